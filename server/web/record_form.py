"""The form of a library record: the same boxes as in the check form, so that a value has one label everywhere."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any, TypedDict

from server.errors import Fault
from server.library import GROUPS, Record
from server.library.groups import Group
from server.web import forms
from server.web.form_fields import GROUPS as ROWS
from server.web.form_fields import PLAIN_UNITS, Box

_ELSEWHERE = ("name", "record", "revision", "status", "source", "note")
"""Boxes of a check's row that a record has of its own, or that only a check has."""
_HINTS = {
    "shear_strength": "characteristic value; may stay blank while tests are wanting",
    "kind": "chooses the hatching of drawings",
}
_ROW = "record"


class Words(TypedDict):
    """What a revision says in plain text."""

    name: str
    status: str
    source: str
    note: str
    made_by: str
    reason: str


@dataclass(frozen=True)
class Typed:
    """A record as read from its form: what the library is asked to keep, what the form itself cannot read, and the
    boxes as typed."""

    text: dict[str, str]
    words: Words
    values: dict[str, Any]
    details: dict[str, str]
    faults: dict[str, str] = field(default_factory=dict)


def boxes(group: str) -> tuple[list[Box], list[Box]]:
    """Return the boxes of a group's values: those in first view, and those folded away."""
    kept = [box for box in ROWS[GROUPS[group].section].boxes if box.name not in _ELSEWHERE]
    return [box for box in kept if not box.more], [box for box in kept if box.more]


def hint(box: Box) -> str:
    """Return the help beside a box of a record."""
    return _HINTS.get(box.name, box.hint)


def read(group: str, values: Mapping[str, str]) -> Typed:
    """Read the form. Numbers are kept as typed, with the unit that stands beside their box."""
    prefix = _prefix(GROUPS[group])
    row = {prefix + box.name: values.get(box.name, "") for box in _all(group)}
    reading = forms.reading_of({**row, prefix + "name": _ROW, "units": forms.system_of(values)})
    section = reading.raw.get(GROUPS[group].section)
    entry = section.get(_ROW, {}) if isinstance(section, dict) else {}
    faults = {name.removeprefix(prefix): message for name, message in reading.faults.items() if name.startswith(prefix)}
    blank = empty(group, "SI")
    return Typed(
        text=blank | {name: text for name, text in values.items() if name in blank},
        words=Words(
            name=values.get("name", ""),
            status=values.get("status", ""),
            source=values.get("source", ""),
            note=values.get("note", ""),
            made_by=values.get("made_by", ""),
            reason=values.get("reason", ""),
        ),
        values=entry,
        details={name: values.get(f"details.{name}", "") for name in GROUPS[group].details},
        faults=faults,
    )


def fill(record: Record, system: str) -> dict[str, str]:
    """Return the boxes that say ``record``."""
    section = GROUPS[record.group].section
    raw = {"format": "bondwright/1", "kind": "member", "display": system, section: {_ROW: dict(record.values)}}
    prefix = _prefix(GROUPS[record.group])
    filled = {name.removeprefix(prefix): text for name, text in forms.write(raw).items() if name.startswith(prefix)}
    filled |= {f"details.{name}": text for name, text in record.details.items()}
    return (
        empty(record.group, system)
        | filled
        | {
            "key": record.key,
            "based_on": str(record.revision),
            "name": record.name,
            "status": "draft" if record.status == "approved" else record.status,
            "source": record.source,
            "note": record.note,
            "made_by": "",
            "reason": "",
            "units": system,
        }
    )


def empty(group: str, system: str) -> dict[str, str]:
    """Return the boxes of a new record."""
    names = [
        "key",
        "based_on",
        *Words.__annotations__,
        *(box.name for box in _all(group)),
        *(f"details.{name}" for name in GROUPS[group].details),
    ]
    return dict.fromkeys(names, "") | {"status": "draft", "units": system}


def place(group: str, faults: Iterable[Fault]) -> dict[str, str]:
    """Return the library's faults by box; one that belongs to no box stands under the empty name."""
    names = {f"values.{box.place}": box.name for box in _all(group)}
    names |= {f"details.{name}": f"details.{name}" for name in GROUPS[group].details}
    names |= {name: name for name in ("key", *Words.__annotations__)}
    beside: dict[str, str] = {}
    for fault in faults:
        path = fault.path
        while path and path not in names:
            path = path[: max(path.rfind("."), path.rfind("["), 0)]
        beside.setdefault(names.get(path, ""), fault.message if path else str(fault))
    return beside


def labels(group: str) -> dict[str, str]:
    """Return what each box is called, for the list of faults above the form."""
    named = {box.name: box.label for box in _all(group)}
    named |= {f"details.{name}": label for name, label in GROUPS[group].details.items()}
    return named | {
        "key": "Key",
        "name": "Name",
        "status": "Status",
        "source": "Source",
        "note": "Note",
        "made_by": "Entered by",
        "reason": "What changed, and why",
    }


def shown(record: Record) -> list[tuple[str, str]]:
    """Return the record's values as typed: (label, text) for every box that says something."""
    found = []
    for box in _all(record.group):
        value: Any = record.values
        for part in box.place.split("."):
            value = value.get(part) if isinstance(value, Mapping) else None
        if value is None or value == "" or value == {}:
            continue
        if isinstance(value, Mapping):
            text = ", ".join(f"{name} {_plain(factor)}" for name, factor in value.items())
        else:
            text = _plain(value) + _unit_after(value, box)
        found.append((box.label, text))
    return found


def in_short(record: Record) -> str:
    """Return the first numbers of a record in one line, for lists."""
    numbers = [(label, text) for label, text in shown(record) if text[:1].isdecimal()]
    return "; ".join(f"{label} {text}" for label, text in numbers[:3])


def _plain(value: object) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:g}" if isinstance(value, float) else str(value)


def _unit_after(value: object, box: Box) -> str:
    is_number = isinstance(value, int | float) and not isinstance(value, bool)
    return f" {PLAIN_UNITS[box.unit]}" if is_number and box.unit else ""


def _all(group: str) -> list[Box]:
    first, more = boxes(group)
    return first + more


def _prefix(group: Group) -> str:
    return f"{group.section}[0]."
