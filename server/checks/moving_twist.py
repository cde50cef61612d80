"""Moving axles beside loads that twist the member: where the axles are worst for shear and torque together.

The torque is that of loads that stand still. A joint's flow is a V + b T, so its worst position of the axles is that of
an envelope whose moving part is taken a times, and whose part that stays is a V + b T of what stands still.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from server.checks.combined_flow import CombinedAlong
from server.checks.moving import Question, Row
from server.mechanics.moving_envelope import Envelope, Runner
from server.mechanics.piecewise import evaluate

Array = NDArray[np.float64]
Causes = dict[tuple[float, float], list[tuple[float, float]]]
"""Ranges along the member, by what a shear and a torque of 1 give."""


def rows(along: object) -> tuple[Row, ...]:
    """Positions of the axles that are worst for a joint or a piece; none where nothing moves or nothing twists."""
    if not isinstance(along, CombinedAlong) or along.twist is None or along.twist.actions.moving is None:
        return ()
    question = along.twist.actions.moving.question
    had = {row.key for row in question.wants.rows}
    found = {row.key: row for row in _all(along, question)}
    return tuple(row for key, row in found.items() if key not in had)


def _all(along: CombinedAlong, question: Question) -> Iterator[Row]:
    twist = along.twist
    assert twist is not None
    assert twist.actions.moving is not None
    written = twist.actions.moving.written
    causes = _causes(along)
    first = {written.combination[row]: place for place, row in reversed(list(enumerate(twist.actions.strength)))}
    for k, place in sorted(first.items()):
        if not question.moves(k):
            continue
        shear = question.envelope(k, "shear")
        torque = twist.torque.coefficients[place]
        for (a, b), ranges in causes.items():
            whole = _of(shear, a, b, twist.torque.breaks, torque)
            for pair in whole.extremes(ranges):
                for extreme in pair:
                    yield Row(k, extreme.placings)


def _causes(along: CombinedAlong) -> Causes:
    """Every joint over the parts of the member that were asked for, every piece over its stretches."""
    found: Causes = {}
    for site, t, start, end in along.asked:
        rates = along.rates(site, along.body.stretches[t])
        if rates is not None and rates[0]:
            found.setdefault((rates[0], rates[1]), []).append((start, end))
    for stretch in along.body.stretches:
        for part in stretch.section.parts:
            cut, turn = stretch.section.cuts[part.index].intensity, stretch.section.torsion_stress[part.index]
            for way in (1.0, -1.0):
                if cut:
                    found.setdefault((cut, way * turn), []).append((stretch.start, stretch.end))
    return {key: list(dict.fromkeys(ranges)) for key, ranges in found.items()}


def _of(shear: Envelope, a: float, b: float, breaks: Array, torque: Array) -> Envelope:
    """The envelope of a V + b T."""
    runners = [
        Runner(runner.train, [(influence, a * factor) for influence, factor in runner.on]) for runner in shear.runners
    ]

    def static(x: Array, right: NDArray[np.bool_]) -> Array:
        sides = (evaluate(breaks, torque, x, "right"), evaluate(breaks, torque, x, "left"))
        return a * shear.static(x, right) + b * np.where(right, *sides)

    return replace(shear, runners=runners, static=static, breaks=np.union1d(shear.breaks, breaks))
