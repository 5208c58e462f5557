"""Theory of walls, junctions, coasts and straits against a shallow-water integration.

results.json holds what make_results.py gave at 16 to 40 cells a radius; small cases are
integrated here again. Tolerances: the integration's own error is 1 % in amplitude and 1° in
phase (it conserves energy to 1 %, and halving the cells changes less than that), 3 % at
ω̂ ≤ 0.2, where slow waves are still on their way when it ends. What the theory adds is said
at each test.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from experiments import eastern, strait, western
from numpy.testing import assert_allclose

from waveguide.constants import BETA_EQUATOR
from waveguide.propagation.dispersion import segment_exponent
from waveguide.propagation.equator import (
    eastern_junction,
    eastern_wall,
    western_junction,
    western_wall,
)
from waveguide.propagation.gaps import passage

STORED = json.loads((Path(__file__).parent / "results.json").read_text(encoding="utf-8"))
C = 2.5
RATE = np.sqrt(BETA_EQUATOR * C)


def stored(kind: str, **made: float) -> tuple[np.ndarray, np.ndarray]:
    """Frequencies and complex amplitudes of one stored experiment."""
    case = next(
        case
        for case in STORED["cases"]
        if case["kind"] == kind and made.items() <= case["made_with"].items()
    )
    phase = np.exp(1j * np.radians(case["phase_degrees"]))
    return np.array(case["frequency"]), np.array(case["amplitude"]) * phase


def columns(kind: str) -> np.ndarray:
    return np.array([c for c in STORED["columns"][kind] if not isinstance(c, str)])


def test_eastern_wall() -> None:
    frequency, found = stored("eastern")
    ratio = eastern_wall(frequency, columns("eastern")) / found
    assert_allclose(np.abs(ratio), 1.0, atol=0.013)
    assert_allclose(np.degrees(np.angle(ratio)), 0.0, atol=1.0)


def test_western_wall() -> None:
    frequency, found = stored("western")
    place = columns("western")
    wall = western_wall(frequency, place)
    wall /= wall[:, :1]
    assert_allclose(np.abs(found[:, :-1]), np.abs(wall), atol=0.008)
    north = place > 0
    phase = np.angle(found[:, :-1][:, north] / wall[:, north])
    assert_allclose(np.degrees(phase), 0.0, atol=1.0)


def test_kelvin_wave_sent_out_at_the_western_wall() -> None:
    frequency, found = stored("western")
    kelvin = 1.0 / western_wall(frequency, np.array([4.0]))[:, 0]
    assert_allclose(np.abs(found[:, -1]), np.abs(kelvin), rtol=0.025)
    assert_allclose(np.degrees(np.angle(found[:, -1] / kelvin)), 0.0, atol=2.5)


def test_eastern_junction_and_coast() -> None:
    # junction at ŷ = 2, then the local relation; it may be 3 % off within ŷ = 4
    frequency, found = stored("eastern")
    y = columns("eastern")[3:]
    leg = segment_exponent(frequency[:, None], 1.0, 2.0, y, y - 2.0)
    ratio = eastern_junction(frequency * RATE, C).amplitude[:, None] * np.exp(leg) / found[:, 3:]
    assert_allclose(np.abs(ratio), 1.0, atol=0.03)
    assert_allclose(np.degrees(np.angle(ratio)), 0.0, atol=2.0)


def test_western_coast_and_junction() -> None:
    frequency, found = stored("western")
    leg = np.exp(segment_exponent(frequency, 1.0, 4.0, 2.0, 2.0))
    assert_allclose(np.abs(found[:, 2]), np.abs(leg), rtol=0.03)
    kelvin = leg * western_junction(frequency * RATE, C).amplitude
    assert_allclose(np.abs(found[:, -1]), np.abs(kelvin), rtol=0.03)
    assert_allclose(np.degrees(np.angle(found[:, -1] / kelvin)), 0.0, atol=3.0)


@pytest.mark.parametrize(
    ("angle", "degrees", "other"),
    [(15.0, 5.0, 0.08), (30.0, 10.0, 0.12), (45.0, 18.0, 0.09), (60.0, 35.0, 0.11),
     (70.0, 47.0, 0.27)],
)
def test_leaning_coast(angle: float, degrees: float, other: float) -> None:
    # A first-order theory. Favoured coast: amplitude within 9 % and phase within `degrees`;
    # other coast: within `other` of its amplitude without lean.
    frequency, found = stored("leaning", angle=angle)
    along = 2.0 / np.cos(np.radians(angle))
    leg = np.exp(segment_exponent(frequency, 1.0, 2.0, 4.0, along))
    north = eastern_junction(frequency * RATE, C, 2.0, angle, -angle).amplitude * leg
    south = eastern_junction(frequency * RATE, C, 2.0, -angle, angle).amplitude * leg
    assert_allclose(np.abs(north), np.abs(found[:, 1]), rtol=0.09)
    assert_allclose(np.degrees(np.angle(found[:, 1] / north)), 0.0, atol=degrees)
    error = (np.abs(south) - np.abs(found[:, 3])) / np.abs(eastern_wall(frequency, 4.0))
    assert_allclose(error, 0.0, atol=other)
    if angle <= 60.0:
        assert_allclose(np.degrees(np.angle(found[:, 3] / south)), 0.0, atol=30.0)


def test_half_each_would_be_wrong_on_a_leaning_coast() -> None:
    frequency, found = stored("leaning", angle=45.0)
    energy = np.abs(found[:, [1, 3]]) ** 2
    share = energy[:, 0] / energy.sum(axis=1)
    assert share[0] < 0.56
    assert np.all(share[frequency >= 0.6] > 0.94)


@pytest.mark.parametrize(("width", "length"), [(0.1, 0.5), (0.3, 0.5), (0.3, 2.0), (0.6, 2.0)])
def test_strait(width: float, length: float) -> None:
    # Phases leave out the way round the corners, about half a width or R/4
    frequency, found = stored("strait", width=width, length=length)
    theory = passage(frequency, width, length, 1.0, 1.0)
    assert_allclose(np.abs(theory.through), np.abs(found[:, 0]), atol=0.018)
    assert_allclose(np.abs(theory.across), np.abs(found[:, 1]), atol=0.018)
    for wave, column in ((theory.through, 0), (theory.across, 1)):
        lag = np.angle(found[:, column] / wave)
        assert np.all(lag > -0.01)
        assert np.all(lag < 0.3 * frequency + 0.55 * width * frequency + 0.03)


def test_strait_as_wide_as_the_radius() -> None:
    frequency, found = stored("strait", width=1.0)
    theory = passage(frequency, 1.0, 1.0, 1.0, 1.0)
    assert_allclose(np.abs(theory.through), np.abs(found[:, 0]), atol=0.025)
    assert_allclose(np.abs(theory.across), np.abs(found[:, 1]), atol=0.05)


def test_end_correction_beats_a_width() -> None:
    # the usual L + W in place of L + (2W/π) ln(1.76 R/W): 0.04 to 0.06 off where W = R/10
    frequency, found = stored("strait", width=0.1)
    usual = 1.0 / (1.0 - 1j * frequency * 0.6 / 0.1)
    theory = passage(frequency, 0.1, 0.5, 1.0, 1.0).through
    error = [np.abs(np.abs(t) - np.abs(found[:, 0])).max() for t in (usual, theory)]
    assert error[0] > 3 * error[1]


def test_integration_conserves_energy_in_a_strait() -> None:
    for width, length in ((0.1, 0.5), (0.3, 2.0), (0.6, 2.0), (1.0, 1.0)):
        _, found = stored("strait", width=width, length=length)
        assert_allclose((np.abs(found) ** 2).sum(axis=1), 1.0, atol=0.014)


def test_small_eastern_wall_now() -> None:
    frequency, place = np.array([0.4, 0.5, 0.8]), np.array([0.0, 2.0, 4.0])
    found = eastern(frequency, place, cells=10, duration=60.0)
    ratio = eastern_wall(frequency, place) / found.amplitude
    assert_allclose(np.abs(ratio), 1.0, atol=0.015)
    assert_allclose(np.degrees(np.angle(ratio)), 0.0, atol=1.5)


def test_small_western_wall_now() -> None:
    frequency, place = np.array([0.4, 0.5, 0.8]), np.array([4.0, 3.0, 2.0, 1.0])
    found = western(frequency, place, cells=10, duration=60.0)
    wall = western_wall(frequency, place)
    assert_allclose(np.abs(found.amplitude[:, :4]), np.abs(wall / wall[:, :1]), atol=0.01)
    assert_allclose(np.abs(found.amplitude[:, 4]), np.abs(1.0 / wall[:, 0]), rtol=0.03)


def test_small_strait_now() -> None:
    frequency = np.array([0.1, 0.3])
    found = strait(frequency, 0.4, 1.0, cells=10, duration=60.0)
    theory = passage(frequency, 0.4, 1.0, 1.0, 1.0)
    both = np.abs(np.stack([theory.through, theory.across], axis=1))
    assert_allclose(np.abs(found.amplitude), both, atol=0.03)  # four cells across
