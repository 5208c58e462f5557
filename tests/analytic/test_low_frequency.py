"""The first step beyond long waves, against the whole dispersion relation."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.modes.finite_frequency import dispersion, stratified_guide
from waveguide.modes.modeset import low_frequency_wavenumber
from waveguide.modes.trapped import trapped_modes

F = 8.7e-5
N2 = np.array([2e-4, 1e-4, 2e-5, 5e-6, 1e-6])
LEVELS = np.array([0.0, 100.0, 500.0, 1000.0, 4500.0])
SHELVES = {
    "wide": ([0.0, 60e3, 100e3, 140e3], [20.0, 150.0, 2000.0, 4000.0]),
    "narrow": ([0.0, 10e3, 40e3, 90e3], [30.0, 200.0, 2000.0, 4000.0]),
}


@pytest.mark.parametrize("shelf", SHELVES)
@pytest.mark.parametrize("share", [0.05, 0.1, 0.2, 0.3])
def test_wavenumber_at_low_frequencies(shelf: str, share: float) -> None:
    """With l² on the right taken as ω²/c² twice the square of what l grows by is left out."""
    x, h = (np.array(values) for values in SHELVES[shelf])
    modes = trapped_modes(x, h, N2, LEVELS, F, count=2, tolerance=0.002)
    guide = stratified_guide(x, h, N2, LEVELS, F, count=2, tolerance=0.002)
    omega = share * F
    found = low_frequency_wavenumber(
        omega, modes.phase_speed, F, h[-1], modes.dispersion, modes.barotropic_tail
    )
    growth = found[1:] * modes.phase_speed[1:] / omega - 1.0
    error = np.abs(found / dispersion(guide, omega).wavenumber - 1.0)[1:]
    assert np.all(error < 0.002 + 2.0 * growth**2)  # the first is the error of c


def test_long_waves_are_too_fast_by_what_the_test_would_see() -> None:
    """At 0.3 |f| mode 2 of the wide shelf is a tenth slower than a long wave."""
    x, h = (np.array(values) for values in SHELVES["wide"])
    modes = trapped_modes(x, h, N2, LEVELS, F, count=2, tolerance=0.002)
    omega = 0.3 * F
    found = low_frequency_wavenumber(
        omega, modes.phase_speed, F, h[-1], modes.dispersion, modes.barotropic_tail
    )
    assert found[2] > 1.08 * omega / modes.phase_speed[2]


def test_flat_bottom_has_no_dispersion() -> None:
    modes = trapped_modes([0.0, 1e5], [4000.0, 4000.0], N2, LEVELS, F, count=2)
    omega = 0.3 * F
    found = low_frequency_wavenumber(
        omega, modes.phase_speed, F, 4000.0, modes.dispersion, modes.barotropic_tail
    )
    assert_allclose(found, omega / modes.phase_speed, rtol=1e-3)
