"""What is folded away, in words: each folded part of the check form says what it holds, defaults included."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from server import units
from server.web.form_fields import GROUPS, SINGLES

Raw = Mapping[str, Any]
_MOST = 4


def summaries(raw: Raw, slip: str = "auto") -> dict[str, str]:
    """Return one line for each folded part of the form."""
    section, member = raw.get("section") or {}, raw.get("member") or {}
    return {
        "basis": _basis(raw.get("basis") or {}),
        "pieces": _pieces(section.get("pieces") or {}),
        "joints": _joints(section.get("joints") or ()),
        "member": _member(member),
        "loads": _loads(raw.get("loads") or {}),
        "combinations": _combinations(raw.get("combinations") or {}),
        "materials": _values(raw.get("materials") or {}, "E", "no stiffness yet"),
        "adhesives": _values(
            raw.get("adhesives") or {}, "shear_strength", "no strength typed: you are told which to ask for"
        ),
        "fasteners": _values(raw.get("fasteners") or {}, "shear_resistance", "no resistance yet"),
        "analysis": _analysis(raw.get("analysis") or {}, slip),
        "service": _service(raw.get("service") or {}),
    }


def label_of(name: str, values: Mapping[str, str]) -> str:
    """Return the words for a box: 'Piece web L: width'."""
    if name in SINGLES:
        return SINGLES[name].label
    group_name, _, rest = name.partition("[")
    index, _, box_name = rest.partition("].")
    group = GROUPS.get(group_name)
    if group is None or not box_name:
        return name
    called = values.get(f"{group_name}[{index}].name") or (f"{int(index) + 1}" if index.isdecimal() else index)
    label = next((box.label for box in group.boxes if box.name == box_name), box_name)
    return f"{group.one.capitalize()} {called}: {label[:1].lower() + label[1:] if label[1:2].islower() else label}"


def _basis(basis: Raw) -> str:
    limit_state = basis.get("method") == "limit-state"
    word = "partial" if limit_state else "safety"
    factors = basis.get(f"{word}_factor") or {}
    by_number: dict[str, list[str]] = {}
    for kind, noun in (("adhesive", "adhesive"), ("fastener", "fasteners"), ("material", "material")):
        factor = factors.get(kind)
        text = (
            ", ".join(f"{n} {f}" for n, f in factor.items()) if isinstance(factor, Mapping) else str(factor or "none")
        )
        by_number.setdefault(text, []).append(noun)
    said = ", ".join(f"{number} on {' and '.join(nouns)}" for number, nouns in by_number.items())
    return f"{'limit state' if limit_state else 'allowable stress'}, {word} factor {said}"


def _pieces(pieces: Raw) -> str:
    def one(name: str, piece: Raw) -> str:
        if piece.get("profile"):
            return f"{name} {piece['profile']}"
        sizes = [str(piece[key]) for key in ("width", "depth") if piece.get(key)] or [str(piece.get("diameter", ""))]
        return f"{name} {_times(sizes)}".strip()

    return _some([one(name, piece) for name, piece in pieces.items()]) or "none yet"


def _times(sizes: Sequence[str]) -> str:
    """Return '90 × 70 mm' for '90 mm' and '70 mm'."""
    units = {size.rpartition(" ")[2] for size in sizes if " " in size}
    if len(sizes) == 2 and len(units) == 1:
        return f"{sizes[0].rpartition(' ')[0]} × {sizes[1]}"
    return " × ".join(sizes)


def _joints(joints: Sequence[Raw]) -> str:
    if not joints:
        return "none yet"
    means = [
        " with ".join(text for text in (joint.get("adhesive") or "", joint.get("fastener") or "") if text)
        or "nothing yet"
        for joint in joints
    ]
    count = f"{len(joints)} joint{'s' if len(joints) > 1 else ''}"
    if len(set(means)) == 1:
        return f"{count}, {'each ' if len(joints) > 1 else ''}held by {means[0]}"
    return f"{count}: " + _some(
        [f"{'/'.join(j.get('between', ()))} by {m}" for j, m in zip(joints, means, strict=True)]
    )


def _member(member: Raw) -> str:
    supports: list[Raw] = list(member.get("supports") or ())
    ends = [support.get("at") for support in supports]
    if len(ends) == 2 and ends[1] == member.get("length") and all(each.get("kind") == "pin" for each in supports):
        held = "simple supports at both ends"
    elif supports:
        held = f"{len(supports)} support{'s' if len(supports) > 1 else ''}: " + _some(
            [f"{support.get('kind')} at {support.get('at')}" for support in supports]
        )
    else:
        held = "simple supports at both ends of the span"
    sideways = "held sideways" if member.get("held_sideways", True) else "held sideways at its supports only"
    hinges = f", {len(member['hinges'])} hinges" if member.get("hinges") else ""
    limit = member.get("deflection_limit")
    return f"{sideways}, {held}{hinges}; " + (f"deflection limit span/{limit}" if limit else "no deflection limit")


def _loads(loads: Raw) -> str:
    count = sum(len(entries) for entries in loads.values())
    if not count:
        return "none yet"
    return f"{count} load{'s' if count > 1 else ''} in {_cases(loads)}"


def _cases(loads: Raw) -> str:
    return ("cases " if len(loads) > 1 else "case ") + _some(list(loads))


def _combinations(combinations: Raw) -> str:
    def one(name: str, entry: Raw) -> str:
        factors = entry.get("factors") or {}
        plain = all(factor in (1, 1.0, "1", "1.0") for factor in factors.values())
        said = "every case × 1.0" if plain else ", ".join(f"{case} {factor}" for case, factor in factors.items())
        judges = f", for {entry['for']}" if entry.get("for") else ""
        return f"{name}: {said}, duration {entry.get('duration') or 'not stated'}{judges}"

    return _some([one(*item) for item in combinations.items()], "; ") or "all: every case × 1.0, duration not stated"


def _values(entries: Raw, main: str, without: str) -> str:
    def one(name: str, entry: Raw) -> str:
        if entry.get("record"):
            revision = f" revision {entry['revision']}" if entry.get("revision") else ", newest approved"
            return f"{name} from record {entry['record']}{revision}"
        return f"{name} {entry[main]}" if entry.get(main) else f"{name}: {without}"

    return _some([one(*item) for item in entries.items()], "; ") or "none"


def _analysis(analysis: Raw, slip: str) -> str:
    slips = "joints slip" if analysis.get("slip") else "joints rigid"
    if slip == "auto" and analysis.get("slip"):
        slips += " (fasteners alone carry one)"
    shear = "counted" if analysis.get("shear_deformation", True) else "left out"
    rules = f"; rules {', '.join(analysis['rules'])}" if analysis.get("rules") else ""
    return f"{slips}; shear deformation {shear}; field method {analysis.get('field', 'auto')}{rules}"


def _service(service: Raw) -> str:
    if not service:
        return "not stated, which the sheet says"
    said = []
    if service.get("temperature"):
        said.append(" to ".join(str(end) for end in service["temperature"]))
    if service.get("cure_temperature"):
        said.append(f"cured at {service['cure_temperature']}")
    if service.get("moisture_change"):
        said.append("moisture change " + ", ".join(f"{n} {c}" for n, c in service["moisture_change"].items()))
    return units.degrees("; ".join(said))


def _some(parts: Sequence[str], between: str = ", ") -> str:
    """Join the first few and say how many more there are."""
    said = between.join(parts[:_MOST])
    return f"{said} and {len(parts) - _MOST} more" if len(parts) > _MOST else said
