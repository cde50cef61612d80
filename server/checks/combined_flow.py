"""Flow of a joint from several causes at one place, added with sign: shear down, shear sideways, torque."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from server.checks import sideways
from server.checks.actions import Actions
from server.checks.along import Demand, Profile, RigidAlong, leftmost, side_by_side
from server.checks.crosssection import CrossSection, Site, Stretch
from server.checks.curves import Curve
from server.checks.resistance import Judge
from server.checks.statics import Statics
from server.checks.twist import Twist, field_of
from server.mechanics.piecewise import evaluate
from server.working.record import Given

Array = NDArray[np.float64]
TWISTED = "abs(V*S_j/EI + T*c_T)"
RATE_DOWN = "(V*EI_l + V_l*EI_p)/(EI*EI_l - EI_p**2)"
RATE_ACROSS = "(V*EI_p + V_l*EI)/(EI*EI_l - EI_p**2)"
BOTH_WAYS = "abs(chi*S_j - chi_l*S_l)"
ALL = "abs(chi*S_j - chi_l*S_l + T*c_T)"
UNSYMMETRICAL = "unsymmetrical bending (Timoshenko and Gere, Mechanics of Materials, generalized flexure theory)"


@dataclass(frozen=True, eq=False)
class CombinedAlong(RigidAlong):
    """Flow from shear in one or both planes and from torsion, added with sign at each place.

    ``across`` the lateral plane where the member bends both ways; ``twist`` the torque where loads are eccentric.
    """

    across: Actions | None = None
    twist: Twist | None = None
    asked: list[tuple[Site, int, float, float]] = field(default_factory=list)
    """Where axles move: joints, stretches and parts of the member whose worst position was asked for."""

    @cached_property
    def _curves(self) -> dict[tuple[int, int], Curve]:
        return {}

    def causes(self) -> list[Curve]:
        """Shear down, then shear sideways and torque where there are any."""
        assert self.scan.curve is not None
        found = [self.scan.curve]
        if self.across is not None:
            assert self.across.shear is not None
            found.append(self.across.shear)
        if self.twist is not None:
            found.append(self.twist.torque)
        return found

    def rates(self, site: Site, stretch: Stretch) -> tuple[float, ...] | None:
        """Flow per each cause [1/mm], with signs; None where the joint is not there or its share not known."""
        section = stretch.section
        flow = section.flows.get(site.index)
        if flow is None or flow.share is None:
            return None
        found: tuple[float, ...] | None = (flow.share / section.properties.EI,)
        if self.across is not None:
            found = sideways.rates(section, site)
        if found is None or self.twist is None:
            return found
        return (*found, float(field_of(section).twist[section.place(site)]))

    def curve(self, site: Site, t: int) -> Curve | None:
        """Flow of a joint with its sign, by the section of one stretch; None where it is not there or not known."""
        key = (site.index, t)
        if key not in self._curves:
            rates = self.rates(site, self.body.stretches[t])
            if rates is None or self.scan.curve is None:
                return None
            first = self.causes()[0]
            whole = sum(rate * cause.coefficients[:, :, :3] for rate, cause in zip(rates, self.causes(), strict=True))
            self._curves[key] = Curve(first.breaks, np.asarray(whole), first.names)
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
            self.asked.append((site, t, start, end))
            q, at = curve.over(start, end).absolute()
            V = np.array([max(abs(side[0]) for side in self.at(float(x), row)) for row, x in enumerate(at)])
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

    def at(self, place: float, row: int) -> list[tuple[float, ...]]:
        """The causes on either side of a place."""
        return [
            tuple(float(evaluate(cause.breaks, cause.coefficients[row], place, side)) for cause in self.causes())
            for side in ("left", "right")
        ]

    def governing(self, site: Site, demand: Demand, row: int) -> tuple[float, ...]:
        """The causes, with signs, on the side of the governing place on which the flow is found."""
        rates = self.rates(site, self.body.stretches[int(demand.stretch[row])])
        assert rates is not None
        wanted = float(demand.flow[row])
        sides = self.at(float(demand.at[row]), row)
        return min(sides, key=lambda side: abs(abs(float(np.dot(rates, side))) - wanted))

    def unsettled(self, site: Site) -> str:
        """As with shear down alone, and where the share of the lateral shear is not known."""
        found = super().unsettled(site)
        if found or self.across is None:
            return found
        for stretch in self.body.stretches:
            if site.index in stretch.section.flows and sideways.rates(stretch.section, site) is None:
                return "The member bends sideways too, and no cut gives this joint's share of the lateral shear."
        return ""


def write_combined_flow(
    along: CombinedAlong, site: Site, demand: Demand, judge: Judge, statics: Statics, group: str
) -> tuple[float, dict[str, object]]:
    """Every cause and the flow at the governing place; return the flow, and the run of stress along the bond."""
    row = demand.peak
    at, stretch = float(demand.at[row]), along.body.stretches[int(demand.stretch[row])]
    section, combination = stretch.section, judge.actions.strength_names[row]
    flow, place = section.flows[site.index], section.place(site)
    assert flow.share is not None
    causes = along.governing(site, demand, row)
    k = judge.actions.strength[row]
    statics.shear(at, k, abs(causes[0]), group)
    if statics.aside is not None:
        statics.aside.shear(at, k, abs(causes[1]), group)
    V, T = causes[0], causes[-1] if along.twist is not None else 0.0
    values: dict[str, Given] = {}
    found: dict[str, object] = {}
    down, across = V / section.properties.EI, 0.0
    if along.across is not None:
        down, across = write_rates(section, V, causes[1], f"at {at:.6g} mm, combination {combination}", judge, group)
        aside = sideways.lateral_share(section, site)
        assert aside is not None
        values |= {
            "chi": (down, "1/mm2"),
            "S_j": (flow.share, "N*mm"),
            "chi_l": (across, "1/mm2"),
            "S_l": (aside, "N*mm"),
        }
        found["shear_lateral"] = causes[1]
    else:
        values |= {"V": (V, "N"), "S_j": (flow.share, "N*mm"), "EI": (section.properties.EI, "N*mm2")}
    if along.twist is not None:
        _write_torque(T, at, combination, judge, group)
        values |= {"T": (T, "N*mm"), "c_T": (float(field_of(section).twist[place]), "1/mm")}
        found |= {"torque": T, "shear_flow_from_shear": abs(V * flow.share / section.properties.EI)}
    text = TWISTED if along.across is None else BOTH_WAYS if along.twist is None else ALL
    q = judge.working.step(
        "Shear flow from shear and torsion" if along.across is None else "Shear flow, bending about both axes",
        "q",
        text,
        values,
        unit="N/mm",
        source=f"{_words(along)}, with signs, at one place; combination {combination}. {flow.reason}",
        group=group,
    )
    if along.across is not None and along.twist is None:
        found |= _by_field_too(section, site, down, across, judge, group)
    if site.bonded and section.settled.field is not None:
        whole = section.settled.field
        run = whole.parts[place] * down - whole.parts_across[place] * across + whole.parts_twist[place] * T
        way = 1.0 if float(run.sum()) >= 0 else -1.0
        found["distribution"] = (way * run / site.spec.coverage).tolist()
    return q, found


def _by_field_too(
    section: CrossSection, site: Site, down: float, across: float, judge: Judge, group: str
) -> dict[str, object]:
    """The field's flow beside the hand's, where there are both."""
    solved, place = section.settled.field, section.place(site)
    apart, aside = section.settled.apart[place], sideways.lateral_differs(section, site)
    if solved is None or apart is None or aside is None:
        return {}
    q = judge.working.step(
        "The same flow by the field",
        "q_F",
        BOTH_WAYS,
        {
            "chi": (down, "1/mm2"),
            "S_j": (float(solved.share[place]), "N*mm"),
            "chi_l": (across, "1/mm2"),
            "S_l": (float(solved.share_across[place]), "N*mm"),
        },
        unit="N/mm",
        source=f"S_j and S_l from the field; they differ from the hand's by {apart:.3%} and {aside:.3%}, at most 0.5 % "
        "is allowed",
        group=group,
    )
    return {"shear_flow_by_field": q, "field_differs": max(apart, aside)}


def write_rates(
    section: CrossSection, V: float, V_l: float, where: str, judge: Judge, group: str
) -> tuple[float, float]:
    """Both rates of curvature at one place."""
    whole = section.properties
    values: dict[str, Given] = {
        "V": (V, "N"),
        "V_l": (V_l, "N"),
        "EI": (whole.EI, "N*mm2"),
        "EI_l": (whole.EI_lateral, "N*mm2"),
        "EI_p": (whole.EI_product, "N*mm2"),
    }
    found = [
        judge.working.step(
            f"Change of curvature along the member, {word}",
            symbol,
            text,
            values,
            unit="1/mm2",
            source=f"{UNSYMMETRICAL}; {where}; EI_l: lateral, EI_p: product",
            group=group,
        )
        for word, symbol, text in (("up and down", "chi", RATE_DOWN), ("sideways", "chi_l", RATE_ACROSS))
    ]
    return found[0], found[1]


def _write_torque(T: float, at: float, combination: str, judge: Judge, group: str) -> None:
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


def _words(along: CombinedAlong) -> str:
    found = "S_j: this joint's share"
    if along.across is not None:
        found += " of the first moment up and down, S_l: sideways"
    if along.twist is not None:
        found += ", c_T: its flow per torque, from the field"
    return found
