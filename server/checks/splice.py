"""Kind "splice": overlaps, straps, scarfs and tube laps, from the document to the result."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from server import ENGINE, documents
from server.checks import lasting, splice_steps
from server.checks.resistance import Claim, Findings, Weighed, Weigher
from server.checks.splice_bond import Stresses, elastic, part, ultimate, yielding
from server.checks.splice_curve import DUCTILE, Change, Holds, changes, drawn, strength_curve, transfer_length
from server.checks.splice_limits import Limit, cases_of, claim, joint_load, limits_of, yield_values
from server.checks.splice_model import SIDES, Model, model_of, named
from server.checks.splice_words import NOT_CHECKED, add_cautions
from server.errors import DocumentError, Fault, InputError
from server.mechanics.overlap_strength import Limits
from server.working import Working, exceeds

GROUP = "Utilisation"


@dataclass(frozen=True)
class Judged:
    """One limit, weighed: what it was, its block of the result."""

    demand: str
    weighed: Weighed
    result: dict[str, object]


@dataclass(frozen=True)
class Found:
    """What a splice was found to do; ``stresses`` None where the bond's stiffness is missing."""

    mean_shear: float
    stresses: Stresses | None
    judged: Sequence[Judged]
    holds: Holds
    joint_strength: float | None
    bond_strength: float | None = None


def run(document: documents.SpliceDocument, *, working: bool = True) -> dict[str, object]:
    """Check a splice as contract.md's kind "splice" says; ``working`` false leaves the steps out.

    Raises
    ------
    DocumentError
        Where the numbers describe no joint; every fault names its field.
    """
    book, findings = Working(record=working), Findings()
    try:
        return _run(document, book, findings)
    except InputError as error:
        raise named(error) from error


def _run(document: documents.SpliceDocument, book: Working, findings: Findings) -> dict[str, object]:
    model = model_of(document, book, findings)
    mean = splice_steps.mean_shear(model, book)
    factors = splice_steps.edge_factors(model, book)
    judge = Weigher(document, cases_of(document.duration), book, findings)
    found = _found(model, mean, judge, book)
    closed = None
    if found.stresses is not None and not found.stresses.yields:
        demands = found.stresses.demands
        closed = splice_steps.peaks(model, factors, demands.shear, demands.peel, book)
    extra = _lasting(model, found, book, findings)
    result = _result(model, found, factors, closed)
    tried = _overlap(model, found, result, findings)
    add_cautions(model, found.stresses, result, tried, findings)
    limits = [*(j.result for j in found.judged), *(each.result for each in extra)]
    return {
        **document.head,
        **_verdict(found, extra, findings),
        "basis": document.basis.model_dump(exclude_none=True),
        "layout": document.layout,
        "response": document.response,
        **result,
        "limits": limits,
        "lasting": [each.result for each in extra],
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "drawing": _drawing(model),
        "steps": book.steps,
        "values_used": _values_used(document),
        "engine": ENGINE,
    }


def _found(model: Model, mean: float, judge: Weigher, book: Working) -> Found:
    """Stresses, limits and strength, elastic or with the bond yielding."""
    plastic = model.document.response == "elastic-plastic"
    yields = yield_values(model, judge.findings) if plastic else None
    if model.lap is None:
        limits_of(model, None, judge, book)  # names the strengths that are missing too, so that one look finds all
        return Found(mean, None, [], Holds(Limits(), 1.0), None)
    stresses = elastic(model, book)
    most = None
    if yields is not None:
        most = _ultimate(model, yields, judge.findings)
        if most is not None and most > 0:
            stresses = yielding(model, stresses, yields[0], most, book)
    demands = stresses.demands
    limits = limits_of(model, demands, judge, book)
    claims = [claim(each, demands) for each in limits]
    if yields is not None and most is not None:
        limits, claims = _with_load(model, yields, most, limits, claims, judge, book)
    judged = _weigh(limits, claims, judge)
    holds = _holds(model, judged, yields, most)
    return Found(mean, stresses, judged, holds, _joint_strength(model, holds, judged), most)


def _ultimate(model: Model, yields: tuple[float, float], findings: Findings) -> float | None:
    """The load the yielding bond holds; None, and named as missing, where there is no method for what acts."""
    tau, strain = yields
    if strain < tau / (model.adhesive.shear_modulus or math.inf):
        path = f"adhesives.{model.document.bond}.shear_strain_limit"
        least = tau / (model.adhesive.shear_modulus or math.inf)
        raise DocumentError(
            [
                Fault(
                    path,
                    f"{strain:g} lies below the strain at which the adhesive yields, shear_yield / shear_modulus = "
                    f"{least:.4g}; the limit is the total strain, elastic and plastic.",
                )
            ]
        )
    try:
        return ultimate(model, tau, strain)
    except InputError as error:
        if error.field in ("moment", "shear", "torque"):
            findings.miss(f"strength of the yielding bond: {error}")
            return None
        raise


