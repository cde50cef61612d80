"""Which column of a pasted block is what: the heading's words, and the unit it names."""

from __future__ import annotations

import re
from dataclasses import dataclass

from server import units
from server.errors import InputError

# field of a coupon: the kind its cells are read as ('' for text, "day", "percent"), and the words that head it
_KNOWN: dict[str, tuple[str, tuple[str, ...]]] = {
    "name": ("", ("name", "coupon", "no", "nr", "number", "specimen", "id", "mark", "test piece")),
    "load": ("force", ("load", "peak load", "max load", "maximum load", "breaking load", "force", "f", "fmax", "p")),
    "gauge": ("stress", ("gauge", "gauge pressure", "ram", "pressure", "ram pressure", "jack", "gage")),
    "ram_area": ("area", ("ram area", "piston area", "jack area")),
    "stress": ("stress", ("stress", "strength", "shear strength", "shear stress", "tau")),
    "width": ("length", ("width", "b", "w")),
    "length": ("length", ("length", "overlap", "overlap length", "l")),
    "area": ("area", ("area", "bonded area", "shear area", "a")),
    "thickness": (
        "length",
        ("thickness", "bond line", "bond-line", "bondline", "bond line thickness", "bond-line thickness",
         "glue line", "glue-line", "glue line thickness", "glue-line thickness", "t"),
    ),
    "temperature": ("temperature", ("temperature", "temp", "test temperature")),
    "date_bonded": ("day", ("bonded", "date bonded", "bonded on", "glued", "date glued", "made on")),
    "date_tested": ("day", ("tested", "date tested", "tested on", "test date", "broken on")),
    "batch": ("", ("batch",)),
    "lot": ("", ("lot", "adhesive lot", "lot number", "lot no")),
    "preparation": ("", ("preparation", "prep", "surface preparation", "surface")),
    "made_by": ("", ("made by", "bonded by", "glued by", "operator")),
    "tested_by": ("", ("tested by", "tester")),
    "failure.adhesive": ("percent", ("adhesive", "adhesive failure", "af", "adhesion")),
    "failure.cohesive": ("percent", ("cohesive", "cohesive failure", "cf")),
    "failure.substrate": (
        "percent",
        ("substrate", "substrate failure", "adherend failure", "sf", "wood failure", "wf", "fibre tear",
         "fiber tear", "ft", "timber failure"),
    ),
    "failure.special_cohesive": (
        "percent",
        ("special cohesive", "special cohesive failure", "scf", "thin layer", "thin-layer cohesive",
         "thin layer cohesive", "tlc", "near surface cohesive", "light fibre tear", "lft"),
    ),
    "excluded": ("", ("excluded", "excluded because", "cause", "cause of exclusion", "reason")),
    "prevented_by": ("", ("prevented by", "what now stops it", "now stopped by")),
    "note": ("", ("note", "notes", "remark", "remarks", "comment")),
}  # fmt: skip
_BY_WORDS = {word: field for field, (_, words) in _KNOWN.items() for word in words}
_KEPT_UNITS = {"%": "percent", "percent": "percent", "pct": "percent"}


@dataclass(frozen=True)
class Column:
    """One column: the coupon's field, what its cells are read as, and the unit of bare numbers."""

    heading: str
    field: str
    kind: str
    unit: str = ""

    @property
    def is_day(self) -> bool:
        """Whether the cells are days."""
        return self.kind == "day"


def known_columns() -> list[str]:
    """The first heading of every field."""
    return [words[0] for _, words in _KNOWN.values()]


def column_of(heading: str) -> tuple[Column | None, str]:
    """Return the column that a heading names, and what is wrong with the heading; None for an empty one.

    >>> column_of("load [kN]")[0]
    Column(heading='load [kN]', field='load', kind='force', unit='kN')
    """
    text = " ".join(heading.split())
    if not text:
        return None, ""
    words, unit = _parted(text)
    field = _BY_WORDS.get(words.lower().rstrip(".:"))
    if field is None:
        listed = ", ".join(known_columns())
        return None, f"is no heading known here; use one of {listed}, with the unit behind it: 'load kN'."
    kind = _KNOWN[field][0]
    wrong = _wrong_unit(field, kind, unit)
    return (None, wrong) if wrong else (Column(text, field, kind, "" if kind in ("", "day", "percent") else unit), "")


def _parted(text: str) -> tuple[str, str]:
    """Words and unit: 'load kN', 'load [kN]', 'load (kN)', 'load / kN', 'load, kN'."""
    bracketed = re.fullmatch(r"(.*?)\s*[\[(]\s*(.*?)\s*[\])]", text)
    if bracketed and bracketed[1]:
        return bracketed[1], bracketed[2]
    if text.lower().rstrip(".:") in _BY_WORDS:
        return text, ""
    slashed = re.fullmatch(r"(.+?)\s*(?:\s/\s|,\s)\s*(\S+)", text)
    if slashed:
        return slashed[1], slashed[2]
    if text.endswith("%"):
        return text[:-1].rstrip(), "%"
    head, _, tail = text.rpartition(" ")
    return (head, tail) if head else (text, "")


def _wrong_unit(field: str, kind: str, unit: str) -> str:
    if not unit:
        return ""
    if kind == "percent":
        return "" if unit.lower() in _KEPT_UNITS else f"'{unit}' is no unit of a share; head it with %."
    if kind in ("", "day"):
        return ""
    try:
        units.parse("", f"1 {unit}", kind)
    except InputError as error:
        if field == "load" and _reads(unit, "stress"):
            return (
                f"'{unit}' is a unit of stress, and a load is asked for; head it 'stress', or 'gauge' where it is a "
                "gauge's pressure."
            )
        return str(error)
    return ""


def _reads(unit: str, kind: str) -> bool:
    try:
        units.parse("", f"1 {unit}", kind)
    except InputError:
        return False
    return True
