"""A whole route as a network, against the stored shallow-water integration of tests/oracle.

Down a western coast, along the equator and up an eastern coast, c = 2.5 m/s, three cells of the
integration to a deformation radius. Its first gauge's record is the source, so the strength of
its event plays no part. Asked for: half-height and peak within 5 % of the travel time or 12 h,
amplitude within 20 %; asserted is what is reached.
"""

from __future__ import annotations

import json
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import SECONDS_PER_DAY
from waveguide.propagation.sources import series_source
from waveguide.propagation.waveform import arrival_times, mode_waveforms

STORED = Path(__file__).parents[1] / "oracle" / "route_results.json"


def route_to(guides: SimpleNamespace, stored: dict, gauge: int) -> SimpleNamespace:
    """The coast, equator and coast up to a gauge, and a little beyond it."""
    step = stored["setup"]["step"]
    west, east = step, 60.0 - step
    start, lon, lat = stored["lat"][0], stored["lon"][gauge], stored["lat"][gauge]
    if lon < 30.0:
        return guides.chain([(guides.COAST, [(west, start), (west, lat)])])
    beyond = lat + np.sign(lat) * 0.5
    return guides.chain([
        (guides.COAST, [(west, start), (west, 0.0)]),
        (guides.EQUATOR, [(west, 0.0), (east, 0.0)]),
        (guides.COAST, [(east, 0.0), (east, lat), (east, beyond)]),
    ])  # fmt: skip


@pytest.mark.parametrize("gauge", range(1, 8))
def test_waveform_at_a_gauge(guides: SimpleNamespace, gauge: int) -> None:
    stored = json.loads(STORED.read_text(encoding="utf-8"))
    records = np.array(stored["sea_level_per_mille_of_peak"]) / 1000.0
    records *= np.array(stored["peak"])[:, None]
    time = stored["sample_seconds"] * np.arange(records.shape[1])
    network = route_to(guides, stored, gauge)
    mode = guides.uniform(network, stored["setup"]["speed"])
    last = int(np.argmin(np.hypot(
        network.lon - network.lon[-1], network.lat - stored["lat"][gauge]
    )))  # fmt: skip
    arrival = guides.arrival(network, mode, [np.arange(last)])
    source = series_source(time, records[0])
    found = mode_waveforms(network, mode, [arrival], source, time[-1], time[1])
    wanted = arrival_times(time, records[gauge])
    times = arrival_times(found.time, found.sea_level[0])
    assert_allclose(
        np.array(times[:2]) / SECONDS_PER_DAY, np.array(wanted[:2]) / SECONDS_PER_DAY, atol=0.25
    )
    assert_allclose(found.sea_level[0].max(), records[gauge].max(), rtol=0.06)
