"""The arrivals as one page for a browser: a single file that asks nothing of any network."""

from __future__ import annotations

import base64
import hashlib
import html
import json
import re
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from waveguide.report.files import written
from waveguide.report.page_data import page_data

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.stored import Stored

_PARTS = Path(__file__).parent / "page_parts"
_SCRIPTS = ("data.js", "projection.js", "map.js", "charts.js", "panels.js", "main.js")


def write_page(
    arrivals: Stored, plan: xr.Dataset, sections: Sequence[Mapping[str, Any]], folder: Path
) -> None:
    """Write ``page.html``.

    Parameters
    ----------
    arrivals : xarray.Dataset or Arrays
    plan : xarray.Dataset
    sections : sequence of mapping
        As for :func:`waveguide.report.page_data.page_data`.
    folder : Path

    Raises
    ------
    InputError
        Where the file cannot be written.
    """
    text = page(page_data(arrivals, plan, sections))
    with written():
        (folder / "page.html").write_text(text, encoding="utf-8")


def page(data: Mapping[str, Any]) -> str:
    """The text of the page.

    Texts from files enter as JSON in a block of data, in which no character can end the block,
    and in the table with their markup escaped. A content security policy allows the page's own
    script and style, told by their hashes, and nothing else: no address can be asked for anything.

    Parameters
    ----------
    data : mapping
        See :func:`waveguide.report.page_data.page_data`.

    Returns
    -------
    str
        HTML.
    """
    style = (_PARTS / "style.css").read_text(encoding="utf-8")
    script = "\n".join((_PARTS / name).read_text(encoding="utf-8") for name in _SCRIPTS)
    policy = (
        f"default-src 'none'; script-src {_hash(script)}; style-src {_hash(style)}; "
        "img-src data:; base-uri 'none'; form-action 'none'"
    )
    parts = {
        "title": html.escape(str(data["title"])),
        "caution": html.escape(str(data["caution"])),
        "policy": policy,
        "style": style,
        "script": script,
        "table": _table(data),
        "data": _json(data),
    }
    template = (_PARTS / "page.html").read_text(encoding="utf-8")
    return re.sub(r"\{\{(\w+)\}\}", lambda match: parts[match[1]], template)


def _hash(text: str) -> str:
    digest = base64.b64encode(hashlib.sha256(text.encode("utf-8")).digest()).decode("ascii")
    return f"'sha256-{digest}'"


def _json(data: Mapping[str, Any]) -> str:
    """JSON that cannot end a block of HTML or start a comment in it."""
    text = json.dumps(data, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return text.replace("<", "\\u003c").replace(">", "\\u003e").replace("&", "\\u0026")


_HEADING = ("Target", "Mode", "Status", "Front, days", "Half height, days", "Peak, days",
            "Look from, days", "until, days", "Peak ratio", "Peak, m", "Path, km", "Speed, m/s")


def _table(data: Mapping[str, Any]) -> str:
    """All rows as a table, for print, for readers of the screen and without a script."""
    rows = []
    for target in data["targets"]:
        for mode, row in zip(data["modes"], target["rows"], strict=True):
            plan = row.get("plan", {})
            cells = [
                row.get("front"), row.get("half"), row.get("peak"), plan.get("look_from"),
                plan.get("look_until"), row.get("ratio"), row.get("metres"), row.get("km"),
                row.get("speed"),
            ]
            styles = (".2f", ".2f", ".2f", ".1f", ".1f", ".3g", ".3f", ".0f", ".2f")
            texts = [
                "–" if value is None else format(value, style)
                for value, style in zip(cells, styles, strict=True)
            ]
            name = f'<th scope="row"><bdi>{html.escape(target["name"])}</bdi></th>'
            head = f"{name}<td>{mode['number']}</td><td>{html.escape(row['status'])}</td>"
            rows.append(f"<tr>{head}{''.join(f'<td>{text}</td>' for text in texts)}</tr>")
    heading = "".join(f'<th scope="col">{name}</th>' for name in _HEADING)
    return f"<thead><tr>{heading}</tr></thead><tbody>{''.join(rows)}</tbody>"
