"""Cautions: what a careful engineer would say about this check beside its numbers."""

from __future__ import annotations

import numpy as np

from server import documents
from server.checks import effective_width, thin_webs
from server.checks.actions import Actions
from server.checks.crosssection import Body, Part
from server.checks.joints import JointCheck
from server.checks.resistance import Findings
from server.checks.rules import SKINS, ULTIMATE_SLIP, WEBS, chosen
from server.checks.wide_bonds import extent, wide_bond

NOT_CHECKED = (
    "lateral buckling of the member and local buckling of its pieces",
    "bearing at supports and under loads",
    "introduction of concentrated loads into the section",
    "web stiffeners",
    "vibration",
    "fire",
    "fatigue, and creep rupture of adhesives under lasting load, where no combination says how its load repeats or "
    "stays",
)
LEAST_ADHESIVE_FACTOR = 2.0  # common practice: an adhesive at least twice as strong as the largest stress


def add_cautions(
    document: documents.MemberDocument, body: Body, actions: Actions, joints: list[JointCheck], findings: Findings
) -> None:
    """Everything that deserves a word; the order is the order in which the sheet prints them."""
    _contacts(body, findings)
    _joints(document, body, joints, findings)
    _skins(document, body, actions, findings)
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
        if role == "hybrid":
            findings.caution(
                "fasteners with adhesive",
                f"{', '.join(ids)}: judged by what the shop's own tests of this joint gave with glue and fasteners "
                "together, at that spacing. The two strengths are never added; a joint built otherwise has no value.",
            )
            continue
        carried = "are judged as if it were gone" if role == "fall-back" else f"({role}) are held to carry none of it"
        findings.caution(
            "fasteners with adhesive",
            f"{', '.join(ids)}: stiff glue carries nearly all of the flow until it breaks, so the fasteners {carried}. "
            "Their strengths are never added.",
        )
    _slip_modulus(document, body, findings)
    _wide_bonds(document, body, joints, findings)
    _thin_webs(document, body, findings)
    if slipping:
        findings.caution(
            "slip",
            f"{', '.join(slipping)}: fasteners slip. Flow and spacing are those of a rigid joint; stresses of the "
            "pieces and deflection are estimates with too great a stiffness.",
        )


def _slip_modulus(document: documents.MemberDocument, body: Body, findings: Findings) -> None:
    """Limit states of EN 1995-1-1 take a softer fastener for strength; that is a rule to be named."""
    carrying = [site.id for site in body.sites if site.spec.effective_role in ("sole", "fall-back")]
    slips = document.analysis.slip or any(site.spec.role == "fall-back" for site in body.sites)
    if document.basis.method == "limit-state" and slips and carrying and ULTIMATE_SLIP not in chosen(document):
        findings.caution(
            "slip modulus",
            f"{', '.join(carrying)}: strength stands on the slip modulus as given. EN 1995-1-1 2.2.2 takes two thirds "
            f"of it in ultimate limit states, which loads the pieces more and the fasteners less: name "
            f"{ULTIMATE_SLIP!r} in analysis.rules where you work to it.",
        )


def _wide_bonds(document: documents.MemberDocument, body: Body, joints: list[JointCheck], findings: Findings) -> None:
    """EN 1995-1-1:2004 expressions (9.10) and (9.14), where their rule was not chosen: stress gathers at the edge."""
    rules = chosen(document)
    found: dict[tuple[str, float, str], list[tuple[str, str, float | None]]] = {}
    for site, check in zip(body.sites, joints, strict=True):
        for part in (site.first, site.second):
            wide = wide_bond(site, part, body)
            if wide is not None and wide.rule not in rules:
                key = (wide.words, round(wide.reduction, 9), wide.rule)
                found.setdefault(key, []).append((site.id, part.name, _rolling_use(check, part)))
    for (words, reduction, rule), places in found.items():
        parts = ", ".join(dict.fromkeys(name for _, name, _ in places))
        used = max((use for _, _, use in places if use is not None), default=None)
        effect = "" if used is None else f" (utilisation {used / reduction:.3g} instead of {used:.3g})"
        findings.caution(
            "wide bond",
            f"{', '.join(dict.fromkeys(joint for joint, _, _ in places))}: {words} would multiply the rolling "
            f"shear strength of {parts}, and the bond's, by {reduction:.3f}{effect}; it is not applied here. Name the "
            f"rule {rule!r} to apply it.",
            answer=True,
        )


