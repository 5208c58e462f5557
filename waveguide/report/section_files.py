"""Writing a section's figure and NetCDF file."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.report.figures import save_for_print
from waveguide.report.files import written
from waveguide.report.section_figure import draw_section

if TYPE_CHECKING:
    import xarray as xr


def write_section(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``section.png``, ``section.pdf`` and ``section.nc``.

    Parameters
    ----------
    dataset : xarray.Dataset
        From :func:`waveguide.report.section_dataset.section_dataset`.
    folder : Path
        An existing folder; see :func:`waveguide.report.files.output_folder`.

    Raises
    ------
    InputError
        Where the files cannot be written.
    """
    figure = draw_section(dataset)
    encoding = {
        str(name): {"_FillValue": np.nan}
        for name, variable in dataset.data_vars.items()
        if variable.dtype.kind == "f"
    }
    with written():
        save_for_print(figure, folder, "section", dataset.attrs["title"])
        dataset.to_netcdf(folder / "section.nc", engine="netcdf4", encoding=encoding)
