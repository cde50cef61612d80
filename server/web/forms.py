"""The check form: text as typed into a raw document, a document back into text, faults back to their boxes.

``read`` validates nothing that the document's own models validate: it only puts what was typed where contract.md
wants it, says the unit of every bare number, and leaves empty rows out. ``write`` is its inverse, so that a saved
document fills the form again. ``place`` puts each fault of ``documents.read`` or ``checks.run`` beside the box it
belongs to; the path of every box is noted while reading.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping, Sequence

from server.errors import Fault
from server.web import form_fill, pieces_boxes
from server.web.form_fields import GROUPS, LOAD_UNITS, SINGLES, VALUE_GROUPS, Box, Group
from server.web.form_text import Reading, couples, is_number, pairs, points, schedule, split, with_unit

FIELD = re.compile(r"(\w+)\[(\d{1,4})\]\.(\w+)")
_LONGEST = 4000
_FORMAT = {"format": "bondwright/1", "kind": "member"}
SIMPLE_CASE = "imposed"
STARTED_WITH = ("glue", "timber", "plywood")
"""Names that a layout starts with: such a row without a value that nothing refers to was never typed by anybody."""
BESIDE = {"mark": "mark", "made_by": "made_by", "reason": "reason"}
"""Boxes whose text stands beside the document, by the name under which a refusal names them."""

Row = dict[str, str]


def read(values: Mapping[str, str]) -> tuple[dict[str, object], dict[str, str]]:
    """Return the document that the form says, as typed strings, and the form's own faults by box."""
    reading = reading_of(values)
    return reading.raw, reading.faults


def write(raw: Mapping[str, object]) -> dict[str, str]:
    """Return the boxes of the form that say ``raw``; ``read`` gives the same document again."""
    return form_fill.fill(raw, simple_case=SIMPLE_CASE, slip_by_itself=carried_by_fasteners_alone(raw))


def place(faults: Iterable[Fault], paths: Mapping[str, str]) -> tuple[dict[str, str], list[str]]:
    """Put faults beside their boxes: ``(message by box, messages that belong to no box)``."""
    beside: dict[str, str] = {}
    on_top: list[str] = []
    for fault in faults:
        name = _box_of(fault.path, paths)
        # In a box a bare number is in the unit beside it, not in the document's plain unit.
        message = re.sub(r"\s*\(a plain number is in [^()]*\)", "", fault.message)
        if name is None:
            on_top.append(str(fault))
        elif name not in beside:
            beside[name] = message
        elif message not in beside[name]:
            beside[name] += " " + message
    return beside, on_top


def _box_of(path: str, paths: Mapping[str, str]) -> str | None:
    """Return the box of a path: its own, else the first one inside it, else that of the nearest path above it."""
    at = path
    while at:
        if at in paths:
            return paths[at]
        inside = next((paths[known] for known in paths if known.startswith((at + ".", at + "["))), None)
        if inside is not None:
            return inside
        cut = max(at.rfind("."), at.rfind("["))
        at = at[:cut] if cut > 0 else ""
    return None


def system_of(values: Mapping[str, str]) -> str:
    """Return the system that the form's boxes are marked in, which is what a bare number means."""
    return "US" if values.get("units") == "US" else "SI"


def is_box(name: str) -> bool:
    """Say whether a name is that of one of the form's boxes; others come from nobody's form."""
    match = FIELD.fullmatch(name)
    if match is None:
        return name in SINGLES
    group = GROUPS.get(match[1])
    return group is not None and any(box.name == match[3] for box in group.boxes)


def rows(values: Mapping[str, str]) -> dict[str, dict[int, Row]]:
    """Return every group's rows by their index in the form, blank ones included."""
    found: dict[str, dict[int, Row]] = {name: {} for name in GROUPS}
    for name, text in values.items():
        if "[" in name and (match := FIELD.fullmatch(name)) and match[1] in found:
            found[match[1]].setdefault(int(match[2]), {})[match[3]] = text
    return {name: dict(sorted(indexed.items())) for name, indexed in found.items()}


