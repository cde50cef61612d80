"""Bonds too deep or too wide for an even stress: EN 1995-1-1 expressions (9.10) and (9.14).

Where a panel's bond is deeper than a few times the panel is thick, the flow gathers at the edge of the bond. The code
lets the mean stress stand and reduces the strength by the power 0.8. The reduction is put on the panel's rolling shear,
and on the bond itself: its strength is that of small coupons, in which the stress is even.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from server.checks.crosssection import Body, Part, Site
from server.checks.rules import EDITION, SKINS, WEBS, Printed, Reduction
from server.working.record import Given

NEAR_FLUSH = 1.0  # of the skin's thickness: a skin that overhangs a rib by no more ends there (a U, not an I)


@dataclass(frozen=True)
class WideBond:
    """A bond over its bound: the rule that says so, in words with numbers, and the reduction it asks for."""

    rule: str
    words: str
    reduction: float
    step: Printed

    def applied(self) -> Reduction:
        """The reduction as a limit takes it."""
        return Reduction(self.rule, self.reduction, self.step)


def wide_bond(site: Site, part: Part, body: Body) -> WideBond | None:
    """What the rules say of one panel at a bond; None where the bond is within bounds, or the piece is no panel."""
    if not (site.bonded and part.rolls):
        return None
    across, up = np.abs(np.asarray(site.contact.end) - np.asarray(site.contact.start))
    return _deep(site, part, body) if up > across else _broad(site, part)


def bond_reductions(site: Site, body: Body, rules: frozenset[str]) -> tuple[Reduction, ...]:
    """What the chosen rules put on the bond itself: the more severe of its two panels'."""
    if not rules:
        return ()
    found = [wide for part in (site.first, site.second) if (wide := wide_bond(site, part, body)) and wide.rule in rules]
    return (min(found, key=lambda wide: wide.reduction).applied(),) if found else ()


def surface_reductions(site: Site, part: Part, body: Body, rules: frozenset[str]) -> tuple[Reduction, ...]:
    """What the chosen rules put on a panel's surface at a bond."""
    if not rules:
        return ()
    wide = wide_bond(site, part, body)
    return (wide.applied(),) if wide and wide.rule in rules else ()


def _deep(site: Site, part: Part, body: Body) -> WideBond | None:
    """Expression (9.10): a web's glue line deeper than 4 b_ef."""
    behind = _bonded_behind(site, part, body)
    thickness = extent(part, 0)
    effective = thickness / 2 if behind else thickness
    return _over(
        WEBS,
        f"{EDITION}, expression (9.10): the flange's depth h_f is over 4 b_ef; b_ef is "
        + (f"half of {part.name}, which is bonded on both faces" if behind else f"the thickness of {part.name}"),
        "(4*b_ef/h_f)**0.8",
        {"b_ef": (effective, "mm"), "h_f": (site.contact.length, "mm")},
        (site.contact.length, 4 * effective, "h_f", "4 b_ef", "(9.10)"),
    )


def _broad(site: Site, part: Part) -> WideBond | None:
    """Expression (9.14): a rib's glue line wider than 8 h_f, or 4 h_f where the skin ends at the rib."""
    low, high = sorted((float(site.contact.start[0]), float(site.contact.end[0])))
    left, right = float(part.box[0][0]), float(part.box[1][0])
    thickness = extent(part, 1)
    ends = min(low - left, right - high) <= NEAR_FLUSH * thickness
    times = 4 if ends else 8
    why = f"; 4 instead of 8 where {part.name} ends at the rib (U-shaped part)" if ends else ""
    return _over(
        SKINS,
        f"{EDITION}, expression (9.14): the rib's width b_w is over {times} h_f of {part.name}{why}",
        f"({times}*h_f/b_w)**0.8",
        {"h_f": (thickness, "mm"), "b_w": (site.contact.length, "mm")},
        (site.contact.length, times * thickness, "b_w", f"{times} h_f", "(9.14)"),
    )


def _over(
    rule: str,
    source: str,
    text: str,
    values: Mapping[str, Given],
    bounds: tuple[float, float, str, str, str],
) -> WideBond | None:
    length, bound, symbol, bounded_by, expression = bounds
    if length <= bound * (1 + 1e-9):
        return None
    words = f"{symbol} = {length:.4g} mm > {bounded_by} = {bound:.4g} mm. EN 1995-1-1:2004 {expression}"
    step = Printed("Reduction for a bond with uneven stress", "k_red", text, values, "", source)
    return WideBond(rule, words, step.value, step)


def extent(part: Part, axis: int) -> float:
    """Width (0) or depth (1) of a piece's bounding box [mm]."""
    return float(part.box[1][axis] - part.box[0][axis])


def _bonded_behind(site: Site, part: Part, body: Body) -> bool:
    """Whether the piece is bonded on its other face over the same height (a web between two flange halves)."""
    low, high = sorted((site.contact.start[1], site.contact.end[1]))
    for other in body.sites:
        if other is site or not other.bonded or part not in (other.first, other.second):
            continue
        bottom, top = sorted((other.contact.start[1], other.contact.end[1]))
        apart = abs(other.contact.start[0] - site.contact.start[0]) > 0.5 * extent(part, 0)
        if apart and min(high, top) - max(low, bottom) > 0:
            return True
    return False
