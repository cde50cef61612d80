"""Every joint of a member: its flow, its stress, and what adhesive, surfaces or fasteners make of it."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import isnan

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.along import FLOW, Along, Demand, RigidAlong, SlidingAlong, leftmost
from server.checks.combined_flow import CombinedAlong, write_combined_flow
from server.checks.crosssection import Body, Part, Site, Stretch
from server.checks.fastened import Fastening, claim_fasteners, write_fasteners
from server.checks.field_steps import beside_hand, write_share
from server.checks.hybrid import hybrid_strength
from server.checks.resistance import Claim, Judge, Strength, Weighed, resistance_formula, worst
from server.checks.slip_steps import write_sliding_flow
from server.checks.statics import Statics
from server.checks.wide_bonds import bond_reductions, surface_reductions
from server.mechanics.flow import JointFlow
from server.working import formula

MECHANICS = "Jourawski's formula, E-weighted (any mechanics of materials text)"
FIRST_MOMENT = "abs(sum(E*A*(u - u_0)))"
STRESS = "q/(b*c)"
BOND = ("tau", "tau_r")  # what is set against the bonded width: the joint in the whole section, and in the rib alone


@dataclass
class JointCheck:
    """One joint on its way through the check: what is claimed of it, then what came out.

    ``weighed`` its claims at the combination that governs each; ``along`` what its flow was found with; ``fastening``
    its fasteners where they carry, with the glue ``gone`` for a fall-back.
    """

    site: Site
    result: dict[str, object]
    demand: Demand | None = None
    claims: list[Claim] = field(default_factory=list)
    weighed: list[Weighed | None] = field(default_factory=list)
    incomplete: bool = False
    times: NDArray[np.float64] | None = None  # what a rib alone has over the whole section, by combination
    governing: Weighed | None = None
    along: Along | None = None
    fastening: Fastening | None = None
    gone: SlidingAlong | None = None


@dataclass(frozen=True)
class Flows:
    """The joints' flow in the states that the check looks at.

    ``along`` as the member is reckoned; ``rigid`` with no slip; ``gone`` with the glue gone, None where no joint has a
    fall-back or it cannot be reckoned.
    """

    along: Along
    rigid: RigidAlong
    gone: SlidingAlong | None


def claim_joints(body: Body, flows: Flows, judge: Judge) -> list[JointCheck]:
    """Flow of every joint, and the limits that are to be weighed."""
    rigid = flows.rigid.demands()
    demands = rigid if flows.along is flows.rigid else flows.along.demands()
    return [_claim(site, body, demands.get(site.index), rigid.get(site.index), flows, judge) for site in body.sites]


def write_joint(check: JointCheck, weighed: list[Weighed | None], body: Body, judge: Judge, statics: Statics) -> None:
    """Write a joint's steps and its block of the result."""
    if check.demand is None:
        return
    site, group = check.site, f"Joint {check.site.id}"
    _write_flow(check, check.demand, body, judge, statics)
    bond = [w for w in weighed if w is not None and w.claim.symbol in BOND]
    limits = [judge.write(w, group) for w in bond]
    if check.fastening is not None:
        force = next((w for w in weighed if w is not None and w.claim.symbol == "F"), None)
        group_of = f"{group}, glue gone" if check.gone is not None else group
        if check.gone is not None and force is not None:
            _, slip = write_sliding_flow(site, check.gone, check.fastening.demand, judge, group_of)
            check.result["slip"] = slip if check.result["slip"] is None else check.result["slip"]
        check.result["spacing_needed"] = write_fasteners(check.fastening, force, body, judge, group_of)
        if force is not None:
            limits.append({**judge.write(force, group_of), "state": "glue gone" if check.gone is not None else ""})
    known = [w for w in weighed if w is not None]
    state = {"state": "glue gone" if check.gone is not None else ""}
    for other in known:
        if other.claim.symbol == "F_r":  # the rib with its own width
            limits.append({**judge.write(other, f"{group}, glue gone" if check.gone is not None else group), **state})
        elif other.claim.symbol not in (*BOND, "F"):
            limits.append(judge.write(other, group))
    check.result["limits"] = limits
    check.governing = worst(known)
    check.result["utilisation"] = None if check.governing is None else check.governing.utilisation
    if site.bonded:
        check.result["strength_needed"] = _strength_needed(check, check.demand, body, judge, group)
        weakest = worst(bond)
        wanted = sum(claim.symbol in BOND for claim in check.claims)
        if weakest is not None and not check.incomplete and len(bond) == wanted:
            check.result["width_needed"] = _width_needed(check, check.demand, weakest, judge, group)


