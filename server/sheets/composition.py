"""A check composed as a sheet: headings, tables, drawings and working in the order in which a reviewer reads them.

The parts are plain data. ``templates/sheet`` decides how they look, and takes every text as it stands.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

from server.sheets import slip_parts, tables
from server.sheets.bond_ends import blocks as end_blocks
from server.sheets.given import Group, given
from server.sheets.one_page import filled
from server.sheets.one_pages import ONE_PAGES
from server.sheets.steps import working_groups
from server.sheets.values import governing, in_units, missing, spoken, utilisation, verdict
from server.working import typst_math

Part = dict[str, Any]

STANDING_CAUTION = (
    "This is a workshop check by published formulae using values and factors entered by the shop. It does not replace "
    "the local code, a licensed engineer’s review where required, or proof testing. The user is responsible for "
    "applicability."
)
FOOT = (
    "Workshop check by published formulae. Local codes and licensed practice take precedence; "
    "limits of use stand at the end."
)
PRECEDENCE = "Local building, road, marine and machinery rules, and licensed practice, take precedence over this sheet."
DIAGRAM_HEIGHT = 172.0
STRESS_HEIGHT = 230.0
KINDS = {"member": "Check of a built-up member"} | {kind: page.title for kind, page in ONE_PAGES.items()}


@dataclass(frozen=True)
class SheetData:
    """Everything that stands on one sheet. Two equal sheets give the same bytes, on any day and on any machine."""

    document: Mapping[str, Any]
    """The check document exactly as typed."""
    result: Mapping[str, Any]
    shop: str = ""
    address: tuple[str, ...] = ()
    job: str = ""
    customer: str = ""
    title: str = ""
    """The heading; left empty, the document's own title."""
    drawing: str = ""
    """Drawing reference with its revision."""
    mark: str = ""
    """Member mark."""
    revision: int | None = None
    date: str = ""
    """The date as it is to be printed."""
    paper: Literal["A4", "Letter"] = "A4"
    display: Literal["SI", "US"] = "SI"
    status: str = ""
    """State of the check as it is to be printed: issued, draft, superseded by revision 3."""
    prepared: str = ""
    checked: str = ""
    approved: str = ""
    replies: Mapping[str, str] = field(default_factory=dict)
    """Replies to cautions, by the caution's text."""
    answered: Sequence[tuple[str, str, str]] = ()
    """Further questions that were answered before the check was issued: what each is about, its text, the reply."""
    content_hash: str = ""
    engine: str = ""
    saved_at: int = 0
    """Seconds since 1970 that the file names as its date of making."""


def compose(sheet: SheetData, drawings: Drawings) -> Part:
    """The whole sheet as data for the template."""
    return {
        "paper": {"A4": "a4", "Letter": "us-letter"}[sheet.paper],
        "head": head_of(sheet),
        "verdict": {
            "word": verdict(sheet.result),
            "utilisation": utilisation(sheet.result.get("utilisation")),
            "governing": headline(sheet.result, sheet.display),
        },
        "parts": list(_numbered(sheet, drawings)),
        "foot": {
            "engine": sheet.engine or str(sheet.result.get("engine", "")),
            "hash": sheet.content_hash or "not saved",
            "limits": FOOT,
        },
    }


def given_values(document: Mapping[str, Any], values_used: Mapping[str, Any], display: str) -> tuple[Group, ...]:
    """The given values of a check of any kind."""
    page = ONE_PAGES.get(str(document.get("kind")))
    return given(document, values_used, display) if page is None else page.given(document, values_used, display)


def headline(result: Mapping[str, Any], display: str) -> str:
    """The line under the verdict, for every kind of check."""
    page = ONE_PAGES.get(str(result.get("kind")))
    return governing(result, display) if page is None else page.headline(result, display)


@dataclass(frozen=True)
class Drawings:
    """The drawing functions, handed in: result and display to SVG."""

    section: Callable[..., str]
    loads: Callable[..., str]
    diagram: Callable[..., str]
    flow: Callable[..., str]
    slip: Callable[..., str]
    stress: Callable[..., str]


def head_of(sheet: SheetData) -> Part:
    """What stands in the title block, and runs on at the head of further pages."""
    title = sheet.title or str(sheet.result.get("title") or sheet.document.get("title") or "Untitled check")
    revision = "" if sheet.revision is None else str(sheet.revision)
    names = [f"job {sheet.job}" if sheet.job else "", sheet.mark, f"revision {revision}" if revision else "", title]
    kind = KINDS.get(str(sheet.result.get("kind")), "Check")
    return {
        "shop": sheet.shop or "No shop heading set",
        "address": list(sheet.address),
        "job": sheet.job,
        "customer": sheet.customer,
        "title": title,
        "kind": f"{kind} – {sheet.status}" if sheet.status else kind,
        "mark": sheet.mark,
        "drawing": sheet.drawing,
        "revision": revision,
        "date": sheet.date,
        "running": " · ".join(name for name in names if name),
    }


