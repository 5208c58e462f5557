"""Published limits of the wind-forced coastal wave."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.constants import GRAVITY, REFERENCE_DENSITY

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import along_characteristics, mode_of, physics_of, zonal_coast

DAY = 86400.0
# An exponential shelf h₀ 20, h_L 4000 m, L 80 km at f = 8.2e-5 with drag r = 5e-4 m/s, mode 1:
# c (m/s), b = F(0,0) (m^-1/2) and friction 1/a (m). DERIVED from Gill & Schumann (1974),
# J. Phys. Oceanogr. 4, 83, and Brink & Allen (1978), J. Phys. Oceanogr. 8, 1008.
SHELF_SPEED, SHELF_VALUE, SHELF_DECAY = 2.7154, 0.124465, 1.0 / 482.3e3


def test_steady_uniform_wind_without_friction_gives_1541_cm_per_1000_km():
    # DERIVED, Gill & Schumann (1974): b² τ/(ρ g) per metre.
    coast = zonal_coast(2000.0, 201)
    mode = mode_of(coast, SHELF_SPEED, SHELF_VALUE)
    physics = physics_of(coast, mode)
    stress = np.full((200, 30), 0.1)
    half = along_characteristics(coast, mode, physics, stress, DAY, node=100)[-1]
    whole = along_characteristics(coast, mode, physics, stress, DAY)[-1]
    assert half == pytest.approx(0.1541, rel=1e-3)  # the value has four digits
    assert whole == pytest.approx(2.0 * half, rel=1e-9)


def test_steady_uniform_wind_with_friction_gives_7431_cm_far_downstream():
    # DERIVED, Brink & Allen (1978): the slope above times the decay length.
    coast = zonal_coast(8000.0, 801)
    mode = mode_of(coast, SHELF_SPEED, SHELF_VALUE)
    physics = physics_of(coast, mode, decay=SHELF_DECAY)
    level = along_characteristics(coast, mode, physics, np.full((800, 60), 0.1), DAY)[-1]
    assert level == pytest.approx(0.07431, rel=1.5e-3)  # ways below 0.1 % are not followed


def test_barotropic_flat_bottom_is_gill_and_schumann():
    # (1/c) η_t + η_s = τ/(ρ g H); READ physics of Gill & Schumann (1974), F(0,0)² = 1/H.
    depth = 4000.0
    coast = zonal_coast(4000.0, 81)
    mode = mode_of(coast, np.sqrt(GRAVITY * depth), depth**-0.5, number=0)
    physics, stress = physics_of(coast, mode), np.full((80, 20), 0.1)
    level = along_characteristics(coast, mode, physics, stress, 0.25 * DAY)[-1]
    exact = 0.1 * coast.length.sum() / (REFERENCE_DENSITY * GRAVITY * depth)
    assert level == pytest.approx(exact, rel=1e-6)
