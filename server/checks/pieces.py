"""Bending and shear of the pieces themselves."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions
from server.checks.crosssection import Body, Part, Stretch
from server.checks.joints import FIRST_MOMENT
from server.checks.pieces_both_ways import (
    HIGHEST,
    LOWEST,
    CornerStress,
    CutShear,
    corner_stress,
    cut_shear,
    write_corner,
    write_cut_shear,
)
from server.checks.resistance import Claim, Judge, Strength, Weighed, worst
from server.checks.scan import Scan
from server.checks.slide import Slide
from server.checks.slip_pieces import CUT, SlidingShear, fibres, sliding_shear, write_stress
from server.checks.slip_pieces import MECHANICS as SLIDING
from server.checks.twist import Twist, twisted_shear
from server.working import formula

BENDING = "-E*M*(u - u_0)/EI"
SHEAR = "V*S/(EI*b)"
TWISTED_SHEAR = "V*S/(EI*b) + T*t_T"
MECHANICS = "plane sections, E-weighted (any mechanics of materials text)"
FIBRES = ("top", "bottom", "mean")


@dataclass(frozen=True, eq=False)
class Bent:
    """Normal stresses of one piece: fibres x entries x combinations, an entry for each stretch x moment extreme.

    Where the member bends both ways: an entry for each place that a corner's stress is greatest at; ``range`` the
    highest and the lowest corner there (2, entries, combinations), ``corners`` where each entry comes from.
    """

    stress: NDArray[np.float64]
    moment: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: NDArray[np.intp]
    range: NDArray[np.float64] | None = None
    corners: tuple[tuple[CornerStress, int], ...] = ()


@dataclass(frozen=True, eq=False)
class Sheared:
    """Largest shear stress on horizontal cuts through one piece: stretches x combinations.

    ``cuts`` stretch by stretch where the joints slide, with the piece's place among those of the stretch; ``torque``
    likewise to ``shear`` where loads are eccentric.
    """

    stress: NDArray[np.float64]
    shear: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: tuple[int, ...]
    cuts: tuple[tuple[SlidingShear, int], ...] = ()
    torque: NDArray[np.float64] | None = None
    both_ways: CutShear | None = None


@dataclass
class PieceCheck:
    """One piece on its way through the check: its stresses, what is claimed of it, then what came out."""

    part: Part
    result: dict[str, object]
    bent: Bent | None = None
    sheared: Sheared | None = None
    claims: list[Claim] = field(default_factory=list)
    governing: Weighed | None = None
    slide: Slide | None = None
    demands: list[tuple[str, NDArray[np.float64]]] = field(default_factory=list)


def claim_pieces(
    body: Body,
    scan: Scan,
    judge: Judge,
    *,
    upper_stiffness: bool,
    slide: Slide | None = None,
    fall_back: bool = False,
    twist: Twist | None = None,
) -> list[PieceCheck]:
    """Stresses of every piece and, where its material has strengths, the limits that are to be weighed.

    ``upper_stiffness``: fasteners carry a joint and slip is not reckoned, so the stresses are estimates
    and no limit is judged on them. ``slide``: the stresses are those of the member whose joints slide; ``fall_back``:
    judged with the factor for what stands with the glue gone; ``twist``: torsion adds to their shear.
    """
    if slide is None and judge.actions.across is not None:
        bent, sheared = _bend_both_ways(body, judge.actions), _shear_both_ways(body, judge.actions, twist)
    elif slide is None:
        bent = _bend(body, scan)
        sheared = _shear(body, scan) if twist is None else _shear_twisted(body, twist)
    else:
        bent, sheared = _bend_sliding(body, slide), _shear_sliding(body, slide)
    judge = judge.with_divisor(judge.document.basis.fall_back()) if fall_back else judge
    found = []
    for part in body.parts:
        check = PieceCheck(part, _blank(part), bent.get(part.index), sheared.get(part.index), slide=slide)
        found.append(check)
        judge.judge_status(f"material {part.spec.material!r}", part.material)  # its E carries, judged itself or not
        if check.bent is None or check.sheared is None:
            continue
        if not upper_stiffness and part.material.strengths.any():
            judge.duration("material", part.spec.material, part.material)
            check.demands = fibre_demands(part, check.bent)
            check.claims = [*_bending_claims(check, check.bent, judge), *_shear_claim(part, check.sheared, judge)]
    return found


def write_piece(check: PieceCheck, weighed: list[Weighed | None], body: Body, judge: Judge, group: str = "") -> None:
    """Write a piece's steps and its block of the result."""
    if check.bent is None or check.sheared is None:
        return
    known = [w for w in weighed if w is not None]
    group = group or f"Piece {check.part.name}"
    _write_bending(check, check.bent, [w for w in known if w.claim.symbol == "sigma"], body, judge, group)
    _write_shear(check, check.sheared, body, judge, group)
    check.result["limits"] = [judge.write(w, group) for w in known]
    check.governing = worst(known)
    check.result["utilisation"] = None if check.governing is None else check.governing.utilisation


