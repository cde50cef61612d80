"""Deflection against span / limit, between supports and on overhangs, short-term and long-term."""

from __future__ import annotations

from dataclasses import dataclass, replace

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body
from server.checks.resistance import Findings
from server.checks.sag_steps import AT_ONCE, LASTING, SIDEWAYS, Length, lengths, write_sag
from server.working import Working

LIMIT = {"span": "L/n", "overhang": "2*L/n"}
SOURCE = "limit chosen by the shop; twice the length for a cantilever or an overhang"


@dataclass(frozen=True)
class Sag:
    """One length of the member with its deflection limit and what it is used to."""

    result: dict[str, object]
    utilisation: float


def check_deflection(
    document: documents.MemberDocument,
    body: Body,
    actions: Actions,
    working: Working,
    findings: Findings,
    *,
    upper_stiffness: bool,
) -> list[Sag]:
    """Write each deflection and judge each span and overhang; say so where a limit stands but cannot be judged."""
    limit = _limit(document, actions, findings, upper_stiffness)
    found: list[Sag] = []
    for curve, long_term in ((actions.sag, False), (actions.long_term, True)):
        if curve is None:
            continue
        sagging = lengths(document.member, curve)
        if working.record:
            write_sag(document, body, actions, sagging, LASTING if long_term else AT_ONCE, working)
            aside = None
            if actions.across is not None:
                aside = actions.across.long_term if long_term else actions.across.sag
            if aside is not None:
                group = (LASTING if long_term else AT_ONCE) + SIDEWAYS
                write_sag(document, body, actions, lengths(document.member, aside), group, working)
        if limit is not None:
            found += [_sag(each, limit, working, long_term=long_term) for each in sagging]
    return found


def more_deflection(document: documents.MemberDocument, actions: Actions, ratio: float, working: Working) -> list[Sag]:
    """Judge the side that bears, where pieces side by side hang on fasteners that give: ``ratio`` times the whole."""
    limit = document.member.deflection_limit
    found: list[Sag] = []
    if ratio <= 1 or limit is None:
        return found
    for curve, long_term in ((actions.sag, False), (actions.long_term, True)):
        if curve is None:
            continue
        for each in lengths(document.member, curve):
            more = working.step(
                "Deflection of what bears, side by side", "u", "k_h*u_w",
                {"k_h": (ratio, ""), "u_w": (each.peak.value, "mm")},
                unit="mm", source="k_h: with the fasteners' give over all pieces as one; u_w: as one",
                group=LASTING if long_term else AT_ONCE,
            )  # fmt: skip
            own = replace(each, peak=each.peak._replace(value=more))
            found.append(_sag(own, limit, working, long_term=long_term))
    return found


def _limit(
    document: documents.MemberDocument, actions: Actions, findings: Findings, upper_stiffness: bool
) -> float | None:
    """The limit to judge by; None where there is none or nothing can be judged against it, which is said."""
    limit = document.member.deflection_limit
    if limit is None:
        findings.caution("deflection", "No deflection limit was given, so deflection was not judged.")
    elif actions.sag is None:
        findings.miss(
            "deflection: a limit is given but no combination is for deflection; add one (for: deflection or both)."
        )
    elif upper_stiffness:
        findings.miss(
            "deflection: fasteners carry a joint and their slip is not reckoned, so the deflection shown is too "
            "small; the limit is not judged until slip is reckoned."
        )
    else:
        return limit
    return None


def _sag(length: Length, limit: float, working: Working, *, long_term: bool) -> Sag:
    peak, where = length.peak, length.words
    group = LASTING if long_term else AT_ONCE
    allowed = working.step(
        f"Deflection limit, {where}", "u_lim", LIMIT[length.kind],
        {"L": (length.end - length.start, "mm"), "n": (limit, "")}, unit="mm", source=SOURCE, group=group,
    )  # fmt: skip
    utilisation = working.step(
        f"Utilisation of the limit, {where}", "eta", "u/u_lim", {"u": (peak.value, "mm"), "u_lim": (allowed, "mm")},
        unit="", source=f"at {peak.at:.6g} mm, combination {length.combination}", group=group,
    )  # fmt: skip
    result: dict[str, object] = {
        "from": length.start,
        "to": length.end,
        "kind": length.kind,
        "limit": allowed,
        "deflection": peak.value,
        "utilisation": utilisation,
        "long_term": long_term,
        "combination": length.combination,
        "at": peak.at,
    }
    return Sag(result, utilisation)
