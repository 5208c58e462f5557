"""What moorings see at depth: rows of the arrivals, and a table of them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.propagation.at_depth import signed
from waveguide.report.layout import aligned, filled
from waveguide.report.text import plain
from waveguide.schema import ARRIVALS

if TYPE_CHECKING:
    from waveguide.propagation.moorings import MooringAnswer
    from waveguide.stored import Stored

_VARIABLES = [name for name, v in ARRIVALS.items() if v.dims == ("instrument",)]
_HEADING = ["Mooring", "Mode", "Guide", "Off (km)", "Depth (m)", "Isopycnals (m)",
            "Current (cm/s)", "To", "Pressure (cm)", "Structure"]  # fmt: skip
_IN_PHASE = 0.5  # degrees


def instrument_columns(
    moorings: Mapping[tuple[int, int], MooringAnswer], depths: Sequence[Sequence[float]],
    guide: NDArray[np.float64],
) -> dict[str, list[Any]]:
    """The variables of instruments, a row for each target, mode and depth.

    Parameters
    ----------
    moorings : mapping of (target, mode) to MooringAnswer
        Indices along both; targets that are no moorings are not in it.
    depths : sequence of sequence of float
        Of the instruments of every target (m).
    guide : ndarray, shape (targets, modes)
        Peak of sea level on the guide beside the targets over that at the source.

    Returns
    -------
    dict of str to list
        By the names of :data:`waveguide.schema.ARRIVALS`.
    """
    columns: dict[str, list[Any]] = {name: [] for name in _VARIABLES}
    for (target, mode), answer in sorted(moorings.items()):
        for place, depth in enumerate(depths[target]):
            row = {
                "target": target, "mode": mode, "depth_m": depth,
                "guide_ratio": float(guide[target, mode]), **_row(answer, place),
            }  # fmt: skip
            for name, value in row.items():
                columns[f"instrument_{name}"].append(value)
    return columns


def _row(answer: MooringAnswer, place: int) -> dict[str, Any]:
    """One instrument; per centimetre of sea level."""
    view, nan = answer.view, complex("nan")
    seen = (nan, nan, nan)
    if view is not None:
        # (m/s per m) and (cm/s per cm) are the same number
        seen = (0.01 * view.displacement[place], view.current[place], view.bottom_pressure)
    amplitude, lag = signed(seen)
    below = view is not None and bool(np.isnan(view.displacement[place]))
    return {
        "offshore_km": answer.distance / 1e3,
        "bottom_m": math.nan if view is None else view.bottom,
        "structure": f"{answer.structure}, below the bottom" if below else answer.structure,
        "displacement_m_per_cm": amplitude[0],
        "displacement_lag_degrees": lag[0],
        "current_cm_s_per_cm": amplitude[1],
        "current_lag_degrees": lag[1],
        "towards_degrees": answer.towards,
        "bottom_pressure_cm_per_cm": amplitude[2],
        "bottom_pressure_lag_degrees": lag[2],
        "best_depth_m": math.nan if view is None else view.best_depth,
    }


def _whose(dataset: Stored, instrument: int) -> list[Any]:
    """Target and mode of an instrument."""
    return [
        dataset[dim].values[dataset[f"instrument_{dim}"].values[instrument]]
        for dim in ("target", "mode")
    ]


def instruments_text(dataset: Stored) -> str:
    """The instruments as a table for the terminal.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    str
        Empty where no target is a mooring.
    """
    if not dataset.sizes["instrument"]:
        return ""
    cells = [_cells(dataset, i) for i in range(dataset.sizes["instrument"])]
    heading = filled(
        "At depth, per centimetre of sea level on the guide beside the mooring: isopycnals upward, "
        "current in the direction of travel (to this azimuth), bottom pressure as height of water; "
        "in brackets the phase by which each lags sea level. What an instrument sees at most is "
        f"that times the peak on the guide, {_unit(dataset)} in the column Guide", 2
    )
    return f"{heading}\n{aligned([_HEADING, *cells], range(1, len(_HEADING) - 1))}"


def _unit(dataset: Stored) -> str:
    known = math.isfinite(dataset.attrs["event_amplitude_m"])
    return "in cm" if known else "over that at the source,"


def _guide(dataset: Stored, i: int) -> str:
    """The peak on the guide: in cm where the amplitude of the event is known, else its ratio."""
    ratio = float(dataset["instrument_guide_ratio"].values[i])
    metres = float(dataset.attrs["event_amplitude_m"])
    if not math.isfinite(ratio):
        return "–"
    return f"{100.0 * ratio * metres:+.1f}" if math.isfinite(metres) else f"{ratio:.2f}"


def _cells(dataset: Stored, i: int) -> list[str]:
    def number(name: str, style: str) -> str:
        value = float(dataset[f"instrument_{name}"].values[i])
        return format(value, style) if math.isfinite(value) else "–"

    def with_lag(name: str, quantity: str, style: str) -> str:
        lag = float(dataset[f"instrument_{quantity}_lag_degrees"].values[i])
        seen = number(name, style)
        return f"{seen} ({lag:+.0f}°)" if math.isfinite(lag) and abs(lag) >= _IN_PHASE else seen

    target, mode = _whose(dataset, i)
    structure = str(dataset["instrument_structure"].values[i]).split(", ")[-1]
    return [
        plain(target, 22), str(int(mode)), _guide(dataset, i), number("offshore_km", ".0f"),
        number("depth_m", ".0f"),
        with_lag("displacement_m_per_cm", "displacement", "+.2f"),
        with_lag("current_cm_s_per_cm", "current", "+.2f"), number("towards_degrees", ".0f"),
        with_lag("bottom_pressure_cm_per_cm", "bottom_pressure", "+.2f"), plain(structure, 24),
    ]
