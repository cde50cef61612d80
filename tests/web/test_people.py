"""The screens of people over HTTP: forms that come back filled, cookies, codes and tokens shown once."""

from __future__ import annotations

import html
import re
from collections.abc import Iterator
from pathlib import Path

import pytest
from fastapi.testclient import TestClient
from httpx import Response

from server import jobs, people, storage
from server.app import create_app
from server.settings import Settings
from server.web.gate import way_back
from tests.web.conftest import ADDRESS
from tests.web.test_library import BOND
from tests.web.test_member import JOB, SAVE, WHOLE

PASSWORD, OTHER = "seven planed boards", "nine sharp chisels"
COOKIE = "bondwright-8300"
CODE = re.compile(r'id="code">([A-Z2-9-]{19})<')
BO = {"name": "Bo Builder", "sign_in_name": "bo", "role_prepares": "yes"}


class Shop:
    """A program with sign-in and its first person."""

    def __init__(self, folder: Path) -> None:
        self.app = create_app(Settings(data=folder, sign_in=True, names=("workshop.local",)))
        self.engine = self.app.state.records.engine

    def browser(self, address: str = ADDRESS) -> TestClient:
        return TestClient(self.app, base_url=address, follow_redirects=False)

    def first_code(self) -> str:
        with storage.reading(self.engine) as session:
            code = people.first_code(session)
        assert code is not None
        return code.code

    def first(self) -> TestClient:
        """Return the browser of the first person."""
        client = self.browser()
        assert client.post("/first-person", data=first_form(self.first_code())).status_code == 303
        return client

    def add(self, keeper: TestClient, **typed: str) -> TestClient:
        """Return the browser of another person, who used the code."""
        code = CODE.search(keeper.post("/people", data=BO | typed).text)
        assert code is not None
        client = self.browser()
        name = (BO | typed)["sign_in_name"]
        form = {"sign_in_name": name, "code": code[1], "password": PASSWORD, "again": PASSWORD}
        assert client.post("/sign-in/code", data=form).status_code == 303
        return client


def first_form(code: str) -> dict[str, str]:
    return {
        "code": code, "name": "Ann Example", "sign_in_name": "ann.e", "password": PASSWORD, "again": PASSWORD,
    }  # fmt: skip


def enter(client: TestClient, name: str = "ann.e", password: str = PASSWORD, **more: str) -> Response:
    return client.post("/sign-in", data={"sign_in_name": name, "password": password, **more})


def _second_browser(shop: Shop) -> TestClient:
    client = shop.browser()
    assert enter(client).status_code == 303
    return client


@pytest.fixture
def shop(tmp_path: Path) -> Iterator[Shop]:
    made = Shop(tmp_path)
    yield made
    made.app.state.records.close()


class TestFirstPerson:
    def test_where_nobody_is_every_way_leads_to_the_first_person(self, shop: Shop) -> None:
        client = shop.browser()
        assert client.get("/jobs").headers["location"].startswith("/sign-in")
        assert client.get("/sign-in").headers["location"] == "/first-person"
        assert "printed a one-time code" in client.get("/first-person").text

    def test_the_code_makes_the_first_person_who_is_then_signed_in(self, shop: Shop) -> None:
        client = shop.first()
        assert "Ann Example" in client.get("/jobs").text
        assert client.get("/people").status_code == 200
        assert shop.browser().get("/first-person").headers["location"] == "/sign-in"

    def test_a_bad_form_comes_back_filled_but_for_passwords(self, shop: Shop) -> None:
        client = shop.browser()
        answer = client.post("/first-person", data=first_form("X") | {"sign_in_name": "Ann E", "again": "other words"})
        assert answer.status_code == 422
        for value in ("Ann Example", "Ann E", 'value="X"'):
            assert value in answer.text
        assert PASSWORD not in answer.text
        assert 'aria-invalid="true"' in answer.text
        assert "cannot be a sign-in name" in answer.text
        answer = client.post("/first-person", data=first_form("AAAA-BBBB-CCCC-DDDD"))
        assert answer.status_code == 422
        assert "code does not fit" in answer.text
        assert "AAAA-BBBB-CCCC-DDDD" in answer.text

    def test_a_name_that_no_sheet_prints_is_refused(self, shop: Shop) -> None:
        form = first_form(shop.first_code()) | {"name": "Ann \U0001f528"}
        assert "which a sheet cannot print" in shop.browser().post("/first-person", data=form).text


