"""Lengths, spacing and bookkeeping of the packaged networks."""

from __future__ import annotations

import numpy as np
import pyproj
import pytest

from waveguide.coast.effective import offshore_azimuths
from waveguide.geodesy import geodesic_length
from waveguide.network.graph import StepKind
from waveguide.network.packaged import packaged_network
from waveguide.network.store import load_network, save_network

FAMILIES = ("baroclinic", "barotropic")


@pytest.mark.parametrize("family", FAMILIES)
def test_lengths_are_geodesics_of_the_ellipsoid(family):
    network, _ = packaged_network(family)
    _, _, length = pyproj.Geod(ellps="WGS84").inv(
        network.lon[network.tail], network.lat[network.tail],
        network.lon[network.head], network.lat[network.head],
    )
    assert np.allclose(network.length, length, rtol=1e-9, atol=1e-3)


def test_nodes_of_the_baroclinic_guide_are_20_to_25_km_apart():
    network, _ = packaged_network("baroclinic")
    for kind, share in ((StepKind.COAST, 0.97), (StepKind.EQUATOR, 1.0)):
        length = network.length[network.kind == kind]
        assert np.mean((length >= 20e3) & (length <= 25e3)) >= share
        assert length.max() < 25e3
        assert np.median(length) == pytest.approx(22.5e3, rel=0.01)
    # Shorter steps cut bends of the line; only beside a junction may one be very short.
    coast = network.kind == StepKind.COAST
    short = coast & (network.length < 8e3)
    ends = np.stack([network.lat[network.tail[short]], network.lat[network.head[short]]])
    assert np.all((ends == 0.0).any(axis=0))


def test_coast_has_the_length_of_an_effective_coast():
    network, _ = packaged_network("baroclinic")
    coast = network.kind == StepKind.COAST
    total = network.length[coast].sum() / 1e6
    # Less than the 1:110 million-scale outlines with all their islands would have at this
    # resolution (some 400 000 km), far more than the hull of the continents (150 000 km).
    assert 250.0 < total < 400.0
    ring = network.line == 1
    around = network.length[coast & ring[network.tail]].sum() / 1e6
    assert network.lat[ring].max() < -60.0
    assert 20.0 < around < 30.0  # round Antarctica and its bays; the circle of 65°S has 17


@pytest.mark.parametrize("family", FAMILIES)
def test_rings_close_and_lines_are_consecutive(family):
    network, _ = packaged_network(family)
    assert np.all(np.diff(network.line) >= 0)
    coast = network.kind == StepKind.COAST
    assert np.array_equal(network.line[network.tail[coast]], network.line[network.head[coast]])
    shore = np.isfinite(network.offshore)
    for line in np.unique(network.line[shore]):
        assert np.sum(coast & (network.line[network.tail] == line)) == np.sum(network.line == line)
    assert network.lon.min() >= -180.0
    assert network.lon.max() <= 180.0


@pytest.mark.parametrize("family", FAMILIES)
def test_steps_agree_with_the_seaward_normal(family):
    network, _ = packaged_network(family)
    for line in np.unique(network.line[np.isfinite(network.offshore)])[:20]:
        nodes = np.nonzero(network.line == line)[0]
        azimuth = offshore_azimuths(network.lon[nodes], network.lat[nodes])
        off = (azimuth - network.offshore[nodes] + 180.0) % 360.0 - 180.0
        assert np.abs(off).max() < 0.01
    coast = np.nonzero(network.kind == StepKind.COAST)[0]
    tail, head = network.tail[coast], network.head[coast]
    travel, _, _ = pyproj.Geod(ellps="WGS84").inv(
        network.lon[tail], network.lat[tail], network.lon[head], network.lat[head]
    )
    # Sea lies to the left in the north and to the right in the south, but for sharp bends.
    side = (network.offshore[tail] - travel) % 360.0
    north = network.lat[tail] + network.lat[head] > 0.0
    assert np.mean(side[north] > 180.0) > 0.997
    assert np.mean(side[~north] < 180.0) > 0.997


@pytest.mark.parametrize("family", FAMILIES)
def test_gaps_are_crossed_and_passed_once_each(family):
    network, _ = packaged_network(family)
    count = network.gap_width.size
    assert np.sort(network.gap[network.gap >= 0]).tolist() == list(range(count))
    passed = network.passes[network.passes >= 0]
    assert np.unique(passed).size == passed.size
    assert passed.size > 0.99 * count
    assert np.all(network.kind[network.passes >= 0] == StepKind.COAST)
    # The mouth is passed where it opens, or a few steps on where several open side by side.
    opens = {int(network.gap[s]): int(network.tail[s]) for s in np.nonzero(network.gap >= 0)[0]}
    far = 0
    for step in np.nonzero(network.passes >= 0)[0]:
        node, at = opens[int(network.passes[step])], int(network.tail[step])
        away = geodesic_length(network.lon[node], network.lat[node], network.lon[at],
                               network.lat[at])
        far = max(far, float(away))
    assert far < 15 * np.median(network.length[network.kind == StepKind.COAST])
    assert np.all(network.gap_width > 0.0)
    assert np.all(network.gap_sill > 0.0)


def test_both_families_keep_their_networks_through_a_file(tmp_path):
    network, atlas = packaged_network("barotropic")
    save_network(tmp_path / "network.nc", network, atlas, {"title": "copy"})
    again, same = load_network(tmp_path / "network.nc")
    for name in ("lon", "lat", "tail", "head", "kind", "length", "gap", "passes", "gap_sill"):
        assert np.array_equal(getattr(again, name), getattr(network, name))
    assert np.array_equal(same.phase_speed, atlas.phase_speed, equal_nan=True)
