"""The tables of a sheet: results in rows, one unit a column."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from math import floor, log10, sqrt
from typing import Any

from server.sheets.values import DASH, Unit, quantity, said, unit, utilisation
from server.working import exceeds, readable

ROUNDING = 1e-9
"""A product of inertia below this share of the others is what rounding left of 0."""
Part = dict[str, Any]
Result = Mapping[str, Any]


def column(title: str, share: float = 0, side: str = "left") -> Part:
    """One column; ``share`` 0 is as wide as its content."""
    return {"title": title, "share": share, "side": side}


def _numbers(name: str, of: Unit) -> Part:
    return column(f"{name}, {of.text}" if of.text else name, side="right")


Cell = str | dict[str, str]


def table(columns: Sequence[Part], rows: Sequence[Sequence[Cell]]) -> Part:
    """A table, for the template and for the terminal; a repeated first cell is left blank."""
    shown = []
    before: Cell | None = None
    for row in rows:
        shown.append(["" if row[0] == before and len(rows) > 1 else row[0], *row[1:]])
        before = row[0]
    return {"kind": "table", "columns": list(columns), "rows": shown}


def used(value: object) -> Cell:
    """A utilisation; strong where it is above 1."""
    text = utilisation(value)
    return {"strong": text} if isinstance(value, int | float) and exceeds(value) else text


def section(result: Result, display: str) -> Iterator[Part]:
    """Section properties, of every stretch where there are several."""
    stretches = result.get("sections") or []
    if len(stretches) > 1:
        for stretch in stretches:
            ends = [quantity(stretch.get(end), "mm", display) for end in ("from", "to")]
            yield {"kind": "sub", "title": f"From {ends[0]} to {ends[1]}", "about": ""}
            yield {"kind": "pairs", "pairs": _properties(stretch, display)}
    elif result.get("section"):
        yield {"kind": "pairs", "pairs": _properties(result["section"], display)}


def _properties(values: Result, display: str) -> list[list[str]]:
    axis = values.get("neutral_axis") or (None, None)
    product, whole = values.get("EI_product"), sqrt((values.get("EI") or 0) * (values.get("EI_lateral") or 0))
    if product is not None and abs(product) < ROUNDING * whole:
        product = 0.0
    rows = [
        ("Area", values.get("area"), "mm2"),
        ("Mass per length", values.get("mass_per_length"), "kg/m"),
        ("Neutral axis, up", axis[1], "mm"),
        ("Neutral axis, across", axis[0], "mm"),
        ("EA", values.get("EA"), "N"),
        ("EI, bending up and down", values.get("EI"), "N*mm2"),
        ("EI, bending sideways", values.get("EI_lateral"), "N*mm2"),
        ("EI product", product, "N*mm2"),
        ("GA, shear", values.get("GA"), "N"),
        ("GJ, torsion", values.get("GJ"), "N*mm2"),
        ("Effective EI, with slip", values.get("effective_EI"), "N*mm2"),
    ]
    if values.get("effective_EI") == values.get("EI"):
        rows.pop()
    return [[name, _plain(value, stored, display)] for name, value, stored in rows if value is not None]


def _plain(value: object, stored: str, display: str) -> str:
    """In the working's own unit: EA and GA are large forces, not loads."""
    if stored == "N" and display == "SI" and isinstance(value, int | float):
        return f"{readable(float(value), 5)}\u00a0N"
    return quantity(value, stored, display, 5)


def actions(result: Result, display: str) -> Iterator[Part]:
    """Reactions by combination, then the extremes of shear and moment with place and combination."""
    member = result.get("member") or {}
    force, couple, length = unit("N", display), unit("N*mm", display), unit("mm", display)
    reactions = member.get("reactions") or {}
    aside = any("lateral" in each for listed in reactions.values() for each in listed)
    rows: list[list[Cell]] = [
        [
            name,
            length.number(each.get("at")),
            _held(each, "force", force),
            _held(each, "couple", couple),
            *([force.number(each.get("lateral")), couple.number(each.get("couple_lateral"))] if aside else []),
        ]
        for name, listed in reactions.items()
        for each in listed
    ]
    if rows:
        columns = [
            column("Combination", share=1),
            _numbers("Support at", length),
            _numbers("Reaction, upward", force),
            _numbers("Couple, anticlockwise", couple),
        ]
        if aside:
            columns += [_numbers("Reaction, to the right", force), _numbers("Couple, lateral", couple)]
        yield table(columns, rows)
    lines = [
        ("Shear", member.get("shear"), force),
        ("Bending moment", member.get("moment"), couple),
        ("Lateral shear", member.get("shear_lateral"), force),
        ("Lateral moment", member.get("moment_lateral"), couple),
    ]
    yield from extremes(lines, length)


