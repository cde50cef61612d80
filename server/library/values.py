"""A record's values are checked by the same models as a document's, so a fault reads the same in both."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from pydantic import ValidationError

from server.documents.faults import faults_of
from server.documents.text import load
from server.errors import DocumentError, Fault
from server.library import fields
from server.library.groups import Group
from server.storage.tables import compact

MOST_CHARACTERS = 50_000
# These belong to the record, not to its values.
_RECORDS_OWN = ("status", "source", "note", "record", "revision")


def check_entry(faults: list[Fault], group: Group, values: Mapping[str, Any]) -> dict[str, Any]:
    """Return ``values`` as typed; faults as ``values.shear_strength`` where the models refuse them."""
    own = [name for name in _RECORDS_OWN if name in values]
    faults += [Fault(f"values.{name}", f"{name} belongs to the record itself; leave it out here.") for name in own]
    try:
        typed = load({name: value for name, value in values.items() if name not in own})
    except DocumentError as error:
        faults += [Fault(f"values.{fault.path}" if fault.path else "values", fault.message) for fault in error.faults]
        return {}
    try:
        group.model.model_validate(typed)
    except ValidationError as error:
        faults += faults_of(error, group.model, ("values",))
        return typed
    text = compact(typed)
    if len(text) > MOST_CHARACTERS:
        faults.append(Fault("values", f"The values have {len(text)} characters; shorten them to {MOST_CHARACTERS}."))
    fields.printable(faults, "values", text)
    return typed
