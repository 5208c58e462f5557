"""What a mode does at depth: closed forms of constant N, of a thermocline, and of β off a coast.

All DERIVED: from the equations of the module under test, evaluated independently here.
"""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import (
    BETA_EQUATOR,
    GRAVITY,
    SECONDS_PER_DAY,
    coriolis,
    deformation_radius,
)
from waveguide.modes.trapped import trapped_modes
from waveguide.modes.vertical import vertical_modes
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology
from waveguide.propagation.at_depth import (
    Offshore,
    best_depth,
    flat_bottom_at_depth,
    off_coast,
    off_equator,
    section_at_depth,
    signed,
)
from waveguide.propagation.dispersion import amplification_rate
from waveguide.propagation.moorings import Water, mooring_answer

H, N = 4000.0, 2.0e-3
DEPTHS = np.array([0.0, 500.0, 1000.0, 2000.0, 3000.0, 4000.0])
HERE = Offshore(1.0 + 0.0j, GRAVITY / 2.5 + 0.0j)
OMEGA = 2.0 * np.pi / (30.0 * SECONDS_PER_DAY)


def constant_n(count: int = 3, rigid_lid: bool = False):
    return vertical_modes([N * N, N * N], [0.0, H], H, count, rigid_lid=rigid_lid)


# p = cos(kz'), k = N/c, z' = depth; ζ = −g p_z/(N² p(0)) = −(gk/N²) sin(kz') = −(g/Nc) sin(kz')
@pytest.mark.parametrize("number", [1, 2, 3])
def test_constant_n_is_sine_and_cosine(number: int) -> None:
    modes = constant_n(rigid_lid=True)
    speed = N * H / (number * np.pi)
    current = Offshore(1.0 + 0.0j, GRAVITY / speed + 0.0j)
    # mode 1 comes first under a rigid lid
    view = flat_bottom_at_depth(modes, number - 1, np.full(modes.depth.size, N), DEPTHS, current)
    scale = GRAVITY / (N * speed)
    # the modes have levels H/6 apart, and are linear in between
    levels = np.interp(DEPTHS, modes.depth, np.sin(number * np.pi * modes.depth / H))
    assert_allclose(view.displacement.real, -scale * levels, atol=1e-6 * scale)
    between = np.interp(DEPTHS, modes.depth, np.cos(number * np.pi * modes.depth / H))
    assert_allclose(view.current.real, GRAVITY / speed * between, rtol=1e-6, atol=1e-9)
    assert_allclose(view.bottom_pressure, (-1.0) ** number, rtol=1e-6)
    assert not np.any(view.displacement.imag)
    assert not np.any(view.current.imag)
    assert view.bottom == H


def test_the_surface_of_a_free_surface_rises_with_sea_level() -> None:
    modes = constant_n()
    for row in range(4):
        view = flat_bottom_at_depth(modes, row, np.full(modes.depth.size, N), [0.0], HERE)
        assert_allclose(view.displacement[0].real, 1.0, rtol=1e-4)
        assert_allclose(view.current[0], HERE.current, rtol=1e-12)


def test_barotropic_mode_moves_the_whole_column() -> None:
    """Mode 0: W linear in depth, so ζ = 1 − z'/H, and pressure all the way down, to N²H/g."""
    modes = constant_n()
    view = flat_bottom_at_depth(modes, 0, np.full(modes.depth.size, N), DEPTHS, HERE)
    assert_allclose(view.displacement.real, 1.0 - DEPTHS / H, atol=2e-3)
    assert_allclose(view.bottom_pressure, 1.0, atol=2e-3)


