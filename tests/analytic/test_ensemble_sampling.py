"""Quasi-random samples, their percentiles with errors, and the split of a variance."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.stats import norm

from waveguide.errors import InputError
from waveguide.propagation.sampling import (
    first_order_shares,
    normal_sample,
    percentiles,
    sample_size,
    share_error,
)

SHARES = np.array([0.1, 0.5, 0.9])


@pytest.mark.parametrize(
    ("members", "size"), [(1, 8), (8, 8), (9, 16), (8192, 8192), (8193, 16384), (10000, 16384)]
)
def test_size_is_rounded_up_to_eight_powers_of_two(members: int, size: int) -> None:
    assert sample_size(members) == size
    assert normal_sample(members, 3, 0).shape == (size, 3)


def test_a_seed_gives_one_sample_and_another_seed_another() -> None:
    assert_array_equal(normal_sample(512, 11, 7), normal_sample(512, 11, 7))
    assert np.abs(normal_sample(512, 11, 7) - normal_sample(512, 11, 8)).max() > 0.5


def test_inputs_are_standard_normal_and_independent() -> None:
    x = normal_sample(8192, 11, 1)
    assert np.isfinite(x).all()
    assert_allclose(x.mean(axis=0), 0.0, atol=2e-3)
    assert_allclose(np.cov(x.T), np.eye(11), atol=0.02)


def test_percentiles_converge_faster_than_random_numbers_and_tell_their_error() -> None:
    weights = np.linspace(0.3, 1.2, 11)
    exact = norm.ppf(SHARES) * np.linalg.norm(weights)
    misses = []
    for seed in range(12):
        found = percentiles(normal_sample(4096, 11, seed) @ weights, SHARES)
        misses.append((found.value - exact) / found.error)
    # of a normal miss over an error with 7 degrees of freedom the root mean square is 1.18
    assert 0.6 < np.sqrt(np.mean(np.square(misses))) < 1.8
    random = np.sqrt(0.1 * 0.9 / 4096) / norm.pdf(norm.ppf(0.1)) * np.linalg.norm(weights)
    assert np.median(found.error) < 0.6 * random


def test_error_falls_as_the_ensemble_grows() -> None:
    errors = [
        np.mean([
            percentiles(normal_sample(n, 11, seed).sum(axis=1), SHARES).error.mean()
            for seed in range(6)
        ])
        for n in (256, 2048, 16384)
    ]
    # random numbers would gain √8 = 2.8 each time
    assert errors[0] > 2.8 * errors[1] > 2.8**2 * errors[2]


# DERIVED: of Σ aᵢxᵢ the index of xᵢ is aᵢ²/Σa².
def test_shares_of_a_sum_are_those_of_the_squares() -> None:
    x = normal_sample(8192, 4, 2)
    a = np.array([3.0, 2.0, 1.0, 0.0])
    assert_allclose(first_order_shares(x, (x @ a)[None])[0], a**2 / 14.0, atol=2e-3)


# DERIVED: of x₁² + x₁³/√15 + x₂ the variances are 2, 1 and 1; of x₁x₂ no input alone has a share.
def test_shares_of_curved_and_of_joint_effects() -> None:
    x = normal_sample(16384, 3, 5)
    curved = x[:, 0] ** 2 + x[:, 0] ** 3 / np.sqrt(15.0) + x[:, 1]
    joint = x[:, 0] * x[:, 1]
    shares = first_order_shares(x, np.stack([curved, joint]))
    assert_allclose(shares[0], [0.75, 0.25, 0.0], atol=0.02)
    assert_allclose(shares[1], 0.0, atol=5e-3)


# DERIVED: exp(σx) has variance e^(2σ²) − e^(σ²), of which the first three Hermite terms take
# σ² + σ⁴/2 + σ⁶/6 over e^(σ²) − 1: all but 6e-4 for σ = 0.5.
@pytest.mark.parametrize("members", [64, 512, 2048])
def test_error_of_shares_is_no_larger_than_it_is_told(members: int) -> None:
    weight = np.linspace(0.2, 1.0, 11)
    found = []
    for seed in range(12):
        x = normal_sample(members, weight.size, seed)
        values = np.exp(x @ weight / 6.0) + 0.3 * x[:, 0] * x[:, 1]
        found.append(first_order_shares(x, values[None])[0])
    assert np.std(found, axis=0).max() < share_error(members)
    assert share_error(1) == 1.0


def test_third_degree_is_enough_for_a_lognormal() -> None:
    x = normal_sample(16384, 2, 6)
    assert_allclose(first_order_shares(x, np.exp(0.5 * x[:, :1].T))[0], [1.0, 0.0], atol=5e-3)


def test_what_does_not_vary_has_no_shares() -> None:
    x = normal_sample(64, 3, 0)
    shares = first_order_shares(x, np.stack([np.full(64, 5.0), np.zeros(64)]))
    assert_array_equal(shares, 0.0)


@pytest.mark.parametrize("members", [0, -8])
def test_an_ensemble_of_nobody_is_refused(members: int) -> None:
    with pytest.raises(InputError, match=f"members: {members}; .* at least one member"):
        normal_sample(members, 3, 0)


@pytest.mark.parametrize("seed", [1.5, "1", -1, None, True])
def test_a_seed_that_is_no_whole_number_is_refused(seed: object) -> None:
    with pytest.raises(InputError, match=r"seed: .* whole number of 0 or more"):
        normal_sample(64, 3, seed)  # type: ignore[arg-type]
