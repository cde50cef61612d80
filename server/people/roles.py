"""What a person may do, and who that person is."""

from __future__ import annotations

from dataclasses import dataclass, field

READS = "reads"
PREPARES = "prepares"
CHECKS = "checks"
APPROVES = "approves"
KEEPS_THE_BOOK = "keeps the book"
ROLES = (READS, PREPARES, CHECKS, APPROVES, KEEPS_THE_BOOK)

MEANING = {
    READS: "sees jobs, sheets and the library, as everybody does who signs in",
    PREPARES: "enters jobs, checks, coupons and records",
    CHECKS: "looks over checks that somebody else prepared",
    APPROVES: "approves values that somebody else entered",
    KEEPS_THE_BOOK: "adds people, gives roles and one-time codes, keeps the shop's heading",
}


@dataclass(frozen=True)
class Person:
    """Somebody who acts: ``id`` is above 0 for a person who signed in, 0 for the machine that needs no sign-in."""

    id: int
    name: str
    roles: frozenset[str] = field(default_factory=frozenset)

    @property
    def named(self) -> bool:
        """Whether this is a person with a name of their own."""
        return self.id > 0

    def may(self, role: str) -> bool:
        """Return whether the person has ``role``; every role includes reading.

        >>> Person(1, "A", frozenset({PREPARES})).may(READS), Person(1, "A", frozenset({PREPARES})).may(APPROVES)
        (True, False)
        """
        return role == READS or role in self.roles


THIS_MACHINE = Person(0, "this machine", frozenset(ROLES))
"""Whoever sits at the machine, where the program runs without sign-in."""
