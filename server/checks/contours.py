"""Pictures of stress in the section: bands of shear and bending stress at one place, for sheets to draw.

By themselves where the greatest shear, or the greatest moment, of the member stands; or at a place and for a
combination that somebody chose.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions
from server.checks.crosssection import Body, Stretch
from server.checks.curves import largest
from server.checks.twist import Twist
from server.mechanics.field_contours import above, stress_grid
from server.mechanics.piecewise import evaluate

Array = NDArray[np.float64]
BANDS = 6
_QUANTILE = 0.985  # of the area: the highest band begins below the peaks at inward corners


@dataclass(frozen=True)
class Look:
    """The place and the combination that somebody chose; None where the check chooses."""

    at: float | None = None
    combination: str | None = None


def contours(
    body: Body, actions: Actions, twist: Twist | None, look: Look | None = None, *, unit: float = 1.0
) -> dict[str, Any] | None:
    """Bands of shear and of bending stress; None where no field was solved or no combination is for strength.

    ``unit`` what the levels are round in [MPa].
    """
    shear, moment = actions.shear, actions.moment
    if shear is None or moment is None or actions.slips:
        return None
    look = look or Look()
    places = {
        "shear": largest(*shear.whole.absolute()),
        "bending": largest(*moment.whole.absolute()),
    }
    found: dict[str, Any] = {}
    for name, peak in places.items():
        row = peak.row
        if look.combination in actions.strength_names:
            row = actions.strength_names.index(look.combination)
        at = peak.at if look.at is None else min(max(look.at, 0.0), body.length)
        stretch = next(s for s in body.stretches if at <= s.end)
        if stretch.section.settled.field is None:
            return None
        across = actions.across
        V, M, T, V_l, M_l = (
            max((_value(curve, row, at, side) for side in ("left", "right")), key=abs)
            for curve in (
                shear,
                moment,
                None if twist is None else twist.torque,
                None if across is None else across.shear,
                None if across is None else across.moment,
            )
        )
        if name == "shear":
            picture = _shear(stretch, _rates(stretch, across, V, V_l), T, unit)
        else:
            picture = _bending(stretch, _rates(stretch, across, M, M_l), unit)
        found[name] = {
            "at": at,
            "combination": actions.strength_names[row],
            "shear": V,
            "moment": M,
            "torque": T,
            **({} if across is None else {"shear_lateral": V_l, "moment_lateral": M_l}),
            "pieces": [part.name for part in stretch.section.parts],
            **picture,
        }
    return found


def _value(curve: Any, row: int, at: float, side: Any) -> float:
    return 0.0 if curve is None else float(evaluate(curve.breaks, curve.coefficients[row], at, side))


def _rates(stretch: Stretch, across: Actions | None, down: float, right: float) -> tuple[float, float]:
    """Curvatures of moments, or their change with shears; sideways none where the member is held."""
    if across is None:
        return down / stretch.section.properties.EI, 0.0
    found = stretch.section.bending_flexibility @ (down, right)
    return float(found[0]), float(found[1])


def _shear(stretch: Stretch, rates: tuple[float, float], T: float, unit: float) -> dict[str, Any]:
    section = stretch.section
    field = section.settled.field
    assert field is not None
    alike = [replace(p, G=part.field_modulus) for p, part in zip(section.pieces, section.parts, strict=True)]
    points, triangles, each, area = stress_grid(alike, section.properties, field)
    stress = each[:, :, 0] * rates[0] - each[:, :, 1] * rates[1] + each[:, :, 2] * (T / field.GJ)
    return _bands(points, triangles, np.hypot(stress[:, 0], stress[:, 1]), area, unit)


def _bending(stretch: Stretch, rates: tuple[float, float], unit: float) -> dict[str, Any]:
    section = stretch.section
    field = section.settled.field
    assert field is not None
    mesh = field.mesh
    E = np.empty(len(mesh.points))
    E[mesh.triangles] = np.array([piece.E for piece in section.pieces])[mesh.piece][:, None]
    arms = mesh.points - section.properties.neutral_axis
    return _bands(mesh.points, mesh.triangles, E * (rates[1] * arms[:, 0] - rates[0] * arms[:, 1]), None, unit)


def _bands(
    points: Array, triangles: NDArray[np.intp], values: Array, area: Array | None, unit: float
) -> dict[str, Any]:
    """Levels between round numbers, and the closed lines around all that lies above each."""
    top = float(values.max())
    if area is not None:
        order = np.argsort(values)
        share = area[order].cumsum() / area.sum()
        top = float(values[order][int(np.searchsorted(share, _QUANTILE))])
    low = min(float(values.min()), 0.0)
    step = unit * _round_step((top - low) / BANDS / unit)
    if step <= 0:
        return {"levels": [], "above": [], "greatest": float(values.max()), "least": float(values.min())}
    levels = [k * step for k in range(int(np.floor(low / step)), int(np.ceil(top / step)))]
    raw = [above(points, triangles, values, level) for level in levels]
    lines = [[line for line in map(_rounded, loops) if line] for loops in raw]
    return {"levels": levels, "above": lines, "greatest": top, "least": float(values.min())}


def _rounded(loop: list[tuple[float, float]]) -> list[list[float]]:
    """To a thousandth, without the points in the middle of a straight side."""
    line = np.array(loop).round(3)
    line = line[(line != np.roll(line, 1, axis=0)).any(axis=1)]
    if len(line) < 3:
        return []
    into, out = line - np.roll(line, 1, axis=0), np.roll(line, -1, axis=0) - line
    bends = np.abs(into[:, 0] * out[:, 1] - into[:, 1] * out[:, 0]) > 1e-2 * np.hypot(*into.T) * np.hypot(*out.T)
    kept: list[list[float]] = line[bends].tolist()
    return kept


def _round_step(step: float) -> float:
    if not step > 0:
        return 0.0
    power = 10.0 ** np.floor(np.log10(step))
    return float(next(k for k in (1, 2, 2.5, 5, 10) if k * power >= step * (1 - 1e-9)) * power)
