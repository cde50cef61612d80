r"""How near fasteners may stand to each other, to ends and to edges, and how many of a row count.

Distances in mm. ``a1`` spacing along the grain, ``a2`` across it, ``a3t`` to a loaded end, ``a3c`` to an unloaded end,
``a4t`` to a loaded edge, ``a4c`` to an unloaded edge (EN 1995-1-1:2004+A1:2008, Figure 8.7).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

NAMES = {
    "a1": "spacing along the grain",
    "a2": "spacing across the grain",
    "a3t": "to a loaded end",
    "a3c": "to an unloaded end",
    "a4t": "to a loaded edge",
    "a4c": "to an unloaded edge",
}


@dataclass(frozen=True)
class Distances:
    """The least distances [mm] and where they come from."""

    a1: float
    a2: float
    a3t: float
    a3c: float
    a4t: float
    a4c: float
    source: str


def nails(
    diameter: float, *, angle: float, density: float, predrilled: bool, panel: str = "", plate: bool = False
) -> Distances:
    """Least distances of nails, and of screws up to 6 mm, in wood.

    Parameters
    ----------
    diameter : float
        Diameter d [mm].
    angle : float
        Angle between force and grain, 0 to 90 [deg].
    density : float
        Characteristic density [kg/m3]; above 420 the wider spacings hold.
    predrilled : bool
        Whether holes are pre-drilled [-].
    panel : str
        "" where the other member is timber, else the panel's kind: spacings times 0.85 [-].
    plate : bool
        Whether the other member is a steel plate: spacings times 0.7 [-].

    Returns
    -------
    Distances
        In mm.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, Table 8.2; 8.3.1.3(1); 8.3.1.4(1). From memory, checked against derived cases.
    """
    cos, sin = math.cos(math.radians(angle)), math.sin(math.radians(angle))
    thin = diameter < 5
    if predrilled:
        along, over, end, free_end = 4 + cos, 3 + sin, 7 + 5 * cos, 7.0
        edge, free_edge = 3 + (2 if thin else 4) * sin, 3.0
    elif density <= 420:
        along, over, end, free_end = 5 + (5 if thin else 7) * cos, 5.0, 10 + 5 * cos, 10.0
        edge, free_edge = 5 + (2 if thin else 5) * sin, 5.0
    else:
        along, over, end, free_end = 7 + 8 * cos, 7.0, 15 + 5 * cos, 15.0
        edge, free_edge = 7 + (2 if thin else 5) * sin, 7.0
    share = 0.7 if plate else 0.85 if panel else 1.0
    d = diameter
    source = "EN 1995-1-1:2004+A1:2008, Table 8.2" + (
        ", spacings x 0.7 (8.3.1.4)" if plate else ", spacings x 0.85 (8.3.1.3)" if panel else ""
    )
    return Distances(share * along * d, share * over * d, end * d, free_end * d, edge * d, free_edge * d, source)


def nails_in_panel(diameter: float, *, angle: float, panel: str, density: float, predrilled: bool) -> Distances:
    """Least distances of nails in the panel itself.

    Parameters
    ----------
    diameter : float
        Diameter d [mm].
    angle : float
        Angle between force and the panel's grain, 0 to 90 [deg].
    panel : str
        "plywood" has its own edge distances; other panels take those of timber [-].
    density : float
        Characteristic density of the timber behind it [kg/m3].
    predrilled : bool
        Whether holes are pre-drilled [-].

    Returns
    -------
    Distances
        In mm.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, 8.3.1.3(1) to (3). From memory.
    """
    wood = nails(diameter, angle=angle, density=density, predrilled=predrilled, panel=panel)
    if panel != "plywood":
        return wood
    loaded = (3 + 4 * math.sin(math.radians(angle))) * diameter
    source = "EN 1995-1-1:2004+A1:2008, Table 8.2 x 0.85 and 8.3.1.3(2)"
    return Distances(wood.a1, wood.a2, loaded, 3 * diameter, loaded, 3 * diameter, source)


def bolts(diameter: float, *, angle: float) -> Distances:
    """Least distances of bolts, and of screws beyond 6 mm.

    Parameters
    ----------
    diameter : float
        Diameter d [mm].
    angle : float
        Angle between force and grain, 0 to 90 [deg].

    Returns
    -------
    Distances
        In mm.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, Table 8.4. From memory.
    """
    cos, sin = math.cos(math.radians(angle)), math.sin(math.radians(angle))
    d = diameter
    free_end = 4 * d if angle <= 30 else max((1 + 6 * sin) * d, 4 * d)
    return Distances(
        (4 + cos) * d,
        4 * d,
        max(7 * d, 80.0),
        free_end,
        max((2 + 2 * sin) * d, 3 * d),
        3 * d,
        "EN 1995-1-1:2004+A1:2008, Table 8.4",
    )


def dowels(diameter: float, *, angle: float) -> Distances:
    """Least distances of dowels.

    Parameters
    ----------
    diameter : float
        Diameter d [mm].
    angle : float
        Angle between force and grain, 0 to 90 [deg].

    Returns
    -------
    Distances
        In mm.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, Table 8.5. From memory.
    """
    cos, sin = math.cos(math.radians(angle)), math.sin(math.radians(angle))
    d = diameter
    end = max(7 * d, 80.0)
    free_end = max(3.5 * d, 40.0) if angle <= 30 else max(end * sin, 3.5 * d, 40.0)
    return Distances(
        (3 + 2 * cos) * d,
        3 * d,
        end,
        free_end,
        max((2 + 2 * sin) * d, 3 * d),
        3 * d,
        "EN 1995-1-1:2004+A1:2008, Table 8.5",
    )


def american(diameter: float, *, angle: float, predrilled: bool, hardwood: bool = False) -> Distances:
    """Distances at which the yield-limit values of the NDS hold in full.

    Parameters
    ----------
    diameter : float
        Diameter D [mm].
    angle : float
        Angle between force and grain, 0 to 90 [deg]; beyond 45 deg the rules across the grain hold.
    predrilled : bool
        Whether holes are pre-drilled [-].
    hardwood : bool
        Whether the wood is a hardwood: ends in tension 5 D in the place of 7 D [-].

    Returns
    -------
    Distances
        In mm.

    Notes
    -----
    Below 1/4 in the code asks only that the wood does not split; the distances are those its commentary recommends.

    References
    ----------
    .. [1] ANSI/AWC NDS-2018, Tables 12.5.1A to D; Commentary C12.1.6.6 for D below 1/4 in. From memory.
    """
    d, over = diameter, angle > 45
    if diameter < 25.4 / 4 - 1e-9:
        bored = predrilled
        return Distances(
            (10 if bored else 15) * d,
            (3 if bored else 5) * d,
            (10 if bored else 15) * d,
            (5 if bored else 10) * d,
            (5 if bored else 10) * d if over else 2.5 * d,
            2.5 * d,
            "ANSI/AWC NDS-2018, Commentary C12.1.6.6 (recommended)",
        )
    return Distances(
        5 * d if over else 4 * d,
        3 * d if over else 1.5 * d,
        4 * d if over else (5 if hardwood else 7) * d,
        4 * d,
        4 * d if over else 1.5 * d,
        1.5 * d,
        "ANSI/AWC NDS-2018, Tables 12.5.1A to D",
    )


def counting_nails(count: int, spacing_over_diameter: float, predrilled: bool) -> tuple[float, float | None]:
    """Effective number of nails in a row along the grain, and its exponent.

    .. math:: n_{ef} = n^{k_{ef}}

    Parameters
    ----------
    count : int
        Nails in the row, n [-].
    spacing_over_diameter : float
        a_1/d [-].
    predrilled : bool
        Whether holes are pre-drilled [-].

    Returns
    -------
    tuple of float and float or None
        n_ef and k_ef [-]; k_ef None where the spacing is below the table: then one nail counts.

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, eq. (8.17), Table 8.1 with linear interpolation.
    """
    known = [(4.0, 0.5)] if predrilled else []
    known += [(7.0, 0.7), (10.0, 0.85), (14.0, 1.0)]
    ratio = spacing_over_diameter
    if ratio < known[0][0] - 1e-9:
        return 1.0, None
    exponent = 1.0
    for (low, below), (high, above) in pairwise(known):
        if ratio <= high:
            exponent = below + (above - below) * (max(ratio, low) - low) / (high - low)
            break
    return float(count) ** exponent, exponent


def counting_bolts(count: int, spacing_over_diameter: float, angle: float) -> float:
    """Effective number of bolts, dowels, or screws beyond 6 mm, in a row along the grain.

    .. math:: n_{ef} = \\min(n, n^{0.9} \\sqrt[4]{a_1/(13 d)}), \\text{ linearly to } n \\text{ at } 90^\\circ

    Parameters
    ----------
    count : int
        Fasteners in the row, n [-].
    spacing_over_diameter : float
        a_1/d [-].
    angle : float
        Angle between force and grain, 0 to 90 [deg].

    Returns
    -------
    float
        n_ef [-].

    References
    ----------
    .. [1] EN 1995-1-1:2004+A1:2008, 8.5.1.1(4), eq. (8.34), (8.35).
    """
    along: float = min(float(count), float(count) ** 0.9 * (spacing_over_diameter / 13) ** 0.25)
    return along + (count - along) * angle / 90
