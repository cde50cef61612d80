"""What a saved revision holds, and the hash that shows it was not altered."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.storage.tables import compact

PARTS = ("heading", "document", "values_used", "result", "engine")


def content_hash(content: Mapping[str, Any]) -> str:
    """Return the SHA-256, in hexadecimal, of heading, document, values used, result and engine.

    It is taken over one JSON object of these five, in this order, names below them in the order they were saved (the
    order of pieces matters to a check), without spaces, letters unescaped, in UTF-8.
    """
    return hashlib.sha256(compact({part: content[part] for part in PARTS}).encode()).hexdigest()


def bytes_hash(data: bytes) -> str:
    """Return the SHA-256, in hexadecimal, of a sheet's bytes."""
    return hashlib.sha256(data).hexdigest()


def leaves(value: Any, path: str = "") -> Iterator[tuple[str, Any]]:
    """Yield every number and text below ``value`` with its path.

    >>> list(leaves({"loads": {"snow": [{"value": "2 kN"}]}}))
    [('loads.snow[0].value', '2 kN')]
    """
    if isinstance(value, Mapping):
        for name, inner in value.items():
            yield from leaves(inner, f"{path}.{name}" if path else str(name))
    elif isinstance(value, Sequence) and not isinstance(value, str):
        for index, inner in enumerate(value):
            yield from leaves(inner, f"{path}[{index}]")
    else:
        yield path, value
