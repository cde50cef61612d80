"""What the form's buttons do to its boxes: rows added and removed, a layout started, boxes marked in other units."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from server.library.profiles import SIZES
from server.web import layouts
from server.web.form_fields import GROUPS, LOAD_UNITS, SINGLES, Group
from server.web.form_text import Reading, couples, points, schedule, with_unit
from server.web.forms import FIELD, rows, system_of
from server.web.pieces_boxes import boxes_of, profile_of

_BUTTONS = ("add", "remove", "reshape", "start", "set_out", "units_of_boxes", "needed_zones", "calculate")


@dataclass(frozen=True)
class Shaped:
    """The boxes after a button was pressed; ``opened`` is the part it stood in, ``focus`` where to go on typing."""

    values: dict[str, str]
    opened: str = ""
    focus: str = ""


def shape(values: Mapping[str, str]) -> Shaped:
    """Do what a button of the form asked for.

    ``add`` names a group, ``remove`` a row such as ``pieces[2]``, ``reshape`` the box of a piece's row that says which
    boxes the row has (``pieces[2].shape``, ``pieces[2].profile``), ``start`` a layout, ``set_out`` places its pieces
    from their sizes, ``units_of_boxes`` marks the boxes in the units chosen. Numbers already typed keep the unit they
    were typed in.
    """
    kept = {name: text for name, text in values.items() if name not in _BUTTONS}
    if values.get("add") in GROUPS:
        return _with_a_row(kept, GROUPS[values["add"]])
    removed = re.fullmatch(r"(\w+)\[\d{1,4}\]", values.get("remove", ""))
    if removed and removed[1] in GROUPS:
        left = {name: text for name, text in kept.items() if not name.startswith(removed[0] + ".")}
        return Shaped(left, removed[1], f"add-{removed[1]}")
    reshaped = re.fullmatch(r"(pieces\[\d{1,4}\])\.(shape|profile)", values.get("reshape", ""))
    if reshaped:
        return Shaped(_reshaped(kept, reshaped[1], reshaped[2]), "pieces", reshaped[0])
    if values.get("start") in layouts.LAYOUTS:
        return Shaped(_started(kept, values["start"]))
    if values.get("set_out"):
        return Shaped(kept | (layouts.set_out(kept) or {}), "pieces")
    if values.get("units_of_boxes"):
        return Shaped(in_units(kept, "US" if kept.get("display") == "US" else "SI"), "display")
    return Shaped(kept)


def _with_a_row(values: dict[str, str], group: Group) -> Shaped:
    taken = rows(values)[group.name]
    if len(taken) >= group.limit:
        return Shaped(values, group.name, f"add-{group.name}")
    # The first view always asks for one adhesive, so its row is there before anything is typed into it.
    last = max(taken, default=0 if group.name == "adhesives" else -1)
    first = f"{group.name}[{last + 1}].{group.boxes[0].name}"
    return Shaped(values | {first: ""}, group.name, first)


def _reshaped(values: dict[str, str], row: str, by: str) -> dict[str, str]:
    """The row after its shape or its profile was chosen: a profile brings shape and sizes, another shape ends it."""
    cells = {box.name: values.get(f"{row}.{box.name}", "") for box in GROUPS["pieces"].boxes}
    profile = profile_of(cells)
    if profile is None:
        return values
    if by == "shape" and profile.shape != cells["shape"]:
        return values | {f"{row}.profile": ""}
    sizes = [box.name for box in boxes_of(profile.shape) if box.place in SIZES]
    return values | {f"{row}.shape": profile.shape} | dict.fromkeys((f"{row}.{name}" for name in sizes), "")


def _started(values: Mapping[str, str], layout: str) -> dict[str, str]:
    """Start from a layout: pieces, joints and materials are new, all else stays as typed."""
    replaced = ("pieces[", "joints[", "materials[", "layout")
    kept = {name: text for name, text in values.items() if not name.startswith(replaced)}
    fresh = layouts.start(layout, system_of(values))
    return kept | {name: text for name, text in fresh.items() if name.startswith(replaced) or name not in kept}


def in_units(values: Mapping[str, str], system: str) -> dict[str, str]:
    """Mark the boxes in another system; a bare number keeps the unit it was typed in."""
    now = system_of(values)
    if now == system:
        return dict(values)
    said = {name: _with_units(name, text, values, now) for name, text in values.items() if text.strip()}
    return {**values, **said, "units": system}


def _with_units(name: str, text: str, values: Mapping[str, str], now: str) -> str:
    """Return one box's text with the unit of every bare number said."""
    match = FIELD.fullmatch(name)
    if match is None or match[1] not in GROUPS:
        return with_unit(text, SINGLES[name].unit, now) if name in SINGLES else text
    box = next((each for each in GROUPS[match[1]].boxes if each.name == match[3]), None)
    if box is None:
        return text
    trial = Reading()
    if box.name in ("points", "holes"):
        said = " | ".join(_listed(points(part, now, name, trial)) for part in text.split("|"))
    elif box.name == "axles":
        said = _listed(
            [with_unit(a, "position", now), with_unit(f, "force", now)] for a, f in couples(text, name, trial)
        )
    elif box.name == "spacing" and ":" in text:
        said = "; ".join(f"{z['from']} to {z['to']}: {z['spacing']}" for z in schedule(text, now, name, trial))
    elif box.unit == "value":
        said = with_unit(text, LOAD_UNITS.get(values.get(f"loads[{match[2]}].kind") or "line", ""), now)
    else:
        said = with_unit(text, box.unit, now)
    return text if trial.faults else said


def _listed(found: Iterable[list[str]]) -> str:
    return "; ".join(", ".join(ends) for ends in found)
