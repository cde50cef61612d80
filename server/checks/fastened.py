"""Fasteners that carry a joint's flow: alone, or as its fall-back when the glue is gone."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.along import Along, Demand, leftmost
from server.checks.crosssection import Body, Site
from server.checks.holds import SpacingZone, spacing_zones
from server.checks.resistance import Claim, Judge, Strength, Weighed, describe
from server.working import formula

FASTENER_FORCE = "q*s/n"
SPACING = "n*R_d/q"


@dataclass(frozen=True, eq=False)
class Fastening:
    """The fasteners of one joint on their way through the check.

    ``demand`` the flow they carry; ``strength`` None where it was not given; ``claim`` the force per fastener against
    it, None where the spacing or the strength is missing; ``times`` what a rib alone has over the whole section, by
    combination.
    """

    site: Site
    demand: Demand
    strength: Strength | None
    claim: Claim | None
    times: NDArray[np.float64] | None = None


def claim_fasteners(
    site: Site, body: Body, along: Along, demand: Demand, judge: Judge, *, fall_back: bool = False
) -> Fastening:
    """What the fasteners of a joint are asked for; what is missing or out of bounds is named."""
    name, fastener = fastener_of(site, judge.document)
    strength = judge.strength(
        fastener.shear_resistance,
        what=f"fastener {name}",
        unit="N",
        kind="fastener",
        owner=name,
        holder=fastener,
        divisor=judge.document.basis.fall_back() if fall_back else None,
    )
    if strength is None:
        judge.findings.miss(
            f"shear resistance of fastener {name!r} (joint {site.id}): tests of the fastener in these pieces, a yield-"
            "limit calculation, or its record."
        )
        return Fastening(site, demand, None, None)
    zones = spacing_zones(site, body.length)
    if not zones:
        judge.findings.miss(f"spacing of {name!r} in joint {site.id}: enter a spacing; the one needed is stated.")
        return Fastening(site, demand, strength, None)
    _bounds(site, name, fastener, zones, judge)
    force = _zone_demand(site, along, zones)
    claim = None if force is None else Claim(strength, "F", force.flow, force.at, force.stretch)
    return Fastening(site, demand, strength, claim)


def _bounds(site: Site, name: str, fastener: documents.Fastener, zones: list[SpacingZone], judge: Judge) -> None:
    for start, end, spacing in zones:
        where = f"joint {site.id}, {start:g} to {end:g} mm"
        if fastener.spacing_min is not None and spacing < fastener.spacing_min:
            judge.findings.miss(
                f"spacing {spacing:g} mm in {where}: under the least, {fastener.spacing_min:g} mm, for which {name!r} "
                "has its resistance; widen it, add a row or choose another fastener."
            )
        if fastener.spacing_max is not None and spacing > fastener.spacing_max:
            judge.findings.miss(
                f"spacing {spacing:g} mm in {where}: over the largest allowed, {fastener.spacing_max:g} mm."
            )


def fastener_of(site: Site, document: documents.MemberDocument) -> tuple[str, documents.Fastener]:
    """Name and values of the joint's fastener."""
    name = site.spec.fastener
    assert name is not None
    return name, document.fastener(name)


def _zone_demand(site: Site, along: Along, zones: list[SpacingZone]) -> Demand | None:
    """Force per fastener (in ``flow``) where it is greatest over the zones."""
    found: Demand | None = None
    for start, end, spacing in zones:
        here = along.over(site, start, end)
        if here is None:
            continue
        force = formula(FASTENER_FORCE).array({"q": here.flow, "s": spacing, "n": site.spec.rows})
        here = Demand(here.shear, force, here.at, here.stretch)
        found = here if found is None else leftmost(found, here)
    return found


def write_fasteners(
    fastening: Fastening,
    weighed: Weighed | None,
    body: Body,
    judge: Judge,
    group: str,
) -> float | None:
    """The force per fastener at the spacing given; return the spacing needed, None where it is not known."""
    site, working = fastening.site, judge.working
    needed = _spacing_needed(fastening, judge, group)
    if weighed is not None:
        spacing = _spacing_at(site, body.length, weighed.at)
        flow = float(weighed.claim.demand[weighed.row]) * site.spec.rows / spacing
        working.step(
            "Force per fastener",
            "F",
            FASTENER_FORCE,
            {"q": (flow, "N/mm"), "s": (spacing, "mm"), "n": (site.spec.rows, "")},
            unit="N",
            source=f"combination {judge.actions.strength_names[weighed.row]}, at {weighed.at:.6g} mm",
            group=group,
        )
    return needed


def _spacing_needed(fastening: Fastening, judge: Judge, group: str) -> float | None:
    demand, strength, site, times = fastening.demand, fastening.strength, fastening.site, fastening.times
    if strength is None or demand.flow.max() <= 0:
        return None
    flow = demand.flow if times is None else demand.flow * times
    weighed = judge.weigh([Claim(strength, "q", flow, demand.at, demand.stretch)])[0]
    if weighed is None:
        return None
    _, fastener = fastener_of(site, judge.document)
    q = float(demand.flow[weighed.row])
    if times is not None and times[weighed.row] > 1:
        q = judge.working.step(
            "Flow with the rib's own width",
            "q_r",
            "k_r*q",
            {"k_r": (float(times[weighed.row]), ""), "q": (q, "N/mm")},
            unit="N/mm",
            source="k_r: flow of the rib alone over that in the whole section",
            group=group,
        )
    return judge.working.step(
        "Spacing needed",
        "s_req",
        SPACING,
        {
            "n": (site.spec.rows, ""),
            "R_d": (weighed.resistance, "N"),
            "q": (q, "N/mm"),
        },
        unit="mm",
        source=describe(fastener),
        group=group,
    )


def _spacing_at(site: Site, length: float, at: float) -> float:
    """The widest spacing at a place: where two zones meet, the one that loads a fastener more."""
    return max(spacing for start, end, spacing in spacing_zones(site, length) if start <= at <= end)


def resistances(strength: Strength) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """What one fastener resists in every combination; NaN where a duration factor is missing."""
    product = float(np.prod([value for _, value in strength.factors])) if strength.factors else 1.0
    return strength.value * np.array(strength.duration) * product / strength.divisor
