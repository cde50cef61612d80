"""The published closed forms of strip ends, as steps beside the solution, with their difference stated."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from server.checks.bond_ends import Bonded
from server.mechanics.overlap_laps import BondLine
from server.working import Working

JOURAWSKI = "Jourawski's formula, E-weighted"
ROBERTS = "T. M. Roberts, The Structural Engineer 67 (1989) 229"
SMITH_TENG = "S. T. Smith and J. G. Teng, Eng. Structures 23 (2001) 857"

MEAN = "abs(V)*S/(EI*b)"
PER_SHEAR = "G*b/t_a"
PER_PEEL = "E_a*b/t_a"
ROBERTS_SHEAR = "(V + M*sqrt(K_s/EA_s))*S/(EI*b)"
ROBERTS_PEEL = "tau_R*t_s*(K_p/(4*EI_s))**(1/4)"
RATE = "sqrt(G*b/t_a*((y_1 + y_2)*(y_1 + y_2 + t_a)/(EI_h + EI_s) + 1/EA_h + 1/EA_s))"
M_1 = "G*(y_1 + y_2)/(t_a*lamda**2*(EI_h + EI_s))"
M_2 = "G*y_1/(t_a*EI_h)"
SHEAR = "m_2*M/lamda + m_1*(V - w/lamda)"
PEEL_RATE = "(E_a*b/(4*t_a)*(1/EI_h + 1/EI_s))**(1/4)"
N_1 = "(y_1*EI_s - y_2*EI_h)/(EI_h + EI_s)"
N_2 = "EI_s/(b*(EI_h + EI_s))"
N_3 = "E_a*b/t_a*(y_1/EI_h - y_2/EI_s)"
LAYER = "m_2*M/lamda - m_1*w/lamda"
PEEL = (
    "E_a/(2*beta**3*t_a*EI_h)*(V + beta*M) - n_3*tau/(2*beta**3) + n_1*A*lamda**3*(lamda - beta)/(2*beta**3) "
    "+ n_1*(A*lamda + m_1*w) - n_2*w"
)


@dataclass(frozen=True)
class Forces:
    """At an end, seen from the strip: moment that stretches it, shear towards its middle, load per length there."""

    moment: float
    shear: float
    load: float


@dataclass(frozen=True)
class Published:
    """Shear and peel at an end by both published closed forms [MPa]; peel positive pulls off."""

    mean: float
    roberts: tuple[float, float]
    smith_teng: tuple[float, float]


def mean_stress(bonded: Bonded, forces: Forces, book: Working) -> float:
    """Mean shear at the end by the whole section [MPa]."""
    return book.step(
        "Mean shear in the bond there", "tau_mean", MEAN,
        {
            "V": (forces.shear, "N"), "S": (bonded.first_moment, "N*mm"), "EI": (bonded.whole.EI, "N*mm2"),
            "b": (bonded.width, "mm"),
        },
        "MPa", JOURAWSKI,
    )  # fmt: skip


def published(bonded: Bonded, bond: BondLine, forces: Forces, book: Working) -> Published:
    """Both closed forms, step by step; for a strip that a moment presses on, the peel comes out negative."""
    mean = mean_stress(bonded, forces, book)
    if not math.isfinite(bonded.host.EA):
        book.note(
            "Published closed forms",
            f"They are for one strip; {bonded.twin} faces this one on the other side, so they are left out.",
        )
        return Published(mean, (math.nan, math.nan), (math.nan, math.nan))
    own = bonded.strip.beam(bonded.strip.thickness, 0.0, 0.0)
    EA_s, EI_s, y_2 = (float(x) for x in (1 / _one(own.stretch), 1 / _one(own.bend), _one(own.arm)))
    line: dict[str, Any] = {"b": (bonded.width, "mm"), "t_a": (bond.thickness, "mm")}
    acting: dict[str, Any] = {"M": (forces.moment, "N*mm"), "V": (forces.shear, "N")}
    first = _roberts(bonded, bond, line, acting, EA_s, EI_s, book)
    second = _smith_teng(bonded, bond, line, acting, forces.load, (EA_s, EI_s, y_2), book)
    return Published(mean, first, second)


def _one(value: Any) -> float:
    return float(value)


def _roberts(
    bonded: Bonded, bond: BondLine, line: Any, acting: Any, EA_s: float, EI_s: float, book: Working
) -> tuple[float, float]:
    K_s = book.step(
        "Shear stiffness of the bond per length", "K_s", PER_SHEAR, {"G": (bond.shear_modulus, "MPa"), **line}, "N/mm2",
        ROBERTS,
    )  # fmt: skip
    K_p = book.step(
        "Peel stiffness of the bond per length", "K_p", PER_PEEL, {"E_a": (bond.E, "MPa"), **line}, "N/mm2", ROBERTS
    )
    tau = book.step(
        "End shear by Roberts", "tau_R", ROBERTS_SHEAR,
        {
            **acting, "K_s": (K_s, "N/mm2"), "EA_s": (EA_s, "N"), "S": (bonded.first_moment, "N*mm"),
            "EI": (bonded.whole.EI, "N*mm2"), "b": (bonded.width, "mm"),
        },
        "MPa", f"{ROBERTS}; its first term is the mean shear",
    )  # fmt: skip
    sigma = book.step(
        "End peel by Roberts", "sigma_R", ROBERTS_PEEL,
        {
            "tau_R": (tau, "MPa"), "t_s": (bonded.strip.thickness, "mm"), "K_p": (K_p, "N/mm2"),
            "EI_s": (EI_s, "N*mm2"),
        },
        "MPa", ROBERTS,
    )  # fmt: skip
    return tau, sigma


def _smith_teng(
    bonded: Bonded,
    bond: BondLine,
    line: Any,
    acting: Any,
    load: float,
    own: tuple[float, float, float],
    book: Working,
) -> tuple[float, float]:
    host, (EA_s, EI_s, y_2) = bonded.host, own
    arms: dict[str, Any] = {"y_1": (host.distance, "mm"), "y_2": (y_2, "mm")}
    bending: dict[str, Any] = {"EI_h": (host.EI, "N*mm2"), "EI_s": (EI_s, "N*mm2")}
    G: dict[str, Any] = {"G": (bond.shear_modulus, "MPa")}
    t_a: dict[str, Any] = {"t_a": (bond.thickness, "mm")}
    E_a: dict[str, Any] = {"E_a": (bond.E, "MPa")}
    w: dict[str, Any] = {"w": (load, "N/mm")}
    lamda: dict[str, Any] = {
        "lamda": (
            book.step(
                "Rate at which the shear decays", "lamda", RATE,
                {**G, **line, **arms, **bending, "EA_h": (host.EA, "N"), "EA_s": (EA_s, "N")}, "1/mm",
                f"{SMITH_TENG}; h: the section without the strip, s: the strip, w: load per length at the end",
            ),
            "1/mm",
        )
    }  # fmt: skip
    m_1: dict[str, Any] = {
        "m_1": (
            book.step("First coefficient", "m_1", M_1, {**G, **t_a, **arms, **lamda, **bending}, "1/mm2", SMITH_TENG),
            "1/mm2",
        )
    }
    m_2: dict[str, Any] = {
        "m_2": (
            book.step(
                "Second coefficient", "m_2", M_2,
                {**G, **t_a, "y_1": arms["y_1"], "EI_h": bending["EI_h"]}, "1/mm3", SMITH_TENG,
            ),
            "1/mm3",
        )
    }  # fmt: skip
    tau = book.step(
        "End shear by Smith and Teng", "tau_ST", SHEAR, {**acting, **m_1, **m_2, **lamda, **w}, "MPa", SMITH_TENG
    )
    beta = book.step("Rate at which the peel decays", "beta", PEEL_RATE, {**E_a, **line, **bending}, "1/mm", SMITH_TENG)
    n_1 = book.step("Coefficient of the peel", "n_1", N_1, {**arms, **bending}, "mm", SMITH_TENG)
    n_2 = book.step("Coefficient of the load", "n_2", N_2, {"b": line["b"], **bending}, "1/mm", SMITH_TENG)
    n_3 = book.step("Coefficient of the end shear", "n_3", N_3, {**E_a, **line, **arms, **bending}, "1/mm3", SMITH_TENG)
    A = book.step(
        "Part of the shear that decays", "A", LAYER,
        {**m_1, **m_2, "M": acting["M"], **lamda, **w}, "MPa", SMITH_TENG,
    )  # fmt: skip
    sigma = book.step(
        "End peel by Smith and Teng", "sigma_ST", PEEL,
        {
            **E_a, **t_a, **acting, **lamda, **m_1, **w, "EI_h": bending["EI_h"], "beta": (beta, "1/mm"),
            "n_1": (n_1, "mm"), "n_2": (n_2, "1/mm"), "n_3": (n_3, "1/mm3"), "A": (A, "MPa"), "tau": (tau, "MPa"),
        },
        "MPa", SMITH_TENG,
    )  # fmt: skip
    return tau, sigma


def compare(found: tuple[float, float], closed: Published, book: Working) -> None:
    """State the difference of both closed forms from the solution."""
    told = []
    for who, (tau, sigma) in (("Roberts", closed.roberts), ("Smith and Teng", closed.smith_teng)):
        if not math.isfinite(tau):
            continue
        parts = [
            f"{word} {_differs(value, own)}"
            for word, value, own in zip(("shear", "peel"), (tau, sigma), found, strict=True)
        ]
        told.append(f"{who}: {', '.join(parts)}")
    if told:
        book.note(
            "The published closed forms beside the solution",
            f"{'; '.join(told)}. They leave out part of the coupling between shear and peel; the solution is judged.",
        )


def _differs(closed: float, found: float) -> str:
    if abs(found) < 1e-12:
        return f"{closed:.4g} MPa"
    return f"{closed:.4g} MPa ({(closed / found - 1) * 100:+.0f} %)"
