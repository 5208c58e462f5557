"""Section modes of many nodes: runs of neighbours, worked through by a few processes.

Nodes are taken in runs along a coast, so that the overlap of the modes of neighbours is found
where both are at hand. Every run that is finished is kept in a file whose name is a hash of all
that went into it; work that was interrupted takes those up again.
"""

from __future__ import annotations

import hashlib
import multiprocessing
import os
from collections.abc import Callable, Iterator
from concurrent.futures import ProcessPoolExecutor, as_completed
from contextlib import contextmanager
from dataclasses import dataclass, fields
from pathlib import Path
from zipfile import BadZipFile

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import WaveguideError
from waveguide.modes.modeset import ModeSet, overlap
from waveguide.modes.trapped import TOLERANCE, trapped_modes

Array = NDArray[np.float64]

RANKS = 4
"""Baroclinic modes found on each section: one more than are followed, for crossings."""

METHOD = "2"
"""Part of every run's hash; to be raised when a change here or in the modes changes results."""

RUN_LENGTH = 40
"""Nodes in a run: a second or two of work."""

SHALLOW, WIDE = 500.0, 250e3
"""Where water of this depth (m) is this wide (m), slow internal modes beside fast shelf waves may
take meshes of a gigabyte. There half the accuracy is asked for first, which often gives it all."""


@dataclass(frozen=True)
class RunInputs:
    """Sections of neighbouring nodes.

    Attributes
    ----------
    offshore, depth : ndarray, shape (n, k)
        Monotonic sections (m), NaN where not used.
    n2 : ndarray, shape (n, nz)
        N² (1/s²), NaN throughout where unknown.
    n2_depth : ndarray, shape (nz,)
        Depths of `n2` (m).
    f : ndarray, shape (n,)
        Coriolis parameter (1/s).
    """

    offshore: Array
    depth: Array
    n2: Array
    n2_depth: Array
    f: Array

    def key(self) -> str:
        """Hash of everything that the result depends on."""
        digest = hashlib.sha256(f"{METHOD} {RANKS} {TOLERANCE}".encode())
        for field in fields(self):
            values = np.ascontiguousarray(getattr(self, field.name), dtype="<f8")
            digest.update(f"{field.name} {values.shape}".encode())
            digest.update(values.tobytes())
        return digest.hexdigest()[:32]


@dataclass(frozen=True)
class RankedModes:
    """Modes of nodes, ranked by speed; rank 0 is the barotropic one. NaN where there are none.

    Attributes
    ----------
    phase_speed, error, coastal_value, bottom_friction, dispersion, barotropic_tail,
    trapping_scale : ndarray, shape (n, RANKS + 1)
        See :class:`waveguide.modes.modeset.ModeSet`.
    overlap : ndarray, shape (n, RANKS, RANKS)
        Overlap of the baroclinic modes of each node with those of the next.
    """

    phase_speed: Array
    error: Array
    coastal_value: Array
    bottom_friction: Array
    dispersion: Array
    barotropic_tail: Array
    trapping_scale: Array
    overlap: Array


_OF_MODES = [field.name for field in fields(RankedModes) if field.name != "overlap"]


def no_modes(count: int) -> RankedModes:
    """Modes of nodes that have none."""
    def empty() -> Array:
        return np.full((count, RANKS + 1), np.nan)

    pairs = np.full((count, RANKS, RANKS), np.nan)
    return RankedModes(**{name: empty() for name in _OF_MODES}, overlap=pairs)


def run_modes(inputs: RunInputs) -> RankedModes:
    """Modes of the sections of a run.

    Parameters
    ----------
    inputs : RunInputs

    Returns
    -------
    RankedModes
        NaN for nodes whose section or stratification allows no modes.
    """
    found = [_node_modes(inputs, row) for row in range(inputs.f.size)]
    result = no_modes(len(found))
    for row, modes in enumerate(found):
        if modes is None:
            continue
        for name in _OF_MODES:
            values = getattr(modes, name)
            getattr(result, name)[row, modes.mode] = values
        following = found[row + 1] if row + 1 < len(found) else None
        if following is not None:
            both = overlap(modes, following)[1:, 1:]
            result.overlap[row, : both.shape[0], : both.shape[1]] = both
    return result


def _node_modes(inputs: RunInputs, row: int) -> ModeSet | None:
    known = np.isfinite(inputs.offshore[row])
    if known.sum() < 2 or not np.isfinite(inputs.n2[row]).all():
        return None
    x, h = inputs.offshore[row, known], inputs.depth[row, known]
    wide = float(np.interp(SHALLOW, h, x)) > WIDE
    try:
        for tolerance in (2.0 * TOLERANCE, TOLERANCE) if wide else (TOLERANCE,):
            modes = trapped_modes(
                x, h, inputs.n2[row], inputs.n2_depth, float(inputs.f[row]),
                count=RANKS, tolerance=tolerance,
            )
            if np.all(modes.error <= TOLERANCE):
                break
    except WaveguideError:
        return None  # the caller falls back on a flat bottom and marks the node
    # rounding has spoilt the problem where a speed is not positive
    return modes if np.all(modes.phase_speed > 0.0) else None


def all_run_modes(
    runs: list[RunInputs],
    folder: Path,
    workers: int,
    report: Callable[[int, int], None] = lambda done, total: None,
) -> list[RankedModes]:
    """Modes of many runs, in parallel; finished runs are kept in files and taken up again.

    Parameters
    ----------
    runs : list of RunInputs
    folder : Path
        Where finished runs are kept; made if need be.
    workers : int
        Processes.
    report : callable, optional
        Told how many runs of how many are done.

    Returns
    -------
    list of RankedModes
    """
    folder.mkdir(parents=True, exist_ok=True)
    paths = [folder / f"{run.key()}.npz" for run in runs]
    results = {number: kept for number, path in enumerate(paths) if (kept := _kept(path))}
    report(len(results), len(runs))
    missing = [number for number in range(len(runs)) if number not in results]
    for number, result in _computed(runs, missing, workers):
        _keep(paths[number], result)
        results[number] = result
        report(len(results), len(runs))
    return [results[number] for number in range(len(runs))]


def _computed(
    runs: list[RunInputs], numbers: list[int], workers: int
) -> Iterator[tuple[int, RankedModes]]:
    """Results as they come."""
    if workers == 1 or len(numbers) < 2:
        yield from ((number, run_modes(runs[number])) for number in numbers)
        return
    with _one_thread_each():
        context = multiprocessing.get_context("spawn")
        pool = ProcessPoolExecutor(workers, mp_context=context)
        try:
            waiting = {pool.submit(run_modes, runs[number]): number for number in numbers}
            for future in as_completed(waiting):
                yield waiting.pop(future), future.result()
        finally:
            pool.shutdown(cancel_futures=True)


@contextmanager
def _one_thread_each() -> Iterator[None]:
    """Processes started within use one thread for linear algebra: the matrices are small."""
    names = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")
    before = {name: os.environ.get(name) for name in names}
    os.environ.update(dict.fromkeys(names, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value


def _keep(path: Path, result: RankedModes) -> None:
    part = path.with_suffix(".part")
    with part.open("wb") as file:
        np.savez(file, **{field.name: getattr(result, field.name) for field in fields(result)})
    part.replace(path)


def _kept(path: Path) -> RankedModes | None:
    """A finished run, None where there is no whole file."""
    try:
        with np.load(path) as stored:
            return RankedModes(**{field.name: stored[field.name] for field in fields(RankedModes)})
    except (OSError, ValueError, KeyError, BadZipFile):
        return None
