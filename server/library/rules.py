"""The shop's rules for values: how many coupons make one provisional or ready for approval, and how much may peel."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

from server import storage
from server.errors import DocumentError, Fault
from server.library import fields
from server.library.record import Record
from server.storage import Session
from server.storage.evidence_tables import RulesRow


@dataclass(frozen=True)
class Rules:
    """Fewest coupons of a provisional and of an approved value, and the most adhesive failure on average [%].

    The defaults are common practice: 5 coupons for a comparison, 10 for design, 20 to 25 % adhesive failure at most.
    """

    provisional_from: int = 5
    approved_from: int = 10
    adhesive_share: float = 25.0


def rules(session: Session) -> Rules:
    """Return the shop's rules; the defaults until others were set."""
    row = session.get(RulesRow, 1)
    return Rules() if row is None else Rules(row.provisional_from, row.approved_from, row.adhesive_share)


def set_rules(
    session: Session,
    *,
    provisional_from: int,
    approved_from: int,
    adhesive_share: float,
    made_by: str = "",
    now: datetime | None = None,
) -> Rules:
    """Set the rules; what is approved already keeps its approval."""
    faults: list[Fault] = []
    who = fields.line(faults, "made_by", made_by)
    if not 2 <= provisional_from <= 1000:
        faults.append(Fault("provisional_from", f"{provisional_from} is not accepted; enter 2 to 1000 coupons."))
    if not provisional_from <= approved_from <= 1000:
        message = f"{approved_from} is not accepted; enter {provisional_from} (provisional) to 1000 coupons."
        faults.append(Fault("approved_from", message))
    if not 0 <= adhesive_share <= 100:
        faults.append(Fault("adhesive_share", f"{adhesive_share:g} is not accepted; enter 0 to 100 %."))
    if faults:
        raise DocumentError(faults)
    entered = Rules(provisional_from, approved_from, adhesive_share)
    with storage.write(session):
        before = rules(session)
        row = session.get(RulesRow, 1) or RulesRow(id=1)
        for name, value in vars(entered).items():
            setattr(row, name, value)
        session.add(row)
        moved = {name: [old, vars(entered)[name]] for name, old in vars(before).items() if old != vars(entered)[name]}
        storage.note(session, at=storage.utc_text(now), who=who, what="rules set", subject="library", detail=moved)
    return entered


def status_by_number(record: Record, rules: Rules) -> str:
    """Return what a value counts as before anybody approved it: "indicative" or "provisional".

    A value from coupons by their number; a published one is provisional; a maker's data sheet only ever indicates.
    """
    origin = record.values["origin"]
    if origin == "coupon set":
        return "provisional" if record.values["found"]["n"] >= rules.provisional_from else "indicative"
    return "provisional" if origin == "published" else "indicative"
