"""Colours that mean the same in every figure, and stay apart in red-green colour blindness."""

from __future__ import annotations

MODE_COLOURS = {0: "#3b3b3b", 1: "#1f6fb4", 2: "#e06c00", 3: "#0a8f63"}
"""Of the modes."""

RECORD_COLOURS = ("#8a8a8a", "#a3123f")
"""Of an upstream and a downstream record."""

KIND_COLOURS = {
    "coast": "#4d4d4d", "equator": "#4fbcc4", "strait": "#c2358f", "facing coast": "#f2a104",
    "opening": "#5e8f2f",
}
"""Of the kinds of legs."""

FATE_COLOURS = {
    "Rossby waves": "#8fc1e8", "bottom friction": "#b9822f", "interior damping": "#9a9a9a",
    "scattered": "#6f4a94", "other ways": "#f3e08c",
}
"""Of what becomes of the energy that does not arrive."""
