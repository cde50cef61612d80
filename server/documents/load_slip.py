"""Kind "load-slip": the shop's own tests of fasteners in a joint, to strength and slip modulus (EN 26891)."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError

from server.documents.common import Document, Model
from server.documents.coupons import Statistic
from server.documents.quantities import Count, Line, Quantity, Resistance, Text
from server.errors import Fault

MOST_SPECIMENS, MOST_READINGS = 500, 2000

Load = Annotated[float, Quantity("force", least=0.0)]
Slip = Annotated[float, Quantity("length", least=-1000.0, most=1000.0)]


class Specimen(Model):
    """One test: its readings (load, slip), or its greatest load with the slips at a tenth and four tenths."""

    maximum: Resistance | None = None
    v01: Slip | None = None
    v04: Slip | None = None
    readings: Annotated[list[tuple[Load, Slip]], Field(min_length=2, max_length=MOST_READINGS)] | None = None
    name: Line = ""
    excluded: Text | None = None


class LoadSlipDocument(Document):
    """Tests of one joint with fasteners. A basis is accepted and not used."""

    kind: Literal["load-slip"]
    basis: Any = None
    specimens: Annotated[list[Specimen], Field(min_length=1, max_length=MOST_SPECIMENS)]
    fastener_count: Annotated[int, Count(1, 1000)] = 1
    shear_planes: Annotated[int, Count(1, 10)] = 1
    estimated: Resistance | None = None
    statistic: Statistic = Field(default_factory=Statistic)


def rules(document: LoadSlipDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    return list(_faults(list(document.specimens)))


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read."""
    listed = raw.get("specimens")
    return list(_faults([_readable(each) for each in listed[:MOST_SPECIMENS]] if isinstance(listed, list) else []))


def _readable(value: object) -> Specimen | None:
    try:
        return Specimen.model_validate(value)
    except ValidationError:
        return None


def _faults(specimens: list[Specimen | None]) -> Iterator[Fault]:
    for index, each in enumerate(specimens):
        if each is not None:
            yield from _specimen(f"specimens[{index}]", each)
    if specimens and all(each is not None and each.excluded is not None for each in specimens):
        yield Fault("specimens", "every specimen is excluded, so none is left to reckon with; keep at least one.")


def _specimen(path: str, each: Specimen) -> Iterator[Fault]:
    typed = [name for name in ("maximum", "v01", "v04") if getattr(each, name) is not None]
    if each.readings is not None and typed:
        yield Fault(f"{path}.{typed[0]}", "readings are given too, which say it; keep one of the two.")
    if each.readings is None and each.maximum is None:
        yield Fault(f"{path}.maximum", "missing; enter the greatest load, or the readings of load and slip.")
    if each.readings is not None and not any(load > 0 for load, _ in each.readings):
        yield Fault(f"{path}.readings", "no load is above 0; enter the loads of the test.")
    if (each.v01 is None) != (each.v04 is None):
        lacking = "v01" if each.v01 is None else "v04"
        yield Fault(f"{path}.{lacking}", "missing; a slip modulus needs the slips at a tenth and at four tenths.")
    if each.v01 is not None and each.v04 is not None and each.v04 <= each.v01:
        yield Fault(f"{path}.v04", "is not larger than v01; the joint must slip between a tenth and four tenths.")
    if each.excluded is not None and not each.excluded.strip():
        yield Fault(f"{path}.excluded", "nothing was written; a specimen is excluded for a cause: write it.")
