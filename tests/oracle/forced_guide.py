"""Simple guides for tests of the forced response: one straight line of nodes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from waveguide.forcing.projection import Forcing
from waveguide.geodesy import geodesic_length
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.losses import StepPhysics, step_physics
from waveguide.propagation.modes import ModeAtNodes


def line_network(lon, lat, equatorial=False) -> Network:
    """Nodes in the order of travel; seaward normal to the left of it in the north."""
    lon, lat = np.asarray(lon, float), np.asarray(lat, float)
    n = lon.size
    here = np.arange(n - 1)
    none = np.zeros(0)
    return Network(
        lon=lon, lat=lat, line=np.zeros(n, np.int64),
        equatorial=np.full(n, equatorial), offshore=np.full(n, np.nan if equatorial else 0.0),
        basin=np.ones(n, np.int64), tail=here, head=here + 1,
        kind=np.full(n - 1, int(StepKind.EQUATOR if equatorial else StepKind.COAST)),
        length=geodesic_length(lon[:-1], lat[:-1], lon[1:], lat[1:]),
        gap=np.full(n - 1, -1), passes=np.full(n - 1, -1),
        gap_width=none, gap_length=none, gap_sill=none,
    )  # fmt: skip


def zonal_coast(length_km: float, nodes: int, lat: float = 35.0) -> Network:
    """A coast along a parallel, where |f| does not change; travelled eastward."""
    degrees = length_km * 1e3 / geodesic_length(0.0, lat, 1.0, lat)
    return line_network(np.linspace(0.0, degrees, nodes), np.full(nodes, lat))


def mode_of(network: Network, speed, value, number: int = 1) -> ModeAtNodes:
    """A mode with phase speed and coastal value given at every node, or one for all."""
    n = network.size
    return ModeAtNodes(
        number, np.broadcast_to(np.asarray(speed, float), n).copy(),
        np.broadcast_to(np.asarray(value, float), n).copy(), np.zeros(0), np.zeros(n),
    )


def physics_of(network: Network, mode: ModeAtNodes, days: float = 20.0, decay: float = 0.0,
               damping: float = 0.0) -> StepPhysics:
    """Step physics with a decay (1/m) by bottom friction on top."""
    base = step_physics(network, mode, 2.0 * np.pi / (days * 86400.0), damping)
    return replace(base, loss=base.loss + decay * network.length)


def forcing_of(network: Network, stress, step: float) -> Forcing:
    """Stress (m, nt) on all steps of a network, `step` seconds apart."""
    stress = np.asarray(stress, np.float32)
    time = np.datetime64("2031-01-01", "ns") + (np.arange(stress.shape[1]) * step * 1e9).astype(
        "timedelta64[ns]"
    )
    return Forcing(np.arange(network.tail.size), time, step, stress, np.ones(network.tail.size))


def branched_coast() -> Network:
    """A coast along 35°N that takes in another one and gives off a third; and a closed ring."""
    parts = [
        (np.linspace(0.0, 20.0, 61), np.full(61, 35.0), list(range(61))),
        (np.linspace(3.0, 7.0, 21), np.linspace(30.0, 34.9, 21), [*range(61, 82), 25]),
        (np.linspace(14.0, 16.0, 15), np.linspace(35.2, 39.0, 15), [40, *range(82, 97)]),
        (np.linspace(30.0, 33.0, 10), np.full(10, 35.0), [*range(97, 107), 97]),
    ]
    lon, lat = (np.concatenate([part[k] for part in parts]) for k in (0, 1))
    chains = [np.array(part[2]) for part in parts]
    tail = np.concatenate([chain[:-1] for chain in chains])
    head = np.concatenate([chain[1:] for chain in chains])
    none, m = np.zeros(0), tail.size
    return Network(
        lon=lon, lat=lat, line=np.repeat(np.arange(4), [61, 21, 15, 10]),
        equatorial=np.zeros(lon.size, bool), offshore=np.zeros(lon.size),
        basin=np.ones(lon.size, np.int64), tail=tail, head=head,
        kind=np.full(m, int(StepKind.COAST)),
        length=geodesic_length(lon[tail], lat[tail], lon[head], lat[head]),
        gap=np.full(m, -1), passes=np.full(m, -1), gap_width=none, gap_length=none, gap_sill=none,
    )  # fmt: skip