def test_a_thermocline_moves_metres_per_centimetre() -> None:
    """Two layers: c² = g'h₁h₂/H and ζ/η = −(g/g')H/h₂, so ζ/η = −g h₁/c²; −2.35 m/cm at 2.5 m/s.

    g' = N² d for the layer d that holds all of N². It has a thickness of its own, d/h₁ = 2 %.
    """
    upper, thickness, speed = 150.0, 3.0, 2.5
    reduced = speed**2 * H / (upper * (H - upper))
    edges = upper + thickness * np.array([-0.501, -0.5, 0.5, 0.501])
    n2 = reduced / thickness
    modes = vertical_modes([0.0, n2, n2, 0.0], edges, H, 1, rigid_lid=True)
    assert modes.phase_speed[0] == pytest.approx(speed, rel=0.01)
    frequency = np.sqrt(np.interp(modes.depth, edges, [0.0, n2, n2, 0.0]))
    view = flat_bottom_at_depth(modes, 0, frequency, [upper], HERE)
    wanted = -GRAVITY * upper / speed**2  # −235 m/m
    assert 0.01 * wanted == pytest.approx(-2.354, abs=1e-3)
    assert view.displacement[0].real == pytest.approx(wanted, rel=0.02)
    assert view.bottom_pressure.real == pytest.approx(-upper / (H - upper), rel=0.02)
    assert view.best_depth == pytest.approx(upper, abs=thickness)  # only there is it seen at all


def test_below_the_bottom_there_is_nothing() -> None:
    modes = constant_n()
    frequency = np.full(modes.depth.size, N)
    view = flat_bottom_at_depth(modes, 1, frequency, [100.0, 900.0, 4100.0], HERE, 800.0)
    assert np.isfinite(view.displacement).tolist() == [True, False, False]
    assert np.isfinite(view.current).tolist() == [True, False, False]
    assert view.bottom == 800.0
    shallow = np.interp(800.0, modes.depth, modes.structure[1]) / modes.structure[1, 0]
    assert view.bottom_pressure.real == pytest.approx(shallow)
    assert view.best_depth <= 800.0


def test_best_depth_weighs_displacement_by_stratification() -> None:
    """|sin| √N with N ∝ e^(−2z'/b) peaks where k cot(kz') = 1/b, above the middle."""
    depth = np.linspace(0.0, H, 8001)
    k, b = np.pi / H, 1000.0
    found = best_depth(depth, 3.0 * np.sin(k * depth), 1e-3 * np.exp(-2.0 * depth / b))
    assert found == pytest.approx(np.arctan(k * b) / k, abs=1.0)
    assert best_depth(depth, np.sin(k * depth), np.ones(depth.size)) == pytest.approx(H / 2.0)


def test_zonal_coast_traps_within_the_radius() -> None:
    c, f = 2.5, 1e-4
    radius = c / f
    for x in (0.0, 10e3, 60e3):
        found = off_coast(x, OMEGA, 0.0, c, f)
        assert_allclose(found.pressure, np.exp(-x / radius), rtol=1e-12)
        assert_allclose(found.current, GRAVITY / c * np.exp(-x / radius), rtol=1e-12)
    # one centimetre of sea level is 3.9 cm/s at 2.5 m/s
    assert off_coast(0.0, OMEGA, 0.0, c, f).current.real == pytest.approx(3.92, abs=0.01)


@pytest.mark.parametrize("ratio", [0.6, -0.6, 0.99, 1.5, -1.5, 4.0, -4.0])
def test_offshore_structure_obeys_the_vorticity_equation(ratio: float) -> None:
    """(κR)² − 2iγκR − 1 = 0, no flow through the wall, and energy that leaves or stays."""
    c, f = 2.5, 6e-5
    radius, gamma = c / f, ratio * OMEGA / c
    x = 0.3 * radius
    found = off_coast(x, OMEGA, gamma, c, f)
    kappa = complex(np.log(found.pressure)) / x * radius
    assert_allclose(kappa**2 - 2j * ratio * kappa - 1.0, 0.0, atol=1e-9)
    wall = off_coast(0.0, OMEGA, gamma, c, f)
    assert wall.pressure == 1.0
    # geostrophic at any distance: v = −p_x/f
    assert_allclose(found.current, -GRAVITY * kappa / radius / f * found.pressure, rtol=1e-9)
    if abs(ratio) < 1.0:
        assert_allclose(kappa.real, -np.sqrt(1.0 - ratio**2), rtol=1e-9)
        assert_allclose(np.angle(found.pressure), 0.3 * ratio, rtol=1e-9)  # lags if poleward
        assert_allclose(np.angle(wall.current), -np.arcsin(ratio), rtol=1e-9)
        assert_allclose(abs(wall.current), GRAVITY / c, rtol=1e-9)
        return
    # a Rossby wave with phase to the west; the long one of an eastern boundary takes its energy
    # west, the short one of a western boundary east
    assert_allclose(abs(found.pressure), 1.0, rtol=1e-9)
    assert np.sign(kappa.imag) == np.sign(ratio)
    wavenumber = abs(kappa.imag)
    assert wavenumber < 1.0 if ratio > 0.0 else wavenumber > 1.0
    assert_allclose(wavenumber, abs(ratio) - np.sign(ratio) * np.sqrt(ratio**2 - 1.0), rtol=1e-9)


