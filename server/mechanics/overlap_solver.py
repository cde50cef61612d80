r"""Two adherends as beams on an adhesive of shear and peel springs, under any end loads: the one solver of all laps.

Units: N, mm, MPa; forces are those of the whole width. The upper adherend (1) and the lower one (2) have axial
compliance :math:`a = 1/EA`, bending compliance :math:`d = 1/EI` and an arm :math:`c` from their axis to the bond; the
bond has a shear stiffness :math:`k_s = G b/t_a` and a peel stiffness :math:`k_p = E_a b/t_a` per length. With N, V, M
of the upper adherend, slip s and opening p of the bond (all others follow from equilibrium):

.. math::
   N' = q, \quad V' = -k_p p, \quad M' = V + (c_1 N)', \quad q = k_s s \ \text{or}\ \pm q_y

   s' = a_1 N - a_2 (N_t - N) + c_1 d_1 M + c_2 d_2 M_2 + \Delta\varepsilon, \quad p'' = d_1 M - d_2 M_2,
   \quad M_2 = M_t + (c_1 + c_2) N - M

N_t and M_t(x) are force and moment of the whole joint, about the axis of the lower adherend. Moments are positive when
they sag, V is the sum of upward forces to the left, p > 0 pulls the adherends apart, q > 0 where the upper adherend
gains tension from left to right.

The six equations are solved by collocation at three Gauss points an element (order 6). Stresses are unknowns
themselves, not differences of displacements, so a very stiff adhesive costs no digits; elements grow away from the
ends, so a very long bond costs few of them; a growing and a decaying stress pass through an element as factors near
one, so nothing overflows.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError
from server.mechanics.overlap_mesh import Mesh

Array = NDArray[np.float64]
_ROOT = np.sqrt(15.0)
GAUSS = np.array([0.5 - _ROOT / 10, 0.5, 0.5 + _ROOT / 10])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 18
_RUNGE_KUTTA = np.array(
    [
        [5 / 36, 2 / 9 - _ROOT / 15, 5 / 36 - _ROOT / 30],
        [5 / 36 + _ROOT / 24, 2 / 9, 5 / 36 - _ROOT / 24],
        [5 / 36 + _ROOT / 30, 2 / 9 + _ROOT / 15, 5 / 36],
    ]
)
_BETWEEN = np.array([0.25, 0.5, 0.75])  # where a stress is reported inside an element, beside its ends
_N, _V, _M, _S, _P, _R = range(6)
HARDENING = 1e-7  # share of the elastic stiffness kept where the bond has yielded, so that a slip is always defined


def _integrals(shares: Array) -> Array:
    """Integrals from 0 to each share of the polynomials that are 1 at one Gauss point and 0 at the others."""
    powers = np.vander(GAUSS, 3, increasing=True)
    coefficients = np.linalg.inv(powers)  # columns: the three polynomials
    return np.asarray([[sum(c[k] * t ** (k + 1) / (k + 1) for k in range(3)) for c in coefficients.T] for t in shares])


_INSIDE = _integrals(_BETWEEN)


@dataclass(frozen=True, eq=False)
class Adherend:
    """One adherend as a beam: 1/EA [1/N], 1/EI [1/(N mm2)], arm from its axis to the bond [mm].

    Each is one number, one a bond ``(bonds, 1, 1)``, or one a collocation point ``(bonds, elements, 3)`` where the
    adherend is tapered; ``rise`` is then the slope of the upper one's arm along the bond [-].
    """

    stretch: ArrayLike
    bend: ArrayLike = 0.0
    arm: ArrayLike = 0.0
    rise: ArrayLike = 0.0


@dataclass(frozen=True, eq=False)
class Pair:
    """Upper and lower adherend with the bond between them, ``shear`` and ``peel`` stiffness per length [N/mm2].

    ``bending`` false leaves deflection and peel out: two bars and a bond that only shears.
    """

    upper: Adherend
    lower: Adherend
    shear: ArrayLike
    peel: ArrayLike = 0.0
    bending: bool = True


Moments = Callable[[Array], Array]


@dataclass(frozen=True, eq=False)
class Loads:
    """Several load columns of a batch of bonds; every array is ``(bonds, columns)``.

    ``left`` and ``right`` hold (N, V, M) of the upper adherend at its ends; ``axial`` is N_t; ``moment`` gives M_t,
    ``(bonds, elements, points, columns)``, at places ``(bonds, elements, points)``; ``mismatch`` is the free strain of
    the upper adherend over that of the lower one.
    """

    left: tuple[Array, Array, Array]
    right: tuple[Array, Array, Array]
    axial: Array
    moment: Moments
    mismatch: Array


@dataclass(frozen=True, eq=False)
class Course:
    """What runs along each bond, ``(bonds, places, columns)``; ``at`` ``(bonds, places)`` [mm].

    ``slip`` s and ``opening`` p of the bond [mm], ``force`` N, ``shear`` V, ``moment`` M of the upper adherend
    [N, N mm]; ``slip_inside`` the slip at the collocation points, ``(bonds, elements, points, columns)``.
    """

    at: Array
    slip: Array
    opening: Array
    force: Array
    shear: Array
    moment: Array
    slip_inside: Array


class Solver:
    """A batch of bonds, meshed; solves for load columns, with the bond elastic or yielded in places."""

    def __init__(self, pair: Pair, mesh: Mesh, *, right: Literal["loads", "guided"] = "loads") -> None:
        """``right`` "guided": the upper adherend cannot turn against the lower one at its right end (M free there)."""
        self.pair, self.mesh, self.right = pair, mesh, right
        self.states = (_N, _V, _M, _S, _P, _R) if pair.bending else (_N, _S)
        self.points = mesh.inside(GAUSS)
        self._full = self.points.shape
        self._full_stiffness = np.ones(1)
        self._known: tuple[Loads, Array, Array] | None = None

    def _at_points(self, value: ArrayLike) -> Array:
        return np.broadcast_to(np.asarray(value, dtype=float), self._full)

    @cached_property
    def _coefficients(self) -> dict[str, Array]:
        upper, lower = self.pair.upper, self.pair.lower
        found = {
            "a1": upper.stretch,
            "d1": upper.bend,
            "c1": upper.arm,
            "rise": upper.rise,
            "a2": lower.stretch,
            "d2": lower.bend,
            "c2": lower.arm,
            "ks": self.pair.shear,
            "kp": self.pair.peel,
        }
        return {name: self._at_points(value) for name, value in found.items()}

    @cached_property
    def _scale(self) -> Array:
        """Sizes of the states for a force of 1, ``(bonds, 6)``."""
        c = {name: np.median(value, axis=(1, 2)) for name, value in self._coefficients.items()}
        rate = np.sqrt(c["ks"] * (c["a1"] + c["a2"] + c["c1"] ** 2 * c["d1"] + c["c2"] ** 2 * c["d2"]))
        scale = np.ones((len(self.mesh.nodes), 6))
        scale[:, _S] = rate / c["ks"]
        if self.pair.bending:
            lift = (c["kp"] * (c["d1"] + c["d2"]) / 4) ** 0.25
            scale[:, _M] = np.maximum(c["c1"], c["c2"])
            scale[:, _V] = scale[:, _M] * np.maximum(lift, 1 / self.mesh.nodes[:, -1])
            scale[:, _P] = scale[:, _V] * lift / c["kp"]
            scale[:, _R] = scale[:, _P] * lift
        return scale

    def _matrix(self, left: Array, which: tuple[NDArray[np.intp], ...] | None = None) -> Array:
        """The scaled matrix of the equations at every point; ``left`` is the share of the shear stiffness there."""
        c = self._coefficients if which is None else {name: v[which] for name, v in self._coefficients.items()}
        ks = c["ks"] * left
        full = np.zeros((*c["ks"].shape, 6, 6))
        full[..., _N, _S] = ks
        full[..., _S, _N] = c["a1"] + c["a2"]
        if self.pair.bending:
            apart = c["c1"] + c["c2"]
            full[..., _V, _P] = -c["kp"]
            full[..., _M, _V] = 1.0
            full[..., _M, _S] = c["c1"] * ks
            full[..., _M, _N] = c["rise"]
            full[..., _S, _N] += c["c2"] * c["d2"] * apart
            full[..., _S, _M] = c["c1"] * c["d1"] - c["c2"] * c["d2"]
            full[..., _P, _R] = 1.0
            full[..., _R, _N] = -c["d2"] * apart
            full[..., _R, _M] = c["d1"] + c["d2"]
        scale = self._scale[:, None, None, :] if which is None else self._scale[which[0], None, :]
        full *= scale[..., None, :] / scale[..., :, None]
        picked = np.array(self.states)
        return full if len(picked) == 6 else full[..., picked[:, None], picked]

    def _forcing(self, loads: Loads, yield_flow: Array | None = None) -> Array:
        """The scaled right-hand side, ``(bonds, elements, points, states, columns)``."""
        c = self._coefficients
        columns = loads.axial.shape[1]
        full = np.zeros((*self._full, 6, columns))
        full[..., _S, :] = -c["a2"][..., None] * loads.axial[:, None, None] + loads.mismatch[:, None, None]
        if self.pair.bending:
            total = loads.moment(self.points)
            full[..., _S, :] += (c["c2"] * c["d2"])[..., None] * total
            full[..., _R, :] = -c["d2"][..., None] * total
        if yield_flow is not None:
            # the yield flow is one more column: what the yielded parts carry whatever the load
            extra = np.zeros((*self._full, 6, 1))
            extra[..., _N, 0] = yield_flow
            extra[..., _M, 0] = c["c1"] * yield_flow
            full = np.concatenate((full, extra), axis=-1)
        scaled = full / self._scale[:, None, None, :, None]
        return scaled if len(self.states) == 6 else scaled[..., np.array(self.states), :]

    def _elements(self, matrix: Array, forcing: Array, steps: Array | None = None) -> Array:
        """Slopes at the collocation points for a unit of each state at the left node, and for each load column."""
        steps = self.mesh.steps if steps is None else steps
        size, shape = len(self.states), matrix.shape[:-3]
        # S[(j, r), (k, s)] = delta - h a_jk A_j[r, s]
        block = -steps[..., None, None, None, None] * _RUNGE_KUTTA[:, None, :, None] * matrix[..., :, :, None, :]
        block = block.reshape(*shape, 3 * size, 3 * size)
        block[..., np.arange(3 * size), np.arange(3 * size)] += 1.0
        given = np.concatenate((matrix, forcing), axis=-1).reshape(*shape, 3 * size, -1)
        try:
            return np.asarray(np.linalg.solve(block, given)).reshape(*shape, 3, size, -1)
        except np.linalg.LinAlgError as error:
            raise InputError(
                "length", "the joint's equations have no answer; check sizes, moduli and loads."
            ) from error

    def solve(
        self,
        loads: Loads,
        yielded: NDArray[np.int8] | None = None,
        yield_flow: ArrayLike = 0.0,
        *,
        only_slip: bool = False,
    ) -> Course:
        """The course of every column.

        ``yielded``, -1, 0 or 1 at every collocation point, says where the bond carries ``yield_flow`` [N/mm] whatever
        its slip; what those parts do is then one more column, the last. ``only_slip``: at the nodes and collocation
        points, and nothing else.
        """
        self._check(loads)
        if yielded is None:
            slopes = self._elements(self._matrix(self._full_stiffness), self._forcing(loads))
        else:
            slopes = self._partly_yielded(loads, yielded, self._at_points(yield_flow) * (1 - HARDENING))
        nodes = self._through(slopes, loads)
        return self._slips(slopes, nodes) if only_slip else self._course(slopes, nodes)

    def _partly_yielded(self, loads: Loads, yielded: NDArray[np.int8], flow: Array) -> Array:
        """Elements that are elastic or yielded throughout are solved once for all rounds, the mixed ones each time."""
        if self._known is None or self._known[0] is not loads:
            forcing = self._forcing(loads, flow)
            quiet = forcing.copy()
            quiet[..., -1] = 0.0
            elastic = self._elements(self._matrix(self._full_stiffness), quiet)
            plastic = self._elements(self._matrix(np.full(self._full, HARDENING)), forcing)
            self._known = (loads, elastic, plastic)
        _, elastic, plastic = self._known
        sign = yielded[:, :, 1]
        slopes = np.where((sign == 0)[..., None, None, None], elastic, plastic)
        slopes[..., -1] *= sign[..., None, None]
        mixed = np.nonzero((yielded != sign[..., None]).any(axis=2))
        if mixed[0].size:
            matrix = self._matrix(np.where(yielded[mixed] == 0, 1.0, HARDENING), mixed)
            slopes[mixed] = self._elements(matrix, self._forcing(loads, yielded * flow)[mixed], self.mesh.steps[mixed])
        return slopes

    def _check(self, loads: Loads) -> None:
        for name, value in self._coefficients.items():
            if not np.isfinite(value).all():
                raise InputError(name, "a stiffness of the joint is beyond all numbers; check sizes and moduli.")
        if not np.isfinite(loads.axial).all():
            raise InputError("axial", "the load is not a finite number.")

    def _through(self, slopes: Array, loads: Loads) -> Array:
        """States at the nodes, ``(bonds, nodes, states, columns)``: one banded solve a bond."""
        from scipy.linalg.lapack import dgbsv

        size, half = len(self.states), len(self.states) // 2
        steps = self.mesh.steps[..., None, None]
        passed = steps * np.tensordot(slopes, _WEIGHTS, (2, 0))
        transfer, gained = np.eye(size) + passed[..., :size], passed[..., size:]
        bonds, elements = transfer.shape[:2]
        columns, rows = gained.shape[-1], size * (elements + 1)
        low, up = half + size - 1, 2 * size - 1 - half
        band = np.zeros((bonds, 2 * low + up + 1, rows))
        up = up + low  # LAPACK keeps its fill-in above the band
        start = size * np.arange(elements)[:, None, None]
        row = half + start + np.arange(size)[:, None]
        column = start + np.arange(size)
        band[:, up + row - column, np.broadcast_to(column, (elements, size, size))] = -transfer
        diagonal = (half + start + np.arange(size)).ravel()
        band[:, up + half - size, diagonal + size - half] = 1.0
        given = np.zeros((bonds, rows, columns))
        given[:, half : rows - half] = gained.reshape(bonds, -1, columns)
        scale = self._scale
        left, right = self._ends()
        ends = np.arange(half)
        band[:, up + ends - np.array(left), np.array(left)] = 1.0
        last = rows - size + np.array(right)
        band[:, up + rows - half + ends - last, last] = 1.0
        loaded = loads.axial.shape[1]
        for place, state in enumerate(left):
            value = loads.left[self.states[state]]
            given[:, place, :loaded] = value / scale[:, self.states[state], None]
        for place, state in enumerate(right):
            kind = self.states[state]
            if kind in (_N, _V, _M):
                given[:, rows - half + place, :loaded] = loads.right[kind] / scale[:, kind, None]
        found = np.empty_like(given)
        for each in range(bonds):
            _, _, found[each], failed = dgbsv(low, up - low, band[each], given[each], overwrite_ab=True)
            if failed:
                raise InputError("length", "the joint's equations have no answer; check sizes, moduli and loads.")
        if not np.isfinite(found).all():
            raise InputError("length", "the joint's stresses are beyond all numbers; check sizes, moduli and loads.")
        return found.reshape(bonds, elements + 1, size, columns)

    def _ends(self) -> tuple[tuple[int, ...], tuple[int, ...]]:
        """Which states are given at either end, by their place among the states."""
        if not self.pair.bending:
            return (0,), (0,)
        return (_N, _V, _M), (_N, _V, _R) if self.right == "guided" else (_N, _V, _M)

    def _slopes_of(self, slopes: Array, nodes: Array) -> Array:
        """The slopes at the collocation points that go with the states at the nodes."""
        size = len(self.states)
        bonds, elements = slopes.shape[:2]
        own = slopes[..., :size].reshape(bonds, elements, -1, size) @ nodes[:, :-1]
        return np.asarray(own.reshape(*slopes.shape[:4], -1) + slopes[..., size:])

    def _slip_inside(self, own: Array, nodes: Array) -> Array:
        slip = self.states.index(_S)
        gained = np.matmul(_RUNGE_KUTTA, own[..., slip, :]) * self.mesh.steps[..., None, None]
        return np.asarray((nodes[:, :-1, None, slip] + gained) * self._scale[:, None, None, _S, None])

    def _slips(self, slopes: Array, nodes: Array) -> Course:
        slip = nodes[:, :, self.states.index(_S)] * self._scale[:, None, _S, None]
        inside = self._slip_inside(self._slopes_of(slopes, nodes), nodes)
        none = np.zeros((0, 0, 0))
        return Course(self.mesh.nodes, slip, none, none, none, none, inside)

    def _course(self, slopes: Array, nodes: Array) -> Course:
        """States at the nodes and between them, from the polynomial that the collocation made of each element."""
        size = len(self.states)
        own = self._slopes_of(slopes, nodes)
        steps = self.mesh.steps[..., None, None, None]
        start = nodes[:, :-1, None]
        inner = start + steps * np.moveaxis(np.tensordot(own, _INSIDE, (2, 1)), -1, 2)
        bonds, columns = nodes.shape[0], nodes.shape[-1]
        together = np.concatenate((start, inner), axis=2).reshape(bonds, -1, size, columns)
        together = np.concatenate((together, nodes[:, -1:]), axis=1)
        shares = np.concatenate(([0.0], _BETWEEN))
        at = np.concatenate((self.mesh.inside(shares).reshape(bonds, -1), self.mesh.nodes[:, -1:]), axis=1)
        full = np.zeros((6, *together.shape[:2], columns))
        full[np.array(self.states)] = np.moveaxis(together, 2, 0)
        full *= np.moveaxis(self._scale, 1, 0)[:, :, None, None]
        return Course(
            at=at,
            slip=full[_S],
            opening=full[_P],
            force=full[_N],
            shear=full[_V],
            moment=full[_M],
            slip_inside=self._slip_inside(own, nodes),
        )
