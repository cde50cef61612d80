"""From the document's pieces and joints to the cross-sections of the member.

Finds the contacts, places every joint on its contact, and cuts the member into stretches of constant
section between the ends of its pieces. What the geometry forbids is refused here, by name.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.outlines import outlines
from server.checks.section_field import Settled, Wanted, bond_of, settle
from server.errors import DocumentError, Fault
from server.mechanics.beam_model import SAME_PLACE
from server.mechanics.beam_two_planes import bending_flexibility, shear_flexibility
from server.mechanics.contacts import Contact, contacts, in_order, overlap
from server.mechanics.cuts import above
from server.mechanics.field import Bond, Field, remembered_field
from server.mechanics.field_cuts import field_cuts
from server.mechanics.field_stress import torsion_stress
from server.mechanics.flow import JointFlow, JointLine, joint_flows, tied
from server.mechanics.outlines import nearest
from server.mechanics.plane_cuts import PlaneCuts, plane_cuts
from server.mechanics.polygon import Edges, edges_of
from server.mechanics.round_contacts import Round, round_contacts
from server.mechanics.section import (
    HorizontalCut,
    Piece,
    SectionProperties,
    largest_cuts,
    properties,
    reweighted,
    shear_stiffness,
)
from server.mechanics.shapes import Shape
from server.remembered import Remembered

LEVEL = 1e-9  # of sqrt(EI EI_lateral): a product below it is rounding
GAP = 0.05  # mm two faces may stand apart and still touch


@dataclass(frozen=True, eq=False)  # two parts are never the same by what they hold; comparing that is slow
class Part:
    """A piece of the document, placed: its outline and how far it runs along the member."""

    index: int
    name: str
    spec: documents.Piece
    material: documents.Material
    shape: Shape
    start: float
    end: float

    @property
    def outline(self) -> NDArray[np.float64]:
        """Corners of the outer ring, anticlockwise."""
        return self.shape.outline

    @cached_property
    def box(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Lower left and upper right corner of the bounding box."""
        return self.shape.box()

    @cached_property
    def bottom(self) -> float:
        return float(self.box[0][1])

    @cached_property
    def top(self) -> float:
        return float(self.box[1][1])

    @cached_property
    def lies_flat(self) -> bool:
        """Whether the piece is wider than deep, so that horizontal cuts pass through its thickness."""
        return float(self.box[1][0] - self.box[0][0]) > self.top - self.bottom

    @cached_property
    def rolls(self) -> bool:
        """Whether shear at its face rolls the fibres: layered material, or grain across the member."""
        return self.spec.grain == "across" or self.material.layered

    @cached_property
    def body_rolls(self) -> bool:
        """Whether shear on horizontal cuts through its body rolls the fibres (a panel on edge shears in its plane)."""
        return self.spec.grain == "across" or (self.material.layered and self.lies_flat)

    @cached_property
    def shear_modulus(self) -> float | None:
        """The modulus that horizontal cuts see."""
        if self.body_rolls and self.material.G_rolling is not None:
            return self.material.G_rolling
        return self.material.G

    @cached_property
    def field_modulus(self) -> float | None:
        """The modulus of the section's field: the rolling one for a layered piece or one with its grain across."""
        if self.rolls and self.material.G_rolling is not None:
            return self.material.G_rolling
        return self.material.G

    def coexists(self, other: Part) -> bool:
        return min(self.end, other.end) > max(self.start, other.start)


@dataclass(frozen=True, eq=False)
class Site:
    """A joint of the document placed on its contact."""

    index: int
    id: str
    spec: documents.Joint
    first: Part
    second: Part
    contact: Contact
    width: float

    @cached_property
    def bonded(self) -> bool:
        return self.spec.adhesive is not None

    def present(self, start: float, end: float) -> bool:
        """Whether both of its pieces run all along from one place to the other."""
        one, other = self.first, self.second
        return one.start <= start and other.start <= start and one.end >= end and other.end >= end


@dataclass(frozen=True)
class Beyond:
    """The parts above a horizontal cut, by their position: area there [mm2] and height of its centroid [mm]."""

    positions: tuple[int, ...]
    area: list[float]
    height: list[float]


