"""The form of a library record: the same boxes as in the check form, so that a value has one label everywhere."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any, TypedDict

from server import units
from server.errors import Fault
from server.library import ALL, PROPERTIES, Group, Link, Record, value_text
from server.sheets import raised
from server.web import form_fill, forms
from server.web.evidence_fields import BOXES, LINKS, VALUE_UNITS
from server.web.form_fields import GROUPS as ROWS
from server.web.form_fields import PLAIN_UNITS, UNITS, Box
from server.web.form_text import with_unit

_ELSEWHERE = ("name", "record", "revision", "status", "source", "note")
"""Boxes of a check's row that a record has of its own, or that only a check has."""
_HINTS = {
    "shear_strength": "characteristic value; may stay blank while tests are wanting",
    "kind": "chooses the hatching of drawings",
}
_ROW = "record"
_LINK = re.compile(r"(\S+)(?:\s+rev(?:ision)?\.?\s*(\d{1,9}))?", re.IGNORECASE)
_FACTOR = re.compile(r"chain\[(\d{1,3})\]\.(\w+)")
FACTOR_BOXES = {
    "name": "Factor",
    "value": "Value",
    "source": "Source",
    "evidence": "What shows it",
    "dry": "Dry set",
    "conditioned": "Conditioned set",
}
SPARE_FACTORS = 2
STARTS = ("draft", "indicative", "provisional", "on hold", "withdrawn", "superseded")
"""States that a form may give a bond, fastener or material; approval is an act of another person."""


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
    links: dict[str, Any] = field(default_factory=dict)
    chain: list[dict[str, Any]] = field(default_factory=list)
    faults: dict[str, str] = field(default_factory=dict)
    factors: list[int] = field(default_factory=list)


# --- boxes ------------------------------------------------------------------------------------------------------------


def boxes(group: str) -> tuple[list[Box], list[Box]]:
    """Return the boxes of a group's values: those in first view, and those folded away."""
    section = ALL[group].section
    every = BOXES.get(group, ()) if not section else ROWS[section].boxes
    kept = [box for box in every if not section or box.name not in _ELSEWHERE]
    return [box for box in kept if not box.more], [box for box in kept if box.more]


def hint(box: Box) -> str:
    """Return the help beside a box of a record."""
    return _HINTS.get(box.name, box.hint)


def links(group: str) -> dict[str, str]:
    """Return the boxes of what a record of a group stands on: role and label."""
    return {role: LINKS[role] for role in ALL[group].links}


def pins(group: str) -> dict[str, str]:
    """Return the boxes of the values that a record may pin: role and label."""
    return {role: wanted for role, wanted in ALL[group].pins.items() if ALL[group].section}


def has_chain(group: str) -> bool:
    """Whether a record of a group has a knock-down chain."""
    return bool(ALL[group].section)


# --- reading ----------------------------------------------------------------------------------------------------------


def read(group: str, values: Mapping[str, str]) -> Typed:
    """Read the form. Numbers are kept as typed, with the unit that stands beside their box."""
    known = ALL[group]
    entry, faults = (_of_a_row if known.section else _of_boxes)(group, values)
    factors, numbers = _chain(values)
    blank = empty(group, "SI")
    text = {name: text for name, text in values.items() if name in blank or name.startswith("chain[")}
    return Typed(
        text=blank | text,
        words=Words(
            name=values.get("name", ""),
            status=values.get("status", "") or "draft",
            source=values.get("source", ""),
            note=values.get("note", ""),
            made_by=values.get("made_by", ""),
            reason=values.get("reason", ""),
        ),
        values=entry,
        details={name: values.get(f"details.{name}", "") for name in known.details},
        links=_links(known, values),
        chain=factors,
        faults=faults,
        factors=numbers,
    )


def _of_a_row(group: str, values: Mapping[str, str]) -> tuple[dict[str, Any], dict[str, str]]:
    """A bond, fastener or material: read as a row of the check form is."""
    prefix = _prefix(ALL[group])
    row = {prefix + box.name: values.get(box.name, "") for box in _all(group)}
    reading = forms.reading_of({**row, prefix + "name": _ROW, "units": forms.system_of(values)})
    section = reading.raw.get(ALL[group].section)
    entry = section.get(_ROW, {}) if isinstance(section, dict) else {}
    return entry, {name.removeprefix(prefix): text for name, text in reading.faults.items() if name.startswith(prefix)}


