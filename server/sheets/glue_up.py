"""The sheet of a glue-up: what it asks, and how its result reads."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server import units
from server.sheets.asked import Ask, AskGroup, Column
from server.sheets.one_page import Blocks, OnePage, Part, Result, pairs
from server.sheets.tables import column, table
from server.sheets.values import DASH, Unit, quantity, unit

ALONE = "areas_alone"
BOND = "adhesives.glue"
SHOWN = 12  # mixes printed one by one

GROUPS = (
    AskGroup(
        "areas",
        "Areas to be bonded",
        (
            Ask(
                "areas",
                "Bonds",
                rows=5,
                wide=True,
                columns=(
                    Column("width", "width", "size"),
                    Column("length", "length", "position"),
                    Column("name", "name"),
                ),
                hint="one a line: width, length, name",
            ),
            Ask(
                ALONE,
                "Areas without width and length",
                rows=2,
                wide=True,
                columns=(Column("area", "area", "bond_area"), Column("name", "name")),
                hint="one a line: area, name",
            ),
            Ask("areas_from", "Taken from", hint="drawing, check", wide=True),
        ),
    ),
    AskGroup(
        "adhesive",
        "Adhesive",
        (
            Ask(BOND, "Bond in the library", record=True, wide=True),
            Ask("adhesive.product", "Product", wide=True),
            Ask("adhesive.spread", "Spread on each face", "spread"),
            Ask("adhesive.sides", "Spread on", choices=(("1", "one face"), ("2", "both faces"))),
            Ask("adhesive.waste", "Mixed beyond that", hint="waste in pot and on roller", start=("10 %", "10 %")),
            Ask("adhesive.density", "Density", "density", hint="of the mix; blank: no volume"),
            Ask("adhesive.pot_life", "Pot life", "time"),
            Ask("adhesive.open_time", "Open time", "time", hint="from spreading to full pressure"),
            Ask("adhesive.rated_at", "These times hold at", "temperature", start=("20", "68")),
            Ask("adhesive.press_time", "Time in the press", "time"),
            Ask("adhesive.pressure", "Pressure", "stress", hint="0: contact pressure"),
        ),
    ),
    AskGroup(
        "shop",
        "Hands and clamps",
        (
            Ask("assembly_rate", "Spread and closed", "assembly_rate", hint="by all hands at work"),
            Ask("shop_temperature", "Shop on the day", "temperature"),
            Ask("pressed_by", "Pressed by", choices=(("clamps", "clamps"), ("fasteners", "nails, screws, staples"))),
            Ask("clamps.force", "Force of one clamp", "force"),
            Ask("clamps.reach", "Length that one presses", "size", hint="caul and pieces spread it"),
            Ask("clamps.available", "Clamps there are", whole=True, hint="blank: not counted"),
            Ask(
                "clamps.area",
                "Area pressed at once",
                "bond_area",
                hint="blank: all; of bonds one over another: one layer",
            ),
        ),
    ),
)


def area_unit(display: str) -> Unit:
    """Areas are shown in m² or ft², as adhesives are bought."""
    return Unit(units.unit_of("assembly_rate", display).partition("/")[0], units.scale_of("assembly_rate", display))


def mass_unit(display: str) -> Unit:
    """A mix is weighed in grams, or in pounds."""
    return Unit("lb", units.scale_of("mass", "US")) if display == "US" else Unit("g", 1000.0)


def time(value: object, display: str) -> str:
    """Minutes; hours beside them where they are many."""
    if not isinstance(value, int | float):
        return ""
    text = units.show(float(value), "time", display)
    return f"{text} ({units.show(float(value) / 60, 'factor', display)} h)" if value >= 120 else text


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    mixes, clamps = result.get("mixes"), result.get("clamps")
    words = [area_unit(display).full(result.get("area"))]
    if result.get("adhesive_mass") is not None:
        words.append(f"{quantity(result['adhesive_mass'], 'kg', display)} to mix")
    if mixes is not None:
        words.append(f"{mixes} mix{'' if mixes == 1 else 'es'}")
    if clamps is not None:
        words.append(f"{clamps} clamp{'' if clamps == 1 else 's'}")
    return f"{', '.join(words)}; {result.get('governing', '')}"


def blocks(result: Result, display: str) -> Blocks:
    """Bonds, adhesive and times, mixes, clamps."""
    yield "Bonds", _bonds(result, display)
    yield "Adhesive and time", [pairs(_adhesive(result, display))]
    yield "Mixes", mixes_table(result, display)
    yield "Clamps", [pairs(_clamps(result, display))]


def _bonds(result: Result, display: str) -> Iterator[Part]:
    length, area = unit("mm", display), area_unit(display)
    columns = [
        column("Bond", share=1),
        column(f"Width, {length.text}", side="right"),
        column(f"Length, {length.text}", side="right"),
        column(f"Area, {area.text}", side="right"),
    ]
    rows = [
        [
            str(each["id"]),
            length.number(each.get("width")),
            length.number(each.get("length")),
            area.number(each["area"]),
        ]
        for each in result.get("bonds") or ()
    ]
    yield table(columns, [*rows, ["All", "", "", area.number(result.get("area"))]])


def _adhesive(result: Result, display: str) -> Iterator[tuple[str, str]]:
    volume = result.get("adhesive_volume")
    litres = Unit("in³", units.display_unit("mm3", "US")[1]) if display == "US" else Unit("l", 1e-6)
    yield "Adhesive", str(result.get("product") or "")
    yield "Mass to be mixed, waste in it", _known(quantity(result.get("adhesive_mass"), "kg", display))
    yield "Volume to be mixed", "" if volume is None else litres.full(volume)
    yield "Mixes", "" if result.get("mixes") is None else str(result["mixes"])
    yield "Pot life", time(result.get("pot_life"), display)
    yield "Open time", time(result.get("open_time"), display)
    yield "A mix is spread and closed within", time(result.get("time_limit"), display)
    yield "Spreading and closing takes", time(result.get("assembly_time"), display)
    fits = result.get("fits_open_time")
    yield "Fits the open time", "" if fits is None else "yes" if fits else "no"
    yield "In the press", time(result.get("press_time"), display)


def _known(text: str) -> str:
    return "" if text == DASH else text


def _clamps(result: Result, display: str) -> Iterator[tuple[str, str]]:
    yield "Pressure", _known(quantity(result.get("pressure"), "MPa", display))
    yield "Force of all clamps", _known(quantity(result.get("clamp_force"), "N", display))
    per_length = result.get("clamp_force_per_length")
    yield "Along the member", "" if per_length is None else units.show(per_length, "line_load", display)
    yield "Clamps", "" if result.get("clamps") is None else str(result["clamps"])
    yield "Their spacing, at most", _known(quantity(result.get("clamp_spacing"), "mm", display))


def mixes_table(result: Result, display: str) -> Iterator[Part]:
    """Every mix with its mass and when it is due, in minutes from the first; beyond a dozen the rest in words."""
    plan = result.get("mix_plan") or ()
    if not plan:
        return
    mass, area = mass_unit(display), area_unit(display)
    columns = [
        column("Mix", side="right"),
        column(f"Mass, {mass.text}", side="right"),
        column(f"For, {area.text}", side="right"),
        column("Mixed at, min", side="right"),
        column("Spread by, min", side="right"),
        column("Closed by, min", side="right"),
    ]
    yield table(columns, [_mix(each, mass, area) for each in plan[:SHOWN]])
    words = "Minutes count from when the first mix is ready. The member goes into the press as one: what is spread "
    words += "first decides when the last clamp is tight."
    if int(result.get("mixes") or 0) > SHOWN:
        words = f"The first {SHOWN} of {result['mixes']} mixes; the others follow alike. " + words
    yield {"kind": "text", "text": words}


def _mix(each: Mapping[str, Any], mass: Unit, area: Unit) -> list[str]:
    minutes = Unit("min", 1.0)
    return [
        str(each["number"]),
        mass.number(each.get("mass")),
        area.number(each.get("area")),
        minutes.number(each.get("mixed_at")),
        minutes.number(each.get("spread_by")),
        minutes.number(each.get("close_by")),
    ]


def _waits_for(raw: Mapping[str, Any]) -> Iterable[str]:
    if not raw.get("areas") and not raw.get("check"):
        yield "the areas to be bonded"


def finish(raw: dict[str, Any]) -> None:
    """Put the areas given alone behind those with width and length."""
    raw.setdefault("adhesive", {})
    alone = raw.pop(ALONE, None)
    if alone:
        raw["areas"] = [*(raw.get("areas") or ()), *alone]


def normal(raw: Mapping[str, Any]) -> Mapping[str, Any]:
    """The areas with sizes apart from those without, and the one adhesive by its name in the form."""
    found = dict(raw)
    listed = raw.get("areas")
    if isinstance(listed, list):
        sized = [each for each in listed if isinstance(each, Mapping) and "area" not in each]
        alone = [each if isinstance(each, Mapping) else {"area": each} for each in listed if each not in sized]
        found |= {"areas": sized} | ({ALONE: alone} if alone else {})
    adhesives = raw.get("adhesives")
    if isinstance(adhesives, Mapping) and adhesives:
        found["adhesives"] = {"glue": next(iter(adhesives.values()))}
    return found


PAGE = OnePage(
    "glue-up", "Glue-up of a bonded member", "glue-up", GROUPS, headline, blocks, _waits_for,
    finish=finish, normal=normal, act="Plan",
)  # fmt: skip
