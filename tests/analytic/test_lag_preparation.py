"""Filters and preparation: known responses, no shift in time, gaps, cycles, jumps."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.compare.filters import band_pass, godin_kernel, low_pass_kernel, response, smooth
from waveguide.compare.preparation import (
    YEAR,
    anomalies,
    bridge_gaps,
    datum_jumps,
    in_band,
    inverse_barometer,
)
from waveguide.compare.series import Series, align
from waveguide.errors import InputError

START = np.datetime64("2031-01-01T12:00:00")


def series(values, step=1.0, start=START, quantity="sea level"):
    return Series("gauge", quantity, (0.0, 0.0), 0.0, start, step, np.asarray(values, float))


def test_low_pass_response_is_half_at_the_cutoff_and_flat_beside():
    # Duchon (1979): the ideal response smoothed over 2/n around the cut-off; DERIVED.
    kernel = low_pass_kernel(1.0, 30.0)
    np.testing.assert_allclose(response(kernel, 1.0, np.array([30.0])), 0.5, atol=0.01)
    assert response(kernel, 1.0, np.array([300.0]))[0] == pytest.approx(1.0, abs=0.01)
    assert np.all(np.abs(response(kernel, 1.0, np.array([3.0, 5.0, 10.0, 15.0]))) < 0.02)


def test_godin_filter_has_the_response_of_three_running_means():
    # Product of sin(πfm)/(m sin πf), m = 24, 24, 25 hours (Godin 1972); DERIVED.
    period = np.array([12.4206, 12.0, 25.8193, 23.9345, 48.0, 72.0, 120.0, 240.0])  # hours
    f = 1.0 / period
    dirichlet = [np.sin(np.pi * f * m) / (m * np.sin(np.pi * f)) for m in (24, 24, 25)]
    got = response(godin_kernel(), 1.0, period)
    np.testing.assert_allclose(got, np.prod(dirichlet, axis=0), atol=1e-12)
    assert np.all(np.abs(got[:4]) < 2e-3)  # M2, S2, O1, K1
    np.testing.assert_allclose(got[4:], [0.25, 0.56, 0.81, 0.95], atol=0.01)


def test_band_pass_keeps_phase_and_amplitude_in_the_band():
    t = np.arange(1500.0)
    inside, slow, fast = (np.cos(2 * np.pi * t / period) for period in (25.0, 400.0, 3.0))
    passed = band_pass(inside + slow + fast, 1.0, (10.0, 60.0))
    middle = slice(200, 1300)
    np.testing.assert_allclose(passed[middle], inside[middle], atol=0.03)


def test_gaps_shorter_than_a_quarter_period_do_not_move_the_rest():
    t = np.arange(1200.0)
    signal = np.cos(2 * np.pi * t / 25.0)
    holed = signal.copy()
    holed[::40] = np.nan
    filtered = band_pass(bridge_gaps(holed, 2), 1.0, (10.0, 60.0))
    assert np.nanmax(np.abs(filtered - signal)[200:1000]) < 0.06


def test_long_gaps_stay_and_values_beside_them_are_doubted():
    values = np.random.default_rng(1).standard_normal(1000)
    values[400:500] = np.nan
    bridged = bridge_gaps(values, 5)
    np.testing.assert_array_equal(np.isnan(bridged), np.isnan(values))
    smoothed = smooth(values, low_pass_kernel(1.0, 30.0))
    assert np.isnan(smoothed[394:506]).all()
    assert np.isfinite(smoothed[100:360]).all()


def test_filters_by_their_cover_do_not_pull_towards_zero():
    values = np.full(500, 3.0)
    values[::7] = np.nan
    smoothed = smooth(values, low_pass_kernel(1.0, 20.0))
    np.testing.assert_allclose(smoothed[np.isfinite(smoothed)], 3.0, rtol=1e-9)


def test_trend_and_annual_cycle_are_removed_and_a_wave_is_left():
    t = np.arange(4 * 366.0)
    wave = 0.05 * np.sin(2 * np.pi * t / 30.0)
    season = 0.2 * np.cos(2 * np.pi * t / YEAR) + 0.05 * np.sin(4 * np.pi * t / YEAR)
    rest = anomalies(series(1.0 + 1e-4 * t + season + wave))
    np.testing.assert_allclose(rest.values, wave, atol=3e-3)
    assert any("annual cycle removed" in note for note in rest.notes)


def test_short_records_keep_their_annual_cycle_and_say_so():
    rest = anomalies(series(np.random.default_rng(2).standard_normal(300)))
    assert any("annual cycle is not told" in note for note in rest.notes)


def test_hourly_tides_are_removed():
    hours = np.arange(60 * 24)
    slow = 0.1 * np.sin(2 * np.pi * hours / 24 / 20.0)
    tide = np.cos(2 * np.pi * hours / 12.4206) + 0.4 * np.cos(2 * np.pi * hours / 23.9345)
    daily = anomalies(series(slow + tide, 1.0 / 24.0, np.datetime64("2031-01-01T00:00:00")))
    assert daily.step == 1.0
    assert str(daily.start).endswith("12:00:00")
    expected = slow[12::24] - np.polyval(np.polyfit(np.arange(60), slow[12::24], 1), np.arange(60))
    np.testing.assert_allclose(daily.values[2:-2], expected[2:-2], atol=0.012)


def test_inverse_barometer_is_a_centimetre_per_hectopascal():
    # 100 Pa/(1025 kg/m³ 9.81 m/s²) = 9.945 mm; DERIVED from hydrostatics.
    pressure = np.array([101325.0, 101425.0, 101225.0])
    np.testing.assert_allclose(inverse_barometer(pressure), [0.0, 0.009945, -0.009945], atol=1e-6)


def test_a_datum_jump_is_found_and_a_storm_is_none():
    noise = 0.05 * np.cumsum(np.random.default_rng(3).standard_normal(1500)) / 20
    values = noise + 0.03 * np.random.default_rng(4).standard_normal(1500)
    assert datum_jumps(values, 1.0) == []
    values[900:] += 0.5
    assert datum_jumps(values, 1.0) == [900]
    storm = noise.copy()
    storm[700:704] += 0.8
    assert datum_jumps(storm, 1.0) == []


def test_too_few_values_are_refused():
    values = np.full(800, np.nan)
    values[:100] = np.arange(100) % 7
    with pytest.raises(InputError, match="fewer gaps"):
        in_band(anomalies(series(values)), (10.0, 60.0))


@pytest.mark.parametrize("band", [(60.0, 10.0), (1.0, 10.0), (10.0, 10.0)])
def test_bands_that_make_no_sense_are_refused(band):
    with pytest.raises(InputError, match="band"):
        band_pass(np.zeros(100), 1.0, band)


def test_series_are_aligned_by_time_and_the_rest_of_a_step_is_kept():
    first = series(np.arange(10.0))
    second = series(np.arange(10.0), start=np.datetime64("2031-01-04T00:00:00"))
    x, y, start, offset = align(first, second)
    assert (x[0], y[0]) == (2.0, 0.0)
    assert str(start).startswith("2031-01-03T12")
    assert offset == pytest.approx(0.5)
    with pytest.raises(InputError, match="no time in common"):
        align(first, series(np.arange(3.0), start=np.datetime64("2035-01-01T12:00:00")))
    with pytest.raises(InputError, match="step"):
        align(first, series(np.arange(3.0), step=1.0 / 24.0))
