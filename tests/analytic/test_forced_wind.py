"""From wind to the stress on a step: drag laws, projection, invented winds, stations, times."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.constants import BETA_EQUATOR, EARTH_RADIUS, REFERENCE_DENSITY, coriolis
from waveguide.errors import InputError
from waveguide.forcing.characteristics import add_delayed, held_on, taken_back
from waveguide.forcing.drag import AIR_DENSITY, LAWS, wind_stress
from waveguide.forcing.events import Patch, Storm, event_stress, within_reach
from waveguide.forcing.projection import resampled, without
from waveguide.forcing.samples import step_samples
from waveguide.forcing.stations import StationWinds, station_forcing
from waveguide.forcing.time_axis import uniform_times

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import line_network

DAY = 86400.0
START = np.datetime64("2031-03-01", "ns")


@pytest.mark.parametrize("law", LAWS)
def test_drag_is_quadratic_and_along_the_wind(law):
    u, v = wind_stress(6.0, -8.0, law)
    assert v / u == pytest.approx(-8.0 / 6.0)
    strength = np.hypot(u, v)
    assert strength == pytest.approx(AIR_DENSITY * LAWS[law](10.0) * 100.0)
    assert 0.13 < strength < 0.15  # 10 m/s make some 0.14 Pa by every law in use
    speed = np.linspace(0.0, 60.0, 601)
    assert np.all(np.diff(wind_stress(speed, 0.0, law)[0]) >= 0.0)


def test_drag_coefficients_are_those_published():
    # MEMORY: Large & Pond (1981) 1.2e-3 below 11 m/s, (0.49 + 0.065 U)e-3 above; Trenberth,
    # Large & Olson (1990) 1.14e-3 between 3 and 10 m/s and (0.62 + 1.56/U)e-3 below.
    law = LAWS["Large and Pond 1981"]
    assert law([5.0, 15.0, 25.0, 40.0]) == pytest.approx([1.2e-3, 1.465e-3, 2.115e-3, 2.115e-3])
    law = LAWS["Trenberth et al. 1990"]
    assert law([2.0, 5.0, 15.0]) == pytest.approx([1.4e-3, 1.14e-3, 1.465e-3])


@pytest.mark.parametrize("mean", [0.1, 1.0, 3.0, 10.0])
def test_unresolved_wind_against_the_mean_of_the_fluctuating_stress(mean):
    """√(W² + 4σ²) W against the mean of |w| w over a normal distribution of w, by quadrature."""
    sigma = 2.0
    x, weight = np.polynomial.hermite_e.hermegauss(60)
    weight = weight / weight.sum()
    u, v = mean + sigma * x[:, None], sigma * x[None, :]
    exact = (np.hypot(u, v) * u * weight[:, None] * weight).sum()
    told = np.sqrt(mean**2 + 4.0 * sigma**2) * mean
    assert told == pytest.approx(exact, rel=0.07)  # 6 % too much for W → 0
    assert told > mean**2


def test_stress_is_taken_in_the_direction_of_travel():
    """Northward along 120°W (land to the right, east), offshore to the west."""
    coast = line_network(np.full(5, -120.0), np.linspace(30.0, 31.0, 5))
    samples = step_samples(coast, np.full(5, 2.5), np.arange(4), 50e3)
    assert samples.northward == pytest.approx(np.ones(4))
    assert samples.eastward == pytest.approx(np.zeros(4), abs=1e-6)
    assert np.all(samples.lon < -120.4)
    # Southward along the same meridian in the south is poleward too: land is on the left, east.
    coast = line_network(np.full(5, -75.0), np.linspace(-30.0, -31.0, 5))
    samples = step_samples(coast, np.full(5, 2.5), np.arange(4), 50e3)
    assert samples.northward == pytest.approx(-np.ones(4))
    assert np.all(samples.lon < -75.4)


@pytest.mark.parametrize("width", [200e3, 500e3, 2000e3])
def test_equator_weighs_the_wind_as_the_kelvin_wave(width):
    """⟨e^(−y²/a²)⟩ = (1 + 2L²/a²)^(−1/2) with L² = c/β."""
    guide = line_network([-150.0, -149.8], [0.0, 0.0], equatorial=True)
    c = 2.5
    samples = step_samples(guide, np.full(2, c), np.array([0]), 0.0)
    y = np.radians(samples.lat) * EARTH_RADIUS
    found = (samples.eastward * np.exp(-((y / width) ** 2))).sum()
    assert samples.eastward.sum() == pytest.approx(1.0)
    assert found == pytest.approx((1.0 + 2.0 * c / BETA_EQUATOR / width**2) ** -0.5, rel=2e-3)


def test_a_response_of_millions_of_steps_is_refused():
    with pytest.raises(InputError, match="longer step_hours"):
        uniform_times(START, START + np.timedelta64(100 * 365, "D"), 3600.0)


def test_patch_moves_and_fades_as_described():
    patch = Patch(lon=160.0, lat=0.0, start=START, duration=20 * DAY, length=1000e3, width=300e3,
                  stress=0.1, towards=90.0, speed=1.0, heading=90.0)  # fmt: skip
    time = uniform_times(START, START + np.timedelta64(25, "D"), 0.5 * DAY)
    lon = np.arange(140.0, 200.0, 0.25)
    u, v = event_stress(patch, lon, np.zeros(lon.size), time)
    assert np.abs(v).max() < 1e-12
    assert u.max() == pytest.approx(0.1, rel=1e-3)
    assert np.all(u[time > START + np.timedelta64(20, "D")] == 0.0)
    middle = 20  # day 10: strongest, 864 km further east
    assert lon[np.argmax(u[middle])] == pytest.approx(160.0 + np.degrees(864e3 / EARTH_RADIUS),
                                                      abs=0.25)
    off, _ = event_stress(patch, lon, np.full(lon.size, np.degrees(300e3 / EARTH_RADIUS)), time)
    assert off.max() / u.max() == pytest.approx(np.exp(-1.0), rel=1e-3)
    near = within_reach(patch, lon, np.zeros(lon.size))
    rest = np.setdiff1d(np.arange(lon.size), near)
    assert np.abs(u[:, rest]).max(initial=0.0) < 1e-9


@pytest.mark.parametrize(("lat", "sense"), [(20.0, 1.0), (-20.0, -1.0)])
def test_storm_turns_with_its_hemisphere_and_blows_inward(lat, sense):
    storm = Storm(
        lon=np.array([130.0, 130.0]), lat=np.array([lat, lat]),
        time=np.array([START, START + np.timedelta64(2, "D")]), wind=40.0, radius=50e3,
        law="Large and Pond 1981",
    )  # fmt: skip
    east = 130.0 + np.degrees(50e3 / EARTH_RADIUS / np.cos(np.radians(lat)))
    time = np.array([START + np.timedelta64(1, "D"), START + np.timedelta64(3, "D")])
    u, v = event_stress(storm, np.array([east]), np.array([lat]), time)
    assert sense * v[0, 0] > 0.0
    assert u[0, 0] < 0.0
    expected = AIR_DENSITY * LAWS[storm.law](40.0) * 1600.0
    assert np.hypot(u[0, 0], v[0, 0]) == pytest.approx(expected, rel=0.01)
    assert u[1, 0] == v[1, 0] == 0.0


def test_index_becomes_a_stress_in_the_direction_of_travel_between_stations():
    """Offshore transport M makes τ_s = −ρ|f|M, linear between stations, half-way held beyond."""
    lat = np.linspace(20.0, 50.0, 151)
    coast = line_network(np.full(151, -120.0), lat)
    transport = 0.5  # m²/s, an index of 50 m³/s per 100 m of coast
    places = np.array([30.0, 36.0])
    stress = -REFERENCE_DENSITY * np.abs(coriolis(places)) * transport
    time = uniform_times(START, START + np.timedelta64(9, "D"), DAY)
    winds = StationWinds(["a", "b"], np.full(2, -121.0), places, time,
                         np.repeat(stress[:, None], 10, axis=1))
    forcing = station_forcing(winds, coast, np.full(151, 2.5), np.arange(150), (0, 10), DAY)
    taken = forcing.stress[:, 0]
    at = coast.lat[:-1]
    assert taken[np.argmin(np.abs(at - 30.0))] == pytest.approx(stress[0], rel=1e-5)
    assert taken[np.argmin(np.abs(at - 33.0))] == pytest.approx(stress.mean(), rel=1e-3)
    assert np.all(taken[at < 26.8] == 0.0)
    assert taken[np.argmin(np.abs(at - 28.0))] == pytest.approx(stress[0], rel=1e-5)
    assert np.array_equal(forcing.covered > 0.0, taken < 0.0)


def test_resampling_is_linear_and_removal_takes_what_it_says():
    record = np.array([0.0, 31.0, 59.0, 90.0]) * DAY
    wanted = np.arange(0.0, 90.0, 10.0) * DAY
    stress = (2.0 + record / DAY / 30.0)[None, :].astype(np.float32)
    found = resampled(stress, record, wanted)[0]
    assert found == pytest.approx(2.0 + wanted / DAY / 30.0, rel=1e-6)
    day = np.arange(3652.0)
    cycle = 0.03 * np.cos(2 * np.pi * day / 365.2425) + 0.01 * np.sin(4 * np.pi * day / 365.2425)
    other = 0.02 * np.sin(2 * np.pi * day / 50.0)
    both = np.stack([0.05 + cycle + other, other]).astype(np.float32)
    left = without(both, DAY, "annual cycle")
    assert np.abs(left[0] - other).max() < 2e-4
    assert without(both, DAY, "mean").mean() == pytest.approx(0.0, abs=1e-6)
    assert without(both, DAY, "nothing") is both


def test_a_delay_is_exact_for_a_series_of_straight_lines():
    series = np.interp(np.arange(40.0), [0, 9, 20, 39], [0.0, 3.0, -1.0, 2.0])
    into = np.zeros(60)
    add_delayed(into, series, 2.0, 7.25)
    t = np.arange(47) - 7.25
    exact = np.where(t >= 0.0, 2.0 * np.interp(t, np.arange(40.0), series), 0.0)
    # between whole steps the corners are cut: a corner lies within one step of each
    assert np.abs(into[:47] - exact).max() < 2.0 * 0.5 * 0.25 * np.abs(np.diff(series, 2)).max()
    assert not into[48:].any()
    whole = np.zeros(10)
    add_delayed(whole, series, 1.0, 3.0)
    assert np.array_equal(whole[3:], series[:7])
    assert not whole[:3].any()
    assert np.array_equal(taken_back(held_on(series), 0.0, 40), series)