def _claim(
    site: Site, body: Body, demand: Demand | None, rigid: Demand | None, flows: Flows, judge: Judge
) -> JointCheck:
    check = JointCheck(site, _blank(site))
    reason = flows.along.unsettled(site)
    if reason:
        judge.findings.miss(
            f"joint {site.id}: its share of the shear flow. {reason} Let the field of shear be solved (analysis.field "
            "auto, rigid joints, G of every piece), or change the section so that a cut or symmetry fixes the share."
        )
        demand = None
    check.demand, check.along = demand, flows.along
    if demand is None:
        if flows.rigid.scan.shear and site.bonded:
            _bond_strengths(site, body, judge)  # names the values it lacks, so that one look finds all gaps
        return check
    if not site.bonded:
        check.fastening = claim_fasteners(site, body, flows.along, demand, judge)
        check.claims = [] if check.fastening.claim is None else [check.fastening.claim]
        return check
    carried = demand
    if site.spec.role == "fall-back" and rigid is not None:
        check.demand, check.along = rigid, flows.rigid
        carried = rigid if demand is rigid else leftmost(rigid, demand)
    stress = formula(STRESS).array({"q": carried.flow, "b": site.width, "c": site.spec.coverage})
    strengths = _bond_strengths(site, body, judge)
    check.claims = [Claim(s, "tau", stress, carried.at, carried.stretch) for s in strengths if s is not None]
    check.incomplete = None in strengths
    if site.spec.role == "fall-back" and flows.gone is not None:
        _claim_fall_back(check, body, flows.gone, judge)
    return check


def _claim_fall_back(check: JointCheck, body: Body, gone: SlidingAlong, judge: Judge) -> None:
    """The fasteners with the glue gone, by their slip; a share that nothing settles is named."""
    site = check.site
    reason = gone.unsettled(site)
    demand = None if reason else gone.over(site, 0.0, body.length)
    if demand is None:
        judge.findings.miss(f"joint {site.id} with the glue gone: its share of the flow. {reason}")
        return
    check.gone = gone
    check.fastening = claim_fasteners(site, body, gone, demand, judge, fall_back=True)
    if check.fastening.claim is not None:
        check.claims.append(check.fastening.claim)


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
        "place": "",
        "combination": None,
        "split": None,
        "distribution": [],
        "limits": [],
        "strength_needed": None,
        "utilisation": None,
        "spacing_needed": None,
        "spacing_schedule": [],
        "schedule_note": "",
        "setting_out": None,
        "slip": None,
        "sharing": None,
        "share": None,
        "handed_over": None,
        "width_needed": None,
        "cut_off": [],
        "partners": [],
    }


def _bond_strengths(site: Site, body: Body, judge: Judge) -> list[Strength | None]:
    """Adhesive, then the surface of either piece; a missing one is None and named in the findings."""
    name, adhesive = _adhesive(site, judge)
    if site.spec.role == "hybrid":
        bond = hybrid_strength(site, name, adhesive, judge)
        bond = bond and bond.reduced(bond_reductions(site, body, judge.rules))
        return [bond, *(_surface_strength(part, site, body, judge) for part in (site.first, site.second))]
    if adhesive.shear_strength is None:
        judge.findings.miss(
            f"shear strength of adhesive {name!r} (joint {site.id}): bond shear coupons of these two surfaces, "
            "prepared and cured as on the job, or an approved bond record."
        )
    bond = judge.strength(
        adhesive.shear_strength, what=f"adhesive {name}", unit="MPa", kind="adhesive", owner=name, holder=adhesive
    )
    bond = bond and bond.reduced(bond_reductions(site, body, judge.rules))
    return [bond, *(_surface_strength(part, site, body, judge) for part in (site.first, site.second))]


def _adhesive(site: Site, judge: Judge) -> tuple[str, documents.Adhesive]:
    name = site.spec.adhesive
    assert name is not None
    adhesive = judge.document.adhesives[name]
    assert isinstance(adhesive, documents.Adhesive)
    return name, adhesive


def _surface_strength(part: Part, site: Site, body: Body, judge: Judge) -> Strength | None:
    """Shear strength of a piece's surface layer: rolling shear where layered or with its grain across."""
    strengths, word = part.material.strengths, "rolling shear" if part.rolls else "shear"
    value = strengths.rolling_shear if part.rolls else strengths.shear
    if value is None:
        judge.findings.miss(
            f"{word} strength of {part.spec.material!r} (surface of {part.name} at joint {site.id}): {word} tests of "
            "the piece (block shear or panel coupons), or its material record."
        )
    strength = judge.strength(
        value,
        what=f"{word} in {part.name}",
        unit="MPa",
        kind="material",
        owner=part.spec.material,
        holder=part.material,
    )
    return strength and strength.reduced(surface_reductions(site, part, body, judge.rules))