def _thin_webs(document: documents.MemberDocument, body: Body, findings: Findings) -> None:
    """EN 1995-1-1:2004 expressions (9.8) and (9.9), where their rule was not chosen: slender webs buckle in shear."""
    if WEBS in chosen(document):
        return
    slender: dict[str, thin_webs.Web] = {}
    for section in body.sections:
        for web in thin_webs.webs(section):
            if web.slenderness > thin_webs.BUCKLES and web.part.name not in slender:
                slender[web.part.name] = web
    for name, web in slender.items():
        if web.slenderness > thin_webs.SLENDER:
            effect = "which is beyond the 70 where expression (9.8) of EN 1995-1-1:2004 stops: stiffen it"
        else:
            left = thin_webs.BUCKLES / web.slenderness
            effect = (
                f"and EN 1995-1-1:2004 (9.9) would count {left:.3f} of the panel shear that its whole depth carries"
            )
        findings.caution(
            "slender web",
            f"{name}: its clear depth is {web.slenderness:.4g} times its thickness, {effect}; it is not applied here. "
            f"Name the rule {WEBS!r} to apply it.",
            answer=True,
        )


def _skins(document: documents.MemberDocument, body: Body, actions: Actions, findings: Findings) -> None:
    """EN 1995-1-1:2004 9.1.2: effective width where the rule was not chosen, and skins too wide between ribs."""
    applied = SKINS in chosen(document)
    if not applied:
        for skin, ratio in effective_width.stiffness_ratio(document, body, actions):
            findings.caution(
                "effective skin width",
                f"{skin.part.name}: EN 1995-1-1:2004 9.1.2, Table 9.1 would count {skin.width:.4g} mm of its "
                f"{extent(skin.part, 0):.4g} mm, which leaves {ratio:.3f} of the bending stiffness; it is not applied "
                f"here. Name the rule {SKINS!r} to apply it.",
                answer=True,
            )
        return
    for stretch in body.stretches:
        for skin in effective_width.skins(document, actions, stretch):
            widest = effective_width.too_slender(skin)
            if widest is not None:
                findings.miss(
                    f"buckling of {skin.part.name} between its ribs: they stand {widest:.4g} mm clear, over twice "
                    f"{skin.buckling:.4g} mm (EN 1995-1-1:2004 9.1.2(5)). Set the ribs closer, take a thicker skin, or "
                    "have its buckling reckoned."
                )


def _rolling_use(check: JointCheck, part: Part) -> float | None:
    limits = check.result["limits"]
    assert isinstance(limits, list)
    for limit in limits:
        if limit["what"] == f"rolling shear in {part.name}":
            return float(limit["utilisation"])
    return None


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


def _uplift(document: documents.MemberDocument, actions: Actions, findings: Findings) -> None:
    forces = actions.response.reaction_force
    scale = max(float(np.abs(forces).max(initial=0.0)), 1e-300)
    rows, least = forces.argmin(axis=0).tolist(), forces.min(axis=0).tolist()
    for support, row, force in zip(document.member.supports, rows, least, strict=True):
        if force < -1e-9 * scale:
            findings.caution(
                "uplift",
                f"The support at {support.at:g} mm pulls the member down with {-force:,.4g} N in combination "
                f"{actions.names[row]!r}: hold it down there, or the member lifts.",
                answer=True,
            )
