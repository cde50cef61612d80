"""The check of a splice: what it asks, and how its result reads."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server.sheets.asked import Ask, AskGroup
from server.sheets.bond_plot import curve_svg
from server.sheets.drafting import MINUS
from server.sheets.lasting import TITLE as LASTING
from server.sheets.lasting import lasting
from server.sheets.limits_table import limits_table
from server.sheets.one_page import Blocks, OnePage, Part, Result, figure, pairs
from server.sheets.splice_drawing import NAMES, splice_svg
from server.sheets.tables import column, table
from server.sheets.values import in_units, quantity, unit
from server.working import readable

PLATES = ("single-lap", "double-lap", "strap", "double-strap")
LAYOUTS = (
    ("single-lap", "single lap"),
    ("double-lap", "double lap"),
    ("strap", "strap on one side of a butt"),
    ("double-strap", "straps on both sides of a butt"),
    ("scarf", "scarf (or finger joint)"),
    ("tube-lap", "tube in tube"),
)
KINDS = (
    ("metal", "metal"),
    ("timber", "timber"),
    ("plywood", "plywood"),
    ("fibre composite", "fibre composite"),
    ("other", "other"),
)
WOODEN = ("timber", "plywood", "fibre composite", "other")


def value_asks(name: str, *, start: Mapping[str, tuple[str, str]], tube: bool = True) -> tuple[Ask, ...]:
    """The boxes of one material's values, picked from the library or typed."""
    place = f"materials.{name}"

    def at(key: str) -> tuple[str, str]:
        return start.get(key, ("", ""))

    wooden = ((f"{place}.kind", WOODEN),)
    return (
        Ask(place, "From the library", record=True, wide=True),
        Ask(f"{place}.kind", "Sort", choices=KINDS, start=at("kind")),
        Ask(f"{place}.E", "Modulus E", "stress", start=at("E")),
        Ask(f"{place}.nu", "Poisson's ratio", hint="blank: 0", start=at("nu")),
        Ask(f"{place}.yield", "Yield", "stress", start=at("yield"), hint="metals: stands in for the strengths"),
        Ask(f"{place}.strengths.tension", "Tension strength", "stress", start=at("tension")),
        Ask(f"{place}.strengths.shear", "Shear strength of the surface", "stress", start=at("shear")),
        Ask(f"{place}.strengths.rolling_shear", "Rolling shear strength", "stress", only=wooden),
        Ask(f"{place}.strengths.tension_across", "Tension across (pull-off)", "stress", start=at("tension_across")),
        *((Ask(f"{place}.G", "Shear modulus", "stress", only=(("layout", ("tube-lap",)),)),) if tube else ()),
        Ask(f"{place}.layered", "Layered", flag=True, only=wooden),
        Ask(f"{place}.expansion", "Thermal expansion", "expansion", start=at("expansion")),
        Ask(f"{place}.moisture_expansion", "Strain for 1 % moisture", only=wooden, hint="along the member: 0.01 %"),
    )


def adhesive_asks(start: Mapping[str, tuple[str, str]], *, plastic: bool = True) -> tuple[Ask, ...]:
    """The boxes of the adhesive's values."""
    place = "adhesives.bond"

    def at(key: str) -> tuple[str, str]:
        return start.get(key, ("", ""))

    yielding = (("response", ("elastic-plastic",)),)
    return (
        Ask(place, "From the library", record=True, wide=True),
        Ask(f"{place}.thickness", "Bond line", "size", start=at("thickness")),
        Ask(f"{place}.shear_modulus", "Shear modulus", "stress", start=at("shear_modulus")),
        Ask(
            f"{place}.E", "Modulus across the bond", "stress", start=at("E"), hint="blank: 2.7 times the shear modulus"
        ),
        Ask(f"{place}.shear_yield", "Shear yield", "stress", start=at("shear_yield"), hint="thick-adherend tests"),
        *(
            (Ask(f"{place}.shear_strain_limit", "Shear strain limit, total", only=yielding, start=at("limit")),)
            if plastic
            else ()
        ),
        Ask(f"{place}.peel_strength", "Tension across (pull-off)", "stress", start=at("peel_strength")),
        Ask(f"{place}.shear_strength", "Lap-shear strength", "stress", hint="a mean: shown beside, not judged"),
    )


