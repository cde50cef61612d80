"""Cautions: what a careful engineer would say about this check beside its numbers."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body, Part, Site
from server.checks.joints import JointCheck
from server.checks.resistance import Findings

NOT_CHECKED = (
    "lateral buckling of the member and local buckling of its pieces",
    "bearing at supports and under loads",
    "introduction of concentrated loads into the section",
    "web stiffeners",
    "vibration",
    "fire",
    "fatigue, and creep rupture of adhesives under lasting load",
    "movement of unlike materials with temperature and moisture",
)
LEAST_ADHESIVE_FACTOR = 2.0  # common practice: an adhesive at least twice as strong as the largest stress


def add_cautions(
    document: documents.MemberDocument, body: Body, actions: Actions, joints: list[JointCheck], findings: Findings
) -> None:
    """Everything that deserves a word; the order is the order in which the sheet prints them."""
    _contacts(body, findings)
    _ends(document, body, findings)
    _joints(document, body, joints, findings)
    _materials(document, body, actions, findings)
    _member(document, body, actions, findings)


def _contacts(body: Body, findings: Findings) -> None:
    named = {id(site.contact) for site in body.sites}
    for contact in body.contacts:
        if id(contact) not in named:
            pair = f"{body.parts[contact.first].name} and {body.parts[contact.second].name}"
            findings.caution(
                "contact without a joint",
                f"{pair} touch over {contact.length:.4g} mm but no joint names this contact: it carries nothing.",
            )


def _ends(document: documents.MemberDocument, body: Body, findings: Findings) -> None:
    """A bonded piece that stops inside the member: its end picks up its force at once."""
    for part in body.parts:
        sites = [s for s in body.sites if s.bonded and part in (s.first, s.second)]
        for at in (part.start, part.end):
            if sites and 0 < at < body.length:
                findings.miss(
                    f"end of {part.name} at {at:g} mm from the left: end shear and peel where a bonded piece stops "
                    "are not reckoned in this version. Needed: a strip-end calculation with the pull-off (flatwise "
                    "tension) strength of the bond, from pull-off tests."
                )
                findings.caution(
                    "end peel",
                    f"{part.name} stops {at:g} mm from the left end. The bond's end carries shear and peel well above "
                    "the mean along the joint: run it on towards the support, taper it, or hold its end down with "
                    "fasteners.",
                    answer=True,
                )


def _joints(document: documents.MemberDocument, body: Body, joints: list[JointCheck], findings: Findings) -> None:
    """What holds for several joints alike is said once, with the joints' names before it."""
    whole: dict[float, list[str]] = {}
    fastened: dict[str, list[str]] = {}
    slipping: list[str] = []
    for site in body.sites:
        if site.bonded and site.spec.width is None and site.spec.coverage == 1.0:
            whole.setdefault(round(site.contact.length, 6), []).append(site.id)
        if site.bonded and site.spec.fastener is not None:
            fastened.setdefault(site.spec.effective_role or "press", []).append(site.id)
        if not site.bonded and not document.analysis.slip:
            slipping.append(site.id)
    for length, ids in whole.items():
        findings.caution(
            "bonded width",
            f"{', '.join(ids)}: the whole contact of {length:.4g} mm is counted as bonded. Radii, chamfers, dry edges "
            "and unglued strips carry nothing: enter the width that is really bonded, or the coverage.",
            answer=True,
        )
    for role, ids in fastened.items():
        findings.caution(
            "fasteners with adhesive",
            f"{', '.join(ids)}: stiff glue carries nearly all of the flow until it breaks, so the fasteners ({role}) "
            "are held to carry none of it. Their strengths are never added.",
        )
    _wide_bonds(body, joints, findings)
    if slipping:
        findings.caution(
            "slip",
            f"{', '.join(slipping)}: fasteners slip. Flow and spacing are those of a rigid joint; stresses of the "
            "pieces and deflection are estimates with too great a stiffness.",
        )


@dataclass(frozen=True)
class WideBond:
    """A bond wider than its layer spreads the flow over: the rule that says so, and what it would take off."""

    rule: str
    reduction: float


def _wide_bonds(body: Body, joints: list[JointCheck], findings: Findings) -> None:
    """EN 1995-1-1:2004 expressions (9.10) and (9.14): stress gathers at the edge of a deep or wide bond."""
    found: dict[WideBond, list[tuple[str, str, float | None]]] = {}
    for site, check in zip(body.sites, joints, strict=True):
        for part in (site.first, site.second):
            wide = _wide_bond(site, part, body) if site.bonded and part.rolls else None
            if wide is not None:
                found.setdefault(wide, []).append((site.id, part.name, _rolling_use(check, part)))
    for wide, places in found.items():
        parts = ", ".join(dict.fromkeys(name for _, name, _ in places))
        used = max((use for _, _, use in places if use is not None), default=None)
        effect = "" if used is None else f" (utilisation {used / wide.reduction:.3g} instead of {used:.3g})"
        findings.caution(
            "wide bond",
            f"{', '.join(dict.fromkeys(joint for joint, _, _ in places))}: {wide.rule} would multiply the rolling "
            f"shear strength of {parts} by {wide.reduction:.3f}{effect}; it is not applied here.",
            answer=True,
        )


