"""Lines cut at the date line lose nothing and never run across the map."""

from __future__ import annotations

import numpy as np
from hypothesis import example, given
from hypothesis import strategies as st

from waveguide.geodesy import wrap_longitude
from waveguide.report.routes import (
    leg_line,
    legs_of,
    routes_of,
    split_at_date_line,
    unwrapped,
    vertices_of,
)

steps = st.lists(st.tuples(st.floats(-60, 60), st.floats(-20, 20)), min_size=1, max_size=12)


@given(st.floats(-180, 180), steps)
@example(180.0, [(1.0, 0.0)])
@example(179.0, [(1.0, 0.0), (1.0, 0.0)])
@example(179.0, [(1.0, 0.0), (-1.0, 0.0)])
@example(180.0, [(0.0, 5.0)])
@example(-180.0, [(-1.0, 5.0)])
def test_split_at_the_date_line(start, moves):
    dlon, dlat = np.transpose(moves)
    lon = np.asarray(wrap_longitude(start + np.concatenate([[0.0], np.cumsum(dlon)])))
    lat = np.concatenate([[0.0], np.cumsum(dlat)])
    pieces = split_at_date_line(lon, lat)
    # RFC 7946, section 3.1.9: no piece crosses 180°; each has two positions or more.
    for x, y in pieces:
        assert x.size == y.size >= 2
        assert np.all(np.abs(x) <= 180.0)
        assert np.all(np.abs(np.diff(x)) <= 60.0 + 1e-6)
    # Together they are as long as the line was, and they join at the date line.
    length = np.abs(np.diff(unwrapped(lon, 0.0))).sum()
    assert np.isclose(sum(np.abs(np.diff(x)).sum() for x, _ in pieces), length, atol=1e-6)
    climb = sum(np.abs(np.diff(y)).sum() for _, y in pieces)
    assert np.isclose(climb, np.abs(np.diff(lat)).sum(), atol=1e-6)


def test_a_crossing_lies_where_the_line_meets_the_meridian():
    pieces = split_at_date_line(np.array([178.0, -178.0]), np.array([0.0, 4.0]))
    assert [p[0].tolist() for p in pieces] == [[178.0, 180.0], [-180.0, -178.0]]
    assert [p[1].tolist() for p in pieces] == [[0.0, 2.0], [2.0, 4.0]]


def test_ragged_indices(arrivals):
    assert routes_of(arrivals, 0, 0) == [0, 1]
    assert routes_of(arrivals, 2, 0) == []
    assert [list(legs_of(arrivals, route)) for route in range(4)] == [
        [0, 1, 2], [3, 4, 5], [6, 7], [8, 9],
    ]  # fmt: skip
    assert list(vertices_of(arrivals, 1)) == [2, 3, 4, 5, 6]
    assert leg_line(arrivals, 1)[0].tolist() == [165.0, 175.0, -175.0, -120.0, -80.5]


def test_a_leg_without_vertices_is_the_line_between_its_ends(arrivals):
    kept = arrivals.isel(vertex=arrivals["vertex_leg"].values != 1)
    assert leg_line(kept, 1)[0].tolist() == [165.0, -80.5]
