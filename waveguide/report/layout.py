"""Aligned columns and filled lines for a terminal."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence

from waveguide.report.text import columns, pad

WIDTH = 110
"""Columns of a page of text."""


def aligned(lines: Sequence[Sequence[str]], right: Iterable[int] = ()) -> str:
    """Lines of cells as columns, the first line as heading above a rule.

    Parameters
    ----------
    lines : sequence of sequence of str
        Cells safe to print (see :func:`waveguide.report.text.plain`), as many in every line.
    right : iterable of int
        Columns that end flush.

    Returns
    -------
    str

    Examples
    --------
    >>> print(aligned([("Gauge", "Days"), ("Callao", "9")], right=[1]))
    Gauge   Days
    ────────────
    Callao     9
    """
    flush = set(right)
    widths = [max(columns(line[i]) for line in lines) for i in range(len(lines[0]))]
    text = [
        "  ".join(pad(cell, widths[i], i in flush) for i, cell in enumerate(line)).rstrip()
        for line in lines
    ]
    return "\n".join([text[0], "─" * max(map(columns, text)), *text[1:]])


def filled(text: str, indent: int) -> str:
    """A text broken into lines of `WIDTH`, all but the first one indented."""
    return textwrap.fill(text, WIDTH, subsequent_indent=" " * indent, break_on_hyphens=False)
