"""Reads check documents: everything that is wrong with one is said at once."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, TypeVar

from pydantic import BaseModel, ValidationError

from server import units
from server.documents import coupons, fastener, fields, glue_up, load_slip, rules, splice, strip_end
from server.documents.common import Adhesive, Document, Fastener, Material, Reference
from server.documents.faults import MOST, faults_of, nearest, sorted_once
from server.documents.member import MemberDocument
from server.documents.parts import parts_of, salvage
from server.documents.text import load
from server.errors import DocumentError, Fault

AnyDocument = TypeVar("AnyDocument", bound=Document)


@dataclass(frozen=True)
class Kind:
    """One kind of check: its model, and its rules across fields for a whole and for a partly readable document."""

    model: type[Document]
    rules: Callable[[Any], list[Fault]]
    rules_of_raw: Callable[[Mapping[str, Any]], list[Fault]]


def _member_rules(document: MemberDocument) -> list[Fault]:
    return list(rules.faults(parts_of(document)))


def _member_rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    return list(rules.faults(salvage(raw)))


# A new kind of check is one line here.
KINDS: dict[str, Kind] = {
    "member": Kind(MemberDocument, _member_rules, _member_rules_of_raw),
    "fastener": Kind(fastener.FastenerDocument, fastener.rules, fastener.rules_of_raw),
    "coupons": Kind(coupons.CouponsDocument, coupons.rules, coupons.rules_of_raw),
    "load-slip": Kind(load_slip.LoadSlipDocument, load_slip.rules, load_slip.rules_of_raw),
    "splice": Kind(splice.SpliceDocument, splice.rules, splice.rules_of_raw),
    "strip-end": Kind(strip_end.StripEndDocument, strip_end.rules, strip_end.rules_of_raw),
    "glue-up": Kind(glue_up.GlueUpDocument, glue_up.rules, glue_up.rules_of_raw),
}

GROUPS: Mapping[str, type[Material] | type[Adhesive] | type[Fastener]] = {
    "materials": Material,
    "adhesives": Adhesive,
    "fasteners": Fastener,
}


def read(data: str | bytes | Mapping[str, object]) -> Document:
    """Return the check document in ``data`` (JSON text, or an object); raise DocumentError with every fault found."""
    raw = load(data)
    kind = KINDS[_kind(raw)]
    try:
        document = kind.model.model_validate(raw)
    except ValidationError as error:
        faults = faults_of(error, kind.model)
        raise DocumentError(sorted_once([*faults, *kind.rules_of_raw(raw)])[:MOST]) from None
    faults = kind.rules(document)
    if faults:
        raise DocumentError(sorted_once(faults)[:MOST])
    document._raw = raw
    return document


def _kind(raw: Mapping[str, Any]) -> str:
    listed = ", ".join(f"'{kind}'" for kind in KINDS)
    if "kind" not in raw:
        raise DocumentError([Fault("kind", f"Missing; enter one of {listed}.")])
    kind = raw["kind"]
    if isinstance(kind, str) and kind in KINDS:
        return kind
    message = f"{units.given(kind)} is no kind of check; {nearest(kind, KINDS)}"
    message = message[0].upper() + message[1:]
    raise DocumentError([Fault("kind", message)])


def fill(document: AnyDocument, entries: Mapping[str, Mapping[str, Mapping[str, object]]]) -> AnyDocument:
    """Return ``document`` with its references replaced by the library's values.

    ``entries`` gives, per group ("materials", "adhesives", "fasteners") and name, the values of that record as a
    document would give them. Names that hold no reference are left alone, as is ``document.raw``. Bad values raise
    DocumentError with faults that name the record; so do rules that only now can be judged.
    """
    faults: list[Fault] = []
    update: dict[str, dict[str, object]] = {}
    for group, model in GROUPS.items():
        table = dict(getattr(document, group))
        for name, values in entries.get(group, {}).items():
            reference = table.get(name)
            if isinstance(reference, Reference):
                table[name] = _values(group, name, reference, model, values, faults)
                update[group] = table
    if faults:
        raise DocumentError(faults)
    filled = document.model_copy(update=update)
    faults = KINDS[document.kind].rules(filled)
    if faults:
        raise DocumentError(sorted_once(faults)[:MOST])
    return filled


def _values(
    group: str,
    name: str,
    reference: Reference,
    model: type[BaseModel],
    values: Mapping[str, object],
    faults: list[Fault],
) -> object:
    given = {"record": reference.record, "revision": reference.revision, **values}
    try:
        return model.model_validate(given)
    except ValidationError as error:
        revision = f" revision {given['revision']}" if given["revision"] is not None else ""
        faults.extend(
            Fault(fault.path, f"Record {given['record']}{revision}: {fault.message}")
            for fault in faults_of(error, model, (group, name))
        )
        return reference


def schema(kind: str = "member") -> dict[str, Any]:
    """JSON schema of the documents of ``kind``, for OpenAPI."""
    return KINDS[kind].model.model_json_schema(by_alias=True)


def kind_of(path: str, choice: str = "", kind: str = "member") -> str | None:
    """The unit kind of the field at ``path`` ('section.pieces.*.width' -> 'length'); None where it is no quantity.

    ``choice`` tells the arms of a union apart: kind_of("loads.*[*].value", "line") is 'line_load'.
    """
    return fields.kind_of(KINDS[kind].model, path, choice)
