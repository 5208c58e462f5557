"""Straits and facing coasts: limits, energy, and the sill."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.errors import InputError
from waveguide.modes.vertical import sill_share
from waveguide.propagation.gaps import end_correction, facing_coast_share, passage

F, C = 1e-4, 2.0
R = C / F


def test_energy_sums_to_one() -> None:
    random = np.random.default_rng(3)
    omega, width, length = F * random.random(500), R * random.random(500) * 3, R * 9
    share = random.random(500)
    out = passage(omega, width + 1.0, length, F, C, share)
    total = np.abs(out.through) ** 2 + np.abs(out.across) ** 2 + out.lost
    assert_allclose(total, 1.0, rtol=1e-9)
    assert np.all(out.lost >= 0.0)


def test_geostrophic_control_of_a_narrow_strait() -> None:
    # Toulany & Garrett (1984, J. Phys. Oceanogr. 14, 649): 1/(1 − iωL/(|f|W)) for exp(−iωt);
    # corrections are of the order of W/R and ωL/c
    omega, width, length = 0.01 * F, 0.01 * R, 2.0 * R
    out = passage(omega, width, length, -F, C)
    control = 1.0 / (1.0 - 1j * omega * (length + end_correction(width, R)) / (F * width))
    assert_allclose(out.through, control, atol=0.01)
    assert_allclose(out.across, 1.0 - control, atol=0.02)
    assert np.angle(out.through) > 0.5  # it lags


def test_whole_transport_passes_at_low_frequency() -> None:
    # Johnson & Garrett (2006, J. Phys. Oceanogr. 36, 945)
    out = passage(0.0, R * np.array([1e-3, 0.1, 1.0]), 5 * R, F, C)
    assert_allclose(out.through, 1.0, atol=1e-12)
    assert_allclose(out.across, 0.0, atol=1e-12)


def test_wide_opening_is_entered() -> None:
    out = passage(0.1 * F, 8 * R, 3 * R, F, C)
    assert_allclose(out.through, np.exp(1j * 0.1 * 3.0), atol=1e-3)
    assert abs(out.across) < 1e-3


def test_front_share_is_the_mean_over_frequencies() -> None:
    # what first reaches the far coast is the response before anything returns, which is the
    # average of the periodic response over one period of 2ωL/c
    width, length = 0.4 * R, 20 * R
    omega = np.pi * C / (length + end_correction(width, R)) * (np.arange(256) + 0.5) / 256
    across = passage(omega, width, length, F, C).across
    assert_allclose(across.mean(), facing_coast_share(width, R), atol=1e-6)


def test_closed_sill_is_a_wall() -> None:
    out = passage(0.1 * F, 0.2 * R, R, F, C, sill_share=0.0)
    assert out.through == 0.0
    assert out.across == 1.0
    assert out.lost == 0.0


def test_no_size_is_refused() -> None:
    with pytest.raises(InputError, match="width"):
        passage(1e-6, [1e3, 0.0], 1e4, F, C)
    with pytest.raises(InputError, match="coriolis"):
        passage(1e-6, 1e3, 1e4, 0.0, C)


def test_sill_share_of_a_cosine_mode() -> None:
    # φ = cos(πz/H): share = z/H + sin(2πz/H)/2π
    depth = np.linspace(0.0, 4000.0, 2001)
    sills = np.array([0.0, 333.3, 1000.0, 2000.0, 4000.0, 6000.0])
    share = sill_share(depth, np.cos(np.pi * depth / 4000.0), sills)
    x = np.minimum(sills / 4000.0, 1.0)
    assert_allclose(share, x + np.sin(2 * np.pi * x) / (2 * np.pi), atol=1e-6)


def test_sill_share_of_several_modes() -> None:
    depth = np.array([0.0, 10.0, 500.0, 3000.0])
    structure = np.array([[1.0, 1.0, 1.0, 1.0], [1.0, 1.0, 0.0, 0.0]])
    share = sill_share(depth, structure, [10.0, 500.0])
    assert_allclose(share[0], [10.0 / 3000.0, 500.0 / 3000.0])
    assert_allclose(share[1], [10.0 / (10.0 + 490.0 / 3.0), 1.0])


def test_sill_above_the_thermocline_closes_it_for_the_baroclinic_mode() -> None:
    depth = np.array([0.0, 150.0, 160.0, 4000.0])
    first_mode = np.array([1.0, 1.0, -0.04, -0.04])
    assert sill_share(depth, first_mode, 15.0) < 0.1
    assert sill_share(depth, first_mode, 200.0) > 0.95


def test_depths_must_increase() -> None:
    with pytest.raises(InputError, match="depth"):
        sill_share([0.0, -10.0, -20.0], [1.0, 1.0, 1.0], 5.0)
