"""People looked after from the command line, and what serving asks for."""

from __future__ import annotations

import re
import subprocess
import sys
import time
from pathlib import Path

import pytest

from server import people, storage
from server.__main__ import main
from server.people import Browser

PASSWORD = "seven planed boards"
CODE = re.compile(r"(?:[A-Z2-9]{4}-){3}[A-Z2-9]{4}")


def run(tmp_path: Path, *words: str) -> int:
    return main(["person", *words, "--data", str(tmp_path / "shop")])


def code_of(text: str) -> str:
    found = CODE.search(text)
    assert found is not None
    return found[0]


def test_a_person_is_added_listed_switched_off_and_on(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(tmp_path, "add", "ann.e", "--name", "Ann Example") == 0
    first = code_of(capsys.readouterr().out)
    assert run(tmp_path, "add", "bo", "--name", "Bo Builder", "--role", "prepares", "--role", "checks") == 0
    assert run(tmp_path, "list") == 0
    listed = capsys.readouterr().out.splitlines()
    assert re.search(
        r"ann\.e +Ann Example +no password yet +reads, prepares, checks, approves, keeps the book", "\n".join(listed)
    )
    assert listed[-1].endswith("reads, prepares, checks")
    assert run(tmp_path, "off", "bo") == 0
    assert run(tmp_path, "list") == 0
    assert re.search(r"bo +Bo Builder +off ", capsys.readouterr().out)
    assert run(tmp_path, "on", "BO") == 0
    assert run(tmp_path, "code", "ann.e") == 0
    second = code_of(capsys.readouterr().out)
    engine = storage.engine(tmp_path / "shop" / "bondwright.sqlite3")
    with storage.reading(engine) as session:
        for code, works in ((first, False), (second, True)):
            try:
                who = people.use_code(
                    session, sign_in_name="ann.e", code=code, password=PASSWORD, again=PASSWORD, browser=Browser()
                )
            except people.SignInError:
                assert not works
            else:
                assert works
                assert who.person.may(people.KEEPS_THE_BOOK)
        assert {line.who for line in storage.lines(session, subject="person bo")} == {"at the machine"}
    engine.dispose()


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (("off", "ann.e"), "give somebody else that role first"),
        (("off", "nobody"), "Nobody signs in as 'nobody'"),
        (("code", "nobody"), "Nobody signs in as 'nobody'"),
        (("add", "ann.e", "--name", "Somebody Else"), "sign_in_name: Somebody signs in as ann.e already"),
        (("add", "bo", "--name", "Ann Example"), "name: There is a Ann Example already"),
        (("add", "bo", "--name", "Bo 接", "--role", "x"), "roles: 'x' is not a role"),
        (("add", "bo", "--name", "Bo \U0001f528"), "which a sheet cannot print"),
    ],
)
def test_what_cannot_be_is_one_clear_line(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], words: tuple[str, ...], says: str
) -> None:
    run(tmp_path, "add", "ann.e", "--name", "Ann Example")
    capsys.readouterr()
    assert run(tmp_path, *words) == 2
    told = capsys.readouterr()
    assert says in told.err
    assert told.out == ""


def test_without_records_there_is_nobody_to_look_after(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(tmp_path, "list") == 2
    assert "no records" in capsys.readouterr().err
    assert not (tmp_path / "shop").exists()


def test_the_network_is_not_served_while_nobody_can_sign_in(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["serve", "--data", str(tmp_path), "--host", "192.0.2.1", "--port", "0"]) == 2
    assert "only done with sign-in" in capsys.readouterr().err


def test_the_network_is_served_with_sign_in_where_there_are_people(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    run(tmp_path, "add", "ann.e", "--name", "Ann Example")
    # An address of nobody's (RFC 5737), so the door does not open; but it was tried.
    assert main(["serve", "--data", str(tmp_path / "shop"), "--host", "192.0.2.1", "--port", "0"]) == 2
    assert "cannot be opened" in capsys.readouterr().err


def test_the_first_start_with_sign_in_prints_a_code_that_works(tmp_path: Path) -> None:
    import httpx

    def started() -> tuple[subprocess.Popen[bytes], str]:
        said = tmp_path / "said.txt"
        with said.open("wb") as out:
            program = subprocess.Popen(
                [sys.executable, "-m", "server", "serve", "--sign-in", "--port", "0", "--data", str(tmp_path)],
                stdout=out, cwd=Path(__file__).parents[2],
            )  # fmt: skip
        until = time.monotonic() + 30
        while time.monotonic() < until and "ready" not in said.read_text("utf-8"):
            time.sleep(0.05)
        time.sleep(0.2)  # for the line after it
        return program, said.read_text("utf-8")

    program, words = started()
    try:
        address = re.findall(r"http://[^ ]+/", words)[0]
        typed = {
            "code": code_of(words), "name": "Ann Example", "sign_in_name": "ann.e",
            "password": PASSWORD, "again": PASSWORD,
        }  # fmt: skip
        with httpx.Client(base_url=address, follow_redirects=True) as client:
            assert "The first person" in client.get("/jobs").text
            assert "Ann Example" in client.post("/first-person", data=typed).text
            assert client.get("/people").status_code == 200
    finally:
        program.terminate()
        program.wait(10)
    program, words = started()
    program.terminate()
    program.wait(10)
    assert "ready" in words
    assert CODE.search(words) is None
