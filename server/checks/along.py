"""The flow of a joint along the member: by V S / EI where joints are rigid, by its slip where they slide."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from server.checks.crosssection import Body, Site, Stretch
from server.checks.curves import TIE, Curve, largest
from server.checks.scan import Scan
from server.checks.slide import Slide
from server.checks.slip_shares import Shares, field_shares
from server.mechanics.piecewise import both_sides
from server.working import formula

FLOW = {"cut": "V*S/EI", "symmetry": "c_s*V*S/EI", "field": "V*S_j/EI"}
SLIDING_FLOW = "k*s"
SHARED_FLOW = "c_f*q_L"


class Demand(NamedTuple):
    """Shear and flow of one joint, one entry a strength combination, with the place and stretch of each."""

    shear: NDArray[np.float64]
    flow: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: NDArray[np.intp]

    @property
    def peak(self) -> int:
        """The combination of the largest flow; the leftmost place wins a tie, then the first combination."""
        return largest(self.flow, self.at).row


def leftmost(left: Demand, right: Demand) -> Demand:
    """The larger flow of two stretches, combination by combination: the left one keeps a tie."""
    more = right.flow > left.flow * (1 + TIE)
    if not more.any():
        return left
    return Demand(
        np.where(more, right.shear, left.shear),
        np.where(more, right.flow, left.flow),
        np.where(more, right.at, left.at),
        np.where(more, right.stretch, left.stretch),
    )


Profile = tuple[NDArray[np.float64], NDArray[np.float64]]  # places, and flows (combinations, places)


def side_by_side(parts: list[Profile]) -> Profile:
    if not parts:
        return np.zeros(0), np.zeros((0, 0))
    return np.concatenate([x for x, _ in parts]), np.concatenate([q for _, q in parts], axis=1)


class Along(Protocol):
    """Where a joint's flow is greatest over a part of the member."""

    def demands(self) -> dict[int, Demand]:
        """Largest flow of every joint whose share is known, over the stretches where it is."""
        ...

    def over(self, site: Site, low: float, high: float) -> Demand | None:
        """Largest flow of one joint between two places; None where it is not there or not known."""
        ...

    def profile(self, site: Site, places: NDArray[np.float64]) -> Profile:
        """Size of one joint's flow at the places and wherever it may be greatest, of every strength combination."""
        ...

    def unsettled(self, site: Site) -> str:
        """Why the joint's share of the flow is not known; empty where it is."""
        ...


@dataclass(frozen=True, eq=False)
class RigidAlong:
    """Flow where no joint slips: shear times the joint's share of the first moment over EI."""

    body: Body
    scan: Scan

    def demands(self) -> dict[int, Demand]:
        """All joints of a stretch at once."""
        found: dict[int, Demand] = {}
        for t, stretch in enumerate(self.body.stretches):
            if not self.scan.shear:
                break
            settled = [(i, flow) for i, flow in stretch.section.flows.items() if flow.share is not None]
            shares = np.array([[abs(flow.share or 0.0)] for _, flow in settled]).reshape(-1, 1)
            shear, at = self.scan.shear[t]
            flows = formula(FLOW["cut"]).array({"V": shear, "S": shares, "EI": stretch.section.properties.EI})
            where = np.full(len(at), t, dtype=np.intp)
            for (index, _), flow in zip(settled, flows, strict=True):
                here = Demand(shear, flow, at, where)
                found[index] = leftmost(found[index], here) if index in found else here
        return found

    def over(self, site: Site, low: float, high: float) -> Demand | None:
        """Stretch by stretch between the two places."""
        if self.scan.curve is None:
            return None
        found: Demand | None = None
        for t, stretch in enumerate(self.body.stretches):
            start, end = max(low, stretch.start), min(high, stretch.end)
            flow = stretch.section.flows.get(site.index)
            if end <= start or flow is None or flow.share is None:
                continue
            V, at = self.scan.curve.over(start, end).absolute()
            q = formula(FLOW["cut"]).array({"V": V, "S": abs(flow.share), "EI": stretch.section.properties.EI})
            here = Demand(V, q, at, np.full(len(at), t, dtype=np.intp))
            found = here if found is None else leftmost(found, here)
        return found

    def profile(self, site: Site, places: NDArray[np.float64]) -> Profile:
        """Stretch by stretch, where the joint is."""
        parts: list[Profile] = []
        for stretch in self.body.stretches:
            flow = stretch.section.flows.get(site.index)
            if self.scan.curve is not None and flow is not None and flow.share is not None:
                x, V = self.scan.curve.sizes(stretch.start, stretch.end, places)
                parts.append((x, V * (abs(flow.share) / stretch.section.properties.EI)))
        return side_by_side(parts)

    def unsettled(self, site: Site) -> str:
        """The reason that neither a cut, symmetry nor the field settles the share."""
        for stretch in self.body.stretches:
            flow = stretch.section.flows.get(site.index)
            if flow is not None and flow.split is None:
                why_not = stretch.section.settled.why_not
                return f"{flow.reason} The field of shear was not solved: {why_not}." if why_not else flow.reason
        return ""


