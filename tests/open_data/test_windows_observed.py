"""Do windows of 80 % hold the lags that moorings and gauges showed about 80 % of the time?

The windows are those of `waveguide.propagation.priors.USUAL` about the travel time of the free wave
between two records, without any error of a source; their sizes were set before looking at lags,
from the evidence told in that module. The records are read from the folder that the environment
variable WAVEGUIDE_OBSERVATIONS names, and the tests are skipped without it. Sources: TAO/TRITON
array (GTMBA Project Office of NOAA/PMEL); University of Hawaii Sea Level Center, Caldwell,
Merrifield & Thompson 2015, doi:10.7289/V5V40S7W. Lags are estimated from the records here, in the
bands of test_compare_observations.py. Flag: READ.
"""

from __future__ import annotations

import os
from datetime import UTC, datetime
from functools import cache
from itertools import combinations, pairwise
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import norm

from waveguide import pipeline
from waveguide.compare.pairs import compare_pair
from waveguide.compare.reading import Record, read_series
from waveguide.constants import SECONDS_PER_DAY
from waveguide.propagation.path_errors import relative_delays
from waveguide.propagation.priors import USUAL
from waveguide.scenario import Event, Scenario, Target, Waves

FOLDER = os.environ.get("WAVEGUIDE_OBSERVATIONS")
pytestmark = pytest.mark.skipif(not FOLDER, reason="WAVEGUIDE_OBSERVATIONS is not set")

MOORINGS = {"165E": (165.0, 0.0), "170W": (-170.0, 0.0), "155W": (-155.0, 0.0),
            "140W": (-140.0, 0.0), "125W": (-125.0, 0.0), "110W": (-110.0, 0.0)}  # fmt: skip
GAUGES = {"San Diego": (-117.173, 32.713), "Monterey": (-121.888, 36.605),
          "San Francisco": (-122.465, 37.807), "Arena Cove": (-123.708, 38.913),
          "Humboldt Bay": (-124.217, 40.767), "Crescent City": (-124.183, 41.745)}  # fmt: skip
Z80 = float(norm.ppf(0.9))


@cache
def record(name: str):
    if name in MOORINGS:
        path, kind, unit = "equator_dynamic_height_daily.csv.gz", "dynamic height", "dyn-cm"
    else:
        path, kind, unit = "california_sea_level_daily_mm.csv.gz", "sea level", "mm"
    place = MOORINGS.get(name) or GAUGES[name]
    return read_series(Record(name, place, Path(FOLDER) / path, kind, unit))


@cache
def misses(first: str, second: str) -> tuple[float, float, float]:
    """Miss of the lag in standard deviations of the prediction, the same with the error of the
    observed lag added, and days by which the wave is later than predicted."""
    places = MOORINGS | GAUGES
    band = (30.0, 90.0) if first in MOORINGS else (15.0, 60.0)
    estimate = compare_pair(record(first), record(second), band, []).estimate
    scenario = Scenario(
        title="lag", waves=Waves(modes=(1,), period_days=float(np.sqrt(band[0] * band[1]))),
        event=Event(position=places[first], start=datetime(2031, 1, 1, tzinfo=UTC),
                    duration_days=1.0),
        targets=(Target(name=second, position=places[second]),),
    )  # fmt: skip
    network, mode = pipeline.mode_guide(scenario, 1, lambda stage: None)
    route = pipeline.target_arrivals(scenario, network, mode)[0].routes[0]
    shares = relative_delays(network, mode, route.steps, USUAL)
    share = float(np.sqrt(sum(s**2 for s in shares.values())))
    days = route.time / SECONDS_PER_DAY
    observed = (estimate.high - estimate.low) / (2.0 * 1.96)
    late = estimate.lag - days
    plain = float(np.log(max(estimate.lag, 1e-3) / days)) / share
    return plain, late / float(np.hypot(share * days, observed)), late


def test_neighbouring_moorings_and_san_diego_to_san_francisco() -> None:
    pairs = [*pairwise(MOORINGS), ("San Diego", "San Francisco")]
    held = [abs(misses(*pair)[0]) <= Z80 for pair in pairs]
    # measured: six of six. Of six 80 % windows fewer than four hold in one case of ten.
    assert sum(held) >= 4, held


def test_all_pairs_of_moorings_with_the_error_of_the_observed_lag() -> None:
    pairs = list(combinations(MOORINGS, 2))
    plain = sum(abs(misses(*pair)[0]) <= Z80 for pair in pairs)
    whole = sum(abs(misses(*pair)[1]) <= Z80 for pair in pairs)
    # measured: 9 of 15 and 12 of 15. The pairs share their ways, so this is fewer than 15 trials.
    # What is missed are the long ways to 110W, where the waves come later than predicted: the
    # lag over 60° to 85° of longitude is badly known (its interval spans several cycles).
    assert plain >= 9
    assert whole >= 12
    assert all(misses(*pair)[2] > 0.0 for pair in pairs if abs(misses(*pair)[1]) > Z80)


def test_from_san_diego_up_the_coast() -> None:
    held = [abs(misses("San Diego", other)[0]) <= Z80 for other in list(GAUGES)[1:]]
    # measured: five of five, on ways that share their southern part
    assert sum(held) >= 4, held


@pytest.mark.xfail(
    strict=True,
    reason="Between gauges north of San Francisco lags of 0.4 to 0.5 days are shorter than those "
    "of any free wave (1.0 to 1.5 days predicted): the wind drives that coast all at once, which "
    "a window about the free wave does not know. Use the wind-driven response there.",
)
def test_between_gauges_north_of_san_francisco() -> None:
    pairs = [("San Francisco", "Humboldt Bay"), ("San Francisco", "Crescent City"),
             ("Arena Cove", "Crescent City")]  # fmt: skip
    assert all(abs(misses(*pair)[0]) <= Z80 for pair in pairs)
