"""Independent solutions for bonds that yield in shear: the load at which the slip reaches its limit, zone by zone.

Own derivations, from equilibrium and Hooke's law alone. Beams: elastic and yielded zones are each linear, so that the
matrix exponential is exact there; a general root finder then places their borders and finds the load.
Bars of any course: scipy's initial-value solver from both ends towards the middle.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp
from scipy.linalg import expm
from scipy.optimize import root

PIECES = 4  # of every zone, so that no exponential grows beyond what its digits hold


@dataclass(frozen=True)
class Beams:
    """Two beams (EA, EI, arm) on a bond: the twelve equations of ``overlap_oracles.two_beams``, with zones that yield.

    ``ends`` gives, for a load, (N, V, M) of the upper beam at left and right and of the lower one at left, which is
    held there. ``guided``: the upper beam cannot turn at the right.
    """

    length: float
    upper: tuple[float, float, float]
    lower: tuple[float, float, float]
    ks: float
    kp: float
    yield_flow: float
    ends: Callable
    mismatch: float = 0.0
    guided: bool = False

    def rates(self, sign):
        """Matrix of y' = A y, with y_13 = 1: elastic for sign 0, yielded one way or the other for 1 or -1."""
        (EA1, EI1, c1), (EA2, EI2, c2) = self.upper, self.lower
        slip, opening = self.slip_row(), np.zeros(13)
        opening[[2, 8]] = 1.0, -1.0
        q = self.ks * slip if sign == 0 else sign * self.yield_flow * np.eye(13)[12]
        pull = self.kp * opening
        A, one = np.zeros((13, 13)), np.eye(13)
        A[0], A[1], A[2], A[3] = one[1] / EA1 + self.mismatch * one[12], q, one[3], one[4] / EI1
        A[4], A[5] = one[5] + c1 * q, -pull
        A[6], A[7], A[8], A[9] = one[7] / EA2, -q, one[9], one[10] / EI2
        A[10], A[11] = one[11] + c2 * q, pull
        return A

    def slip_row(self):
        row = np.zeros(13)
        row[[0, 6, 3, 9]] = 1.0, -1.0, self.upper[2], self.lower[2]
        return row

    def states(self, load, left, right, signs):
        """Places and states at the borders of the pieces; ``left`` and ``right`` are the yielded lengths."""
        borders, zones = [0.0], []
        for end, sign in ((left, signs[0]), (self.length - right, 0), (self.length, signs[1])):
            start = borders[-1]
            if end - start > 1e-12 * self.length:
                borders += list(start + (end - start) * np.arange(1, PIECES + 1) / PIECES)
                zones += [(sign, (end - start) / PIECES)] * PIECES
        left1, right1, left2 = self.ends(load)
        c = max(self.upper[2], self.lower[2])
        bent = load * c * self.length / self.upper[1]
        scale = np.array([load * self.length / self.upper[0], load, bent * self.length, bent, load * c, load] * 2)
        count = len(borders)
        M, f = np.zeros((12 * count, 12 * count)), np.zeros(12 * count)
        over = {zone: expm(self.rates(zone[0]) * zone[1]) for zone in set(zones)}
        for k, zone in enumerate(zones):
            T = over[zone]
            rows = slice(12 * k, 12 * k + 12)
            M[rows, rows] = -T[:12, :12] * scale / scale[:, None]
            M[rows, 12 * k + 12 : 12 * k + 24] = np.eye(12)
            f[rows] = T[:12, 12] / scale
        last = 12 * (count - 1)
        given = [(1, left1[0]), (5, left1[1]), (4, left1[2]), (7, left2[0]), (11, left2[1]), (10, left2[2])]
        given += [(last + 1, right1[0]), (last + 5, right1[1]), (6, 0.0), (8, 0.0), (9, 0.0)]
        given.append((last + 3, 0.0) if self.guided else (last + 4, right1[2]))
        for row, (where, value) in enumerate(given, start=last):
            M[row, where], f[row] = 1.0, value / scale[where % 12]
        y = np.linalg.solve(M, f).reshape(count, 12) * scale
        return np.array(borders), np.column_stack((y, np.ones(count))), zones

    def at_limit(self, limit, guess, signs=(1, 1)):
        """Load and yielded lengths at which the greater of both end slips is at its limit; from a rough ``guess``.

        A yielded length guessed as 0 stays 0. Raises AssertionError where no such state is found.
        """
        at_yield, row = self.yield_flow / self.ks, self.slip_row()
        free = [0] + [k for k in (1, 2) if guess[k] > 0]

        def spread(z):
            full = np.zeros(3)
            full[free] = z
            return full * [guess[0], self.length, self.length]

        def off(z):
            load, left, right = spread(z)
            x, y, _ = self.states(load, left, right, signs)
            s = y @ row
            rows = [max(abs(s[0]), abs(s[-1])) / limit - 1]
            if left > 0:
                rows.append(signs[0] * s[np.argmin(np.abs(x - left))] / at_yield - 1)
            if right > 0:
                rows.append(signs[1] * s[np.argmin(np.abs(x - self.length + right))] / at_yield - 1)
            return rows

        start = np.array([1.0, guess[1] / self.length, guess[2] / self.length])[free]
        found = root(off, start, tol=1e-11)
        assert np.abs(off(found.x)).max() < 1e-8, found.message
        return spread(found.x)

    def slip(self, x, load, left, right, signs=(1, 1)):
        """Slip and opening at places."""
        borders, states, zones = self.states(load, left, right, signs)
        piece = np.clip(np.searchsorted(borders, x, side="right") - 1, 0, len(zones) - 1)
        y = np.array(
            [expm(self.rates(zones[k][0]) * (at - borders[k])) @ states[k] for at, k in zip(x, piece, strict=True)]
        )
        return y @ self.slip_row(), y[:, 2] - y[:, 8]


