"""The evidence page of a value: what the library holds of it, put into words for sheets.evidence."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping
from datetime import UTC, datetime
from typing import Any

from server import ENGINE, sheets, units
from server.library import reading
from server.library.chains import chains_on
from server.library.coupon_sets import coupon_document, measured_result
from server.library.groups import EVIDENCE, LINK_LABELS
from server.library.history import charted, history
from server.library.questions import questions
from server.library.record import Act, Approval, Factor, Link, Record
from server.library.references import standing
from server.library.values import value_text
from server.storage import Session
from server.storage.tables import Shop as ShopRow
from server.storage.tables import compact

LIMITS = ("load_bearing", "exposure", "conditions")
_SET_FACTS = (
    ("thickness", "Glue line, nominal", "mm"),
    ("temperature", "Cured and tested in", "°C"),
    ("cured_days", "Days of cure before the test", ""),
    ("hybrid_fastener", "Fastener in the coupons", ""),
    ("hybrid_spacing", "Spacing of the fasteners", "mm"),
    ("hybrid_rows", "Rows of fasteners", ""),
)
_RANGES = (
    ("thickness", "Glue line", "mm"),
    ("service_temperature", "In service", "°C"),
)


def evidence_content(session: Session, record: Record) -> dict[str, Any]:
    """Return what an evidence page stands on: value, set, result, answers, acts, history, chains, program."""
    behind = _set_of(session, record)
    return {
        "value": _told(record),
        "set": None if behind is None else _told(behind),
        "result": None if behind is None else dict(measured_result(behind, record.values.get("statistic"))),
        "answers": [
            [each.about, each.text, each.answer, each.answered_by, each.answered_at]
            for each in questions(session, record)
        ],
        "acts": [
            [act.status, act.who, act.at, act.reason, dict(act.detail)]
            for act in reading.acts(session, record.key, record.revision)
        ],
        "history": [[each.key, each.revision, each.date, each.mean] for each in history(session, record)],
        "chains": [[str(each.record.itself), each.standing, each.line] for each in chains_on(session, record)],
        "engine": ENGINE,
    }


def evidence_hash(content: Mapping[str, Any]) -> str:
    """Return the SHA-256, in hexadecimal, of what an evidence page stands on."""
    return hashlib.sha256(compact(content).encode()).hexdigest()


def evidence_data(session: Session, record: Record, content_hash: str, *, kept: bool = False) -> sheets.EvidenceData:
    """Return everything that stands on the evidence page of a value's revision; ``kept``: as it is kept at approval."""
    heading = session.get(ShopRow, 1)
    display = "US" if heading is not None and heading.display == "US" else "SI"
    targets = reading.many(session, record.links.values())
    coupon_set = _set_of(session, record)
    result = None if coupon_set is None else measured_result(coupon_set, record.values.get("statistic"))
    points, chart = charted(session, record)
    acts = reading.acts(session, record.key, record.revision)
    last = acts[-1].at if acts else record.created_at
    made = datetime.strptime(last[:19], "%Y-%m-%dT%H:%M:%S").replace(tzinfo=UTC)
    return sheets.EvidenceData(
        key=record.key,
        revision=record.revision,
        name=record.name,
        state=_state(record),
        what=str(record.values["property"]),
        value=value_text(record, display),
        says=_says(record, result, display),
        belongs=tuple(_belongs(record, targets)),
        limits=tuple(_limits(record)),
        coupon_set=str(coupon_set.itself) if coupon_set is not None else "",
        set_facts=tuple(_set_facts(coupon_set)) if coupon_set is not None else (),
        result=result,
        document=coupon_document(coupon_set) if coupon_set is not None else None,
        history=points,
        chart=chart,
        chains=[
            sheets.ChainLines(
                of=f"{each.record.itself} {each.record.name} ({each.standing})",
                line=each.line,
                factors=[_factor_line(factor) for factor in each.record.chain],
            )
            for each in chains_on(session, record, display)
        ],
        replies=[
            sheets.Reply(each.about, each.text, each.answer, f"{each.answered_by}, {each.answered_at[:10]}")
            for each in questions(session, record)
        ],
        people=tuple(_people(record, coupon_set, acts)),
        acts=[(act.status, act.at[:10], act.who, act.reason) for act in acts],
        note=record.note,
        shop=heading.name if heading is not None else "",
        address=tuple(line for line in (heading.address if heading else "").splitlines() if line.strip()),
        date=last[:10],
        paper="Letter" if heading is not None and heading.paper == "Letter" else "A4",
        display="US" if display == "US" else "SI",
        engine=ENGINE,
        content_hash=content_hash,
        kept=kept,
        made_at=int(made.timestamp()),
        unit="N" if result is not None and result.get("unit") == "N" else "MPa",
    )


