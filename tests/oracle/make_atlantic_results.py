"""Integrate one mode with uniform c = 2.5 m/s over the tropical Atlantic and store the gauges.

The mask is the packaged shoreline and bathymetry at 0.1°, water being what is deeper than the
sill depth of the baroclinic network, with every island and bend. Run it in this folder,
`python make_atlantic_results.py`; a minute or two on one core. It rewrites
atlantic_results.json (a burst of 5 days) and atlantic_short_results.json (1.5 days).
"""

from __future__ import annotations

import json
import platform
import time
from functools import partial
from pathlib import Path

import numba
import numpy as np
from scipy.interpolate import RegularGridInterpolator
from whole_route import Domain, edge_sponge, patch, whole_route

from waveguide.coast.shoreline import land_mask
from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.latitude import typical_ocean
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology

FOLDER = Path(__file__).parent
SPEED, STEP, WEST, SOUTH = 2.5, 0.1, -56.0, -27.0
COLUMNS, ROWS = 720, 470
RUNS = {"atlantic_results.json": (150.0, 5.0), "atlantic_short_results.json": (100.0, 1.5)}
"""File: days to integrate, standard deviation of the burst in days."""
SOURCE = (-38.6, -15.5)
GAUGES = {
    "Aracaju": (-37.0, -11.0), "Natal": (-35.1, -5.0), "Libreville": (9.3, 0.5),
    "Pointe-Noire": (11.5, -5.0), "Luanda": (13.5, -10.0), "Tombua": (12.2, -15.5),
    "Toscanini": (14.3, -21.0), "Lagos": (3.5, 6.2), "Takoradi": (-1.7, 4.6),
    "Tabou": (-7.8, 4.5), "Dakar": (-17.4, 14.5), "Camocim": (-40.8, -2.4),
    "20 W": (-20.0, 0.0), "5 W": (-5.0, 0.0),
}


def real_coast() -> Domain:
    """Mask of the tropical Atlantic."""
    lon = WEST + STEP * (np.arange(COLUMNS) + 0.5)
    lat = SOUTH + STEP * (np.arange(ROWS) + 0.5)
    depths, typical = packaged_bathymetry(), typical_ocean(packaged_climatology())
    depth = RegularGridInterpolator((depths.lat, depths.lon), depths.depth)
    deep = depth(np.stack(np.meshgrid(lat, lon, indexing="ij"), axis=-1))
    sill = np.interp(lat, typical.lat, typical.sill_depth)[:, None]
    return Domain(~land_mask(lon, lat) & (deep > sill), WEST, SOUTH, STEP)


def burst(t: float, deviation: float) -> float:
    """Gaussian in time, with its peak four standard deviations (days) after the start."""
    return float(np.exp(-0.5 * (t / SECONDS_PER_DAY / deviation - 4.0) ** 2)) / SECONDS_PER_DAY


def integrate(days: float, deviation: float) -> dict:
    """Integrate one burst."""
    domain = real_coast()
    gauges = whole_route(
        domain, SPEED, patch(domain, *SOURCE, 1.0), partial(burst, deviation=deviation),
        list(GAUGES.values()), days * SECONDS_PER_DAY,
        sponge=edge_sponge(domain, 4.0, 4e-5, "NSW"), viscosity=10.0,
    )
    peak = np.abs(gauges.sea_level).max(axis=0)
    made_on = time.strftime("%Y-%m-%d", time.gmtime())
    return {
        "made_by": "make_atlantic_results.py (whole_route.py, shallow_water.py)",
        "made_on": f"{made_on}, Python {platform.python_version()}, numpy {np.__version__}, "
        f"numba {numba.__version__}",
        "setup": {"speed": SPEED, "step": STEP, "source": SOURCE, "burst_days": deviation,
                  "viscosity": 10.0, "water_share": round(float(domain.water.mean()), 4)},
        "steps": gauges.steps,
        "cpu_seconds": round(gauges.cpu_seconds, 1),
        "names": list(GAUGES),
        "lon": gauges.lon.round(3).tolist(),
        "lat": gauges.lat.round(3).tolist(),
        "sample_seconds": float(gauges.time[1]),
        "peak": peak.round(6).tolist(),
        "sea_level_per_mille_of_peak": np.round(1000 * gauges.sea_level / peak).astype(int).T
        .tolist(),
    }


def main() -> None:
    """Run both and write the files."""
    for name, (days, deviation) in RUNS.items():
        content = integrate(days, deviation)
        lines = [f" {json.dumps(key)}: {json.dumps(value)}" for key, value in content.items()]
        (FOLDER / name).write_text("{\n" + ",\n".join(lines) + "\n}\n", encoding="utf-8")


if __name__ == "__main__":
    main()
