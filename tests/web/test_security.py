"""What every request passes and every answer carries."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from fastapi.testclient import TestClient
from starlette.datastructures import Headers

from server.errors import JointError
from server.settings import Settings, is_loopback
from server.web.security import from_our_pages, host_name

JOB = {"number": "26-001", "title": "Gangway", "paper": "A4", "display": "SI"}


@pytest.mark.parametrize("path", ["/jobs", "/jobs/new", "/library", "/shop", "/nothing-here", "/static/bondwright.css"])
def test_every_answer_carries_the_policy(client: TestClient, path: str) -> None:
    headers = client.get(path).headers
    policy = headers["content-security-policy"]
    assert policy.startswith("default-src 'self'")
    assert "unsafe" not in policy
    assert "frame-ancestors 'none'" in policy
    assert headers["x-content-type-options"] == "nosniff"
    assert headers["referrer-policy"] == "same-origin"


@pytest.mark.parametrize("path", ["/jobs", "/jobs/new", "/library", "/library/new/bond", "/shop", "/nothing-here"])
def test_no_page_has_inline_style_or_script(client: TestClient, path: str) -> None:
    text = client.get(path).text
    assert " style=" not in text
    assert "<style" not in text
    assert " onclick=" not in text
    assert "<script>" not in text
    assert "http://" not in text.replace("http://www.w3.org/", "")
    assert "https://" not in text


@pytest.mark.parametrize(
    "host", ["attacker.example", "127.0.0.1.attacker.example", "", "[", "localhost@attacker.example:80"]
)
def test_a_foreign_host_name_is_refused_in_words(client: TestClient, host: str) -> None:
    answer = client.get("/jobs", headers={"host": host})
    assert answer.status_code == 421
    assert "does not answer to that name" in answer.text
    assert "content-security-policy" in answer.headers


@pytest.mark.parametrize("host", ["127.0.0.1:8300", "localhost", "LOCALHOST:9", "[::1]:8300"])
def test_loopback_names_are_answered(client: TestClient, host: str) -> None:
    assert client.get("/jobs", headers={"host": host}).status_code == 200


@pytest.mark.parametrize(
    "headers",
    [
        {"sec-fetch-site": "cross-site"},
        {"sec-fetch-site": "same-site"},
        {"sec-fetch-site": "cross-site", "origin": "http://127.0.0.1:8300"},
        {"origin": "http://attacker.example"},
        {"origin": "http://127.0.0.1:9999"},
        {"origin": "https://127.0.0.1:8300"},
        {"origin": "null"},
        {"origin": "http://["},
    ],
)
def test_a_change_from_somebody_elses_page_is_refused(client: TestClient, headers: dict[str, str]) -> None:
    answer = client.post("/jobs", data=JOB, headers=headers)
    assert answer.status_code == 403
    assert "own pages" in answer.text
    assert "26-001" not in client.get("/jobs").text


@pytest.mark.parametrize("path", ["/api/checks/run", "/shop", "/library/new/bond"])
def test_every_kind_of_change_is_guarded(client: TestClient, path: str) -> None:
    assert client.post(path, headers={"origin": "http://attacker.example"}).status_code == 403


@pytest.mark.parametrize(
    "headers", [{"sec-fetch-site": "same-origin"}, {"sec-fetch-site": "none"}, {"origin": "http://127.0.0.1:8300"}, {}]
)
def test_a_change_from_our_own_page_or_a_program_is_taken(client: TestClient, headers: dict[str, str]) -> None:
    assert client.post("/jobs", data=JOB, headers=headers).status_code == 303
    assert "26-001" in client.get("/jobs").text


def test_the_usual_port_may_be_left_out_of_an_origin() -> None:
    assert from_our_pages(Headers({"origin": "http://localhost", "host": "localhost:80"}), "http")
    assert not from_our_pages(Headers({"origin": "http://localhost", "host": "localhost:443"}), "http")


@pytest.mark.parametrize(("host", "name"), [("[::1]:8300", "::1"), ("A.b.", "a.b"), ("[", ""), ("", "")])
def test_host_names_are_read_without_their_port(host: str, name: str) -> None:
    assert host_name(host) == name


class TestSize:
    def test_a_large_form_is_refused_in_words(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB | {"note": "x" * 3_000_000})
        assert answer.status_code == 413
        assert "2 megabytes" in answer.text
        assert "26-001" not in client.get("/jobs").text

    def test_a_large_body_without_announced_length_is_refused(self, client: TestClient) -> None:
        def pieces() -> Iterator[bytes]:
            for _ in range(40):
                yield b" " * 100_000

        answer = client.post("/api/checks/run", content=pieces(), headers={"content-type": "application/json"})
        assert answer.status_code == 413
        assert "split it" in answer.json()["faults"][0]["message"]

    def test_a_form_with_too_many_boxes_is_refused(self, client: TestClient) -> None:
        answer = client.post("/jobs", data=JOB | {f"box{i}": "" for i in range(5001)})
        assert answer.status_code == 400
        assert "too many boxes" in answer.text

    def test_a_nonsense_length_does_no_harm(self, client: TestClient) -> None:
        answer = client.post("/jobs", content=b"number=1", headers={"content-length": "9" * 400})
        assert answer.status_code == 413


class TestAddress:
    @pytest.mark.parametrize("host", ["0.0.0.0", "192.168.1.20", "::", "workshop", "127.0.0.1.example", ""])
    def test_without_sign_in_only_this_machine_is_served(self, tmp_path: Path, host: str) -> None:
        with pytest.raises(JointError, match="only done with sign-in"):
            Settings(data=tmp_path, host=host)

    @pytest.mark.parametrize("host", ["192.168.1.20", "workshop", "fd00::5"])
    def test_with_sign_in_the_network_is_served_under_the_names_it_was_given(self, tmp_path: Path, host: str) -> None:
        settings = Settings(data=tmp_path, host=host, sign_in=True, names=("Workshop.local",))
        assert {host, "workshop.local", "localhost"} <= settings.hosts
        assert settings.address == "http://Workshop.local:8300/"
        assert host in Settings(data=tmp_path, host=host, sign_in=True).address

    @pytest.mark.parametrize("host", ["0.0.0.0", "::", ""])
    def test_every_address_at_once_needs_a_name_to_answer_to(self, tmp_path: Path, host: str) -> None:
        with pytest.raises(JointError, match="--name"):
            Settings(data=tmp_path, host=host, sign_in=True)
        settings = Settings(data=tmp_path, host=host, sign_in=True, names=("workshop.local",))
        assert "workshop.local" in settings.hosts
        assert not settings.hosts & {"0.0.0.0", "::", ""}

    @pytest.mark.parametrize("host", ["127.0.0.1", "127.0.0.2", "localhost", "::1", "[::1]"])
    def test_loopback_addresses_are_served(self, tmp_path: Path, host: str) -> None:
        assert is_loopback(host)
        assert Settings(data=tmp_path, host=host).address.startswith("http://")

    @pytest.mark.parametrize("port", [-1, 65536])
    def test_a_port_out_of_range_is_refused_in_words(self, tmp_path: Path, port: int) -> None:
        with pytest.raises(JointError, match="whole number from 1 to 65535"):
            Settings(data=tmp_path, port=port)
