"""Lags that gauges and moorings showed, from the records themselves.

The records are not part of the project: tests read them from the folder that the environment
variable WAVEGUIDE_OBSERVATIONS names, and are skipped without it. Sources: TAO/TRITON array (GTMBA
Project Office of NOAA/PMEL); University of Hawaii Sea Level Center, Caldwell, Merrifield &
Thompson 2015, doi:10.7289/V5V40S7W. Flag of the intervals: READ, an analysis of the same records
made apart from this package (trend and annual cycle removed, band-passed, block bootstrap, 95 %).

Equator: the band of 30 to 90 days was chosen before looking at lags, that of the intraseasonal
Kelvin waves of Kessler, McPhaden & Weickmann (1995, J. Geophys. Res. 100, 10613). California: the
band of 15 to 60 days was chosen after a scan of bands, as one in which the lag lies in the
interval; in others it does not (`test_lags_off_california_grow_with_period`), so agreement there is
no evidence for the theory. The reason given for it, slower than weather, whose wind lies over the
whole coast at once, and faster than the season, came afterwards.

What the null can tell: a record that holds n independent windows of the lags searched can give no
chance below about 1/n, which is 1/70 to 1/90 here. So two things are asserted: the chance is below
that of the verdict, and it is the smallest there can be, for no shifted pair correlates as well.
"""

from __future__ import annotations

import csv
import os
from pathlib import Path

import pytest

from waveguide.compare.pairs import compare_pair
from waveguide.compare.reading import Record, read_series
from waveguide.compare.verdict import CHANCE
from waveguide.comparison import predictions
from waveguide.scenario import Compare, Comparison, Observation, Waves

FOLDER = os.environ.get("WAVEGUIDE_OBSERVATIONS")
pytestmark = pytest.mark.skipif(not FOLDER, reason="WAVEGUIDE_OBSERVATIONS is not set")

EQUATOR = {"165E": 165.0, "170W": -170.0, "155W": -155.0, "140W": -140.0, "125W": -125.0,
           "110W": -110.0}  # fmt: skip
INTRASEASONAL = (30.0, 90.0)
SUBSEASONAL = (15.0, 60.0)


def dynamic_height(name):
    path = Path(FOLDER) / "equator_dynamic_height_daily.csv.gz"
    place = (EQUATOR[name], 0.0)
    return read_series(Record(name, place, path, "dynamic height", "dyn-cm"))


def sea_level(name):
    path = Path(FOLDER) / "california_sea_level_daily_mm.csv.gz"
    return read_series(Record(name, (0.0, 0.0), path, "sea level", "mm"))


def assert_as_unlikely_as_can_be_told(result):
    """The verdict's level is met, and none of the shifted pairs correlates as well."""
    assert result.null == "shifted"
    assert result.chance <= CHANCE
    assert result.chance == pytest.approx(result.least_chance)


def told(places, band):
    """Predictions of modes 1 and 2 between two named places."""
    file = Path(FOLDER) / "california_gauges.csv"  # any file that is there: none is read here
    ends = [Observation(name=name, position=at, file=file) for name, at in places.items()]
    question = Comparison(
        title="a pair", waves=Waves(modes=(1, 2), period_days=50.0), observations=tuple(ends),
        compare=Compare(band_days=band),
    )
    return predictions(question, ends[0].position, ends[1:])[0]


def told_on_equator(first, second):
    return told({name: (EQUATOR[name], 0.0) for name in (first, second)}, INTRASEASONAL)


def told_off_california(first, second):
    with (Path(FOLDER) / "california_gauges.csv").open() as file:
        at = {row["name"]: (float(row["lon"]), float(row["lat"])) for row in csv.DictReader(file)}
    return told({name: at[name] for name in (first, second)}, SUBSEASONAL)


@pytest.mark.parametrize(
    ("first", "second", "low", "high"),
    [
        ("165E", "170W", 9.7, 12.0),
        ("170W", "155W", 6.2, 7.4),
        ("155W", "140W", 6.1, 7.7),
        ("140W", "125W", 6.5, 8.8),
        ("125W", "110W", 6.3, 9.1),
    ],
)
def test_equatorial_lags_and_their_verdicts(first, second, low, high):
    result = compare_pair(
        dynamic_height(first), dynamic_height(second), INTRASEASONAL, told_on_equator(first, second)
    )
    assert low <= result.estimate.lag <= high
    assert result.estimate.low < high
    assert result.estimate.high > low
    assert_as_unlikely_as_can_be_told(result)
    assert [v.word for v in result.verdicts] == ["consistent", "too early"]


def test_sea_level_from_san_diego_to_san_francisco():
    result = compare_pair(
        sea_level("San Diego"), sea_level("San Francisco"), SUBSEASONAL,
        told_off_california("San Diego", "San Francisco"),
    )
    assert 1.5 <= result.estimate.lag <= 2.5
    assert [v.word for v in result.verdicts] == ["consistent", "too early"]
    assert_as_unlikely_as_can_be_told(result)
    assert result.slope.slope == pytest.approx(0.75, abs=0.1)


def test_lags_off_california_grow_with_period():
    # The wind is nearly in phase along the coast at short periods, so the lag depends on the band;
    # the interval above is met in 15 to 60 days and not in 20 to 60 (3.0 days) or 10 to 60 (1.0).
    bands = [(5.0, 15.0), (10.0, 30.0), SUBSEASONAL, (20.0, 60.0), (30.0, 90.0)]
    lags = [
        compare_pair(sea_level("San Diego"), sea_level("San Francisco"), band, []).estimate.lag
        for band in bands
    ]
    assert lags == sorted(lags)
    assert abs(lags[0]) < 0.3
    assert lags[-1] > 3.5


def test_the_same_records_the_other_way_round_are_reversed():
    # No wave of the theory runs down this coast, and the verdict says which way the record goes.
    forward = compare_pair(sea_level("San Diego"), sea_level("San Francisco"), SUBSEASONAL, [])
    back = compare_pair(
        sea_level("San Francisco"), sea_level("San Diego"), SUBSEASONAL,
        told_off_california("San Francisco", "San Diego"),
    )
    assert back.estimate.lag == pytest.approx(-forward.estimate.lag, abs=0.05)
    assert back.estimate.high < 0.0
    assert {v.word for v in back.verdicts} == {"not resolvable"}
    assert all("at the second place first" in v.reason for v in back.verdicts)


def test_the_whole_way_along_the_equator_is_not_resolvable_in_the_first_mode():
    # 9000 km: other waves, wind and the mean flow leave a correlation of 0.3, and an interval that
    # holds no delay at all.
    result = compare_pair(
        dynamic_height("165E"), dynamic_height("110W"), INTRASEASONAL,
        told_on_equator("165E", "110W"),
    )
    assert result.verdicts[0].word == "not resolvable"
