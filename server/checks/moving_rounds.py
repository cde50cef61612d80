"""What a round of a check with moving axles found that it still needs: shear over further parts, closer positions.

Zones and schedules of fasteners ask for the shear of parts of the member that nobody could foresee; and where joints
slip, the worst position of the axles for a joint is sought about the best of even steps. The check is run again with
these rows, until nothing new is asked for.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from server.checks import moving
from server.checks.actions import Actions
from server.checks.curves import Curve
from server.checks.resistance import Findings
from server.checks.slide import Slide
from server.mechanics.piecewise import Extremes

ROUNDS = 4


def further(actions: Actions, slides: Sequence[Slide], turning: Sequence[moving.Row] = ()) -> moving.Wants | None:
    """What the next round needs beyond this one; None where this one was the last.

    ``turning`` positions that torque beside the axles' shear asks for.
    """
    if actions.moving is None:
        return None
    had = actions.moving.question.wants
    asked = actions.asked
    rows = () if had.rows else tuple(row for each in slides for row in _closer(actions, each))
    rows += tuple(turning)
    if not asked and not rows:
        return None
    return moving.Wants((*had.ranges, *asked), (*had.rows, *rows))


def _closer(actions: Actions, slide: Slide) -> Iterator[moving.Row]:
    """Positions about those at which a joint slips, a piece bends or the member sags most."""
    assert actions.moving is not None
    question, written = actions.moving.question, actions.moving.written
    curves: list[tuple[Curve, Sequence[int]]] = [(each, slide.strength_rows) for each in slide.flows]
    curves.append((slide.curvature, slide.strength_rows))
    for late in (slide.actions.sag, slide.actions.long_term):
        if late is not None:
            curves.append((late, slide.actions.deflection))
    best = {row for curve, rows in curves for row in _best(curve.whole, rows, written.combination)}
    for row in sorted(best):
        k = written.combination[row]
        if question.moves(k):
            yield from moving.closer(moving.Row(k, written.parked[row]), question.moves(k))


def _best(found: Extremes, rows: Sequence[int], combination: Sequence[int]) -> Iterator[int]:
    """The row of the greatest and of the least value of every combination."""
    of = np.array([combination[row] for row in rows])
    for k in np.unique(of):
        own: NDArray[np.intp] = np.flatnonzero(of == k)
        yield rows[int(own[found.max[own].argmax()])]
        yield rows[int(own[found.min[own].argmin()])]


def caution(actions: Actions, findings: Findings) -> None:
    """What moving axles leave to the reader."""
    if actions.moving is None:
        return
    findings.caution(
        "moving loads",
        "The axles stand still at every position and weigh what was typed: impact, braking, sway and fatigue are not "
        "in them. Put impact into the factor of the case.",
        answer=True,
    )
    question = actions.moving.question
    if question.stepped and any(len(question.moves(k)) > 1 for k in range(len(question.factors))):
        findings.caution(
            "moving loads",
            "Joints slip, and several moving loads stand in one combination: they were moved one at a time, the others "
            "standing where they bend the member most.",
        )


def reactions(actions: Actions, supports: Sequence[float]) -> dict[str, list[dict[str, float]]]:
    """Reactions of every combination; extremes over all positions where axles move."""
    found: dict[str, list[dict[str, float]]] = {}
    force, couple = actions.response.reaction_force, actions.response.reaction_couple
    moves = (
        set()
        if actions.moving is None
        else {
            name
            for name, k in zip(actions.names, actions.moving.written.combination, strict=True)
            if actions.moving.question.moves(k)
        }
    )
    for name in dict.fromkeys(actions.names):
        rows = [row for row, each in enumerate(actions.names) if each == name]
        found[name] = [
            {
                "at": at,
                "max": float(force[rows, i].max()),
                "min": float(force[rows, i].min()),
                "couple_max": float(couple[rows, i].max()),
                "couple_min": float(couple[rows, i].min()),
            }
            if name in moves
            else {"at": at, "force": float(force[rows[0], i]), "couple": float(couple[rows[0], i])}
            for i, at in enumerate(supports)
        ]
    return found
