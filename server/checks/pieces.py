"""Bending and shear of the pieces themselves."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from server.checks.crosssection import Body, Part, Stretch
from server.checks.joints import FIRST_MOMENT
from server.checks.piece_stresses import BENDING, SHEAR, Bent, Sheared, bend, heights, shear
from server.checks.pieces_both_ways import HIGHEST, LOWEST, write_corner, write_cut_shear
from server.checks.resistance import Claim, Judge, Strength, Weighed, worst
from server.checks.scan import Scan
from server.checks.slide import Slide
from server.checks.slip_pieces import CUT, write_stress
from server.checks.slip_pieces import MECHANICS as SLIDING
from server.checks.twist import Twist

TWISTED_SHEAR = "V*S/(EI*b) + T*t_T"
MECHANICS = "plane sections, E-weighted (any mechanics of materials text)"
FIBRES = ("top", "bottom", "mean")


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


Asked = tuple[str, NDArray[np.float64], NDArray[np.float64], NDArray[np.intp]]
"""A strength of a piece and what it is set against, an entry a strength combination, with place and stretch of each."""
Stress = TypeVar("Stress", Bent, Sheared)
NOISE = 1e-9  # of a piece's largest stress: what is below it comes of rounding, as at a free end
EXTREME, PULLED, PRESSED, MEAN_PULLED, MEAN_PRESSED = range(5)  # the rows of ``_sizes``


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
    for_strength = judge.actions.moment is not None
    bent = bend(body, scan, judge.actions, slide) if for_strength else {}
    sheared = shear(body, scan, judge.actions, slide, twist) if for_strength else {}
    judge = judge.with_divisor(judge.document.basis.fall_back()) if fall_back else judge
    found = [
        PieceCheck(part, _blank(part), bent.get(part.index), sheared.get(part.index), slide=slide)
        for part in body.parts
    ]
    judged = [] if upper_stiffness else [check for check in found if check.part.material.strengths.any()]
    bending, shearing = _bending(judged), _shearing(judged)
    for check in found:
        part = check.part
        judge.judge_status(f"material {part.spec.material!r}", part.material)  # its E carries, judged itself or not
        if part.index in bending and part.index in shearing:
            judge.duration("material", part.spec.material, part.material)
            check.claims = [
                *_bending_claims(part, bending[part.index], judge),
                *_shear_claim(part, shearing[part.index], judge),
            ]
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


def _bending(checks: Sequence[PieceCheck]) -> dict[int, list[Asked]]:
    """What the strengths of all pieces against normal stress are set against, by the piece's index."""
    found: dict[int, list[Asked]] = {}
    for alike in _alike([(check, check.bent) for check in checks if check.bent is not None]):
        (_, first), ranges = alike[0], [bent.range for _, bent in alike if bent.range is not None]
        stress = np.array([bent.stress for _, bent in alike]).swapaxes(0, 1)
        sizes = _sizes(stress, np.array(ranges).swapaxes(0, 1) if ranges else None)
        demand, at, stretch = _hardest(sizes, first.at, first.stretch)
        most, demand = demand.max(axis=-1).tolist(), np.maximum(demand, 0.0)
        for i, (check, _) in enumerate(alike):
            looked_at = _looked_at(check.part)
            check.demands = [(word, sizes[k, i]) for word, k in looked_at]
            found[check.part.index] = [
                (word, demand[k, i], at[k, i], stretch[k, i])
                for word, k in looked_at
                if most[k][i] > NOISE * most[EXTREME][i]  # else never in tension, or never in compression
            ]
    return found


def _shearing(checks: Sequence[PieceCheck]) -> dict[int, Asked]:
    """What the shear strengths of all pieces are set against, by the piece's index."""
    found: dict[int, Asked] = {}
    for alike in _alike([(check, check.sheared) for check in checks if check.sheared is not None]):
        first = alike[0][1]
        stress = np.array([sheared.stress for _, sheared in alike])
        demand, at, stretch = _hardest(stress, first.at, np.array(first.stretch, dtype=np.intp))
        for i, (check, _) in enumerate(alike):
            word = "rolling_shear" if check.part.body_rolls else "shear"
            found[check.part.index] = (word, demand[i], at[i], stretch[i])
    return found