def _numbered(sheet: SheetData, drawings: Drawings) -> Iterator[Part]:
    number = 0
    for title, parts in _sections(sheet, drawings):
        listed = list(parts)
        if listed:
            number += 1
            yield {"kind": "heading", "number": str(number), "title": title}
            yield from listed


def _sections(sheet: SheetData, drawings: Drawings) -> Iterator[tuple[str, Iterable[Part]]]:
    yield from _one_page(sheet) if str(sheet.result.get("kind")) in ONE_PAGES else _member(sheet, drawings)
    yield from _common(sheet)


def _one_page(sheet: SheetData) -> Iterator[tuple[str, Iterable[Part]]]:
    page = ONE_PAGES[str(sheet.result["kind"])]
    groups = page.given(sheet.document, sheet.result.get("values_used") or {}, sheet.display)
    yield "Given values", _given_parts(groups, sheet)
    for title, parts in filled(page.blocks(sheet.result, sheet.display)):
        yield title, [dict(part) for part in parts]


def _member(sheet: SheetData, drawings: Drawings) -> Iterator[tuple[str, Iterable[Part]]]:
    result, display = sheet.result, sheet.display
    groups = given(sheet.document, result.get("values_used") or {}, display)
    basis = [group for group in groups if group.title in ("Basis", "Combinations")]
    yield "Basis", [_lines(group) for group in basis]
    yield "Given values", _given_parts([group for group in groups if group not in basis], sheet)
    yield "Section, loads and actions", _drawing_parts(result, display, drawings)
    yield "Stress in the section", _stress_parts(result, display, drawings)
    yield "Section properties", tables.section(result, display)
    yield "Reactions, shear, moment", tables.actions(result, display)
    yield "Joints", tables.joints(result, display)
    yield from slip_parts.blocks(result, display)
    yield "Pieces", tables.pieces(result, display)
    yield "Deflection", tables.deflection(result, display)
    yield from ((title, [dict(part) for part in parts]) for title, parts in end_blocks(result, display))


def _common(sheet: SheetData) -> Iterator[tuple[str, Iterable[Part]]]:
    """What every kind of check ends with."""
    result, display = sheet.result, sheet.display
    yield "What is missing", _list(missing(result, display))
    yield "Cautions and replies", _cautions(result, sheet.replies, display)
    yield "Tested as, used as", _answers(sheet.answered, display)
    yield "Working", working(result, display)
    yield "Values used", _values_used(result)
    yield "Not checked", _not_checked(result)
    yield "Prepared, checked, approved", [_signatures(sheet)]
    yield "Limits of use", [{"kind": "text", "text": STANDING_CAUTION}]


def _given_parts(groups: Sequence[Group], sheet: SheetData) -> Iterator[Part]:
    note = sheet.document.get("note")
    if isinstance(note, str) and note.strip():
        yield {"kind": "text", "text": note.strip()}
    yield {"kind": "legend", "columns": ["", "As typed", "As used"]}
    values = [group for group in groups if group.values]
    for group in groups:
        if not group.values:
            yield {"kind": "given", **_given(group)}
    yield from _abreast(values)


def _abreast(groups: Sequence[Group]) -> Iterator[Part]:
    """Groups two by two: their rows are short."""
    for first in range(0, len(groups), 2):
        yield {"kind": "given-pair", "groups": [_given(group) for group in groups[first : first + 2]]}


def _lines(group: Group) -> Part:
    before = "Combination " if group.title == "Combinations" else ""
    return {"kind": "lines", "rows": [[before + row.label, row.typed] for row in group.rows]}


def _given(group: Group) -> Part:
    rows = [[row.label, row.typed, row.converted] for row in group.rows]
    return {"title": group.title, "about": group.about, "rows": rows}


def _drawing_parts(result: Mapping[str, Any], display: str, drawings: Drawings) -> Iterator[Part]:
    if "drawing" not in result:
        return
    yield _figure(drawings.section(result, display=display), "Section, seen on the right-hand face of a cut", 0.86)
    yield _figure(drawings.loads(result, display=display), "Supports and loads", 0.86)
    names = {"shear": "Shear", "moment": "Bending moment", "deflection": "Deflection"}
    aside = {f"{quantity}_lateral": f"Lateral {name.lower()}" for quantity, name in names.items()}
    for quantity, name in (names | aside).items():
        if (result.get("diagrams") or {}).get(quantity):
            svg = drawings.diagram(result, quantity, display=display, height=DIAGRAM_HEIGHT)
            yield {**_figure(svg, "", 0.86), "alt": f"{name}, envelope over the combinations"}
    if (result.get("diagrams") or {}).get("joints"):
        yield {**_figure(drawings.flow(result, display=display), "", 0.86), "alt": "Shear flow in the joints"}
    if (result.get("diagrams") or {}).get("slips"):
        yield {**_figure(drawings.slip(result, display=display), "", 0.86), "alt": "Slip of the joints"}


