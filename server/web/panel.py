"""The result of a check as the page shows it: drawings, tables in the units of the sheet, what governs what.

Nothing is reckoned here; numbers are written by the same functions that write the printed sheet.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup

from server import library, sheets
from server.sheets import diagrams
from server.sheets import values as written
from server.sheets.asked import RECORDS
from server.sheets.one_page import filled
from server.sheets.section_view import joint_numbers
from server.storage import Session
from server.working import exceeds

Result = Mapping[str, Any]
QUANTITIES = tuple(diagrams.QUANTITIES)
_MOST_RECORDS = 500
_SPLITS = {"cut": "clean cut", "symmetry": "by symmetry", "field": "by field"}


@dataclass(frozen=True)
class JointRow:
    """One joint of the table: texts only, numbers in the unit of their column."""

    number: int
    id: str
    held_by: str
    flow: str
    at: str
    split: str
    width: str
    stress: str
    utilisation: str
    weakest: str
    ask_for: str
    needed: str
    over: bool


@dataclass(frozen=True)
class PieceRow:
    """One piece of the table."""

    id: str
    top: str
    bottom: str
    shear: str
    utilisation: str
    weakest: str
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
class Caution:
    """What a careful engineer would say: one subject, each sentence once, with the places it is about."""

    about: str
    texts: tuple[str, ...]
    answer: bool


@dataclass(frozen=True)
class Judged:
    """One form, read and checked: a result, or what stands in its way."""

    raw: Mapping[str, Any]
    result: Mapping[str, Any] | None
    messages: Mapping[str, str]
    on_top: tuple[str, ...] = ()
    waiting: tuple[str, ...] = ()


@dataclass(frozen=True)
class Found:
    """What the result panel of every kind shows; ``template`` draws what is the kind's own."""

    template: str
    verdict: str
    utilisation: str
    governing: str
    missing: tuple[str, ...]
    cautions: tuple[Caution, ...]
    not_checked: tuple[str, ...]


@dataclass(frozen=True)
class OnePagePanel(Found):
    """The result of a check that fits on one page: its blocks, as they are printed."""

    blocks: tuple[tuple[str, tuple[Mapping[str, Any], ...]], ...]


@dataclass(frozen=True)
class Asked:
    """What somebody wants to see of a section: the outside area of a joint, a stress, its place and combination."""

    shade: str = ""
    stress: str = ""
    at: str = ""
    combination: str = ""


def asked_of(query: Mapping[str, str]) -> Asked:
    """What the address of a saved check asks to see; its stresses stand where they are greatest."""
    return Asked(query.get("shade", ""), query.get("stress", ""))


_NOTHING = Asked()


@dataclass(frozen=True)
class Panel(Found):
    """The result of a member check."""

    section: Markup
    loads: Markup
    diagrams: tuple[Markup, ...]
    joints: tuple[JointRow, ...]
    pieces: tuple[PieceRow, ...]
    sags: tuple[SagRow, ...]
    extremes: tuple[tuple[str, str], ...]
    units: Mapping[str, str]
    shade: str = ""
    outside: str = ""
    stress: Markup | None = None
    stress_where: str = ""
    asked: Asked = _NOTHING
    combinations: tuple[str, ...] = ()
    by_field: bool = False
    blocks: tuple[tuple[str, tuple[Mapping[str, Any], ...]], ...] = ()


def any_panel(result: Result, display: str, asked: Asked = _NOTHING) -> Found:
    """Return the panel of a result of any kind, with what is asked to be seen of a member's section."""
    if result["kind"] in sheets.ONE_PAGES:
        return one_page_panel(result, display)
    return panel(result, display, asked)


def one_page_panel(result: Result, display: str) -> OnePagePanel:
    """Return the panel of a check that fits on one page."""
    found = filled(sheets.ONE_PAGES[str(result["kind"])].blocks(result, display))
    return OnePagePanel(
        **_of_every_kind(result, display, "check/_found_parts.html"),
        blocks=_blocks(found),
    )


