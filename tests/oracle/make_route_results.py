"""Integrate the basin at three cells per deformation radius and store the gauges.

Run it in this folder, `python make_route_results.py`; two to three minutes on one core. It
rewrites route_results.json.
"""

from __future__ import annotations

import json
import platform
import time
from pathlib import Path

import numba
import numpy as np
from basin import integrate_basin

RESULTS = Path(__file__).parent / "route_results.json"
SETUP = {"speed": 2.5, "step": 0.1, "days": 110.0, "burst_days": 5.0, "viscosity": 10.0}


def main() -> None:
    """Run it and write the file."""
    _, gauges = integrate_basin(**SETUP)
    peak = np.abs(gauges.sea_level).max(axis=0)
    made_on = time.strftime("%Y-%m-%d", time.gmtime())
    content = {
        "made_by": "make_route_results.py (basin.py, whole_route.py, shallow_water.py)",
        "made_on": f"{made_on}, Python {platform.python_version()}, numpy {np.__version__}, "
        f"numba {numba.__version__}",
        "setup": SETUP,
        "steps": gauges.steps,
        "cpu_seconds": round(gauges.cpu_seconds, 1),
        "lon": gauges.lon.round(3).tolist(),
        "lat": gauges.lat.round(3).tolist(),
        "sample_seconds": float(gauges.time[1]),
        "peak": peak.round(6).tolist(),
        "sea_level_per_mille_of_peak": np.round(1000 * gauges.sea_level / peak).astype(int).T
        .tolist(),
    }
    lines = [f" {json.dumps(key)}: {json.dumps(value)}" for key, value in content.items()]
    RESULTS.write_text("{\n" + ",\n".join(lines) + "\n}\n", encoding="utf-8")


if __name__ == "__main__":
    main()
