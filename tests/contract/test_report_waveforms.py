"""Waveforms, distance–time diagrams and budgets as files: what is in them, and that it adds up."""

from __future__ import annotations

import csv
import math

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.report.budget import LOSSES, budget_line, budget_text, write_budget
from waveguide.report.distance_time import draw_distance_time, spread, write_distance_time
from waveguide.report.document import document
from waveguide.report.figures import SMALL
from waveguide.report.fronts import front_of
from waveguide.report.table import table
from waveguide.report.text import columns
from waveguide.report.waveforms import draw_waveforms, sea_level_unit, write_waveforms
from waveguide.report.ways import guided_legs, ways


def rows_of(path):
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def known(arrivals):
    return arrivals.assign_attrs(event_amplitude_m=0.2)


def texts(figure):
    found = [text for axes in figure.axes for text in (axes.title, axes._left_title)]
    found += [*figure.texts, *(t for axes in figure.axes for t in axes.texts)]
    found += [text for legend in figure.legends for text in legend.get_texts()]
    for axes in figure.axes:
        found += [axes.xaxis.label, axes.yaxis.label, *axes.get_xticklabels()]
    return [text for text in found if text.get_text()]


def overlapping(figure):
    """Pairs of texts drawn over each other."""
    figure.canvas.draw()  # gives the texts their places
    renderer = figure.canvas.get_renderer()
    boxes = [(t.get_text(), t.get_window_extent(renderer)) for t in texts(figure)]
    return [
        (a, b) for i, (a, one) in enumerate(boxes) for b, other in boxes[:i]
        if one.shrunk(0.9, 0.8).overlaps(other.shrunk(0.9, 0.8))
    ]  # fmt: skip


def test_waveforms_as_a_table(arrivals, tmp_path):
    write_waveforms(known(arrivals), tmp_path)
    assert {"waveforms.csv", "waveforms.png", "waveforms.pdf"} == {
        path.name for path in tmp_path.iterdir()
    }
    rows = rows_of(tmp_path / "waveforms.csv")
    names = list(rows[0])
    assert names[:5] == ["time_days", "date", "source (m)", "Callao mode 1 (m)",
                         "Callao mode 2 (m)"]  # fmt: skip
    assert names[5] == "Callao sum = 0.700 x mode 1 + 0.300 x mode 2 (m)"
    assert len(names) == 3 + 3 * 3
    assert len(rows) == arrivals.sizes["time"]
    at = int(np.argmax(arrivals["waveform"].values[0, 0]))
    assert float(rows[at]["Callao mode 1 (m)"]) == pytest.approx(0.1, rel=0.01)  # half of 0.2 m
    assert rows[2]["date"] == "2031-03-06T00:00:00Z"
    total = np.array([[float(row[name]) for name in names[3:6]] for row in rows])
    assert_allclose(total[:, 2], total[:, :2] @ [0.7, 0.3], atol=2e-6)  # six decimals are written


def test_a_lowering_is_negative_numbers_not_texts(arrivals, tmp_path):
    write_waveforms(arrivals.assign_attrs(event_amplitude_m=-0.2), tmp_path)
    values = [row["source (m)"] for row in rows_of(tmp_path / "waveforms.csv")]
    assert min(map(float, values)) == pytest.approx(-0.2)


def test_unit_of_an_unknown_amplitude_is_the_ratio(arrivals):
    assert sea_level_unit(arrivals) == ("ratio", 1.0)
    assert sea_level_unit(known(arrivals)) == ("m", 0.2)


