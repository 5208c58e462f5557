"""What the figures for print have in common: their size in millimetres, fonts and files."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PAGE = 170.0
"""Width (mm) of both columns of a journal's page."""

SMALL, NORMAL, MEDIUM, LARGE = 7.0, 7.5, 8.0, 9.0
"""Font sizes (points); none is below 7 when the figure is printed at its own size."""

GREY = "#6a6a6a"
"""Of what is beside the matter: notes and guiding lines."""

MILLIMETRES = 25.4
"""In an inch."""

_DOTS = 220.0  # per inch, of the PNG


def new_figure(height: float, width: float = PAGE) -> Figure:
    """An empty figure.

    Parameters
    ----------
    height, width : float
        mm.

    Returns
    -------
    matplotlib.figure.Figure
    """
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(width / MILLIMETRES, height / MILLIMETRES), dpi=_DOTS)
    FigureCanvasAgg(figure)
    return figure


def arranged_figure(height: float, title: str) -> Figure:
    """A figure whose parts find their places by themselves, with its title.

    Parameters
    ----------
    height : float
        mm.
    title : str
        Safe to print.

    Returns
    -------
    matplotlib.figure.Figure
    """
    figure = new_figure(height)
    figure.set_layout_engine("constrained")
    figure.suptitle(title, fontsize=LARGE, fontweight="bold", parse_math=False)
    return figure


def add_axes(figure: Figure, left: float, bottom: float, width: float, height: float) -> Axes:
    """Axes at a place given in mm from the lower left corner."""
    full = [size * MILLIMETRES for size in figure.get_size_inches()]
    axes: Axes = figure.add_axes(
        (left / full[0], bottom / full[1], width / full[0], height / full[1])
    )
    axes.tick_params(labelsize=SMALL, width=0.6, length=2.5, pad=2.0)
    for spine in axes.spines.values():
        spine.set_linewidth(0.6)
    return axes


def write_heading(figure: Figure, dataset: xr.Dataset, what: str) -> None:
    """Title of the scenario and what is drawn, at the top; the caution at the bottom."""
    height = figure.get_figheight() * MILLIMETRES
    style: dict[str, Any] = {"ha": "center", "va": "top", "parse_math": False}
    title = plain(dataset.attrs["title"], 80)
    figure.text(0.5, 1.0 - 2.0 / height, title, fontsize=LARGE, weight="bold", **style)
    figure.text(0.5, 1.0 - 6.5 / height, what, fontsize=NORMAL, color=GREY, **style)
    note = str(dataset.attrs["caution"]).split(": ")[0]
    style["va"] = "bottom"
    figure.text(0.5, 1.0 / height, note + ".", fontsize=SMALL, color=GREY, **style)


def save_figure(figure: Figure, folder: Path, name: str, dataset: xr.Dataset) -> None:
    """Write a figure of arrivals, whose title becomes that of the PDF; see `save_for_print`.

    Parameters
    ----------
    figure : matplotlib.figure.Figure
    folder : Path
    name : str
        Of the files, without ending.
    dataset : xarray.Dataset
    """
    save_for_print(figure, folder, name, str(dataset.attrs["title"]))


def save_for_print(figure: Figure, folder: Path, name: str, title: str) -> None:
    """Write a figure as PNG and as PDF, whose letters stay letters.

    Parameters
    ----------
    figure : matplotlib.figure.Figure
    folder : Path
    name : str
        Of the files, without ending.
    title : str
        Of the PDF.
    """
    import matplotlib

    figure.savefig(folder / f"{name}.png", dpi=_DOTS)
    with matplotlib.rc_context({"pdf.fonttype": 42}):  # TrueType: text can be edited and searched
        figure.savefig(folder / f"{name}.pdf", metadata={"Title": plain(title, 120)})


def fit_for_print(figure: Figure) -> Figure:
    """Give every text in a figure a size to be read when it is printed at its own size.

    Parameters
    ----------
    figure : matplotlib.figure.Figure

    Returns
    -------
    matplotlib.figure.Figure
        The same.
    """
    from matplotlib.text import Text

    for axes in figure.axes:
        axes.tick_params(which="both", labelsize=SMALL, width=0.6, length=2.5, pad=2.0)
        for text in axes.findobj(Text):
            text.set_fontsize(min(max(text.get_fontsize(), SMALL), MEDIUM))
    for text in figure.findobj(Text):
        text.set_fontsize(min(max(text.get_fontsize(), SMALL), LARGE))
    return figure


def event_start(dataset: xr.Dataset) -> str:
    """Start of the event to the minute."""
    return f"{dataset.attrs['event_start'][:16].replace('T', ' ')} UTC"


def mode_name(mode: int) -> str:
    """A mode in words."""
    return "mode 0 (barotropic)" if mode == 0 else f"mode {mode}"