GROUPS = (
    AskGroup(
        "joint",
        "Joint",
        (
            Ask("layout", "Layout", choices=LAYOUTS, wide=True),
            Ask("overlap", "Overlap", "size", start=("25", "1"), only=(("layout", (*PLATES, "tube-lap")),)),
            Ask("slope", "Slope, length over thickness", start=("8", "8"), only=(("layout", ("scarf",)),)),
            Ask("width", "Width", "size", start=("25", "1"), only=(("layout", (*PLATES, "scarf")),)),
            Ask("diameter", "Inner tube, outside", "size", start=("30", "1.25"), only=(("layout", ("tube-lap",)),)),
            Ask("response", "Bond", choices=(("elastic", "elastic"), ("elastic-plastic", "yields in shear"))),
        ),
        about="Straps: the overlap on each side of the butt.",
    ),
    AskGroup(
        "load",
        "Load",
        (
            Ask("load.axial", "Axial, whole width", "force", start=("1.2", "270"), hint="pull positive"),
            Ask("load.moment", "Moment", "couple", only=(("layout", (*PLATES, "scarf")),)),
            Ask("load.shear", "Shear", "force", only=(("layout", (*PLATES, "scarf")),)),
            Ask("load.torque", "Torque", "couple", only=(("layout", ("tube-lap",)),)),
            Ask("load.temperature_change", "Temperature from cure", hint="in kelvin: -30"),
            Ask("load.moisture_change.inner", "Moisture change, inner, %", only=(("materials.inner.kind", WOODEN),)),
            Ask("load.moisture_change.outer", "Moisture change, outer, %", only=(("materials.outer.kind", WOODEN),)),
            Ask("duration", "Load duration", hint="as in the values' tables"),
        ),
    ),
    AskGroup(
        "inner",
        "Inner adherend",
        (
            Ask("adherends.inner.thickness", "Thickness", "size", start=("1.6", "0.063")),
            Ask(
                "adherends.inner.taper",
                "Taper of its free end",
                "size",
                hint="blank: none",
                only=(("layout", ("single-lap",)),),
            ),
            Ask("adherends.inner.tip", "Thickness at the tip", "size", only=(("layout", ("single-lap", "scarf")),)),
            Ask(
                "adherends.inner.grain",
                "Grain",
                choices=(("along", "along the load"), ("across", "across the load")),
                only=(("materials.inner.kind", WOODEN),),
            ),
            *value_asks(
                "inner",
                start={"E": ("70000", "10000000"), "nu": ("0.33", "0.33"), "yield": ("240", "35000")},
            ),
        ),
        about="Middle plate of a double lap, main plate of a strap, tube inside.",
    ),
    AskGroup(
        "outer",
        "Outer adherend",
        (
            Ask("adherends.outer.thickness", "Thickness", "size", start=("1.6", "0.063")),
            Ask(
                "adherends.outer.taper", "Taper of its free end", "size", hint="blank: none", only=(("layout", PLATES),)
            ),
            Ask("adherends.outer.tip", "Thickness at the tip", "size", only=(("layout", PLATES),)),
            Ask(
                "adherends.outer.grain",
                "Grain",
                choices=(("along", "along the load"), ("across", "across the load")),
                only=(("materials.outer.kind", WOODEN),),
            ),
            *value_asks(
                "outer",
                start={"E": ("70000", "10000000"), "nu": ("0.33", "0.33"), "yield": ("240", "35000")},
            ),
        ),
        about="Of a double lap or strap: each outer plate.",
    ),
    AskGroup(
        "adhesive",
        "Adhesive",
        adhesive_asks(
            {
                "thickness": ("0.2", "0.008"),
                "shear_modulus": ("1000", "145000"),
                "E": ("2700", "390000"),
                "shear_yield": ("30", "4350"),
                "limit": ("0.5", "0.5"),
                "peel_strength": ("40", "5800"),
            }
        ),
    ),
    AskGroup(
        "basis",
        "Basis",
        (
            Ask(
                "basis.method",
                "Method",
                choices=(("allowable", "allowable stress"), ("limit-state", "limit states")),
                wide=True,
            ),
            Ask(
                "basis.safety_factor",
                "Safety factor",
                start=("2", "2"),
                only=(("basis.method", ("allowable",)),),
            ),
            Ask(
                "basis.partial_factor",
                "Partial factor",
                start=("1.5", "1.5"),
                only=(("basis.method", ("limit-state",)),),
            ),
        ),
    ),
    AskGroup(
        "lasting",
        "Load that stays or repeats",
        (
            Ask("sustained", "Share that stays", hint="0.3 or 30 %"),
            Ask("adhesives.bond.creep_limit", "Creep limit of the value", hint="share of its resistance"),
            Ask("fatigue.cycles", "Cycles"),
            Ask("fatigue.range", "Range, share of the load", hint="blank: all of it"),
            Ask("fatigue.impact", "Impact factor in the load", hint="taken off the range"),
            Ask("adhesives.bond.fatigue.share", "Share of static borne"),
            Ask("adhesives.bond.fatigue.cycles", "at so many cycles", hint="as tested (ISO 9664)"),
        ),
        folded=True,
        about="not reckoned unless filled in",
    ),
)
FIXED = (("adhesive", "bond"), ("adherends.inner.material", "inner"), ("adherends.outer.material", "outer"))