def _blocks(found: Iterable[tuple[str, Iterable[Mapping[str, Any]]]]) -> tuple[tuple[str, tuple[Any, ...]], ...]:
    """Titled parts with something in them, drawings as markup."""
    drawn = ((title, tuple(_part(each) for each in parts)) for title, parts in found)
    return tuple((title, parts) for title, parts in drawn if parts)


def _part(part: Mapping[str, Any]) -> Mapping[str, Any]:
    return {**part, "svg": _drawn(part["svg"])} if part["kind"] == "drawing" else part


def _of_every_kind(result: Result, display: str, template: str) -> dict[str, Any]:
    return {
        "template": template,
        "verdict": str(result["verdict"]),
        "utilisation": written.utilisation(result.get("utilisation")),
        "governing": sheets.headline(result, display),
        "missing": written.missing(result, display),
        "cautions": tuple(_cautions(result, display)),
        "not_checked": tuple(result["not_checked"]),
    }


def records_offered(session: Session) -> dict[str, tuple[tuple[str, str], ...]]:
    """Return the library's records to choose from, by their group."""
    found = {group: library.search(session, group=group, limit=_MOST_RECORDS).records for group in RECORDS.values()}
    return {
        group: tuple(
            (record.key, f"{record.key}  {record.name}, rev {record.revision} {record.status}") for record in records
        )
        for group, records in found.items()
    }


def panel(result: Result, display: str, asked: Asked = _NOTHING) -> Panel:
    """Return the panel of a result, in SI or US units, with what is asked to be seen of its section."""
    numbers, shade = joint_numbers(result), asked.shade
    svg, where = _stress(result, asked.stress, display)
    shaded = next((joint for joint in result["joints"] if joint["id"] == shade), None)
    return Panel(
        **_of_every_kind(result, display, "check/_found_member.html"),
        section=_drawn(sheets.section_svg(result, display=display, shade_joint=shade or None)),
        loads=_drawn(sheets.loads_svg(result, display=display)),
        diagrams=_diagrams(result, display),
        joints=tuple(_joint(joint, numbers.get(joint["id"], 0), display) for joint in result["joints"]),
        pieces=tuple(_piece(piece, display) for piece in result["pieces"]),
        sags=tuple(_sag(each, display) for each in result.get("deflection_limits", ())),
        extremes=tuple(_extremes(result["member"], display)),
        units={stored: written.unit(stored, display).text for stored in ("N/mm", "mm", "MPa")},
        shade=shade if shaded else "",
        outside=_outside(shaded, display) if shaded else "",
        stress=svg,
        stress_where=where,
        asked=asked,
        combinations=tuple(result["member"]["reactions"]),
        by_field=result["section"].get("shear_centre") is not None,
        blocks=_blocks((*sheets.slip_blocks(result, display), *sheets.end_blocks(result, display))),
    )


def _stress(result: Result, which: str, display: str) -> tuple[Markup | None, str]:
    """The drawing of a stress, and where it stands in words; none where the result has none."""
    picture = (result.get("contours") or {}).get(which)
    if picture is None:
        return None, ""
    title = sheets.STRESSES[which]
    where = f"{title} {written.quantity(picture['at'], 'mm', display)} from the left end, {picture['combination']}"
    if which == "shear":
        where += "; beside the bond lines the run of stress along each bond where its flow is largest"
    return _drawn(sheets.stress_svg(result, which, display=display)), f"{where}."


def _outside(joint: Mapping[str, Any], display: str) -> str:
    """What is shaded, and its first moment, in words."""
    if joint.get("first_moment") is None:
        return "Nothing is shaded: what this joint holds is not settled."
    if not joint.get("cut_off"):
        return "Nothing is shaded: by symmetry this joint carries no flow."
    names, moment = ", ".join(joint["cut_off"]), written.quantity(joint["first_moment"], "mm3", display)
    return (
        f"Shaded: {names}. First moment about the neutral axis {moment}; all else gives the same with the other sign, "
        "as the working shows."
    )


def _drawn(svg: str) -> Markup:
    """Let a drawing onto the page as it is: sheets escapes every text in it."""
    return Markup(svg)  # noqa: S704 -- the one place, for our own drawings