@dataclass(frozen=True, eq=False)
class SlidingAlong:
    """Flow where the joints slide: stiffness along the member times slip."""

    slide: Slide
    _known: dict[tuple[int, frozenset[int]], Shares] = field(default_factory=dict)

    def demands(self) -> dict[int, Demand]:
        """Joint by joint over the whole member."""
        if self.slide.actions.shear is None:
            return {}
        body = self.slide.body
        found = {site.index: self.over(site, 0.0, body.length) for site in body.sites if not self.unsettled(site)}
        return {index: demand for index, demand in found.items() if demand is not None}

    def over(self, site: Site, low: float, high: float) -> Demand | None:
        """Stretch by stretch where both pieces of the joint are."""
        body, curve = self.slide.body, self.flow(site)
        found: Demand | None = None
        for t, stretch in enumerate(body.stretches):
            start, end = max(low, stretch.start), min(high, stretch.end)
            if end <= start or not site.present(stretch.start, stretch.end):
                continue
            q, at = curve.over(start, end).absolute()
            here = Demand(self._shear(at), q, at, np.full(len(at), t, dtype=np.intp))
            found = here if found is None else leftmost(found, here)
        return found

    def profile(self, site: Site, places: NDArray[np.float64]) -> Profile:
        """Stretch by stretch, where both pieces of the joint are."""
        curve = self.slide.flows[site.index]
        return side_by_side(
            [
                curve.sizes(stretch.start, stretch.end, places)
                for stretch in self.slide.body.stretches
                if site.present(stretch.start, stretch.end)
            ]
        )

    def _shear(self, at: NDArray[np.float64]) -> NDArray[np.float64]:
        curve = self.slide.actions.shear
        if curve is None:
            return np.zeros(len(at))
        sides = np.diagonal(both_sides(curve.breaks, curve.coefficients, at), axis1=0, axis2=2)
        return np.asarray(np.abs(sides).max(axis=0))

    def unsettled(self, site: Site) -> str:
        """Why the layers alone do not settle the joint: a ring that the field does not open, unlike partners."""
        for stretch in self.slide.body.stretches:
            flow = stretch.section.hand_flows.get(site.index)
            if flow is None:
                continue
            if flow.split is None:
                why_not = self.shares(stretch, site).why_not
                if why_not:
                    return f"{flow.reason} {why_not}"
                continue
            partners = [stretch.section.sites[place] for place in flow.partners]
            if any(not self._alike(site, other) for other in partners):
                names = ", ".join(other.id for other in partners)
                return f"Symmetry would make {names} share alike, but they are not equally stiff."
        return ""

    def shares(self, stretch: Stretch, site: Site) -> Shares:
        """Shares of the joints parallel to one that neither a cut nor symmetry settles."""
        key = (id(stretch), frozenset((site.first.index, site.second.index)))
        if key not in self._known:
            self._known[key] = field_shares(self.slide, stretch, site)
        return self._known[key]

    def by_field(self, site: Site, stretch: Stretch) -> bool:
        """Whether the field divides the flow of this joint and its neighbours."""
        flow = stretch.section.hand_flows.get(site.index)
        return flow is not None and flow.split is None and bool(self.shares(stretch, site).weight)

    def flow(self, site: Site) -> Curve:
        """The joint's flow: that of its own slip, or its share of the layer's where the field divides it."""
        curve = self.slide.flows[site.index]
        found = curve
        for stretch in self.slide.body.stretches:
            if not site.present(stretch.start, stretch.end) or not self.by_field(site, stretch):
                continue
            shared = self.shares(stretch, site)
            inside = (curve.breaks[:-1] >= stretch.start - 1e-9) & (curve.breaks[1:] <= stretch.end + 1e-9)
            whole = sum(sign * self.slide.flows[index].coefficients for index, sign in shared.sign.items())
            own = shared.weight[site.index] * shared.sign[site.index] * np.asarray(whole)
            found = Curve(curve.breaks, np.where(inside[:, None], own, found.coefficients), curve.names)
        return found

    def _alike(self, one: Site, other: Site) -> bool:
        a, b = (
            [(zone.start, zone.end, zone.stiffness) for zone in self.slide.holds.each[site.index].zones]
            for site in (one, other)
        )
        return len(a) == len(b) and (not a or bool(np.allclose(a, b, rtol=1e-6)))
