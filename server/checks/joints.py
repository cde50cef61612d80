"""Every joint of a member: its flow, its stress, and what adhesive, surfaces or fasteners make of it."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import TIE
from server.checks.crosssection import Body, Part, Site, Stretch
from server.checks.resistance import Claim, Judge, Strength, Weighed, describe, resistance_formula, worst
from server.checks.scan import Scan
from server.checks.statics import Statics
from server.working import formula

MECHANICS = "Jourawski's formula, E-weighted (any mechanics of materials text)"
FIRST_MOMENT = "abs(sum(E*A*(u - u_0)))"
FLOW = {"cut": "V*S/EI", "symmetry": "c_s*V*S/EI"}
STRESS = "q/(b*c)"
FASTENER_FORCE = "q*s/n"


@dataclass(frozen=True, eq=False)
class Demand:
    """Shear and flow of one joint, one entry a strength combination, with the place and stretch of each."""

    shear: NDArray[np.float64]
    flow: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: NDArray[np.intp]

    @property
    def peak(self) -> int:
        """The combination of the largest flow; the leftmost place wins a tie, then the first combination."""
        near = self.flow >= self.flow.max() * (1 - TIE)
        return int(np.where(near, self.at, np.inf).argmin())


@dataclass
class JointCheck:
    """One joint on its way through the check: what is claimed of it, then what came out."""

    site: Site
    result: dict[str, object]
    demand: Demand | None = None
    claims: list[Claim] = field(default_factory=list)
    incomplete: bool = False
    governing: Weighed | None = None


def claim_joints(body: Body, scan: Scan, judge: Judge) -> list[JointCheck]:
    """Flow of every joint, and the limits that are to be weighed."""
    demands = _demands(body, scan)
    return [_claim(site, body, demands.get(site.index), scan, judge) for site in body.sites]


def write_joint(check: JointCheck, weighed: list[Weighed | None], body: Body, judge: Judge, statics: Statics) -> None:
    """Write a joint's steps and its block of the result."""
    if check.demand is None:
        return
    _write_flow(check, check.demand, body, judge, statics)
    group = f"Joint {check.site.id}"
    known = [w for w in weighed if w is not None]
    if not check.site.bonded:
        _write_spacing(check, check.demand, known, body, judge, group)
    check.result["limits"] = [judge.write(w, group) for w in known]
    check.governing = worst(known)
    check.result["utilisation"] = None if check.governing is None else check.governing.utilisation
    if check.site.bonded:
        check.result["strength_needed"] = _strength_needed(check, check.demand, judge, group)
        if check.governing is not None and not check.incomplete and len(known) == len(weighed):
            check.result["width_needed"] = _width_needed(check, check.demand, check.governing, judge, group)


def _demands(body: Body, scan: Scan) -> dict[int, Demand]:
    """Largest flow of every joint whose share is known, over the stretches where it is, by combination."""
    found: dict[int, Demand] = {}
    for t, stretch in enumerate(body.stretches):
        if not scan.shear:
            break
        settled = [(i, flow) for i, flow in stretch.section.flows.items() if flow.share is not None]
        shares = np.array([[abs(flow.share or 0.0)] for _, flow in settled]).reshape(-1, 1)
        shear, at = scan.shear[t]
        flows = formula(FLOW["cut"]).array({"V": shear, "S": shares, "EI": stretch.section.properties.EI})
        where = np.full(len(at), t, dtype=np.intp)
        for (index, _), flow in zip(settled, flows, strict=True):
            here = Demand(shear, flow, at, where)
            found[index] = _leftmost(found[index], here) if index in found else here
    return found


def _leftmost(left: Demand, right: Demand) -> Demand:
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


def _claim(site: Site, body: Body, demand: Demand | None, scan: Scan, judge: Judge) -> JointCheck:
    check = JointCheck(site, _blank(site))
    reason = _undetermined(site, body)
    if reason:
        judge.findings.miss(
            f"joint {site.id}: its share of the shear flow. {reason} A method for the field of shear in the whole "
            "section would be needed; until then change the section so that a cut or symmetry fixes the share."
        )
        demand = None
    check.demand = demand
    if demand is None:
        if scan.shear and site.bonded:
            _bond_strengths(site, judge)  # names the values it lacks, so that one look finds all gaps
        return check
    if site.bonded:
        stress = formula(STRESS).array({"q": demand.flow, "b": site.width, "c": site.spec.coverage})
        strengths = _bond_strengths(site, judge)
        check.claims = [Claim(s, "tau", stress, demand.at, demand.stretch) for s in strengths if s is not None]
        check.incomplete = None in strengths
        if site.spec.role == "fall-back":
            judge.findings.miss(
                f"joint {site.id}: whether its fasteners are a fall-back (glue gone, slip reckoned) is not reckoned in "
                "this version; check the member again with the fasteners as sole carriers."
            )
    else:
        _claim_fasteners(check, demand, body, scan, judge)
    return check


