"""The evidence page of a value: where it comes from, coupon by coupon, who stands for it, and what it may carry.

Plain data in, parts for the template out, as composition.py does for checks; nothing is calculated here.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from server import units
from server.mechanics.control_chart import Chart
from server.sheets import coupon_tables
from server.sheets.composition import PRECEDENCE, STANDING_CAUTION, Part, working
from server.sheets.dot_plot import dot_plot_svg
from server.sheets.history import Point, history_svg, in_words
from server.sheets.plotting import texts_of
from server.sheets.probability_plot import probability_plot_svg
from server.sheets.tables import column, table
from server.sheets.values import DASH, unit
from server.working import readable

Pairs = Sequence[tuple[str, str]]
SHORT = (("adhesive", "AF"), ("special_cohesive", "SCF"), ("cohesive", "CF"), ("substrate", "SF"))
KEY_TO_FACES = (
    "Where it broke, in per cent of the bonded area (ISO 10365): AF adhesive failure, off a surface; SCF special "
    "cohesive failure, in a thin layer near a surface; CF cohesive failure; SF failure in the substrate (adherend)."
)
FOOT = (
    "Evidence of a tested value. It says what these coupons carried, not what a joint may carry; local codes and "
    "licensed practice take precedence."
)
NO_COUPONS = (
    "No coupon set stands behind this value. A supplier's or a published number compares adhesives; it is no allowable "
    "stress (see ASTM D4896). A check that rests on it alone is not proven."
)


@dataclass(frozen=True)
class FactorLine:
    """One factor of the knock-down chain, as printed."""

    name: str
    value: str
    source: str = ""
    evidence: str = ""


@dataclass(frozen=True)
class ChainLines:
    """The chain of one record that uses the value: which record, the line of multiplication, its factors."""

    of: str
    line: str
    factors: Sequence[FactorLine]


@dataclass(frozen=True)
class Reply:
    """A question that was put to people, and what they answered; ``by`` with the day."""

    about: str
    text: str
    answer: str = ""
    by: str = ""


@dataclass(frozen=True)
class EvidenceData:
    """Everything that stands on one evidence page. Equal data give equal bytes."""

    key: str
    revision: int
    name: str
    state: str
    """The value's state as it is to be printed: approved, provisional, superseded by revision 3."""
    what: str
    """The property: bond shear strength."""
    value: str
    """The value as it is used, with its unit."""
    says: str
    """One line below it: how it was found."""
    belongs: Pairs = ()
    """What the value belongs to: adhesive, surfaces, cure, conditions, test method."""
    limits: Pairs = ()
    """Where it may be used: glue-line thickness, temperatures, load-bearing class, exposure."""
    coupon_set: str = ""
    set_facts: Pairs = ()
    result: Mapping[str, Any] | None = None
    document: Mapping[str, Any] | None = None
    history: Sequence[Point] = ()
    chart: Chart | None = None
    chains: Sequence[ChainLines] = ()
    """The knock-down chains that multiply the value, one for each record that uses it."""
    replies: Sequence[Reply] = ()
    people: Sequence[tuple[str, str, str]] = ()
    """Role, name and day: who entered, put forward, approved it."""
    acts: Sequence[Sequence[str]] = ()
    """State, day, person, reason of everything that was done with this revision."""
    note: str = ""
    shop: str = ""
    address: tuple[str, ...] = ()
    date: str = ""
    paper: Literal["A4", "Letter"] = "A4"
    display: Literal["SI", "US"] = "SI"
    engine: str = ""
    content_hash: str = ""
    kept: bool = False
    """Whether this is the page that is kept at approval, and not one drawn later."""
    made_at: int = 0
    unit: str = "MPa"


