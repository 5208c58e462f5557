"""One mode with averaged coastal values and its own friction, against twelve coupled modes.

coupled_results.json has five coasts, made by make_coupled_results.py from sections alone. Sea
level there follows from nothing but pressure handed on along isobaths; it knows no mode of the
wave's own. What the packaged atlas makes of it, without the change of f that the oracle leaves out:

    F̄_end/F̄_start exp(−Σ γ ds).

Found, over all coasts, distances and periods of 5 to 40 days: with friction mode 1 is within a
factor of 1.31 in the median and within 2 in four cases of five. The local F of each section, not
averaged, is off by 1.60 in the median; off California, in the band of 10 to 40 days, by up to 3.
Worst is Central America, where most of the wave is lost to friction on the widest shelf within
1300 km, and theory keeps three times as much. Mode 2 is worse: what it hands to mode 1 comes back
to the coast, and in the Bay of Bengal that is most of what is left.
"""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from make_coupled_results import DRAG, coast_from

from waveguide.network.trapped_store import packaged_guide
from waveguide.propagation.adaptation import adapted
from waveguide.propagation.modes import ModeAtNodes, atlas_mode, friction_of_steps
from waveguide.propagation.step_response import step_speeds

RESULTS = json.loads(
    (Path(__file__).parent / "coupled_results.json").read_text(encoding="utf-8")
)
COASTS = list(RESULTS["coasts"])


@cache
def packaged(number: int) -> ModeAtNodes:
    return atlas_mode(packaged_guide("baroclinic")[1], number)


def theory(coast: str, wave: dict, average: bool = True) -> np.ndarray:
    """Sea level at the stops over that at the start."""
    network, mode = packaged_guide("baroclinic")[0], packaged(wave["mode"])
    if average:
        mode = adapted(network, mode, 2.0 * np.pi / (wave["period_days"] * 86400.0))
    steps = coast_from(network, *RESULTS["coasts"][coast]["start"])
    rate = friction_of_steps(network, mode, wave["drag"])[steps]
    rubbed = np.cumsum(rate * network.length[steps])
    value = mode.coastal_value
    level = value[network.head[steps]] / value[network.tail[steps[0]]] * np.exp(-rubbed)
    return level[np.array(RESULTS["coasts"][coast]["stops"]) - 1]


def both(
    mode: int, drag: float, average: bool = True, coasts: list[str] = COASTS
) -> tuple[np.ndarray, np.ndarray]:
    """Sea level by theory and by the oracle at all stops and periods of some coasts."""
    waves = [
        (theory(coast, wave, average), wave["sea_level"])
        for coast in coasts
        for wave in RESULTS["coasts"][coast]["waves"]
        if wave["mode"] == mode and wave["drag"] == drag
    ]
    told, found = (np.concatenate(levels) for levels in zip(*waves, strict=True))
    return told, found


def misses(mode: int, drag: float, average: bool = True, coasts: list[str] = COASTS) -> np.ndarray:
    """|ln(theory/oracle)| of all stops and periods of some coasts."""
    told, found = both(mode, drag, average, coasts)
    return np.abs(np.log(told / found))


def delay_ratios(coasts: list[str]) -> np.ndarray:
    """∫ds/c of mode 1 over the oracle's group delay at the last stop, at 10 to 40 days."""
    network, ratios = packaged_guide("baroclinic")[0], []
    for coast in coasts:
        steps = coast_from(network, *RESULTS["coasts"][coast]["start"])
        time = network.length[steps] / step_speeds(network, packaged(1), steps)[0]
        days = np.cumsum(time)[RESULTS["coasts"][coast]["stops"][-1] - 1] / 86400.0
        ratios += [
            days / wave["group_delay_days"][-1]
            for wave in RESULTS["coasts"][coast]["waves"]
            if wave["mode"] == 1 and wave["drag"] == DRAG and wave["period_days"] >= 10.0
        ]
    return np.array(ratios)


def test_mode_1_with_friction() -> None:
    """A factor of two is claimed, for what is not small; 20 % is not met in the median."""
    found = misses(1, DRAG)
    assert np.median(found) < np.log(1.5)
    assert np.quantile(found, 0.8) < np.log(2.0)


@pytest.mark.parametrize("drag", [0.0, DRAG])
def test_local_values_would_miss_by_more(drag: float) -> None:
    kept, local = misses(1, drag), misses(1, drag, average=False)
    assert np.median(local) > 1.5 * np.median(kept)


@pytest.mark.xfail(strict=True, reason="the widest shelf takes more than the mode's own friction")
def test_central_america() -> None:
    assert np.max(misses(1, DRAG, coasts=["Central America"])) < np.log(2.0)


def test_mode_2_with_friction() -> None:
    found = misses(2, DRAG, coasts=["California", "Peru", "Japan"])
    assert np.quantile(found, 0.8) < np.log(2.0)


@pytest.mark.xfail(strict=True, reason="mode 1 brings back what mode 2 loses")
def test_mode_2_in_the_bay_of_bengal() -> None:
    assert np.median(misses(2, DRAG, coasts=["Bay of Bengal"])) < np.log(2.0)


def test_mode_1_is_told_too_high_where_a_tenth_to_a_third_is_left() -> None:
    told, found = both(1, DRAG)
    little = (found > 0.1) & (found < 0.3)
    assert 1.2 < np.median(told / found) < 1.4
    assert 1.5 < np.median((told / found)[little]) < 2.2


def test_less_than_a_hundredth_is_told_too_low() -> None:
    """Modes that last longer hold sea level up."""
    told, found = both(2, DRAG)
    ratio = (found / told)[told < 0.01]
    assert ratio.size > 5
    assert ratio.min() > 2.5
    assert ratio.max() < 50.0


def test_travel_time_of_mode_1() -> None:
    """No wave is only mode 1: delays of one period and coast scatter, their middle is that of c."""
    found = delay_ratios(COASTS)
    assert abs(np.median(found) - 1.0) < 0.1
    assert np.mean(np.abs(found - 1.0) < 0.3) > 0.75


@pytest.mark.xfail(strict=True, reason="1300 km in 1.8 and 2.1 days where ∫ds/c has 3.4")
def test_travel_time_off_japan() -> None:
    assert np.all(np.abs(delay_ratios(["Japan"]) - 1.0) < 0.3)
