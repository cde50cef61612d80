"""The boxes of a piece's row: which of them belong to its shape, and the sizes that a profile brings."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from typing import Any

from server import units
from server.errors import InputError
from server.library.profiles import SIZES, Profile, find
from server.web.form_fields import PIECES, Box
from server.web.form_text import Reading, with_unit

Row = Mapping[str, str]


def profile_of(row: Row) -> Profile | None:
    """The profile that a row names; None where it names none, or one that is not in the list."""
    name = row.get("profile", "").strip()
    return find(name) if name else None


def shape_of(row: Row) -> str:
    """The shape of a row's piece: its profile's, else the one chosen."""
    profile = profile_of(row)
    return profile.shape if profile else row.get("shape") or "rectangle"


@cache
def boxes_of(shape: str) -> tuple[Box, ...]:
    """The boxes that say something about a piece of ``shape``; all of them for a shape that is not known."""
    known = any(shape in box.shapes for box in PIECES.boxes)
    return tuple(box for box in PIECES.boxes if not known or not box.shapes or shape in box.shapes)


def boxes_shown(row: Row) -> tuple[Box, ...]:
    """The boxes of a row as it stands: sizes that its profile says need no box."""
    boxes = boxes_of(shape_of(row))
    if profile_of(row) is None:
        return boxes
    return tuple(box for box in boxes if box.place not in SIZES or row.get(box.name, "").strip())


def sizes_in_words(row: Row) -> str:
    """The sizes of a row's profile: 'width 100 mm, depth 200 mm, web 5.6 mm'; '' without one."""
    profile = profile_of(row)
    if profile is None:
        return ""
    return ", ".join(f"{name.replace('_', ' ')} {size}" for name, size in profile.sizes.items())


def sizes_of_profile(row: Row, paths: Mapping[str, str], system: str, reading: Reading) -> dict[str, object]:
    """The sizes of the profile a row names, and its name; a size typed beside it that differs is a fault."""
    profile = profile_of(row)
    if profile is None:
        reading.fault(
            paths["profile"],
            f"“{row['profile']}” is not in the list of profiles; choose one of it, or empty this box and type sizes.",
        )
        return {}
    for box in boxes_of(profile.shape):
        own = profile.sizes.get(box.place, "0 mm")
        typed = row.get(box.name, "")
        if box.place in SIZES and typed and not _same(with_unit(typed, box.unit, system), own):
            reading.fault(
                paths["profile"],
                f"{profile.name} has a {box.label.lower()} of {own}, and {typed} is typed beside it; empty one.",
            )
    return {"profile": profile.name, **profile.sizes}


def row_of(name: str, piece: Mapping[str, Any]) -> dict[str, Any]:
    """A document's piece as a row is filled from it: of a profile in the list the name is enough."""
    row = {**piece, "name": name}
    profile = find(str(piece.get("profile") or ""))
    if profile is None or profile.shape != piece.get("shape"):
        row.pop("profile", None)
        return row
    if all(_same(piece.get(size, "0 mm"), profile.sizes.get(size, "0 mm")) for size in SIZES):
        return {key: value for key, value in row.items() if key not in SIZES}
    row.pop("profile", None)
    return row


def _same(one: object, other: object) -> bool:
    try:
        return abs(units.parse("", one, "length") - units.parse("", other, "length")) < 1e-9
    except InputError:
        return False
