"""Cautions of all answers as a person reads them: each kind once, the most serious first."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from waveguide.propagation.cautions import KINDS, Kind
from waveguide.report.layout import filled
from waveguide.report.text import plain

if TYPE_CHECKING:
    from waveguide.stored import Stored

_MOST_TARGETS = 8
"""Targets that are named; of longer lists the rest is counted."""

_ANSWERED = ("reached", "responds")
"""Status of arrivals and of responses that there are."""

_MOST_SPARED = 2
"""Answers that a caution does not concern, so few that they are named instead of the others."""

_HEADING = (
    "Cautions, the most serious first; numbers range over the answers named below (--json has all)"
)


def cautions_text(dataset: Stored, notes: Sequence[str] = ()) -> str:
    """Each kind of caution once, with the range of its numbers and the answers it concerns.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`, a plan or a response.
    notes : sequence of str
        What else is to be told, before the caution that belongs to every answer.

    Returns
    -------
    str
        Lines, the last of which is the caution that belongs to every answer.
    """
    kinds = dataset["remark_kind"].values
    told = [_of_kind(dataset, kind) for kind in KINDS if (kinds == kind.name).any()]
    general = [filled(f"  {text}", 4) for text in (*notes, dataset.attrs["caution"])]
    return "\n".join([_HEADING if told else "Cautions", *told, *general])


def _of_kind(dataset: Stored, kind: Kind) -> str:
    """A kind of caution in words, and below it whom it concerns."""
    mine = dataset["remark_kind"].values == kind.name
    rows = [
        (int(t), int(m))
        for t, m in zip(
            dataset["remark_target"].values[mine], dataset["remark_mode"].values[mine], strict=True
        )
    ]
    text = kind.text.format(span(kind, dataset["remark_number"].values[mine]))
    return filled(f"  {text}", 4) + "\n" + filled(f"      {_concerned(dataset, rows)}", 6)


def span(kind: Kind, numbers: np.ndarray[tuple[int], np.dtype[np.float64]]) -> str:
    """The smallest and the largest number, or one where they read the same.

    Parameters
    ----------
    kind : Kind
    numbers : ndarray, shape (k,)
        In the unit of the kind.

    Returns
    -------
    str
    """
    low, high = (format(float(number), kind.style) for number in (numbers.min(), numbers.max()))
    return low if low == high else f"{low} to {high}"


def _concerned(dataset: Stored, rows: list[tuple[int, int]]) -> str:
    """Targets with their modes, in the shortest words that are exact."""
    status = dataset["status"].values
    answered = np.nonzero(np.isin(status, _ANSWERED))
    reached = [(int(t), int(m)) for t, m in zip(*answered, strict=True)]
    if rows == reached:
        return "all answers"
    modes = sorted({m for _, m in rows})
    if rows == [row for row in reached if row[1] in modes]:
        return f"all targets in {_modes(dataset, modes)}"
    spared = [row for row in reached if row not in rows]
    if len(spared) <= _MOST_SPARED and len(spared) < len(rows):
        return f"all answers but {_listed(dataset, spared)}"
    return _listed(dataset, rows)


def _listed(dataset: Stored, rows: list[tuple[int, int]]) -> str:
    """Targets with their modes; those with the same modes together."""
    targets: dict[tuple[int, ...], list[int]] = {}
    for target in dict.fromkeys(t for t, _ in rows):
        targets.setdefault(tuple(m for t, m in rows if t == target), []).append(target)
    parts = [
        f"{_names(dataset, named)} ({_modes(dataset, list(of))})" for of, named in targets.items()
    ]
    return "; ".join(parts)


def _names(dataset: Stored, targets: list[int]) -> str:
    named = [plain(dataset["target"].values[t], 28) for t in targets[:_MOST_TARGETS]]
    more = len(targets) - len(named)
    return " · ".join([*named, *([f"{more} more"] if more else [])])


def _modes(dataset: Stored, modes: list[int]) -> str:
    numbers = [str(int(dataset["mode"].values[m])) for m in modes]
    return f"mode {numbers[0]}" if len(numbers) == 1 else f"modes {', '.join(numbers)}"
