"""Beams of any number of supports: exact shear, moment and deflection as piecewise polynomials.

Any number of pins, fixed supports and springs, overhangs, hinges, several spans; bending and shear stiffness constant
by stretches; point loads, linearly varying line loads and couples in any number of cases, which share one set of
equations. Units: N, mm, N/mm, N*mm; see `server.mechanics.beam_model` for signs. Linear elastic, small deflections,
sections stay plane; a shear deformation V/GA is added where GA is finite (Timoshenko 1921).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError
from server.mechanics.beam_loads import Grid, lay_out
from server.mechanics.beam_model import Beam, Couple, LineLoad, Load, PointLoad, Stretch, Support, span_ends
from server.mechanics.beam_stability import require_stable
from server.mechanics.beam_system import FIXED, Sweep, assemble, solve_system, sweep
from server.mechanics.piecewise import (
    Candidates,
    Extremes,
    candidates,
    candidates_together,
    evaluate,
    extremes,
    restrict,
)

__all__ = [
    "Beam",
    "Candidates",
    "Couple",
    "Extremes",
    "LineLoad",
    "Load",
    "PointLoad",
    "Response",
    "Stretch",
    "Support",
    "candidates",
    "evaluate",
    "extremes",
    "restrict",
    "solve",
    "solve_alike",
    "span_ends",
]

Array = NDArray[np.float64]
_1_2_3 = np.array([1.0, 2.0, 3.0])  # shear's coefficients over these: moment's
_TWICE = np.array([-2.0, -6.0, -12.0, -20.0])  # moment's over EI and these: deflection's


@dataclass(frozen=True)
class Response:
    """What the member does under each load case, or each combination of cases.

    Parameters
    ----------
    breaks : numpy.ndarray
        Places where a curve may jump or bend, (m + 1,) [mm].
    shear, moment, deflection : numpy.ndarray
        Ascending coefficients in s = x - breaks[i], shapes (c, m, 3), (c, m, 4), (c, m, 6)
        [N, N*mm, mm, each over mm^k].
    reaction_force, reaction_couple : numpy.ndarray
        Upward force [N] and anticlockwise couple [N*mm] on the member at each support, (c, s).
    """

    breaks: Array
    shear: Array
    moment: Array
    deflection: Array
    reaction_force: Array
    reaction_couple: Array

    def combine(self, factors: ArrayLike) -> Response:
        """Return the response to combinations of the cases.

        Parameters
        ----------
        factors : array_like
            Factor of each case in each combination, (k, c) [-].
        """
        share = np.asarray(factors, dtype=float)
        parts = (self.shear, self.moment, self.deflection, self.reaction_force, self.reaction_couple)
        return Response(
            self.breaks, *((share @ part.reshape(len(part), -1)).reshape(-1, *part.shape[1:]) for part in parts)
        )

    def plus(self, other: Response) -> Response:
        """Return the sum of two responses with the same breaks, combination by combination.

        Parameters
        ----------
        other : Response
            For instance that of the sustained loads on the stiffnesses after creep [N, mm].

        Raises
        ------
        InputError
            If the breaks differ: both must come from the same member cut at the same places.
        """
        if not np.array_equal(self.breaks, other.breaks):
            raise InputError("other", "the two responses are cut at different places; solve both with the same loads.")
        return Response(
            self.breaks,
            self.shear + other.shear,
            self.moment + other.moment,
            self.deflection + other.deflection,
            self.reaction_force + other.reaction_force,
            self.reaction_couple + other.reaction_couple,
        )

    def candidates(self) -> Candidates:
        """Return all places of possible extremes of shear, moment and deflection, shape (3, c, m, q)."""
        return candidates_together(self.breaks, (self.shear, self.moment, self.deflection))

    def extremes(self) -> Extremes:
        """Return the extremes over the whole member: rows shear [N], moment [N*mm], deflection [mm], (3, c)."""
        return self.candidates().over()


def solve(beam: Beam, cases: Sequence[Sequence[Load]]) -> Response:
    r"""Solve a member for all load cases at once.

    .. math:: V' = -w, \quad M' = V, \quad \psi' = -M / EI, \quad y' = \psi + V / GA

    Parameters
    ----------
    beam : Beam
        The member [mm, N*mm2, N, N/mm].
    cases : sequence of sequence of Load
        Loads of each case [N, N/mm, N*mm, mm].

    Returns
    -------
    Response
        One row a case; exact piecewise polynomials, up to rounding.

    Raises
    ------
    InputError
        If the member can move without bending (the message names the part), or a load cannot be placed.

    Notes
    -----
    Between key places (ends, supports, hinges) the equations are integrated exactly; what holds at the key places
    gives one small banded system for all cases. Left out: axial force, second-order effects, torsion, temperature.

    References
    ----------
    .. [1] S. P. Timoshenko, "On the correction for shear of the differential equation for transverse vibrations of
       prismatic bars", Phil. Mag. 41 (1921), 744-746.
    .. [2] S. P. Timoshenko, "Strength of Materials", part I, 3rd ed. (1955), chapters 5 to 8.

    Examples
    --------
    >>> floor = Beam(4000, [Support(0, "pin"), Support(4000, "pin")], [], [Stretch(0, 4000, 4.5e11)])
    >>> response = solve(floor, [[LineLoad(0, 4000, 5, 5)]])
    >>> found = extremes(response.breaks, response.moment)
    >>> round(float(found.max[0])), round(float(found.at_max[0]))
    (10000000, 2000)
    """
    return solve_alike([beam], cases)[0]


def solve_alike(beams: Sequence[Beam], cases: Sequence[Sequence[Load]]) -> list[Response]:
    """Solve members that differ in the stiffness of their stretches only, all at once.

    Parameters
    ----------
    beams : sequence of Beam
        The same member with each set of stiffnesses [mm, N*mm2, N, N/mm].
    cases : sequence of sequence of Load
        Loads of each case [N, N/mm, N*mm, mm].

    Returns
    -------
    list of Response
        One a member, as `solve` gives it.

    Raises
    ------
    InputError
        As `solve` does.

    References
    ----------
    .. [1] S. P. Timoshenko, "Strength of Materials", part I, 3rd ed. (1955), chapters 5 to 8.
    """
    require_stable(beams[0])
    grid = lay_out(beams, cases)
    swept = sweep(grid)
    A, rhs, scale = assemble(grid, swept)
    states = solve_system(A, rhs).reshape(len(beams), len(grid.key), 4, len(cases)) * scale[:, None, :, None]
    return _curves(grid, swept, states)


def _curves(grid: Grid, swept: Sweep, states: Array) -> list[Response]:
    """Return polynomials and reactions from the states just right of the key places, (k, K, 4, c): y, psi, M, V."""
    cases = grid.load.shape[1]
    start, end = swept.start[:, :, :cases], swept.end[:, :, :cases]
    unit_M, unit_V = swept.start[:, :, cases, None], swept.start[:, :, cases + 1, None]  # (4, k, 1, m)
    along = unit_V[1]  # distance from the key place
    own = np.repeat(np.arange(len(grid.first)), np.subtract(grid.stop, grid.first))
    y, psi, M, V = states.take(own, 1).transpose(2, 0, 3, 1)  # each (k, c, m): just right of the key place before
    V0, M0, psi0, y0 = start + V * unit_V + M * unit_M
    psi0 += psi
    y0 += y + psi * along
    a, b = grid.load
    shape = V0.shape
    shear, moment, deflection = np.empty((*shape, 3)), np.empty((*shape, 4)), np.empty((*shape, 6))
    shear[..., 0], shear[..., 1], shear[..., 2] = V0, -a, b / -2
    moment[..., 0] = M0
    np.divide(shear, _1_2_3, out=moment[..., 1:])
    deflection[..., 0], deflection[..., 1] = y0, psi0
    np.multiply(moment, grid.bending[:, None, :, None] / _TWICE, out=deflection[..., 2:])
    deflection[..., 1:4] += moment[..., 1:] * grid.shear[:, None, :, None]
    _, _, M, V = states.transpose(2, 0, 3, 1)  # each (k, c, K)
    jump_V, jump_M = grid.force[:, grid.key] + V, -grid.couple[:, grid.key] - M
    jump_V[:, :, 1:] -= V[:, :, :-1] + end[0]
    jump_M[:, :, 1:] += M[:, :, :-1] + V[:, :, :-1] * swept.end[1, :, cases + 1, None] + end[1]
    at = grid.support
    forces, couples = jump_V.take(at, 2), jump_M.take(at, 2) * (grid.kind[at] == FIXED)
    return [Response(grid.breaks, *each) for each in zip(shear, moment, deflection, forces, couples, strict=True)]
