"""Ways in: each lets in who should get in, nobody else, and says the same to all others."""

from __future__ import annotations

from datetime import timedelta

import pytest
from sqlalchemy import text

from server import people, storage
from server.errors import DocumentError
from server.people import Browser, HeldError, SignedIn, SignInError
from tests.people.conftest import HERE, NOW, PASSWORD, Make

OTHER = "nine sharp chisels"


def enter(session: storage.Session, name: str = "ann", password: str = PASSWORD, **more: object) -> SignedIn:
    given = {"browser": HERE, "now": NOW} | more
    return people.sign_in(session, sign_in_name=name, password=password, **given)  # type: ignore[arg-type]


def paths(error: DocumentError) -> list[str]:
    return [fault.path for fault in error.faults]


class TestPassword:
    def test_name_and_password_let_a_person_in(self, session: storage.Session, make: Make) -> None:
        ann = make()
        who = enter(session, " ANN ")
        assert who.person == ann.person
        assert people.by_session(session, who.token, now=NOW) is not None

    @pytest.mark.parametrize(
        ("name", "password"),
        [("ann", OTHER), ("ann", ""), ("bo", PASSWORD), ("", ""), ("änn", PASSWORD), ("a\x00", "")],
    )
    def test_what_does_not_fit_is_refused_in_the_same_words(
        self, session: storage.Session, make: Make, name: str, password: str
    ) -> None:
        make()
        with pytest.raises(SignInError, match=r"^The name and the password do not fit\."):
            enter(session, name, password)

    def test_a_person_switched_off_or_without_password_is_refused_in_the_same_words(
        self, session: storage.Session, make: Make
    ) -> None:
        make()
        bo = make("Bo Builder", people.READS)
        people.switch_off(session, bo.id, by="test", now=NOW)
        people.add(session, name="Cy Cutter", sign_in_name="cy", roles=(), now=NOW)
        for name in ("bo", "cy"):
            with pytest.raises(SignInError, match=r"^The name and the password do not fit\."):
                enter(session, name)

    def test_secrets_are_nowhere_in_the_record_book(self, session: storage.Session, make: Make) -> None:
        make()
        who = enter(session)
        token = people.make_token(session, who.person.id, "script", now=NOW)
        code = people.give_code(session, who.person.id, now=NOW)
        held = "\n".join(session.connection().connection.driver_connection.iterdump())  # type: ignore[union-attr]
        assert "Ann Example" in held
        for secret in (PASSWORD, who.token, token, code.code, code.code.replace("-", "")):
            assert secret not in held

    def test_an_older_hash_is_renewed_at_the_sign_in(self, session: storage.Session, make: Make) -> None:
        from argon2 import PasswordHasher

        make()
        old = PasswordHasher(time_cost=1, memory_cost=8192, parallelism=1).hash(PASSWORD)
        with storage.write(session):
            session.execute(text("UPDATE people SET password_hash = :old"), {"old": old})
        enter(session)
        assert "m=19456,t=2,p=1" in str(session.scalar(text("SELECT password_hash FROM people")))
        enter(session)


