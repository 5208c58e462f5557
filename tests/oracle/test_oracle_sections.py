"""Section modes against scikit-fem on the same sections, to 0.5 %."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.modes.trapped import trapped_modes

sys.path.insert(0, str(Path(__file__).parent))
from finite_elements import CASES, section_speeds


@pytest.mark.parametrize("name", CASES)
def test_speeds_agree_with_scikit_fem(name: str) -> None:
    """Default accuracy against quadratic elements whose own error is below 0.3 %."""
    case = CASES[name]
    modes = trapped_modes(case.offshore, case.depth, case.n2, case.n2_depth, case.f)
    reference = section_speeds(case, 3, nx=70, nz=28)
    np.testing.assert_allclose(modes.phase_speed, reference, rtol=0.005)
