r"""A strip or plate bonded to a member in bending: the shear and peel with which it ends.

Units: N, mm, MPa. The strip and the rest of the section (the host) are the two beams of the general solver; together
they carry the member's moment, so at an end the host carries all of it and the strip takes its share over the transfer
length. Arms reach to the middle of the bond line.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError, positive
from server.mechanics.overlap_mesh import graded
from server.mechanics.overlap_solver import GAUSS, Adherend, Array, Loads, Pair, Solver


@dataclass(frozen=True)
class Host:
    """The section without the strip: EA [N], EI [N mm2], distance from its neutral axis to its bonded face [mm].

    Either stiffness may be infinite: by symmetry, as in the half of a core between two strips alike, which does not
    stretch under a moment and does not bend under a free strain.
    """

    EA: float
    EI: float
    distance: float


@dataclass(frozen=True)
class Strip:
    """The strip: modulus [MPa], width, thickness; ``taper`` the length over which either end thins to ``tip`` [mm].

    A strip that is no rectangle has an ``area`` [mm2], ``inertia`` [mm4] and ``distance`` from its axis to its bonded
    face [mm] of its own, and does not taper.
    """

    E: float
    width: float
    thickness: float
    taper: float = 0.0
    tip: float = 0.0
    area: float | None = None
    inertia: float | None = None
    distance: float | None = None

    def beam(self, thickness: Array | float, rise: Array | float, bond_line: float) -> Adherend:
        """The strip as a beam where it is so thick."""
        E, b = self.E, self.width
        if self.area is not None and self.inertia is not None and self.distance is not None:
            return Adherend(1 / (E * self.area), 1 / (E * self.inertia), self.distance + bond_line / 2)
        return Adherend(1 / (E * b * thickness), 12 / (E * b * thickness**3), (thickness + bond_line) / 2, rise)


@dataclass(frozen=True, eq=False)
class StripCourse:
    """Along the bond: places from the strip's left end [mm], shear and peel [MPa], force in the strip [N].

    Columns as the moments were given. Shear is positive where the strip gains tension from left to right; peel is
    positive where it pulls off.
    """

    at: Array
    shear: Array
    peel: Array
    force: Array


Moments = Callable[[Array], Array]


def strip_course(
    host: Host,
    strip: Strip,
    *,
    shear_modulus: float,
    E: float,
    bond_line: float,
    length: float,
    moment: Moments,
    strain: ArrayLike,
    face: Literal["bottom", "top"] = "bottom",
    bonded_width: float | None = None,
    breaks: ArrayLike = (),
) -> StripCourse:
    r"""Shear and peel along a bonded strip, for several load columns at once.

    Parameters
    ----------
    host : Host
        The section without the strip.
    strip : Strip
        The strip.
    shear_modulus, E : float
        Of the adhesive, E across the bond [MPa].
    bond_line : float
        Thickness of the bond line [mm].
    length : float
        Length of the strip [mm].
    moment : callable
        Places from the strip's left end [mm], any shape -> bending moments of the member [N mm], one more axis for the
        columns; positive sagging.
    strain : array_like
        Free strain of the strip over that of the host, one a column [-].
    face : {"bottom", "top"}
        The face of the host that the strip is bonded to.
    bonded_width : float, optional
        Where it is not the strip's [mm].
    breaks : array_like
        Places from the strip's left end where the moment has a kink [mm].

    Returns
    -------
    StripCourse
        Stresses [MPa] and force [N], ``(places, columns)``.

    Raises
    ------
    InputError
        If a size or stiffness is not above zero, or the taper does not fit.

    Notes
    -----
    Linear elastic, plane sections in host and strip, neither shears: an upper estimate where the host is soft in shear.
    The published closed forms for strip ends leave out part of the coupling between shear and peel and differ by some
    per cent in shear and tens of per cent in peel.

    References
    ----------
    .. [1] D. A. Bigwood and A. D. Crocombe, Int. J. Adhesion and Adhesives 9 (1989), 229-242.
    .. [2] S. T. Smith and J. G. Teng, "Interfacial stresses in plated beams", Eng. Structures 23 (2001), 857-871.
    """
    _check(host, strip, shear_modulus, E, bond_line, length)
    b = float(strip.width if bonded_width is None else positive("bonded_width", bonded_width, "mm"))
    stiffness = shear_modulus * b / bond_line, E * b / bond_line
    thinnest = strip.tip if strip.taper else strip.thickness
    soft = strip.beam(thinnest, 0.0, bond_line)
    a, d, own = (float(np.asarray(each)) for each in (soft.stretch, soft.bend, soft.arm))
    arm = host.distance + bond_line / 2
    slip = stiffness[0] * (a + 1 / host.EA + own**2 * d + arm**2 / host.EI)
    lift = (stiffness[1] * (d + 1 / host.EI)) ** 0.25
    ends = [strip.taper, length - strip.taper] if strip.taper else []
    mesh = graded(length, max(np.sqrt(slip), lift), places=np.array([*ends, *np.ravel(breaks)]))
    free = np.atleast_1d(np.asarray(strain, dtype=float))[None]
    none, sign = np.zeros_like(free), -1.0 if face == "bottom" else 1.0
    loads = Loads(
        left=(none, none, none),
        right=(none, none, none),
        axial=none,
        moment=lambda x: sign * moment(x),
        mismatch=free,
    )
    pair = Pair(
        _beam(strip, mesh.inside(GAUSS), length, bond_line), Adherend(1 / host.EA, 1 / host.EI, arm), *stiffness
    )
    course = Solver(pair, mesh).solve(loads)
    return StripCourse(
        at=course.at[0],
        shear=shear_modulus / bond_line * course.slip[0],
        peel=E / bond_line * course.opening[0],
        force=course.force[0],
    )


def _check(host: Host, strip: Strip, shear_modulus: float, E: float, bond_line: float, length: float) -> None:
    for name, stiffness in (("host.EA", host.EA), ("host.EI", host.EI)):
        if not stiffness > 0:
            raise InputError(name, f"{name} is {stiffness:g}; a stiffness greater than 0 is needed.")
    for name, value, unit in (
        ("strip.E", strip.E, "MPa"),
        ("strip.width", strip.width, "mm"),
        ("strip.thickness", strip.thickness, "mm"),
        ("shear_modulus", shear_modulus, "MPa"),
        ("E", E, "MPa"),
        ("bond_line", bond_line, "mm"),
        ("length", length, "mm"),
    ):
        positive(name, value, unit)
    if strip.taper:
        positive("strip.tip", strip.tip, "mm")
        if not 0 < 2 * strip.taper <= length or strip.tip > strip.thickness:
            raise InputError("strip.taper", "the tapers do not fit: two of them within the strip, thinner at the tip.")


def _beam(strip: Strip, places: Array, length: float, bond_line: float) -> Adherend:
    """The strip at every collocation point."""
    if not strip.taper:
        return strip.beam(strip.thickness, 0.0, bond_line)
    slope = (strip.thickness - strip.tip) / strip.taper
    thick = np.minimum(strip.thickness, strip.tip + slope * np.minimum(places, length - places))
    rise = np.where(places < strip.taper, slope, np.where(places > length - strip.taper, -slope, 0.0)) / 2
    return strip.beam(thick, rise, bond_line)
