"""Members whose layers bend together and slide on flexible joints: partial composite action, solved exactly.

Any number of layers, each with its own axial and bending stiffness and height, joined by joints whose flow is
proportional to their slip; any supports, hinges and loads of the beam solver; layers and zones of stiffness may start
and stop along the member. All layers share deflection and rotation. Units: N, mm, N/mm, N*mm; signs as in
`server.mechanics.beam_model`, axial force positive in tension, slip positive where the joint's second layer moves to
the right against the first. Linear elastic, small deflections.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.mechanics.beam import Response
from server.mechanics.beam_loads import lay_out
from server.mechanics.beam_model import Load
from server.mechanics.beam_stability import require_stable
from server.mechanics.beam_system import FIXED
from server.mechanics.slip_curves import Curves, Stations, stations, trace, trace_deflection
from server.mechanics.slip_model import FlexibleJoint, Layer, LayeredMember, Share, Zone
from server.mechanics.slip_stacks import Stacks, Tree, plant, stack
from server.mechanics.slip_system import Chain, assemble, link, solve_system, spread_loads

__all__ = [
    "Curves",
    "FlexibleJoint",
    "Layer",
    "LayeredMember",
    "Share",
    "SlipResponse",
    "Stations",
    "Zone",
    "solve_slip",
]

Array = NDArray[np.float64]


@dataclass(frozen=True)
class SlipResponse:
    """What a layered member does under each load case, or each combination of cases.

    Parameters
    ----------
    member : LayeredMember
        The member [N, mm].
    tree, stacks, chain : Tree, Stacks, Chain
        Its unknowns, sections in modes and breaks.
    breaks : numpy.ndarray
        Places where something changes, (m + 1,) [mm].
    states : numpy.ndarray
        The unknowns at every break, (K, n + 4, c) [N, mm].
    reaction_force, reaction_couple : numpy.ndarray
        Upward force [N] and anticlockwise couple [N*mm] on the member at each support, (c, s).
    """

    member: LayeredMember
    tree: Tree
    stacks: Stacks
    chain: Chain
    breaks: Array
    states: Array
    reaction_force: Array
    reaction_couple: Array

    @cached_property
    def stations(self) -> Stations:
        """Places between which the curves are written as polynomials: close where a wave is steep."""
        return stations(self.stacks, self.chain, self.breaks)

    @cached_property
    def curves(self) -> Curves:
        """Shear, moment, deflection, and what every layer and joint carries, along the member."""
        return trace(self.member, self.tree, self.stacks, self.chain, self.stations, self.states)

    def curves_at(self, places: Stations) -> Curves:
        """Return the curves between stations chosen for another member with the same breaks.

        Parameters
        ----------
        places : Stations
            For instance those of the same member with stiffer joints.
        """
        if places is self.stations:
            return self.curves
        return trace(self.member, self.tree, self.stacks, self.chain, places, self.states)

    def deflection_at(self, places: Stations) -> Array:
        """Return the deflection of `curves_at`, without finding the rest.

        Parameters
        ----------
        places : Stations
            For instance those of the same member with stiffer joints.
        """
        if places is self.stations and "curves" in self.__dict__:
            return self.curves.deflection
        return trace_deflection(self.member, self.tree, self.stacks, self.chain, places, self.states)

    @cached_property
    def response(self) -> Response:
        """The member as a whole, as the beam solver would give it, cut at the stations."""
        found = self.curves
        return Response(
            self.stations.places,
            found.shear,
            found.moment,
            found.deflection,
            self.reaction_force,
            self.reaction_couple,
        )

    def combine(self, factors: ArrayLike) -> SlipResponse:
        """Return the response to combinations of the cases.

        Parameters
        ----------
        factors : array_like
            Factor of each case in each combination, (k, c) [-].
        """
        share = np.asarray(factors, dtype=float)
        chain = self.chain
        mixed = Chain(
            width=chain.width,
            left=chain.left,
            kind=chain.kind,
            load=np.einsum("kc,scm->skm", share, chain.load),
            force=share @ chain.force,
            couple=share @ chain.couple,
            spring=chain.spring,
            softness=chain.softness,
            support=chain.support,
            waves=chain.waves,
            ends=chain.ends,
        )
        return SlipResponse(
            self.member,
            self.tree,
            self.stacks,
            mixed,
            self.breaks,
            self.states @ share.T,
            share @ self.reaction_force,
            share @ self.reaction_couple,
        )


def solve_slip(member: LayeredMember, cases: Sequence[Sequence[Load]]) -> SlipResponse:
    r"""Solve a layered member for all load cases at once.

    .. math:: N_i' = \sum_j \pm q_j, \quad q_j = k_j s_j, \quad s_j = u_b - u_a - (z_b - z_a) \psi, \quad
              M = -\psi' \sum_i EI_i - \sum_i N_i z_i, \quad M' = V, \quad y' = \psi + V / GA

    with :math:`N_i = EA_i u_i'`; a and b are the layers a joint joins.

    Parameters
    ----------
    member : LayeredMember
        The member [mm, N, N*mm2, N/mm2].
    cases : sequence of sequence of Load
        Loads of each case [N, N/mm, N*mm, mm]. A couple turns all layers, each by its share of bending stiffness.

    Returns
    -------
    SlipResponse
        One row a case; exact up to rounding at every break, and in between as curves.

    Raises
    ------
    InputError
        If the member can move without bending, or a load cannot be placed.

    Notes
    -----
    Between two places where something changes, stiffness is constant and loads are straight lines, so the equations
    have closed solutions (`slip_modes`); no mesh is chosen. Without joints the layers lie loose, each with its share of
    bending stiffness; as the joints stiffen the member tends to the rigid one, the difference in proportion to the
    joints' give. Left out: layers that lift off one another, slip with friction, shear deformation of single layers,
    the spread of stress across a wide layer.

    References
    ----------
    .. [1] N. M. Newmark, C. P. Siess and I. M. Viest, "Tests and analysis of composite beams with incomplete
       interaction", Proc. Society for Experimental Stress Analysis 9 (1951), 75-92.
    .. [2] U. A. Girhammar and D. H. Pan, "Exact static analysis of partially composite beams and beam-columns",
       Int. J. Mech. Sci. 49 (2007), 239-255.

    Examples
    --------
    >>> from server.mechanics.beam_model import LineLoad, Support
    >>> deck = LayeredMember(
    ...     4200, [Support(0, "pin"), Support(4200, "pin")], [],
    ...     [Layer(0, 4200, 22.8e6, 427.5e6, 227.5), Layer(0, 4200, 108.9e6, 439.23e9, 110.0)],
    ...     [FlexibleJoint(1, 0, (Zone(0, 4200, 10.0),))],
    ... )
    >>> found = solve_slip(deck, [[LineLoad(0, 4200, 1.5, 1.5)]]).response.extremes()
    >>> round(float(found.max[2, 0]), 5)  # Newmark's closed form: 10.72249
    10.72249
    """
    outline = member.outline()
    require_stable(outline)
    grid = lay_out([outline], cases)
    tree = plant(member)
    stacks = stack(member, tree, grid.breaks)
    chain = link(grid, stacks)
    states = solve_system(assemble(member, tree, stacks, chain))
    force, couple = _reactions(member, chain, states)
    return SlipResponse(member, tree, stacks, chain, grid.breaks, states, force, couple)


def _reactions(member: LayeredMember, chain: Chain, states: Array) -> tuple[Array, Array]:
    """Return force and couple at every support: what shear and moment jump by there beside the loads."""
    n = len(member.layers)
    V, M = states[:, n + 3].T, states[:, n + 2].T  # (c, K), just right of each break
    V_before, M_before = np.zeros_like(V), np.zeros_like(M)
    V_before[:, 1:], M_before[:, 1:] = V[:, :-1], M[:, :-1]  # a hinge passes both on
    taken, left = spread_loads(chain), chain.left
    V_before[:, left + 1] = V[:, left] - taken.V
    M_before[:, left + 1] = M[:, left] + V[:, left] * chain.width - taken.M
    at = chain.support
    force = V[:, at] - V_before[:, at] + chain.force[:, at]
    couple = -(M[:, at] - M_before[:, at] + chain.couple[:, at])
    return force, couple * (chain.kind[at] == FIXED)
