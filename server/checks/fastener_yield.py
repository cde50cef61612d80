"""One fastener by the yield-limit equations of the NDS: reference value, every mode, adjusted value."""

from __future__ import annotations

from typing import Any

from server import units
from server.checks.fastener_parts import NAMES, PANELS, Case, Found, slip, spacings
from server.checks.fastener_parts import depth as depths
from server.documents.fastener import ADJUSTMENTS, Part
from server.mechanics import dowel_distances as distances
from server.mechanics import embedment
from server.mechanics import yield_limit as limit
from server.mechanics.yield_limit import Mode
from server.units.table import PSI as _PSI
from server.working import formula

CODE = "ANSI/AWC NDS-2018"
INCH = 25.4
PSI = float(_PSI)
BOLT_STEEL = 45e3  # psi, bending yield strength of bolts: footnotes of Tables 12A to 12I
THIN_STEEL, THICK_STEEL = 61850.0, 87000.0  # psi, bearing of steel plates below and from 1/4 in: Tables 12N, 12B
Values = dict[str, tuple[float, str]]


def find(case: Case) -> Found:
    """The reference value of one shear plane, and the adjusted one where adjustments are given."""
    document, book = case.document, case.book
    book.begin("Fastener")
    diameter = _diameter(case)
    bending = _bending(case, diameter)
    l_s, l_m = _lengths(case, diameter)
    book.begin("Dowel bearing")
    strengths = {name: _bearing(case, name, part, diameter) for name, part in case.parts()}
    values: Values = {
        "D": (diameter, "mm"),
        "F_yb": (bending, "MPa"),
        "l_s": (l_s, "mm"),
        "l_m": (l_m, "mm"),
        "F_em": (strengths["main"], "MPa"),
        "F_es": (strengths["side"], "MPa"),
    }
    values |= _coefficients(case, values)
    modes = limit.NDS_DOUBLE if document.shear_planes == 2 else limit.NDS_SINGLE
    loads = _loads(case, modes, values, diameter)
    key, reference = limit.weakest(list(loads.items()))
    both = ", half of the fastener's in double shear" if document.shear_planes == 2 else ""
    book.note("Reference value of one shear plane", f"Mode {key} governs{both}.", reference, "N", symbol="Z")
    found = Found(loads, key, reference, {mode.key: mode for mode in modes})
    found.more |= {
        "embedment": strengths,
        "bending_yield": bending,
        "diameter_effective": diameter,
        "penetration": l_m,
        "reference": reference,
        **_adjusted(case, reference),
    }
    found.more |= _row(case, reference)
    found.more |= spacings(
        case,
        {
            name: distances.american(
                document.dowel.diameter,
                angle=part.angle,
                predrilled=document.predrilled,
                hardwood=part.wood == "hardwood",
            )
            for name, part in case.wooden()
        },
    )
    found.more |= slip(case, diameter, nailed=document.dowel.type == "nail")
    if found.more["slip_modulus"] is not None:
        case.findings.caution(
            "slip modulus",
            "It is that of EN 1995-1-1 Table 7.1, from the mean density: the yield-limit method gives none for one "
            "fastener. Test your own where stiffness decides.",
        )
    return found


def _diameter(case: Case) -> float:
    """The diameter in the shear plane [mm]: of a thread that crosses the joint its root."""
    dowel = case.document.dowel
    if dowel.root_diameter is not None:
        case.book.note(
            "Diameter",
            "The root of the thread, which crosses the shear plane.",
            dowel.root_diameter,
            "mm",
            CODE,
            symbol="D",
        )
        return dowel.root_diameter
    if dowel.type == "screw":
        case.findings.caution(
            "diameter of the screw",
            "The diameter typed is taken in the equations. Where the thread crosses the joint the root diameter "
            "counts: enter root_diameter.",
        )
    if dowel.diameter > INCH * (1 + 1e-9):
        case.findings.miss("a rule for diameters above 1 in: the yield-limit equations of the NDS end there.")
    return dowel.diameter


