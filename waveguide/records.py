"""Records against theory, as one Dataset."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from waveguide.comparison import comparison
from waveguide.report.comparison_dataset import comparison_dataset
from waveguide.scenario import Comparison

if TYPE_CHECKING:
    import xarray as xr


def compare_records(
    question: Comparison, progress: Callable[[str], None] | None = None
) -> xr.Dataset:
    """Lags, ratios and verdicts for the records of a scenario.

    Parameters
    ----------
    question : Comparison
        See :func:`waveguide.read_comparison`.
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    xarray.Dataset
        One row for each pair of records and for the event at each record.

    Raises
    ------
    InputError
        If a record cannot be used, with every such record.
    """
    return comparison_dataset(comparison(question, progress))
