"""Stresses of the pieces of a member whose joints slip: each piece has its own axial force and its own bending."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.checks.crosssection import Part, Stretch
from server.checks.resistance import Judge
from server.checks.slide import Slide
from server.mechanics.piecewise import evaluate

Array = NDArray[np.float64]
STRESS = "E*N/EA - E*M_i*(u - u_i)/EI_i"
CUT = "abs(sum(n_x))/b"
MECHANICS = "each piece plane by itself, curvature in common (Newmark, Siess and Viest 1951)"
SAMPLES = 9  # heights a band is looked at; between them a parabola, which is exact where the width stays the same


@dataclass(frozen=True, eq=False)
class Fibres:
    """Normal stress along the member in one piece: top, bottom and centroid, as curves of every combination."""

    breaks: Array
    stress: Array  # (3, combinations, cells, 6)

    def extremes(self, start: float, end: float) -> tuple[Array, Array]:
        """Stress of all three fibres, (3, 6, c), where any of them is greatest or least, and the places, (6, c)."""
        from server.mechanics.piecewise import extremes

        found = extremes(self.breaks, self.stress, start, end)
        places = np.stack([found.at_max, found.at_min], axis=1).reshape(6, -1)  # fibre by fibre, greatest then least
        wanted = np.stack([found.max, found.min], axis=1).reshape(6, -1)
        fibre, row = np.repeat(np.arange(3), 2)[:, None], np.arange(places.shape[1])
        both = []
        for side in (False, True):
            values = evaluate(self.breaks, self.stress, places.ravel(), "right" if side else "left")
            own = values.reshape(3, len(row), 6, len(row))
            both.append(np.diagonal(own, axis1=1, axis2=3))  # (3, 6, c)
        left, right = both
        entry = np.arange(6)[:, None]
        nearer = np.abs(left[fibre, entry, row] - wanted) <= np.abs(right[fibre, entry, row] - wanted)
        return np.where(nearer, left, right), places


def fibres(slide: Slide, part: Part, stretch: Stretch) -> Fibres:
    """Curves of the stress in a piece from its axial force and the member's curvature."""
    E, EA, _, height = _piece(part, stretch)
    force, curve = slide.axial[part.index], slide.curvature
    arms = np.array([part.top - height, part.bottom - height, 0.0])
    stress = E * (force.coefficients / EA + arms[:, None, None, None] * curve.coefficients)
    return Fibres(curve.breaks, stress)


def _piece(part: Part, stretch: Stretch) -> tuple[float, float, float, float]:
    """E, EA and EI (about its own centroid) of as much of it as counts, and the centroid's height."""
    position = next(i for i, other in enumerate(stretch.section.parts) if other is part)
    pieces = stretch.section.properties.pieces
    E, share = part.material.E, stretch.section.share(position)
    return (
        E,
        E * share * float(pieces.area[position]),
        E * share * float(pieces.inertia[position, 0]),
        float(pieces.centroid[position, 1]),
    )


def write_stress(
    slide: Slide, part: Part, stretch: Stretch, at: float, row: int, wanted: float, judge: Judge, group: str
) -> list[float]:
    """Steps for the stress at a piece's top, bottom and centroid where it is used most; ``wanted`` picks the side."""
    E, EA, EI, height = _piece(part, stretch)
    force, curve = slide.axial[part.index], slide.curvature
    sides = []
    for side in ("left", "right"):
        N = float(evaluate(force.breaks, force.coefficients[row], at, "left" if side == "left" else "right"))
        kappa = float(evaluate(curve.breaks, curve.coefficients[row], at, "left" if side == "left" else "right"))
        sides.append((N, -EI * kappa))
    N, M = min(sides, key=lambda s: abs(E * s[0] / EA - E * s[1] * (part.top - height) / EI - wanted))
    found = []
    where = f"{MECHANICS}; at {at:.6g} mm, combination {judge.actions.strength_names[row]}"
    for name, up in (("top", part.top), ("bottom", part.bottom), ("mean", height)):
        found.append(
            judge.working.step(
                "Normal stress at its centroid" if name == "mean" else f"Normal stress at its {name}",
                f"sigma_{name}",
                STRESS,
                {
                    "E": (E, "MPa"), "N": (N, "N"), "EA": (EA, "N"), "M_i": (M, "N*mm"), "u": (up, "mm"),
                    "u_i": (height, "mm"), "EI_i": (EI, "N*mm2"),
                },
                unit="MPa", source=where, group=group,
            )
        )  # fmt: skip
    return found


@dataclass(frozen=True, eq=False)
class Cuts:
    """The section of one stretch cut at many heights: what of each piece lies above, from the lowest height up.

    ``up`` (h,); ``area`` (n, h) and ``moment`` (n, h) about each piece's own centroid, both times E; ``width`` (h,) of
    all pieces cut; ``through`` (n, h) whether a piece is cut there.
    """

    up: Array
    area: Array
    moment: Array
    width: Array
    through: NDArray[np.bool_]


