"""Coastal-trapped modes of a section against closed forms, limits and symmetries.

Closed forms are DERIVED: evaluated independently from the theory named beside each.
"""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.constants import GRAVITY, coriolis
from waveguide.errors import InputError
from waveguide.modes.assembly import Rotation
from waveguide.modes.mesh import build_mesh, plan_mesh
from waveguide.modes.modeset import (
    ModeSet,
    alongshore_velocity,
    isopycnal_displacement,
    overlap,
)
from waveguide.modes.profile import make_profile
from waveguide.modes.section import monotonic_depth
from waveguide.modes.trapped import solve_on_mesh, trapped_modes
from waveguide.modes.vertical import vertical_modes

F = 8.2e-5
N2_DEPTH = np.array([0.0, 40.0, 100.0, 200.0, 500.0, 1000.0, 2000.0, 5000.0])
N2 = np.array([2e-5, 1e-4, 3e-4, 8e-5, 2e-5, 8e-6, 2e-6, 5e-7])


def shelf_and_slope() -> tuple[np.ndarray, np.ndarray]:
    """A shelf of 60 km to 150 m and a slope to 4000 m within another 60 km."""
    x = np.linspace(0.0, 200e3, 401)
    return x, 30.0 + 2.0e-3 * np.minimum(x, 60e3) + np.interp(x, [60e3, 120e3], [0.0, 3850.0])


def test_flat_bottom_and_vertical_wall_give_the_vertical_modes() -> None:
    """F = ψ(z) e^{-x/R}, so c, F(0,0), decay ψ(-H)²/2c and trapping scale R are known."""
    bottom = 4000.0
    modes = trapped_modes([0.0, 100e3], [bottom, bottom], N2, N2_DEPTH, F, tolerance=2e-4)
    exact = vertical_modes(N2, N2_DEPTH, bottom, 3)
    np.testing.assert_allclose(modes.phase_speed, exact.phase_speed, rtol=2e-4)
    # eigenvectors converge more irregularly than eigenvalues: N² bends between levels
    np.testing.assert_allclose(modes.coastal_value, exact.structure[:, 0], rtol=3e-3)
    friction = exact.structure[:, -1] ** 2 / (2.0 * exact.phase_speed)
    np.testing.assert_allclose(modes.bottom_friction, friction, rtol=5e-3)
    np.testing.assert_allclose(modes.trapping_scale, exact.phase_speed / F, rtol=5e-3)
    assert np.all(modes.error <= 2e-4)


def test_barotropic_flat_bottom_friction() -> None:
    """Amplitude decays as exp(-r s/(2 H c)) (Brink & Allen 1978, J. Phys. Oceanogr. 8, 1008),
    and F(0,0) = H^(-1/2) (Gill & Schumann 1974, J. Phys. Oceanogr. 4, 83)."""
    modes = trapped_modes([0.0, 50e3], [3000.0, 3000.0], [0.0], [0.0], F, count=1)
    speed = np.sqrt(GRAVITY * 3000.0)
    assert modes.phase_speed[0] == pytest.approx(speed, rel=1e-5)
    assert modes.coastal_value[0] == pytest.approx(3000.0**-0.5, rel=1e-5)
    assert modes.bottom_friction[0] == pytest.approx(1.0 / (2.0 * 3000.0 * speed), rel=1e-4)


def test_unstratified_exponential_shelf() -> None:
    """h = h0 e^{2bx} to L, flat beyond, rigid lid: c = 2bf/(m² + b²), tan mL = -m/b.

    Long waves of Buchwald & Adams (1968, Proc. R. Soc. A 305); couplings and friction after Gill
    & Schumann (1974) and Brink & Allen (1978), h0 20 m, hL 4000 m, L 80 km, r 5e-4 m/s.
    N² = 1e-10 stands for 0; mode 3 then feels N by (N hL/c)²/10 < 1e-3.
    """
    x = np.linspace(0.0, 80e3, 1601)
    h = 20.0 * np.exp(np.log(200.0) * x / 80e3)
    modes = trapped_modes(x, h, [0.0], [0.0], F, rigid_lid=True, tolerance=5e-4)
    np.testing.assert_allclose(modes.phase_speed, [2.7154, 1.0253, 0.4714], rtol=1e-3)
    np.testing.assert_allclose(modes.coastal_value, [0.124465, 0.107217, 0.079226], rtol=1e-3)
    decay_length = 1.0 / (5e-4 * modes.bottom_friction)
    np.testing.assert_allclose(decay_length, [482.3e3, 162.1e3, 83.1e3], rtol=2e-3)


