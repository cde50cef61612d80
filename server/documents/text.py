"""From bytes, text or a mapping to a plain JSON object of bounded size, before any field is read."""

from __future__ import annotations

import json
import unicodedata
from collections.abc import Mapping
from typing import Any

from server import units
from server.errors import DocumentError, Fault

LARGEST = 1_000_000  # bytes of a document
DEEPEST = 16
NODES = 100_000
_LINES = "\n\r\t"


class _Twice(dict[str, Any]):
    """An object in which ``twice`` was given more than once."""

    twice: tuple[str, ...] = ()


def load(data: str | bytes | Mapping[str, object]) -> dict[str, Any]:
    """Return the document as a fresh JSON object; raise DocumentError for what no field could explain.

    Refused: more than 1 MB, nesting beyond 16 levels, keys given twice, text that is not JSON or not UTF-8, values
    that are not JSON, control characters.
    """
    if isinstance(data, Mapping):
        value: object = data
    else:
        value = _parse(data)
    if not isinstance(value, Mapping):
        raise _refused(f"the document is {units.given(value)}; it is one JSON object, {{...}}.")
    copier = _Copier()
    copied = copier.copy(value)
    if copier.faults:
        raise DocumentError(copier.faults)
    assert isinstance(copied, dict)
    return copied


def _refused(message: str) -> DocumentError:
    return DocumentError([Fault("", message[0].upper() + message[1:])])


def _parse(data: str | bytes) -> object:
    if len(data) > LARGEST:
        raise _refused(f"the document holds {len(data)} bytes; at most {LARGEST} are read.")
    try:
        text = data.decode("utf-8-sig") if isinstance(data, bytes) else data.removeprefix("\ufeff")
    except UnicodeDecodeError as error:
        raise _refused(f"the document is not UTF-8 text (byte {error.start}); save it as UTF-8.") from None
    try:
        return json.loads(text, object_pairs_hook=_pairs)
    except json.JSONDecodeError as error:
        raise _refused(
            f"the document is not JSON: line {error.lineno}, column {error.colno}: {error.msg}; correct it there."
        ) from None
    except RecursionError:
        raise _refused(f"the document is nested too deeply; at most {DEEPEST} levels are read.") from None
    except ValueError:  # a number of thousands of digits
        raise _refused("the document holds a number of more than 4000 digits; shorten it.") from None


def _pairs(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) == len(pairs):
        return found
    marked, seen, twice = _Twice(found), set[str](), list[str]()
    for key, _ in pairs:
        if key in seen and key not in twice:
            twice.append(key)
        seen.add(key)
    marked.twice = tuple(twice)
    return marked


class _Copier:
    """Copies JSON values, collecting what cannot stand in a document; ``trail`` is the path of the value at hand."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []
        self.trail: list[str | int] = []
        self.nodes = 0
        self.characters = 0

    def copy(self, value: object) -> object:
        """Return ``value`` as dict, list, str, float, int, bool or None."""
        kind = type(value)
        if kind is str:
            return self.text(value)  # type: ignore[arg-type]
        if kind is float or kind is int or kind is bool or value is None:
            return value
        if isinstance(value, (Mapping, list, tuple)):
            return self.container(value)
        if isinstance(value, (float, str, int)):  # numpy's float64, enumerations and the like
            plain = float(value) if isinstance(value, float) else int(value) if isinstance(value, int) else str(value)
            return self.copy(plain)
        self.fault(
            f"{units.given(value)} is not a JSON value; give a number, a text, true, false, a list or an object."
        )
        return None

    def container(self, value: Mapping[Any, Any] | list[Any] | tuple[Any, ...]) -> object:
        """Copy an object or a list, within the limits of depth and size."""
        self.nodes += len(value)
        if len(self.trail) >= DEEPEST:
            self.fault(f"the document is nested too deeply here; at most {DEEPEST} levels are read.")
            return None
        if self.nodes > NODES or self.characters > LARGEST:
            raise _refused(f"the document is too large; at most {LARGEST} bytes and {NODES} values are read.")
        trail, copy = self.trail, self.copy
        if isinstance(value, Mapping):
            if isinstance(value, _Twice):
                for key in value.twice:
                    self.fault(f"{units.given(key)} is given twice; keep one of them.", key)
            found = {}
            for key, item in value.items():
                if not isinstance(key, str):
                    self.fault(f"the name {units.given(key)} is not a text; names are texts.")
                    continue
                self.text(key)
                trail.append(key)
                found[key] = copy(item)
                trail.pop()
            return found
        items = []
        for index, item in enumerate(value):
            trail.append(index)
            items.append(copy(item))
            trail.pop()
        return items

    def text(self, value: str) -> str:
        """Refuse what neither a database nor a printed sheet can hold."""
        self.characters += len(value)
        if not value.isprintable():
            for sign in value:
                if sign not in _LINES and unicodedata.category(sign) in ("Cc", "Cs"):
                    self.fault(
                        f"the text {units.given(value)} holds the control character U+{ord(sign):04X}; remove it."
                    )
                    break
        return value

    def fault(self, message: str, *more: str | int) -> None:
        """Note a fault at the path of the value at hand."""
        self.faults.append(Fault(path_of([*self.trail, *more]), message[0].upper() + message[1:]))


def path_of(trail: list[str | int]) -> str:
    """'section.joints[0].between' for ["section", "joints", 0, "between"]."""
    path = ""
    for element in trail:
        if isinstance(element, int):
            path += f"[{element}]"
        else:
            name = "".join(sign if sign.isprintable() else "?" for sign in element[:80])
            path += f".{name}" if path else name
    return path