def _bending(case: Case, diameter: float) -> float:
    """Bending yield strength [MPa]: as given, from the steel, or as the tables assume it."""
    dowel, book, findings = case.document.dowel, case.book, case.findings
    if dowel.bending_yield is not None:
        book.note("Bending yield strength", "As given.", dowel.bending_yield, "MPa", symbol="F_yb")
        return dowel.bending_yield
    if dowel.yield_moment is not None:
        return book.step(
            "Bending yield strength from the declared yield moment",
            "F_yb",
            "6*M_y/D**3",
            {"M_y": (dowel.yield_moment, "N*mm"), "D": (diameter, "mm")},
            "MPa",
        )
    if dowel.ultimate is not None and dowel.yield_ is not None:
        return book.step(
            "Bending yield strength",
            "F_yb",
            "(F_y + F_u)/2",
            {"F_y": (dowel.yield_, "MPa"), "F_u": (dowel.ultimate, "MPa")},
            "MPa",
            f"{CODE}, Appendix I.4",
        )
    if dowel.ultimate is not None:
        findings.caution(
            "bending yield strength",
            "It is found from the tensile strength alone, by the yield moment 0.3 f_u d^2.6 of EN 1995-1-1. Enter the "
            "bending yield strength (ASTM F1575), or the steel's yield strength beside the tensile one.",
        )
        return book.step(
            "Bending yield strength",
            "F_yb",
            "1.8*F_u*D**(-0.4)",
            {"F_u": (dowel.ultimate, "MPa"), "D": (diameter, "mm")},
            "MPa",
            "6 M_y/D^3 with M_y of EN 1995-1-1 eq. (8.30), D in mm",
        )
    listed = embedment.bending_yield_of_nails(dowel.diameter / INCH) if dowel.type in ("nail", "screw") else BOLT_STEEL
    if not listed:
        findings.miss("bending yield strength: the tables have none for this diameter; enter bending_yield.")
        listed = BOLT_STEEL
    strength = listed * PSI
    book.note(
        "Bending yield strength",
        "Not given: what the tables assume for such a fastener.",
        strength,
        "MPa",
        f"{CODE}, Appendix I, Table I1; bolts: Table 12A footnote",
        symbol="F_yb",
    )
    findings.caution(
        "bending yield strength",
        f"None is given; {units.show(strength, 'stress', case.document.display)} is taken, as the code's tables do. "
        "Enter that of your fastener (ASTM F1575).",
    )
    return strength


def _lengths(case: Case, diameter: float) -> tuple[float, float]:
    """Bearing lengths in the side and the main member [mm]."""
    document = case.document
    side, main = depths(case)
    dowel = document.dowel
    if dowel.type not in ("nail", "screw") or document.main.metal:
        return side, main
    nominal = dowel.diameter
    penetration = main if document.shear_planes == 1 else side
    if dowel.length is not None and document.shear_planes == 1:
        penetration = dowel.length - document.side.thickness
        if penetration < 10 * nominal:
            main = min(document.main.thickness, max(penetration - nominal, 1e-6))
            case.book.note(
                "Bearing length in the main member",
                "Less than 10 D stands in it, so half of the tapered tip (2 D long) is not counted.",
                main,
                "mm",
                f"{CODE}, 12.3.5",
                symbol="l_m",
            )
    least = 4 if dowel.type == "screw" and nominal >= INCH / 4 else 6
    if penetration < least * nominal * (1 - 1e-9):
        display = document.display
        case.findings.miss(
            f"penetration of the point: {units.show(penetration, 'length', display)} is less than {least} D = "
            f"{units.show(least * nominal, 'length', display)} (NDS 12.1); use a longer fastener."
        )
    return side, main


