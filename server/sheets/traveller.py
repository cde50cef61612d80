"""The traveller of a glue-up: one page that goes to the bench and comes back with what was measured in pencil.

Drawn from a saved result; nothing is reckoned here. What the shop finds on the day has blanks to write into.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from server import units
from server.errors import JointError
from server.sheets.composition import Part, SheetData, head_of
from server.sheets.glue_up import area_unit, mass_unit, time
from server.sheets.values import DASH, Unit, quantity, unit, utilisation, verdict

KIND = "glue-up"
MOST_BONDS, MOST_MIXES = 4, 5
FOOT = "Plan of a glue-up; the sheet of the check says what it stands on. The adhesive's data sheets take precedence."
SAFETY = (
    "Read the adhesive's safety data sheet first: gloves, eye protection, ventilation. Do not start where a measured "
    "value is outside what its data sheet allows; write down what was found all the same."
)


def compose_traveller(sheet: SheetData) -> Part:
    """The page as data for the template.

    Raises
    ------
    JointError
        Where the check is no glue-up.
    """
    result, display = sheet.result, sheet.display
    if result.get("kind") != KIND:
        raise JointError("Only a glue-up has a traveller; plan one from the check of the member.")
    return {
        "paper": {"A4": "a4", "Letter": "us-letter"}[sheet.paper],
        "head": {**head_of(sheet), "kind": "Glue-up traveller"},
        "verdict": {
            "word": verdict(result),
            "utilisation": utilisation(result.get("utilisation")),
            "governing": _says(result),
        },
        "plan": [[name, text] for name, text in _plan(sheet) if text and text != DASH],
        "bonds": _bonds(result, display),
        "lots": [["Resin or one-part adhesive", "", "", ""], ["Hardener", "", "", ""]],
        "climate": _climate(display),
        "mixes": _mixes(result, display),
        "press": _press(result, display),
        "remarks": "Squeeze-out all along? What was unusual, and what was done about it?",
        "safety": SAFETY,
        "foot": {
            "engine": sheet.engine or str(result.get("engine", "")),
            "hash": sheet.content_hash or "not saved",
            "limits": FOOT,
        },
    }


def _says(result: Mapping[str, Any]) -> str:
    line = str(result.get("governing", ""))
    tail = {"pass": "", "fail": " Do not start: change the plan.", "not proven": " Not planned out: see the sheet."}
    return line[:1].upper() + line[1:] + "." + tail.get(str(result.get("verdict")), "")


def _plan(sheet: SheetData) -> Iterator[tuple[str, str]]:
    result, display = sheet.result, sheet.display
    glue = sheet.document.get("adhesive") or {}
    yield "Adhesive", str(result.get("product") or "") or _named(result)
    yield "Area to be bonded", area_unit(display).full(result.get("area"))
    yield "Spread on each face", _spread(glue, display)
    yield "Spread on", "both faces" if str(glue.get("sides")) == "2" else "one face"
    yield "To mix in all", mass_unit(display).full(result.get("adhesive_mass"))
    yield "Mixes", str(result.get("mixes") or "")
    yield "Pot life", time(result.get("pot_life"), display)
    yield "Open time", time(result.get("open_time"), display)
    yield "Spreading and closing takes", time(result.get("assembly_time"), display)
    yield "In the press, at least", time(result.get("press_time"), display)
    yield "Pressure", quantity(result.get("pressure"), "MPa", display)
    yield "Clamps", _clamps(result, display)


def _named(result: Mapping[str, Any]) -> str:
    entries = (result.get("values_used") or {}).get("adhesives") or {}
    return ", ".join(str(entry.get("record") or name) for name, entry in entries.items())


def _spread(glue: Mapping[str, Any], display: str) -> str:
    typed = glue.get("spread")
    return "" if typed is None else units.show(units.parse("spread", typed, "spread"), "spread", display)


def _clamps(result: Mapping[str, Any], display: str) -> str:
    count, spacing = result.get("clamps"), result.get("clamp_spacing")
    if count is None:
        return ""
    return str(count) if spacing is None else f"{count}, at most {quantity(spacing, 'mm', display)} apart"


def _bonds(result: Mapping[str, Any], display: str) -> Part:
    length, area = unit("mm", display), area_unit(display)
    listed = list(result.get("bonds") or ())
    rows = [
        [str(each["id"]), *(length.number(each.get(name)) for name in ("width", "length")), area.number(each["area"])]
        for each in listed[:MOST_BONDS]
    ]
    if len(listed) > MOST_BONDS:
        rest = sum(float(each["area"]) for each in listed[MOST_BONDS:])
        rows.append([f"and {len(listed) - MOST_BONDS} more, on the sheet", "", "", area.number(rest)])
    titles = ["Bond", f"Width, {length.text}", f"Length, {length.text}", f"Area, {area.text}"]
    return {"titles": titles, "rows": rows}


def _climate(display: str) -> Part:
    degrees = "°F" if display == "US" else "°C"
    titles = [
        "",
        f"Air, {degrees}",
        "Humidity, %",
        f"Dew point, {degrees}",
        f"Pieces, {degrees}",
        f"Pieces above dew point, {'°F' if display == 'US' else 'K'}",
        "Wood moisture, %",
        "Read at",
    ]
    return {"titles": titles, "rows": ["Data sheet allows", "At the start", "When closed"]}


def _press(result: Mapping[str, Any], display: str) -> list[str]:
    open_time, press_time = (Unit("min", 1.0).full(result.get(name)) for name in ("open_time", "press_time"))
    return [
        "First mix ready at",
        f"Full pressure by: first mix + {open_time}",
        "Full pressure at",
        f"Released not before: pressure + {press_time}",
        "Released at",
    ]


def _mixes(result: Mapping[str, Any], display: str) -> Part:
    """Every mix with its blanks; without a plan, blank lines to write the mixes into."""
    mass, minutes = mass_unit(display), Unit("min", 1.0)
    plan = list(result.get("mix_plan") or ())
    pot, open_time = (minutes.full(result.get(name)) for name in ("pot_life", "open_time"))
    titles = [
        "Mix",
        f"Mass, {mass.text}",
        "Mixed at",
        f"Spread by: mixed + {pot}",
        f"Latest close: mixed + {open_time}",
        "Closed at",
        "Mixed by",
    ]
    rows = [[str(each["number"]), mass.number(each.get("mass"))] for each in plan[:MOST_MIXES]] or [["", ""]] * 3
    more = int(result.get("mixes") or 0) - MOST_MIXES
    note = "The member is pressed as one: the latest close of the first mix is that of the whole."
    if more > 0:
        note = f"{more} more mix{'' if more == 1 else 'es'} of the same mass: go on overleaf. {note}"
    return {"titles": titles, "rows": rows, "note": note}
