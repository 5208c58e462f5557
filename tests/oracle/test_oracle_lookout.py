"""The shallow-water integration as model output: its speed is recovered from the diagram.

An equatorial Kelvin wave of known speed is set off in a basin without theory in common with the
package, written as daily sea level on a longitude–latitude grid, and looked at like anybody's
output. Tolerance 3 %: that of the task; the grid itself is within 0.2 % of the speed.
"""

from __future__ import annotations

from datetime import UTC, datetime

import numpy as np
import pytest
import xarray as xr
from shallow_water import integrate, sphere_grid

from waveguide.compare.phase_speed import phase_speed
from waveguide.lookout import lookout
from waveguide.scenario import Event, Ocean, Scenario, Target, Waves

SPEED = 2.4
WEST, SOUTH, STEP = 150.0, -12.0, 0.5
COLUMNS, ROWS = 200, 48


@pytest.fixture(scope="module")
def model():
    """Daily sea level of a Kelvin pulse that starts at 160E and crosses to 110W."""
    grid = sphere_grid(np.ones((ROWS, COLUMNS), bool), STEP, SOUTH, STEP)
    lon = WEST + STEP * (np.arange(COLUMNS) + 0.5)
    lat = SOUTH + STEP * (np.arange(ROWS) + 0.5)
    y = np.radians(lat) * 6.371e6
    beta = 2.0 * 7.292115e-5 / 6.371e6
    pulse = np.exp(-(((lon - 160.0) / 4.0) ** 2))
    shape = np.exp(-beta * y**2 / (2.0 * SPEED))
    level = 0.1 * shape[:, None] * pulse
    current = np.zeros((ROWS, COLUMNS + 1))
    current[:, 1:-1] = 9.81 / SPEED * 0.5 * (level[:, 1:] + level[:, :-1])
    sponge = np.zeros((ROWS, COLUMNS))
    sponge[:, -20:] = 1e-5 * np.linspace(0.0, 1.0, 20) ** 2
    rows, columns = np.meshgrid(np.arange(ROWS), np.arange(COLUMNS), indexing="ij")
    record = integrate(
        grid, SPEED, 50 * 86400.0, np.column_stack([rows.ravel(), columns.ravel()]),
        initial=(level, current, np.zeros((ROWS + 1, COLUMNS))), sponge=sponge, sample=86400.0,
    )
    values = record.sea_level.reshape(-1, ROWS, COLUMNS).astype("f4")
    start = np.datetime64("2031-03-05")
    attributes = {"units": "m", "standard_name": "sea_surface_height_above_geoid"}
    return xr.Dataset(
        {"eta": (("time", "lat", "lon"), values, attributes)},
        {"time": (start + np.arange(len(values))).astype("datetime64[ns]"),
         "lat": ("lat", lat, {"units": "degrees_north"}),
         "lon": ("lon", lon, {"units": "degrees_east"})},
    )


def question(speed: float) -> Scenario:
    return Scenario(
        title="oracle", waves=Waves(modes=(1,), period_days=30.0),
        ocean=Ocean(phase_speed_m_s=speed),
        event=Event(
            position=(165.0, 0.0), start=datetime(2031, 3, 5, tzinfo=UTC), duration_days=5.0
        ),
        targets=(Target(name="mooring", position=(-125.0, 0.0)),),
    )


@pytest.mark.parametrize(("theory", "word"), [(2.4, "consistent"), (1.6, "faster")])
def test_speed_is_recovered_within_three_per_cent(model, theory, word):
    (diagram,) = lookout(question(theory), model).diagrams
    assert diagram.speed.predicted == pytest.approx(theory, rel=0.01)
    assert diagram.speed.measured == pytest.approx(SPEED, rel=0.03)
    assert diagram.speed.low <= SPEED * 1.03
    assert diagram.speed.high >= SPEED * 0.97
    assert diagram.speed.verdict == word


def test_the_wave_run_backwards_is_no_wave_of_this_route(model):
    (diagram,) = lookout(question(2.4), model).diagrams
    back = phase_speed(diagram.values[::-1], diagram.days, diagram.distance, diagram.travel)
    assert back.verdict == "not resolvable"


def test_amplitude_and_subset_are_those_of_the_wave(model):
    result = lookout(question(2.4), model)
    (diagram,) = result.diagrams
    peak = np.nanmax(diagram.values, axis=0)[5:-5]
    # Mean of e^(−y²/2L²) weighted by itself over |y| < √2 L: erf(√2)/(√2 erf(1)) = 0.801. Daily
    # values miss the crest by half a day at most, which costs a pulse of 4 days 2 %.
    np.testing.assert_allclose(peak, 0.1 * 0.801, rtol=0.05)
    assert float(result.subset["eta"].max()) == pytest.approx(0.1, rel=0.1)
    assert abs(result.subset["lat"]).max() <= 4.25
