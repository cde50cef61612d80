"""Rules of the contract that look across the fields of a member document.

What needs the section's geometry (pieces that touch, overlap, are tied) belongs to the check.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from server import units
from server.documents.faults import unknown
from server.documents.member import (
    AreaLoad,
    Combination,
    CoupleLoad,
    Joint,
    LineLoad,
    Load,
    MovingLoad,
    PointLoad,
    SelfWeight,
    SpacingZone,
)
from server.documents.parts import Parts
from server.errors import Fault
from server.mechanics.beam_model import SAME_PLACE, SOFTEST, STIFFEST

LOADS_AT_MOST = 1000
MOVING_AT_MOST = 10


def faults(parts: Parts) -> Iterator[Fault]:
    """Every fault between the readable parts of a member document."""
    yield from _values(parts)
    yield from _pieces(parts)
    for index, joint in enumerate(parts.joints):
        if joint is not None:
            yield from _joint_names(parts, index, joint)
            yield from _joint_roles(f"section.joints[{index}]", joint)
            yield from _spacing(parts, f"section.joints[{index}]", joint)
    yield from _repeated_joints(parts)
    yield from _supports(parts)
    yield from _hinges(parts)
    yield from _bearing(parts)
    yield from _loads(parts)
    yield from _combinations(parts)
    yield from _service(parts)
    yield from _basis(parts)


def _mm(parts: Parts, value: float) -> str:
    return units.show(value, "length", parts.display)


def _outside(parts: Parts, path: str, place: float | None) -> Iterator[Fault]:
    """A place beyond the right end; places left of 0 were refused when they were read."""
    if parts.length is not None and place is not None and place > parts.length * (1 + SAME_PLACE):
        shown, length = _mm(parts, place), _mm(parts, parts.length)
        if shown == length:
            shown, length = f"{place!r} mm", f"{parts.length!r} mm"
        yield Fault(path, f"{shown} is beyond the end of the member; enter a place from 0 to its length, {length}.")


def _run(parts: Parts, path: str, start: float | None, end: float | None) -> Iterator[Fault]:
    """A stretch from ``start`` to ``end``: in that order, inside the member."""
    yield from _outside(parts, f"{path}.from", start)
    yield from _outside(parts, f"{path}.to", end)
    if start is not None and end is not None and start >= end:
        yield Fault(
            f"{path}.to",
            f"{_mm(parts, end)} is not to the right of 'from' ({_mm(parts, start)}); enter a larger place.",
        )


def _values(parts: Parts) -> Iterator[Fault]:
    for name in parts.fasteners or {}:
        fastener = parts.fastener(name)
        if fastener is None or fastener.spacing_min is None or fastener.spacing_max is None:
            continue
        if fastener.spacing_min > fastener.spacing_max:
            yield Fault(
                f"fasteners.{name}.spacing_max",
                f"{_mm(parts, fastener.spacing_max)} is less than spacing_min ({_mm(parts, fastener.spacing_min)}); "
                "enter a larger spacing.",
            )


def _pieces(parts: Parts) -> Iterator[Fault]:
    for name, piece in (parts.pieces or {}).items():
        if piece is None:
            continue
        path = f"section.pieces.{name}"
        if parts.materials is not None and piece.material not in parts.materials:
            yield Fault(f"{path}.material", unknown(piece.material, "material", parts.materials))
        yield from _run(parts, path, piece.from_, piece.to)
        if piece.to is None and piece.from_ is not None and piece.from_ == parts.length:
            yield Fault(f"{path}.from", "the piece begins where the member ends; enter a smaller place.")
        if piece.from_ is None and piece.to == 0:
            yield Fault(f"{path}.to", "the piece ends where the member begins; enter a larger place.")


def _joint_names(parts: Parts, index: int, joint: Joint) -> Iterator[Fault]:
    path = f"section.joints[{index}]"
    if parts.pieces is not None:
        for name in dict.fromkeys(joint.between):
            if name not in parts.pieces:
                yield Fault(f"{path}.between", unknown(name, "piece", parts.pieces))
    if joint.between[0] == joint.between[1]:
        yield Fault(f"{path}.between", f"{units.given(joint.between[0])} is named twice; name two pieces that touch.")
    if joint.adhesive is not None and parts.adhesives is not None and joint.adhesive not in parts.adhesives:
        yield Fault(f"{path}.adhesive", unknown(joint.adhesive, "adhesive", parts.adhesives))
    if joint.fastener is not None and parts.fasteners is not None and joint.fastener not in parts.fasteners:
        yield Fault(f"{path}.fastener", unknown(joint.fastener, "fastener", parts.fasteners))


def _joint_roles(path: str, joint: Joint) -> Iterator[Fault]:
    """Who carries the flow: the adhesive or the fasteners, never both together, never nobody."""
    if joint.adhesive is None and joint.fastener is None:
        yield Fault(path, "the joint has neither an adhesive nor a fastener; name one of them, or leave the joint out.")
        return
    if joint.fastener is None:
        for name in ("role", "spacing"):
            if getattr(joint, name) is not None:
                yield Fault(f"{path}.{name}", f"'{name}' is for fasteners, and the joint names none; name a fastener.")
        return
    if joint.role == "sole" and joint.adhesive is not None:
        yield Fault(
            f"{path}.role",
            "'sole' means that fasteners carry the whole flow, and the joint has an adhesive too; strengths of glue "
            "and fasteners are never added. Take the adhesive out, or give the fasteners another role: 'fall-back', "
            "'peel-stop', 'press', or 'hybrid' where the shop has tested that very joint with both.",
        )
    if joint.role not in (None, "sole") and joint.adhesive is None:
        yield Fault(
            f"{path}.role",
            f"'{joint.role}' fasteners stand beside an adhesive, and the joint has none, so nothing would carry the "
            "flow. Name an adhesive, or make the role 'sole'.",
        )


def _spacing(parts: Parts, path: str, joint: Joint) -> Iterator[Fault]:
    """Zones of spacing lie inside the member and cover the joint's run without gap or overlap."""
    if not isinstance(joint.spacing, list):
        return
    for index, zone in enumerate(joint.spacing):
        yield from _run(parts, f"{path}.spacing[{index}]", zone.from_, zone.to)
    order = sorted(range(len(joint.spacing)), key=lambda index: joint.spacing[index].from_)  # type: ignore[index]
    for left, right in pairwise(order):
        end, start = joint.spacing[left].to, joint.spacing[right].from_
        if abs(start - end) <= 1e-6 * max(abs(end), 1.0):
            continue
        what = "a gap" if start > end else "an overlap"
        yield Fault(
            f"{path}.spacing[{right}].from",
            f"{what} between the zone that ends at {_mm(parts, end)} and the one that begins at {_mm(parts, start)}; "
            f"let it begin at {_mm(parts, end)}.",
        )
    yield from _uncovered(parts, path, joint, [joint.spacing[index] for index in order])


