"""How much the wind over each step of the guide raises sea level at a target, and how late.

Along a coast, with s in the direction of travel and the wind stress τ_s positive downstream, a
mode p = φF obeys at the coast

    (1/c) φ_t + φ_s − Γφ + (losses) φ = F(0,0) τ_s/ρ₀                              (1)

(∫F² dz = 1 over the coastal wall, or pᵀBp = 1 for trapped modes): the momentum balance along the
wall v_t = −p_s + F τ_s/ρ₀ with the v of the mode. Over a flat bottom F² = 1/H for mode 0, which is
the equation of Gill & Schumann (1974). At any frequency v is tied to p at the wall by the free
wave, so (1) says that a stretch ds adds dη = F² τ_s ds/(ρ₀ g) to sea level η = Fφ/g, and that this
increment travels on as a free wave would. It also holds below the critical frequency, when Γ and
the losses are those of :mod:`waveguide.propagation.dispersion`.

On the equator, multiply the equation of p/c + u by e^(−βy²/2c) and integrate over y: all that has
v drops out, and the Kelvin wave p = φF e^(−βy²/2c) obeys

    (1/c) φ_t + φ_x = F(0) ⟨τ_x⟩/(√2 ρ₀),   ⟨τ_x⟩ = ∫ τ_x e^(−βy²/2c) dy / √(2πc/β),      (2)

so that dη = F² ⟨τ_x⟩ dx/(√2 ρ₀ g). (At an eastern coast sea level is √2 of that as ω → 0: the
setup τ_x L/(ρ₀ g) F² of a steady wind.)

With η = aP/g and the losses n of :mod:`waveguide.propagation.losses`, the sea level at a target is

    η(t) = Σ weight × stress(t − delay),   weight = F² ds/(ρ₀ g) · (P_target/P) e^(−n),

summed over all steps upstream. So an impulse of wind over one step arrives as the free wave of
:mod:`waveguide.propagation.arrivals` does, by the strongest route.

Approximations. From each step the strongest way to the target is taken; what takes another way
round an island is left out. Wind makes no signal in straits and on the hop to a facing coast.
Rossby waves that the wind makes in the interior, and their reflection at western boundaries, are
left out: what is computed is what the wind does along the guide itself. Here losses are those of
the dominant period and delays those of the long wave, which is what tells where wind counts;
:mod:`waveguide.forcing.transfer` has them at every frequency. On a western boundary within one
L_e of the equator, where P → 0 and the relation of a coast fails, wind counts as it would at one
L_e.

References
----------
Gill & Schumann (1974), J. Phys. Oceanogr. 4, 83.
Cane & Sarachik (1977), J. Mar. Res. 35, 395 (projection on the equatorial Kelvin wave).
"""

from __future__ import annotations

import heapq
import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, GRAVITY, REFERENCE_DENSITY, coriolis
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.losses import StepPhysics
from waveguide.propagation.modes import ModeAtNodes, poleward_nodes

Array = NDArray[np.float64]
Index = NDArray[np.int64]

FAINTEST = 1e-3
"""Ways that keep less than this share of the amplitude are not followed further upstream: what
lies beyond is that share of the whole at most, where losses act along the way."""

_NEAREST = 1.0  # L_e, see the module


@dataclass(frozen=True)
class Influence:
    """The wind's influence on one target, step by step upstream.

    Every step occurs once, after the one that follows it on its way downstream.

    Attributes
    ----------
    step : ndarray of int, shape (k,)
        Step of the network.
    parent : ndarray of int, shape (k,)
        Row of the step that follows downstream, −1 where the step ends at the target.
    weight : ndarray, shape (k,)
        Sea level at the target per stress over the step (m/Pa); 0 where no wind counts, negative
        where F has another sign than at the target.
    delay : ndarray, shape (k,)
        Time from the middle of the step to the target (s).
    head_delay : ndarray, shape (k,)
        Time from the end of the step to the target (s).
    gain : ndarray, shape (k,)
        Sea level at the target over that at the end of the step.
    distance : ndarray, shape (k,)
        Way from the end of the step to the target (m).
    """

    step: Index
    parent: Index
    weight: Array
    delay: Array
    head_delay: Array
    gain: Array
    distance: Array


def step_increment(network: Network, mode: ModeAtNodes, physics: StepPhysics) -> Array:
    """What a stress of 1 Pa over each step adds to a = ηg/P at the end of the step, over g.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    physics : StepPhysics

    Returns
    -------
    ndarray, shape (m,)
        Sea level (m/Pa) over the potential; 0 on steps where no wind counts. With the sign of F.
    """
    tail, head = network.tail, network.head
    coast = (network.kind == StepKind.COAST) & np.isfinite(physics.time)
    equator = (network.kind == StepKind.EQUATOR) & np.isfinite(physics.time)
    value = mode.coastal_value
    potential = physics.potential * lifted_near_equator(network, mode)
    increment = np.zeros(tail.size)
    # On a coast the middle of the step; half of its losses lie behind. P/F is positive, F of a
    # higher mode may change its sign along the coast.
    with np.errstate(divide="ignore", invalid="ignore"):
        flux = potential / value
    along = np.sqrt(flux[tail] * flux[head])
    middle = 0.5 * (value[tail] + value[head]) / along * np.exp(-0.5 * physics.loss)
    increment[coast] = np.nan_to_num(middle[coast])
    # On the equator a junction at either end is not part of the stretch that is forced.
    inner = np.where(network.equatorial[head], head, tail)
    after = np.where(network.equatorial[tail], physics.loss, 0.0)
    zonal = value[inner] ** 2 / physics.potential[inner] * np.exp(-after) / np.sqrt(2.0)
    increment[equator] = zonal[equator]
    return increment * network.length / (REFERENCE_DENSITY * GRAVITY)


