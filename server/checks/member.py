"""Kind "member": a built-up member in bending, from the document to the result."""

from __future__ import annotations

from collections.abc import Sequence

from pydantic import BaseModel

from server import ENGINE, documents
from server.checks import effective_width, moving, moving_rounds, moving_twist, sideways
from server.checks import statics as hand
from server.checks.actions import Actions, act, added_after
from server.checks.along import RigidAlong, SlidingAlong
from server.checks.bent_axis import bent_axis
from server.checks.cautions import NOT_CHECKED, add_cautions
from server.checks.combined_flow import CombinedAlong
from server.checks.contours import Look, contours
from server.checks.crosssection import Body, CrossSection, build
from server.checks.curves import envelope
from server.checks.deflection import check_deflection, more_deflection
from server.checks.drawing import diagrams, drawing
from server.checks.fall_back import FallBack, glue_gone, judge_fall_back
from server.checks.field_steps import write_fields
from server.checks.fits import refuse_misfits
from server.checks.gamma import write_annex_b
from server.checks.governing import Governing, governing_limit
from server.checks.holds import holds
from server.checks.joints import Flows, JointCheck, claim_joints, write_joint
from server.checks.member_ends import after_bonding, check_ends
from server.checks.member_lasting import check_lasting
from server.checks.pieces import PieceCheck, claim_pieces, write_piece
from server.checks.places import Places
from server.checks.resistance import Claim, Findings, Judge, Weighed
from server.checks.ribs import add_rib_claims
from server.checks.rules import KNOWN, SKINS, chosen, unknown
from server.checks.sandwich import add_sandwich_claims
from server.checks.scan import Scan, scan
from server.checks.schedule import add_schedules
from server.checks.section_field import doubts
from server.checks.sharing import state_sharing
from server.checks.side_by_side import Handing, judge_side_by_side
from server.checks.slide import Slide, slide
from server.checks.slip_steps import write_effective, write_method
from server.checks.thin_webs import add_web_claims
from server.checks.twist import Twist, twist
from server.working import Working, exceeds

PSI = 4.4482216152605 / 25.4**2  # MPa: pound-force and inch are defined (NIST SP 811)


def run(document: documents.MemberDocument, *, working: bool = True, look: Look | None = None) -> dict[str, object]:
    """Check a member as contract.md's kind "member" says.

    Raises
    ------
    DocumentError
        Where the geometry, supports or loads cannot be checked; every fault names its field.
    """
    wants: moving.Wants | None = moving.Wants()
    for _ in range(moving_rounds.ROUNDS):
        assert wants is not None
        result, wants = _round(document, wants, working=working, look=look)
        if wants is None:
            break
    return result


