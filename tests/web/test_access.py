"""Every route has a rule, and every role meets every route as the table says."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import pytest
from fastapi import FastAPI
from fastapi.routing import APIRoute, iter_route_contexts
from fastapi.testclient import TestClient
from starlette.routing import Mount

from server import people, storage
from server.app import create_app
from server.people import ROLES
from server.settings import Settings
from server.web import gate
from server.web.access import NOBODY, RULES, may
from tests.web.conftest import ADDRESS

VALUES = {
    "job_id": "1",
    "check_id": "1",
    "revision": "1",
    "old": "1",
    "new": "1",
    "group": "bonds",
    "kind": "fastener",
    "key": "B-001",
    "person_id": "7",
}


def routes(app: FastAPI) -> list[tuple[str, str, str]]:
    """Return (name, method, path with values in it) of every route, also of those within routers."""
    found = []
    for route in iter_route_contexts(app.routes):
        assert route.path is not None
        path = re.sub(r"\{(\w+)(?::\w+)?\}", lambda part: VALUES.get(part[1], "1"), route.path)
        if isinstance(route.original_route, Mount):
            found.append((str(route.original_route.name), "GET", f"{path}/bondwright.css"))
        else:
            found += [(str(route.name), method, path) for method in sorted(route.methods or ()) if method != "HEAD"]
    return found


class Door:
    """A program with sign-in, with one person for every role."""

    def __init__(self, folder: Path) -> None:
        self.settings = Settings(data=folder, sign_in=True)
        self.app = create_app(self.settings)
        self.client = TestClient(self.app, base_url=ADDRESS, follow_redirects=False)
        engine = self.app.state.records.engine
        self.engine = engine
        with storage.reading(engine) as session:
            keeper, _ = people.add(session, name="Kay Keeper", sign_in_name="kay", roles=ROLES)
            self.people = {
                role: people.add(session, name=f"One who {role}", sign_in_name=f"p{n}", roles=[role])[0]
                for n, role in enumerate(ROLES)
            }
            people.add(session, name="Sam Subject", sign_in_name="sam", roles=[])  # number 7: whom forms are about
        self.keeper = keeper

    def signed_in(self, member: people.Member | None) -> dict[str, str]:
        """Return the headers of a person with a session of their own; of nobody without one."""
        if member is None:
            return {}
        with storage.reading(self.engine) as session:
            token = people.start(session, member.id)
        return {"cookie": f"bondwright-8300={token}"}

    def token(self, member: people.Member) -> dict[str, str]:
        with storage.reading(self.engine) as session:
            return {"authorization": f"Bearer {people.make_token(session, member.id, 'test')}"}

    def ask(self, method: str, path: str, headers: Mapping[str, str], **more: Any) -> Any:
        self.client.cookies.clear()
        return self.client.request(method, path, headers=dict(headers), **more)


@pytest.fixture(scope="module")
def door(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Door]:
    made = Door(tmp_path_factory.mktemp("book"))
    yield made
    made.app.state.records.close()


@pytest.fixture(scope="module")
def app(tmp_path_factory: pytest.TempPathFactory) -> FastAPI:
    return create_app(Settings(data=tmp_path_factory.mktemp("book")))


def lacking(app: FastAPI) -> set[str]:
    return {name for name, _, _ in routes(app)} - set(RULES)


def test_every_route_has_a_rule(app: FastAPI) -> None:
    assert lacking(app) == set(), "each new route needs a line in server/web/access.py"


def test_every_rule_has_a_route(app: FastAPI) -> None:
    assert set(RULES) - {name for name, _, _ in routes(app)} == set()
    assert set(RULES.values()) <= {NOBODY, *ROLES}


def test_no_two_routes_share_a_name(app: FastAPI) -> None:
    names = [name for name, _, _ in routes(app)]
    assert len(names) == len(set(names))


def test_a_new_route_without_a_rule_is_noticed_and_refused(tmp_path: Path) -> None:
    door = Door(tmp_path)
    door.app.add_api_route("/new-one", lambda: "in", name="new_one")
    assert lacking(door.app) == {"new_one"}
    assert door.ask("GET", "/new-one", {}).status_code == 303
    assert door.ask("GET", "/new-one", door.signed_in(door.keeper)).status_code == 403


def test_the_gate_stands_before_every_route(app: FastAPI) -> None:
    """Each route asks the table before anything else of it runs; only the files of every page stand outside."""
    outside = []
    for route in iter_route_contexts(app.routes):
        if not isinstance(route.original_route, APIRoute):
            outside.append(str(getattr(route.original_route, "name", route)))
            continue
        first = route.dependant.dependencies[0]
        assert first.call is gate.admit, route.path
    assert outside == ["static"]


def outcome(answer: Any) -> str:
    """Return what became of a request: sent to sign in, refused, or let in (whatever came of it then)."""
    if answer.status_code == 401 or answer.headers.get("location", "").startswith("/sign-in?"):
        return "sign in"
    if answer.status_code == 403:
        return "refused"
    if answer.status_code == 303 and answer.headers["location"] == "/sign-in":
        return "sign in"
    return "in"


def test_signed_out_every_route_but_the_way_in_refuses(door: Door) -> None:
    open_to_all = set()
    for name, method, path in routes(door.app):
        found = outcome(door.ask(method, path, {}))
        if name in ("first_person", "make_first_person"):  # leads to the sign-in where there are people
            continue
        assert found in ("in", "sign in"), name
        if found == "in":
            open_to_all.add(name)
    assert open_to_all == {"static", "sign_in", "enter", "code", "use_code"}


@pytest.mark.parametrize("role", ROLES)
def test_every_route_takes_a_role_as_the_table_says(door: Door, role: str) -> None:
    member = door.people[role]
    let_in = 0
    for name, method, path in routes(door.app):
        if RULES[name] == NOBODY:
            continue
        answer = door.ask(method, path, door.signed_in(member))
        expected = RULES[name] in (people.READS, role)
        assert expected == may(member.person, name)
        if name == "sign_out":
            assert answer.headers["location"] == "/sign-in"
            continue
        assert outcome(answer) == ("in" if expected else "refused"), (name, answer.status_code)
        if not expected:
            assert RULES[name] in answer.text
            assert member.name in answer.text
        let_in += expected
    assert let_in >= 15


def test_with_every_role_every_route_is_open(door: Door) -> None:
    for name, method, path in routes(door.app):
        if RULES[name] != NOBODY and name not in ("sign_out", "switch_off"):
            assert outcome(door.ask(method, path, door.signed_in(door.keeper))) == "in", name


def test_a_refused_change_changes_nothing(door: Door) -> None:
    typed = {"number": "26-666", "title": "Not mine", "paper": "A4", "display": "SI"}
    assert door.ask("POST", "/jobs", door.signed_in(door.people[people.READS]), data=typed).status_code == 403
    assert door.ask("POST", "/jobs", {}, data=typed).status_code == 303
    assert "26-666" not in door.ask("GET", "/jobs", door.signed_in(door.keeper)).text


class TestSignedOut:
    @pytest.mark.parametrize(
        ("path", "back"),
        [
            ("/jobs", "%2Fjobs"),
            ("/library?q=a&group=bonds", "%2Flibrary%3Fq%3Da%26group%3Dbonds"),
            ("/checks/1", "%2Fchecks%2F1"),
        ],
    )
    def test_a_page_leads_to_the_sign_in_and_back(self, door: Door, path: str, back: str) -> None:
        answer = door.ask("GET", path, {})
        assert answer.status_code == 303
        assert answer.headers["location"] == f"/sign-in?back={back}"

    @pytest.mark.parametrize("path", ["/api/records", "/api/records/B-001", "/openapi.json"])
    def test_the_api_answers_in_json(self, door: Door, path: str) -> None:
        answer = door.ask("GET", path, {})
        assert answer.status_code == 401
        assert answer.headers["www-authenticate"] == "Bearer"
        assert "Sign in first" in answer.json()["faults"][0]["message"]

    def test_a_form_that_comes_too_late_says_so(self, door: Door) -> None:
        answer = door.ask("POST", "/jobs", {"referer": f"{ADDRESS}/jobs/new"}, data={"number": "1"})
        assert answer.headers["location"] == "/sign-in?back=%2Fjobs%2Fnew&lost=yes"
        assert "Nothing was saved" in door.ask("GET", answer.headers["location"], {}).text
        answer = door.ask("POST", "/jobs", {"referer": "http://attacker.example/jobs/new"})
        assert answer.headers["location"] == "/sign-in?lost=yes"

    def test_a_part_of_a_page_is_answered_with_a_note_that_leaves_what_was_typed(self, door: Door) -> None:
        answer = door.ask("POST", "/jobs/1/checks/preview", {"HX-Request": "true"})
        assert answer.status_code == 401
        assert answer.headers["HX-Retarget"] == "#signed-out"
        assert "<html" not in answer.text
        assert "not signed in any more" in answer.text

    @pytest.mark.parametrize(
        "header",
        [
            "bondwright-8300=",
            "bondwright-8300=nonsense",
            "bondwright-8300=\xe4",
            "bondwright-8301=TOKEN",
            "other=TOKEN",
        ],
    )
    def test_a_cookie_that_is_nobodys_is_nobody(self, door: Door, header: str) -> None:
        token = door.signed_in(door.keeper)["cookie"].partition("=")[2]
        cookie = header.replace("TOKEN", token).encode("latin-1")
        assert door.client.get("/jobs", headers={b"cookie": cookie}).status_code == 303


class TestTokens:
    def test_a_token_opens_the_api_with_the_roles_of_its_person(self, door: Door) -> None:
        headers = door.token(door.people[people.READS])
        assert door.ask("GET", "/api/records", headers).status_code == 200
        assert door.ask("GET", "/openapi.json", headers).status_code == 200
        assert door.ask("POST", "/api/checks/run", headers, content=b"{}").status_code == 422

    def test_a_token_opens_nothing_else(self, door: Door) -> None:
        headers = door.token(door.keeper)
        for path in ("/jobs", "/people", "/me"):
            assert outcome(door.ask("GET", path, headers)) == "sign in"
        assert outcome(door.ask("POST", "/me/tokens", headers, data={"label": "more"})) == "sign in"

    def test_beside_a_token_the_cookie_does_not_count(self, door: Door) -> None:
        bad = door.signed_in(door.keeper) | {"authorization": "Bearer nonsense"}
        assert door.ask("GET", "/api/records", bad).status_code == 401
        assert door.ask("POST", "/people", bad | {"origin": "http://attacker.example"}).status_code == 303

    def test_a_token_needs_no_origin_and_a_cookie_does(self, door: Door) -> None:
        foreign = {"origin": "http://attacker.example"}
        assert door.ask("POST", "/api/checks/run", door.token(door.keeper) | foreign, content=b"{}").status_code == 422
        assert (
            door.ask("POST", "/api/checks/run", door.signed_in(door.keeper) | foreign, content=b"{}").status_code == 403
        )

    def test_without_sign_in_a_made_up_token_does_not_pass_for_an_origin(self, tmp_path: Path) -> None:
        client = TestClient(create_app(Settings(data=tmp_path)), base_url=ADDRESS, follow_redirects=False)
        headers = {"origin": "http://attacker.example", "authorization": "Bearer x"}
        assert client.post("/jobs", headers=headers).status_code == 403


class TestWithoutSignIn:
    def test_whoever_sits_at_the_machine_may_do_everything(self, client: TestClient) -> None:
        for name, method, path in routes(client.app):  # type: ignore[arg-type]
            answer = client.request(method, path)
            assert answer.status_code not in (401, 403), name

    def test_the_page_says_so_in_words(self, client: TestClient) -> None:
        text = client.get("/people").text
        assert "Nobody signs in at present" in text
        assert "--sign-in" in text
        assert "Sign out" not in text


def test_pages_show_only_what_the_person_may_open(door: Door) -> None:
    def links(member: people.Member) -> list[str]:
        text = door.ask("GET", "/jobs", door.signed_in(member)).text
        return re.findall(r'<li><a href="([^"]+)"', text)

    assert links(door.people[people.READS]) == ["/jobs", "/library"]
    assert {"/jobs", "/library", "/shop", "/people"} <= set(links(door.people[people.KEEPS_THE_BOOK]))
    assert "Main" not in door.ask("GET", "/sign-in", {}).text


def test_a_record_book_that_cannot_be_read_lets_nobody_in(door: Door, monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(*_: object) -> None:
        raise storage.StorageError("The disk did not answer.")

    headers = door.signed_in(door.keeper)
    monkeypatch.setattr(people, "by_session", fails)
    answer = door.ask("GET", "/jobs", headers)
    assert answer.status_code == 503
    assert "did not answer" in answer.text


def test_pages_offer_no_button_that_would_be_refused(door: Door) -> None:
    typed = {"number": "26-001", "title": "Gangway", "paper": "A4", "display": "SI"}
    keeper, reader = door.signed_in(door.keeper), door.signed_in(door.people[people.READS])
    where = door.ask("POST", "/jobs", keeper, data=typed).headers["location"]
    for path in ("/jobs", where, "/library"):
        offered = re.findall(r'<a class="button[^"]*" href="([^"]+)"', door.ask("GET", path, keeper).text)
        assert offered
        text = door.ask("GET", path, reader).text
        for link in offered:
            # offered to a reader exactly where it lets a reader in
            assert (f'href="{link}"' in text) is (outcome(door.ask("GET", link, reader)) != "refused"), link
