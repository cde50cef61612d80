"""The form of a check that fits on one page: its questions (``sheets.asked``) as boxes, read into a document and back.

``read`` puts every answer at its place in the document, with the unit of its box after a bare number; ``write`` is
its inverse. What is typed into a box that is not shown (``Ask.only``) stays in the form and out of the document.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

from server.sheets import OnePage
from server.sheets.asked import RECORDS, Ask, AskGroup, answer, asks_of
from server.web import form_fill, pasted_readings
from server.web.form_fields import SINGLES, UNITS, Box, shown_unit
from server.web.form_text import Reading, split, with_unit
from server.web.form_view import Options
from server.web.forms import system_of

COMMON = ("title", "note", "shop_note")
_BESIDE = ("mark", "display", "made_by", "reason")
_BUTTONS = ("units_of_boxes", "calculate", "save", "asked")
Values = Mapping[str, str]


def start(page: OnePage, display: str) -> dict[str, str]:
    """Return the boxes of a new form."""
    us = display == "US"
    values = {ask.path: ask.start[us] for ask in asks_of(page.groups).values() if ask.start[us]}
    return {"units": display, "display": display, **values}


def is_box(page: OnePage, name: str) -> bool:
    """Say whether a name is that of one of the form's boxes."""
    return name in COMMON or name in _BESIDE or name in asks_of(page.groups)


def shown(page: OnePage, values: Values) -> dict[str, Ask]:
    """Return the questions that make sense with the answers so far, by their place."""
    asks = asks_of(page.groups)
    return {path: ask for path, ask in asks.items() if ask.makes_sense(values, asks)}


def read(page: OnePage, values: Values) -> Reading:
    """Return the document that the form says, as typed texts, and which box each place came from."""
    system = system_of(values)
    reading = Reading(raw={"format": "bondwright/1", "kind": page.kind})
    for name in COMMON:
        reading.paths[name] = name
        if values.get(name):
            reading.raw[name] = values[name]
    reading.raw["display"] = values.get("display") or system
    for path, fixed in page.fixed:
        _put(reading.raw, path, fixed)
    asked = shown(page, values)
    picked = [ask.path + "." for ask in asked.values() if ask.record and values.get(ask.path, "").strip()]
    for path, ask in asked.items():
        reading.paths[path] = path
        text = values.get(path, "").strip()
        if (text or ask.answers) and not path.startswith(tuple(picked)):
            _put(reading.raw, path, _read(ask, text, system, reading))
    page.finish(reading.raw)
    return reading


def _read(ask: Ask, text: str, system: str, reading: Reading) -> object:
    if ask.answers:
        chosen = text or ask.answers[0][0]
        return chosen == "yes" if ask.flag else chosen or None
    if ask.record:
        return {"record": text}
    if ask.into:
        found = pasted_readings.readings(text, system, ask.path, reading)
        before = len(reading.raw.get(ask.into) or ())  # type: ignore[arg-type]
        reading.paths |= {f"{ask.into}[{before + i}]": ask.path for i in range(len(found))}
        return found
    if ask.rows:
        return [_row(ask, line, number, system, reading) for number, line in enumerate(_lines(text))]
    if ask.whole and text.isdecimal() and len(text) < 10:
        return int(text)
    return with_unit(text, ask.unit, system)


def _lines(text: str) -> list[str]:
    return [line for line in text.replace(";", "\n").split("\n") if line.strip()]


def _row(ask: Ask, line: str, number: int, system: str, reading: Reading) -> dict[str, object]:
    """Read one line into an entry; a line with too many answers is a fault of the form."""
    parts = split(line) if "," in line else line.split(None, len(ask.columns) - 1)
    reading.paths[f"{ask.path}[{number}]"] = ask.path
    if len(parts) > len(ask.columns):
        wanted = ", ".join(column.label for column in ask.columns)
        reading.fault(ask.path, f"Line {number + 1} has {len(parts)} values; enter {wanted}, with commas between.")
    return {
        column.key: with_unit(part, column.unit, system)
        for column, part in zip(ask.columns, parts, strict=False)
        if part.strip()
    }


def _put(raw: dict[str, Any], path: str, value: object) -> None:
    """Set a place of the document, making the levels above it; an answer of None is left out."""
    if value is None or value == "":
        return
    *above, last = path.split(".")
    for name in above:
        raw = raw.setdefault(name, {})
    raw[last] = value


def write(page: OnePage, raw: Mapping[str, Any]) -> dict[str, str]:
    """Return the boxes of the form that say ``raw``; ``read`` gives the same document again."""
    raw = page.normal(raw)
    system = "US" if raw.get("display") == "US" else "SI"
    values = {"units": system, "display": system}
    values |= {name: str(raw.get(name) or "") for name in COMMON}
    for path, ask in asks_of(page.groups).items():
        text = _written(ask, answer(raw, path), system)
        if text:
            values[path] = text
    return values


