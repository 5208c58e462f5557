"""The routes, source and targets as GeoJSON (RFC 7946), for a GIS."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.document import plain_value
from waveguide.report.routes import leg_line, legs_of, split_at_date_line, vertices_of
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.geodesy import Array

_DIGITS = 5
"""Digits of a coordinate in degrees: a metre."""


def write_geojson(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``routes.geojson``: a line for each leg, a point for the source and each target.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    collection = {
        "type": "FeatureCollection",
        "title": plain(dataset.attrs["title"], 200),
        "caution": dataset.attrs["caution"],
        "features": [_source(dataset), *_targets(dataset), *_legs(dataset)],
    }
    text = json.dumps(collection, ensure_ascii=False, allow_nan=False)
    (folder / "routes.geojson").write_text(text, encoding="utf-8")


def _feature(geometry: dict[str, Any], properties: dict[str, Any]) -> dict[str, Any]:
    plain_properties = {key: plain_value(value) for key, value in properties.items()}
    return {"type": "Feature", "geometry": geometry, "properties": plain_properties}


def _point(lon: float, lat: float) -> dict[str, Any]:
    return {
        "type": "Point",
        "coordinates": [round(float(lon), _DIGITS), round(float(lat), _DIGITS)],
    }


def _source(dataset: xr.Dataset) -> dict[str, Any]:
    attributes = dataset.attrs
    return _feature(
        _point(attributes["source_longitude"], attributes["source_latitude"]),
        {
            "feature": "source",
            "name": plain(attributes["event_name"], 120),
            "start": attributes["event_start"],
        },
    )


def _targets(dataset: xr.Dataset) -> Iterator[dict[str, Any]]:
    for t, name in enumerate(dataset["target"].values):
        properties: dict[str, Any] = {"feature": "target", "name": plain(name, 120)}
        for m, mode in enumerate(dataset["mode"].values):
            properties[f"mode_{mode}_status"] = dataset["status"].values[t, m]
            properties[f"mode_{mode}_front_time_days"] = dataset["front_time_days"].values[t, m]
        lon, lat = (dataset[f"target_{axis}"].values[t] for axis in ("longitude", "latitude"))
        yield _feature(_point(lon, lat), properties)


def _legs(dataset: xr.Dataset) -> Iterator[dict[str, Any]]:
    for route in range(dataset.sizes["route"]):
        target = dataset["target"].values[dataset["route_target"].values[route]]
        head = {
            "feature": "leg",
            "target": plain(target, 120),
            "mode": dataset["mode"].values[dataset["route_mode"].values[route]],
            "route": route,
            "route_kind": dataset["route_kind"].values[route],
            "route_via": plain(dataset["route_via"].values[route], 200),
        }
        for number, leg in enumerate(legs_of(dataset, route), start=1):
            geometry = _line(*leg_line(dataset, leg))
            yield _feature(geometry, {**head, "leg": number, **_leg_properties(dataset, leg)})


def _leg_properties(dataset: xr.Dataset, leg: int) -> dict[str, Any]:
    names = ("kind", "length_km", "time_days", "phase_speed_m_s", "amplitude_factor")
    times = dataset["vertex_time_days"].values[vertices_of(dataset, leg)]
    ends = {"from_time_days": times[0], "to_time_days": times[-1]} if times.size else {}
    return {**{name: dataset[f"leg_{name}"].values[leg] for name in names}, **ends}


def _line(lon: Array, lat: Array) -> dict[str, Any]:
    """A LineString, or a MultiLineString where the line crosses the date line."""
    pieces = [
        np.round(np.column_stack(piece), _DIGITS).tolist() for piece in split_at_date_line(lon, lat)
    ]
    if len(pieces) == 1:
        return {"type": "LineString", "coordinates": pieces[0]}
    return {"type": "MultiLineString", "coordinates": pieces}
