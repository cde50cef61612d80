"""Bending and shear of pieces where the member bends about both axes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions
from server.checks.combined_flow import UNSYMMETRICAL, write_rates
from server.checks.crosssection import Body, Part, Stretch
from server.checks.curves import Curve
from server.checks.resistance import Judge
from server.checks.twist import Twist
from server.mechanics.piecewise import evaluate
from server.mechanics.plane_cuts import PlaneCuts
from server.working.record import Given

Array = NDArray[np.float64]
BENDING = "E*((M_l*EI + M*EI_p)*(a - a_0) - (M*EI_l + M_l*EI_p)*(u - u_0))/(EI*EI_l - EI_p**2)"
SHEAR = "abs(chi*S - chi_l*S_l)/b"
TWISTED_SHEAR = "abs(chi*S - chi_l*S_l)/b + T*t_T"
WORDS = ("top", "bottom", "mean", "t", "c")
TOP, BOTTOM, MEAN, HIGHEST, LOWEST = range(5)


@dataclass(frozen=True, eq=False)
class CornerStress:
    """Normal stress at the corners of one piece over one stretch, at the places where any of them is greatest.

    Entries are places, rows combinations: ``corners`` (k + 1, entries, rows), the centroid last; ``at``; ``moments``
    (2, entries, rows) down and to the right.
    """

    points: Array
    upper: NDArray[np.bool_]
    corners: Array
    at: Array
    moments: Array

    def fibres(self) -> Array:
        """Top, bottom and mean (3, entries, rows): of the corners in the upper and lower half the worse one."""
        found = []
        for half in (self.upper, ~self.upper):
            own = self.corners[:-1][half]
            worst = np.abs(own).argmax(axis=0)
            found.append(np.take_along_axis(own, worst[None], axis=0)[0])
        return np.stack((*found, self.corners[-1]))

    def range(self) -> tuple[Array, Array]:
        """The highest and the lowest corner (entries, rows)."""
        return self.corners[:-1].max(axis=0), self.corners[:-1].min(axis=0)

    def corner(self, fibre: int, entry: int, row: int) -> Array:
        """The corner of a fibre: top, bottom, in most tension or compression; the centroid for the mean."""
        if fibre == MEAN:
            return np.asarray(self.points[-1])
        if fibre in (HIGHEST, LOWEST):
            own = self.corners[:-1, entry, row]
            return np.asarray(self.points[int(own.argmax() if fibre == HIGHEST else own.argmin())])
        half = np.flatnonzero(self.upper if fibre == TOP else ~self.upper)
        return np.asarray(self.points[half[int(np.abs(self.corners[half, entry, row]).argmax())]])


def corner_stress(actions: Actions, part: Part, stretch: Stretch) -> CornerStress:
    """Stress at every corner of a piece, exact at its turning points."""
    section, across = stretch.section, actions.across
    assert actions.moment is not None
    assert across is not None
    assert across.moment is not None
    place = next(i for i, other in enumerate(section.parts) if other.index == part.index)
    corners = part.outline
    points = np.concatenate((corners, section.properties.pieces.centroid[None, place]))
    weights = _weights(points, stretch, part.material.E)
    down, right = actions.moment, across.moment
    both = np.stack((down.coefficients, right.coefficients))
    curves = np.einsum("kp,prmd->krmd", weights, both)
    k, rows = len(points), curves.shape[1]
    found = Curve(down.breaks, curves.reshape(k * rows, *curves.shape[2:]), ()).over(stretch.start, stretch.end)
    at = np.concatenate((found.at_max.reshape(k, rows), found.at_min.reshape(k, rows)))
    wanted = np.concatenate((found.max.reshape(k, rows), found.min.reshape(k, rows)))
    own = np.tile(np.arange(k), 2)
    moments = np.empty((2, 2 * k, rows))
    for row in range(rows):
        sides = [evaluate(down.breaks, both[:, row], at[:, row], side) for side in ("left", "right")]
        off = np.array([np.abs((weights[own] * side.T).sum(axis=1) - wanted[:, row]) for side in sides])
        moments[:, :, row] = np.where(off[0] <= off[1], *sides)
    stress = np.einsum("kp,per->ker", weights, moments)
    middle = (part.top + part.bottom) / 2
    return CornerStress(points, corners[:, 1] >= middle, stress, at, moments)


def _weights(points: Array, stretch: Stretch, E: float) -> Array:
    """Stress per moment down and to the right at points (k, 2)."""
    whole = stretch.section.properties
    arms = points - whole.neutral_axis
    result: Array = E * (np.stack((-arms[:, 1], arms[:, 0]), axis=1) @ stretch.section.bending_flexibility)
    return result


def write_corner(
    found: CornerStress, part: Part, stretch: Stretch, title: str, fibre: int, entry: int, row: int, judge: Judge,
    group: str,
) -> float:  # fmt: skip
    """The step of one normal stress."""
    whole = stretch.section.properties
    a, u = found.corner(fibre, entry, row).tolist()
    M, M_l = found.moments[:, entry, row].tolist()
    values: dict[str, Given] = {
        "E": (part.material.E, "MPa"),
        "M": (M, "N*mm"),
        "M_l": (M_l, "N*mm"),
        "a": (a, "mm"),
        "a_0": (float(whole.neutral_axis[0]), "mm"),
        "u": (u, "mm"),
        "u_0": (float(whole.neutral_axis[1]), "mm"),
        "EI": (whole.EI, "N*mm2"),
        "EI_l": (whole.EI_lateral, "N*mm2"),
        "EI_p": (whole.EI_product, "N*mm2"),
    }
    return judge.working.step(
        title,
        f"sigma_{WORDS[fibre]}",
        BENDING,
        values,
        unit="MPa",
        source=f"{UNSYMMETRICAL}; at {found.at[entry, row]:.6g} mm, combination {judge.actions.strength_names[row]}; "
        "EI_l: lateral, EI_p: product",
        group=group,
    )


@dataclass(frozen=True, eq=False)
class CutShear:
    """Largest shear on level and upright cuts of one piece, one entry a stretch: stress, place, and its causes."""

    stress: Array
    at: Array
    cut: NDArray[np.intp]
    causes: Array
    cuts: tuple[PlaneCuts, ...]
    stretch: tuple[int, ...]


def cut_shear(actions: Actions, twist: Twist | None, body: Body, part: Part) -> CutShear | None:
    """Over the stretches where the piece is; torsion adds by its size."""
    rows = [(t, stretch, *_one(actions, twist, part, stretch)) for t, stretch in body.stretches_of(part)]
    if not rows:
        return None
    stretches, _, cuts, stress, at, cut, causes = zip(*rows, strict=True)
    return CutShear(np.array(stress), np.array(at), np.array(cut), np.array(causes), tuple(cuts), tuple(stretches))


def _one(
    actions: Actions, twist: Twist | None, part: Part, stretch: Stretch
) -> tuple[PlaneCuts, Array, Array, NDArray[np.intp], Array]:
    assert actions.shear is not None
    assert actions.across is not None
    assert actions.across.shear is not None
    cuts = stretch.section.plane_cuts[part.index]
    rates = np.stack((cuts.first, -cuts.aside), axis=1) / cuts.width[:, None] @ stretch.section.bending_flexibility
    causes: list[Curve] = [actions.shear, actions.across.shear]
    by_torque = 0.0
    if twist is not None:
        by_torque = stretch.section.torsion_stress[part.index]
        causes.append(twist.torque)
    both = np.stack([cause.coefficients[:, :, :3] for cause in causes])
    weights = np.concatenate(
        [np.concatenate((rates, np.full((len(rates), 1), way * by_torque)), axis=1) for way in (1.0, -1.0)]
    )[:, : len(causes)]
    weights = weights if twist is not None else weights[: len(rates)]
    curves = np.einsum("kp,prmd->krmd", weights, both)
    k, n = curves.shape[:2]
    size, at = (
        each.reshape(k, n)
        for each in Curve(actions.shear.breaks, curves.reshape(k * n, *curves.shape[2:]), ())
        .over(stretch.start, stretch.end)
        .absolute()
    )
    worst = (size >= size.max(axis=0) * (1 - 1e-9)).argmax(axis=0)
    rows = np.arange(n)
    stress, place = size[worst, rows], at[worst, rows]
    found = np.empty((n, len(causes)))
    for row in rows.tolist():
        sides = [
            np.array([evaluate(c.breaks, c.coefficients[row], float(place[row]), side) for c in causes])
            for side in ("left", "right")
        ]
        found[row] = min(sides, key=lambda side: abs(abs(float(weights[worst[row]] @ side)) - stress[row]))
    return cuts, stress, place, worst % len(rates), found


def write_cut_shear(found: CutShear, part: Part, body: Body, judge: Judge, group: str) -> float:
    """The steps of the largest shear stress of a piece."""
    entry, row = (int(i) for i in np.unravel_index(int(found.stress.argmax()), found.stress.shape))
    stretch, cuts, k = body.stretches[found.stretch[entry]], found.cuts[entry], int(found.cut[entry, row])
    V, V_l, *T = found.causes[entry, row].tolist()
    where = f"at {found.at[entry, row]:.6g} mm, combination {judge.actions.strength_names[row]}"
    down, across = write_rates(stretch.section, V, V_l, where, judge, group)
    values: dict[str, Given] = {
        "chi": (down, "1/mm2"),
        "S": (float(cuts.first[k]), "N*mm"),
        "chi_l": (across, "1/mm2"),
        "S_l": (float(cuts.aside[k]), "N*mm"),
        "b": (float(cuts.width[k]), "mm"),
    }
    by_field = stretch.section.settled.field is not None
    of = "of this piece alone, less the flows of its joints there" if by_field else "of all pieces cut there"
    if T:
        values |= {"T": (abs(T[0]), "N*mm"), "t_T": (stretch.section.torsion_stress[part.index], "1/mm3")}
        of += "; t_T: stress of a unit torque, as sizes, short of the peaks at inward corners"
    way = f"level cut {cuts.at[k]:.6g} mm up" if cuts.level[k] else f"upright cut {cuts.at[k]:.6g} mm across"
    return judge.working.step(
        "Largest shear stress on level and upright cuts" + (", with that of torsion" if T else ""),
        "tau",
        TWISTED_SHEAR if T else SHEAR,
        values,
        unit="MPa",
        source=f"{UNSYMMETRICAL}; {way}; S, S_l: first moments beyond it, {of}",
        group=group,
    )
