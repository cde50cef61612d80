"""Full-text search: what a person types, as a query that can only ever be words."""

from __future__ import annotations

MOST_CHARACTERS, MOST_WORDS = 200, 20


def search_terms(text: str) -> str | None:
    """Return an FTS5 query for entries holding every word of ``text``, each from its beginning; None without a word.

    Each word is quoted, so nothing a person types is an operator.

    >>> search_terms('epoxy "B-0')
    '"epoxy"* "\"\"B-0"*'
    >>> search_terms(" - ") is None
    True
    """
    printable = "".join(sign if sign.isprintable() else " " for sign in text[:MOST_CHARACTERS])
    words = [word for word in printable.split() if any(sign.isalnum() for sign in word)]
    return " ".join(f'"{word.replace(chr(34), chr(34) * 2)}"*' for word in words[:MOST_WORDS]) or None
