"""Sea level that the wind drives at all nodes of a guide at once.

Between junctions a guide is a chain of steps with one way in and one way out. What the wind does
on a chain leaves at its end as one series, whatever lies downstream; so the response where a
chain begins is the sum of the series of the chains upstream, each with the losses and the delay
of its strongest way, and along the chain the wave is followed by its characteristic. The sum is
that of :mod:`waveguide.forcing.influence`, done once for each chain instead of once for each step
and node.

The series of a chain is interpolated once more on its way than a step's own stress: signals of a
period T lose up to (πΔ/T)²/2 of their amplitude, 5 % at ten days of daily values.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.forcing.characteristics import add_delayed, held_on, taken_back
from waveguide.forcing.influence import Inflow, search_upstream, step_increment
from waveguide.forcing.projection import Forcing
from waveguide.network.graph import Network
from waveguide.propagation.losses import StepPhysics
from waveguide.propagation.modes import ModeAtNodes

Array = NDArray[np.float64]
Index = NDArray[np.int64]

FAINTEST = 0.01
"""Share of amplitude below which a way is not followed further upstream."""


@dataclass(frozen=True)
class Chains:
    """Runs of steps between junctions.

    Attributes
    ----------
    step : ndarray of int, shape (m,)
        All usable steps, chain by chain, in the order of travel.
    first : ndarray of int, shape (k + 1,)
        Where each chain begins in `step`.
    tail, head : ndarray of int, shape (k,)
        Nodes a chain leads from and to.
    time, loss : ndarray, shape (k,)
        Of the whole chain (s; nepers).
    """

    step: Index
    first: Index
    tail: Index
    head: Index
    time: Array
    loss: Array


def chains_of(network: Network, physics: StepPhysics) -> Chains:
    """Cut a network into chains.

    Parameters
    ----------
    network : Network
    physics : StepPhysics

    Returns
    -------
    Chains
        A ring without any junction is cut at one of its nodes.
    """
    usable = np.nonzero(np.isfinite(physics.time) & np.isfinite(physics.loss))[0]
    into = np.bincount(network.head[usable], minlength=network.size)
    out = np.bincount(network.tail[usable], minlength=network.size)
    through = (into == 1) & (out == 1)
    onward = np.full(network.size, -1, dtype=np.int64)
    onward[network.tail[usable]] = usable  # the one step where there is one
    runs: list[list[int]] = []
    done = np.zeros(network.tail.size, dtype=bool)
    starts = usable[~through[network.tail[usable]]]
    for start in [*starts.tolist(), *usable.tolist()]:  # the second part finds closed rings
        if done[start]:
            continue
        run, step = [], start
        while not done[step]:
            done[step] = True
            run.append(step)
            node = int(network.head[step])
            if not through[node]:
                break
            step = int(onward[node])
        runs.append(run)
    step = np.array([s for run in runs for s in run], dtype=np.int64)
    first = np.cumsum([0, *(len(run) for run in runs)])
    return Chains(
        step, first, network.tail[step[first[:-1]]], network.head[step[first[1:] - 1]],
        np.add.reduceat(physics.time[step], first[:-1]),
        np.add.reduceat(physics.loss[step], first[:-1]),
    )


def nodes_response(
    network: Network, mode: ModeAtNodes, physics: StepPhysics, forcing: Forcing,
    nodes: NDArray[np.bool_], longest: float,
) -> tuple[Index, NDArray[np.float32]]:
    """Sea level at many nodes.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    physics : StepPhysics
    forcing : Forcing
        Of the steps that have wind; on all others there is none.
    nodes : ndarray of bool, shape (n,)
        Where sea level is wanted.
    longest : float
        Delay beyond which the wind is forgotten (s).

    Returns
    -------
    node : ndarray of int, shape (k,)
        Rising; nodes that nothing leads to are left out.
    sea_level : ndarray of float32, shape (k, nt)
        m.
    """
    chains = chains_of(network, physics)
    increment = step_increment(network, mode, physics)
    inflow = Inflow.of(chains.tail, chains.head, chains.time, chains.loss, chains.time)
    outputs = [_leaving(physics, forcing, increment, chains, k) for k in range(chains.tail.size)]
    wanted = np.maximum.reduceat(nodes[network.head[chains.step]], chains.first[:-1])
    found: dict[int, Array] = {}
    for entry in np.unique(chains.tail[wanted]).tolist():
        entering = _entering(inflow, outputs, entry, forcing, longest)
        found[entry] = entering
        for k in np.nonzero(wanted & (chains.tail == entry))[0].tolist():
            run = chains.step[chains.first[k] : chains.first[k + 1]]
            levels = _along(physics, forcing, increment, run, entering)
            found.update(zip(network.head[run[:-1]].tolist(), levels, strict=False))
    # The end of a chain is a junction: there all that comes in adds up.
    for node in np.setdiff1d(chains.head[wanted], chains.tail[wanted]).tolist():
        found[node] = _entering(inflow, outputs, node, forcing, longest)
    order = [node for node in sorted(found) if nodes[node]]
    levels32 = [(physics.potential[n] * found[n]).astype(np.float32) for n in order]
    empty = np.zeros((0, forcing.time.size), np.float32)
    return np.array(order, np.int64), np.array(levels32) if order else empty


def _entering(
    inflow: Inflow, outputs: list[Array | None], node: int, forcing: Forcing, longest: float
) -> Array:
    """What leaves the chains upstream, as it comes in at a node (m over the potential)."""
    total = np.zeros(forcing.time.size)
    rows = search_upstream(inflow, node, longest, FAINTEST)
    share, lag = np.exp(-rows.loss), rows.delay / forcing.step
    for row, chain in enumerate(rows.step.tolist()):
        output = outputs[chain]
        if output is not None:
            add_delayed(total, output, share[row], lag[row])
    return total


def _windy(forcing: Forcing, increment: Array, steps: Index) -> list[tuple[int, int]]:
    """Places in a run of steps where wind acts, with the row of their stress."""
    row = np.minimum(np.searchsorted(forcing.steps, steps), max(forcing.steps.size - 1, 0))
    known = (increment[steps] != 0.0) & (forcing.steps[row] == steps)
    return [(int(place), int(row[place])) for place in np.nonzero(known)[0]]


def _leaving(
    physics: StepPhysics, forcing: Forcing, increment: Array, chains: Chains, k: int
) -> Array | None:
    """What wind on a chain makes at its end (m over the potential); None without wind."""
    steps = chains.step[chains.first[k] : chains.first[k + 1]]
    acting = _windy(forcing, increment, steps)
    if not acting:
        return None
    time, loss = physics.time[steps], physics.loss[steps]
    after = (time.sum() - np.cumsum(time) + 0.5 * time) / forcing.step
    left = np.exp(-(loss.sum() - np.cumsum(loss))) * increment[steps]
    total = np.zeros(forcing.time.size)
    for place, row in acting:
        add_delayed(total, forcing.stress[row], left[place], max(after[place], 0.0))
    return total


def _along(
    physics: StepPhysics, forcing: Forcing, increment: Array, steps: Index, entering: Array
) -> list[Array]:
    """Waves at the end of every step of a run (m over the potential).

    The wave is kept in the time of the entry, t minus the time from there, in which it only loses
    by factors and takes on increments; for each node it is shifted once.
    """
    count = forcing.time.size
    passed = np.concatenate([[0.0], np.cumsum(physics.time[steps])]) / forcing.step
    ahead = int(np.ceil(passed[-1])) + 1
    wave = np.zeros(count + ahead + 1)
    add_delayed(wave, held_on(entering), 1.0, float(ahead))
    acting = dict(_windy(forcing, increment, steps))
    result = []
    for place, step in enumerate(steps.tolist()):
        wave *= np.exp(-physics.loss[step])
        if place in acting:
            middle = 0.5 * (passed[place] + passed[place + 1])
            held = held_on(forcing.stress[acting[place]])
            add_delayed(wave, held, increment[step], ahead - middle)
        result.append(taken_back(wave, ahead - passed[place + 1], count))
    return result
