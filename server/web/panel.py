"""The result of a check as the page shows it: drawings, tables in the units of the sheet, what governs what.

Nothing is reckoned here; numbers are written by the same functions that write the printed sheet.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup

from server import sheets
from server.sheets import values as written

Result = Mapping[str, Any]
QUANTITIES = (
    ("shear", "Shear force"),
    ("moment", "Bending moment"),
    ("deflection", "Deflection"),
    ("joints", "Shear flow in the joints"),
)
_SPLITS = {"cut": "clean cut", "symmetry": "by symmetry", "field": "by field"}


@dataclass(frozen=True)
class JointRow:
    """One joint of the table: texts only, but for the utilisation that the verdict needs."""

    number: int
    id: str
    held_by: str
    flow: str
    width: str
    stress: str
    split: str
    weakest: str
    utilisation: str
    ask_for: str
    needed: str
    at: str
    over: bool


@dataclass(frozen=True)
class PieceRow:
    """One piece of the table."""

    id: str
    top: str
    bottom: str
    shear: str
    weakest: str
    utilisation: str
    over: bool


@dataclass(frozen=True)
class SagRow:
    """One deflection limit of the table."""

    where: str
    deflection: str
    limit: str
    utilisation: str
    over: bool


@dataclass(frozen=True)
class Panel:
    """Everything the result panel shows."""

    verdict: str
    utilisation: str
    governing: str
    section: Markup
    loads: Markup
    diagrams: tuple[tuple[str, Markup], ...]
    joints: tuple[JointRow, ...]
    pieces: tuple[PieceRow, ...]
    sags: tuple[SagRow, ...]
    missing: tuple[str, ...]
    cautions: tuple[Mapping[str, Any], ...]
    not_checked: tuple[str, ...]
    extremes: tuple[tuple[str, str], ...]


def panel(result: Result, display: str) -> Panel:
    """Return the panel of a result, in SI or US units."""
    numbers = sheets.joint_numbers(result)
    return Panel(
        verdict=str(result["verdict"]),
        utilisation=written.utilisation(result.get("utilisation")),
        governing=written.governing(result, display),
        section=_drawn(sheets.section_svg(result, display=display)),
        loads=_drawn(sheets.loads_svg(result, display=display)),
        diagrams=_diagrams(result, display),
        joints=tuple(_joint(joint, numbers.get(joint["id"], 0), display) for joint in result["joints"]),
        pieces=tuple(_piece(piece, display) for piece in result["pieces"]),
        sags=tuple(_sag(each, display) for each in result.get("deflection_limits", ())),
        missing=tuple(line[:1].upper() + line[1:] for line in result["missing"]),
        cautions=tuple(result["cautions"]),
        not_checked=tuple(result["not_checked"]),
        extremes=tuple(_extremes(result["member"], display)),
    )


def _drawn(svg: str) -> Markup:
    """Let a drawing onto the page as it is: sheets escapes every text in it."""
    return Markup(svg)  # noqa: S704 -- the one place, for our own drawings


def _diagrams(result: Result, display: str) -> tuple[tuple[str, Markup], ...]:
    found = result["diagrams"]
    return tuple(
        (title, _drawn(sheets.diagram_svg(result, name, display=display)))
        for name, title in QUANTITIES
        if found.get(name)
    )


def _joint(joint: Mapping[str, Any], number: int, display: str) -> JointRow:
    weakest = _weakest(joint["limits"])
    needed = [
        f"{words} {written.quantity(joint[key], 'mm', display)}"
        for key, words in (("width_needed", "width"), ("spacing_needed", "spacing"))
        if joint.get(key) is not None
    ]
    held_by = [str(joint[key]) for key in ("adhesive", "fastener") if joint.get(key)]
    return JointRow(
        number=number,
        id=str(joint["id"]),
        held_by=" with ".join(held_by),
        flow=written.quantity(joint["shear_flow"], "N/mm", display),
        width=written.quantity(joint["bonded_width"], "mm", display),
        stress=written.quantity(joint["stress"], "MPa", display),
        split=_SPLITS.get(str(joint["split"]), "no method yet"),
        weakest=weakest,
        utilisation=written.utilisation(joint["utilisation"]),
        ask_for=written.quantity(joint["strength_needed"], "MPa", display),
        needed=", ".join(needed) or written.DASH,
        at=written.quantity(joint["at"], "mm", display),
        over=_over(joint),
    )


def _piece(piece: Mapping[str, Any], display: str) -> PieceRow:
    return PieceRow(
        id=str(piece["id"]),
        top=written.quantity(piece["stress_top"], "MPa", display),
        bottom=written.quantity(piece["stress_bottom"], "MPa", display),
        shear=written.quantity(piece["shear_stress"], "MPa", display),
        weakest=_weakest(piece["limits"]),
        utilisation=written.utilisation(piece["utilisation"]),
        over=_over(piece),
    )


def _sag(each: Mapping[str, Any], display: str) -> SagRow:
    ends = " to ".join(written.quantity(each[end], "mm", display) for end in ("from", "to"))
    return SagRow(
        where=ends + (", long-term" if each.get("long_term") else ""),
        deflection=written.quantity(each["deflection"], "mm", display),
        limit=written.quantity(each["limit"], "mm", display),
        utilisation=written.utilisation(each["utilisation"]),
        over=_over(each),
    )


def _weakest(limits: Sequence[Mapping[str, Any]]) -> str:
    """Name the limit that is used most; a dash where nothing could be judged."""
    judged = [limit for limit in limits if limit.get("utilisation") is not None]
    return str(max(judged, key=lambda limit: float(limit["utilisation"]))["what"]) if judged else written.DASH


def _over(part: Mapping[str, Any]) -> bool:
    used = part.get("utilisation")
    return isinstance(used, int | float) and used > 1


def _extremes(member: Mapping[str, Any], display: str) -> Iterable[tuple[str, str]]:
    """Return the largest shear, moment and deflection with their places, for the lines under the diagrams."""
    for name, title, unit in (("shear", "Largest shear", "N"), ("moment", "Largest moment", "N*mm")):
        if found := member.get(name):
            end = "max" if abs(found["max"]) >= abs(found["min"]) else "min"
            place = written.quantity(found[f"at_{end}"], "mm", display)
            yield title, f"{written.quantity(found[end], unit, display)} at {place}"
    for name, title in (
        ("deflection", "Largest deflection"),
        ("deflection_long_term", "Largest deflection, long-term"),
    ):
        if found := member.get(name):
            place = written.quantity(found["at_max"], "mm", display)
            yield title, f"{written.quantity(found['max'], 'mm', display)} at {place}"
