"""One fastener by EN 1995-1-1: embedment, yield moment, yield modes, rope effect, rows, distances, slip."""

from __future__ import annotations

from typing import Any

from server import units
from server.checks.fastener_parts import (
    CODE,
    NAMES,
    NUMBERS,
    PANELS,
    Case,
    Found,
    characteristic_density,
    slip,
    spacings,
)
from server.checks.fastener_parts import depth as depths
from server.documents.fastener import Dowel, Part
from server.mechanics import dowel_distances as distances
from server.mechanics import embedment
from server.mechanics import yield_limit as limit
from server.mechanics.dowel_distances import Distances
from server.mechanics.yield_limit import Mode
from server.working import Working

LARGEST_NAIL, LARGEST_SMALL_SCREW, LARGEST_BOLT = 8.0, 6.0, 30.0  # mm
NAIL_WIRE = 600.0  # MPa, least tensile strength of a nail's wire: 8.3.1.1(2)
DENSE = 500.0  # kg/m3, from which timber is pre-drilled: 8.3.1.1(2)


def find(case: Case) -> Found:
    """The characteristic resistance of one shear plane, every mode and what goes with it."""
    case.book.begin("Fastener")
    diameter = _diameter(case)
    nailed = _as_nail(case.document.dowel, diameter)
    moment = _yield_moment(case, diameter)
    t_1, t_2 = depths(case)
    strengths = _embedment(case, diameter, nailed)
    values = {
        "d": (diameter, "mm"),
        "M_y": (moment, "N*mm"),
        "t_1": (t_1, "mm"),
        "t_2": (t_2, "mm"),
        **{f"f_h{NUMBERS[name]}": (value, "MPa") for name, value in strengths.items()},
    }
    found = _of_the_plate(case, values) if case.plate() else _of_wood(case, values)
    found.more |= {
        "embedment": strengths,
        "yield_moment": moment,
        "diameter_effective": diameter,
        "penetration": t_2 if case.document.shear_planes == 1 else t_1,
    }
    _rules(case, diameter, nailed, t_1 if case.document.shear_planes == 2 else t_2)
    found.more |= _row(case, diameter, nailed, found.resistance)
    found.more |= spacings(case, _distances(case, nailed))
    found.more |= slip(case, diameter, nailed=nailed and case.document.dowel.type == "nail")
    return found


def _diameter(case: Case) -> float:
    """The diameter that yields [mm]: of a screw 1.1 times the thread's core."""
    dowel = case.document.dowel
    if dowel.type != "screw":
        return dowel.diameter
    if dowel.root_diameter is not None:
        return case.book.step(
            "Effective diameter of the screw",
            "d_ef",
            "1.1*d_root",
            {"d_root": (dowel.root_diameter, "mm")},
            "mm",
            f"{CODE} 8.7.1(3)",
        )
    case.findings.caution(
        "diameter of the screw",
        "The diameter typed is taken as the effective one, as for a smooth shank that reaches at least 4 d into the "
        "main member. Where the thread crosses the joint, enter root_diameter: 1.1 times the core is then used.",
    )
    return dowel.diameter


def _as_nail(dowel: Dowel, diameter: float) -> bool:
    """Whether the rules of nails hold: nails up to 8 mm, screws up to 6 mm."""
    most = {"nail": LARGEST_NAIL, "screw": LARGEST_SMALL_SCREW}.get(dowel.type, 0.0)
    return diameter <= most