def cuts(stretch: Stretch) -> Cuts:
    """Cut a section at several heights of every band between corner heights."""
    section = stretch.section
    band = section.properties.bands
    E = np.array([piece.E for piece in section.pieces])[:, None, None]
    centre = section.properties.pieces.centroid[:, 1][:, None, None]
    s = np.linspace(0, 1, SAMPLES)
    H = (band.high - band.low)[:, None]
    low, high = band.width_low[:, :, None], band.width_high[:, :, None]
    up = band.low[:, None] + H * s
    width = low + (high - low) * s
    # area and first moment from each height to the top of its band, then all of the bands above
    area = H * ((1 - s) * (width + high) / 2)
    lever = H * (1 - s)
    beyond = area * (up - centre) + lever**2 * (width + 2 * high) / 6
    above = [np.cumsum(part[:, ::-1, 0], axis=1)[:, ::-1] - part[:, :, 0] for part in (area, beyond)]
    count = len(section.pieces)
    return Cuts(
        up.ravel(),
        (E * (area + above[0][:, :, None])).reshape(count, -1),
        (E * (beyond + above[1][:, :, None])).reshape(count, -1),
        width.sum(axis=0).ravel(),
        np.broadcast_to((low + high) > 0, width.shape).reshape(count, -1),
    )


@dataclass(frozen=True, eq=False)
class SlidingShear:
    """Largest shear stress on horizontal cuts through each piece of a stretch, by combination: (n, c) each.

    ``change`` (n, c, n): change of axial force along the member of what each piece has above the cut [N/mm].
    """

    stress: Array
    at: Array
    up: Array
    width: Array
    change: Array


def sliding_shear(slide: Slide, stretch: Stretch) -> SlidingShear:
    """How fast the axial force above a cut changes along the member, over the width of the cut."""
    cut, parts = cuts(stretch), stretch.section.parts
    EA = np.array([_piece(part, stretch)[1] for part in parts])
    places, force, turn = _slopes(slide, stretch, [part.index for part in parts])
    n, c = len(parts), turn.shape[0]
    blank = np.zeros((4, n, c))
    found = SlidingShear(blank[0], blank[1], blank[2], blank[3], np.zeros((n, c, n)))
    solid = cut.width > 1e-9 * cut.width.max()
    width = np.where(solid, cut.width, np.inf)
    for row in range(c):
        strain = force[:, row] / EA[:, None]  # (n, x)
        total = strain.T @ cut.area + turn[row][:, None] * cut.moment.sum(axis=0)
        tau = np.abs(total) / width  # (x, h)
        for i in range(n):
            own = np.where(cut.through[i] & solid, tau, -1.0)
            largest = own.max()
            x = int((own >= largest * (1 - 1e-9)).any(axis=1).argmax())  # the leftmost place
            h = int(own[x].argmax())
            _settle(found, i, row, cut, strain[:, x], float(turn[row, x]), h)
            found.at[i, row] = places[x]
    return found


def _settle(found: SlidingShear, i: int, row: int, cut: Cuts, strain: Array, turn: float, h: int) -> None:
    """Put the cut at the top of the parabola through the three heights around the largest sample of its band."""
    first = h - h % SAMPLES
    middle = min(max(h, first + 1), first + SAMPLES - 2)
    near = slice(middle - 1, middle + 2)
    parts = strain[:, None] * cut.area[:, near] + turn * cut.moment[:, near]  # (n, 3)
    width = cut.width[near]
    tau = np.abs(parts.sum(axis=0)) / np.where(width > 0, width, np.inf)
    bend, slope = tau[0] - 2 * tau[1] + tau[2], (tau[2] - tau[0]) / 2
    t = float(np.clip(-slope / bend, -1, 1)) if bend < 0 else (1.0 if tau[2] > tau[0] else -1.0)
    weights = np.array([t * (t - 1) / 2, 1 - t * t, t * (t + 1) / 2])
    found.change[i, row] = parts @ weights
    found.width[i, row] = width @ weights
    found.up[i, row] = cut.up[near] @ weights
    found.stress[i, row] = abs(found.change[i, row].sum()) / found.width[i, row] if found.width[i, row] > 0 else 0.0


def _slopes(slide: Slide, stretch: Stretch, indices: list[int]) -> tuple[Array, Array, Array]:
    """Places (x,), slopes of the axial forces (n, c, x) and of the curvature (c, x), on both sides of every break."""
    curve = slide.curvature
    inside = (curve.breaks[:-1] >= stretch.start - 1e-9) & (curve.breaks[1:] <= stretch.end + 1e-9)
    low, high = curve.breaks[:-1][inside], curve.breaks[1:][inside]
    width = high - low
    powers = np.arange(1.0, 6.0) * width[:, None] ** np.arange(5.0)

    def both(coefficients: Array) -> Array:
        own = coefficients[..., inside, 1:]
        sides = np.stack([own[..., 0], (own * powers).sum(axis=-1)], axis=-1)
        return sides.reshape(*sides.shape[:-2], -1)

    places = np.stack([low, high], axis=-1).ravel()
    return places, np.array([both(slide.axial[i].coefficients) for i in indices]), both(curve.coefficients)
