"""Couple twelve modes along real coasts, with the whole friction of each section, and store it.

From each section of a coast come modes F_n, speeds c_n and the matrix of bottom friction
A_nm = (1/|f|) ∫ (dF_n/dx along the bottom)(∂x F_m) dx. Between sections pressure is handed on along
isobaths (the modes are orthonormal in B = ∫ p q dh, and below the bottom of the shallower section
pressure is that at its foot), along each the amplitudes obey ∂s a = (iω/c − rA) a. So nothing is
supposed about how fast sections change, as long as the wave is longer than the section is wide;
the curvature of f along the coast is left out. One mode is sent in at the first node.

Run it in this folder, `python make_coupled_results.py`: some ten minutes on one core. It rewrites
coupled_results.json, which test_oracle_coupled.py holds the packaged atlas against.
"""

from __future__ import annotations

import json
import platform
import time
from itertools import pairwise
from pathlib import Path

import numpy as np
import scipy
from numpy.typing import NDArray
from scipy.linalg import expm

from waveguide.constants import GRAVITY, SECONDS_PER_DAY, coriolis
from waveguide.modes.assembly import Rotation
from waveguide.modes.profile import make_profile
from waveguide.modes.section import checked_section
from waveguide.modes.trapped import Solution, converged_solutions
from waveguide.network.graph import Network, StepKind
from waveguide.network.packaged import packaged_network
from waveguide.network.trapped_atlas import node_sections
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology

Array = NDArray[np.float64]

RESULTS = Path(__file__).parent / "coupled_results.json"
COUNT, TOLERANCE, DRAG = 11, 0.03, 5e-4
PERIODS = (5.0, 10.0, 20.0, 40.0)
STARTS = {
    "California": (-120.6, 34.6, 90), "Peru": (-81.0, -6.0, 90), "Japan": (141.9, 40.5, 70),
    "Central America": (-91.5, 13.9, 70), "Bay of Bengal": (94.0, 16.0, 60),
}
"""A place near the first node, and how many nodes."""

PLACES = (1e5, 2e5, 4e5, 6e5, 8e5, 10e5, 13e5, 16e5)
"""Distances along the coast (m) at the nodes nearest to which sea level is stored."""


def coast_from(network: Network, lon: float, lat: float, count: int) -> NDArray[np.int64]:
    """Steps of a coast in the direction of travel, from the node nearest to a place."""
    off = np.hypot((network.lon - lon) * np.cos(np.radians(lat)), network.lat - lat)
    node = int(np.argmin(np.where(np.isfinite(network.offshore), off, np.inf)))
    coast = np.flatnonzero(network.kind == StepKind.COAST)
    leaving = dict(zip(network.tail[coast].tolist(), coast.tolist(), strict=True))
    steps = []
    for _ in range(count - 1):
        steps.append(leaving[node])
        node = int(network.head[steps[-1]])
    return np.array(steps)


def friction_matrix(solution: Solution) -> Array:
    """A of the module (s/m²)."""
    mesh, values, beyond = solution.mesh, solution.values, solution.beyond
    depth, dx = mesh.level[mesh.bottom], np.diff(mesh.offshore)
    on_bottom = values[:, mesh.start[:-1] + mesh.bottom]
    rise = np.diff(on_bottom) / dx
    middle = 0.5 * (on_bottom[:, 1:] + on_bottom[:, :-1])
    n2 = solution.profile.at(0.5 * (depth[1:] + depth[:-1]))
    burger = n2 * (np.diff(depth) / (dx * solution.f)) ** 2
    p_x = (rise - solution.eigenvalue[:, None] * burger * middle) / (1.0 + burger)
    shares = values[:, mesh.start[-2]:] @ beyond.projection * beyond.structure[-1]
    k = beyond.decay
    pairs = np.outer(k, k) / np.maximum(np.add.outer(k, k), np.finfo(float).tiny)
    return ((rise * dx) @ p_x.T + shares @ pairs @ shares.T) / abs(solution.f)


def by_depth(solution: Solution) -> tuple[Array, Array]:
    """Depths along the boundary, rising, and the modes there."""
    mesh = solution.mesh
    depth = mesh.boundary_depth
    kept = depth >= np.maximum.accumulate(depth)
    apart = 1e-6 * depth[-1] * np.arange(depth.size) / depth.size
    return (depth + apart)[kept], solution.values[:, mesh.boundary][:, kept]