def _stress_parts(result: Mapping[str, Any], display: str, drawings: Drawings) -> Iterator[Part]:
    """Bands of shear and of bending stress where either is greatest, and the run of stress along each bond."""
    for which in result.get("contours") or ():
        svg = drawings.stress(result, which, display=display, height=STRESS_HEIGHT)
        if svg:
            yield _figure(svg, tables.where_stressed(result, which, display), 0.86)
    yield from tables.runs(result, display)


def _figure(svg: str, caption: str, share: float) -> Part:
    return {"kind": "drawing", "svg": svg, "caption": caption, "alt": caption, "share": share}


def _list(items: Iterable[object]) -> Iterator[Part]:
    listed = [str(item) for item in items]
    if listed:
        yield {"kind": "list", "items": listed}


def _cautions(result: Mapping[str, Any], replies: Mapping[str, str], display: str) -> Iterator[Part]:
    for number, caution in enumerate(result.get("cautions", ()), 1):
        text = str(caution.get("text", ""))
        about = str(caution.get("about", ""))
        yield {
            "kind": "caution",
            "number": f"{number}",
            "about": about[:1].upper() + about[1:],
            "text": spoken(in_units(text, display)),
            "answer": bool(caution.get("answer")),
            "reply": str(replies.get(text, "")),
        }


def _answers(answered: Sequence[tuple[str, str, str]], display: str) -> Iterator[Part]:
    """What differs between the tests behind a value and its use here, and why it may stand."""
    for number, (about, text, reply) in enumerate(answered, 1):
        yield {
            "kind": "caution",
            "number": f"{number}",
            "about": about[:1].upper() + about[1:],
            "text": in_units(text, display),
            "answer": True,
            "reply": reply,
        }


def working(result: Mapping[str, Any], display: str) -> Iterator[Part]:
    """The steps of a result in their groups; a group that repeats another is named once."""
    for group in working_groups(result.get("steps", ())):
        if group.title:
            yield {"kind": "sub", "title": group.title, "about": ""}
        if group.same:
            yield {"kind": "text", "text": group.same}
        else:
            yield from _steps(group.steps, group.first, display)


def _steps(steps: Sequence[Mapping[str, Any]], first: int, display: str) -> Iterator[Part]:
    for number, step in enumerate(steps, first):
        line = typst_math(step, display)
        yield {
            "kind": "step",
            "number": str(number),
            "title": in_units(step["title"], display),
            "source": in_units(step.get("source", ""), display),
            "line": line if line["value"] is not None else None,
            "note": in_units(step.get("note", ""), display),
        }


def _values_used(result: Mapping[str, Any]) -> Iterator[Part]:
    rows = []
    for group, word in (("materials", "material"), ("adhesives", "adhesive"), ("fasteners", "fastener")):
        for name, entry in (result.get("values_used", {}).get(group) or {}).items():
            record = entry.get("record") or "typed for this check"
            rows.append(
                [
                    word,
                    name,
                    record,
                    str(entry.get("revision", "") or ""),
                    entry.get("status") or "not stated",
                    entry.get("source") or "",
                ]
            )
    if rows:
        columns = [
            tables.column("Kind"),
            tables.column("Name"),
            tables.column("Record"),
            tables.column("Rev.", side="right"),
            tables.column("Status"),
            tables.column("Source", share=1),
        ]
        yield {"kind": "table", "columns": columns, "rows": rows}
        yield from _list(_lineage(result.get("values_used") or {}))


def _lineage(values_used: Mapping[str, Any]) -> Iterator[str]:
    """The way from each number of a record back to its coupons, one line a number."""
    for entries in values_used.values():
        for name, entry in entries.items():
            for at, behind in (entry.get("lineage") or {}).items():
                what = at.replace("_", " ").replace(".", ", ")
                line = f"{name}, {what}: {behind['record']} rev {behind['revision']}, {behind['status']}"
                if behind.get("coupon_set"):
                    out = f", {behind['excluded']} excluded" if behind.get("excluded") else ""
                    line += (
                        f", from coupon set {behind['coupon_set']} rev {behind['coupon_set_revision']} "
                        f"({behind['coupons']} coupons{out}; {behind['statistic']})"
                    )
                elif behind.get("origin"):
                    line += f", {behind['origin']}"
                if behind.get("approved_by"):
                    line += f", approved by {behind['approved_by']} on {str(behind.get('approved_at', ''))[:10]}"
                if behind.get("outside_checker"):
                    line += f", outside checker {behind['outside_checker']}"
                yield line


def _not_checked(result: Mapping[str, Any]) -> Iterator[Part]:
    listed = list(_list(result.get("not_checked", ())))
    if listed:
        yield {"kind": "text", "text": "This check leaves to others:"}
        yield from listed
        yield {
            "kind": "text",
            "text": PRECEDENCE,
        }


def _signatures(sheet: SheetData) -> Part:
    people = [["Prepared", sheet.prepared], ["Checked", sheet.checked], ["Approved", sheet.approved]]
    return {"kind": "signatures", "people": people}
