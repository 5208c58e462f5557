"""A comparison as text for the terminal, as a JSON document and as CSV."""

from __future__ import annotations

import csv
import math
import textwrap
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.propagation.cautions import KINDS
from waveguide.report.caution_text import span
from waveguide.report.document import plain_value
from waveguide.report.text import columns, pad, plain

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.result import ComparisonResult

_WIDTH = 110


def comparison_table(result: ComparisonResult, dataset: xr.Dataset) -> str:
    """What a person wants to read: lags, verdicts with reasons, moorings, what was done.

    Parameters
    ----------
    result : ComparisonResult
    dataset : xarray.Dataset
        Of the same result; see `waveguide.report.comparison_dataset`.

    Returns
    -------
    str
    """
    short, long = result.band
    head = (
        f"{plain(result.title, _WIDTH)}\n"
        f"Band    {short:g} to {long:g} days (lags belong to their band: another band may have "
        "others)\n"
        f"Ocean   {result.ocean}"
    )
    parts = [head, _lags(dataset), _reasons(dataset), _moorings(result), _records(result)]
    parts.append("\n".join(["Cautions", *_cautions(result),
                            _filled("  " + dataset.attrs["caution"], 2)]))
    return "\n\n".join(part for part in parts if part)


def _cautions(result: ComparisonResult) -> list[str]:
    """Each kind of caution once, with the range of its numbers and the rows it concerns."""
    rows = [(pair.first.name, pair.second.name, pair.predictions) for pair in result.pairs]
    rows += [("event", e.series.name, e.predictions) for e in result.events]
    lines = []
    for kind in KINDS:
        numbers: list[float] = []
        modes: dict[str, list[str]] = {}
        for first, second, predictions in rows:
            for p in predictions:
                for caution in (c for c in p.cautions if c.kind == kind.name):
                    numbers.append(caution.number)
                    way = f"{plain(first, 24)} to {plain(second, 24)}"
                    modes.setdefault(way, []).append(str(p.mode))
        if numbers:
            lines.append(_filled("  " + kind.text.format(span(kind, np.array(numbers))), 4))
            who = (f"{way} (mode {', '.join(which)})" for way, which in modes.items())
            lines.append(_filled("      " + " · ".join(who), 6))
    return lines


def _lags(dataset: xr.Dataset) -> str:
    """A line for each row and mode."""
    header = ("From", "To", "Mode", "Lag, days", "95 %", "Corr.", "Chance", "Theory, days",
              "Ratio", "Theory", "Verdict")
    lines = [header]
    for row in range(dataset.sizes["row"]):
        at = dataset.isel(row=row)
        for m, mode in enumerate(dataset["mode"].values):
            first = m == 0
            lines.append((
                plain(at["first"].item(), 24) if first else "",
                plain(at["second"].item(), 24) if first else "",
                str(mode),
                _number(at["lag_days"], "+.1f") if first else "",
                f"{_number(at['lag_low_days'], '.1f')} to {_number(at['lag_high_days'], '.1f')}"
                if first else "",
                _number(at["correlation"], ".2f") if first else "",
                _chance(at) if first else "",
                _number(at["predicted_lag_days"][m], ".1f"),
                _number(at["amplitude_ratio"], ".2f") if first else "",
                _number(at["predicted_ratio"][m], ".2f"),
                str(at["verdict"][m].item()),
            ))
    return _aligned(lines, right=range(2, 10))


def _chance(at: xr.Dataset) -> str:
    """The chance, or that it is below what the record can tell."""
    chance = float(at["chance"])
    told = _number(at["chance"], ".3f")
    return f"≤ {told}" if 0.0005 < chance <= float(at["least_chance"]) < 1.0 else told


def _reasons(dataset: xr.Dataset) -> str:
    lines = []
    for row in range(dataset.sizes["row"]):
        at = dataset.isel(row=row)
        name = f"{plain(at['first'].item(), 24)} to {plain(at['second'].item(), 24)}"
        for m, mode in enumerate(dataset["mode"].values):
            word, reason = at["verdict"][m].item(), at["reason"][m].item()
            lines.append(_filled(f"  {name}, mode {mode}: {word}: {plain(reason, 400)}", 6))
    return "\n".join(["Why", *lines]) if lines else ""


