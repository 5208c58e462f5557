"""Shortest paths against networkx on random networks with parallel and closed steps."""

from __future__ import annotations

import networkx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from waveguide.network.graph import Network
from waveguide.network.search import Origin, Searcher

TINY = 1e-6
"""Each step counts 1e-9 more than its weight, for up to a thousand steps."""


def network_of(size, tail, head):
    """A network that is only a graph."""
    tail, head = np.asarray(tail, np.int64), np.asarray(head, np.int64)
    nodes, none = np.zeros(size), np.full(tail.size, -1)
    gap = np.zeros(0)
    return Network(
        lon=nodes, lat=nodes, line=nodes.astype(int), equatorial=nodes > 0, offshore=nodes,
        basin=nodes.astype(int), tail=tail, head=head, kind=np.zeros(tail.size, int),
        length=np.ones(tail.size), gap=none, passes=none, gap_width=gap, gap_length=gap,
        gap_sill=gap,
    )


weights = st.one_of(
    st.floats(0.0, 1e7), st.just(0.0), st.just(np.inf), st.just(np.nan), st.just(5.0)
)


@st.composite
def problems(draw):
    """A multigraph with weights and an origin of one to four entries."""
    size = draw(st.integers(1, 12))
    node = st.integers(0, size - 1)
    steps = draw(st.lists(st.tuples(node, node, weights), max_size=40))
    entries = draw(st.lists(st.tuples(node, st.floats(0.0, 20.0)), min_size=1, max_size=4))
    patience = draw(st.sampled_from([0.0, 1.0, 1e4]))
    return size, steps, entries, patience


def by_networkx(size, steps, entries, patience):
    """The same by another library, which keeps parallel edges by itself."""
    graph = networkx.MultiDiGraph()
    graph.add_nodes_from(range(size))
    for tail, head, weight in steps:
        if np.isfinite(weight):
            graph.add_edge(tail, head, weight=weight)
    for node, loss in entries:
        graph.add_edge("origin", node, weight=patience * loss)
    return networkx.single_source_dijkstra_path_length(graph, "origin", weight="weight")


@settings(deadline=None, max_examples=150)
@given(problems())
def test_costs_are_those_of_networkx(problem):
    size, steps, entries, patience = problem
    tail, head, weight = (list(part) for part in zip(*steps, strict=True)) if steps else ([],) * 3
    searcher = Searcher.of(network_of(size, tail, head))
    node, loss = (np.array(part) for part in zip(*entries, strict=True))
    reach = searcher.reach(np.array(weight, float), Origin(node, loss), patience)
    expected = by_networkx(size, steps, entries, patience)
    for place in range(size):
        if place in expected:
            assert reach.cost[place] == pytest.approx(expected[place], abs=TINY, rel=1e-12)
        else:
            assert reach.cost[place] == np.inf
            assert reach.entry_step[place] == -1


@settings(deadline=None, max_examples=150)
@given(problems())
def test_steps_lead_from_an_entry_to_the_node_at_the_stated_cost(problem):
    size, steps, entries, patience = problem
    tail, head, weight = (list(part) for part in zip(*steps, strict=True)) if steps else ([],) * 3
    network = network_of(size, tail, head)
    weight = np.array(weight, float)
    node, loss = (np.array(part) for part in zip(*entries, strict=True))
    reach = Searcher.of(network).reach(weight, Origin(node, loss), patience)
    for place in np.nonzero(np.isfinite(reach.cost))[0]:
        path = reach.steps_to(int(place), network)
        start = int(network.tail[path[0]]) if path.size else int(place)
        assert start in node
        assert np.array_equal(network.head[path][:-1], network.tail[path][1:])
        if path.size:
            assert network.head[path[-1]] == place
        entry = patience * loss[node == start].min()
        assert entry + weight[path].sum() == pytest.approx(
            reach.cost[place], abs=TINY, rel=1e-12
        )


def test_fastest_of_parallel_steps_is_taken_whatever_their_order():
    for order in ([9.0, 2.0, 5.0], [2.0, 5.0, 9.0], [5.0, np.nan, 2.0]):
        network = network_of(2, [0, 0, 0], [1, 1, 1])
        reach = Searcher.of(network).reach(np.array(order), Origin(np.array([0]), np.zeros(1)))
        assert reach.cost[1] == pytest.approx(2.0)
        assert reach.steps_to(1, network).tolist() == [int(np.nanargmin(order))]


def test_searcher_is_used_again_with_other_weights_and_origins():
    network = network_of(3, [0, 1, 0], [1, 2, 2])
    searcher = Searcher.of(network)
    origin = Origin(np.array([0]), np.zeros(1))
    direct = searcher.reach(np.array([1.0, 1.0, 5.0]), origin)
    closed = searcher.reach(np.array([1.0, np.inf, 5.0]), origin)
    assert direct.steps_to(2, network).tolist() == [0, 1]
    assert closed.steps_to(2, network).tolist() == [2]
    assert searcher.reach(np.array([1.0, 1.0, 5.0]), Origin(np.array([1]), np.zeros(1))).cost[
        0] == np.inf


def test_patience_trades_time_for_loss_at_the_origin():
    # Entry 0 is faint (3 nepers lost) but next door; entry 1 is strong but 10 s away.
    network = network_of(3, [0, 1], [2, 2])
    searcher, weight = Searcher.of(network), np.array([1.0, 10.0])
    origin = Origin(np.array([0, 1]), np.array([3.0, 0.0]))
    assert searcher.reach(weight, origin).steps_to(2, network).tolist() == [0]
    assert searcher.reach(weight, origin, 2.9).steps_to(2, network).tolist() == [0]
    assert searcher.reach(weight, origin, 3.1).steps_to(2, network).tolist() == [1]


def test_negative_weights_are_refused():
    network = network_of(2, [0], [1])
    with pytest.raises(ValueError, match="weights ≥ 0"):
        Searcher.of(network).reach(np.array([-1.0]), Origin(np.array([0]), np.zeros(1)))
