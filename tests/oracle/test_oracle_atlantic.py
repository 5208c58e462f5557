"""A real coast with uniform phase speed: Brazil, the equator, Africa.

atlantic_results.json holds what a shallow-water integration over the real mask recorded
(make_atlantic_results.py). One gauge's record is carried to the others by the route that the
network finds and its transfer function, so the strength of the source plays no part.

What is found. Along Brazil and along south-west Africa half-height and amplitude agree (half
a day, a few per cent): the effective coast has the right length. From the middle of the ocean to
Gabon and Angola, over a junction whose coasts lean 26° and −38°, they agree within 0.2 days and
6 %. Over the Brazilian junction, −57°, theory is 1.5 days late and 14 % high on the equator:
north-east Brazil is no straight line but runs zonal within 5° of the equator and meridional
beyond. The whole crossing is within 1.2 days of 29 to 40, and 12 %; with meridional junctions it
would be 5 days late and 1.5 times too high.

A burst of 1.5 days (atlantic_short_results.json) takes 8 days from Natal to 20° W, as from Natal
straight east along the equator, where the guide takes 18: from a slanting coast the wave leaves at
once. What comes first has the height that theory gives it; it is even earlier. Most of the burst
crosses as mixed Rossby-gravity waves, at ω̂ = 1 with half the speed, and reaches Africa 27 days
later, higher than what came first. Theory has them (waveguide/propagation/mixed_waves.py) within
half a day, but half as high as they are south of the equator and twice as high north of it: the
lean of both coasts, −38° and 25°, shares them out wrongly. What raises Tabou and Dakar at 54 and 62
days it does not have.

The Guinea coast, zonal at 4° to 6° N, is missed: the wave takes 4 days from Takoradi to Tabou
where theory has 2.5. Between a zonal wall at 1.45 L_e and the equator long waves go at
c/(2ν + 1) with D_ν(−1.45√2) = 0, which is 0.85 c, and so explains a third of it.
"""

from __future__ import annotations

import json
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from basin import half_height_and_peak
from numpy.testing import assert_allclose

from waveguide.network.graph import Network
from waveguide.network.packaged import packaged_network
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.propagation import near_equator, transfer
from waveguide.propagation.arrivals import mode_arrivals
from waveguide.propagation.junctions import Junctions, network_junctions
from waveguide.propagation.modes import ModeAtNodes, uniform_mode
from waveguide.propagation.transfer import independent_paths, paths_of_arrival, route_transfers

RECORD, SHORT = (
    json.loads((Path(__file__).parent / name).read_text(encoding="utf-8"))
    for name in ("atlantic_results.json", "atlantic_short_results.json")
)
SPEED = RECORD["setup"]["speed"]
PERIOD = 25 * 86400.0
AFRICA = ("Luanda", "Tombua", "Toscanini")
CROSSING = ("Libreville", "Pointe-Noire", *AFRICA)


def series(name: str, record: dict = RECORD) -> tuple[np.ndarray, np.ndarray]:
    row = record["names"].index(name)
    values = record["peak"][row] / 1000.0 * np.array(record["sea_level_per_mille_of_peak"][row])
    return record["sample_seconds"] * np.arange(values.size), values


def place(name: str) -> tuple[float, float]:
    row = RECORD["names"].index(name)
    return RECORD["lon"][row], RECORD["lat"][row]


@cache
def carried(
    start: str, names: tuple[str, ...], upright: bool = False, short: bool = False
) -> np.ndarray:
    """Half-height time, peak time (days) and peak at gauges by theory (rows)."""
    time, first = series(start, SHORT if short else RECORD)
    padded = 4 * time.size
    omega = 2 * np.pi * np.fft.rfftfreq(padded, time[1])
    spectrum = np.fft.rfft(first, padded).conj()
    network, _ = packaged_network("baroclinic")
    mode = uniform_mode(network, 1, SPEED)
    here = place(start)
    with pytest.MonkeyPatch.context() as patch:
        if upright:
            patch.setattr(near_equator, "network_junctions", meridional_junctions)
        arrivals = mode_arrivals(
            network, mode, packaged_bathymetry(), (*here, *here), here,
            [place(name) for name in names], 2 * np.pi / PERIOD,
        )
        rows = []
        for arrival in arrivals:
            paths = paths_of_arrival(arrival)
            kept = [paths[i] for i in independent_paths(paths)]
            total = sum(t.response for t in route_transfers(network, mode, kept, omega))
            rows.append(half_height_and_peak(
                time, np.fft.irfft((spectrum * total).conj(), padded)[: time.size]
            ))
    return np.array(rows)


def meridional_junctions(network: Network, mode: ModeAtNodes) -> Junctions:
    """The junctions of a network as if no coast leaned."""
    found = network_junctions(network, mode)
    return replace(found, lean=np.zeros_like(found.lean))


def found(names: tuple[str, ...], record: dict = RECORD) -> np.ndarray:
    return np.array([half_height_and_peak(*series(name, record)) for name in names])


def front(start: str, end: str) -> float:
    """Days of the front along the guide."""
    network, _ = packaged_network("baroclinic")
    mode, here = uniform_mode(network, 1, SPEED), place(start)
    arrival = mode_arrivals(
        network, mode, packaged_bathymetry(), (*here, *here), here, [place(end)],
        2 * np.pi / PERIOD,
    )[0]
    return arrival.routes[0].time / 86400.0


