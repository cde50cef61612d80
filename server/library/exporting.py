"""The whole library as plain files that any later program can read: JSON with every revision, CSV with the newest."""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Iterable, Iterator, Mapping
from datetime import datetime
from typing import Any

from sqlalchemy import select

from server import ENGINE, storage
from server.library import reading
from server.library.questions import answers
from server.library.record import Factor, Link, Record
from server.library.references import standing
from server.library.states import first
from server.library.values import FOUND
from server.storage import Session
from server.storage.evidence_tables import AnswerRow, HeadRow

FORMAT = "bondwright-library/1"
_AT_ONCE = 300
FIRST_COLUMNS = ("group", "key", "revision", "name", "status", "source", "note")
LAST_COLUMNS = ("chain", "made_by", "created_at", "reason", "approved_by", "approved_at")


def export_lines(session: Session, now: datetime | None = None) -> Iterator[str]:
    """Yield the library as JSON text: one object, each record on a line of its own with all its revisions."""
    told = {"format": FORMAT, "engine": ENGINE, "exported_at": storage.utc_text(now)}
    head = ", ".join(f"{_json(name)}: {_json(value)}" for name, value in told.items())
    yield f'{{{head}, "records": [\n'
    first = True
    for revisions in _records(session):
        yield ("" if first else ",\n") + _json(_record(session, revisions))
        first = False
    yield "\n]}\n"


def export_csv(session: Session) -> dict[str, str]:
    """Return the newest revision of every record as ``records.csv``, and the coupons as ``coupons.csv`` too.

    A nested value stands under its path (``values.strengths.bending``, ``links.set``); a cell that begins with a
    bracket is JSON. Coupons stand one a row under the key of their set.
    """
    rows: list[dict[str, str]] = []
    coupons: list[dict[str, str]] = []
    for revisions in _records(session):
        newest = revisions[-1]
        rows.append(_row(newest))
        for place, coupon in enumerate(newest.values.get("coupons", ()), start=1):
            flat = dict(flattened(coupon))
            coupons.append({"set": newest.key, "revision": str(newest.revision), "number": str(place), **flat})
    return {
        "records.csv": _table(rows, FIRST_COLUMNS, LAST_COLUMNS),
        "coupons.csv": _table(coupons, ("set", "revision", "number"), ()),
    }


def flattened(value: Mapping[str, Any], before: str = "") -> Iterator[tuple[str, str]]:
    """Yield path and text of every leaf: {"failure": {"adhesive": 5}} is ("failure.adhesive", "5")."""
    for name, inner in value.items():
        path = f"{before}.{name}" if before else str(name)
        if isinstance(inner, Mapping) and inner:
            yield from flattened(inner, path)
        else:
            yield path, _cell(inner)


def _cell(value: object) -> str:
    if isinstance(value, str):
        return value
    return "" if value is None else _json(value)


def _row(record: Record) -> dict[str, str]:
    values = {name: value for name, value in record.values.items() if name != FOUND}
    approval = record.approval
    return {
        "group": record.group,
        "key": record.key,
        "revision": str(record.revision),
        "name": record.name,
        "status": standing(record),
        "source": record.source,
        "note": record.note,
        **dict(flattened(values, "values")),
        **{f"details.{name}": text for name, text in record.details.items()},
        **{f"links.{role}": f"{link.key} rev {link.revision}" for role, link in record.links.items()},
        "chain": _json([_factor(each) for each in record.chain]) if record.chain else "",
        "made_by": record.made_by,
        "created_at": record.created_at,
        "reason": record.reason,
        "approved_by": approval.by if approval else "",
        "approved_at": approval.at if approval else "",
    }


def _table(rows: Iterable[Mapping[str, str]], first: tuple[str, ...], last: tuple[str, ...]) -> str:
    listed = list(rows)
    between = sorted({name for row in listed for name in row} - set(first) - set(last))
    text = io.StringIO()
    writer = csv.DictWriter(text, [*first, *between, *last], restval="", lineterminator="\n")
    writer.writeheader()
    writer.writerows({name: _safe(cell) for name, cell in row.items()} for row in listed)
    return text.getvalue()


def _safe(cell: str) -> str:
    """A cell that a spreadsheet would run as a formula begins with an apostrophe; reading takes it off again."""
    return f"'{cell}" if cell[:1] in ("=", "+", "@", "'") or (cell[:1] == "-" and not _is_number(cell)) else cell


def _is_number(cell: str) -> bool:
    try:
        float(cell.split(" ")[0])
    except ValueError:
        return False
    return True


def _records(session: Session) -> Iterator[list[Record]]:
    """Every record with its revisions, oldest first; records by key."""
    keys = list(session.execute(select(HeadRow.key, HeadRow.record_id).order_by(HeadRow.key)))
    for start in range(0, len(keys), _AT_ONCE):
        some = [record_id for _, record_id in keys[start : start + _AT_ONCE]]
        found: dict[str, list[Record]] = {key: [] for key, _ in keys[start : start + _AT_ONCE]}
        query = reading.rows().where(HeadRow.record_id.in_(some))
        for record in reading.records(session, session.execute(query).all()):
            found[record.key].append(record)
        yield from (sorted(each, key=lambda record: record.revision) for each in found.values())


def _record(session: Session, revisions: list[Record]) -> dict[str, Any]:
    ids = [each.revision_id for each in revisions]
    answered = answers(session, "record", ids)
    asked = _asked(session, ids) if answered else {}
    newest = revisions[-1]
    return {
        "group": newest.group,
        "key": newest.key,
        "revisions": [_revision(session, each, answered.get(each.revision_id, {}), asked) for each in revisions],
    }


def _asked(session: Session, ids: list[int]) -> dict[str, str]:
    """The words of the questions that were answered, by their keys."""
    query = select(AnswerRow.question, AnswerRow.asked)
    query = query.where(AnswerRow.subject == "record", AnswerRow.subject_id.in_(ids))
    return {question: asked for question, asked in session.execute(query)}  # noqa: C416 -- rows are no pairs to mypy


def _revision(
    session: Session, record: Record, answered: Mapping[str, Any], asked: Mapping[str, str]
) -> dict[str, Any]:
    told: dict[str, Any] = {
        "revision": record.revision,
        "name": record.name,
        "status": record.status,
        "values": dict(record.values),
        "details": dict(record.details),
        "links": {role: _link(link) for role, link in record.links.items()},
        "chain": [_factor(each) for each in record.chain],
        "source": record.source,
        "note": record.note,
        "made_by": record.made_by,
        "created_at": record.created_at,
        "reason": record.reason,
    }
    if record.status != first(record.group) or record.approval is not None or record.put_forward:
        told["acts"] = [
            {"status": act.status, "who": act.who, "at": act.at, "reason": act.reason, "detail": dict(act.detail)}
            for act in reading.acts(session, record.key, record.revision)
        ]
    if answered:
        told["answers"] = [
            {"asked": asked[key], "answer": each.text, "who": each.who, "at": each.at} for key, each in answered.items()
        ]
    return told


def _link(link: Link) -> dict[str, Any]:
    return {"record": link.key, "revision": link.revision}


def _factor(factor: Factor) -> dict[str, Any]:
    told: dict[str, Any] = {"name": factor.name, "value": factor.value, "source": factor.source}
    if factor.evidence:
        told["evidence"] = factor.evidence
    pair = {"dry": factor.dry, "conditioned": factor.conditioned}
    return told | {role: [link.key, link.revision] for role, link in pair.items() if link is not None}


def _json(value: object) -> str:
    return json.dumps(value, ensure_ascii=False, allow_nan=False)
