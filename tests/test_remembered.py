"""The store of what was worked out before."""

from __future__ import annotations

import pytest

from server.remembered import Remembered


def test_a_content_is_worked_out_once_and_the_oldest_goes_first():
    store: Remembered[str] = Remembered(2)
    made: list[str] = []

    def ask(content: str) -> str:
        return store.of(content, lambda: made.append(content) or content.upper())

    assert [ask(each) for each in ("a", "b", "a", "c", "a", "b")] == ["A", "B", "A", "C", "A", "B"]
    assert made == ["a", "b", "c", "b"]  # "b" was asked for longest ago when "c" came
    store.forget()
    assert ask("a") == "A"
    assert made[-1] == "a"


def test_what_cannot_be_made_is_not_kept():
    store: Remembered[int] = Remembered(2)
    with pytest.raises(ZeroDivisionError):
        store.of("x", lambda: 1 // 0)
    assert store.of("x", lambda: 5) == 5
