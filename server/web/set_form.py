"""The form of a coupon set: boxes as typed into the set's values, values back into boxes, faults beside their boxes.

What all coupons share is typed once and may differ in a column of its own; a coupon is excluded below the grid, with
its cause and what now stops it. Nothing is validated here that the set's own models validate.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from server.documents.coupons import MOST
from server.errors import Fault
from server.web.form_fields import PLAIN_UNITS
from server.web.form_text import with_unit
from server.web.set_columns import COLUMNS, DEFAULTS, FIRST_ROWS, MOST_ROWS, ROW_BOXES, SHARES, STATISTIC, WAYS, Way

_ROW = re.compile(r"coupons\[(\d{1,4})\]\.(\w+)")
_OUT = re.compile(r"excluded\[(\d{1,4})\]\.(\w+)")
_LONGEST = 2000
CONDITIONS = {
    "thickness": "size",
    "temperature": "temperature",
    "cured_days": "",
    "hybrid_fastener": "",
    "hybrid_spacing": "size",
    "hybrid_rows": "",
}
"""Boxes about the whole set, with their units."""
SPARE_EXCLUSIONS = 1
LARGER = f"Bring a larger set, up to {MOST} coupons, in as a file under Library, In and out, or by the API."


@dataclass
class SetReading:
    """A set as read from its form: its values, the form's own faults by box, which box each path came from, and which
    row each coupon stands in."""

    values: dict[str, Any] = field(default_factory=dict)
    faults: dict[str, str] = field(default_factory=dict)
    paths: dict[str, str] = field(default_factory=dict)
    rows: list[int] = field(default_factory=list)

    def fault(self, name: str, message: str) -> None:
        """Keep the first message of a box."""
        self.faults.setdefault(name, message)


# --- reading ----------------------------------------------------------------------------------------------------------


def read(boxes: Mapping[str, str]) -> SetReading:
    """Read the boxes of a set's form."""
    reading = SetReading()
    typed = {name: text.strip() for name, text in boxes.items()}
    for name, text in typed.items():
        if len(text) > _LONGEST and name not in ("paste", "note", "source"):
            reading.fault(name, f"This has {len(text)} characters; shorten it to at most {_LONGEST}.")
            typed[name] = ""
    system = "US" if typed.get("units") == "US" else "SI"
    way = WAYS.get(typed.get("way", ""), WAYS["load kN"])
    reading.values["property"] = typed.get("property", "")
    reading.paths["values.property"] = "property"
    coupons = [_coupon(index, row, typed, way, system, reading) for index, row in filled_rows(typed).items()]
    reading.paths["values.coupons"] = f"coupons[{reading.rows[0]}].reading" if reading.rows else "coupons[0].reading"
    _exclude(typed, coupons, reading)
    reading.values["coupons"] = coupons
    if reading.rows and reading.rows[-1] >= MOST_ROWS:
        message = f"Coupon {reading.rows[-1] + 1} is beyond the grid, which takes {MOST_ROWS}. {LARGER}"
        reading.fault("coupons[0].reading", message)
    if not coupons:
        reading.fault("coupons[0].reading", "No coupon has a reading yet; type at least one, or paste them below.")
    if statistic := _statistic(typed, reading):
        reading.values["statistic"] = statistic
    for name, unit in CONDITIONS.items():
        reading.paths[f"values.{name}"] = f"set.{name}"
        if text := typed.get(f"set.{name}", ""):
            reading.values[name] = with_unit(text, unit, system)
    reading.values["display"] = system
    return reading


def filled_rows(typed: Mapping[str, str]) -> dict[int, dict[str, str]]:
    """Return the rows in which something is typed, by their number in the form."""
    rows: dict[int, dict[str, str]] = {}
    for name, text in typed.items():
        if text.strip() and name.startswith("coupons[") and (match := _ROW.fullmatch(name)) and match[2] in ROW_BOXES:
            rows.setdefault(int(match[1]), {})[match[2]] = text.strip()
    return dict(sorted(rows.items()))