def _of_boxes(group: str, values: Mapping[str, str]) -> tuple[dict[str, Any], dict[str, str]]:
    """Evidence: each box where its path says; a range needs both ends."""
    system, entry, faults = forms.system_of(values), dict[str, Any](), dict[str, str]()
    for box in _all(group):
        text = values.get(box.name, "").strip()
        if len(text) > 5000:
            faults[box.name] = f"This has {len(text)} characters; shorten it to at most 5000."
        elif text:
            unit = _value_unit(values) if (group, box.name) == ("values", "value") else box.unit
            _put(entry, box.place, with_unit(text, unit, system) if not box.whole else _whole(text))
    for name, ends in list(entry.items()):
        if isinstance(ends, dict) and set(ends) <= {"0", "1"}:
            entry[name] = [ends.get("0", ""), ends.get("1", "")]
            lacking = next((box for box in _all(group) if box.place == f"{name}[{0 if '0' not in ends else 1}]"), None)
            if len(ends) < 2 and lacking is not None:
                faults[lacking.name] = f"{lacking.label} is empty; enter both ends."
    return entry, faults


def _value_unit(values: Mapping[str, str]) -> str:
    known = PROPERTIES.get(values.get("property", ""))
    return VALUE_UNITS.get(known.kind, "") if known else ""


def _put(entry: dict[str, Any], place: str, value: Any) -> None:
    head, tail = re.fullmatch(r"(\w+)[.\[]?(\w*)\]?", place).groups()  # type: ignore[union-attr]
    if tail:
        entry.setdefault(head, {})[tail] = value
    else:
        entry[head] = value


def _whole(text: str) -> int | str:
    return int(text) if text.isascii() and text.isdecimal() and len(text) < 10 else text


def _links(group: Group, values: Mapping[str, str]) -> dict[str, Any]:
    """What the record stands on: "A-001" (the one in force, else the newest) or "A-001 rev 2"."""
    found: dict[str, Any] = {}
    for role in (*group.links, *group.pins):
        text = values.get(f"links.{role}", "").strip()
        if text:
            match = _LINK.fullmatch(text)
            found[role] = {"record": match[1], "revision": _number(match[2])} if match else {"record": text}
    return found


def _number(text: str | None) -> int | None:
    return int(text) if text else None


def _chain(values: Mapping[str, str]) -> tuple[list[dict[str, Any]], list[int]]:
    rows: dict[int, dict[str, str]] = {}
    for name, text in values.items():
        if text.strip() and name.startswith("chain[") and (match := _FACTOR.fullmatch(name)):
            rows.setdefault(int(match[1]), {})[match[2]] = text.strip()
    found: list[dict[str, Any]] = []
    for row in dict(sorted(rows.items())).values():
        factor: dict[str, Any] = {name: row[name] for name in ("name", "value", "source", "evidence") if name in row}
        for role in ("dry", "conditioned"):
            if role in row:
                match = _LINK.fullmatch(row[role])
                factor[role] = (match[1], _number(match[2])) if match else (row[role], None)
        found.append(factor)
    return found, sorted(rows)


# --- writing ----------------------------------------------------------------------------------------------------------


def fill(record: Record, system: str) -> dict[str, str]:
    """Return the boxes that say ``record``."""
    filled = content(record.group, record.values, record.details, record.links, system)
    for index, factor in enumerate(record.chain):
        row = {
            "name": factor.name,
            "value": f"{factor.value:.6g}",
            "source": factor.source,
            "evidence": factor.evidence,
        }
        row |= {role: str(pair) for role in ("dry", "conditioned") if (pair := getattr(factor, role))}
        filled |= {f"chain[{index}].{name}": text for name, text in row.items()}
    return filled | {
        "key": record.key,
        "based_on": str(record.revision),
        "name": record.name,
        "status": record.status if record.status in STARTS else "draft",
        "source": record.source,
        "note": record.note,
        "made_by": "",
        "reason": "",
        "units": system,
    }


def content(
    group: str, values: Mapping[str, Any], details: Mapping[str, str], linked: Mapping[str, Any], system: str
) -> dict[str, str]:
    """Return the boxes that say what a record of a group holds."""
    filled = empty(group, system)
    if ALL[group].section:
        section = ALL[group].section
        raw = {"format": "bondwright/1", "kind": "member", "display": system, section: {_ROW: dict(values)}}
        prefix = _prefix(ALL[group])
        filled |= {
            name.removeprefix(prefix): text for name, text in forms.write(raw).items() if name.startswith(prefix)
        }
    else:
        for box in _all(group):
            filled[box.name] = form_fill.show(at(values, box.place), box.unit if box.unit in UNITS else "", system)
    filled |= {f"details.{name}": text for name, text in details.items()}
    return filled | {f"links.{role}": _link_text(target) for role, target in linked.items()}


