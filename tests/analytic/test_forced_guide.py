"""The forced response along one straight guide against closed forms and independent solutions."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.constants import BETA_EQUATOR, GRAVITY, REFERENCE_DENSITY, coriolis
from waveguide.forcing.influence import influence
from waveguide.forcing.transfer import Place
from waveguide.network.search import Origin, Searcher
from waveguide.propagation.step_response import STILL, Conditions

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import (
    along_characteristics,
    at_every_frequency,
    line_network,
    mode_of,
    physics_of,
    zonal_coast,
)
from forced_wave import integrate_guide, shallow_water_wind

DAY = 86400.0
WEIGHT = REFERENCE_DENSITY * GRAVITY


def test_wind_sets_up_over_the_time_the_wave_takes():
    """After time t the response has felt the wind over a distance ct."""
    coast = zonal_coast(3000.0, 301)
    mode = mode_of(coast, 2.5, 0.06)
    physics, stress = physics_of(coast, mode), np.full((300, 200), 0.1)
    level = along_characteristics(coast, mode, physics, stress, 0.1 * DAY)
    time = np.arange(200) * 0.1 * DAY
    reached = np.minimum(2.5 * time, coast.length.sum())
    exact = 0.06**2 * 0.1 * reached / WEIGHT
    assert np.abs(level - exact).max() < 0.5 * exact.max() / 300 * 1.01  # half a step of the coast


@pytest.mark.parametrize("speed", [2.5, -2.5, 1.25])
def test_patch_translating(speed):
    """A patch of length ℓ that travels at v forces each characteristic for ℓ/|1 − v/c|.

    With v = c (resonance) growth is linear with distance; otherwise the greatest sea level
    behind the patch is F²τ/(ρ g) ℓ/|1 − v/c|: half as much as for a steady patch against c.
    """
    c, value, tau, patch = 2.5, 0.06, 0.1, 600e3
    coast = zonal_coast(6000.0, 1201)
    mode = mode_of(coast, c, value)
    s = np.concatenate([[0.0], np.cumsum(coast.length)])
    middle = 0.5 * (s[1:] + s[:-1])
    step = 0.05 * DAY
    time = np.arange(700) * step
    begin = 1000e3 if speed > 0 else 5000e3
    centre = begin + speed * time
    shape = np.exp(-(((middle[:, None] - centre) / patch) ** 2))
    physics = physics_of(coast, mode)
    level = along_characteristics(coast, mode, physics, tau * shape, step)
    coefficient = value**2 * tau / WEIGHT
    if speed == c:  # resonance
        half = along_characteristics(coast, mode, physics, tau * shape, step, node=600)
        for got, end in ((half.max(), s[600]), (level.max(), s[-1])):
            # The best characteristic lies somewhat behind the centre and is forced for longer.
            behind = np.linspace(0.0, 0.5 * patch, 1000)
            exact = ((end - begin + behind) * np.exp(-((behind / patch) ** 2))).max()
            assert got == pytest.approx(coefficient * exact, rel=1e-3)
    else:
        exact = coefficient * patch * np.sqrt(np.pi) / abs(1.0 - speed / c)
        assert level.max() == pytest.approx(exact, rel=2e-3)


def test_impulse_arrives_as_the_free_wave():
    """Time and amplitude of a wind over one step are those of the free wave of the network."""
    lat = np.linspace(12.0, 44.0, 161)
    coast = line_network(np.full(161, -120.0), lat)
    speed = np.linspace(2.8, 2.0, 161)
    value = np.linspace(0.05, 0.08, 161)
    mode = mode_of(coast, speed, value)
    physics = physics_of(coast, mode, days=60.0, damping=1.0 / (365.0 * DAY))
    reach = influence(coast, mode, physics, 160, 1.0, np.inf)
    source = 30  # the wave starts at the end of step 29
    row = int(np.nonzero(reach.step == source - 1)[0][0])
    path = Searcher.of(coast).reach(
        physics.loss + 1e-12 * physics.time, Origin(np.array([source]), np.zeros(1))
    ).steps_to(160, coast)
    free = physics.potential[160] / physics.potential[source] * np.exp(-physics.loss[path].sum())
    assert reach.gain[row] == pytest.approx(free, rel=1e-12)
    assert reach.head_delay[row] == pytest.approx(physics.time[path].sum(), rel=1e-12)
    # The pulse: its area is that of F² τ ds/(ρ g), times the free wave's factor.
    step = 0.1 * DAY
    stress = np.zeros((160, 2000))
    stress[source - 1, 10] = 1.0
    level = along_characteristics(coast, mode, physics, stress, step)
    increment = value[source - 1] * value[source] * coast.length[source - 1] / WEIGHT
    assert level.sum() == pytest.approx(increment * free, rel=5e-3)  # half a step of growth
    arrival = (level * np.arange(2000)).sum() / level.sum() * step
    assert arrival == pytest.approx(10 * step + physics.time[path].sum()
                                    + 0.5 * physics.time[source - 1], rel=1e-6)


def test_growth_with_latitude_and_varying_speed_against_an_independent_integrator():
    n = 401
    lat = np.linspace(20.0, 45.0, n)
    coast = line_network(np.full(n, -120.0), lat)
    s = np.concatenate([[0.0], np.cumsum(coast.length)])
    speed = 2.6 - 0.8 * s / s[-1]
    value = 0.06 + 0.02 * np.sin(3.0 * s / s[-1])
    mode = mode_of(coast, speed, value)
    decay = 1.0 / 2500e3
    physics = physics_of(coast, mode, days=20.0, decay=decay)

    def wind(position, t):
        ramp = np.sin(np.pi * np.minimum(t / (10.0 * DAY), 0.5)) ** 2
        return 0.1 * ramp * np.sin(2.0 * np.pi * (position / 2000e3 + t / (8.0 * DAY)))

    step = 0.05 * DAY
    times = np.arange(600) * step
    middle = 0.5 * (s[1:] + s[:-1])
    stress = np.array([wind(middle, t) for t in times]).T
    level = along_characteristics(coast, mode, physics, stress, step)
    grid = np.linspace(0.0, s[-1], 801)
    f = np.interp(grid, s, np.abs(coriolis(lat)))
    growth = np.gradient(f, grid, edge_order=2) / (2.0 * f)
    c, F = np.interp(grid, s, speed), np.interp(grid, s, value)
    phi = integrate_guide(grid, c, growth, np.full(grid.size, decay),
                          lambda t: F * wind(grid, t) / REFERENCE_DENSITY, times)
    exact = value[-1] * phi[:, -1] / GRAVITY
    # At 20 days the frequency is well above the critical one: growth is √|f| alone. What is left
    # is the 7 km step of the coast and the oracle's own error.
    assert np.abs(level - exact).max() < 5e-4 * np.abs(exact).max()


def test_a_coastal_value_that_changes_its_sign_against_an_independent_integrator():
    """Where F of a higher mode is negative the wind downstream makes a wave of the other sign."""
    n = 301
    coast = zonal_coast(3000.0, n)
    s = np.concatenate([[0.0], np.cumsum(coast.length)])
    value = 0.06 * np.cos(4.0 * s / s[-1])
    mode = mode_of(coast, 2.0, value)
    physics = physics_of(coast, mode)

    def wind(position, t):
        during = np.sin(np.pi * np.clip(t / (20.0 * DAY), 0.0, 1.0)) ** 2
        return 0.1 * during * (1.0 + 0.5 * np.sin(position / 300e3))

    step = 0.1 * DAY
    times = np.arange(400) * step
    stress = np.array([wind(0.5 * (s[1:] + s[:-1]), t) for t in times]).T
    grid = np.linspace(0.0, s[-1], 601)
    F, none = np.interp(grid, s, value), np.zeros(grid.size)
    phi = integrate_guide(grid, np.full(grid.size, 2.0), none, none,
                          lambda t: F * wind(grid, t) / REFERENCE_DENSITY, times)
    exact = value[-1] * phi[:, -1] / GRAVITY
    along = along_characteristics(coast, mode, physics, stress, step)
    told, way = at_every_frequency(coast, mode, physics, STILL, stress, step)
    for found in (along, told):
        assert np.abs(found - exact).max() < 2e-3 * np.abs(exact).max()
    middle = int(np.argmin(np.abs(way.distance - 1500e3)))
    there = np.interp(s[-1] - way.distance[middle], grid, F) * np.array([
        np.interp(s[-1] - way.distance[middle], grid, row) for row in phi]) / GRAVITY
    assert np.abs(way.sea_level[middle] - there).max() < 0.01 * np.abs(there).max()


def test_equator_with_varying_speed_against_an_independent_integrator():
    n = 401
    guide = line_network(np.linspace(150.0, 230.0, n) - 360.0, np.zeros(n), equatorial=True)
    s = np.concatenate([[0.0], np.cumsum(guide.length)])
    speed, value = 2.9 - 0.6 * s / s[-1], 0.05 + 0.03 * s / s[-1]
    mode = mode_of(guide, speed, value)
    physics = physics_of(guide, mode, days=60.0)

    def wind(position, t):
        return 0.05 * np.exp(-(((position - 2500e3) / 800e3) ** 2)) * (
            np.sin(np.pi * np.clip(t / (20.0 * DAY), 0.0, 1.0)) ** 2
        )

    step = 0.1 * DAY
    times = np.arange(600) * step
    middle = 0.5 * (s[1:] + s[:-1])
    stress = np.array([wind(middle, t) for t in times]).T
    level = along_characteristics(guide, mode, physics, stress, step)
    grid = np.linspace(0.0, s[-1], 801)
    c, F = np.interp(grid, s, speed), np.interp(grid, s, value)
    growth = 0.25 * np.gradient(c, grid, edge_order=2) / c  # φ ∝ c^¼ at constant energy flux
    phi = integrate_guide(grid, c, growth, np.zeros(grid.size),
                          lambda t: F * wind(grid, t) / (np.sqrt(2.0) * REFERENCE_DENSITY), times)
    exact = value[-1] * phi[:, -1] / GRAVITY
    assert np.abs(level - exact).max() < 1e-3 * np.abs(exact).max()  # steps of 22 km, of 0.1 days


def test_both_sums_agree_where_coasts_do_not_disperse():
    """Along a parallel with friction the sum over frequencies is that along characteristics."""
    coast = zonal_coast(4000.0, 201)
    mode = mode_of(coast, 2.5, 0.06)
    physics = physics_of(coast, mode, decay=1e-6)
    middle = np.cumsum(coast.length)[:, None]
    time = np.arange(300) * 0.5 * DAY
    gently = np.sin(np.pi * np.clip(time / (20.0 * DAY), 0.0, 0.5)) ** 2
    stress = np.sin(middle / 700e3 + time / (3.0 * DAY))
    stress += np.cos(middle / 400e3 - time / (7.0 * DAY))
    stress *= gently
    told, way = at_every_frequency(
        coast, mode, physics, Conditions(friction=1e-6), stress, 0.5 * DAY
    )
    exact = along_characteristics(coast, mode, physics, stress, 0.5 * DAY)
    # Straight lines between half-day values lose (ωΔ)²/8 of the fastest signal, 0.4 %; the end
    # of the record, where the wind stops for the transform, is left out.
    assert np.abs(told - exact)[:-10].max() < 0.01 * np.abs(exact).max()
    assert way.sea_level.shape == (200, 300)
    for k in (0, 60, 150, 199):
        node = int(way.node[k])
        alone = along_characteristics(coast, mode, physics, stress, 0.5 * DAY, node)
        assert np.abs(way.sea_level[k] - alone)[:-10].max() < 0.01 * np.abs(exact).max()


def test_a_target_between_two_nodes_is_told_in_between():
    coast = zonal_coast(2000.0, 41)
    mode = mode_of(coast, 2.5, 0.06)
    physics = physics_of(coast, mode)
    time = np.arange(400) * 0.25 * DAY
    pulse = np.exp(-(((time - 20.0 * DAY) / (3.0 * DAY)) ** 2))
    stress = np.zeros((40, 400))
    stress[5] = pulse
    peaks = []
    for beyond in (-0.2 * DAY, 0.0, 0.2 * DAY):
        level, _ = at_every_frequency(coast, mode, physics, STILL, stress, 0.25 * DAY, 30,
                                      Place(30, 0.8, beyond))
        peaks.append((level * time).sum() / level.sum())
    assert np.diff(peaks) == pytest.approx([0.2 * DAY, 0.2 * DAY], rel=1e-3)


def test_source_and_receiver_can_be_exchanged():
    """Wind at A read at B going one way is wind at B read at A going the other way, over |f|.

    Reciprocity: between two stretches with the same |f|, the same F and c, the response does not
    depend on which of them is forced when the direction of travel is reversed; with different
    |f| both responses are in the ratio of |f| (dispersion.segment_exponent).
    """
    lat = np.linspace(15.0, 40.0, 126)
    north = line_network(np.full(126, -120.0), lat)
    south = line_network(np.full(126, -60.0), lat[::-1])
    results = []
    for network in (north, south):
        mode = mode_of(network, 2.4, 0.06)
        physics = physics_of(network, mode, days=90.0, damping=1e-8)
        reach = influence(network, mode, physics, 125, 1.0, np.inf)
        row = int(np.nonzero(reach.step == 0)[0][0])
        results.append((reach.weight[row], reach.delay[row]))
    f = np.abs(coriolis(0.5 * (lat[1:] + lat[:-1])))
    # The receiver is a node, the source the middle of a step: f at half a step each way.
    ratio = np.abs(coriolis(40.0)) / f[0], f[-1] / np.abs(coriolis(15.0))
    assert results[0][0] / results[1][0] == pytest.approx(np.sqrt(ratio[0] * ratio[1])
                                                          * np.sqrt(ratio[0] / ratio[1]), rel=0.02)
    assert results[0][1] == pytest.approx(results[1][1], rel=1e-3)


def test_kelvin_wave_of_a_patch_against_shallow_water():
    """East of a patch of zonal wind there is the Kelvin wave alone: √2 and Gaussian weight."""
    c, depth = 2.5, 100.0
    reduced = c**2 / depth
    middle, ly = 2500e3, 5000e3
    length, width = 900e3, 500e3

    def stress(x, y, t):
        during = np.sin(np.pi * np.clip(t / (16.0 * DAY), 0.0, 1.0)) ** 2
        shape = np.exp(-(((x - 4000e3) / length) ** 2) - ((y - middle - 200e3) / width) ** 2)
        return 0.05 * during * shape

    step = 6000.0
    eta = shallow_water_wind(
        (12000e3, ly), (160, 100), lambda y: BETA_EQUATOR * (y - middle), depth, reduced,
        stress, 45.0 * DAY, step,
    )  # fmt: skip
    column = int(9000e3 / 75e3)
    series = eta[:, 49:51, column].mean(axis=1)
    n = 161
    guide = line_network(np.linspace(0.0, np.degrees(9037.5e3 / 6.378137e6), n), np.zeros(n), True)
    # One layer: F² = 1/depth; its elevation is p/g'.
    mode = mode_of(guide, c, depth**-0.5)
    s = np.concatenate([[0.0], np.cumsum(guide.length)])
    x = 0.5 * (s[1:] + s[:-1])
    y = np.linspace(-3000e3, 3000e3, 1201)
    weight = np.exp(-BETA_EQUATOR * y**2 / (2.0 * c))
    weight /= weight.sum()
    wind = np.array([stress(x[:, None], y + middle, t) @ weight
                     for t in np.arange(eta.shape[0]) * step])
    level = along_characteristics(guide, mode, physics_of(guide, mode, days=30.0), wind.T, step)
    level *= GRAVITY / reduced
    assert np.abs(level - series).max() < 0.03 * np.abs(series).max()  # grid of L_e/6.6


def test_coastal_wave_of_a_patch_against_shallow_water():
    """Alongshore wind over a strip wider than R raises the coast by F²τ ds/(ρ g) per step."""
    c, depth, f = 2.5, 100.0, 1e-4
    reduced = c**2 / depth

    def stress(x, y, t):
        during = np.sin(np.pi * np.clip(t / (6.0 * DAY), 0.0, 1.0)) ** 2
        return 0.05 * during * np.exp(-(((x - 800e3) / 200e3) ** 2)) * np.ones_like(y)

    step = 1000.0
    # f > 0 and the coast at y = 0: eastward travel has it on the right.
    eta = shallow_water_wind(
        (2400e3, 300e3), (160, 75), lambda y: np.full_like(y, f), depth, reduced,
        stress, 14.0 * DAY, step,
    )  # fmt: skip
    column = int(1700e3 / 15e3)
    # from cell centres half a cell off to the wall, and from η to the mean over wall layers
    series = eta[:, 0, column] * np.exp(0.5 * 4e3 * f / c)
    coast = zonal_coast(1707.5, 201, lat=np.degrees(np.arcsin(f / (2 * 7.292115e-5))))
    mode = mode_of(coast, c, depth**-0.5)
    s = np.concatenate([[0.0], np.cumsum(coast.length)])
    x = 0.5 * (s[1:] + s[:-1])
    wind = np.array([stress(x, np.zeros(1), t) for t in np.arange(eta.shape[0]) * step])
    level = along_characteristics(coast, mode, physics_of(coast, mode), wind.T, step)
    level *= GRAVITY / reduced
    assert np.abs(level - series).max() < 0.03 * np.abs(series).max()


def test_eastern_coast_keeps_the_steady_setup_of_the_equator():
    """As ω → 0 a steady zonal wind raises an eastern coast by F² τ L/(ρ g), √2 of the Kelvin wave.

    Cane & Sarachik (1977), J. Mar. Res. 35, 395 (√2 at the wall).
    """
    from waveguide.propagation.equator import eastern_wall

    assert abs(eastern_wall(1e-4, 0.0)) / np.sqrt(2.0) == pytest.approx(1.0, rel=1e-3)
    guide = line_network(np.linspace(-160.0, -100.0, 301), np.zeros(301), equatorial=True)
    mode = mode_of(guide, 2.5, 0.06)
    physics, stress = physics_of(guide, mode), np.full((300, 80), 0.05)
    level = along_characteristics(guide, mode, physics, stress, DAY)[-1]
    setup = 0.06**2 * 0.05 * guide.length.sum() / WEIGHT
    assert level * abs(eastern_wall(1e-4, 0.0)) == pytest.approx(setup, rel=1e-3)