@dataclass(frozen=True)
class CrossSection:
    """The section over one or more stretches: the parts present and all that follows from them.

    ``shares``: how much of each part counts (effective width); empty where all of every part does.
    """

    parts: tuple[Part, ...]
    sites: tuple[Site, ...]
    pieces: tuple[Piece, ...]
    properties: SectionProperties
    shares: tuple[float, ...] = ()
    wanted: Wanted = "auto"

    def share(self, position: int) -> float:
        """How much of the part at a position counts."""
        return self.shares[position] if self.shares else 1.0

    @cached_property
    def shear_stiffness(self) -> float | None:
        """GA from the field where it was solved and takes the modulus that bending sees, else from horizontal cuts."""
        field = self.settled.field
        if field is not None and self._sees_alike:
            return self.properties.EI**2 / float(field.energy[0, 0])
        return shear_stiffness(self.pieces, self.properties)

    @property
    def by_field(self) -> bool:
        """Whether GA comes from the field."""
        return self.settled.field is not None and self._sees_alike

    @property
    def _sees_alike(self) -> bool:
        """False where a panel stands on edge: it shears in its plane, which the field takes as rolling."""
        return all(part.field_modulus == part.shear_modulus for part in self.parts)

    @cached_property
    def bending_flexibility(self) -> NDArray[np.float64]:
        """(2, 2) curvatures per moment, down and to the right."""
        whole = self.properties
        return bending_flexibility(whole.EI, whole.EI_lateral, whole.EI_product)

    @cached_property
    def shear_flexibility(self) -> NDArray[np.float64] | None:
        """(2, 2) shear strains per shear force, down and to the right; None without the field."""
        if self.settled.field is None:
            return None
        return shear_flexibility(self.bending_flexibility, self._bent_field(self.pieces, self.properties).energy)

    def _bent_field(self, pieces: Sequence[Piece], whole: SectionProperties) -> Field:
        """The field with the moduli that bending sees."""
        return remembered_field(pieces, whole, self.bonds)

    @cached_property
    def softened_both_ways(self) -> tuple[NDArray[np.float64], NDArray[np.float64] | None]:
        """As the two flexibilities, with each piece's E and G divided by 1 + creep."""
        soft, whole = self._soft
        bending = bending_flexibility(whole.EI, whole.EI_lateral, whole.EI_product)
        if self.settled.field is None:
            return bending, None
        return bending, shear_flexibility(bending, self._bent_field(soft, whole).energy)

    @cached_property
    def centroids(self) -> dict[int, float]:
        """Height of each part's centroid, by its index."""
        heights = self.properties.pieces.centroid[:, 1].tolist()
        return {part.index: height for part, height in zip(self.parts, heights, strict=True)}

    @cached_property
    def beyond(self) -> dict[int, Beyond]:
        """What lies above the cut through each part where its shear is largest, by the part's index."""
        areas, heights = above(self.properties.bands, [cut.up for cut in self.cuts.values()])
        found = {}
        for index, area, height in zip(self.cuts, areas.tolist(), heights.tolist(), strict=True):
            least = 1e-12 * sum(area)
            over = tuple(place for place, size in enumerate(area) if size > least)
            found[index] = Beyond(over, [area[place] for place in over], [height[place] for place in over])
        return found

    @cached_property
    def cuts(self) -> dict[int, HorizontalCut]:
        field = self.settled.field
        if field is None:
            found = largest_cuts(self.pieces, self.properties)
        else:
            found = field_cuts(self.pieces, self.properties, self.bonds, field)
        return {part.index: cut for part, cut in zip(self.parts, found, strict=True)}

    @cached_property
    def plane_cuts(self) -> dict[int, PlaneCuts]:
        """Level and upright cuts of each part, by its index, where the member bends about both axes."""
        found = plane_cuts(self.pieces, self.properties, self.bonds, self.settled.field)
        return {part.index: cut for part, cut in zip(self.parts, found, strict=True)}

    @cached_property
    def bonds(self) -> tuple[Bond, ...]:
        """The joints as the field sees them."""
        position = {part.index: i for i, part in enumerate(self.parts)}
        return tuple(
            bond_of(position[s.first.index], position[s.second.index], s.contact, s.spec.width) for s in self.sites
        )

    @cached_property
    def settled(self) -> Settled:
        """Flows by hand, and by the field where it is wanted."""
        alike = tuple(replace(p, G=part.field_modulus) for p, part in zip(self.pieces, self.parts, strict=True))
        hand = joint_flows(alike, self.properties, lines_of(self.parts, self.sites))
        return settle(alike, self.properties, hand, self.bonds, wanted=self.wanted)

    @cached_property
    def flows(self) -> dict[int, JointFlow]:
        """Flow of every joint, by its place in the document."""
        return {site.index: flow for site, flow in zip(self.sites, self.settled.flows, strict=True)}

    @cached_property
    def hand_flows(self) -> dict[int, JointFlow]:
        """What cuts and symmetry alone say, by the joint's place in the document."""
        return {site.index: flow for site, flow in zip(self.sites, self.settled.hand, strict=True)}

    @cached_property
    def torsion_stress(self) -> dict[int, float]:
        """Shear stress in each part per torque, by its index; empty without the field."""
        field = self.settled.field
        if field is None:
            return {}
        alike = [replace(p, G=part.field_modulus) for p, part in zip(self.pieces, self.parts, strict=True)]
        found = torsion_stress(alike, self.properties, field).tolist()
        return {part.index: value for part, value in zip(self.parts, found, strict=True)}

    def place(self, site: Site) -> int:
        """Of a joint of the document among those of this section."""
        return next(place for place, other in enumerate(self.sites) if other.index == site.index)

    @cached_property
    def softened(self) -> tuple[float, float | None]:
        """EI and GA with each piece's E and G divided by 1 + creep."""
        soft, whole = self._soft
        if self.by_field:
            return whole.EI, whole.EI**2 / float(remembered_field(soft, whole, self.bonds).energy[0, 0])
        return whole.EI, shear_stiffness(soft, whole)

    @cached_property
    def _soft(self) -> tuple[tuple[Piece, ...], SectionProperties]:
        shares = self.shares or (1.0,) * len(self.parts)
        soft = tuple(_piece(part, creep=True, share=share) for part, share in zip(self.parts, shares, strict=True))
        return soft, reweighted(soft, self.properties)


