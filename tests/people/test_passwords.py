from __future__ import annotations

import threading
import time

import pytest

from server.people import BusyError, passwords


@pytest.mark.parametrize(
    "password",
    ["short", "nine char", "", "          ", "aaaaaaaaaaaaaaaa", "abababababab", "1234567890", "0987654321",
     "abcdefghij", "Password123!", "p@ssw0rd2024", "Qwertyuiop1", "welcome12345", "Bondwright1", "Summer2026!!",
     "letmein!!!!", "x" * 201],
)  # fmt: skip
def test_a_password_that_is_guessed_first_is_refused_with_the_next_step(password: str) -> None:
    assert "use" in passwords.fault(password)


@pytest.mark.parametrize("password", ["Ann Example", "annexample", "example.ann", "ann.e1234567", "AnnExample2026"])
def test_a_password_that_is_the_name_is_refused(password: str) -> None:
    found = passwords.fault(password, "Ann Example", "ann.e")
    assert ("name" in found) == (password != "example.ann")


@pytest.mark.parametrize(
    "password", ["seven planed boards", "Zwölf Leimklammern", "kx8!qTz2vB", "接着剤は強いですよねえ"]
)
def test_other_passwords_are_taken(password: str) -> None:
    assert passwords.fault(password, "Ann Example", "ann.e") == ""


def test_only_the_hash_is_kept_and_it_is_argon2id_at_the_chosen_cost() -> None:
    kept = passwords.hashed("seven planed boards")
    assert kept.startswith("$argon2id$v=19$m=19456,t=2,p=1$")
    assert "planed" not in kept
    assert kept != passwords.hashed("seven planed boards")
    assert passwords.fits(kept, "seven planed boards")
    assert not passwords.fits(kept, "seven planed board")
    assert not passwords.outdated(kept)


def test_two_spellings_that_look_alike_are_one_password() -> None:
    assert passwords.fits(passwords.hashed("Zwo\u0308lf Klammern"), "Zw\u00f6lf Klammern")


@pytest.mark.parametrize("kept", [None, "", "not a hash"])
def test_where_nothing_is_kept_nothing_fits(kept: str | None) -> None:
    assert not passwords.fits(kept, "a password nobody has")


def test_an_unknown_name_takes_as_long_as_a_known_one() -> None:
    kept = passwords.hashed("seven planed boards")
    passwords.fits(None, "x")

    def taken(known: str | None) -> float:
        begun = time.perf_counter()
        passwords.fits(known, "some other words")
        return time.perf_counter() - begun

    # In turns, so that a busy machine falls on both alike; without the work it would be thousands of times quicker.
    known, unknown = (min(times) for times in zip(*((taken(kept), taken(None)) for _ in range(7)), strict=True))
    assert 1 / 3 < unknown / known < 3


def test_few_passwords_are_weighed_at_once_and_a_crowd_is_turned_away(monkeypatch: pytest.MonkeyPatch) -> None:
    at_once = most = turned_away = 0
    lock = threading.Lock()

    def slow(kept: str, password: str) -> bool:
        nonlocal at_once, most
        with lock:
            at_once += 1
            most = max(most, at_once)
        time.sleep(0.05)
        with lock:
            at_once -= 1
        return True

    class Slow:
        verify = staticmethod(slow)

    def knock() -> None:
        nonlocal turned_away
        try:
            passwords.fits("kept", "words")
        except BusyError:
            with lock:
                turned_away += 1

    monkeypatch.setattr(passwords, "_HASHER", Slow)
    threads = [threading.Thread(target=knock) for _ in range(30)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert most == 2
    assert 0 < turned_away <= 18
    assert passwords.fits("kept", "words")
