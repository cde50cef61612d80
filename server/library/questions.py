"""What a careful tester asks about a set or a value, and the answers that people wrote.

A question is known by its words: where a new revision raises the same one, the earlier answer is at hand.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select

from server import documents, storage, units
from server.errors import DocumentError, Fault
from server.library import fields, reading
from server.library.coupon_sets import coupon_document, coupon_result
from server.library.lots import expired_lots
from server.library.properties import PROPERTIES
from server.library.record import NotFoundError, Record
from server.people import Person
from server.storage import Session
from server.storage.evidence_tables import AnswerRow
from server.storage.tables import Record as RecordRow
from server.storage.tables import RecordRevision as RevisionRow

# Cautions of the check that it only mentions, and that an approval may not pass over.
_ALSO_ASKED = ("identical readings",)
LEAST_STRESS = 0.05  # MPa; common practice: a bond that breaks below it is none
BELOW_GLASS_TRANSITION = 20.0  # K; CEN/TS 19101 (scope): service temperature at most Tg - 20 degC


@dataclass(frozen=True)
class Question:
    """One question about ``record`` revision ``revision``, with its answer ('' while there is none).

    ``earlier`` is what was answered to the same question on an earlier revision.
    """

    key: str
    about: str
    text: str
    record: str
    revision: int
    answer: str = ""
    answered_by: str = ""
    answered_at: str = ""
    earlier: str = ""

    @property
    def open(self) -> bool:
        """Whether nobody answered yet."""
        return not self.answer


@dataclass(frozen=True)
class Answer:
    """What somebody wrote, when."""

    text: str
    who: str
    at: str


def question_key(*words: str) -> str:
    """The key of a question: the same words ask the same."""
    return hashlib.sha256("\x1f".join(words).encode()).hexdigest()[:16]


def questions(session: Session, record: Record) -> list[Question]:
    """Return what is asked about a set, or about a value: its own questions, then those of the set behind it."""
    behind = record.links.get("set")
    if record.group != "values" or behind is None:
        return _answered(session, record, _asked(session, record))
    coupons = reading.get(session, behind.key, behind.revision)
    statistic = record.values.get("statistic")
    of_the_set = _answered(session, coupons, _asked(session, coupons))
    own = list(_of_a_value(record))
    if statistic:  # the set's questions about its own distribution are not this value's
        mine = dict.fromkeys(_of_the_check(coupons, statistic))
        theirs = set(_of_the_check(coupons))
        of_the_set = [each for each in of_the_set if (each.about, each.text) not in theirs - set(mine)]
        own += [each for each in mine if each not in theirs]
    return _answered(session, record, own) + of_the_set


def _answered(session: Session, record: Record, asked: Iterable[tuple[str, str]]) -> list[Question]:
    """Questions about one revision with what was answered."""
    listed = list(dict.fromkeys(asked))
    given = answers(session, "record", [record.revision_id]).get(record.revision_id, {})
    before = _earlier(session, record) if listed else {}
    return [_question(record, about, text, given, before) for about, text in listed]


def _question(
    record: Record, about: str, text: str, given: Mapping[str, Answer], before: Mapping[str, Answer]
) -> Question:
    key = question_key(about, text)
    answer, earlier = given.get(key), before.get(key)
    return Question(
        key=key,
        about=about,
        text=text,
        record=record.key,
        revision=record.revision,
        answer=answer.text if answer else "",
        answered_by=answer.who if answer else "",
        answered_at=answer.at if answer else "",
        earlier=earlier.text if earlier else "",
    )


def answer(
    session: Session, key: str, revision: int, question: str, text: str, *, by: Person, now: datetime | None = None
) -> None:
    """Write an answer to a question about one revision; a later answer takes its place, and both are kept.

    Raises
    ------
    DocumentError
        If nothing was written, or it cannot be kept.
    NotFoundError
        If that revision raises no such question.
    """
    record = reading.get(session, key, revision)
    asked = {each.key: each for each in questions(session, record) if each.record == record.key}
    if question not in asked:
        raise NotFoundError(f"{record.itself} raises no such question; look at it again, it may have changed.")
    keep_answer(session, "record", record.revision_id, question, asked[question].text, text, by, now)


def keep_answer(
    session: Session, subject: str, subject_id: int, question: str, asked: str, text: str, by: Person,
    now: datetime | None,
) -> None:  # fmt: skip
    """Keep an answer about a saved revision of a record or a check."""
    faults: list[Fault] = []
    written = fields.prose(faults, "answer", text)
    if not written:
        faults.append(Fault("answer", "Nothing was written; answer in words that an inspector can follow."))
    if faults:
        raise DocumentError(faults)
    with storage.write(session):
        session.add(
            AnswerRow(
                subject=subject,
                subject_id=subject_id,
                question=question,
                asked=asked,
                answer=written,
                who=by.name,
                person_id=by.id or None,
                at=storage.utc_text(now),
            )
        )


def answers(session: Session, subject: str, subject_ids: Sequence[int]) -> dict[int, dict[str, Answer]]:
    """Return the last answer to each question, by the saved revision that it is about."""
    found: dict[int, dict[str, Answer]] = {}
    query = select(AnswerRow).where(AnswerRow.subject == subject, AnswerRow.subject_id.in_(subject_ids))
    for row in session.scalars(query.order_by(AnswerRow.id)):
        found.setdefault(row.subject_id, {})[row.question] = Answer(row.answer, row.who, row.at)
    return found


def _earlier(session: Session, record: Record) -> dict[str, Answer]:
    query = select(RevisionRow.id).join(RecordRow).where(RecordRow.key == record.key, RevisionRow.n < record.revision)
    older = list(session.scalars(query.order_by(RevisionRow.n)))
    merged: dict[str, Answer] = {}
    for _, given in sorted(answers(session, "record", older).items()):
        merged |= given
    return merged


def _asked(session: Session, record: Record) -> Iterator[tuple[str, str]]:
    if record.group == "sets":
        yield from _of_the_check(record)
        yield from _loads(record)
        yield from _cured(session, record)
        yield from expired_lots(session, record)
    elif record.group == "values":
        yield from _of_a_value(record)


def _of_the_check(record: Record, statistic: Mapping[str, Any] | None = None) -> Iterator[tuple[str, str]]:
    for caution in coupon_result(record, statistic)["cautions"]:
        if caution["answer"] or caution["about"] in _ALSO_ASKED:
            yield str(caution["about"]), str(caution["text"])


def _loads(record: Record) -> Iterator[tuple[str, str]]:
    """Loads so small that they look like stresses typed in a load's place."""
    result, coupons = coupon_result(record), record.values["coupons"]
    loads = all("load" in coupon for coupon in coupons)
    if loads and PROPERTIES[record.values["property"]].kind == "stress" and 0 < result["mean_stress"] < LEAST_STRESS:
        yield (
            "stress for load",
            f"The loads give {units.show(result['mean_stress'], 'stress')} on average, less than any bond holds: were "
            "stresses typed where loads were asked, or is the unit of the loads wrong?",
        )


