"""The form of a coupon set: grid, paste, upload, live answer. Saved and shown by library.py like every record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import checks, documents, library
from server.errors import DocumentError, Fault, JointError
from server.library import ALL, Record
from server.library.coupon_sets import as_measured
from server.library.properties import FROM_COUPONS
from server.storage import Session
from server.web import record_form, set_form
from server.web.coupon_panel import CouponPanel, panel
from server.web.errors import faults_of
from server.web.evidence_lists import offered
from server.web.form_fields import shown_unit
from server.web.inputs import DbSession, UploadValues
from server.web.pages import Boxes, page
from server.web.set_columns import COLUMNS, DISTRIBUTIONS, MOST_ROWS, ROW_BOXES, SHARES, STATISTIC, WAYS

router = APIRouter(prefix="/library/form/sets", include_in_schema=False)

LABELS = {f"all.{name}": column.label for name, column in COLUMNS.items()} | {
    "property": "Property",
    "set.thickness": "Glue line, nominal",
    "set.temperature": "Cured and tested in",
    "set.cured_days": "Days of cure before the test",
    "set.hybrid_fastener": "Fastener in the coupons",
    "set.hybrid_spacing": "Spacing of the fasteners",
    "set.hybrid_rows": "Rows of fasteners",
    "statistic.coverage": "Share above",
    "statistic.confidence": "Confidence",
    "statistic.scatter": "Scatter",
    "statistic.least_scatter": "Least scatter",
    "statistic.level": "Level of the batch test",
    "statistic.distribution": "Distribution",
}


@dataclass(frozen=True)
class JudgedSet:
    """A set's form, read and reckoned: a panel, or what stands in its way; ``asks`` are questions by row."""

    reading: set_form.SetReading
    panel: CouponPanel | None = None
    messages: Mapping[str, str] = field(default_factory=dict)
    asks: Mapping[int, list[str]] = field(default_factory=dict)


def judge(boxes: Mapping[str, str]) -> JudgedSet:
    """Read and reckon the set as typed; nothing is raised."""
    reading = set_form.read(boxes)
    if not reading.values["coupons"]:
        return JudgedSet(reading)
    try:
        document = documents.read(library.document_of(reading.values, boxes.get("name", "")))
        result = as_measured(checks.run(document, working=False), reading.values["property"])
    except JointError as error:
        faults = [Fault(f"values.{fault.path}" if fault.path else "", fault.message) for fault in faults_of(error)]
        return JudgedSet(reading, messages=set_form.place(faults, reading.paths) | reading.faults)
    asks: dict[int, list[str]] = {}
    for caution in result["cautions"]:
        for row in set_form.rows_named(caution["text"], reading.rows):
            asks.setdefault(row, []).append(caution["text"])
    return JudgedSet(reading, panel(result, str(reading.values["display"])), reading.faults, asks)


@router.post("/preview", name="preview_set")
def preview_set(request: Request, session: DbSession, values: UploadValues) -> Response:
    """Answer a keystroke: the value and its drawing, and what is asked about which row."""
    boxes = dict(values)
    return page(request, "library/_set_preview.html", **_context(request, session, boxes, judge(boxes)))


@router.post("", name="shape_set")
def shape_set(request: Request, session: DbSession, values: UploadValues, key: str = "") -> Response:
    """Do what a button of the form asks (rows, columns, pasted coupons) and give the page back as typed."""
    boxes, pasted = _shaped(dict(values))
    record = library.get(session, key) if key else None
    return set_page(request, session, boxes, judge(boxes), record, pasted=pasted)


def _shaped(boxes: dict[str, str]) -> tuple[dict[str, str], library.Pasted | None]:
    act = boxes.get("do", "")
    text = boxes.get("file", "") or boxes.get("paste", "")
    if act == "take" and text.strip():
        way = WAYS.get(boxes.get("way", ""), WAYS["load kN"])
        pasted = library.read_coupons(text, header=f"{way.field} {way.unit}")
        if pasted.faults or not pasted.coupons:
            return boxes | {"paste": text}, pasted
        already = len(set_form.filled_rows(boxes))
        if already + len(pasted.coupons) > MOST_ROWS:
            message = f"{already + len(pasted.coupons)} coupons are too many for the grid, which takes {MOST_ROWS}. "
            message += set_form.LARGER
            too_many = library.LineFault(pasted.lines[MOST_ROWS - already], "", "", message)
            return boxes | {"paste": text}, library.Pasted([], [], pasted.columns, [too_many])
        return set_form.take(boxes, pasted.coupons), pasted
    if act == "rows":
        return set_form.compacted(boxes, rows=set_form.row_count(boxes) + 6), None
    return set_form.compacted(boxes, rows=set_form.row_count(boxes)), None


