"""What became different between two saved revisions of a check, for people."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

from server import documents, sheets, units
from server.jobs.content import leaves
from server.jobs.revisions import SavedRevision

_ONE = {"materials": "material", "adhesives": "adhesive", "fasteners": "fastener"}
_NOTHING = "–"


@dataclass(frozen=True)
class Moved:
    """One difference: what, and its old and new state as they are to be read."""

    what: str
    old: str
    new: str
    about: Literal["values", "given", "result"]


def moved(old: SavedRevision, new: SavedRevision) -> list[Moved]:
    """Return the differences: values used, what was given, then verdict, governing check and every utilisation."""
    display = str(new.heading["display"])
    found = [
        *_pairs(_values(old, display), _values(new, display), "values"),
        *_pairs(_given(old), _given(new), "given"),
        *_pairs(_result(old, display), _result(new, display), "result"),
    ]
    return [difference for difference in found if difference.old != difference.new]


def _pairs(old: Mapping[str, str], new: Mapping[str, str], about: Literal["values", "given", "result"]) -> list[Moved]:
    names = dict.fromkeys([*old, *new])
    return [Moved(name, old.get(name, _NOTHING), new.get(name, _NOTHING), about) for name in names]


def _values(saved: SavedRevision, display: str) -> dict[str, str]:
    found: dict[str, str] = {}
    for section, entries in saved.values_used.items():
        for name, entry in entries.items():
            what = f"{_ONE.get(section, section)} {name}"
            if entry.get("record") is not None:
                found[f"{what}: record"] = f"{entry['record']} revision {entry['revision']}"
            for path, value in leaves(entry):
                if path not in ("record", "revision"):
                    found[f"{what}: {_words(path)}"] = _shown(f"{section}.*.{path}", value, display)
    return found


def _given(saved: SavedRevision) -> dict[str, str]:
    # Which revision a reference names shows among the values.
    skipped = (".record", ".revision")
    return {
        path: str(value)
        for path, value in leaves(saved.document)
        if not (path.startswith(tuple(_ONE)) and path.endswith(skipped))
    }


def _result(saved: SavedRevision, display: str) -> dict[str, str]:
    result = saved.result
    found = {
        "verdict": str(result["verdict"]),
        "utilisation": _share(result.get("utilisation")),
        "governing": _governing(result, display),
    }
    for part, one in (("joints", "joint"), ("pieces", "piece")):
        for entry in result.get(part, ()):
            found[f"{one} {entry['id']}: utilisation"] = _share(entry.get("utilisation"))
    for entry in result.get("deflection_limits", ()):
        what = "long-term deflection" if entry.get("long_term") else "deflection"
        start, end = (units.show(entry[end], "length", display) for end in ("from", "to"))
        found[f"{what} from {start} to {end}: utilisation"] = _share(entry.get("utilisation"))
    found["missing"] = "; ".join(sheets.missing(result, display)) or _NOTHING
    found["program"] = saved.engine
    return found


def _words(path: str) -> str:
    return path.replace("_", " ").replace(".", ", ")


def _shown(path: str, value: Any, display: str) -> str:
    if isinstance(value, bool) or not isinstance(value, int | float):
        return str(value)
    kind = documents.kind_of(path)
    return f"{value:g}" if kind is None else units.show(value, kind, display)


def _share(value: Any) -> str:
    return _NOTHING if value is None else f"{value:.3f}"


def _governing(result: Mapping[str, Any], display: str) -> str:
    value = result.get("governing")
    if isinstance(value, Mapping):
        return ", ".join(str(part) for part in value.values() if isinstance(part, str) and part) or _NOTHING
    return sheets.headline(result, display) or _NOTHING