def _with_load(
    model: Model,
    yields: tuple[float, float],
    most: float,
    limits: list[Limit],
    claims: list[Claim],
    judge: Weigher,
    book: Working,
) -> tuple[list[Limit], list[Claim]]:
    """Put the load against what the yielding bond holds in front of the other limits."""
    lap = model.lap
    assert lap is not None
    load = abs(model.axial)
    symbol = "P"
    if not load and model.action.torque:
        load, symbol = abs(model.action.torque) / lap.bond_radius, "T_a"
    splice_steps.yield_strength(model, *yields, book)
    book.note(
        "Load at which the shear strain reaches its limit",
        f"The bond yields at {yields[0]:.4g} MPa and breaks at a total shear strain of {yields[1]:.4g}; found by "
        "Newton's method on the load and on where the bond yields."
        + (" Torque over the bond's radius." if symbol == "T_a" else ""),
        most,
        "N",
        symbol="R_k",
        source=splice_steps.HART_SMITH_DOUBLE.replace("CR-112235", "CR-112235 and CR-112236"),
        group="Strength of the yielding bond",
    )
    # a bond that what else acts strains too much already holds nothing: its limit is then as small as can be divided by
    strength = joint_load(model, max(most, 1e-9), judge)
    if strength is None:
        return limits, claims
    demand = np.array([load if most > 0 else max(load, 1.0)])
    own = Claim(strength, symbol, demand, np.zeros(1), np.zeros(1, dtype=np.intp))
    return [Limit("load", strength), *limits], [own, *claims]


def _weigh(limits: Sequence[Limit], claims: Sequence[Claim], judge: Weigher) -> list[Judged]:
    return [
        Judged(limit.demand, weighed, judge.write(weighed, GROUP) | {"demand_of": limit.demand})
        for limit, weighed in zip(limits, judge.weigh(claims), strict=True)
        if weighed is not None
    ]


def _holds(model: Model, judged: Sequence[Judged], yields: tuple[float, float] | None, most: float | None) -> Holds:
    """What the stresses may reach, or how the bond yields, for the strength of other overlaps."""
    sign = -1.0 if model.axial < 0 else 1.0
    least = {
        name: min((j.weighed.resistance for j in judged if j.demand == name), default=math.inf)
        for name in ("shear", "peel", "inner", "outer")
    }
    limits = Limits(**least)
    own = next((j for j in judged if j.demand == "load"), None)
    if yields is not None and own is not None and most:
        if model.lap is not None and model.lap.layout == "tube-lap" and model.action.torque:
            return Holds(Limits(), sign)
        return Holds(limits, sign, yields, own.weighed.resistance / most)
    return Holds(limits, sign)


def _joint_strength(model: Model, holds: Holds, judged: Sequence[Judged]) -> float | None:
    """The axial load at utilisation 1 [N]: of everything judged, or of the yielding bond's shear."""
    own = next((j for j in judged if j.demand == "load"), None)
    if own is not None and only_turned(model):
        return None
    if own is not None:
        return own.weighed.resistance if own.weighed.resistance > 1e-6 else 0.0
    if model.lap is None or not holds.known:
        return None
    found = float(holds.strength(model.lap, np.array([model.length]), model.action)[0])
    return found if math.isfinite(found) else None


def only_turned(model: Model) -> bool:
    """Whether torque is all that acts on a tube lap."""
    return bool(model.action.torque) and not model.axial and not model.action.strain


def _torque_strength(model: Model, judged: Sequence[Judged]) -> float | None:
    """The torque at utilisation 1, where nothing else acts [N mm]."""
    used = max((j.weighed.utilisation for j in judged), default=0.0)
    if not only_turned(model) or not used:
        return None
    return abs(model.action.torque) / used


def _lasting(model: Model, found: Found, book: Working, findings: Findings) -> list[lasting.Lasting]:
    """Load that stays and load that repeats, on the bond's own limits."""
    document, name = model.document, model.document.bond
    if not (document.sustained or document.fatigue):
        return []
    bond = [j for j in found.judged if j.weighed.claim.strength.owner == name and j.demand in ("shear", "peel", "load")]

    def use(share: float) -> float | None:
        if not bond:
            return None
        demands = part(model, share)
        values = {"shear": demands.shear, "peel": demands.peel}
        return max(
            (share * j.weighed.utilisation if j.demand == "load" else values[j.demand] / j.weighed.resistance)
            for j in bond
        )

    where = "under its load"
    each = (
        lasting.sustained(document.sustained, model.adhesive, name, use, book, findings, where),
        lasting.repeated(document.fatigue, model.adhesive, name, use, book, findings, where),
    )
    return [one for one in each if one is not None]