def handed_on(here: tuple[Array, Array], there: tuple[Array, Array]) -> Array:
    """Amplitudes on the next section (rows) of modes of this one."""
    depth = np.union1d(here[0], there[0])
    a = np.array([np.interp(depth, here[0], values) for values in here[1]])
    b = np.array([np.interp(depth, there[0], values, right=0.0) for values in there[1]])
    third = np.diff(depth) / 6.0
    upper, lower = (2.0 * a[:, :-1] + a[:, 1:]) * third, (a[:, :-1] + 2.0 * a[:, 1:]) * third
    return (upper @ b[:, :-1].T + lower @ b[:, 1:].T).T


def sections_of(network: Network, nodes: NDArray[np.int64]) -> list[Solution]:
    """Modes of the sections at nodes."""
    flat = packaged_network("baroclinic")[1]
    found = node_sections(network, flat, packaged_bathymetry(), nodes)
    columns = packaged_climatology()
    n2 = columns.profiles(network.lon[nodes], network.lat[nodes]).n2
    solutions = []
    for row, node in enumerate(nodes):
        x, h = checked_section(*found.monotonic(row))
        f = float(coriolis(network.lat[node]))
        solutions.append(converged_solutions(
            x, h, make_profile(n2[row], columns.depth), f, Rotation(f * f, 0.0, GRAVITY), COUNT,
            TOLERANCE,
        )[1])
    return solutions


def along_coast(
    omega: float, mode: int, drag: float, value: Array, slow: Array, rub: list[Array],
    on: list[Array], length: Array,
) -> NDArray[np.complex128]:
    """Sea level at every node per unit at the first, of one mode sent in."""
    amplitude = np.zeros(value.shape[1], complex)
    amplitude[mode] = 1.0
    level = [value[0] @ amplitude]
    for i, ds in enumerate(length):
        rate = np.diag(0.5j * omega * (slow[i] + slow[i + 1])) - drag * rub[i]
        amplitude = on[i] @ (expm(rate * ds) @ amplitude)
        level.append(value[i + 1] @ amplitude)
    return np.array(level) / value[0, mode]


def coast_results(network: Network, lon: float, lat: float, count: int) -> dict:
    """Sea level along one coast per unit at its first node."""
    steps = coast_from(network, lon, lat, count)
    nodes = np.append(network.tail[steps[0]], network.head[steps])
    solutions = sections_of(network, nodes)
    value = np.array([solution.values[:, 0] for solution in solutions])
    slow = np.array([1.0 / solution.phase_speed for solution in solutions])
    rub = [friction_matrix(solution) for solution in solutions]
    depths = [by_depth(solution) for solution in solutions]
    on = [handed_on(a, b) for a, b in pairwise(depths)]
    length = network.length[steps]
    place = np.concatenate([[0.0], np.cumsum(length)])
    stops = [int(np.argmin(np.abs(place - at))) for at in PLACES if at < place[-1]]
    waves = []
    for mode in (1, 2):
        for drag in (0.0, DRAG):
            for days in PERIODS:
                omega = 2.0 * np.pi / (days * SECONDS_PER_DAY) * np.array([1.0, 1.02])
                one, other = (
                    along_coast(w, mode, drag, value, slow, rub, on, length)[stops] for w in omega
                )
                delay = np.angle(other / one) / (omega[1] - omega[0]) / SECONDS_PER_DAY
                waves.append({
                    "mode": mode, "drag": drag, "period_days": days,
                    "sea_level": np.abs(one).round(3).tolist(),
                    "group_delay_days": delay.round(2).tolist(),
                })
    return {"start": [lon, lat, count], "stops": stops, "waves": waves}


def main() -> None:
    """Run it and write the file."""
    network, _ = packaged_network("baroclinic")
    begin = time.process_time()
    coasts = {name: coast_results(network, *start) for name, start in STARTS.items()}
    content = {
        "made_by": "make_coupled_results.py",
        "made_on": f"{time.strftime('%Y-%m-%d', time.gmtime())}, Python "
        f"{platform.python_version()}, numpy {np.__version__}, scipy {scipy.__version__}",
        "cpu_seconds": round(time.process_time() - begin, 1),
        "coasts": coasts,
    }
    RESULTS.write_text(json.dumps(content, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
