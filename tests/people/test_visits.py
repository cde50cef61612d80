from __future__ import annotations

from datetime import timedelta

import pytest
from sqlalchemy import text

from server import people, storage
from server.errors import DocumentError
from server.people import NoPersonError
from tests.people.conftest import NOW, Make


class TestSessions:
    def test_a_session_ends_when_nothing_is_asked_for(self, session: storage.Session, make: Make) -> None:
        token = people.start(session, make().id, now=NOW)
        assert people.by_session(session, token, now=NOW + people.IDLE - timedelta(seconds=1)) is not None
        idle_since = NOW + people.IDLE - timedelta(seconds=1)
        assert people.by_session(session, token, now=idle_since + people.IDLE) is None

    def test_a_session_in_use_ends_all_the_same(self, session: storage.Session, make: Make) -> None:
        token = people.start(session, make().id, now=NOW)
        at = NOW
        while at + timedelta(hours=1) < NOW + people.LONGEST:
            at += timedelta(hours=1)
            assert people.by_session(session, token, now=at) is not None
        assert people.by_session(session, token, now=NOW + people.LONGEST) is None

    def test_one_session_ends_or_all_others(self, session: storage.Session, make: Make) -> None:
        ann, bo = make(), make("Bo Builder", people.READS)
        with storage.write(session):
            session.execute(text("DELETE FROM sessions"))
        tokens = [people.start(session, ann.id, browser=f"browser {n}", now=NOW) for n in range(4)]
        other = people.start(session, bo.id, now=NOW)

        def there() -> list[bool]:
            return [people.by_session(session, token, now=NOW) is not None for token in [*tokens, other]]

        people.end(session, tokens[0])
        assert there() == [False, True, True, True, True]
        seats = {seat.browser: seat.id for seat in people.seats(session, ann.id, now=NOW)}
        assert set(seats) == {"browser 1", "browser 2", "browser 3"}
        people.end_seat(session, bo.id, seats["browser 1"])  # somebody else's
        assert there() == [False, True, True, True, True]
        people.end_seat(session, ann.id, seats["browser 1"])
        assert there() == [False, False, True, True, True]
        people.end_others(session, ann.id, but=seats["browser 2"])
        assert there() == [False, False, True, False, True]

    @pytest.mark.parametrize("token", ["", "x", "ä", "\ud800", "a" * 10_000])
    def test_nonsense_is_nobody(self, session: storage.Session, make: Make, token: str) -> None:
        make()
        assert people.by_session(session, token, now=NOW) is None
        assert people.by_token(session, token, now=NOW) is None

    def test_ended_sessions_are_cleared_away(self, session: storage.Session, make: Make) -> None:
        ann = make()
        people.start(session, ann.id, now=NOW)
        people.start(session, ann.id, now=NOW + timedelta(days=2))
        assert session.scalar(text("SELECT count(*) FROM sessions")) == 1

    def test_a_page_is_read_while_somebody_else_saves(
        self, session: storage.Session, make: Make, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        from server.storage import sessions

        token = people.start(session, make().id, now=NOW)
        monkeypatch.setattr(sessions, "LOCK_SECONDS", 0.05)
        with sessions._turn():
            assert people.by_session(session, token, now=NOW + timedelta(hours=1)) is not None


class TestTokens:
    def test_a_token_is_known_until_it_is_revoked(self, session: storage.Session, make: Make) -> None:
        ann = make()
        token = people.make_token(session, ann.id, "  saw   list ", now=NOW)
        visit = people.by_token(session, token, now=NOW)
        assert visit is not None
        assert visit.person == ann.person
        (kept,) = people.tokens(session, ann.id)
        assert (kept.label, kept.used_at, kept.revoked_at) == ("saw list", "2026-12-01T09:00:00Z", None)
        people.revoke_token(session, ann.id, kept.id, now=NOW)
        assert people.by_token(session, token, now=NOW) is None
        assert [line.what for line in storage.lines(session, subject="person ann")][:2] == [
            "token revoked",
            "token made",
        ]

    def test_a_token_is_no_session_and_a_session_no_token(self, session: storage.Session, make: Make) -> None:
        ann = make()
        token, of_browser = people.make_token(session, ann.id, "x"), people.start(session, ann.id, now=NOW)
        assert people.by_session(session, token, now=NOW) is None
        assert people.by_token(session, of_browser, now=NOW) is None

    def test_nobody_revokes_somebody_elses_token(self, session: storage.Session, make: Make) -> None:
        ann, bo = make(), make("Bo Builder", people.READS)
        token = people.make_token(session, ann.id, "x")
        (kept,) = people.tokens(session, ann.id)
        with pytest.raises(NoPersonError):
            people.revoke_token(session, bo.id, kept.id)
        assert people.by_token(session, token) is not None

    @pytest.mark.parametrize("label", ["", "  ", "x" * 81, "a\x00b"])
    def test_a_token_says_what_it_is_for(self, session: storage.Session, make: Make, label: str) -> None:
        with pytest.raises(DocumentError, match="Say in 1 to 80"):
            people.make_token(session, make().id, label)