def normal(raw: Mapping[str, Any]) -> dict[str, Any]:
    """The same document with its materials and adhesive called as the form calls them."""
    made = dict(raw)
    sides = raw.get("adherends") or {}
    named = {side: str((sides.get(side) or {}).get("material", "")) for side in ("inner", "outer")}
    materials, adhesives = raw.get("materials") or {}, raw.get("adhesives") or {}
    made["materials"] = {side: materials[name] for side, name in named.items() if name in materials}
    bond = raw.get("adhesive")
    made["adhesives"] = {"bond": adhesives[bond]} if bond in adhesives else {}
    load = dict(raw.get("load") or {})
    moves = load.get("moisture_change") or {}
    if moves:
        load["moisture_change"] = {side: moves[name] for side, name in named.items() if name in moves}
        made["load"] = load
    return made


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    line = in_units(str(result.get("governing", "")), display)
    strength = result.get("joint_strength")
    holds = f"; holds {quantity(strength, 'N', display)}" if strength is not None else ""
    return line[:1].upper() + line[1:] + holds


def blocks(result: Result, display: str) -> Blocks:
    """The drawing with its stresses, the bond, the adherends, the limits, the overlap curve."""
    yield "Joint and stress along the bond", _drawing(result, display)
    yield "Bond", _bond(result, display)
    yield "Adherends", _adherends(result, display)
    yield "Limits", limits_table(result.get("limits") or [], display)
    yield LASTING, lasting(result.get("lasting") or [])
    yield "Strength and overlap", _overlap(result, display)


def _drawing(result: Result, display: str) -> Iterator[Part]:
    svg = splice_svg(result, display=display)
    if svg:
        place = "the strap's end" if "strap" in str(result["layout"]) else "the end where the inner adherend is loaded"
        words = f"Side view; heavy: bond lines. Below it the stress along the bond, from {place}."
        yield figure(svg, words, 1.0)


