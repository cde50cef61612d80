"""A record's values are checked by the same models as a document's, so a fault reads the same in both."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from pydantic import ValidationError

from server import ENGINE, documents, units
from server.documents import evidence
from server.documents.faults import faults_of
from server.documents.text import load
from server.errors import DocumentError, Fault, InputError
from server.library import fields
from server.library.coupon_sets import coupon_result, document_of, result_value
from server.library.groups import Group
from server.library.links import placeholders
from server.library.properties import FROM_COUPONS, HYBRID, HYBRID_FIELDS, PROPERTIES, Property
from server.library.record import Record
from server.storage.tables import compact

MOST_CHARACTERS = 50_000
MOST_OF_A_SET = 1_000_000
# These belong to the record, not to its values.
_RECORDS_OWN = ("status", "source", "note", "record", "revision", "lineage")
FOUND = "found"
"""Beside a value found from coupons: what the coupons gave on the day, so that it never depends on a later program."""
_OF_COUPONS = ("values.coupons", "values.statistic")
_WITHIN = 1.0005  # a value typed as it is printed, rounded to four digits, may lie a hair above


def check_entry(
    faults: list[Fault], group: Group, values: Mapping[str, Any], pinned: Sequence[str] = ()
) -> dict[str, Any]:
    """Return ``values`` as typed; faults as ``values.shear_strength`` where the models refuse them.

    ``pinned`` are the fields that value records supply.
    """
    own = [name for name in _RECORDS_OWN if name in values]
    faults += [Fault(f"values.{name}", f"{name} belongs to the record itself; leave it out here.") for name in own]
    try:
        typed = load({name: value for name, value in values.items() if name not in own and name != FOUND})
    except DocumentError as error:
        faults += [Fault(f"values.{fault.path}" if fault.path else "values", fault.message) for fault in error.faults]
        return {}
    if group.model is evidence.Value and _was_found(values):
        typed.pop("value", None)  # found anew from the set that it stands on now
    found = list(_model_faults(group, placeholders(typed, pinned, faults)))
    if found:
        faults += found
        return typed
    text = compact(typed)
    most = MOST_OF_A_SET if group.name == "sets" else MOST_CHARACTERS
    if len(text) > most:
        faults.append(Fault("values", f"The values have {len(text)} characters; shorten them to {most}."))
    else:
        fields.printable(faults, "values", text)
    return typed


def _was_found(values: Mapping[str, Any]) -> bool:
    """Whether the number of an earlier revision came from its coupons and was not typed lower."""
    found = values.get(FOUND)
    return isinstance(found, Mapping) and not found.get("typed", False) and values.get("origin") == "coupon set"


def _model_faults(group: Group, values: Mapping[str, Any]) -> list[Fault]:
    found: list[Fault] = []
    try:
        group.model.model_validate(values)
    except ValidationError as error:
        found = faults_of(error, group.model, ("values",))
    if group.model is evidence.CouponSet:
        found = [fault for fault in found if not fault.path.startswith(_OF_COUPONS)] + _set_faults(values)
    if group.model is evidence.Value and not found:
        found = _value_faults(values)
    return found


def _set_faults(values: Mapping[str, Any]) -> list[Fault]:
    """What is wrong with the coupons: the rules of the check document of kind "coupons", and the set's own."""
    found = []
    property = values.get("property")
    if isinstance(property, str) and property not in FROM_COUPONS:
        message = f"{property[:60]!r} is not found from coupons here; choose one of {', '.join(FROM_COUPONS)}."
        found.append(Fault("values.property", message))
    if property == HYBRID:
        found += [
            Fault(f"values.{name}", f"Missing; {wanted}, for the value holds for that alone.")
            for name, wanted in (
                ("hybrid_fastener", "name the fastener that was in the coupons, or the key of its record"),
                ("hybrid_spacing", "enter the spacing of the fasteners in the coupons"),
            )
            if not values.get(name)
        ]
    try:
        document = documents.read(document_of(values))
    except DocumentError as error:
        return found + [Fault(f"values.{fault.path}", fault.message) for fault in error.faults]
    if isinstance(document, documents.CouponsDocument) and found == [] and PROPERTIES[str(property)].kind == "force":
        found += [
            Fault(f"values.coupons[{place}].stress", "A fastener breaks at a load; enter the load alone.")
            for place, coupon in enumerate(document.coupons)
            if coupon.stress is not None or coupon.area != 1.0
        ]
    return found