def _uncovered(parts: Parts, path: str, joint: Joint, zones: Sequence[SpacingZone]) -> Iterator[Fault]:
    if parts.length is None or parts.pieces is None:
        return
    pair = [parts.pieces.get(name) for name in joint.between]
    start = max((piece.from_ or 0.0 for piece in pair if piece is not None), default=0.0)
    end = min((piece.to if piece.to is not None else parts.length for piece in pair if piece is not None), default=0.0)
    tolerance = 1e-6 * parts.length
    if None in pair or end <= start:
        return
    if zones[0].from_ > start + tolerance or max(zone.to for zone in zones) < end - tolerance:
        yield Fault(
            f"{path}.spacing",
            f"the zones run from {_mm(parts, zones[0].from_)} to {_mm(parts, max(zone.to for zone in zones))}, the "
            f"joint from {_mm(parts, start)} to {_mm(parts, end)}; let the zones cover the joint.",
        )


def _repeated_joints(parts: Parts) -> Iterator[Fault]:
    first: dict[tuple[frozenset[str], int], int] = {}
    ids: dict[str, int] = {}
    for index, joint in enumerate(parts.joints):
        if joint is None:
            continue
        before = first.setdefault((frozenset(joint.between), joint.segment), index)
        alike = ids.setdefault(joint.id, index)
        if before != index:
            yield Fault(
                f"section.joints[{index}].between",
                f"joint {before} already joins '{joint.between[0]}' and '{joint.between[1]}'; keep one of them, or "
                "give the other 'segment' 2 where the pieces touch along a further line.",
            )
        elif alike != index:
            yield Fault(
                f"section.joints[{index}].between",
                f"the joint would be called '{joint.id}', as joint {alike} is; rename a piece.",
            )