@dataclass(frozen=True)
class Stretch:
    """A length of the member over which the section stays the same."""

    start: float
    end: float
    section: CrossSection


@dataclass(frozen=True, eq=False)
class Run:
    """Parts that run along the same stretches, with what the formulas of their stresses ask of the sections."""

    parts: Sequence[Part]
    along: tuple[int, ...]
    stretches: Sequence[Stretch]

    @cached_property
    def bending(self) -> dict[str, NDArray[np.float64]]:
        """E, u, u_0 and EI, (parts, fibres, stretches, extremes, combinations); fibres: top, bottom, centroid."""
        sections = [stretch.section for stretch in self.stretches]
        heights = [[(p.top, p.bottom, section.centroids[p.index]) for section in sections] for p in self.parts]
        return {
            "E": np.array([part.material.E for part in self.parts])[:, None, None, None, None],
            "u": np.array(heights).swapaxes(1, 2)[..., None, None],
            "u_0": np.array([section.properties.neutral_axis[1] for section in sections])[:, None, None],
            "EI": np.array([section.properties.EI for section in sections])[:, None, None],
        }

    @cached_property
    def shearing(self) -> dict[str, NDArray[np.float64]]:
        """S, b and EI of the cut through each part where its shear is largest, (parts, stretches, combinations)."""
        sections = [stretch.section for stretch in self.stretches]
        cuts = [[section.cuts[part.index] for section in sections] for part in self.parts]
        return {
            "S": np.array([[[abs(cut.first_moment)] for cut in own] for own in cuts]),
            "b": np.array([[[cut.width] for cut in own] for own in cuts]),
            "EI": np.array([[section.properties.EI] for section in sections]),
        }


