"""Colours that mean the same in every figure."""

from __future__ import annotations

MODE_COLOURS = {0: "#3b3b3b", 1: "#1f6fb4", 2: "#e06c00", 3: "#0a8f63"}
"""Of the modes; they stay apart in the common kinds of colour blindness."""

RECORD_COLOURS = ("#5b5b5b", "#a3123f")
"""Of an upstream and a downstream record."""

KIND_COLOURS = {
    "coast": "#4d4d4d", "equator": "#4fbcc4", "strait": "#d81159", "facing coast": "#f2a104",
    "opening": "#76b041",
}
"""Of the kinds of legs."""

FATE_COLOURS = {
    "Rossby waves": "#9cc5e4", "bottom friction": "#c9a66b", "interior damping": "#b5b5b5",
    "scattered": "#cbb0de", "other ways": "#f1e3a4",
}
"""Of what becomes of the energy that does not arrive."""
