"""Ten years of alongshore wind off North America against gauges of California.

The daily upwelling index, 24°N to 60°N, drives modes 1 to 3; the gauges are those of 1980 to 1989.
Records: Caldwell, Merrifield & Thompson (2015), doi:10.7289/V5V40S7W (University of Hawaii Sea
Level Center); upwelling index of NOAA PFEL. They are not the project's to ship: the folder is
named by the environment variable WAVEGUIDE_OBSERVATIONS. The tables are printed by

    python -m pytest tests/open_data/test_wind_california.py -s

Two simple predictions stand beside the forced response: sea level proportional to the wind at the
nearest station, and sea level of the next gauge upstream, each at its best lag.
"""

from __future__ import annotations

import csv
import gzip
import os
import sys
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from waveguide.compare.filters import band_pass
from waveguide.compare.lags import cross_correlation
from waveguide.forcing.stations import read_stations
from waveguide.scenario import WindScenario
from waveguide.wind_response import wind_response

sys.path.insert(0, str(Path(__file__).parent))
from wind_skill import anomalies, skill

FOLDER = Path(os.environ.get("WAVEGUIDE_OBSERVATIONS", ""))
pytestmark = pytest.mark.skipif(
    "WAVEGUIDE_OBSERVATIONS" not in os.environ, reason="WAVEGUIDE_OBSERVATIONS is not set"
)

FIRST, LAST = np.datetime64("1979-06-01"), np.datetime64("1989-12-31")
BANDS = ((3.0, 10.0), (10.0, 60.0), (60.0, 180.0))
GAUGES = ("San Diego", "Los Angeles", "Port San Luis", "Monterey", "San Francisco", "Arena Cove",
          "Humboldt Bay", "Crescent City")


@pytest.fixture(scope="module")
def sea_level() -> dict[str, np.ndarray]:
    """Daily anomalies (m) from FIRST to LAST."""
    with gzip.open(FOLDER / "california_sea_level_daily_mm.csv.gz", "rt") as file:
        rows = list(csv.reader(file))
    day = np.array([row[0] for row in rows[1:]], "datetime64[D]")
    place = (day - FIRST).astype(int)
    inside = (place >= 0) & (day <= LAST)
    result = {}
    for k, name in enumerate(rows[0][1:], start=1):
        values = np.array([float(row[k]) if row[k] else np.nan for row in rows[1:]]) / 1000.0
        series = np.full(int((LAST - FIRST).astype(int)) + 1, np.nan)
        series[place[inside]] = values[inside]
        if np.isfinite(series).sum() > 1000:
            result[name] = anomalies(series)
    return result


@pytest.fixture(scope="module")
def response():
    """The forced response, mode by mode and summed."""
    with (FOLDER / "california_gauges.csv").open() as file:
        gauges = {row["name"]: [float(row["lon"]), float(row["lat"])]
                  for row in csv.DictReader(file)}
    question = WindScenario.model_validate({
        "title": "California",
        "wind": {
            "file": str(FOLDER / "upwelling_index_daily.csv.gz"),
            "stations": str(FOLDER / "upwelling_index_positions.csv"),
            "quantity": "upwelling index", "remove": "annual cycle",
            "start": f"{FIRST}T00:00:00Z", "end": f"{LAST}T00:00:00Z",
        },
        "waves": {"modes": [1, 2, 3], "period_days": 20},
        "targets": [{"name": name, "position": gauges[name]} for name in GAUGES],
    })  # fmt: skip
    return wind_response(question)


@pytest.fixture(scope="module")
def spun_up(response):
    """Days from 1980 on: the wind of half a year before has passed."""
    return response.time >= np.datetime64("1980-01-01")


def _predicted(response, name):
    return response.total(response.target.index(name))


def _months(response, months):
    month = response.time.astype("datetime64[M]").astype(int) % 12 + 1
    return np.isin(month, months)


