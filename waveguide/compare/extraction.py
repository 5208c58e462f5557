"""One pass over model output: the distance–time diagram and the cells worth keeping.

The output is taken chunk by chunk as it is stored. Of every chunk that holds a wanted cell at a
wanted time, the cells are multiplied by a sparse matrix of weights onto the bins of all routes at
once, and kept themselves; then the chunk is forgotten. So every chunk is read once, chunks
without wanted cells are not read, and what is held in memory is one chunk per worker and the
answer.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from itertools import pairwise, product
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from waveguide.compare.cells import GuideCells
from waveguide.compare.model_grid import has_dask

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]
Index = NDArray[np.intp]

LARGEST_PIECE = 64_000_000
"""Values read at once without dask (0.25 GB of single precision)."""


@dataclass(frozen=True)
class Extraction:
    """What one pass finds.

    Attributes
    ----------
    diagram : ndarray, shape (nt, nbin)
        Weighted mean over the cells of every bin, NaN where there are none.
    values : ndarray of float32, shape (nt, ncell)
        The cells themselves.
    chunks : int
        Chunks that were read.
    """

    diagram: Array
    values: NDArray[np.float32]
    chunks: int


@dataclass(frozen=True)
class _Piece:
    """A block of the output: its extent, and its wanted cells within it and among all."""

    extent: tuple[slice, slice, slice]
    local: Index
    among: Index


@dataclass(frozen=True)
class _Part:
    """What one piece adds."""

    rows: slice
    among: Index
    values: NDArray[np.float32]
    total: Array
    weight: Array


def extract(
    data: xr.DataArray, first: int, last: int, cells: GuideCells,
    report: Callable[[int, int], None] = lambda done, total: None,
) -> Extraction:
    """Go once through the output between two times.

    Parameters
    ----------
    data : xarray.DataArray, dimensions (time, row, column)
        Backed by dask, or lazily by a file, or in memory.
    first, last : int
        First time wanted, and the one after the last.
    cells : GuideCells
    report : callable, optional
        Told how many pieces are done, of how many.

    Returns
    -------
    Extraction
    """
    shape = data.shape
    pieces = list(_pieces(_bounds(data), shape[2], first, last, cells))
    parts = _parts(data, pieces, (first, last), cells.weights)
    values = np.full((last - first, cells.cell.size), np.nan, np.float32)
    total = np.zeros((last - first, cells.bin_distance.size))
    weight = np.zeros_like(total)
    for done, part in enumerate(parts, start=1):
        values[part.rows, part.among] = part.values
        total[part.rows] += part.total
        weight[part.rows] += part.weight
        report(done, len(pieces))
    known = weight > 0.0
    diagram = np.where(known, total / np.where(known, weight, 1.0), np.nan)
    return Extraction(diagram, values, len(pieces))


def _bounds(data: xr.DataArray) -> tuple[Index, Index, Index]:
    """Edges of the chunks along each dimension."""
    if data.chunks is not None:
        sizes = data.chunks
    else:
        stored = _stored_chunks(data)
        sizes = tuple(
            tuple(min(step, n - start) for start in range(0, n, step))
            for n, step in zip(data.shape, stored, strict=True)
        )
    edges = [np.concatenate([[0], np.cumsum(part)]).astype(np.intp) for part in sizes]
    return edges[0], edges[1], edges[2]


def _stored_chunks(data: xr.DataArray) -> tuple[int, int, int]:
    """Pieces for output that dask does not divide: whole stored chunks of rows and columns."""
    _, ny, nx = data.shape
    given = data.encoding.get("chunksizes")
    steps = int(given[0]) if given is not None and len(given) == 3 else 1
    fit = max(LARGEST_PIECE // max(ny * nx, 1), 1)
    return max(fit // steps * steps, steps), ny, nx


def _pieces(
    bounds: tuple[Index, Index, Index], columns: int, first: int, last: int, cells: GuideCells
) -> Iterator[_Piece]:
    """Blocks that hold wanted cells at wanted times, times outermost."""
    row, column = np.divmod(cells.cell, columns)
    times = [
        (a, b) for a, b in pairwise(bounds[0]) if a < last and b > first
    ]
    across = []
    for (y0, y1), (x0, x1) in product(*(
        list(pairwise(edges)) for edges in bounds[1:]
    )):
        among = np.flatnonzero((row >= y0) & (row < y1) & (column >= x0) & (column < x1))
        if among.size:
            local = (row[among] - y0) * (x1 - x0) + column[among] - x0
            across.append((slice(int(y0), int(y1)), slice(int(x0), int(x1)), local, among))
    for a, b in times:
        for rows, across_columns, local, among in across:
            yield _Piece((slice(int(a), int(b)), rows, across_columns), local, among)


def _parts(
    data: xr.DataArray, pieces: list[_Piece], wanted: tuple[int, int], weights: csr_array
) -> Iterator[_Part]:
    """What the pieces add, computed by dask where it divides the output, else one by one."""
    if data.chunks is None or not has_dask():
        for piece in pieces:
            block = np.asarray(data[piece.extent].values)
            yield _reduce(block, piece, wanted, weights[piece.among])
        return
    import dask

    blocks = {_start(extent): block for extent, block in _dask_blocks(data.data)}
    for batch in _batches(pieces):
        tasks = [
            dask.delayed(_reduce)(
                blocks[_start(piece.extent)], piece, wanted, weights[piece.among]
            )
            for piece in batch
        ]
        yield from dask.compute(*tasks)


def _batches(pieces: list[_Piece], size: int = 16) -> Iterator[list[_Piece]]:
    """A few pieces at a time, so that results are taken off and progress is told."""
    for start in range(0, len(pieces), size):
        yield pieces[start : start + size]


def _dask_blocks(array: Any) -> Iterator[tuple[tuple[slice, slice, slice], Any]]:
    """Extent and delayed value of each chunk."""
    edges = [np.concatenate([[0], np.cumsum(part)]) for part in array.chunks]
    delayed = array.to_delayed()
    for index in np.ndindex(*delayed.shape):
        extent = tuple(
            slice(int(e[i]), int(e[i + 1])) for e, i in zip(edges, index, strict=True)
        )
        yield (extent[0], extent[1], extent[2]), delayed[index]


def _start(extent: tuple[slice, slice, slice]) -> tuple[int, int, int]:
    return extent[0].start, extent[1].start, extent[2].start


def _reduce(
    block: NDArray[Any], piece: _Piece, wanted: tuple[int, int], weights: csr_array
) -> _Part:
    """Weighted sums and weights onto the bins, and the cells themselves.

    Parameters
    ----------
    block : ndarray, shape (nt, ny, nx)
    piece : _Piece
    wanted : (int, int)
        First time wanted, and the one after the last.
    weights : csr_array, shape (ncell of the piece, nbin)

    Returns
    -------
    _Part
    """
    begin = piece.extent[0].start
    skip, stop = max(wanted[0] - begin, 0), min(wanted[1] - begin, block.shape[0])
    picked = block.reshape(block.shape[0], -1)[skip:stop, piece.local].astype(np.float32)
    there = np.isfinite(picked)
    total = np.asarray((weights.T @ np.where(there, picked, 0.0).T.astype(float)).T)
    weight = np.asarray((weights.T @ there.T.astype(float)).T)
    start = begin + skip - wanted[0]
    return _Part(slice(start, start + picked.shape[0]), piece.among, picked, total, weight)
