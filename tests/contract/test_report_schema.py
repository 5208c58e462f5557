"""The table of stored variables, and that a dataset off it is refused."""

from __future__ import annotations

import re

import numpy as np
import pytest

from waveguide.report.attributes import arrivals_attributes
from waveguide.report.document import document
from waveguide.report.table import table
from waveguide.scenario import read_scenario, shipped_scenarios
from waveguide.schema import ARRIVALS, ARRIVALS_ATTRIBUTES, SchemaError, arranged, assemble, check


def test_the_arrivals_made_by_hand_pass(arrivals):
    check(arrivals)


def test_every_declaration_is_complete():
    for name, variable in ARRIVALS.items():
        assert variable.long_name, name
        if variable.kind == "number":
            assert variable.units, name
        if variable.units == "km":
            assert name.endswith("_km")
        if variable.units == "day":
            assert name.endswith("_days")


def _without_units(arrivals):
    return arrivals.assign(leg_length_km=arrivals["leg_length_km"].drop_attrs())


def _with_a_time_in_every_row(arrivals):
    return arrivals.assign(front_time_days=arrivals["front_time_days"].fillna(0.0))


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (lambda d: d.drop_vars("status"), "missing: status"),
        (lambda d: d.assign(extra=("leg", d["leg_length_km"].values)), "not declared: extra"),
        (lambda d: d.assign(status=d["status"].T), "status has dimensions"),
        (lambda d: d.assign(caution=d["amplitude_m"]), "caution has type"),
        (_without_units, "leg_length_km has units"),
        (lambda d: d.drop_attrs(deep=False), "global attributes missing: Conventions"),
        (lambda d: d.assign(route_target=d["route_target"] + 3), "route_target points outside"),
        (lambda d: d.assign(leg_route=d["leg_route"][::-1]), "leg_route does not rise"),
        (_with_a_time_in_every_row, "front_time_days is finite"),
        (lambda d: d.assign(path_length_km=np.nan * d["path_length_km"]), "path_length_km is"),
    ],
)
def test_a_difference_is_refused(arrivals, change, message):
    with pytest.raises(SchemaError, match=message):
        check(change(arrivals))


def test_values_must_match_the_table():
    with pytest.raises(SchemaError, match="not declared: depth"):
        assemble({"depth": [1.0]}, {})


def test_arrays_say_what_their_dataset_says(arrivals):
    values = {name: arrivals[name].values for name in ARRIVALS}
    arrays = arranged(values, arrivals.attrs)
    check(arrays)
    assert arrays.sizes == dict(arrivals.sizes)
    assert arrays.dataset().identical(arrivals)
    assert table(arrays, budget=True) == table(arrivals, budget=True)
    assert document(arrays) == document(arrivals)
    values["route_target"] = values["route_target"] + 3
    with pytest.raises(SchemaError, match="route_target points outside"):
        check(arranged(values, arrivals.attrs))


@pytest.mark.parametrize("name", shipped_scenarios("event"))
def test_attributes_of_a_scenario(name):
    attributes = arrivals_attributes(read_scenario(name), {"bathymetry.nc": "0" * 64})
    assert tuple(attributes)[: len(ARRIVALS_ATTRIBUTES)] == ARRIVALS_ATTRIBUTES
    assert re.fullmatch(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ", attributes["event_start"])
    assert "no warning system" in attributes["caution"]
    assert attributes["data_sha256"] == "bathymetry.nc " + "0" * 64
