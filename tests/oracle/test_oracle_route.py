"""A whole route on the sphere: coast, equator, coast, against a shallow-water integration.

The first gauge's record is carried to the others by theory, so the strength of the source
plays no part. Asked for: peak and half-height within 5 % of the travel time or 12 h, peak
amplitude within 20 %. What is reached is asserted.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
from basin import basin_theory, half_height_and_peak, integrate_basin
from numpy.testing import assert_allclose

STORED = Path(__file__).parent / "route_results.json"


def compare(
    time: np.ndarray, found: np.ndarray, theory: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Errors of half-height and peak time (days), and ratio of peaks, at gauges after the first."""
    pairs = [
        (half_height_and_peak(time, found[:, k]), half_height_and_peak(time, theory[:, k]))
        for k in range(1, found.shape[1])
    ]
    values = np.array(pairs)
    return values[:, 1, :2] - values[:, 0, :2], values[:, 1, 2] / values[:, 0, 2]


def test_three_cells_per_radius() -> None:
    stored = json.loads(STORED.read_text(encoding="utf-8"))
    scale = np.array(stored["peak"])[:, None] / 1000.0
    found = (np.array(stored["sea_level_per_mille_of_peak"]) * scale).T
    time = stored["sample_seconds"] * np.arange(len(found))
    lon, lat = np.array(stored["lon"]), np.array(stored["lat"])
    setup = stored["setup"]
    theory = basin_theory(time, found[:, 0], lon, lat, setup["speed"], setup["step"])
    error, ratio = compare(time, found, theory)
    assert_allclose(error, 0.0, atol=0.2)  # days, after 51 days to the last gauge
    assert_allclose(ratio, 1.0, atol=0.06)


def test_fast_mode_now() -> None:
    # c = 10 m/s, where the equatorial plane is a poor likeness of the sphere (2 L_e is 12°)
    domain, gauges = integrate_basin(10.0, 0.4, 40.0, 2.0, 100.0)
    theory = basin_theory(
        gauges.time, gauges.sea_level[:, 0], gauges.lon, gauges.lat, 10.0, domain.step
    )
    error, ratio = compare(gauges.time, gauges.sea_level, theory)
    assert_allclose(error, 0.0, atol=0.15)  # days, after 12 days to the last gauge
    assert_allclose(ratio, 1.0, atol=0.09)