def reading_of(values: Mapping[str, str]) -> Reading:
    """Read the form; the result also knows which box each path of the document came from."""
    reading = Reading(raw=dict(_FORMAT))
    values = {name: text.strip() for name, text in values.items()}
    for name, text in values.items():
        if len(text) > _LONGEST:
            reading.fault(name, f"This has {len(text)} characters; shorten it to at most {_LONGEST}.")
            values[name] = ""
    for name, box in SINGLES.items():
        if box.path:
            reading.paths[box.path] = name
    system = system_of(values)
    typed = rows(values)
    filled = {name: _filled(typed[name], group, reading) for name, group in GROUPS.items()}
    _read_heading(values, reading)
    for name in VALUE_GROUPS:
        _read_values(GROUPS[name], filled[name], _names_used(name, filled), system, reading)
    _read_section(filled, system, reading)
    _read_member(values, filled, system, reading)
    _read_loads(values, filled["loads"], system, reading)
    _read_combinations(filled["combinations"], reading)
    _read_analysis(values, reading)
    _read_service(values, system, reading)
    return reading


def _filled(typed: Mapping[int, Row], group: Group, reading: Reading) -> dict[int, Row]:
    """Return the rows in which something was typed; more than the group's limit is a fault."""
    choices = {box.name: box.choices[0][0] for box in group.boxes if box.choices}
    kept: dict[int, Row] = {}
    for index, row in typed.items():
        if any(text and text != choices.get(name) and name not in ("case", "layered") for name, text in row.items()):
            kept[index] = row
    if len(kept) > group.limit:
        over = list(kept)[group.limit]
        reading.fault(
            f"{group.name}[{over}].{group.boxes[0].name}",
            f"There are {len(kept)} {group.name}; a form takes at most {group.limit}. "
            "Remove some, or send the document as a file to the command line.",
        )
        kept = dict(list(kept.items())[: group.limit])
    return kept


def _names_used(name: str, filled: Mapping[str, Mapping[int, Row]]) -> set[str]:
    """Return the names of a group of values that pieces or joints refer to."""
    if name == "materials":
        return {row.get("material", "") for row in filled["pieces"].values()}
    key = "adhesive" if name == "adhesives" else "fastener"
    return {row.get(key, "") for row in filled["joints"].values()}


def _read_heading(values: Mapping[str, str], reading: Reading) -> None:
    for name in ("title", "note", "shop_note"):
        if values.get(name):
            reading.raw[name] = values[name]
    reading.raw["display"] = values.get("display") or system_of(values)
    method = values.get("basis.method", "")
    if not method:
        return
    key = "partial_factor" if method == "limit-state" else "safety_factor"
    factors: dict[str, object] = {}
    for kind in ("adhesive", "fastener", "material"):
        reading.paths[f"basis.{key}.{kind}"] = f"basis.{kind}"
        if text := values.get(f"basis.{kind}", ""):
            by_name = kind == "material" and not is_number(text)
            factors[kind] = pairs(text, "basis.material", reading) if by_name else text
    basis: dict[str, object] = {"method": method, key: factors}
    if values.get("basis.fall_back_factor"):
        basis["fall_back_factor"] = values["basis.fall_back_factor"]
    reading.raw["basis"] = basis


def _read_values(group: Group, filled: Mapping[int, Row], used: set[str], system: str, reading: Reading) -> None:
    """Materials, adhesives, fasteners: a row picked from the library is a reference, else what was typed."""
    entries: dict[str, object] = {}
    for index, row in filled.items():
        only_named = {name for name, text in row.items() if text} <= {"name", "layered", "kind", "status"}
        if only_named and row.get("name") not in used and row.get("name") in ("", None, *STARTED_WITH):
            continue
        name = row.get("name") or row.get("record", "")
        if not _named(group, index, name, entries, reading):
            continue
        paths = _box_paths(group, index, f"{group.path}.{name}", reading)
        if row.get("revision") and not row.get("record"):
            message = "A revision belongs to a record; choose the record too, or empty this box."
            reading.fault(paths["revision"], message)
        if record := row.get("record"):
            entries[name] = {"record": record, **_whole("revision", row)}
            reading.paths[f"{group.path}.{name}"] = f"{group.name}[{index}].record"
        else:
            entries[name] = _entry(group, row, paths, system, reading)
    if entries:
        reading.raw[group.path] = entries


