"""Colours that mean the same in every figure."""

from __future__ import annotations

MODE_COLOURS = {0: "#3b3b3b", 1: "#1f6fb4", 2: "#e06c00", 3: "#0a8f63"}
"""Of the modes; they stay apart in the common kinds of colour blindness."""

RECORD_COLOURS = ("#5b5b5b", "#a3123f")
"""Of an upstream and a downstream record."""
