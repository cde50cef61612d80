"""What a single box may hold: a number that takes the box's unit, a list of names with numbers, points, stretches.

Each reader puts what it cannot read beside its box (``Reading.fault``) and goes on, so that all faults show at once.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from server.web.form_fields import UNITS

_BARE = re.compile(r"[+\-−]?\s*[\d.,][\d\s.,/\-]*(?:[eE][+\-]?\d+)?")


@dataclass
class Reading:
    """One form as read: the document, the form's own faults by box, and which box each path came from."""

    raw: dict[str, object] = field(default_factory=dict)
    faults: dict[str, str] = field(default_factory=dict)
    paths: dict[str, str] = field(default_factory=dict)

    def fault(self, name: str, message: str) -> None:
        """Keep the first message of a box."""
        self.faults.setdefault(name, message)


def with_unit(text: str, unit: str, system: str) -> str:
    """Say the box's unit after a bare number; leave anything else as typed."""
    text = text.strip()
    if unit and _BARE.fullmatch(text):
        return f"{text} {UNITS[unit][system == 'US']}"
    return text


def is_number(text: str) -> bool:
    return _BARE.fullmatch(text) is not None


def split(text: str) -> list[str]:
    """Split a list typed with commas, semicolons or lines; quotes round a part keep its commas in it."""
    found = re.findall(r'\s*(?:"((?:[^"]|"")*)"|([^,;\n]*))\s*(?:[,;\n]|$)', text)
    return [part for quoted, plain in found if (part := quoted.replace('""', '"') or plain.strip())]


def pairs(text: str, box: str, reading: Reading) -> dict[str, object]:
    """Read ``dead 1.35, snow 1.5`` into a value by name."""
    found: dict[str, object] = {}
    for part in split(text):
        match = re.fullmatch(r"(.+?)[\s:=]+([+\-−]?[\d.,]+(?:[eE][+\-]?\d+)?\s*%?)", part)
        if match is None:
            reading.fault(box, f"“{part}” is not a name and a number; write for example “dead 1.35, snow 1.5”.")
        elif match[1] in found:
            reading.fault(box, f"“{match[1]}” is given twice; keep one of them.")
        else:
            found[match[1]] = match[2]
    return found


def couples(text: str, box: str, reading: Reading) -> list[tuple[str, str]]:
    """Read ``0, 3 kN; 1.2 m, 3 kN`` into couples of texts."""
    found = []
    for part in re.split(r"[;\n]", text):
        ends = [end.strip() for end in (part.split(",") if "," in part else part.split())]
        if len(ends) == 2 and all(ends):
            found.append((ends[0], ends[1]))
        elif part.strip():
            reading.fault(box, f"“{part.strip()}” is not two values; write them as “0, 3; 1.2, 3”.")
    return found


def points(text: str, system: str, box: str, reading: Reading) -> list[list[str]]:
    return [[with_unit(end, "size", system) for end in point] for point in couples(text, box, reading)]


def schedule(text: str, system: str, box: str, reading: Reading) -> list[dict[str, object]]:
    """Read ``0 to 1 m: 75 mm; 1 m to 3 m: 150 mm`` into stretches of spacing."""
    found: list[dict[str, object]] = []
    for part in re.split(r"[;\n]", text):
        match = re.fullmatch(r"\s*(.+?)\s+to\s+(.+?)\s*:\s*(.+?)\s*", part)
        if match:
            found.append(
                {
                    "from": with_unit(match[1], "position", system),
                    "to": with_unit(match[2], "position", system),
                    "spacing": with_unit(match[3], "size", system),
                }
            )
        elif part.strip():
            reading.fault(box, f"“{part.strip()}” is not a stretch; write for example “0 to 1 m: 75; 1 m to 3 m: 150”.")
    return found
