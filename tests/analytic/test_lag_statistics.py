"""Lags of synthetic series with known lag, noise and gaps: bias, coverage, and saying no.

Coverage is that of many independent draws; its tolerance is three standard deviations of the
binomial law, √(0.95·0.05/n), plus what a bootstrap of some ten blocks is known to fall short by
(0.02, see waveguide.compare.lags).
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter

from waveguide.compare.events import compare_event
from waveguide.compare.lags import (
    cross_correlation,
    dominant_period,
    lag_estimate,
    peak,
    second_maximum,
)
from waveguide.compare.pairs import BLOCK_PERIODS, Prediction, compare_pair
from waveguide.compare.preparation import anomalies, in_band
from waveguide.compare.regression import regression
from waveguide.compare.series import Series
from waveguide.compare.significance import (
    circular_correlation,
    effective_count,
    scrambled,
    scrambled_chance,
    shifted_chance,
)
from waveguide.compare.spectra import cross_spectrum
from waveguide.compare.verdict import verdict

START = np.datetime64("2031-01-01T12:00:00")
BAND = (10.0, 60.0)
LAG = 3.4


def red(generator, n, memory=0.9):
    """Unit-variance red noise, AR(1)."""
    white = generator.standard_normal(n + 200)
    return lfilter([np.sqrt(1.0 - memory**2)], [1.0, -memory], white)[200:]


def pair(seed, n=1460, lag=LAG, noise=0.8, holes=7):
    """Two daily records of one red signal, the second later by a lag, with noise and gaps."""
    generator = np.random.default_rng(seed)
    fine = red(generator, 5 * (n + 200), 0.9**0.2)  # steps of 0.2 days
    start, later = 500, round(5 * lag)
    x = fine[start : start + 5 * n : 5] + noise * red(generator, n)
    y = fine[start - later : start - later + 5 * n : 5] + noise * red(generator, n)
    for values in (x, y):
        for hole in generator.integers(0, n - 30, holes):
            values[hole : hole + generator.integers(1, 25)] = np.nan
    return record("up", x), record("down", y)


def record(name, values):
    return Series(name, "sea level", (0.0, 0.0), 0.0, START, 1.0, values)


def told(lag=LAG):
    return [Prediction(1, "reached", lag, lag, 1.0)]


def test_peak_of_a_parabola_is_exact():
    lag = np.arange(-5.0, 6.0)
    assert peak(lag, -((lag - 1.3) ** 2)) == pytest.approx(1.3)


def test_dominant_period_of_a_sinusoid():
    t = np.arange(4000.0)
    assert dominant_period(np.sin(2 * np.pi * t / 17.0), 1.0) == pytest.approx(17.0, rel=1e-3)


def test_noise_free_lag_is_found_to_a_hundredth_of_a_day():
    t = np.arange(3000.0)
    x, y = (sum(np.cos(2 * np.pi * at / p + p) for p in (13.0, 21.7, 34.0, 55.0))
            for at in (t, t - 2.6))
    corr = cross_correlation(x, y, 1.0, 20.0)
    assert peak(corr.lag, corr.value) == pytest.approx(2.6, abs=0.02)


def test_interval_covers_as_often_as_it_says():
    draws = 160
    results = []
    for seed in range(draws):
        x, y = (in_band(anomalies(series), BAND).values for series in pair(seed))
        block = BLOCK_PERIODS * BAND[1]
        results.append(lag_estimate(x, y, 1.0, 20.0, block, np.random.default_rng(seed)))
    covered = np.mean([r.low <= LAG <= r.high for r in results])
    three_sigma = 3.0 * np.sqrt(0.95 * 0.05 / draws)
    assert 0.95 - 0.02 - three_sigma <= covered <= min(0.95 + three_sigma, 1.0)
    lags = np.array([r.lag for r in results])
    assert abs(lags.mean() - LAG) < 3.0 * lags.std() / np.sqrt(draws)
    assert np.median([r.high - r.low for r in results]) < 2.5


def test_a_wave_on_time_is_consistent():
    words = [
        compare_pair(*pair(seed), BAND, told(), longest=20.0).verdicts[0].word for seed in range(20)
    ]
    assert words.count("consistent") >= 17


def test_unrelated_records_are_found_related_as_rarely_as_stated():
    draws = 200
    chances = []
    for seed in range(draws):
        generator = np.random.default_rng(9000 + seed)
        chances.append(shifted_chance(red(generator, 1200), red(generator, 1200), 1.0, 20.0))
    false = np.mean(np.array(chances) < 0.05)
    assert false <= 0.05 + 3.0 * np.sqrt(0.05 * 0.95 / draws)
    assert 0.4 < np.mean(chances) < 0.6  # uniform under the null


@pytest.mark.parametrize("chance", ["shifted", "scrambled"])
def test_lags_that_are_a_tenth_of_the_record_do_not_make_chance_small(chance):
    # The highest of ten independent windows is that of the real pair in one case of ten.
    draws, small = 100, 0
    for seed in range(draws):
        generator = np.random.default_rng(7000 + seed)
        records = red(generator, 900), red(generator, 900)
        told_chance = (
            shifted_chance(*records, 1.0, 45.0) if chance == "shifted"
            else scrambled_chance(*records, 1.0, 45.0, generator)
        )
        small += told_chance < 0.05
    assert small / draws <= 0.05 + 3.0 * np.sqrt(0.05 * 0.95 / draws)


def test_scrambled_records_agree_with_shifted_ones():
    generator = np.random.default_rng(5)
    unrelated = red(generator, 800), red(generator, 800)
    assert scrambled_chance(*unrelated, 1.0, 20.0, generator) > 0.05
    signal = red(generator, 800)
    noisy = signal + 0.7 * red(generator, 800), signal + 0.7 * red(generator, 800)
    assert scrambled_chance(*noisy, 1.0, 20.0, generator) < 0.01


def test_scrambling_keeps_power_and_gaps():
    values = red(np.random.default_rng(6), 900)
    values[300:340] = np.nan
    (new,) = scrambled(values, 1, np.random.default_rng(7))
    np.testing.assert_array_equal(np.isnan(new), np.isnan(values))
    assert np.nanstd(new) == pytest.approx(np.nanstd(values), rel=0.2)


def test_noise_alone_is_not_resolvable():
    words = []
    for seed in range(20):
        generator = np.random.default_rng(seed)
        unrelated = record("up", red(generator, 1460)), record("down", red(generator, 1460))
        words.append(compare_pair(*unrelated, BAND, told(), longest=20.0).verdicts[0].word)
    assert words.count("not resolvable") >= 17  # 5 % chance each of a relation


def test_reversed_propagation_is_refused():
    down, up = pair(11, n=3000)
    result = compare_pair(up, down, BAND, told(), longest=20.0)
    assert result.verdicts[0].word == "too early"
    assert "reversed" in result.verdicts[0].reason


@pytest.mark.parametrize(("predicted", "word"), [(8.0, "too early"), (1.2, "too late")])
def test_wrong_times_are_called_early_and_late(predicted, word):
    result = compare_pair(*pair(12, n=4000), BAND, told(predicted), longest=20.0)
    assert result.verdicts[0].word == word


def test_no_delay_at_all_is_not_taken_for_a_wave():
    together = pair(13, n=4000, lag=0.0)
    assert compare_pair(*together, BAND, told(), longest=20.0).verdicts[0].word == "too early"
    short = compare_pair(*together, BAND, told(0.15), longest=20.0).verdicts[0]
    assert short.word == "not resolvable"
    assert "no delay at all" in short.reason


def test_one_cycle_of_ambiguity_is_said():
    # A nearly pure line: the correlation repeats after every period of 12 days.
    generator = np.random.default_rng(14)
    t = np.arange(1460.0)
    line = np.cos(2 * np.pi * t / 12.0 + 0.3 * np.sin(2 * np.pi * t / 500.0))
    late = np.cos(2 * np.pi * (t - 4) / 12.0 + 0.3 * np.sin(2 * np.pi * (t - 4) / 500.0))
    up = record("up", line + 0.8 * red(generator, 1460))
    down = record("down", late + 0.8 * red(generator, 1460))
    result = compare_pair(up, down, (8.0, 20.0), told(4.0), longest=30.0)
    assert result.verdicts[0].word == "not resolvable"
    assert "one cycle of ambiguity" in result.verdicts[0].reason


def test_the_second_maximum_lies_a_cycle_away():
    t = np.arange(2000.0)
    corr = cross_correlation(np.cos(2 * np.pi * t / 12), np.cos(2 * np.pi * (t - 4) / 12), 1.0, 30)
    lag, value = second_maximum(corr)
    assert (lag - 4.0) % 12.0 == pytest.approx(0.0, abs=1.0)
    assert value > 0.9


def test_a_peak_at_the_edge_of_the_search_is_said():
    result = compare_pair(*pair(15, n=3000, lag=8.0, noise=0.3), BAND, told(), longest=5.0)
    assert result.verdicts[0].word == "not resolvable"
    assert "longest lag searched" in result.verdicts[0].reason


def test_a_mode_without_a_route_has_no_lag_to_judge():
    result = compare_pair(*pair(16), BAND, [Prediction(1, "no route", np.nan, np.nan, np.nan)])
    assert result.verdicts[0].word == "not resolvable"
    assert "no route" in result.verdicts[0].reason


def test_a_record_that_falls_as_the_other_rises_is_turned_by_the_prediction():
    up, down = pair(17, n=3000)
    fallen = record("down", -down.values)
    result = compare_pair(up, fallen, BAND, [Prediction(1, "reached", LAG, LAG, -1.0)], 20.0)
    assert result.verdicts[0].word == "consistent"


def test_regression_recovers_a_slope_within_its_interval():
    covered = []
    for seed in range(100):
        generator = np.random.default_rng(seed)
        x = red(generator, 1500)
        y = 0.7 * x + 0.8 * red(generator, 1500)
        fit = regression(x, y, 0)
        covered.append(fit.low <= 0.7 <= fit.high)
    assert np.mean(covered) >= 0.95 - 3.0 * np.sqrt(0.95 * 0.05 / 100)


def test_effective_number_of_red_noise():
    # Σ ρ² = (1 + a²)/(1 − a²) for two AR(1) of memory a (Bartlett): n_e = n (1 − a²)/(1 + a²).
    a, n = 0.8, 20000
    generator = np.random.default_rng(8)
    count = effective_count(red(generator, n, a), red(generator, n, a))
    assert count == pytest.approx(n * (1 - a**2) / (1 + a**2), rel=0.15)


def test_circular_correlation_equals_the_sum_over_pairs_that_are_there():
    generator = np.random.default_rng(9)
    x, y = generator.standard_normal(60), generator.standard_normal(60)
    x[10:14], y[50] = np.nan, np.nan
    shift = 7
    turned = np.roll(y, -shift)
    both = np.isfinite(x) & np.isfinite(turned)
    a, b = x[both], turned[both]
    expected = (a @ b) / np.sqrt((a @ a) * (b @ b))
    assert circular_correlation(x, y)[shift] == pytest.approx(expected)


def test_coherence_and_phase_of_a_lagged_record():
    generator = np.random.default_rng(10)
    fine = red(generator, 6500)
    x, y = fine[100:6100], fine[97:6097] + 0.3 * red(generator, 6000)  # y lags by 3 days
    spectrum = cross_spectrum(x, y, 1.0, 120.0)
    near = (spectrum.frequency > 0.02) & (spectrum.frequency < 0.1)
    expected = 360.0 * spectrum.frequency[near] * 3.0
    off = np.abs((spectrum.phase[near] - expected + 180.0) % 360.0 - 180.0)
    assert np.all(off < 3.5 * spectrum.phase_error[near])
    np.testing.assert_allclose(spectrum.coherence[near], 1 / 1.09, atol=0.1)
    unrelated = cross_spectrum(red(generator, 6000), red(generator, 6000), 1.0, 120.0)
    share = np.mean(unrelated.coherence > unrelated.significant)
    assert share < 0.15


def test_too_short_a_record_gives_no_spectrum():
    spectrum = cross_spectrum(np.ones(50), np.ones(50), 1.0, 120.0)
    assert spectrum.frequency.size == 0


def burst(seed, height, lag=12.3, n=1600):
    """Red noise with a box of ten days that arrives `lag` days after day 800."""
    t = np.arange(float(n))
    box = np.clip((5.0 - np.abs(t - 800.0 - lag - 5.0)) + 0.5, 0.0, 1.0)
    noise = 0.04 * red(np.random.default_rng(seed), n)
    return record("gauge", noise + height * box)


def test_an_event_is_timed_with_an_interval_that_covers():
    start, draws = START + np.timedelta64(800, "D"), 100
    results = [
        compare_event(burst(seed, 0.2), (5.0, 60.0), start, 10.0, told(12.0))
        for seed in range(draws)
    ]
    covered = np.mean([r.estimate.low <= 12.3 <= r.estimate.high for r in results])
    assert covered >= 0.95 - 0.02 - 3.0 * np.sqrt(0.95 * 0.05 / draws)
    assert np.median([r.estimate.high - r.estimate.low for r in results]) < 2.0
    assert all(r.verdicts[0].word == "consistent" for r in results)
    strongest = [np.max(r.amplitude) for r in results]
    assert np.mean(strongest) == pytest.approx(0.2, rel=0.1)


def test_no_event_is_not_resolvable():
    start = START + np.timedelta64(800, "D")
    words = [
        compare_event(burst(seed, 0.0), (5.0, 60.0), start, 10.0, told(12.0)).verdicts[0].word
        for seed in range(40)
    ]
    assert words.count("not resolvable") >= 34


def test_a_verdict_needs_the_whole_interval_outside():
    result = compare_pair(*pair(18, n=4000), BAND, told(), longest=20.0)
    estimate = result.estimate
    assert verdict(estimate, 0.2, LAG, "reached").word == "not resolvable"
    just = estimate.high / 0.9 * 0.999
    assert verdict(estimate, 0.0, just, "reached").word == "consistent"
    assert verdict(estimate, 0.0, estimate.high / 0.9 * 1.001, "reached").word == "too early"
