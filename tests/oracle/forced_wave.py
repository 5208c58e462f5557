"""Independent solutions of the wind-forced problem, for tests only.

`integrate_guide` solves the one-dimensional equation along a guide by finite differences and
Runge–Kutta steps; it shares nothing with the sum over delays. `shallow_water_wind` solves the
linear shallow-water equations in two dimensions, so that it knows nothing of guides and modes.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np

DENSITY = 1025.0
GRAVITY = 9.81


def integrate_guide(s, speed, growth, decay, source, times, substeps=4):
    """φ(s, t) of (1/c) φ_t + φ_s − growth φ + decay φ = source(s, t), at rest before t = 0.

    Third-order upwind differences in s on a uniform grid, classical Runge–Kutta in t.
    `speed`, `growth` and `decay` are arrays over s; `source` a function of t.
    """
    ds = s[1] - s[0]

    def rate(phi, t):
        slope = np.zeros_like(phi)
        slope[2:-1] = (2 * phi[3:] + 3 * phi[2:-1] - 6 * phi[1:-2] + phi[:-3]) / (6 * ds)
        slope[1] = (phi[2] - phi[0]) / (2 * ds)
        slope[-1] = (3 * phi[-1] - 4 * phi[-2] + phi[-3]) / (2 * ds)
        change = speed * (source(t) - slope + (growth - decay) * phi)
        change[0] = 0.0  # nothing comes in
        return change

    phi = np.zeros_like(s)
    result = [phi]
    for begin, end in pairwise(times):
        h = (end - begin) / substeps
        for k in range(substeps):
            t = begin + k * h
            k1 = rate(phi, t)
            k2 = rate(phi + 0.5 * h * k1, t + 0.5 * h)
            k3 = rate(phi + 0.5 * h * k2, t + 0.5 * h)
            k4 = rate(phi + h * k3, t + h)
            phi = phi + h / 6.0 * (k1 + 2 * k2 + 2 * k3 + k4)
        result.append(phi)
    return np.array(result)


def shallow_water_wind(
    size, cells, coriolis, depth, gravity, stress, duration, step, damping=0.0,
    sponges=(True, True),
):
    """Surface elevation (nt, ny, nx) of a rotating layer under wind, at rest before t = 0.

    An Arakawa C grid, closed on all sides, with sponges at those ends in x that `sponges` names;
    forward–backward steps, the Coriolis terms alternating. `coriolis(y)` is f (1/s),
    `stress(x, y, t)` the x-component (Pa) at u points.
    """
    (lx, ly), (nx, ny) = size, cells
    dx, dy = lx / nx, ly / ny
    x_u, y_c = np.arange(nx + 1) * dx, (np.arange(ny) + 0.5) * dy
    y_v = np.arange(ny + 1) * dy
    f_u, f_v = coriolis(y_c)[:, None], coriolis(y_v)[1:-1, None]
    u, v, eta = np.zeros((ny, nx + 1)), np.zeros((ny + 1, nx)), np.zeros((ny, nx))
    edge = 10
    sponge = np.zeros(nx)
    layer = 0.2 / step * (1 - np.arange(edge) / edge) ** 3
    sponge[:edge] = layer if sponges[0] else 0.0
    sponge[-edge:] = layer[::-1] if sponges[1] else 0.0
    rub_c, rub_u = sponge + damping, np.interp(x_u, (np.arange(nx) + 0.5) * dx, sponge) + damping
    kept = []

    def push_u(t):
        v_at_u = np.zeros_like(u)
        v_c = 0.5 * (v[:-1] + v[1:])
        v_at_u[:, 1:-1] = 0.5 * (v_c[:, :-1] + v_c[:, 1:])
        slope = np.zeros_like(u)
        slope[:, 1:-1] = np.diff(eta, axis=1) / dx
        wind = stress(x_u[None, :], y_c[:, None], t) / (DENSITY * depth)
        u[:] += step * (f_u * v_at_u - gravity * slope + wind - rub_u * u)
        u[:, [0, -1]] = 0.0

    def push_v():
        u_c = 0.5 * (u[:, :-1] + u[:, 1:])
        u_at_v = 0.5 * (u_c[:-1] + u_c[1:])
        v[1:-1] += step * (-f_v * u_at_v - gravity * np.diff(eta, axis=0) / dy - rub_c * v[1:-1])

    for k in range(round(duration / step)):
        kept.append(eta.copy())
        eta -= step * (depth * (np.diff(u, axis=1) / dx + np.diff(v, axis=0) / dy) + rub_c * eta)
        if k % 2:
            push_v()
            push_u((k + 0.5) * step)
        else:
            push_u((k + 0.5) * step)
            push_v()
    return np.array(kept)
