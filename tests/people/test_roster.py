from __future__ import annotations

import pytest
from sqlalchemy import text
from sqlalchemy.exc import IntegrityError

from server import people, storage
from server.errors import DocumentError
from server.people import NoPersonError, Person
from tests.people.conftest import NOW, Make

ALICE = {"name": "Alice Adze", "sign_in_name": "alice", "roles": [people.READS]}


def faults(error: pytest.ExceptionInfo[DocumentError]) -> dict[str, str]:
    return {fault.path: fault.message for fault in error.value.faults}


def test_every_role_includes_reading_and_no_other() -> None:
    for role in people.ROLES:
        person = Person(1, "A", frozenset({role}))
        assert [each for each in people.ROLES if person.may(each)] == list(dict.fromkeys([people.READS, role]))
    assert not Person(0, "x").named
    assert Person(1, "x").named


def test_the_first_person_keeps_the_book(session: storage.Session) -> None:
    with pytest.raises(DocumentError) as refused:
        people.add(session, **ALICE)
    assert list(faults(refused)) == ["roles"]
    member, _ = people.add(session, **ALICE | {"roles": [people.KEEPS_THE_BOOK]}, now=NOW)
    assert member.roles == (people.READS, people.KEEPS_THE_BOOK)
    assert not member.has_password
    assert member.code_until == "2026-12-02T09:00:00Z"


@pytest.mark.parametrize(
    ("typed", "path"),
    [
        ({"name": ""}, "name"), ({"name": "42"}, "name"), ({"name": "x" * 81}, "name"), ({"name": "A\u202eb"}, "name"),
        ({"name": "A\x07b"}, "name"), ({"name": "ann  EXAMPLE"}, "name"), ({"sign_in_name": ""}, "sign_in_name"),
        ({"sign_in_name": "a"}, "sign_in_name"), ({"sign_in_name": "al ice"}, "sign_in_name"),
        ({"sign_in_name": "älice"}, "sign_in_name"), ({"sign_in_name": "ANN"}, "sign_in_name"),
        ({"sign_in_name": "-al"}, "sign_in_name"), ({"roles": ["owns the place"]}, "roles"),
    ],
)  # fmt: skip
def test_a_person_that_cannot_be_is_refused_by_field(
    session: storage.Session, make: Make, typed: dict[str, object], path: str
) -> None:
    make()
    with pytest.raises(DocumentError) as refused:
        people.add(session, **ALICE | typed)  # type: ignore[arg-type]
    assert list(faults(refused)) == [path]
    assert len(people.members(session)) == 1


def test_a_name_that_no_sheet_can_print_is_refused(session: storage.Session, make: Make) -> None:
    make()
    with pytest.raises(DocumentError) as refused:
        people.add(session, **ALICE, unprintable=lambda name: [sign for sign in name if sign == "z"])
    assert "sheet cannot print" in faults(refused)["name"]


def test_nobody_is_deleted_renamed_or_replaced(session: storage.Session, make: Make) -> None:
    ann = make()
    for change in (
        "DELETE FROM people",
        "UPDATE people SET name = 'Bo'",
        "UPDATE people SET name = 'ANN EXAMPLE'",
        "UPDATE people SET sign_in_name = 'bo'",
        "UPDATE people SET id = 77",
        "INSERT OR REPLACE INTO people SELECT id, 'Bo', 'bo', roles, NULL, created_at, NULL FROM people",
        "INSERT OR REPLACE INTO people SELECT 9, name, 'bo', roles, NULL, created_at, NULL FROM people",
    ):
        with pytest.raises(IntegrityError), storage.write(session):
            session.execute(text(change))
    assert people.members(session) == [ann]


class TestRoles:
    def test_roles_change_and_the_trail_says_from_what_to_what(self, session: storage.Session, make: Make) -> None:
        make()
        bo = make("Bo Builder", people.PREPARES)
        people.set_roles(session, bo.id, [people.CHECKS, people.APPROVES], by="Ann Example", now=NOW)
        assert people.member(session, bo.id).roles == (people.READS, people.CHECKS, people.APPROVES)
        line = storage.lines(session, subject="person bo")[0]
        assert (line.who, line.what) == ("Ann Example", "roles changed")
        assert line.detail == {"before": ["reads", "prepares"], "after": ["reads", "checks", "approves"]}

    def test_somebody_always_keeps_the_book(self, session: storage.Session, make: Make) -> None:
        ann, bo = make(), make("Bo Builder", people.KEEPS_THE_BOOK)
        people.set_roles(session, ann.id, [people.PREPARES])
        for act in (lambda: people.set_roles(session, bo.id, []), lambda: people.switch_off(session, bo.id)):
            with pytest.raises(DocumentError, match="give somebody else that role first"):
                act()
        people.set_roles(session, ann.id, [people.KEEPS_THE_BOOK])
        people.switch_off(session, bo.id)
        with pytest.raises(DocumentError):
            people.switch_off(session, ann.id)  # one who is switched off keeps nothing

    def test_new_roles_hold_in_sessions_that_are_open(self, session: storage.Session, make: Make) -> None:
        make()
        bo = make("Bo Builder", people.PREPARES)
        token = people.start(session, bo.id, now=NOW)
        people.set_roles(session, bo.id, [people.CHECKS])
        visit = people.by_session(session, token, now=NOW)
        assert visit is not None
        assert visit.person.roles == {people.READS, people.CHECKS}


class TestSwitchedOff:
    def test_sessions_tokens_and_codes_end_at_once(self, session: storage.Session, make: Make) -> None:
        make()
        bo = make("Bo Builder", people.PREPARES)
        token, of_program = people.start(session, bo.id, now=NOW), people.make_token(session, bo.id, "script")
        people.give_code(session, bo.id, now=NOW)
        people.switch_off(session, bo.id, by="Ann Example", now=NOW)
        off = people.member(session, bo.id)
        assert (off.off_at, off.code_until, off.name) == ("2026-12-01T09:00:00Z", None, "Bo Builder")
        people.switch_on(session, bo.id)
        assert people.by_session(session, token, now=NOW) is None
        assert people.by_token(session, of_program, now=NOW) is None

    def test_the_name_stays_taken(self, session: storage.Session, make: Make) -> None:
        make()
        bo = make("Bo Builder", people.PREPARES)
        people.switch_off(session, bo.id)
        with pytest.raises(DocumentError) as refused:
            people.add(session, name="Bo Builder", sign_in_name="bo", roles=[])
        assert set(faults(refused)) == {"name", "sign_in_name"}

    def test_the_list_has_those_at_work_first(self, session: storage.Session, make: Make) -> None:
        cy, ann = make("Cy Cutter"), make()
        people.switch_off(session, ann.id)
        assert [each.id for each in people.members(session)] == [cy.id, ann.id]


@pytest.mark.parametrize("person_id", [0, -1, 5, 2**60])
def test_a_missing_person_is_said_in_words(session: storage.Session, make: Make, person_id: int) -> None:
    make()
    for act in (people.member, people.switch_off, people.switch_on, people.give_code):
        with pytest.raises(NoPersonError, match="no person with the number"):
            act(session, person_id)
    with pytest.raises(NoPersonError):
        people.find(session, "nobody")
