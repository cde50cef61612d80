"""A member that is free to bend sideways: both planes solved together, and what is not reckoned with it named.

The lateral plane is handled like the vertical one: "down" there is to the right, "sagging" puts the right-hand side in
tension, and the lateral shear is the sum of the forces to the left on the part at the left.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import moving
from server.checks.crosssection import Body, CrossSection, Site, both_ways
from server.checks.rules import SKINS, WEBS, chosen
from server.errors import DocumentError, Fault, InputError
from server.mechanics.beam import Beam, LineLoad, Load, PointLoad, Response
from server.mechanics.beam_two_planes import solve_two_planes
from server.mechanics.field_flow import AGREE

if TYPE_CHECKING:
    from server.checks.resistance import Findings

Array = NDArray[np.float64]
LITTLE = 0.05


def refuse_moving(document: documents.MemberDocument) -> None:
    """Moving axles are reckoned up and down only."""
    if moving.movers_of(document):
        raise DocumentError(
            [
                Fault(
                    "member.held_sideways",
                    "held_sideways is false and axles move: they are not reckoned together where the section bends "
                    "sideways too. Hold the member sideways (true), or place the axles as point loads.",
                )
            ]
        )


def lateral_loads(document: documents.MemberDocument) -> tuple[tuple[Load, ...], ...]:
    """The lateral parts of the loads of every case, to the right positive."""
    return tuple(tuple(_lateral(loads)) for loads in document.loads.values())


def _lateral(loads: Sequence[documents.Load]) -> Iterable[Load]:
    for load in loads:
        if isinstance(load, documents.PointLoad) and load.lateral:
            yield PointLoad(load.at, load.lateral)
        elif isinstance(load, documents.LineLoad) and load.lateral:
            yield LineLoad(load.from_, load.to, load.lateral, load.lateral)


def solve_both(
    beam: Beam,
    body: Body,
    down: Sequence[Sequence[Load]],
    right: Sequence[Sequence[Load]],
    *,
    deform: bool,
    creep: bool = False,
) -> tuple[Response, Response]:
    """Every case in both planes; mechanics' complaints come back with the document's path."""
    bending, shear = zip(*(_flexibility(s.section, creep=creep) for s in body.stretches), strict=True)
    strains = np.array([np.zeros((2, 2)) if each is None or not deform else each for each in shear])
    try:
        return solve_two_planes(beam, np.array(bending), strains, down, right)
    except InputError as error:
        raise DocumentError([Fault(f"member.{error.field}", str(error))]) from error


def _flexibility(section: CrossSection, *, creep: bool) -> tuple[Array, Array | None]:
    return section.softened_both_ways if creep else (section.bending_flexibility, section.shear_flexibility)


def lateral_share(section: CrossSection, site: Site) -> float | None:
    """The joint's E-weighted first moment for bending sideways, with its sign on the first piece [N mm].

    By a clean cut where there is one, else from the field; None where neither gives it.
    """
    by_hand = lateral_by_cut(section, site)
    field = section.settled.field
    return by_hand if by_hand is not None or field is None else float(field.share_across[section.place(site)])


def lateral_by_cut(section: CrossSection, site: Site) -> float | None:
    """As ``lateral_share``, by a clean cut alone."""
    flow = section.settled.flows[section.place(site)]
    if flow.split != "cut":
        return None
    parts, whole = section.properties.pieces, section.properties
    arms = parts.centroid[:, 0] - whole.neutral_axis[0]
    moments = np.array([piece.E for piece in section.pieces]) * parts.area * arms
    first = next(i for i, part in enumerate(section.parts) if part.index == site.first.index)
    way = 1.0 if first in flow.cut_off else -1.0
    return way * float(moments[list(flow.cut_off)].sum())


def lateral_differs(section: CrossSection, site: Site) -> float | None:
    """By how much cut and field differ for bending sideways, of the field; None where they are not both there.

    A flow that is small beside the section's largest counts as a twentieth of that.
    """
    by_hand, field = lateral_by_cut(section, site), section.settled.field
    if by_hand is None or field is None:
        return None
    own = float(field.share_across[section.place(site)])
    size = max(abs(own), LITTLE * float(np.abs(field.share_across).max()), 1e-300)
    return abs(by_hand - own) / size


def rates(section: CrossSection, site: Site) -> tuple[float, float] | None:
    """Flow of a joint per vertical and per lateral shear [1/mm], with signs; None where its share is not known."""
    flow = section.flows.get(site.index)
    if flow is None or flow.share is None:
        return None
    aside = lateral_share(section, site)
    if aside is None:
        return None
    down, across = np.array([flow.share, -aside]) @ section.bending_flexibility
    return float(down), float(across)


def name_what_is_left_out(document: documents.MemberDocument, body: Body, findings: Findings) -> None:
    """What this version reckons for bending up and down only."""
    if not both_ways(document, body):
        return
    stiffer = [rule for rule in (SKINS, WEBS) if rule in chosen(document)]
    for wanted, what in (
        (document.analysis.slip, "slip of the joints"),
        (any(j.effective_role == "fall-back" for j in document.section.joints), "fasteners that stand by for glue"),
        (bool(stiffer), f"the rules {', '.join(map(repr, stiffer))}"),
        (bool(document.analysis.before_bonding), "load before bonding"),
        (any(p.start > 0 or p.end < body.length for p in body.parts), "ends of bonded pieces inside the member"),
        (document.service is not None, "movement with temperature and moisture"),
        (_lasting(document), "lasting and repeated load on the bonds"),
    ):
        if wanted:
            findings.miss(
                f"bending about both axes (member.held_sideways false): {what}: reckoned for bending up and down only. "
                "Hold the member sideways, or have it reckoned."
            )
    for section in body.sections:
        for site in section.sites:
            apart = lateral_differs(section, site)
            if apart is not None and apart > AGREE:
                findings.miss(
                    f"joint {site.id}: its flow in bending sideways by hand and by the field differ by {apart:.2%}, "
                    f"more than {AGREE:.1%}; look for contacts that the hand cut takes as open, or report the section."
                )
    if document.analysis.shear_deformation and any(s.shear_flexibility is None for s in body.sections):
        findings.caution(
            "shear deformation",
            "The member bends about both axes and its shear field was not solved: the shear part of the deflection is "
            "left out.",
        )
    findings.caution(
        "held sideways",
        "The member is held sideways at its supports only. Load down and load sideways are taken through the shear "
        "centre, but for the offsets given; lateral buckling between the supports is not checked.",
        answer=True,
    )


def _lasting(document: documents.MemberDocument) -> bool:
    limited = any(getattr(each, "creep_limit", None) is not None for each in document.adhesives.values())
    return any(c.fatigue or (limited and any(c.sustained.values())) for c in document.combinations.values())