def _bearing(case: Case, name: str, part: Part, diameter: float) -> float:
    """Dowel bearing strength of a member [MPa]."""
    symbol = "F_es" if name == "side" else "F_em"
    title = f"Dowel bearing strength of the {NAMES[name]}"
    if part.embedment is not None:
        case.book.note(title, "As given.", part.embedment, "MPa", symbol=symbol)
        return part.embedment
    if part.metal:
        return _steel(case, title, symbol, part)
    gravity = _gravity(case, name, part)
    inches = case.document.dowel.diameter / INCH
    if inches < 0.25 - 1e-9:
        along = case.book.step(
            title, f"{symbol}_G", "16600*G**1.84", {"G": (gravity, "")}, "psi", f"{CODE}, Table 12.3.3"
        )
        return _rounded(case, title, symbol, along)
    along = case.book.step(
        f"{title} along the grain", f"{symbol}_0", "11200*G", {"G": (gravity, "")}, "psi", f"{CODE}, Table 12.3.3"
    )
    if part.kind in PANELS or not part.angle:
        return _rounded(case, title, symbol, along)
    over = case.book.step(
        f"{title} across the grain",
        f"{symbol}_90",
        "6100*G**1.45/sqrt(D_in)",
        {"G": (gravity, ""), "D_in": (inches, "in")},
        "psi",
        f"{CODE}, Table 12.3.3",
    )
    return _at_an_angle(case, title, symbol, embedment.to_50_psi(along), embedment.to_50_psi(over), part.angle)


def _at_an_angle(case: Case, title: str, symbol: str, along: float, over: float, angle: float) -> float:
    from math import cos, radians, sin

    if angle >= 90:
        return _rounded(case, f"{title} across the grain", symbol, over)
    value = case.book.step(
        f"{title} at {angle:g} deg to the grain",
        f"{symbol}_G",
        f"{symbol}_0*{symbol}_90/({symbol}_0*sin_theta**2 + {symbol}_90*cos_theta**2)",
        {
            f"{symbol}_0": (along, "psi"),
            f"{symbol}_90": (over, "psi"),
            "sin_theta": (sin(radians(angle)), ""),
            "cos_theta": (cos(radians(angle)), ""),
        },
        "psi",
        f"{CODE}, eq. (12.3-11)",
    )
    case.book.note(title, "The same in the unit of the modes.", value * PSI, "MPa", symbol=symbol)
    return value * PSI


def _rounded(case: Case, title: str, symbol: str, value: float) -> float:
    rounded = embedment.to_50_psi(value)
    case.book.note(
        title,
        f"{rounded:g} psi: rounded to 50 psi, as the tables print and use it.",
        rounded * PSI,
        "MPa",
        f"{CODE}, Table 12.3.3",
        symbol=symbol,
    )
    return rounded * PSI


def _steel(case: Case, title: str, symbol: str, part: Part) -> float:
    if part.ultimate is not None:
        hot = part.thickness >= INCH / 4 - 1e-9
        return case.book.step(
            title,
            symbol,
            f"{2.4 if hot else 2.2}*F_u/1.6",
            {"F_u": (part.ultimate, "MPa")},
            "MPa",
            f"{CODE}, Tables 12B and 12N, footnotes",
        )
    strength = (THICK_STEEL if part.thickness >= INCH / 4 - 1e-9 else THIN_STEEL) * PSI
    case.book.note(
        title, "Steel not named: as the tables assume it.", strength, "MPa", f"{CODE}, Tables 12B, 12N", symbol=symbol
    )
    case.findings.caution(
        "steel plate",
        "Its tensile strength is not given; the steel of the code's tables is taken (A36, or A653 grade 33).",
    )
    return strength


def _gravity(case: Case, name: str, part: Part) -> float:
    """Specific gravity, from the density with a caution where only that is given."""
    if part.specific_gravity is not None:
        return part.specific_gravity
    density = part.density if part.density is not None else part.density_mean
    assert density is not None
    case.findings.caution(
        "specific gravity",
        f"That of the {NAMES[name]} is found from its characteristic density at 12 % moisture, which is on the low "
        "side. Enter the specific gravity that the code assigns to the species.",
    )
    return case.book.step(
        f"Specific gravity of the {NAMES[name]}",
        "G",
        "rho_k/(1120 - 0.108*rho_k)",
        {"rho_k": (density, "kg/m3")},
        source="density = 1000 G (1 + m)/(1 + 0.009 G m) at m = 12 %",
    )


