"""Deflection against span / limit, between supports and on overhangs, short-term and long-term."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from server import documents
from server.checks.actions import Actions, Curve, Peak, largest
from server.checks.resistance import Findings
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
    actions: Actions,
    working: Working,
    findings: Findings,
    *,
    upper_stiffness: bool,
) -> list[Sag]:
    """Judge each span and overhang; say so where a limit stands but nothing can be judged against it."""
    limit = document.member.deflection_limit
    if limit is None:
        findings.caution("deflection", "No deflection limit was given, so deflection was not judged.")
        return []
    if actions.sag is None:
        findings.miss(
            "deflection: a limit is given but no combination is for deflection; add one (for: deflection or both)."
        )
        return []
    if upper_stiffness:
        findings.miss(
            "deflection: fasteners carry a joint and their slip is not reckoned, so the deflection shown is too "
            "small; the limit is not judged until slip is reckoned."
        )
        return []
    found = _sags(document, actions.sag, limit, working, long_term=False)
    if actions.long_term is not None:
        found += _sags(document, actions.long_term, limit, working, long_term=True)
    return found


def _sags(
    document: documents.MemberDocument, curve: Curve, limit: float, working: Working, *, long_term: bool
) -> list[Sag]:
    return [
        _sag(start, end, kind, largest(*curve.over(start, end).absolute()), limit, curve.names, working, long_term)
        for start, end, kind in spans(document.member)
    ]


def spans(member: documents.Member) -> list[tuple[float, float, str]]:
    """The lengths between supports ("span") and beyond the outer ones ("overhang"), left to right."""
    places = sorted(s.at for s in member.supports)
    found = [(a, b, "span") for a, b in pairwise(places)]
    if places[0] > 0:
        found.insert(0, (0.0, places[0], "overhang"))
    if places[-1] < member.length:
        found.append((places[-1], member.length, "overhang"))
    return found


def _sag(
    start: float,
    end: float,
    kind: str,
    peak: Peak,
    limit: float,
    names: tuple[str, ...],
    working: Working,
    long_term: bool,
) -> Sag:
    combination = names[peak.row]
    group = "Long-term deflection" if long_term else "Deflection"
    where = f"{kind} {start:g} to {end:g} mm"
    allowed = working.step(
        f"Deflection limit, {where}", "u_lim", LIMIT[kind], {"L": (end - start, "mm"), "n": (limit, "")},
        unit="mm", source=SOURCE, group=group,
    )  # fmt: skip
    utilisation = working.step(
        f"Utilisation of the limit, {where}", "eta", "u/u_lim", {"u": (peak.value, "mm"), "u_lim": (allowed, "mm")},
        unit="", source=f"at {peak.at:.6g} mm, combination {combination}", group=group,
    )  # fmt: skip
    result: dict[str, object] = {
        "from": start,
        "to": end,
        "kind": kind,
        "limit": allowed,
        "deflection": peak.value,
        "utilisation": utilisation,
        "long_term": long_term,
        "combination": combination,
        "at": peak.at,
    }
    return Sag(result, utilisation)
