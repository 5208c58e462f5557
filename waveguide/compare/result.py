"""Everything that a comparison finds."""

from __future__ import annotations

from dataclasses import dataclass

from waveguide.compare.events import EventResult
from waveguide.compare.moorings import MooringResult
from waveguide.compare.pairs import PairResult


@dataclass(frozen=True)
class ComparisonResult:
    """Pairs, events and moorings of one scenario.

    Attributes
    ----------
    name, title : str
        Of the scenario.
    ocean : str
        Where the speeds come from.
    event : str
        Name of the event.
    band : (shortest, longest)
        Days.
    modes : tuple of int
    pairs : tuple of PairResult
    events : tuple of EventResult
    moorings : tuple of MooringResult
    """

    name: str
    title: str
    ocean: str
    event: str
    band: tuple[float, float]
    modes: tuple[int, ...]
    pairs: tuple[PairResult, ...]
    events: tuple[EventResult, ...]
    moorings: tuple[MooringResult, ...]
