r"""How hard wood presses back on a dowel: embedment strength (EN 1995-1-1) and dowel bearing strength (NDS).

The equations are text, which the working evaluates and prints; units N, mm, MPa and kg/m3 (NDS: psi, inches and
specific gravity, as in the source).

References
----------
.. [1] EN 1995-1-1:2004+A1:2008, 8.3.1.1 eq. (8.15), (8.16); 8.3.1.3 eq. (8.20) to (8.22); 8.5.1.1 eq. (8.31) to
   (8.33); 8.5.1.2 eq. (8.36), (8.37); 8.6; 8.7.1.
.. [2] ANSI/AWC NDS-2018, Table 12.3.3 and its footnotes; Appendix I.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Equation:
    """An equation as text, with its source and the names of the quantities in it."""

    text: str
    source: str
    symbols: tuple[str, ...]


_CODE = "EN 1995-1-1:2004+A1:2008"
WOOD = ("timber", "lvl")


def nailed(kind: str, predrilled: bool) -> Equation:
    """The embedment strength under a nail, or a screw up to 6 mm.

    .. math:: f_h = 0.082\\,\\rho_k d^{-0.3}; \\quad 0.082\\,(1 - 0.01 d)\\,\\rho_k \\text{ pre-drilled}

    Parameters
    ----------
    kind : str
        "timber", "lvl", "plywood", "hardboard", "particleboard" or "osb" [-].
    predrilled : bool
        Whether holes are pre-drilled [-].

    Returns
    -------
    Equation
        In d [mm], rho_k [kg/m3], t [mm].

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, eq. (8.15), (8.16), (8.20), (8.21), (8.22).
    """
    if kind in WOOD:
        if predrilled:
            return Equation("0.082*(1 - 0.01*d)*rho_k", f"{_CODE} eq. (8.16)", ("d", "rho_k"))
        return Equation("0.082*rho_k*d**(-0.3)", f"{_CODE} eq. (8.15)", ("d", "rho_k"))
    if kind == "plywood":
        return Equation("0.11*rho_k*d**(-0.3)", f"{_CODE} eq. (8.20)", ("d", "rho_k"))
    if kind == "hardboard":
        return Equation("30*d**(-0.3)*t**0.6", f"{_CODE} eq. (8.21)", ("d", "t"))
    return Equation("65*d**(-0.7)*t**0.1", f"{_CODE} eq. (8.22)", ("d", "t"))


def bolted(kind: str) -> Equation:
    """The embedment strength along the grain under a bolt, a dowel, or a screw beyond 6 mm.

    .. math:: f_{h,0} = 0.082\\,(1 - 0.01 d)\\,\\rho_k

    Parameters
    ----------
    kind : str
        "timber", "lvl", "plywood", "hardboard", "particleboard" or "osb" [-].

    Returns
    -------
    Equation
        In d [mm], rho_k [kg/m3], t [mm]; hardboard has no rule, that of a nail is taken.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, eq. (8.32), (8.36), (8.37).
    """
    if kind in WOOD:
        return Equation("0.082*(1 - 0.01*d)*rho_k", f"{_CODE} eq. (8.32)", ("d", "rho_k"))
    if kind == "plywood":
        return Equation("0.11*(1 - 0.01*d)*rho_k", f"{_CODE} eq. (8.36)", ("d", "rho_k"))
    if kind == "hardboard":
        return nailed(kind, False)
    return Equation("50*d**(-0.6)*t**0.2", f"{_CODE} eq. (8.37)", ("d", "t"))


def across(kind: str, wood: str) -> str:
    """The factor k_90 between embedment along and across the grain, as text in d [mm].

    .. math:: k_{90} = 1.35 + 0.015 d \\text{ (softwood)}, 1.30 + 0.015 d \\text{ (LVL)}, 0.90 + 0.015 d
       \\text{ (hardwood)}

    Parameters
    ----------
    kind : str
        "timber" or "lvl" [-].
    wood : str
        "softwood" or "hardwood" [-].

    Returns
    -------
    str
        The formula.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, eq. (8.33).
    """
    if kind == "lvl":
        return "1.30 + 0.015*d"
    return "0.90 + 0.015*d" if wood == "hardwood" else "1.35 + 0.015*d"


def to_50_psi(value: float) -> float:
    """A bearing strength rounded to 50 psi, as the tables print and use it.

    Parameters
    ----------
    value : float
        Bearing strength [psi].

    Returns
    -------
    float
        Rounded, half up [psi].

    References
    ----------
    .. [1] ANSI/AWC NDS-2018, Table 12.3.3.
    """
    return 50.0 * int(value / 50.0 + 0.5)


def bending_yield_of_nails(diameter: float) -> float:
    """Bending yield strength of common wire nails and wood screws by diameter; 0 where none is tabulated.

    Parameters
    ----------
    diameter : float
        Diameter [in].

    Returns
    -------
    float
        Strength [psi].

    References
    ----------
    .. [1] ANSI/AWC NDS-2018, Appendix I, Table I1 (nails, spikes, wood screws); from memory.
    """
    limits = ((0.142, 100e3), (0.177, 90e3), (0.236, 80e3), (0.273, 70e3), (0.344, 60e3), (0.375, 45e3))
    return next((strength for most, strength in limits if diameter <= most + 1e-9), 0.0) if diameter >= 0.099 else 0.0