def _coupon(
    index: int, row: Mapping[str, str], typed: Mapping[str, str], way: Way, system: str, reading: SetReading
) -> dict[str, Any]:
    base, box = f"values.coupons[{len(reading.rows)}]", f"coupons[{index}]"
    reading.rows.append(index)
    coupon: dict[str, Any] = {}
    if row.get("name"):
        coupon["name"] = row["name"]
    if row.get("reading"):
        coupon[way.field] = _reading(row["reading"], way)
    for name in ("load", "stress", "gauge"):
        reading.paths[f"{base}.{name}"] = f"{box}.reading"
    reading.paths[f"{base}.name"] = f"{box}.name"
    for name, column in COLUMNS.items():
        own = row.get(name, "") if shown(name, typed) else ""
        reading.paths[f"{base}.{name}"] = f"{box}.{name}" if shown(name, typed) else f"all.{name}"
        if text := own or typed.get(f"all.{name}", ""):
            coupon[name] = with_unit(text, column.unit, system)
    shares = {name: row[name] for name in SHARES if row.get(name)}
    reading.paths |= {f"{base}.failure.{name}": f"{box}.{name}" for name in SHARES}
    reading.paths[f"{base}.failure"] = f"{box}.{next(iter(shares), 'adhesive')}"
    if shares:
        coupon["failure"] = shares
    reading.paths[base] = f"{box}.reading"
    return coupon


def _reading(text: str, way: Way) -> str:
    """Say the unit after a bare number; a unit that was typed stands."""
    return f"{text} {way.unit}" if re.fullmatch(r"[+\-−]?\s*[\d.,][\d\s.,]*(?:[eE][+\-]?\d+)?", text) else text


def _exclude(typed: Mapping[str, str], coupons: Sequence[dict[str, Any]], reading: SetReading) -> None:
    """Put causes to the coupons that they exclude; the number is that of the row."""
    for index, row in exclusions(typed).items():
        box = f"excluded[{index}]"
        number = row.get("number", "")
        if not number:
            reading.fault(f"{box}.number", "Which coupon? Enter its number in the grid above.")
            continue
        place = _place(number, reading.rows)
        if place is None:
            reading.fault(f"{box}.number", f"“{number}” is not the number of a coupon with a reading.")
            continue
        if "excluded" in coupons[place]:
            reading.fault(f"{box}.number", f"Coupon {number} is excluded twice; write both causes in one row.")
            continue
        coupons[place]["excluded"] = row.get("cause", "")
        if row.get("stop"):
            coupons[place]["prevented_by"] = row["stop"]
        if not row.get("cause"):
            reading.fault(f"{box}.cause", "A coupon is excluded for a cause that can be named: write it.")
        reading.paths[f"values.coupons[{place}].excluded"] = f"{box}.cause"
        reading.paths[f"values.coupons[{place}].prevented_by"] = f"{box}.stop"


def exclusions(typed: Mapping[str, str]) -> dict[int, dict[str, str]]:
    """Return the rows of exclusions in which something is typed."""
    rows: dict[int, dict[str, str]] = {}
    for name, text in typed.items():
        if text.strip() and name.startswith("excluded[") and (match := _OUT.fullmatch(name)):
            rows.setdefault(int(match[1]), {})[match[2]] = text.strip()
    return dict(sorted(rows.items()))


def _place(number: str, rows: Sequence[int]) -> int | None:
    wanted = int(number) - 1 if number.isascii() and number.isdecimal() and len(number) < 6 else -1
    return rows.index(wanted) if wanted in rows else None


def _statistic(typed: Mapping[str, str], reading: SetReading) -> dict[str, Any]:
    """What differs from the defaults, so that a set says no more than was chosen."""
    found: dict[str, Any] = {}
    for name in STATISTIC:
        reading.paths[f"values.statistic.{name}"] = f"statistic.{name}"
        text = typed.get(f"statistic.{name}", "")
        if text and text != DEFAULTS.get(name):
            found[name] = text
    return found


def shown(column: str, typed: Mapping[str, str]) -> bool:
    """Whether the grid has a column for what may differ from coupon to coupon."""
    return bool(typed.get(f"column.{column}"))


# --- writing ----------------------------------------------------------------------------------------------------------


