"""Numbers of an earlier, unpublished shallow-water integration, quoted to 3 %.

MEMORY. They agree with theory and with this folder's integration in phase, on the equator for
ω̂ ≥ 0.2, and in straits. Away from the equator their wall amplitudes fall short by a factor
close to exp(−0.04 ŷ): what the cell next to the wall reads, half a cell (0.04 L_e) off it,
instead of the wall. This folder's own first cell shows the same, its wall value does not.
They cannot be wall values: 2.29 at ŷ = 4 and ω̂ = 0.8 is 74 % of an energy that all goes
poleward (Moore, Durland & Hristova 2014). For the same reason the western junction, per
coastal amplitude at ŷ = 4, reads too high. Those that miss are marked, and must go on missing.
"""

from __future__ import annotations

import numpy as np
import pytest
from experiments import eastern
from numpy.testing import assert_allclose

from waveguide.propagation.dispersion import segment_exponent
from waveguide.propagation.equator import eastern_wall, western_wall
from waveguide.propagation.gaps import passage

OFF_WALL = pytest.mark.xfail(strict=True, reason="read half a cell off the wall")
SLOW = pytest.mark.xfail(strict=True, reason="6 % low everywhere: slow waves not yet arrived")
HALF = pytest.mark.xfail(strict=True, reason="leaves out the mixed Rossby-gravity wave")


@pytest.mark.parametrize(
    ("frequency", "place", "value"),
    [
        *(
            pytest.param(0.1, y, v, marks=SLOW)
            for y, v in enumerate((1.32, 1.33, 1.35, 1.38, 1.43))
        ),
        *((0.2, y, v) for y, v in enumerate((1.40, 1.40, 1.49))),
        *(pytest.param(0.2, y, v, marks=OFF_WALL) for y, v in ((3, 1.65), (4, 1.79))),
        *((0.4, y, v) for y, v in enumerate((1.24, 1.43))),
        *(pytest.param(0.4, y, v, marks=OFF_WALL) for y, v in ((2, 1.78), (3, 2.10), (4, 2.33))),
        (0.8, 0, 1.42),
        *(
            pytest.param(0.8, y, v, marks=OFF_WALL)
            for y, v in ((1, 1.47), (2, 1.74), (3, 2.07), (4, 2.29))
        ),
    ],
)
def test_wall_amplitude(frequency: float, place: float, value: float) -> None:
    assert_allclose(np.abs(eastern_wall(frequency, place)), value, rtol=0.03)


@pytest.mark.parametrize(
    ("frequency", "degrees"), [(0.4, (8, 23, 43, 64)), (0.8, (22, 64, 110, 153))]
)
def test_wall_phase(frequency: float, degrees: tuple[float, ...]) -> None:
    wall = eastern_wall(frequency, np.arange(5.0))
    lag = np.degrees(np.unwrap(np.angle(wall / wall[0])))[1:]
    assert_allclose(lag, degrees, atol=2.0)  # 3 % of an amplitude is 2°


def test_the_shortfall_is_that_of_half_a_cell() -> None:
    quoted = np.array([1.42, 1.47, 1.74, 2.07, 2.29])
    deficit = np.log(np.abs(eastern_wall(0.8, np.arange(5.0))) / quoted)
    assert_allclose(deficit, 0.038 * np.arange(5.0), atol=0.015)


@pytest.mark.parametrize(
    ("frequency", "value"),
    [
        (0.1, 0.11),
        pytest.param(0.2, 0.16, marks=OFF_WALL),
        pytest.param(0.4, 0.21, marks=OFF_WALL),
        pytest.param(0.8, 0.21, marks=OFF_WALL),
    ],
)
def test_western_junction(frequency: float, value: float) -> None:
    assert_allclose(1.0 / np.abs(western_wall(frequency, 4.0)), value, rtol=0.03)


@pytest.mark.parametrize(
    ("frequency", "value"), [(0.01, 0.100), pytest.param(0.8, 0.266, marks=HALF)]
)
def test_western_limits(frequency: float, value: float) -> None:
    assert_allclose(1.0 / np.abs(western_wall(frequency, 4.0)), value, rtol=0.005)


@pytest.mark.parametrize(
    ("frequency", "place", "value"),
    [
        (0.05, 3, 0.75),
        (0.05, 2, 0.52),
        (0.05, 1, 0.28),
        (0.8, 3, 0.89),
        pytest.param(0.8, 2, 0.76, marks=OFF_WALL),
        pytest.param(0.8, 1, 0.57, marks=OFF_WALL),
    ],
)
def test_western_coast(frequency: float, place: float, value: float) -> None:
    wall = np.abs(western_wall(frequency, np.array([4.0, place])))
    assert_allclose(wall[1] / wall[0], value, rtol=0.03)
    if place >= 2:
        leg = segment_exponent(frequency, 1.0, 4.0, place, 4.0 - place).real
        assert_allclose(np.exp(leg), value, rtol=0.03)


@pytest.mark.parametrize(
    ("width", "length", "frequency", "value"),
    [
        (0.3, 2.0, 0.1, 0.78),
        (0.3, 2.0, 0.3, 0.41),
        (0.6, 2.0, 0.1, 0.93),
        (0.6, 2.0, 0.3, 0.67),
        (0.3, 0.5, 0.1, 0.96),
        (0.3, 0.5, 0.3, 0.74),
    ],
)
def test_strait(width: float, length: float, frequency: float, value: float) -> None:
    through = np.abs(passage(frequency, width, length, 1.0, 1.0).through)
    assert_allclose(through, value, atol=0.036)  # 3 % and the printed digits


def test_first_cell_reads_low_here_too() -> None:
    # twelve cells per L_e: half a cell is 0.042 L_e
    place, frequency = np.array([0.0, 4.0]), np.array([0.8])
    at_wall = eastern(frequency, place, cells=12, duration=40.0).amplitude
    first = eastern(frequency, place, cells=12, duration=40.0, first_cell=True).amplitude
    deficit = np.abs(first / at_wall)[0]
    assert_allclose(deficit, [1.0, np.exp(-4.0 / 24.0)], atol=0.015)
