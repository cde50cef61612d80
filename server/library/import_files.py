"""Library files read into items to import, each with the line it stands on; nothing is judged here but the file."""

from __future__ import annotations

import csv
import io
import json
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from server.errors import DocumentError, Fault
from server.library.exporting import FIRST_COLUMNS, FORMAT, LAST_COLUMNS

LARGEST = 64 * 1024 * 1024
MOST_ROWS = 100_000
_LINK = re.compile(r"\s*(\S+?)\s*(?:rev\.?|revision)\s*(\d{1,9})\s*", re.IGNORECASE)
_PARTS = ("values.", "details.", "links.")
csv.field_size_limit(2**24)  # a set's coupons are one cell
CONTENT = ("name", "values", "details", "links", "chain", "source", "note")


@dataclass(frozen=True)
class Item:
    """One revision in a file. ``content`` holds what the file says, and nothing for what it leaves open.

    ``last``: no later revision of the record is in the file; ``alone``: nor can an earlier one be; ``rows`` are the
    lines of its coupons, where each has its own.
    """

    line: int
    group: str
    key: str
    revision: int | None
    status: str
    content: Mapping[str, Any]
    provenance: Mapping[str, str] = field(default_factory=dict)
    last: bool = True
    alone: bool = False
    wrong: str = ""
    rows: tuple[int, ...] = ()


def read_file(text: str) -> list[Item]:
    """Read a library file: JSON where it begins with a brace, else CSV.

    Raises
    ------
    DocumentError
        If the file as a whole cannot be read; single rows that cannot are items with ``wrong``.
    """
    if len(text) > LARGEST:
        raise _refused(f"The file holds {len(text)} characters; at most {LARGEST} are read.")
    plain = text.removeprefix("\ufeff")
    return list(_json_items(plain) if plain.lstrip()[:1] == "{" else _csv_items(plain))


def _refused(message: str) -> DocumentError:
    return DocumentError([Fault("", message)])


# --- JSON -------------------------------------------------------------------------------------------------------------


def _json_items(text: str) -> Iterator[Item]:
    found = _Scanner(text).read()
    if found.format != FORMAT:
        raise _refused(f"The format is {str(found.format)[:60]!r}; this program reads {FORMAT!r}.")
    for line, record in found.records:
        yield from _record_items(line, record)


def _record_items(line: int, record: object) -> Iterator[Item]:
    if not isinstance(record, Mapping):
        yield Item(line, "", "", None, "", {}, wrong="This is no record; a record is an object with group and key.")
        return
    group, key = str(record.get("group", ""))[:60], str(record.get("key", ""))[:60]
    revisions = record.get("revisions", [record])
    if not isinstance(revisions, list) or not revisions or not all(isinstance(each, Mapping) for each in revisions):
        yield Item(line, group, key, None, "", {}, wrong="'revisions' holds no revisions; it is a list of objects.")
        return
    for place, revision in enumerate(revisions):
        yield _json_item(line, group, key, revision, last=place == len(revisions) - 1)


def _json_item(line: int, group: str, key: str, revision: Mapping[str, Any], *, last: bool) -> Item:
    content = {name: revision[name] for name in CONTENT if name in revision}
    wrong = ""
    kinds = {"values": Mapping, "details": Mapping, "links": Mapping, "chain": list}
    for name, kind in kinds.items():
        if name in content and not isinstance(content[name], kind):
            wrong = f"'{name}' is {'a list' if kind is list else 'an object'}; correct it."
    words = ("name", "source", "note", *content.get("details", {})) if not wrong else ()
    texts = {**content, **content.get("details", {})} if not wrong else {}
    bad = [name for name in words if name in texts and not isinstance(texts[name], str)]
    if bad:
        wrong = f"'{bad[0]}' is a text; write it in quotes."
    number = revision.get("revision")
    acts = revision.get("acts")
    approvals = [act for act in acts if isinstance(act, Mapping) and act.get("status") == "approved"] if acts else []
    told = {name: str(revision[name])[:200] for name in ("made_by", "created_at", "reason") if revision.get(name)}
    if approvals:
        told |= {"approved_by": str(approvals[-1].get("who", "")), "approved_at": str(approvals[-1].get("at", ""))}
    n = number if isinstance(number, int) and not isinstance(number, bool) else None
    return Item(line, group, key, n, str(revision.get("status", "draft")), content, told, last=last, wrong=wrong)


@dataclass
class _Scanner:
    """Reads the outer object by hand, so that every record's line is known."""

    text: str
    at: int = 0
    format: object = None
    records: list[tuple[int, object]] = field(default_factory=list)

    def read(self) -> _Scanner:
        try:
            self._object()
        except json.JSONDecodeError as error:
            raise _refused(f"line {error.lineno}: the file is not JSON ({error.msg}); correct it there.") from None
        except RecursionError:
            raise _refused("The file is nested too deeply.") from None
        return self

    def _object(self) -> None:
        self._take("{")
        while self._peek() != "}":
            name = self._value()
            self._take(":")
            if name == "records" and self._peek() == "[":
                self._list()
            else:
                value = self._value()
                self.format = value if name == "format" else self.format
            if self._peek() == ",":
                self._take(",")
        self._take("}")

    def _list(self) -> None:
        self._take("[")
        line, counted = 1, 0
        while self._peek() != "]":
            line += self.text.count("\n", counted, self.at)
            counted = self.at
            self.records.append((line, self._value()))
            if self._peek() == ",":
                self._take(",")
        self._take("]")

    def _value(self) -> object:
        self._peek()
        value, self.at = json.JSONDecoder().raw_decode(self.text, self.at)
        found: object = value
        return found

    def _peek(self) -> str:
        while self.at < len(self.text) and self.text[self.at] in " \t\r\n":
            self.at += 1
        if self.at >= len(self.text):
            raise json.JSONDecodeError("it ends too early", self.text, len(self.text))
        return self.text[self.at]

    def _take(self, sign: str) -> None:
        if self._peek() != sign:
            raise json.JSONDecodeError(f"{sign!r} is wanted here", self.text, self.at)
        self.at += 1