def _bond(result: Result, display: str) -> Iterator[Part]:
    def stress(key: str) -> str:
        value = result.get(key)
        return "" if value is None else quantity(value, "MPa", display)

    ratio, factor = result.get("peak_ratio"), result.get("edge_moment_factor")
    other = result.get("edge_moment_factor_goland_reissner")
    rows = [
        ("Mean shear", stress("mean_shear")),
        ("Lap coupons' strength, a mean too", stress("lap_shear_strength")),
        ("Peak shear", stress("peak_shear") + (f", {readable(ratio, 4)} times the mean" if ratio else "")),
        ("Peak shear by closed form", stress("peak_shear_closed_form")),
        ("Peak peel", stress("peak_peel")),
    ]
    if factor is not None:
        beside = "" if other is None else f"; {readable(other, 4)} (Goland and Reissner)"
        text = f"{readable(factor, 4)} (Hart-Smith){beside}"
        rows.append(("Edge moment factor", text))
    rows.append(("Transfer length", _size(result.get("transfer_length"), display)))
    yield pairs(rows)


def _size(value: object, display: str) -> str:
    return "" if value is None else quantity(value, "mm", display)


def _adherends(result: Result, display: str) -> Iterator[Part]:
    listed = result.get("adherends") or []
    if not listed:
        return
    names, of = NAMES[str(result["layout"])], unit("MPa", display)
    columns = [
        column("Piece", share=1),
        column("Material"),
        column(f"Thickness, {unit('mm', display).text}", side="right"),
        column(f"Largest stress, {of.text}", side="right"),
        column("Utilisation", side="right"),
    ]
    rows = []
    for name, each in zip(names, listed, strict=True):
        used = each.get("utilisation")
        rows.append(
            [
                name,
                "" if each["material"] == each["id"] else each["material"],
                unit("mm", display).number(each["thickness"]),
                of.number(each["stress"]),
                "–" if used is None else f"{used:.2f}",
            ]
        )
    yield table(columns, rows)


def _overlap(result: Result, display: str) -> Iterator[Part]:
    svg = curve_svg(result, display=display)
    if svg:
        yield figure(svg, "Axial strength over overlap; the dot is the joint as drawn.", 1.0)
    useful = result.get("overlap_useful")
    yield pairs(
        [
            ("Axial load at utilisation 1", _force(result.get("joint_strength"), display)),
            ("Torque at utilisation 1", _couple(result.get("torque_strength"), display)),
            ("Useful overlap", _size(useful, display)),
        ]
    )
    changes = result.get("changes") or []
    if changes:
        force = unit("N", display)
        columns = [column("What would change it", share=1)]
        columns += [column(f"Strength, {force.text}", side="right"), column("Gain", side="right")]
        ordered = sorted(changes, key=lambda each: -each["gain"])
        rows = [
            [in_units(each["what"], display), force.number(each["joint_strength"]), _gain(each["gain"])]
            for each in ordered
        ]
        yield table(columns, rows)


def _gain(gain: float) -> str:
    """+17 %, −16 %, and 0 % for what rounds to it."""
    whole = round(gain * 100)
    return f"{whole:+d} %".replace("-", MINUS) if whole else "0 %"


def _force(value: object, display: str) -> str:
    return "" if value is None else quantity(value, "N", display)


def _couple(value: object, display: str) -> str:
    return "" if value is None else quantity(value, "N*mm", display)


def _waits_for(raw: Mapping[str, Any]) -> Iterable[str]:
    for side in ("inner", "outer"):
        if not ((raw.get("adherends") or {}).get(side) or {}).get("thickness"):
            yield f"the thickness of the {side} adherend"
    layout = raw.get("layout")
    if layout == "scarf":
        if not raw.get("slope"):
            yield "the slope"
    elif not raw.get("overlap"):
        yield "the overlap"
    if layout != "tube-lap" and not raw.get("width"):
        yield "the width"


PAGE = OnePage(
    "splice", "Check of a bonded splice", "splice", GROUPS, headline, blocks, _waits_for, fixed=FIXED, normal=normal
)
