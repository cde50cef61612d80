"""Import: first the plan, then, if it is wanted, exactly that. An approval does not come in with a file."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import select

from server import storage
from server.errors import DocumentError, JointError
from server.library import reading
from server.library.groups import ALL
from server.library.import_files import CONTENT, Item, read_file
from server.library.record import NotFoundError, Record
from server.library.records import Draft, checked, store
from server.library.states import first, word
from server.library.values import FOUND
from server.people import Person
from server.storage import Session
from server.storage.tables import Record as RecordRow

ADD, CHANGE, UNCHANGED, REFUSED = "add", "change", "unchanged", "refused"
_COUPON = re.compile(r"values\.coupons\[(\d+)\]\.?(.*)")
_PASSES = 6  # a revision may stand on others further down the file


@dataclass(frozen=True)
class PlanLine:
    """What becomes of one revision in the file; ``line`` is where it stands there."""

    line: int
    group: str
    key: str
    revision: int | None
    act: str
    text: str

    def __str__(self) -> str:
        named = f"{self.key} rev {self.revision}" if self.revision else self.key
        told = f": {self.text}" if self.text else ""
        return f"line {self.line}: {self.act} {named or 'a row without a key'}{told}"


@dataclass(frozen=True)
class Plan:
    """What an import does, or did, line by line."""

    lines: Sequence[PlanLine]
    applied: bool

    def count(self, act: str) -> int:
        """How many lines are added, changed, unchanged or refused."""
        return sum(line.act == act for line in self.lines)

    @property
    def refused(self) -> list[PlanLine]:
        """The lines that are refused, each with its reason."""
        return [line for line in self.lines if line.act == REFUSED]


class _UndoError(Exception):
    """Takes back everything a plan tried out."""


def plan(session: Session, text: str, *, by: Person, name: str = "a file", now: datetime | None = None) -> Plan:
    """Return what importing ``text`` would do; nothing is changed. It is tried out, so applying does the same."""
    items, lines = read_file(text), list[PlanLine]()
    try:
        with storage.write(session):
            lines += _run(session, items, by, name, storage.utc_text(now))
            raise _UndoError
    except _UndoError:
        return Plan(lines, applied=False)


def apply(session: Session, text: str, *, by: Person, name: str = "a file", now: datetime | None = None) -> Plan:
    """Import ``text``: every row that is not refused, all at once or, if the disk fails, none.

    New revisions are drafts, or what else the file says but "approved": a revision that is approved here stays in
    force until somebody approves the new one. ``by`` enters them; who entered and approved them elsewhere is kept as
    the reason.
    """
    items = read_file(text)
    with storage.write(session):
        return Plan(_run(session, items, by, name, storage.utc_text(now)), applied=True)


def _run(session: Session, items: Sequence[Item], by: Person, name: str, at: str) -> list[PlanLine]:
    """Store what can be stored, in the order in which it was entered; what waits for others is tried again."""
    done: dict[int, list[PlanLine]] = {}
    waiting = sorted(range(len(items)), key=lambda place: (items[place].provenance.get("created_at", ""), place))
    for _ in range(_PASSES):
        left = []
        for place in waiting:
            done[place] = _one(session, items[place], by, name, at)
            if done[place][0].act == REFUSED and not items[place].wrong:
                left.append(place)
        if len(left) == len(waiting):
            break
        waiting = left
    return [line for place in range(len(items)) for line in done[place]]


def _one(session: Session, item: Item, by: Person, name: str, at: str) -> list[PlanLine]:
    try:
        if item.wrong:
            raise JointError(item.wrong)
        act, n, text = _store(session, item, by, name, at)
    except DocumentError as error:
        return _refusals(item, error)
    except JointError as error:
        return [_line(item, REFUSED, item.revision, str(error))]
    return [_line(item, act, n, text)]


def _line(item: Item, act: str, n: int | None, text: str, line: int | None = None) -> PlanLine:
    return PlanLine(item.line if line is None else line, item.group, item.key, n, act, text)


def _refusals(item: Item, error: DocumentError) -> list[PlanLine]:
    """One line a row of the file: a fault of a coupon stands where the coupon stands."""
    by_line: dict[int, list[str]] = {}
    for fault in error.faults:
        coupon = _COUPON.fullmatch(fault.path)
        if coupon and int(coupon[1]) < len(item.rows):
            told = f"{coupon[2]}: {fault.message}" if coupon[2] else fault.message
            by_line.setdefault(item.rows[int(coupon[1])], []).append(told)
        else:
            by_line.setdefault(item.line, []).append(str(fault))
    return [_line(item, REFUSED, item.revision, "; ".join(told), line) for line, told in sorted(by_line.items())]


def _store(session: Session, item: Item, by: Person, name: str, at: str) -> tuple[str, int, str]:
    if item.group not in ALL:
        raise JointError(f"{item.group[:40]!r} is no group; choose one of {', '.join(ALL)}.")
    if not reading.is_key(item.key):
        raise JointError(f"{item.key[:40]!r} cannot be a key; use letters, digits, hyphens, dots or underscores.")
    old = _existing(session, item)
    base = old[-1] if old else None
    content = checked(session, ALL[item.group], _draft(item, base, by, name), [])
    for each in old:
        if (item.revision in (None, each.revision) or each is base) and _same(content, each):
            return UNCHANGED, each.revision, ""
    n = _next(item, base)
    if base is None:
        row = RecordRow(key=item.key, group=item.group, created_at=at)
        session.add(row)
        session.flush()
    else:
        row = session.scalars(select(RecordRow).where(RecordRow.key == item.key)).one()
    store(session, row, n, content, at)
    return (ADD if base is None else CHANGE), n, _told(item, base, content)


def _existing(session: Session, item: Item) -> list[Record]:
    try:
        found = reading.revisions(session, item.key)
    except NotFoundError:
        return []
    if found[0].group != item.group:
        raise JointError(f"{item.key} is {ALL[found[0].group].one} here; give it another key.")
    return found[::-1]


def _next(item: Item, base: Record | None) -> int:
    """The number that the revision gets here."""
    newest = base.newest if base is not None else 0
    if item.revision is None or item.revision == newest + 1:
        return newest + 1
    if base is None and item.alone:  # a table holds the newest revision of each record and nothing before
        return 1
    if item.revision > newest + 1:
        raise JointError(f"revision {item.revision - 1} comes before it and is neither here nor in the file.")
    if item.last and item.revision == newest:
        return newest + 1
    if item.last:
        raise JointError(
            f"it was taken from revision {item.revision}; revision {newest} was saved here since. Look at that one, "
            "and enter the change again."
        )
    raise JointError(f"revision {item.revision} reads otherwise here; a saved revision is never changed.")


def _draft(item: Item, base: Record | None, by: Person, name: str) -> Draft:
    """What the revision is to hold: what the file says, and where it says nothing, what stands here."""
    said: dict[str, Any] = dict(item.content)
    if base is not None:
        kept = {part: getattr(base, part) for part in CONTENT}
        if item.rows:
            said["values"] = {**base.values, **said["values"]}
        elif "coupons" in base.values and "coupons" not in said.get("values", {"coupons": 0}):
            said["values"] = {**said["values"], "coupons": base.values["coupons"]}
        said = kept | said
    return Draft(
        name=said.get("name", ""),
        values=said.get("values", {}),
        source=said.get("source", ""),
        status=_status(item),
        note=said.get("note", ""),
        details=said.get("details"),
        links=said.get("links"),
        chain=said.get("chain"),
        made_by=by.name,
        reason=_provenance(item, name),
    )


def _status(item: Item) -> str:
    status = word(item.group, item.status)
    if item.group in ("sets", "lots"):
        return status if status == "rejected" else first(item.group)
    if status == "approved" or (item.group == "values" and status not in ("on hold", "withdrawn")):
        return "draft"
    return status


def _provenance(item: Item, name: str) -> str:
    told = item.provenance
    words = [f"Imported from {name}"]
    if told.get("made_by") or told.get("created_at"):
        words.append(f"entered there by {told.get('made_by') or 'somebody'} on {told.get('created_at', '?')[:10]}")
    if told.get("approved_by"):
        words.append(f"approved there by {told['approved_by']} on {told.get('approved_at', '')[:10]}")
    if told.get("reason"):
        words.append(f"reason there: {told['reason']}")
    return "; ".join(words)


def _told(item: Item, base: Record | None, content: dict[str, Any]) -> str:
    words = []
    if item.status == "approved" and content["status"] == "draft":
        words.append("comes in as a draft; somebody here approves it")
    if base is not None:
        changed = [part for part in CONTENT if not _alike(part, content, base)]
        words.append(f"changes {', '.join(changed)}" if changed else "")
        if base.in_force is not None and base.in_force_status == "approved":
            words.append(f"approved revision {base.in_force} stays in force")
    return "; ".join(word for word in words if word)


def _same(content: dict[str, Any], record: Record) -> bool:
    return all(_alike(part, content, record) for part in CONTENT)


def _alike(part: str, content: dict[str, Any], record: Record) -> bool:
    if part == "values":
        return _values(content["entry"]) == _values(record.values)
    if part == "links":
        return dict(content["links"]) == {role: [link.key, link.revision] for role, link in record.links.items()}
    if part == "chain":
        return [_factor(each) for each in content["chain"]] == [
            (each.name, each.value, each.source, each.evidence) for each in record.chain
        ]
    return bool(content[part] == getattr(record, part))


def _values(entry: Any) -> dict[str, Any]:
    return {name: value for name, value in entry.items() if name != FOUND}


def _factor(stored: Any) -> tuple[Any, ...]:
    return stored["name"], stored["value"], stored["source"], stored["evidence"]


def summary(made: Plan) -> Iterable[str]:
    """Yield the plan for the terminal: every line that changes something or is refused, then the counts."""
    for line in made.lines:
        if line.act != UNCHANGED:
            yield str(line)
    done = "Imported" if made.applied else "Would be imported"
    yield (
        f"{done}: {made.count(ADD)} added, {made.count(CHANGE)} changed, {made.count(UNCHANGED)} unchanged, "
        f"{made.count(REFUSED)} refused."
    )