def _held(reaction: Result, what: str, of: Unit) -> str:
    """A reaction's force or couple; from least to greatest where axles move; no couple is a dash."""
    least, most = ("min", "max") if what == "force" else ("couple_min", "couple_max")
    if most not in reaction:
        value = reaction.get(what)
        return of.number(value) if value or what == "force" else DASH
    if what == "couple" and not reaction[most] and not reaction[least]:
        return DASH
    return f"{of.number(reaction[least])} to {of.number(reaction[most])}"


def extremes(lines: Sequence[tuple[str, Any, Unit]], length: Unit) -> Iterator[Part]:
    """Greatest and least of some quantities, with place and combination."""
    rows = []
    for name, envelope, of in lines:
        if not envelope:
            continue
        for end, word in (("max", "greatest"), ("min", "least")):
            rows.append(
                [
                    f"{name}, {word}",
                    of.full(envelope.get(end)),
                    length.number(envelope.get(f"at_{end}")),
                    str(envelope.get(f"combination_{end}") or DASH),
                ]
            )
    if rows:
        columns = [column("", share=1), column("Value", side="right"), _numbers("At", length), column("Combination")]
        yield table(columns, rows)


def where_stressed(result: Result, which: str, display: str) -> str:
    """What a drawing of stress shows, and where."""
    picture = result["contours"][which]
    words = {"shear": "Shear stress", "bending": "Bending stress, tension positive"}[which]
    place = f"{quantity(picture['at'], 'mm', display)} from the left end, combination {picture['combination']}"
    beside = "; beside the bond lines the run of stress along each bond, where its flow is largest"
    return f"{words}, {place}{beside if which == 'shear' else ''}"


def runs(result: Result, display: str) -> Iterator[Part]:
    """The run of stress along each bond, in equal parts of its bonded width, where its flow is largest."""
    stress = unit("MPa", display)
    listed = [(n, joint) for n, joint in enumerate(result.get("joints") or (), 1) if joint.get("distribution")]
    if not listed or not result.get("contours"):
        return
    count = len(listed[0][1]["distribution"])
    about = f"{stress.text}, means over {count} equal parts of the bonded width, from the lower or the left end on"
    yield {"kind": "sub", "title": "Run of stress along each bond", "about": about}
    columns = [column("No."), column("Joint", share=1), column("Mean", side="right")]
    columns += [column(str(part), side="right") for part in range(1, count + 1)]
    largest = max(abs(value) for _, joint in listed for value in joint["distribution"])
    fine = 10.0 ** (floor(log10(largest)) - 3) if largest > 0 else 1.0  # what is nothing beside it reads as nothing
    rows: list[list[Cell]] = [
        [
            str(n),
            str(joint["id"]),
            stress.number(joint.get("stress")),
            *(stress.number(round(value / fine) * fine) for value in joint["distribution"]),
        ]
        for n, joint in listed
    ]
    yield table(columns, rows)


def joined_by(joint: Result) -> str:
    """What holds a joint together, in words."""
    words = []
    if joint.get("adhesive"):
        words.append(str(joint["adhesive"]))
    if joint.get("fastener"):
        role = f" ({joint['role']})" if joint.get("role") else " (press)" if joint.get("adhesive") else ""
        words.append(f"{joint['fastener']}{role}")
    return " + ".join(words) or DASH


def joints(result: Result, display: str) -> Iterator[Part]:
    """The joint list, what each limit says, and what to ask for."""
    listed = result.get("joints") or []
    if not listed:
        return
    length, flow, stress = unit("mm", display), unit("N/mm", display), unit("MPa", display)
    yield table(
        [
            column("No."),
            column("Joint", share=1),
            column("Joined by", share=1),
            _numbers("Bonded width", length),
            _numbers("Shear flow", flow),
            _numbers("Stress", stress),
            _numbers("At", length),
            column("Split"),
            column("Utilisation", side="right"),
        ],
        [
            [
                str(number),
                joint["id"],
                joined_by(joint),
                length.number(joint.get("bonded_width")),
                flow.number(joint.get("shear_flow")),
                stress.number(joint.get("stress")),
                length.number(joint.get("at")),
                str(joint.get("split") or DASH),
                used(joint.get("utilisation")),
            ]
            for number, joint in enumerate(listed, 1)
        ],
    )
    limits = [[str(n), *row] for n, joint in enumerate(listed, 1) for row in limit_rows(joint, length, display)]
    if limits:
        yield {"kind": "sub", "title": "What each joint stands on", "about": ""}
        yield table([column("No."), *_limit_columns(length)], limits)
    yield from _asked(listed, length, stress)