def _verdict(found: Found, extra: Sequence[lasting.Lasting], findings: Findings) -> dict[str, object]:
    """Fail where a utilisation exceeds 1; else not proven where anything is missing; else pass."""
    lines = [
        (
            j.weighed.utilisation,
            f"{j.weighed.claim.strength.what}: {j.weighed.utilisation:.3g} of its resistance used"
            + ("" if j.demand == "load" else f", {j.weighed.at:.4g} mm along the bond"),
        )
        for j in found.judged
    ]
    lines += [(each.utilisation, each.line) for each in extra]
    worst = max(lines, key=lambda line: line[0], default=None)
    if worst is None and not findings.missing:
        findings.miss("anything to judge: no strength is given that this load calls on.")
    failed = worst is not None and exceeds(worst[0])
    return {
        "verdict": "fail" if failed else "not proven" if findings.missing or worst is None else "pass",
        "utilisation": None if worst is None else worst[0],
        "governing": "nothing could be judged" if worst is None else worst[1],
    }


def _result(model: Model, found: Found, factors: dict[str, float] | None, closed: float | None) -> dict[str, object]:
    stresses, mean = found.stresses, found.mean_shear
    result: dict[str, object] = {
        "mean_shear": mean,
        "lap_shear_strength": model.adhesive.shear_strength,
        "peak_shear": None,
        "peak_ratio": None,
        "peak_peel": None,
        "edge_moment_factor": None if factors is None else max(factors.values()),
        "edge_moment_factors": factors,
        "edge_moment_factor_goland_reissner": splice_steps.compare_factor(model),
        "joint_strength": found.joint_strength,
        "bond_strength": found.bond_strength,
        "torque_strength": _torque_strength(model, found.judged),
        "overlap": model.length,
        "overlap_useful": None,
        "overlap_curve": None,
        "transfer_length": None if model.lap is None else transfer_length(model.lap),
        "peak_shear_closed_form": closed,
        "distribution": {"at": [], "shear": [], "peel": []},
        "adherends": [],
        "changes": [],
    }
    if stresses is None:
        return result
    demands = stresses.demands
    shear, peel = stresses.governing_face
    result |= {
        "peak_shear": demands.shear,
        "peak_ratio": demands.shear / mean if mean > 0 else None,
        "peak_peel": demands.peel,
        "distribution": {"at": stresses.at.tolist(), "shear": shear.tolist(), "peel": peel.tolist()},
        "adherends": [_adherend(model, side, stresses, found.judged) for side in range(2)],
    }
    return result


def _adherend(model: Model, side: int, stresses: Stresses, judged: Sequence[Judged]) -> dict[str, object]:
    name, demands = SIDES[side], stresses.demands
    own = [j for j in judged if j.demand == name or f"of the {name} adherend" in j.weighed.claim.strength.what]
    return {
        "id": name,
        "material": model.names[side],
        "thickness": model.thicknesses[side],
        "stress": demands.of(name),
        "at": demands.at[name],
        "limits": [j.result for j in own],
        "utilisation": max((j.weighed.utilisation for j in own), default=None),
    }


def _overlap(model: Model, found: Found, result: dict[str, object], findings: Findings) -> list[Change]:
    """The overlap curve, its useful length, and what changes of the joint would bring."""
    if model.lap is None or not found.holds.known or not found.joint_strength:
        return []
    if found.holds.sharp(model.lap):
        findings.caution(
            "overlap curve",
            f"The bond yields at less than 1/{DUCTILE:g} of its strain limit, which no adhesive does: curve and "
            "changes were not reckoned. Check its shear modulus, yield and strain limit.",
        )
        return []
    run_of = strength_curve(model.lap, model.action, model.length, found.holds)
    if run_of is not None:
        result["overlap_useful"] = run_of.useful
        result["overlap_curve"] = drawn(run_of, model.length)
    tried = changes(model.lap, model.action, model.length, found.joint_strength, found.holds)
    result["changes"] = [{"what": c.what, "joint_strength": c.strength, "gain": c.gain} for c in tried]
    return tried


def _drawing(model: Model) -> dict[str, object]:
    document, adherends = model.document, model.document.adherends
    return {
        "layout": document.layout,
        "length": model.length,
        "width": document.width,
        "slope": document.slope,
        "diameter": document.diameter,
        "bond_line": model.adhesive.thickness,
        "adhesive": document.bond,
        "adherends": [
            {
                "id": name,
                "material": model.names[side],
                "thickness": model.thicknesses[side],
                "kind": model.materials[side].kind,
                "grain": each.grain,
                "taper": min(each.taper or 0.0, model.length),
                "tip": document.blunt_tip or each.tip or 0.0,
            }
            for side, (name, each) in enumerate(zip(SIDES, (adherends.inner, adherends.outer), strict=True))
        ],
        "load": document.load.model_dump(),
    }


def _values_used(document: documents.SpliceDocument) -> dict[str, object]:
    def dump(value: documents.Model) -> dict[str, object]:
        found: dict[str, object] = value.model_dump(by_alias=True, exclude_none=True, mode="json")
        return found

    names = dict.fromkeys((document.adherends.inner.material, document.adherends.outer.material))
    return {
        "materials": {name: dump(document.materials[name]) for name in names},
        "adhesives": {document.bond: dump(document.adhesives[document.bond])},
        "fasteners": {},
    }
