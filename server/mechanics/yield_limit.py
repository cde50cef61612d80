r"""Yield modes of a dowel in wood: the equations as text, and how the dowel lies in each.

The yield-limit model (Johansen): wood under the dowel and the dowel in bending are rigid-plastic; each mode is one
kinematically possible way to fail, and the smallest load governs. Units N, mm, MPa; loads per shear plane.

An equation is kept as text, which the working evaluates and prints: there is no second copy of it. Symbols: ``f_h1``,
``f_h2`` embedment strength in the side (or the only wooden) and the main member [MPa], ``t_1`` thickness of the side
member, ``t_2`` penetration into (single shear) or thickness of (double shear) the main member [mm], ``d`` diameter
[mm], ``M_y`` yield moment [N mm], ``beta`` = f_h2 / f_h1.

References
----------
.. [1] K. W. Johansen, "Theory of timber connections", IABSE Publications 9 (1949), 249-262.
.. [2] EN 1995-1-1:2004+A1:2008, Eurocode 5, 8.2.2 eq. (8.6), (8.7); 8.2.3 eq. (8.9) to (8.13).
.. [3] ANSI/AWC NDS-2018, National Design Specification for Wood Construction, Table 12.3.1A, 12.3.1B.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Mode:
    """One way to yield.

    ``rope`` says whether the dowel is bent, so that its pull adds to the resistance. The dowel lies
    straight through, past the members that are ``crushed``; or it turns in some members (``turns``) and bends in others
    (``hinges``), each of "side", "main", "plate".
    """

    key: str
    words: str
    formula: str
    rope: bool = False
    turns: tuple[str, ...] = ()
    hinges: tuple[str, ...] = ()
    crushed: tuple[str, ...] = ()


_ROTATION_1 = "f_h1*t_1*d/(2 + beta)*(sqrt(2*beta*(1 + beta) + 4*beta*(2 + beta)*M_y/(f_h1*d*t_1**2)) - beta)"
_ROTATION_2 = "f_h1*t_2*d/(1 + 2*beta)*(sqrt(2*beta**2*(1 + beta) + 4*beta*(1 + 2*beta)*M_y/(f_h1*d*t_2**2)) - beta)"
_TWO_HINGES = "sqrt(2*beta/(1 + beta))*sqrt(2*M_y*f_h1*d)"
_AT_A_PLATE = "f_h1*t_1*d*(sqrt(2 + 4*M_y/(f_h1*d*t_1**2)) - 1)"

WOOD_SINGLE = (
    Mode("a", "the side member is crushed", "f_h1*t_1*d", crushed=("side",)),
    Mode("b", "the main member is crushed", "f_h2*t_2*d", crushed=("main",)),
    Mode(
        "c",
        "the fastener turns in both members",
        "f_h1*t_1*d/(1 + beta)*(sqrt(beta + 2*beta**2*(1 + t_2/t_1 + (t_2/t_1)**2) + beta**3*(t_2/t_1)**2)"
        " - beta*(1 + t_2/t_1))",
        True,
        ("side", "main"),
    ),
    Mode(
        "d", "it turns in the side member and bends in the main one", f"1.05*{_ROTATION_1}", True, ("side",), ("main",)
    ),
    Mode(
        "e", "it bends in the side member and turns in the main one", f"1.05*{_ROTATION_2}", True, ("main",), ("side",)
    ),
    Mode("f", "it bends in both members", f"1.15*{_TWO_HINGES}", True, (), ("side", "main")),
)
WOOD_DOUBLE = (
    Mode("g", "the side members are crushed", "f_h1*t_1*d", crushed=("side",)),
    Mode("h", "the main member is crushed", "0.5*f_h2*t_2*d", crushed=("main",)),
    Mode(
        "j", "it turns in the side members and bends in the main one", f"1.05*{_ROTATION_1}", True, ("side",), ("main",)
    ),
    Mode("k", "it bends in all members", f"1.15*{_TWO_HINGES}", True, (), ("side", "main")),
)
PLATE_THIN = (
    Mode("a", "the fastener turns in the wood", "0.4*f_h1*t_1*d", False, ("main",)),
    Mode("b", "it bends in the wood", "1.15*sqrt(2*M_y*f_h1*d)", True, (), ("main",)),
)
PLATE_THICK = (
    Mode("c", "the wood is crushed", "f_h1*t_1*d", crushed=("main",)),
    Mode("d", "it bends at the plate and turns in the wood", _AT_A_PLATE, True, ("main",), ("plate",)),
    Mode("e", "it bends at the plate and in the wood", "2.3*sqrt(M_y*f_h1*d)", True, (), ("plate", "main")),
)
PLATE_INSIDE = (
    Mode("f", "the wood is crushed", "f_h1*t_1*d", crushed=("side",)),
    Mode("g", "it bends at the plate and turns in the wood", _AT_A_PLATE, True, ("side",), ("plate",)),
    Mode("h", "it bends at the plate and in the wood", "2.3*sqrt(M_y*f_h1*d)", True, (), ("plate", "side")),
)
PLATES_THIN_OUTSIDE = (
    Mode("j", "the wood is crushed", "0.5*f_h2*t_2*d", crushed=("main",)),
    Mode("k", "it bends in the wood", "1.15*sqrt(2*M_y*f_h2*d)", True, (), ("main",)),
)
PLATES_THICK_OUTSIDE = (
    Mode("l", "the wood is crushed", "0.5*f_h2*t_2*d", crushed=("main",)),
    Mode("m", "it bends at the plates and in the wood", "2.3*sqrt(M_y*f_h2*d)", True, (), ("plate", "main")),
)

# In the NDS the bending term holds F_yb D^2 in the place of 6 M_y / D, and a reduction term R_d divides everything.
_K_1 = "(sqrt(R_e + 2*R_e**2*(1 + R_t + R_t**2) + R_t**2*R_e**3) - R_e*(1 + R_t))/(1 + R_e)"
_K_2 = "-1 + sqrt(2*(1 + R_e) + 2*F_yb*(1 + 2*R_e)*D**2/(3*F_em*l_m**2))"
_K_3 = "-1 + sqrt(2*(1 + R_e)/R_e + 2*F_yb*(2 + R_e)*D**2/(3*F_em*l_s**2))"
COEFFICIENTS = {"k_1": _K_1, "k_2": _K_2, "k_3": _K_3}
"""Coefficients of the NDS equations, Table 12.3.1A."""

NDS_SINGLE = (
    Mode("Im", "the main member is crushed", "D*l_m*F_em/R_d", crushed=("main",)),
    Mode("Is", "the side member is crushed", "D*l_s*F_es/R_d", crushed=("side",)),
    Mode("II", "the fastener turns in both members", "k_1*D*l_s*F_es/R_d", False, ("side", "main")),
    Mode(
        "IIIm",
        "it bends in the side member and turns in the main one",
        "k_2*D*l_m*F_em/((1 + 2*R_e)*R_d)",
        False,
        ("main",),
        ("side",),
    ),
    Mode(
        "IIIs",
        "it turns in the side member and bends in the main one",
        "k_3*D*l_s*F_em/((2 + R_e)*R_d)",
        False,
        ("side",),
        ("main",),
    ),
    Mode("IV", "it bends in both members", "D**2/R_d*sqrt(2*F_em*F_yb/(3*(1 + R_e)))", False, (), ("side", "main")),
)
NDS_DOUBLE = (
    Mode("Im", "the main member is crushed", "D*l_m*F_em/(2*R_d)", crushed=("main",)),
    Mode("Is", "the side members are crushed", "D*l_s*F_es/R_d", crushed=("side",)),
    Mode(
        "IIIs",
        "it turns in the side members and bends in the main one",
        "k_3*D*l_s*F_em/((2 + R_e)*R_d)",
        False,
        ("side",),
        ("main",),
    ),
    Mode("IV", "it bends in all members", "D**2/R_d*sqrt(2*F_em*F_yb/(3*(1 + R_e)))", False, (), ("side", "main")),
)


def reduction(mode: str, diameter: float, angle: float, *, threaded: bool = False) -> tuple[str, dict[str, float]]:
    """The reduction term R_d of a mode as text and the numbers in it.

    .. math:: R_d = K_D \\text{ or } 4 K_\\theta, 3.6 K_\\theta, 3.2 K_\\theta, \\quad K_\\theta = 1 + \\theta/360

    Parameters
    ----------
    mode : str
        Key of the mode, such as "IIIs" [-].
    diameter : float
        Diameter in the shear plane [in].
    angle : float
        Largest angle between force and grain of any member [deg].
    threaded : bool
        Whether the nominal diameter is at least 1/4 in and only the thread's root is thinner [-].

    Returns
    -------
    tuple of str and dict
        The formula and its numbers.

    References
    ----------
    .. [1] ANSI/AWC NDS-2018, Table 12.3.1B with its footnote on threaded fasteners.
    """
    if diameter < 0.25:
        slender = "2.2" if diameter <= 0.17 else "10*D_in + 0.5"
        values = {} if diameter <= 0.17 else {"D_in": diameter}
        if not threaded:
            return slender, values
        return (slender if slender == "2.2" else f"({slender})") + "*K_theta", {**values, "K_theta": 1 + angle / 360}
    factor = "4" if mode.startswith("I") and mode in ("Im", "Is") else "3.6" if mode == "II" else "3.2"
    return f"{factor}*K_theta", {"K_theta": 1 + angle / 360}


def interpolation(plate: float, diameter: float) -> float:
    """Share of the thick plate's resistance: 0 up to half a diameter, 1 from a full diameter on.

    .. math:: s = \\min(1, \\max(0, 2t/d - 1))

    Parameters
    ----------
    plate : float
        Thickness of the steel plate [mm].
    diameter : float
        Diameter of the fastener [mm].

    Returns
    -------
    float
        Share between 0 and 1 [-].

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, 8.2.3(1).
    """
    return min(1.0, max(0.0, 2 * plate / diameter - 1))


ROPE_LIMITS = {
    "round nail": 0.15,
    "square nail": 0.25,
    "grooved nail": 0.25,
    "other nail": 0.50,
    "screw": 1.00,
    "bolt": 0.25,
    "dowel": 0.0,
}
"""How much of the yielding part the pull of the fastener may add (EN 1995-1-1:2004+A1:2008, 8.2.2(2))."""


def weakest(values: Sequence[tuple[str, float]]) -> tuple[str, float]:
    """The governing mode: the smallest load, the first of equal ones."""
    return min(values, key=lambda each: each[1])