def _diagrams(result: Result, display: str) -> tuple[Markup, ...]:
    found = result["diagrams"]
    drawn = [_drawn(sheets.diagram_svg(result, name, display=display)) for name in QUANTITIES if found.get(name)]
    if found.get("joints"):
        drawn.append(_drawn(sheets.flow_svg(result, display=display)))
    if found.get("slips"):
        drawn.append(_drawn(sheets.slip_svg(result, display=display)))
    return tuple(drawn)


def _joint(joint: Mapping[str, Any], number: int, display: str) -> JointRow:
    def said(key: str, unit: str) -> str:
        return written.unit(unit, display).number(joint.get(key))

    needed = [
        f"{words} {written.quantity(joint[key], 'mm', display)}"
        for key, words in (("width_needed", "width"), ("spacing_needed", "spacing"))
        if joint.get(key) is not None
    ]
    return JointRow(
        number=number,
        id=str(joint["id"]),
        held_by=" with ".join(str(joint[key]) for key in ("adhesive", "fastener") if joint.get(key)),
        flow=said("shear_flow", "N/mm"),
        at=written.quantity(joint["at"], "mm", display),
        split=_SPLITS.get(str(joint["split"]), "no method yet"),
        width=said("bonded_width", "mm"),
        stress=said("stress", "MPa"),
        utilisation=written.utilisation(joint["utilisation"]),
        weakest=_weakest(joint["limits"]),
        ask_for=said("strength_needed", "MPa"),
        needed=", ".join(needed) or written.DASH,
        over=_over(joint),
    )


def _piece(piece: Mapping[str, Any], display: str) -> PieceRow:
    stress = written.unit("MPa", display)
    return PieceRow(
        id=str(piece["id"]),
        top=stress.number(piece["stress_top"]),
        bottom=stress.number(piece["stress_bottom"]),
        shear=stress.number(piece["shear_stress"]),
        utilisation=written.utilisation(piece["utilisation"]),
        weakest=_weakest(piece["limits"]),
        over=_over(piece),
    )


def _sag(each: Mapping[str, Any], display: str) -> SagRow:
    ends = " to ".join(written.quantity(each[end], "mm", display) for end in ("from", "to"))
    length = written.unit("mm", display)
    return SagRow(
        where=ends + (", long-term" if each.get("long_term") else ""),
        deflection=length.number(each["deflection"]),
        limit=length.number(each["limit"]),
        utilisation=written.utilisation(each["utilisation"]),
        over=_over(each),
    )


def _cautions(result: Result, display: str) -> Iterable[Caution]:
    """Put cautions on one subject together; a sentence said of several joints or pieces names them all once."""
    ids = {str(part["id"]) for group in ("joints", "pieces") for part in result.get(group, ())}
    subjects: dict[tuple[str, bool], dict[str, list[str]]] = {}
    for each in result["cautions"]:
        sentences = subjects.setdefault((str(each["about"]), bool(each.get("answer"))), {})
        whole = written.spoken(written.in_units(str(each["text"]), display))
        place, colon, rest = whole.partition(": ")
        if colon and place in ids:
            sentences.setdefault(rest, []).append(place)
        else:
            sentences.setdefault(whole, [])
    for (about, answer), sentences in subjects.items():
        texts = tuple(f"{', '.join(places)}: {text}" if places else text for text, places in sentences.items())
        yield Caution(about, texts, answer)


def _weakest(limits: Sequence[Mapping[str, Any]]) -> str:
    """Name the limit that is used most; a dash where nothing could be judged."""
    judged = [limit for limit in limits if limit.get("utilisation") is not None]
    return str(max(judged, key=lambda limit: float(limit["utilisation"]))["what"]) if judged else written.DASH


def _over(part: Mapping[str, Any]) -> bool:
    used = part.get("utilisation")
    return isinstance(used, int | float) and exceeds(used)


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
        ("deflection_lateral", "Largest lateral deflection"),
    ):
        if found := member.get(name):
            aside = name == "deflection_lateral" and abs(found["min"]) > abs(found["max"])
            end = "min" if aside else "max"
            place = written.quantity(found[f"at_{end}"], "mm", display)
            yield title, f"{written.quantity(found[end], 'mm', display)} at {place}"