def test_coast_of_africa() -> None:
    theory, record = carried("Pointe-Noire", AFRICA), found(AFRICA)
    assert_allclose(theory[:, 0], record[:, 0], atol=0.5)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.05)
    assert_allclose(theory[:, 1], record[:, 1], atol=0.9)  # later waves shift the broad peak


def test_coast_of_brazil() -> None:
    theory, record = carried("Aracaju", ("Natal",)), found(("Natal",))
    assert_allclose(theory[:, :2], record[:, :2], atol=0.5)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.05)


# 5 % of the travel time, or the half day of the record; 20 % of the amplitude.
def test_crossing() -> None:
    theory, record = carried("Aracaju", CROSSING), found(CROSSING)
    travel = record[:, 0] - found(("Aracaju",))[0, 0]
    assert np.all(np.abs(theory[:, 0] - record[:, 0]) < 0.05 * travel)
    assert_allclose(theory[:, 1], record[:, 1], atol=1.2)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.12)


def test_meridional_junctions_would_miss_the_crossing() -> None:
    theory, record = carried("Aracaju", CROSSING, upright=True), found(CROSSING)
    assert np.all(theory[:, 0] - record[:, 0] > 5.0)
    assert np.all(theory[:, 2] > 1.45 * record[:, 2])


# Half-height within 5 % of the travel time would be 0.6 days on the equator: missed there.
def test_junction_of_brazil() -> None:
    places = ("Camocim", "20 W")
    theory, record = carried("Natal", places), found(places)
    assert_allclose(theory[:, 0], record[:, 0], atol=1.6)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.2)


def test_junction_of_africa() -> None:
    names = ("Libreville", "Pointe-Noire", "Luanda")
    theory, record = carried("5 W", names), found(names)
    assert_allclose(theory[:, 0], record[:, 0], atol=0.25)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.07)


def test_amplitude_along_the_guinea_coast() -> None:
    names = ("Takoradi", "Tabou", "Dakar")
    assert_allclose(carried("Lagos", names)[:, 2], found(names)[:, 2], rtol=0.13)


@pytest.mark.xfail(strict=True, reason="zonal within 2 L_e of the equator; see the module")
def test_time_along_the_guinea_coast() -> None:
    names = ("Takoradi", "Tabou", "Dakar")
    travel = found(names)[:, 0] - found(("Lagos",))[0, 0]
    assert np.all(np.abs(carried("Lagos", names)[:, 0] - found(names)[:, 0])
                  < np.maximum(0.05 * travel, 0.5))


def test_short_cut_from_a_slanting_coast() -> None:
    """Sea level at 20° W rises a whole week before the front along the guide."""
    rise = np.diff(found(("Natal", "20 W"), SHORT)[:, 0])[0]
    straight = np.radians(35.1 - 20.0) * 6.371e6 / SPEED / 86400.0
    assert abs(rise - straight) < 1.0
    assert front("Natal", "20 W") > rise + 7.0


FIRST = ("5 W", "Libreville")


def test_height_of_what_comes_first_of_a_short_burst() -> None:
    theory, record = carried("Aracaju", FIRST, short=True), found(FIRST, SHORT)
    assert_allclose(theory[:, 2], record[:, 2], rtol=0.2)


@pytest.mark.xfail(strict=True, reason="2.6 days late of 20 and 27: the bend of Brazil")
def test_time_of_what_comes_first_of_a_short_burst() -> None:
    theory, record = carried("Aracaju", FIRST, short=True), found(FIRST, SHORT)
    travel = record[:, 0] - found(("Aracaju",), SHORT)[0, 0]
    assert np.all(np.abs(theory[:, 0] - record[:, 0]) < 0.05 * travel)


def whole(name: str) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Time (days), the record of the short burst, and theory from Aracaju."""
    time, first = series("Aracaju", SHORT)
    omega = 2 * np.pi * np.fft.rfftfreq(4 * time.size, time[1])
    network, _ = packaged_network("baroclinic")
    mode, here = uniform_mode(network, 1, SPEED), place("Aracaju")
    arrival = mode_arrivals(
        network, mode, packaged_bathymetry(), (*here, *here), here, [place(name)],
        2 * np.pi / PERIOD,
    )[0]
    paths = paths_of_arrival(arrival)
    kept = [paths[i] for i in independent_paths(paths)]
    total = sum(t.response for t in route_transfers(network, mode, kept, omega))
    spectrum = np.fft.rfft(first, 4 * time.size).conj()
    theory = np.fft.irfft((spectrum * total).conj(), 4 * time.size)[: time.size]
    return time / 86400.0, series(name, SHORT)[1], theory


@pytest.mark.parametrize("name", ["Libreville", "Luanda", "Toscanini", "Lagos", "Takoradi"])
def test_mixed_waves_of_a_short_burst(name: str) -> None:
    """Four or five crests and troughs within half a day and a factor of two; not the 20 % of 4."""
    day, record, theory = whole(name)
    later = (day > 60.0) & (day < 95.0)
    shift = np.arange(-4.0, 4.01, 0.25)
    fit = [np.corrcoef(np.interp(day[later] + s, day, theory), record[later])[0, 1] for s in shift]
    assert np.max(fit) > 0.6
    assert abs(shift[np.argmax(fit)]) <= 0.5
    assert 0.48 < record[later].std() / theory[later].std() < 2.1


def test_without_mixed_waves_nothing_would_come_then(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(
        transfer, "gains",
        lambda *given: [np.ones((ends.size, given[3].size), complex) for _, ends in given[4]],
    )
    day, record, theory = whole("Luanda")
    later = (day > 60.0) & (day < 95.0)
    assert theory[later].std() < 0.3 * record[later].std()