def _blank(part: Part) -> dict[str, object]:
    return {
        "id": part.name,
        "material": part.spec.material,
        "stress_top": None,
        "stress_bottom": None,
        "stress_mean": None,
        "shear_stress": None,
        "limits": [],
        "utilisation": None,
    }


def _bend(body: Body, scan: Scan) -> dict[int, Bent]:
    """Normal stresses of every piece: one evaluation a stretch, for all pieces, fibres, extremes and combinations."""
    found: dict[int, Bent] = {}
    for t, (stretch, extremes) in enumerate(zip(body.stretches, scan.moment, strict=False)):
        parts, whole = stretch.section.parts, stretch.section.properties
        moment, at = np.array([extremes.max, extremes.min]), np.array([extremes.at_max, extremes.at_min])
        stress = formula(BENDING).array(
            {
                "E": np.array([p.material.E for p in parts])[:, None, None, None],
                "M": moment,
                "u": np.array([_heights(p, stretch) for p in parts])[:, :, None, None],
                "u_0": whole.neutral_axis[1],
                "EI": whole.EI,
            }
        )
        where = np.full(2, t, dtype=np.intp)
        for part, own in zip(parts, stress, strict=True):
            here = Bent(own, moment, at, where)
            found[part.index] = _longer(found[part.index], here) if part.index in found else here
    return found


def _longer(left: Bent, right: Bent) -> Bent:
    return Bent(
        np.concatenate([left.stress, right.stress], axis=1),
        np.concatenate([left.moment, right.moment]),
        np.concatenate([left.at, right.at]),
        np.concatenate([left.stretch, right.stretch]),
    )


def _heights(part: Part, stretch: Stretch) -> tuple[float, float, float]:
    """Heights of the fibres: top, bottom, centroid."""
    return part.top, part.bottom, stretch.section.centroids[part.index]


def _shear(body: Body, scan: Scan) -> dict[int, Sheared]:
    """Largest shear stress on a horizontal cut through every piece: one evaluation a stretch for all pieces."""
    rows: dict[int, list[tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64], int]]] = {}
    for t, (stretch, (shear, at)) in enumerate(zip(body.stretches, scan.shear, strict=False)):
        cuts = list(stretch.section.cuts.items())
        stress = formula(SHEAR).array(
            {
                "V": shear,
                "S": np.array([[abs(cut.first_moment)] for _, cut in cuts]),
                "b": np.array([[cut.width] for _, cut in cuts]),
                "EI": stretch.section.properties.EI,
            }
        )
        for (index, _), own in zip(cuts, stress, strict=True):
            rows.setdefault(index, []).append((own, shear, at, t))
    found = {}
    for index, each in rows.items():
        stresses, shears, places, stretches = zip(*each, strict=True)
        found[index] = Sheared(np.array(stresses), np.array(shears), np.array(places), stretches)
    return found


def _shear_twisted(body: Body, twist: Twist) -> dict[int, Sheared]:
    """Shear on horizontal cuts and by torsion together, piece by piece."""
    found = {}
    for part in body.parts:
        stretches = body.stretches_of(part)
        if stretches:
            each = twisted_shear(twist, part.index, stretches)
            found[part.index] = Sheared(each.stress, each.shear, each.at, each.stretch, torque=each.torque)
    return found


