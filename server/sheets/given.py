"""Given values for people: what was typed, and beside it the value the check used.

Rows are made from the document exactly as typed; what a library record supplied comes from ``values_used`` of the
result, so nothing is looked up and nothing is reckoned here but the conversion of units.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server import units
from server.errors import InputError
from server.sheets.values import unit

Typed = Mapping[str, Any]
METHODS = {"allowable": "allowable stress", "limit-state": "limit-state design"}


@dataclass(frozen=True)
class Row:
    """One given value: its name, what was typed, and the value used where it is a quantity."""

    label: str
    typed: str
    converted: str


@dataclass(frozen=True)
class Group:
    """Given values of one subject; ``about`` says where they come from (record, revision, status, source)."""

    title: str
    rows: tuple[Row, ...]
    about: str = ""
    values: bool = False
    """Whether these are the values of a material, an adhesive or a fastener."""


_MATERIAL = {
    "E": ("Modulus E", "stress"),
    "G": ("Shear modulus G", "stress"),
    "G_rolling": ("Shear modulus through the thickness", "stress"),
    "nu": ("Poisson's ratio", "factor"),
    "density": ("Density", "density"),
    "expansion": ("Expansion with temperature", "expansion"),
    "moisture_expansion": ("Strain for 1 % of moisture", "factor"),
    "yield": ("Yield strength", "stress"),
    "creep": ("Creep factor", "factor"),
    "layered": ("Layered", ""),
    "kind": ("Kind", ""),
}
_ADHESIVE = {
    "shear_strength": ("Shear strength", "stress"),
    "peel_strength": ("Tension strength across the bond", "stress"),
    "shear_modulus": ("Shear modulus", "stress"),
    "E": ("Modulus E", "stress"),
    "thickness": ("Bond-line thickness", "length"),
    "shear_yield": ("Shear yield", "stress"),
    "shear_strain_limit": ("Shear strain limit", "factor"),
    "glass_transition": ("Softens at", "temperature"),
    "creep_limit": ("Creep limit", "factor"),
    "hybrid_shear_strength": ("Shear strength with fasteners", "stress"),
    "hybrid_fastener": ("Tested with", ""),
    "hybrid_spacing": ("at a spacing of", "length"),
    "hybrid_rows": ("Rows when tested", ""),
    "kind": ("Kind", ""),
}
_FASTENER = {
    "shear_resistance": ("Shear resistance, each", "force"),
    "slip_modulus": ("Slip modulus", "stiffness"),
    "diameter": ("Diameter", "length"),
    "spacing_min": ("Least spacing", "length"),
    "spacing_max": ("Greatest spacing", "length"),
    "creep": ("Creep factor", "factor"),
    "kind": ("Kind", ""),
}
_PLURALS = {
    "materials": ("Material", _MATERIAL),
    "adhesives": ("Adhesive", _ADHESIVE),
    "fasteners": ("Fastener", _FASTENER),
}
_SHAPE_SIZES = (
    ("diameter", "diameter"),
    ("wall", "wall"),
    ("web", "web"),
    ("flange", "flange"),
    ("corner radius", "corner_radius"),
    ("chamfer", "chamfer"),
    ("root radius", "root_radius"),
    ("toe radius", "toe_radius"),
)
_GROUPS = ("materials", "adhesives", "fasteners")


def given(raw: Typed, values_used: Typed, display: str = "SI") -> tuple[Group, ...]:
    """Every given value of a member's document, grouped in the order of the sheet."""
    writer = _Writer(display)
    groups = [
        Group("Basis", tuple(writer.basis(raw.get("basis", {})))),
        Group("Member", tuple(writer.member(raw.get("member", {})))),
        Group("Loads", tuple(writer.loads(raw.get("loads", {})))),
        Group("Combinations", tuple(writer.combinations(raw.get("combinations") or {}))),
        Group("Section pieces", tuple(writer.pieces(_in(raw, "section").get("pieces", {})))),
        Group("Joints", tuple(writer.joints(_in(raw, "section").get("joints", ())))),
        Group("Analysis and service", tuple(writer.analysis(_in(raw, "analysis"), _in(raw, "service")))),
    ]
    for plural in _GROUPS:
        groups += writer.values(plural, _in(raw, plural), _in(values_used, plural))
    return tuple(group for group in groups if group.rows or group.about)


