"""Where the energy of the source goes, leg by leg, as text and as CSV.

Every share is of the energy that sets out from the source, averaged over its spectrum. What
arrives at the end of a route and what all its legs take sum to one.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.csv_files import write_rows
from waveguide.report.layout import aligned
from waveguide.report.routes import routes_of
from waveguide.report.text import plain
from waveguide.report.ways import guided_legs

if TYPE_CHECKING:
    from waveguide.stored import Stored

LOSSES = {
    "leg_lost_rossby": "Rossby waves", "leg_lost_friction": "bottom friction",
    "leg_lost_damping": "damping", "leg_lost_scattering": "scattered",
    "leg_other_ways": "other ways",
}
"""What a leg takes, by the variable that stores it."""

_HEADING = ["Route", "Leg", "km", "Critical (days)", "Arrives", "Rossby", "Friction", "Damping",
            "Scattered", "Other ways"]  # fmt: skip
_COLUMNS = ["target", "mode", "route", "via", "leg", "kind", "length_km", "critical_period_days",
            "quasi_simultaneous", "sets_out", "arrives", "rossby_waves", "bottom_friction",
            "damping", "scattered", "other_ways"]  # fmt: skip
_NO_BREAK = "\u00a0"
_LEAST = 0.005  # of the source's energy, to be worth a word


def write_budget(dataset: Stored, folder: Path) -> None:
    """Write ``budget.csv``, a line for each leg and one for the whole of each route.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    write_rows(folder / "budget.csv", _COLUMNS, _lines(dataset))


def _lines(dataset: Stored) -> Iterator[list[Any]]:
    for route in _routes(dataset):
        target, mode = (
            dataset[dim].values[dataset[f"route_{dim}"].values[route]] for dim in ("target", "mode")
        )
        kind, via = (dataset[f"route_{what}"].values[route] for what in ("kind", "via"))
        head, energy = [target, mode, kind, via], 1.0
        legs = guided_legs(dataset, route)
        for number, leg in enumerate(legs, start=1):
            arrives = float(dataset["leg_energy_share"].values[leg])
            flag = bool(dataset["leg_quasi_simultaneous"].values[leg])
            described = [
                dataset[f"leg_{name}"].values[leg]
                for name in ("kind", "length_km", "critical_period_days")
            ]
            lost = [dataset[name].values[leg] for name in LOSSES]
            yield [*head, number, *described, "yes" if flag else "no", energy, arrives, *lost]
            energy = arrives
        length = float(dataset["route_length_km"].values[route])
        taken = [float(dataset[name].values[legs].sum()) for name in LOSSES]
        yield [*head, "all", "", length, np.nan, "", 1.0, energy, *taken]


def budget_line(dataset: Stored, route: int) -> str:
    """What arrives by a route and where the rest goes, the largest part first.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals.
    route : int

    Returns
    -------
    str
        For example ``"energy: 28 % arrives, 44 % to other ways, 28 % to bottom friction"``.
    """
    legs = guided_legs(dataset, route)
    arrives = float(dataset["leg_energy_share"].values[legs[-1]]) if legs else 1.0
    taken = {word: float(dataset[name].values[legs].sum()) for name, word in LOSSES.items()}
    parts = [f"{_percent(arrives)} arrives"]
    parts += [
        f"{_percent(share)} {'' if word == 'scattered' else 'to '}{word}"
        for word, share in sorted(taken.items(), key=lambda item: -item[1])
        if share >= _LEAST
    ]
    return f"energy: {', '.join(parts)}"


def budget_text(dataset: Stored) -> str:
    """The budget of every route as a table for the terminal.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    str
        Shares in percent of the energy at the source; fates that take nothing are left out.
    """
    lines = [_HEADING]
    for route in _routes(dataset):
        target, mode = (int(dataset[f"route_{dim}"].values[route]) for dim in ("target", "mode"))
        kind = plain(dataset["route_kind"].values[route])
        name = f"{plain(dataset['target'].values[target], 22)} mode {dataset['mode'].values[mode]}"
        name = name if kind == "earliest" else f"  {kind}"
        for leg in guided_legs(dataset, route):
            lines.append([name, *_leg(dataset, leg)])
            name = ""
    if len(lines) == 1:
        return ""
    heading = "Energy on every leg, in percent of what sets out from the source"
    idle = [i for i in range(5, len(_HEADING)) if {line[i] for line in lines[1:]} == {"0.0"}]
    shown = [[cell for i, cell in enumerate(line) if i not in idle] for line in lines]
    return f"{heading}\n{aligned(shown, range(2, len(shown[0])))}"


def _routes(dataset: Stored) -> Iterator[int]:
    """Routes in the order of the rows, the earliest of each first."""
    for target in range(dataset.sizes["target"]):
        for mode in range(dataset.sizes["mode"]):
            yield from routes_of(dataset, target, mode)


def _leg(dataset: Stored, leg: int) -> list[str]:
    period = float(dataset["leg_critical_period_days"].values[leg])
    at_once = ", at once" if dataset["leg_quasi_simultaneous"].values[leg] else ""
    shares = [float(dataset[name].values[leg]) for name in ("leg_energy_share", *LOSSES)]
    return [
        f"{plain(dataset['leg_kind'].values[leg])}{at_once}",
        f"{float(dataset['leg_length_km'].values[leg]):.0f}",
        f"{period:.0f}" if np.isfinite(period) else "–",
        *(f"{100.0 * share:.1f}" for share in shares),
    ]


def _percent(share: float) -> str:
    """A share in percent, on one line."""
    return f"under 1{_NO_BREAK}%" if share < _LEAST else f"{100.0 * share:.0f}{_NO_BREAK}%"
