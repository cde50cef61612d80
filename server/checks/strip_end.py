"""Kind "strip-end": the ends of a strip bonded to a member in bending, from the document to the result."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from server import ENGINE, documents
from server.checks import statics as hand
from server.checks.actions import Actions, act
from server.checks.crosssection import GAP, Body, build
from server.checks.curves import envelope
from server.checks.member_ends import MemberEnds, after_bonding, check_ends
from server.checks.outlines import outlines
from server.checks.resistance import Findings, Judge
from server.checks.strip_ends import group_of
from server.errors import DocumentError, Fault
from server.mechanics.piecewise import evaluate
from server.working import Working, exceeds

NOT_CHECKED = (
    "the member itself: bending, shear, deflection, its other joints (check it as a member)",
    "the mean shear along the strip against the adhesive's shear strength (check it as a member)",
    "peeling where the member cracks or steps under the strip",
    "ageing, moisture and temperature of the adhesive: only by the factors of its value",
    "fire",
    "workmanship: surface preparation, bond-line thickness, cure, voids",
)
TOUCHING = 1e-3  # mm: how near to the face a piece's edge must lie for the strip to be bonded to it


def run(document: documents.StripEndDocument, *, working: bool = True) -> dict[str, object]:
    """Check both ends of a strip as contract.md's kind "strip-end" says; ``working`` false leaves the steps out.

    Raises
    ------
    DocumentError
        Where the geometry, supports or loads cannot be checked; every fault names its field.
    """
    book, findings = Working(record=working), Findings()
    if not document.member.held_sideways:
        raise DocumentError(
            [Fault("member.held_sideways", "A strip's ends are reckoned for bending up and down; enter true.")]
        )
    try:
        member = _with_strip(document)
        body = build(member)
        actions = act(member, body)
        after = act(after_bonding(member, document.before_bonding), body) if document.before_bonding else None
    except DocumentError as error:
        raise DocumentError([_named(fault, document.strip_name) for fault in error.faults]) from error
    judge = Judge(member, actions, book, findings)
    if working:
        statics = hand.Statics(member, body, actions, book)
        statics.loads()
        statics.section()
    if document.before_bonding:
        book.note(
            "Load before bonding",
            f"{', '.join(document.before_bonding)}: carried by the member alone before the strip was bonded; only "
            "what is added afterwards is shared.",
            group="Member",
        )
    ends = check_ends(member, body, actions, judge, book, findings, only=document.strip_name, after=after)
    _cautions(document, findings)
    return {
        **document.head,
        **_verdict(ends, findings),
        "basis": document.basis.model_dump(exclude_none=True),
        "ends": [_end(each, findings, book) for each in ends.ends],
        "movement": ends.movement,
        "member": {"shear": envelope(actions.shear), "moment": envelope(actions.moment)},
        "host": _host(body, document),
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "drawing": _drawing(document, body, actions),
        "steps": book.steps,
        "values_used": _values_used(document),
        "engine": ENGINE,
    }


def _with_strip(document: documents.StripEndDocument) -> documents.MemberDocument:
    """The member with the strip placed on its face, a bond line away, in the middle of what it touches."""
    strip, bottom = document.strip, document.face == "bottom"
    adhesive = document.adhesives[document.bond]
    assert isinstance(adhesive, documents.Adhesive)
    line = adhesive.thickness or 0.0
    found = {name: shape.outline for name, shape in outlines(document.host.pieces).items()}
    edges = {name: outline[:, 1].min() if bottom else outline[:, 1].max() for name, outline in found.items()}
    level = min(edges.values()) if bottom else max(edges.values())
    faces = [name for name, edge in edges.items() if abs(edge - level) <= TOUCHING]
    low = min(float(found[name][:, 0].min()) for name in faces)
    high = max(float(found[name][:, 0].max()) for name in faces)
    at = ((low + high - strip.width) / 2, level - line - strip.thickness if bottom else level + line)
    joined = [
        name
        for name in faces
        if found[name][:, 0].max() > at[0] + GAP and found[name][:, 0].min() < at[0] + strip.width - GAP
    ]
    if not joined:
        raise DocumentError(
            [Fault("strip.width", "The strip touches no piece of the host; widen it, or check the face.")]
        )
    return document.as_member(at, joined)


def _named(fault: Fault, strip: str) -> Fault:
    """A fault of the member that was made of the document, with the place it has there."""
    path = fault.path
    if path.startswith(f"section.pieces.{strip}") or path.startswith("section.joints[0]"):
        path = "strip"
    elif path.startswith("section.joints["):
        number, rest = path.removeprefix("section.joints[").split("]", 1)
        path = f"host.joints[{int(number) - 1}]{rest}"
    elif path.startswith("section."):
        path = path.replace("section.", "host.", 1)
    return replace(fault, path=path)


def _verdict(ends: MemberEnds, findings: Findings) -> dict[str, object]:
    worst = max(ends.governs, key=lambda each: float(f"{each.utilisation:.9g}"), default=None)  # of equals the first
    if worst is None and not findings.missing:
        findings.miss("anything to judge: no combination is for strength, or nothing acts after bonding.")
    failed = worst is not None and exceeds(worst.utilisation)
    return {
        "verdict": "fail" if failed else "not proven" if findings.missing or worst is None else "pass",
        "utilisation": None if worst is None else worst.utilisation,
        "governing": "nothing could be judged" if worst is None else worst.line,
    }


def _end(found: dict[str, object], findings: Findings, book: Working) -> dict[str, object]:
    """One end's block with its own verdict and its own steps."""
    used = found["utilisation"]
    failed = isinstance(used, float) and exceeds(used)
    verdict = "fail" if failed else "not proven" if findings.missing or used is None else "pass"
    group = group_of(str(found["piece"]), float(str(found["at"])))
    return {"verdict": verdict, **found, "steps": [step for step in book.steps if step["group"] == group]}