def _coefficients(case: Case, values: Values) -> Values:
    """R_e, R_t and k_1 to k_3, as far as the modes ask for them."""
    case.book.begin("Coefficients")
    found: Values = {}
    ratios = {"R_e": ("F_em/F_es", "Bearing of main over side member"), "R_t": ("l_m/l_s", "Length in main over side")}
    for symbol, (text, title) in ratios.items():
        given = {name: values[name] for name in formula(text).names}
        found[symbol] = (case.book.step(title, symbol, text, given, source=f"{CODE}, Table 12.3.1A"), "")
    wanted = ("k_3",) if case.document.shear_planes == 2 else ("k_1", "k_2", "k_3")
    for symbol in wanted:
        text = limit.COEFFICIENTS[symbol]
        given = {name: {**values, **found}[name] for name in formula(text).names}
        found[symbol] = (
            case.book.step(f"Coefficient {symbol[-1]}", symbol, text, given, source=f"{CODE}, Table 12.3.1A"),
            "",
        )
    return found


def _loads(case: Case, modes: tuple[Mode, ...], values: Values, diameter: float) -> dict[str, float]:
    case.book.begin("Yield modes, each shear plane")
    angle = max(part.angle for _, part in case.parts())
    inches = diameter / INCH
    threaded = inches < 0.25 - 1e-9 and case.document.dowel.diameter / INCH >= 0.25 - 1e-9
    if abs(inches - 0.25) < 1e-9:
        inches = 0.25
    loads, before = {}, None
    for mode in modes:
        text, numbers = limit.reduction(mode.key, inches, angle, threaded=threaded)
        if text != before:
            reduced = _reduction(case, text, numbers)
            before = text
        given = {name: {**values, "R_d": (reduced, "")}[name] for name in formula(mode.formula).names}
        double = ", half of the table's, which is for both planes" if case.document.shear_planes == 2 else ""
        loads[mode.key] = case.book.step(
            f"Mode {mode.key}: {mode.words}",
            f"Z_{mode.key}",
            mode.formula,
            given,
            "N",
            f"{CODE}, Table 12.3.1A{double}",
        )
    return loads


def _reduction(case: Case, text: str, numbers: dict[str, float]) -> float:
    if not numbers:
        case.book.note("Reduction term", "D up to 0.17 in.", float(text), source=f"{CODE}, Table 12.3.1B", symbol="R_d")
        return float(text)
    given = {name: (value, "in" if name == "D_in" else "") for name, value in numbers.items()}
    return case.book.step("Reduction term", "R_d", text, given, source=f"{CODE}, Table 12.3.1B")


def _adjusted(case: Case, reference: float) -> dict[str, Any]:
    given = case.document.adjustments
    if not given:
        case.findings.caution(
            "adjustments",
            "The value is the reference one, for ten years of load, dry wood and ordinary temperature; adjustment "
            "factors are not given.",
        )
        return {"adjusted": None, "adjustments": {}}
    case.book.begin("Adjusted value")
    symbols = [ADJUSTMENTS[name] for name in given]
    adjusted = case.book.step(
        "Adjusted value of one shear plane: " + ", ".join(given),
        "Z_adj",
        "Z*" + "*".join(symbols),
        {"Z": (reference, "N"), **{ADJUSTMENTS[name]: (value, "") for name, value in given.items()}},
        "N",
        f"{CODE}, Table 11.3.1",
    )
    if given.get("duration", 0.0) > 1.6:
        case.findings.caution(
            "duration", "The impact factor of 2.0 is not for connections; 1.6 is the most (NDS 2.3.2)."
        )
    return {"adjusted": adjusted, "adjustments": dict(given)}


def _row(case: Case, reference: float) -> dict[str, Any]:
    row = case.document.row
    if row is None:
        return {}
    if case.document.dowel.diameter >= INCH / 4 and "group" not in case.document.adjustments:
        case.findings.miss("group action factor C_g of the row (NDS 11.3.6): enter it under adjustments as 'group'.")
    whole = case.book.step(
        "Reference value of the row, each shear plane",
        "Z_row",
        "n*Z",
        {"n": (float(row.count), ""), "Z": (reference, "N")},
        "N",
    )
    return {"row": {"count": row.count, "spacing": row.spacing, "counting": float(row.count), "resistance": whole}}
