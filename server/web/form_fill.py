"""A document back into the boxes of the check form: the inverse of ``forms.read``.

A saved document says its units ("90 mm"); in a box marked mm only the number is shown. A plain number of a document
written by hand or by a program is in N, mm, MPa, and is given that unit where the box is marked otherwise.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from server.web.form_fields import GROUPS, LOAD_UNITS, PLAIN_UNITS, UNITS, VALUE_GROUPS, Group
from server.web.form_text import is_number
from server.web.pieces_boxes import boxes_of, row_of

Values = dict[str, str]
Raw = Mapping[str, Any]


def show(value: object, unit: str, system: str) -> str:
    """Return a document's value as the text of a box marked with ``unit``."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    text = number(value) if isinstance(value, int | float) else str(value).strip()
    if not unit:
        return text
    marked = UNITS[unit][system == "US"]
    typed = text.removesuffix(marked).strip()
    if typed != text:
        return typed if is_number(typed) else text
    if not is_number(text) or marked == PLAIN_UNITS[unit]:
        return text
    return f"{text} {PLAIN_UNITS[unit]}"


def number(value: float) -> str:
    """Return a number in full, without a trailing ``.0``."""
    text = repr(value)
    return text.removesuffix(".0")


def fill(raw: Raw, *, simple_case: str, slip_by_itself: bool) -> Values:
    """Return the boxes of the form that say ``raw``."""
    system = "US" if raw.get("display") == "US" else "SI"
    values: Values = {"units": system, "display": system}
    for name in ("title", "note", "shop_note"):
        values[name] = str(raw.get(name) or "")
    _basis(raw.get("basis") or {}, values)
    for name in VALUE_GROUPS:
        for index, (entry_name, entry) in enumerate((raw.get(name) or {}).items()):
            _row(values, GROUPS[name], index, {**entry, "name": entry_name}, system)
    section = raw.get("section") or {}
    for index, (piece_name, piece) in enumerate((section.get("pieces") or {}).items()):
        _piece(values, index, piece_name, piece, system)
    for index, joint in enumerate(section.get("joints") or ()):
        _joint(values, index, joint, system)
    _member(raw.get("member") or {}, values, system)
    _loads(raw, values, system, simple_case)
    _combinations(raw, values)
    _analysis(raw.get("analysis") or {}, values, slip_by_itself, system)
    _service(raw.get("service") or {}, values, system)
    return values


def _row(values: Values, group: Group, index: int, entry: Raw, system: str, leave: Sequence[str] = ()) -> None:
    """Fill one row's boxes from an entry of the document."""
    for box in group.boxes:
        if box.name in leave:
            continue
        value: Any = entry
        for part in re.findall(r"\w+", box.place):
            if isinstance(value, Mapping):
                value = value.get(part)
            elif isinstance(value, list | tuple) and part.isdecimal() and int(part) < len(value):
                value = value[int(part)]
            else:
                value = None
        if isinstance(value, Mapping):
            text = pairs(value)
        elif isinstance(value, list | tuple):
            text = ""
        else:
            text = show(value, box.unit, system)
        if text:
            values[f"{group.name}[{index}].{box.name}"] = text


def _basis(basis: Raw, values: Values) -> None:
    values["basis.method"] = str(basis.get("method") or "")
    given = basis.get("partial_factor" if basis.get("method") == "limit-state" else "safety_factor")
    factors = given if isinstance(given, Mapping) else dict.fromkeys(("adhesive", "fastener", "material"), given)
    for name in ("adhesive", "fastener", "material"):
        factor = factors.get(name)
        values[f"basis.{name}"] = pairs(factor) if isinstance(factor, Mapping) else show(factor, "", "")
    values["basis.fall_back_factor"] = show(basis.get("fall_back_factor"), "", "")


def _piece(values: Values, index: int, name: str, piece: Raw, system: str) -> None:
    boxes = boxes_of(str(piece.get("shape") or "rectangle"))
    leave = [box.name for box in GROUPS["pieces"].boxes if box not in boxes]
    _row(values, GROUPS["pieces"], index, row_of(name, piece), system, leave=(*leave, "points", "holes"))
    if piece.get("points"):
        values[f"pieces[{index}].points"] = _points(piece["points"], system)
    if piece.get("holes"):
        values[f"pieces[{index}].holes"] = " | ".join(_points(hole, system) for hole in piece["holes"])


def _points(points: Sequence[Sequence[object]], system: str) -> str:
    return "; ".join(", ".join(show(end, "size", system) for end in point) for point in points)


def _joint(values: Values, index: int, joint: Raw, system: str) -> None:
    _row(values, GROUPS["joints"], index, joint, system, leave=("spacing",))
    spacing = joint.get("spacing")
    if isinstance(spacing, list):
        stretches = (
            f"{show(part.get('from'), 'position', system)} to {show(part.get('to'), 'position', system)}: "
            f"{show(part.get('spacing'), 'size', system)}"
            for part in spacing
        )
        values[f"joints[{index}].spacing"] = "; ".join(stretches)
    elif spacing is not None:
        values[f"joints[{index}].spacing"] = show(spacing, "size", system)


