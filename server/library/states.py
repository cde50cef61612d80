"""The states of each kind of record, and the steps from one to the next.

Values, bonds, procedures and the like are drafted and approved. A coupon set is tested, reviewed, then accepted or
rejected; a lot of adhesive is quarantined until somebody releases it. The words are those of shop quality control
(common practice; ISO 9001:2015, 8.5.1 and 8.7).
"""

from __future__ import annotations

from server.library.groups import STATUSES

_FIRST = {"sets": "tested", "lots": "quarantined"}
_GOOD = {"sets": "accepted", "lots": "released"}
SET_STATES = ("tested", "reviewed", "accepted", "rejected")
LOT_STATES = ("quarantined", "released", "opened", "extended", "rejected")
ALL_STATES = tuple(dict.fromkeys((*STATUSES, *SET_STATES, *LOT_STATES)))
IN_WORK = ("draft", "indicative", "provisional", "tested", "reviewed", "quarantined")
"""What waits for a decision: such a revision may be put forward, and be found good."""
FOUND_GOOD = ("approved", "accepted", "released")
_OLD_WORDS = {
    "sets": {"draft": "tested", "indicative": "tested", "provisional": "tested", "approved": "accepted",
             "withdrawn": "rejected"},
    "lots": {"draft": "quarantined", "indicative": "quarantined", "provisional": "quarantined",
             "approved": "released", "on hold": "quarantined", "withdrawn": "rejected"},
}  # fmt: skip
_STEPS = {
    "": {
        "draft": ("on hold", "withdrawn"),
        "indicative": ("on hold", "withdrawn"),
        "provisional": ("on hold", "withdrawn"),
        "approved": ("on hold", "withdrawn", "superseded"),
        "on hold": ("draft", "withdrawn"),
    },
    "sets": {
        "tested": ("reviewed", "rejected"),
        "reviewed": ("tested", "rejected"),
        "accepted": ("rejected",),
        "rejected": ("tested",),
        "on hold": ("tested", "rejected"),
    },
    "lots": {
        "quarantined": ("extended", "rejected"),
        "released": ("opened", "extended", "quarantined", "rejected"),
        "opened": ("extended", "quarantined", "rejected"),
        "extended": ("opened", "extended", "quarantined", "rejected"),
        "rejected": ("quarantined",),
    },
}


def first(group: str) -> str:
    """Return the state in which a revision of ``group`` begins."""
    return _FIRST.get(group, "draft")


def good(group: str) -> str:
    """Return what a revision of ``group`` is once somebody stands for it: approved, accepted or released."""
    return _GOOD.get(group, "approved")


def word(group: str, status: str) -> str:
    """Return a status in the words of its group: older books called every state of sets and lots as of values.

    >>> word("lots", "draft"), word("sets", "approved"), word("values", "draft")
    ('quarantined', 'accepted', 'draft')
    """
    return _OLD_WORDS.get(group, {}).get(status, status)


def steps(group: str, status: str) -> tuple[str, ...]:
    """Return the states to which a person may bring a revision, beside finding it good.

    >>> steps("lots", "released")
    ('opened', 'extended', 'quarantined', 'rejected')
    """
    return _STEPS.get(group, _STEPS[""]).get(status, ())
