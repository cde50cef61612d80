r"""Influence lines of a member: what a unit load does at a place, over the position of the load.

For a beam of constant stiffness by stretches the influence line of an action at a place is a cubic in the load's
position p between key places (ends, supports, hinges, changes of stiffness), with a jump or a kink where the load
passes the place itself. Units: N, mm, N*mm; signs as in `server.mechanics.beam_model`.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server.mechanics.beam import Beam, PointLoad, solve

Array = NDArray[np.float64]
Quantity = Literal["shear", "moment", "deflection"]


@dataclass(frozen=True)
class Lines:
    """Influence lines of one action at n places, as cubics in p - knots[j] for a load left and right of the place.

    Parameters
    ----------
    x : numpy.ndarray
        The places, (n,) [mm].
    left, right : numpy.ndarray
        Coefficients for a load left of x and right of x, (n, m, 4) [action per N, over mm^k].
    """

    x: Array
    left: Array
    right: Array


class Influence:
    """The influence lines of one member.

    Parameters
    ----------
    beam : Beam
        The member [mm, N*mm2, N, N/mm].

    Raises
    ------
    InputError
        As `server.mechanics.beam.solve`.

    Notes
    -----
    Reactions come from unit loads at four places an interval, which settle a cubic; shear and moment follow from
    reactions by equilibrium; deflection at x under a load at p is that at p under a load at x (Maxwell).

    References
    ----------
    .. [1] H. Müller-Breslau, "Die neueren Methoden der Festigkeitslehre", Leipzig 1886 (influence lines).
    .. [2] J. C. Maxwell, "On the calculation of the equilibrium and stiffness of frames", Phil. Mag. 27 (1864), 294.
    """

    def __init__(self, beam: Beam) -> None:
        self.beam = beam
        places = {0.0, beam.length, *(s.at for s in beam.supports), *beam.hinges, *(s.start for s in beam.stretches)}
        knots = np.array(sorted(places))
        self.knots: Array = knots[np.append(True, np.diff(knots) > beam.same_place)]
        self.knots[-1] = beam.length
        self.supports = np.array([s.at for s in beam.supports])

    @cached_property
    def _reactions(self) -> tuple[Array, Array]:
        """Coefficients of every reaction's force and couple, (s, m, 4)."""
        width = np.diff(self.knots)
        thirds = self.knots[:-1, None] + width[:, None] * np.array([0.0, 1 / 3, 2 / 3])
        places = np.append(thirds.ravel(), self.knots[-1])
        found = solve(self.beam, [[PointLoad(float(p), 1.0)] for p in places])
        nodes = np.arange(len(width))[:, None] * 3 + np.arange(4)
        t = np.array([0.0, 1 / 3, 2 / 3, 1.0])
        fit = np.linalg.inv(np.vander(t, 4, increasing=True))
        scale = width[:, None] ** -np.arange(4.0)
        force, couple = (
            np.einsum("kn,mns->smk", fit, values[nodes]) * scale
            for values in (found.reaction_force, found.reaction_couple)
        )
        return force, couple

    def reactions(self) -> tuple[Lines, Lines]:
        """Influence lines of the reactions' forces [N/N] and couples [N*mm/N], one a support."""
        nowhere = np.full(len(self.supports), -np.inf)
        return tuple(Lines(nowhere, line, line) for line in self._reactions)  # type: ignore[return-value]

    def _held(self, x: Array, right: NDArray[np.bool_]) -> NDArray[np.bool_]:
        """Which supports stand left of each place, (n, s); one at the place itself counts on its right side."""
        there = np.abs(self.supports - x[:, None]) <= self.beam.same_place
        return np.where(there, right[:, None], self.supports < x[:, None])

    def shear(self, x: Array, right: NDArray[np.bool_]) -> Lines:
        """Influence lines of the shear just left or (``right``) just right of places x [mm]: N per N."""
        force, _ = self._reactions
        after = np.einsum("ns,smk->nmk", self._held(x, right).astype(float), force)
        before = after.copy()
        before[..., 0] -= 1
        return Lines(x, before, after)

    def moment(self, x: Array, right: NDArray[np.bool_]) -> Lines:
        """Influence lines of the bending moment at places x [mm]: N*mm per N."""
        force, couple = self._reactions
        held = self._held(x, right).astype(float)
        arms = held * (x[:, None] - self.supports)
        after = np.einsum("ns,smk->nmk", arms, force) - np.einsum("ns,smk->nmk", held, couple)
        before = after.copy()
        before[..., 0] -= x[:, None] - self.knots[:-1]
        before[..., 1] += 1
        return Lines(x, before, after)

    def deflection(self, x: Array, right: NDArray[np.bool_]) -> Lines:
        """Influence lines of the deflection at places x [mm]: mm per N."""
        found = solve(self.beam, [[PointLoad(float(p), 1.0)] for p in x])
        first = np.searchsorted(found.breaks, self.knots[:-1] - self.beam.same_place)
        last = np.append(first[1:], len(found.breaks) - 1) - 1
        shift = found.breaks[last] - self.knots[:-1]
        cubic = found.deflection[..., :4]
        return Lines(x, cubic[:, first], shifted(cubic[:, last], -shift))

    def lines(self, quantity: Quantity, x: Array, right: NDArray[np.bool_]) -> Lines:
        """Influence lines of one quantity at places x [mm]."""
        made: Lines = getattr(self, quantity)(x, right)
        return made


def shifted(c: Array, by: Array) -> Array:
    """Cubics c(s) written in s' where s = s' + by; the last axis of ``c`` holds the coefficients."""
    a, b, e, f = np.moveaxis(c, -1, 0)
    return np.stack([a + by * (b + by * (e + by * f)), b + by * (2 * e + 3 * by * f), e + 3 * by * f, f], axis=-1)
