"""What stands at a place of the member: a support, a load, the end of a piece, a change of spacing."""

from __future__ import annotations

from collections.abc import Iterator

from server import documents

SAME = 1e-6  # of the member's length: closer than this is the same place


class Places:
    """Names for the stations of a member, so that a governing place is named and not only measured."""

    def __init__(self, document: documents.MemberDocument) -> None:
        self.length = document.member.length
        self._known = list(_stations(document))
        self._told: dict[float, str] = {}

    def at(self, place: float) -> str:
        """What stands there, in words; empty in between."""
        told = self._told.get(place)
        if told is None:
            told = self._told[place] = self._find(place)
        return told

    def _find(self, place: float) -> str:
        slack = SAME * self.length
        found = dict.fromkeys(words for x, words in self._known if abs(x - place) <= slack)
        return " and ".join(found)

    def words(self, place: float) -> str:
        """'250 mm from the left end: start of strip'."""
        known = self.at(place)
        return f"{place:.6g} mm from the left end" + (f": {known}" if known else "")

    def stations(self) -> list[float]:
        """All places where something stands, left to right."""
        return sorted({x for x, _ in self._known})


def _stations(document: documents.MemberDocument) -> Iterator[tuple[float, str]]:
    length = document.member.length
    for support in document.member.supports:
        yield support.at, "support" if support.kind != "fixed" else "fixed support"
    for hinge in document.member.hinges:
        yield hinge, "hinge"
    for name, piece in document.section.pieces.items():
        if piece.from_:
            yield piece.from_, f"start of {name}"
        if piece.to is not None and piece.to < length:
            yield piece.to, f"end of {name}"
    for joint in document.section.joints:
        if isinstance(joint.spacing, list):
            for zone in joint.spacing:
                if 0 < zone.from_ < length:
                    yield zone.from_, f"change of spacing in {joint.id}"
    for case, loads in document.loads.items():
        for number, load in enumerate(loads, 1):
            yield from _load(case, number, load, length)


def _load(case: str, number: int, load: documents.Load, length: float) -> Iterator[tuple[float, str]]:
    if isinstance(load, documents.PointLoad | documents.CoupleLoad):
        word = "load" if isinstance(load, documents.PointLoad) else "couple"
        yield load.at, f"{word} {number} of {case}"
    elif isinstance(load, documents.LineLoad | documents.AreaLoad):
        if load.from_ > 0:
            yield load.from_, f"start of load {number} of {case}"
        if load.to < length:
            yield load.to, f"end of load {number} of {case}"
