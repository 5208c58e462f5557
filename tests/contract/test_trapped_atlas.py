"""The atlas of section modes on a made-up world: an island with a shelf in a flat ocean."""

from __future__ import annotations

from dataclasses import fields

import numpy as np
import pytest

from waveguide.coast.section_quality import QualityFlag
from waveguide.constants import EARTH_RADIUS, coriolis
from waveguide.errors import InputError
from waveguide.geodesy import destination
from waveguide.modes.trapped import trapped_modes
from waveguide.network import section_runs
from waveguide.network.atlas import flat_bottom_atlas
from waveguide.network.graph import Network, StepKind
from waveguide.network.section_runs import RunInputs, all_run_modes
from waveguide.network.trapped_atlas import build_trapped_atlas, inside
from waveguide.network.trapped_build import check_region
from waveguide.network.trapped_store import load_atlas, save_atlas
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology

LON, LAT, ISLAND = 30.0, 42.0, 300e3
N2_DEPTH = np.array([0.0, 100.0, 500.0, 1500.0, 4000.0])
N2 = np.array([2e-4, 1e-4, 2e-5, 4e-6, 1e-6])
WIDTH, EDGE, FOOT, DEEP = 50e3, 200.0, 110e3, 4000.0


def depth_off_shore(x):
    return np.interp(x, [-20e3, 0.0, WIDTH, FOOT], [-200.0, 0.0, EDGE, DEEP])


@pytest.fixture(scope="module")
def depths():
    lon, lat = np.arange(20.0, 40.01, 0.05), np.arange(34.0, 50.01, 0.05)
    x, y = np.meshgrid(np.radians(lon - LON), np.radians(lat))
    centre = np.radians(LAT)
    angle = np.arccos(np.sin(centre) * np.sin(y) + np.cos(centre) * np.cos(y) * np.cos(x))
    depth = depth_off_shore(angle * EARTH_RADIUS - ISLAND)
    return Bathymetry(lon, lat, depth.astype(np.float32))


@pytest.fixture(scope="module")
def climatology():
    lon, lat = np.arange(15.5, 45.0), np.arange(30.5, 55.0)
    n2 = np.tile(N2[:, None, None], (1, lat.size, lon.size)).astype(np.float32)
    return Climatology(lon, lat, N2_DEPTH, n2)


@pytest.fixture(scope="module")
def network():
    """A guide round the island on its shelf edge, land on the right, and two equator nodes."""
    count = 24
    azimuth = -360.0 * np.arange(count) / count  # anticlockwise round water, land on the right
    lon, lat = destination(LON, LAT, -azimuth, ISLAND + WIDTH)
    seaward = destination(LON, LAT, -azimuth, ISLAND + 2.0 * WIDTH)
    east = (seaward[0] - lon) * np.cos(np.radians(lat))
    offshore = np.degrees(np.arctan2(east, seaward[1] - lat)) % 360.0
    here = np.arange(count)
    nan = np.full(2, np.nan)
    equator = np.array([count, count + 1])
    return Network(
        lon=np.append(lon, [30.0, 31.0]), lat=np.append(lat, [0.0, 0.0]),
        line=np.append(np.zeros(count, int), [1, 1]),
        equatorial=np.append(np.zeros(count, bool), [True, True]),
        offshore=np.append(offshore, nan), basin=np.ones(count + 2, int),
        tail=np.append(here, equator[:1]), head=np.append(np.roll(here, -1), equator[1:]),
        kind=np.append(np.full(count, int(StepKind.COAST)), int(StepKind.EQUATOR)),
        length=np.full(count + 1, 90e3), gap=np.full(count + 1, -1), passes=np.full(count + 1, -1),
        gap_width=np.zeros(0), gap_length=np.zeros(0), gap_sill=np.zeros(0),
    )


@pytest.fixture(scope="module")
def flat(network, depths, climatology):
    return flat_bottom_atlas(network, depths, climatology, np.full(network.size, 20e3))


@pytest.fixture(scope="module")
def atlas(network, flat, depths, climatology, tmp_path_factory):
    folder = tmp_path_factory.mktemp("parts")
    return build_trapped_atlas(network, flat, depths, climatology, folder, workers=1)


def test_every_node_has_the_modes_of_the_section_that_was_drawn(network, atlas):
    x = np.array([0.0, WIDTH, FOOT, 400e3])
    for node in (0, 7, 13):
        drawn = trapped_modes(x, depth_off_shore(x), N2, N2_DEPTH, float(coriolis(
            network.lat[node])))
        # depths on a grid of 4 to 6 km, isobaths of the fit and two grids' errors of 0.5 %
        np.testing.assert_allclose(atlas.phase_speed[:, node], drawn.phase_speed, rtol=0.03)
        np.testing.assert_allclose(
            atlas.coastal_value[:2, node], drawn.coastal_value[:2], rtol=0.06
        )


def test_modes_are_passed_on_along_a_coast_that_does_not_change(atlas, network):
    coast = network.kind == StepKind.COAST
    passed = np.abs(atlas.overlap[[0, 1, 2], [0, 1, 2]][:, coast])
    assert passed.min() > 0.95
    assert np.isnan(atlas.overlap[:, :, ~coast]).all()
    np.testing.assert_array_equal(atlas.rank[:, 0], [0, 1, 2, 3])


def test_the_equator_outside_the_depths_has_no_modes(atlas):
    assert np.isnan(atlas.phase_speed[:, -1]).all()