def _value_faults(values: Mapping[str, Any]) -> list[Fault]:
    known = PROPERTIES.get(values["property"])
    if known is None:
        message = f"{values['property']!r} is not known here; choose one of {', '.join(PROPERTIES)}."
        return [Fault("values.property", message)]
    if known.name == HYBRID and values["origin"] != "coupon set":
        message = (
            "Strengths of glue and fasteners are never added; the strength of both together is the shop's own test of "
            "that very joint. Name its coupon set."
        )
        return [Fault("values.origin", message)]
    if values.get("value") is None:
        if values["origin"] == "coupon set":
            return []
        return [Fault("values.value", f"Missing; enter {units.KINDS[known.kind].noun}.")]
    _, faults = number_of(values["value"], known)
    return faults


def number_of(value: object, property: Property) -> tuple[float, list[Fault]]:
    """Return a value in the plain unit of its property, and what is wrong with it."""
    try:
        number = units.parse("", value, property.kind)
    except InputError as error:
        return 0.0, [Fault("values.value", str(error))]
    if not number > 0:
        return number, [Fault("values.value", f"{units.given(value)} is not accepted; enter a value greater than 0.")]
    return number, []


def complete_value(
    faults: list[Fault], entry: dict[str, Any], details: dict[str, str], source: str, behind: Record | None
) -> tuple[dict[str, Any], dict[str, str]]:
    """Return a value's entry with its number found from the set ``behind`` it, and its details filled from there."""
    origin = entry["origin"]
    if origin != "coupon set":
        if behind is not None:
            faults.append(Fault("links.set", f"A value of origin {origin!r} rests on no coupon set; leave it out."))
        if not source:
            wanted = "name the maker's data sheet and its date" if origin == "data sheet" else "name standard and table"
            faults.append(Fault("source", f"The source is empty; {wanted}."))
        return entry, details
    if behind is None:
        faults.append(Fault("links.set", "Missing; name the coupon set that the value is found from."))
        return entry, details
    property = PROPERTIES[entry["property"]]
    if behind.values["property"] != property.name:
        message = f"{behind.itself} is a set of {behind.values['property']}, not of {property.name}."
        faults.append(Fault("links.set", message))
        return entry, details
    try:
        result = coupon_result(behind, entry.get("statistic"))
    except DocumentError as error:
        faults += [Fault(f"values.{fault.path}", fault.message) for fault in error.faults]
        return entry, details
    shown = result_value(result, property.name)
    if shown is None:
        faults.append(Fault("links.set", f"{behind.itself} gives no value: {'; '.join(result['missing'])}"))
        return entry, details
    number = shown
    if entry.get("value") is not None:
        number, wrong = number_of(entry["value"], property)
        faults += wrong
        if number > shown * _WITHIN:
            most = units.show(shown, property.kind, str(entry.get("display", "SI")))
            message = f"{units.given(entry['value'])} is more than the coupons show ({most}); enter that or less."
            faults.append(Fault("values.value", message))
    typed = entry.get("value")
    completed = {**entry, "value": shown if typed is None else typed}
    completed |= {name: behind.values[name] for name in HYBRID_FIELDS if behind.values.get(name)}
    completed[FOUND] = {**_found(result), "typed": typed is not None}
    return completed, {**behind.details, **details}


def _found(result: Mapping[str, Any]) -> dict[str, Any]:
    """The summary of a set's result that stays with the value."""
    whole = result["without_exclusions"]
    names = ("n", "mean_stress", "standard_deviation_stress", "variation", "factor", "characteristic", "statistic")
    return {
        **{name: result[name] for name in names},
        "excluded": len(result["coupons"]) - result["n"],
        "characteristic_of_all": result["characteristic"] if whole is None else whole["characteristic"],
        "failure": result["failure"],
        "engine": ENGINE,
    }


def value_text(record: Record, display: str = "SI") -> str:
    """Return the number of a value record with its unit: as typed or, where it was found, in four digits."""
    value, known = record.values.get("value"), PROPERTIES.get(str(record.values.get("property")))
    if isinstance(value, int | float) and known is not None:
        return units.show(float(value), known.kind, display)
    return "" if value is None else units.degrees(str(value))