def compose_evidence(page: EvidenceData) -> Part:
    """The whole page as data for the template."""
    title = f"{page.key} revision {page.revision}: {page.name}"
    return {
        "paper": {"A4": "a4", "Letter": "us-letter"}[page.paper],
        "head": {
            "shop": page.shop or "No shop heading set",
            "address": list(page.address),
            "kind": "Evidence of a tested value",
            "title": page.name,
            "running": f"{title} · {page.state}",
            "cells": [
                {"label": "Value", "text": page.key, "strong": True},
                {"label": "Revision", "text": str(page.revision), "strong": True},
                {"label": "Property", "text": page.what, "strong": False},
                {"label": "Coupon set", "text": page.coupon_set or "none", "strong": False},
                {"label": "Date", "text": page.date, "strong": False},
            ],
        },
        "value": {"state": page.state.upper(), "number": page.value, "says": page.says},
        "parts": list(_numbered(page)),
        "foot": {"engine": page.engine, "hash": page.content_hash, "limits": _foot(page)},
    }


def _foot(page: EvidenceData) -> str:
    drawn = "Kept as it was approved." if page.kept else "Drawn as the library stands today."
    return f"{drawn} {FOOT}"


def _numbered(page: EvidenceData) -> Iterator[Part]:
    number = 0
    for title, parts in _sections(page):
        listed = list(parts)
        if listed:
            number += 1
            yield {"kind": "heading", "number": str(number), "title": title}
            yield from listed


def _sections(page: EvidenceData) -> Iterator[tuple[str, Iterable[Part]]]:
    result, display = page.result, page.display
    yield "What the value belongs to", _lines(page.belongs, page.note)
    yield "Where it may be used", _lines(page.limits)
    if result is None:
        yield "Coupons", [{"kind": "text", "text": NO_COUPONS}]
    else:
        yield "The value", _value(result, display)
        yield f"Coupons of {page.coupon_set}", _coupons(page, result)
        yield "Excluded coupons", _exclusions(page, result)
        yield "Where they broke, on average", coupon_tables.failures(result)
        yield "Tests of the set", _tests(result, display)
        yield "What one more coupon, or less scatter, would buy", coupon_tables.ahead(result, display)
    yield "History of the sets", _history(page)
    yield "Knock-down chain", _chains(page)
    yield "Cautions and questions, with their answers", _questions(page)
    if result is not None:
        yield "Working", _working(result, display)
        yield "Not checked", _list(result.get("not_checked", ()))
    yield "Entered, put forward, approved", _people(page)
    yield "Limits of use", [{"kind": "text", "text": f"{STANDING_CAUTION} {PRECEDENCE}"}]


def _lines(pairs: Pairs, note: str = "") -> Iterator[Part]:
    rows = [[label, text] for label, text in pairs if text]
    if rows:
        yield {"kind": "lines", "rows": rows}
    if note:
        yield {"kind": "text", "text": note}


def _list(items: Iterable[object]) -> Iterator[Part]:
    listed = [str(item) for item in items]
    if listed:
        yield {"kind": "list", "items": listed}


def _figure(svg: str, alt: str) -> Part:
    return {"kind": "drawing", "svg": svg, "caption": "", "alt": alt, "share": 0.86}


def _value(result: Mapping[str, Any], display: str) -> Iterator[Part]:
    """Both answers side by side where coupons were excluded; then what EN 1990 gives directly from the tests."""
    whole, of = result.get("without_exclusions"), coupon_tables.unit_of(result)
    if whole:
        left = [f"no. {each['index'] + 1}" for each in result["coupons"] if each.get("excluded")]
        kept, every = (dict(coupon_tables.pairs(found, display, of)) for found in (result, whole))
        head = [
            column("", share=1),
            column(f"Without {', '.join(left[:6])}{' and more' if len(left) > 6 else ''}", side="right"),
        ]
        rows = [[name, text, every.get(name, DASH)] for name, text in kept.items()]
        yield table([*head, column("With every coupon", side="right")], rows)
    else:
        yield {"kind": "pairs", "pairs": coupon_tables.pairs(result, display, of)}
    yield from coupon_tables.directly_from_tests(result, display)


