"""The mode atlas of cross-shelf sections: coastal-trapped modes at every coast node.

Close to the equator the modes of sections become those of a flat bottom (as f → 0 the sloping
bottom acts as a wall; Allen and Romea 1980, J. Fluid Mech. 98, 555), which are the modes of the
equatorial guide. Within `BLENDED` degrees the two are blended by latitude, so that the atlas is
continuous where coast and equator meet although the depths of the two are taken differently.
Nodes on the equator and in straits, and those without a section, have the flat-bottom modes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import Sections, cross_shelf_sections
from waveguide.coast.section_modes import LEAST_LATITUDE, limited_scale
from waveguide.coast.section_quality import QualityFlag
from waveguide.constants import coriolis, deformation_radius
from waveguide.modes.trapped import TOLERANCE
from waveguide.modes.vertical import barotropic_speed
from waveguide.network.atlas import Atlas, TrappedAtlas
from waveguide.network.continuity import followed_ranks
from waveguide.network.graph import Network, StepKind
from waveguide.network.section_runs import (
    RUN_LENGTH,
    RankedModes,
    RunInputs,
    all_run_modes,
    no_modes,
)
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Mask = NDArray[np.bool_]
Region = tuple[float, float, float, float]

NUMBERS = 3
"""Baroclinic modes that are followed."""

BLENDED = 1.0
"""Latitude (degrees) below which the modes of sections give way to those of a flat bottom."""


LEAST_VALUE = 1e-4
"""Smallest F(0,0) (m^-1/2). Values and frictions are extrapolated from two meshes, which can carry
a quantity that is nearly nothing to the wrong side of nothing (two values, a few frictions)."""


def build_trapped_atlas(
    network: Network,
    flat: Atlas,
    depths: Bathymetry,
    climatology: Climatology,
    folder: Path,
    region: Region | None = None,
    workers: int = 2,
    report: Callable[[int, int], None] = lambda done, total: None,
) -> TrappedAtlas:
    """Compute the modes of the section of every coast node.

    Parameters
    ----------
    network : Network
        Of the baroclinic family.
    flat : Atlas
        Its flat-bottom modes 1 to 3.
    depths : Bathymetry
    climatology : Climatology
    folder : Path
        Where finished parts are kept until the whole is done.
    region : (west, south, east, north), optional
        Degrees; nodes outside get no modes.
    workers : int
        Processes.
    report : callable, optional
        Told how many parts of how many are done.

    Returns
    -------
    TrappedAtlas
        Modes 0 to 3.
    """
    wanted = np.ones(network.size, bool) if region is None else inside(network, region)
    columns = climatology.profiles(network.lon, network.lat).n2
    chosen = np.flatnonzero(np.isfinite(network.offshore) & wanted)
    sections = node_sections(network, flat, depths, chosen)
    runs, spans = _runs(network, chosen, sections, columns, climatology.depth)
    solved = all_run_modes(runs, folder, workers, report)
    ranked = _gathered(network.size, solved, spans)
    flags = np.zeros(network.size, dtype=np.int64)
    flags[chosen] = sections.flags
    flags[~wanted] = int(QualityFlag.NOT_COMPUTED)
    fallback = _flat_bottom(network, flat, wanted)
    return _assembled(network, flat, ranked, _followed(network, ranked), fallback, flags)


def inside(network: Network, region: Region) -> Mask:
    """Which nodes lie in a region (west, south, east, north; degrees, across 180° too)."""
    west, south, east, north = region
    across = (network.lon - west) % 360.0 <= (east - west) % 360.0
    across |= east - west >= 360.0
    return np.asarray(across & (network.lat >= south) & (network.lat <= north))


def node_sections(network: Network, flat: Atlas, depths: Bathymetry, nodes: Index) -> Sections:
    """Cross-shelf sections of coast nodes.

    Parameters
    ----------
    network : Network
    flat : Atlas
        Its first row gives the deformation radius.
    depths : Bathymetry
    nodes : ndarray of int, shape (n,)

    Returns
    -------
    Sections
    """
    speed = flat.phase_speed[flat.row(1)]
    known = np.where(np.isfinite(speed), speed, np.nanmedian(speed))
    return cross_shelf_sections(
        network.lon[nodes], network.lat[nodes], network.offshore[nodes],
        deformation_radius(known[nodes], network.lat[nodes]), depths,
    )


def _rings(network: Network) -> list[Index]:
    """Nodes of each closed coast in order."""
    coast = np.flatnonzero(np.isfinite(network.offshore))
    line = network.line[coast]
    return [coast[line == number] for number in np.unique(line)]


def _runs(
    network: Network, chosen: Index, sections: Sections, columns: Array, n2_depth: Array
) -> tuple[list[RunInputs], list[Index]]:
    """Inputs of runs of neighbours, and their nodes; the last of a run opens the next one."""
    row = np.full(network.size, -1)
    row[chosen] = np.arange(chosen.size)
    f = coriolis(network.lat)
    runs, spans = [], []
    for ring in _rings(network):
        for start in range(0, ring.size, RUN_LENGTH):
            end = min(start + RUN_LENGTH, ring.size)
            span = np.take(ring, np.arange(start, end + 1), mode="wrap")
            if not (row[span[:-1]] >= 0).any():
                continue
            there = (row[span] >= 0) & (np.abs(network.lat[span]) >= LEAST_LATITUDE)
            at = np.where(there, row[span], 0)
            runs.append(RunInputs(
                np.where(there[:, None], sections.offshore[at], np.nan),
                np.where(there[:, None], sections.depth[at], np.nan),
                columns[span], n2_depth, f[span],
            ))
            spans.append(span)
    return runs, spans


def _gathered(size: int, solved: list[RankedModes], spans: list[Index]) -> RankedModes:
    """Modes of all nodes; the last node of each run is the next run's."""
    result = no_modes(size)
    for modes, span in zip(solved, spans, strict=True):
        for name in vars(modes):
            getattr(result, name)[span[:-1]] = getattr(modes, name)[:-1]
    return result


