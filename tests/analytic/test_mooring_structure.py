"""Moorings of several instruments against the vertical structure of modes with closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.signal import lfilter

from waveguide.compare.moorings import (
    compare_mooring,
    explained_variance,
    gradient_from_n2,
    responses,
    structure_word,
)
from waveguide.compare.regression import Regression
from waveguide.compare.series import Series
from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.vertical import vertical_modes

DEPTH, N = 4000.0, 2e-3
BAND = (10.0, 60.0)
MODES = np.array([1, 2])


@pytest.fixture(scope="module")
def uniform():
    """Modes 1 and 2 of uniform stratification."""
    z = np.linspace(0.0, DEPTH, 801)
    return vertical_modes(np.full(z.size, N**2), z, DEPTH, 2, rigid_lid=True)


def red(seed, n=2000, memory=0.9):
    white = np.random.default_rng(seed).standard_normal(n + 200)
    return lfilter([np.sqrt(1.0 - memory**2)], [1.0, -memory], white)[200:]


def series(name, values, quantity, depth):
    start = np.datetime64("2031-01-01T12:00:00")
    return Series(name, quantity, (-140.0, 0.0), depth, start, 1.0, values)


def test_responses_are_those_of_uniform_stratification(uniform):
    # p ∝ cos(nπz/H), c = NH/nπ and, from g η = p(0)/ρ₀ and p_z = −ρ₀ N² ζ, an isopycnal rises by
    # −(g/N²)(nπ/H) sin(nπz/H) per metre of sea level (Gill 1982, 6.10); DERIVED, rigid lid.
    depth, mode = 1000.0, np.array([1, 2])
    k = mode * np.pi / DEPTH
    np.testing.assert_allclose(
        responses("bottom pressure", depth, uniform), np.cos(k * depth), atol=0.003
    )
    np.testing.assert_allclose(
        responses("alongshore velocity", depth, uniform),
        GRAVITY * k / N * np.cos(k * depth), rtol=0.01, atol=1e-3,
    )
    rise = -GRAVITY / N**2 * k * np.sin(k * depth)
    np.testing.assert_allclose(
        np.abs(responses("isopycnal depth", depth, uniform)), np.abs(rise), rtol=0.01
    )
    warming = responses("temperature", depth, uniform, gradient=0.01)
    np.testing.assert_allclose(warming, -0.01 * rise, rtol=0.01)  # sinking isopycnals warm


def test_an_isopycnal_is_deeper_where_sea_level_is_higher(uniform):
    assert (responses("isopycnal depth", 500.0, uniform) > 0.0).all()


def test_an_instrument_below_the_bottom_is_refused(uniform):
    with pytest.raises(InputError, match="water there is 4000 m deep"):
        responses("temperature", 4200.0, uniform, gradient=0.01)


def test_a_temperature_gradient_of_thermal_stratification():
    # N² = g α dT/dz: 0.02 °C/m is 3.9e-5 1/s² with α = 2e-4; DERIVED.
    assert gradient_from_n2(GRAVITY * 2e-4 * 0.02) == pytest.approx(0.02)


def mooring(uniform, mode, noise=0.3, seed=0):
    """Four instruments that see one mode and noise of their own, and their responses."""
    instruments = [("sea level", 0.0), ("temperature", 300.0), ("alongshore velocity", 50.0),
                   ("bottom pressure", 3900.0)]  # fmt: skip
    rows = np.array([responses(q, d, uniform, 0.02) for q, d in instruments])
    signal = 0.05 * red(seed)
    records = []
    for i, ((quantity, depth), row) in enumerate(zip(instruments, rows, strict=True)):
        seen = row[mode - 1]
        own = noise * 0.05 * abs(seen) * red(100 * seed + i + 1)
        records.append(series(f"{quantity} {depth:g}", seen * signal + own, quantity, depth))
    return records, rows


def test_the_mode_that_is_there_is_told_from_the_other(uniform):
    for mode in (1, 2):
        records, rows = mooring(uniform, mode)
        result = compare_mooring(records, rows, MODES, BAND)
        assert [part.words[mode - 1] for part in result.instruments] == ["consistent"] * 3
        others = {part.words[2 - mode] for part in result.instruments}
        assert others & {"too weak", "too strong", "wrong sign"}
        assert np.argmax(result.explained) == mode - 1
        assert result.explained[mode - 1] > 0.85
        assert result.pattern_variance >= result.explained.max()


def test_a_mooring_of_noise_is_no_mode(uniform):
    records, rows = mooring(uniform, 1)
    for i, record in enumerate(records):
        record.values[:] = np.std(record.values) * red(50 + i)
    result = compare_mooring(records, rows, MODES, BAND)
    words = [word for part in result.instruments for word in part.words]
    assert "consistent" not in words
    assert result.pattern_variance < 0.5


def test_gaps_of_instruments_are_left_out_together(uniform):
    records, rows = mooring(uniform, 1)
    records[1].values[300:500] = np.nan
    records[3].values[800:1000] = np.nan
    result = compare_mooring(records, rows, MODES, BAND)
    assert all(part.words[0] == "consistent" for part in result.instruments)
    assert result.explained[0] > 0.85


@pytest.mark.parametrize(
    ("low", "high", "predicted", "word"),
    [
        (0.9, 1.1, 1.0, "consistent"), (-1.1, -0.9, -1.0, "consistent"),
        (0.1, 0.3, 1.0, "too weak"), (1.4, 1.6, 1.0, "too strong"),
        (-1.1, -0.9, 1.0, "wrong sign"), (-0.1, 0.9, 1.0, "not resolvable"),
        (-0.1, 0.1, 1.0, "too weak"),
    ],
)  # fmt: skip
def test_words(low, high, predicted, word):
    assert structure_word(Regression(0.5 * (low + high), low, high, 0.5, 100.0), predicted) == word


def test_explained_variance_of_one_pattern_is_all():
    pattern = np.array([1.0, -2.0, 0.5])
    values = pattern[:, None] * red(3, 500)
    explained, best = explained_variance(values, np.stack([pattern, [1.0, 1.0, 1.0]], axis=1))
    assert explained[0] == pytest.approx(1.0)
    # (1 − ½ + 2)²/(3 · 5¼): the other pattern by the same standard deviations; DERIVED.
    assert explained[1] == pytest.approx(6.25 / 15.75)
    assert best == pytest.approx(1.0)