@dataclass(frozen=True)
class Body:
    """The whole member: its parts, joints, contacts, and stretches from left to right."""

    length: float
    parts: tuple[Part, ...]
    sites: tuple[Site, ...]
    contacts: tuple[Contact, ...]
    stretches: tuple[Stretch, ...]

    @cached_property
    def sections(self) -> list[CrossSection]:
        """Every section once, from left to right."""
        return list({id(stretch.section): stretch.section for stretch in self.stretches}.values())

    @cached_property
    def runs(self) -> list[Run]:
        """The parts in groups that run along the same stretches."""
        found: dict[tuple[int, ...], list[Part]] = {}
        for part in self.parts:
            found.setdefault(tuple(t for t, _ in self.stretches_of(part)), []).append(part)
        return [Run(parts, along, [self.stretches[t] for t in along]) for along, parts in found.items() if along]

    def stretches_of(self, part: Part) -> list[tuple[int, Stretch]]:
        return [(i, s) for i, s in enumerate(self.stretches) if part.start <= s.start and part.end >= s.end]


_bodies: Remembered[Body] = Remembered(32)  # with all that was worked out of them: cuts, stiffnesses, flows


def build(document: documents.MemberDocument) -> Body:
    """Place pieces and joints; raise DocumentError for overlaps, loose pieces and joints that touch nothing.

    A body whose pieces, joints and values are those of one asked for before is that one.
    """
    content = document.model_dump_json(include={"section", "materials", "adhesives", "analysis"}, exclude_none=True)
    wanted, free = _wanted(document), not document.member.held_sideways
    return _bodies.of((document.member.length, wanted, free, content), lambda: _build(document, wanted, free))


def _build(document: documents.MemberDocument, wanted: Wanted, free: bool) -> Body:
    parts = tuple(_parts(document))
    edges = edges_of([part.shape.rings for part in parts], [part.shape.curved for part in parts])
    _refuse_overlaps(parts, edges)
    found = _contacts(document, parts, edges)
    sites = tuple(_sites(document, parts, found))
    stretches = tuple(_stretches(document.member.length, parts, sites, wanted, free))
    return Body(document.member.length, parts, sites, tuple(found), stretches)


def _wanted(document: documents.MemberDocument) -> Wanted:
    """When to solve the field: eccentric loads need it beside whatever was asked for."""
    if document.analysis.field == "auto" and (eccentric(document) or pushed_sideways(document)):
        return "always"
    return document.analysis.field


def eccentric(document: documents.MemberDocument) -> bool:
    """Whether any load acts beside the shear centre."""
    return any(load.offset for load in _placed(document))


def pushed_sideways(document: documents.MemberDocument) -> bool:
    """Whether the member is free to bend sideways and a load pushes it that way."""
    if document.member.held_sideways:
        return False
    return any(load.lateral for load in _placed(document))


def _placed(document: documents.MemberDocument) -> Iterator[documents.PointLoad | documents.LineLoad]:
    """The loads that may stand beside the member's axis or push it sideways."""
    for loads in document.loads.values():
        for load in loads:
            if isinstance(load, (documents.PointLoad, documents.LineLoad)):
                yield load


def both_ways(document: documents.MemberDocument, body: Body) -> bool:
    """Whether the member bends about both axes: it is free to, and a load or its own section makes it."""
    if document.member.held_sideways:
        return False
    return pushed_sideways(document) or any(lopsided(section.properties) for section in body.sections)


def lopsided(whole: SectionProperties) -> bool:
    """Whether load straight down bends the section sideways as well."""
    return abs(whole.EI_product) > LEVEL * math.sqrt(whole.EI * whole.EI_lateral)


def _stiffness_key(site: Site) -> object:
    """What must match before two mirrored joints share alike: bonds are rigid, fasteners are not."""
    if site.bonded:
        return ("bond", round(site.width, 6))
    spacing = site.spec.spacing
    zones = tuple((z.from_, z.to, z.spacing) for z in spacing) if isinstance(spacing, list | tuple) else spacing
    return ("fastener", site.spec.fastener, site.spec.rows, zones)


def _parts(document: documents.MemberDocument) -> list[Part]:
    length = document.member.length
    shapes = outlines(document.section.pieces)
    ends = _told_apart(document)
    parts = []
    for index, (name, spec) in enumerate(document.section.pieces.items()):
        material = document.materials[spec.material]
        assert isinstance(material, documents.Material)
        start = 0.0 if spec.from_ is None else ends[spec.from_]
        end = length if spec.to is None else ends[spec.to]
        parts.append(Part(index, name, spec, material, shapes[name], start, end))
    return parts


