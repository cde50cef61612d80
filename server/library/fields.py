"""Texts that people type beside the numbers: trimmed, measured, refused with the field's name."""

from __future__ import annotations

import unicodedata

from server import sheets
from server.errors import Fault

LINE, TEXT = 200, 5000


def line(faults: list[Fault], path: str, value: str, *, needed: str = "", most: int = LINE) -> str:
    """Return one trimmed line; a fault where it is too long, broken or, with ``needed`` (what to enter), empty."""
    text = _clean(faults, path, value, most, "")
    if needed and not text:
        faults.append(Fault(path, f"The {path.replace('_', ' ')} is empty; enter {needed}."))
    return text


def prose(faults: list[Fault], path: str, value: str, *, most: int = TEXT) -> str:
    """Return a trimmed text that may have several lines."""
    return _clean(faults, path, value.replace("\r\n", "\n"), most, "\n\t")


def choice(faults: list[Fault], path: str, value: str, known: tuple[str, ...]) -> str:
    """Return ``value`` if it is one of ``known``; else a fault that lists them."""
    if value not in known:
        faults.append(Fault(path, f"{value[:60]!r} is not known here; choose one of {', '.join(known)}."))
    return value


def _clean(faults: list[Fault], path: str, value: str, most: int, allowed: str) -> str:
    text = value.strip()
    if len(text) > most:
        faults.append(Fault(path, f"{path} has {len(text)} characters; shorten it to {most}."))
    # Cc: control characters, Cs: halves of a broken character; neither can be printed or kept as text.
    bad = [sign for sign in text if sign not in allowed and unicodedata.category(sign) in ("Cc", "Cs")]
    if bad:
        faults.append(Fault(path, f"{path} holds a character that cannot be printed ({bad[0]!a}); take it out."))
        return text
    printable(faults, path, text)
    return text


def printable(faults: list[Fault], path: str, text: str) -> None:
    """Add a fault where ``text`` holds a sign the sheets' fonts do not have: better now than when a sheet is drawn."""
    for sign in dict.fromkeys(text):
        if not sign.isascii() and sheets.unprintable(sign):
            message = f"{path} holds “{sign}” (U+{ord(sign):04X}), which a sheet cannot print; use another sign."
            faults.append(Fault(path, message))
            return
