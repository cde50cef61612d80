"""The shop's heading on every sheet, and its defaults for new jobs."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

from server import storage
from server.errors import DocumentError, Fault
from server.library import fields
from server.storage import Session
from server.storage.tables import Shop as ShopRow

PAPERS = ("A4", "Letter")
DISPLAYS = ("SI", "US")


@dataclass(frozen=True)
class Shop:
    """The shop's name and address as printed, and what a new job starts with."""

    name: str = ""
    address: str = ""
    paper: str = "A4"
    display: str = "SI"


def shop(session: Session) -> Shop:
    """Return the shop's heading; empty, with A4 and SI, until it was entered."""
    row = session.get(ShopRow, 1)
    if row is None:
        return Shop()
    return Shop(name=row.name, address=row.address, paper=row.paper, display=row.display)


def set_shop(
    session: Session,
    *,
    name: str,
    address: str = "",
    paper: str = "A4",
    display: str = "SI",
    made_by: str = "",
    now: datetime | None = None,
) -> Shop:
    """Enter the heading; sheets already saved keep the one they were saved with."""
    faults: list[Fault] = []
    entered = Shop(
        name=fields.line(faults, "name", name, needed="the shop's name as it is to stand on the sheets"),
        address=fields.prose(faults, "address", address, most=500),
        paper=fields.choice(faults, "paper", paper, PAPERS),
        display=fields.choice(faults, "display", display, DISPLAYS),
    )
    made_by = fields.line(faults, "made_by", made_by)
    if faults:
        raise DocumentError(faults)
    with storage.write(session):
        row = session.get(ShopRow, 1)
        if row is None:
            session.add(ShopRow(id=1, **vars(entered)))
        else:
            for column, value in vars(entered).items():
                setattr(row, column, value)
        storage.note(session, at=storage.utc_text(now), who=made_by, what="heading entered", subject="shop")
    return entered