def _moorings(result: ComparisonResult) -> str:
    parts = []
    for mooring in result.moorings:
        modes = [int(m) for m in mooring.modes]
        header = ("Instrument", "Depth, m", "Ratio", "95 %",
                  *(f"Mode {m}" for m in modes), *(f"Verdict {m}" for m in modes))
        lines: list[Sequence[str]] = [header]
        for part in mooring.instruments:
            slope = part.slope
            lines.append((
                plain(part.series.name, 30), f"{part.series.depth:g}", f"{slope.slope:.3g}",
                f"{slope.low:.3g} to {slope.high:.3g}",
                *(f"{value:.3g}" for value in part.predicted), *part.words,
            ))
        share = ", ".join(
            f"mode {m} {100 * value:.0f} %"
            for m, value in zip(modes, mooring.explained, strict=True)
        )
        parts.append(
            f"Mooring: ratio of each instrument to {plain(mooring.reference, 30)}, SI units\n"
            + _aligned(lines, right=range(1, 4 + len(modes)))
            + f"\n  explained of all instruments' variance: {share}; by the best structure there "
            f"is {100 * mooring.pattern_variance:.0f} %"
        )
    return "\n\n".join(parts)


def _records(result: ComparisonResult) -> str:
    """What was done to every record, once."""
    notes: dict[str, tuple[str, ...]] = {}
    for pair in result.pairs:
        notes[pair.first.name] = pair.first.notes
        notes[pair.second.name] = pair.second.notes
    for event in result.events:
        notes[event.series.name] = event.series.notes
    for mooring in result.moorings:
        for part in mooring.instruments:
            notes[part.series.name] = part.series.notes
    lines = [_filled(f"  {plain(name, 30)}: {'; '.join(told)}", 6) for name, told in notes.items()]
    return "\n".join(["Records", *lines])


def _number(value: Any, style: str) -> str:
    number = float(value)
    return format(number, style) if math.isfinite(number) else "–"


def _aligned(lines: Sequence[Sequence[str]], right: range) -> str:
    widths = [max(columns(line[i]) for line in lines) for i in range(len(lines[0]))]
    text = [
        "  ".join(pad(cell, widths[i], i in right) for i, cell in enumerate(line)).rstrip()
        for line in lines
    ]
    return "\n".join([text[0], "─" * max(map(columns, text)), *text[1:]])


def _filled(text: str, indent: int) -> str:
    return textwrap.fill(text, _WIDTH, subsequent_indent=" " * indent, break_on_hyphens=False)


def comparison_document(result: ComparisonResult, dataset: xr.Dataset) -> dict[str, Any]:
    """A comparison as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    result : ComparisonResult
    dataset : xarray.Dataset

    Returns
    -------
    dict
    """
    rows = [
        {name: _plain(dataset[name].values[row]) for name in _of(dataset, "row")}
        for row in range(dataset.sizes["row"])
    ]
    parts = [
        {name: _plain(dataset[name].values[i]) for name in _of(dataset, "instrument")}
        for i in range(dataset.sizes["instrument"])
    ]
    spectra = [
        {
            "frequency_per_day": _plain(pair.spectrum.frequency),
            "coherence_squared": _plain(pair.spectrum.coherence),
            "phase_degrees": _plain(pair.spectrum.phase),
            "phase_error_degrees": _plain(pair.spectrum.phase_error),
            "significant_coherence_squared": _plain(pair.spectrum.significant),
        }
        for pair in result.pairs
    ]
    notes = {
        series.name: list(series.notes)
        for pair in result.pairs for series in (pair.first, pair.second)
    }
    return {
        "mode": _plain(dataset["mode"].values),
        "rows": rows,
        "instruments": parts,
        "spectra": spectra,
        "records": notes,
        **{key: _plain(value) for key, value in dataset.attrs.items()},
    }


def _of(dataset: xr.Dataset, dim: str) -> list[str]:
    return [str(name) for name, v in dataset.data_vars.items() if v.dims[0] == dim]


def _plain(value: Any) -> Any:
    if hasattr(value, "tolist") and getattr(value, "ndim", 0) > 0:
        return [_plain(item) for item in value]
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    return plain_value(value)


def write_comparison_csv(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``comparison.csv``, a line for each row and mode, and ``moorings.csv`` for moorings.

    Parameters
    ----------
    dataset : xarray.Dataset
    folder : Path
    """
    for dim, file in (("row", "comparison.csv"), ("instrument", "moorings.csv")):
        if not dataset.sizes[dim]:
            continue
        names = _of(dataset, dim)
        with (folder / file).open("w", encoding="utf-8", newline="") as out:
            writer = csv.writer(out, lineterminator="\n")
            writer.writerow(["mode", *names])
            for row in range(dataset.sizes[dim]):
                for m, mode in enumerate(dataset["mode"].values):
                    writer.writerow([int(mode), *(_cell(dataset[n].values[row], m) for n in names)])


def _cell(value: Any, mode: int) -> Any:
    value = plain_value(value[mode] if getattr(value, "ndim", 0) else value)
    if isinstance(value, str):
        text = plain(value, 1000)
        return f"'{text}" if text.startswith(("=", "+", "-", "@")) else text
    return "" if value is None else value