def _entry(group: Group, row: Row, paths: Mapping[str, str], system: str, reading: Reading) -> dict[str, object]:
    entry: dict[str, object] = {}
    for box in group.boxes:
        text = row.get(box.name, "")
        if not text or box.name in ("name", "record", "revision"):
            continue
        value: object = with_unit(text, box.unit, system)
        if box.name in ("duration_factors", "factors"):
            value = pairs(text, paths[box.name], reading)
        elif box.name == "layered":
            value = text == "yes"
        _put(entry, box.place, value)
    return entry


def _read_section(filled: Mapping[str, Mapping[int, Row]], system: str, reading: Reading) -> None:
    pieces: dict[str, object] = {}
    group = GROUPS["pieces"]
    for index, row in filled["pieces"].items():
        name = row.get("name", "")
        if _named(group, index, name, pieces, reading):
            shape = pieces_boxes.shape_of(row)
            paths = _box_paths(group, index, f"{group.path}.{name}", reading, pieces_boxes.boxes_of(shape))
            reading.paths[f"{group.path}.{name}.at"] = paths["across"]
            pieces[name] = _piece(row, shape, paths, system, reading)
    joints = [
        _joint(index, row, number, pieces, system, reading)
        for number, (index, row) in enumerate(filled["joints"].items())
    ]
    reading.raw["section"] = {"pieces": pieces, "joints": joints}


def _piece(row: Row, shape: str, paths: Mapping[str, str], system: str, reading: Reading) -> dict[str, object]:
    piece: dict[str, object] = {"shape": shape}
    if row.get("profile") and "profile" in paths:
        piece |= pieces_boxes.sizes_of_profile(row, paths, system, reading)
    for box in pieces_boxes.boxes_of(shape):
        text = row.get(box.name, "")
        if not text or box.name in ("name", "shape", "profile", "across", "up"):
            continue
        if box.name == "points":
            piece["points"] = points(text, system, paths["points"], reading)
        elif box.name == "holes":
            piece["holes"] = [points(hole, system, paths["holes"], reading) for hole in text.split("|")]
        else:
            piece[box.place] = with_unit(text, box.unit, system)
    if row.get("across") or row.get("up"):
        for name in ("across", "up"):
            if not row.get(name):
                reading.fault(paths[name], f"Where the piece stands {name} is empty; enter it, 0 included.")
        piece["at"] = [with_unit(row.get(name) or "0", "size", system) for name in ("across", "up")]
    return piece


def _joint(
    index: int, row: Row, number: int, pieces: Collection[str], system: str, reading: Reading
) -> dict[str, object]:
    group = GROUPS["joints"]
    paths = _box_paths(group, index, f"{group.path}[{number}]", reading)
    first, second = row.get("first", ""), row.get("second", "")
    # A fault of the pair belongs to the piece that is not there, and to the first one where both are.
    reading.paths[f"{group.path}[{number}].between"] = paths[
        "second" if first in pieces and second not in pieces else "first"
    ]
    joint: dict[str, object] = {"between": [first, second]}
    for box in group.boxes:
        text = row.get(box.name, "")
        if not text or box.name in ("first", "second"):
            continue
        if box.name == "spacing" and ":" in text:
            joint["spacing"] = schedule(text, system, paths["spacing"], reading)
        elif box.whole:
            joint.update(_whole(box.name, row))
        else:
            joint[box.name] = with_unit(text, box.unit, system)
    return joint