def test_the_flat_bottom_field_meanings_are_kept(atlas, flat):
    drop_in = atlas.of_modes(1)
    np.testing.assert_array_equal(drop_in.mode, flat.mode)
    for field in fields(flat):
        assert getattr(drop_in, field.name).shape == getattr(flat, field.name).shape


def test_a_file_gives_the_atlas_back(atlas, network, tmp_path):
    save_atlas(tmp_path / "atlas.nc", network, atlas, {"title": "made up"})
    back, attributes = load_atlas(tmp_path / "atlas.nc")
    assert attributes["title"] == "made up"
    for field in fields(atlas):
        kept, stored = getattr(atlas, field.name), getattr(back, field.name)
        tolerance = {"overlap": 0.005}.get(field.name, 0.0)
        np.testing.assert_allclose(stored, kept, rtol=2.5e-4, atol=tolerance)


def test_a_region_leaves_the_rest_out(network, flat, depths, climatology, atlas, tmp_path):
    region = (30.0, 30.0, 40.0, 42.0)
    part = build_trapped_atlas(
        network, flat, depths, climatology, tmp_path, region=region, workers=1
    )
    within = inside(network, region)
    assert 0 < within.sum() < 12
    np.testing.assert_allclose(part.phase_speed[:, within], atlas.phase_speed[:, within])
    assert np.isnan(part.phase_speed[:, ~within]).all()
    assert np.all(part.flags[~within] == int(QualityFlag.NOT_COMPUTED))


def test_a_node_without_section_modes_falls_back_and_says_so(
    network, flat, depths, climatology, tmp_path, monkeypatch
):
    def no_modes(*_, **__):
        raise InputError("none")

    monkeypatch.setattr(section_runs, "trapped_modes", no_modes)
    fallen = build_trapped_atlas(network, flat, depths, climatology, tmp_path, workers=1)
    coast = ~network.equatorial
    assert np.all(fallen.flags[coast] & int(QualityFlag.FLAT_BOTTOM))
    np.testing.assert_allclose(fallen.phase_speed[1:], flat.phase_speed)
    np.testing.assert_allclose(fallen.coastal_value[1:], flat.coastal_value)
    assert np.isfinite(fallen.decay_per_drag[:, coast]).all()


def test_the_date_line_is_no_edge_of_a_region(network):
    shifted = Network(**{**vars(network), "lon": np.where(network.lon > 30.0, -179.0, 179.0)})
    assert inside(shifted, (170.0, -90.0, 190.0, 90.0)).all()
    assert inside(shifted, (-180.0, -90.0, 180.0, 90.0)).all()
    assert inside(shifted, (170.0, -90.0, 180.0, 90.0)).sum() == (shifted.lon > 0).sum()


@pytest.mark.parametrize(
    ("region", "said"),
    [
        ((0.0, 50.0, 10.0, 40.0), "south must be less than north"),
        ((20.0, 0.0, 10.0, 40.0), "20 0 370 40"),
        ((0.0, -100.0, 10.0, 40.0), "latitudes"),
        ((0.0, 0.0, 1e9, 40.0), "longitudes"),
        ((100.0, 0.0, 110.0, 10.0), "no coast"),
        ((float("nan"), 0.0, 110.0, 10.0), "degrees"),
    ],
)
def test_regions_that_are_none(network, region, said):
    with pytest.raises(InputError, match=said):
        check_region(network, region)


def _runs(count):
    offshore = np.array([0.0, 50e3, 110e3])
    depth = np.array([0.0, 200.0, 4000.0])
    return [
        RunInputs(np.tile(offshore, (2, 1)), np.tile(depth, (2, 1)), np.tile(N2, (2, 1)),
                  N2_DEPTH, np.full(2, 1e-4 + 1e-6 * k))
        for k in range(count)
    ]


def test_interrupted_work_is_taken_up_where_it_stopped(tmp_path, monkeypatch):
    calls = []
    original = section_runs.run_modes

    def counted(inputs):
        calls.append(inputs)
        if len(calls) == 3:
            raise KeyboardInterrupt
        return original(inputs)

    monkeypatch.setattr(section_runs, "run_modes", counted)
    with pytest.raises(KeyboardInterrupt):
        all_run_modes(_runs(4), tmp_path, workers=1)
    assert len(list(tmp_path.glob("*.npz"))) == 2
    seen = []
    result = all_run_modes(_runs(4), tmp_path, 1, lambda done, total: seen.append((done, total)))
    assert len(calls) == 3 + 2
    assert seen == [(2, 4), (3, 4), (4, 4)]
    whole = all_run_modes(_runs(4), tmp_path / "other", workers=1)
    for a, b in zip(result, whole, strict=True):
        np.testing.assert_array_equal(a.phase_speed, b.phase_speed)
        np.testing.assert_array_equal(a.overlap, b.overlap)


def test_other_inputs_are_other_parts_and_a_torn_file_is_no_part(tmp_path):
    run, other = _runs(2)
    assert run.key() != other.key()
    assert run.key() == _runs(1)[0].key()
    all_run_modes([run], tmp_path, workers=1)
    part = tmp_path / f"{run.key()}.npz"
    part.write_bytes(part.read_bytes()[:100])
    again = all_run_modes([run], tmp_path, workers=1)
    assert np.isfinite(again[0].phase_speed).all()


def test_two_processes_give_the_same(tmp_path):
    runs = _runs(2)
    one = all_run_modes(runs, tmp_path / "one", workers=1)
    two = all_run_modes(runs, tmp_path / "two", workers=2)
    for a, b in zip(one, two, strict=True):
        np.testing.assert_array_equal(a.phase_speed, b.phase_speed)