def _round(
    document: documents.MemberDocument, wants: moving.Wants, *, working: bool, look: Look | None
) -> tuple[dict[str, object], moving.Wants | None]:
    """One round of the check, and what another one needs where axles move (see ``moving_rounds``)."""
    body = build(document)
    refuse_misfits(document, body)
    rigid = act(document, body, wants)
    rules = chosen(document)
    if SKINS in rules and rigid.across is None:
        body = effective_width.narrowed(document, body, rigid)
        rigid = act(document, body, wants)
    book, findings = Working(record=working), Findings()
    sliding = _slide(document, body, rigid, findings)
    actions = rigid if sliding is None else sliding.actions
    statics = hand.Statics(document, body, actions, book)
    annex_b = None
    if working:
        statics.loads()
        if SKINS in rules and rigid.across is None:
            effective_width.write(document, body, rigid, book)
        statics.section()
        write_fields(body, book)
        if sliding is not None:
            write_method(sliding, book, "Slip")
            write_effective(sliding, body.stretches[0].section.properties.EI, book, "Slip")
        statics.member()
    if sliding is not None:
        annex_b = write_annex_b(document, sliding, actions, book, "EN 1995-1-1 Annex B, for comparison")
    upper = sliding is None and _upper_stiffness(document, body, findings)
    if rigid.shear is None and (body.sites or any(part.material.strengths.any() for part in body.parts)):
        findings.miss("strength: no combination is for strength, so no joint or piece is judged; add one.")
    _name_what_is_to_come(document, findings)
    sideways.name_what_is_left_out(document, body, findings)
    for section in body.sections:
        for text in doubts(section.settled, [site.id for site in section.sites]):
            findings.miss(text)
    judge = Judge(document, actions, book, findings, Places(document))
    twisted = twist(document, body, rigid, findings)
    flows = _flows(document, body, rigid, sliding, twisted, findings)
    judged = _judge(body, scan(body, actions), judge, statics, flows, sliding, upper, twisted)
    joints, pieces, fall_back, handing = judged
    state_sharing(body, joints, judge, handing)
    add_schedules(document, body, rigid, joints, flows, book)
    sags = check_deflection(document, body, actions, book, findings, upper_stiffness=upper)
    if handing is not None and not upper:
        sags += more_deflection(document, actions, handing.ratio, book)
    ends = check_ends(document, body, actions, judge, book, findings, after=_shared(document, body, rigid, findings))
    lasting = check_lasting(document, actions, joints, book, findings, ends)
    add_cautions(document, body, actions, joints, findings)
    moving_rounds.caution(actions, findings)
    slides = [each for each in (sliding, None if flows.gone is None else flows.gone.slide) if each is not None]
    governing = governing_limit(body, judge, joints, pieces, sags, fall_back, ends)
    drawn = governing.section if governing else body.stretches[0].section
    result = {
        **document.head,
        **_verdict(governing, findings),
        "basis": document.basis.model_dump(exclude_none=True),
        "section": {**_section(drawn, sliding), "bent_axis": bent_axis(actions, drawn)},
        "sections": [{"from": s.start, "to": s.end, **_section(s.section, sliding)} for s in body.stretches],
        "member": _member(document, actions),
        "joints": [c.result for c in joints],
        "pieces": [c.result for c in pieces],
        "deflection_limits": [s.result for s in sags],
        "annex_b": annex_b,
        "fall_back": None if fall_back is None else fall_back.result,
        "ends": ends.ends,
        "movement": ends.movement,
        "lasting": lasting,
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "contours": contours(body, actions, twisted, look, unit=_level_unit(document)) if working or look else None,
        "drawing": drawing(document, body, actions),
        "diagrams": diagrams(body, actions, sliding, twisted),
        "steps": book.steps,
        "values_used": _values_used(document, body),
        "engine": ENGINE,
    }
    return result, moving_rounds.further(rigid, slides, moving_twist.rows(flows.rigid))


def _level_unit(document: documents.MemberDocument) -> float:
    """What the levels of drawn stress are round in."""
    return PSI if document.display == "US" else 1.0


def _slide(document: documents.MemberDocument, body: Body, rigid: Actions, findings: Findings) -> Slide | None:
    """The member with slip where it is asked for; what it lacks is named, and without it nothing is reckoned."""
    if not document.analysis.slip or rigid.across is not None:
        return None
    held = holds(document, body, "as built")
    for text in held.missing:
        findings.miss(f"slip: {text}")
    return slide(document, body, rigid, held) if held.solvable else None


def _flows(
    document: documents.MemberDocument,
    body: Body,
    rigid: Actions,
    sliding: Slide | None,
    twisted: Twist | None,
    findings: Findings,
) -> Flows:
    scanned = scan(body, rigid)
    along: RigidAlong = RigidAlong(body, scanned)
    if twisted is not None or rigid.across is not None:
        along = CombinedAlong(body, scanned, rigid.across, twisted)
    held = None if rigid.across is not None else glue_gone(document, body, findings)
    gone = None if held is None or rigid.shear is None else SlidingAlong(slide(document, body, rigid, held))
    return Flows(along if sliding is None else SlidingAlong(sliding), along, gone)


def _upper_stiffness(document: documents.MemberDocument, body: Body, findings: Findings) -> bool:
    """Whether fasteners carry a joint with no slip reckoned, or slip was asked for and could not be."""
    fastened = [site.id for site in body.sites if not site.bonded]
    if fastened:
        findings.miss(
            f"stresses of the pieces and deflection: fasteners carry {', '.join(fastened)} and their slip is not "
            "reckoned; only flow, resistance and spacing of the fasteners stand."
        )
    return document.analysis.slip or bool(fastened)


def _shared(document: documents.MemberDocument, body: Body, rigid: Actions, findings: Findings) -> Actions | None:
    """The actions that the bonds share, where some act on the unpropped pieces before bonding."""
    before = document.analysis.before_bonding
    if not before:
        return None
    findings.miss(
        f"stresses of the pieces and deflection with load before bonding ({', '.join(before)}): until the glue has "
        "set the pieces carry it as they are held; only the ends of bonds are reckoned with what is added afterwards."
    )
    if rigid.moving is not None:
        return added_after(document, rigid, before)
    return act(after_bonding(document, before), body)


