"""Where bonds end along a member: what is bonded to what there, and with which stiffnesses it is reckoned.

A bonded piece (the strip) ends at a place; what runs on there, or what the strip is bonded to at the member's own end,
is the host. Flat faces above or below are reckoned as two beams on shear and peel springs; all others are left to the
caller, with the reason.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

from server import documents
from server.checks.crosssection import Body, Part, Site, Stretch
from server.mechanics.overlap_strip import Host, Strip
from server.mechanics.section import Piece, SectionProperties, properties

LEVEL = 1e-6  # of a contact's length: how level a face must lie
SAME = 1e-9
Side = Literal["left", "right"]


@dataclass(frozen=True)
class Bonded:
    """A piece bonded to the rest of the section by one adhesive on one flat face; ``ends`` the places where it ends.

    ``host`` carries load columns, ``free`` those of free strain: they differ where two strips alike face each other,
    and each then has half of the core by symmetry. ``share`` is the part of the member's moment that goes with
    ``host``. ``apart``: E-weighted first moment of the strip in the whole section over its EI, for the mean flow.
    """

    part: Part
    sites: tuple[Site, ...]
    adhesive: str
    width: float
    face: Literal["bottom", "top"]
    strip: Strip
    host: Host
    free: Host
    share: float
    host_parts: tuple[Part, ...]
    whole: SectionProperties
    first_moment: float
    twin: str = ""

    @property
    def length(self) -> float:
        """Of the strip [mm]."""
        return self.part.end - self.part.start

    @property
    def surfaces(self) -> tuple[Part, ...]:
        """The pieces whose surfaces the bond joins: the strip, then those it lies on."""
        others = [site.second if site.first is self.part else site.first for site in self.sites]
        return (self.part, *{other.index: other for other in others}.values())


@dataclass(frozen=True)
class End:
    """One end of a bonded piece: where, on which side of the piece, how it is reckoned, or why it is not."""

    part: Part
    at: float
    side: Side
    inside: bool
    bonded: Bonded | None
    reason: str = ""

    @property
    def title(self) -> str:
        """'end of strip, 250 mm from the left'."""
        return f"{'start' if self.side == 'left' else 'end'} of {self.part.name}, {self.at:g} mm from the left end"


def ends_of(document: documents.MemberDocument, body: Body, *, outer: bool = False) -> list[End]:
    """Every end of a bonded piece inside the member; ``outer``: also those at the member's own ends."""
    found = []
    for part in body.parts:
        for at, side in ((part.start, "left"), (part.end, "right")):
            inside = 0 < at < body.length
            if inside or outer:
                end = _end(document, body, part, at, "left" if side == "left" else "right", inside)
                if end is not None:
                    found.append(end)
    return found


def _end(document: documents.MemberDocument, body: Body, part: Part, at: float, side: Side, inside: bool) -> End | None:
    here, beyond = _beside(body, part, at, side)
    sites = [s for s in here.section.sites if s.bonded and part in (s.first, s.second)]
    others = [p for p in here.section.parts if p is not part]
    if inside:
        assert beyond is not None
        there = {p.index for p in beyond.section.parts}
        running = [p for p in others if p.index in there]
        stopping = [p for p in others if p.index not in there]
        sites = [s for s in sites if (s.second if s.first is part else s.first).index in there]
    else:
        running, stopping = others, []
    if not sites or not running:
        return None
    reason = _not_flat(part, sites)
    if reason:
        return End(part, at, side, inside, None, reason)
    twin = _twin(part, sites, here, others)
    if not inside and twin is not None:
        stopping = [twin]
    faced = twin if twin in stopping else None
    core = [p for p in running if p is not faced]
    if not core:
        return None
    bonded = _bonded(document, here, part, sites, core, faced)
    return End(part, at, side, inside, bonded)


def _beside(body: Body, part: Part, at: float, side: Side) -> tuple[Stretch, Stretch | None]:
    """The stretch just inside the piece's end, and the one beyond it."""
    inner = next(s for s in body.stretches if (s.start if side == "left" else s.end) == at)
    outer = next((s for s in body.stretches if (s.end if side == "left" else s.start) == at), None)
    return inner, outer


def _not_flat(part: Part, sites: Sequence[Site]) -> str:
    """Why the bond is not one flat face above or below; '' where it is."""
    heights = []
    for site in sites:
        contact = site.contact
        level = abs(float(contact.end[1] - contact.start[1])) <= LEVEL * contact.length
        if contact.line is not None or not level:
            return "its bond does not lie level, so how it bends away from what it is bonded to has no method here"
        heights.append(float(contact.middle[1]))
    if max(heights) - min(heights) > 0.1:
        return "it is bonded on two faces, which share its force in a way that has no method here"
    if len({site.spec.adhesive for site in sites}) > 1:
        return "its bonds have different adhesives"
    return ""


