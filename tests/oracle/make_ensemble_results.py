"""Integrate the random oceans and store when the signal came to the gauges.

Run it in this folder, `python make_ensemble_results.py`; a few minutes on one core. It rewrites
ensemble_results.json.
"""

from __future__ import annotations

import json
import platform
import time
from pathlib import Path

import numba
import numpy as np
from basin import basin_theory, half_height_and_peak
from random_oceans import LENGTH, SIZE, SPEED, integrate_ocean

RESULTS = Path(__file__).parent / "ensemble_results.json"
STEP, DAYS, OCEANS = 0.25, 55.0, 32


def times(time: np.ndarray, level: np.ndarray) -> list[list[float]]:
    """Half-height and peak time (days) at every gauge."""
    rows = [half_height_and_peak(time, level[:, k])[:2] for k in range(level.shape[1])]
    return np.round(rows, 3).tolist()


def main() -> None:
    """Run them and write the file."""
    _, base = integrate_ocean(None, STEP, DAYS)
    theory = basin_theory(base.time, base.sea_level[:, 0], base.lon, base.lat, SPEED, STEP)
    found, seconds = [], base.cpu_seconds
    for seed in range(OCEANS):
        _, gauges = integrate_ocean(seed, STEP, DAYS)
        found.append(times(gauges.time, gauges.sea_level))
        seconds += gauges.cpu_seconds
    made_on = time.strftime("%Y-%m-%d", time.gmtime())
    content = {
        "made_by": "make_ensemble_results.py (random_oceans.py, whole_route.py, shallow_water.py)",
        "made_on": f"{made_on}, Python {platform.python_version()}, numpy {np.__version__}, "
        f"numba {numba.__version__}",
        "setup": {"speed": SPEED, "step": STEP, "days": DAYS, "size": SIZE, "length": LENGTH},
        "cpu_seconds": round(seconds, 1),
        "lon": base.lon.round(3).tolist(),
        "lat": base.lat.round(3).tolist(),
        "theory": times(base.time, theory),
        "uniform": times(base.time, base.sea_level),
        "random": found,
    }
    lines = [f" {json.dumps(key)}: {json.dumps(value)}" for key, value in content.items()]
    RESULTS.write_text("{\n" + ",\n".join(lines) + "\n}\n", encoding="utf-8")


if __name__ == "__main__":
    main()
