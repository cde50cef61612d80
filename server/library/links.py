"""Links between records and chains of factors: read as given, checked against what the library holds."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from pydantic import ValidationError

from server.documents import evidence
from server.documents.faults import faults_of
from server.errors import Fault
from server.library import fields, reading
from server.library.groups import ALL, Group
from server.library.properties import PINNED, PROPERTIES
from server.library.record import Factor, Link, NotFoundError, Record
from server.library.retention import retention
from server.storage import Session

MOST_FACTORS = 20
Given = Link | Mapping[str, Any] | Sequence[Any] | None


def read_links(
    session: Session, faults: list[Fault], group: Group, given: Mapping[str, Given]
) -> dict[str, tuple[Link, Record]]:
    """Return the links of a record with their targets; without a revision, the one in force, or else the newest
    (of a coupon set the newest).

    Faults stand at ``links.ROLE``: a role the group does not have, a record that is not there, one of another group, a
    value of another property than it is pinned for.
    """
    roles = group.links | dict.fromkeys(group.pins, "values")
    found: dict[str, tuple[Link, Record]] = {}
    for role, target in given.items():
        path = f"links.{role[:60]}"
        if role not in roles:
            faults.append(Fault(path, f"{group.one} has no such link; it has {', '.join(roles) or 'none'}."))
            continue
        record = _target(session, faults, path, roles[role], target)
        if record is None:
            continue
        wanted = group.pins.get(role)
        if wanted is not None and record.values.get("property") != wanted:
            faults.append(
                Fault(path, f"{record.itself} is a value of {record.values.get('property')}; {wanted} is wanted here.")
            )
            continue
        found[role] = (record.itself, record)
    return found


def _target(session: Session, faults: list[Fault], path: str, wanted: str, given: Given) -> Record | None:
    key, revision = _key_of(given)
    if not key:
        return None
    try:
        record = reading.get(session, key)
        # Of a coupon set the newest counts, accepted or not: a value is found from it before both are judged.
        chosen = revision or (None if wanted == "sets" else record.in_force) or record.newest
        record = record if chosen == record.revision else reading.get(session, key, chosen)
    except NotFoundError as error:
        faults.append(Fault(path, str(error)))
        return None
    if record.group != wanted:
        faults.append(Fault(path, f"{record.key} is {ALL[record.group].one}; {ALL[wanted].one} is wanted here."))
        return None
    return record


def _key_of(given: Given) -> tuple[str, int | None]:
    if given is None:
        return "", None
    if isinstance(given, Link):
        return given.key, given.revision
    if isinstance(given, Mapping):
        key, revision = given.get("record", ""), given.get("revision")
    elif isinstance(given, list | tuple):
        key, revision = (*given, None, None)[:2]
    else:
        key, revision = given, None
    number = revision if isinstance(revision, int) and not isinstance(revision, bool) else None
    if isinstance(revision, str) and revision.strip().isdecimal() and len(revision.strip()) < 10:
        number = int(revision)
    return (key.strip() if isinstance(key, str) else "?"), number


def read_chain(
    session: Session,
    faults: list[Fault],
    given: Sequence[Factor | Mapping[str, Any]],
    entry: Mapping[str, Any],
    pinned: Sequence[Record],
) -> list[dict[str, Any]]:
    """Return the chain as it is kept: each factor once, each with its source and evidence.

    A factor found from a pair of coupon sets takes its value from the pair and may stand here once; it is refused where
    the pinned value itself was found from the conditioned set, as the loss would then be counted twice.
    """
    if len(given) > MOST_FACTORS:
        faults.append(Fault("chain", f"{len(given)} factors; at most {MOST_FACTORS} are kept."))
        return []
    plain = entry.get("factors")
    typed = {str(name).casefold() for name in plain} if isinstance(plain, Mapping) else set()
    kept: list[dict[str, Any]] = []
    names, pairs = set[str](), set[frozenset[str]]()
    for place, each in enumerate(given):
        path = f"chain[{place}]"
        factor = _factor(faults, path, each)
        if factor is None:
            continue
        name = factor.name.casefold()
        if name in names or name in typed:
            faults.append(Fault(f"{path}.name", f"{factor.name!r} is multiplied already; each factor stands once."))
        names.add(name)
        kept.append(_checked(session, faults, path, factor, pairs, pinned))
    return kept


def _factor(faults: list[Fault], path: str, given: Factor | Mapping[str, Any]) -> evidence.Factor | None:
    raw: Any = given
    if isinstance(given, Factor):
        raw = {"name": given.name, "value": given.value, "source": given.source, "evidence": given.evidence}
        raw |= {role: (pair.key, pair.revision) for role in ("dry", "conditioned") if (pair := getattr(given, role))}
    try:
        return evidence.Factor.model_validate(raw)
    except ValidationError as error:
        faults += faults_of(error, evidence.Factor, (path,))
        return None


def _checked(
    session: Session,
    faults: list[Fault],
    path: str,
    factor: evidence.Factor,
    pairs: set[frozenset[str]],
    pinned: Sequence[Record],
) -> dict[str, Any]:
    source = fields.line(
        faults, f"{path}.source", factor.source, needed="where the factor comes from, such as own tests or a guide"
    )
    words = fields.prose(faults, f"{path}.evidence", factor.evidence)
    kept: dict[str, Any] = {"name": factor.name, "value": factor.value, "source": source, "evidence": words}
    if factor.dry is None and factor.conditioned is None:
        if factor.value is None:
            faults.append(Fault(f"{path}.value", "Missing; enter the factor, such as 0.8, or the pair of sets."))
        if not words:
            message = "What shows it? Name the tests, the table or the reasoning that this factor rests on."
            faults.append(Fault(f"{path}.evidence", message))
        return kept
    if factor.dry is None or factor.conditioned is None:
        lacking = "dry" if factor.dry is None else "conditioned"
        faults.append(Fault(f"{path}.{lacking}", "Missing; a retention is found from a dry and a conditioned set."))
        return kept
    pair = frozenset((factor.dry[0].upper(), factor.conditioned[0].upper()))
    if pair in pairs:
        faults.append(Fault(path, f"The pair {' and '.join(sorted(pair))} is multiplied already; it stands once."))
    pairs.add(pair)
    return kept | _retained(session, faults, path, factor, pinned)


def _retained(
    session: Session, faults: list[Fault], path: str, factor: evidence.Factor, pinned: Sequence[Record]
) -> dict[str, Any]:
    found = {}
    for role in ("dry", "conditioned"):
        record = _target(session, faults, f"{path}.{role}", "sets", getattr(factor, role))
        if record is None:
            return {}
        found[role] = record
    twice = [each for each in pinned if _set_of(each) == found["conditioned"].key]
    if twice:
        message = (
            f"{twice[0].itself} was itself found from the conditioned set {found['conditioned'].key}: this factor "
            "would count the loss twice. Pin the value of the dry set, or leave the factor out."
        )
        faults.append(Fault(path, message))
    kept = retention(faults, path, found["dry"], found["conditioned"])
    if kept is None:
        return {}
    value = kept.factor
    if factor.value is not None:
        if factor.value > value * 1.0005:
            message = f"{factor.value:g} is more than the pair shows ({value:.3g}); enter that or less."
            faults.append(Fault(f"{path}.value", message))
        value = factor.value
    pair = {role: [record.key, record.revision] for role, record in found.items()}
    return {"value": value, **pair}


def _set_of(value: Record) -> str:
    behind = value.links.get("set")
    return "" if behind is None else behind.key


def pinned_records(links: Mapping[str, tuple[Link, Record]]) -> dict[str, Record]:
    """The pinned values by the field of the entry that each supplies."""
    return {role.removeprefix(PINNED): record for role, (_, record) in links.items() if role.startswith(PINNED)}


def placeholders(entry: Mapping[str, Any], fields_pinned: Sequence[str], faults: list[Fault]) -> dict[str, Any]:
    """``entry`` with a number in every pinned field, for the models; a typed number there is a fault."""
    filled: dict[str, Any] = dict(entry)
    for at in fields_pinned:
        head, _, tail = at.partition(".")
        inner = filled.get(head)
        if (tail and isinstance(inner, Mapping) and tail in inner) or (not tail and head in filled):
            message = "is typed here and pinned to a value record too; keep one of them."
            faults.append(Fault(f"values.{at}", message))
            continue
        filled[head] = {**(inner if isinstance(inner, Mapping) else {}), tail: 1.0} if tail else 1.0
    return filled


def value_kind(name: object) -> str:
    """The unit kind of a property; '' for one that is not known."""
    known = PROPERTIES.get(str(name))
    return known.kind if known else ""
