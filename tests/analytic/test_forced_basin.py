"""Wind over an equatorial ocean: equator, junction and coast as one, against shallow water.

The integration knows nothing of guides, junctions or modes; the guide is the equator and the
northern coast of a meridional eastern boundary.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.constants import BETA_EQUATOR, GRAVITY
from waveguide.propagation.step_response import STILL

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import (
    along_characteristics,
    at_every_frequency,
    eastern_ocean,
    mode_of,
    physics_of,
)
from forced_wave import shallow_water_wind

DAY, C, DEPTH = 86400.0, 2.5, 100.0
REDUCED = C**2 / DEPTH
WIDTH, HALF, STEP, CELL = 8000e3, 2600e3, 5000.0, 25e3
PLACES = (0.0, 500e3, 1000e3, 1500e3, 2000e3)


def _stress(days):
    def stress(x, y, t):
        during = np.sin(np.pi * np.clip(t / (days * DAY), 0.0, 1.0)) ** 2
        return 0.05 * during * np.exp(-(((x - 3500e3) / 800e3) ** 2) - ((y / 500e3) ** 2))

    return stress


@pytest.fixture(scope="module", params=[20.0, 40.0])
def basin(request):
    """Burst length (days), and sea level at the wall from the integration, by distance north."""
    stress = _stress(request.param)
    eta = shallow_water_wind(
        (WIDTH, 2.0 * HALF), (320, 104), lambda y: BETA_EQUATOR * (y - HALF), DEPTH, REDUCED,
        lambda x, y, t: stress(x, y - HALF, t), 70.0 * DAY, STEP, sponges=(True, False),
    )  # fmt: skip
    wall = 1.5 * eta[:, :, -1] - 0.5 * eta[:, :, -2]  # from the middle of cells to the wall
    row = (HALF + np.array(PLACES)) / (2.0 * HALF / 104)
    return request.param, wall[:, row.astype(int)].T


def _guide(days, count):
    """The guide, its mode, and the stress on its steps."""
    network = eastern_ocean(WIDTH, 2400e3)
    mode = mode_of(network, C, DEPTH**-0.5)
    s = np.cumsum(network.length) - 0.5 * network.length
    y = np.linspace(-3000e3, 3000e3, 1201)
    weight = np.exp(-BETA_EQUATOR * y**2 / (2.0 * C))
    weight /= weight.sum()
    equator = network.equatorial[network.tail]
    stress = _stress(days)
    wind = [np.where(equator, stress(s[:, None], y, t) @ weight, 0.0)
            for t in np.arange(count) * STEP]
    return network, mode, np.array(wind).T


def test_eastern_coast_agrees_with_shallow_water_at_every_frequency(basin):
    days, wall = basin
    network, mode, wind = _guide(days, wall.shape[1])
    physics = physics_of(network, mode, days=40.0)
    first = int(np.nonzero(~network.equatorial)[0][0])
    time = np.arange(wall.shape[1]) * STEP / DAY
    for place, exact in zip(PLACES, wall, strict=True):
        node = first + round(place / 30e3)
        told, _ = at_every_frequency(network, mode, physics, STILL, wind, STEP, node)
        told = told * GRAVITY / REDUCED
        early = time < 55.0  # before the sponge and the closed north matter
        assert told.max() == pytest.approx(exact.max(), rel=0.02)
        assert abs(time[told.argmax()] - time[exact.argmax()]) < 0.4
        assert np.sqrt(np.mean((told - exact)[early] ** 2)) < 0.02 * exact.max()


def test_losses_of_one_period_are_what_they_are_said_to_be(basin):
    """With losses of 60 days the peak is within 40 %: why weights are had at every frequency."""
    days, wall = basin
    network, mode, wind = _guide(days, wall.shape[1])
    physics = physics_of(network, mode, days=60.0)
    first = int(np.nonzero(~network.equatorial)[0][0])
    ratio = []
    for place, exact in zip(PLACES, wall, strict=True):
        node = first + round(place / 30e3)
        told = along_characteristics(network, mode, physics, wind, STEP, node)
        ratio.append(told.max() * GRAVITY / REDUCED / exact.max())
    assert ratio[0] == pytest.approx(1.0, abs=0.06)
    assert 0.6 < min(ratio) <= max(ratio) < 1.4