class TestGuessing:
    def test_after_five_tries_a_name_has_to_wait_and_longer_each_time(
        self, session: storage.Session, make: Make
    ) -> None:
        make()
        for _ in range(5):
            with pytest.raises(SignInError):
                enter(session, password=OTHER)
        with pytest.raises(HeldError) as held:
            enter(session)  # also with the right password, so that a guess learns nothing
        assert held.value.seconds == 30
        later = NOW + timedelta(seconds=31)
        with pytest.raises(SignInError, match="do not fit"):
            enter(session, password=OTHER, now=later)
        with pytest.raises(HeldError) as held:
            enter(session, now=later + timedelta(seconds=31))
        assert held.value.seconds == 29
        assert enter(session, now=later + timedelta(seconds=61)).token

    def test_a_name_nobody_has_waits_the_same(self, session: storage.Session, make: Make) -> None:
        make()
        for _ in range(5):
            with pytest.raises(SignInError):
                enter(session, "nobody", OTHER)
        with pytest.raises(HeldError, match="Wait 30 seconds"):
            enter(session, "nobody", OTHER)
        assert enter(session).token

    def test_getting_in_starts_the_name_afresh(self, session: storage.Session, make: Make) -> None:
        make()
        for _ in range(3):
            for _ in range(4):
                with pytest.raises(SignInError):
                    enter(session, password=OTHER)
            assert enter(session).token

    def test_an_address_has_to_wait_whatever_names_it_tries(self, session: storage.Session, make: Make) -> None:
        make()
        for n in range(20):
            with pytest.raises(SignInError, match="do not fit"):
                enter(session, f"name{n}", OTHER)
        with pytest.raises(HeldError):
            enter(session, "one more", OTHER)
        assert enter(session, browser=Browser("192.168.1.8")).token

    def test_ones_own_password_does_not_wash_an_address_clean(self, session: storage.Session, make: Make) -> None:
        make()
        for n in range(19):
            with pytest.raises(SignInError):
                enter(session, f"name{n}", OTHER)
        enter(session)
        with pytest.raises(SignInError):
            enter(session, "name19", OTHER)
        with pytest.raises(HeldError):
            enter(session, "name20", OTHER)

    def test_addresses_of_one_version_6_network_are_one(self, session: storage.Session, make: Make) -> None:
        make()
        for n in range(20):
            with pytest.raises(SignInError):
                enter(session, f"name{n}", OTHER, browser=Browser(f"fd00::{n + 1:x}"))
        with pytest.raises(HeldError):
            enter(session, browser=Browser("fd00::ffff"))

    def test_a_day_later_the_tries_are_forgotten(self, session: storage.Session, make: Make) -> None:
        make()
        for _ in range(5):
            with pytest.raises(SignInError):
                enter(session, password=OTHER)
        with pytest.raises(SignInError, match="do not fit"):
            enter(session, password=OTHER, now=NOW + timedelta(days=1, seconds=1))
        assert session.scalar(text("SELECT max(failures) FROM sign_in_tries")) == 1

    def test_what_was_typed_as_a_name_is_not_kept(self, session: storage.Session, make: Make) -> None:
        make()
        with pytest.raises(SignInError):
            enter(session, "my secret password", "")
        held = "\n".join(session.connection().connection.driver_connection.iterdump())  # type: ignore[union-attr]
        assert "my secret" not in held

    def test_many_guesses_at_once_are_all_counted(self, session: storage.Session, make: Make) -> None:
        """A try counts before its password is weighed, so a crowd gains nothing over one after the other."""
        from server.people import passwords, tries

        make()
        weighed: list[str] = []
        with pytest.MonkeyPatch.context() as patched:

            def fits(kept: str | None, password: str) -> bool:
                if len(weighed) < 10:
                    weighed.append(password)
                    with pytest.raises(SignInError):
                        enter(session, password=f"guess {len(weighed)}")
                return False

            patched.setattr(passwords, "fits", fits)
            with pytest.raises(SignInError):
                enter(session, password="guess 0")
        assert len(weighed) == tries.NAME_FREE


class TestCode:
    def use(self, session: storage.Session, code: str, name: str = "ann", **more: object) -> SignedIn:
        given = {"password": OTHER, "again": OTHER, "browser": HERE, "now": NOW} | more
        return people.use_code(session, sign_in_name=name, code=code, **given)  # type: ignore[arg-type]

    def test_a_code_works_once_and_ends_sessions_and_tokens(self, session: storage.Session, make: Make) -> None:
        ann = make()
        before, token = enter(session), people.make_token(session, ann.id, "script", now=NOW)
        code = people.give_code(session, ann.id, by="Bo", now=NOW)
        assert enter(session).token  # the old password holds until then
        who = self.use(session, code.code.lower().replace("-", " "))
        assert people.by_session(session, before.token, now=NOW) is None
        assert people.by_token(session, token, now=NOW) is None
        assert people.by_session(session, who.token, now=NOW) is not None
        assert enter(session, password=OTHER).token
        with pytest.raises(SignInError):
            enter(session)
        with pytest.raises(SignInError, match="code"):
            self.use(session, code.code)

    def test_a_code_ends_after_a_day_or_with_the_next_one(self, session: storage.Session, make: Make) -> None:
        ann = make()
        first = people.give_code(session, ann.id, now=NOW)
        second = people.give_code(session, ann.id, now=NOW)
        with pytest.raises(SignInError):
            self.use(session, first.code)
        assert self.use(session, second.code, now=NOW + timedelta(hours=23, minutes=59)).token
        third = people.give_code(session, ann.id, now=NOW)
        with pytest.raises(SignInError):
            self.use(session, third.code, now=NOW + timedelta(hours=24))

    def test_a_code_is_good_for_its_own_person_only(self, session: storage.Session, make: Make) -> None:
        ann, _ = make(), make("Bo Builder", people.READS)
        code = people.give_code(session, ann.id, now=NOW)
        for name in ("bo", "nobody"):
            with pytest.raises(SignInError):
                self.use(session, code.code, name)

    def test_a_password_that_cannot_be_used_leaves_the_code_whole(self, session: storage.Session, make: Make) -> None:
        code = people.give_code(session, make().id, now=NOW)
        for n in range(8):
            with pytest.raises(DocumentError) as refused:
                self.use(
                    session, code.code, password=["short", "Ann Example"][n % 2], again=["short", "Ann Example"][n % 2]
                )
            assert paths(refused.value) == ["password"]
        with pytest.raises(DocumentError) as refused:
            self.use(session, code.code, again="nine sharp chisel")
        assert paths(refused.value) == ["again"]
        assert self.use(session, code.code).token

    def test_codes_are_guarded_against_guessing(self, session: storage.Session, make: Make) -> None:
        make()
        for _ in range(5):
            with pytest.raises(SignInError):
                self.use(session, "AAAA-AAAA-AAAA-AAAA")
        with pytest.raises(HeldError):
            self.use(session, "AAAA-AAAA-AAAA-AAAA")

    def test_nobody_who_is_switched_off_gets_a_code(self, session: storage.Session, make: Make) -> None:
        make()
        bo = make("Bo Builder", people.READS)
        code = people.give_code(session, bo.id, now=NOW)
        people.switch_off(session, bo.id, now=NOW)
        with pytest.raises(DocumentError, match="switched off"):
            people.give_code(session, bo.id, now=NOW)
        people.switch_on(session, bo.id, now=NOW)
        with pytest.raises(SignInError):
            self.use(session, code.code, "bo")


