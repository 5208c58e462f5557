"""Records and model output against theory, each as one Dataset."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from waveguide.comparison import comparison
from waveguide.lookout import lookout
from waveguide.report.comparison_dataset import comparison_dataset
from waveguide.report.lookout_dataset import lookout_dataset
from waveguide.scenario import Comparison, Scenario

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


def look_out(
    scenario: Scenario, model: xr.Dataset | None = None,
    progress: Callable[[str], None] | None = None,
) -> xr.Dataset:
    """Where and when to look in model output, and how fast the signal runs in it.

    Parameters
    ----------
    scenario : Scenario
        See :func:`waveguide.read_scenario`.
    model : xarray.Dataset, optional
        Output with CF coordinates, in memory or not; without it only the windows are told.
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    xarray.Dataset
        One `window` for each stretch of a route, and one `route` for each in the output.

    Raises
    ------
    InputError
        If the model has no such variable, times or places.
    """
    return lookout_dataset(lookout(scenario, model, progress))
