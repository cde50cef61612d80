"""Passwords: which are refused, and how they are kept (argon2id, 19 MiB, two passes, one lane)."""

from __future__ import annotations

import secrets
import threading
import unicodedata
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache

from argon2 import PasswordHasher
from argon2.exceptions import InvalidHashError, VerificationError

from server.people.errors import BusyError

SHORTEST, LONGEST = 10, 200
_FEWEST_SIGNS = 5
_AT_ONCE, _IN_LINE = 2, 12
_WAIT_SECONDS = 10

# OWASP's minimum for argon2id (Password Storage Cheat Sheet): 19 MiB, t = 2, p = 1.
_HASHER = PasswordHasher(time_cost=2, memory_cost=19 * 1024, parallelism=1)
_hashing, _line = threading.BoundedSemaphore(_AT_ONCE), threading.BoundedSemaphore(_IN_LINE)

# The words most often found in leaked passwords (from memory), and this shop's own. A password that is one of them
# with figures and marks around it, or letters swapped for figures, is guessed first.
_WORDS = """
password passwort motdepasse contrasena kennwort letmein welcome willkommen administrator admin adminadmin qwerty
qwertyuiop qwertyui qwertz qwertzuiop azerty azertyuiop asdfghjkl asdfasdf zxcvbnm yxcvbnm qazwsx qazwsxedc abc
abcd abcdef abcdefgh abcdefghij iloveyou ilovejesus sunshine princess dragon monkey football baseball superman
batman master shadow michael jordan charlie trustno changeme changeit secret default guest login test testtest
passpass passwordpassword hallo hello hellohello whatever starwars computer internet summer winter spring autumn
sommer january monday freedom mustang access ninja lovely flower cookie cheese pepper matrix samsung google
bondwright workshop werkstatt carpenter joiner fabrication shop gluegun epoxy
"""
_COMMON = frozenset(_WORDS.split())
_SWAPPED = str.maketrans("@4310$5!7", "aaeiossit")
_ROWS = ("01234567890123456789", "98765432109876543210", "abcdefghijklmnopqrstuvwxyz", "qwertyuiopasdfghjklzxcvbnm")


def fault(password: str, *names: str) -> str:
    """Return why ``password`` cannot be used by the person with ``names``, with the next step; '' if it can.

    >>> fault("correct horse", "Ann Example", "ann")
    ''
    >>> fault("short")
    'The password has 5 characters; use 10 or more. Several words in a row are easy to remember.'
    """
    text = _plain(password)
    if len(text) < SHORTEST:
        return (
            f"The password has {len(text)} characters; use {SHORTEST} or more. "
            "Several words in a row are easy to remember."
        )
    if len(text) > LONGEST:
        return f"The password has {len(text)} characters; use {LONGEST} at most."
    if _is_name(text, names):
        return "The password is the name; use words that have nothing to do with the person."
    if len(set(text.casefold())) < _FEWEST_SIGNS or any(text.casefold() in row for row in _ROWS) or _is_common(text):
        return "This password is among the first that are guessed; use several words that do not belong together."
    return ""


def hashed(password: str) -> str:
    """Return what is kept of a password."""
    with _turn():
        return _HASHER.hash(_plain(password))


def fits(kept: str | None, password: str) -> bool:
    """Return whether ``password`` is the kept one; as slow where nothing is kept, so that time tells nothing."""
    with _turn():
        try:
            _HASHER.verify(kept or _nobodys(), _plain(password))
        except (VerificationError, InvalidHashError):
            return False
    return bool(kept)


def outdated(kept: str) -> bool:
    """Return whether a kept password was hashed in an older way."""
    return _HASHER.check_needs_rehash(kept)


@cache
def _nobodys() -> str:
    return _HASHER.hash(secrets.token_urlsafe())


def _plain(password: str) -> str:
    """Return one spelling of what looks alike, so that another keyboard gives the same password."""
    return unicodedata.normalize("NFKC", password)


def _is_name(text: str, names: tuple[str, ...]) -> bool:
    letters = _letters(text)
    known = {_letters(name) for name in names} - {""}
    parts = {_letters(part) for name in names for part in name.replace(".", " ").split()} - {""}
    return letters in known | parts or any(letters == name * 2 for name in known | parts)


def _is_common(text: str) -> bool:
    core = text.casefold().strip("0123456789.,-_#?!&*+/ ")
    return _letters(text) in _COMMON or _letters(core.translate(_SWAPPED)) in _COMMON


def _letters(text: str) -> str:
    return "".join(sign for sign in text.casefold() if sign.isalpha())


@contextmanager
def _turn() -> Iterator[None]:
    """Let a few passwords be weighed at once, each takes 19 MiB; a few more wait, the rest are turned away."""
    if not _line.acquire(blocking=False):
        raise BusyError("Too many people are signing in at this moment. Wait a few seconds, then try again.")
    try:
        if not _hashing.acquire(timeout=_WAIT_SECONDS):
            raise BusyError("Signing in takes too long at this moment. Wait a few seconds, then try again.")
        try:
            yield
        finally:
            _hashing.release()
    finally:
        _line.release()