def _undetermined(site: Site, body: Body) -> str:
    for stretch in body.stretches:
        flow = stretch.section.flows.get(site.index)
        if flow is not None and flow.split is None:
            return flow.reason
    return ""


def _blank(site: Site) -> dict[str, object]:
    return {
        "id": site.id,
        "between": [site.first.name, site.second.name],
        "contact_length": site.contact.length,
        "bonded_width": site.width,
        "coverage": site.spec.coverage,
        "adhesive": site.spec.adhesive,
        "fastener": site.spec.fastener,
        "role": site.spec.effective_role,
        "rows": site.spec.rows,
        "first_moment": None,
        "shear_flow": None,
        "stress": None,
        "at": None,
        "combination": None,
        "split": None,
        "distribution": [],
        "limits": [],
        "strength_needed": None,
        "utilisation": None,
        "spacing_needed": None,
        "slip": None,
        "width_needed": None,
        "cut_off": [],
        "partners": [],
    }


def _bond_strengths(site: Site, judge: Judge) -> list[Strength | None]:
    """Adhesive, then the surface of either piece; a missing one is None and named in the findings."""
    name, adhesive = _adhesive(site, judge)
    if adhesive.shear_strength is None:
        judge.findings.miss(
            f"shear strength of adhesive {name!r} (joint {site.id}): bond shear coupons of these two surfaces, "
            "prepared and cured as on the job, or an approved bond record."
        )
    bond = judge.strength(
        adhesive.shear_strength, what=f"adhesive {name}", unit="MPa", kind="adhesive", owner=name, holder=adhesive
    )
    return [bond, *(_surface_strength(part, site, judge) for part in (site.first, site.second))]


def _adhesive(site: Site, judge: Judge) -> tuple[str, documents.Adhesive]:
    name = site.spec.adhesive
    assert name is not None
    adhesive = judge.document.adhesives[name]
    assert isinstance(adhesive, documents.Adhesive)
    return name, adhesive


def _surface_strength(part: Part, site: Site, judge: Judge) -> Strength | None:
    """Shear strength of a piece's surface layer: rolling shear where layered or with its grain across."""
    strengths, word = part.material.strengths, "rolling shear" if part.rolls else "shear"
    value = strengths.rolling_shear if part.rolls else strengths.shear
    if value is None:
        judge.findings.miss(
            f"{word} strength of {part.spec.material!r} (surface of {part.name} at joint {site.id}): {word} tests of "
            "the piece (block shear or panel coupons), or its material record."
        )
    return judge.strength(
        value,
        what=f"{word} in {part.name}",
        unit="MPa",
        kind="material",
        owner=part.spec.material,
        holder=part.material,
    )


def _claim_fasteners(check: JointCheck, demand: Demand, body: Body, scan: Scan, judge: Judge) -> None:
    site, findings = check.site, judge.findings
    name, fastener = _fastener(site, judge)
    strength = judge.strength(
        fastener.shear_resistance, what=f"fastener {name}", unit="N", kind="fastener", owner=name, holder=fastener
    )
    if strength is None:
        findings.miss(
            f"shear resistance of fastener {name!r} (joint {site.id}): tests of the fastener in these pieces, a yield-"
            "limit calculation, or its record."
        )
        return
    zones = _zones(site, body.length)
    if not zones:
        findings.miss(f"spacing of {name!r} in joint {site.id}: enter a spacing; the one needed is stated.")
        return
    for start, end, spacing in zones:
        where = f"joint {site.id}, {start:g} to {end:g} mm"
        if fastener.spacing_min is not None and spacing < fastener.spacing_min:
            findings.miss(
                f"spacing {spacing:g} mm in {where}: under the least, {fastener.spacing_min:g} mm, for which {name!r} "
                "has its resistance; widen it, add a row or choose another fastener."
            )
        if fastener.spacing_max is not None and spacing > fastener.spacing_max:
            findings.miss(f"spacing {spacing:g} mm in {where}: over the largest allowed, {fastener.spacing_max:g} mm.")
    worst_zone = _zone_demand(site, body, scan, zones)
    check.claims = [Claim(strength, "F", worst_zone.flow, worst_zone.at, demand.stretch)]


