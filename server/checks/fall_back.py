"""Whether the fasteners hold the member when the glue is gone: stiffness left, force per fastener, pieces, verdict."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from server import documents
from server.checks.along import SlidingAlong
from server.checks.crosssection import Body
from server.checks.curves import largest
from server.checks.gamma import write_annex_b
from server.checks.holds import Holds, holds
from server.checks.joints import JointCheck
from server.checks.pieces import PieceCheck, write_piece
from server.checks.resistance import Findings, Judge, Weighed
from server.checks.sag_steps import spans
from server.checks.slide import Slide
from server.checks.slip_steps import write_effective, write_method
from server.working import exceeds

GROUP = "Glue gone"


@dataclass(frozen=True)
class FallBack:
    """What came out: its block of the result, and its largest utilisation with the line that says so."""

    result: dict[str, object]
    utilisation: float | None
    line: str


def glue_gone(document: documents.MemberDocument, body: Body, findings: Findings) -> Holds | None:
    """The joints with all glue gone; None where no joint asks for it, or a stiffness is missing (named)."""
    if not any(site.spec.role == "fall-back" for site in body.sites):
        return None
    held = holds(document, body, "glue gone")
    for text in held.missing:
        findings.miss(f"fall-back: {text}")
    return held if held.solvable else None


def judge_fall_back(
    gone: SlidingAlong,
    joints: Sequence[JointCheck],
    pieces: Sequence[tuple[PieceCheck, list[Weighed | None]]],
    judge: Judge,
) -> FallBack:
    """Write the steps of the fall-back and say in words whether there is one."""
    slide, document, working = gone.slide, judge.document, judge.working
    write_method(slide, working, GROUP)
    EI = slide.body.stretches[0].section.properties.EI
    left = write_effective(slide, EI, working, GROUP)
    share = working.step(
        "Share of the stiffness left", "r", "EI_eff/EI", {"EI_eff": (left, "N*mm2"), "EI": (EI, "N*mm2")},
        unit="", source="with the glue gone, against the glued member", group=GROUP,
    )  # fmt: skip
    annex_b = write_annex_b(document, slide, slide.actions, working, "EN 1995-1-1 Annex B with the glue gone")
    blocks = [_joint_block(check) for check in joints if check.gone is not None]
    judged = [(check, _write_piece(check, weighed, slide.body, judge)) for check, weighed in pieces]
    uses = [
        (float(str(block["utilisation"])), f"fastener {block['fastener']} of joint {block['id']}")
        for block in blocks
        if block["utilisation"] is not None
    ]
    uses += [
        (check.governing.utilisation, f"{check.governing.claim.strength.what}")
        for check, _ in judged
        if check.governing
    ]
    proven = len(blocks) == sum(site.spec.role == "fall-back" for site in slide.body.sites)
    proven = proven and all(block["utilisation"] is not None for block in blocks)
    worst = max(uses, key=lambda use: float(f"{use[0]:.9g}"), default=None)  # of equals the first
    holds_well = worst is not None and not exceeds(worst[0])
    words = _words(proven, holds_well, worst, share)
    result: dict[str, object] = {
        "verdict": "there is none" if not holds_well and worst is not None else "there is a fall-back" if proven else
        "not proven",
        "holds": holds_well and proven,
        "text": words,
        "stiffness_left": share,
        "effective_EI": left,
        "annex_b": annex_b,
        "factor": document.basis.fall_back(),
        "deflection": _deflection(slide, document),
        "utilisation": None if worst is None else worst[0],
        "joints": blocks,
        "pieces": [check.result for check, _ in judged],
    }  # fmt: skip
    line = "" if worst is None else f"glue gone: {worst[1]}, {worst[0]:.3g} of its resistance used"
    return FallBack(result, None if worst is None else worst[0], line)


def _joint_block(check: JointCheck) -> dict[str, object]:
    fastening, gone = check.fastening, check.gone
    assert fastening is not None
    assert gone is not None
    limits = check.result["limits"]
    assert isinstance(limits, list)
    own = [limit for limit in limits if limit["demand_unit"] == "N"]  # as one section, then the rib alone
    most: dict[str, float] = max(own, key=lambda limit: float(limit["utilisation"]), default={})
    row = fastening.demand.peak
    slips = gone.slide.slips[check.site.index]
    return {
        "id": check.site.id,
        "fastener": check.site.spec.fastener,
        "shear_flow": float(fastening.demand.flow[row]),
        "at": float(fastening.demand.at[row]),
        "slip": largest(*slips.whole.absolute()).value,
        "force": own[0]["demand"] if own else None,
        "force_judged": most["demand"] if own else None,
        "resistance": own[0]["resistance"] if own else None,
        "utilisation": most["utilisation"] if own else None,
        "spacing_needed": check.result["spacing_needed"],
    }


def _write_piece(check: PieceCheck, weighed: list[Weighed | None], body: Body, judge: Judge) -> PieceCheck:
    write_piece(check, weighed, body, judge, f"Piece {check.part.name}, glue gone")
    return check


def _deflection(slide: Slide, document: documents.MemberDocument) -> list[dict[str, object]]:
    """Greatest deflection of every span and overhang, and the span over it: told, not judged."""
    sag = slide.actions.sag
    found: list[dict[str, object]] = []
    if sag is None:
        return found
    for start, end, kind in spans(document.member):
        peak = largest(*sag.over(start, end).absolute())
        reach = (end - start) * (1 if kind == "span" else 2)
        found.append(
            {
                "from": start,
                "to": end,
                "kind": kind,
                "deflection": peak.value,
                "at": peak.at,
                "span_over": reach / peak.value if peak.value > 0 else None,
                "combination": sag.names[peak.row],
            }
        )
    return found


def _words(proven: bool, holds_well: bool, worst: tuple[float, str] | None, share: float) -> str:
    left = f"with the glue gone the member keeps {100 * share:.0f} % of its stiffness"
    if worst is not None and not holds_well:
        return f"There is none: {left}, and {worst[1]} is used to {worst[0]:.3g}."
    if not proven or worst is None:
        return f"Not proven: {left}; what is missing is named."
    return f"There is a fall-back: {left}, and {worst[1]} is used most, to {worst[0]:.3g}."
