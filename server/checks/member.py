"""Kind "member": a built-up member in bending, from the document to the result."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from pydantic import BaseModel

from server import ENGINE, documents
from server.checks import statics as hand
from server.checks.actions import Actions, act, envelope
from server.checks.cautions import NOT_CHECKED, add_cautions
from server.checks.crosssection import Body, CrossSection, build
from server.checks.deflection import Sag, check_deflection
from server.checks.drawing import diagrams, drawing
from server.checks.joints import JointCheck, claim_joints, write_joint
from server.checks.pieces import PieceCheck, claim_pieces, write_piece
from server.checks.resistance import Findings, Judge
from server.checks.scan import scan
from server.errors import DocumentError, Fault
from server.working import Working, exceeds


@dataclass(frozen=True)
class Candidate:
    """One limit that could govern."""

    utilisation: float
    line: str
    section: CrossSection


def run(document: documents.MemberDocument, *, working: bool = True) -> dict[str, object]:
    """Check a member as contract.md's kind "member" says.

    Raises
    ------
    DocumentError
        Where the geometry, supports or loads cannot be checked; every fault names its field.
    """
    _refuse_what_is_to_come(document)
    body = build(document)
    actions = act(document, body)
    book, findings = Working(record=working), Findings()
    statics = hand.Statics(document, body, actions, book)
    if working:
        statics.loads()
        statics.section()
        statics.member()
    upper = _upper_stiffness(document, body, findings)
    joints, pieces = _judge(body, actions, Judge(document, actions, book, findings), statics, upper)
    if working:
        statics.deflection()
    sags = check_deflection(document, actions, book, findings, upper_stiffness=upper)
    add_cautions(document, body, actions, joints, findings)
    governing = _governing(body, actions, joints, pieces, sags)
    return {
        "format": document.format,
        "kind": document.kind,
        "title": document.title,
        "note": document.note,
        "display": document.display,
        **_verdict(governing, findings),
        "basis": document.basis.model_dump(exclude_none=True),
        "section": _section(governing.section if governing else body.stretches[0].section),
        "sections": [{"from": s.start, "to": s.end, **_section(s.section)} for s in body.stretches],
        "member": _member(document, actions),
        "joints": [c.result for c in joints],
        "pieces": [c.result for c in pieces],
        "deflection_limits": [s.result for s in sags],
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "drawing": drawing(document, body, actions),
        "diagrams": diagrams(body, actions),
        "steps": book.steps,
        "values_used": _values_used(document, body),
        "engine": ENGINE,
    }


def _refuse_what_is_to_come(document: documents.MemberDocument) -> None:
    """Unsymmetrical bending has no method here yet; a number for it would be wrong without a sign of it."""
    if not document.member.held_sideways:
        raise DocumentError(
            [
                Fault(
                    "member.held_sideways",
                    "held_sideways is false; bending about both axes is not available in this version. Hold the "
                    "member sideways and enter true.",
                )
            ]
        )


def _upper_stiffness(document: documents.MemberDocument, body: Body, findings: Findings) -> bool:
    """Whether fasteners carry a joint with no slip reckoned; also names every analysis asked for and not to be had."""
    fastened = [site.id for site in body.sites if not site.bonded]
    analysis = document.analysis
    if analysis.slip:
        findings.miss("slip of the joints (analysis.slip): not reckoned in this version; the joints are taken rigid.")
    elif fastened:
        findings.miss(
            f"stresses of the pieces and deflection: fasteners carry {', '.join(fastened)} and their slip is not "
            "reckoned; only flow, resistance and spacing of the fasteners stand."
        )
    if analysis.field == "always":
        findings.miss("the section's shear field (analysis.field always): not available in this version.")
    for rule in analysis.rules:
        findings.miss(f"rule {rule!r} (analysis.rules): not applied in this version; see the cautions for its effect.")
    for case, loads in document.loads.items():
        for number, load in enumerate(loads):
            if getattr(load, "offset", 0.0):
                findings.miss(f"torsion of load {number + 1} of case {case!r} (offset): not reckoned in this version.")
    return analysis.slip or bool(fastened)


def _judge(
    body: Body, actions: Actions, judge: Judge, statics: hand.Statics, upper_stiffness: bool
) -> tuple[list[JointCheck], list[PieceCheck]]:
    """Gather every claim, weigh all at once, write joints and pieces in the order of the document."""
    scanned = scan(body, actions)
    joints = claim_joints(body, scanned, judge)
    pieces = claim_pieces(body, scanned, judge, upper_stiffness=upper_stiffness)
    weighed = iter(
        judge.weigh(
            [
                *(claim for joint in joints for claim in joint.claims),
                *(claim for piece in pieces for claim in piece.claims),
            ]
        )
    )
    for joint in joints:
        write_joint(joint, [next(weighed) for _ in joint.claims], body, judge, statics)
    for piece in pieces:
        write_piece(piece, [next(weighed) for _ in piece.claims], body, judge)
    return joints, pieces


def _governing(
    body: Body, actions: Actions, joints: Sequence[JointCheck], pieces: Sequence[PieceCheck], sags: Sequence[Sag]
) -> Candidate | None:
    candidates = [
        Candidate(
            c.governing.utilisation,
            f"{word} {c.result['id']}: {c.governing.claim.strength.what}, {c.governing.utilisation:.3g} of its "
            f"resistance used {c.governing.at:.6g} mm from the left end, combination "
            f"{actions.strength_names[c.governing.row]}",
            body.stretches[c.governing.stretch].section,
        )
        for word, group in (("joint", joints), ("piece", pieces))
        for c in group
        if c.governing is not None
    ]
    for sag in sags:
        result = sag.result
        at = float(str(result["at"]))
        section = next(s.section for s in body.stretches if at <= s.end)
        term = "long-term deflection" if result["long_term"] else "deflection"
        candidates.append(
            Candidate(
                sag.utilisation,
                f"{term} of the {result['kind']} {result['from']:g} to {result['to']:g} mm, {sag.utilisation:.3g} of "
                f"its limit used {at:.6g} mm from the left end, combination {result['combination']}",
                section,
            )
        )
    return max(candidates, key=lambda c: c.utilisation, default=None)


def _verdict(governing: Candidate | None, findings: Findings) -> dict[str, object]:
    """Fail where a utilisation exceeds 1; else not proven where anything is missing; else pass."""
    if governing is not None and exceeds(governing.utilisation):
        verdict = "fail"
    elif findings.missing or governing is None:
        verdict = "not proven"
    else:
        verdict = "pass"
    if governing is None and not findings.missing:
        findings.miss("anything to judge: no joint, piece strength or deflection limit gives a utilisation.")
    return {
        "verdict": verdict,
        "utilisation": None if governing is None else governing.utilisation,
        "governing": "nothing could be judged" if governing is None else governing.line,
    }


def _section(section: CrossSection) -> dict[str, object]:
    whole = section.properties
    return {
        "area": whole.area,
        "mass_per_length": whole.mass_per_length,
        "EA": whole.EA,
        "EI": whole.EI,
        "EI_lateral": whole.EI_lateral,
        "EI_product": whole.EI_product,
        "neutral_axis": [float(x) for x in whole.neutral_axis],
        "shear_centre": None,
        "GA": section.shear_stiffness,
        "GJ": None,
        "effective_EI": whole.EI,
    }


def _member(document: documents.MemberDocument, actions: Actions) -> dict[str, object]:
    response = actions.response
    found: dict[str, object] = {
        "reactions": {
            name: [
                {
                    "at": support.at,
                    "force": float(response.reaction_force[k, i]),
                    "couple": float(response.reaction_couple[k, i]),
                }
                for i, support in enumerate(document.member.supports)
            ]
            for k, name in enumerate(actions.names)
        },
        "shear": envelope(actions.shear),
        "moment": envelope(actions.moment),
        "deflection": envelope(actions.sag),
    }
    if actions.long_term is not None:
        found["deflection_long_term"] = envelope(actions.long_term)
    return found


def _values_used(document: documents.MemberDocument, body: Body) -> dict[str, object]:
    """Every value the check stands on, whole, so that a stored result never depends on the library."""
    materials = dict.fromkeys(part.spec.material for part in body.parts)
    adhesives = dict.fromkeys(s.spec.adhesive for s in body.sites if s.spec.adhesive is not None)
    fasteners = dict.fromkeys(s.spec.fastener for s in body.sites if s.spec.fastener is not None)
    return {
        "materials": {name: _dump(document.materials[name]) for name in materials},
        "adhesives": {name: _dump(document.adhesives[name]) for name in adhesives},
        "fasteners": {name: _dump(document.fasteners[name]) for name in fasteners},
    }


def _dump(value: BaseModel) -> dict[str, object]:
    dumped: dict[str, object] = value.model_dump(by_alias=True, exclude_none=True, mode="json")
    return dumped