def _supports(parts: Parts) -> Iterator[Fault]:
    seen: list[tuple[int, float]] = []
    for index, support in enumerate(parts.supports):
        if support is None:
            continue
        path = f"member.supports[{index}]"
        yield from _outside(parts, f"{path}.at", support.at)
        for before, at in [pair for pair in seen if _same_place(parts, pair[1], support.at)][:1]:
            yield Fault(f"{path}.at", f"support {before} already stands at {_mm(parts, at)}; keep one of them.")
        seen.append((index, support.at))
        if support.kind == "spring" and support.stiffness is None:
            yield Fault(f"{path}.stiffness", "missing; a spring needs its stiffness, such as 900 N/mm or 5.1 kip/in.")
        if support.kind == "spring" and support.stiffness is not None and not SOFTEST <= support.stiffness <= STIFFEST:
            yield Fault(
                f"{path}.stiffness",
                f"{support.stiffness:g} N/mm is not accepted; enter {SOFTEST:g} to {STIFFEST:g} N/mm, or a pin where "
                "nothing gives.",
            )
        if support.kind != "spring" and support.stiffness is not None:
            yield Fault(
                f"{path}.stiffness",
                f"a '{support.kind}' support does not give way; make its kind 'spring', or leave stiffness out.",
            )


def _same_place(parts: Parts, one: float, other: float) -> bool:
    return abs(one - other) <= SAME_PLACE * (parts.length or 0.0)


def _hinges(parts: Parts) -> Iterator[Fault]:
    fixed = [support.at for support in parts.supports if support is not None and support.kind == "fixed"]
    seen: list[float] = []
    for index, hinge in enumerate(parts.hinges):
        if hinge is None:
            continue
        path = f"member.hinges[{index}]"
        yield from _outside(parts, path, hinge)
        if parts.length is not None and any(_same_place(parts, hinge, end) for end in (0.0, parts.length)):
            yield Fault(path, "the hinge is at an end of the member; an end is free already, so leave it out.")
        elif any(_same_place(parts, hinge, at) for at in fixed):
            yield Fault(
                path,
                f"the hinge is at the fixed support at {_mm(parts, hinge)}; make the support a pin, or put the hinge "
                "beside it.",
            )
        if any(_same_place(parts, hinge, at) for at in seen):
            yield Fault(path, f"a hinge already stands at {_mm(parts, hinge)}; keep one of them.")
        seen.append(hinge)


def _loads(parts: Parts) -> Iterator[Fault]:
    if parts.loads is None:
        return
    count = sum(len(loads) for loads in parts.loads.values())
    if count > LOADS_AT_MOST:
        yield Fault("loads", f"holds {count} loads; at most {LOADS_AT_MOST} are read.")
    if parts.loads and count == 0:
        yield Fault("loads", "there is no load in any case; enter at least one.")
    heavy = False
    for case, loads in parts.loads.items():
        for index, load in enumerate(loads):
            if load is not None:
                yield from _load(parts, f"loads.{case}[{index}]", load)
                heavy = heavy or isinstance(load, SelfWeight)
    if heavy:
        yield from _weightless(parts)
    moving = sum(isinstance(load, MovingLoad) for loads in parts.loads.values() for load in loads)
    if moving > MOVING_AT_MOST:
        yield Fault("loads", f"holds {moving} moving loads; at most {MOVING_AT_MOST} are read.")


def _load(parts: Parts, path: str, load: Load) -> Iterator[Fault]:
    if isinstance(load, (PointLoad, CoupleLoad)):
        yield from _outside(parts, f"{path}.at", load.at)
    if isinstance(load, (LineLoad, AreaLoad, MovingLoad)):
        yield from _run(parts, path, load.from_, load.to)
    if isinstance(load, MovingLoad):
        yield from _axles(parts, path, load)
    if parts.held_sideways and isinstance(load, (PointLoad, LineLoad)) and load.lateral != 0:
        yield Fault(
            f"{path}.lateral",
            "the member is held sideways, so a lateral load would be left out; make member.held_sideways false, or "
            "leave lateral out.",
        )


def _axles(parts: Parts, path: str, load: MovingLoad) -> Iterator[Fault]:
    if all(force == 0 for _, force in load.axles):
        yield Fault(f"{path}.axles", "every axle weighs nothing; enter the forces, such as [[0, 5000], [1200, 5000]].")
    if load.to is None and load.from_ is not None and load.from_ == parts.length:
        yield Fault(f"{path}.from", "the axles would carry from the member's end on; enter a smaller place.")
    if load.from_ is None and load.to == 0:
        yield Fault(f"{path}.to", "the axles would carry up to the member's beginning; enter a larger place.")


