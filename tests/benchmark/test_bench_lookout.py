"""Lookout over ten gigabytes of daily sea level made on the fly: time, memory, chunks read once.

    python -m pytest tests/benchmark/test_bench_lookout.py -s

Limits: 3 minutes and 2 GB on two cores, those of the task.
"""

from __future__ import annotations

import os
import subprocess
import sys
from collections import Counter
from datetime import UTC, datetime

import numpy as np
import pytest

LON, LAT, DAYS, CHUNK = 4320, 2040, 285, 5
"""A twelfth of a degree all round, 10 GB in single precision, in chunks of 176 MB."""

SPEED = 2.5

COUNT = """
import json, resource, sys, time
sys.path.insert(0, {folder!r})
from test_bench_lookout import run
start = time.perf_counter()
result = run()
result["seconds"] = time.perf_counter() - start
result["gigabytes"] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6
print(json.dumps(result))
"""


def model(read: Counter[tuple[int, int, int]]):
    """Global output backed by dask, whose chunks are made when they are read, and counted."""
    import dask.array as da
    import xarray as xr

    lon = -180.0 + 360.0 * np.arange(LON) / LON
    lat = -85.0 + 170.0 * np.arange(LAT) / LAT
    x = np.radians((lon - 165.0) % 360.0) * 6.371e6
    shape = np.exp(-2.29e-11 * (np.radians(lat) * 6.371e6) ** 2 / (2.0 * SPEED)).astype("f4")

    def make(block_info=None):
        where = block_info[None]["array-location"]
        read[tuple(start for start, _ in where)] += 1
        days = np.arange(*where[0])[:, None] - 7.0
        wave = np.exp(-(((days - x / SPEED / 86400.0) / 6.0) ** 2)).astype("f4")
        return wave[:, None, :] * shape[:, None]

    chunks = ((CHUNK,) * (DAYS // CHUNK), (LAT,), (LON,))
    data = da.map_blocks(make, chunks=chunks, dtype="f4", meta=np.empty((0, 0, 0), "f4"))
    attributes = {"units": "m", "standard_name": "sea_surface_height_above_geoid"}
    times = np.datetime64("2031-03-05") + np.arange(DAYS)
    return xr.Dataset(
        {"zos": (("time", "lat", "lon"), data, attributes)},
        {"time": times.astype("datetime64[ns]"), "lat": ("lat", lat, {"units": "degrees_north"}),
         "lon": ("lon", lon, {"units": "degrees_east"})},
    )


def run() -> dict[str, float]:
    """One lookout over all of it."""
    import dask

    from waveguide.lookout import lookout
    from waveguide.scenario import Event, Scenario, Target, Waves

    scenario = Scenario(
        title="ten gigabytes", waves=Waves(modes=(1,), period_days=360.0),
        event=Event(
            position=(165.0, 0.0), start=datetime(2031, 3, 5, tzinfo=UTC), duration_days=60.0
        ),
        targets=(Target(name="Callao", position=(-77.17, -12.06)),
                 Target(name="Acapulco", position=(-99.92, 16.82))),
    )
    read: Counter[tuple[int, int, int]] = Counter()
    with dask.config.set(scheduler="threads", num_workers=2):
        result = lookout(scenario, model(read))
    return {
        "chunks": result.chunks, "most_reads": max(read.values()), "read": len(read),
        "read_gigabytes": len(read) * CHUNK * LAT * LON * 4e-9,
        "measured": result.diagrams[0].speed.measured,
    }


def test_ten_gigabytes_in_three_minutes_and_two_gigabytes():
    import json

    pytest.importorskip("dask")
    folder = os.path.dirname(os.path.abspath(__file__))
    done = subprocess.run(
        [sys.executable, "-c", COUNT.format(folder=folder)], capture_output=True, text=True,
        check=True, env={**os.environ, "OMP_NUM_THREADS": "1"},
    )
    told = json.loads(done.stdout.splitlines()[-1])
    print(told)
    assert told["read_gigabytes"] > 9.5
    assert told["most_reads"] == 1
    assert told["seconds"] < 180.0
    assert told["gigabytes"] < 2.0