def empty(system: str) -> dict[str, str]:
    """Return the boxes of a new set."""
    way = "load lbf" if system == "US" else "load kN"
    boxes = {"units": system, "way": way, "property": "bond shear", "rows": str(FIRST_ROWS)}
    return boxes | {f"statistic.{name}": DEFAULTS.get(name, "") for name in STATISTIC}


def fill(values: Mapping[str, Any]) -> dict[str, str]:
    """Return the boxes that say the values of a set."""
    system = "US" if values.get("display") == "US" else "SI"
    coupons = [each for each in values.get("coupons") or () if isinstance(each, Mapping)]
    boxes = empty(system) | {"property": str(values.get("property") or ""), "way": _way_of(coupons, system)}
    boxes |= {f"set.{name}": _text(values[name], unit) for name, unit in CONDITIONS.items() if name in values}
    boxes |= {f"statistic.{name}": _text(text, "") for name, text in (values.get("statistic") or {}).items()}
    return boxes | fill_rows(coupons, WAYS[boxes["way"]])


def fill_rows(coupons: Sequence[Mapping[str, Any]], way: Way) -> dict[str, str]:
    """Return the grid's boxes: what all coupons share once, what differs in a column of its own."""
    boxes: dict[str, str] = {"rows": str(max(len(coupons), 1))}
    for name, column in COLUMNS.items():
        texts = [_text(each.get(name), column.unit) for each in coupons]
        if len(set(texts)) == 1 and texts[0]:
            boxes[f"all.{name}"] = texts[0]
        elif any(texts):
            boxes[f"column.{name}"] = "yes"
            boxes |= {f"coupons[{index}].{name}": text for index, text in enumerate(texts) if text}
    out = 0
    for index, coupon in enumerate(coupons):
        row = f"coupons[{index}]"
        boxes[f"{row}.name"] = _text(coupon.get("name"), "")
        boxes[f"{row}.reading"] = next(
            (_without(coupon[name], way) for name in ("load", "stress", "gauge") if coupon.get(name) is not None), ""
        )
        failure = coupon.get("failure") or {}
        boxes |= {f"{row}.{name}": _text(failure[name], "") for name in SHARES if name in failure}
        if coupon.get("excluded") is not None:
            boxes[f"excluded[{out}].number"] = str(index + 1)
            boxes[f"excluded[{out}].cause"] = str(coupon["excluded"])
            boxes[f"excluded[{out}].stop"] = str(coupon.get("prevented_by") or "")
            out += 1
    return boxes


def _way_of(coupons: Sequence[Mapping[str, Any]], system: str) -> str:
    """The way in which most readings were typed, so that their units need not stand in every box."""
    counted: dict[str, int] = {}
    for coupon in coupons:
        for key, way in WAYS.items():
            text = coupon.get(way.field)
            if isinstance(text, str) and _bare(text, way) != text:
                counted[key] = counted.get(key, 0) + 1
    if counted:
        return max(counted, key=lambda key: counted[key])
    field_name = next((name for each in coupons for name in ("load", "stress", "gauge") if name in each), "load")
    plain = {"load": "load N", "stress": "stress MPa", "gauge": "gauge MPa"}
    return plain[field_name] if coupons else ("load lbf" if system == "US" else "load kN")


def _without(reading: object, way: Way) -> str:
    """A reading without the unit that the grid says anyway; a plain number says its own (N or MPa)."""
    if isinstance(reading, str):
        return _bare(reading, way)
    own = "N" if way.field == "load" else "MPa"
    text = _text(reading, "")
    return text if own == way.unit else f"{text} {own}"


_SAME_UNIT = {"MPa": ("N/mm2", "N/mm²"), "kgf": ("kp",), "kgf/cm2": ("kgf/cm²", "kp/cm2")}


def _bare(reading: str, way: Way) -> str:
    """A reading without the unit of the grid, however that is spelled."""
    for unit in (way.unit, *_SAME_UNIT.get(way.unit, ())):
        if reading.endswith(f" {unit}"):
            return reading.removesuffix(f" {unit}")
    return reading