def _yield_moment(case: Case, diameter: float) -> float:
    dowel, book = case.document.dowel, case.book
    if dowel.yield_moment is not None:
        book.note("Yield moment", "As declared.", dowel.yield_moment, "N*mm", symbol="M_y")
        return dowel.yield_moment
    square = dowel.type == "nail" and dowel.shape in ("square", "grooved")
    if dowel.bending_yield is not None:
        modulus = 4 if dowel.type == "nail" and dowel.shape == "square" else 6
        return book.step(
            "Yield moment",
            "M_y",
            f"f_yb*d**3/{modulus}",
            {"f_yb": (dowel.bending_yield, "MPa"), "d": (diameter, "mm")},
            "N*mm",
            "plastic section modulus times the bending yield strength",
        )
    assert dowel.ultimate is not None
    if dowel.type == "nail" and dowel.ultimate < NAIL_WIRE:
        case.findings.caution(
            "steel of the nail",
            f"The rule for nails holds for wire of at least {NAIL_WIRE:g} MPa; "
            f"{units.show(dowel.ultimate, 'stress', case.document.display)} is given. Ask for its yield moment.",
        )
    source = f"{CODE} eq. (8.14)" if dowel.type in ("nail", "screw") else f"{CODE} eq. (8.30)"
    return book.step(
        "Yield moment",
        "M_y",
        f"{0.45 if square else 0.3}*f_u*d**2.6",
        {"f_u": (dowel.ultimate, "MPa"), "d": (diameter, "mm")},
        "N*mm",
        source,
    )


def _embedment(case: Case, diameter: float, nailed: bool) -> dict[str, float]:
    """Embedment strength of every wooden member [MPa]."""
    case.book.begin("Embedment")
    return {name: _pressed(case, name, part, diameter, nailed) for name, part in case.wooden()}


def _pressed(case: Case, name: str, part: Part, diameter: float, nailed: bool) -> float:
    symbol, title = f"f_h{NUMBERS[name]}", f"Embedment strength of the {NAMES[name]}"
    if part.embedment is not None:
        case.book.note(title, "As given.", part.embedment, "MPa", symbol=symbol)
        return part.embedment
    equation = embedment.nailed(part.kind, case.document.predrilled) if nailed else embedment.bolted(part.kind)
    if not nailed and part.kind == "hardboard":
        case.findings.miss("a rule for bolts in hardboard: give the board's own embedment strength.")
    known: dict[str, Any] = {"d": (diameter, "mm"), "t": (part.thickness, "mm")}
    if "rho_k" in equation.symbols:
        known["rho_k"] = (characteristic_density(case, name, part), "kg/m3")
    values = {each: known[each] for each in equation.symbols}
    if nailed or part.kind in PANELS or not part.angle:
        return case.book.step(title, symbol, equation.text, values, "MPa", equation.source)
    along = case.book.step(f"{title} along the grain", f"{symbol}_0", equation.text, values, "MPa", equation.source)
    factor = case.book.step(
        f"Embedment along over across the grain, {NAMES[name]}",
        f"k_90_{NUMBERS[name]}",
        embedment.across(part.kind, part.wood),
        {"d": (diameter, "mm")},
        source=f"{CODE} eq. (8.33)",
    )
    return _at_an_angle(case.book, title, symbol, along, factor, part.angle, NUMBERS[name])


def _at_an_angle(
    book: Working, title: str, symbol: str, along: float, factor: float, angle: float, number: str
) -> float:
    return book.step(
        f"{title} at {angle:g} deg to the grain",
        symbol,
        f"f_h{number}_0/(k_90_{number}*sin_alpha**2 + cos_alpha**2)",
        {
            f"f_h{number}_0": (along, "MPa"),
            f"k_90_{number}": (factor, ""),
            "sin_alpha": (_sin(angle), ""),
            "cos_alpha": (_sin(90 - angle), ""),
        },
        "MPa",
        f"{CODE} eq. (8.31)",
    )


def _sin(angle: float) -> float:
    from math import radians, sin

    return sin(radians(angle))


# --- yield modes ------------------------------------------------------------------------------------------------------

Values = dict[str, tuple[float, str]]


def _of_wood(case: Case, values: Values) -> Found:
    beta = case.book.step(
        "Ratio of the embedment strengths", "beta", "f_h2/f_h1", {n: values[n] for n in ("f_h1", "f_h2")}
    )
    values = {**values, "beta": (beta, "")}
    double = case.document.shear_planes == 2
    modes = limit.WOOD_DOUBLE if double else limit.WOOD_SINGLE
    source = f"{CODE} eq. ({'8.7' if double else '8.6'})"
    loads, parts = _loads(case, modes, values, source)
    return _found(case, loads, {mode.key: mode for mode in modes}, parts)