def _written(ask: Ask, value: Any, system: str) -> str:
    if ask.record:
        return str(value.get("record", "")) if isinstance(value, Mapping) else ""
    if ask.into and isinstance(value, list):
        return pasted_readings.write(value)
    if ask.rows and isinstance(value, list):
        return "\n".join(_line(ask, entry, system) for entry in value)
    return "" if isinstance(value, Mapping | list) else form_fill.show(value, ask.unit, system)


def _line(ask: Ask, entry: Any, system: str) -> str:
    if not isinstance(entry, Mapping):
        return str(entry)
    texts = [form_fill.show(entry.get(column.key), column.unit, system) for column in ask.columns]
    return ", ".join(f'"{text}"' if "," in text else text for text in texts).rstrip(", ")


def in_units(page: OnePage, values: Values, system: str) -> dict[str, str]:
    """Mark the boxes in another system; a bare number keeps the unit it was typed in."""
    kept = {name: text for name, text in values.items() if name not in _BUTTONS}
    if system_of(values) == system:
        return kept
    everything = replace_only(page)
    typed = write(everything, {**read(everything, values).raw, "display": system})
    return {**kept, **{path: text for path, text in typed.items() if values.get(path, "").strip()}, "units": system}


def replace_only(page: OnePage) -> OnePage:
    """Return the page with every question open, so that hidden answers are converted too."""
    groups = tuple(
        replace(group, asks=tuple(replace(a, only=(), record=False) for a in group.asks if not a.record))
        for group in page.groups
    )
    return replace(page, groups=groups)


@dataclass(frozen=True)
class OneForm:
    """What the templates ask of the form; the same names as those of the member's form where they mean the same."""

    page: OnePage
    values: Mapping[str, str]
    messages: Mapping[str, str]
    raw: Mapping[str, Any]
    preview_url: str
    shape_url: str
    working_url: str
    save_url: str
    leave_url: str
    library: Mapping[str, Options] = field(default_factory=dict)
    revising: bool = False
    focus: str = ""

    names: Mapping[str, list[str]] = field(default_factory=dict)
    now: Mapping[str, str] = field(default_factory=dict)

    @property
    def system(self) -> str:
        """The system the boxes are marked in."""
        return system_of(self.values)

    @cached_property
    def asked(self) -> dict[str, Ask]:
        """The questions shown, by their place."""
        return shown(self.page, self.values)

    @property
    def asked_now(self) -> str:
        """A mark of which questions are shown; the preview brings the form anew when it changes."""
        return " ".join(self.asked)

    def groups(self) -> Iterator[tuple[AskGroup, list[Box]]]:
        """Each subject with the boxes that are shown."""
        for group in self.page.groups:
            boxes = [_box(ask) for ask in group.asks if ask.path in self.asked]
            if boxes:
                yield group, boxes

    def hidden(self) -> Iterator[tuple[str, str]]:
        """What was typed into boxes that are not shown now."""
        for path in asks_of(self.page.groups):
            if path not in self.asked and self.values.get(path):
                yield path, self.values[path]

    @property
    def changed(self) -> list[str]:
        """Boxes whose message changed since the page last showed them."""
        before = (name for name in self.values.get("shown", "").split() if is_box(self.page, name))
        return list(dict.fromkeys((*before, *self.messages)))

    def single(self, name: str) -> Box:
        """Return a box that every check has: its mark, title, note, units."""
        return SINGLES[name]

    def unit(self, box: Box) -> str:
        """Return the unit beside a box."""
        return shown_unit(box.unit, self.system) if box.unit in UNITS else ""

    def hint(self, name: str, box: Box) -> str:
        """Return what is said under a box."""
        return box.hint

    def choices(self, box: Box) -> Options:
        """Return a select's choices."""
        return box.choices

    def records(self, name: str) -> Options:
        """Return the library's records for a place in a group of values."""
        return (("", "typed here"), *self.library.get(RECORDS.get(name.partition(".")[0], ""), ()))

    def typed_box(self, name: str) -> Box | None:
        """Return the box of a text input; None for a select or several lines, which are left alone while in use."""
        if name in SINGLES:
            box = SINGLES[name]
            return None if box.choices else box
        ask = self.asked.get(name)
        return None if ask is None or ask.answers or ask.record or ask.rows else _box(ask)

    def is_open(self, group: AskGroup) -> bool:
        """Say whether a folded subject stands open: something in it was answered, or needs another look."""
        return any(
            ask.path in self.messages or (self.values.get(ask.path, "") not in ("", *_first(ask)))
            for ask in group.asks
            if ask.path in self.asked
        )


def _first(ask: Ask) -> tuple[str, ...]:
    return (ask.answers[0][0],) if ask.answers else ask.start


def _box(ask: Ask) -> Box:
    return Box(
        "record" if ask.record else ask.path,
        ask.label,
        ask.unit,
        ask.path,
        ask.answers,
        hint=ask.hint,
        wide=ask.wide,
        lines=ask.rows,
    )