# --- CSV --------------------------------------------------------------------------------------------------------------


def _csv_items(text: str) -> Iterator[Item]:
    first = text.split("\n", 1)[0]
    separator = max(";\t,", key=first.count) if any(sign in first for sign in ";\t,") else ","
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    try:
        header = [name.strip() for name in next(reader, [])]
        _check_header(header)
        rows: list[tuple[int, list[str]]] = []
        for row in reader:
            if len(rows) >= MOST_ROWS:
                raise _refused(f"line {reader.line_num}: at most {MOST_ROWS} rows are read at once.")
            if any(cell.strip() for cell in row):
                rows.append((reader.line_num, row))
    except csv.Error as error:
        raise _refused(f"line {reader.line_num}: the file is not CSV ({error}); correct it there.") from None
    if "set" in header:
        yield from _sets(header, rows)
    else:
        yield from (_csv_item(line, header, row) for line, row in rows)


def _sets(header: list[str], rows: list[tuple[int, list[str]]]) -> Iterator[Item]:
    """Coupons, one a row, put together to the sets that they name."""
    found: dict[str, list[tuple[int, dict[str, Any]]]] = {}
    revisions: dict[str, str] = {}
    for line, row in rows:
        cells = {name: _plain(cell) for name, cell in zip(header, row, strict=False) if name}
        key = cells.pop("set", "")
        revisions.setdefault(key, cells.pop("revision", ""))
        cells.pop("number", "")
        found.setdefault(key, []).append((line, _nested(cells)))
    for key, coupons in found.items():
        lines = tuple(line for line, _ in coupons)
        content = {"values": {"coupons": [coupon for _, coupon in coupons]}}
        n = int(revisions[key]) if revisions[key].isdecimal() and len(revisions[key]) < 10 else None
        yield Item(lines[0], "sets", key, n, "draft", content, alone=True, rows=lines)


def _check_header(header: list[str]) -> None:
    twice = sorted({name for name in header if name and header.count(name) > 1})
    if twice:
        raise _refused(f"line 1: the column {twice[0]} stands there twice; keep one.")
    if "set" in header:
        return
    lacking = [name for name in ("group", "key") if name not in header]
    if lacking:
        raise _refused(
            f"line 1: the column {' and '.join(lacking)} is missing; a library table names its columns in the first "
            "line: group, key, name, values.shear_strength, details.product, links.set, ..."
        )
    for name in header:
        if name and name not in (*FIRST_COLUMNS, *LAST_COLUMNS) and not name.startswith(_PARTS):
            raise _refused(f"line 1: {name[:60]!r} is no column known here; a value is headed values.NAME.")


def _csv_item(line: int, header: list[str], row: list[str]) -> Item:
    cells = {name: _plain(cell) for name, cell in zip(header, row, strict=False) if name}
    wrong = "" if len(row) <= len(header) else f"has {len(row)} cells under {len(header)} headings."
    content: dict[str, Any] = {name: cells[name] for name in ("name", "source", "note") if name in cells}
    try:
        for part in ("values", "details", "links"):
            named = {name.partition(".")[2]: cell for name, cell in cells.items() if name.startswith(f"{part}.")}
            if named:
                content[part] = _nested(named) if part == "values" else _strings(part, named)
        if cells.get("chain"):
            content["chain"] = json.loads(cells["chain"])
    except json.JSONDecodeError as error:
        wrong = f"a cell begins with a bracket and is not JSON ({error.msg})."
    told = {name: cells[name][:200] for name in LAST_COLUMNS[1:] if cells.get(name)}
    revision = cells.get("revision", "")
    n = int(revision) if revision.isdecimal() and len(revision) < 10 else None
    status, group, key = cells.get("status") or "draft", cells.get("group", ""), cells.get("key", "")
    return Item(line, group, key, n, status, content, told, alone=True, wrong=wrong)


def _plain(cell: str) -> str:
    text = cell.strip()
    return text[1:] if text[:1] == "'" else text


def _strings(part: str, named: Mapping[str, str]) -> dict[str, Any]:
    if part == "details":
        return {name: cell for name, cell in named.items() if cell}
    links: dict[str, Any] = {}
    for role, cell in named.items():
        match = _LINK.fullmatch(cell)
        if cell:
            links[role] = {"record": match[1], "revision": int(match[2])} if match else {"record": cell.strip()}
    return links


def _nested(named: Mapping[str, str]) -> dict[str, Any]:
    """Cells under their paths: {"strengths.bending": "24 MPa"} is {"strengths": {"bending": "24 MPa"}}."""
    found: dict[str, Any] = {}
    for path, cell in named.items():
        if not cell:
            continue
        *parents, last = path.split(".")
        at = found
        for name in parents:
            at = at.setdefault(name, {})
        at[last] = _cell_value(cell)
    return found


def _cell_value(cell: str) -> Any:
    if cell[:1] in "[{":
        return json.loads(cell)
    if cell in ("true", "false"):
        return cell == "true"
    return float(cell) if re.fullmatch(r"-?\d+(?:\.\d+)?(?:[eE][-+]?\d+)?", cell, re.ASCII) else cell