def _member(member: Raw, values: Values, system: str) -> None:
    values["span"] = show(member.get("length"), "position", system)
    values["bears_on"] = ", ".join(f'"{each}"' if "," in each else each for each in member.get("bears_on") or ())
    values["held_sideways"] = "no" if member.get("held_sideways") is False else "yes"
    values["deflection_limit"] = show(member.get("deflection_limit"), "", system)
    for index, hinge in enumerate(member.get("hinges") or ()):
        values[f"hinges[{index}].at"] = show(hinge, "position", system)
    if _at_both_ends(member):
        return
    for index, support in enumerate(member.get("supports") or ()):
        _row(values, GROUPS["supports"], index, support, system)


def _at_both_ends(member: Raw) -> bool:
    """Say whether the supports are those that the form assumes when no row is filled: a pin at either end."""
    supports = list(member.get("supports") or ())
    return (
        len(supports) == 2
        and all(support.get("kind") == "pin" and "stiffness" not in support for support in supports)
        and _nought(supports[0].get("at"))
        and supports[1].get("at") == member.get("length")
    )


def _nought(value: object) -> bool:
    return re.fullmatch(r"0(?:\.0)?(?:\s*(?:mm|m|ft|in))?", str(value)) is not None


def _loads(raw: Raw, values: Values, system: str, simple_case: str) -> None:
    """Fill the load boxes; one plain line load over the whole length goes into the first view's box."""
    length = (raw.get("member") or {}).get("length")
    listed = [(case, load) for case, entries in (raw.get("loads") or {}).items() for load in entries]
    values["load_case"] = simple_case
    if listed and _over_the_whole(listed[0][1], length):
        case, load = listed.pop(0)
        values["load"] = show(load.get("value"), "line_load", system)
        values["load_case"] = case
    for index, (case, load) in enumerate(listed):
        name = f"loads[{index}]"
        unit = LOAD_UNITS.get(load.get("kind", ""), "")
        leave = ("case", "value", "value2", "lateral", "axles")
        _row(values, GROUPS["loads"], index, load, system, leave=leave)
        values[f"{name}.case"] = case
        value = load.get("value")
        ends = value if isinstance(value, list | tuple) else [value]
        for box, end in zip(("value", "value2"), ends, strict=False):
            if end is not None:
                values[f"{name}.{box}"] = show(end, unit, system)
        if load.get("lateral"):
            values[f"{name}.lateral"] = show(load["lateral"], unit, system)
        if load.get("axles"):
            values[f"{name}.axles"] = "; ".join(
                f"{show(offset, 'position', system)}, {show(force, 'force', system)}" for offset, force in load["axles"]
            )


def _over_the_whole(load: Raw, length: object) -> bool:
    return (
        load.get("kind") == "line"
        and set(load) == {"kind", "from", "to", "value"}
        and _nought(load["from"])
        and load["to"] == length
        and not isinstance(load["value"], list | tuple)
    )


def _combinations(raw: Raw, values: Values) -> None:
    """A combination that takes every case as it is shows no factors, as the form says in words."""
    cases = set(raw.get("loads") or {})
    for index, (name, entry) in enumerate((raw.get("combinations") or {}).items()):
        _row(values, GROUPS["combinations"], index, {**entry, "name": name}, "SI")
        factors = entry.get("factors") or {}
        if set(factors) == cases and all(factor in (1, 1.0, "1", "1.0") for factor in factors.values()):
            values.pop(f"combinations[{index}].factors", None)


def _analysis(analysis: Raw, values: Values, slip_by_itself: bool, system: str) -> None:
    if analysis.get("spacing_step") is not None:
        values["spacing_step"] = show(analysis["spacing_step"], "size", system)
    slip = analysis.get("slip")
    values["slip"] = "auto" if slip is None or bool(slip) == slip_by_itself else ("yes" if slip else "no")
    values["shear_deformation"] = "no" if analysis.get("shear_deformation") is False else "yes"
    values["field"] = str(analysis.get("field") or "auto")
    values["rules"] = _listed(analysis.get("rules") or ())


def _service(service: Raw, values: Values, system: str) -> None:
    for name, value in zip(("lowest", "highest"), service.get("temperature") or ("", ""), strict=False):
        values[name] = show(value, "temperature", system) if value != "" else ""
    values["cure"] = show(service.get("cure_temperature"), "temperature", system)
    values["moisture"] = pairs(service.get("moisture_change") or {})


def pairs(found: Mapping[str, object]) -> str:
    """Return ``dead 1.35, snow 1.5`` for values by name."""
    return _listed(f"{name} {show(value, '', '')}" for name, value in found.items())


def _listed(parts: Iterable[str]) -> str:
    """Join with commas; a part that holds a comma or a quote is quoted, so that it reads back as one."""
    quoted = ('"' + part.replace('"', '""') + '"' if re.search(r'[,;"\n]', part) else part for part in parts)
    return ", ".join(quoted)