def _followed(network: Network, ranked: RankedModes) -> Index:
    """Rank (0 the fastest baroclinic) of each mode number at each node, shape (NUMBERS, n)."""
    result = np.tile(np.arange(NUMBERS)[:, None], (1, network.size))
    along = np.zeros(network.size)
    coast = network.kind == StepKind.COAST
    along[np.minimum(network.tail[coast], network.head[coast])] = network.length[coast]
    for ring in _rings(network):
        # begin where rank and number agree best: closest to the equator
        order = np.roll(ring, -int(np.argmin(np.abs(network.lat[ring]))))
        result[:, order] = followed_ranks(ranked.overlap[order], along[order], NUMBERS).T
    return result


@dataclass(frozen=True)
class _Modes:
    """Modes 0 to 3 at nodes, shape (4, n) each."""

    speed: Array
    value: Array
    decay: Array
    scale: Array


def _flat_bottom(network: Network, flat: Atlas, wanted: Mask) -> _Modes:
    """Flat-bottom modes at the nodes of a region; mode 0 over the adjoining deep water."""
    rows = [flat.row(mode) for mode in range(1, NUMBERS + 1)]
    deep = np.where(wanted, flat.depth, np.nan)
    barotropic = barotropic_speed(deep)

    def with_barotropic(zero: Array, others: Array) -> Array:
        return np.vstack([zero, np.where(wanted, others[rows], np.nan)])

    speed = with_barotropic(barotropic, flat.phase_speed)
    return _Modes(
        speed,
        with_barotropic(1.0 / np.sqrt(deep), flat.coastal_value),
        with_barotropic(0.5 / (deep * barotropic), flat.decay_per_drag),
        deformation_radius(speed, network.lat),
    )


def _assembled(
    network: Network, flat: Atlas, ranked: RankedModes, followed: Index, fallback: _Modes,
    flags: Index,
) -> TrappedAtlas:
    """Modes of sections where there are any, of a flat bottom elsewhere, blended in between."""
    rank = np.vstack([np.zeros((1, network.size), dtype=np.int64), followed + 1])
    pick = (np.arange(network.size), rank)
    speed, error = ranked.phase_speed[pick], ranked.error[pick]
    scale = limited_scale(ranked.trapping_scale[pick], speed, network.lat)
    found = np.isfinite(speed)
    weight = np.clip(np.abs(network.lat) / BLENDED, 0.0, 1.0)

    def blend(section: Array, level: Array) -> Array:
        share = np.where(~np.isfinite(level), 1.0, np.where(found, weight, 0.0))
        mixed = share * np.where(share > 0.0, section, 0.0)
        return np.asarray(mixed + np.where(share < 1.0, (1.0 - share) * np.nan_to_num(level), 0.0))

    coast = np.isfinite(network.offshore) & (flags & int(QualityFlag.NOT_COMPUTED) == 0)
    flags = flags | np.where(coast & ~found[1:].all(axis=0), int(QualityFlag.FLAT_BOTTOM), 0)
    loose = (np.nan_to_num(error) > TOLERANCE).any(axis=0)
    flags = flags | np.where(loose, int(QualityFlag.NOT_CONVERGED), 0)
    gaps = np.vstack([np.full((1, network.gap_width.size), np.nan), flat.gap_share])
    return TrappedAtlas(
        mode=np.arange(NUMBERS + 1), depth=flat.depth,
        phase_speed=blend(speed, fallback.speed),
        coastal_value=blend(np.maximum(ranked.coastal_value[pick], LEAST_VALUE), fallback.value),
        gap_share=gaps, error=error,
        decay_per_drag=blend(np.maximum(ranked.bottom_friction[pick], 0.0), fallback.decay),
        dispersion=blend(ranked.dispersion[pick], np.zeros_like(fallback.speed)),
        barotropic_tail=blend(ranked.barotropic_tail[pick], np.zeros_like(fallback.speed)),
        trapping_scale=blend(scale, fallback.scale),
        rank=rank, overlap=step_overlaps(network, ranked.overlap, followed), flags=flags,
    )


def step_overlaps(network: Network, overlap: Array, followed: Index) -> Array:
    """Overlap of the modes at the tail of each coast step with those at its head.

    Parameters
    ----------
    network : Network
    overlap : ndarray, shape (n, RANKS, RANKS)
        Of each node's modes, by rank, with those of the next node of its ring.
    followed : ndarray of int, shape (NUMBERS, n)
        Rank of each mode number.

    Returns
    -------
    ndarray, shape (NUMBERS, NUMBERS, m)
        NaN on other steps.
    """
    following = np.full(network.size, -1)
    for ring in _rings(network):
        following[ring] = np.roll(ring, -1)
    tail, head = network.tail, network.head
    forward = following[tail] == head
    backward = ~forward & (following[head] == tail)
    first = np.where(forward, tail, head)
    second = np.where(forward, head, tail)
    between = overlap[first[None, None], followed[:, first][:, None], followed[:, second][None]]
    turned = np.where(backward, np.swapaxes(between, 0, 1), between)
    coast = (network.kind == StepKind.COAST) & (forward | backward)
    return np.where(coast, turned, np.nan)