def _of_the_plate(case: Case, values: Values) -> Found:
    """A steel plate and wood: thin and thick plates by their own modes, a plate between the two by both."""
    name = case.plate()
    plate = case.document.side if name == "side" else case.document.main
    double = case.document.shear_planes == 2
    if name == "main" and double:
        inside, beside = _loads(case, limit.PLATE_INSIDE, values, f"{CODE} eq. (8.11)")
        return _found(case, inside, {mode.key: mode for mode in limit.PLATE_INSIDE}, beside)
    if not double:
        # One wooden member: its strength and its thickness stand in the equations of the plate.
        wood = NUMBERS["main" if name == "side" else "side"]
        values = {**values, "f_h1": values[f"f_h{wood}"], "t_1": values[f"t_{wood}"]}
    share = limit.interpolation(plate.thickness, case.document.dowel.diameter)
    thin, thick = (
        (limit.PLATES_THIN_OUTSIDE, limit.PLATES_THICK_OUTSIDE) if double else (limit.PLATE_THIN, limit.PLATE_THICK)
    )
    numbers = ("8.12", "8.13") if double else ("8.9", "8.10")
    loads: dict[str, float] = {}
    parts: dict[str, dict[str, float]] = {}
    for used, modes, number in ((share < 1, thin, numbers[0]), (share > 0, thick, numbers[1])):
        if used:
            more, more_parts = _loads(case, modes, values, f"{CODE} eq. ({number})")
            loads |= more
            parts |= more_parts
    shapes = {mode.key: mode for mode in (*thin, *thick) if mode.key in loads}
    if share > 0 and case.document.dowel.type != "nail":
        case.findings.caution(
            "hole in the plate",
            "A plate counts as thick only where its hole is wider than the fastener by less than 0.1 d.",
        )
    if share in (0.0, 1.0):
        return _found(case, loads, shapes, parts)
    lows = limit.weakest([(mode.key, loads[mode.key]) for mode in thin])
    highs = limit.weakest([(mode.key, loads[mode.key]) for mode in thick])
    resistance = case.book.step(
        "Resistance of one shear plane, plate between thin and thick",
        "F_v_R",
        "F_thin + (F_thick - F_thin)*(2*t/d - 1)",
        {
            "F_thin": (lows[1], "N"),
            "F_thick": (highs[1], "N"),
            "t": (plate.thickness, "mm"),
            "d": (case.document.dowel.diameter, "mm"),
        },
        "N",
        f"{CODE} 8.2.3(1)",
    )
    governing = lows[0] if share < 0.5 else highs[0]
    more_said = {"interpolated": {"thin": list(lows), "thick": list(highs), "share": share}, **_beside(parts)}
    return Found(loads, governing, resistance, shapes, more_said)


def _beside(parts: dict[str, dict[str, float]]) -> dict[str, Any]:
    return {"yielding": {key: each["yielding"] for key, each in parts.items()}, "rope": _ropes(parts)}


def _ropes(parts: dict[str, dict[str, float]]) -> dict[str, float]:
    return {key: each["rope"] for key, each in parts.items()}


def _loads(
    case: Case, modes: tuple[Mode, ...], values: Values, source: str
) -> tuple[dict[str, float], dict[str, dict[str, float]]]:
    """The load of every mode, with what the pull of the fastener adds."""
    from server.working import formula

    case.book.begin("Yield modes, each shear plane")
    loads, parts = {}, {}
    for mode in modes:
        symbol = f"F_{mode.key}"
        given = {name: values[name] for name in formula(mode.formula).names}
        title = f"Mode {mode.key}: {mode.words}"
        yielding = case.book.step(title, symbol, mode.formula, given, "N", f"{source} ({mode.key})")
        rope = _rope(case, mode, yielding)
        loads[mode.key] = yielding + rope
        parts[mode.key] = {"yielding": yielding, "rope": rope}
    return loads, parts


