"""Ends of bonded pieces along a member: shear and peel there, what they stand against, and what to change.

Loads that act before bonding are carried by the unpropped member alone and are left out of the moment that is shared.
Free strains (``strains``, from temperature and moisture) act with every combination, or not, whichever is worse.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import strip_steps, surfaces
from server.checks.bond_ends import Bonded, End
from server.checks.curves import Curve
from server.checks.resistance import Claim, Strength, Weighed, Weigher, resistances
from server.mechanics.overlap_laps import BondLine
from server.mechanics.overlap_strip import Host, StripCourse, strip_course
from server.mechanics.piecewise import evaluate
from server.working import Working

Array = NDArray[np.float64]
ISOTROPIC = 2.7  # E over G of an adhesive with a Poisson's ratio of 0.35 (common practice for epoxies)
METHOD = "two beams on shear and peel springs (D. A. Bigwood and A. D. Crocombe, Int. J. Adhesion 9 (1989) 229)"


@dataclass(frozen=True)
class Strain:
    """A free strain of the strip over its host, and what brings it."""

    value: float
    cause: str


@dataclass(frozen=True, eq=False)
class Stresses:
    """At one end: shear and peel of every combination with its worst free strain, and of the strains alone [MPa].

    ``shear`` and ``peel`` at the very end, of the load alone, with sign; ``peak_shear`` and ``peak_peel`` the largest
    over the half of the strip next to it, free strain included; ``cause`` the strain that goes with each.
    """

    shear: Array
    peel: Array
    peak_shear: Array
    peak_peel: Array
    cause: tuple[str, ...]
    strain_shear: Array
    strain_peel: Array
    course: StripCourse
    free: StripCourse | None = None


@dataclass
class EndCheck:
    """One end on its way through the check."""

    end: End
    bond: BondLine
    stresses: Stresses
    result: dict[str, object]
    claims: list[Claim] = field(default_factory=list)
    governing: Weighed | None = None
    changes: list[dict[str, object]] = field(default_factory=list)
    moves: dict[str, object] | None = None

    @property
    def used(self) -> float:
        """The largest part of a resistance that is used; 0 where nothing is judged."""
        return 0.0 if self.governing is None else self.governing.utilisation

    @property
    def line(self) -> str:
        """What governs at this end, in words."""
        assert self.governing is not None
        return (
            f"{self.end.title}: {self.governing.claim.strength.what}, {self.governing.utilisation:.3g} of its "
            "resistance used"
        )


def group_of(piece: str, at: float) -> str:
    """The heading of the steps of one end."""
    return f"End of {piece}, {at:g} mm"


def bond_line(bonded: Bonded, where: str, document: documents.MemberDocument, weigher: Weigher) -> BondLine | None:
    """The adhesive's stiffness; None with what is missing named."""
    adhesive = document.adhesives[bonded.adhesive]
    assert isinstance(adhesive, documents.Adhesive)
    for value, what in ((adhesive.shear_modulus, "shear_modulus"), (adhesive.thickness, "thickness")):
        if value is None:
            weigher.findings.miss(
                f"{what} of adhesive {bonded.adhesive!r} ({where}): the stress at the end of a bond follows from the "
                "bond line's stiffness; thick-adherend shear tests (ISO 11003-2) and the bond line as made give it."
            )
    if adhesive.shear_modulus is None or adhesive.thickness is None:
        return None
    across = adhesive.E
    if across is None:
        across = ISOTROPIC * adhesive.shear_modulus
        weigher.findings.caution(
            "peel stiffness",
            f"Adhesive {bonded.adhesive!r} has no E: {across:.5g} MPa was taken across the bond (2.7 times its shear "
            "modulus). Rubber-like layers are far stiffer across: enter E for them.",
            answer=True,
        )
    return BondLine(adhesive.shear_modulus, across, adhesive.thickness)


def stresses_at(
    end: End,
    bond: BondLine,
    moment: Curve,
    strains: Sequence[Strain],
    *,
    start: float | None = None,
    stop: float | None = None,
    taper: float = 0.0,
    tip: float = 0.0,
) -> Stresses:
    """Solve a strip's end for all combinations and strains; ``start``, ``stop`` move its ends, ``taper`` thins them."""
    bonded = end.bonded
    assert bonded is not None
    first, last = bonded.part.start if start is None else start, bonded.part.end if stop is None else stop
    count = moment.coefficients.shape[0]

    def moments(x: Array) -> Array:
        flat = np.clip(first + x.ravel(), moment.breaks[0], moment.breaks[-1])
        found = evaluate(moment.breaks, moment.coefficients, flat)
        return bonded.share * np.moveaxis(found, 0, -1).reshape(*x.shape, count)

    strip = replace(bonded.strip, taper=taper, tip=tip)
    inside = moment.breaks[(moment.breaks > first) & (moment.breaks < last)] - first

    def course(host: Host, columns: int, acting: object, free: Sequence[float]) -> StripCourse:
        return strip_course(
            host,
            strip,
            shear_modulus=bond.shear_modulus,
            E=bond.E,
            bond_line=bond.thickness,
            length=last - first,
            moment=acting if callable(acting) else lambda x: np.zeros((*x.shape, columns)),
            strain=np.array(free, dtype=float),
            face=bonded.face,
            bonded_width=bonded.width,
            breaks=inside,
        )

    loaded = course(bonded.host, count, moments, [0.0] * count)
    values = [strain.value for strain in strains]
    free = course(bonded.free, len(values), None, values) if values else None
    return _worst(end, loaded, free, strains)


