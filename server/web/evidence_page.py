"""The evidence page of a value as PDF: what the library holds, put into words for sheets.evidence."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import UTC, datetime

from fastapi import APIRouter
from fastapi.responses import Response

from server import ENGINE, jobs, library, sheets, units
from server.library import Link, Record, reading
from server.storage import Session
from server.web import record_form
from server.web.evidence_fields import LINKS
from server.web.inputs import DbSession, Id
from server.web.record_page import history_of, result_of

router = APIRouter(prefix="/library", include_in_schema=False)

_LIMITS = ("load_bearing", "exposure", "conditions")


@router.get("/{key}/revisions/{revision}/evidence.pdf", name="evidence_page")
def evidence_page(session: DbSession, key: str, revision: Id) -> Response:
    """Hand out the evidence page of one revision of a value."""
    record = library.get(session, key, revision)
    if record.group != "values":
        raise library.NotFoundError(f"{record.key} is no value; only values have an evidence page.")
    headers = {"Content-Disposition": f'inline; filename="{record.key}-rev-{record.revision}-evidence.pdf"'}
    return Response(sheets.evidence_pdf(evidence(session, record)), media_type="application/pdf", headers=headers)


def evidence(session: Session, record: Record) -> sheets.EvidenceData:
    """Return everything that stands on the evidence page of a value's revision."""
    shop = jobs.shop(session)
    display = "US" if shop.display == "US" else "SI"
    targets = reading.many(session, record.links.values())
    link = record.links.get("set")
    coupon_set = targets.get(link) if link is not None else None
    result = result_of(record, coupon_set) if coupon_set is not None else None
    points, chart = history_of(session, record)
    acts = library.acts(session, record.key, record.revision)
    last = acts[-1].at if acts else record.created_at
    made = datetime.strptime(last[:19], "%Y-%m-%dT%H:%M:%S").replace(tzinfo=UTC)
    return sheets.EvidenceData(
        key=record.key,
        revision=record.revision,
        name=record.name,
        state=_state(record),
        what=str(record.values["property"]),
        value=record_form.value_text(record, display),
        says=_says(record, result, display),
        belongs=tuple(_belongs(record, targets)),
        limits=tuple(_limits(record)),
        coupon_set=str(coupon_set.itself) if coupon_set is not None else "",
        set_facts=tuple(_set_facts(coupon_set)) if coupon_set is not None else (),
        result=result,
        document=library.coupon_document(coupon_set) if coupon_set is not None else None,
        history=points,
        chart=chart,
        replies=[
            sheets.Reply(each.about, each.text, each.answer, f"{each.answered_by}, {each.answered_at[:10]}")
            for each in library.questions(session, record)
        ],
        people=tuple(_people(record, coupon_set, acts)),
        acts=[(act.status, act.at[:10], act.who, act.reason) for act in acts],
        note=record.note,
        shop=shop.name,
        address=tuple(line for line in shop.address.splitlines() if line.strip()),
        date=last[:10],
        paper="Letter" if shop.paper == "Letter" else "A4",
        display="US" if display == "US" else "SI",
        engine=ENGINE,
        made_at=int(made.timestamp()),
        unit="N" if result is not None and result.get("unit") == "N" else "MPa",
    )


def _state(record: Record) -> str:
    today = library.standing(record)
    return record.status if today == record.status else f"{today} (was {record.status})"


def _says(record: Record, result: Mapping[str, object] | None, display: str) -> str:
    if result is None:
        origin = {"data sheet": "A supplier's data sheet", "published": "A published value"}
        return f"{origin.get(str(record.values['origin']), 'Not stated')}: {record.source}"
    from server.sheets.coupon_tables import headline

    return headline(result, display)


def _belongs(record: Record, targets: Mapping[Link, Record]) -> Iterator[tuple[str, str]]:
    """Links with their names; the words beside them where they say something of their own."""
    for role, label in LINKS.items():
        link = record.links.get(role)
        if link is not None and role != "set" and link in targets:
            yield label, f"{targets[link].name} ({link})"
    group = library.ALL["values"]
    for name, label in group.details.items():
        if name not in _LIMITS and record.details.get(name):
            yield label, record.details[name]


def _limits(record: Record) -> Iterator[tuple[str, str]]:
    group = library.ALL["values"]
    for name in _LIMITS:
        yield group.details.get(name, name), record.details.get(name, "")
    for label, text in record_form.shown(record):
        if label.startswith(("Glue line", "In service", "Glass")):
            yield label, text


def _set_facts(coupon_set: Record) -> Iterator[tuple[str, str]]:
    values = coupon_set.values
    for name, label in (
        ("thickness", "Glue line, nominal"),
        ("temperature", "Cured and tested in"),
        ("cured_days", "Days of cure before the test"),
        ("hybrid_fastener", "Fastener in the coupons"),
        ("hybrid_spacing", "Spacing of the fasteners"),
        ("hybrid_rows", "Rows of fasteners"),
    ):
        if values.get(name) is not None:
            yield label, units.degrees(str(values[name]))
    if coupon_set.source:
        yield "Test report", coupon_set.source


def _people(record: Record, coupon_set: Record | None, acts: list[library.Act]) -> Iterator[tuple[str, str, str]]:
    if coupon_set is not None:
        yield "Coupons entered by", coupon_set.made_by, coupon_set.created_at[:10]
    yield "Value entered by", record.made_by, record.created_at[:10]
    for act in acts:
        if act.detail.get("put forward"):
            yield "Sent for approval by", act.who, act.at[:10]
    approval = record.approval
    if approval is None:
        yield "Approved by", "", ""
        return
    invented = " (invented, demo shop)" if approval.invented else ""
    yield "Approved by", f"{approval.by}{invented}", approval.at[:10]
    if approval.outside_checker:
        yield "Looked over from outside by", approval.outside_checker, approval.checked_on
