"""What the page of a saved check shows of its way to issue: tested and used, what holds it back, who issued it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from server import jobs, sheets
from server.jobs import SavedRevision
from server.library.obstacles import others_who_may
from server.people import CHECKS, Person
from server.storage import Session
from server.web.pages import Boxes


def context(
    session: Session,
    saved: SavedRevision,
    person: Person,
    errors: Mapping[str, str] | None = None,
    values: Mapping[str, str] | None = None,
) -> dict[str, Any]:
    """Return the names that templates/check/_issue.html shows; what keeps this person is told to who may issue."""
    issue = jobs.issue_of(session, saved.id)
    found = [] if issue else jobs.hindrances(session, saved.id, person if person.may(CHECKS) else None)
    display = str(saved.heading["display"])
    found = [replace(each, text=sheets.spoken(sheets.in_units(each.text, display))) for each in found]
    return {
        "hindrances": [each for each in found if each.kind != "difference"],
        "differing": [each for each in found if each.kind == "difference"] if issue is None else _answered(issue),
        "still_open": sum(1 for each in found if each.open),
        "may_issue": issue is None and _issuable(session, person, [each for each in found if each.open]),
        "issue": issue,
        "errors": Boxes(errors or {}),
        "typed": Boxes(values or {}),
    }


def _issuable(session: Session, person: Person, still: Sequence[jobs.Hindrance]) -> bool:
    """Whether nothing holds it back, or only who asks, in a shop where an outside checker may look it over."""
    if not person.may(CHECKS) or any(each.kind != "person" for each in still):
        return False
    return not still or not others_who_may(session, person, CHECKS)


def _answered(issue: jobs.Issue) -> list[Mapping[str, Any]]:
    """The differences of an issued check as they were answered on the day."""
    return [{**each, "answerable": True, "earlier": ""} for each in issue.answers if each["kind"] == "difference"]