def test_waveform_panels(arrivals):
    figure = draw_waveforms(arrivals)
    assert [axes.get_title("left") for axes in figure.axes] == ["burst", "Callao", "Acapulco"]
    callao = figure.axes[1]
    assert callao.get_ylabel() == "Ratio"
    modes = [line for line in callao.lines if len(line.get_xdata()) == arrivals.sizes["time"]]
    first, second, total = (np.asarray(line.get_ydata()) for line in modes)
    assert_allclose(first + second, total, atol=1e-12)  # the lines of a panel add up to its sum
    marks = {line.get_marker(): float(np.ravel(line.get_xdata())[0]) for line in callao.lines
             if line.get_color() != "none" and line.get_marker() == "|"}  # fmt: skip
    assert marks["|"] == pytest.approx(float(arrivals["front_time_days"][0, 1]))
    legend = [text.get_text() for text in figure.legends[0].get_texts()]
    assert legend == ["mode 1, 70 % of the source", "mode 2, 30 % of the source", "sum", "front",
                      "half-height", "peak"]  # fmt: skip


@pytest.mark.parametrize("draw", [draw_waveforms, draw_distance_time])
def test_figures_are_fit_for_print(arrivals, draw):
    figure = draw(known(arrivals))
    assert figure.get_figwidth() * 25.4 == pytest.approx(170.0)
    assert min(text.get_fontsize() for text in texts(figure)) >= SMALL == 7.0
    assert overlapping(figure) == []
    # nothing is drawn over the legend
    renderer = figure.canvas.get_renderer()
    legend = figure.legends[0].get_window_extent(renderer)
    assert not any(legend.overlaps(axes.get_tightbbox(renderer)) for axes in figure.axes)


def test_small_sea_level_is_told_in_centimetres(arrivals):
    figure = draw_waveforms(arrivals.assign_attrs(event_amplitude_m=0.12))
    labels = [axes.get_ylabel() for axes in figure.axes]
    assert labels == ["Sea level (m)", "Sea level (cm)", "Sea level (cm)"]


def test_ways_put_targets_along_one_route_together(arrivals):
    found = ways(arrivals)
    # headline routes only; those made by hand have vertices of their own, so each is a way
    assert [way.routes for way in found] == [[0], [2], [3]]


def test_a_route_that_begins_another_joins_its_way(arrivals):
    longitude = arrivals["vertex_longitude"].values.copy()
    latitude = arrivals["vertex_latitude"].values.copy()
    first, last = (np.flatnonzero(arrivals["vertex_leg"].values == leg) for leg in (6, 8))
    # Acapulco's route takes Callao's first vertices in mode 2: equator to (-160, 0) and on
    longitude[last], latitude[last] = longitude[first], latitude[first]
    moved = arrivals.assign(
        vertex_longitude=arrivals["vertex_longitude"].copy(data=longitude),
        vertex_latitude=arrivals["vertex_latitude"].copy(data=latitude),
    )
    kept = moved.isel(leg=slice(0, 9), vertex=slice(0, int(last[-1]) + 1))
    assert [way.routes for way in ways(kept)] == [[0], [2, 3]]


def test_fronts_know_where_the_coast_is_below_its_critical_frequency(arrivals):
    front = front_of(arrivals, 0)
    assert front.distance.size == front.time.size == front.below.size
    assert np.all(np.diff(front.time) >= 0.0)
    assert not front.below[:5].any()  # the equator has no critical frequency
    assert front.below[5:].any()  # the coast close to it has, for 40 days
    # DERIVED: tan(latitude) = cT/(4πa) for 2.8 m/s and 40 days
    wanted = math.degrees(math.atan(2.8 * 40 * 86400 / (4 * math.pi * 6.371e6)))
    ((place, latitude),) = front.critical
    assert latitude == pytest.approx(-wanted, rel=0.01)  # in the southern hemisphere
    assert front.distance[5] < place < front.distance[-1]


def test_distance_time_rows(arrivals, tmp_path):
    figure = draw_distance_time(arrivals)
    titles = [axes.get_title("left") for axes in figure.axes if axes.get_title("left")]
    assert titles == ["Towards Callao", "Towards Callao", "Towards Acapulco"]
    names = {text.get_text() for axes in figure.axes for text in axes.texts}
    assert {"Callao", "Acapulco"} <= names
    labels = {text.get_text() for text in figure.legends[0].get_texts()}
    assert {"mode 1", "mode 2", "peak", "coast", "equator", "energy: Rossby waves",
            "below critical frequency"} <= labels  # fmt: skip
    assert "energy: scattered" not in labels  # nothing is
    write_distance_time(arrivals, tmp_path)
    assert {path.name for path in tmp_path.iterdir()} == {"distance_time.png", "distance_time.pdf"}