def bars_at_limit(length, soft1, soft2, ks, yield_flow, limit, guess, *, mismatch=0.0):
    """Load at which the slip of two bars reaches its limit, with places and slip; both bars may run out to a tip.

    ``soft1`` and ``soft2`` are compliances at places; ``guess``: load, slip at the left, slip at the right. The end at
    which the slip is greater in the guess is the one at the limit, and must be the place of the greatest slip.
    """
    first, middle = 1e-7 * length, length / 2
    at_left = abs(guess[1]) >= abs(guess[2])

    def flow(s):
        return np.clip(ks * s, -yield_flow, yield_flow)

    def run(load, s, start):
        force = flow(s) * first if start < middle else load - flow(s) * first
        return solve_ivp(
            lambda x, y: [flow(y[1]), y[0] * soft1(x) - (load - y[0]) * soft2(x) + mismatch],
            (start, middle),
            [force, s],
            method="DOP853",
            rtol=1e-10,
            atol=[1e-12 * guess[0], 1e-12 * limit],
            dense_output=True,
        )

    def unknowns(z):
        end, other = np.copysign(limit, guess[1 if at_left else 2]), z[1] * limit
        return (z[0] * guess[0], end, other) if at_left else (z[0] * guess[0], other, end)

    def both(z):
        load, left, right = unknowns(z)
        return load, run(load, left, first), run(load, right, length - first)

    def off(z):
        load, left, right = both(z)
        return [(left.y[0, -1] - right.y[0, -1]) / load, (left.y[1, -1] - right.y[1, -1]) / limit]

    found = root(off, [1.0, guess[2 if at_left else 1] / limit], tol=1e-9, options={"eps": 1e-8})
    assert np.abs(off(found.x)).max() < 1e-6, found.message
    load, left, right = both(found.x)
    x = np.linspace(first, length - first, 4001)
    s = np.where(x < middle, left.sol(np.minimum(x, middle))[1], right.sol(np.maximum(x, middle))[1])
    assert np.abs(s).max() <= limit * (1 + 1e-6)
    return load, x, s
