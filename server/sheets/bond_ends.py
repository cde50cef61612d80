"""Ends of bonded pieces and movement: how they read in every sheet, of members and of strip ends alike."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.sheets.bond_plot import stress_plot
from server.sheets.drafting import MINUS
from server.sheets.lasting import TITLE as LASTING
from server.sheets.lasting import lasting
from server.sheets.one_page import Blocks, Part, figure, pairs, sub
from server.sheets.plotting import Axis, across
from server.sheets.svg import Drawing
from server.sheets.tables import column, table, used
from server.sheets.values import DASH, in_units, quantity, unit, utilisation

Result = Mapping[str, Any]
End = Mapping[str, Any]


def blocks(result: Result, display: str) -> Blocks:
    """Ends, movement, and load that stays or repeats, where the result has any; older results have none."""
    yield "Ends of bonded pieces", list(ends(result, display))
    yield "Movement of unlike materials", list(movement(result, display))
    yield LASTING, list(lasting(result.get("lasting") or []))


def ends(result: Result, display: str) -> Iterator[Part]:
    """Every end with its shear and peel, both published closed forms beside them, and what would help."""
    listed: Sequence[End] = result.get("ends") or []
    if not listed:
        return
    worst = worst_of(listed)
    svg = end_svg(worst, display=display)
    if svg:
        place = _where(worst, display)
        words = f"{place[:1].upper()}{place[1:]}: stress from the end inwards, combination {worst['combination']}."
        yield figure(svg, words, 0.86)
    of = unit("MPa", display)
    columns = [
        column("End", share=1),
        column(f"End shear, {of.text}", side="right"),
        column(f"End peel, {of.text}", side="right"),
        column(f"Mean shear, {of.text}", side="right"),
        column("Utilisation", side="right"),
    ]
    rows: list[list[Any]] = []
    for end in listed:
        rows.append(
            [
                _where(end, display),
                of.number(end.get("end_shear")),
                of.number(end.get("end_peel")),
                of.number(end.get("mean_shear_at_end")),
                used(end.get("utilisation")),
            ]
        )
    yield table(columns, rows)
    yield pairs(_facts(worst, display))
    yield from _changes(worst, display)


def worst_of(listed: Sequence[End]) -> End:
    """The end that is used hardest; of equals the first."""
    return max(listed, key=lambda end: float(f"{float(end.get('utilisation') or 0.0):.6g}"))


def _where(end: End, display: str) -> str:
    side = "start" if end["side"] == "left" else "end"
    return f"{side} of {end['piece']}, at {quantity(end['at'], 'mm', display)}"


def _facts(end: End, display: str) -> list[tuple[str, str]]:
    def stress(value: object) -> str:
        return quantity(value, "MPa", display, 3)

    rows = [("To be picked up at once", quantity(end.get("force_to_pick_up"), "N", display))]
    for key, name in (("roberts", "By Roberts (1989), shear and peel"), ("smith_teng", "By Smith and Teng (2001)")):
        pair = end.get(key)
        if pair:
            rows.append((name, f"{stress(pair['shear'])} and {stress(pair['peel'])}"))
    limits = end.get("limits") or []
    if limits:
        top = max(limits, key=lambda limit: float(limit["utilisation"]))
        rows.append(("Governs", f"{top['what']}: it resists {stress(top['resistance'])}"))
    if end.get("free_strain"):
        told = f"{stress(end['peak_shear'])} and {stress(end['peak_peel'])}"
        rows.append(("With free strain, shear and peel", f"{told} ({end['free_strain']})"))
    held = end.get("hold_down")
    if held:
        pull = quantity(held["force"], "N", display, 3)
        rows.append(("End fasteners would have to hold", f"{pull} within {quantity(held['within'], 'mm', display, 2)}"))
    return rows


def _changes(end: End, display: str) -> Iterator[Part]:
    listed = end.get("changes") or []
    if not listed:
        return
    of = unit("MPa", display)
    columns = [
        column("What would change it", share=1),
        column(f"Shear, {of.text}", side="right"),
        column(f"Peel, {of.text}", side="right"),
        column("Utilisation", side="right"),
    ]
    rows = []
    for each in listed:
        used = each.get("utilisation")
        rows.append(
            [
                in_units(str(each["what"]), display),
                of.number(each["end_shear"], 3),
                of.number(each["end_peel"], 3),
                DASH if used is None else utilisation(used),
            ]
        )
    yield sub("What to change", f"at the {_where(end, display)}")
    yield table(columns, rows)


def _place(each: End, display: str) -> str:
    name = str(each["piece"])
    return f"{name[:1].upper()}{name[1:]}, at {quantity(each['at'], 'mm', display)}"


def _strain(value: object) -> str:
    """A free strain as what people measure: 0.57 mm on a metre."""
    return f"{float(str(value)) * 1e3:.3g} mm/m".replace("-", MINUS)


def _top(listed: Sequence[End], display: str) -> str:
    """What stands in the way of the worst of them."""
    worst = worst_of(listed)
    limits = worst.get("limits") or []
    if not limits:
        return ""
    top = max(limits, key=lambda limit: float(limit["utilisation"]))
    return f" Governs: {top['what']}, which resists {quantity(top['resistance'], 'MPa', display, 3)}."


def end_svg(end: End, *, display: str = "SI", width: float = 560.0, where: str = "") -> str:
    """Shear and peel from an end inwards; "" where the result keeps no course."""
    course = end.get("distribution") or {}
    if len(course.get("at") or ()) < 2:
        return ""
    drawing = Drawing(width)
    size = unit("mm", display)
    at = [place * size.factor for place in course["at"]]
    x = Axis(0.0, max(at), 60.0, width - 110.0)
    distribution = {"at": at, "shear": [abs(v) for v in course["shear"]], "peel": course["peel"]}
    foot = stress_plot(
        drawing, x, 12.0, distribution, display=display, mean=end.get("mean_shear_at_end"), limits=_limits(end)
    )
    across(drawing, x, foot + 6, f"From the end [{size.text}]", most=7)
    drawing.height = foot + 44
    return drawing.svg(
        "bond-end", "Stress at the end of a bond", f"Shear and peel along the bond, {where or _where(end, display)}."
    )


def _limits(end: End) -> dict[str, float]:
    found = {}
    for limit in end.get("limits") or []:
        if str(limit["what"]).endswith("peel"):
            found["peel limit"] = float(limit["resistance"])
        elif str(limit["what"]).endswith("shear yield"):
            found["shear limit"] = float(limit["resistance"])
    return found


def movement(result: Result, display: str) -> Iterator[Part]:
    """Every bond of unlike materials that moves: free strain, what it brings to the end, what another line would."""
    listed: Sequence[Mapping[str, Any]] = result.get("movement") or []
    if not listed:
        return
    of, size = unit("MPa", display), unit("mm", display)
    columns = [
        column("Piece, end", share=1),
        column(f"Free, {size.text}", side="right"),
        column(f"Shear, {of.text}", side="right"),
        column(f"Peel, {of.text}", side="right"),
        column(f"Slip, {size.text}", side="right"),
        column(f"Transfer, {size.text}", side="right"),
        column("Utilisation", side="right"),
    ]
    rows: list[list[Any]] = []
    for each in listed:
        rows.append(
            [
                f"{each['piece']}, at {quantity(each['at'], 'mm', display)}",
                size.number(each["free_movement"], 3),
                of.number(each["end_shear"], 3),
                of.number(each["end_peel"], 3),
                size.number(each["end_slip"], 3),
                size.number(each["transfer_length"], 3),
                used(each.get("utilisation")),
            ]
        )
    yield table(columns, rows)
    causes = dict.fromkeys(
        f"{str(each['cause']).replace('-', MINUS)}: free strain {_strain(each['free_strain'])}" for each in listed
    )
    text = "; ".join(causes).replace("-", MINUS)
    yield {
        "kind": "text",
        "text": f"{text[:1].upper()}{text[1:]}. Free: movement of half the length if nothing held it. Shear and peel: "
        f"from the free strain alone, an upper estimate; the utilisation counts the loads too.{_top(listed, display)}",
    }
    worst = worst_of(listed)
    svg = end_svg({**worst, "limits": ()}, display=display, where=f"movement at {worst['piece']}")
    if svg:
        cause = str(worst["cause"]).replace("-", MINUS)
        yield figure(svg, f"{_place(worst, display)}: stress from the end inwards, free strain alone, {cause}.", 0.86)
    offers = [offer for each in listed for offer in each.get("what_if") or []]
    if offers:
        heads = [column("Another bond line", share=1), column(f"Shear, {of.text}", side="right")]
        heads += [column(f"Slip, {size.text}", side="right"), column("Utilisation", side="right")]
        yield table(
            heads,
            [
                [
                    in_units(str(each["what"]), display),
                    of.number(each["end_shear"], 3),
                    size.number(each["end_slip"], 3),
                    DASH if each.get("utilisation") is None else utilisation(each["utilisation"]),
                ]
                for each in offers
            ],
        )
