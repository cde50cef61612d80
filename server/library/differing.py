"""One difference between how a value was tested and how a check uses it, and how the things compared are worded."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server import units
from server.errors import JointError
from server.library import reading
from server.library.questions import BELOW_GLASS_TRANSITION, question_key
from server.library.record import Link, Record
from server.library.tested_as import Description, number, pairs, same
from server.storage import Session

TEMPERATURE_WITHIN = 10.0  # K beyond the temperatures tested at; common practice
NOT_SAID = "not stated"
ValuesUsed = Mapping[str, Mapping[str, Mapping[str, Any]]]


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


def compared_adherends(
    tested: Description, parts: Sequence[tuple[str, str]], where: str, about: str = "adherend"
) -> tuple[list[Difference], bool]:
    """Differences of the two adherends, in the order that fits better; whether that is the other way round."""
    best: list[Difference] = []
    turned = False
    for at, surfaces in enumerate(pairs(tested.surfaces)):
        found = [
            difference_of(
                about,
                where,
                side.adherend or side.adherend_key,
                named_thing(part),
                f"Tested on {side.adherend or side.adherend_key} ({tested.what}), used on {named_thing(part)}. Why "
                "does the value hold on it?",
            )
            for side, part in zip(surfaces, parts, strict=False)
            if (side.adherend or side.adherend_key) and not same((side.adherend, side.adherend_key), part)
        ]
        if at == 0 or len(found) < len(best):
            best, turned = found, at == 1
    return best, turned


def compared_words(
    where: str, about: str, tested: tuple[str, str], used: tuple[str, str], by: Description
) -> Iterator[Difference]:
    """A difference in words; what the test does not record is said once, elsewhere."""
    if not any(tested) or same(tested, used):
        return
    told = named_thing(used) if any(used) else NOT_SAID
    text = f"The {about}: tested as {named_thing(tested)} ({by.what}), used as {told}. Why does the value hold?"
    yield difference_of(about, where, named_thing(tested), told, text)


def compared_temperature(
    where: str, tested: Description, used: Description, value: Record | None
) -> Iterator[Difference]:
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
        yield difference_of("temperature", where, shown, told, text)
    softens = number(given.get("glass_transition"), "temperature")
    if softens is not None and used.temperatures and used.temperatures[1] > softens - BELOW_GLASS_TRANSITION:
        text = (
            f"The adhesive softens at {softens:g} °C and is used up to {used.temperatures[1]:g} °C; common practice "
            f"stays {BELOW_GLASS_TRANSITION:g} K below (CEN/TS 19101). Why may it be used so near?"
        )
        yield difference_of("glass transition", where, f"softens at {softens:g} °C", told, text)


def service_range(document: Mapping[str, Any]) -> tuple[float, float] | None:
    service = document.get("service")
    given = service.get("temperature") if isinstance(service, Mapping) else None
    if not isinstance(given, list | tuple) or len(given) != 2:
        return None
    low, high = (number(each, "temperature") for each in given)
    return None if low is None or high is None else (low, high)


def material_of(
    session: Session, values_used: Mapping[str, Mapping[str, Mapping[str, Any]]], name: str
) -> tuple[str, str]:
    """A material of a check: how it is called, and the key of its record."""
    entry = values_used.get("materials", {}).get(name, {})
    key = str(entry.get("record") or "")
    record = record_of(session, Link(key, int(entry["revision"]))) if key else None
    return (record.name if record is not None else name), key


def named_thing(thing: tuple[str, str]) -> str:
    text, key = thing
    return f"{text} ({key})" if text and key else text or key


def typed_here(what: str) -> Difference:
    text = f"The values of {what} were typed into this check. What shows that they hold for these parts?"
    return difference_of("typed values", what, "nothing in the library shows how", "typed in this check", text)


def record_of(session: Session, link: Link) -> Record | None:
    try:
        return reading.get(session, link.key, link.revision)
    except JointError:
        return None


def difference_of(about: str, where: str, tested: str, used: str, text: str) -> Difference:
    key = question_key("difference", about, where, tested, used)
    return Difference(key, about, where, tested, used, text)
