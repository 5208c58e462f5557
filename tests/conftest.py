"""Shared by all tests: a small set of arrivals made by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest
import xarray as xr

from waveguide.propagation.cautions import KIND, Caution
from waveguide.schema import ARRIVALS, ARRIVALS_ATTRIBUTES, CAUTION, assemble

# Two targets and one out of reach, two modes. Mode 1 crosses the date line along the equator
# and turns along the coast of South America; the first target has a second route.
ROUTES = [
    # target, mode, kind, via, legs: (kind, [(lon, lat), …], speed m/s)
    (0, 0, "earliest", "the equator", [
        ("attachment", [(165.0, 0.5), (165.0, 0.0)], 2.5),
        ("equator", [(165.0, 0.0), (175.0, 0.0), (-175.0, 0.0), (-120.0, 0.0), (-80.5, 0.0)], 2.5),
        ("coast", [(-80.5, 0.0), (-81.2, -4.6), (-79.0, -8.1), (-77.2, -12.1)], 2.8),
    ]),
    (0, 0, "alternative", "Galápagos", [
        ("equator", [(165.0, 0.0), (-170.0, 0.0), (-90.0, 0.0)], 2.5),
        ("facing coast", [(-90.0, 0.0), (-80.5, -2.0)], 1.5),
        ("coast", [(-80.5, -2.0), (-77.2, -12.1)], 2.8),
    ]),
    (0, 1, "earliest", "the equator", [
        ("equator", [(165.0, 0.0), (-160.0, 0.0), (-80.5, 0.0)], 1.6),
        ("coast", [(-80.5, 0.0), (-81.2, -4.6), (-77.2, -12.1)], 1.9),
    ]),
    (1, 0, "earliest", "the equator", [
        ("equator", [(165.0, 0.0), (-160.0, 0.0), (-80.5, 0.0)], 2.5),
        ("coast", [(-80.5, 0.0), (-78.0, 7.0), (-99.9, 16.8)], 2.7),
    ]),
]  # fmt: skip
FATES = ["Rossby waves", "bottom friction", "interior damping", "scattered", "other ways"]
LOST = ["leg_lost_rossby", "leg_lost_friction", "leg_lost_damping", "leg_lost_scattering",
        "leg_other_ways"]  # fmt: skip
CAUTIONS = {
    (0, 0): [("fast wave", 0.42), ("narrow basin", 2.2)],
    (0, 1): [("fast wave", 0.51)],
    (1, 0): [("fast wave", 0.33), ("curved coast", 0.84)],
}
NAMES = ["Callao", "Acapulco", "=Lima\n$x_1$ \u202eevil"]
PLACES = [(-77.15, -12.05), (-99.92, 16.82), (-60.0, -10.0)]


def _ragged() -> dict[str, list[object]]:
    """Routes, legs and vertices of ROUTES as columns."""
    from waveguide.geodesy import geodesic_length

    table: dict[str, list[object]] = {
        n: [] for n, v in ARRIVALS.items() if v.dims[0] in ("route", "leg", "vertex")
    }
    for route, (target, mode, kind, via, legs) in enumerate(ROUTES):
        distance, time, energy, taken = 0.0, 0.0, 1.0, np.zeros(len(FATES))
        for leg_kind, line, speed in legs:
            leg = len(table["leg_kind"])
            lon, lat = np.transpose(line)
            steps = geodesic_length(lon[:-1], lat[:-1], lon[1:], lat[1:]) / 1e3
            along = distance + np.concatenate([[0.0], np.cumsum(steps)])
            days = time + (along - distance) * 1e3 / speed / 86400.0
            share = 0.0 if leg_kind == "attachment" else energy  # an attachment takes nothing
            lost = share * np.array([0.2, 0.1, 0.0, 0.0, 0.06])
            energy -= lost.sum()
            for column, value in {
                "leg_route": route, "leg_kind": leg_kind, "leg_length_km": steps.sum(),
                "leg_from_longitude": lon[0], "leg_from_latitude": lat[0],
                "leg_to_longitude": lon[-1], "leg_to_latitude": lat[-1],
                "leg_time_days": days[-1] - time, "leg_phase_speed_m_s": speed,
                "leg_amplitude_factor": 0.8, "leg_energy_share": energy,
                **dict(zip(LOST, lost, strict=True)), "leg_critical_period_days": 90.0,
                "leg_quasi_simultaneous": int(leg_kind == "coast" and speed < 2.0),
            }.items():  # fmt: skip
                table[column].append(value)
            for column, values in {
                "vertex_leg": [leg] * len(lon), "vertex_longitude": lon, "vertex_latitude": lat,
                "vertex_distance_km": along, "vertex_time_days": days,
                "vertex_taken": taken + np.linspace(0.0, 1.0, len(lon))[:, None] * lost,
            }.items():  # fmt: skip
                table[column].extend(values)
            distance, time, taken = float(along[-1]), float(days[-1]), taken + lost
        for column, value in {
            "route_target": target, "route_mode": mode, "route_kind": kind, "route_via": via,
            "route_front_time_days": time, "route_amplitude_ratio": 0.8 ** len(legs),
            "route_length_km": distance,
        }.items():  # fmt: skip
            table[column].append(value)
    return table


def _instruments() -> dict[str, list[object]]:
    """The first target is a mooring with two instruments, the lower one on the bottom."""
    return {
        "instrument_target": [0, 0, 0, 0], "instrument_mode": [0, 0, 1, 1],
        "instrument_guide_ratio": [0.6, 0.6, 0.4, 0.4],
        "instrument_depth_m": [100.0, 900.0] * 2, "instrument_offshore_km": [60.0] * 4,
        "instrument_bottom_m": [800.0] * 4,
        "instrument_structure": ["flat bottom", "flat bottom, below the bottom",
                                 "section", "section, below the bottom"],
        "instrument_displacement_m_per_cm": [-1.18, math.nan, -2.05, math.nan],
        "instrument_displacement_lag_degrees": [9.0, math.nan, 0.0, math.nan],
        "instrument_current_cm_s_per_cm": [3.03, math.nan, -2.25, math.nan],
        "instrument_current_lag_degrees": [-41.0, math.nan, 0.0, math.nan],
        "instrument_towards_degrees": [138.0] * 4,
        "instrument_bottom_pressure_cm_per_cm": [0.65, 0.65, -0.24, -0.24],
        "instrument_bottom_pressure_lag_degrees": [9.0, 9.0, 0.0, 0.0],
        "instrument_best_depth_m": [400.0, 400.0, 342.0, 342.0],
    }  # fmt: skip


def _remarks() -> dict[str, list[object]]:
    rows = [(*row, *each) for row, told in CAUTIONS.items() for each in told]
    target, mode, kind, number = (list(column) for column in zip(*rows, strict=True))
    return {
        "remark_target": target, "remark_mode": mode, "remark_kind": kind,
        "remark_number": number, "remark_unit": [KIND[name].unit for name in kind],
    }


def build_arrivals() -> xr.Dataset:
    """Arrivals made by hand: Callao in two modes, Acapulco in the first, an inland target."""
    table = _ragged()
    rows: dict[str, np.ndarray] = {
        name: np.full((3, 2), np.nan)
        for name, variable in ARRIVALS.items()
        if variable.dims == ("target", "mode") and variable.kind == "number"
    }
    status = np.full((3, 2), "off the guide", dtype="<U24")
    status[1, 1] = "no route"
    caution = np.full((3, 2), "", dtype="<U400")
    for (target, mode), told in CAUTIONS.items():
        caution[target, mode] = "; ".join(Caution(*each).text for each in told)
    for route, (target, mode, kind, _, _) in enumerate(ROUTES):
        if kind != "earliest":
            continue
        row = target, mode
        status[row] = "reached"
        rows["front_time_days"][row] = table["route_front_time_days"][route]
        rows["path_length_km"][row] = table["route_length_km"][route]
        front = rows["front_time_days"][row]
        for name, later in (("half_height", 3.0), ("peak", 5.0), ("centroid", 5.5)):
            rows[f"{name}_time_days"][row] = front + later
        rows["peak_ratio"][row] = 0.5
        rows["amplitude_ratio"][row] = table["route_amplitude_ratio"][route]
        rows["mean_speed_m_s"][row] = (
            rows["path_length_km"][row] * 1e3 / rows["front_time_days"][row] / 86400.0
        )
    start = np.datetime64("2031-03-05T00:00:00", "ns")
    known = np.isfinite(rows["front_time_days"])
    delay = np.where(known, rows["front_time_days"], 0.0) * 86400e9
    date = np.where(known, start + delay.astype("timedelta64[ns]"), np.datetime64("NaT"))
    lon, lat = np.transpose(PLACES)
    values = {
        "target": NAMES, "mode": [1, 2], "target_longitude": lon, "target_latitude": lat,
        "status": status, "caution": caution, "front_date": date, **rows,
        "fate_name": FATES,
        **{name: column for name, column in table.items() if name not in ("target", "mode")
           and not name.startswith("target_")},
    }  # fmt: skip
    values |= _instruments() | _remarks()
    time = np.arange(0.0, 120.0, 0.5)
    peak = np.nan_to_num(rows["peak_time_days"])[..., None]
    wave = np.where(peak > 0.0, 0.5 * np.exp(-(((time - peak) / 3.0) ** 2)), 0.0)
    values |= {
        "time": start + (time * 86400e9).astype("timedelta64[ns]"), "time_days": time,
        "source_waveform": np.exp(-(((time - 5.0) / 3.0) ** 2)), "waveform": wave,
        "mode_share": [0.7, 0.3], "waveform_sum": 0.7 * wave[:, 0] + 0.3 * wave[:, 1],
    }  # fmt: skip
    attributes = dict.fromkeys(ARRIVALS_ATTRIBUTES, "") | {
        "Conventions": "CF-1.11",
        "title": "A burst with $dollars$ in its name",
        "scenario": "by_hand",
        "event_name": "burst",
        "event_start": "2031-03-05T00:00:00Z",
        "event_duration_days": 10.0,
        "event_amplitude_m": math.nan,
        "source_longitude": 165.0,
        "source_latitude": 0.5,
        "period_days": 40.0,
        "ocean": "packaged",
        "source": "waveguide 0",
        "caution": CAUTION,
    }
    return assemble(values, attributes)


@pytest.fixture
def printed_figures(monkeypatch):
    """Figures as they are saved, each held to what a journal's page asks for."""
    from matplotlib.figure import Figure
    from matplotlib.text import Text

    saved: list[str] = []
    save = Figure.savefig

    def look(figure, path, **options):
        save(figure, path, **options)
        saved.append(path.name)
        assert figure.get_figwidth() * 25.4 == pytest.approx(170.0)
        said = [t for t in figure.findobj(Text) if t.get_text().strip() and t.get_visible()]
        assert min(text.get_fontsize() for text in said) >= 7.0
        renderer = figure.canvas.get_renderer()
        drawn = figure.get_tightbbox(renderer)  # inches
        assert -0.02 < drawn.x0 < drawn.x1 < figure.get_figwidth() + 0.02, drawn
        for axes in figure.axes:
            box = axes.get_window_extent(renderer)
            assert min(box.width, box.height) > 20.0  # pixels: nothing has collapsed

    monkeypatch.setattr(Figure, "savefig", look)
    return saved


@pytest.fixture
def arrivals() -> xr.Dataset:
    return build_arrivals()