def _in(mapping: Typed, key: str) -> Typed:
    found = mapping.get(key)
    return found if isinstance(found, Mapping) else {}


class _Writer:
    """Writes rows in one display; every method takes a part of the document as typed."""

    def __init__(self, display: str) -> None:
        self.display = display

    # --- one value ---

    def used(self, value: object, kind: str) -> str:
        """The value the check used, in the unit of the display; '' for words and plain factors."""
        return used_text(value, kind, self.display)

    def row(self, label: str, value: object, kind: str) -> Row:
        """One row for one value."""
        return Row(label, typed_text(value), self.used(value, kind))

    def line(self, label: str, parts: Iterable[tuple[str, object, str]]) -> Row:
        """One row for several values: (words before, value, kind); words without a kind are not repeated as used."""
        typed, used = "", ""
        for words, value, kind in parts:
            own = self.used(value, kind)
            typed = _joined(typed, words, typed_text(value))
            if own or (used and words and not value and not kind):
                used = _joined(used, words, own)
        return Row(label, typed, used.strip(" ;,"))

    # --- the parts of a member's document ---

    def basis(self, basis: Typed) -> Iterable[Row]:
        if "method" in basis:
            yield Row("Method", METHODS.get(str(basis["method"]), typed_text(basis["method"])), "")
        names = {"safety_factor": "Safety factor", "partial_factor": "Partial factor"}
        for field, name in names.items():
            if field in basis:
                yield from self._factors(name, basis[field])
        if "fall_back_factor" in basis:
            yield Row("Factor with the glue gone", typed_text(basis["fall_back_factor"]), "")

    def _factors(self, name: str, value: object) -> Iterable[Row]:
        if isinstance(value, Mapping):
            for each, inner in value.items():
                yield from self._factors(f"{name}, {each}", inner)
        else:
            yield Row(name, typed_text(value), "")

    def member(self, member: Typed) -> Iterable[Row]:
        if not member:
            return
        yield self.row("Length", member.get("length"), "length")
        for number, support in enumerate(member.get("supports", ()), 1):
            parts = [("", support.get("kind"), ""), ("at", support.get("at"), "length")]
            if support.get("stiffness") is not None:
                parts.append((", stiffness", support["stiffness"], "stiffness"))
            yield self.line(f"Support {number}", parts)
        for number, at in enumerate(member.get("hinges", ()), 1):
            yield self.row(f"Hinge {number}", at, "length")
        held = member.get("held_sideways", True)
        yield Row("Held sideways", "yes" if held is True else "no" if held is False else typed_text(held), "")
        if member.get("bears_on"):
            yield Row("Supports and loads bear on", ", ".join(map(str, member["bears_on"])), "")
        if member.get("deflection_limit") is not None:
            limit = typed_text(member["deflection_limit"])
            yield Row("Deflection limit", limit if "/" in limit else f"span / {limit}", "")

    def loads(self, loads: Typed) -> Iterable[Row]:
        for case, listed in loads.items():
            for number, load in enumerate(listed, 1):
                label = f"{case} {number}" if len(listed) > 1 else case
                yield self.line(label, self._load(load))

    def _load(self, load: Typed) -> Iterable[tuple[str, object, str]]:
        kind = load.get("kind", "")
        of = {"point": "force", "line": "line_load", "area": "area_load", "couple": "couple"}.get(kind, "")
        yield "", "moving axles" if kind == "moving" else kind, ""
        for number, axle in enumerate(load.get("axles") or ()):
            if isinstance(axle, Sequence) and not isinstance(axle, str) and len(axle) == 2:
                yield "," if number else "", "", ""
                yield "", axle[1], "force"
                yield "at", axle[0], "length"
        value = load.get("value")
        if isinstance(value, Sequence) and not isinstance(value, str):
            for words, each in zip(("", "to"), value, strict=False):
                yield words, each, of
        elif value is not None:
            yield "", value, of
        for words, field, of_field in (
            ("on a width of", "width", "length"),
            ("at", "at", "length"),
            ("from", "from", "length"),
            ("to", "to", "length"),
            ("sideways", "lateral", of),
            ("off centre by", "offset", "length"),
        ):
            if field in load:
                yield words, load[field], of_field

    def combinations(self, combinations: Typed) -> Iterable[Row]:
        for name, each in combinations.items():
            factors = " + ".join(f"{typed_text(factor)} × {case}" for case, factor in each.get("factors", {}).items())
            words = [factors]
            if each.get("duration"):
                words.append(f"duration {each['duration']}")
            if each.get("for", "both") != "both":
                words.append(f"for {each['for']} only")
            if each.get("sustained"):
                shares = ", ".join(f"{typed_text(share)} of {case}" for case, share in each["sustained"].items())
                words.append(f"sustained {shares}")
            yield Row(name, "; ".join(words), "")

    def pieces(self, pieces: Typed) -> Iterable[Row]:
        for name, piece in pieces.items():
            yield self.line(name, self._piece(piece))

    def _piece(self, piece: Typed) -> Iterable[tuple[str, object, str]]:
        if piece.get("shape", "rectangle") != "rectangle":
            yield "", piece["shape"], ""
        if piece.get("profile"):
            yield "", piece["profile"], ""
        if piece.get("width") is not None:
            yield "", piece["width"], "length"
            yield "×", piece.get("depth"), "length"
        for words, field in _SHAPE_SIZES:
            if piece.get(field) is not None:
                yield words, piece[field], "length"
        yield from self._corners("corners", piece.get("points"))
        for hole in piece.get("holes") or ():
            yield from self._corners("; hole", hole)
        at = piece.get("at")
        if isinstance(at, Sequence) and not isinstance(at, str) and len(at) == 2:
            yield "at", at[0], "length"
            yield "across,", at[1], "length"
            yield "up", "", ""
        yield ";", piece.get("material"), ""
        if "turn" in piece:
            yield "; turned", piece["turn"], "angle"
        if piece.get("grain", "along") != "along":
            yield "; grain", piece["grain"], ""
        if piece.get("from") is not None:
            yield "; from", piece["from"], "length"
        if piece.get("to") is not None:
            yield "; to", piece["to"], "length"

    def _corners(self, word: str, points: object) -> Iterable[tuple[str, object, str]]:
        """The corners of a ring: 'corners 0, 0; 50, 0; 50, 30'."""
        for number, point in enumerate(points if isinstance(points, list | tuple) else ()):
            if isinstance(point, list | tuple) and len(point) == 2:
                yield word if number == 0 else ";", point[0], "length"
                yield ",", point[1], "length"

    def joints(self, joints: Iterable[Typed]) -> Iterable[Row]:
        for joint in joints:
            segment = joint.get("segment", 1)
            label = "/".join(str(each) for each in joint.get("between", ()))
            yield self.line(label + (f"#{segment}" if segment not in (1, "1") else ""), self._joint(joint))

    def _joint(self, joint: Typed) -> Iterable[tuple[str, object, str]]:
        if joint.get("adhesive"):
            yield "", joint["adhesive"], ""
            if joint.get("width") is not None:
                yield "on a width of", joint["width"], "length"
            yield ", coverage", joint.get("coverage", 1), ""
        if joint.get("fastener"):
            yield ";" if joint.get("adhesive") else "", joint["fastener"], ""
            spacing = joint.get("spacing")
            if isinstance(spacing, Sequence) and not isinstance(spacing, str):
                for number, zone in enumerate(spacing):
                    yield "," if number else "", "", ""
                    yield "at", zone.get("spacing"), "length"
                    yield "from", zone.get("from"), "length"
                    yield "to", zone.get("to"), "length"
            elif spacing is not None:
                yield "at", spacing, "length"
            rows = joint.get("rows", 1)
            yield ",", f"{typed_text(rows)} {'row' if rows in (1, '1') else 'rows'}", ""
            if joint.get("role"):
                yield ",", joint["role"], ""

    def analysis(self, analysis: Typed, service: Typed) -> Iterable[Row]:
        words = {"slip": "Slip of joints", "shear_deformation": "Shear deformation", "field": "Section field"}
        for field, name in words.items():
            if field in analysis:
                yield Row(name, typed_text(analysis[field]), "")
        if analysis.get("rules"):
            yield Row("Rules", ", ".join(analysis["rules"]), "")
        if isinstance(service.get("temperature"), Sequence) and len(service["temperature"]) == 2:
            low, high = service["temperature"]
            yield self.line("Service temperature", [("", low, "temperature"), ("to", high, "temperature")])
        if service.get("cure_temperature") is not None:
            yield self.row("Cured at", service["cure_temperature"], "temperature")
        for name, change in _in(service, "moisture_change").items():
            yield self.row(f"Moisture change, {name}", change, "moisture")

    # --- materials, adhesives, fasteners ---

    def values(self, plural: str, typed: Typed, used: Typed) -> Iterable[Group]:
        word, fields = _PLURALS[plural]
        for name in [*used, *(each for each in typed if each not in used)]:
            own, full = _in(typed, name), _in(used, name)
            if "record" in own or not own:
                # Nothing was typed: the record's values are all there is to show.
                rows = tuple(Row(row.label, "", row.converted or row.typed) for row in self._entry(full, fields))
            else:
                rows = tuple(self._entry(own, fields))
            unused = "" if name in used else "not used by the section"
            yield Group(
                f"{word} {name}", rows, "; ".join(each for each in (provenance(full or own), unused) if each), True
            )

    def _entry(self, entry: Typed, fields: Mapping[str, tuple[str, str]]) -> Iterable[Row]:
        for field, (name, kind) in fields.items():
            value = entry.get(field)
            if value is not None and value not in (False, ""):
                yield self.row(name, value, kind)
        for what, value in _in(entry, "strengths").items():
            if value is not None:
                words = "tension across" if what == "tension_across" else what.replace("_", " ")
                yield self.row(f"Strength, {words}", value, "stress")
        for what, title in (("duration_factors", "Duration factor"), ("factors", "Factor")):
            for name, value in _in(entry, what).items():
                yield Row(f"{title}, {name}", typed_text(value), "")


