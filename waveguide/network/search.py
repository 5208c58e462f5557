"""Shortest paths through a wave-guide network.

Time along a route and what it loses on the way (in nepers) both add up, and neither is negative,
so every question about routes is a shortest path under the weight time + patience × loss:
patience 0 finds the earliest route, a very large one the strongest, and values between find the
routes that trade one for the other.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_matrix
from scipy.sparse.csgraph import dijkstra

from waveguide.network.graph import Network

Array = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class Origin:
    """Where a signal enters the network.

    Attributes
    ----------
    node : ndarray of int, shape (k,)
        Entry nodes.
    loss : ndarray, shape (k,)
        What is lost on the way to each of them (nepers, ≥ 0).
    """

    node: Index
    loss: Array


@dataclass(frozen=True)
class Reach:
    """Shortest paths from an origin to every node.

    Attributes
    ----------
    cost : ndarray, shape (n,)
        Weight of the path, infinite where there is none.
    entry_step : ndarray of int, shape (n,)
        Step by which the path arrives at a node; −1 at an entry node and where there is no path.
    """

    cost: Array
    entry_step: Index

    def steps_to(self, node: int, network: Network) -> Index:
        """Steps of the path to a node, in order of travel, shape (k,)."""
        steps = []
        while (step := self.entry_step.item(node)) >= 0:
            steps.append(step)
            node = network.tail.item(step)
        return np.array(steps[::-1], dtype=np.int64)


@dataclass(frozen=True)
class Searcher:
    """A network laid out for repeated searches with changing weights.

    Attributes
    ----------
    network : Network
    pair : ndarray of int, shape (m,)
        Row of the compressed graph that each step belongs to; parallel steps share a row.
    indices, indptr : ndarray of int
        Compressed sparse rows of the graph without an origin.
    """

    network: Network
    pair: Index
    indices: NDArray[np.int32]
    indptr: NDArray[np.int32]

    @classmethod
    def of(cls, network: Network) -> Searcher:
        """Lay a network out."""
        key = network.tail * network.size + network.head
        unique, pair = np.unique(key, return_inverse=True)
        tails, heads = unique // network.size, unique % network.size
        indptr = np.searchsorted(tails, np.arange(network.size + 2))
        return cls(network, pair.astype(np.int64), heads.astype(np.int32),
                   indptr.astype(np.int32))

    def reach(self, weight: Array, origin: Origin, patience: float = 0.0) -> Reach:
        """Shortest paths from an origin to all nodes.

        Parameters
        ----------
        weight : ndarray, shape (m,)
            Weight of every step, ≥ 0; infinite or NaN closes a step.
        origin : Origin
        patience : float
            Weight of one neper, applied to the origin's losses.

        Returns
        -------
        Reach

        Raises
        ------
        ValueError
            If a weight is negative, which Dijkstra's method cannot use.
        """
        usable = np.where(np.isfinite(weight), weight, np.inf)
        if usable.min(initial=0.0) < 0.0:
            raise ValueError(f"weight: smallest is {usable.min():g}; steps need weights ≥ 0")
        order = np.lexsort((usable, self.pair))
        first = np.searchsorted(self.pair[order], np.arange(self.indices.size))
        best = order[first]
        graph = self._with_origin(usable[best], origin, patience)
        n = self.network.size
        cost, before = dijkstra(graph, indices=n, return_predecessors=True)
        entry = np.full(n, -1, dtype=np.int64)
        inner = np.nonzero((before[:n] >= 0) & (before[:n] < n))[0]
        entry[inner] = best[self._row_of(before[inner].astype(np.int64), inner)]
        return Reach(cost[:n], entry)

    def _row_of(self, tail: Index, head: Index) -> Index:
        """Row of the compressed graph for pairs of nodes that it holds."""
        tails = np.repeat(np.arange(self.network.size), np.diff(self.indptr[:-1]))
        keys = tails * self.network.size + self.indices
        return np.searchsorted(keys, tail * self.network.size + head)

    def _with_origin(self, weight: Array, origin: Origin, patience: float) -> csr_matrix:
        """The graph with one more node that leads to the entry nodes.

        An explicit zero would be read as a missing edge by some of scipy's routines, so weights
        are kept above zero by an amount (1e-9 s) far below any printed digit.
        """
        order = np.argsort(origin.node, kind="stable")
        extra = patience * origin.loss[order] if patience > 0.0 else np.zeros(order.size)
        data = np.concatenate([weight, extra]) + 1e-9
        indices = np.concatenate([self.indices, origin.node[order].astype(np.int32)])
        indptr = self.indptr.copy()
        indptr[-1] = data.size
        n = self.network.size
        return csr_matrix((data, indices, indptr), shape=(n + 1, n + 1))
