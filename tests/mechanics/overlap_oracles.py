"""Independent solutions for bonded overlaps: displacements by scipy's boundary-value solver, nothing eliminated."""

from __future__ import annotations

import numpy as np
from scipy.integrate import solve_bvp


def two_beams(length, upper, lower, ks, kp, ends, *, mismatch=0.0, points=600, guided=False):
    """Flow and opening force along the bond of two beams, from their own twelve equations in displacements.

    ``upper`` and ``lower`` are (EA, EI, arm); ``ends`` the (N, V, M) of the upper beam at left and right, then of the
    lower one at left. The lower beam is held at its left end; what acts on its right end follows from equilibrium.
    ``guided``: the upper beam's right end cannot turn, its moment there is not given; the lower beam is then rigid in
    bending and only stretches.
    """
    (EA1, EI1, c1), (EA2, EI2, c2) = upper, lower
    left1, right1, left2 = ends
    force = max(abs(v) for v in (left1[0], right1[0], left2[0], 1e-9)) + abs(mismatch) * EA1 * 1e-2
    c = max(c1, c2)
    scale = np.array([force * length / EA1, force, c, c / length, force * c, force * c / length] * 2)
    scale[[2, 8]] = force * c * length**2 / EI1
    scale[[3, 9]] = force * c * length / EI1
    scale[6] = scale[0]

    def bond(y):
        s = y[0] - y[6] + c1 * y[3] + c2 * y[9]
        return ks * s, kp * (y[2] - y[8])

    def equations(x, z):
        y = z * scale[:, None]
        q, pull = bond(y)
        rows = [
            y[1] / EA1 + mismatch,
            q,
            y[3],
            y[4] / EI1,
            y[5] + c1 * q,
            -pull,
            y[7] / EA2,
            -q,
            y[9],
            y[10] / EI2 if np.isfinite(EI2) else 0 * q,
            y[11] + c2 * q,
            pull,
        ]
        return length * np.vstack(rows) / scale[:, None]

    def boundary(za, zb):
        a, b = za * scale, zb * scale
        last = b[3] / scale[3] if guided else (b[4] - right1[2]) / scale[4]
        return np.array(
            [
                (a[1] - left1[0]) / scale[1],
                (a[5] - left1[1]) / scale[5],
                (a[4] - left1[2]) / scale[4],
                (b[1] - right1[0]) / scale[1],
                (b[5] - right1[1]) / scale[5],
                last,
                a[6] / scale[6],
                a[8] / scale[8],
                a[9] / scale[9],
                (a[7] - left2[0]) / scale[7],
                (a[11] - left2[1]) / scale[11],
                (a[10] - left2[2]) / scale[10],
            ]
        )

    t = np.linspace(0, 1, points)
    x = (1 - np.cos(np.pi * t)) / 2
    start = np.zeros((12, points))
    start[1] = x * right1[0] / scale[1]
    found = solve_bvp(equations, boundary, x, start, tol=1e-6, max_nodes=60000)
    assert found.success, found.message
    where = (1 - np.cos(np.pi * np.linspace(0, 1, 2001))) / 2
    y = found.sol(where) * scale[:, None]
    q, pull = bond(y)
    return where * length, q, pull, y


def two_bars(length, soft1, soft2, ks, force, *, mismatch=0.0, yield_flow=None, points=2000):
    """Flow along a bond of two bars of compliance ``soft1`` and ``soft2`` (functions of place): shear lag alone."""

    def equations(x, y):
        q = ks * y[1] if yield_flow is None else np.clip(ks * y[1], -yield_flow, yield_flow)
        return np.vstack([q, y[0] * soft1(x) - (force - y[0]) * soft2(x) + mismatch])

    x = length * (1 - np.cos(np.pi * np.linspace(0, 1, points))) / 2
    start = np.vstack([force * x / length, np.full(points, force / length / ks)])
    found = solve_bvp(
        equations, lambda a, b: np.array([a[0] / force, b[0] / force - 1]), x, start, tol=1e-7, max_nodes=100000
    )
    assert found.success, found.message
    q = ks * found.sol(x)[1]
    return x, q if yield_flow is None else np.clip(q, -yield_flow, yield_flow)


