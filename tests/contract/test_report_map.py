"""The map: a view that cuts no route, and labels that cover nothing."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from waveguide.report.map import draw_map
from waveguide.report.map_view import choose_view, extent


def view_of(lon, lat):
    return choose_view(np.asarray(lon, float), np.asarray(lat, float))


@pytest.mark.parametrize(
    ("lon", "lat", "middle", "name"),
    [
        ([140.0, -80.0], [0.0, -30.0], -150.0, "merc"),
        ([-35.0, 10.0], [-8.0, 40.0], -12.5, "merc"),
        ([170.0, -160.0], [20.0, 70.0], -175.0, "mill"),
        ([60.0, 70.0], [20.0, 30.0], 65.0, "merc"),
    ],
)
def test_the_middle_stands_opposite_the_widest_gap(lon, lat, middle, name):
    view = view_of(lon, lat)
    assert view.middle == pytest.approx(middle)
    assert (view.pole, view.name) == (0, name)


def test_a_ring_round_the_pole_is_seen_from_above_it():
    lon = np.arange(-180.0, 180.0, 10.0)
    view = view_of(lon, np.full(lon.shape, -67.0))
    assert view.pole == -1
    x, y = view.place(lon, np.full(lon.shape, -67.0))
    assert np.ptp(np.hypot(x, y)) < 1.0  # m
    x0, x1, y0, y1 = extent(view, x, y)
    assert x0 < x.min() < x.max() < x1
    assert y0 < y.min() < y.max() < y1


def test_north_and_south_are_upright():
    for lat in (60.0, -60.0):
        view = view_of([10.0, 100.0, -170.0, -80.0], [lat] * 4)
        assert view.pole == np.sign(lat)
    view = view_of([10.0, 20.0], [-5.0, 5.0])
    x, y = view.place(np.array([10.0, 20.0]), np.array([-5.0, 5.0]))
    assert x[0] < x[1]
    assert y[0] < y[1]


@pytest.fixture(scope="module")
def figure():
    import importlib.util
    from pathlib import Path

    path = Path(__file__).parents[1] / "conftest.py"
    spec = importlib.util.spec_from_file_location("arrivals_by_hand", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    figure = draw_map(module.build_arrivals())
    figure.draw_without_rendering()
    return figure


def texts(figure):
    (axes,) = figure.axes
    return [text for text in axes.texts if text.get_text()]


def test_the_map_names_the_source_and_every_target(figure):
    written = [text.get_text() for text in texts(figure)]
    for name in ("burst", "Callao", "Acapulco", r"=Lima\x0a$x_1$ \u202eevil"):
        assert written.count(name) == 1
    assert "20 d" in written
    (title, *_) = [text.get_text() for text in figure.texts]
    assert title == "A burst with $dollars$ in its name"


def test_labels_do_not_cover_each_other(figure):
    renderer = figure.canvas.get_renderer()
    # The text alone: an annotation's own extent holds the line that leads to its point.
    boxes = [text.get_bbox_patch() or _text_box(text, renderer) for text in texts(figure)]
    for one, other in itertools.combinations(boxes, 2):
        assert not one.overlaps(other)
    (axes,) = figure.axes
    frame = axes.get_window_extent()
    for box in boxes:
        assert frame.x0 <= box.x0 < box.x1 <= frame.x1
        assert frame.y0 <= box.y0 < box.y1 <= frame.y1


def _text_box(note, renderer):
    from matplotlib.text import Text

    note.update_positions(renderer)
    return Text.get_window_extent(note, renderer)


def test_the_legend_lies_outside_the_map(figure):
    (axes,) = figure.axes
    (legend,) = figure.legends
    box = legend.get_window_extent(figure.canvas.get_renderer())
    assert not box.overlaps(axes.get_window_extent())
    assert {text.get_text() for text in legend.get_texts()} >= {"mode 1", "mode 2", "event"}


def test_the_map_is_fit_for_print(figure):
    from matplotlib.text import Text

    assert figure.get_figwidth() * 25.4 == pytest.approx(170.0)
    assert min(t.get_fontsize() for t in figure.findobj(Text) if t.get_text()) >= 7.0
    (legend,) = figure.legends
    box = legend.get_window_extent(figure.canvas.get_renderer())
    assert 0.0 <= box.x0 < box.x1 <= figure.bbox.x1


def test_routes_are_drawn_without_running_across_the_map(figure):
    (axes,) = figure.axes
    wide = np.ptp(axes.get_xlim())
    lines = [line for line in axes.lines if len(line.get_xdata()) > 1]
    assert lines
    for line in lines:
        assert np.abs(np.diff(line.get_xdata())).max() < wide / 10.0
