"""Sea level at a target as a function of time, and the times read off it.

With the source's spectrum S(ω) and the sum of the transfer functions of the independent routes,

    η(t) = ∫ S(ω) Σ G(ω) exp(−iωt) dω,

by a discrete Fourier transform. (NumPy's transform of real series has exp(+iωt), so G enters as
its complex conjugate.) G is computed where |S| exceeds 1e-7 of its largest value.

A discrete transform is periodic: what outlasts the period would come back at its beginning. So
the period is longer than the window by half of it or by four durations, whichever is more, and is
doubled (at most twice) until sea level late in it, which is what comes back, is less than 5e-3 of
the peak; `ModeWaveforms.wrapped` says what is left. Dispersive coasts leave nothing there.
Junctions do, as they ring at the frequencies where a Rossby wave ceases to propagate and its
group speed is nil; so do mouths of straits close to the equator, which answer slowly. A step that
lasts is given as a boxcar over half of a period of twice the length, and the other half lets it
die away.

Times, all from the start of the event (not from its maximum):

- front: ∫ds/c of the fastest route, the earliest energy of a signal that sets in at the start;
- half-height: when sea level first reaches half of its peak;
- peak: when it is farthest from zero (the vertex of the parabola through three values);
- centroid: ∫tη² dt/∫η² dt over the window.

A burst of duration D peaks D/2 after the start at the source itself, so compare times at two
targets, or subtract D/2, to find a travel time. A step has neither peak nor centroid.

The front is told along the guide. Round a junction sea level may rise earlier: the equatorial wave
is as wide as its radius and cuts the corner, by about T_e = 1/√(βc) (1.5 days for 2.5 m/s) where
the coasts are meridional. A coast that slants away, so that the guide doubles back on itself, is
left at once for the equator, or reached from it: north-east Brazil leans 57°, and from Natal to
20° W on the equator a burst of 1.5 days takes 8 days in a shallow-water integration where the
guide takes 18 and the straight way east 7.8 (tests/oracle/test_oracle_atlantic.py).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.fft import irfft, rfft, rfftfreq  # as SciPy's, which take longer to import
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.network.graph import Network
from waveguide.propagation.arrivals import Arrival
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.sources import SourceFunction, require_signal, time_step
from waveguide.propagation.step_response import STILL, Conditions
from waveguide.propagation.transfer import (
    Path,
    RouteTransfer,
    independent_paths,
    paths_of_arrival,
    route_transfers,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_FAINTEST = 1e-7  # of the spectrum, below which frequencies are left out
_WRAPS = 5e-3  # of the peak, what may come back at the beginning of a period
_MOST_DOUBLINGS = 2
_MOST_STEPS = 100_000  # of a window


class ArrivalTimes(NamedTuple):
    """Times read off a waveform (s from the start of the event), NaN where there is none.

    Attributes
    ----------
    half_height, peak, centroid : float
    """

    half_height: float
    peak: float
    centroid: float


@dataclass(frozen=True)
class ModeWaveforms:
    """Waveforms of one mode at all targets.

    Attributes
    ----------
    time : ndarray, shape (nt,)
        From the start of the event (s).
    source : ndarray, shape (nt,)
        Sea level at the source.
    sea_level : ndarray, shape (targets, nt)
        Sum over the independent routes, zero where there is no route; in the unit of the source.
    by_route : list of ndarray, shape (routes, nt)
        For every target, each route of the arrival by itself.
    added : list of list of int
        For every target, the routes that are in the sum.
    transfers : list of list of RouteTransfer
        For every target and route, at `omega`, each as one leg.
    omega, power : ndarray, shape (nω,)
        Frequencies of the source (rad/s) and its energy spectrum |S|², with sum 1.
    wrapped : float
        Largest sea level late in the period, relative to the peak at the same target.
    """

    time: Array
    source: Array
    sea_level: Array
    by_route: list[Array]
    added: list[list[int]]
    transfers: list[list[RouteTransfer]]
    omega: Array
    power: Array
    wrapped: float


class Spectrum(NamedTuple):
    """A source on a periodic time axis.

    Attributes
    ----------
    step : float
        Time step (s).
    times : int
        Number of time steps in a period.
    omega : ndarray, shape (nω,)
        Frequencies that matter (rad/s).
    row : ndarray of int, shape (nω,)
        Their places among all.
    amplitude : ndarray of complex, shape (nω,)
        NumPy's transform of the source there.
    """

    step: float
    times: int
    omega: Array
    row: NDArray[np.int64]
    amplitude: ComplexArray


def mode_waveforms(
    network: Network, mode: ModeAtNodes, arrivals: Sequence[Arrival], source: SourceFunction,
    window: float, step: float | None = None, conditions: Conditions = STILL,
) -> ModeWaveforms:
    """Waveforms of one mode at all targets.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    arrivals : sequence of Arrival
        One for each target.
    source : SourceFunction
    window : float
        How long after the start of the event the waveforms go on (s).
    step : float, optional
        Time step (s); that of `time_step` unless given.
    conditions : Conditions

    Returns
    -------
    ModeWaveforms

    Raises
    ------
    InputError
        If the event does not fit the window, or the time step does not suit both.
    """
    step = time_step(source) if step is None else step
    _require_window(source, window, step)
    paths = [paths_of_arrival(arrival) for arrival in arrivals]
    together = [_in_one_leg(path) for target in paths for path in target]
    each: list[RouteTransfer] = []
    added = [independent_paths(target) for target in paths]
    shown = np.arange(int(window / step) + 1)
    for doubling in range(_MOST_DOUBLINGS + 1):
        spectrum = source_spectrum(source, step, _first_period(source, window) * 2.0**doubling)
        each = _at_frequencies(network, mode, together, spectrum.omega, conditions, each)
        found = iter(each)
        transfers = [[next(found) for _ in target] for target in paths]
        whole = [synthesise(spectrum, [t.response for t in target]) for target in transfers]
        sums = np.array([waves[rows].sum(axis=0) for waves, rows in zip(whole, added, strict=True)])
        wrapped = _late_in_period(sums, shown)
        if wrapped <= _WRAPS:
            break
    power = np.abs(spectrum.amplitude) ** 2
    time = np.asarray(shown * step, dtype=np.float64)
    return ModeWaveforms(
        time, source.values(time), sums[:, shown],
        [waves[:, shown] for waves in whole], added, transfers,
        spectrum.omega, power / power.sum(), wrapped,
    )


def source_spectrum(source: SourceFunction, step: float, period: float) -> Spectrum:
    """Spectrum of a source at the frequencies that matter.

    Parameters
    ----------
    source : SourceFunction
    step, period : float
        s; the period is made a little longer where that suits the transform.

    Returns
    -------
    Spectrum
    """
    count = _fast_length(int(np.ceil(period / step)))
    time = np.asarray(np.arange(count) * step, dtype=np.float64)
    before = time >= count * step + source.begin
    time = np.where(before, time - count * step, time)
    values = source.values(time)
    if source.lasting:
        values = values - source.values(time - 0.5 * count * step)
    amplitude = rfft(values)
    row = np.nonzero(np.abs(amplitude) > _FAINTEST * np.abs(amplitude).max())[0]
    omega = np.asarray(2.0 * np.pi * rfftfreq(count, step), dtype=np.float64)
    return Spectrum(step, count, omega[row], row, amplitude[row])


def _fast_length(least: int) -> int:
    """The smallest length from `least` whose transform is fast: without primes above 5."""
    length, rest = least, 0
    while rest != 1:
        rest = length
        for prime in (2, 3, 5):
            while rest % prime == 0:
                rest //= prime
        length += 1
    return length - 1


def synthesise(spectrum: Spectrum, responses: Sequence[ComplexArray]) -> Array:
    """Sea level over one period for each of several transfer functions.

    Parameters
    ----------
    spectrum : Spectrum
    responses : sequence of ndarray of complex, shape (nω,)

    Returns
    -------
    ndarray, shape (len(responses), times)
        The last values of a period are the times just before the start of the event.
    """
    whole = np.zeros((len(responses), spectrum.times // 2 + 1), complex)
    for row, response in enumerate(responses):
        whole[row, spectrum.row] = spectrum.amplitude * np.conj(response)
    return np.asarray(irfft(whole, spectrum.times, axis=-1))


def arrival_times(time: Array, sea_level: Array, lasting: bool = False) -> ArrivalTimes:
    """Half-height, peak and centroid of a waveform, as the module defines them.

    Parameters
    ----------
    time : ndarray, shape (nt,)
        From the start of the event (s), evenly spaced.
    sea_level : ndarray, shape (nt,)
    lasting : bool
        Whether the source stays up: then there is a half-height time only.

    Returns
    -------
    ArrivalTimes
    """
    top = int(np.argmax(np.abs(sea_level)))
    height = sea_level * np.sign(sea_level[top])
    if not height[top] > 0.0:
        return ArrivalTimes(np.nan, np.nan, np.nan)
    half_height = _first_reach(time, height, 0.5 * height[top])
    if lasting:
        return ArrivalTimes(half_height, np.nan, np.nan)
    centroid = float((time * height**2).sum() / (height**2).sum())
    return ArrivalTimes(half_height, _vertex(time, height, top), centroid)


def default_window(front_times: Sequence[float], source: SourceFunction) -> float:
    """Window that holds the waveforms of all routes: 1.5 times the latest front and 4 durations.

    Parameters
    ----------
    front_times : sequence of float
        Of all routes (s).
    source : SourceFunction

    Returns
    -------
    float
        Whole days (s).
    """
    seconds = 1.5 * max(front_times, default=0.0) + 4.0 * source.duration
    return float(np.ceil(seconds / SECONDS_PER_DAY) * SECONDS_PER_DAY)


def mode_shares(coastal_value: ArrayLike) -> Array:
    """Shares of modes in the sea level that wind raises at a source, F²/ΣF².

    Under a wind stress τ that lasts longer than a wave takes to leave the fetch X, mode n rises by
    F_n² τX/(ρg). So modes weighted by F_n² add up to the sea level at the source.

    Parameters
    ----------
    coastal_value : array_like, shape (modes,)
        F(0,0) of the modes at the source (m^-1/2).

    Returns
    -------
    ndarray, shape (modes,)
        With sum 1.

    References
    ----------
    Gill & Schumann (1974), J. Phys. Oceanogr. 4, 83.
    """
    square = np.asarray(coastal_value, float) ** 2
    return np.asarray(square / square.sum())


def _in_one_leg(path: Path) -> Path:
    """A path of which only the whole is wanted."""
    return replace(path, leg_ends=path.leg_ends[-1:])


def _at_frequencies(
    network: Network, mode: ModeAtNodes, paths: Sequence[Path], omega: Array,
    conditions: Conditions, known: list[RouteTransfer],
) -> list[RouteTransfer]:
    """Transfer functions of paths, given those at some frequencies.

    A period of twice the length has its frequencies twice as close: every other one is known.
    """
    if not known:
        return route_transfers(network, mode, paths, omega, conditions)
    new = omega[~np.isin(omega, known[0].omega)]
    added = route_transfers(network, mode, paths, new, conditions)
    frequencies = np.append(known[0].omega, new)
    order = np.argsort(frequencies)
    rows = order[np.searchsorted(frequencies, omega, sorter=order)]
    return [one.beside(other).at(rows) for one, other in zip(known, added, strict=True)]


def _require_window(source: SourceFunction, window: float, step: float) -> None:
    days = source.duration / SECONDS_PER_DAY
    if source.duration > window:
        raise InputError(
            f"duration: the event lasts {days:g} days and the window {window / SECONDS_PER_DAY:g}; "
            "make the window longer than the event"
        )
    if step > source.finest * (1.0 + 1e-9):
        raise InputError(
            f"step: {step / 3600.0:g} h does not resolve an event of {days:g} days; "
            f"take {source.finest / 3600.0:g} h or less"
        )
    if window > _MOST_STEPS * step:
        raise InputError(
            f"window: {window / SECONDS_PER_DAY:.6g} days in the steps of {step / 3600.0:.3g} h "
            f"that an event of {days:g} days asks for are more than {_MOST_STEPS} values; state a "
            f"window_days of {_MOST_STEPS * step / SECONDS_PER_DAY:.4g} or less, or a longer event"
        )
    require_signal(source, window, step)


def _first_period(source: SourceFunction, window: float) -> float:
    """Period to begin with (s)."""
    if source.lasting:
        return 2.0 * (window + 2.0 * source.duration)
    return window + max(0.5 * window, 4.0 * source.duration)


def _late_in_period(sums: Array, shown: NDArray[np.int64]) -> float:
    """Largest sea level late in the period relative to the peak at the same target.

    Late is from 70 to 85 % of the way from the end of the window to that of the period.
    """
    peak = np.abs(sums[:, shown]).max(axis=1, initial=0.0)
    padding = sums.shape[1] - shown.size
    late = slice(shown.size + int(0.7 * padding), shown.size + int(0.85 * padding))
    end = np.abs(sums[:, late]).max(axis=1, initial=0.0)
    return float(np.max(end[peak > 0.0] / peak[peak > 0.0], initial=0.0))


def _first_reach(time: Array, height: Array, level: float) -> float:
    """First time that a level is reached, linear between values."""
    at = int(np.argmax(height >= level))
    if at == 0:
        return float(time[0])
    share = (level - height[at - 1]) / (height[at] - height[at - 1])
    return float(time[at - 1] + share * (time[at] - time[at - 1]))


def _vertex(time: Array, height: Array, top: int) -> float:
    """Time of the maximum of the parabola through the highest value and its neighbours."""
    if not 0 < top < time.size - 1:
        return float(time[top])
    left, middle, right = height[top - 1 : top + 2]
    shift = 0.5 * (left - right) / (left - 2.0 * middle + right)
    return float(time[top] + shift * (time[1] - time[0]))
