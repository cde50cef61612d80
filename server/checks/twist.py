"""Eccentric loads in a check: the torque along the member, its part in each joint's flow, the rule on warping."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions, Curve
from server.checks.along import Demand, Profile, RigidAlong, leftmost, side_by_side
from server.checks.crosssection import Body, CrossSection, Site, Stretch, eccentric
from server.checks.resistance import Findings, Judge
from server.mechanics.field import Field
from server.mechanics.piecewise import evaluate
from server.mechanics.torsion import TorqueLoad, torque, warping_part

Array = NDArray[np.float64]
WARPING = 0.05  # of a torque; contract of the check
FLOW = "abs(V*S_j/EI + T*c_T)"


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
    if actions.moving is not None:
        findings.miss(
            "torsion of eccentric loads (offset): not reckoned together with moving axles; place the axles as point "
            "loads with their offsets."
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
    combined = np.tensordot(actions.factors[list(actions.strength)], cases, 1)
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


def _field(section: CrossSection) -> Field:
    field = section.settled.field
    assert field is not None
    return field


def _torsional(section: CrossSection) -> float:
    return _field(section).GJ


def _warping(section: CrossSection) -> float:
    return _field(section).EIw


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
    for name, own in zip(curve.names, curve.coefficients, strict=True):
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
class TwistedAlong(RigidAlong):
    """Flow from shear and torsion together, added with sign at each place."""

    twist: Twist

    @cached_property
    def _curves(self) -> dict[tuple[int, int], Curve]:
        return {}

    def curve(self, site: Site, t: int) -> Curve | None:
        """Flow of a joint with its sign, by the section of one stretch; None where it is not there or not known."""
        key = (site.index, t)
        if key not in self._curves:
            rates = rates_of(site, self.body.stretches[t])
            if rates is None or self.scan.curve is None:
                return None
            shear, turn = self.scan.curve.coefficients, self.twist.torque.coefficients
            both = rates[0] * shear[:, :, : turn.shape[2]] + rates[1] * turn
            self._curves[key] = Curve(self.scan.curve.breaks, both, self.scan.curve.names)
        return self._curves[key]

    def demands(self) -> dict[int, Demand]:
        """Joint by joint over the whole member."""
        found = {site.index: self.over(site, 0.0, self.body.length) for site in self.body.sites}
        return {index: demand for index, demand in found.items() if demand is not None}

    def over(self, site: Site, low: float, high: float) -> Demand | None:
        """Stretch by stretch between the two places."""
        found: Demand | None = None
        for t, stretch in enumerate(self.body.stretches):
            start, end = max(low, stretch.start), min(high, stretch.end)
            curve = self.curve(site, t) if end > start else None
            if curve is None:
                continue
            q, at = curve.over(start, end).absolute()
            V = np.array([max(abs(v) for v, _ in self.twist.at(float(x), row)) for row, x in enumerate(at)])
            here = Demand(V, q, at, np.full(len(at), t, dtype=np.intp))
            found = here if found is None else leftmost(found, here)
        return found

    def profile(self, site: Site, places: Array) -> Profile:
        """Stretch by stretch, where the joint is."""
        parts = []
        for t, stretch in enumerate(self.body.stretches):
            curve = self.curve(site, t)
            if curve is not None:
                parts.append(curve.sizes(stretch.start, stretch.end, places))
        return side_by_side(parts)

    def governing(self, site: Site, demand: Demand, row: int) -> tuple[float, float]:
        """Shear and torque, with signs, on the side of the governing place on which the flow is found."""
        stretch = self.body.stretches[int(demand.stretch[row])]
        rates = rates_of(site, stretch)
        assert rates is not None
        wanted = float(demand.flow[row])
        sides = self.twist.at(float(demand.at[row]), row)
        return min(sides, key=lambda side: abs(abs(rates[0] * side[0] + rates[1] * side[1]) - wanted))


def rates_of(site: Site, stretch: Stretch) -> tuple[float, float] | None:
    """Flow per shear and per torque [1/mm], with signs; None where the joint is not there or its share not known."""
    section = stretch.section
    flow = section.flows.get(site.index)
    if flow is None or flow.share is None:
        return None
    return flow.share / section.properties.EI, float(_field(section).twist[section.place(site)])


def write_twisted_flow(
    along: TwistedAlong, site: Site, demand: Demand, judge: Judge, group: str
) -> tuple[float, dict[str, object]]:
    """Torque and flow at the governing place; return the flow, and the run of stress along the bond."""
    row = demand.peak
    at, stretch = float(demand.at[row]), along.body.stretches[int(demand.stretch[row])]
    section = stretch.section
    field, place = _field(section), section.place(site)
    V, T = along.governing(site, demand, row)
    flow = section.flows[site.index]
    assert flow.share is not None
    combination = judge.actions.strength_names[row]
    judge.working.note(
        f"Torque at {at:.6g} mm, combination {combination}",
        "Loads x their distance from the shear centre, anticlockwise on the face looked at; the twist is nil at every "
        "support, overhanging ends are free.",
        value=T,
        unit="N*mm",
        source="Saint-Venant torsion, equal twist in every span",
        group=group,
        symbol="T",
    )
    q = judge.working.step(
        "Shear flow from shear and torsion",
        "q",
        FLOW,
        {
            "V": (V, "N"),
            "S_j": (flow.share, "N*mm"),
            "EI": (section.properties.EI, "N*mm2"),
            "T": (T, "N*mm"),
            "c_T": (float(field.twist[place]), "1/mm"),
        },
        unit="N/mm",
        source=f"with signs, at one place; S_j: this joint's share, c_T: its flow per torque, from the field; V of "
        f"combination {combination}. {flow.reason}",
        group=group,
    )
    signed = V * flow.share / section.properties.EI + T * float(field.twist[place])
    run = field.parts[place] * (V / section.properties.EI) + field.parts_twist[place] * T
    way = 1.0 if signed >= 0 else -1.0
    found: dict[str, object] = {"torque": T, "shear_flow_from_shear": abs(V * flow.share / section.properties.EI)}
    if site.bonded:
        found["distribution"] = (way * run / site.spec.coverage).tolist()
    return q, found


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
