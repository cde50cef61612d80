"""What a check found about fasteners and slip, as parts of the page and of the sheet: fall-back, slip, spacing."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from server.sheets import setting_out
from server.sheets.section_view import joint_numbers
from server.sheets.tables import column, limit_rows, table, used
from server.sheets.values import DASH, in_units, quantity, unit
from server.working import readable

Part = dict[str, Any]
Result = Mapping[str, Any]


def blocks(result: Result, display: str) -> Iterator[tuple[str, list[Part]]]:
    """Titled blocks, those with nothing to say left out; a result from before this was reckoned has none."""
    for title, parts in (
        ("What the joints give", list(_slip(result, display))),
        ("Fall-back: with the glue gone", list(_fall_back(result, display))),
        ("Fasteners: spacing and setting out", list(_fasteners(result, display))),
    ):
        if parts:
            yield title, parts


def _slip(result: Result, display: str) -> Iterator[Part]:
    """Slip of the joints as built, and what is left of the bending stiffness."""
    section = result.get("section") or {}
    EI, left = section.get("EI"), section.get("effective_EI")
    slips = (result.get("diagrams") or {}).get("slips")
    if not slips or not EI or left is None:
        return
    pairs = [
        ["EI with rigid joints", quantity(EI, "N*mm2", display, 5)],
        ["Effective EI, with slip", quantity(left, "N*mm2", display, 5)],
        ["Share of the stiffness left", f"{100 * left / EI:.1f} %"],
    ]
    code = result.get("annex_b")
    if code:
        pairs.append(["EI by EN 1995-1-1 Annex B, for comparison", quantity(code["EI_ef"], "N*mm2", display, 5)])
    yield {"kind": "pairs", "pairs": pairs}
    length, flow = unit("mm", display), unit("N/mm", display)
    numbers = joint_numbers(result)
    rows = [
        [str(numbers.get(joint["id"], "")), joint["id"], length.number(joint.get("slip")),
         flow.number(joint.get("shear_flow")), length.number(joint.get("at")), str(joint.get("place") or DASH)]
        for joint in result.get("joints") or () if joint.get("slip") is not None
    ]  # fmt: skip
    if rows:
        columns = [
            column("No."), column("Joint", share=1), column(f"Slip, {length.text}", side="right"),
            column(f"Shear flow, {flow.text}", side="right"), column(f"At, {length.text}", side="right"),
            column("Place", share=0.8),
        ]  # fmt: skip
        yield table(columns, rows)


def _fall_back(result: Result, display: str) -> Iterator[Part]:
    found = result.get("fall_back")
    if not found:
        return
    yield {"kind": "text", "text": in_units(str(found["text"]), display)}
    pairs = [
        ["Verdict", str(found["verdict"])],
        ["Share of the stiffness left", f"{100 * float(found['stiffness_left']):.1f} %"],
        ["Effective EI", quantity(found.get("effective_EI"), "N*mm2", display, 5)],
        ["Factor with the glue gone", readable(float(found["factor"]), 4) if found.get("factor") else DASH],
    ]
    for sag in found.get("deflection") or ():
        ratio = f", span over {readable(float(int(sag['span_over'])), 6)}" if sag.get("span_over") else ""
        pairs.append(["Deflection (told, not judged)", quantity(sag["deflection"], "mm", display) + ratio])
    yield {"kind": "pairs", "pairs": pairs}
    numbers = joint_numbers(result)
    length, flow = unit("mm", display), unit("N/mm", display)
    rows = [
        [
            str(numbers.get(joint["id"], "")), joint["id"], flow.number(joint.get("shear_flow")),
            length.number(joint.get("slip")), quantity(joint.get("force_judged", joint.get("force")), "N", display),
            quantity(joint.get("resistance"), "N", display), used(joint.get("utilisation")),
        ]
        for joint in found.get("joints") or ()
    ]  # fmt: skip
    if rows:
        columns = [
            column("No."), column("Joint", share=1), column(f"Shear flow, {flow.text}", side="right"),
            column(f"Slip, {length.text}", side="right"), column("Force each", side="right"),
            column("Resistance", side="right"), column("Utilisation", side="right"),
        ]  # fmt: skip
        yield table(columns, rows)
        own = [j for j in found["joints"] if j.get("force_judged", j.get("force")) != j.get("force")]
        if own:
            named = ", ".join(str(numbers.get(j["id"], j["id"])) for j in own)
            words = "Force each with the rib's own width of the skin, which is more than its share in the whole section"
            yield {"kind": "text", "text": f"Joint {named}: {words[0].lower()}{words[1:]}."}
    limits = [
        [piece["id"], row[0], row[2], row[3], row[6]]
        for piece in found.get("pieces") or ()
        for row in limit_rows(piece, length, display)
    ]
    if limits:
        yield {"kind": "sub", "title": "Pieces without composite action", "about": ""}
        columns = [
            column("Piece"), column("Limit", share=1), column("Resistance", side="right"),
            column("Demand", side="right"), column("Utilisation", side="right"),
        ]  # fmt: skip
        yield table(columns, limits)


def _fasteners(result: Result, display: str) -> Iterator[Part]:
    laid = setting_out.laid_out(result)
    if laid:
        yield setting_out.figure(result, display)
        yield from setting_out.tables(result, display)
    yield from setting_out.schedule(result, display)