def _weightless(parts: Parts) -> Iterator[Fault]:
    """Self-weight needs the density of every piece's material."""
    weightless: dict[str, list[str]] = {}
    for name, piece in (parts.pieces or {}).items():
        material = parts.material(piece.material) if piece is not None else None
        if piece is not None and material is not None and material.density is None:
            weightless.setdefault(piece.material, []).append(name)
    for name, pieces in weightless.items():
        of = ", ".join(f"'{piece}'" for piece in pieces[:5]) + (", ..." if len(pieces) > 5 else "")
        yield Fault(
            f"materials.{name}.density",
            f"missing, and the self-weight of {of} needs it; enter a density such as 420 kg/m3, or take the load "
            "'self-weight' out.",
        )


def _combinations(parts: Parts) -> Iterator[Fault]:
    for name, combination in parts.combinations.items():
        if combination is not None:
            yield from _combination(parts, f"combinations.{name}", combination)


def _combination(parts: Parts, path: str, combination: Combination) -> Iterator[Fault]:
    for case in combination.factors:
        if parts.loads is not None and case not in parts.loads:
            yield Fault(f"{path}.factors.{case}", unknown(case, "load case", parts.loads))
    for case in combination.sustained:
        if case not in combination.factors:
            yield Fault(
                f"{path}.sustained.{case}",
                f"'{case}' is not in this combination's factors, so it has no part that stays; add it to 'factors', or "
                "take it out here.",
            )


def _service(parts: Parts) -> Iterator[Fault]:
    if parts.service is None:
        return
    temperature = parts.service.temperature
    if temperature is not None and temperature[0] > temperature[1]:
        yield Fault("service.temperature", "the first temperature is above the second; enter [lowest, highest].")
    for name in parts.service.moisture_change:
        if parts.materials is not None and name not in parts.materials:
            yield Fault(f"service.moisture_change.{name}", unknown(name, "material", parts.materials))


def _bearing(parts: Parts) -> Iterator[Fault]:
    for index, name in enumerate(parts.bears_on):
        if parts.pieces is not None and name not in parts.pieces:
            yield Fault(f"member.bears_on[{index}]", unknown(name, "piece", parts.pieces))


def _basis(parts: Parts) -> Iterator[Fault]:
    """A factor for every kind of strength the check divides: by name, and no name that is not there."""
    basis = parts.basis
    if basis is None:
        return
    path = f"basis.{basis.factor_field}"
    joints = [joint for joint in parts.joints if joint is not None]
    if any(joint.adhesive is not None for joint in joints) and basis.factor("adhesive") is None:
        yield _no_factor(path, "adhesive", "a joint is bonded")
    if any(joint.effective_role == "sole" for joint in joints) and basis.factor("fastener") is None:
        yield _no_factor(path, "fastener", "a joint is carried by fasteners")
    elif any(joint.effective_role == "fall-back" for joint in joints) and basis.fall_back() is None:
        yield _no_factor(path, "fastener", "a joint has fall-back fasteners (or give basis.fall_back_factor)")
    by_name = basis.factors_by_material
    for name in by_name or ():
        if parts.materials is not None and name not in parts.materials:
            yield Fault(f"{path}.material.{name}", unknown(name, "material", parts.materials))
    needed = [name for name in _judged_materials(parts) if basis.factor("material", name) is None]
    if needed and by_name is None:
        yield _no_factor(path, "material", f"pieces of '{needed[0]}' are judged")
    elif by_name is not None:
        for name in needed:
            yield _no_factor(f"{path}.material", name, "its pieces are judged")


def _no_factor(path: str, name: str, because: str) -> Fault:
    return Fault(f"{path}.{name}", f"missing, and {because}; enter the factor its strengths are divided by.")


def _judged_materials(parts: Parts) -> list[str]:
    """Materials whose strengths are divided: of pieces that give any, and of the surfaces of bonded joints."""
    bonded = {name for joint in parts.joints if joint is not None and joint.adhesive for name in joint.between}
    judged: dict[str, None] = {}
    for name, piece in (parts.pieces or {}).items():
        if piece is None:
            continue
        material = parts.material(piece.material)
        known = parts.materials is not None and piece.material in parts.materials
        if known and (name in bonded or (material is not None and material.strengths.any())):
            judged[piece.material] = None
    return list(judged)