def _cautions(document: documents.StripEndDocument, findings: Findings) -> None:
    if document.service is None:
        findings.caution(
            "movement", "No service conditions were given: movement with temperature and moisture was not reckoned."
        )
    factor = document.basis.factor("adhesive")
    if document.basis.method == "allowable" and factor is not None and factor < 2.0:
        findings.caution(
            "safety factor",
            f"The safety factor on the adhesive is {factor:g}; common practice asks for an adhesive at least twice as "
            "strong as the largest stress.",
            answer=True,
        )


def _host(body: Body, document: documents.StripEndDocument) -> dict[str, object]:
    """The section with and without the strip, where it begins."""
    place = document.strip.from_
    inside = next(s for s in body.stretches if s.start <= place < s.end)
    outside = next((s for s in body.stretches if s.end == place), None)
    return {
        "EI": None if outside is None else outside.section.properties.EI,
        "EI_with_strip": inside.section.properties.EI,
        "neutral_axis": [float(x) for x in inside.section.properties.neutral_axis],
    }


def _drawing(document: documents.StripEndDocument, body: Body, actions: Actions) -> dict[str, object]:
    moment = actions.moment
    curve: list[list[float]] = []
    if moment is not None:
        x = np.union1d(np.linspace(0.0, body.length, 121), (document.strip.from_, document.strip.to))
        values = evaluate(moment.breaks, moment.coefficients, x)
        row = int(np.abs(values).max(axis=1).argmax())
        curve = [x.tolist(), values[row].tolist()]
    strip = document.strip
    pieces = [
        {
            "name": part.name,
            "material": part.spec.material,
            "kind": part.material.kind,
            "grain": part.spec.grain,
            "outline": part.outline.tolist(),
        }
        for part in body.parts
    ]
    return {
        "length": body.length,
        "supports": [{"at": s.at, "kind": s.kind} for s in document.member.supports],
        "strip": {"from": strip.from_, "to": strip.to, "thickness": strip.thickness, "width": strip.width},
        "face": document.face,
        "bond_line": document.adhesives[document.bond].thickness,  # type: ignore[union-attr]
        "pieces": pieces,
        "moment": curve,
    }


def _values_used(document: documents.StripEndDocument) -> dict[str, object]:
    def dump(value: documents.Model) -> dict[str, object]:
        found: dict[str, object] = value.model_dump(by_alias=True, exclude_none=True, mode="json")
        return found

    materials = dict.fromkeys((document.strip.material, *(p.material for p in document.host.pieces.values())))
    adhesives = dict.fromkeys((document.bond, *(j.adhesive for j in document.host.joints if j.adhesive is not None)))
    fasteners = dict.fromkeys(j.fastener for j in document.host.joints if j.fastener is not None)
    return {
        "materials": {name: dump(document.materials[name]) for name in materials},
        "adhesives": {name: dump(document.adhesives[name]) for name in adhesives},
        "fasteners": {name: dump(document.fasteners[name]) for name in fasteners if name is not None},
    }
