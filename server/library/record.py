"""What the library hands out: a record's revision, its links, its chain of factors, who approved it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from server.errors import JointError
from server.library.properties import PINNED

MOST = 1_000_000_000  # beyond any revision or page; SQLite refuses numbers of more than 64 bits


class NotFoundError(JointError):
    """There is no such record, revision, job or check."""


@dataclass(frozen=True)
class Link:
    """One revision of a record that another stands on."""

    key: str
    revision: int

    def __str__(self) -> str:
        return f"{self.key} rev {self.revision}"


@dataclass(frozen=True)
class Factor:
    """One factor of a knock-down chain; ``dry`` and ``conditioned`` are the sets that a retention was found from."""

    name: str
    value: float
    source: str = ""
    evidence: str = ""
    dry: Link | None = None
    conditioned: Link | None = None


@dataclass(frozen=True)
class Approval:
    """Who approved a revision, and when; an outside checker, with the day, where the shop has one person only."""

    by: str
    at: str
    outside_checker: str = ""
    checked_on: str = ""
    note: str = ""
    invented: bool = False


@dataclass(frozen=True)
class Act:
    """One step of a revision to a status: who, when, why."""

    status: str
    who: str
    at: str
    reason: str
    detail: Mapping[str, Any]


@dataclass(frozen=True)
class Record:
    """One revision of a record, with the status that its last act gave it.

    ``newest`` is the record's last revision; ``in_force`` the one that a reference without a revision takes, with its
    status (None: no revision was ever approved, put on hold, withdrawn or superseded). ``approval`` is the last one
    this revision had (of a set its acceptance, of a lot its release), whatever became of it since; ``acted`` is what
    was told with its acts, such as the day a lot was opened.
    """

    key: str
    group: str
    revision: int
    name: str
    status: str
    values: Mapping[str, Any]
    details: Mapping[str, str]
    source: str
    note: str
    made_by: str
    reason: str
    created_at: str
    newest: int
    in_force: int | None
    in_force_status: str | None
    links: Mapping[str, Link] = field(default_factory=dict)
    chain: tuple[Factor, ...] = ()
    approval: Approval | None = None
    put_forward: bool = False
    acted: Mapping[str, Any] = field(default_factory=dict)
    revision_id: int = 0

    @property
    def itself(self) -> Link:
        """The link that names this revision."""
        return Link(self.key, self.revision)

    @property
    def pins(self) -> dict[str, Link]:
        """The pinned value revisions, by the field of an entry that each supplies."""
        return {role.removeprefix(PINNED): target for role, target in self.links.items() if role.startswith(PINNED)}


@dataclass(frozen=True)
class Found:
    """One page of a search, and how many there are in all."""

    records: Sequence[Record]
    total: int
