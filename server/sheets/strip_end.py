"""The check of a strip's ends: what it asks, and how its result reads.

The form asks for a host of one rectangle; any other section comes as a document, and reads the same here.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server.sheets.asked import Ask, AskGroup, Column
from server.sheets.bond_ends import ends, movement, worst_of
from server.sheets.limits_table import limits_table
from server.sheets.one_page import Blocks, OnePage, Part, Result, figure
from server.sheets.splice import adhesive_asks, value_asks
from server.sheets.strip_end_drawing import strip_end_svg
from server.sheets.values import in_units

LOAD = (Column("from", "from", "position"), Column("to", "to", "position"), Column("value", "load", "line_load"))
POINT = (Column("at", "at", "position"), Column("value", "load", "force"))
HOST, LINES, POINTS, BEFORE = "host", "line loads", "point loads", "before bonding"
STEEL = {"E": ("210000", "30000000"), "yield": ("235", "36000"), "expansion": ("12e-6", "6.7e-6")}
TIMBER = {
    "kind": ("timber", "timber"),
    "E": ("11000", "1600000"),
    "shear": ("4", "580"),
    "tension_across": ("1.5", "220"),
    "expansion": ("4e-6", "2.2e-6"),
}

GROUPS = (
    AskGroup(
        "strip",
        "Strip",
        (
            Ask("strip.width", "Width", "size", start=("80", "3")),
            Ask("strip.thickness", "Thickness", "size", start=("8", "0.3125")),
            Ask("strip.from", "From", "position", start=("0.25", "1")),
            Ask("strip.to", "To", "position", start=("4.55", "15")),
            Ask("face", "On the", choices=(("bottom", "underside"), ("top", "top"))),
            *value_asks("strip", start=STEEL, tube=False),
        ),
    ),
    AskGroup(
        "host",
        "Member",
        (
            Ask(f"host.pieces.{HOST}.width", "Width", "size", start=("140", "5.5")),
            Ask(f"host.pieces.{HOST}.depth", "Depth", "size", start=("240", "9.5")),
            Ask("member.length", "Length", "position", start=("4.8", "16")),
            Ask(
                "member.supports",
                "Supports",
                rows=3,
                wide=True,
                columns=(Column("at", "at", "position"), Column("kind", "pin or fixed")),
                hint="one a line: place, pin or fixed",
                start=("0, pin\n4.8, pin", "0, pin\n16, pin"),
            ),
            *value_asks("host", start=TIMBER, tube=False),
        ),
    ),
    AskGroup(
        "load",
        "Load",
        (
            Ask(
                f"loads.{LINES}",
                "Line loads",
                rows=3,
                wide=True,
                columns=LOAD,
                hint="one a line: from, to, load",
                start=("0, 4.8, 4.5", "0, 16, 300"),
            ),
            Ask(
                f"loads.{POINTS}", "Point loads", rows=3, wide=True, columns=POINT, hint="one a line: at, load",
                start=("2.4, 7", "8, 1500"),
            ),
            Ask(
                f"loads.{BEFORE}", "Line loads before bonding, unpropped", rows=2, wide=True, columns=LOAD,
                hint="carried by the member alone",
            ),
        ),
    ),
    AskGroup(
        "adhesive",
        "Adhesive",
        adhesive_asks(
            {
                "thickness": ("1", "0.04"),
                "shear_modulus": ("1700", "246000"),
                "E": ("4500", "650000"),
                "shear_yield": ("18", "2600"),
                "peel_strength": ("1.54", "223"),
            },
            plastic=False,
        ),
    ),
    AskGroup(
        "service",
        "Service conditions",
        (
            Ask("service.lowest", "Coldest", "temperature"),
            Ask("service.highest", "Hottest", "temperature"),
            Ask("service.cure_temperature", "Cured at", "temperature"),
        ),
        folded=True,
        about="movement is not reckoned unless filled in",
    ),
    AskGroup(
        "basis",
        "Basis",
        (
            Ask(
                "basis.method", "Method", choices=(("allowable", "allowable stress"), ("limit-state", "limit states")),
                wide=True,
            ),
            Ask("basis.safety_factor", "Safety factor", start=("3", "3"), only=(("basis.method", ("allowable",)),)),
            Ask(
                "basis.partial_factor", "Partial factor", start=("1.5", "1.5"),
                only=(("basis.method", ("limit-state",)),),
            ),
        ),
    ),
)  # fmt: skip
FIXED = (
    ("adhesive", "bond"),
    ("strip.material", "strip"),
    (f"host.pieces.{HOST}.material", "host"),
    (f"host.pieces.{HOST}.shape", "rectangle"),
)


def finish(raw: dict[str, Any]) -> None:
    """Place the host, say what sort each load is, name what acts before bonding, join the temperatures."""
    raw["host"]["pieces"][HOST]["at"] = [0, 0]
    loads = raw.setdefault("loads", {})
    for case, kind in ((LINES, "line"), (POINTS, "point"), (BEFORE, "line")):
        for load in loads.get(case) or ():
            load["kind"] = kind
        if not loads.get(case):
            loads.pop(case, None)
    if BEFORE in loads:
        raw["before_bonding"] = [BEFORE]
    service = raw.get("service") or {}
    pair = [service.pop(name, None) for name in ("lowest", "highest")]
    if any(value is not None for value in pair):
        known = [value for value in pair if value is not None]
        service["temperature"] = pair if len(known) == 2 else [known[0], known[0]]


def normal(raw: Mapping[str, Any]) -> dict[str, Any]:
    """The same document with its values called as the form calls them; what the form does not ask is left as it is."""
    made = dict(raw)
    materials, adhesives = raw.get("materials") or {}, raw.get("adhesives") or {}
    strip = raw.get("strip") or {}
    pieces = (raw.get("host") or {}).get("pieces") or {}
    first: Mapping[str, Any] = next(iter(pieces.values()), {})
    found = {"strip": materials.get(strip.get("material")), "host": materials.get(first.get("material"))}
    made["materials"] = {name: value for name, value in found.items() if value is not None}
    bond = raw.get("adhesive")
    made["adhesives"] = {"bond": adhesives[bond]} if bond in adhesives else {}
    made["host"] = {"pieces": {HOST: first}}
    before = raw.get("before_bonding") or []
    loads: dict[str, list[Any]] = {}
    for case, listed in (raw.get("loads") or {}).items():
        for load in listed if isinstance(listed, list) else ():
            kind = load.get("kind") if isinstance(load, Mapping) else None
            name = BEFORE if case in before else LINES if kind == "line" else POINTS
            loads.setdefault(name, []).append(load)
    made["loads"] = loads
    service = dict(raw.get("service") or {})
    pair = service.pop("temperature", None)
    if isinstance(pair, list) and len(pair) == 2:
        service["lowest"], service["highest"] = pair
    made["service"] = service
    return made


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    line = in_units(str(result.get("governing", "")), display)
    return line[:1].upper() + line[1:]


def blocks(result: Result, display: str) -> Blocks:
    """The member with its strip, the ends, their limits, movement."""
    yield "Member and strip", _drawing(result, display)
    yield "Ends", ends(result, display)
    yield "Limits at the ends", _limits(result, display)
    yield "Movement of unlike materials", movement(result, display)


def _drawing(result: Result, display: str) -> Iterator[Part]:
    svg = strip_end_svg(result, display=display)
    if svg:
        yield figure(svg, "Side view with the strip's ends, and the bending moment that the strip shares.", 1.0)


def _limits(result: Result, display: str) -> Iterator[Part]:
    listed = result.get("ends") or []
    if listed:
        yield from limits_table(worst_of(listed).get("limits") or [], display)


def _waits_for(raw: Mapping[str, Any]) -> Iterable[str]:
    strip, member = raw.get("strip") or {}, raw.get("member") or {}
    for name in ("width", "thickness", "from", "to"):
        if not strip.get(name):
            yield f"the strip's {name}"
    if not member.get("length"):
        yield "the member's length"
    if not raw.get("loads"):
        yield "a load"


PAGE = OnePage(
    "strip-end", "Check of the ends of a bonded strip", "strip end", GROUPS, headline, blocks, _waits_for,
    fixed=FIXED, finish=finish, normal=normal,
)  # fmt: skip