def _told_apart(document: documents.MemberDocument) -> dict[float, float]:
    """Ends of pieces along the member; those too close to tell apart are one, and the member's own ends win."""
    length = document.member.length
    slack = SAME_PLACE * length
    typed = {at for piece in document.section.pieces.values() for at in (piece.from_, piece.to) if at is not None}
    found: dict[float, float] = {}
    last = 0.0
    for at in sorted(typed):
        last = length if at >= length - slack else at if at - last > slack else last
        found[at] = last
    return found


def with_shares(section: CrossSection, shares: Mapping[int, float]) -> CrossSection:
    """The section with some parts, by their index, counted only in part: the modulus is taken times the share."""
    if all(share >= 1.0 for share in shares.values()):
        return section
    each = tuple(shares.get(part.index, 1.0) for part in section.parts)
    pieces = tuple(_piece(part, share=share) for part, share in zip(section.parts, each, strict=True))
    return CrossSection(
        section.parts, section.sites, pieces, reweighted(pieces, section.properties), each, section.wanted
    )


def _piece(part: Part, creep: bool = False, share: float = 1.0) -> Piece:
    soften = 1.0 + (part.material.creep or 0.0) if creep else 1.0
    G = part.shear_modulus
    return Piece(
        part.name,
        part.outline,
        part.material.E * share / soften,
        None if G is None else G / soften,
        part.material.density,
        part.shape.holes,
    )


def _refuse_overlaps(parts: Sequence[Part], edges: Edges) -> None:
    faults = [
        Fault(
            f"section.pieces.{parts[i].name}.at",
            f"{parts[i].name!r} and {parts[j].name!r} overlap{'' if math.isnan(area) else f' by {area:.4g} mm2'}; move "
            "one so that they only touch.",
        )
        for i, j, area in overlap(edges)
        if parts[i].coexists(parts[j])
    ]
    if faults:
        raise DocumentError(faults)


def _contacts(document: documents.MemberDocument, parts: Sequence[Part], edges: Edges) -> list[Contact]:
    """All contacts between pieces that stand side by side somewhere along the member."""
    reach = np.full((len(parts), len(parts)), GAP)
    position = {part.name: part.index for part in parts}
    for joint in document.section.joints:
        i, j = (position[name] for name in joint.between)
        reach[i, j] = reach[j, i] = max(reach[i, j], GAP + _thickness(document, joint))
    flat = contacts(edges, reach)
    rings = round_contacts(_rounds(parts), reach)
    found = in_order([*flat, *rings]) if rings else flat
    return [c for c in found if parts[c.first].coexists(parts[c.second])]


def _rounds(parts: Sequence[Part]) -> list[Round]:
    found = []
    for part in parts:
        if isinstance(part.spec, documents.Round):
            (left, low), radius = part.spec.at, part.spec.diameter / 2
            inner = 0.0 if part.spec.wall is None else radius - part.spec.wall
            found.append(Round(part.index, (left + radius, low + radius), radius, inner))
    return found


def _thickness(document: documents.MemberDocument, joint: documents.Joint) -> float:
    if joint.adhesive is None:
        return 0.0
    adhesive = document.adhesives[joint.adhesive]
    assert isinstance(adhesive, documents.Adhesive)
    return adhesive.thickness or 0.0