def _bend_both_ways(body: Body, actions: Actions) -> dict[int, Bent]:
    """Normal stresses at the corners of every piece where any of them is greatest."""
    found: dict[int, Bent] = {}
    for part in body.parts:
        rows = [(t, corner_stress(actions, part, stretch)) for t, stretch in body.stretches_of(part)]
        if not rows:
            continue
        each = [one for _, one in rows]
        found[part.index] = Bent(
            np.concatenate([one.fibres() for one in each], axis=1),
            np.concatenate([one.moments[0] for one in each]),
            np.concatenate([one.at for one in each]),
            np.repeat(np.array([t for t, _ in rows], dtype=np.intp), [len(one.at) for one in each]),
            np.concatenate([one.range() for one in each], axis=1),
            tuple((one, entry) for one in each for entry in range(len(one.at))),
        )
    return found


def _shear_both_ways(body: Body, actions: Actions, twist: Twist | None) -> dict[int, Sheared]:
    """Shear on level and upright cuts of every piece, with that of torsion."""
    found = {}
    for part in body.parts:
        each = cut_shear(actions, twist, body, part)
        if each is not None:
            found[part.index] = Sheared(each.stress, each.causes[..., 0], each.at, each.stretch, both_ways=each)
    return found


def _bend_sliding(body: Body, slide: Slide) -> dict[int, Bent]:
    """Normal stresses where any fibre of a piece is greatest or least, from its own force and bending."""
    found: dict[int, Bent] = {}
    for t, stretch in enumerate(body.stretches):
        for part in stretch.section.parts:
            stress, at = fibres(slide, part, stretch).extremes(stretch.start, stretch.end)
            here = Bent(stress, np.zeros_like(at), at, np.full(len(at), t, dtype=np.intp))
            found[part.index] = _longer(found[part.index], here) if part.index in found else here
    return found


def _shear_sliding(body: Body, slide: Slide) -> dict[int, Sheared]:
    """Largest shear stress on a horizontal cut through every piece, by what the forces above it change by."""
    rows: dict[int, list[tuple[SlidingShear, int, int]]] = {}
    for t, stretch in enumerate(body.stretches):
        found = sliding_shear(slide, stretch)
        for position, part in enumerate(stretch.section.parts):
            rows.setdefault(part.index, []).append((found, position, t))
    return {
        index: Sheared(
            np.array([cut.stress[i] for cut, i, _ in each]),
            np.zeros((len(each), each[0][0].stress.shape[1])),
            np.array([cut.at[i] for cut, i, _ in each]),
            tuple(t for _, _, t in each),
            tuple((cut, i) for cut, i, _ in each),
        )
        for index, each in rows.items()
    }


def _bending_claims(check: PieceCheck, bent: Bent, judge: Judge) -> Iterator[Claim]:
    part = check.part
    for word, demand in check.demands:
        entry = demand.argmax(axis=0)
        columns = np.arange(demand.shape[1])
        worst_of = demand[entry, columns]
        if worst_of.max() <= 0:  # never in tension, or never in compression: nothing to judge
            continue
        strength = piece_strength(part, word, f"{word} in {part.name}", judge)
        if strength is None:
            judge.findings.miss(
                f"bending strength of {part.spec.material!r} (piece {part.name}), or its {word} strength: the "
                "material's record, from its grade or from tests."
            )
            continue
        yield Claim(strength, "sigma", np.maximum(worst_of, 0.0), bent.at[entry, columns], bent.stretch[entry])


def fibre_demands(part: Part, bent: Bent) -> list[tuple[str, NDArray[np.float64]]]:
    """What each strength is set against: the extreme fibre by bending, the mean by tension or compression.

    Where bending is not given, the extreme fibre is judged by tension and compression.
    """
    top, bottom, mean = bent.stress
    high, low = (np.maximum(top, bottom), np.minimum(top, bottom)) if bent.range is None else bent.range
    given = part.material.strengths
    if given.bending is None:
        return [("tension", high), ("compression", -low)]
    demands = [("bending", np.maximum(np.abs(high), np.abs(low)))]
    demands += [("tension", mean)] if given.tension is not None else []
    demands += [("compression", -mean)] if given.compression is not None else []
    return demands