class TestSignIn:
    def test_the_cookie_is_out_of_reach_of_scripts_and_other_sites(self, shop: Shop) -> None:
        shop.first()
        cookie = enter(shop.browser()).headers["set-cookie"]
        assert re.fullmatch(rf"{COOKIE}=[\w-]{{43}}; HttpOnly; Path=/; SameSite=strict", cookie)

    def test_over_https_the_cookie_stays_on_https(self, shop: Shop) -> None:
        shop.first()
        client = shop.browser("https://workshop.local")
        cookie = enter(client).headers["set-cookie"]
        assert cookie.startswith("__Host-bondwright-443=")
        assert cookie.endswith("; HttpOnly; Path=/; SameSite=strict; Secure")
        assert client.get("/jobs").status_code == 200

    def test_a_page_asked_for_is_found_again(self, shop: Shop) -> None:
        shop.first()
        client = shop.browser()
        where = client.get("/library?q=a%26b").headers["location"]
        back = html.unescape(re.findall(r'name="back" value="([^"]*)"', client.get(where).text)[0])
        assert enter(client, back=back).headers["location"] == "/library?q=a%26b"

    @pytest.mark.parametrize(
        "back",
        ["https://evil.example/", "//evil.example", "/\\evil.example", "\\\\evil.example", "/\t/evil.example",
         "javascript:alert(1)", "evil", "", "/sign-in", "/sign-out", "/jobs\r\nSet-Cookie: a=b", "/" + "x" * 3000],
    )  # fmt: skip
    def test_nobody_is_led_elsewhere(self, shop: Shop, back: str) -> None:
        assert way_back(back) == ""
        shop.first()
        client = shop.browser()
        assert enter(client, back=back).headers["location"] == "/"
        signed_in = client.get("/sign-in", params={"back": back})
        assert signed_in.headers["location"] == "/"

    def test_what_does_not_fit_gives_the_name_back_and_no_cookie(self, shop: Shop) -> None:
        shop.first()
        answer = enter(shop.browser(), password=OTHER, back="/jobs/1")
        assert answer.status_code == 422
        assert "do not fit" in answer.text
        assert 'value="ann.e"' in answer.text
        assert 'name="back" value="/jobs/1"' in answer.text
        assert OTHER not in answer.text
        assert "set-cookie" not in answer.headers

    def test_after_too_many_tries_the_answer_says_how_long(self, shop: Shop) -> None:
        shop.first()
        for _ in range(5):
            enter(shop.browser(), password=OTHER)
        answer = enter(shop.browser())
        assert answer.status_code == 429
        assert int(answer.headers["retry-after"]) <= 30
        assert "Wait" in answer.text

    def test_a_new_sign_in_never_takes_over_a_session_that_was_there(self, shop: Shop) -> None:
        shop.first()
        client = shop.browser()
        enter(client)
        before = client.cookies[COOKIE]
        enter(client)
        assert client.cookies[COOKIE] != before
        client.cookies.clear()
        assert client.get("/jobs", headers={"cookie": f"{COOKIE}={before}"}).status_code == 303

    def test_signing_out_ends_the_session_itself(self, shop: Shop) -> None:
        client = shop.first()
        token = client.cookies[COOKIE]
        assert client.get("/sign-out").status_code == 405
        assert client.post("/sign-out").headers["location"] == "/sign-in"
        assert COOKIE not in client.cookies
        assert client.get("/jobs", headers={"cookie": f"{COOKIE}={token}"}).status_code == 303

    def test_a_form_of_somebody_elses_page_signs_nobody_in(self, shop: Shop) -> None:
        shop.first()
        answer = shop.browser().post(
            "/sign-in",
            data={"sign_in_name": "ann.e", "password": PASSWORD},
            headers={"origin": "http://attacker.example"},
        )
        assert answer.status_code == 403


