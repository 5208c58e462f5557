"""How the waveform at a target answers to a slower ocean and to a longer event.

The table holds figures of the waveform for a grid of two numbers: how much later the front comes
(its travel time times 1 + δ), and how much longer the event lasts. Between them it is linear.

Why one δ is enough for phase speed, mean flow and length: along a coast the exponent ∫l ds is a
function of κ = ω/(c + U) and Γ only (:mod:`waveguide.propagation.dispersion`), both times the
length. A slowness larger by the share δ all along the way therefore acts like a frequency larger
by δ: G(ω) becomes G(ω(1 + δ)). So does a coast longer by δ, since Γ, a change of ln|f| per length,
becomes smaller by as much. On the equator the phase is ωs/c, and the same holds. It does not hold
at junctions, where ω/√c counts, at gaps and for the amplitudes F, which keep their value here; and
an error that is not the same all along the way is taken as if it were. The tests measure both
against exact recomputation.

Waveforms are synthesised in the retarded time t − (1 + δ) front, so that no window is too short.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import RegularGridInterpolator

from waveguide.propagation.sources import SourceFunction
from waveguide.propagation.transfer import RouteTransfer
from waveguide.propagation.waveform import (
    Spectrum,
    arrival_times,
    source_spectrum,
    synthesise,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

FIGURES = ("half height", "peak", "fall", "log height")
"""Columns of a table: times after the front (s) when sea level first reaches half of its peak,
when it peaks and when it has fallen to half again, and ln of peak over that of the source."""

_BEFORE = 0.25  # share of the period that is kept for what comes before the front


@dataclass(frozen=True)
class WaveTable:
    """Figures of a waveform by delay and duration.

    Attributes
    ----------
    stretch : ndarray, shape (p,)
        δ, rising.
    duration : ndarray, shape (q,)
        Factor of the duration, rising; times grow almost linearly with it.
    figures : ndarray, shape (p, q, 4)
        `FIGURES`.
    """

    stretch: Array
    duration: Array
    figures: Array

    def at(self, stretch: Array, duration: Array) -> Array:
        """Figures of members, shape (n, 4); beyond the table those of its edge."""
        axes = [self.stretch, self.duration]
        points = [
            np.clip(values, axis[0], axis[-1])
            for values, axis in zip((stretch, duration), axes, strict=True)
        ]
        return np.asarray(RegularGridInterpolator(axes, self.figures)(np.column_stack(points)))


def wave_table(
    routes: Sequence[RouteTransfer], reference: float, source: SourceFunction, step: float,
    window: float, stretch: Array, duration: Array,
) -> WaveTable:
    """Tabulate the figures of the waveform at one target.

    Parameters
    ----------
    routes : sequence of RouteTransfer
        Those that add up, with one set of frequencies.
    reference : float
        Travel time that retarded time refers to (s): the front of the headline route.
    source : SourceFunction
    step, window : float
        Time step and length of the waveforms (s).
    stretch, duration : ndarray, shape (p,) and (q,)
        As in `WaveTable`; at least two values each.

    Returns
    -------
    WaveTable
    """
    figures = np.empty((stretch.size, duration.size, len(FIGURES)))
    logs = [_retarded_log(route) for route in routes]
    for column, factor in enumerate(duration):
        longer = lasting_longer(source, float(factor))
        spectrum = source_spectrum(longer, min(step, longer.finest), _period(longer, window))
        top = float(np.abs(longer.values(np.arange(0.0, window, spectrum.step))).max())
        for row, delta in enumerate(stretch):
            response = _stretched(routes, logs, reference, spectrum.omega, float(delta))
            figures[row, column] = _figures(spectrum, response, source.lasting, top)
    return WaveTable(stretch, duration, figures)


def lasting_longer(source: SourceFunction, factor: float) -> SourceFunction:
    """The same event with its course in time drawn out by a factor."""
    return replace(
        source,
        values=lambda time: source.values(time / factor),
        duration=source.duration * factor,
        begin=source.begin * factor,
        finest=source.finest * factor,
    )


def _period(source: SourceFunction, window: float) -> float:
    """Period of the transform (s), as `waveguide.propagation.waveform` begins with."""
    if source.lasting:
        return 2.0 * (window + 2.0 * source.duration)
    return window + max(0.5 * window, 4.0 * source.duration)


def _retarded_log(route: RouteTransfer) -> ComplexArray:
    """Ln of a transfer function without the delay of its front; varies slowly with ω."""
    retarded = route.response * np.exp(-1j * route.omega * route.front_time)
    modulus = np.maximum(np.abs(retarded), 1e-300)
    return np.asarray(np.log(modulus) + 1j * np.unwrap(np.angle(retarded)))


def _stretched(
    routes: Sequence[RouteTransfer], logs: Sequence[ComplexArray], reference: float,
    omega: Array, delta: float,
) -> ComplexArray:
    """Sum of G(ω(1 + δ)) over the routes, without the delay of the reference."""
    higher = omega * (1.0 + delta)
    total = np.zeros(omega.size, complex)
    for route, log in zip(routes, logs, strict=True):
        real, imaginary = (np.interp(higher, route.omega, part) for part in (log.real, log.imag))
        later = higher * (route.front_time - reference)
        total += np.exp(real + 1j * (imaginary + later))
    return total


def _figures(spectrum: Spectrum, response: ComplexArray, lasting: bool, top: float) -> Array:
    """`FIGURES` of one waveform; NaN where nothing arrives."""
    early = int(_BEFORE * spectrum.times)
    level = np.roll(synthesise(spectrum, [response])[0], early)
    if lasting:  # the other half of the period lets the step die away again
        level = level[: spectrum.times // 2 + early // 2]
    time = (np.arange(level.size) - early) * spectrum.step
    times = arrival_times(time, level, lasting)
    top_at = int(np.argmax(np.abs(level)))
    height = float(np.abs(level[top_at]))
    if not height > 0.0:
        return np.full(len(FIGURES), np.nan)
    fall = np.nan if lasting else _fall(time, level * np.sign(level[top_at]), top_at)
    return np.array([times.half_height, times.peak, fall, np.log(height / top)])


def _fall(time: Array, level: Array, top: int) -> float:
    """When a level first falls to half of its peak after it, linear between values."""
    height = level[top]
    below = np.flatnonzero(level[top:] < 0.5 * height)
    if not below.size:
        return float(time[-1])
    at = top + int(below[0])
    share = (level[at - 1] - 0.5 * height) / (level[at - 1] - level[at])
    return float(time[at - 1] + share * (time[at] - time[at - 1]))
