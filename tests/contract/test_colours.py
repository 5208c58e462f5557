"""Colours that must be told apart are so with red-green colour blindness too.

A dichromat's view by Viénot, Brettel and Mollon (1999, Color Res. Appl. 24, 243): matrices in
linear RGB, quoted from memory (MEMORY), so the limit is a plain one. Distances are those of CIELAB
(1976): 2.3 is just noticeable; 15 is told at a glance in thin lines and small patches.
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from waveguide.report.colours import FATE_COLOURS, KIND_COLOURS, MODE_COLOURS, RECORD_COLOURS

TOLD_APART = 15.0
SIGHT = {
    "all colours": np.eye(3),
    "no red": np.array(
        [[0.11238, 0.88762, 0.0], [0.11238, 0.88762, 0.0], [0.00401, -0.00401, 1.0]]
    ),
    "no green": np.array(
        [[0.29275, 0.70725, 0.0], [0.29275, 0.70725, 0.0], [-0.02234, 0.02234, 1.0]]
    ),
}
PALETTES = {
    "modes": list(MODE_COLOURS.values()),
    "fates": [*FATE_COLOURS.values(), "#56636d"],  # the page draws what is left in the last one
    "kinds": list(KIND_COLOURS.values()),
    "records": list(RECORD_COLOURS),
}


def linear(colour: str) -> np.ndarray:
    value = np.array([int(colour[i : i + 2], 16) for i in (1, 3, 5)]) / 255.0
    return np.where(value <= 0.04045, value / 12.92, ((value + 0.055) / 1.055) ** 2.4)


def lab(rgb: np.ndarray) -> np.ndarray:
    to_xyz = [[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]]
    xyz = np.array(to_xyz) @ rgb / np.array([0.9505, 1.0, 1.089])
    f = np.where(xyz > (6.0 / 29.0) ** 3, np.cbrt(xyz), xyz * (29.0 / 6.0) ** 2 / 3.0 + 4.0 / 29.0)
    return np.array([116.0 * f[1] - 16.0, 500.0 * (f[0] - f[1]), 200.0 * (f[1] - f[2])])


@pytest.mark.parametrize("sight", SIGHT)
@pytest.mark.parametrize("palette", PALETTES)
def test_colours_are_told_apart(palette, sight):
    seen = {c: lab(np.clip(SIGHT[sight] @ linear(c), 0.0, 1.0)) for c in PALETTES[palette]}
    for one, other in itertools.combinations(seen, 2):
        distance = np.linalg.norm(seen[one] - seen[other])
        assert distance > TOLD_APART, (one, other)


def test_a_known_pair_is_confused_without_red():
    """Dark red and dark grey, which differ by far with all colours, look alike without red."""
    red, grey = linear("#d81159"), linear("#4d4d4d")
    assert np.linalg.norm(lab(red) - lab(grey)) > 60.0
    blind = [lab(np.clip(SIGHT["no red"] @ c, 0.0, 1.0)) for c in (red, grey)]
    assert np.linalg.norm(blind[0] - blind[1]) < 10.0
