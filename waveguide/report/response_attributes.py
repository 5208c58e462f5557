"""Global attributes of a forced response: the question, the software and the data."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from waveguide.ocean.packaged import used_files
from waveguide.report.attributes import software_version
from waveguide.schema import CAUTION

if TYPE_CHECKING:
    from waveguide.forcing.projection import Forcing
    from waveguide.scenario import WindScenario


def response_attributes(
    question: WindScenario, forcing: Forcing, wind_files: Sequence[Path]
) -> dict[str, str | float]:
    """Global attributes.

    Parameters
    ----------
    question : WindScenario
    forcing : Forcing
    wind_files : sequence of Path
        Files the wind was read from; folders (Zarr stores) are named without a hash.

    Returns
    -------
    dict
    """
    digests = used_files()
    for path in wind_files:
        if path.is_file() and path.name not in digests:
            digests[path.name] = _sha256(path)
    drag = question.waves.drag_m_s
    days = question.waves.damping_days
    return {
        "Conventions": "CF-1.11",
        "title": question.title,
        "summary": " ".join(question.description.split()),
        "scenario": question.name,
        "wind": _wind(question),
        "initial_condition": "at rest before the first time; no wind before it",
        "period_days": question.waves.period_days,
        "drag_m_s": drag,
        "damping_days": float("nan") if days is None else days,
        "step_days": forcing.step / 86400.0,
        "ocean": question.ocean.source,
        "source": f"waveguide {software_version()}",
        "history": f"waveguide response {question.name}",
        "data_sha256": "; ".join(f"{name} {digest}" for name, digest in digests.items()),
        "caution": CAUTION,
    }


def _sha256(path: Path) -> str:
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def _wind(question: WindScenario) -> str:
    """Where the wind comes from, in words."""
    wind = question.wind
    if wind.invented:
        parts = [f"{len(wind.patches)} patch(es)"] if wind.patches else []
        parts += [f"{len(wind.storms)} storm(s), stress by {wind.drag_law}"] if wind.storms else []
        return "invented: " + " and ".join(parts)
    name = wind.record or ", ".join(path.name for path in wind.file or ())
    if wind.stations is not None:
        return f"{wind.quantity} at stations, {name}; {wind.remove} removed"
    gusts = f", {wind.unresolved_m_s:g} m/s unresolved" if wind.unresolved_m_s else ""
    return f"{name}; wind to stress by {wind.drag_law}{gusts}; {wind.remove} removed"
