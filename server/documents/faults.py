"""pydantic's errors in plain words: the path as a person writes it, what was given, what is wanted."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from difflib import get_close_matches
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from server import units
from server.documents import fields
from server.documents.common import MARK, Reference
from server.documents.text import path_of
from server.errors import Fault

MOST = 200  # faults reported at once

Location = tuple[int | str, ...]


def faults_of(error: ValidationError, model: type[BaseModel], under: Location = ()) -> list[Fault]:
    """Every fault of ``error``, which validating ``model`` at the path ``under`` raised."""
    found = []
    for details in error.errors(include_url=False)[:MOST]:
        if details["type"] != "default_factory_not_called":
            found.append(_fault(details, model, under))
    return found


def nearest(name: object, known: Iterable[str]) -> str:
    """'; did you mean 'width'?' or the list of what there is."""
    choices = sorted(known)
    if isinstance(name, str):
        lowered = {choice.lower(): choice for choice in choices}
        close = get_close_matches(name[:100].lower(), list(lowered), n=1, cutoff=0.6)
        if close:
            return f"did you mean '{lowered[close[0]]}'?"
    if not choices:
        return "there are none."
    shown = ", ".join(f"'{choice}'" for choice in choices[:20])
    return f"known: {shown}{', ...' if len(choices) > 20 else ''}."


def _fault(details: ErrorDetails, model: type[BaseModel], under: Location) -> Fault:
    location = details["loc"]
    trail = [element for element in (*under, *location) if not (isinstance(element, str) and element.startswith(MARK))]
    if trail and trail[-1] == "[key]":
        trail.pop()
    word = _WORDS.get(details["type"], _other)
    message, more = word(details, model)
    return Fault(path_of([*trail, *more]), message[0].upper() + message[1:])


_Said = tuple[str, tuple[str, ...]]


def _missing(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    location = details["loc"]
    if isinstance(location[-1], int):
        return "a value is missing here; two are wanted.", ()
    if location == ("basis",):
        return (
            'the basis is missing; state what strengths are divided by, such as {"method": "allowable", '
            '"safety_factor": 3} or {"method": "limit-state", "partial_factor": 1.3}.',
            (),
        )
    wanted = fields.wanted(fields.locate(model, location))
    return (f"missing; enter {wanted}." if wanted else "missing; enter it."), ()


def _extra(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    *parent, name = details["loc"]
    known = [n for spot in fields.locate(model, parent) if spot.model is not None for n in fields.names(spot.model)]
    if any(spot.model is Reference for spot in fields.locate(model, parent)):
        return (
            f"{units.given(name)} stands beside a record; the record's own values are used, so give either the record "
            "or the values.",
            (),
        )
    return f"{units.given(name)} is not a name of the contract here; {nearest(name, known)}", ()


def _choice(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    context = details.get("ctx", {})
    field, known = context["field"], context["known"].split(", ")
    value = details["input"]
    if not isinstance(value, Mapping):
        return f"{units.given(value)} is not an object; enter an object with '{field}' and what belongs to it.", ()
    listed = ", ".join(f"'{choice}'" for choice in known)
    if field not in value:
        return f"missing; enter one of {listed}.", (field,)
    given = value[field]
    return f"{units.given(given)} is not accepted; {nearest(given, known)}", (field,)


def _literal(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    wanted = fields.wanted(fields.locate(model, details["loc"])) or details.get("ctx", {}).get("expected", "")
    return f"{units.given(details['input'])} is not accepted; enter {wanted}.", ()


def _type(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    value = details["input"]
    wanted = fields.wanted(fields.locate(model, details["loc"]))
    if details["type"] == "string_type" and not wanted:
        wanted = "a text"
    return f"{units.given(value)} is not accepted; enter {wanted or 'another value'}.", ()


def _size(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    context = details.get("ctx", {})
    actual = context.get("actual_length")
    entries = {1: "entry"}
    if details["type"] == "too_long":
        most = context["max_length"]
        held = f"{actual} entries" if actual is not None else "too many entries"
        return f"holds {held}; at most {most} are read.", ()
    least = context["min_length"]
    return f"holds {actual} entries; enter at least {least} {entries.get(least, 'entries')}.", ()


def _text_size(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    context = details.get("ctx", {})
    value = str(details["input"])
    if details["type"] == "string_too_long":
        return f"holds {len(value)} characters; at most {context['max_length']} are accepted.", ()
    return "nothing was entered; enter a text.", ()


def _value(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    message = str(details.get("ctx", {}).get("error", details["msg"]))
    if details["loc"] and details["loc"][-1] == "[key]":
        message = f"the name {units.given(details['input'])} is not accepted: {message}"
    return message, ()


def _other(details: ErrorDetails, model: type[BaseModel]) -> _Said:
    return f"{units.given(details['input'])} is not accepted: {details['msg'].lower()}.", ()


_WORDS: Mapping[str, Callable[[ErrorDetails, type[BaseModel]], _Said]] = {
    "missing": _missing,
    "extra_forbidden": _extra,
    "choice": _choice,
    "literal_error": _literal,
    "string_type": _type,
    "bool_type": _type,
    "list_type": _type,
    "tuple_type": _type,
    "dict_type": _type,
    "model_type": _type,
    "model_attributes_type": _type,
    "too_long": _size,
    "too_short": _size,
    "string_too_long": _text_size,
    "string_too_short": _text_size,
    "value_error": _value,
}


def sorted_once(faults: Iterable[Fault]) -> list[Fault]:
    """The faults in the order found, each once, each beginning as a sentence does."""
    return list(dict.fromkeys(Fault(fault.path, fault.message[0].upper() + fault.message[1:]) for fault in faults))


def unknown(value: Any, what: str, known: Iterable[str]) -> str:
    """'glu' names no adhesive of this document; known: 'PU'."""
    return f"{units.given(value)} names no {what} of this document; {nearest(value, known)}"
