"""What governs a member: of all limits the one used most, said in a line."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial
from typing import NamedTuple

from server.checks.crosssection import Body, CrossSection
from server.checks.deflection import Sag
from server.checks.fall_back import FallBack
from server.checks.joints import JointCheck
from server.checks.member_ends import MemberEnds
from server.checks.pieces import PieceCheck
from server.checks.resistance import Judge, Weighed


class Governing(NamedTuple):
    """The limit used most, in words, and the section where it is."""

    utilisation: float
    line: str
    section: CrossSection


class _Candidate(NamedTuple):
    """One limit that could govern; its line is put into words only where it does."""

    utilisation: float
    line: Callable[[], str]
    section: Callable[[], CrossSection]


def governing_limit(
    body: Body,
    judge: Judge,
    joints: Sequence[JointCheck],
    pieces: Sequence[PieceCheck],
    sags: Sequence[Sag],
    fall_back: FallBack | None,
    ends: MemberEnds,
) -> Governing | None:
    """The limit used most, of equals the first; None where nothing could be judged."""
    candidates = [
        _Candidate(weighed.utilisation, partial(_limit, word, c, weighed, judge), partial(_in_stretch, body, weighed))
        for word, group in (("joint", joints), ("piece", pieces))
        for c in group
        if (weighed := c.governing) is not None
    ]
    if fall_back is not None and fall_back.utilisation is not None:
        line = fall_back.line
        candidates.append(_Candidate(fall_back.utilisation, lambda: line, lambda: body.stretches[0].section))
    for each in ends.governs:
        candidates.append(_Candidate(each.utilisation, partial(str, each.line), partial(_section_at, body, each.at)))
    for sag in sags:
        at = float(str(sag.result["at"]))
        candidates.append(_Candidate(sag.utilisation, partial(_sag, sag, at, judge), partial(_section_at, body, at)))
    most = max(candidates, key=lambda c: float(f"{c.utilisation:.12g}"), default=None)
    return None if most is None else Governing(most.utilisation, most.line(), most.section())


def _limit(word: str, check: JointCheck | PieceCheck, weighed: Weighed, judge: Judge) -> str:
    """The line of a joint's or a piece's limit; with the glue gone, where that is what governs a joint."""
    gone = isinstance(check, JointCheck) and check.gone is not None and weighed.claim.symbol in ("F", "F_r")
    return (
        f"{word} {check.result['id']}: {weighed.claim.strength.what}{' with the glue gone' if gone else ''}, "
        f"{weighed.utilisation:.3g} of its resistance used {judge.places.words(weighed.at)}, combination "
        f"{judge.actions.strength_names[weighed.row]}"
    )


def _sag(sag: Sag, at: float, judge: Judge) -> str:
    result = sag.result
    term = "long-term deflection" if result["long_term"] else "deflection"
    return (
        f"{term} of the {result['kind']} {result['from']:g} to {result['to']:g} mm, {sag.utilisation:.3g} of "
        f"its limit used {judge.places.words(at)}, combination {result['combination']}"
    )


def _in_stretch(body: Body, weighed: Weighed) -> CrossSection:
    return body.stretches[weighed.stretch].section


def _section_at(body: Body, at: float) -> CrossSection:
    return next(s.section for s in body.stretches if at <= s.end)
