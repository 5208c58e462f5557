"""Run the shallow-water experiments and store what they give, with how it was made.

Run it in this folder, `python make_results.py`; it takes about four minutes on one core and
rewrites results.json, which the tests compare with the theory.
"""

from __future__ import annotations

import json
import platform
import time
from pathlib import Path

import numba
import numpy as np
from experiments import Transfer, eastern, strait, western

RESULTS = Path(__file__).parent / "results.json"
FREQUENCY = [0.05, 0.1, 0.2, 0.4, 0.8]
EAST = [0.0, 1.0, 2.0, 3.0, 4.0, 5.0]
WEST = [4.0, 3.0, 2.0, 1.0, 0.0, -1.0, -3.0]
LEAN_FREQUENCY = [0.1, 0.2, 0.3, 0.4, 0.6, 0.8, 1.2]
LEAN = [2.0, 4.0, -2.0, -4.0]
STRAIT_FREQUENCY = [0.05, 0.1, 0.2, 0.3, 0.5]
STRAITS = [(0.1, 0.5, 40), (0.3, 0.5, 20), (0.3, 2.0, 20), (0.6, 2.0, 20), (1.0, 1.0, 20)]


def entry(kind: str, result: Transfer, **made: float) -> dict[str, object]:
    """One experiment as plain lists."""
    return {
        "kind": kind,
        "made_with": {**made, "steps": result.steps, "cpu_seconds": round(result.cpu_seconds, 1)},
        "frequency": result.frequency.tolist(),
        "amplitude": np.round(np.abs(result.amplitude), 4).tolist(),
        "phase_degrees": np.round(np.degrees(np.angle(result.amplitude)), 2).tolist(),
    }


def main() -> None:
    """Run everything and write the file."""
    cases = [entry("eastern", eastern(FREQUENCY, EAST, 20), cells=20, duration=200.0)]
    cases.append(entry("western", western(FREQUENCY, WEST, 20), cells=20, duration=150.0))
    for angle in (15.0, 30.0, 45.0, 60.0, 70.0):
        result = eastern(LEAN_FREQUENCY, LEAN, 16, angle, 130.0)
        cases.append(entry("leaning", result, cells=16, duration=130.0, angle=angle))
    for width, length, cells in STRAITS:
        result = strait(STRAIT_FREQUENCY, width, length, cells)
        made = {"cells": cells, "duration": 80.0, "width": width, "length": length}
        cases.append(entry("strait", result, **made))
    made_at = time.strftime("%Y-%m-%d", time.gmtime())
    header = {
        "made_by": "make_results.py (experiments.py, shallow_water.py)",
        "made_on": f"{made_at}, Python {platform.python_version()}, numpy {np.__version__}, "
        f"numba {numba.__version__}",
        "columns": {"eastern": EAST, "western": [*WEST, "Kelvin"], "leaning": LEAN,
                    "strait": ["through", "across"]},
    }
    body = ",\n".join(json.dumps(case) for case in cases)
    text = json.dumps(header, indent=1)[:-2] + ',\n "cases": [\n' + body + "\n]}\n"
    RESULTS.write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
