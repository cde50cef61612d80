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
from server.mechanics.beam_system import Sweep, assemble, solve_system, sweep
from server.mechanics.piecewise import Candidates, Extremes, candidates, evaluate, extremes, restrict

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
    "span_ends",
]

Array = NDArray[np.float64]


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

    def candidates(self) -> tuple[Candidates, Candidates, Candidates]:
        """Return all places of possible extremes of shear, moment and deflection, found in one go."""
        c, m, d = self.deflection.shape
        curves = np.zeros((3, c, m, d))
        curves[0, ..., :3], curves[1, ..., :4], curves[2] = self.shear, self.moment, self.deflection
        found = candidates(self.breaks, curves)
        shear, moment, deflection = (Candidates(found.values[i], found.at[i]) for i in range(3))
        return shear, moment, deflection

    def extremes(self) -> tuple[Extremes, Extremes, Extremes]:
        """Return the extremes of shear [N], moment [N*mm] and deflection [mm] over the whole member."""
        shear, moment, deflection = self.candidates()
        return shear.over(), moment.over(), deflection.over()


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
    >>> shear, moment, deflection = solve(floor, [[LineLoad(0, 4000, 5, 5)]]).extremes()
    >>> round(float(moment.max[0])), round(float(moment.at_max[0])), round(float(deflection.max[0]), 6)
    (10000000, 2000, 37.037037)
    """
    require_stable(beam)
    grid = lay_out(beam, cases)
    swept = sweep(grid)
    A, rhs, scale = assemble(grid, swept)
    states = solve_system(A, rhs).reshape(len(grid.key), 4, len(cases)) * scale[:, None]
    return _curves(grid, swept, states)


def _curves(grid: Grid, swept: Sweep, states: Array) -> Response:
    """Return the polynomials and reactions from the states just right of the key places, (K, 4, c): y, psi, M, V."""
    cases, m = grid.load.shape
    y, psi, M, V = states.transpose(1, 2, 0)  # each (c, K)
    start, end = swept.start, swept.end
    own = np.repeat(np.arange(len(grid.first)), np.subtract(grid.stop, grid.first))
    V0, M0, psi0, y0 = start[:, :cases]
    unit_M, unit_V = start[:, cases], start[:, cases + 1]
    Mj, Vj, psij = M[:, own], V[:, own], psi[:, own]
    a, b, f, g = grid.load, grid.load_slope, grid.bending, grid.shear
    V0 = V0 + Vj
    M0 = M0 + Mj + Vj * unit_V[1]
    psi0 = psi0 + psij + Mj * unit_M[2] + Vj * unit_V[2]
    y0 = y0 + y[:, own] + psij * unit_V[1] + Mj * unit_M[3] + Vj * unit_V[3]
    shear, moment, deflection = np.empty((cases, m, 3)), np.empty((cases, m, 4)), np.empty((cases, m, 6))
    shear[..., 0], shear[..., 1], shear[..., 2] = V0, -a, b / -2
    moment[..., 0] = M0
    moment[..., 1:] = shear / [1, 2, 3]
    deflection[..., 0], deflection[..., 1] = y0, psi0
    deflection[..., 2:] = moment * f[:, None] / [-2, -6, -12, -20]
    deflection[..., 1:4] += moment[..., 1:] * g[:, None]
    arriving_V, arriving_M = np.zeros_like(V), np.zeros_like(M)
    arriving_V[:, 1:] = V[:, :-1] + end[0, :cases]
    arriving_M[:, 1:] = M[:, :-1] + V[:, :-1] * end[1, cases + 1] + end[1, :cases]
    at = grid.support
    force = (V - arriving_V + grid.force[:, grid.key])[:, at]
    couple = (arriving_M - M - grid.couple[:, grid.key])[:, at]
    return Response(grid.breaks, shear, moment, deflection, force, np.where(grid.kind[at] == 2, couple, 0.0))
