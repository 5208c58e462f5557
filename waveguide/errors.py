"""The errors a person can meet, each with a message that says what to do."""

from __future__ import annotations

from collections.abc import Sequence


class WaveguideError(Exception):
    """Base of every error raised on purpose by this package."""


class InputError(WaveguideError, ValueError):
    """Something the person gave cannot be used.

    Parameters
    ----------
    problems : str or sequence of str
        One line for each problem: the argument, the value, the rule and the way out.
    """

    def __init__(self, problems: str | Sequence[str]) -> None:
        self.problems = [problems] if isinstance(problems, str) else list(problems)
        super().__init__("\n".join(self.problems))


class DataError(InputError):
    """A data file is missing, truncated or not the one its manifest describes."""
