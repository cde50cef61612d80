"""The published closed forms of overlaps, as steps beside the numerical solution, where their assumptions hold."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from server.checks.splice_model import Model
from server.mechanics.overlap_edges import goland_reissner_factor
from server.mechanics.overlap_laps import DOUBLE, Lap
from server.mechanics.overlap_tube import sections
from server.working import Working

VOLKERSEN = "O. Volkersen, Luftfahrtforschung 15 (1938) 41"
GOLAND_REISSNER = "M. Goland and E. Reissner, J. Appl. Mech. 11 (1944) A17"
HART_SMITH_SINGLE = "L. J. Hart-Smith, NASA CR-112236 (1973)"
HART_SMITH_DOUBLE = "L. J. Hart-Smith, NASA CR-112235 (1973)"
HART_SMITH_SCARF = "L. J. Hart-Smith, NASA CR-112237 (1973); statics"
ADAMS_PEPPIATT = "R. D. Adams and N. A. Peppiatt, J. Adhesion 9 (1977) 1"
CHEN_NELSON = "W. T. Chen and C. W. Nelson, IBM J. Res. Dev. 23 (1979) 179"
STATICS = "statics"

# written once: the text that is printed is the text that is evaluated, here and in the tests against published numbers
PLANE_MODULUS = "E/(1 - nu**2)"
MEAN = "P/(n*b*l)"
MEAN_TUBE = "P/(2*pi*a*l)"
MEAN_TORQUE = "T/(2*pi*a**2*l)"
BENDING_STIFFNESS = "E*t**3*b/12"
HART_SMITH_K = "1/(1 + sqrt(P/D)*l/2 + P/D*l**2/24)"
GOLAND_REISSNER_K = "1/(1 + 2*sqrt(2)*tanh(sqrt(P/D)*l/(4*sqrt(2))))"
EDGE_MOMENT = "k*P*(t_i + t_o)/4"
LAP_RATE = "sqrt(8*G/(E*t*t_a))"
LAP_SHEAR = "P/(4*b*l)*((1 + 3*k)*beta*l/2/tanh(beta*l/2) + 3*(1 - k))"
PEEL_RATE = "(6*E_a*t/(E*t_a))**(1/4)*l/(2*t)"
PEEL_SHEAR_FORCE = "k*l/(2*t)*sqrt(3*P/(E*b*t))"
LAP_PEEL = "4*P*t/(b*l**2)*(lamda**2*k/2 + lamda*k_1)"
LONG = 2.5  # of the rate below which the closed form of the peel does not hold
SHEAR_LAG_RATE = "sqrt(G/t_a*(c_o + c_i))"
SHEAR_LAG_SHEAR = "q/l*lamda*l/2*(1/tanh(lamda*l/2) + abs(c_o - c_i)/(c_o + c_i)*tanh(lamda*l/2))"
FREE_STRAIN_SHEAR = "G*abs(Delta_epsilon)/(lamda*t_a)*tanh(lamda*l/2)"
SCARF_SHEAR = "P/(b*t)*n/(1 + n**2)"
BLUNT_SHEAR = "P/(b*(t - 2*t_t))*n/(1 + n**2)"
SCARF_NORMAL = "P/(b*t)/(1 + n**2)"
DOUBLE_STRENGTH = "sqrt(4*t_a*tau_y*(gamma_u - gamma_y/2)*K_1*(1 + K_1/K_2))"


@dataclass(frozen=True)
class Closed:
    """What closed forms gave beside the solution: mean shear [MPa], edge moment factors, peak shear [MPa]."""

    mean_shear: float
    factor: float | None = None
    factors: dict[str, float] | None = None
    peak_shear: float | None = None


def mean_shear(model: Model, book: Working) -> float:
    """The load over the bonded area [MPa]."""
    document, length = model.document, model.length
    book.begin("Mean stress in the bond")
    if document.layout == "tube-lap":
        return _mean_tube(model, book)
    assert document.width is not None
    if document.layout == "scarf":
        assert document.slope is not None
        blunt = {"t_t": (document.blunt_tip, "mm")} if document.blunt_tip else {}
        return book.step(
            "Mean shear on the slope", "tau_mean", BLUNT_SHEAR if blunt else SCARF_SHEAR,
            {
                "P": (abs(model.axial), "N"), "b": (document.width, "mm"), "t": (model.thicknesses[0], "mm"),
                "n": (document.slope, ""), **blunt,
            },
            "MPa", HART_SMITH_SCARF,
        )  # fmt: skip
    bonds = 2 if document.layout in DOUBLE else 1
    return book.step(
        "Mean shear over the overlap", "tau_mean", MEAN,
        {
            "P": (abs(model.axial), "N"), "n": (bonds, ""), "b": (document.width, "mm"), "l": (length, "mm"),
        },
        "MPa", f"{STATICS}; n: bond lines that share the load",
    )  # fmt: skip


def _mean_tube(model: Model, book: Working) -> float:
    document = model.document
    assert document.diameter is not None
    a = document.diameter / 2 + (model.adhesive.thickness or 0.0) / 2
    found = 0.0
    if model.axial or not document.load.torque:
        found = book.step(
            "Mean shear along the axis", "tau_mean", MEAN_TUBE,
            {"P": (abs(model.axial), "N"), "a": (a, "mm"), "l": (model.length, "mm")}, "MPa", ADAMS_PEPPIATT,
        )  # fmt: skip
    if document.load.torque:
        around = book.step(
            "Mean shear around the axis", "tau_t_mean", MEAN_TORQUE,
            {"T": (abs(document.load.torque), "N*mm"), "a": (a, "mm"), "l": (model.length, "mm")},
            "MPa", ADAMS_PEPPIATT,
        )  # fmt: skip
        found = math.hypot(found, around)
    return found


def edge_factors(model: Model, book: Working) -> dict[str, float] | None:
    """Hart-Smith's edge moment factors of a single lap in tension, Goland and Reissner's beside them."""
    lap, P = model.lap, model.axial
    if lap is None or lap.layout != "single-lap" or P <= 0:
        return None
    book.begin("Edge moment")
    alike = lap.inner == lap.outer
    found: dict[str, float] = {}
    for name, plate in (("inner", lap.inner), ("outer", lap.outer)):
        if name == "outer" and alike:
            found[name] = found["inner"]
            break
        E = _plane(plate.E, plate.nu, name if not alike else "either", book)
        D = book.step(
            f"Bending stiffness of {'either' if alike else 'the ' + name} adherend", "D", BENDING_STIFFNESS,
            {"E": (E, "MPa"), "t": (plate.thickness, "mm"), "b": (lap.width, "mm")}, "N*mm2", STATICS,
        )  # fmt: skip
        values: dict[str, Any] = {"P": (P, "N"), "D": (D, "N*mm2"), "l": (model.length, "mm")}
        found[name] = book.step(
            f"Edge moment factor{'' if alike else f', {name} adherend'}",
            "k",
            HART_SMITH_K,
            values,
            "",
            HART_SMITH_SINGLE,
        )
        book.step(
            "Edge moment factor by Goland and Reissner, to compare", "k_GR", GOLAND_REISSNER_K, values, "",
            GOLAND_REISSNER,
        )  # fmt: skip
        book.step(
            f"Edge moment of {'either' if alike else 'the ' + name} adherend", f"M_{name[0]}", EDGE_MOMENT,
            {
                "k": (found[name], ""), "P": (P, "N"),
                "t_i": (lap.inner.thickness, "mm"), "t_o": (lap.outer.thickness, "mm"),
            },
            "N*mm", f"{HART_SMITH_SINGLE}; the bond line left out of the lever arm",
        )  # fmt: skip
    return found


def _plane(E: float, nu: float, whose: str, book: Working) -> float:
    if not nu:
        return E
    return book.step(
        f"Modulus of {'either' if whose == 'either' else 'the ' + whose} adherend in cylindrical bending", "E",
        PLANE_MODULUS, {"E": (E, "MPa"), "nu": (nu, "")}, "MPa", STATICS,
    )  # fmt: skip


def peaks(model: Model, factors: dict[str, float] | None, found: float, peel: float, book: Working) -> float | None:
    """The closed form of the peak shear where there is one, with its difference from the solution stated; and peel."""
    lap, load = model.lap, model.document.load
    if lap is None or load.moment or load.shear or lap.inner.tip or lap.outer.tip:
        return None  # the closed forms are for adherends of one thickness
    book.begin("Peaks by closed form")
    if lap.layout == "single-lap":
        return _lap_peak(model, lap, factors, found, peel, book)
    if lap.layout in (*DOUBLE, "tube-lap"):
        return _lag_peak(model, lap, found, book)
    if lap.layout == "scarf" and lap.inner == lap.outer and not model.action.strain:
        book.note(
            "Uniform stress on the slope",
            "Both pieces are alike: they hand over their force evenly along the slope, so the peak is the mean.",
            source=HART_SMITH_SCARF,
        )
        book.step(
            "Stress across the slope", "sigma_n", SCARF_NORMAL,
            {
                "P": (abs(model.axial), "N"), "b": (lap.width, "mm"), "t": (lap.inner.thickness, "mm"),
                "n": (lap.slope, ""),
            },
            "MPa", HART_SMITH_SCARF,
        )  # fmt: skip
    return None


def _lap_peak(
    model: Model, lap: Lap, factors: dict[str, float] | None, found: float, peel: float, book: Working
) -> float | None:
    """A single lap of two plates alike, in tension, without free strain: shear does not depend on peel."""
    if factors is None or lap.inner != lap.outer or model.action.strain:
        return None
    plate, bond = lap.inner, lap.bond
    beta = book.step(
        "Rate at which the shear stress decays", "beta", LAP_RATE,
        {
            "G": (bond.shear_modulus, "MPa"), "E": (plate.plane_modulus, "MPa"),
            "t": (plate.thickness, "mm"), "t_a": (bond.thickness, "mm"),
        },
        "1/mm", GOLAND_REISSNER,
    )  # fmt: skip
    value = book.step(
        "Peak shear", "tau_max", LAP_SHEAR,
        {
            "P": (model.axial, "N"), "b": (lap.width, "mm"), "l": (model.length, "mm"), "k": (factors["inner"], ""),
            "beta": (beta, "1/mm"),
        },
        "MPa", f"{GOLAND_REISSNER}, with Hart-Smith's k",
    )  # fmt: skip
    _compare(value, found, "The closed form holds here; the two should agree.", book)
    _lap_peel(model, lap, factors["inner"], peel, book)
    return value


def _lap_peel(model: Model, lap: Lap, k: float, found: float, book: Working) -> None:
    """Peel at the edge of a long single lap, with the edge shear force of the turned adherend."""
    plate, bond = lap.inner, lap.bond
    sizes: dict[str, Any] = {"t": (plate.thickness, "mm"), "l": (model.length, "mm")}
    load: dict[str, Any] = {"P": (model.axial, "N"), "b": (lap.width, "mm")}
    modulus = (plate.plane_modulus, "MPa")
    rate = plate.thickness and (6 * bond.E * plate.thickness / (plate.plane_modulus * bond.thickness)) ** 0.25
    if rate * model.length / (2 * plate.thickness) < LONG:
        return
    lamda = book.step(
        "Rate at which the peel stress decays, over half the overlap", "lamda", PEEL_RATE,
        {"E_a": (bond.E, "MPa"), "E": modulus, "t_a": (bond.thickness, "mm"), **sizes}, "", GOLAND_REISSNER,
    )  # fmt: skip
    k_1 = book.step(
        "Edge shear force factor", "k_1", PEEL_SHEAR_FORCE, {"k": (k, ""), "E": modulus, **sizes, **load}, "",
        GOLAND_REISSNER,
    )  # fmt: skip
    value = book.step(
        "Peel at the edge of a long overlap", "sigma_peel", LAP_PEEL,
        {"lamda": (lamda, ""), "k": (k, ""), "k_1": (k_1, ""), **sizes, **load},
        "MPa", f"{GOLAND_REISSNER}, with Hart-Smith's k",
    )  # fmt: skip
    why = "The closed form takes the edge's shear force from the turned adherend, the solution from equilibrium."
    _compare(value, found, why, book)


def _lag_peak(model: Model, lap: Lap, found: float, book: Working) -> float | None:
    """Shear lag of two bars: exact for tubes; for double laps without the bending of the outer plates."""
    load, bond, length = model.document.load, lap.bond, model.length
    if lap.layout == "tube-lap":
        (A_i, J_i), (A_o, J_o) = sections(lap)
        per = lap.bond_width
        soft = per / (lap.inner.E * A_i), per / (lap.outer.E * A_o)
        flow, source = abs(model.axial) / per, ADAMS_PEPPIATT
        if load.torque and model.axial:
            return None
        if load.torque:
            r = lap.bond_radius
            soft = per * r**2 / (lap.inner.shear_modulus * J_i), per * r**2 / (lap.outer.shear_modulus * J_o)
            flow = abs(load.torque) / (per * r)
    else:
        inner, outer = lap.inner, lap.outer
        soft = 2 / (inner.plane_modulus * inner.thickness), 1 / (outer.plane_modulus * outer.thickness)
        flow, source = abs(model.axial) / (2 * lap.width), f"{VOLKERSEN}; {HART_SMITH_DOUBLE}"
    rate = book.step(
        "Rate at which the shear stress decays", "lamda", SHEAR_LAG_RATE,
        {
            "G": (bond.shear_modulus, "MPa"), "t_a": (bond.thickness, "mm"),
            "c_o": (soft[1], "mm/N"), "c_i": (soft[0], "mm/N"),
        },
        "1/mm", f"{source}; c: compliance of outer and inner adherend per width of bond",
    )  # fmt: skip
    value = 0.0
    if flow:
        value = book.step(
            "Peak shear from the load, shear lag alone", "tau_P", SHEAR_LAG_SHEAR,
            {
                "q": (flow, "N/mm"), "l": (length, "mm"), "lamda": (rate, "1/mm"),
                "c_o": (soft[1], "mm/N"), "c_i": (soft[0], "mm/N"),
            },
            "MPa", source,
        )  # fmt: skip
    if model.action.strain:
        book.step(
            "Peak shear from the free strain, shear lag alone", "tau_epsilon", FREE_STRAIN_SHEAR,
            {
                "G": (bond.shear_modulus, "MPa"), "Delta_epsilon": (model.action.strain, ""), "lamda": (rate, "1/mm"),
                "t_a": (bond.thickness, "mm"), "l": (length, "mm"),
            },
            "MPa", CHEN_NELSON,
        )  # fmt: skip
        return None
    why = "The closed form holds here; the two should agree."
    if lap.layout != "tube-lap":
        why = "The closed form holds the outer plates straight; in the solution they bend, which raises their end."
    _compare(value, found, why, book)
    return value


def _compare(closed: float, found: float, why: str, book: Working) -> None:
    if closed > 0:
        book.note(
            "Beside the numerical solution",
            f"The closed form gives {closed:.4g} MPa, the solution {found:.4g} MPa: {(closed / found - 1) * 100:+.1f} "
            f"%. {why}",
        )


def yield_strength(model: Model, tau: float, strain: float, book: Working) -> float | None:
    """The long-overlap strength of a double lap whose bond yields, without bending, to compare."""
    lap = model.lap
    if lap is None or lap.layout not in DOUBLE or model.action.strain or lap.outer.tip:
        return None
    book.begin("Strength of the yielding bond")
    inner = lap.inner.plane_modulus * lap.inner.thickness
    outer = 2 * lap.outer.plane_modulus * lap.outer.thickness
    ends = []
    for name, first, second in (("inner", inner, outer), ("outer", outer, inner)):
        ends.append(
            book.step(
                f"Strength of a long overlap at the end where the {name} adherend is loaded", f"P_{name[0]}",
                DOUBLE_STRENGTH,
                {
                    "t_a": (lap.bond.thickness, "mm"), "tau_y": (tau, "MPa"), "gamma_u": (strain, ""),
                    "gamma_y": (tau / lap.bond.shear_modulus, ""), "K_1": (first, "N/mm"), "K_2": (second, "N/mm"),
                },
                "N/mm", f"{HART_SMITH_DOUBLE}; per width, K = E t; no bending, any greater overlap holds the same",
            )
        )  # fmt: skip
    return min(ends) * lap.width


def compare_factor(model: Model) -> float | None:
    """Goland and Reissner's factor of a single lap in tension (inner adherend)."""
    lap = model.lap
    if lap is None or lap.layout != "single-lap" or model.axial <= 0:
        return None
    D = lap.inner.plane_modulus * lap.inner.thickness**3 / 12 * lap.width
    return float(goland_reissner_factor(model.axial, model.length, bending_stiffness=D))