def _read_member(
    values: Mapping[str, str], filled: Mapping[str, Mapping[int, Row]], system: str, reading: Reading
) -> None:
    """Without rows of supports the member rests on a pin at either end, as the form says in words."""
    length = with_unit(values.get("span", ""), "position", system)
    member: dict[str, object] = {"length": length} if length else {}
    supports = []
    for number, (index, row) in enumerate(filled["supports"].items()):
        _box_paths(GROUPS["supports"], index, f"member.supports[{number}]", reading)
        support = {"at": with_unit(row.get("at", ""), "position", system), "kind": row.get("kind") or "pin"}
        if row.get("stiffness"):
            support["stiffness"] = with_unit(row["stiffness"], "slip", system)
        supports.append(support)
    if not supports and length:
        supports = [{"at": "0 mm", "kind": "pin"}, {"at": length, "kind": "pin"}]
        reading.paths["member.supports"] = "span"
    member["supports"] = supports
    hinges = []
    for number, (index, row) in enumerate(filled["hinges"].items()):
        reading.paths[f"member.hinges[{number}]"] = f"hinges[{index}].at"
        hinges.append(with_unit(row["at"], "position", system))
    if hinges:
        member["hinges"] = hinges
    member["held_sideways"] = values.get("held_sideways", "yes") != "no"
    if names := split(values.get("bears_on", "")):
        member["bears_on"] = names
    if values.get("deflection_limit"):
        member["deflection_limit"] = values["deflection_limit"]
    reading.raw["member"] = member


def _read_loads(values: Mapping[str, str], filled: Mapping[int, Row], system: str, reading: Reading) -> None:
    loads: dict[str, list[dict[str, object]]] = {}
    if values.get("load"):
        case = values.get("load_case") or SIMPLE_CASE
        length = with_unit(values.get("span", ""), "position", system)
        value = with_unit(values["load"], "line_load", system)
        loads[case] = [{"kind": "line", "from": "0 mm", "to": length, "value": value}]
        reading.paths |= {f"loads.{case}[0].value": "load", f"loads.{case}[0].to": "span", f"loads.{case}[0]": "load"}
    for index, row in filled.items():
        case = row.get("case") or values.get("load_case") or SIMPLE_CASE
        entries = loads.setdefault(case, [])
        _box_paths(GROUPS["loads"], index, f"loads.{case}[{len(entries)}]", reading)
        entries.append(_load(row, index, system, reading))
    if not loads:
        reading.paths["loads"] = "load"
    reading.raw["loads"] = loads


def _load(row: Row, index: int, system: str, reading: Reading) -> dict[str, object]:
    kind = row.get("kind") or "line"
    unit = LOAD_UNITS.get(kind, "")
    load: dict[str, object] = {"kind": kind}
    for name in ("at", "from", "to", "width"):
        if row.get(name):
            load[name] = with_unit(row[name], "position", system)
    if row.get("value") or row.get("value2"):
        ends = [with_unit(row.get(name, ""), unit, system) for name in ("value", "value2") if row.get(name)]
        load["value"] = ends if row.get("value2") else ends[0]
    if row.get("lateral"):
        load["lateral"] = with_unit(row["lateral"], unit, system)
    if row.get("offset"):
        load["offset"] = with_unit(row["offset"], "size", system)
    if row.get("axles"):
        load["axles"] = [
            [with_unit(offset, "position", system), with_unit(force, "force", system)]
            for offset, force in couples(row["axles"], f"loads[{index}].axles", reading)
        ]
    return load


