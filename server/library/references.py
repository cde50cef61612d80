"""From ``{"record": KEY, "revision": n}`` in a document to the values of that record."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from server import documents
from server.documents import Document, Reference
from server.errors import DocumentError, Fault
from server.library import reading
from server.library.coupon_sets import in_words
from server.library.groups import ALL, BY_SECTION, STOPPED, Group
from server.library.lot_life import lot_state
from server.library.nearest import nearest_words
from server.library.properties import HYBRID, HYBRID_FIELDS
from server.library.record import Factor, Link, NotFoundError, Record
from server.storage import Session


def resolve(session: Session, document: Document) -> Document:
    """Return ``document`` with every reference filled: the record's values with record, revision, source and status.

    Without a revision a reference takes the revision in force: the newest approved one, or, where a later revision put
    the record on hold, withdrew or superseded it, that one, so that the check sees it.

    Raises
    ------
    DocumentError
        With every reference that cannot be filled: unknown key, another group's key, no such revision, none in force.
    """
    faults: list[Fault] = []
    filled: dict[str, dict[str, dict[str, Any]]] = {}
    for section, name, reference in references(document):
        path = f"{section}.{name}"
        record = _find(session, path, BY_SECTION[section], reference, faults)
        if record is not None:
            filled.setdefault(section, {})[name] = assembled(session, record)
    held: dict[str, Document] = {}
    for at, inner in document.held.items():
        try:
            held[at] = resolve(session, inner)
        except DocumentError as error:
            faults += [Fault(f"{at}.{fault.path}", fault.message) for fault in error.faults]
    if faults:
        raise DocumentError(faults)
    whole = documents.fill(document, filled) if filled else document
    return whole.model_copy(update=held) if held else whole


def references(document: Document) -> Iterator[tuple[str, str, Reference]]:
    """Yield section, name and reference of each entry that stands in the library."""
    for section in BY_SECTION:
        for name, value in getattr(document, section).items():
            if isinstance(value, Reference):
                yield section, name, value


def entry(record: Record) -> dict[str, Any]:
    """Return the record's values as a document holds them, with where they come from and what they count as today."""
    found: dict[str, Any] = {**record.values, "record": record.key, "revision": record.revision}
    found["status"] = standing(record)
    if record.source:
        found["source"] = record.source
    if record.note:
        found["note"] = record.note
    if record.chain:
        found["factors"] = {**record.values.get("factors", {}), **{each.name: each.value for each in record.chain}}
    return found


def assembled(session: Session, record: Record) -> dict[str, Any]:
    """Return ``entry`` with every pinned value in its place, and under "lineage" how each was come by.

    It counts for no more than the least of its pinned values does today.
    """
    found = entry(record)
    if not record.pins:
        return found
    pinned = reading.many(session, record.pins.values())
    lineage = {at: _lineage(pinned[link]) for at, link in record.pins.items()}
    for at, link in record.pins.items():
        head, _, tail = at.partition(".")
        value = pinned[link].values["value"]
        found[head] = {**found.get(head, {}), tail: value} if tail else value
        if pinned[link].values["property"] == HYBRID:  # holds for the fasteners that were tested, whatever was typed
            found |= {name: pinned[link].values[name] for name in HYBRID_FIELDS if name in pinned[link].values}
    found["status"] = worst([found["status"], *(each["status"] for each in lineage.values())])
    found["lineage"] = lineage
    if "source" not in found:
        found["source"] = "; ".join(f"{link} ({pinned[link].name})" for link in record.pins.values())[:5000]
    return found


def _lineage(value: Record) -> dict[str, Any]:
    """The way from a value back to its coupons, as a document carries it."""
    found: dict[str, Any] = {
        "record": value.key,
        "revision": value.revision,
        "property": value.values["property"],
        "origin": value.values["origin"],
        "status": standing(value),
    }
    behind = value.links.get("set")
    if behind is not None:
        shown = value.values["found"]
        found |= {
            "coupon_set": behind.key,
            "coupon_set_revision": behind.revision,
            "coupons": shown["n"],
            "excluded": shown["excluded"],
            "statistic": in_words(shown["statistic"]),
        }
    if value.approval is not None:
        found |= {"approved_by": value.approval.by, "approved_at": value.approval.at}
        if value.approval.outside_checker:
            found["outside_checker"] = f"{value.approval.outside_checker}, {value.approval.checked_on}"
    return found


_FROM_BEST = ("approved", "superseded", "provisional", "indicative", "draft", "on hold", "withdrawn")


def worst(statuses: Sequence[str]) -> str:
    """Return the status that counts for least.

    >>> worst(["approved", "provisional", "superseded"])
    'provisional'
    """
    return max(statuses, key=_FROM_BEST.index)


def multiplication(chain: Sequence[Factor], strength: str = "") -> str:
    """Return a chain as one line of multiplication, each factor once.

    >>> multiplication([Factor("wet", 0.7), Factor("long term", 0.6)], "4.2 MPa")
    '4.2 MPa × 0.7 (wet) × 0.6 (long term) = 4.2 MPa × 0.42'
    """
    if not chain:
        return strength
    factors = " × ".join(f"{each.value:.4g} ({each.name})" for each in chain)
    product = 1.0
    for each in chain:
        product *= each.value
    before = f"{strength} × " if strength else ""
    return f"{before}{factors} = {before}{product:.4g}"


def pinned_links(record: Record) -> list[Link]:
    """The value revisions that a record pins, each once."""
    return list(dict.fromkeys(record.pins.values()))


def standing(record: Record) -> str:
    """Return what a revision counts as today: its own status, unless a later revision decided otherwise.

    A later hold or withdrawal stops the older revisions too. A later approval makes an older approved or provisional
    revision superseded; a draft or indicative one stays what it was, as superseded would count for more.
    """
    if record.group == "lots":
        return lot_state(record)
    later = record.in_force is not None and record.in_force > record.revision
    if later and record.in_force_status is not None and record.in_force_status in STOPPED:
        return record.in_force_status
    return "superseded" if later and record.status in ("approved", "provisional") else record.status


def _find(session: Session, path: str, group: Group, reference: Reference, faults: list[Fault]) -> Record | None:
    key, revision = reference.record, reference.revision
    try:
        newest = reading.get(session, key)
    except NotFoundError:
        message = f"there is no record {key!r} among the {group.name}. {nearest_words(session, key, group.name)}"
        faults.append(Fault(f"{path}.record", message))
        return None
    if newest.group != group.name:
        message = f"{newest.key} is {ALL[newest.group].one}; {group.one} is wanted here. "
        faults.append(Fault(f"{path}.record", message + nearest_words(session, key, group.name)))
        return None
    chosen = newest.in_force if revision is None else revision
    if chosen is None:
        message = (
            f"no revision of {newest.key} is approved (revision {newest.newest} is {newest.status}). Have it approved, "
            f'or name a revision: {{"record": "{newest.key}", "revision": {newest.newest}}}.'
        )
        faults.append(Fault(f"{path}.record", message))
        return None
    if not 1 <= chosen <= newest.newest:
        message = f"{newest.key} has no revision {chosen}; it has revisions 1 to {newest.newest}."
        faults.append(Fault(f"{path}.revision", message))
        return None
    return newest if chosen == newest.revision else reading.get(session, key, chosen)
