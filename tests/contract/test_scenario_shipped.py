"""The shipped scenarios are sound, cover the ocean, and lie where they say."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial import cKDTree

from waveguide.coast.shoreline import shoreline
from waveguide.geodesy import arc, unit_vectors
from waveguide.scenario import read_scenario, shipped_scenarios

SHIPPED = shipped_scenarios("event")


@pytest.fixture(scope="module")
def shore():
    rings = shoreline("intermediate")
    lon, lat = (np.concatenate([getattr(ring, axis) for ring in rings]) for axis in ("lon", "lat"))
    return cKDTree(unit_vectors(lon, lat))


@pytest.mark.parametrize("name", SHIPPED)
def test_scenario_is_invented_and_in_the_future(name):
    scenario = read_scenario(name)
    assert scenario.name == name
    assert "invented" in scenario.description
    assert 2030 < scenario.event.start.year < 2040
    assert len(scenario.targets) >= 7


@pytest.mark.parametrize("name", SHIPPED)
def test_targets_lie_at_a_shore(name, shore):
    # 15 km: ice fronts move, and Vernadsky lies among islands the shoreline leaves out. The
    # atoll of Kapingamarangi is left out too; so close to the equator it lies on that guide.
    for target in read_scenario(name).targets:
        if target.depth_m:
            continue  # a mooring stands off the shore
        if target.name == "Kapingamarangi":
            assert abs(target.position[1]) < 1.5
            continue
        if target.position[1] == 0.0 and target.name.startswith("0N"):
            continue  # a mooring on the equator
        distance = float(arc(shore.query(unit_vectors(*target.position))[0])) / 1e3
        assert distance < 15.0, target.name


def test_scenarios_cover_hemispheres_modes_and_oceans():
    scenarios = [read_scenario(name) for name in SHIPPED]
    assert len(scenarios) >= 7
    lats = [s.event.centre[1] for s in scenarios]
    assert min(lats) < -40.0
    assert max(lats) > 25.0
    assert {mode for s in scenarios for mode in s.waves.modes} >= {0, 1, 2}
    lons = np.array([s.event.centre[0] for s in scenarios])
    assert np.any((lons > 50) & (lons < 100))  # Indian Ocean
    assert np.any((lons > -70) & (lons < -20))  # Atlantic
    assert np.any((lons > 120) | (lons < -110))  # Pacific
    assert {s.ocean.source for s in scenarios} == {"packaged", "uniform"}
    assert any(s.event.amplitude_m is None for s in scenarios)
    assert any(s.event.box for s in scenarios)
