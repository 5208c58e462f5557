"""Ensembles: each part against closed forms, the whole against exact recomputation of members."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import norm

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.attach import Ties
from waveguide.propagation.answers import ModeAnswer, mode_answer
from waveguide.propagation.ensemble import Members, chance_window, members, sensitivity
from waveguide.propagation.path_errors import correlated_sum, relative_delays
from waveguide.propagation.priors import INPUTS, USUAL, Prior, Priors, depth_exponent
from waveguide.propagation.sampling import normal_sample
from waveguide.propagation.sources import SourceFunction, gaussian_burst, step_rise
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.transfer import paths_of_arrival, route_transfers
from waveguide.propagation.wave_table import lasting_longer
from waveguide.propagation.waveform import arrival_times, source_spectrum, synthesise

C, DAY = 2.5, SECONDS_PER_DAY
OMEGA = 2.0 * np.pi / (20.0 * DAY)


def answered(
    guides: SimpleNamespace, network, source: SourceFunction, conditions: Conditions | None = None,
    mode=None,
) -> tuple[ModeAnswer, Conditions]:
    mode = guides.uniform(network, C) if mode is None else mode
    conditions = conditions or Conditions()
    arrival = guides.arrival(network, mode, [np.arange(network.tail.size)], OMEGA)
    window = 1.5 * arrival.routes[0].time + 4.0 * source.duration
    return mode_answer(network, mode, [arrival], source, window, OMEGA, conditions), conditions


def zonal(guides: SimpleNamespace):
    return guides.chain([(guides.COAST, [(0.0, 40.0), (30.0, 40.0)])])


def draw(guides: SimpleNamespace, network, priors: Priors, seed: int = 1, **more) -> Members:
    source = more.pop("source", gaussian_burst(6.0 * DAY))
    answer, conditions = answered(guides, network, source, **more)
    given = sensitivity(network, answer, 0, source, OMEGA, priors, conditions)
    return members(given, priors, normal_sample(4096, len(INPUTS), seed))


# Along the path


def test_correlated_sum_is_the_double_sum_over_all_pairs() -> None:
    rng = np.random.default_rng(5)
    size, length = rng.uniform(0.1, 2.0, 60), rng.uniform(5e3, 40e3, 60)
    place = np.cumsum(length) - 0.5 * length
    for scale in (1e3, 80e3, 500e3, 1e8):
        kernel = np.exp(-np.abs(place[:, None] - place) / scale)
        assert_allclose(correlated_sum(size, length, scale) ** 2, size @ kernel @ size, rtol=1e-12)


# DERIVED: for σ and c uniform over a length S the double integral of exp(−|s − s′|/L) is
# 2L S (1 − (L/S)(1 − e^(−S/L))). Steps of 17 km in 500 km leave 1e-3 of it.
@pytest.mark.parametrize("scale", [500e3, 2000e3, 1e9])
def test_uniform_path_has_the_variance_of_the_double_integral(
    guides: SimpleNamespace, scale: float
) -> None:
    network = zonal(guides)
    whole = network.length.sum()
    share = scale / whole
    expected = 0.06 * np.sqrt(2.0 * share * (1.0 - share * -np.expm1(-1.0 / share)))
    mode, steps = guides.uniform(network, C), np.arange(network.tail.size)
    found = relative_delays(network, mode, steps, Priors(stratification=Prior(0.06, scale)))
    assert_allclose(found["stratification"], expected, rtol=2e-3)
    assert found["depth"] == found["mean flow"] == found["coast length"] == 0.0


def test_each_mode_and_guide_has_the_errors_it_can_have(guides: SimpleNamespace) -> None:
    far = 1e12  # m: everything correlated, so that a relative delay is the error itself
    priors = Priors(Prior(0.06, far), Prior(0.1, far), Prior(0.25, far), Prior(0.05, far))
    coast, equator = zonal(guides), guides.chain([(guides.EQUATOR, [(0.0, 0.0), (30.0, 0.0)])])
    steps = np.arange(coast.tail.size)
    first = relative_delays(coast, guides.uniform(coast, C), steps, priors)
    assert_allclose(list(first.values()), [0.06, 0.1, 0.1, 0.05], rtol=1e-6)
    fast = relative_delays(coast, guides.uniform(coast, 200.0, 0), steps, priors)
    assert_allclose(list(fast.values()), [0.0, 0.05, 0.25 / 200.0, 0.05], rtol=1e-6)
    along = np.arange(equator.tail.size)
    open_sea = relative_delays(equator, guides.uniform(equator, C), along, priors)
    assert_allclose(list(open_sea.values()), [0.06, 0.023, 0.1, 0.0], rtol=1e-6)


# DERIVED: 2.23826 and 2.35389 m/s over 4000 and 5000 m, exponential stratification (Bessel cross
# products of Gill 1982, section 6.11).
def test_depth_exponent_of_the_open_ocean_is_that_of_exponential_stratification() -> None:
    expected = np.log(2.35389 / 2.23826) / np.log(5000.0 / 4000.0)
    assert_allclose(depth_exponent(1, np.array([False])), expected, atol=0.005)


# What a member is made of


def test_without_errors_every_member_is_the_computed_answer(guides: SimpleNamespace) -> None:
    source = gaussian_burst(6.0 * DAY)
    network = guides.chain([(guides.COAST, [(0.0, 12.0), (0.0, 45.0)])])
    answer, conditions = answered(guides, network, source)
    given = sensitivity(network, answer, 0, source, OMEGA, Priors(), conditions)
    found = members(given, Priors(), normal_sample(8, len(INPUTS), 0))
    times = answer.times[0]
    peak = np.abs(answer.waveforms.sea_level[0]).max()
    for values, expected in (
        (found.front, answer.arrivals[0].routes[0].time), (found.half_height, times.half_height),
        (found.peak, times.peak),
    ):  # fmt: skip
        assert np.ptp(values) < 1.0
        assert_allclose(values[0], expected, atol=0.01 * DAY)
    # the highest of values 1/32 duration apart is up to ½(6/64)² = 0.4 % below the peak
    assert_allclose(np.exp(found.log_ratio), peak, rtol=5e-3)
    assert_allclose(found.log_height, found.log_ratio)


def test_percentiles_of_the_front_are_those_of_the_lognormal_delay(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    found = draw(guides, network, Priors(stratification=Prior(0.06, 1e12)))
    whole = network.length.sum() / C
    expected = whole * np.exp(0.06 * norm.ppf([0.1, 0.5, 0.9]))
    assert_allclose(np.quantile(found.front, [0.1, 0.5, 0.9]), expected, rtol=3e-4)


def test_start_and_place_of_the_source_move_everything_alike(guides: SimpleNamespace) -> None:
    priors = Priors(source_time=0.5 * DAY, source_position=100e3)
    found = draw(guides, zonal(guides), priors)
    for values in (found.front, found.half_height, found.peak, found.fall):
        assert_allclose(np.std(values), np.hypot(0.5 * DAY, 100e3 / C), rtol=3e-3)
    assert_allclose(np.ptp(found.peak - found.front), 0.0, atol=1.0)
    assert_allclose(np.ptp(found.log_ratio), 0.0, atol=1e-6)


# A Gaussian burst of duration D peaks at D/2 and is above half for 2√(2 ln 2) D/6.
def test_a_longer_event_peaks_later_and_stays_up_longer(guides: SimpleNamespace) -> None:
    duration = 6.0 * DAY
    found = draw(guides, zonal(guides), Priors(source_duration=0.2))
    factor = np.exp(0.2 * norm.ppf([0.1, 0.9]))
    width = 2.0 * np.sqrt(2.0 * np.log(2.0)) / 6.0 * duration
    peak = np.quantile(found.peak - found.front, [0.1, 0.9])
    assert_allclose(peak, 0.5 * duration * factor, rtol=3e-3)
    assert_allclose(
        np.quantile(found.fall - found.half_height, [0.1, 0.9]), width * factor, rtol=3e-3
    )
    assert_allclose(np.ptp(found.front), 0.0, atol=1e-6)


def test_friction_takes_more_or_less_of_its_own_nepers(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    decay = 1.0 / network.length.sum()  # one neper on the whole way
    found = draw(guides, network, Priors(friction=0.5), conditions=Conditions(friction=decay))
    expected = -np.exp(0.5 * norm.ppf([0.9, 0.5, 0.1]))
    assert_allclose(np.quantile(found.log_ratio, [0.1, 0.5, 0.9]), expected, rtol=5e-3)
    assert_allclose(np.ptp(found.peak), 0.0, atol=1.0)


def test_coastal_value_counts_at_a_coast_of_sections_only(guides: SimpleNamespace) -> None:
    coast = zonal(guides)
    flat = guides.uniform(coast, C)
    sections = replace(flat, detuning=np.full(coast.size, 0.2))
    equator = guides.chain([(guides.EQUATOR, [(0.0, 0.0), (30.0, 0.0)])])
    on_equator = replace(guides.uniform(equator, C), detuning=np.full(equator.size, 0.2))
    priors = Priors(coastal_value=0.4)
    found = draw(guides, coast, priors, mode=sections)
    assert_allclose(np.std(found.log_ratio), 0.4, rtol=2e-3)
    assert_allclose(np.ptp(found.peak), 0.0, atol=1e-6)
    for network, mode in ((coast, flat), (equator, on_equator)):
        assert_allclose(np.ptp(draw(guides, network, priors, mode=mode).log_ratio), 0.0, atol=1e-9)


def test_height_of_the_source_counts_for_height_alone(guides: SimpleNamespace) -> None:
    found = draw(guides, zonal(guides), Priors(source_height=0.3))
    assert_allclose(np.std(found.log_height), 0.3, rtol=2e-3)
    assert_allclose(np.ptp(found.log_ratio), 0.0, atol=1e-9)


def test_inside_a_box_the_disturbance_is_evenly_anywhere(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    source = gaussian_burst(6.0 * DAY)
    mode = guides.uniform(network, C)
    beyond = np.arange(40, network.tail.size)
    arrival = guides.arrival(network, mode, [beyond], OMEGA)
    nodes = np.arange(41)  # the route starts at the last of them
    zero = np.zeros(nodes.size)
    box = Ties(nodes, zero, zero, network.lon[nodes], network.lat[nodes], zero, zero + 1.0,
               zero > 0.0, 0.0, 0.0)  # fmt: skip
    route = replace(arrival.routes[0], start=40)
    arrival = replace(arrival, source=box, routes=[route])
    answer = mode_answer(network, mode, [arrival], source, 60.0 * DAY, OMEGA, Conditions())
    given = sensitivity(network, answer, 0, source, OMEGA, Priors())
    through = network.length[:40].sum() / C
    assert_allclose(given.box, through, rtol=1e-12)
    found = members(given, Priors(), normal_sample(4096, len(INPUTS), 2))
    later = (found.peak - found.front - 3.0 * DAY) / through
    assert_allclose(np.quantile(later, [0.1, 0.5, 0.9]), [0.1, 0.5, 0.9], atol=2e-3)
    assert_allclose(np.ptp(found.front), 0.0, atol=1e-6)


def test_a_rise_that_lasts_has_a_half_height_and_no_peak(guides: SimpleNamespace) -> None:
    found = draw(guides, zonal(guides), USUAL, source=step_rise(6.0 * DAY))
    assert np.isfinite(found.half_height).all()
    assert np.isnan(found.peak).all()
    assert np.isnan(found.fall).all()


# The whole against exact recomputation


def recomputed(
    guides: SimpleNamespace, network, slowness: np.ndarray, source: SourceFunction, window: float
) -> tuple[float, float, float, float]:
    """Front, half-height, peak (s) and ln height of a member computed anew."""
    mode = replace(guides.uniform(network, C), speed=C / slowness)
    path = paths_of_arrival(guides.arrival(network, mode, [np.arange(network.tail.size)], OMEGA))
    spectrum = source_spectrum(source, source.finest, window + 4.0 * source.duration)
    transfer = route_transfers(network, mode, path, spectrum.omega)[0]
    level = synthesise(spectrum, [transfer.response])[0]
    time = np.arange(level.size) * spectrum.step
    inside = time < window
    times = arrival_times(time[inside], level[inside])
    height = float(np.log(np.abs(level).max()))
    return transfer.front_time, times.half_height, times.peak, height


def member_of(guides: SimpleNamespace, network, later: float, longer: float):
    source = gaussian_burst(10.0 * DAY)
    answer, conditions = answered(guides, network, source)
    priors = Priors(stratification=Prior(0.2, 1e12), source_duration=0.2)
    given = sensitivity(network, answer, 0, source, OMEGA, priors, conditions)
    sample = np.zeros((1, len(INPUTS)))
    sample[0, INPUTS.index("stratification")] = np.log(later) / given.delay["stratification"]
    sample[0, INPUTS.index("source duration")] = np.log(longer) / 0.2
    return members(given, priors, sample)


# Uniform errors: exact on coasts by the scaling of κ and Γ, poleward through the critical latitude
# of 10 days (1.5°) and of 60 days (9.2°) and equatorward, but for the floor of |f| at 2 L_e.
@pytest.mark.parametrize("ends", [(12.0, 45.0), (45.0, 12.0), (-12.0, -45.0)])
@pytest.mark.parametrize("later", [0.85, 1.2])
def test_a_slower_coast_is_a_stretched_response(
    guides: SimpleNamespace, ends: tuple[float, float], later: float
) -> None:
    network = guides.chain([(guides.COAST, [(0.0, ends[0]), (0.0, ends[1])])])
    longer = 1.2
    source = lasting_longer(gaussian_burst(10.0 * DAY), longer)
    slowness = np.full(network.size, later)
    exact = recomputed(guides, network, slowness, source, 60.0 * DAY)
    found = member_of(guides, network, later, longer)
    assert_allclose(found.front, exact[0], rtol=1e-9)
    assert_allclose(found.half_height, exact[1], atol=0.02 * DAY)
    assert_allclose(found.peak, exact[2], atol=0.02 * DAY)
    assert_allclose(found.log_ratio, exact[3], atol=0.01)


# Errors that vary along a way over an equator, a junction and a coast: a member takes their mean.
# The spread of half-height there is 5 % of 80 days, 4 days; what the member misses is an eighth
# (a tenth of the Kelvin wave alone; mixed waves do not stretch with the slowness).
@pytest.mark.parametrize("seed", [1, 2, 3, 4])
def test_errors_that_vary_along_the_way_count_by_their_mean(
    guides: SimpleNamespace, seed: int
) -> None:
    network = guides.chain([
        (guides.COAST, [(0.0, 10.0), (0.0, 0.0)]),
        (guides.EQUATOR, [(0.0, 0.0), (60.0, 0.0)]),
        (guides.COAST, [(60.0, 0.0), (60.0, 35.0)]),
    ])
    rng = np.random.default_rng(seed)
    place = np.concatenate([[0.0], np.cumsum(network.length)])
    knots = np.arange(0.0, place[-1] + 2e6, 1e6)
    slowness = np.exp(0.1 * np.interp(place, knots, rng.normal(size=knots.size)))
    source = gaussian_burst(10.0 * DAY)
    exact = recomputed(guides, network, slowness, source, 120.0 * DAY)
    base = recomputed(guides, network, np.ones(network.size), source, 120.0 * DAY)
    found = member_of(guides, network, exact[0] / base[0], 1.0)
    assert_allclose(found.front, exact[0], rtol=1e-9)
    assert_allclose(found.half_height, exact[1], atol=0.5 * DAY)
    assert_allclose(found.peak, exact[2], atol=0.5 * DAY)
    assert_allclose(found.log_ratio, exact[3], atol=0.15)


# Windows


def test_window_holds_both_moments_in_the_share_that_is_asked_for() -> None:
    x = normal_sample(16384, 2, 3)
    first, last = 10.0 + 2.0 * x[:, 0], 14.0 + 2.0 * x[:, 0] + x[:, 1]
    for chance in (0.5, 0.8, 0.95):
        start, stop = chance_window(first, last, chance)
        assert np.mean((first >= start) & (last <= stop)) == pytest.approx(chance, abs=2e-3)
        # as much is lost at the beginning as at the end
        assert np.mean(first < start) == pytest.approx(np.mean(last > stop), abs=2e-3)


def test_window_of_one_moment_is_between_its_quantiles() -> None:
    x = normal_sample(16384, 1, 4)[:, 0]
    assert_allclose(chance_window(x, x, 0.8), norm.ppf([0.1, 0.9]), atol=5e-3)