def test_names_are_moved_apart_as_little_as_may_be():
    moved = spread([5.0, 0.0, 5.1, 5.2], 1.0)
    assert_allclose(moved, [4.1, 0.0, 5.1, 6.1])
    assert_allclose(spread([0.0, 0.2, 5.0], 1.0, 0.5), [0.5, 1.5, 5.0])
    assert spread([], 1.0) == []


def test_budget_adds_up_to_one_on_every_route(arrivals, tmp_path):
    write_budget(arrivals, tmp_path)
    rows = rows_of(tmp_path / "budget.csv")
    wholes = [row for row in rows if row["leg"] == "all"]
    assert len(wholes) == arrivals.sizes["route"]
    fates = ["rossby_waves", "bottom_friction", "damping", "scattered", "other_ways"]
    for row in rows:
        end = float(row["arrives"]) + sum(float(row[fate]) for fate in fates)
        assert end == pytest.approx(float(row["sets_out"]), abs=1e-8)
    assert [row["kind"] for row in rows[:3]] == ["equator", "coast", ""]  # no attachments
    # attachments of the arrivals made by hand take energy: theirs is not that of the guide
    assert rows[1]["quasi_simultaneous"] == "no"
    assert {row["quasi_simultaneous"] for row in rows} == {"no", "yes", ""}


def test_budget_as_text(arrivals):
    text = budget_text(arrivals)
    assert max(map(columns, text.splitlines())) <= 120
    heading = text.splitlines()[1].split()
    assert "Rossby" in heading
    assert "Damping" not in heading  # nothing is damped
    assert "coast, at once" in text
    assert budget_text(arrivals.isel(target=[2], route=[], leg=[], vertex=[])) == ""
    line = budget_line(arrivals, 2)
    share = float(arrivals["leg_energy_share"].values[guided_legs(arrivals, 2)[-1]])
    assert line.startswith(f"energy: {100 * share:.0f}\u00a0% arrives, ")
    assert line.index("Rossby waves") < line.index("bottom friction")  # the largest part first
    assert set(LOSSES.values()) >= {"Rossby waves", "scattered"}


def test_budget_is_printed_only_when_asked_for(arrivals):
    assert "Energy on every leg" not in table(arrivals)
    assert "Energy on every leg" in table(arrivals, budget=True)
    assert "energy: " in table(arrivals)  # a line for each route always


def test_quasi_simultaneous_legs_have_no_speed_to_speak_of(arrivals):
    text = table(arrivals)
    assert "quasi-simultaneous, critical period 90 days" in " ".join(text.split())
    assert " at once " not in text  # the coast is the shorter part of every way
    coast = arrivals["leg_quasi_simultaneous"].copy(
        data=np.ones(arrivals.sizes["leg"], dtype=np.int64)
    )
    all_of_it = table(arrivals.assign(leg_quasi_simultaneous=coast))
    row = next(line for line in all_of_it.splitlines() if line.startswith("Callao"))
    assert " at once " in row
    assert f"{float(arrivals['mean_speed_m_s'][0, 0]):.2f}  " not in row
    assert "at once: most of the way is quasi-simultaneous" in all_of_it


def test_the_document_has_the_budget_of_every_leg(arrivals):
    legs = document(arrivals)["arrivals"][1]["legs"]
    assert legs[-1]["quasi_simultaneous"] is True
    assert legs[-1]["critical_period_days"] == 90.0
    spent = sum(leg[key] for leg in legs for key in (
        "lost_rossby", "lost_friction", "lost_damping", "lost_scattering", "other_ways"
    ))  # fmt: skip
    assert spent + legs[-1]["energy_share"] == pytest.approx(1.0)