def _working(result: Mapping[str, Any], display: str) -> Iterator[Part]:
    shown = _steps(result)
    yield from working(shown, display)
    if shown["left"]:
        yield {
            "kind": "text",
            "text": f"The stresses of {shown['left']} more coupons are found in the same way; they stand in the table.",
        }


def _steps(result: Mapping[str, Any]) -> dict[str, Any]:
    """The working without the stress of every coupon: one is written out for each way of finding it."""
    seen: set[str] = set()
    kept = []
    left = 0
    for step in result.get("steps", ()):
        if step.get("group") == "Stresses" and step.get("formula"):
            if step["formula"] in seen:
                left += 1
                continue
            seen.add(step["formula"])
        kept.append(step)
    return {**result, "steps": kept, "left": left}


# --- coupons ----------------------------------------------------------------------------------------------------------


def _coupons(page: EvidenceData, result: Mapping[str, Any]) -> Iterator[Part]:
    columns = _columns(page, result)
    alike = [(name, cells[0]) for name, cells in columns if _same(cells)]
    yield from _lines([*page.set_facts, *((f"{name}, all coupons", text) for name, text in alike if text)])
    yield _figure(
        dot_plot_svg(result, display=page.display), "Coupons on one scale, with mean and characteristic value"
    )
    yield _coupon_table(page, result, [(name, cells) for name, cells in columns if not _same(cells)])
    if result.get("failure"):
        yield {"kind": "text", "text": KEY_TO_FACES}


def _same(cells: Sequence[str]) -> bool:
    return len(set(cells)) < 2


def _columns(page: EvidenceData, result: Mapping[str, Any]) -> list[tuple[str, list[str]]]:
    """What is recorded of the coupons as typed: what all have in common is said once, above the table."""
    typed = (page.document or {}).get("coupons") or []
    coupons = [typed[each["index"]] if each["index"] < len(typed) else {} for each in result["coupons"]]
    columns: list[tuple[str, list[str]]] = [
        ("Load", [load_as_typed(each) for each in coupons]),
        ("Bonded area", [area_as_typed(each) for each in coupons]),
        ("Glue line", [_typed(each.get("thickness"), "mm") for each in coupons]),
        ("Temperature", [_typed(each.get("temperature"), "°C") for each in coupons]),
    ]
    for name, field_name in _RECORDED:
        columns.append((name, [str(each.get(field_name) or "") for each in coupons]))
    return columns


_RECORDED = (
    ("Preparation", "preparation"),
    ("Lot", "lot"),
    ("Batch", "batch"),
    ("Bonded", "date_bonded"),
    ("Tested", "date_tested"),
    ("Made by", "made_by"),
    ("Tested by", "tested_by"),
)


def _coupon_table(page: EvidenceData, result: Mapping[str, Any], recorded: Sequence[tuple[str, list[str]]]) -> Part:
    """Every coupon: what differs from coupon to coupon as typed, its stress, where it broke."""
    stress = unit(str(result.get("unit") or "MPa"), page.display)
    listed = result["coupons"]
    numbers = texts_of([float(each["stress"]) * stress.factor for each in listed])
    shares = [_shares(each.get("failure")) for each in listed]
    broken = [i for i in range(len(SHORT)) if any(row[i] not in ("", "0") for row in shares)]
    head = [column("No.", side="right"), *(column(name) for name, _ in recorded)]
    head.append(column(f"{result.get('quantity') or 'Stress'}, {stress.text}", side="right"))
    head += [column(f"{SHORT[i][1]} %", side="right") for i in broken]
    rows = [
        [
            str(each["index"] + 1),
            *(cells[place] for _, cells in recorded),
            numbers[place],
            *(shares[place][i] for i in broken),
            _remark(each),
        ]
        for place, each in enumerate(listed)
    ]
    return table([*head, column("Remark", share=1)], rows)


