"""Placing the labels of a map so that they cover neither each other nor the routes."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.text import Annotation

    from waveguide.geodesy import Array

Box = tuple[float, float, float, float]
"""Left, bottom, right, top, in pixels."""

_DIRECTIONS = np.radians([0.0, 180.0, 40.0, 140.0, -40.0, -140.0, 90.0, -90.0])
"""Where a label may stand, seen from its point; the sooner the better."""


@dataclass
class LabelPlacer:
    """Remembers what is drawn and finds room for each further label.

    Parameters
    ----------
    axes : Axes
        With its final limits and size.
    lines : ndarray, shape (n, 2)
        Points along the routes (pixels), close enough to stand for the lines.
    """

    axes: Axes
    lines: Array
    taken: list[Box] = field(default_factory=list)

    def keep_clear(self, x: float, y: float, radius: float) -> None:
        """Keep labels off a marker at map coordinates, of a radius in points."""
        left, bottom = self._pixels(x, y) - self._points(radius)
        right, top = self._pixels(x, y) + self._points(radius)
        self.taken.append((left, bottom, right, top))

    def keep_texts_clear(self) -> None:
        """Keep labels off the texts that are on the map already."""
        for text in self.axes.texts:
            extent = text.get_window_extent(self._renderer())
            self.taken.append((extent.x0, extent.y0, extent.x1, extent.y1))

    def place(
        self, text: str, x: float, y: float, reach: tuple[float, ...], needed: bool, **style: Any
    ) -> bool:
        """Write a label near a point; where there is no room, leave it out unless it is needed.

        Parameters
        ----------
        text : str
        x, y : float
            Map coordinates of the point.
        reach : tuple of float
            Distances from the point to try (points), the nearest first.
        needed : bool
            Written in the least bad place, rather than left out.
        **style
            Passed to the text.

        Returns
        -------
        bool
            Whether it was written.
        """
        note = self._note(text, x, y, style)
        extent = note.get_window_extent(self._renderer())
        size = np.array([extent.width, extent.height])
        offers = self._offers(self._pixels(x, y), size, reach)
        cost, best, far = min(offers, key=lambda offer: offer[0])
        if cost >= 100.0 and not needed:
            note.remove()
            return False
        self.taken.append(best)
        corner = (np.array(best[:2]) - self._pixels(x, y)) / self._points(1.0)
        note.set_position((float(corner[0]), float(corner[1])))
        if not far and note.arrow_patch is not None:
            note.arrow_patch.set_visible(False)
        return True

    def _note(self, text: str, x: float, y: float, style: dict[str, Any]) -> Annotation:
        arrow = {"arrowstyle": "-", "color": "#777777", "linewidth": 0.5, "shrinkA": 0}
        return self.axes.annotate(
            text,
            (x, y),
            xytext=(0.0, 0.0),
            textcoords="offset points",
            ha="left",
            va="bottom",
            parse_math=False,
            arrowprops=arrow,
            annotation_clip=False,
            **style,
        )

    def _offers(
        self, point: Array, size: Array, reach: tuple[float, ...]
    ) -> list[tuple[float, Box, bool]]:
        """Cost, box and whether it is far off, for each place a label may take."""
        offers = []
        for step, distance in enumerate(reach):
            for rank, angle in enumerate(_DIRECTIONS):
                way = np.array([np.cos(angle), np.sin(angle)])
                middle = point + way * (self._points(distance) + size / 2.0)
                left, bottom = middle - size / 2.0
                right, top = middle + size / 2.0
                box = (float(left), float(bottom), float(right), float(top))
                offers.append((self._cost(box) + rank * 0.2 + step * 3.0, box, step > 0))
        return offers

    def _cost(self, box: Box) -> float:
        """100 and more for what must not be: off the map, or on another label or marker."""
        frame = self.axes.get_window_extent()
        outside = box[0] < frame.x0 or box[1] < frame.y0 or box[2] > frame.x1 or box[3] > frame.y1
        overlaps = sum(
            box[0] < right and box[2] > left and box[1] < top and box[3] > bottom
            for left, bottom, right, top in self.taken
        )
        on_line = np.count_nonzero(
            (self.lines > np.array(box[:2])).all(axis=1)
            & (self.lines < np.array(box[2:])).all(axis=1)
        )
        return float(300.0 * outside + 100.0 * overlaps + min(2 * on_line, 80))

    def _renderer(self) -> Any:
        return self.axes.figure.canvas.get_renderer()  # type: ignore[attr-defined]

    def _pixels(self, x: float, y: float) -> Array:
        return np.asarray(self.axes.transData.transform((x, y)), float)

    def _points(self, number: float) -> float:
        return number * float(self.axes.figure.dpi) / 72.0