def lifted_near_equator(network: Network, mode: ModeAtNodes) -> Array:
    """Factor of P at every node where wind acts: see the module on western boundaries.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes

    Returns
    -------
    ndarray, shape (n,)
    """
    c = np.where(np.isfinite(mode.speed), mode.speed, 1.0)
    distance = np.abs(coriolis(network.lat)) / np.sqrt(BETA_EQUATOR * c)
    near = np.isfinite(network.offshore) & ~poleward_nodes(network) & (distance < _NEAREST)
    return np.where(near, _NEAREST / np.maximum(distance, 0.05), 1.0)


def influence(
    network: Network, mode: ModeAtNodes, physics: StepPhysics, node: int, factor: float,
    longest: float, beyond: float = 0.0, faintest: float = FAINTEST,
) -> Influence:
    """Follow the guide upstream from a target.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    physics : StepPhysics
    node : int
        Node that the target is tied to.
    factor : float
        Share of the node's amplitude that the target feels.
    longest : float
        Delay beyond which the wind is forgotten (s).
    beyond : float
        Time from the node to the target, which may lie between two nodes (s).
    faintest : float
        Share of amplitude below which a way is not followed further.

    Returns
    -------
    Influence
    """
    inflow = Inflow.of(network.tail, network.head, physics.time, physics.loss, network.length)
    step, parent, loss, delay, distance = search_upstream(inflow, node, longest, faintest)
    at_target = physics.potential[node] * factor * np.exp(-loss)
    return Influence(
        step=step,
        parent=parent,
        weight=at_target * step_increment(network, mode, physics)[step],
        delay=np.maximum(delay + _time_after_middle(network, physics)[step] + beyond, 0.0),
        head_delay=np.maximum(delay + beyond, 0.0),
        gain=at_target / physics.potential[network.head[step]],
        distance=distance,
    )


def _time_after_middle(network: Network, physics: StepPhysics) -> Array:
    return 0.5 * np.where(np.isfinite(physics.time), physics.time, 0.0)


class Upstream(NamedTuple):
    """What lies upstream of a node, best ways first.

    Attributes
    ----------
    step, parent : ndarray of int, shape (k,)
        As in `Influence`.
    loss, delay, distance : ndarray, shape (k,)
        From the end of the step to the node (nepers, s, m).
    """

    step: Index
    parent: Index
    loss: Array
    delay: Array
    distance: Array


@dataclass(frozen=True)
class Inflow:
    """A graph laid out for searches against the direction of travel.

    Attributes
    ----------
    first : list of int
        Where the steps that end at a node begin in `into`.
    into : list of int
        Steps by the node they end at.
    tail : list of int
    time, loss, length : list of float
        Of each step (s, nepers, m).
    """

    first: list[int]
    into: list[int]
    tail: list[int]
    time: list[float]
    loss: list[float]
    length: list[float]

    @classmethod
    def of(cls, tail: Index, head: Index, time: Array, loss: Array, length: Array) -> Inflow:
        """Lay steps out, all arrays of shape (m,)."""
        order = np.argsort(head, kind="stable")
        count = int(max(tail.max(initial=0), head.max(initial=0))) + 2
        first = np.searchsorted(head[order], np.arange(count + 1))
        return cls(first.tolist(), order.tolist(), tail.tolist(), time.tolist(), loss.tolist(),
                   length.tolist())


def search_upstream(inflow: Inflow, node: int, longest: float, faintest: float) -> Upstream:
    """Dijkstra's method against the direction of travel, by loss and then by time.

    Parameters
    ----------
    inflow : Inflow
    node : int
    longest, faintest : float
        As for `influence`.

    Returns
    -------
    Upstream
        Every step once whose end leads to the node.
    """
    first, into, tail = inflow.first, inflow.into, inflow.tail
    time, cost, length = inflow.time, inflow.loss, inflow.length
    most = float(-np.log(faintest))
    done = bytearray(len(first))
    queue = [(0.0, 0.0, 0.0, node, -1)]
    rows: list[tuple[int, int, float, float, float]] = []
    while queue:
        loss, delay, distance, here, parent = heapq.heappop(queue)
        if done[here]:
            continue
        done[here] = True
        for step in into[first[here] : first[here + 1]]:
            onward, later = loss + cost[step], delay + time[step]
            if not (math.isfinite(onward) and math.isfinite(later)):
                continue
            rows.append((step, parent, loss, delay, distance))
            if onward <= most and later <= longest:
                way = distance + length[step]
                heapq.heappush(queue, (onward, later, way, tail[step], len(rows) - 1))
    table = np.array(rows, dtype=float).reshape(-1, 5).T
    return Upstream(
        table[0].astype(np.int64), table[1].astype(np.int64), table[2], table[3], table[4]
    )