def _shear_claim(part: Part, sheared: Sheared, judge: Judge) -> Iterator[Claim]:
    word = "rolling_shear" if part.body_rolls else "shear"
    spoken = word.replace("_", " ")
    strength = piece_strength(part, word, f"{spoken} in {part.name}", judge)
    if strength is None:
        judge.findings.miss(
            f"{spoken} strength of {part.spec.material!r} (piece {part.name}): the material's record, from its grade "
            "or from tests."
        )
        return
    entry = sheared.stress.argmax(axis=0)
    columns = np.arange(sheared.stress.shape[1])
    stretches = np.array(sheared.stretch, dtype=np.intp)[entry]
    yield Claim(strength, "tau", sheared.stress[entry, columns], sheared.at[entry, columns], stretches)


def piece_strength(part: Part, word: str, what: str, judge: Judge) -> Strength | None:
    return judge.strength(
        getattr(part.material.strengths, word),
        what=what,
        unit="MPa",
        kind="material",
        owner=part.spec.material,
        holder=part.material,
    )


def _write_bending(check: PieceCheck, bent: Bent, weighed: list[Weighed], body: Body, judge: Judge, group: str) -> None:
    """Stresses where the piece is used most: by its limits on normal stress, else where they are largest."""
    governing, demands = worst(weighed), dict(check.demands)
    if governing is None:
        size = np.abs(bent.stress[:2]).max(axis=0)
        entry, row = (int(i) for i in np.unravel_index(int(size.argmax()), size.shape))
    else:
        row, word = governing.row, governing.claim.strength.what.removesuffix(f" in {check.part.name}")
        entry = int(demands[word][:, row].argmax())
    stretch = body.stretches[int(bent.stretch[entry])]
    part = check.part
    if check.slide is not None:
        at, top = float(bent.at[entry, row]), float(bent.stress[0, entry, row])
        found = write_stress(check.slide, part, stretch, at, row, top, judge, group)
        check.result.update(zip(("stress_top", "stress_bottom", "stress_mean"), found, strict=True))
        return
    for name in FIBRES:
        check.result[f"stress_{name}"] = _write_stress(part, bent, entry, row, name, body, judge, group)
    for other in weighed:
        word = other.claim.strength.what.removesuffix(f" in {part.name}")
        there = int(demands[word][:, other.row].argmax())
        if bent.corners and word != "bending" and part.material.strengths.bending is None:
            corners, own = bent.corners[there]
            title = f"Normal stress at the corner in most {word}"
            extreme = HIGHEST if word == "tension" else LOWEST
            write_corner(
                corners, part, body.stretches[int(bent.stretch[there])], title, extreme, own, other.row, judge, group
            )
            continue
        if (there, other.row) != (entry, row):
            fibre = _fibre_of(part, word, bent.stress[:, there, other.row])
            _write_stress(part, bent, there, other.row, fibre, body, judge, group)


def _fibre_of(part: Part, word: str, stress: NDArray[np.float64]) -> str:
    """Which fibre a limit looks at: the mean, or of top and bottom the one that is stressed more in its way."""
    if word != "bending" and part.material.strengths.bending is not None:
        return "mean"
    sized = {"bending": np.abs(stress), "tension": stress, "compression": -stress}[word]
    return FIBRES[int(sized[:2].argmax())]


def _write_stress(
    part: Part, bent: Bent, entry: int, row: int, fibre: str, body: Body, judge: Judge, group: str
) -> float:
    """The step of one normal stress."""
    stretch = body.stretches[int(bent.stretch[entry])]
    whole = stretch.section.properties
    title = "Normal stress at its centroid" if fibre == "mean" else f"Normal stress at its {fibre}"
    if bent.corners:
        found, own = bent.corners[entry]
        title = title if fibre == "mean" else f"{title}, the worse corner"
        return write_corner(found, part, stretch, title, FIBRES.index(fibre), own, row, judge, group)
    return judge.working.step(
        title,
        f"sigma_{fibre}",
        BENDING,
        {
            "E": (part.material.E, "MPa"),
            "M": (float(bent.moment[entry, row]), "N*mm"),
            "u": (_heights(part, stretch)[FIBRES.index(fibre)], "mm"),
            "u_0": (float(whole.neutral_axis[1]), "mm"),
            "EI": (whole.EI, "N*mm2"),
        },
        unit="MPa",
        source=f"{MECHANICS}; at {bent.at[entry, row]:.6g} mm, combination {judge.actions.strength_names[row]}",
        group=group,
    )


