"""Rivets, screws and bolts in thin metal: the tested shear resistance, and bearing of either sheet."""

from __future__ import annotations

from typing import Any

from server.checks.fastener_parts import NAMES, Case, Found
from server.documents.fastener import Part
from server.mechanics import yield_limit as limit
from server.mechanics.yield_limit import Mode

CODE = "EN 1993-1-3:2006"
SHAPES = {
    "fastener": Mode("fastener", "the fastener shears", ""),
    "side": Mode("side", "the side sheet bears", ""),
    "main": Mode("main", "the main sheet bears", ""),
    "end": Mode("end", "the sheet tears out at its end", ""),
}
EDGE = 3.0  # diameters to the end of a sheet, taken where none is given


def find(case: Case) -> Found:
    """The least of the tested shear resistance and the bearing of either sheet, each shear plane."""
    document, book = case.document, case.book
    assert document.dowel.tested is not None
    book.begin("Thin metal, each shear plane")
    book.note("Shear resistance of the fastener", "Tested or declared.", document.dowel.tested, "N", symbol="F_v")
    loads = {"fastener": document.dowel.tested}
    thicknesses = [part.thickness for _, part in case.parts()]
    for name, part in case.parts():
        loads[name] = _bearing(case, name, part, min(thicknesses), max(thicknesses))
    if document.end_distance is not None:
        thinnest = min(case.parts(), key=lambda each: each[1].thickness * (each[1].ultimate or 0.0))[1]
        assert thinnest.ultimate is not None
        loads["end"] = book.step(
            "Tearing out at the end of the sheet",
            "F_end",
            "f_u*e_1*t/1.2",
            {
                "f_u": (thinnest.ultimate, "MPa"),
                "e_1": (document.end_distance, "mm"),
                "t": (thinnest.thickness, "mm"),
            },
            "N",
            f"{CODE} Tables 8.1 to 8.4",
        )
    key, least = limit.weakest(list(loads.items()))
    _cautions(case)
    more: dict[str, Any] = {
        "embedment": {},
        "diameter_effective": document.dowel.diameter,
        "slip_modulus": None,
        "slip_modulus_ultimate": None,
        "spacing_min": 3 * document.dowel.diameter,
        "distances": [],
    }
    book.note(
        "Least spacing",
        "Three diameters between fasteners, in line of the force.",
        more["spacing_min"],
        "mm",
        f"{CODE} Tables 8.1 to 8.4",
        symbol="p_1",
    )
    if document.row is not None:
        whole = document.row.count * least
        more["row"] = {
            "count": document.row.count,
            "spacing": document.row.spacing,
            "counting": float(document.row.count),
            "resistance": whole,
        }
        book.note("Row", "Every fastener counts; long joints share unevenly.", whole, "N", symbol="F_row")
    return Found(loads, key, least, SHAPES, more)


def _bearing(case: Case, name: str, part: Part, thin: float, thick: float) -> float:
    """Bearing of one sheet [N], by the type of fastener; of the middle sheet half for each plane."""
    document = case.document
    assert part.ultimate is not None
    d, t = document.dowel.diameter, part.thickness
    half = 0.5 if name == "main" and document.shear_planes == 2 else 1.0
    values = {"f_u": (part.ultimate, "MPa"), "d": (d, "mm"), "t": (t, "mm")}
    title = f"Bearing of the {NAMES[name].replace('member', 'sheet')}"
    before = "0.5*" if half < 1 else ""
    if document.dowel.type in ("bolt", "dowel"):
        end = document.end_distance if document.end_distance is not None else EDGE * d
        values["e_1"] = (end, "mm")
        soft = "min(1, (0.8*t + 1.5)/2.5)" if t <= 1.25 else "1"
        text = f"{before}2.5*min(1, e_1/(3*d))*{soft}*f_u*d*t"
        return case.book.step(title, f"F_b_{name}", text, values, "N", f"{CODE} Table 8.4, t in mm")
    factor = 3.6 if document.dowel.type == "rivet" else 3.2
    values["t_thin"] = (thin, "mm")
    share = min(1.0, max(0.0, (thick / thin - 1) / 1.5))
    values["s"] = (share, "")
    alpha = f"(min(2.1, {factor}*sqrt(t_thin/d))*(1 - s) + 2.1*s)"
    return case.book.step(
        title,
        f"F_b_{name}",
        f"{before}{alpha}*f_u*d*t",
        values,
        "N",
        f"{CODE} Table {'8.1' if document.dowel.type == 'rivet' else '8.2'}; s: equal sheets 0, 2.5 times 1",
    )


def _cautions(case: Case) -> None:
    document, findings = case.document, case.findings
    if document.end_distance is None:
        findings.caution(
            "end of the sheet", "The distance to its end is not given; at least three diameters are taken for granted."
        )
    if any(part.kind == "aluminium" for _, part in case.parts()):
        findings.caution(
            "aluminium", "Bearing is reckoned by the rules for steel sheet; compare with EN 1999-1-4 or your own tests."
        )
    if any(part.thickness > 4 or part.thickness < 0.5 for _, part in case.parts()):
        findings.caution("thickness", "The rules are for sheets of about 0.5 to 4 mm; beyond them trust tests.")
    findings.caution(
        "tested value",
        "The tested shear resistance holds for the sheets, the edges and the tool it was tested with. Pull-through, "
        "prying and fatigue are not in it.",
        answer=True,
    )