def _sites(document: documents.MemberDocument, parts: Sequence[Part], found: Sequence[Contact]) -> list[Site]:
    by_name = {part.name: part for part in parts}
    faults: list[Fault] = []
    sites: list[Site] = []
    for index, joint in enumerate(document.section.joints):
        first, second = (by_name[name] for name in joint.between)
        path = f"section.joints[{index}]"
        touching = [c for c in found if {c.first, c.second} == {first.index, second.index}]
        allowed = GAP + _thickness(document, joint)
        pair = f"{first.name!r} and {second.name!r}"
        if not touching:
            faults.append(Fault(f"{path}.between", _apart(first, second, allowed)))
            continue
        segment = joint.segment or 1
        if segment > len(touching):
            faults.append(
                Fault(f"{path}.segment", f"{pair} touch in {len(touching)} place(s); segment {segment} does not exist.")
            )
            continue
        contact = touching[segment - 1]
        if contact.gap > allowed + 1e-9:
            faults.append(Fault(f"{path}.between", _apart(first, second, allowed, contact.gap)))
            continue
        width = contact.length if joint.width is None else joint.width
        if width > contact.length * (1 + 1e-9):
            faults.append(
                Fault(
                    f"{path}.width",
                    f"width is {width:g} mm, but {pair} touch over only {contact.length:.6g} mm; "
                    "enter at most that, or leave it empty for the whole contact.",
                )
            )
            continue
        joint_id = "/".join(joint.between) + (f"#{segment}" if segment > 1 else "")
        sites.append(Site(index, joint_id, joint, first, second, contact, width))
    if faults:
        raise DocumentError(faults)
    return sites


def _apart(first: Part, second: Part, allowed: float, gap: float | None = None) -> str:
    pair = f"{first.name!r} and {second.name!r}"
    if not first.coexists(second):
        return f"{pair} are never side by side: one ends before the other starts. Change their from and to."
    how = _how_far(first, second, allowed) if gap is None else f"stand {gap:.3g} mm apart"
    return (
        f"{pair} {how}; a joint needs facing parallel edges with a gap of at most {allowed:g} mm "
        "(0.05 mm plus the adhesive's thickness). Move a piece, or give the adhesive its thickness."
    )


def _how_far(first: Part, second: Part, allowed: float) -> str:
    """Why two pieces have no contact: apart, touching at a point, or along a curve or a slope."""
    distance = nearest(first.shape.rings, second.shape.rings)
    if distance > allowed + 1e-9:
        return f"do not touch: they are {distance:.3g} mm apart"
    return "touch only at a point, or nowhere along flats that face each other"


def _stretches(
    length: float, parts: Sequence[Part], sites: Sequence[Site], wanted: Wanted, free: bool
) -> list[Stretch]:
    """``free`` to bend sideways: then a lopsided section needs its field."""
    ends = sorted({0.0, length, *(p.start for p in parts), *(p.end for p in parts)})
    known: dict[tuple[int, ...], CrossSection] = {}
    stretches: list[Stretch] = []
    for start, end in pairwise(ends):
        active = tuple(p for p in parts if p.start <= start and p.end >= end)
        key = tuple(p.index for p in active)
        if key not in known:
            here = [site for site in sites if site.present(start, end)]
            section = _cross_section(active, here, start, end, wanted)
            if free and wanted == "auto" and lopsided(section.properties):
                section = replace(section, wanted="always")
            known[key] = section
        stretches.append(Stretch(start, end, known[key]))
    return stretches


def _cross_section(
    active: tuple[Part, ...], sites: Sequence[Site], start: float, end: float, wanted: Wanted
) -> CrossSection:
    where = f"between {start:g} and {end:g} mm from the left end"
    if not active:
        raise DocumentError(
            [Fault("section.pieces", f"No piece runs {where}; the member is cut through there. Extend a piece.")]
        )
    loose = tied(len(active), lines_of(active, sites))
    if loose:
        raise DocumentError(
            [
                Fault(
                    f"section.pieces.{active[i].name}",
                    f"{active[i].name!r} is tied to nothing {where}: no chain of joints joins it to "
                    f"{active[0].name!r}. Add a joint, or take the piece out.",
                )
                for i in loose
            ]
        )
    pieces = tuple(_piece(part) for part in active)
    return CrossSection(active, tuple(sites), pieces, properties(pieces), wanted=wanted)


def lines_of(parts: Sequence[Part], sites: Sequence[Site]) -> list[JointLine]:
    position = {part.index: i for i, part in enumerate(parts)}
    return [
        JointLine(
            position[site.first.index],
            position[site.second.index],
            site.contact.start if site.contact.line is None else site.contact.middle,
            site.contact.end if site.contact.line is None else site.contact.middle,
            _stiffness_key(site),
        )
        for site in sites
    ]