def _link_text(target: Any) -> str:
    return str(target) if isinstance(target, Link | str) else " rev ".join(map(str, target))


def empty(group: str, system: str) -> dict[str, str]:
    """Return the boxes of a new record."""
    names = [
        "key",
        "based_on",
        *Words.__annotations__,
        *(box.name for box in _all(group)),
        *(f"details.{name}" for name in ALL[group].details),
        *(f"links.{role}" for role in (*ALL[group].links, *pins(group))),
    ]
    return dict.fromkeys(names, "") | {"status": "draft", "units": system}


def factor_rows(values: Mapping[str, str]) -> list[int]:
    """Return the rows of the chain that a form shows: the filled ones and some spare."""
    filled = [int(match[1]) for name in values if (match := _FACTOR.fullmatch(name))]
    return list(range(max(filled, default=-1) + 1 + SPARE_FACTORS))


# --- placing ----------------------------------------------------------------------------------------------------------


def place(group: str, faults: Iterable[Fault], factors: Iterable[int] = ()) -> dict[str, str]:
    """Return the library's faults by box; one that belongs to no box stands under the empty name."""
    names = {f"values.{box.place}": box.name for box in _all(group)}
    for box in _all(group):  # a fault of a whole range, or of all strengths, stands at its first box
        names.setdefault("values." + re.split(r"[.\[]", box.place)[0], box.name)
    names |= {f"details.{name}": f"details.{name}" for name in ALL[group].details}
    names |= {f"links.{role}": f"links.{role}" for role in (*ALL[group].links, *pins(group))}
    for place_, row in enumerate(factors):
        names |= {f"chain[{place_}].{name}": f"chain[{row}].{name}" for name in FACTOR_BOXES}
        names[f"chain[{place_}]"] = f"chain[{row}].name"
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
    named |= {f"details.{name}": label for name, label in ALL[group].details.items()}
    named |= {f"links.{role}": label for role, label in (links(group) | pins(group)).items()}
    for row in range(30):
        named |= {f"chain[{row}].{name}": f"Factor {row + 1}, {label}" for name, label in FACTOR_BOXES.items()}
    return named | {
        "key": "Key",
        "name": "Name",
        "status": "Status",
        "source": "Source",
        "note": "Note",
        "made_by": "Entered by",
        "reason": "What changed, and why",
    }


# --- showing ----------------------------------------------------------------------------------------------------------


def shown(record: Record) -> list[tuple[str, str]]:
    """Return the record's values as typed: (label, text) for every box that says something."""
    found = []
    for box in _all(record.group):
        value = at(record.values, box.place)
        if value is None or value == "" or value == {}:
            continue
        if (record.group, box.name) == ("values", "value"):
            text = value_text(record)
        elif isinstance(value, Mapping):
            text = ", ".join(f"{name} {_plain(factor)}" for name, factor in value.items())
        else:
            text = _plain(value) + _unit_after(value, box)
        found.append((box.label, raised(units.degrees(text))))
    return found


def in_short(record: Record) -> str:
    """Return the first numbers of a record in one line, for lists."""
    if record.group == "values":
        return f"{record.values.get('property')} {value_text(record)}"
    if record.group == "sets":
        coupons = record.values.get("coupons") or ()
        out = sum(1 for each in coupons if isinstance(each, Mapping) and each.get("excluded") is not None)
        return f"{record.values.get('property')}: {len(coupons)} coupons{f', {out} excluded' if out else ''}"
    if record.group == "lots":
        expiry = record.values.get("maker_expiry")
        return f"lot {record.values.get('number')}{f', expires {expiry}' if expiry else ''}"
    numbers = [(label, text) for label, text in shown(record) if text[:1].isdecimal()]
    pinned = ", ".join(str(link) for link in record.pins.values())
    return "; ".join([*(f"{label} {text}" for label, text in numbers[:3]), *([pinned] if pinned else [])])


def at(values: Mapping[str, Any], place_: str) -> Any:
    """Return what stands at a place such as 'strengths.bending' or 'thickness[0]'; None where nothing does."""
    value: Any = values
    for part in re.findall(r"\w+", place_):
        if isinstance(value, Mapping):
            value = value.get(part)
        elif isinstance(value, list | tuple) and part.isdecimal() and int(part) < len(value):
            value = value[int(part)]
        else:
            return None
    return value


def _plain(value: object) -> str:
    if value is None:
        return ""
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
