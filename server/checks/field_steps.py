"""The working of the section's field: how it was solved, each joint's share, and the hand's result beside it."""

from __future__ import annotations

from server.checks.crosssection import Body, CrossSection, Site, Stretch
from server.checks.resistance import Judge
from server.working import Working

METHOD = "anti-plane finite elements: div(G grad psi) = -E (u - u_0), no shear through free edges, bonds rigid"
SOURCE = "warping function of bending by shear (Timoshenko and Goodier, Theory of Elasticity), Poisson's ratio left out"
TORSION = "Saint-Venant torsion from the same matrix"


def write_fields(body: Body, working: Working) -> None:
    """How the field of every distinct section was solved, and what it gives for the whole section."""
    sections = body.sections
    for number, section in enumerate(sections, 1):
        if section.settled.field is not None:
            _write_field(section, "" if len(sections) == 1 else f", section {number}", working)


def _write_field(section: CrossSection, which: str, working: Working) -> None:
    field, group = section.settled.field, "Shear field"
    assert field is not None
    worst = float(field.error[:, 0].max(initial=0.0))
    working.note(
        f"Field of shear{which}: estimated error",
        f"{METHOD}. {field.triangles} triangles with cubic functions, edges {field.smallest:.3g} to "
        f"{field.largest:.3g} mm, {field.unknowns} unknowns; small where bonds end at inward corners. The error is "
        "twice the difference from the solution with quadratic functions, of the flow of the joint where it is worst.",
        value=worst,
        unit="",
        source=SOURCE,
        group=group,
    )
    _write_balance(section, which, working, group)
    across, up = field.shear_centre.tolist()
    working.note(
        f"Torsional stiffness{which}",
        f"GJ = integral of tau r over a unit twist; estimated error {field.error_GJ:.2%}.",
        value=field.GJ,
        unit="N*mm2",
        source=TORSION,
        group=group,
        symbol="GJ",
    )
    for word, value, axis in (("across", across, "a"), ("up", up, "u")):
        working.note(
            f"Shear centre, {word}{which}",
            "Where a shear force makes no twist: the moment of its stresses from the product of its loads and the "
            "warping of torsion.",
            value=value,
            unit="mm",
            source="E. Trefftz, ZAMM 15 (1935); Betti's theorem",
            group=group,
            symbol=f"{axis}_c",
        )


def _write_balance(section: CrossSection, which: str, working: Working, group: str) -> None:
    """The flows of the field on the piece of the largest first moment, set against that moment."""
    field, moments = section.settled.field, section.properties.first_moments
    assert field is not None
    if not section.sites:
        return
    piece = int(abs(moments).argmax())
    shares = [
        float(share) * (1.0 if bond.first == piece else -1.0)
        for bond, share in zip(section.bonds, field.share, strict=True)
        if piece in (bond.first, bond.second)
    ]
    name = section.parts[piece].name
    working.step(
        f"Equilibrium of {name}{which}: flows of its joints over V x first moment / EI",
        "r_S",
        "sum(S_j)/S",
        {"S_j": (shares, "N*mm"), "S": (float(moments[piece]), "N*mm")},
        unit="",
        source=f"S_j: share of each joint of {name}; of all pieces the largest difference is {field.balance:.1e} "
        "of the largest first moment",
        group=group,
    )


def write_share(site: Site, stretch: Stretch, first: float, judge: Judge, group: str) -> float:
    """The joint's share of the first moment, as the field gives it."""
    section = stretch.section
    flow, field = section.flows[site.index], section.settled.field
    assert field is not None
    assert flow.share is not None
    place = section.place(site)
    part = f"{abs(flow.share) / first:.4g} of the first moment cut off" if first > 0 else "the cut-off part has none"
    judge.working.note(
        "This joint's share of the first moment",
        f"Flow of the field over this joint; {part}. Estimated error {float(field.error[place, 0]):.2%}.",
        value=abs(flow.share),
        unit="N*mm",
        source=SOURCE,
        group=group,
        symbol="S_j",
    )
    return abs(flow.share)


def beside_hand(site: Site, stretch: Stretch, shear: float, judge: Judge, group: str) -> dict[str, object]:
    """The field's flow beside the hand's, and the run of stress along the bond, where the field was solved."""
    section = stretch.section
    field = section.settled.field
    if field is None:
        return {}
    place = section.place(site)
    share, EI = float(field.share[place]), section.properties.EI
    run = field.parts[place] * (shear / EI) * (1.0 if share >= 0 else -1.0)
    found: dict[str, object] = {"distribution": (run / site.spec.coverage).tolist()} if site.bonded else {}
    apart = section.settled.apart[place]
    if apart is None:
        return found
    found["shear_flow_by_field"] = judge.working.step(
        "The same flow by the field",
        "q_F",
        "V*S_j/EI",
        {"V": (shear, "N"), "S_j": (abs(share), "N*mm"), "EI": (EI, "N*mm2")},
        unit="N/mm",
        source=f"{SOURCE}; differs from the hand's share by {apart:.3%}, at most 0.5 % is allowed",
        group=group,
    )
    found["field_differs"] = apart
    return found
