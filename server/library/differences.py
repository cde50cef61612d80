"""Tested as / used as: where a check uses a value otherwise than it was tested."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
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
    record_of,
    service_range,
    typed_here,
)
from server.library.part_differences import of_parts
from server.library.record import Link, Record
from server.library.tested_as import Description, Surface, described, materials_of, pairs, tests_behind
from server.storage import Session

THICKNESS_WITHIN = 0.25  # of the tested bond line; common practice


def differences(session: Session, document: Mapping[str, Any], values_used: ValuesUsed) -> list[Difference]:
    """Return every difference between the tests behind a check's values and what the check makes of them."""
    if document.get("kind") == "glue-up":  # it names the adhesive that is spread and rests on no strength of it
        return []
    found: list[Difference] = []
    for name, entry in values_used.get("adhesives", {}).items():
        found += _of_an_adhesive(session, document, values_used, name, entry)
    for section in ("fasteners", "materials"):
        typed = [name for name, entry in values_used.get(section, {}).items() if entry.get("record") is None]
        if typed:
            found.append(typed_here(f"{section if len(typed) > 1 else section[:-1]} {', '.join(typed)}"))
    found += of_parts(session, document, values_used)
    return list({each.key: each for each in found}.values())


def _of_an_adhesive(
    session: Session,
    document: Mapping[str, Any],
    values_used: ValuesUsed,
    name: str,
    entry: Mapping[str, Any],
) -> Iterator[Difference]:
    if entry.get("record") is None:
        yield typed_here(f"adhesive {name}")
        return
    bond = record_of(session, Link(str(entry["record"]), int(entry["revision"])))
    if bond is None:
        return
    used = replace(
        described(bond), what=f"adhesive {name}", thickness=entry.get("thickness"), temperatures=service_range(document)
    )
    tests: list[tuple[Description, Record | None]] = list(tests_behind(session, bond))
    if not tests:
        yield difference_of(
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


def _compared(
    session: Session,
    document: Mapping[str, Any],
    values_used: ValuesUsed,
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
        parts = [material_of(session, values_used, each) for each in materials]
        found, turned = compared_adherends(tested, parts, f"adhesive {name} in {', '.join(places)}")
        yield from found
    where = f"adhesive {name}"
    yield from compared_words(
        where, "product", (tested.product, tested.product_key), (used.product, used.product_key), tested
    )
    yield from _preparations(where, tested, used, turned)
    yield from compared_words(where, "cure", (tested.cure, tested.cure_key), (used.cure, used.cure_key), tested)
    yield from compared_words(where, "exposure", (tested.exposure, ""), (used.exposure, ""), tested)
    yield from _thickness(where, tested, used)
    yield from compared_temperature(where, tested, used, value)
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
        yield difference_of(
            "not recorded",
            where,
            f"{tested.what}: {', '.join(lacking)} not recorded",
            "as in this check",
            f"{tested.what} does not record {', '.join(lacking)}. Why does its value hold for this use?",
        )


def _preparations(where: str, tested: Description, used: Description, turned: bool) -> Iterator[Difference]:
    best: list[Difference] | None = None
    for surfaces in pairs(used.surfaces):
        found: list[Difference] = []
        for side, other in zip(tested.surfaces, surfaces, strict=True):
            found += compared_words(where, f"preparation of {_side(side)}", _prep(side), _prep(other), tested)
        if best is None or len(found) < len(best):
            best = found
    yield from best or ()


def _prep(side: Surface) -> tuple[str, str]:
    return side.preparation, side.preparation_key


def _side(side: Surface) -> str:
    return side.adherend or side.adherend_key or "the surface"


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
    yield difference_of("bond-line thickness", where, shown, told, text)