def load_as_typed(coupon: Mapping[str, Any]) -> str:
    """The load a coupon broke at as it was typed; empty where a stress was typed."""
    if coupon.get("gauge") is not None:
        return f"gauge {_typed(coupon['gauge'], 'MPa')}, ram {_typed(coupon.get('ram_area'), 'mm²')}"
    return _typed(coupon.get("load"), "N")


def area_as_typed(coupon: Mapping[str, Any]) -> str:
    """The bonded area of a coupon as it was typed: '25 mm × 12.5 mm'."""
    if coupon.get("area") is not None:
        return _typed(coupon["area"], "mm²")
    if coupon.get("width") is None:
        return ""
    return f"{_typed(coupon['width'], 'mm')} × {_typed(coupon.get('length'), 'mm')}"


def _typed(value: object, of: str) -> str:
    if isinstance(value, int | float) and not isinstance(value, bool):
        return f"{readable(float(value))} {of}"
    return "" if value is None else units.degrees(str(value))


def _shares(failure: Mapping[str, Any] | None) -> list[str]:
    return ["" if failure is None else readable(float(failure[name]), 3) for name, _ in SHORT]


def _remark(coupon: Mapping[str, Any]) -> str:
    words = [str(coupon.get("name") or "")]
    words += ["excluded"] if coupon.get("excluded") else []
    words += ["stands apart"] if coupon.get("outlier") else []
    return "; ".join(word for word in words if word)


def _exclusions(page: EvidenceData, result: Mapping[str, Any]) -> Iterator[Part]:
    typed = (page.document or {}).get("coupons") or []
    rows = []
    for each in result["coupons"]:
        if each.get("excluded"):
            raw = typed[each["index"]] if each["index"] < len(typed) else {}
            stopped = str(raw.get("prevented_by") or "").strip()
            rows.append([str(each["index"] + 1), str(each["excluded"]), stopped or "not answered"])
    if rows:
        yield table(
            [column("No.", side="right"), column("Cause", share=1), column("What now stops it on the job", share=1)],
            rows,
        )
        yield {"kind": "text", "text": "Both answers, with and without what was excluded, stand under “The value”."}


def _tests(result: Mapping[str, Any], display: str) -> Iterator[Part]:
    yield from coupon_tables.tests(result)
    if result.get("probability_plot"):
        yield _figure(probability_plot_svg(result, display=display), "Coupons on probability paper")


# --- beyond the set ---------------------------------------------------------------------------------------------------


def _history(page: EvidenceData) -> Iterator[Part]:
    if page.chart is None or len(page.history) < 2:
        return
    svg = history_svg(page.history, page.chart, stored=page.unit, display=page.display)
    yield _figure(svg, "Means of the sets over time with limits, and their changes")
    said = in_words(page.history, page.chart)
    yield from _list(said or ["Nothing in the history speaks against chance."])


def _chains(page: EvidenceData) -> Iterator[Part]:
    for chain in page.chains:
        yield {"kind": "text", "text": chain.of}
        yield {"kind": "text", "text": chain.line}
        rows = [[each.name, each.value, each.source or "not stated", each.evidence or DASH] for each in chain.factors]
        yield table(
            [column("Factor"), column("Value", side="right"), column("Source", share=1.4), column("Evidence", share=1)],
            rows,
        )


def _questions(page: EvidenceData) -> Iterator[Part]:
    for number, each in enumerate(page.replies, 1):
        by = f" ({each.by})" if each.by and each.answer else ""
        yield {
            "kind": "caution",
            "number": str(number),
            "about": each.about[:1].upper() + each.about[1:],
            "text": each.text,
            "answer": not each.answer,
            "reply": f"{each.answer}{by}" if each.answer else "",
        }


def _people(page: EvidenceData) -> Iterator[Part]:
    yield {"kind": "stood-for", "people": [list(each) for each in page.people]}
    if page.acts:
        columns = [column("State"), column("Day"), column("By"), column("Reason", share=1)]
        yield table(columns, [list(act) for act in page.acts])