def _cured(session: Session, record: Record) -> Iterator[tuple[str, str]]:
    """Coupons that were broken before the cure was over."""
    days = record.values.get("cured_days")
    linked = record.links.get("cure")
    if days is None and linked is not None:
        days = reading.get(session, linked.key, linked.revision).values.get("days_before_load")
    document = documents.read(coupon_document(record))
    if days is None or not isinstance(document, documents.CouponsDocument):
        return
    wanted = units.parse("", days, "factor")
    early = [
        str(place + 1)
        for place, coupon in enumerate(document.coupons)
        if coupon.counts and coupon.date_bonded and coupon.date_tested
        and (coupon.date_tested - coupon.date_bonded).days < wanted
    ]  # fmt: skip
    if early:
        named = f"Coupon {early[0]} was" if len(early) == 1 else f"Coupons {', '.join(early)} were"
        yield (
            "cure",
            f"{named} tested before the {wanted:g} days of cure were over: the value is of a bond half cured. Why may "
            "it stand?",
        )


def _of_a_value(record: Record) -> Iterator[tuple[str, str]]:
    values = record.values
    if values.get("service_temperature") and values.get("glass_transition") is not None:
        highest = units.parse("", values["service_temperature"][1], "temperature")
        softens = units.parse("", values["glass_transition"], "temperature")
        if highest > softens - BELOW_GLASS_TRANSITION:
            yield (
                "glass transition",
                f"The service temperature goes up to {highest:g} °C; the adhesive softens at {softens:g} °C, and "
                f"common practice stays {BELOW_GLASS_TRANSITION:g} K below (CEN/TS 19101). Why may it be used so near?",
            )
