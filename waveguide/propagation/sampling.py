"""Quasi-random samples, their percentiles with an error, and whose doing the spread is.

A sample consists of `SCRAMBLES` independently scrambled Sobol' sequences of one length. Each
covers the space evenly, so percentiles converge faster than those of random numbers; and since
the sequences are independent, the scatter of a percentile between them tells its error (Owen
1997). Points of a sequence must be a power of two, so a size is rounded up to that.

The split of the variance is by first-order Sobol' indices, Var(E[y|xᵢ])/Var(y): the share of the
variance that would go if input i were known. E[y|xᵢ] is taken as a polynomial of third degree in
xᵢ. Hermite polynomials being orthonormal for normal xᵢ, its coefficients are means of y Heⱼ(xᵢ)/√j!
over the sample, and the index is the sum of their squares over the variance, less what random
numbers would give to an input without effect (a share of 1/members for each coefficient). What the
indices lack of one is due to inputs acting together, and to sampling.

References
----------
Owen (1997), SIAM J. Numer. Anal. 34, 1884 (scrambled nets and their error).
Sobol' (1993), Math. Model. Comput. Exp. 1, 407 (indices).
Sudret (2008), Reliab. Eng. Syst. Saf. 93, 964 (indices from orthogonal polynomials).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri
from scipy.stats import qmc

from waveguide.errors import InputError

Array = NDArray[np.float64]

SCRAMBLES = 8
_LEAST = 1e-9  # probability; keeps normal values finite where a point falls on 0


class Percentile(NamedTuple):
    """Percentiles of a sample.

    Attributes
    ----------
    value : ndarray, shape (k,)
    error : ndarray, shape (k,)
        Standard error, from the scatter between the scrambled sequences.
    """

    value: Array
    error: Array


def sample_size(members: int) -> int:
    """Members of the sample that is drawn for at least `members` (a power of two per sequence)."""
    if members < 1:
        raise InputError(
            f"members: {members}; an ensemble needs at least one member, and some thousand for "
            "percentiles that mean anything"
        )
    each = -(-members // SCRAMBLES)
    return SCRAMBLES * (1 << (each - 1).bit_length())


def normal_sample(members: int, inputs: int, seed: int) -> Array:
    """Independent standard normal values from scrambled Sobol' sequences.

    Parameters
    ----------
    members : int
        Rounded up, see `sample_size`.
    inputs : int
    seed : int
        The same seed gives the same sample.

    Returns
    -------
    ndarray, shape (sample_size, inputs)
        One sequence after another.

    Raises
    ------
    InputError
        If there are no members, or the seed is not a whole number ≥ 0.
    """
    size = sample_size(members)
    if isinstance(seed, bool) or not isinstance(seed, int | np.integer) or seed < 0:
        raise InputError(f"seed: {seed!r}; write a whole number of 0 or more, as in seed = 1")
    exponent = int(np.log2(size // SCRAMBLES))
    streams = np.random.SeedSequence(int(seed)).spawn(SCRAMBLES)
    points = [
        qmc.Sobol(inputs, rng=np.random.default_rng(stream)).random_base2(exponent)
        for stream in streams
    ]
    return np.asarray(ndtri(np.clip(np.concatenate(points), _LEAST, 1.0 - _LEAST)))


def percentiles(values: Array, shares: Array) -> Percentile:
    """Percentiles of a sample that consists of scrambled sequences.

    Parameters
    ----------
    values : ndarray, shape (members,)
    shares : ndarray, shape (k,)
        0 to 1.

    Returns
    -------
    Percentile
    """
    each = np.quantile(values.reshape(SCRAMBLES, -1), shares, axis=1)
    error = each.std(axis=1, ddof=1) / np.sqrt(SCRAMBLES)
    return Percentile(np.quantile(values, shares), error)


def share_error(members: int) -> float:
    """Standard error that shares by :func:`first_order_shares` do not exceed, measured over seeds.

    Parameters
    ----------
    members : int

    Returns
    -------
    float
        1.3/√members, at most 1.
    """
    return min(1.0, 1.3 / float(np.sqrt(members)))


def first_order_shares(sample: Array, values: Array) -> Array:
    """First-order Sobol' indices of every input.

    Parameters
    ----------
    sample : ndarray, shape (members, inputs)
        Independent standard normal inputs.
    values : ndarray, shape (k, members)
        Several outputs.

    Returns
    -------
    ndarray, shape (k, inputs)
        0 to 1; all zero where the values do not vary.
    """
    away = values - values.mean(axis=1, keepdims=True)
    variance = np.sum(away**2, axis=1)
    varies = variance > 1e-24 * np.sum(values**2, axis=1)
    x, square = sample, sample * sample
    basis = (x, (square - 1.0) / np.sqrt(2.0), x * (square - 3.0) / np.sqrt(6.0))
    explained = sum((away @ polynomial) ** 2 for polynomial in basis) / sample.shape[0]
    share = np.asarray(explained) / np.where(varies, variance, 1.0)[:, None]
    share = share - len(basis) / sample.shape[0]
    return np.where(varies[:, None], np.clip(share, 0.0, 1.0), 0.0)
