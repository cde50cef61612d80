"""Random secrets handed out once: session and API tokens, one-time codes. Only their hashes are kept."""

from __future__ import annotations

import hashlib
import secrets

# No letter or figure that is taken for another on paper.
_SIGNS = "ABCDEFGHJKLMNPQRSTUVWXYZ23456789"
_GROUPS, _A_GROUP = 4, 4
_API = "bw_"  # a leaked one is recognised by its start


def session_token() -> str:
    """Return a new session's secret: 256 random bits."""
    return secrets.token_urlsafe(32)


def api_token() -> str:
    """Return a new token for a program."""
    return _API + secrets.token_urlsafe(32)


def one_time_code() -> str:
    """Return a code to be read out or written down: 80 random bits in four groups."""
    return "-".join("".join(secrets.choice(_SIGNS) for _ in range(_A_GROUP)) for _ in range(_GROUPS))


def code_hash(typed: str) -> str:
    """Return the hash of a code as typed: capitals, hyphens and spaces do not matter.

    >>> code_hash("abcd-efgh-2345-wxyz") == code_hash(" ABCDEFGH 2345WXYZ")
    True
    """
    return digest("".join(sign for sign in typed.upper() if sign.isalnum()))


def digest(secret: str) -> str:
    """Return what is kept of a random secret; a quick hash will do where nothing can be guessed."""
    return hashlib.sha256(secret.encode("utf-8", "replace")).hexdigest()