# --- saving -----------------------------------------------------------------------------------------------------------


def save(session: Session, boxes: dict[str, str], record: Record | None) -> tuple[Record | None, dict[str, str]]:
    """Add a set or its next revision; the record, or every message by its box and nothing saved."""
    reading = set_form.read(boxes)
    typed = record_form.read("sets", boxes)
    messages = dict(reading.faults)
    if record is not None and not boxes.get("reason", "").strip():
        messages["reason"] = "The reason is empty; say what changed, such as “coupon 8 excluded: closed too late”."
    if messages:
        return None, messages | dict(judge(boxes).messages)
    try:
        words: dict[str, Any] = {name: text for name, text in typed.words.items() if name != "status"}
        content: dict[str, Any] = {"values": reading.values, "details": typed.details, "links": typed.links}
        if record is None:
            return library.add(session, group="sets", key=boxes.get("key", ""), **content, **words), {}
        based_on = int(boxes["based_on"]) if boxes.get("based_on", "").isdecimal() else None
        return library.edit(session, record.key, based_on=based_on, **content, **words), {}
    except DocumentError as error:
        mine = [fault for fault in error.faults if fault.path.startswith("values")]
        others = [fault for fault in error.faults if not fault.path.startswith("values")]
        return None, set_form.place(mine, reading.paths) | record_form.place("sets", others)


def set_page(
    request: Request,
    session: Session,
    boxes: Mapping[str, str],
    judged: JudgedSet,
    record: Record | None = None,
    *,
    messages: Mapping[str, str] | None = None,
    pasted: library.Pasted | None = None,
) -> Response:
    """Return the page of a set's form as typed."""
    context = _context(request, session, boxes, judged, record)
    return page(
        request,
        "library/set_edit.html",
        status=422 if messages else 200,
        **context | {"messages": Boxes({**judged.messages, **(messages or {})})},
        refused=bool(messages),
        pasted=pasted,
        record=record,
        offered=offered(session),
        fault_labels=_fault_labels(boxes),
    )


def _context(
    request: Request, session: Session, boxes: Mapping[str, str], judged: JudgedSet, record: Record | None = None
) -> dict[str, Any]:
    system = "US" if boxes.get("units") == "US" else "SI"
    return {
        "values": Boxes(boxes),
        "messages": Boxes(judged.messages),
        "asks": judged.asks,
        "panel": judged.panel,
        "rows": range(set_form.row_count(boxes)),
        "exclusions": _exclusion_rows(boxes),
        "asked_below": False,
        "row_boxes": ROW_BOXES,
        "other_boxes": _other_boxes(boxes),
        "columns": COLUMNS,
        "others_filled": any(
            boxes.get(f"all.{name}") or set_form.shown(name, boxes)
            for name in COLUMNS
            if name not in ("width", "length", "lot")
        ),
        "shown_columns": [column for name, column in COLUMNS.items() if set_form.shown(name, boxes)],
        "shares": SHARES,
        "ways": [(key, way.label) for key, way in WAYS.items()],
        "way": WAYS.get(boxes.get("way", ""), WAYS["load kN"]),
        "distributions": DISTRIBUTIONS,
        "properties": [(name, name) for name in FROM_COUPONS],
        "details": ALL["sets"].details,
        "links": record_form.links("sets"),
        "system": system,
        "unit": lambda unit: shown_unit(unit, system),
    }


def _other_boxes(boxes: Mapping[str, str]) -> list[str]:
    """The boxes beside the grid whose messages may come and go while typing."""
    out = [f"excluded[{row}].{name}" for row in _exclusion_rows(boxes) for name in ("number", "cause", "stop")]
    common = [f"all.{name}" for name in COLUMNS] + [f"set.{name}" for name in set_form.CONDITIONS]
    return ["property", "way", *common, *(f"statistic.{name}" for name in STATISTIC), *out]


def _exclusion_rows(boxes: Mapping[str, str]) -> range:
    return range(max(set_form.exclusions(boxes), default=-1) + 1 + set_form.SPARE_EXCLUSIONS)


def _fault_labels(boxes: Mapping[str, str]) -> dict[str, str]:
    named = dict(LABELS) | record_form.labels("sets")
    for row in range(set_form.row_count(boxes)):
        parts = {"reading": "reading", "name": "mark"} | {name: short for name, (short, _) in SHARES.items()}
        parts |= {name: column.label.lower() for name, column in COLUMNS.items()}
        named |= {f"coupons[{row}].{name}": f"Coupon {row + 1}, {label}" for name, label in parts.items()}
    for row in range(30):
        for name, label in (("number", "which coupon"), ("cause", "cause"), ("stop", "what now stops it")):
            named[f"excluded[{row}].{name}"] = f"Exclusion {row + 1}, {label}"
    return named