def _wide_bond(site: Site, part: Part, body: Body) -> WideBond | None:
    length = site.contact.length
    across, up = np.abs(np.asarray(site.contact.end) - np.asarray(site.contact.start))
    if up > across:
        bound = 4 * _extent(part, 0) / (2 if _bonded_behind(site, part, body) else 1)
        words = f"h_f = {length:.4g} mm > 4 b_ef = {bound:.4g} mm. EN 1995-1-1:2004 (9.10)"
    else:
        bound = 8 * _extent(part, 1)
        words = f"b_w = {length:.4g} mm > 8 h_f = {bound:.4g} mm. EN 1995-1-1:2004 (9.14)"
    if length <= bound * (1 + 1e-9):
        return None
    return WideBond(words, round(float((bound / length) ** 0.8), 9))


def _rolling_use(check: JointCheck, part: Part) -> float | None:
    limits = check.result["limits"]
    assert isinstance(limits, list)
    for limit in limits:
        if limit["what"] == f"rolling shear in {part.name}":
            return float(limit["utilisation"])
    return None


def _extent(part: Part, axis: int) -> float:
    return float(np.ptp(part.outline[:, axis]))


def _bonded_behind(site: Site, part: Part, body: Body) -> bool:
    """Whether the piece is bonded on its other face over the same height (a web between two flange halves)."""
    low, high = sorted((site.contact.start[1], site.contact.end[1]))
    for other in body.sites:
        if other is site or not other.bonded or part not in (other.first, other.second):
            continue
        bottom, top = sorted((other.contact.start[1], other.contact.end[1]))
        apart = abs(other.contact.start[0] - site.contact.start[0]) > 0.5 * _extent(part, 0)
        if apart and min(high, top) - max(low, bottom) > 0:
            return True
    return False


def _materials(document: documents.MemberDocument, body: Body, actions: Actions, findings: Findings) -> None:
    used = {part.spec.material: part.material for part in body.parts}
    for name, material in used.items():
        if not material.strengths.any():
            findings.caution(
                "strength of pieces", f"Material {name!r} has no strengths: its pieces' own stresses are not judged."
            )
    without = sorted({part.spec.material for part in body.parts if part.shear_modulus is None})
    if document.analysis.shear_deformation and without:
        findings.caution(
            "shear deformation",
            f"No shear modulus is given for {', '.join(without)}: the shear part of the deflection is left out.",
        )
    for part in body.parts:
        if part.body_rolls and part.material.G_rolling is None and part.material.G is not None:
            findings.caution(
                "shear deformation",
                f"{part.name} shears through its thickness, but {part.spec.material!r} has no G_rolling: its G was "
                "used, which makes the deflection too small.",
            )
    if not document.analysis.shear_deformation:
        findings.caution("shear deformation", "Shear deformation was switched off: the deflection is bending only.")
    sustained = any(c.sustained for c in document.combinations.values())
    if actions.long_term is None and sustained:
        findings.caution(
            "long-term deflection", "Sustained shares are given but no material has a creep factor: not reckoned."
        )
    if actions.long_term is not None:
        lacking = sorted({part.spec.material for part in body.parts if part.material.creep is None})
        if not sustained:
            findings.caution(
                "long-term deflection",
                "Creep factors are given but no combination names a sustained share: nothing was taken as lasting.",
            )
        if lacking:
            findings.caution(
                "long-term deflection", f"No creep factor for {', '.join(lacking)}: taken as not creeping."
            )


def _member(document: documents.MemberDocument, body: Body, actions: Actions, findings: Findings) -> None:
    if document.basis.method == "allowable" and any(site.bonded for site in body.sites):
        factor = document.basis.factor("adhesive")
        if factor is not None and factor < LEAST_ADHESIVE_FACTOR:
            findings.caution(
                "safety factor",
                f"The safety factor on the adhesive is {factor:g}; common practice asks for an adhesive at least "
                "twice as strong as the largest stress.",
                answer=True,
            )
    used = {case for c in document.combinations.values() for case in c.factors}
    idle = [case for case in document.loads if case not in used]
    if idle:
        findings.caution("loads", f"No combination uses the load case(s) {', '.join(idle)}: they were left out.")
    _uplift(document, actions, findings)
    if document.service is None:
        findings.caution(
            "movement",
            "No service conditions were given: movement with temperature and moisture was not reckoned.",
        )
    else:
        findings.caution(
            "movement",
            "Service conditions are given, but movement of unlike materials is not reckoned in this version.",
        )


def _uplift(document: documents.MemberDocument, actions: Actions, findings: Findings) -> None:
    forces = actions.response.reaction_force
    scale = max(float(np.abs(forces).max(initial=0.0)), 1e-300)
    for i, support in enumerate(document.member.supports):
        lifting = np.flatnonzero(forces[:, i] < -1e-9 * scale)
        if len(lifting):
            k = int(lifting[0])
            findings.caution(
                "uplift",
                f"The support at {support.at:g} mm pulls the member down with {-forces[k, i]:,.4g} N in combination "
                f"{actions.names[k]!r}: hold it down there, or the member lifts.",
                answer=True,
            )
