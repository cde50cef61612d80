"""How one layer's flow divides over parallel joints that neither a cut nor symmetry settles: by the section's field.

The layers give the flow of all joints between two pieces together. How much each of them takes depends on how the
pieces deform and how the joints give: the field of shear with joints of their own stiffness says.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from server.checks.crosssection import Site, Stretch
from server.checks.holds import Hold
from server.checks.slide import ULTIMATE, Slide
from server.errors import InputError
from server.mechanics.field import TARGET, remembered_field
from server.mechanics.graph import components


@dataclass(frozen=True)
class Shares:
    """Shares of one group of parallel joints in one stretch, by the joint's number; in words why there are none.

    ``sign`` of each joint against the first: -1 where it names the pieces the other way round.
    """

    weight: Mapping[int, float]
    sign: Mapping[int, float]
    why_not: str = ""


def field_shares(slide: Slide, stretch: Stretch, site: Site) -> Shares:
    """The shares of the joints parallel to this one."""
    group = _parallel(stretch, site)
    if not group:
        return Shares({}, {}, "They close a ring over more than two pieces, which the layers do not settle.")
    sign = {other.index: 1.0 if other.first is group[0].first else -1.0 for other in group}
    stiffness = {other.index: _even(slide, slide.holds.each[other.index], stretch) for other in stretch.section.sites}
    if any(stiffness[other.index] is None for other in group):
        return Shares({}, sign, "Their stiffness changes along the member, each in its own way.")
    section = stretch.section
    lacking = [part.name for part in section.parts if part.field_modulus is None]
    if lacking:
        return Shares({}, sign, f"The field of shear needs the shear modulus G of {', '.join(lacking)}.")
    alike = tuple(replace(p, G=part.field_modulus) for p, part in zip(section.pieces, section.parts, strict=True))
    bonds = [
        replace(bond, stiffness=k / bond.bonded)
        for bond, other in zip(section.bonds, section.sites, strict=True)
        for k in [stiffness[other.index]]
        if k
    ]
    order = [other.index for other in section.sites if stiffness[other.index]]
    try:
        field = remembered_field(alike, section.properties, bonds)
    except InputError as error:
        return Shares({}, sign, f"The field of shear was not solved: {error}")
    places = [order.index(other.index) for other in group]
    if float(field.error[places, 0].max()) > TARGET:
        return Shares({}, sign, "The field of shear is not settled on its finest mesh.")
    parts = {other.index: sign[other.index] * float(field.share[p]) for other, p in zip(group, places, strict=True)}
    total = sum(parts.values())
    if total == 0 or max(abs(part) for part in parts.values()) > 100 * abs(total):
        return Shares({}, sign, "Their flows nearly cancel, so shares of the sum mean nothing.")
    return Shares({index: part / total for index, part in parts.items()}, sign)


def _parallel(stretch: Stretch, site: Site) -> list[Site]:
    """Joints between the same two pieces, if they alone hold these together; else none."""
    pair = {site.first.index, site.second.index}
    sites = stretch.section.sites
    group = [other for other in sites if {other.first.index, other.second.index} == pair]
    place = {part.index: i for i, part in enumerate(stretch.section.parts)}
    ends = [(place[other.first.index], place[other.second.index]) for other in sites]
    without = [i for i, other in enumerate(sites) if other in group]
    bodies = components(len(place), ends, without)
    together = any({place[index] for index in pair} <= set(body) for body in bodies)
    return [] if together or len(group) < 2 else group


def _even(slide: Slide, hold: Hold, stretch: Stretch) -> float | None:
    """The joint's stiffness over the stretch [N/mm2]; nothing holds: 0; None where it changes."""
    zones = [zone for zone in hold.zones if zone.end > stretch.start and zone.start < stretch.end]
    if not zones:
        return 0.0
    k = np.array([zone.stiffness for zone in zones])
    if np.ptp(k) > 1e-9 * k.max():
        return None
    return float(k[0]) * (ULTIMATE if slide.ultimate and hold.by == "fasteners" else 1.0)
