"""Published results on the reflection of equatorial Kelvin waves, and what follows from them."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import BETA_EQUATOR, SECONDS_PER_DAY, coriolis
from waveguide.errors import InputError
from waveguide.propagation.dispersion import segment_exponent
from waveguide.propagation.equator import (
    eastern_junction,
    eastern_wall,
    equatorial_growth,
    equatorial_radius,
    poleward_share,
    rossby_share,
    scaled_frequency,
    western_junction,
    western_wall,
)
from waveguide.propagation.wall import hermite_functions, oblique_asymmetry

C = 2.5
RATE = np.sqrt(BETA_EQUATOR * C)
DAYS = np.array([20, 30, 34, 40, 50, 60, 90, 120, 182.625, 365.25])


def frequency_of(days: np.ndarray) -> np.ndarray:
    return scaled_frequency(2 * np.pi / (days * SECONDS_PER_DAY), C)


def test_energy_that_goes_poleward() -> None:
    # DERIVED from Moore (1968, thesis, Harvard) and Clarke (1983, J. Phys. Oceanogr. 13, 1193)
    expected = [1, 1, 0.8338, 0.6720, 0.5921, 0.4796, 0.3243, 0.2450, 0.1611, 0.0807]
    assert_allclose(poleward_share(frequency_of(DAYS)), expected, atol=6e-5)


def test_energy_in_the_first_rossby_wave() -> None:
    # DERIVED from the same
    expected = [0, 0, 0.1662, 0.3280, 0.4079, 0.4407, 0.4758, 0.4867, 0.4944, 0.4986]
    assert_allclose(rossby_share(frequency_of(DAYS), 1)[:, 0], expected, atol=6e-5)


def test_long_wave_limit_of_the_rossby_waves() -> None:
    # DERIVED: ½, ⅛, 1/16, 5/128 into n = 1, 3, 5, 7 (Clarke 1983)
    assert_allclose(rossby_share(0.003, 4), [1 / 2, 1 / 8, 1 / 16, 5 / 128], rtol=1e-3)


def test_everything_goes_poleward_in_between() -> None:
    # READ in Moore, Durland & Hristova (2014): between ω̂ = 1 ∓ √½
    inside = np.array([1 - np.sqrt(0.5) + 1e-6, 1.0, 1 + np.sqrt(0.5) - 1e-6])
    assert_allclose(poleward_share(inside), 1.0, rtol=1e-12)
    outside = np.array([1 - np.sqrt(0.5) - 1e-3, 1 + np.sqrt(0.5) + 1e-3])
    assert np.all(poleward_share(outside) < 0.99)


def test_a_quarter_or_more_returns_below_that_band() -> None:
    # Clarke (1983) as quoted: a sizeable part, a quarter or more
    assert np.all(poleward_share(np.linspace(0.02, 0.25, 40)) < 0.75)


def test_energy_is_complete() -> None:
    omega = np.array([0.03, 0.08, 0.2, 0.28, 0.5])
    total = poleward_share(omega) + rossby_share(omega, 150).sum(axis=-1)
    assert_allclose(total, 1.0, atol=1e-9)


def test_uniform_wall_at_low_frequency() -> None:
    # Cane & Sarachik (1977, J. Mar. Res. 35, 395): √2 times the incident amplitude
    wall = eastern_wall(np.array([0.0, 1e-3]), np.linspace(-6.0, 6.0, 25))
    assert_allclose(wall, np.sqrt(2.0), atol=2e-4)


@pytest.mark.parametrize("matching", [1.0, 2.0, 3.0])
def test_low_frequency_limits_of_the_junctions(matching: float) -> None:
    east = eastern_junction(0.0, C, matching)
    west = western_junction(0.0, C, matching)
    assert_allclose(east.amplitude, np.sqrt(2.0), atol=1e-5)
    assert_allclose(west.amplitude, 1 / (matching * np.sqrt(2 * np.pi)), rtol=1e-5)


@pytest.mark.parametrize("scaled", [0.3, 0.5, 0.8, 1.2])
def test_energy_limits_of_the_junctions(scaled: float) -> None:
    omega = scaled * RATE
    east, west = eastern_junction(omega, C), western_junction(omega, C)
    far = np.exp(segment_exponent(scaled, 1.0, 2.0, 6.0, 4.0))
    assert_allclose(np.abs(east.amplitude * far), np.sqrt(np.sqrt(np.pi) * 6.0), rtol=2e-4)
    assert_allclose([east.energy_out, west.energy_out], 0.5, rtol=4e-4)
    # half of the energy of one hemisphere goes into the mixed Rossby-gravity wave
    assert_allclose(np.abs(west.amplitude), (4 * np.sqrt(np.pi) * 2.0) ** -0.5, rtol=2e-4)


def test_long_coast_energy_connects_to_the_junction() -> None:
    # share left on both coasts once the coastal wave is trapped: the poleward share
    scaled = np.array([0.06, 0.1, 0.15, 0.25])
    junction = eastern_junction(scaled * RATE, C)
    onward = segment_exponent(scaled, 1.0, 2.0, 60.0, 58.0)
    energy = np.abs(junction.amplitude * np.exp(onward)) ** 2 / (np.sqrt(np.pi) * 60.0)
    assert_allclose(energy, poleward_share(scaled), rtol=0.02)  # turning points near ŷ = 6


def test_local_relation_from_the_equator_gives_the_energy() -> None:
    # √2 carried along the coast by the local relation alone: P = 2e ω̂/√π
    scaled = np.array([0.03, 0.06, 0.1, 0.15])
    assert_allclose(poleward_share(scaled), 2 * np.e * scaled / np.sqrt(np.pi), rtol=0.02)


def test_wall_follows_the_local_relation_beyond_the_matching_distance() -> None:
    scaled = np.array([0.02, 0.05, 0.1, 0.2, 0.28, 0.4, 0.8, 1.2])
    y = np.array([2.5, 3.0, 4.0, 6.0])
    local = segment_exponent(scaled[:, None], 1.0, 2.0, y, y - 2.0)
    ratio = eastern_wall(scaled, y) / eastern_wall(scaled, np.array([2.0])) / np.exp(local)
    assert_allclose(np.abs(ratio), 1.0, atol=0.03)
    assert_allclose(np.degrees(np.angle(ratio)), 0.0, atol=2.0)


def test_reciprocity_of_the_two_boundaries() -> None:
    # the western series is summed on its own; the junction uses the eastern one
    scaled = np.array([0.05, 0.1, 0.2, 0.27, 0.4, 0.8, 1.2])
    coast = western_wall(scaled, np.array([4.0]))[:, 0]
    transposed = eastern_wall(scaled, np.array([4.0]))[:, 0] / (2 * np.sqrt(np.pi) * 4.0)
    assert_allclose(1 / coast, transposed, rtol=4e-3)
    assert_allclose(np.abs(western_wall(scaled, np.array([-5.0]))), 0.0, atol=0.03)


def test_western_coast_limits() -> None:
    # Johnson & Marshall (2002, J. Phys. Oceanogr. 32, 1121): ∝ f below the critical
    # frequency; ∝ √f above (energy)
    y = np.array([4.0, 3.0, 2.0])
    wall = np.abs(western_wall(np.array([0.01, 0.8]), y))
    assert_allclose(wall[0] / wall[0, 0], y / 4.0, rtol=5e-3)
    assert_allclose(wall[1] / wall[1, 0], np.sqrt(y / 4.0), rtol=8e-3)


def test_inertia_gravity_waves_take_over_at_high_frequency() -> None:
    junction = eastern_junction(np.array([2.0, 3.0, 3.01]) * RATE, C)
    assert np.all(junction.energy_out[:2] < 0.06)
    assert junction.amplitude[2] == 0.0


def test_matching_latitude_and_radius() -> None:
    junction = eastern_junction(1e-6, C)
    assert_allclose(np.abs(coriolis(junction.latitude)), 2.0 * RATE, rtol=1e-12)
    assert_allclose(equatorial_radius(C), np.sqrt(C / BETA_EQUATOR))


@pytest.mark.parametrize(("speed", "matching"), [(2.5, 0.5), (2.5, 5.0), (240.0, 2.0)])
def test_matching_out_of_range(speed: float, matching: float) -> None:
    with pytest.raises(InputError, match="matching"):
        eastern_junction(1e-6, speed, matching)


def test_energy_sums_to_one() -> None:
    omega = np.linspace(0.0, 2.9, 59) * RATE
    north = eastern_junction(omega, C, 2.0, 25.0, -10.0)
    south = eastern_junction(omega, C, 2.0, -10.0, 25.0)
    assert_allclose(north.energy_rossby, south.energy_rossby, atol=1e-12)
    assert_allclose(north.energy_out + south.energy_out + north.energy_rossby, 1.0, atol=1e-12)
    assert np.all(north.energy_rossby > -2e-3)  # rounding and the error of matching at ŷ = 6
    west = western_junction(omega, C)
    assert_allclose(west.energy_out + west.energy_rossby, 1.0, atol=1e-12)


def test_lean_turns_the_wave_to_the_coast_that_leads_on() -> None:
    omega = np.array([0.01, 0.8]) * RATE
    north = eastern_junction(omega, C, 2.0, 30.0, -30.0)
    south = eastern_junction(omega, C, 2.0, -30.0, 30.0)
    assert_allclose(np.abs([north.amplitude[0], south.amplitude[0]]), np.sqrt(2.0), rtol=3e-3)
    assert north.energy_out[1] > 5 * south.energy_out[1]
    alike = eastern_junction(omega, C, 2.0, 30.0, 30.0)
    assert_allclose(alike.energy_out[1], 0.5, rtol=1e-3)


def test_asymmetry_series_has_converged() -> None:
    scaled = np.array([0.4, 0.8, 1.2])
    assert_allclose(oblique_asymmetry(scaled, 5.0), oblique_asymmetry(scaled, 6.0), atol=8e-3)


def test_equatorial_growth_in_a_layer() -> None:
    # a layer of thickness h ∝ c² has F = h^(−1/2) ∝ 1/c; the flux c² η² c^(−1/2) is kept
    ratio = np.exp(equatorial_growth(2.8, 2.2)) * (2.8 / 2.2)
    assert_allclose(ratio, (2.2 / 2.8) ** -0.75, rtol=1e-12)


def test_hermite_functions_are_orthonormal() -> None:
    y = np.linspace(-30.0, 30.0, 6001)
    psi = hermite_functions(201, y)[[0, 1, 2, 77, 200]]
    assert_allclose(psi @ psi.T * 0.01, np.eye(5), atol=1e-10)
