"""The member as the beam solver sees it: supports, hinges, stretches of constant stiffness, loads.

Units: N, mm, N/mm, N*mm; positions run from the member's left end. Loads act downward when positive, couples
are positive anticlockwise. Everything here is plain numbers that are checked once, when a `Beam` is made.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

from server.errors import InputError

SAME_PLACE = 1e-9  # positions closer than this share of the length are one place
SOFTEST, STIFFEST = 1e-6, 1e12  # N/mm: beyond these a spring is no support, or a pin


@dataclass(frozen=True, slots=True)
class Support:
    """A place where the member is held: "pin" (down and up), "fixed" (also against turning), "spring".

    Parameters
    ----------
    at : float
        Position [mm].
    kind : str
        "pin", "fixed" or "spring" [-].
    stiffness : float
        Vertical stiffness of a spring [N/mm]; not used for the other kinds.
    """

    at: float
    kind: Literal["pin", "fixed", "spring"]
    stiffness: float = 0.0


@dataclass(frozen=True, slots=True)
class Stretch:
    """A part of the member with constant stiffness.

    Parameters
    ----------
    start, end : float
        From where to where [mm].
    EI : float
        Bending stiffness [N*mm2].
    GA : float
        Shear stiffness [N]; infinity leaves shear deformation out.
    """

    start: float
    end: float
    EI: float
    GA: float = math.inf


@dataclass(frozen=True, slots=True)
class PointLoad:
    """A force at one place.

    Parameters
    ----------
    at : float
        Position [mm].
    value : float
        Force [N], downward positive.
    """

    at: float
    value: float


@dataclass(frozen=True, slots=True)
class LineLoad:
    """A load spread along the member, changing linearly from its start to its end.

    Parameters
    ----------
    start, end : float
        From where to where [mm].
    value_start, value_end : float
        Load there [N/mm], downward positive.
    """

    start: float
    end: float
    value_start: float
    value_end: float


@dataclass(frozen=True, slots=True)
class Couple:
    """A turning moment at one place.

    Parameters
    ----------
    at : float
        Position [mm].
    value : float
        Couple [N*mm], anticlockwise positive: the bending moment jumps by minus this value.
    """

    at: float
    value: float


Load = PointLoad | LineLoad | Couple


@dataclass(frozen=True)
class Beam:
    """A straight member; refused, with the reason in words, when it cannot be reckoned.

    Parameters
    ----------
    length : float
        Length [mm].
    supports : tuple of Support
        Supports in any order, at different places; their order is that of the reactions [mm, N/mm].
    hinges : tuple of float
        Places inside the member where it turns freely [mm].
    stretches : tuple of Stretch
        Stiffness along the member, end to end from left to right [mm, N*mm2, N].

    Raises
    ------
    InputError
        If a number is unusable (the field is "length", "supports[1].stiffness", "hinges[0]", "stretches[2].EI", ...).
        Whether the member stands is asked by `server.mechanics.beam.solve`.
    """

    length: float
    supports: tuple[Support, ...]
    hinges: tuple[float, ...]
    stretches: tuple[Stretch, ...]

    def __init__(
        self, length: float, supports: Sequence[Support], hinges: Sequence[float], stretches: Sequence[Stretch]
    ) -> None:
        object.__setattr__(self, "length", length)
        object.__setattr__(self, "supports", tuple(supports))
        object.__setattr__(self, "hinges", tuple(hinges))
        object.__setattr__(self, "stretches", tuple(stretches))
        if not (math.isfinite(length) and length > 0):
            raise InputError("length", f"length is {length:g} mm; enter a length greater than 0 mm.")
        self._check_supports()
        self._check_hinges()
        self._check_stretches()

    @property
    def same_place(self) -> float:
        """Distance below which two positions count as one place [mm]."""
        return self.length * SAME_PLACE

    def _on_member(self, field: str, at: float) -> None:
        if not -self.same_place <= at <= self.length + self.same_place:  # also false for nan
            raise InputError(field, f"{field} is {at:g} mm; enter a place on the member, 0 to {self.length:g} mm.")

    def _check_supports(self) -> None:
        for number, support in enumerate(self.supports):
            self._on_member(f"supports[{number}].at", support.at)
            if support.kind == "spring":
                _check_spring(f"supports[{number}].stiffness", support.stiffness)
            elif support.kind not in ("pin", "fixed"):
                raise InputError(
                    f"supports[{number}].kind",
                    f'a support of kind "{support.kind}"; choose "pin", "fixed" or "spring".',
                )
        order = sorted(range(len(self.supports)), key=lambda number: self.supports[number].at)
        for left, right in pairwise(order):
            if self.supports[right].at - self.supports[left].at <= self.same_place:
                raise InputError(
                    f"supports[{max(left, right)}].at",
                    f"two supports at {self.supports[left].at:g} mm; leave one out or move it.",
                )

    def _check_hinges(self) -> None:
        for number, at in enumerate(self.hinges):
            field = f"hinges[{number}]"
            self._on_member(field, at)
            if min(at, self.length - at) <= self.same_place:
                raise InputError(
                    field,
                    f"the hinge at {at:g} mm is at the end of the member; leave it out: an end without a fixed support"
                    " turns freely.",
                )
            if any(abs(at - other) <= self.same_place for other in self.hinges[:number]):
                raise InputError(field, f"two hinges at {at:g} mm; leave one out.")
            for support in self.supports:
                if support.kind == "fixed" and abs(support.at - at) <= self.same_place:
                    raise InputError(
                        field,
                        f"the hinge at {at:g} mm is on a fixed support, which leaves open what the support holds; make"
                        " the support a pin, or put the hinge to the left or right of it.",
                    )

    def _check_stretches(self) -> None:
        if not self.stretches:
            raise InputError("stretches", "no stiffness given; give at least one stretch from 0 to the member's end.")
        reached = 0.0
        for number, stretch in enumerate(self.stretches):
            field = f"stretches[{number}]"
            if not abs(stretch.start - reached) <= self.same_place:
                raise InputError(
                    f"{field}.start", f"the stretch starts at {stretch.start:g} mm; it must start at {reached:g} mm."
                )
            if not stretch.end - stretch.start > self.same_place:
                raise InputError(
                    f"{field}.end", f"the stretch ends at {stretch.end:g} mm; it must end after {stretch.start:g} mm."
                )
            if not (math.isfinite(stretch.EI) and stretch.EI > 0):
                raise InputError(f"{field}.EI", f"EI is {stretch.EI:g} N*mm2; enter a number greater than 0 N*mm2.")
            if not stretch.GA > 0:
                raise InputError(
                    f"{field}.GA", f"GA is {stretch.GA:g} N; enter a number greater than 0 N, or infinity."
                )
            reached = stretch.end
        if not abs(reached - self.length) <= self.same_place:
            raise InputError("stretches", f"the stretches end at {reached:g} mm; they must reach {self.length:g} mm.")


def _check_spring(field: str, stiffness: float) -> None:
    if not SOFTEST <= stiffness <= STIFFEST:
        raise InputError(
            field,
            f"the spring's stiffness is {stiffness:g} N/mm; enter {SOFTEST:g} to {STIFFEST:g} N/mm, use a pin for a"
            " support that does not give, or leave out a support that holds nothing.",
        )


def span_ends(beam: Beam) -> list[tuple[float, float, Literal["span", "overhang"]]]:
    """Return the parts between supports and beyond them, for deflection limits.

    Parameters
    ----------
    beam : Beam
        The member [mm].

    Returns
    -------
    list of (float, float, str)
        Start [mm], end [mm] and "span" (between two supports) or "overhang", from left to right.

    References
    ----------
    .. [1] Project contract: span / limit between supports, twice the length for an overhang.

    Examples
    --------
    >>> span_ends(Beam(5200, [Support(0, "pin"), Support(4000, "pin")], [], [Stretch(0, 5200, 1e12)]))
    [(0, 4000, 'span'), (4000, 5200, 'overhang')]
    """
    places = sorted(support.at for support in beam.supports)
    ends: list[tuple[float, float, Literal["span", "overhang"]]] = []
    if not places:
        return ends
    if places[0] > beam.same_place:
        ends.append((0.0, places[0], "overhang"))
    ends.extend((left, right, "span") for left, right in pairwise(places))
    if beam.length - places[-1] > beam.same_place:
        ends.append((places[-1], beam.length, "overhang"))
    return ends