def test_equator_is_gaussian_and_in_phase() -> None:
    c = 2.5
    scale = np.sqrt(c / BETA_EQUATOR)
    found = off_equator(1.5 * scale, c)
    assert_allclose(found.pressure, np.exp(-0.5 * 1.5**2), rtol=1e-12)
    assert_allclose(found.current, GRAVITY / c * found.pressure, rtol=1e-12)


def test_section_with_a_wall_is_the_flat_bottom() -> None:
    """A wall to the bottom: p̂(z) e^(−x/R) of every mode, so both ways must agree.

    2 %: the structure of a section is of the mesh that gives speeds to 0.5 %, and its velocity is
    a difference over its columns.
    """
    f, x = 1e-4, 12e3
    n2_depth = np.array([0.0, 200.0, 1000.0, H])
    n2 = np.array([1e-4, 4e-5, 5e-6, 1e-6])
    modes = trapped_modes([0.0, 300e3], [H, H], n2, n2_depth, f, count=2)
    column = vertical_modes(n2, n2_depth, H, 2)
    frequency = np.sqrt(np.interp(column.depth, n2_depth, n2))
    depths = [50.0, 200.0, 800.0, 2000.0]
    for row in (1, 2):
        c = float(column.phase_speed[row])
        flat = flat_bottom_at_depth(column, row, frequency, depths, off_coast(x, OMEGA, 0.0, c, f))
        section = section_at_depth(modes, row, x, depths)
        size = np.abs(flat.displacement).max()
        assert_allclose(section.displacement, flat.displacement, atol=0.02 * size)
        assert_allclose(section.current, flat.current, atol=0.02 * np.abs(flat.current).max())
        assert_allclose(section.bottom_pressure, flat.bottom_pressure, atol=5e-3)
        assert section.bottom == pytest.approx(H)
        assert section.best_depth == pytest.approx(flat.best_depth, abs=400.0)  # levels apart


def test_section_knows_its_bottom() -> None:
    x, h = [0.0, 40e3, 80e3, 300e3], [20.0, 200.0, H, H]
    modes = trapped_modes(x, h, [1e-4, 1e-6], [0.0, H], 1e-4, count=1)
    view = section_at_depth(modes, 1, 20e3, [100.0, 150.0])
    assert view.bottom == pytest.approx(110.0, rel=0.05)
    assert np.isfinite(view.displacement).tolist() == [True, False]
    assert view.best_depth <= view.bottom
    at_coast = section_at_depth(modes, 1, 0.0, [0.0])
    assert at_coast.displacement[0].real == pytest.approx(1.0)


def test_signed_numbers() -> None:
    amplitude, lag = signed([2.0, -2.0, 2j, np.exp(1j * np.radians(150.0)), complex("nan")])
    assert_allclose(amplitude[:4], [2.0, -2.0, 2.0, -1.0])
    assert_allclose(lag[:4], [0.0, 0.0, 90.0, -30.0])
    assert np.isnan(amplitude[4])
    assert np.isnan(lag[4])