class TestOwnPage:
    def test_a_new_password_signs_out_elsewhere_and_keeps_this_browser(self, shop: Shop) -> None:
        client, elsewhere = shop.first(), shop.browser()
        enter(elsewhere)
        answer = client.post("/me/password", data={"old": PASSWORD, "password": OTHER, "again": OTHER})
        assert answer.headers["location"] == "/me?done=password"
        assert "password is changed" in client.get("/me?done=password").text
        assert elsewhere.get("/jobs").status_code == 303
        assert enter(shop.browser(), password=OTHER).status_code == 303
        assert enter(shop.browser()).status_code == 422

    def test_a_bad_change_has_its_messages_beside_the_boxes(self, shop: Shop) -> None:
        client = shop.first()
        for typed, box in (
            ({"old": OTHER + "s"}, "old"),
            ({"password": "short", "again": "short"}, "password"),
            ({"again": "x"}, "again"),
        ):
            form = {"old": PASSWORD, "password": OTHER, "again": OTHER} | typed
            answer = client.post("/me/password", data=form)
            assert answer.status_code == 422
            assert f'id="f-{box}-message"' in answer.text
            assert OTHER not in answer.text
            assert PASSWORD not in answer.text

    def test_a_token_is_shown_once_used_and_revoked(self, shop: Shop) -> None:
        client = shop.first()
        answer = client.post("/me/tokens", data={"label": "saw list"})
        assert answer.headers["cache-control"] == "no-store"
        token = re.findall(r'id="token">([^<]+)<', answer.text)[0]
        assert token not in client.get("/me").text
        program = {"authorization": f"Bearer {token}"}
        assert shop.browser().get("/api/records", headers=program).status_code == 200
        number = re.findall(r"/me/tokens/(\d+)/revoke", client.get("/me").text)[0]
        assert client.post(f"/me/tokens/{number}/revoke").status_code == 303
        assert shop.browser().get("/api/records", headers=program).status_code == 401
        assert "revoked 20" in client.get("/me").text
        assert client.post("/me/tokens", data={"label": ""}).status_code == 422

    def test_a_session_elsewhere_is_ended_from_here(self, shop: Shop) -> None:
        client, one, two = shop.first(), shop.browser(), shop.browser()
        for browser in (one, two):
            enter(browser)
        ends = re.findall(r"/me/sessions/(\d+)/end", client.get("/me").text)
        assert len(ends) == 2  # not the one that is here
        client.post(f"/me/sessions/{ends[0]}/end")
        assert sorted(browser.get("/jobs").status_code for browser in (one, two)) == [200, 303]
        client.post("/me/sessions/others/end")
        assert [browser.get("/jobs").status_code for browser in (one, two)] == [303, 303]
        assert client.get("/jobs").status_code == 200

    def test_nobody_touches_anothers_sessions_or_tokens(self, shop: Shop) -> None:
        client = shop.first()
        bo = shop.add(client)
        client.post("/me/tokens", data={"label": "saw list"})
        (theirs,) = re.findall(r"/me/sessions/(\d+)/end", _second_browser(shop).get("/me").text)
        assert bo.post(f"/me/sessions/{theirs}/end").status_code == 303
        assert client.get("/jobs").status_code == 200
        assert bo.post("/me/tokens/1/revoke").status_code == 404
        assert "revoked 20" not in client.get("/me").text


