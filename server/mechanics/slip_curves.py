"""Curves of a layered member: exact values at stations, and polynomials between them.

Stations stand close where a wave dies away and wide elsewhere; between two of them a quintic takes value, slope and
curvature of the exact solution at both, which leaves less than 1e-5 of a wave's height. Units: N, mm.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.slip_model import LayeredMember
from server.mechanics.slip_modes import CONSTANT, LEFT, RIGHT, Waves
from server.mechanics.slip_stacks import Indices, Stacks, Tree
from server.mechanics.slip_system import Chain

Array = NDArray[np.float64]
STEP = 0.6  # first station from a break, in lengths over which the steepest wave falls to 1/e
GROWTH = 1.35  # distance of each station from the break over that of the one before
SETTLED = 1e-9  # mu below which a mode has no wave to resolve

# Quintic on 0..1 from value, slope, curvature at 0 and the same at 1 (Hermite).
_HERMITE = np.linalg.inv(
    np.array(
        [
            [1, 0, 0, 0, 0, 0],
            [0, 1, 0, 0, 0, 0],
            [0, 0, 2, 0, 0, 0],
            [1, 1, 1, 1, 1, 1],
            [0, 1, 2, 3, 4, 5],
            [0, 0, 2, 6, 12, 20],
        ],
        dtype=float,
    )
)


@dataclass(frozen=True)
class Stations:
    """Where the exact solution is evaluated.

    Parameters
    ----------
    places : numpy.ndarray
        Ends of the cells, (q + 1,) [mm].
    of : numpy.ndarray
        Interval of each cell, (q,) [-].
    low, high : numpy.ndarray
        The two points that end each cell, (q,) [-]; where two intervals meet there are two points, one of either side.
    share, interval : numpy.ndarray
        Where each point lies in its interval, and which that is, (points,) [-].
    """

    places: Array
    of: Indices
    low: Indices
    high: Indices
    share: Array
    interval: Indices


@dataclass(frozen=True)
class Curves:
    """Ascending coefficients in x - places[i] of every cell; a row a case.

    Parameters
    ----------
    places : numpy.ndarray
        Ends of the cells, (q + 1,) [mm].
    shear, moment, deflection : numpy.ndarray
        Shapes (c, q, 3), (c, q, 4), (c, q, 6) [N, N*mm, mm].
    curvature : numpy.ndarray
        psi', negative where the member sags, (c, q, 6) [1/mm].
    axial : numpy.ndarray
        Axial force of every layer, (n, c, q, 6) [N]; zero where the layer is not.
    slip, flow : numpy.ndarray
        Of every joint, (j, c, q, 6) [mm, N/mm]; zero where one of its layers is not.
    """

    places: Array
    shear: Array
    moment: Array
    deflection: Array
    curvature: Array
    axial: Array
    slip: Array
    flow: Array


def stations(stacks: Stacks, chain: Chain, breaks: Array) -> Stations:
    """Choose the cells of every interval: a geometric row from either end, down to the steepest wave.

    Parameters
    ----------
    stacks, chain : Stacks, Chain
        Sections and intervals [N, mm].
    breaks : numpy.ndarray
        Ends of the intervals, (m + 1,) [mm].

    Returns
    -------
    Stations
        Cells from left to right.

    References
    ----------
    .. [1] C. Schwab, "p- and hp-Finite Element Methods" (1998), chapter 3 (geometric meshes for boundary layers);
       from memory.
    """
    steepest = stacks.rate.max(1)[stacks.of] * chain.width
    ends = [_cells(mu) for mu in steepest.tolist()]
    share = np.concatenate(ends)
    interval = np.repeat(np.arange(len(ends)), [len(each) for each in ends])
    low = np.flatnonzero(share < 1)
    of = interval[low]
    places = breaks[of] + share[low] * chain.width[of]
    return Stations(np.append(places, breaks[-1]), of, low, low + 1, share, interval)


def _cells(mu: float) -> Array:
    if mu <= 2 * STEP:
        return np.array([0.0, 1.0]) if mu < SETTLED else np.array([0.0, 0.5, 1.0])
    count = int(np.ceil(np.log(mu / (2 * STEP)) / np.log(GROWTH)))
    half = 0.5 * GROWTH ** -np.arange(count, -1.0, -1.0)
    return np.concatenate([[0.0], half, 1 - half[-2::-1], [1.0]])


Knots = tuple[Array, Array, Array]  # value, slope and curvature at every point, each (..., c, points)


def _quintic(knots: Knots, cells: Stations, width: Array) -> Array:
    """Return ascending coefficients in x of the quintic that takes both ends of every cell, (..., c, q, 6)."""
    scaled = [part[..., side] * width**k for side in (cells.low, cells.high) for k, part in enumerate(knots)]
    return np.asarray(np.stack(scaled, axis=-1) @ _HERMITE.T / width[:, None] ** np.arange(6.0))


def trace(member: LayeredMember, tree: Tree, stacks: Stacks, chain: Chain, cells: Stations, states: Array) -> Curves:
    """Evaluate the exact solution at the stations and write the curves between them.

    Parameters
    ----------
    member, tree, stacks, chain : LayeredMember, Tree, Stacks, Chain
        The member [N, mm].
    cells : Stations
        Where to evaluate.
    states : numpy.ndarray
        The unknowns at every break, (K, n + 4, c).

    Returns
    -------
    Curves
        Shear and moment exact; the others as quintics.

    References
    ----------
    .. [1] The equations of `slip_stacks`, evaluated.
    """
    line = _Line(member, tree, stacks, chain, states)
    width = np.diff(cells.places)
    shear, moment = line.statics(cells)
    found = [_quintic(knots, cells, width) for knots in line.at(cells.interval, cells.share)]
    return Curves(cells.places, shear, moment, *found)


def trace_deflection(
    member: LayeredMember, tree: Tree, stacks: Stacks, chain: Chain, cells: Stations, states: Array
) -> Array:
    """Deflection between the stations as `trace` gives it, and nothing else: (c, q, 6)."""
    line = _Line(member, tree, stacks, chain, states)
    (knots,) = line.at(cells.interval, cells.share, only_deflection=True)
    return _quintic(knots, cells, np.diff(cells.places))


class _Line:
    """The exact solution of every interval, ready to be evaluated."""

    def __init__(self, member: LayeredMember, tree: Tree, stacks: Stacks, chain: Chain, states: Array) -> None:
        self.tree, self.stacks, self.chain = tree, stacks, chain
        self.n = n = len(member.layers)
        near, far = states[chain.left], states[chain.left + 1]  # (m, n + 4, c)
        self.psi, self.y = near[:, n + 1].T, near[:, n].T  # (c, m)
        self.M, self.V = near[:, n + 2].T, near[:, n + 3].T
        Y = stacks.force[stacks.of]
        starts = np.einsum("mij,mic->cmj", Y, near[:, :n])
        stops = np.einsum("mij,mic->cmj", Y, far[:, :n])
        self.turned = self.psi + np.einsum("mi,mic->cm", stacks.lever[stacks.of] @ tree.to_layers, near[:, :n])
        self.sigma = near[:, :n], far[:, :n]
        self.waves = self._mode_waves(starts, stops)

    def _mode_waves(self, starts: Array, stops: Array) -> Waves:
        """Return every mode on every interval, (c, m, n)."""
        chain, shapes = self.chain, self.chain.waves
        p = self.stacks.drive[self.stacks.of]
        d = chain.width[:, None]
        w, slope = chain.load[..., None]

        def put(part: Array) -> Array:
            extra = part.ndim - 3
            wide = (..., *([None] * extra))
            loaded = (
                (self.V[..., None] * p * d**2)[wide] * part[CONSTANT]
                - (w * p * d**3)[wide] * part[CONSTANT + 1]
                - (slope * p * d**4)[wide] * part[CONSTANT + 2]
            )
            return np.asarray(starts[wide] * part[LEFT] + stops[wide] * part[RIGHT] + loaded)

        return Waves(shapes.mu[0], put(shapes.power), put(shapes.left), put(shapes.right))

    def statics(self, cells: Stations) -> tuple[Array, Array]:
        """Shear and moment as exact polynomials of each cell."""
        V, M, w, slope = self._statics(cells.of, cells.share[cells.low])
        shear = np.stack([V, -w, -slope / 2], axis=-1)
        return shear, np.stack([M, V, -w / 2, -slope / 6], axis=-1)

    def _statics(self, of: Indices, t: Array) -> tuple[Array, Array, Array, Array]:
        x = t * self.chain.width[of]
        w, slope = self.chain.load[0][:, of], self.chain.load[1][:, of]
        V, M = self.V[:, of], self.M[:, of]
        return (
            V - w * x - slope * x**2 / 2,
            M + V * x - w * x**2 / 2 - slope * x**3 / 6,
            w + slope * x,
            slope,
        )

    def at(self, of: Indices, t: Array, *, only_deflection: bool = False) -> list[Knots]:
        """Value, slope and curvature of deflection, curvature, axial forces, slips and flows at t of intervals."""
        chain, stacks = self.chain, self.stacks
        kind, d = stacks.of[of], chain.width[of]
        V, M, w, _ = self._statics(of, t)
        own = Waves(self.waves.mu[of], self.waves.power[:, of], self.waves.left[:, of], self.waves.right[:, of])
        g = own.at(t[:, None])
        dg = own.slope(t[:, None]) / d[:, None]
        rate, p = stacks.rate[kind], stacks.drive[kind]
        f, D = 1 / stacks.tied[kind], stacks.loose[kind]
        softness = chain.softness[of]
        slid = (p * g).sum(2)
        x = t * d
        w0, s0 = chain.load[0][:, of], chain.load[1][:, of]
        V0, M0 = self.V[:, of], self.M[:, of]
        turned = self.turned[:, of] - f * (M0 * x + V0 * x**2 / 2 - w0 * x**3 / 6 - s0 * x**4 / 24)
        y = (
            self.y[:, of]
            + self.turned[:, of] * x
            - f * (M0 * x**2 / 2 + V0 * x**3 / 6 - w0 * x**4 / 24 - s0 * x**5 / 120)
            + softness * (M - M0)
            - d * (p * own.area(t[:, None])).sum(2)
        )
        curvature = -f * M - (p * dg).sum(2)
        deflection = (y, turned - slid + softness * V, curvature - softness * w)
        if only_deflection:
            return [deflection]
        held, dheld = rate**2 * g, rate**2 * dg  # lambda^2 g and its slope
        bend = -V / D - (p * held).sum(2)
        curved = (curvature, bend, w / D - (p * dheld).sum(2))
        axial = self._axial(kind, dg, held, dheld, V, M, w)
        return [deflection, curved, axial, *self._slides(of, t, kind, g, dg, held, V, p)]

    def _axial(self, kind: Indices, dg: Array, held: Array, dheld: Array, V: Array, M: Array, w: Array) -> Knots:
        X = np.einsum("ji,rjm->rim", self.tree.to_sigma, self.stacks.force)
        X *= self.stacks.present[:, :, None]
        lever = self.stacks.lever[kind].T[:, None]  # (n, 1, q)

        def force(mode: Array) -> Array:
            return np.asarray((X[kind] @ mode.transpose(1, 2, 0)).transpose(1, 2, 0))

        return force(dg) - lever * M, force(held), force(dheld)

    def _slides(
        self, of: Indices, t: Array, kind: Indices, g: Array, dg: Array, held: Array, V: Array, p: Array
    ) -> list[Knots]:
        """Slips and flows of every joint; a pair's flow divides over its joints by their stiffness."""
        stacks, tree = self.stacks, self.tree
        rate = stacks.rate[kind]
        third = held + p * V[..., None]  # g''
        hold, slide = stacks.hold[kind], stacks.slide[kind]
        k = stacks.stiffness[kind].T[:, None]  # (e, 1, q)
        joined = k > 0
        slips = []
        for mode in (g, dg, third):
            flow = (hold @ (rate * mode).transpose(1, 2, 0)).transpose(1, 2, 0)
            free = (slide @ mode.transpose(1, 2, 0)).transpose(1, 2, 0)
            slips.append(np.where(joined, flow / np.where(joined, k, 1.0), free))
        own = stacks.own[of].T[:, None]  # (j, 1, q)
        value, slope, curvature = (tree.sign[:, None, None] * slip[tree.of_joint] for slip in slips)
        return [(value, slope, curvature), (own * value, own * slope, own * curvature)]
