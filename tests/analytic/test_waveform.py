"""Waveforms: shifted sources, causality, sums of routes, and the times read off them."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad
from scipy.signal import hilbert

from waveguide.constants import EARTH_RADIUS, SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.network.graph import Network
from waveguide.propagation.dispersion import amplification_rate, dispersive_group_speed
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.sources import (
    SourceFunction,
    boxcar_burst,
    gaussian_burst,
    series_source,
    step_rise,
    time_step,
)
from waveguide.propagation.transfer import route_transfers
from waveguide.propagation.waveform import (
    ModeWaveforms,
    arrival_times,
    default_window,
    mode_shares,
    mode_waveforms,
)

C = 2.5
DAY = SECONDS_PER_DAY


def zonal(guides: SimpleNamespace, east: float = 40.0) -> Network:
    return guides.chain([(guides.COAST, [(0.0, -35.0), (east, -35.0)])])


def run(
    guides: SimpleNamespace, network: Network, source: SourceFunction, window: float = 200.0,
    ways: list[np.ndarray] | None = None, mode: ModeAtNodes | None = None,
) -> ModeWaveforms:  # fmt: skip
    mode = mode or guides.uniform(network, C)
    ways = ways or [np.arange(network.tail.size)]
    arrival = guides.arrival(network, mode, ways)
    return mode_waveforms(network, mode, [arrival], source, window * DAY)


@pytest.mark.parametrize("shape", [gaussian_burst, boxcar_burst, step_rise])
def test_without_dispersion_the_source_arrives_unchanged(
    guides: SimpleNamespace, shape: type[SourceFunction]
) -> None:
    source = shape(10.0 * DAY)
    network = zonal(guides)
    found = run(guides, network, source)
    shifted = source.values(found.time - network.length.sum() / C)
    assert_allclose(found.sea_level[0], shifted, atol=1e-6)
    assert_allclose(found.source, source.values(found.time))
    assert found.wrapped < 1e-6


def test_waveforms_are_linear_in_the_source(guides: SimpleNamespace) -> None:
    rng = np.random.default_rng(4)
    network = guides.chain([(guides.COAST, [(0.0, 8.0), (0.0, 40.0)])])
    time = np.arange(60) * 0.5 * DAY
    first, second = rng.normal(size=(2, 60)) * np.hanning(60)
    one, two, both = (
        run(guides, network, series_source(time, values)).sea_level
        for values in (first, second, 2.0 * first - 0.5 * second)
    )
    # frequencies below 1e-7 of the largest are left out of each by itself
    assert_allclose(both, 2.0 * one - 0.5 * two, atol=1e-6)


@pytest.mark.parametrize("ends", [(15.0, 60.0), (-60.0, -18.0)])
def test_nothing_arrives_before_the_front(
    guides: SimpleNamespace, ends: tuple[float, float]
) -> None:
    network = guides.chain([(guides.COAST, [(0.0, ends[0]), (0.0, ends[1])])])
    source = gaussian_burst(10.0 * DAY)
    # Long Rossby waves leave for years; a long window keeps what of it wraps below 1e-6.
    found = run(guides, network, source, 3200.0)
    front = network.length.sum() / C
    early = found.time < front + source.begin
    assert early.sum() > 50
    level = np.abs(found.sea_level[0])
    # the burst is below 2e-8 before its beginning, and so is the band limit
    assert level[early].max() < 1e-6 * level.max()
    assert level[~early].max() == level.max() > 0.1


def test_slow_burst_arrives_with_the_group_speed(guides: SimpleNamespace) -> None:
    # critical period at 20°: 135 days; a packet of 60 days is well above it and slower than c
    network = guides.chain([(guides.COAST, [(0.0, 20.0), (0.0, 45.0)])], 0.1)
    omega = 2.0 * np.pi / (60.0 * DAY)
    time = np.arange(0.0, 1200.0, 0.5) * DAY
    packet = np.exp(-0.5 * ((time - 600.0 * DAY) / (120.0 * DAY)) ** 2)
    source = series_source(time, packet * np.cos(omega * (time - 600.0 * DAY)))
    found = run(guides, network, source, 1400.0)
    envelope = np.abs(hilbert(found.sea_level[0]))
    centre = (found.time * envelope**2).sum() / (envelope**2).sum() - 600.0 * DAY

    def slowness(lat: float) -> float:
        return float(1.0 / dispersive_group_speed(omega, amplification_rate(lat, 0.0), C))

    travel = quad(slowness, 20.0, 45.0)[0] * EARTH_RADIUS * np.pi / 180.0
    front = network.length.sum() / C
    assert travel > 1.03 * front  # the tolerance below tells the group from the front
    assert_allclose(centre, travel, rtol=0.01)  # the packet has a width of 1/50 of ω


def test_a_step_becomes_the_steady_response(guides: SimpleNamespace) -> None:
    network = guides.chain([(guides.COAST, [(0.0, 10.0), (0.0, 50.0)])])
    found = run(guides, network, step_rise(10.0 * DAY), 700.0)
    mode = guides.uniform(network, C)
    steady = route_transfers(network, mode, [guides.path(network)], np.zeros(1))[0].response.real
    assert_allclose(found.sea_level[0, -1], steady, rtol=0.02)  # long Rossby waves still leave
    times = arrival_times(found.time, found.sea_level[0], lasting=True)
    assert np.isnan(times.peak)
    assert np.isnan(times.centroid)
    assert 0.0 < times.half_height < 40.0 * DAY


def test_two_routes_add_and_one_within_another_does_not(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    source = gaussian_burst(6.0 * DAY)
    all_steps = np.arange(network.tail.size)
    # the second way leaves at node 50 by a step of its own to the last node
    lon, lat = np.append(network.lon, 20.0), np.append(network.lat, -34.0)
    forked = guides.replace(
        network, lon=lon, lat=lat, line=np.zeros(lon.size, dtype=np.int64),
        equatorial=np.zeros(lon.size, dtype=bool), offshore=np.full(lon.size, 90.0),
        basin=np.zeros(lon.size, dtype=np.int64),
        tail=np.append(network.tail, [50, lon.size - 1]),
        head=np.append(network.head, [lon.size - 1, network.size - 1]),
        kind=np.append(network.kind, [2, 2]), length=np.append(network.length, [4e6, 4e6]),
        gap=np.append(network.gap, [-1, -1]), passes=np.append(network.passes, [-1, -1]),
    )  # fmt: skip
    other = np.append(all_steps[:50], [all_steps.size, all_steps.size + 1])
    found = run(guides, forked, source, 200.0, [all_steps, other, all_steps[10:]])
    assert found.added == [[0, 1]]
    assert_allclose(found.sea_level[0], found.by_route[0][0] + found.by_route[0][1])
    delays = [forked.length[steps].sum() / C for steps in (all_steps, other)]
    wanted = sum(source.values(found.time - delay) for delay in delays)
    assert_allclose(found.sea_level[0], wanted, atol=1e-6)


def test_what_wraps_is_what_is_said(guides: SimpleNamespace) -> None:
    # across an ocean by both junctions, the case that rings longest
    network = guides.chain([
        (guides.COAST, [(0.0, 8.0), (0.0, 0.0)]),
        (guides.EQUATOR, [(0.0, 0.0), (50.0, 0.0)]),
        (guides.COAST, [(50.0, 0.0), (50.0, 30.0)]),
    ])  # fmt: skip
    source = gaussian_burst(10.0 * DAY)
    short, long = (run(guides, network, source, window) for window in (150.0, 1500.0))
    same = long.sea_level[:, : short.time.size]
    peak = np.abs(same).max()
    assert short.wrapped < 5e-3
    assert np.abs(short.sea_level - same).max() < 2.0 * max(short.wrapped, 1e-3) * peak


def test_target_without_a_route_stays_at_rest(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    mode = guides.uniform(network, C)
    none = guides.replace(
        guides.arrival(network, mode, [np.arange(3)]), status="no route", routes=[], legs=[]
    )
    found = mode_waveforms(network, mode, [none], gaussian_burst(5.0 * DAY), 60.0 * DAY)
    assert not found.sea_level.any()
    assert found.by_route[0].shape == (0, found.time.size)
    assert np.isnan(arrival_times(found.time, found.sea_level[0])).all()


def test_times_of_a_gaussian() -> None:
    source = gaussian_burst(12.0 * DAY)
    time = np.arange(0.0, 60.0, 0.25) * DAY
    for sign in (1.0, -1.0):
        times = arrival_times(time, sign * source.values(time - 20.1 * DAY))
        assert_allclose(times.peak / DAY, 26.1, atol=2e-3)
        assert_allclose(times.centroid / DAY, 26.1, atol=1e-6)
        half_height = 26.1 - 2.0 * np.sqrt(2.0 * np.log(2.0))
        assert_allclose(times.half_height / DAY, half_height, atol=5e-3)


def test_shapes_of_sources() -> None:
    duration = 8.0 * DAY
    time = np.linspace(-2.0, 3.0, 50001) * duration
    gaussian, boxcar, step = (
        shape(duration).values(time) for shape in (gaussian_burst, boxcar_burst, step_rise)
    )
    spacing = time[1] - time[0]
    assert gaussian.max() == pytest.approx(1.0, abs=1e-9)
    within = (time >= 0.0) & (time <= duration)
    assert gaussian[within].sum() / gaussian.sum() == pytest.approx(0.9973, abs=2e-4)
    assert boxcar.sum() * spacing == pytest.approx(duration, rel=1e-6)
    assert np.interp([0.0, duration], time, boxcar) == pytest.approx([0.5, 0.5], abs=1e-6)
    assert np.interp([0.0, 0.5 * duration, duration], time, step) == pytest.approx(
        [0.00135, 0.5, 0.99865], abs=1e-5
    )
    assert time_step(gaussian_burst(duration)) == 0.25 * DAY
    assert time_step(gaussian_burst(1.0 * DAY)) == DAY / 32.0


def test_series_is_linear_and_ends_in_nothing() -> None:
    source = series_source(np.array([1.0, 2.0, 3.0]) * DAY, np.array([1.0, 3.0, 2.0]))
    when = np.array([0.0, 0.5, 1.5, 3.0, 3.5, 4.0, 9.0]) * DAY
    assert_allclose(source.values(when), [0.0, 0.5, 2.0, 2.0, 1.0, 0.0, 0.0])
    assert source.duration == 2.0 * DAY


@pytest.mark.parametrize(
    ("time", "value", "words"),
    [
        ([0, 1, 2, 4, 5], [1, 1, 1, 1, 1], "numbers 3 and 4"),
        ([0, 1, 2, 3], [1, np.nan, 1, 1], "1 values are missing, the first is number 2"),
        ([0, 1, 1, 2], [1, 1, 1, 1], "does not rise after number 2"),
        ([0, 1], [1, 1], "three or more"),
        ([0, 1, 2], [1, 1], "as many of both"),
    ],
)
def test_series_with_gaps_are_refused(
    time: list[float], value: list[float], words: str
) -> None:
    with pytest.raises(InputError, match=words):
        series_source(np.array(time) * DAY, np.array(value, float))


def test_event_longer_than_the_window_is_refused(guides: SimpleNamespace) -> None:
    with pytest.raises(InputError, match="the event lasts 40 days and the window 30"):
        run(guides, zonal(guides), gaussian_burst(40.0 * DAY), 30.0)


def test_coarse_time_step_is_refused(guides: SimpleNamespace) -> None:
    network = zonal(guides)
    mode = guides.uniform(network, C)
    arrival = guides.arrival(network, mode, [np.arange(network.tail.size)])
    with pytest.raises(InputError, match="24 h does not resolve an event of 2 days"):
        mode_waveforms(network, mode, [arrival], gaussian_burst(2.0 * DAY), 50.0 * DAY, DAY)


@pytest.mark.parametrize(("first", "height"), [(0.0, 0.0), (-400.0, 1.0), (400.0, 1.0)])
def test_a_series_without_signal_in_the_window_is_refused(
    guides: SimpleNamespace, first: float, height: float
) -> None:
    source = series_source(np.arange(first, first + 5.0) * DAY, np.full(5, height))
    with pytest.raises(InputError, match="0 throughout the 200 days"):
        run(guides, zonal(guides), source)


def test_a_window_of_too_many_steps_is_refused(guides: SimpleNamespace) -> None:
    with pytest.raises(InputError, match="window_days of 1562 or less"):
        run(guides, zonal(guides), gaussian_burst(0.5 * DAY), 2000.0)


@pytest.mark.parametrize("duration", [0.0, -1.0, np.nan, np.inf])
def test_burst_of_no_duration_is_refused(duration: float) -> None:
    for shape in (gaussian_burst, boxcar_burst, step_rise):
        with pytest.raises(InputError, match="duration"):
            shape(duration)


def test_shares_of_modes_sum_to_one() -> None:
    assert_allclose(mode_shares([0.1, 0.2, 0.2]), np.array([1.0, 4.0, 4.0]) / 9.0)


def test_default_window_holds_the_latest_front() -> None:
    source = gaussian_burst(10.0 * DAY)
    assert default_window([3.0 * DAY, 100.3 * DAY], source) == 191.0 * DAY
    assert default_window([], source) == 40.0 * DAY