def _fastener(site: Site, judge: Judge) -> tuple[str, documents.Fastener]:
    name = site.spec.fastener
    assert name is not None
    fastener = judge.document.fasteners[name]
    assert isinstance(fastener, documents.Fastener)
    return name, fastener


Zone = tuple[float, float, float]  # from, to, spacing


def _zones(site: Site, length: float) -> list[Zone]:
    spacing = site.spec.spacing
    if spacing is None:
        return []
    if isinstance(spacing, float | int):
        return [(0.0, length, float(spacing))]
    return [(zone.from_, zone.to, zone.spacing) for zone in spacing]


def _zone_demand(site: Site, body: Body, scan: Scan, zones: list[Zone]) -> Demand:
    """Force per fastener (in ``flow``) where it is greatest over the zones; ``stretch`` counts zones."""
    assert scan.curve is not None
    found: Demand | None = None
    for number, (start, end, spacing) in enumerate(zones):
        for stretch in body.stretches:
            low, high = max(start, stretch.start), min(end, stretch.end)
            flow = stretch.section.flows.get(site.index)
            if high <= low or flow is None or flow.share is None:
                continue
            V, at = scan.curve.over(low, high).absolute()
            q = formula(FLOW["cut"]).array({"V": V, "S": abs(flow.share), "EI": stretch.section.properties.EI})
            force = formula(FASTENER_FORCE).array({"q": q, "s": spacing, "n": site.spec.rows})
            here = Demand(q, force, at, np.full(len(at), number, dtype=np.intp))
            found = here if found is None else _leftmost(found, here)
    assert found is not None  # zones cover the member, and the joint is somewhere on it
    return found


def _write_flow(check: JointCheck, demand: Demand, body: Body, judge: Judge, statics: Statics) -> None:
    site, working = check.site, judge.working
    group, row = f"Joint {site.id}", demand.peak
    stretch = body.stretches[int(demand.stretch[row])]
    shared = stretch.section.flows[site.index]
    assert shared.split is not None
    statics.shear(float(demand.at[row]), judge.actions.strength[row], float(demand.shear[row]), group)
    first = _write_first_moment(site, stretch, judge, group)
    reference = body.parts[0]
    combination = judge.actions.strength_names[row]
    values: dict[str, tuple[float, str]] = {
        "V": (float(demand.shear[row]), "N"),
        "S": (first, "N*mm"),
        "EI": (stretch.section.properties.EI, "N*mm2"),
    }
    if shared.split == "symmetry":
        values["c_s"] = (abs(shared.share or 0.0) / first if first else 0.0, "")
    flow = working.step(
        "Shear flow",
        "q",
        FLOW[shared.split],
        values,
        unit="N/mm",
        source=f"{MECHANICS}; V of combination {combination}. {shared.reason}",
        group=group,
    )
    check.result.update(
        first_moment=working.step(
            "First moment on the reference modulus",
            "Q",
            "S/E_1",
            {"S": (first, "N*mm"), "E_1": (reference.material.E, "MPa")},
            unit="mm3",
            source=f"E_1: modulus of {reference.name}",
            group=group,
        ),
        shear_flow=flow,
        at=float(demand.at[row]),
        combination=combination,
        split=shared.split,
        cut_off=[stretch.section.parts[i].name for i in shared.cut_off],
        partners=[stretch.section.sites[i].id for i in shared.partners],
    )
    if site.bonded:
        check.result["stress"] = working.step(
            "Shear stress in the bond",
            "tau",
            STRESS,
            {"q": (flow, "N/mm"), "b": (site.width, "mm"), "c": (site.spec.coverage, "")},
            unit="MPa",
            source="mean over the bonded width x coverage",
            group=group,
        )