def test_sea_level_rises_with_wind_in_the_direction_of_travel(response, sea_level, spun_up):
    """The sign of the index (positive for offshore transport) and of the whole theory."""
    print()
    for name in GAUGES:
        found = skill(_predicted(response, name), sea_level[name], (10.0, 60.0), spun_up)
        assert found.slope_low > 0.0 or name in ("San Diego", "Los Angeles"), name


def test_skill_by_gauge_and_band(response, sea_level, spun_up):
    """Theory applies at 10 to 60 days; it grows to the north, where the wind is strongest.

    Shorter periods are left to the local wind of the day and to waves that are not long; longer
    ones come below the critical frequency and from the tropics, whose winds the index lacks.
    """
    best = {}
    print()
    for band in BANDS:
        print(f"band {band[0]:g} to {band[1]:g} days")
        for name in GAUGES:
            found = skill(_predicted(response, name), sea_level[name], band, spun_up)
            best[name, band] = found
            print(f"  {name:14s} {found.told()}")
    middle = BANDS[1]
    # North of Point Conception, where the index has wind upstream, sea level comes in the size
    # and at the time that theory says, within a factor of 2.5 and two days; the rest of it is not
    # this wind's. South of there only the sign is asked for. Sea level is told too large where
    # the shelf is wide: with the friction of the first order at all periods the slope at Crescent
    # City is 0.75 and the variance explained 43 %, but nothing comes from the tropics any more.
    for name in ("Monterey", "San Francisco", "Arena Cove", "Humboldt Bay", "Crescent City"):
        found = best[name, middle]
        assert found.correlation > 0.4, name
        assert 0.4 < found.slope < 1.5, name
        assert abs(found.lag) < 2.2, name
    assert best["Crescent City", middle].correlation > 0.6
    assert best["Crescent City", middle].best > best["San Diego", middle].best


def test_skill_by_season(response, sea_level, spun_up):
    by_season = {}
    print()
    for season, months in (("April to September", range(4, 10)),
                           ("October to March", (10, 11, 12, 1, 2, 3))):
        use = spun_up & _months(response, list(months))
        for name in ("Monterey", "San Francisco", "Crescent City"):
            found = skill(_predicted(response, name), sea_level[name], (10.0, 60.0), use)
            print(f"  {season:18s} {name:14s} {found.told()}")
            assert found.best > 0.3, (season, name)
            by_season[season, name] = found.correlation
    for name in ("Monterey", "San Francisco", "Crescent City"):  # storms are large, and so long
        assert by_season["October to March", name] > by_season["April to September", name]


def test_against_simple_predictions(response, sea_level, spun_up):
    """Local wind at its best lag, and the gauge upstream at its best lag, both in sample."""
    winds = read_stations(FOLDER / "upwelling_index_daily.csv.gz",
                          FOLDER / "upwelling_index_positions.csv", "upwelling index")
    start = int(np.searchsorted(winds.time, FIRST.astype("datetime64[ns]")))
    stress = winds.stress[:, start : start + response.time.size]
    print("\ncorrelation at 10 to 60 days: response (no lag) | local wind | gauge upstream")
    band, beaten = (10.0, 60.0), 0
    for upstream, name in pairwise(GAUGES):
        observed = np.where(spun_up, band_pass(sea_level[name], 1.0, band), np.nan)
        station = int(np.argmin(np.abs(winds.lat - response.lat[response.target.index(name)])))
        rivals = []
        for series in (anomalies(stress[station]), sea_level[upstream]):
            other = band_pass(series, 1.0, band)
            corr = cross_correlation(other, observed, 1.0, 10.0)
            rivals.append((float(corr.value.max()), float(corr.lag[np.argmax(corr.value)])))
        own = skill(_predicted(response, name), sea_level[name], band, spun_up)
        print(f"  {name:14s} {own.correlation:.2f} (best {own.best:.2f} at {own.lag:+.1f} d) | "
              f"{rivals[0][0]:.2f} at {rivals[0][1]:+.0f} d | "
              f"{rivals[1][0]:.2f} at {rivals[1][1]:+.0f} d ({upstream})")
        beaten += own.best > rivals[0][0]
    assert beaten == 7  # winds upstream add to what the wind at hand says, at every gauge
