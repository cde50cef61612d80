"""How a value was tested, and how a check uses it: two descriptions in the same words, so that they can be compared."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server import documents, units
from server.errors import InputError
from server.library import reading
from server.library.coupon_sets import coupon_document
from server.library.record import Record
from server.storage import Session


@dataclass(frozen=True)
class Surface:
    """One side of a bond: the adherend with the key of its record ('' for none), and its preparation."""

    adherend: str = ""
    adherend_key: str = ""
    preparation: str = ""
    preparation_key: str = ""


@dataclass(frozen=True)
class Description:
    """A bond as it was tested or as it is used [mm, degrees Celsius]; what nobody wrote down is '' or None."""

    what: str
    product: str = ""
    product_key: str = ""
    surfaces: tuple[Surface, Surface] = (Surface(), Surface())
    cure: str = ""
    cure_key: str = ""
    thickness: float | None = None
    temperatures: tuple[float, float] | None = None
    exposure: str = ""


def described(record: Record) -> Description:
    """Describe a record by its details and links: a bond, a value or a coupon set."""
    details, links = record.details, record.links

    def key(role: str) -> str:
        return links[role].key if role in links else ""

    surfaces = [
        Surface(
            adherend=details.get(f"surface_{side}_material", ""),
            adherend_key=key(f"adherend_{side}"),
            preparation=details.get(f"surface_{side}_preparation", ""),
            preparation_key=key(f"preparation_{side}"),
        )
        for side in ("a", "b")
    ]
    is_set = record.group == "sets"
    return Description(
        what=str(record.itself),
        product=details.get("product", ""),
        product_key=key("product"),
        surfaces=(surfaces[0], surfaces[1]),
        cure=details.get("cure", ""),
        cure_key=key("cure"),
        thickness=_thickness(record) if is_set else number(record.values.get("thickness"), "length"),
        temperatures=_temperatures(record) if is_set else None,
        exposure=details.get("exposure", ""),
    )


def tests_behind(session: Session, record: Record) -> Iterator[tuple[Description, Record]]:
    """Return what each value that a record pins was tested as, with the value; the same set once."""
    seen = set[str]()
    for value in reading.many(session, record.pins.values()).values():
        behind = value.links.get("set")
        tested = value if behind is None else reading.many(session, [behind]).get(behind)
        if tested is not None and str(tested.itself) not in seen:
            seen.add(str(tested.itself))
            yield described(tested), value


def number(value: object, kind: str) -> float | None:
    """A typed quantity as a number; None where there is none, or it is a range."""
    if value is None or isinstance(value, list | tuple):
        return None
    try:
        return units.parse("", value, kind)
    except InputError:
        return None


def _of_coupons(record: Record, field: str) -> list[float]:
    document = documents.read(coupon_document(record))
    assert isinstance(document, documents.CouponsDocument)
    return [value for each in document.coupons if each.counts and (value := getattr(each, field)) is not None]


def _thickness(record: Record) -> float | None:
    """The mean bond line of the coupons, or else what is said of the whole set."""
    measured = _of_coupons(record, "thickness")
    return sum(measured) / len(measured) if measured else number(record.values.get("thickness"), "length")


def _temperatures(record: Record) -> tuple[float, float] | None:
    measured = _of_coupons(record, "temperature")
    whole = number(record.values.get("temperature"), "temperature")
    found = measured or ([whole] if whole is not None else [])
    return (min(found), max(found)) if found else None


def alike(one: str, other: str) -> bool:
    """Return whether two texts name the same: every word of one stands in the other.

    >>> alike("softwood ply", "Softwood ply 12.5 mm, web"), alike("spruce", "")
    (True, False)
    """
    first, second = _words(one), _words(other)
    return bool(first) and bool(second) and (first <= second or second <= first)


def same(one: tuple[str, str], other: tuple[str, str]) -> bool:
    """Return whether two things are the same, each given as text and record key: by their keys where both have one."""
    if one[1] and other[1]:
        return one[1].casefold() == other[1].casefold()
    return alike(one[0], other[0])


def _words(text: str) -> frozenset[str]:
    return frozenset(re.findall(r"[^\W_]+", text.casefold()))


def materials_of(document: Mapping[str, Any]) -> list[tuple[str, str, tuple[str, ...]]]:
    """Return where a check uses which adhesive between which materials: (adhesive, place, names of materials)."""
    found: list[tuple[str, str, tuple[str, ...]]] = []
    section = document.get("section")
    if isinstance(section, Mapping):
        pieces = section.get("pieces", {})
        for joint in section.get("joints", ()):
            if joint.get("adhesive"):
                sides = tuple(str(pieces[name]["material"]) for name in joint["between"])
                found.append((str(joint["adhesive"]), "/".join(joint["between"]), sides))
    adherends = document.get("adherends")
    if isinstance(adherends, Mapping) and document.get("adhesive"):
        sides = tuple(str(each["material"]) for each in adherends.values() if "material" in each)
        found.append((str(document["adhesive"]), "the overlap", sides))
    strip = document.get("strip")
    if isinstance(strip, Mapping) and document.get("adhesive"):
        host = document.get("host", {}).get("pieces", {})
        sides = (str(strip["material"]), *dict.fromkeys(str(each["material"]) for each in host.values()))
        found.append((str(document["adhesive"]), "the strip", sides))
    return found


@dataclass(frozen=True)
class Fastened:
    """One joint that a fastener holds: where, the materials, and the thinner piece [mm] where that is plain."""

    fastener: str
    place: str
    materials: tuple[str, ...]
    thinner: float | None


def fastened(document: Mapping[str, Any]) -> list[Fastened]:
    """Return the joints of a member that fasteners hold; those that only press or stop peel carry nothing."""
    section = document.get("section")
    if not isinstance(section, Mapping):
        return []
    pieces, found = section.get("pieces", {}), []
    for joint in section.get("joints", ()):
        role = joint.get("role") or ("press" if joint.get("adhesive") else "sole")
        if joint.get("fastener") and role not in ("press", "peel-stop"):
            both = [pieces[name] for name in joint["between"]]
            sizes = [size for piece in both if (size := _least_size(piece)) is not None]
            materials = tuple(str(piece["material"]) for piece in both)
            thinner = min(sizes) if len(sizes) == 2 else None
            found.append(Fastened(str(joint["fastener"]), "/".join(joint["between"]), materials, thinner))
    return found


def _least_size(piece: Mapping[str, Any]) -> float | None:
    if piece.get("shape", "rectangle") != "rectangle":
        return None
    sizes = [number(piece.get(name), "length") for name in ("width", "depth")]
    return None if None in sizes else min(size for size in sizes if size is not None)


def pairs(surfaces: Sequence[Surface]) -> Sequence[tuple[Surface, Surface]]:
    """A bond's two surfaces in both orders."""
    first, second = surfaces
    return ((first, second), (second, first))
