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
