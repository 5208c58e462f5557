"""What all modes together do at a target, each weighted by its share in the signal."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from waveguide.stored import Stored


@dataclass(frozen=True)
class SumOfModes:
    """The peak of the sum of all modes at a target.

    Attributes
    ----------
    peak_time : float
        From the start of the event (days), to the step of the waveforms.
    date : datetime64
        The same in UTC.
    peak_ratio : float
        To the peak at the source; negative where one is a rise and the other a lowering.
    metres : float
        The same in metres, NaN where the amplitude of the event is unknown.
    """

    peak_time: float
    date: np.datetime64
    peak_ratio: float
    metres: float


def farthest(level: np.ndarray[tuple[int], np.dtype[np.float64]]) -> float:
    """The value of a waveform that is farthest from zero, with its sign.

    Parameters
    ----------
    level : ndarray, shape (nt,)

    Returns
    -------
    float
    """
    return float(level[np.argmax(np.abs(level))])


def sum_of_modes(dataset: Stored, target: int) -> SumOfModes | None:
    """The sum of modes at a target, where several modes have a share.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.
    target : int
        Index along ``target``.

    Returns
    -------
    SumOfModes or None
        None with one mode, and for a target that no mode reaches.
    """
    level = dataset["waveform_sum"].values[target]
    if dataset.sizes["mode"] < 2 or not np.abs(level).max() > 0.0:
        return None
    at = int(np.argmax(np.abs(level)))
    ratio = farthest(level) / farthest(dataset["source_waveform"].values)
    return SumOfModes(
        peak_time=float(dataset["time_days"].values[at]), date=dataset["time"].values[at],
        peak_ratio=ratio,
        metres=ratio * float(dataset.attrs["event_amplitude_m"]),
    )  # fmt: skip


def shares_text(dataset: Stored) -> str:
    """The shares of the modes in the signal at the source, in words.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays

    Returns
    -------
    str
        As in "76 % mode 1, 24 % mode 2".
    """
    return ", ".join(
        f"{100.0 * share:.0f} % mode {mode}"
        for mode, share in zip(
            dataset["mode"].values.tolist(), dataset["mode_share"].values.tolist(), strict=True
        )
    )