def _told(record: Record) -> dict[str, Any]:
    """One revision in full, as it was entered."""
    return {
        "record": [record.key, record.revision],
        "name": record.name,
        "values": record.values,
        "details": record.details,
        "links": {role: [link.key, link.revision] for role, link in record.links.items()},
        "source": record.source,
        "note": record.note,
        "made_by": record.made_by,
        "created_at": record.created_at,
    }


def _set_of(session: Session, record: Record) -> Record | None:
    link = record.links.get("set")
    return None if link is None else reading.get(session, link.key, link.revision)


def _state(record: Record) -> str:
    today = standing(record)
    return record.status if today == record.status else f"{today} (was {record.status})"


def _says(record: Record, result: Mapping[str, Any] | None, display: str) -> str:
    if result is None:
        origin = {"data sheet": "A supplier's data sheet", "published": "A published value"}
        return f"{origin.get(str(record.values['origin']), 'Not stated')}: {record.source}"
    return sheets.coupon_headline(result, display)


def _belongs(record: Record, targets: Mapping[Link, Record]) -> Iterator[tuple[str, str]]:
    """Links with their names; the words beside them where they say something of their own."""
    for role, label in LINK_LABELS.items():
        link = record.links.get(role)
        if link is not None and role != "set" and link in targets:
            yield label, f"{targets[link].name} ({link})"
    for name, label in EVIDENCE["values"].details.items():
        if name not in LIMITS and record.details.get(name):
            yield label, record.details[name]


def _limits(record: Record) -> Iterator[tuple[str, str]]:
    for name in LIMITS:
        yield EVIDENCE["values"].details.get(name, name), record.details.get(name, "")
    for name, label, unit in _RANGES:
        ends = record.values.get(name)
        if ends:
            yield label, " to ".join(_typed(end, unit) for end in ends)
    if record.values.get("glass_transition") is not None:
        yield "Glass transition", _typed(record.values["glass_transition"], "°C")


def _set_facts(coupon_set: Record) -> Iterator[tuple[str, str]]:
    for name, label, unit in _SET_FACTS:
        if coupon_set.values.get(name) not in (None, ""):
            yield label, _typed(coupon_set.values[name], unit)
    if coupon_set.source:
        yield "Test report", coupon_set.source


def _typed(value: object, unit: str) -> str:
    """A quantity as it was typed; a plain number with the unit that it means."""
    if isinstance(value, int | float):
        return f"{value:g} {unit}".rstrip()
    return units.degrees(str(value))


def _factor_line(factor: Factor) -> sheets.FactorLine:
    shown = factor.evidence
    if factor.dry is not None:
        pair = f"{factor.conditioned} against {factor.dry}"
        shown = f"{shown}; {pair}" if shown else pair
    return sheets.FactorLine(factor.name, f"{factor.value:.4g}", factor.source, shown)


def _people(record: Record, coupon_set: Record | None, acts: list[Act]) -> Iterator[tuple[str, str, str]]:
    if coupon_set is not None:
        yield "Coupons entered by", coupon_set.made_by, coupon_set.created_at[:10]
        accepted = coupon_set.approval
        if accepted is not None:
            yield "Coupons accepted by", f"{accepted.by}{_invented(accepted)}", accepted.at[:10]
    yield "Value entered by", record.made_by, record.created_at[:10]
    for act in acts:
        if act.detail.get(reading.PUT_FORWARD):
            yield "Sent for approval by", act.who, act.at[:10]
    approval = record.approval
    if approval is None:
        yield "Approved by", "", ""
        return
    yield "Approved by", f"{approval.by}{_invented(approval)}", approval.at[:10]
    if approval.outside_checker:
        yield "Looked over from outside by", approval.outside_checker, approval.checked_on


def _invented(approval: Approval) -> str:
    return " (invented, demo shop)" if approval.invented else ""