def _name_what_is_to_come(document: documents.MemberDocument, findings: Findings) -> None:
    """Name every analysis that was asked for and is not to be had."""
    for rule in unknown(document):
        findings.miss(f"rule {rule!r} (analysis.rules): not known here; known are {', '.join(map(repr, KNOWN))}.")


def _judge(
    body: Body,
    scanned: Scan,
    judge: Judge,
    statics: hand.Statics,
    flows: Flows,
    sliding: Slide | None,
    upper_stiffness: bool,
    twisted: Twist | None,
) -> tuple[list[JointCheck], list[PieceCheck], FallBack | None, Handing | None]:
    """Gather every claim, weigh all at once, write joints and pieces in the order of the document."""
    joints = claim_joints(body, flows, judge)
    pieces = claim_pieces(body, scanned, judge, upper_stiffness=upper_stiffness, slide=sliding, twist=twisted)
    add_web_claims(pieces, body, scanned, judge)
    add_sandwich_claims(joints, pieces, body, judge, upper_stiffness=upper_stiffness)
    if judge.actions.across is None:
        add_rib_claims(joints, pieces, body, judge, sliding=sliding is not None)
    handing = judge_side_by_side(judge.document, body, joints, pieces, judge, upper_stiffness=upper_stiffness)
    gone: list[PieceCheck] = []
    if flows.gone is not None:
        gone = claim_pieces(body, scanned, judge, upper_stiffness=False, slide=flows.gone.slide, fall_back=True)
        add_rib_claims([], gone, body, judge, sliding=True)
    claimed = [*(joint.claims for joint in joints), *(piece.claims for piece in (*pieces, *gone))]
    weighed = _in_groups(judge.weigh([claim for claims in claimed for claim in claims]), claimed)
    for joint, own in zip(joints, weighed, strict=False):
        joint.weighed = own
        write_joint(joint, own, body, judge, statics)
    rest = weighed[len(joints) :]
    for piece, own in zip(pieces, rest, strict=False):
        write_piece(piece, own, body, judge)
    if flows.gone is None:
        return joints, pieces, None, handing
    left = list(zip(gone, rest[len(pieces) :], strict=True))
    return joints, pieces, judge_fall_back(flows.gone, joints, left, judge), handing


def _in_groups(weighed: Sequence[Weighed | None], claimed: Sequence[Sequence[Claim]]) -> list[list[Weighed | None]]:
    found = iter(weighed)
    return [[next(found) for _ in claims] for claims in claimed]


def _verdict(governing: Governing | None, findings: Findings) -> dict[str, object]:
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


def _section(section: CrossSection, sliding: Slide | None) -> dict[str, object]:
    whole, field = section.properties, section.settled.field
    return {
        "area": whole.area,
        "mass_per_length": whole.mass_per_length,
        "EA": whole.EA,
        "EI": whole.EI,
        "EI_lateral": whole.EI_lateral,
        "EI_product": whole.EI_product,
        "neutral_axis": [float(x) for x in whole.neutral_axis],
        "shear_centre": None if field is None else field.shear_centre.tolist(),
        "GA": section.shear_stiffness,
        "GJ": None if field is None else field.GJ,
        "effective_EI": whole.EI if sliding is None else whole.EI * sliding.ratio,
    }


def _member(document: documents.MemberDocument, actions: Actions) -> dict[str, object]:
    found: dict[str, object] = {
        "reactions": moving_rounds.reactions(actions, [support.at for support in document.member.supports]),
        "shear": envelope(actions.shear),
        "moment": envelope(actions.moment),
        "deflection": envelope(actions.sag),
    }
    if actions.long_term is not None:
        found["deflection_long_term"] = envelope(actions.long_term)
    if actions.across is not None:
        found |= _sideways(actions, found["reactions"])
    return found


def _sideways(actions: Actions, reactions: object) -> dict[str, object]:
    """The lateral plane, to the right positive; its reactions stand beside the vertical ones."""
    across = actions.across
    assert across is not None
    assert isinstance(reactions, dict)
    for row, name in enumerate(across.names):
        for support, each in enumerate(reactions[name]):
            each["lateral"] = -float(across.response.reaction_force[row, support])
            each["couple_lateral"] = -float(across.response.reaction_couple[row, support])
    found: dict[str, object] = {
        "shear_lateral": envelope(across.shear),
        "moment_lateral": envelope(across.moment),
        "deflection_lateral": envelope(across.sag),
    }
    if across.long_term is not None:
        found["deflection_lateral_long_term"] = envelope(across.long_term)
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
