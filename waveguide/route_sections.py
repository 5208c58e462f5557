"""Cross-shelf sections along the routes of a study, for pictures of the way."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import cross_shelf_sections
from waveguide.constants import deformation_radius
from waveguide.network.graph import StepKind
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.pipeline import Study

EVERY = 8
"""Every so many nodes of a coast, which lie 20 km apart, a section is taken."""

MOST_SECTIONS = 250
MOST_POINTS = 28
"""Of a section: it is drawn as large as a thumbnail."""


def route_sections(study: Study) -> list[dict[str, Any]]:
    """Sections at coast nodes of the headline routes of the lowest mode.

    Parameters
    ----------
    study : Study

    Returns
    -------
    list of dict
        ``lon``, ``lat`` (degrees), ``offshore_km`` and ``depth_m`` (lists), ``radius_km``: the
        deformation radius of the mode.
    """
    mode, answer = min(study.answers.items())
    network = study.networks[mode]
    nodes = _coast_nodes(study, mode)
    if not nodes.size:
        return []
    radius = deformation_radius(answer.mode.speed[nodes], network.lat[nodes])
    sections = cross_shelf_sections(
        network.lon[nodes], network.lat[nodes], network.offshore[nodes], radius,
        packaged_bathymetry(),
    )
    found = []
    for row, node in enumerate(nodes.tolist()):
        offshore, depth = sections.raw(row)
        if offshore.size < 2:
            continue
        kept = np.unique(np.linspace(0, offshore.size - 1, MOST_POINTS).round().astype(int))
        found.append({
            "lon": float(network.lon[node]), "lat": float(network.lat[node]),
            "offshore_km": (offshore[kept] / 1e3).tolist(), "depth_m": depth[kept].tolist(),
            "radius_km": float(radius[row]) / 1e3,
        })
    return found


def _coast_nodes(study: Study, mode: int) -> NDArray[np.int64]:
    """Every n-th coast node of the headline routes, fewer where there are many."""
    network = study.networks[mode]
    steps = [a.routes[0].steps for a in study.answers[mode].arrivals if a.routes]
    together = np.unique(np.concatenate([*steps, np.zeros(0, np.int64)]))
    nodes = np.unique(network.tail[together[network.kind[together] == StepKind.COAST]])
    nodes = nodes[np.isfinite(network.offshore[nodes])]
    every = max(EVERY, -(-nodes.size // MOST_SECTIONS))
    return np.asarray(nodes[::every], np.int64)
