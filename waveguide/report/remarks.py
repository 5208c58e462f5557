"""What is stored of how far an answer is from what the theory assumes: numbers and cautions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import fields
from typing import Any

from waveguide.propagation.cautions import KIND, Caution
from waveguide.propagation.validity import Validity

_UNKNOWN = Validity(*([float("nan")] * len(fields(Validity))))


def validity_values(validity: Validity | None) -> dict[str, float]:
    """The numbers by the names of :data:`waveguide.schema.VALIDITY`.

    Parameters
    ----------
    validity : Validity or None
        None where there is no answer.

    Returns
    -------
    dict of str to float
    """
    found = validity or _UNKNOWN
    return {
        "frequency_over_f": found.frequency_over_f,
        "coast_radius_radii": found.coast_radius,
        "basin_width_radii": found.basin_width,
        "speed_change": found.speed_change,
        "critical_share": found.critical_share,
        "narrowest_strait_km": found.narrowest_strait / 1e3,
        "northernmost_latitude": found.northernmost,
        "southernmost_latitude": found.southernmost,
        "upper_ocean_share": found.upper_share,
    }


def caution_words(cautions: Sequence[Caution]) -> str:
    """The cautions of one target and mode in one text."""
    return "; ".join(caution.text for caution in cautions)


def remark_rows(target: int, column: int, cautions: Sequence[Caution]) -> list[dict[str, Any]]:
    """The cautions of one target and mode, a row for each.

    Parameters
    ----------
    target, column : int
        Indices along ``target`` and ``mode``.
    cautions : sequence of Caution

    Returns
    -------
    list of dict
        By the names of :data:`waveguide.schema.REMARKS`.
    """
    return [
        {
            "remark_target": target,
            "remark_mode": column,
            "remark_kind": caution.kind,
            "remark_number": caution.number,
            "remark_unit": KIND[caution.kind].unit,
        }
        for caution in cautions
    ]
