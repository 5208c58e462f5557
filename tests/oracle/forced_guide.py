"""Simple guides for tests of the forced response: one straight line of nodes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from waveguide.forcing.field import nodes_response
from waveguide.forcing.influence import influence
from waveguide.forcing.projection import Forcing
from waveguide.forcing.response import (
    Period,
    RouteResponse,
    contributions,
    route_response,
    windy_rows,
)
from waveguide.forcing.transfer import Place, wind_transfer
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
        np.full(n, np.inf), np.full(n, np.inf), np.zeros(n), np.zeros(n),
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


def along_characteristics(network, mode, physics, stress, step, node=None) -> np.ndarray:
    """Response at one node, by the characteristics of the long wave."""
    node = network.size - 1 if node is None else node
    asked = np.zeros(network.size, bool)
    asked[node] = True
    forcing = forcing_of(network, stress, step)
    found, level = nodes_response(network, mode, physics, forcing, asked, np.inf)
    assert found.tolist() == [node]
    return level[0].astype(float)


def at_every_frequency(
    network, mode, physics, conditions, stress, step, node=None, place=None
) -> tuple[np.ndarray, RouteResponse]:
    """Response at one node and along the way to it, summed over frequencies."""
    node = network.size - 1 if node is None else node
    place = place or Place(node, 1.0)
    found = influence(network, mode, physics, node, place.factor, np.inf, place.beyond)
    forcing = forcing_of(network, stress, step)
    period = Period.of(forcing, float(found.delay.max()))
    windy = windy_rows(found, forcing)
    transfer = wind_transfer(network, mode, conditions, found, place, windy, period.few_omega)
    one = np.zeros(found.step.size, np.int64)
    level = period.series(contributions(transfer, found, forcing, period, one, 1))[0]
    return level, route_response(
        network, transfer, found, forcing, period, found.head_delay
    )


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


def eastern_ocean(width: float, north: float) -> Network:
    """The equator over a width (m) up to a meridional coast that goes north (m)."""
    east = np.degrees(np.linspace(0.0, width, 201) / 6.378137e6)
    up = np.degrees(np.arange(0.0, north + 1.0, 30e3) / 6.3568e6)
    lon = np.concatenate([east[:-1], np.full(up.size, east[-1])])
    lat = np.concatenate([np.zeros(200), up])
    network = line_network(lon, lat)
    equatorial = np.arange(lon.size) < 200
    return replace(
        network, equatorial=equatorial, offshore=np.where(equatorial, np.nan, 270.0),
        line=np.where(equatorial, 1, 0),
        kind=np.where(equatorial[network.tail], int(StepKind.EQUATOR), int(StepKind.COAST)),
    )
