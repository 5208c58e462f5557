"""The packaged monthly winds along the equator against moorings, 1983 to 1992.

Dynamic height 0/500 dbar of the TAO/TRITON array (GTMBA Project Office of NOAA/PMEL). The record
is not the project's to ship: the folder is named by the environment variable
WAVEGUIDE_OBSERVATIONS. The table is printed by

    python -m pytest tests/open_data/test_wind_equator.py -s

Only the Kelvin wave is computed. Interannual dynamic height also holds Rossby waves and their
reflections, and monthly means hold none of the bursts of a few days that make the strongest
Kelvin waves, so agreement is that of a part.
"""

from __future__ import annotations

import csv
import gzip
import os
import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.scenario import WindScenario
from waveguide.wind_response import wind_response

sys.path.insert(0, str(Path(__file__).parent))
from wind_skill import anomalies, skill

FOLDER = Path(os.environ.get("WAVEGUIDE_OBSERVATIONS", ""))
pytestmark = pytest.mark.skipif(
    "WAVEGUIDE_OBSERVATIONS" not in os.environ, reason="WAVEGUIDE_OBSERVATIONS is not set"
)

MOORINGS = {"165E": 165.0, "170W": -170.0, "155W": -155.0, "140W": -140.0, "125W": -125.0,
            "110W": -110.0}
STEP = 5.0
"""Days; the winds are monthly."""


@pytest.fixture(scope="module")
def response():
    question = WindScenario.model_validate({
        "title": "equator",
        "wind": {"record": "monthly 1982-1992", "unresolved_m_s": 2.0, "remove": "annual cycle",
                 "step_hours": 24.0 * STEP},
        "waves": {"modes": [1, 2, 3], "period_days": 60, "damping_days": 365},
        "targets": [{"name": name, "position": [lon, 0.0]} for name, lon in MOORINGS.items()],
    })  # fmt: skip
    return wind_response(question)


@pytest.fixture(scope="module")
def moorings(response) -> dict[str, np.ndarray]:
    """Five-day means of dynamic height over g (m) about the times of the response."""
    with gzip.open(FOLDER / "equator_dynamic_height_daily.csv.gz", "rt") as file:
        rows = list(csv.reader(file))
    moment = np.array([row[0] for row in rows[1:]], "datetime64[s]") + np.timedelta64(12, "h")
    slot = np.round((moment - response.time[0]) / np.timedelta64(1, "D") / STEP).astype(int)
    inside = (slot >= 0) & (slot < response.time.size)
    result = {}
    for k, name in enumerate(rows[0][1:], start=1):
        # dynamic centimetres: 0.1 m²/s² each
        values = np.array([float(row[k]) if row[k] else np.nan for row in rows[1:]]) * 0.1 / 9.81
        use = inside & np.isfinite(values)
        count = np.bincount(slot[use], minlength=response.time.size)
        total = np.bincount(slot[use], values[use], minlength=response.time.size)
        result[name] = np.where(count > 1, total / np.maximum(count, 1), np.nan)
    return result


def _dynamic_height(response, name):
    target = response.target.index(name)
    return sum(
        response.ratios[target, mode].dynamic_height
        * response.answers[mode].targets[target].sea_level
        for mode in response.modes
    )


def test_dynamic_height_is_a_share_of_sea_level(response):
    """Half to nine tenths of a low mode's sea level comes from above 500 m."""
    for name in MOORINGS:
        ratios = response.ratios[response.target.index(name), 1]
        assert 0.5 < ratios.dynamic_height < 0.9
        # Metres down per metre up: g/g' of two layers is some 200 where the thermocline is deep;
        # at 110°W, where it lies at 50 m, the first mode moves it least.
        assert 30.0 < ratios.thermocline_depth < 300.0


def test_skill_at_moorings(response, moorings):
    print()
    found = {}
    use = response.time >= np.datetime64("1983-01-01")
    for name in MOORINGS:
        observed = moorings[name]
        if np.isfinite(observed[use]).sum() < 200:  # fewer than three years in all
            continue
        observed = anomalies(np.where(use, observed, np.nan), STEP)
        predicted = anomalies(np.where(np.isfinite(observed), _dynamic_height(response, name),
                                       np.nan), STEP)
        for band in (None, (30.0, 180.0)):
            found[name, band] = skill(predicted, observed, band, use, STEP, 60.0)
            print(f"  {name} {'all' if band is None else '30-180 d':8s} "
                  f"{found[name, band].told()}")
    # The winds east of the date line are what the array at 140°W and 110°W has upstream. Only
    # that the two are related, in the right sense, is asserted: see above what is missing.
    for name in ("140W", "110W"):
        assert found[name, None].correlation > 0.3
        assert found[name, None].slope > 0.0
    assert found["140W", (30.0, 180.0)].correlation > 0.3