def test_modes_are_orthonormal_and_complete_on_the_boundary() -> None:
    """∫ F_m F_n dh = δ_mn, and the function 1 on the boundary is Σ F_n ∫ F_n dh."""
    x, h = shelf_and_slope()
    modes = trapped_modes(x, h, N2, N2_DEPTH, F, count=10, tolerance=0.05)
    np.testing.assert_allclose(overlap(modes, modes), np.eye(11), atol=1e-3)
    part = np.trapezoid(modes.boundary_structure, modes.boundary_depth, axis=1)
    captured = np.cumsum(part**2) / modes.boundary_depth[-1]
    assert captured[-1] == pytest.approx(1.0, abs=2e-3)
    assert captured[-1] < 1.0 + 1e-3


def test_hemispheres_are_mirror_images() -> None:
    x, h = shelf_and_slope()
    north = trapped_modes(x, h, N2, N2_DEPTH, coriolis(30.0))
    south = trapped_modes(x, h, N2, N2_DEPTH, coriolis(-30.0))
    for name in ("phase_speed", "coastal_value", "bottom_friction", "trapping_scale"):
        np.testing.assert_array_equal(getattr(north, name), getattr(south, name))
    np.testing.assert_array_equal(alongshore_velocity(north), alongshore_velocity(south))


def test_depth_and_stratification_scaled_together() -> None:
    """Depths times a and N divided by a leave c under a rigid lid; F scales as a^(-1/2)."""
    x, h = shelf_and_slope()
    base = trapped_modes(x, h, N2, N2_DEPTH, F, rigid_lid=True)
    scaled = trapped_modes(x, 0.5 * h, 4.0 * N2, 0.5 * N2_DEPTH, F, rigid_lid=True)
    np.testing.assert_allclose(scaled.phase_speed, base.phase_speed, rtol=1e-4)
    np.testing.assert_allclose(scaled.coastal_value, np.sqrt(2.0) * base.coastal_value, rtol=1e-4)


def test_width_and_rotation_scaled_together() -> None:
    """Distances times a and f divided by a leave c, with a free surface too."""
    x, h = shelf_and_slope()
    base = trapped_modes(x, h, N2, N2_DEPTH, F)
    scaled = trapped_modes(2.0 * x, h, N2, N2_DEPTH, 0.5 * F)
    np.testing.assert_allclose(scaled.phase_speed, base.phase_speed, rtol=1e-6)
    np.testing.assert_allclose(scaled.trapping_scale, 2.0 * base.trapping_scale, rtol=1e-4)


def test_more_flat_ocean_changes_nothing() -> None:
    """The ocean beyond the last column is exact, so the section may end at the foot of the slope,
    even for mode 0, which reaches 2400 km."""
    x, h = shelf_and_slope()
    near = trapped_modes(x[x <= 120e3], h[x <= 120e3], N2, N2_DEPTH, F, tolerance=1e-3)
    wide = trapped_modes(np.append(x, 3000e3), np.append(h, h[-1]), N2, N2_DEPTH, F,
                         tolerance=1e-3)  # fmt: skip
    np.testing.assert_allclose(near.phase_speed, wide.phase_speed, rtol=1.5e-3)
    np.testing.assert_allclose(near.trapping_scale[0], wide.trapping_scale[0], rtol=0.01)


def test_observed_order_of_accuracy() -> None:
    """Second order on nested meshes of one polygon, a little less where its corners bend the
    bottom outward (p is singular there); Richardson's limit is better than either mesh."""
    x, h = shelf_and_slope()
    profile = make_profile(N2, N2_DEPTH)
    plan = plan_mesh(x, h, profile, F, 16, 1e-3)
    speeds = np.array(
        [
            solve_on_mesh(build_mesh(plan, k), profile, F, Rotation(F * F), 4).phase_speed
            for k in (1, 2, 4, 8)
        ]
    )
    limit = (4.0 * speeds[3] - speeds[2]) / 3.0
    errors = np.abs(speeds / limit - 1.0)
    order = np.log2(errors[:2] / errors[1:3])
    assert np.all((order > 1.65) & (order < 2.1))
    first_limit = (4.0 * speeds[1] - speeds[0]) / 3.0
    assert np.all(np.abs(first_limit / limit - 1.0) < 0.35 * errors[1])


def test_error_estimate_covers_the_error() -> None:
    x, h = shelf_and_slope()
    quick = trapped_modes(x, h, N2, N2_DEPTH, F)
    better = trapped_modes(x, h, N2, N2_DEPTH, F, tolerance=2e-4)
    assert np.all(quick.error <= 0.005)
    assert np.all(np.abs(quick.phase_speed / better.phase_speed - 1.0) <= 0.005)


