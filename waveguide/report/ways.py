"""Targets that lie along one way: routes of which one is the beginning of the other."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.report.routes import legs_of, routes_of, vertices_of

if TYPE_CHECKING:
    from waveguide.stored import Stored

Array = NDArray[np.float64]

_SAME_PLACE = 1e-6  # degrees


class Way(NamedTuple):
    """Headline routes that lead the same way.

    Attributes
    ----------
    routes : list of int
        Indices of the routes, the longest first.
    """

    routes: list[int]

    def longest(self, dataset: Stored, mode: int) -> int | None:
        """The longest route of a mode (its index along ``mode``), None where there is none."""
        modes = dataset["route_mode"].values
        return next((route for route in self.routes if modes[route] == mode), None)


def ways(dataset: Stored) -> list[Way]:
    """Headline routes of all targets and modes, those that lead the same way together.

    A route belongs to the longest one whose vertices begin with its own. Its first and last
    vertices are feet of ties beside the guide's nodes, so they are not compared.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals.

    Returns
    -------
    list of Way
        In the order of their targets.
    """
    rows = [(t, m) for t in range(dataset.sizes["target"]) for m in range(dataset.sizes["mode"])]
    headline = [found[0] for row in rows if (found := routes_of(dataset, *row))]
    lines = {route: _inner_line(dataset, route) for route in headline}
    result: list[Way] = []
    for route in sorted(headline, key=lambda i: -len(lines[i])):
        home = next((way for way in result if _begins(lines[way.routes[0]], lines[route])), None)
        if home is None:
            result.append(Way([route]))
        else:
            home.routes.append(route)
    return sorted(result, key=lambda way: min(way.routes))


def guided_legs(dataset: Stored, route: int) -> list[int]:
    """Legs of a route along the guide, in the order of travel."""
    kinds = dataset["leg_kind"].values
    return [leg for leg in legs_of(dataset, route) if kinds[leg] != "attachment"]


def guided_vertices(dataset: Stored, route: int) -> NDArray[np.int64]:
    """Vertices of a route along the guide, in the order of travel."""
    spans = [np.array(vertices_of(dataset, leg)) for leg in guided_legs(dataset, route)]
    return np.concatenate([np.zeros(0, np.int64), *spans]).astype(np.int64)


def _inner_line(dataset: Stored, route: int) -> Array:
    index = guided_vertices(dataset, route)[1:-1]
    return np.column_stack(
        [dataset[f"vertex_{axis}"].values[index] for axis in ("longitude", "latitude")]
    )


def _begins(line: Array, other: Array) -> bool:
    """Whether a line begins with another one."""
    return len(other) <= len(line) and bool(
        np.all(np.abs(line[: len(other)] - other) < _SAME_PLACE)
    )