def _read_combinations(filled: Mapping[int, Row], reading: Reading) -> None:
    """A combination without factors takes every case as it is."""
    combinations: dict[str, object] = {}
    group = GROUPS["combinations"]
    loads = reading.raw["loads"]
    assert isinstance(loads, dict)
    for index, row in filled.items():
        name = row.get("name") or ("all" if len(filled) == 1 else "")
        if not _named(group, index, name, combinations, reading):
            continue
        paths = _box_paths(group, index, f"{group.path}.{name}", reading)
        factors: object = dict.fromkeys(loads, 1.0)
        if row.get("factors"):
            factors = pairs(row["factors"], paths["factors"], reading)
        entry: dict[str, object] = {"factors": factors}
        for key in ("duration", "for"):
            if row.get(key):
                entry[key] = row[key]
        if row.get("sustained"):
            entry["sustained"] = pairs(row["sustained"], paths["sustained"], reading)
        combinations[name] = entry
    if combinations:
        reading.raw["combinations"] = combinations


def _read_analysis(values: Mapping[str, str], reading: Reading) -> None:
    slip = values.get("slip") or "auto"
    analysis: dict[str, object] = {
        "slip": carried_by_fasteners_alone(reading.raw) if slip == "auto" else slip == "yes",
        "shear_deformation": values.get("shear_deformation") != "no",
        "field": values.get("field") or "auto",
    }
    if values.get("rules"):
        analysis["rules"] = split(values["rules"])
    if values.get("spacing_step"):
        analysis["spacing_step"] = with_unit(values["spacing_step"], "size", system_of(values))
    reading.raw["analysis"] = analysis


def carried_by_fasteners_alone(raw: Mapping[str, object]) -> bool:
    """Say whether some joint has fasteners that carry and no adhesive: then joints slip, and slip is reckoned."""
    section = raw.get("section")
    joints = section.get("joints", []) if isinstance(section, dict) else []
    return any(
        joint.get("fastener") and not joint.get("adhesive") and joint.get("role", "sole") == "sole" for joint in joints
    )


def _read_service(values: Mapping[str, str], system: str, reading: Reading) -> None:
    service: dict[str, object] = {}
    if values.get("lowest") or values.get("highest"):
        for name in ("lowest", "highest"):
            if not values.get(name):
                reading.fault(name, f"The {name} temperature in service is empty; enter both, such as -10 and 35.")
        service["temperature"] = [with_unit(values.get(n, ""), "temperature", system) for n in ("lowest", "highest")]
    if values.get("cure"):
        service["cure_temperature"] = with_unit(values["cure"], "temperature", system)
    if values.get("moisture"):
        service["moisture_change"] = pairs(values["moisture"], "moisture", reading)
    if service:
        reading.raw["service"] = service


# Small parts ------------------------------------------------------------------------------------------------------


def _named(group: Group, index: int, name: str, taken: Mapping[str, object], reading: Reading) -> bool:
    """Say whether a row has a name of its own; if not, note the fault beside its name."""
    box = f"{group.name}[{index}].name"
    if not name:
        reading.fault(box, f"This {group.one} has no name; give it one, such as “{group.one} {index + 1}”.")
    elif name in taken:
        reading.fault(box, f"The name “{name}” is given twice; give each {group.one} a name of its own.")
    else:
        return True
    return False


def _box_paths(
    group: Group, index: int, base: str, reading: Reading, boxes: Sequence[Box] | None = None
) -> dict[str, str]:
    """Note the paths of a row's boxes, or of those of them that count; return the box names by their short name."""
    counted = group.boxes if boxes is None else boxes
    names = {box.name: f"{group.name}[{index}].{box.name}" for box in counted}
    for box in counted:
        place = box.place.lstrip(".")
        reading.paths.setdefault(f"{base}.{place}" if place else base, names[box.name])
    return names


def _put(entry: dict[str, object], place: str, value: object) -> None:
    """Set ``strengths.bending`` in an entry, making the level above where needed."""
    head, _, tail = place.partition(".")
    if tail:
        below = entry.setdefault(head, {})
        assert isinstance(below, dict)
        below[tail] = value
    else:
        entry[head] = value


def _whole(name: str, row: Row) -> dict[str, object]:
    """Return a whole number as one; anything else as typed, for the document's models to refuse."""
    text = row.get(name, "")
    if not text:
        return {}
    return {name: int(text) if text.isdecimal() and len(text) < 10 else text}