def _rope(case: Case, mode: Mode, yielding: float) -> float:
    """A quarter of the withdrawal resistance, at most a share of the yielding part."""
    dowel = case.document.dowel
    if not mode.rope or not dowel.withdrawal:
        return 0.0
    share = limit.ROPE_LIMITS[f"{dowel.shape} nail" if dowel.type == "nail" else dowel.type]
    if not share:
        return 0.0
    return case.book.step(
        f"Mode {mode.key}: pull of the fastener",
        f"F_rope_{mode.key}",
        f"min(F_ax/4, {share:g}*F_{mode.key})",
        {"F_ax": (dowel.withdrawal, "N"), f"F_{mode.key}": (yielding, "N")},
        "N",
        f"{CODE} 8.2.2(2)",
    )


def _found(case: Case, loads: dict[str, float], shapes: dict[str, Mode], parts: dict[str, dict[str, float]]) -> Found:
    key, _ = limit.weakest(list(loads.items()))
    part = parts[key]
    if part["rope"]:
        resistance = case.book.step(
            f"Resistance of one shear plane: mode {key} governs",
            "F_v_R",
            f"F_{key} + F_rope_{key}",
            {f"F_{key}": (part["yielding"], "N"), f"F_rope_{key}": (part["rope"], "N")},
            "N",
        )
    else:
        resistance = loads[key]
        case.book.note(
            "Resistance of one shear plane", f"Mode {key} governs: the least of all.", resistance, "N", symbol="F_v_R"
        )
    return Found(loads, key, resistance, shapes, _beside(parts))


# --- rules, rows, distances -------------------------------------------------------------------------------------------


def _rules(case: Case, diameter: float, nailed: bool, penetration: float) -> None:
    """What the code asks of sizes and holes; what is not met is missing."""
    document, findings = case.document, case.findings
    dowel = document.dowel
    if dowel.type in ("bolt", "dowel") or not nailed:
        if diameter > LARGEST_BOLT:
            findings.miss(f"a rule for diameters above {LARGEST_BOLT:g} mm: EN 1995-1-1 8.5 and 8.6 end there.")
        if dowel.type == "dowel" and diameter <= LARGEST_SMALL_SCREW:
            findings.miss(f"a rule for dowels up to {LARGEST_SMALL_SCREW:g} mm: EN 1995-1-1 8.6(2) begins above it.")
    if dowel.type == "nail":
        _penetration(case, penetration, 8 if dowel.shape in ("round", "square") else 6)
    if dowel.type == "screw" and not document.predrilled:
        hard = any(part.wood == "hardwood" for _, part in case.wooden())
        if hard or diameter > LARGEST_SMALL_SCREW:
            findings.caution(
                "pre-drilling",
                "Screws in hardwood, and screws above 6 mm in softwood, go into pre-drilled holes (EN 1995-1-1 "
                "10.4.5), unless the screw's own approval says otherwise.",
                answer=True,
            )
    if dowel.type == "nail" and not document.predrilled:
        for name, part in case.wooden():
            if part.kind in embedment.WOOD:
                _splitting(case, name, part)


def _penetration(case: Case, penetration: float, least: int) -> None:
    d = case.document.dowel.diameter
    inside = case.document.side if case.document.shear_planes == 2 else case.document.main
    if not inside.metal and penetration < least * d * (1 - 1e-9):
        display = case.document.display
        case.findings.miss(
            f"penetration of the point: {units.show(penetration, 'length', display)} is less than {least} d = "
            f"{units.show(least * d, 'length', display)} (EN 1995-1-1 8.3.1.2); use a longer nail."
        )