@pytest.fixture
def ocean(guides: SimpleNamespace) -> SimpleNamespace:
    """A flat ocean 4000 m deep east of a meridional coast at 0° E, stratified everywhere."""
    network = guides.chain([(guides.COAST, [(0.0, 35.0), (0.0, 25.0)])])  # a western boundary
    lon, lat = np.arange(-100, 301) / 20.0, np.arange(-10.0, 45.5, 0.5)
    depth = np.where(lon[None, :] < 0.0, -100.0, H) * np.ones((lat.size, 1))
    levels = np.array([10.0, 200.0, 1000.0, 3900.0])
    n2 = np.broadcast_to(
        np.array([1e-4, 4e-5, 5e-6, 1e-6])[:, None, None], (4, lat.size, lon.size)
    )
    water = Water(
        Bathymetry(lon, lat, depth), Climatology(lon, lat, levels, n2.astype(np.float32)),
        np.full(network.size, H), np.ones(network.size, dtype=np.int64),
    )
    column = vertical_modes(n2[:, 0, 0], levels, H, 1)
    speed = float(column.phase_speed[1])
    return SimpleNamespace(network=network, water=water, speed=speed, column=column)


@pytest.mark.parametrize(("days", "structure"), [(10.0, "section"), (200.0, "flat bottom")])
def test_mooring_off_a_western_boundary(
    guides: SimpleNamespace, ocean: SimpleNamespace, days: float, structure: str
) -> None:
    mode = guides.uniform(ocean.network, ocean.speed)
    arrival = guides.arrival(ocean.network, mode, [np.arange(ocean.network.tail.size)])
    omega = 2.0 * np.pi / (days * SECONDS_PER_DAY)
    answer = mooring_answer(ocean.network, mode, arrival, omega, ocean.water, 30e3, [200.0])
    assert answer.structure == structure
    assert answer.distance == 30e3
    assert answer.towards == pytest.approx(180.0, abs=0.5)
    radius = float(deformation_radius(ocean.speed, 25.0))
    levels = np.interp([200.0], ocean.column.depth, ocean.column.displacement[1])
    assert answer.view is not None
    if structure == "section":
        wanted = levels * np.exp(-30e3 / radius)
        assert_allclose(answer.view.displacement, wanted, rtol=0.03)
        return
    # the shore lies within a cell, 5.6 km, of the guide, and so much less is x from the guide
    f, gamma = float(coriolis(25.0)), float(amplification_rate(25.4, 180.0))
    near, far = (off_coast(x, omega, gamma, ocean.speed, f).pressure for x in (24e3, 30e3))
    found = answer.view.displacement[0] / levels[0]
    assert abs(found) == pytest.approx(1.0, rel=1e-6)  # not trapped: below the critical frequency
    assert np.angle(far) * 1.05 < np.angle(found) < np.angle(near) * 0.95 < 0.0  # it leads


def test_mooring_without_an_arrival_says_why(
    guides: SimpleNamespace, ocean: SimpleNamespace
) -> None:
    mode = guides.uniform(ocean.network, ocean.speed)
    arrival = guides.arrival(ocean.network, mode, [])
    answer = mooring_answer(
        ocean.network, mode, guides.replace(arrival, status="no route"), OMEGA, ocean.water, None,
        [100.0],
    )
    assert (answer.structure, answer.view) == ("no route", None)


def test_mooring_on_the_equator(guides: SimpleNamespace, ocean: SimpleNamespace) -> None:
    network = guides.chain([(guides.EQUATOR, [(2.0, 0.0), (12.0, 0.0)])])
    mode = guides.uniform(network, ocean.speed)
    arrival = guides.arrival(network, mode, [np.arange(network.tail.size - 1)])
    water = guides.replace(
        ocean.water, bottom=np.full(network.size, H), rank=np.full(network.size, -1)
    )
    y = float(np.sqrt(ocean.speed / BETA_EQUATOR))
    answer = mooring_answer(network, mode, arrival, OMEGA, water, y, [200.0])
    assert answer.structure == "equator"
    assert answer.towards == pytest.approx(90.0, abs=0.5)
    levels = np.interp([200.0], ocean.column.depth, ocean.column.displacement[1])
    assert answer.view is not None
    assert_allclose(answer.view.displacement, levels * np.exp(-0.5), rtol=1e-6)