class TestFirstPerson:
    def make(self, session: storage.Session, code: str, **more: object) -> SignedIn:
        given = {"name": "Ann Example", "sign_in_name": "ann.e", "password": OTHER, "again": OTHER, "now": NOW} | more
        return people.first_person(session, code=code, browser=HERE, **given)  # type: ignore[arg-type]

    def test_the_code_makes_one_person_with_every_role(self, session: storage.Session) -> None:
        code = people.first_code(session, now=NOW)
        assert code is not None
        who = self.make(session, code.code)
        assert who.person.roles == set(people.ROLES)
        assert people.first_code(session, now=NOW) is None
        with pytest.raises(SignInError):
            self.make(session, code.code, name="Bo Builder", sign_in_name="bo")
        assert len(people.members(session)) == 1

    def test_the_code_ends_after_an_hour_or_with_the_next_start(self, session: storage.Session) -> None:
        first, second = (people.first_code(session, now=NOW) for _ in range(2))
        assert first is not None
        assert second is not None
        for code, now in ((first, NOW), (second, NOW + timedelta(hours=1))):
            with pytest.raises(SignInError, match="prints a new one"):
                self.make(session, code.code, now=now)
        assert not people.anybody(session)

    def test_bad_entries_are_all_named_and_cost_nothing(self, session: storage.Session) -> None:
        code = people.first_code(session, now=NOW)
        assert code is not None
        for _ in range(10):
            with pytest.raises(DocumentError) as refused:
                self.make(session, code.code, name=" ", sign_in_name="Ann E!", password="short")
            assert paths(refused.value) == ["name", "sign_in_name", "password"]
        assert self.make(session, code.code).token


class TestOwnPassword:
    def change(self, session: storage.Session, person_id: int, **more: object) -> SignedIn:
        given = {"old": PASSWORD, "password": OTHER, "again": OTHER, "browser": HERE, "now": NOW} | more
        return people.change_password(session, person_id, **given)  # type: ignore[arg-type]

    def test_a_change_signs_out_everywhere_else(self, session: storage.Session, make: Make) -> None:
        ann = make()
        before = enter(session)
        after = self.change(session, ann.id)
        assert people.by_session(session, before.token, now=NOW) is None
        assert people.by_session(session, after.token, now=NOW) is not None
        assert enter(session, password=OTHER).token
        assert storage.lines(session, subject="person ann")[0].what == "password changed"

    @pytest.mark.parametrize(
        ("typed", "path"),
        [({"old": OTHER + "x"}, "old"), ({"password": "short"}, "password"), ({"again": "x"}, "again"),
         ({"password": PASSWORD, "again": PASSWORD}, "password"), ({"password": "Ann.Example"}, "password")],
    )  # fmt: skip
    def test_what_cannot_be_used_changes_nothing(
        self, session: storage.Session, make: Make, typed: dict[str, str], path: str
    ) -> None:
        ann, before = make(), None
        before = enter(session)
        with pytest.raises(DocumentError) as refused:
            self.change(session, ann.id, **typed)
        assert paths(refused.value) == [path]
        assert people.by_session(session, before.token, now=NOW) is not None
        assert enter(session).token

    def test_the_present_password_is_guarded_against_guessing(self, session: storage.Session, make: Make) -> None:
        ann = make()
        for _ in range(5):
            with pytest.raises(DocumentError):
                self.change(session, ann.id, old="not this one")
        with pytest.raises(HeldError):
            self.change(session, ann.id)
