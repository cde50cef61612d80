"""The check of one fastener: what it asks, and how its result reads."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server import units
from server.sheets.asked import Ask, AskGroup
from server.sheets.one_page import Blocks, OnePage, Part, Result, figure, pairs
from server.sheets.tables import column, table
from server.sheets.values import quantity, unit
from server.sheets.yield_drawing import caption, modes_svg
from server.working import readable

EN, YIELD, THIN = "EN 1995-1-1", "yield-limit", "thin metal"
_WOODEN = (("method", (EN, YIELD)),)
_NAMES = {"side": "Side member", "main": "Main member"}
_DISTANCES = (
    ("a1", "Spacing along the grain"),
    ("a2", "Spacing across the grain"),
    ("a3t", "To a loaded end"),
    ("a3c", "To an unloaded end"),
    ("a4t", "To a loaded edge"),
    ("a4c", "To an unloaded edge"),
)


def _part(name: str, title: str, about: str, thickness: tuple[str, str]) -> AskGroup:
    wood = ("timber", "lvl", "plywood", "osb", "particleboard", "hardboard")
    kinds = (
        ("timber", "timber or glulam"),
        ("lvl", "LVL"),
        ("plywood", "plywood"),
        ("osb", "OSB"),
        ("particleboard", "particleboard"),
        ("hardboard", "hardboard"),
        ("steel", "steel plate"),
        ("aluminium", "aluminium sheet"),
    )
    grown = (f"{name}.kind", wood)
    return AskGroup(
        name,
        title,
        (
            Ask(f"{name}.thickness", "Thickness", "size", start=thickness),
            Ask(f"{name}.kind", "Material", choices=kinds, wide=True),
            Ask(
                f"{name}.density",
                "Characteristic density",
                "density",
                start=("350", ""),
                only=(("method", (EN,)), grown),
            ),
            Ask(
                f"{name}.density_mean",
                "Mean density",
                "density",
                hint="for the slip; blank: 1.2 times as much",
                start=("420", ""),
                only=(*_WOODEN, grown),
            ),
            Ask(
                f"{name}.specific_gravity",
                "Specific gravity",
                hint="as the code assigns it",
                start=("", "0.50"),
                only=(("method", (YIELD,)), grown),
            ),
            Ask(f"{name}.angle", "Force to grain", "angle", hint="0 along, 90 across", only=(*_WOODEN, grown)),
            Ask(
                f"{name}.wood",
                "Wood",
                choices=(("softwood", "softwood"), ("hardwood", "hardwood")),
                only=(*_WOODEN, (f"{name}.kind", ("timber",))),
            ),
            Ask(
                f"{name}.splits",
                "Species that splits",
                flag=True,
                only=(("method", (EN,)), (f"{name}.kind", ("timber",))),
            ),
            Ask(f"{name}.embedment", "Embedment strength", "stress", hint="blank: from the density", only=_WOODEN),
            Ask(
                f"{name}.ultimate",
                "Tensile strength",
                "stress",
                only=((f"{name}.kind", ("steel", "aluminium")), ("method", (YIELD, THIN))),
            ),
        ),
        about=about,
    )


GROUPS = (
    AskGroup(
        "method",
        "Method",
        (
            Ask(
                "method",
                "By",
                choices=(
                    (EN, "EN 1995-1-1, dowels in wood"),
                    (YIELD, "NDS yield-limit equations"),
                    (THIN, "thin metal, tested fastener"),
                ),
                start=(EN, YIELD),
                wide=True,
            ),
            Ask("shear_planes", "Shear planes", choices=(("1", "one"), ("2", "two"))),
            Ask("predrilled", "Pre-drilled", flag=True, only=_WOODEN),
        ),
    ),
    AskGroup(
        "fastener",
        "Fastener",
        (
            Ask(
                "fastener.type",
                "Sort",
                choices=(
                    ("nail", "nail"),
                    ("screw", "screw"),
                    ("bolt", "bolt"),
                    ("dowel", "dowel"),
                    ("rivet", "blind rivet (thin metal)"),
                ),
            ),
            Ask("fastener.diameter", "Diameter", "size", hint="screws: outside the thread", start=("3.1", "0.162")),
            Ask(
                "fastener.shape",
                "Shank",
                choices=(("round", "round"), ("square", "square"), ("grooved", "grooved"), ("other", "other (ringed)")),
                only=(*_WOODEN, ("fastener.type", ("nail",))),
            ),
            Ask(
                "fastener.root_diameter",
                "Thread's root",
                "size",
                hint="where the thread crosses the joint",
                only=(*_WOODEN, ("fastener.type", ("screw", "bolt"))),
            ),
            Ask(
                "fastener.length",
                "Length",
                "size",
                hint="blank: the main member's thickness is what it stands in",
                only=(*_WOODEN, ("fastener.type", ("nail", "screw"))),
            ),
            Ask("fastener.ultimate", "Tensile strength of its steel", "stress", start=("600", ""), only=_WOODEN),
            Ask("fastener.bending_yield", "Bending yield strength", "stress", start=("", "90000"), only=_WOODEN),
            Ask("fastener.yield_moment", "Declared yield moment", "fastener_couple", only=_WOODEN),
            Ask(
                "fastener.withdrawal",
                "Withdrawal resistance",
                "fastener_force",
                hint="of one fastener; blank: no rope effect",
                only=(("method", (EN,)),),
            ),
            Ask(
                "fastener.tested",
                "Tested shear resistance",
                "fastener_force",
                hint="of one fastener, characteristic",
                only=(("method", (THIN,)),),
            ),
        ),
    ),
    _part("side", "Side member", "The member under the head; with two planes both outer ones.", ("35", "1.5")),
    _part("main", "Main member", "The member with the point; with two planes the inner one.", ("45", "1.62")),
    AskGroup(
        "row",
        "Row and ends",
        (
            Ask("row.count", "Fasteners in a row", whole=True, hint="along the grain; blank: one"),
            Ask("row.spacing", "Spacing in the row", "size", hint="blank: the least allowed"),
            Ask("end_distance", "To the sheet's end", "size", only=(("method", (THIN,)),)),
        ),
        folded=True,
        about="how many of a row count",
    ),
    AskGroup(
        "adjustments",
        "Adjustment factors",
        tuple(
            Ask(f"adjustments.{name}", words, hint=symbol, only=(("method", (YIELD,)),))
            for name, words, symbol in (
                ("duration", "Load duration", "C_D"),
                ("wet", "Wet service", "C_M"),
                ("temperature", "Temperature", "C_t"),
                ("group", "Group action", "C_g"),
                ("geometry", "Geometry", "C_Δ"),
                ("penetration", "Penetration", "older editions: p/10D"),
                ("end grain", "End grain", "C_eg"),
                ("diaphragm", "Diaphragm", "C_di"),
                ("toe-nail", "Toe-nail", "C_tn"),
            )
        ),
        folded=True,
        about="none: the reference value alone",
    ),
)


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    key = str(result.get("governing_mode", ""))
    words = (result.get("mode_words") or {}).get(key, "")
    value = quantity(result.get("shear_resistance"), "N", display)
    line = f"{value} a shear plane, mode {key}: {words}"
    if result.get("adjusted") is not None:
        line += f"; adjusted {quantity(result['adjusted'], 'N', display)}"
    return line


def blocks(result: Result, display: str) -> Blocks:
    """Resistance, modes, distances, the row."""
    yield "Resistance", _resistance(result, display)
    yield "Modes", _modes(result, display)
    yield "Least distances", _distances(result, display)


def _resistance(result: Result, display: str) -> Iterator[Part]:
    moment = result.get("yield_moment")
    reference = "Reference value" if result.get("method") == YIELD else "Characteristic resistance"
    rows = [(f"{reference}, each shear plane", quantity(result.get("shear_resistance"), "N", display))]
    if result.get("shear_planes") == 2:
        rows.append((f"{reference}, two planes", quantity(result.get("resistance_per_fastener"), "N", display)))
    if result.get("adjusted") is not None:
        factors = ", ".join(f"{name} {readable(value, 4)}" for name, value in result["adjustments"].items())
        rows.append((f"Adjusted, each plane ({factors})", quantity(result["adjusted"], "N", display)))
    if result.get("row"):
        row = result["row"]
        counted = f"{quantity(row['resistance'], 'N', display)}, {readable(row['counting'], 4)} counting"
        rows.append((f"Row of {row['count']}, each plane", counted))
    rows += [
        ("Slip modulus in service, each plane", _if(result.get("slip_modulus"), "N/mm", display)),
        ("Slip modulus for strength", _if(result.get("slip_modulus_ultimate"), "N/mm", display)),
        ("Least spacing along the grain", _if(result.get("spacing_min"), "mm", display)),
        ("Diameter that yields", _if(result.get("diameter_effective"), "mm", display)),
        ("Yield moment", "" if moment is None else units.show(moment, "couple", display)),
        ("Bending yield strength", _if(result.get("bending_yield"), "MPa", display)),
    ]
    for name, value in (result.get("embedment") or {}).items():
        rows.append((f"Embedment strength, {_NAMES[name].lower()}", _if(value, "MPa", display)))
    yield pairs(rows)


def _if(value: object, stored: str, display: str) -> str:
    return "" if value is None else quantity(value, stored, display)


def _modes(result: Result, display: str) -> Iterator[Part]:
    svg = modes_svg(result, display=display)
    if svg:
        yield figure(svg, caption(result), 1.0)
    force = unit("N", display)
    rope = result.get("rope") or {}
    columns = [column("Mode"), column("How it fails", share=1), column(f"Load, {force.text}", side="right")]
    if any(rope.values()):
        columns.insert(2, column(f"of it by its pull, {force.text}", side="right"))
    rows: list[list[str]] = []
    for key, value in result.get("modes", {}).items():
        governs = key == result.get("governing_mode")
        row = [key, result["mode_words"][key] + (", and governs" if governs else "")]
        if any(rope.values()):
            row.append(force.number(rope.get(key)))
        rows.append([*row, force.number(value)])
    yield table(columns, rows)


def _distances(result: Result, display: str) -> Iterator[Part]:
    listed = result.get("distances") or []
    if not listed:
        return
    length = unit("mm", display)
    columns = [column(f"Least distance, {length.text}", share=1)]
    columns += [column(_NAMES[each["member"]], side="right") for each in listed]
    yield table(columns, [[words, *(length.number(each[key]) for each in listed)] for key, words in _DISTANCES])
    yield {"kind": "text", "text": "; ".join(dict.fromkeys(each["source"] for each in listed)) + "."}


def _waits_for(raw: Mapping[str, Any]) -> Iterable[str]:
    fastener = raw.get("fastener") or {}
    if not fastener.get("diameter"):
        yield "the fastener's diameter"
    for name in ("side", "main"):
        if not (raw.get(name) or {}).get("thickness"):
            yield f"the thickness of the {_NAMES[name].lower()}"


PAGE = OnePage("fastener", "Resistance of one fastener", "fastener", GROUPS, headline, blocks, _waits_for)