def _write_flow(check: JointCheck, demand: Demand, body: Body, judge: Judge, statics: Statics) -> None:
    site, working = check.site, judge.working
    group, row = f"Joint {site.id}", demand.peak
    at, force = float(demand.at[row]), float(demand.shear[row])
    stretch = body.stretches[int(demand.stretch[row])]
    shared = stretch.section.flows[site.index]
    assert shared.split is not None
    combination = judge.actions.strength_names[row]
    if not isinstance(check.along, SlidingAlong | CombinedAlong):
        statics.shear(at, judge.actions.strength[row], force, group)
    first = _write_first_moment(site, stretch, judge, group)
    if isinstance(check.along, SlidingAlong):
        flow, check.result["slip"] = write_sliding_flow(site, check.along, demand, judge, group)
    elif isinstance(check.along, CombinedAlong):
        flow, run = write_combined_flow(check.along, site, demand, judge, statics, group)
        check.result.update(run)
    else:
        own = write_share(site, stretch, first, judge, group) if shared.split == "field" else first
        flow = _rigid_flow(force, stretch, shared, own, combination, judge, group)
        check.result.update(beside_hand(site, stretch, force, judge, group))
    check.result["first_moment"] = working.step(
        "First moment on the reference modulus",
        "Q",
        "S/E_1",
        {"S": (first, "N*mm"), "E_1": (body.parts[0].material.E, "MPa")},
        unit="mm3",
        source=f"E_1: modulus of {body.parts[0].name}",
        group=group,
    )
    check.result.update(
        shear_flow=flow,
        at=at,
        place=judge.places.at(at),
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


def _rigid_flow(
    force: float, stretch: Stretch, shared: JointFlow, first: float, combination: str, judge: Judge, group: str
) -> float:
    assert shared.split is not None
    values: dict[str, tuple[float, str]] = {
        "V": (force, "N"),
        "S": (first, "N*mm"),
        "EI": (stretch.section.properties.EI, "N*mm2"),
    }
    if shared.split == "symmetry":
        values["c_s"] = (abs(shared.share or 0.0) / first if first else 0.0, "")
    elif shared.split == "field":
        values["S_j"] = values.pop("S")
    return judge.working.step(
        "Shear flow",
        "q",
        FLOW[shared.split],
        values,
        unit="N/mm",
        source=f"{MECHANICS}; V of combination {combination}. {shared.reason}",
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


def _strength_needed(check: JointCheck, demand: Demand, body: Body, judge: Judge, group: str) -> float | None:
    """The characteristic adhesive strength to ask for, whatever strength was or was not given."""
    site = check.site
    name, adhesive = _adhesive(site, judge)
    asked_of = judge.strength(1.0, what="", unit="MPa", kind="adhesive", owner=name, holder=adhesive)
    assert asked_of is not None
    asked_of = asked_of.reduced(bond_reductions(site, body, judge.rules))
    flow = demand.flow if check.times is None else demand.flow * check.times
    stress = formula(STRESS).array({"q": flow, "b": site.width, "c": site.spec.coverage}).tolist()
    asked = [-1.0 if isnan(k_dur) else tau / k_dur for tau, k_dur in zip(stress, asked_of.duration, strict=True)]
    row = max(range(len(asked)), key=asked.__getitem__)
    if isnan(asked_of.duration[row]):
        return None
    method = "safety factor" if judge.document.basis.method == "allowable" else "partial factor"
    resists = resistance_formula("1", len(asked_of.multipliers)).removeprefix("1*")
    return judge.working.step(
        "Characteristic adhesive shear strength to ask for",
        "f_req",
        f"tau/({resists})",
        {"tau": (stress[row], "MPa"), **asked_of.arguments(row)},
        unit="MPa",
        source=f"{method} {asked_of.divisor:g}, combination {judge.actions.strength_names[row]}",
        group=group,
    )


def _width_needed(check: JointCheck, demand: Demand, governing: Weighed, judge: Judge, group: str) -> float:
    times = 1.0 if governing.claim.origin is None or check.times is None else float(check.times[governing.row])
    flow = float(demand.flow[governing.row])
    if times > 1:
        flow = judge.working.step(
            "Flow with the rib's own width",
            "q_r",
            "k_r*q",
            {"k_r": (times, ""), "q": (flow, "N/mm")},
            unit="N/mm",
            source="k_r: flow of the rib alone over that in the whole section",
            group=group,
        )
    return judge.working.step(
        "Bonded width needed for the weakest limit",
        "b_req",
        "q/(c*f_d)",
        {
            "q": (flow, "N/mm"),
            "c": (check.site.spec.coverage, ""),
            "f_d": (governing.resistance, "MPa"),
        },
        unit="mm",
        source=governing.claim.strength.what,
        group=group,
    )
