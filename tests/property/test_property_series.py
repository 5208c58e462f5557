"""What preparing a record may and may not do to it, whatever the record."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from scipy.signal import lfilter

from waveguide.compare.clock import regular
from waveguide.compare.preparation import anomalies, bridge_gaps, in_band, seasonal_fit
from waveguide.compare.reading import FILLS, Record, read_series, without_fills
from waveguide.compare.series import Series

START = np.datetime64("2031-01-01T12:00:00")
seeds = st.integers(0, 2**32 - 1)


def red(seed, n, memory=0.9):
    white = np.random.default_rng(seed).standard_normal(n + 200)
    return lfilter([np.sqrt(1.0 - memory**2)], [1.0, -memory], white)[200:]


def holed(seed, n, share):
    """Red noise with a share of its values missing, never the first and last."""
    values = red(seed, n)
    lost = np.random.default_rng(seed + 1).random(n) < share
    lost[[0, -1]] = False
    values[lost] = np.nan
    return values


def record(values, quantity="sea level"):
    return Series("gauge", quantity, (0.0, 0.0), 0.0, START, 1.0, values)


@settings(deadline=None)
@given(seeds, st.floats(0.0, 0.9), st.integers(0, 12))
def test_bridges_join_short_gaps_only_and_touch_no_value(seed, share, longest):
    values = holed(seed, 200, share)
    bridged = bridge_gaps(values, longest)
    known = np.isfinite(values)
    np.testing.assert_array_equal(bridged[known], values[known])
    edges = np.flatnonzero(np.diff(np.isfinite(bridged).astype(int)))
    assert all(last - first > longest for first, last in zip(edges[::2], edges[1::2], strict=True))
    place = np.arange(values.size)
    line = np.interp(place, place[known], values[known])
    new = np.isfinite(bridged) & ~known
    np.testing.assert_allclose(bridged[new], line[new], atol=1e-12)


@settings(deadline=None)
@given(
    seeds, st.floats(0.0, 0.4), st.floats(-10.0, 10.0), st.floats(-1e-2, 1e-2),
    st.floats(-2.0, 2.0), st.floats(0.0, 6.3),
)
def test_level_trend_and_season_leave_no_trace(seed, share, level, trend, height, phase):
    days, values = np.arange(1100.0), holed(seed, 1100, share)
    year = 2.0 * np.pi * days / 365.2425
    season = height * np.cos(year + phase) + 0.3 * height * np.sin(2.0 * year - phase)
    changed = values + level + trend * days + season
    rest = values - seasonal_fit(days, values, True)
    np.testing.assert_allclose(changed - seasonal_fit(days, changed, True), rest, atol=1e-8)


@settings(max_examples=30, deadline=None)
@given(seeds, st.floats(0.0, 0.05), st.floats(-50.0, 50.0).filter(lambda k: abs(k) > 1e-3))
def test_the_band_is_linear(seed, share, factor):
    values = holed(seed, 1100, share)
    band = in_band(anomalies(record(values, "temperature")), (10.0, 60.0)).values
    scaled = in_band(anomalies(record(factor * values, "temperature")), (10.0, 60.0)).values
    np.testing.assert_allclose(scaled, factor * band, atol=1e-8 * abs(factor))


@settings(max_examples=30, deadline=None)
@given(seeds)
def test_a_record_turned_in_time_is_prepared_as_the_same_turned(seed):
    # No step may delay the signal: time reversal must go through every filter.
    values = holed(seed, 1101, 0.03)
    band = in_band(anomalies(record(values)), (10.0, 60.0)).values
    back = in_band(anomalies(record(values[::-1].copy())), (10.0, 60.0)).values[::-1]
    both = np.isfinite(band) & np.isfinite(back)
    np.testing.assert_array_equal(np.isfinite(band), np.isfinite(back))
    # the phase of the annual cycle's origin differs, the space of fitted functions does not
    np.testing.assert_allclose(back[both], band[both], atol=1e-6)


@settings(deadline=None)
@given(seeds, st.sampled_from([1, 24]), st.floats(0.0, 0.5))
def test_values_stay_at_their_times(seed, per_day, share):
    generator = np.random.default_rng(seed)
    kept = np.flatnonzero(generator.random(300) >= share)
    kept = np.union1d(kept, np.arange(100))  # the step must be the usual one
    step = np.timedelta64(24 // per_day, "h")
    values = generator.standard_normal(kept.size)
    start, days, placed = regular((START + kept * step).astype("datetime64[s]"), values, "gauge")
    assert start == START
    assert days == pytest.approx(1.0 / per_day)
    np.testing.assert_array_equal(placed[kept], values)
    assert np.isfinite(placed).sum() == kept.size


@settings(deadline=None)
@given(seeds, st.sampled_from(FILLS), st.integers(1, 60))
def test_fills_are_left_out_and_nothing_else(seed, fill, count):
    generator = np.random.default_rng(seed)
    values = 1.5 + 0.1 * generator.standard_normal(400)
    lost = generator.choice(400, count, replace=False)
    values[lost] = fill
    kept, notes = without_fills(values, None, "gauge")
    assert np.isnan(kept[lost]).all()
    assert np.isfinite(kept).sum() == 400 - count
    assert notes == [f"{count} fill values left out"]


@settings(max_examples=20, deadline=None)
@given(seed=seeds, unit=st.sampled_from([("mm", 1e3), ("cm", 1e2), ("dm", 10.0)]))
def test_the_unit_of_the_file_does_not_matter(tmp_path_factory, seed, unit):
    name, factor = unit
    path = tmp_path_factory.mktemp("unit") / "a.csv"
    level = 1.5 + 0.1 * red(seed, 400)
    days = (START + np.arange(400) * np.timedelta64(1, "D")).astype("datetime64[D]")
    rows = "\n".join(f"{d},{factor * v!r}" for d, v in zip(days, level.tolist(), strict=True))
    path.write_text(f"date,gauge\n{rows}\n")
    series = read_series(Record("gauge", (0.0, 0.0), path, units=name))
    np.testing.assert_allclose(series.values, level, rtol=1e-12)


@settings(max_examples=30, deadline=None)
@given(seeds, st.integers(250, 850), st.floats(0.5, 3.0), st.sampled_from([-1.0, 1.0]))
@example(0, 335, 3.0, -1.0)
def test_a_datum_jump_is_said_with_its_size_and_date(seed, at, size, sign):
    # Noise of 5 cm that forgets itself within days: a jump of half a metre is no weather.
    values = 0.05 * red(seed, 1100, 0.8)
    assert not [note for note in anomalies(record(values)).notes if "datum" in note]
    values[at:] += sign * size
    (note,) = [note for note in anomalies(record(values)).notes if "datum" in note]
    assert str(START + np.timedelta64(at, "D"))[:10] in note
    told = float(note.split("jumps by ")[1].split(" m")[0])
    assert told == pytest.approx(sign * size, abs=0.5)
