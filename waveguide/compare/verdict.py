"""What a measured lag says of a predicted one, in a word and a sentence.

The order of the questions matters: first whether the two records are related at all, then
whether the lag is told from its neighbours a cycle away, then which way the signal goes, and only
then whether its time is that of the theory.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from waveguide.compare.lags import LagEstimate

Word = Literal["consistent", "too early", "too late", "not resolvable"]

CHANCE = 0.05
"""A relation must be less likely than this among unrelated series of the same kind."""

CYCLE_CHANCE = 0.05
"""So must be a lag another cycle away among the draws."""

PREDICTION_ERROR = 0.10
"""Relative error of a predicted travel time that is allowed for.

First-mode speeds from a climatology and 0.1° depths lie within 10 % of those of Chelton et al.
(1998, J. Phys. Oceanogr. 28, 433) in nine cells of ten.
"""


@dataclass(frozen=True)
class Verdict:
    """One mode's verdict.

    Attributes
    ----------
    word : {"consistent", "too early", "too late", "not resolvable"}
    reason : str
    """

    word: Word
    reason: str


def verdict(
    estimate: LagEstimate, chance: float, predicted: float, status: str,
    error: float = PREDICTION_ERROR,
) -> Verdict:
    """Judge a predicted lag by a measured one.

    Parameters
    ----------
    estimate : LagEstimate
    chance : float
        Probability of as high a correlation without a relation.
    predicted : float
        Predicted lag (days), NaN if theory has none.
    status : str
        Why theory has none; "reached" if it has one.
    error : float
        Relative error of the predicted lag.

    Returns
    -------
    Verdict
        "too early" and "too late" are said of the record: what it shows comes earlier or later
        than the theory of this mode.
    """
    hidden = unresolved(estimate, chance)
    if hidden:
        return Verdict("not resolvable", hidden)
    span = f"{estimate.lag:.1f} [{estimate.low:.1f} to {estimate.high:.1f}] days"
    if not np.isfinite(predicted):
        way = (
            f"; the record has the signal at the second place first, {span}"
            if estimate.high < 0.0 else ""
        )
        return Verdict("not resolvable", f"theory has no lag for this mode: {status}{way}")
    if estimate.high < 0.0 < predicted:
        return Verdict(
            "too early",
            f"reversed: the signal is at the second place first, {span}, so this is no wave from "
            "the first",
        )
    early, late = predicted * (1.0 - error), predicted * (1.0 + error)
    theory = f"{predicted:.1f} ± {100 * error:.0f} %"
    if estimate.high < early:
        at_once = " and no delay at all is not excluded" if estimate.low <= 0.0 else ""
        return Verdict("too early", f"{span} against {theory}{at_once}")
    if estimate.low > late:
        return Verdict("too late", f"{span} against {theory}")
    if estimate.low <= 0.0 < early:
        return Verdict(
            "not resolvable",
            f"{span} holds both the predicted {theory} and no delay at all",
        )
    return Verdict("consistent", f"{span} against {theory}")


def unresolved(estimate: LagEstimate, chance: float) -> str:
    """Why no lag can be read from the records, or nothing."""
    if not np.isfinite(estimate.lag):
        return "the record is too short or has too many gaps to tell signal from noise"
    if chance > CHANCE:
        return (
            f"no relation: unrelated records of this kind correlate as well "
            f"({estimate.correlation:.2f}) in {chance:.0%} of cases"
        )
    if estimate.at_edge:
        return (
            f"the correlation still rises at the longest lag searched ({estimate.lag:.1f} days): "
            "search longer lags"
        )
    if estimate.other_cycle > CYCLE_CHANCE:
        other = (
            f" ({estimate.rival:.1f} days fits with a correlation of "
            f"{estimate.rival_correlation:.2f} beside {estimate.correlation:.2f})"
            if np.isfinite(estimate.rival) else ""
        )
        return (
            f"one cycle of ambiguity: {estimate.lag:.1f} days, but {estimate.other_cycle:.0%} of "
            f"the draws lie another half period of {estimate.period:.0f} days or more away{other}"
        )
    return ""
