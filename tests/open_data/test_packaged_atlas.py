"""The shipped atlas of section modes: whole, of the shipped network, and what the code computes."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.coast.section_quality import QualityFlag
from waveguide.constants import coriolis
from waveguide.modes.trapped import TOLERANCE, trapped_modes
from waveguide.network.graph import StepKind
from waveguide.network.packaged import packaged_network
from waveguide.network.trapped_atlas import node_sections
from waveguide.network.trapped_store import ATLAS_FILE, packaged_trapped_atlas
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.packaged import packaged_file
from waveguide.ocean.stratification import packaged_climatology


@pytest.fixture(scope="module")
def shipped():
    network, flat = packaged_network("baroclinic")
    return network, flat, packaged_trapped_atlas()


def flagged(atlas, flag):
    return (atlas.flags & int(flag)) > 0


def test_it_is_compact():
    assert packaged_file(ATLAS_FILE).stat().st_size < 3e6


def test_it_drops_in_for_the_flat_bottom_atlas(shipped):
    network, flat, atlas = shipped
    np.testing.assert_array_equal(atlas.mode, flat.mode)
    assert atlas.phase_speed.shape == flat.phase_speed.shape == (3, network.size)
    assert np.isfinite(atlas.phase_speed[:, np.isfinite(flat.phase_speed[0])]).all()
    np.testing.assert_allclose(atlas.gap_share, flat.gap_share, rtol=2.5e-4)


def test_nearly_every_coast_node_has_the_modes_of_its_own_section(shipped):
    network, _, atlas = shipped
    coast = np.isfinite(network.offshore)
    assert flagged(atlas, QualityFlag.FLAT_BOTTOM)[coast].mean() < 0.02  # seas without climatology
    assert flagged(atlas, QualityFlag.NOT_CONVERGED)[coast].mean() < 1e-3
    assert not flagged(atlas, QualityFlag.NOT_COMPUTED).any()


def test_numbers_are_positive_where_there_are_modes(shipped):
    _, _, atlas = shipped
    known = np.isfinite(atlas.phase_speed)
    for name in ("phase_speed", "coastal_value", "trapping_scale"):
        assert np.all(getattr(atlas, name)[known] > 0.0), name


def test_it_meets_the_equatorial_guide(shipped):
    """As f → 0 modes of sections are those of a flat bottom (Allen & Romea 1980)."""
    network, flat, atlas = shipped
    near = np.isfinite(network.offshore) & (np.abs(network.lat) < 0.15)
    ratio = atlas.phase_speed[0, near] / flat.phase_speed[0, near]
    assert near.sum() > 10
    assert np.nanmax(np.abs(ratio - 1.0)) < 0.05


def test_overlaps_are_those_of_coast_steps(shipped):
    network, _, atlas = shipped
    coast = network.kind == StepKind.COAST
    assert np.isnan(atlas.overlap[:, :, ~coast]).all()
    passed = np.abs(np.einsum("iim->im", atlas.overlap[:, :, coast]))
    known = np.isfinite(passed).all(axis=0)
    assert known.mean() > 0.95
    # orthonormal modes: no projection exceeds 1 (stored to 0.01)
    assert np.nanmax((atlas.overlap[:, :, coast] ** 2).sum(axis=1)) < 1.05
    assert np.all(np.median(passed[:, known], axis=1) > [0.95, 0.9, 0.85])


def test_a_few_nodes_computed_anew(shipped):
    network, flat, atlas = shipped
    coast = np.flatnonzero(np.isfinite(network.offshore) & (np.abs(network.lat) > 1.0)
                           & np.isfinite(flat.phase_speed[0]))
    nodes = coast[:: coast.size // 12]
    sections = node_sections(network, flat, packaged_bathymetry(), nodes)
    columns = packaged_climatology().profiles(network.lon[nodes], network.lat[nodes])
    compared = 0
    for row, node in enumerate(nodes):
        if flagged(atlas, QualityFlag.FLAT_BOTTOM)[node]:
            continue
        modes = trapped_modes(
            *sections.monotonic(row), columns.n2[row], columns.depth,
            float(coriolis(network.lat[node])), count=4,
        )
        np.testing.assert_allclose(
            atlas.phase_speed[:, node], modes.phase_speed[atlas.rank[:, node]],
            rtol=2.0 * TOLERANCE,
        )
        compared += 1
    assert compared >= 10