def _text(value: object, unit: str) -> str:
    """A stored value as it is typed; a plain number with the unit that it has in a document."""
    if value is None:
        return ""
    if isinstance(value, int | float) and not isinstance(value, bool):
        return f"{value:g} {PLAIN_UNITS[unit]}" if unit else f"{value:g}"
    return str(value)


def beyond_the_grid(itself: object, values: Mapping[str, Any]) -> str:
    """Return why a set cannot be changed in the grid, '' where it can: coupons that are not shown would be lost."""
    coupons = values["coupons"]
    if len(coupons) <= MOST_ROWS:
        return ""
    return (
        f"coupons: {itself} has {len(coupons)} of them; the grid takes {MOST_ROWS}, and the others would be "
        "lost. Exclude a coupon below, or take the set out as a file under Library, In and out, change it there, and "
        "bring it in again."
    )


# --- shaping and placing ----------------------------------------------------------------------------------------------


def compacted(typed: Mapping[str, str], *, rows: int = 0) -> dict[str, str]:
    """Return the boxes with the grid's rows closed up, exclusions following their coupons, and room for ``rows``."""
    filled = filled_rows(typed)
    kept = {name: text for name, text in typed.items() if not (_ROW.fullmatch(name) or _OUT.fullmatch(name))}
    moved = {str(old + 1): str(new + 1) for new, old in enumerate(filled)}
    for new, row in enumerate(filled.values()):
        kept |= {f"coupons[{new}].{name}": text for name, text in row.items()}
    for new, row in enumerate(exclusions(typed).values()):
        number = row.get("number", "")
        kept |= {f"excluded[{new}].{name}": text for name, text in row.items()}
        kept[f"excluded[{new}].number"] = moved.get(number, number)
    kept["rows"] = str(min(max(len(filled), rows, 1), MOST_ROWS))
    return kept


def row_count(typed: Mapping[str, str]) -> int:
    """Return how many rows the grid shows: as many as asked for, and all that are filled."""
    asked = typed.get("rows", "")
    wanted = int(asked) if asked.isascii() and asked.isdecimal() and len(asked) < 5 else FIRST_ROWS
    return min(max(wanted, 1 + max(filled_rows(typed), default=0)), MOST_ROWS)


def take(typed: Mapping[str, str], coupons: Sequence[Mapping[str, Any]]) -> dict[str, str]:
    """Return the boxes with pasted coupons after those that are there already."""
    system = "US" if typed.get("units") == "US" else "SI"
    already = read(typed).values["coupons"]
    every = [*already, *coupons]
    way = WAYS.get(typed.get("way", ""), WAYS["load kN"])
    if not already and coupons:
        way = WAYS[_way_of(coupons, system)]
    gone = ("all.", "column.") if every else ()
    kept = {
        name: text
        for name, text in typed.items()
        if not (_ROW.fullmatch(name) or _OUT.fullmatch(name) or name.startswith(gone) or name == "paste")
    }
    key = next(key for key, each in WAYS.items() if each == way)
    return kept | fill_rows(every, way) | {"way": key}


def place(faults: Iterable[Fault], paths: Mapping[str, str]) -> dict[str, str]:
    """Return messages by box; what belongs to no box stands under the empty name."""
    beside: dict[str, str] = {}
    for fault in faults:
        path = fault.path
        while path and path not in paths:
            path = path[: max(path.rfind("."), path.rfind("["), 0)]
        message = re.sub(r"\s*\(a plain number is in [^()]*\)", "", fault.message)
        name = paths.get(path, "")
        text = message if name else str(fault)
        beside[name] = f"{beside[name]} {text}" if name in beside and text not in beside[name] else text
    return beside


def rows_named(text: str, rows: Sequence[int]) -> list[int]:
    """Return the grid's rows that a caution names ('coupons 3 and 8'), so that it can stand beside them.

    >>> rows_named("The same load to 5 digits in coupons 3 and 8: was one copied from the other?", range(12))
    [2, 7]
    """
    match = re.search(r"[Cc]oupons? (\d+(?:(?:, | and )\d+)*)", text)
    numbers = [int(each) - 1 for each in re.findall(r"\d+", match[1])] if match else []
    return [rows[number] for number in numbers if 0 <= number < len(rows)]
