"""Tested as / used as, for fasteners and materials: what their records hold, against what a check makes of them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any

from server import units
from server.library.differing import (
    NOT_SAID,
    Difference,
    ValuesUsed,
    compared_adherends,
    compared_temperature,
    compared_words,
    difference_of,
    material_of,
    named_thing,
    record_of,
    service_range,
)
from server.library.record import Link, Record
from server.library.tested_as import Description, Surface, fastened, number, same, tests_behind
from server.storage import Session

SIDE_WITHIN = 0.1  # of the side member's thickness that a fastener's strength was found with; common practice


@dataclass(frozen=True)
class Check:
    """What a check says that every part of it is compared with."""

    session: Session
    document: Mapping[str, Any]
    values_used: ValuesUsed

    @property
    def exposure(self) -> str:
        """Where the member stands, in the words of the bonds it uses; '' where none says so."""
        said = [
            bond.details.get("exposure", "")
            for entry in self.values_used.get("adhesives", {}).values()
            if entry.get("record") is not None
            and (bond := record_of(self.session, Link(str(entry["record"]), int(entry["revision"])))) is not None
        ]
        return "; ".join(dict.fromkeys(each for each in said if each))


def of_parts(session: Session, document: Mapping[str, Any], values_used: ValuesUsed) -> Iterator[Difference]:
    """Return every difference of the fasteners and materials that a check takes from the library."""
    check = Check(session, document, values_used)
    for section, compare in (("fasteners", _of_a_fastener), ("materials", _of_a_material)):
        for name, entry in values_used.get(section, {}).items():
            key = entry.get("record")
            record = None if key is None else record_of(session, Link(str(key), int(entry["revision"])))
            if record is not None:
                yield from compare(check, name, record)


def _of_a_fastener(check: Check, name: str, record: Record) -> Iterator[Difference]:
    """By its tests where it pins values, else by what the record itself says it holds for."""
    where = f"fastener {name}"
    tests = list(tests_behind(check.session, record))
    for tested, value in tests:
        yield from _parts_joined(check, name, tested)
        product = (record.details.get("product", "") or record.name, "")
        yield from compared_words(where, "product", (tested.product, ""), product, tested)
        yield from _conditions(check, where, tested, value)
    side, main = (record.details.get(each, "") for each in ("side_member", "main_member"))
    own = Description(what=str(record.itself), surfaces=(Surface(side), Surface(main)))
    if not tests:
        if not (side and main):
            told = "side and main member" if not (side or main) else "main member" if side else "side member"
            yield difference_of(
                "parts joined",
                where,
                f"{told} not recorded",
                " and ".join(dict.fromkeys(named_thing(each) for each in _materials(check, name))) or NOT_SAID,
                f"{record.itself} ({record.name}) does not record the {told} that its strength was found with. What "
                "shows that it holds for these parts?",
            )
        yield from _parts_joined(check, name, own)
        yield from compared_words(
            where, "exposure", (record.details.get("exposure", ""), ""), (check.exposure, ""), own
        )
    yield from _side_thickness(check, name, record)


def _of_a_material(check: Check, name: str, record: Record) -> Iterator[Difference]:
    where = f"material {name}"
    for tested, value in tests_behind(check.session, record):
        of = [side for side in tested.surfaces if side.adherend or side.adherend_key]
        itself = (f"{record.name} {record.details.get('product', '')}".strip(), record.key)
        if of and not any(same((side.adherend, side.adherend_key), itself) for side in of):
            coupon = named_thing((of[0].adherend, of[0].adherend_key))
            text = (
                f"Coupons of {coupon} ({tested.what}), used as {record.name} ({record.key}). Why does the value hold?"
            )
            yield difference_of("material", where, coupon, f"{record.name} ({record.key})", text)
        yield from _conditions(check, where, tested, value)


def _conditions(check: Check, where: str, tested: Description, value: Record) -> Iterator[Difference]:
    """Exposure, temperature and what else a value says it holds in."""
    yield from compared_words(where, "exposure", (tested.exposure, ""), (check.exposure, ""), tested)
    told = value.details.get("conditions", "")
    yield from compared_words(
        where, "conditions", (told, ""), (check.exposure, ""), replace(tested, what=str(value.itself))
    )
    used = Description(what=where, temperatures=service_range(check.document))
    yield from compared_temperature(where, tested, used, value)


def _materials(check: Check, name: str) -> list[tuple[str, str]]:
    found = [each for place in fastened(check.document) if place.fastener == name for each in place.materials]
    return [_part(check, each) for each in dict.fromkeys(found)]


def _part(check: Check, material: str) -> tuple[str, str]:
    """A material of the check with its kind: a strength found "in timber" holds in spruce that is timber."""
    text, key = material_of(check.session, check.values_used, material)
    kind = str(check.values_used.get("materials", {}).get(material, {}).get("kind") or "")
    return (f"{text}, {kind}" if kind else text), key


def _parts_joined(check: Check, name: str, tested: Description) -> Iterator[Difference]:
    by_materials: dict[tuple[str, ...], list[str]] = {}
    for place in fastened(check.document):
        if place.fastener == name:
            by_materials.setdefault(place.materials, []).append(place.place)
    for materials, places in by_materials.items():
        parts = [_part(check, each) for each in materials]
        found, _ = compared_adherends(tested, parts, f"fastener {name} in {', '.join(places)}", about="part joined")
        yield from found


def _side_thickness(check: Check, name: str, record: Record) -> Iterator[Difference]:
    """A thinner or thicker side member than the fastener's strength was found with."""
    tested = number(record.details.get("side_thickness") or None, "length")
    if tested is None:
        return
    for place in fastened(check.document):
        if place.fastener != name or place.thinner is None:
            continue
        if abs(place.thinner - tested) > SIDE_WITHIN * tested:
            shown, used = units.show(tested, "length"), units.show(place.thinner, "length")
            text = (
                f"The side member: {shown} thick where the strength was found ({record.itself}), {used} in "
                f"{place.place}. Why does the value hold?"
            )
            yield difference_of("side member's thickness", f"fastener {name} in {place.place}", shown, used, text)
