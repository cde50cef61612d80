"""Eccentric loads in a check: the torque along the member, the shear it makes in pieces, the rule on warping."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body, CrossSection, Stretch, eccentric
from server.checks.curves import Curve
from server.checks.resistance import Findings
from server.mechanics.field import Field
from server.mechanics.piecewise import evaluate
from server.mechanics.torsion import TorqueLoad, torque, warping_part

Array = NDArray[np.float64]
WARPING = 0.05  # of a torque; contract of the check


@dataclass(frozen=True, eq=False)
class Twist:
    """``torque`` of every combination for strength, on the breaks of the member."""

    body: Body
    actions: Actions
    torque: Curve

    def at(self, place: float, row: int) -> list[tuple[float, float]]:
        """Shear and torque on either side of a place."""
        assert self.actions.shear is not None
        return [
            (
                float(evaluate(self.actions.shear.breaks, self.actions.shear.coefficients[row], place, side)),
                float(evaluate(self.torque.breaks, self.torque.coefficients[row], place, side)),
            )
            for side in ("left", "right")
        ]


def twist(document: documents.MemberDocument, body: Body, actions: Actions, findings: Findings) -> Twist | None:
    """The torque, where a load is eccentric and the field of every section is there; what is lacking is named."""
    if not eccentric(document) or actions.shear is None:
        return None
    if document.analysis.slip:
        findings.miss(
            "torsion of eccentric loads (offset): not reckoned together with slip of the joints; check the member with "
            "rigid joints as well."
        )
        return None
    fields = [stretch.section.settled.field for stretch in body.stretches]
    if any(field is None for field in fields):
        findings.miss(
            "torsion of eccentric loads (offset): it needs the section's shear field (analysis.field auto or always, G "
            "of every piece)."
        )
        return None
    breaks = actions.breaks
    GJ, EIw, size = (_by_interval(body, breaks, of) for of in (_torsional, _warping, _size))
    supports = [support.at for support in document.member.supports]
    cases = np.array([torque(breaks, supports, GJ, list(_loads(document, case))) for case in document.loads])
    factors = actions.factors[list(actions.strength), : len(cases)]  # axles that move act through the shear centre
    combined = np.tensordot(factors, cases, 1)
    curve = Curve(breaks, combined, actions.strength_names)
    _judge_warping(body, supports, GJ, EIw, size, curve, findings)
    return Twist(body, actions, curve)


def _loads(document: documents.MemberDocument, case: str) -> Iterator[TorqueLoad]:
    for load in document.loads[case]:
        if isinstance(load, documents.PointLoad) and load.offset:
            yield TorqueLoad(load.at, load.at, load.value * load.offset, 0.0)
        elif isinstance(load, documents.LineLoad) and load.offset:
            first, last = load.ends
            yield TorqueLoad(load.from_, load.to, first * load.offset, last * load.offset)


def field_of(section: CrossSection) -> Field:
    field = section.settled.field
    assert field is not None
    return field


def _torsional(section: CrossSection) -> float:
    return field_of(section).GJ


def _warping(section: CrossSection) -> float:
    return field_of(section).EIw


def _size(section: CrossSection) -> float:
    """The section's greatest dimension."""
    corners = section.properties.edges.start
    return float(np.ptp(corners, axis=0).max())


def _by_interval(body: Body, breaks: Array, of: object) -> Array:
    assert callable(of)
    middles = (breaks[1:] + breaks[:-1]) / 2
    ends = np.array([stretch.end for stretch in body.stretches])
    values = np.array([of(stretch.section) for stretch in body.stretches], dtype=float)
    found: Array = values[np.minimum(np.searchsorted(ends, middles), len(ends) - 1)]
    return found


def _judge_warping(
    body: Body, supports: list[float], GJ: Array, EIw: Array, size: Array, curve: Curve, findings: Findings
) -> None:
    worst: tuple[float, float, float, str] | None = None
    distinct = {own.tobytes(): (name, own) for name, own in zip(curve.names, curve.coefficients, strict=True)}
    for name, own in distinct.values():
        for start, end, share in warping_part(curve.breaks, supports, GJ, EIw, own, size):
            if share > WARPING and (worst is None or share > worst[2]):
                worst = (start, end, share, name)
    if worst is not None:
        start, end, share, name = worst
        findings.miss(
            f"warping torsion: between {start:.6g} mm and {end:.6g} mm warping would take {share:.0%} of the torque "
            f"(combination {name!r}), more than {WARPING:.0%}; the flows shown are those of Saint-Venant torsion "
            "alone. Close the section, bring the load nearer to the shear centre, or have warping torsion reckoned."
        )


@dataclass(frozen=True, eq=False)
class TwistedShear:
    """Shear of one piece over its stretches (rows) and combinations: stress, and size of shear and torque there."""

    stress: Array
    shear: Array
    torque: Array
    at: Array
    stretch: tuple[int, ...]


def twisted_shear(twist: Twist, index: int, stretches: Sequence[tuple[int, Stretch]]) -> TwistedShear:
    """Largest sum of shear on a horizontal cut through a piece and of shear by torsion, both as sizes at one place."""
    shear, names = twist.actions.shear, twist.torque.names
    assert shear is not None
    rows: list[tuple[Array, Array, Array, Array]] = []
    for _, stretch in stretches:
        cut, by_torque = stretch.section.cuts[index].intensity, stretch.section.torsion_stress[index]
        V, T = (
            cut * shear.coefficients[:, :, : twist.torque.coefficients.shape[2]],
            by_torque * twist.torque.coefficients,
        )
        found = [Curve(shear.breaks, V + way * T, names).over(stretch.start, stretch.end).absolute() for way in (1, -1)]
        more = found[1][0] > found[0][0]
        stress, at = (np.where(more, b, a) for a, b in zip(*found, strict=True))
        sides = [_nearest(twist, float(x), row, cut, by_torque, float(stress[row])) for row, x in enumerate(at)]
        rows.append((stress, np.array([v for v, _ in sides]), np.array([t for _, t in sides]), at))
    stress, V, T, at = (np.array(column) for column in zip(*rows, strict=True))
    return TwistedShear(stress, V, T, at, tuple(t for t, _ in stretches))


def _nearest(twist: Twist, place: float, row: int, cut: float, by_torque: float, wanted: float) -> tuple[float, float]:
    sides = [(abs(v), abs(t)) for v, t in twist.at(place, row)]
    return min(sides, key=lambda side: abs(cut * side[0] + by_torque * side[1] - wanted))