def _twin(part: Part, sites: Sequence[Site], here: Stretch, others: Sequence[Part]) -> Part | None:
    """A piece alike on the opposite face of the core, of the same length, bonded in the same way."""
    index = {p.index: i for i, p in enumerate(here.section.parts)}
    pieces = here.section.properties.pieces
    own = index[part.index]
    for other in others:
        i = index[other.index]
        bonds = [s for s in here.section.sites if s.bonded and other in (s.first, s.second)]
        alike = (
            other.spec.material == part.spec.material
            and (other.start, other.end) == (part.start, part.end)
            and math.isclose(pieces.area[i], pieces.area[own], rel_tol=1e-6)
            and math.isclose(pieces.inertia[i, 0], pieces.inertia[own, 0], rel_tol=1e-6)
            and bool(bonds)
            and {s.spec.adhesive for s in bonds} == {s.spec.adhesive for s in sites}
            and math.isclose(sum(s.width for s in bonds), sum(s.width for s in sites), rel_tol=1e-6)
            and not _not_flat(other, bonds)
        )
        if not alike:
            continue
        core = [p for p in here.section.parts if p is not part and p is not other]
        if not core:
            continue
        middle = _of(here, core).neutral_axis[1]
        one, two = (float(bond[0].contact.middle[1]) - middle for bond in (sites, bonds))
        if one * two < 0 and math.isclose(one, -two, rel_tol=1e-3):
            return other
    return None


def _of(here: Stretch, parts: Sequence[Part]) -> SectionProperties:
    index = {p.index: i for i, p in enumerate(here.section.parts)}
    pieces: list[Piece] = [here.section.pieces[index[p.index]] for p in parts]
    return properties(pieces)


def _bonded(
    document: documents.MemberDocument,
    here: Stretch,
    part: Part,
    sites: Sequence[Site],
    core: Sequence[Part],
    twin: Part | None,
) -> Bonded:
    name = sites[0].spec.adhesive
    assert name is not None
    adhesive = document.adhesives[name]
    assert isinstance(adhesive, documents.Adhesive)
    line = adhesive.thickness or 0.0
    own = properties([here.section.pieces[[p.index for p in here.section.parts].index(part.index)]])
    host = _of(here, core)
    contact = sites[0].contact
    height, rest = float(contact.middle[1]), max(line - contact.gap, 0.0) / 2 - line / 2
    distance = abs(float(host.neutral_axis[1]) - height) + rest
    face: Literal["bottom", "top"] = "bottom" if float(own.neutral_axis[1]) < height else "top"
    width = sum(site.width * site.spec.coverage for site in sites)
    area, inertia = float(own.pieces.area[0]), float(own.pieces.inertia[0, 0])
    strip = Strip(
        E=part.material.E,
        width=area / _depth(part),
        thickness=_depth(part),
        area=area,
        inertia=inertia,
        distance=abs(float(own.neutral_axis[1]) - height) + rest,
    )
    if isinstance(part.spec, documents.Rectangle) and part.spec.turn % 90 == 0:
        strip = Strip(E=part.material.E, width=area / _depth(part), thickness=_depth(part))
    plain = Host(host.EA, host.EI, distance)
    loaded, free, share = plain, plain, 1.0
    if twin is not None:
        # by symmetry: under a moment the core does not stretch, under free strain it does not bend
        loaded, free, share = Host(math.inf, host.EI / 2, distance), Host(host.EA / 2, math.inf, distance), 0.5
    whole = here.section.properties
    index = [p.index for p in here.section.parts].index(part.index)
    return Bonded(
        part=part,
        sites=tuple(sites),
        adhesive=name,
        width=width,
        face=face,
        strip=strip,
        host=loaded,
        free=free,
        share=share,
        host_parts=tuple(core),
        whole=whole,
        first_moment=abs(float(whole.first_moments[index])),
        twin="" if twin is None else twin.name,
    )


def _depth(part: Part) -> float:
    return part.top - part.bottom


def unlike(end: End, document: documents.MemberDocument) -> Iterator[Part]:
    """The pieces of another material that a piece is bonded to at an end."""
    assert end.bonded is not None
    own = end.part.spec.material
    for other in end.bonded.surfaces[1:]:
        if other.spec.material != own:
            yield other