def _write_first_moment(site: Site, stretch: Stretch, judge: Judge, group: str) -> float:
    """First moment of the cut-off part, from both sides of the joint."""
    section = stretch.section
    flow = section.flows[site.index]
    if not flow.cut_off:
        judge.working.note("No flow, by symmetry", flow.reason, value=0.0, unit="N*mm", source=MECHANICS, group=group)
        return 0.0
    outside = set(flow.cut_off)
    sides = [[i for i in range(len(section.parts)) if (i in outside) is wanted] for wanted in (True, False)]
    whole = section.properties
    E, A, u = [p.E for p in section.pieces], whole.pieces.area.tolist(), whole.pieces.centroid[:, 1].tolist()
    found = [
        judge.working.step(
            f"E-weighted first moment, {title}",
            "S",
            FIRST_MOMENT,
            {
                "E": ([E[i] for i in side], "MPa"),
                "A": ([A[i] for i in side], "mm2"),
                "u": ([u[i] for i in side], "mm"),
                "u_0": (float(whole.neutral_axis[1]), "mm"),
            },
            unit="N*mm",
            source=f"{MECHANICS}; {', '.join(section.parts[i].name for i in side)}",
            group=group,
        )
        for title, side in zip(("outside the joint", "from the other side"), sides, strict=True)
    ]
    return found[0]


def _strength_needed(check: JointCheck, demand: Demand, judge: Judge, group: str) -> float | None:
    """The characteristic adhesive strength to ask for, whatever strength was or was not given."""
    site = check.site
    name, adhesive = _adhesive(site, judge)
    asked_of = judge.strength(1.0, what="", unit="MPa", kind="adhesive", owner=name, holder=adhesive)
    assert asked_of is not None
    factors = np.array(asked_of.duration)
    if np.all(np.isnan(factors)):
        return None
    stress = formula(STRESS).array({"q": demand.flow, "b": site.width, "c": site.spec.coverage})
    row = int(np.nanargmax(stress / factors))
    method = "safety factor" if judge.document.basis.method == "allowable" else "partial factor"
    resists = resistance_formula("1", len(asked_of.factors)).removeprefix("1*")
    return judge.working.step(
        "Characteristic adhesive shear strength to ask for",
        "f_req",
        f"tau/({resists})",
        {"tau": (float(stress[row]), "MPa"), **asked_of.arguments(row)},
        unit="MPa",
        source=f"{method} {asked_of.divisor:g}, combination {judge.actions.strength_names[row]}",
        group=group,
    )


def _width_needed(check: JointCheck, demand: Demand, governing: Weighed, judge: Judge, group: str) -> float:
    return judge.working.step(
        "Bonded width needed for the weakest limit",
        "b_req",
        "q/(c*f_d)",
        {
            "q": (float(demand.flow[governing.row]), "N/mm"),
            "c": (check.site.spec.coverage, ""),
            "f_d": (governing.resistance, "MPa"),
        },
        unit="mm",
        source=governing.claim.strength.what,
        group=group,
    )


def _write_spacing(
    check: JointCheck, demand: Demand, known: list[Weighed], body: Body, judge: Judge, group: str
) -> None:
    """The spacing needed, and the force per fastener at the spacing given."""
    site, working = check.site, judge.working
    name, fastener = _fastener(site, judge)
    strength = judge.strength(
        fastener.shear_resistance, what=f"fastener {name}", unit="N", kind="fastener", owner=name, holder=fastener
    )
    if strength is None or demand.flow.max() <= 0:
        return
    weighed = judge.weigh([Claim(strength, "q", demand.flow, demand.at, demand.stretch)])[0]
    if weighed is None:
        return
    check.result["spacing_needed"] = working.step(
        "Spacing needed",
        "s_req",
        "n*R_d/q",
        {
            "n": (site.spec.rows, ""),
            "R_d": (weighed.resistance, "N"),
            "q": (float(demand.flow[weighed.row]), "N/mm"),
        },
        unit="mm",
        source=describe(fastener),
        group=group,
    )
    for w in known:
        spacing = _spacing_at(site, body.length, w.at)
        flow = float(w.claim.demand[w.row]) * site.spec.rows / spacing
        working.step(
            "Force per fastener",
            "F",
            FASTENER_FORCE,
            {"q": (flow, "N/mm"), "s": (spacing, "mm"), "n": (site.spec.rows, "")},
            unit="N",
            source=f"combination {judge.actions.strength_names[w.row]}, at {w.at:.6g} mm",
            group=group,
        )


def _spacing_at(site: Site, length: float, at: float) -> float:
    """The widest spacing at a place: where two zones meet, the one that loads a fastener more."""
    return max(spacing for start, end, spacing in _zones(site, length) if start <= at <= end)