def _splitting(case: Case, name: str, part: Part) -> None:
    """When timber must be pre-drilled for nails."""
    d, display = case.document.dowel.diameter, case.document.display
    density = part.density if part.density is not None else 0.0
    if density >= DENSE or d > LARGEST_SMALL_SCREW:
        why = f"its density is {density:g} kg/m3" if density >= DENSE else "nails above 6 mm split it"
        case.findings.miss(f"pre-drilling of the {NAMES[name]}: {why} (EN 1995-1-1 8.3.1.1(2)); pre-drill it.")
        return
    if not density:
        return
    factor, over, equation = (14, 200, "8.19") if part.splits else (7, 400, "8.18")
    least = case.book.step(
        f"Least thickness of the {NAMES[name]} without pre-drilling",
        f"t_least_{NUMBERS[name]}",
        f"max({factor}*d, (13*d - 30)*rho_k/{over})",
        {"d": (d, "mm"), "rho_k": (density, "kg/m3")},
        "mm",
        f"{CODE} eq. ({equation}), rho_k in kg/m3",
        "Rules of the code",
    )
    if part.thickness < least * (1 - 1e-9):
        case.findings.miss(
            f"pre-drilling of the {NAMES[name]}: {units.show(part.thickness, 'length', display)} is thinner than "
            f"{units.show(least, 'length', display)}, from which nails may be driven without (EN 1995-1-1 eq. "
            f"({equation})); pre-drill it."
        )


def _row(case: Case, diameter: float, nailed: bool, resistance: float) -> dict[str, Any]:
    """How many of a row along the grain count."""
    row = case.document.row
    if row is None:
        return {}
    case.book.begin("Fasteners in a row")
    d = case.document.dowel.diameter
    spacing = row.spacing
    if spacing is None:
        spacing = max(each.a1 for each in _distances(case, nailed).values())
    angle = max((part.angle for _, part in case.wooden() if part.kind in embedment.WOOD), default=0.0)
    ratio, n = spacing / d, float(row.count)
    if nailed:
        counting, exponent = distances.counting_nails(row.count, ratio, case.document.predrilled)
        if exponent is None:
            case.findings.miss(
                f"spacing in the row: {ratio:.3g} d is less than EN 1995-1-1 Table 8.1 begins with; space them wider."
            )
            case.book.note("Fasteners that count", "The spacing is below the table: one counts.", 1.0, symbol="n_ef")
        else:
            counting = case.book.step(
                "Fasteners that count",
                "n_ef",
                "n**k_ef",
                {"n": (n, ""), "k_ef": (exponent, "")},
                source=f"{CODE} eq. (8.17), Table 8.1",
            )
    else:
        along = "min(n, n**0.9*(a_1/(13*d))**0.25)"
        values: Values = {"n": (n, ""), "a_1": (spacing, "mm"), "d": (d, "mm")}
        text = along if not angle else f"{along} + (n - {along})*alpha/90"
        counting = case.book.step(
            "Fasteners that count",
            "n_ef",
            text,
            values if not angle else {**values, "alpha": (angle, "deg")},
            source=f"{CODE} eq. (8.34)" + (", between it and n at 90 deg (8.5.1.1(4))" if angle else ""),
        )
    whole = case.book.step(
        "Resistance of the row, each shear plane",
        "F_row",
        "n_ef*F_v_R",
        {"n_ef": (counting, ""), "F_v_R": (resistance, "N")},
        "N",
    )
    case.findings.caution(
        "rows",
        "A row counts n_ef for the part of the force along the grain; nails staggered by at least 1 d count fully.",
    )
    return {"row": {"count": row.count, "spacing": spacing, "counting": counting, "resistance": whole}}


def _distances(case: Case, nailed: bool) -> dict[str, Distances]:
    document = case.document
    d, of = document.dowel.diameter, {}
    for name, part in case.wooden():
        other = document.main if name == "side" else document.side
        if not nailed:
            of[name] = (
                distances.dowels(d, angle=part.angle)
                if document.dowel.type == "dowel"
                else (distances.bolts(d, angle=part.angle))
            )
        elif part.kind in PANELS:
            density = other.density or part.density or 0.0
            of[name] = distances.nails_in_panel(
                d, angle=part.angle, panel=part.kind, density=density, predrilled=document.predrilled
            )
        else:
            panel = other.kind if other.kind in PANELS else ""
            of[name] = distances.nails(
                d,
                angle=part.angle,
                density=part.density or 0.0,
                predrilled=document.predrilled,
                panel=panel,
                plate=other.metal,
            )
    return of
