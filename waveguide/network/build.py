"""From depth, shoreline and stratification to the two networks that are shipped."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.effective import CoastRule, EffectiveCoast, effective_coast
from waveguide.coast.gaps import straits
from waveguide.coast.raster import GlobalGrid, Mask
from waveguide.constants import BETA_EQUATOR, EARTH_RADIUS, deformation_radius
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
    depth: Array,
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
    report("straits")
    through = strait_crossings(lines, straits(coast, depth), 2.0 * rule.spacing)
    report("facing coasts and openings")
    speed = np.interp(lines.lat, rule.lat, phase_speed)
    radius = deformation_radius(speed, lines.lat)
    nearest = float(np.degrees(equatorial_radius / EARTH_RADIUS))
    facing = facing_crossings(lines, coast, radius, nearest)
    return _assemble(lines, through, facing), coast


def _assemble(lines: Lines, *crossings: Crossings) -> Network:
    """Join steps along lines with the crossings between them."""
    def joined(name: str) -> NDArray[np.generic]:
        return np.concatenate([getattr(crossing, name) for crossing in crossings])

    tail, head = joined("tail"), joined("head")
    width, length = joined("width"), joined("length")
    along_count, gap_count = lines.tail.size, tail.size
    equatorial = lines.equatorial[lines.tail] | lines.equatorial[lines.head]
    along_kind = np.where(equatorial, int(StepKind.EQUATOR), int(StepKind.COAST))
    return Network(
        lon=lines.lon,
        lat=lines.lat,
        line=lines.line,
        equatorial=lines.equatorial,
        offshore=lines.offshore,
        basin=lines.basin,
        tail=np.concatenate([lines.tail, tail]).astype(np.int64),
        head=np.concatenate([lines.head, head]).astype(np.int64),
        kind=np.concatenate([along_kind, joined("kind")]).astype(np.int64),
        length=np.concatenate([lines.length, np.maximum(width, length)]).astype(float),
        gap=np.concatenate([np.full(along_count, -1), np.arange(gap_count)]).astype(np.int64),
        passes=np.concatenate(
            [_passed_gaps(lines.tail, along_kind, tail), np.full(gap_count, -1)]
        ).astype(np.int64),
        gap_width=np.asarray(width, float),
        gap_length=np.asarray(length, float),
        gap_sill=np.asarray(joined("sill"), float),
    )


def _passed_gaps(step_tail: Index, kind: Index, gap_tail: Index) -> Index:
    """The gap whose mouth each coast step passes: the one that opens at its tail."""
    opens = np.full(int(max(step_tail.max(), gap_tail.max(initial=0))) + 1, -1)
    opens[gap_tail] = np.arange(gap_tail.size)
    return np.where(kind == int(StepKind.COAST), opens[step_tail], -1)