def _alike(stressed: Sequence[tuple[PieceCheck, Stress]]) -> Iterable[list[tuple[PieceCheck, Stress]]]:
    """The pieces in groups whose entries stand at the same places."""
    groups: dict[int, list[tuple[PieceCheck, Stress]]] = {}
    for check, stress in stressed:
        groups.setdefault(id(stress.at), []).append((check, stress))
    return groups.values()


def _hardest(
    sizes: NDArray[np.float64], at: NDArray[np.float64], stretch: NDArray[np.intp]
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.intp]]:
    """The largest of several entries (..., entries, combinations), with its place and stretch."""
    entry = sizes.argmax(axis=-2)
    return sizes.max(axis=-2), at[entry, np.arange(entry.shape[-1])], stretch[entry]


def _sizes(stress: NDArray[np.float64], highest: NDArray[np.float64] | None) -> NDArray[np.float64]:
    """Normal stress in every way that a strength may look at it, a row each, from that at top, bottom and centroid.

    ``highest``: the highest and the lowest stress, where more than top and bottom count.
    """
    top, bottom, mean = stress
    high, low = (np.maximum(top, bottom), np.minimum(top, bottom)) if highest is None else highest
    return np.array([np.maximum(np.abs(high), np.abs(low)), high, -low, mean, -mean])


def _looked_at(part: Part) -> list[tuple[str, int]]:
    """The strengths that a piece has against normal stress, each with its row of ``_sizes``.

    The extreme fibre is set against bending, the mean against tension and compression; where bending is not given, the
    extreme fibre is judged by tension and compression.
    """
    given = part.material.strengths
    if given.bending is None:
        return [("tension", PULLED), ("compression", PRESSED)]
    found = [("bending", EXTREME)]
    found += [("tension", MEAN_PULLED)] if given.tension is not None else []
    found += [("compression", MEAN_PRESSED)] if given.compression is not None else []
    return found


def fibre_demands(part: Part, bent: Bent) -> list[tuple[str, NDArray[np.float64]]]:
    """What each strength of one piece against normal stress is set against, (entries, combinations) each."""
    sizes = _sizes(bent.stress, bent.range)
    return [(word, sizes[k]) for word, k in _looked_at(part)]


def _bending_claims(part: Part, asked: Sequence[Asked], judge: Judge) -> Iterator[Claim]:
    for word, demand, at, stretch in asked:
        strength = piece_strength(part, word, f"{word} in {part.name}", judge)
        if strength is None:
            judge.findings.miss(
                f"bending strength of {part.spec.material!r} (piece {part.name}), or its {word} strength: the "
                "material's record, from its grade or from tests."
            )
            continue
        yield Claim(strength, "sigma", demand, at, stretch)


def _shear_claim(part: Part, asked: Asked, judge: Judge) -> Iterator[Claim]:
    word, demand, at, stretch = asked
    spoken = word.replace("_", " ")
    strength = piece_strength(part, word, f"{spoken} in {part.name}", judge)
    if strength is None:
        judge.findings.miss(
            f"{spoken} strength of {part.spec.material!r} (piece {part.name}): the material's record, from its grade "
            "or from tests."
        )
        return
    yield Claim(strength, "tau", demand, at, stretch)


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
            "u": (heights(part, stretch)[FIBRES.index(fibre)], "mm"),
            "u_0": (float(whole.neutral_axis[1]), "mm"),
            "EI": (whole.EI, "N*mm2"),
        },
        unit="MPa",
        source=f"{MECHANICS}; at {float(bent.at[entry, row]):.6g} mm, combination {judge.actions.strength_names[row]}",
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
