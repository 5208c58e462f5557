"""Speeds measured from synthetic distance–time diagrams; windows and routes made by hand."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from scipy.ndimage import gaussian_filter1d
from scipy.signal import lfilter
from scipy.stats import binom

from waveguide.compare.phase_speed import (
    STRETCHES,
    Stacker,
    best_stretch,
    phase_speed,
    semblance,
    without_holes,
)
from waveguide.compare.route_lines import RouteLine, densified, route_lines
from waveguide.compare.standing_null import unit_anomalies
from waveguide.compare.windows import guide_width, seaward, stretches, windows

BINS, DAYS, LENGTH = 90, 150, 8e6


def diagram(seed, speed=2.5, noise=0.25, height=1.0):
    """A pulse of seven days that crosses 8000 km, in noise red in time and smooth in space."""
    generator = np.random.default_rng(seed)
    distance, days = np.linspace(0.0, LENGTH, BINS), np.arange(float(DAYS))
    travel = distance / speed / 86400.0
    pulse = np.exp(-(((days[:, None] - 20.0 - travel) / 7.0) ** 2))
    kicks = generator.standard_normal((DAYS + 100, BINS + 40))
    rough = lfilter([np.sqrt(0.19)], [1.0, -0.9], kicks, axis=0)[100:]
    smooth = gaussian_filter1d(rough, 4.0, axis=1)[:, 20:-20]
    return height * pulse + noise * smooth / smooth.std(), days, distance


def curve_of(x, lag):
    """Semblance of daily bins for all stretches."""
    stacker = Stacker.of(x, 1.0, lag)
    curve = semblance(stacker.stacks(x).sum(axis=0), stacker.power(x))
    np.testing.assert_allclose(stacker.curves(x[None])[0], curve)
    return curve


def test_speed_is_recovered_and_its_interval_covers():
    draws, covered, measured = 24, 0, []
    for seed in range(draws):
        values, days, distance = diagram(seed)
        speed = phase_speed(values, days, distance, distance / 2.7 / 86400.0)
        covered += speed.low <= 2.5 <= speed.high
        measured.append(speed.measured)
        assert speed.verdict == "consistent"
    assert covered / draws >= 0.95 - 3.0 * np.sqrt(0.95 * 0.05 / draws)
    assert np.mean(measured) == pytest.approx(2.5, rel=0.02)


@pytest.mark.parametrize(("theory", "word"), [(1.7, "faster"), (4.0, "slower")])
def test_other_speeds_are_called_so(theory, word):
    values, days, distance = diagram(1)
    assert phase_speed(values, days, distance, distance / theory / 86400.0).verdict == word


def noise(seed, memory, likeness, bins=12, days=60):
    """Noise without direction: red in time by `memory`, smoothed in space over `likeness` bins."""
    kicks = np.random.default_rng(seed).standard_normal((days + 100, bins + 80))
    rough = lfilter([1.0], [1.0, -memory], kicks, axis=0)[100:]
    return (gaussian_filter1d(rough, likeness, axis=1) if likeness else rough)[:, 40:-40]


@pytest.mark.parametrize("memory", [0.0, 0.9])
@pytest.mark.parametrize("likeness", [0.0, 3.0])
def test_false_alarms_on_noise_are_as_many_as_said(memory, likeness):
    draws = 200
    days, distance = np.arange(60.0), np.linspace(0.0, 1.5e6, 12)
    found = [
        phase_speed(noise(seed, memory, likeness), days, distance, distance / 2.5 / 86400.0)
        for seed in range(draws)
    ]
    chance = np.array([speed.chance for speed in found])
    for level in (0.05, 0.2, 0.5):  # the whole distribution, not only the level of the verdict
        fewest, most = binom.interval(0.999, draws, level)
        assert fewest <= np.sum(chance <= level) <= most
    said = sum(speed.verdict != "not resolvable" for speed in found)
    assert said <= binom.ppf(0.999, draws, 0.05)


def test_reversed_waves_are_not_resolvable():
    values, days, distance = diagram(3)
    back = phase_speed(values[:, ::-1], days, distance, distance / 2.5 / 86400.0)
    assert back.verdict == "not resolvable"


def test_two_waves_of_one_size_leave_the_speed_open():
    fast, days, distance = diagram(7, speed=3.5, noise=0.05)
    slow, _, _ = diagram(8, speed=1.5, noise=0.05)
    speed = phase_speed(fast + np.roll(slow, 40, axis=0), days, distance, distance / 2.5 / 86400.0)
    assert speed.chance <= 0.05
    assert speed.verdict == "not resolvable"
    assert "line up almost as well" in speed.reason


def test_a_pure_line_between_few_places_is_ambiguous():
    # Six days from place to place and a period of eight: the wave might as well run backwards.
    days, distance = np.arange(200.0), 6.0 * 86400.0 * 2.5 * np.arange(10.0)
    wave = np.cos(2.0 * np.pi * (days[:, None] - 6.0 * np.arange(10.0)) / 8.0)
    speed = phase_speed(wave, days, distance, distance / 2.5 / 86400.0)
    assert speed.verdict == "not resolvable"


def test_a_route_without_values_has_no_speed():
    values, days, distance = diagram(4)
    values[:, 3:] = np.nan
    speed = phase_speed(values, days, distance, distance / 2.5 / 86400.0)
    assert speed.verdict == "not resolvable"
    assert "3 bins" in speed.reason


def test_semblance_by_transform_is_that_by_shifting_whole_days():
    generator = np.random.default_rng(5)
    x = gaussian_filter1d(generator.standard_normal((12, 80)), 3.0, axis=1)
    lag = 2.0 * np.arange(12.0)
    at = int(np.argmin(np.abs(STRETCHES - 1.0)))
    assert STRETCHES[at] == pytest.approx(1.0, abs=1e-3)
    stack = np.zeros(80 + 30)
    for row, delay in zip(x, lag, strict=True):
        start = 30 - int(delay)
        stack[start : start + 80] += row
    direct = np.sum(stack**2) / (12 * np.sum(x**2))
    assert curve_of(x, lag)[at] == pytest.approx(direct, rel=5e-3)


def test_identical_bins_in_line_have_semblance_one():
    days = np.arange(200.0)
    lag = np.linspace(0.0, 40.0, 20)
    x = np.exp(-(((days - 60.0 - lag[:, None]) / 8.0) ** 2))
    curve = curve_of(x, lag)
    assert curve.max() == pytest.approx(1.0, abs=2e-3)
    assert best_stretch(curve) == pytest.approx(1.0, abs=2e-3)


def test_standardised_bins_have_neither_trend_nor_holes():
    values, days, _ = diagram(6)
    values += 3.0 + 0.1 * days[:, None]
    values[10:14, 5] = np.nan
    x = unit_anomalies(without_holes(values))
    assert np.isfinite(x).all()
    np.testing.assert_allclose(x.mean(axis=1), 0.0, atol=1e-9)
    np.testing.assert_allclose(x[6].std(), 1.0, rtol=1e-9)


def turning_route() -> RouteLine:
    """3000 km along the equator, then 1500 km south along a meridional coast."""
    lon = np.concatenate([np.linspace(-107.0, -80.0, 55), np.full(30, -80.0)])
    lat = np.concatenate([np.zeros(55), np.linspace(-0.45, -13.5, 30)])
    step = 6.371e6 * np.radians(np.hypot(np.diff(lon), np.diff(lat)))
    distance = np.concatenate([[0.0], np.cumsum(step)])
    return RouteLine("gauge", 1, lon, lat, distance, distance / 2.5, np.linspace(1.0, 0.8, 85),
                     np.repeat([0, 1], [55, 30]), ("equator", "coast"))


def test_stretches_cover_a_route_without_overlap_and_keep_to_one_leg():
    line = turning_route()
    runs = stretches(line)
    assert runs[0][0] == 0
    assert runs[-1][1] == line.distance.size - 1
    assert all(first[1] == second[0] for first, second in pairwise(runs))
    assert all(line.distance[b] - line.distance[a] <= 1.0e6 for a, b in runs)
    assert 54 in {b for _, b in runs}  # the end of the equatorial leg


def test_the_sea_lies_left_of_travel_in_the_south_off_an_eastern_boundary():
    azimuth = seaward(turning_route())
    assert np.isnan(azimuth[:50]).all()
    np.testing.assert_allclose(azimuth[60:], 270.0, atol=1.0)  # west of a southward coast


def test_widths_are_the_radii_of_theory():
    # √(2c/β) = 468 km at c = 2.5 m/s, and c/|f| = 73 km at 13.5°S; DERIVED.
    width = guide_width(turning_route())
    assert width[10] == pytest.approx(467.3e3, rel=0.01)
    assert width[-1] == pytest.approx(73.4e3, rel=0.02)


def test_windows_open_before_and_close_after_the_front():
    line = turning_route()
    found = windows([line, line], 10.0, 40.0)
    assert len(found) == len(stretches(line))  # told once
    for window in found:
        front = np.interp(window.start_distance, line.distance, line.time) / 86400.0
        end = np.interp(window.end_distance, line.distance, line.time) / 86400.0
        assert window.opens == pytest.approx(max(front - max(0.1 * front, 1.0), 0.0))
        assert window.closes == pytest.approx(end + max(0.1 * end, 1.0) + 30.0)
        assert 20.0 < window.depth < 400.0  # the thermocline, where a mode shows in temperature
        assert window.response < 0.0  # isopycnals sink where sea level rises, in mode 1


def test_densified_routes_cross_the_date_line():
    line = turning_route()
    over = RouteLine("x", 1, np.array([178.0, 179.9, -178.0]), np.zeros(3),
                     np.array([0.0, 2e5, 4.4e5]), np.array([0.0, 1.0, 2.0]), np.ones(3),
                     np.zeros(3, int), ("equator",))
    _, lon, _ = densified(over, 1e4)
    assert np.all(np.diff(lon) > 0.0)
    distance, _, lat = densified(line, 5e4)
    assert np.diff(distance).max() <= 5e4
    assert lat.min() == pytest.approx(-13.5)


def test_routes_within_others_are_told_once(arrivals):
    lines = route_lines(arrivals)
    assert {(line.target, line.mode) for line in lines} == {
        ("Callao", 1), ("Callao", 2), ("Acapulco", 1)
    }
    callao = lines[0] if lines[0].target == "Callao" else lines[1]
    assert callao.kinds == ("equator", "coast")
    assert np.all(np.diff(callao.distance) > 0.0)
    assert np.all(np.diff(callao.time) > 0.0)