class TestPeople:
    def test_a_person_is_added_and_comes_in_by_the_code(self, shop: Shop) -> None:
        keeper = shop.first()
        answer = keeper.post("/people", data=BO)
        assert answer.headers["cache-control"] == "no-store"
        code = CODE.findall(answer.text)[0]
        assert code not in keeper.get("/people").text
        bo = shop.browser()
        form = {"sign_in_name": "bo", "code": code, "password": PASSWORD, "again": PASSWORD}
        bad = bo.post("/sign-in/code", data=form | {"again": OTHER})
        assert bad.status_code == 422
        assert code in bad.text
        assert PASSWORD not in bad.text
        assert bo.post("/sign-in/code", data=form).status_code == 303
        assert "Bo Builder" in bo.get("/jobs").text
        assert bo.get("/people").status_code == 403
        again = shop.browser().post("/sign-in/code", data=form)
        assert again.status_code == 422
        assert "was used" in again.text

    def test_a_bad_person_comes_back_filled(self, shop: Shop) -> None:
        answer = shop.first().post("/people", data=BO | {"sign_in_name": "ANN.E"})
        assert answer.status_code == 422
        assert 'value="Bo Builder"' in answer.text
        assert 'value="ANN.E"' in answer.text
        assert re.search(r'name="role_prepares" value="yes" checked', answer.text)
        assert 'id="f-sign_in_name-message"' in answer.text

    def test_roles_change_at_once(self, shop: Shop) -> None:
        keeper = shop.first()
        bo = shop.add(keeper)
        assert bo.get("/jobs/new").status_code == 200
        assert keeper.post("/people/2/roles", data={"role_checks": "yes"}).headers["location"] == "/people/2?done=roles"
        assert bo.get("/jobs/new").status_code == 403
        assert bo.get("/jobs").status_code == 200

    def test_the_last_who_keeps_the_book_stays(self, shop: Shop) -> None:
        keeper = shop.first()
        for path, typed in (("/people/1/roles", {"role_checks": "yes"}), ("/people/1/off", {})):
            answer = keeper.post(path, data=typed)
            assert answer.status_code == 422
            assert "give somebody else that role first" in html.unescape(answer.text)
        assert keeper.get("/people").status_code == 200

    def test_switched_off_is_out_at_once_and_on_again_comes_back(self, shop: Shop) -> None:
        keeper = shop.first()
        bo = shop.add(keeper)
        assert keeper.post("/people/2/off").status_code == 303
        assert bo.get("/jobs").status_code == 303
        assert enter(shop.browser(), "bo").status_code == 422
        assert "switched off" in keeper.get("/people").text
        assert keeper.post("/people/2/code").status_code == 422
        keeper.post("/people/2/on")
        assert enter(shop.browser(), "bo").status_code == 303

    def test_a_forgotten_password_is_renewed_by_a_code(self, shop: Shop) -> None:
        keeper = shop.first()
        bo = shop.add(keeper)
        code = CODE.findall(keeper.post("/people/2/code").text)[0]
        assert bo.get("/jobs").status_code == 200
        form = {"sign_in_name": "bo", "code": code, "password": OTHER, "again": OTHER}
        assert shop.browser().post("/sign-in/code", data=form).status_code == 303
        assert bo.get("/jobs").status_code == 303
        assert enter(shop.browser(), "bo", OTHER).status_code == 303

    @pytest.mark.parametrize("path", ["/people/99", "/people/0", "/people/x"])
    def test_a_missing_person_is_said_in_words(self, shop: Shop, path: str) -> None:
        assert shop.first().get(path).status_code == 404


class TestWhoDidIt:
    def test_what_is_saved_carries_the_person_whatever_was_sent(self, shop: Shop) -> None:
        client = shop.add(shop.first())
        forged = {"made_by": "Ann Example"}
        client.post("/jobs", data={"number": "26-001", "title": "Gangway", "paper": "A4", "display": "SI"} | forged)
        client.post("/library/new/bonds", data=BOND | forged)
        with storage.reading(shop.engine) as session:
            lines = storage.lines(session)
            assert {line.who for line in lines if line.subject.startswith(("job", "record"))} == {"Bo Builder"}
        assert "Bo Builder" in client.get("/library/B-001").text

    def test_a_saved_check_and_its_sheet_carry_the_person(self, shop: Shop) -> None:
        client = shop.first()
        client.post("/jobs", data=JOB)
        assert client.post(SAVE, data=WHOLE | {"made_by": "Somebody Else"}).status_code == 303
        assert client.post("/checks/1/revisions/1/again").status_code == 303
        with storage.reading(shop.engine) as session:
            for n in (1, 2):
                saved = jobs.revision_of(session, 1, n)
                assert (saved.made_by, saved.heading["made_by"]) == ("Ann Example", "Ann Example")
            assert {line.who for line in storage.lines(session)} == {"Ann Example"}
        assert "Somebody Else" not in client.get("/checks/1").text

    def test_forms_show_the_name_instead_of_a_box(self, shop: Shop) -> None:
        client = shop.first()
        client.post("/jobs", data={"number": "26-001", "title": "Gangway", "paper": "A4", "display": "SI"})
        for path in ("/library/new/bonds", "/jobs/1/checks/new?layout=box"):
            text = client.get(path).text
            assert 'name="made_by"' not in text
            assert text.count("Ann Example") == 2

    def test_without_sign_in_the_typed_name_stands(self, client: TestClient) -> None:
        client.post("/library/new/bonds", data=BOND | {"made_by": "Somebody"})
        assert "Somebody" in client.get("/library/B-001").text


def test_without_sign_in_there_is_no_page_to_sign_in(client: TestClient) -> None:
    assert client.get("/sign-in").headers["location"] == "/"
    for path in ("/sign-in/code", "/first-person"):
        assert client.get(path).status_code == 422
    assert "runs without sign-in" in client.get("/me").text
    assert client.post("/me/tokens", data={"label": "x"}).status_code == 422