def provenance(entry: Typed) -> str:
    """Where values come from, in one line: record and revision, status, source."""
    words = []
    if entry.get("record"):
        revision = f", revision {entry['revision']}" if entry.get("revision") is not None else ""
        words.append(f"record {entry['record']}{revision}")
    words.append(
        f"status {entry['status']}" if entry.get("status") else "" if entry.get("record") else "typed for this check"
    )
    for field in ("source", "note"):
        if entry.get(field):
            words.append(str(entry[field]))
    return "; ".join(word for word in words if word)


def used_text(value: object, kind: str, display: str) -> str:
    """A quantity as the check used it, in the unit of the display; '' for words and plain factors."""
    if kind in ("", "factor") or isinstance(value, bool) or not isinstance(value, str | int | float):
        return ""
    try:
        number = units.parse("", value, kind)
    except InputError:
        return ""
    return unit(units.KINDS[kind].unit, display).full(number, 6)


def typed_text(value: object) -> str:
    """A value as it was typed, read by people: plain numbers without needless digits, degrees with their sign."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.12g}"
    return units.degrees(str(value))


def _joined(line: str, words: str, value: str) -> str:
    """Words and value put behind a line; no space before a comma or a semicolon."""
    for each in (words, value):
        if each:
            line += each if not line or each[0] in ",;" else f" {each}"
    return line
