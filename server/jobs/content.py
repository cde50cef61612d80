"""What a saved revision holds, and the hash that shows it was not altered."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping
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
