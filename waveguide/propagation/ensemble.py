"""Arrivals under uncertainty: times and heights of many equally likely members.

No member is computed anew. About the computed answer of one target and mode

- the front comes at T(1 + δ) + t + x/c, with ln(1 + δ) = Σσᵢξᵢ over the errors along the path
  (:mod:`waveguide.propagation.path_errors`; the logarithm keeps an arrival after its cause), t
  the error of the event's time and x that of its place;
- half-height, peak and fall follow the front as in the table of
  :mod:`waveguide.propagation.wave_table`, by δ and by the error of the duration. The disturbance
  may sit anywhere in an event that is a box, evenly: since a route starts where the box ends,
  they come later by up to the time the wave takes through the box;
- the height is that of the table, times exp(−n(e^ξσ − 1)) for the n nepers that friction and
  damping take, times the factors of straits and facing coasts for other widths
  (:mod:`waveguide.propagation.gap_errors`), and at a coast of sections times that of its coastal
  value.

The same ξ serve all targets and modes: what is wrong with the stratification is wrong for all.
Errors of routes other than the headline route are taken to be those of the headline route.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from waveguide.network.attach import Ties
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.answers import ModeAnswer
from waveguide.propagation.gap_errors import GRID, gap_logs
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.path_errors import relative_delays
from waveguide.propagation.priors import HIGHER_MODES, INPUTS, PATH_INPUTS, Priors
from waveguide.propagation.routes import Route
from waveguide.propagation.sources import SourceFunction
from waveguide.propagation.step_response import FATES, STILL, Conditions
from waveguide.propagation.wave_table import WaveTable, wave_table

Array = NDArray[np.float64]

_REACH = 3.5  # standard deviations that a table covers
_ROWS, _COLUMNS = 9, 5  # of a table, by delay and duration
_SMALLEST = 1e-6  # half-width of a table where nothing varies
_IN_THE_BOX = 1e3  # m; nodes as close as this to a box are in it
_HOLE = 150e3  # m; a longer way without a node in the box has left it


@dataclass(frozen=True)
class Sensitivity:
    """How one target's arrival in one mode answers to every input.

    Attributes
    ----------
    front : float
        Travel time of the front (s).
    delay : dict of str to float
        Relative error of the travel time, for each of `PATH_INPUTS`.
    slowness : float
        1/c at the source (s/m).
    box : float
        Time the wave takes through a box of the event, upstream of where the route starts (s).
    table : WaveTable
    nepers : float
        Of amplitude, taken by friction and damping.
    gaps : dict of str to ndarray, shape (7,)
        Change of ln height by straits and facing coasts at `GRID`.
    sections : float
        Size of the error of the coastal value in units of its prior: 0 where the target does not
        lie on a coast whose modes are those of sections.
    """

    front: float
    delay: dict[str, float]
    slowness: float
    box: float
    table: WaveTable
    nepers: float
    gaps: dict[str, Array]
    sections: float


@dataclass(frozen=True)
class Members:
    """Times and heights of all members at one target in one mode, shape (members,) each.

    Attributes
    ----------
    front, half_height, peak, fall : ndarray
        Times from the stated start of the event (s).
    log_ratio : ndarray
        ln of the peak over that of the source, without the error of the source's height.
    log_height : ndarray
        With it.
    """

    front: Array
    half_height: Array
    peak: Array
    fall: Array
    log_ratio: Array
    log_height: Array


def sensitivity(
    network: Network, answer: ModeAnswer, target: int, source: SourceFunction, omega: float,
    priors: Priors, conditions: Conditions = STILL,
) -> Sensitivity:
    """Prepare an ensemble for a target that is reached.

    Parameters
    ----------
    network : Network
    answer : ModeAnswer
    target : int
        Position of the target in the answer; its arrival must have a route.
    source : SourceFunction
    omega : float
        Dominant angular frequency (rad/s).
    priors : Priors
    conditions : Conditions
        Those the answer was computed with.

    Returns
    -------
    Sensitivity
    """
    arrival, waves = answer.arrivals[target], answer.waveforms
    headline, transfers = arrival.routes[0], waves.transfers[target]
    delay = relative_delays(network, answer.mode, headline.steps, priors, conditions)
    spread = float(np.sqrt(sum(share**2 for share in delay.values())))
    table = wave_table(
        [transfers[i] for i in waves.added[target]], transfers[0].front_time, source,
        float(waves.time[1]), float(waves.time[-1]),
        np.expm1(_grid(spread, _ROWS)), np.exp(_grid(priors.source_duration, _COLUMNS)),
    )
    lost = [FATES.index(fate) for fate in ("bottom friction", "interior damping")]
    at = int(np.argmin(np.abs(transfers[0].omega - omega)))
    return Sensitivity(
        transfers[0].front_time, delay, *_source(network, answer.mode, arrival.source, headline),
        table, float(transfers[0].leg_nepers[lost, :, at].sum()),
        gap_logs(network, answer.mode, headline.steps, omega, priors.gap_width),
        _error_of_sections(network, answer.mode, arrival.target, headline),
    )


def members(given: Sensitivity, priors: Priors, sample: Array) -> Members:
    """Times and heights of all members.

    Parameters
    ----------
    given : Sensitivity
    priors : Priors
        Those that `given` was prepared with.
    sample : ndarray, shape (members, inputs)
        Standard normal errors in the order of `INPUTS`; see
        :func:`waveguide.propagation.sampling.normal_sample`.

    Returns
    -------
    Members
    """
    error = dict(zip(INPUTS, sample.T, strict=True))
    later = np.exp(sum(given.delay[name] * error[name] for name in PATH_INPUTS))
    place = priors.source_position * given.slowness * error["source position"]
    start = priors.source_time * error["source time"]
    front = given.front * later + start + place
    longer = np.exp(priors.source_duration * error["source duration"])
    figures = given.table.at(later - 1.0, longer)
    upstream = given.box * ndtr(error["source position"])
    height = figures[:, 3] - given.nepers * np.expm1(priors.friction * error["friction"])
    for name, logs in given.gaps.items():
        height = height + np.interp(error[name], GRID, logs)
    height = height + given.sections * priors.coastal_value * error["coastal value"]
    half_height, peak, fall = (front + upstream)[None, :] + figures[:, :3].T
    stronger = priors.source_height * error["source height"]
    return Members(front, half_height, peak, fall, height, height + stronger)


def chance_window(first: Array, last: Array, chance: float) -> tuple[float, float]:
    """Narrowest symmetric span of time that holds both of two moments with a stated chance.

    Parameters
    ----------
    first, last : ndarray, shape (members,)
        Of each member, for example half-height and peak.
    chance : float
        0 to 1.

    Returns
    -------
    start, stop : float
        The quantile a of `first` and 1 − a of `last`, with the largest a for which `first` is
        not before and `last` not after in the share `chance` of all members.
    """
    early, late = np.sort(first), np.sort(last)[::-1]

    def held(a: float) -> float:
        start, stop = _at_share(early, a), _at_share(late, a)
        return float(np.mean((first >= start) & (last <= stop)))

    low, high = 0.0, 1.0 - chance
    for _ in range(40):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if held(middle) >= chance else (low, middle)
    return _at_share(early, low), _at_share(late, low)


def _at_share(ordered: Array, share: float) -> float:
    return float(ordered[min(int(share * ordered.size), ordered.size - 1)])


def _grid(spread: float, count: int) -> Array:
    """Values over the reach of a table."""
    half = max(_REACH * spread, _SMALLEST)
    return np.linspace(-half, half, count)


def _error_of_sections(
    network: Network, mode: ModeAtNodes, target: Ties, route: Route
) -> float:
    """`Sensitivity.sections`: higher modes are known half as well as the first."""
    node = int(target.node[route.end])
    if not (np.isfinite(network.offshore[node]) and np.isfinite(mode.detuning[node])):
        return 0.0
    return 1.0 if mode.number == 1 else HIGHER_MODES


def _source(
    network: Network, mode: ModeAtNodes, source: Ties, route: Route
) -> tuple[float, float]:
    """Slowness at the start of a route, and the time through the box upstream of it."""
    node = int(source.node[route.start])
    tied = set(source.node[source.distance < _IN_THE_BOX].tolist())
    along = np.flatnonzero(np.isin(network.kind, (StepKind.COAST, StepKind.EQUATOR)))
    into = dict(zip(network.head[along].tolist(), along.tolist(), strict=True))
    slowness = 1.0 / float(mode.speed[node])
    time = within = beyond = 0.0
    tied.discard(node)
    while tied and node in into and beyond < _HOLE:
        step = into[node]
        node = int(network.tail[step])
        beyond += float(network.length[step])
        time += float(network.length[step]) / float(mode.speed[node])
        if node in tied:
            tied.discard(node)
            within, beyond = time, 0.0
    return slowness, within
