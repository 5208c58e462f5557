"""Following modes by overlap: crossings, scattering, rings."""

from __future__ import annotations

import numpy as np

from waveguide.network.continuity import followed_ranks

STEP = 20e3


def ring(count, ranks=4):
    """Overlaps of a coast on which nothing changes."""
    return np.tile(np.eye(ranks), (count, 1, 1))


def exchange(overlap, at, first, second):
    """Two ranks change places between node `at` and the next."""
    overlap[at][:, [first, second]] = overlap[at][:, [second, first]]


def test_without_crossings_number_and_rank_agree():
    ranks = followed_ranks(ring(30), np.full(30, STEP), 3)
    np.testing.assert_array_equal(ranks, np.tile([0, 1, 2], (30, 1)))


def test_a_mode_is_followed_through_a_crossing_and_back():
    overlap = ring(30)
    exchange(overlap, 9, 0, 1)
    exchange(overlap, 19, 0, 1)
    ranks = followed_ranks(overlap, np.full(30, STEP), 3)
    np.testing.assert_array_equal(ranks[:10], np.tile([0, 1, 2], (10, 1)))
    np.testing.assert_array_equal(ranks[10:20], np.tile([1, 0, 2], (10, 1)))
    np.testing.assert_array_equal(ranks[20:], np.tile([0, 1, 2], (10, 1)))


def test_a_mode_that_never_crosses_back_returns_to_its_rank_where_it_is_scattered():
    overlap = ring(200)
    exchange(overlap, 99, 0, 1)
    overlap[104, :2, :2] = np.sqrt(0.5) * np.array([[1.0, 1.0], [-1.0, 1.0]])
    ranks = followed_ranks(overlap, np.full(200, STEP), 2)
    assert ranks[102, 0] == 1  # beyond the crossing
    assert ranks[110, 0] == 0  # beyond the scattering: 95 nodes would cost 19 nepers, it costs 0.35


def test_an_avoided_crossing_that_is_resolved_keeps_the_rank():
    """Two modes that turn into each other by 90 degrees over 30 nodes."""
    overlap = ring(60)
    turn = np.radians(3.0)
    for k in range(15, 45):
        overlap[k, :2, :2] = [[np.cos(turn), np.sin(turn)], [-np.sin(turn), np.cos(turn)]]
    ranks = followed_ranks(overlap, np.full(60, STEP), 3)
    np.testing.assert_array_equal(ranks, np.tile([0, 1, 2], (60, 1)))


def test_the_sign_of_an_overlap_does_not_matter():
    overlap = ring(20)
    exchange(overlap, 4, 1, 2)
    exchange(overlap, 9, 1, 2)
    ranks = followed_ranks(overlap, np.full(20, STEP), 3)
    np.testing.assert_array_equal(followed_ranks(-overlap, np.full(20, STEP), 3), ranks)


def test_unknown_overlaps_keep_the_ranks_and_no_rank_is_used_twice():
    rng = np.random.default_rng(4)
    overlap = np.linalg.qr(rng.normal(size=(80, 4, 4)))[0]
    overlap[30:40] = np.nan
    ranks = followed_ranks(overlap, np.full(80, STEP), 3)
    assert all(np.unique(row).size == 3 for row in ranks)
    np.testing.assert_array_equal(ranks[0], [0, 1, 2])
