"""From depth, shoreline and stratification to the two networks that are shipped."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.charted import charted_straits
from waveguide.coast.effective import CoastRule, EffectiveCoast, effective_coast
from waveguide.coast.gaps import straits
from waveguide.coast.raster import GlobalGrid, Mask
from waveguide.constants import BETA_EQUATOR, EARTH_RADIUS, deformation_radius
from waveguide.geodesy import geodesic_length
from waveguide.network.crossings import Crossings, facing_crossings, strait_crossings
from waveguide.network.graph import Network, StepKind
from waveguide.network.lines import Lines, build_lines

Array = NDArray[np.float64]
Index = NDArray[np.int64]


def baroclinic_rule(lat: Array, phase_speed: Array, sill_depth: Array) -> CoastRule:
    """What the first baroclinic mode follows.

    The scale is the deformation radius, but no finer than three cells of a 0.1° grid, below
    which gaps are not resolved. An island is passed if smaller than R.

    Parameters
    ----------
    lat : ndarray, shape (n,)
        Latitudes, degrees, ascending.
    phase_speed : ndarray, shape (n,)
        First-mode phase speed typical of the latitude (m/s).
    sill_depth : ndarray, shape (n,)
        Depth that still carries the mode (m).

    Returns
    -------
    CoastRule
    """
    radius = deformation_radius(phase_speed, lat)
    return CoastRule(
        lat=lat,
        scale=np.maximum(radius, 30e3),
        sill_depth=sill_depth,
        island_size=np.maximum(radius, 40e3),
        basin_size=np.maximum(2.0 * radius, 80e3),
        smoothing=np.clip(radius / 4.0, 12e3, 60e3),
        spacing=22.5e3,
    )


def barotropic_rule(lat: Array) -> CoastRule:
    """What the barotropic mode follows: continents.

    Its R is some 2000 km, but a closing of that size would seal Drake Passage, which a signal
    crosses as a facing coast instead. So gaps up to 300 km are bridged, land below 1000 km is
    passed and basins below 1500 km are left out (our choice; the scale of what is passed is half
    of R, that of what is bridged a sixth).

    Parameters
    ----------
    lat : ndarray, shape (n,)
        Latitudes, degrees, ascending.

    Returns
    -------
    CoastRule
    """
    one = np.ones_like(lat)
    return CoastRule(
        lat=lat,
        scale=300e3 * one,
        sill_depth=200.0 * one,
        island_size=1000e3 * one,
        basin_size=1500e3 * one,
        smoothing=75e3 * one,
        spacing=100e3,
    )


def build_network(
    grid: GlobalGrid,
    depth: NDArray[np.floating],
    land: Mask,
    rule: CoastRule,
    phase_speed: Array,
    report: Callable[[str], None] = lambda _: None,
) -> tuple[Network, EffectiveCoast]:
    """Build the network of one family of modes.

    Parameters
    ----------
    grid : GlobalGrid
    depth : ndarray, shape (ny, nx)
        Depth (m), positive down.
    land : ndarray of bool, shape (ny, nx)
    rule : CoastRule
    phase_speed : ndarray, shape (n,)
        Typical phase speed at the latitudes of the rule (m/s); sets the reach of a facing coast.
    report : callable, optional
        Told what is being done.

    Returns
    -------
    Network
    EffectiveCoast
    """
    report("effective coastline")
    coast = effective_coast(grid, depth, land, rule)
    report("nodes and the equator")
    equatorial_radius = float(np.sqrt(np.interp(0.0, rule.lat, phase_speed) / BETA_EQUATOR))
    lines = build_lines(coast, rule.spacing)
    radius = deformation_radius(np.interp(lines.lat, rule.lat, phase_speed), lines.lat)
    report("straits")
    found = straits(coast, depth)
    found += charted_straits(coast, rule, found)
    through = strait_crossings(lines, found, radius, rule.spacing)
    report("facing coasts and openings")
    nearest = float(np.degrees(equatorial_radius / EARTH_RADIUS))
    facing = facing_crossings(lines, coast, radius, nearest)
    return _assemble(lines, through, facing), coast


def _assemble(lines: Lines, *crossings: Crossings) -> Network:
    """Join steps along lines with the crossings between them."""
    equatorial = lines.equatorial[lines.tail] | lines.equatorial[lines.head]
    along_kind = np.where(equatorial, int(StepKind.EQUATOR), int(StepKind.COAST))
    passing = _passing_steps(lines, along_kind, [crossing.tail for crossing in crossings])
    ways = _ways(lines, crossings, passing)
    passes = np.full(lines.tail.size + ways.tail.size, -1)
    known = np.concatenate(passing)
    passes[known[known >= 0]] = np.nonzero(known >= 0)[0]
    lon = np.concatenate([lines.lon, ways.lon])
    lat = np.concatenate([lines.lat, ways.lat])
    added = ways.lon.size
    width = np.concatenate([crossing.width for crossing in crossings])
    return Network(
        lon=lon,
        lat=lat,
        line=np.concatenate([lines.line, ways.line]),
        equatorial=np.concatenate([lines.equatorial, np.zeros(added, dtype=bool)]),
        offshore=np.concatenate([lines.offshore, np.full(added, np.nan)]),
        basin=np.concatenate([lines.basin, np.zeros(added, dtype=np.int64)]),
        tail=np.concatenate([lines.tail, ways.tail]),
        head=np.concatenate([lines.head, ways.head]),
        kind=np.concatenate([along_kind, ways.kind]),
        length=np.concatenate([
            lines.length,
            geodesic_length(lon[ways.tail], lat[ways.tail], lon[ways.head], lat[ways.head]),
        ]),
        gap=np.concatenate([np.full(lines.tail.size, -1), ways.gap]),
        passes=passes,
        gap_width=width,
        gap_length=np.concatenate([crossing.length for crossing in crossings]),
        gap_sill=np.concatenate([crossing.sill for crossing in crossings]),
    )


@dataclass(frozen=True)
class _Ways:
    """Nodes within straits, and the steps of all crossings; fields as in `Network`."""

    lon: Array
    lat: Array
    line: Index
    tail: Index
    head: Index
    kind: Index
    gap: Index


def _ways(lines: Lines, crossings: tuple[Crossings, ...], passing: list[Index]) -> _Ways:
    """Lay every crossing out as steps.

    What comes out of a gap goes on along the coast beyond its mouth, so it lands past the step
    that passes the mouth and not before it. Each direction through a strait has nodes of its own,
    or a signal could turn round inside and leave past the mouth it came in by.
    """
    none = np.zeros(0, dtype=np.int64)
    parts = [_Ways(np.zeros(0), np.zeros(0), none, none, none, none, none)]
    first, number, gap = lines.lon.size, int(lines.line.max()) + 1, 0
    for crossing, passed in zip(crossings, passing, strict=True):
        beyond = np.where(passed >= 0, lines.head[passed], crossing.tail)
        landing = np.roll(beyond, crossing.tail.size // 2)
        for row in range(crossing.tail.size):
            parts.append(_way(crossing, row, int(landing[row]), first, number, gap + row))
            first += parts[-1].lon.size
            number += int(parts[-1].lon.size > 0)
        gap += crossing.tail.size
    return _Ways(*(
        np.concatenate([getattr(part, field.name) for part in parts]) for field in fields(_Ways)
    ))


def _way(
    crossing: Crossings, row: int, landing: int, first: int, number: int, gap: int
) -> _Ways:
    """Nodes within one crossing, and its steps.

    `first` is the number of its first node, `number` that of its line, `gap` its row in the gap
    table.
    """
    lon, lat = crossing.way[row]
    chain = np.concatenate([[crossing.tail[row]], np.arange(first, first + lon.size), [landing]])
    return _Ways(
        lon=lon,
        lat=lat,
        line=np.full(lon.size, number),
        tail=chain[:-1],
        head=chain[1:],
        kind=np.full(lon.size + 1, crossing.kind[row]),
        gap=np.concatenate([[gap], np.full(lon.size, -1)]),
    )


def _passing_steps(lines: Lines, kind: Index, gap_tails: list[Index]) -> list[Index]:
    """The coast step that passes the mouth of each gap, −1 where the coast ends at the equator.

    It is the step that leaves the node the gap opens at; where several open at one node, the
    next ones are passed on the steps that follow.
    """
    coast = np.nonzero(kind == int(StepKind.COAST))[0]
    leaving = np.full(lines.lon.size, -1)
    leaving[lines.tail[coast]] = coast
    free = np.ones(lines.tail.size, dtype=bool)
    passing = []
    for tails in gap_tails:
        steps = np.full(tails.size, -1)
        for row, tail in enumerate(tails):
            steps[row] = _first_free(leaving, lines.head, int(tail), free)
            free[steps[row]] &= steps[row] < 0
        passing.append(steps)
    return passing


def _first_free(leaving: Index, head: Index, start: int, free: NDArray[np.bool_]) -> int:
    """First free coast step on the way from a node, −1 if there is none."""
    step = int(leaving[start])
    while step >= 0 and not free[step]:
        step = int(leaving[head[step]])
        if step == leaving[start]:
            return -1
    return step