def test_a_shelf_makes_the_first_mode_faster_and_mode_0_slower() -> None:
    """Adding a shelf to a wall: mode 1 exceeds the flat-bottom c₁ (Wang & Mooers 1976, J. Phys.
    Oceanogr. 6, 853), mode 0 falls short of √(gH) (Miles 1972, J. Fluid Mech. 55, 113)."""
    x, h = shelf_and_slope()
    modes = trapped_modes(x, h, N2, N2_DEPTH, F)
    flat = vertical_modes(N2, N2_DEPTH, h[-1], 1)
    assert modes.phase_speed[1] > 1.1 * flat.phase_speed[1]
    assert 0.8 < modes.phase_speed[0] / flat.phase_speed[0] < 1.0


def bank() -> ModeSet:
    x, h = shelf_and_slope()
    raw = h - 600.0 * np.exp(-(((x - 150e3) / 8e3) ** 2))
    return trapped_modes(x, raw, N2, N2_DEPTH, F)


def test_a_bank_holds_waves_of_the_other_direction() -> None:
    """B is indefinite, speeds stay real, and the modes found have B(F, F) = +1."""
    x, h = shelf_and_slope()
    monotonic = trapped_modes(x, h, N2, N2_DEPTH, F)
    with_bank = bank()
    assert monotonic.reverse_speed == 0.0
    assert with_bank.reverse_speed > 0.05
    assert np.all(with_bank.phase_speed > 0.0)
    depth, p = with_bank.boundary_depth, with_bank.boundary_structure
    square = np.sum(np.diff(depth) / 3.0 * (p[:, 1:] ** 2 + p[:, 1:] * p[:, :-1] + p[:, :-1] ** 2),
                    axis=1)  # fmt: skip
    np.testing.assert_allclose(square, 1.0, rtol=1e-6)


def test_monotonic_depth_levels_a_bank_and_leaves_a_slope() -> None:
    x, h = shelf_and_slope()
    np.testing.assert_allclose(monotonic_depth(x, h), h, rtol=1e-12)
    raw = h - 600.0 * np.exp(-(((x - 150e3) / 8e3) ** 2))
    level = monotonic_depth(x, raw)
    assert np.all(np.diff(level) >= 0.0)
    assert np.all(np.abs(level[x < 100e3] - h[x < 100e3]) < 1e-9)


def test_fields_obey_the_surface_condition_and_geostrophy() -> None:
    """At the coast's surface isopycnals move with the sea; v falls off as e^{-x/R} on a flat."""
    modes = trapped_modes([0.0, 200e3], [4000.0, 4000.0], N2, N2_DEPTH, F)
    displacement = isopycnal_displacement(modes)
    np.testing.assert_allclose(displacement[:, 0, 0], 1.0, rtol=1e-12)
    exact = vertical_modes(N2, N2_DEPTH, 4000.0, 3)
    peak = np.nanmax(np.abs(displacement[1]))
    assert peak == pytest.approx(np.max(np.abs(exact.displacement[1])), rel=0.02)
    velocity = alongshore_velocity(modes)
    expected = GRAVITY / exact.phase_speed  # η g/c, a Kelvin wave
    np.testing.assert_allclose(velocity[1:3, 0, 0], expected[1:3], rtol=0.1)
    assert np.all(np.isnan(velocity) == np.isnan(modes.structure))


@pytest.mark.parametrize(
    ("x", "h", "f", "words"),
    [
        ([0, 1e4, 2e4], [50, np.nan, 100], F, "1 holes"),
        ([0, 2e4, 1e4], [50, 60, 100], F, "unsorted"),
        ([0, 1e4, 1e4], [50, 60, 100], F, "duplicate"),
        ([5e3, 1e4, 2e4], [50, 60, 100], F, "must start at 0"),
        ([0, 1e4, 2e4], [50, -5, 100], F, "land at 10 km"),
        ([0, 1e4, 2e4], [-50, -60, -100], F, "positive down"),
        ([0, 1e4, 2e4], [50, 60, 100], 0.0, "on the equator the guide is the equator itself"),
        ([0, 1e4], [50, 60, 100], F, "one depth for each"),
    ],
)
def test_bad_sections_are_named(x: list[float], h: list[float], f: float, words: str) -> None:
    with pytest.raises(InputError, match=words):
        trapped_modes(x, h, N2, N2_DEPTH, f)


@pytest.mark.parametrize(
    ("n2", "words"),
    [([1e-5, -1e-6], "stable"), ([1e-5, np.nan], "missing"), ([1e-5], "one value per depth")],
)
def test_bad_stratification_is_named(n2: list[float], words: str) -> None:
    with pytest.raises(InputError, match=words):
        trapped_modes([0, 1e4], [50, 60], n2, [0, 100], F)