def _worst(end: End, loaded: StripCourse, free: StripCourse | None, strains: Sequence[Strain]) -> Stresses:
    here = slice(0, len(loaded.at) // 2 + 1) if end.side == "left" else slice(len(loaded.at) // 2, None)
    edge = 0 if end.side == "left" else -1
    sign = 1.0 if end.side == "left" else -1.0
    shear, peel = loaded.shear[here], loaded.peel[here]
    options_shear = [np.abs(shear).max(axis=0)]
    options_peel = [peel.max(axis=0)]
    causes = [""]
    strain_shear, strain_peel = np.zeros(len(strains)), np.zeros(len(strains))
    if free is not None:
        strain_shear, strain_peel = sign * free.shear[edge], free.peel[edge]
        for k, strain in enumerate(strains):
            own_shear = np.interp(loaded.at, free.at, free.shear[:, k])[here, None]
            own_peel = np.interp(loaded.at, free.at, free.peel[:, k])[here, None]
            options_shear.append(np.abs(shear + own_shear).max(axis=0))
            options_peel.append((peel + own_peel).max(axis=0))
            causes.append(strain.cause)
    all_shear, all_peel = np.array(options_shear), np.array(options_peel)
    cause = tuple(causes[int(i)] for i in all_shear.argmax(axis=0))
    return Stresses(
        shear=sign * loaded.shear[edge],
        peel=loaded.peel[edge],
        peak_shear=all_shear.max(axis=0),
        peak_peel=np.maximum(all_peel.max(axis=0), 0.0),
        cause=cause,
        strain_shear=strain_shear,
        strain_peel=strain_peel,
        course=loaded,
        free=free,
    )


def claim_end(
    end: End, bond: BondLine, found: Stresses, document: documents.MemberDocument, weigher: Weigher, book: Working
) -> EndCheck:
    """Set an end's shear and peel against the adhesive and both surfaces."""
    bonded = end.bonded
    assert bonded is not None
    adhesive = document.adhesives[bonded.adhesive]
    assert isinstance(adhesive, documents.Adhesive)
    check = EndCheck(end, bond, found, _blank(end, bonded))
    book.begin(group_of(bonded.part.name, end.at))
    where, at_end = f" ({end.title})", f" at the {end.title}"
    shear: list[Strength | None] = []
    pull: list[Strength | None] = []
    pulled = bool((found.peak_peel > 0).any())
    if (found.peak_shear > 0).any():
        shear.append(surfaces.shear_yield(weigher, bonded.adhesive, adhesive, where))
    if pulled:
        pull.append(surfaces.peel(weigher, bonded.adhesive, adhesive, where))
    for part in bonded.surfaces:
        name, material = part.spec.material, part.material
        if (found.peak_shear > 0).any():
            shear.append(
                surfaces.surface_shear(weigher, name, material, part.name, rolls=part.rolls, where=at_end, book=book)
            )
        if pulled:
            pull.append(surfaces.surface_peel(weigher, name, material, part.name, where=at_end))
    count = len(found.peak_shear)
    at, stretch = np.full(count, end.at), np.zeros(count, dtype=np.intp)
    check.claims = [Claim(s, "tau_end", found.peak_shear, at, stretch) for s in shear if s is not None]
    check.claims += [Claim(s, "sigma_end", found.peak_peel, at, stretch) for s in pull if s is not None]
    return check


def _blank(end: End, bonded: Bonded) -> dict[str, object]:
    return {
        "piece": bonded.part.name,
        "joint": ", ".join(site.id for site in bonded.sites),
        "adhesive": bonded.adhesive,
        "side": end.side,
        "at": end.at,
        "end_shear": None,
        "end_peel": None,
        "mean_shear_at_end": None,
        "combination": None,
        "limits": [],
        "utilisation": None,
        "changes": [],
    }


def write_end(
    check: EndCheck, weighed: Sequence[Weighed | None], weigher: Weigher, curves: tuple[Curve, Curve], book: Working
) -> None:
    """Write an end's steps and its block of the result, at the combination that governs it."""
    end, found, bonded = check.end, check.stresses, check.end.bonded
    assert bonded is not None
    known = [w for w in weighed if w is not None]
    check.governing = max(known, key=lambda w: w.utilisation, default=None)
    row = check.governing.row if check.governing is not None else int(found.peak_shear.argmax())
    group = group_of(bonded.part.name, end.at)
    book.begin(group)
    name = weigher.combinations.strength_names[row]
    forces = _forces(end, bonded, curves, row)
    book.note(
        "Moment and shear there",
        f"Combination {name}, from the member's statics; the strip reckons with the moment that stretches it "
        f"({forces.moment + 0.0:.5g} N·mm) and the shear towards its middle ({forces.shear + 0.0:.5g} N).",
        source="equilibrium",
    )
    closed = strip_steps.published(bonded, check.bond, forces, book)
    own = (float(found.shear[row]), float(found.peel[row]))
    elements = (len(found.course.at) - 1) // 4
    for title, symbol, value in (("End shear", "tau_end", own[0]), ("End peel", "sigma_end", own[1])):
        book.note(
            title,
            f"Strip and host solved together over the strip's {bonded.length:.5g} mm by collocation on {elements} "
            "elements; "
            "positive peel pulls off."
            if symbol == "sigma_end"
            else "From the same solution: force handed over at the end.",
            value,
            "MPa",
            symbol=symbol,
            source=METHOD,
        )
    signed = 1.0 if own[0] >= 0 else -1.0
    strip_steps.compare((signed * own[0], own[1]), _signed(closed, signed), book)
    if found.cause[row]:
        book.note(
            "With free strain",
            f"{found.cause[row]}: the worst of it at this end brings the shear to {found.peak_shear[row]:.4g} MPa and "
            f"the peel to {found.peak_peel[row]:.4g} MPa.",
        )
    check.result |= {
        "end_shear": abs(own[0]),
        "end_peel": own[1],
        "mean_shear_at_end": closed.mean,
        "peak_shear": float(found.peak_shear[row]),
        "peak_peel": float(found.peak_peel[row]),
        "free_strain": found.cause[row] or None,
        "combination": name,
        "moment": forces.moment,
        "shear_force": forces.shear,
        "roberts": _pair(closed.roberts),
        "smith_teng": _pair(closed.smith_teng),
        "force_to_pick_up": abs(forces.moment) * bonded.first_moment / bonded.whole.EI,
        "limits": [weigher.write(w, group) for w in known],
        "utilisation": None if check.governing is None else check.governing.utilisation,
        "distribution": near(end, found.course, row),
    }


def _signed(closed: strip_steps.Published, sign: float) -> strip_steps.Published:
    def turned(pair: tuple[float, float]) -> tuple[float, float]:
        return sign * pair[0], pair[1]

    return strip_steps.Published(closed.mean, turned(closed.roberts), turned(closed.smith_teng))


def _pair(values: tuple[float, float]) -> dict[str, float] | None:
    return {"shear": abs(values[0]), "peel": values[1]} if np.isfinite(values).all() else None


def near(end: End, course: StripCourse, row: int) -> dict[str, list[float]]:
    """The stresses next to the end, far enough in to see them fall to the run of the member, for a drawing."""
    at = course.at
    inward = at if end.side == "left" else at[-1] - at
    shear = np.abs(course.shear[:, row])
    half = inward <= at[-1] / 2
    high = inward[half & (shear > 0.15 * shear[half].max())] if shear[half].max() > 0 else inward[:1]
    reach = min(max(float(high.max(initial=0.0)) * 2.5, at[-1] / 500), at[-1] / 2)
    kept = inward <= reach
    order = np.argsort(inward[kept])
    sign = 1.0 if end.side == "left" else -1.0
    return {
        "at": inward[kept][order].tolist(),
        "shear": (sign * course.shear[kept, row][order]).tolist(),
        "peel": course.peel[kept, row][order].tolist(),
    }


def _forces(end: End, bonded: Bonded, curves: tuple[Curve, Curve], row: int) -> strip_steps.Forces:
    """Moment and shear at the end as the strip sees them: on the face below, sagging stretches it."""
    moment, shear = curves
    x = np.array([end.at])
    side: Literal["left", "right"] = "right" if end.side == "left" else "left"
    M = float(evaluate(moment.breaks, moment.coefficients, x)[row, 0])
    V = float(evaluate(shear.breaks, shear.coefficients, x, side=side)[row, 0])
    slope = _slope(shear, end.at, side, row)
    inward = 1.0 if end.side == "left" else -1.0
    stretched = 1.0 if bonded.face == "bottom" else -1.0
    return strip_steps.Forces(stretched * M, stretched * inward * V, -stretched * slope)


def _slope(curve: Curve, at: float, side: str, row: int) -> float:
    """The derivative of a curve beside a place."""
    breaks = curve.breaks
    i = int(np.searchsorted(breaks, at, side="right" if side == "right" else "left")) - 1
    i = min(max(i, 0), len(breaks) - 2)
    c = curve.coefficients[row, i]
    s = at - breaks[i]
    return float(sum(k * c[k] * s ** (k - 1) for k in range(1, len(c))))


def use_of(check: EndCheck, found: Stresses) -> float | None:
    """The largest part of a resistance that other stresses at the same end would use."""
    if not check.claims:
        return None
    demand = np.array([found.peak_shear if c.symbol == "tau_end" else found.peak_peel for c in check.claims])
    used = demand / resistances(check.claims)
    return None if np.isnan(used).all() else float(np.nanmax(used))
