"""Tested as / used as: where a check uses a value otherwise than it was tested."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from server import units
from server.errors import JointError
from server.library import reading
from server.library.questions import BELOW_GLASS_TRANSITION, question_key
from server.library.record import Link, Record
from server.library.tested_as import Description, Surface, described, materials_of, number, pairs, same
from server.storage import Session

THICKNESS_WITHIN = 0.25  # of the tested bond line; common practice
TEMPERATURE_WITHIN = 10.0  # K beyond the temperatures tested at; common practice
NOT_SAID = "not stated"


@dataclass(frozen=True)
class Difference:
    """One difference between how a value was tested and how a check uses it; it wants a written answer.

    ``where`` names the adhesive, fastener or material and the joints; ``tested`` and ``used`` read side by side.
    """

    key: str
    about: str
    where: str
    tested: str
    used: str
    text: str


def differences(
    session: Session, document: Mapping[str, Any], values_used: Mapping[str, Mapping[str, Mapping[str, Any]]]
) -> list[Difference]:
    """Return every difference between the tests behind a check's values and what the check makes of them."""
    found: list[Difference] = []
    for name, entry in values_used.get("adhesives", {}).items():
        found += _of_an_adhesive(session, document, values_used, name, entry)
    for section in ("fasteners", "materials"):
        typed = [name for name, entry in values_used.get(section, {}).items() if entry.get("record") is None]
        if typed:
            found.append(_typed(f"{section if len(typed) > 1 else section[:-1]} {', '.join(typed)}"))
    return list({each.key: each for each in found}.values())


def _of_an_adhesive(
    session: Session,
    document: Mapping[str, Any],
    values_used: Mapping[str, Mapping[str, Mapping[str, Any]]],
    name: str,
    entry: Mapping[str, Any],
) -> Iterator[Difference]:
    if entry.get("record") is None:
        yield _typed(f"adhesive {name}")
        return
    bond = _record(session, Link(str(entry["record"]), int(entry["revision"])))
    if bond is None:
        return
    used = replace(
        described(bond), what=f"adhesive {name}", thickness=entry.get("thickness"), temperatures=_service(document)
    )
    tests = list(_tests(session, bond))
    if not tests:
        yield _difference(
            "tests",
            f"adhesive {name}",
            "nothing in the library shows how",
            str(bond.itself),
            f"{bond.itself} ({bond.name}) holds typed values; nothing in the library shows how they were tested. What "
            "shows that they hold for these parts?",
        )
        tests = [(described(bond), None)]
    for tested, value in tests:
        yield from _compared(session, document, values_used, name, tested, used, value)


def _tests(session: Session, bond: Record) -> Iterator[tuple[Description, Record | None]]:
    """What each pinned value was tested as, with the value; the same set once."""
    seen = set[str]()
    for link in bond.pins.values():
        value = _record(session, link)
        if value is None:
            continue
        behind = value.links.get("set")
        tested = _record(session, behind) if behind is not None else value
        if tested is not None and str(tested.itself) not in seen:
            seen.add(str(tested.itself))
            yield described(tested), value


def _compared(
    session: Session,
    document: Mapping[str, Any],
    values_used: Mapping[str, Mapping[str, Mapping[str, Any]]],
    name: str,
    tested: Description,
    used: Description,
    value: Record | None,
) -> Iterator[Difference]:
    lacking: list[str] = []
    by_materials: dict[tuple[str, ...], list[str]] = {}
    for adhesive, place, materials in materials_of(document):
        if adhesive == name:
            by_materials.setdefault(materials, []).append(place)
    turned = False
    for materials, places in by_materials.items():
        parts = [_material(session, values_used, each) for each in materials]
        found, turned = _adherends(tested, parts, f"adhesive {name} in {', '.join(places)}")
        yield from found
    where = f"adhesive {name}"
    yield from _words(where, "product", (tested.product, tested.product_key), (used.product, used.product_key), tested)
    yield from _preparations(where, tested, used, turned)
    yield from _words(where, "cure", (tested.cure, tested.cure_key), (used.cure, used.cure_key), tested)
    yield from _words(where, "exposure", (tested.exposure, ""), (used.exposure, ""), tested)
    yield from _thickness(where, tested, used)
    yield from _temperature(where, tested, used, value)
    for what, given in (
        ("adherends", all(side.adherend or side.adherend_key for side in tested.surfaces)),
        ("preparation", all(side.preparation or side.preparation_key for side in tested.surfaces)),
        ("cure", tested.cure or tested.cure_key),
        ("bond-line thickness", tested.thickness),
        ("temperature", tested.temperatures),
        ("exposure", tested.exposure),
    ):
        if not given:
            lacking.append(what)
    if lacking and value is not None:  # where nothing was tested, that is asked already
        yield _difference(
            "not recorded",
            where,
            f"{tested.what}: {', '.join(lacking)} not recorded",
            "as in this check",
            f"{tested.what} does not record {', '.join(lacking)}. Why does its value hold for this use?",
        )