def _asked(listed: Sequence[Result], length: Unit, stress: Unit) -> Iterator[Part]:
    """The strength to ask for, the width and the spacing needed."""
    keys = ("strength_needed", "width_needed", "spacing_needed")
    rows = [
        [
            str(number),
            joint["id"],
            stress.number(joint.get("strength_needed")),
            length.number(joint.get("width_needed")),
            length.number(joint.get("spacing_needed")),
        ]
        for number, joint in enumerate(listed, 1)
        if any(joint.get(key) is not None for key in keys)
    ]
    if rows:
        yield {
            "kind": "sub",
            "title": "What to ask for",
            "about": "characteristic adhesive shear strength, bonded width, fastener spacing for a utilisation of 1",
        }
        columns = [
            column("No."),
            column("Joint", share=1),
            _numbers("Strength needed", stress),
            _numbers("Width needed", length),
            _numbers("Spacing needed", length),
        ]
        yield table(columns, rows)


def _limit_columns(length: Unit) -> list[Part]:
    return [
        column("Limit", share=1),
        column("Strength", side="right"),
        column("Resistance", side="right"),
        column("Demand", side="right"),
        _numbers("At", length),
        column("Combination", share=0.6),
        column("Utilisation", side="right"),
    ]


def limit_rows(owner: Result, length: Unit, display: str) -> Iterator[list[Cell]]:
    """One row a limit: strength, resistance after factors, demand, where and when."""
    for limit in owner.get("limits") or ():
        own = str(limit.get("demand_unit") or "MPa")
        yield [
            said(limit),
            quantity(limit.get("strength"), own, display),
            quantity(limit.get("resistance"), own, display),
            quantity(limit.get("demand"), own, display),
            length.number(limit.get("at")),
            str(limit.get("combination") or DASH),
            used(limit.get("utilisation")),
        ]


def pieces(result: Result, display: str) -> Iterator[Part]:
    """Stresses of the pieces and what they stand on."""
    listed = result.get("pieces") or []
    if not listed:
        return
    length, stress = unit("mm", display), unit("MPa", display)
    yield table(
        [
            column("Piece", share=1),
            _numbers("Upper edge", stress),
            _numbers("Lower edge", stress),
            _numbers("Shear", stress),
            column("Utilisation", side="right"),
        ],
        [
            [
                piece["id"],
                stress.number(piece.get("stress_top")),
                stress.number(piece.get("stress_bottom")),
                stress.number(piece.get("shear_stress")),
                used(piece.get("utilisation")),
            ]
            for piece in listed
        ],
    )
    limits = [[piece["id"], *row] for piece in listed for row in limit_rows(piece, length, display)]
    if limits:
        yield {"kind": "sub", "title": "What each piece stands on", "about": "tension positive"}
        yield table([column("Piece", share=0.7), *_limit_columns(length)], limits)


def deflection(result: Result, display: str) -> Iterator[Part]:
    """Greatest and least deflection, and every limit that was asked for."""
    member = result.get("member") or {}
    length = unit("mm", display)
    lines = [
        ("Deflection", member.get("deflection"), length),
        ("Long-term deflection", member.get("deflection_long_term"), length),
        ("Lateral deflection", member.get("deflection_lateral"), length),
        ("Long-term lateral deflection", member.get("deflection_lateral_long_term"), length),
    ]
    yield from extremes(lines, length)
    rows = [
        [
            f"{length.number(each.get('from'))} to {length.number(each.get('to'))}",
            "long-term" if each.get("long_term") else "short-term",
            length.number(each.get("deflection")),
            length.number(each.get("limit")),
            _ratio(each),
            str(each.get("combination") or DASH),
            used(each.get("utilisation")),
        ]
        for each in result.get("deflection_limits") or ()
    ]
    if rows:
        columns = [
            column(f"Span, {length.text}", share=1),
            column("Term"),
            _numbers("Deflection", length),
            _numbers("Limit", length),
            column("Span / deflection", side="right"),
            column("Combination", share=0.6),
            column("Utilisation", side="right"),
        ]
        yield table(columns, rows)


def _ratio(each: Result) -> str:
    """The span (twice an overhang's length) over its deflection, rounded down: L/274."""
    start, end, sag = each.get("from"), each.get("to"), each.get("deflection")
    if (
        not isinstance(start, int | float)
        or not isinstance(end, int | float)
        or not isinstance(sag, int | float)
        or not sag
    ):
        return DASH
    span = (end - start) * (2 if each.get("kind") == "overhang" else 1)
    return readable(float(int(abs(span / sag))), 6)
