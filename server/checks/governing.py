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


Told = tuple[str, CrossSection]
"""A limit in words, and the section where it is."""


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
    candidates: list[tuple[float, Callable[[], Told]]] = [
        (weighed.utilisation, partial(_limit, word, c, weighed, body, judge))
        for word, group in (("joint", joints), ("piece", pieces))
        for c in group
        if (weighed := c.governing) is not None
    ]
    if fall_back is not None and fall_back.utilisation is not None:
        candidates.append((fall_back.utilisation, partial(_told, fall_back.line, body, 0.0)))
    candidates += [(each.utilisation, partial(_told, each.line, body, each.at)) for each in ends.governs]
    candidates += [(sag.utilisation, partial(_sag, sag, body, judge)) for sag in sags]
    if not candidates:
        return None
    utilisation, told = max(candidates, key=lambda each: float(f"{each[0]:.12g}"))
    return Governing(utilisation, *told())


def _limit(word: str, check: JointCheck | PieceCheck, weighed: Weighed, body: Body, judge: Judge) -> Told:
    """A joint's or a piece's limit; with the glue gone, where that is what governs a joint."""
    gone = isinstance(check, JointCheck) and check.gone is not None and weighed.claim.symbol in ("F", "F_r")
    line = (
        f"{word} {check.result['id']}: {weighed.claim.strength.what}{' with the glue gone' if gone else ''}, "
        f"{weighed.utilisation:.3g} of its resistance used {judge.places.words(weighed.at)}, combination "
        f"{judge.actions.strength_names[weighed.row]}"
    )
    return line, body.stretches[weighed.stretch].section


def _sag(sag: Sag, body: Body, judge: Judge) -> Told:
    result = sag.result
    at = float(str(result["at"]))
    term = "long-term deflection" if result["long_term"] else "deflection"
    line = (
        f"{term} of the {result['kind']} {result['from']:g} to {result['to']:g} mm, {sag.utilisation:.3g} of "
        f"its limit used {judge.places.words(at)}, combination {result['combination']}"
    )
    return _told(line, body, at)


def _told(line: str, body: Body, at: float) -> Told:
    return line, next(stretch.section for stretch in body.stretches if at <= stretch.end)