def _write_shear(check: PieceCheck, sheared: Sheared, body: Body, judge: Judge, group: str) -> None:
    if sheared.both_ways is not None:
        check.result["shear_stress"] = write_cut_shear(sheared.both_ways, check.part, body, judge, group)
        return
    entry, row = (int(i) for i in np.unravel_index(int(sheared.stress.argmax()), sheared.stress.shape))
    if sheared.cuts:
        _write_sliding_shear(check, sheared, entry, row, body, judge, group)
        return
    stretch = body.stretches[sheared.stretch[entry]]
    section = stretch.section
    cut = section.cuts[check.part.index]
    if section.settled.field is None:
        _write_cut(stretch, check.part.index, judge, group)
    values: dict[str, tuple[float, str]] = {
        "V": (float(sheared.shear[entry, row]), "N"),
        "S": (abs(cut.first_moment), "N*mm"),
        "b": (cut.width, "mm"),
        "EI": (section.properties.EI, "N*mm2"),
    }
    of = "b of all pieces cut there" if section.settled.field is None else "S and b of this piece alone, by the field"
    if sheared.torque is not None:
        values["T"] = (float(sheared.torque[entry, row]), "N*mm")
        values["t_T"] = (section.torsion_stress[check.part.index], "1/mm3")
        of = f"{of}; t_T: stress of a unit torque, as sizes, short of the peaks at inward corners"
    check.result["shear_stress"] = judge.working.step(
        "Largest shear stress on a horizontal cut" + ("" if sheared.torque is None else ", with that of torsion"),
        "tau",
        SHEAR if sheared.torque is None else TWISTED_SHEAR,
        values,
        unit="MPa",
        source=f"{MECHANICS}; cut {cut.up:.6g} mm up, {of}",
        group=group,
    )


def _write_cut(stretch: Stretch, index: int, judge: Judge, group: str) -> None:
    """First moment of all that lies above the horizontal cut through a part, piece by piece."""
    if not judge.working.record:
        return
    section = stretch.section
    over = section.beyond[index]
    judge.working.step(
        f"E-weighted first moment above the cut at {section.cuts[index].up:.6g} mm",
        "S",
        FIRST_MOMENT,
        {
            "E": ([section.pieces[i].E for i in over.positions], "MPa"),
            "A": (over.area, "mm2"),
            "u": (over.height, "mm"),
            "u_0": (float(section.properties.neutral_axis[1]), "mm"),
        },
        unit="N*mm",
        source="areas above the cut, heights of their centroids: "
        + ", ".join(section.parts[i].name for i in over.positions),
        group=group,
    )


def _write_sliding_shear(
    check: PieceCheck, sheared: Sheared, entry: int, row: int, body: Body, judge: Judge, group: str
) -> None:
    found, i = sheared.cuts[entry]
    parts = body.stretches[sheared.stretch[entry]].section.parts
    above = [j for j in range(len(parts)) if abs(found.change[i, row, j]) > 0] or [i]
    names = ", ".join(parts[j].name for j in above)
    check.result["shear_stress"] = judge.working.step(
        "Largest shear stress on a horizontal cut",
        "tau",
        CUT,
        {"n_x": (found.change[i, row, above].tolist(), "N/mm"), "b": (float(found.width[i, row]), "mm")},
        unit="MPa",
        source=f"{SLIDING}; n_x: change of axial force along the member above the cut, of {names}; cut "
        f"{found.up[i, row]:.6g} mm up, at {found.at[i, row]:.6g} mm, combination {judge.actions.strength_names[row]}",
        group=group,
    )
