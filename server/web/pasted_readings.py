"""Load-slip readings pasted as they come from a testing machine: blocks of two columns, a name before each.

A line is a reading (load, slip), the name of the next specimen, or a heading of the columns that may say their units.
A blank line ends a specimen. What cannot be read is told by its line, and all such lines at once.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

from server import units
from server.errors import InputError
from server.web.form_fields import UNITS
from server.web.form_text import Reading

_NUMBER = r"[+\-−]?(?:\d+(?:[.,]\d+)*|[.,]\d+)(?:[eE][+\-]?\d+)?"
_LINE = re.compile(rf"\s*({_NUMBER})\s*([A-Za-z]+)?\s*[,;\t\s]\s*({_NUMBER})\s*([A-Za-z]+)?\s*[,;]?\s*")
_STARTS = re.compile(rf"\s*(?:{_NUMBER})")
_HEADING = re.compile(
    r"\s*(?:load|force|last|kraft|F|P)\b[^A-Za-z]*([A-Za-z]+)?[\])\s]*[,;\t\s]\s*"
    r"(?:slip|displacement|deformation|v|u|s)\b[^A-Za-z]*([A-Za-z]+)?[\])\s]*",
    re.IGNORECASE,
)
_EXCLUDED = re.compile(r"(.*?)[\s,;|]*\bexcluded:\s*(.*)", re.IGNORECASE)
TOLD = 8  # faults told at once
MOST = 2000  # readings of one specimen


@dataclass
class _Block:
    name: str = ""
    excluded: str = ""
    readings: list[list[str]] = field(default_factory=list)
    line: int = 0

    def entry(self) -> dict[str, Any]:
        said = {"name": self.name, "excluded": self.excluded}
        return {**{key: text for key, text in said.items() if text}, "readings": self.readings}


def readings(text: str, system: str, box: str, reading: Reading) -> list[dict[str, Any]]:
    """Read pasted text into specimens; a bare number has the unit of its heading, else that of the box."""
    plain = (UNITS["force"][system == "US"], UNITS["size"][system == "US"])
    used, found, block = plain, list[_Block](), _Block()
    faults: list[str] = []
    for number, line in enumerate(text.splitlines(), 1):
        if not line.strip():
            block = _closed(block, found)
        elif heading := _HEADING.fullmatch(line):
            used = _units_of(heading, plain, number, faults)
        elif _STARTS.match(line) and (_LINE.fullmatch(line) or not _names(line)):
            pair = _pair(line, used, number, faults)
            if pair is not None:
                block.line = block.line or number
                block.readings.append(pair)
        else:
            block = _closed(block, found)
            cut = _EXCLUDED.fullmatch(line.strip())
            block.line = number
            block.name, block.excluded = (cut[1], cut[2]) if cut else (line.strip().rstrip(":").strip(), "")
    _closed(block, found)
    faults += _short(found)
    if faults:
        more = f" And {len(faults) - TOLD} more." if len(faults) > TOLD else ""
        reading.fault(box, " ".join(faults[:TOLD]) + more)
    return [each.entry() for each in found]


def write(specimens: Sequence[Any]) -> str:
    """Write specimens with readings as ``readings`` takes them."""
    blocks = []
    for each in specimens:
        head = str(each.get("name") or "")
        if each.get("excluded"):
            head = f"{head} excluded: {each['excluded']}".strip()
        lines = [f"{_said(load, 'N')}; {_said(slip, 'mm')}" for load, slip in each.get("readings") or ()]
        blocks.append("\n".join([head, *lines] if head else lines))
    return "\n\n".join(blocks)


def _said(value: object, unit: str) -> str:
    return f"{value:.10g} {unit}" if isinstance(value, int | float) else str(value)


def _closed(block: _Block, found: list[_Block]) -> _Block:
    """Keep a block that says anything, and begin the next."""
    if block.name or block.readings or block.excluded:
        found.append(block)
        return _Block()
    return block


def _names(line: str) -> bool:
    """Whether a line that begins with a number is a name all the same: '3 / spruce', '12a'."""
    return bool(re.match(r"\s*\d+\s*(?:[/:)]|[A-Za-z]+\d*\s*:?$)", line)) and not re.search(r"[;\t]", line)


def _units_of(heading: re.Match[str], plain: tuple[str, str], number: int, faults: list[str]) -> tuple[str, str]:
    said = []
    for place, kind in ((0, "force"), (1, "length")):
        unit = heading[place + 1] or plain[place]
        try:
            units.parse("", f"1 {unit}", kind)
        except InputError:
            faults.append(f"Line {number}: “{unit}” is no unit of {'load' if place == 0 else 'slip'} here.")
            unit = plain[place]
        said.append(unit)
    return said[0], said[1]


def _pair(line: str, used: tuple[str, str], number: int, faults: list[str]) -> list[str] | None:
    bare = line.strip()
    match = _LINE.fullmatch(line)
    if match is None or (bare.count(",") > 1 and not re.search(r"[;\t\s]", bare)):
        faults.append(f"Line {number}: “{bare[:40]}” is not a load and a slip; write them as “1.25; 0.40”.")
        return None
    pair = []
    for place, kind, word in ((0, "force", "load"), (1, "length", "slip")):
        text = f"{_decimal(match[1 + 2 * place])} {match[2 + 2 * place] or used[place]}"
        try:
            value = units.parse("", text, kind)
        except InputError as error:
            faults.append(f"Line {number}: the {word}: {error}")
            return None
        if place == 0 and value < 0:
            faults.append(f"Line {number}: the load {text} is below 0; enter loads from 0 up.")
            return None
        pair.append(text)
    return pair


def _decimal(number: str) -> str:
    """A decimal comma as a point, where it cannot be meant to part thousands."""
    if number.count(",") == 1 and "." not in number and not re.fullmatch(r"[+\-−]?[1-9]\d{0,2},\d{3}", number):
        return number.replace(",", ".")
    return number


def _short(found: Sequence[_Block]) -> list[str]:
    told = []
    for number, block in enumerate(found, 1):
        who = f"Line {block.line}: specimen {number}{f' ({block.name})' if block.name else ''}"
        count = len(block.readings)
        if count < 2:
            told.append(f"{who} has {count or 'no'} reading{'s' if count != 1 else ''}; it needs two at least.")
        elif count > MOST:
            told.append(f"{who} has {count} readings; at most {MOST} are taken, so leave some out.")
    return told