def _adherends(tested: Description, parts: Sequence[tuple[str, str]], where: str) -> tuple[list[Difference], bool]:
    """Differences of the two adherends, in the order that fits better; whether that is the other way round."""
    best: list[Difference] = []
    turned = False
    for at, surfaces in enumerate(pairs(tested.surfaces)):
        found = [
            _difference(
                "adherend",
                where,
                side.adherend or side.adherend_key,
                _named(part),
                f"Tested on {side.adherend or side.adherend_key} ({tested.what}), used on {_named(part)}. Why does the "
                "value hold on it?",
            )
            for side, part in zip(surfaces, parts, strict=False)
            if (side.adherend or side.adherend_key) and not same((side.adherend, side.adherend_key), part)
        ]
        if at == 0 or len(found) < len(best):
            best, turned = found, at == 1
    return best, turned


def _preparations(where: str, tested: Description, used: Description, turned: bool) -> Iterator[Difference]:
    best: list[Difference] | None = None
    for surfaces in pairs(used.surfaces):
        found: list[Difference] = []
        for side, other in zip(tested.surfaces, surfaces, strict=True):
            found += _words(where, f"preparation of {_side(side)}", _prep(side), _prep(other), tested)
        if best is None or len(found) < len(best):
            best = found
    yield from best or ()


def _prep(side: Surface) -> tuple[str, str]:
    return side.preparation, side.preparation_key


def _side(side: Surface) -> str:
    return side.adherend or side.adherend_key or "the surface"


def _words(
    where: str, about: str, tested: tuple[str, str], used: tuple[str, str], by: Description
) -> Iterator[Difference]:
    """A difference in words; what the test does not record is said once, elsewhere."""
    if not any(tested) or same(tested, used):
        return
    told = _named(used) if any(used) else NOT_SAID
    text = f"The {about}: tested as {_named(tested)} ({by.what}), used as {told}. Why does the value hold?"
    yield _difference(about, where, _named(tested), told, text)


def _thickness(where: str, tested: Description, used: Description) -> Iterator[Difference]:
    if tested.thickness is None:
        return
    shown = units.show(tested.thickness, "length")
    if used.thickness is None:
        told = NOT_SAID
    elif abs(used.thickness - tested.thickness) <= THICKNESS_WITHIN * tested.thickness:
        return
    else:
        told = units.show(used.thickness, "length")
    text = f"The bond line: tested {shown} thick ({tested.what}), used {told}. Why does the value hold?"
    yield _difference("bond-line thickness", where, shown, told, text)


def _temperature(where: str, tested: Description, used: Description, value: Record | None) -> Iterator[Difference]:
    given, by = (value.values, tested.what) if value is not None else ({}, tested.what)
    allowed = given.get("service_temperature")
    if allowed is not None:
        span = tuple(units.parse("", each, "temperature") for each in allowed)
        low, high, shown = span[0], span[1], f"stated for {span[0]:g} to {span[1]:g} °C"
        by = str(value.itself) if value is not None else by
    elif tested.temperatures is not None:
        low, high = tested.temperatures[0] - TEMPERATURE_WITHIN, tested.temperatures[1] + TEMPERATURE_WITHIN
        first, last = tested.temperatures
        shown = f"tested at {first:g} °C" if first == last else f"tested at {first:g} to {last:g} °C"
    else:
        return
    told = NOT_SAID if used.temperatures is None else "{:g} to {:g} °C".format(*used.temperatures)
    if used.temperatures is None or used.temperatures[0] < low or used.temperatures[1] > high:
        text = f"Temperature: {shown} ({by}), used at {told}. Why does the value hold?"
        yield _difference("temperature", where, shown, told, text)
    softens = number(given.get("glass_transition"), "temperature")
    if softens is not None and used.temperatures and used.temperatures[1] > softens - BELOW_GLASS_TRANSITION:
        text = (
            f"The adhesive softens at {softens:g} °C and is used up to {used.temperatures[1]:g} °C; common practice "
            f"stays {BELOW_GLASS_TRANSITION:g} K below (CEN/TS 19101). Why may it be used so near?"
        )
        yield _difference("glass transition", where, f"softens at {softens:g} °C", told, text)


def _service(document: Mapping[str, Any]) -> tuple[float, float] | None:
    service = document.get("service")
    given = service.get("temperature") if isinstance(service, Mapping) else None
    if not isinstance(given, list | tuple) or len(given) != 2:
        return None
    low, high = (number(each, "temperature") for each in given)
    return None if low is None or high is None else (low, high)


def _material(
    session: Session, values_used: Mapping[str, Mapping[str, Mapping[str, Any]]], name: str
) -> tuple[str, str]:
    """A material of a check: how it is called, and the key of its record."""
    entry = values_used.get("materials", {}).get(name, {})
    key = str(entry.get("record") or "")
    record = _record(session, Link(key, int(entry["revision"]))) if key else None
    return (record.name if record is not None else name), key


def _named(thing: tuple[str, str]) -> str:
    text, key = thing
    return f"{text} ({key})" if text and key else text or key


def _typed(what: str) -> Difference:
    text = f"The values of {what} were typed into this check. What shows that they hold for these parts?"
    return _difference("typed values", what, "nothing in the library shows how", "typed in this check", text)


def _record(session: Session, link: Link) -> Record | None:
    try:
        return reading.get(session, link.key, link.revision)
    except JointError:
        return None


def _difference(about: str, where: str, tested: str, used: str, text: str) -> Difference:
    key = question_key("difference", about, where, tested, used)
    return Difference(key, about, where, tested, used, text)