def two_bars_by_energy(length, soft1, soft2, ks, force, *, elements=20000):
    """The same from the least complementary energy, by linear elements: for bars that run out to a tip."""
    from scipy.linalg import solveh_banded

    h = length / elements
    middle = (np.arange(elements) + 0.5) * h
    a = soft1(middle) + soft2(middle)
    main, side = np.full(elements + 1, 0.0), 1 / (ks * h) * -1 + a * h / 4
    main[:-1] += 1 / (ks * h) + a * h / 4
    main[1:] += 1 / (ks * h) + a * h / 4
    load = np.zeros(elements + 1)
    load[:-1] += soft2(middle) * force * h / 2
    load[1:] += soft2(middle) * force * h / 2
    load[-2] -= side[-1] * force
    band = np.vstack([main[1:-1], np.append(side[1:-1], 0.0)])
    N = np.concatenate(([0.0], solveh_banded(band, load[1:-1], lower=True), [force]))
    return middle, np.diff(N) / h


def two_tapered_beams(length, upper, lower, ks, kp, ends, *, breaks=(), mismatch=0.0, yield_flow=None, points=200):
    """As ``two_beams`` for beams that change along the bond: ``upper`` and ``lower`` give (EA, EI, arm) at places.

    Moments are taken about the bond, where the flow has no arm and the slope of an axis none either (M_b' = V); those
    about the axes are M_b + c N of the upper and M_b - c N of the lower beam. Plane sections strain the faces at the
    bond by N/EA +- c M/EI. Unknowns of each beam: displacement at the bond, N, w, w', M_b, V.
    """
    left1, right1, left2 = ends
    EA1, EI1, c1 = (np.max(each) for each in upper(np.array([0.0, length])))
    c2 = np.max(lower(np.array([0.0, length]))[2])
    force = max(abs(right1[0]), abs(left2[0]), abs(mismatch) * EA1 * 1e-2)
    couple = force * max(c1, c2)
    bent = couple * length / EI1
    scale = np.array([force * length / EA1, force, bent * length, bent, couple, couple / length] * 2)

    def equations(t, z):
        y = z * scale[:, None]
        (EA1, EI1, c1), (EA2, EI2, c2) = upper(t * length), lower(t * length)
        q = ks * (y[0] - y[6])
        q = q if yield_flow is None else np.clip(q, -yield_flow, yield_flow)
        pull = kp * (y[2] - y[8])
        curve1, curve2 = (y[4] + c1 * y[1]) / EI1, (y[10] - c2 * y[7]) / EI2
        rows = [
            *(y[1] / EA1 + c1 * curve1 + mismatch, q, y[3], curve1, y[5], -pull),
            *(y[7] / EA2 - c2 * curve2, -q, y[9], curve2, y[11], pull),
        ]
        return length * np.vstack(rows) / scale[:, None]

    def boundary(za, zb):
        rows = []
        for z, first, (N, V, M), arm in (
            (za, 0, left1, upper(np.zeros(1))[2]),
            (zb, 0, right1, upper(np.full(1, length))[2]),
            (za, 6, left2, -lower(np.zeros(1))[2]),
        ):
            state = z * scale
            rows += [(state[first + 1] - N) / force, (state[first + 5] - V) / scale[5]]
            rows.append((state[first + 4] - (M - arm[0] * N)) / couple)
        return np.array([*rows, za[6], za[8], za[9]])

    t = np.unique(np.concatenate(((1 - np.cos(np.pi * np.linspace(0, 1, points))) / 2, np.asarray(breaks) / length)))
    start = np.zeros((12, t.size))
    start[1] = t * right1[0] / force
    found = solve_bvp(equations, boundary, t, start, tol=1e-5, max_nodes=30000)
    assert found.success, found.message
    where = (1 - np.cos(np.pi * np.linspace(0, 1, 2001))) / 2
    y = found.sol(where) * scale[:, None]
    q = ks * (y[0] - y[6])
    q = q if yield_flow is None else np.clip(q, -yield_flow, yield_flow)
    x = where * length
    c1, c2 = upper(x)[2], lower(x)[2]
    return x, q, kp * (y[2] - y[8]), (y[1], y[4] + c1 * y[1], y[7], y[10] - c2 * y[7])
