"""What a check that fits on one page asks for: one table serves its form, its given values and its faults.

A member check has rows that come and go; the other kinds of check ask a fixed list of questions. Each question is an
``Ask``: its place in the document, its words, its unit. The web makes boxes of them (``web/one_page.py``), the sheet
prints what was answered (``given``), so that nothing can be asked without being printed.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server import documents
from server.sheets.given import Group, Row, provenance, typed_text, used_text

Raw = Mapping[str, Any]
Choices = tuple[tuple[str, str], ...]
YES_NO: Choices = (("no", "no"), ("yes", "yes"))
RECORDS = {"materials": "materials", "adhesives": "bonds", "fasteners": "fasteners"}
"""Group of records in the library, by group of values in a document."""


@dataclass(frozen=True)
class Ask:
    """One question: the place of its answer in the document ("side.thickness"), its label, and how it is answered.

    ``unit`` is the unit of a bare number, by its name in the form ("size", "force", "stress"); ``choices`` are (value,
    words); ``flag`` is answered with yes or no; ``whole`` with a whole number; ``rows`` with several lines, one entry
    each, whose columns are the ``columns``; ``into`` names the list that pasted blocks of readings join. ``record``
    true picks values from the library: the answer's place is then that of a whole entry ("adhesives.glue"), and typed
    answers below it are left out. ``start`` is what a new form holds, in SI and in US units. ``only`` (a place, its
    values) says when the question makes sense; at all other times it is neither shown nor read, and what was typed is
    kept.
    """

    path: str
    label: str
    unit: str = ""
    choices: Choices = ()
    hint: str = ""
    start: tuple[str, str] = ("", "")
    flag: bool = False
    whole: bool = False
    wide: bool = False
    record: bool = False
    rows: int = 0
    columns: tuple[Column, ...] = ()
    into: str = ""
    only: tuple[tuple[str, tuple[str, ...]], ...] = ()

    @property
    def answers(self) -> Choices:
        """The choices of a question that is answered by choosing."""
        return YES_NO if self.flag else self.choices

    def makes_sense(self, answers: Mapping[str, str], asks: Mapping[str, Ask]) -> bool:
        """Whether the answers given elsewhere leave this question open; an empty choice counts as its first."""
        for place, wanted in self.only:
            other = asks.get(place)
            first = other.answers[0][0] if other is not None and other.answers else ""
            if (answers.get(place) or first) not in wanted:
                return False
        return all(asks[place].makes_sense(answers, asks) for place, _ in self.only if place in asks)


@dataclass(frozen=True)
class Column:
    """One column of a question answered in rows: its key in each entry, its words, its unit."""

    key: str
    label: str
    unit: str = ""


@dataclass(frozen=True)
class AskGroup:
    """Questions on one subject. ``folded`` ones stand closed on the page until something in them needs a look."""

    key: str
    title: str
    asks: tuple[Ask, ...]
    folded: bool = False
    about: str = ""


def asks_of(groups: Iterable[AskGroup]) -> dict[str, Ask]:
    """Every question by its place."""
    return {ask.path: ask for group in groups for ask in group.asks}


def answer(raw: Raw, path: str) -> Any:
    """The answer at a place of the document; None where there is none."""
    found: Any = raw
    for name in path.split("."):
        if not isinstance(found, Mapping):
            return None
        found = found.get(name)
    return found


def given(groups: Sequence[AskGroup], raw: Raw, values_used: Raw, display: str, kind: str) -> tuple[Group, ...]:
    """The given values of a check: what was typed, and beside it what the check used."""
    found = []
    for group in groups:
        rows = tuple(row for ask in group.asks for row in _rows(ask, raw, values_used, display, kind))
        about = "; ".join(dict.fromkeys(_provenance(group, raw, values_used)))
        if rows or about:
            found.append(Group(group.title, rows, about))
    return tuple(found)


def _rows(ask: Ask, raw: Raw, values_used: Raw, display: str, kind: str) -> Iterator[Row]:
    typed = answer(raw, ask.path)
    if ask.record:
        return
    if typed is None or typed == "" or typed is False:
        taken = answer(values_used, ask.path)
        if taken is None or not _from_record(ask.path, raw):
            return
        text = used_text(taken, _kind(ask.path, kind), display)
        yield Row(ask.label, "", text or typed_text(taken))
    elif ask.into:
        for number, entry in enumerate(typed if isinstance(typed, list) else (), 1):
            yield Row(f"{ask.label} {number}", _readings(entry), "")
    elif ask.rows:
        columns = ", ".join(column.label for column in ask.columns)
        for number, entry in enumerate(typed if isinstance(typed, list) else (), 1):
            yield Row(f"{ask.label} {number}: {columns}", _entry(ask, entry), _entry_used(ask, entry, display, kind))
    else:
        words = dict(ask.choices).get(str(typed), "") if ask.choices else typed_text(typed)
        yield Row(ask.label, words or typed_text(typed), used_text(typed, _kind(ask.path, kind), display))


def _readings(entry: object) -> str:
    """What pasted readings are, in short: the sheet has their number, the document all of them."""
    if not isinstance(entry, Mapping):
        return typed_text(entry)
    listed = entry.get("readings") or ()
    last = " to ".join(", ".join(typed_text(part) for part in listed[at]) for at in (0, -1)) if listed else ""
    words = [typed_text(entry.get("name") or ""), f"{len(listed)} readings", last]
    if entry.get("excluded"):
        words.append(f"excluded: {typed_text(entry['excluded'])}")
    return ": ".join(word for word in words if word)


def _entry(ask: Ask, entry: object) -> str:
    if not isinstance(entry, Mapping):
        return typed_text(entry)
    return ", ".join(typed_text(entry.get(column.key)) for column in ask.columns).rstrip(", ")


def _entry_used(ask: Ask, entry: object, display: str, kind: str) -> str:
    if not isinstance(entry, Mapping):
        return ""
    used = [
        used_text(entry.get(column.key), _kind(f"{ask.path}[0].{column.key}", kind), display) for column in ask.columns
    ]
    return ", ".join(text for text in used if text)


def _kind(path: str, kind: str) -> str:
    return documents.kind_of(path, kind=kind) or ""


def _from_record(path: str, raw: Raw) -> bool:
    names = path.split(".")
    entry = answer(raw, ".".join(names[:2]))
    return names[0] in RECORDS and isinstance(entry, Mapping) and "record" in entry


def _provenance(group: AskGroup, raw: Raw, values_used: Raw) -> Iterator[str]:
    """Where the values of a group come from: record, revision, status, source."""
    for place in dict.fromkeys(".".join(ask.path.split(".")[:2]) for ask in group.asks):
        if place.partition(".")[0] in RECORDS and answer(raw, place) is not None:
            entry = answer(values_used, place) or answer(raw, place)
            if isinstance(entry, Mapping):
                yield provenance(entry)
