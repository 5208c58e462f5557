"""Every answer says with a number how far each assumption holds, and every limit is one caution.

That the numbers are right is held in `tests/analytic/test_validity.py`; here that none is missing
from an answer, and that what is said of it follows from it.
"""

from __future__ import annotations

import json

import numpy as np
import pytest
import xarray as xr

import waveguide
from waveguide.propagation.cautions import KINDS, mixed_cautions, rise_cautions
from waveguide.propagation.legs import Leg
from waveguide.report.document import document
from waveguide.report.page_data import _CHECKS

# what is to be flagged: the variables that say it, and the kinds of caution that name it
FLAGS = {
    "wind that is not known": (["wind_covered"], ["uncovered wind"]),  # of a response alone
    "ω/f": (["frequency_over_f"], ["fast wave"]),
    "R against coast curvature": (["coast_radius_radii"], ["curved coast"]),
    "basin width in R": (["basin_width_radii"], ["narrow basin"]),
    "slowly varying or not": (["speed_change"], ["fast change of speed"]),
    "critical frequency": (["critical_share"], ["below the critical frequency"]),
    "unresolved strait": (["narrowest_strait_km"], ["unresolved strait"]),
    "sea ice": (
        ["northernmost_latitude", "southernmost_latitude"],
        ["sea ice in the north", "sea ice in the south"],
    ),
    "season": (["upper_ocean_share"], ["season"]),
    "distance off the guide": (
        ["source_distance_radii", "target_distance_radii"],
        ["source off the guide", "source on the shelf", "target off the guide",
         "target on the shelf"],
    ),
    "amplitude": (["amplitude_ratio"], ["faint signal"]),
    "half-height and front": (["half_height_time_days", "front_time_days"], ["early rise"]),
    "mixed waves": (["peak_time_days", "half_height_time_days"], ["mixed waves"]),
}  # fmt: skip

LIMITS = {name: beyond for name, _, _, beyond in _CHECKS}


@pytest.fixture(scope="module", params=["mindanao_chain", "antarctic_ring", "brazil_guinea"])
def answer(request) -> xr.Dataset:
    return waveguide.arrivals(waveguide.read_scenario(request.param))


def test_every_kind_of_caution_belongs_to_a_flag():
    assert {kind.name for kind in KINDS} == {name for _, kinds in FLAGS.values() for name in kinds}


def test_every_flag_has_its_number_in_every_answer(answer):
    rows = json.loads(json.dumps(document(answer)))["arrivals"]
    assert any(row["status"] == "reached" for row in rows)
    for row in rows:
        if row["status"] != "reached":
            continue
        applies = {
            "unresolved strait": any(leg["kind"] == "strait" for leg in row["legs"]),
            "season": row["mode"] > 0,  # √(gh) does not know of the stratification
        }
        for flag, (names, _) in FLAGS.items():
            for name in names if flag != "wind that is not known" else ():
                assert isinstance(row[name], float) == applies.get(flag, True), (flag, row)


def test_a_caution_stands_for_every_number_beyond_its_limit_and_for_no_other(answer):
    kinds = {name: names for variables, names in FLAGS.values() for name in variables}
    for t, m in np.argwhere(answer["status"].values == "reached"):
        mine = (answer["remark_target"].values == t) & (answer["remark_mode"].values == m)
        told = dict(zip(answer["remark_kind"].values[mine], answer["remark_number"].values[mine],
                        strict=True))  # fmt: skip
        for name, beyond in LIMITS.items():
            value = float(answer[name].values[t, m])
            end = name.split("_")[0]
            of = [k for k in kinds[name] if end in k or end not in ("source", "target")]
            if name.endswith("latitude"):
                of = [k for k in kinds[name] if k.endswith("north") == name.startswith("north")]
            raised = [told[k] for k in of if k in told]
            assert bool(raised) == bool(beyond(value)), name
            assert all(abs(number) == pytest.approx(abs(value), rel=1e-9)
                       or number == pytest.approx(100.0 * value) for number in raised), name
        front, half = (answer[f"{n}_time_days"].values[t, m] for n in ("front", "half_height"))
        wave, time = answer["source_waveform"].values, answer["time_days"].values
        source = time[np.argmax(wave >= 0.5 * wave.max())]  # to a step of the waveform
        early = front - half + source
        if abs(early - 1.0) > time[1]:
            assert ("early rise" in told) == (early > 1.0)
        assert ("faint signal" in told) == (answer["amplitude_ratio"].values[t, m] < 0.01)


def test_cautions_are_told_the_most_serious_first(answer):
    order = [kind.name for kind in KINDS]
    row = answer["remark_target"].values * 10 + answer["remark_mode"].values
    rank = np.array([order.index(kind) for kind in answer["remark_kind"].values])
    assert np.all(np.diff(row * 100 + rank) > 0)


def test_half_height_well_before_the_front_is_told_with_the_difference():
    day = 86400.0
    (caution,) = rise_cautions(30.0 * day, 24.5 * day, 2.0 * day)
    assert caution.number == pytest.approx(7.5)
    assert "7.5 days less than the front" in caution.text
    assert rise_cautions(30.0 * day, 31.5 * day, 2.0 * day) == []
    assert rise_cautions(30.0 * day, 33.0 * day, 2.0 * day) == []


def test_mixed_waves_are_told_for_short_events_from_coast_to_coast():
    def leg(kind, length):
        ends = np.array([0.0, length])
        return Leg(kind, ends, ends, ends, ends / 2.5, 1.0, 3)

    crossing = [leg("coast", 1e6), leg("equator", 6e6), leg("coast", 1e6)]
    omega = 2.0 * np.pi / (86400.0 * np.array([60.0, 30.0, 9.6]))
    (caution,) = mixed_cautions(crossing, omega, np.array([0.3, 0.4, 0.3]))
    assert caution.number == pytest.approx(30.0)
    assert mixed_cautions(crossing, omega, np.array([0.5, 0.45, 0.05])) == []
    assert mixed_cautions(crossing[1:], omega, np.array([0.3, 0.4, 0.3])) == []
    islands = [leg("coast", 1e6), leg("equator", 3e5), leg("coast", 1e6)]
    assert mixed_cautions(islands, omega, np.array([0.3, 0.4, 0.3])) == []
