"""Coupons from a pasted block of a spreadsheet, or from a CSV file: one coupon a line, columns by their heading."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server import units
from server.errors import InputError
from server.library.pasted_columns import Column, column_of, known_columns
from server.library.pasted_dates import read_day

MOST_LINES, MOST_CHARACTERS = 2001, 500_000


@dataclass(frozen=True)
class LineFault:
    """What is wrong with one line, or with one cell of it; ``line`` counts from 1 in the text as pasted."""

    line: int
    column: str
    given: str
    message: str

    def __str__(self) -> str:
        at = f"line {self.line}" + (f", {self.column}" if self.column else "")
        return f"{at}: {self.message}"


@dataclass(frozen=True)
class Pasted:
    """What was read: the coupons as a document holds them, the line each stood on, and what could not be read."""

    coupons: list[dict[str, Any]]
    lines: list[int]
    columns: list[str]
    faults: list[LineFault]


def read_coupons(text: str, *, header: str = "", defaults: Mapping[str, object] | None = None) -> Pasted:
    """Read ``text``: columns parted by tabs, semicolons or commas, under a line of headings with their units.

    "load kN", "width (mm)", "ram bar" and "bonded" are such headings. ``header`` is the line to suppose where the text
    begins with numbers; ``defaults`` fills fields of every coupon that the text leaves open ("ram_area": "1200 mm2").
    A cell that cannot be read is a fault with its line and column; what the cells mean together is for the check of
    the coupons to judge.
    """
    lines = _lines(text)
    if not lines:
        return Pasted([], [], [], [LineFault(1, "", "", "Nothing was pasted; paste the coupons, one a line.")])
    if len(text) > MOST_CHARACTERS or len(lines) > MOST_LINES:
        message = f"The text has {len(lines)} lines; at most {MOST_LINES - 1} coupons are read at once."
        return Pasted([], [], [], [LineFault(1, "", "", message)])
    first, *rest = lines
    if _is_numbers(first[1]):
        if not header:
            listed = ", ".join(known_columns())
            message = f"The first line must name the columns, such as 'load kN; width mm; length mm'. Known: {listed}."
            return Pasted([], [], [], [LineFault(first[0], "", first[1][:60], message)])
        rest = lines if len(lines) > 1 else _one_line_of_many(first)
        first = (0, header)
    separator = _separator(first[1], [line for _, line in rest])
    columns, faults = _columns(first[0], _cells(first[1], separator))
    return _coupons(rest, separator, columns, faults, dict(defaults or {}))


def _lines(text: str) -> list[tuple[int, str]]:
    """The lines that hold something, with their numbers."""
    every = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n")
    return [(number, line) for number, line in enumerate(every, start=1) if line.strip(" \t;,")]


def _is_numbers(line: str) -> bool:
    cells = [cell for cell in re.split(r"[\t; ]+", line.strip()) if cell]
    return bool(cells) and all(re.fullmatch(r"[-+]?[\d.,]+", cell) for cell in cells)


def _one_line_of_many(line: tuple[int, str]) -> list[tuple[int, str]]:
    """Numbers side by side in one line, each a coupon."""
    number, text = line
    parted = re.split(r"[\t;]+" if re.search(r"[\t;]", text) else r"\s+", text.strip())
    return [(number, cell.strip()) for cell in parted if cell.strip()]


def _separator(header: str, lines: Sequence[str]) -> str:
    """Tab before semicolon before comma; '' for a single column, where a comma can only be a decimal one."""
    for sign in "\t;":
        if sign in header:
            return sign
    if "," in header:
        return ","
    return next((sign for sign in "\t;" if any(sign in line.strip() for line in lines)), "")


def _cells(line: str, separator: str) -> list[str]:
    if not separator:
        return [_unquoted(line.strip())]
    cells, cell, quoted = [], "", False
    for sign in line:
        if sign == '"' and (quoted or not cell.strip()):
            quoted = not quoted
            cell += sign
        elif sign == separator and not quoted:
            cells.append(_unquoted(cell.strip()))
            cell = ""
        else:
            cell += sign
    return [*cells, _unquoted(cell.strip())]


def _unquoted(cell: str) -> str:
    if len(cell) > 1 and cell[0] == cell[-1] == '"':
        return cell[1:-1].replace('""', '"').strip()
    return cell


def _columns(line: int, cells: Sequence[str]) -> tuple[list[Column | None], list[LineFault]]:
    columns: list[Column | None] = []
    faults: list[LineFault] = []
    seen: dict[str, str] = {}
    for cell in cells:
        column, wrong = column_of(cell)
        if wrong:
            faults.append(LineFault(line, cell[:40], cell[:60], wrong))
        elif column is not None and column.field in seen:
            message = f"is the same as '{seen[column.field]}'; keep one of the two columns."
            faults.append(LineFault(line, cell[:40], cell[:60], message))
        if column is not None:
            seen.setdefault(column.field, cell)
        columns.append(column)
    return columns, faults


def _coupons(
    lines: Sequence[tuple[int, str]],
    separator: str,
    columns: Sequence[Column | None],
    faults: list[LineFault],
    defaults: dict[str, object],
) -> Pasted:
    coupons: list[dict[str, Any]] = []
    numbers: list[int] = []
    for number, line in lines:
        cells = _cells(line, separator)
        spare = [cell for cell in cells[len(columns) :] if cell]
        if spare:
            hint = " A decimal comma needs tabs or semicolons between the columns." if separator == "," else ""
            message = f"has {len(cells)} cells under {len(columns)} headings.{hint}"
            faults.append(LineFault(number, "", line[:60], message))
            continue
        coupon: dict[str, Any] = {}
        for column, cell in zip(columns, cells, strict=False):
            if column is not None and cell:
                _put(coupon, column, cell, number, faults)
        coupons.append(_filled(coupon, defaults))
        numbers.append(number)
    named = [column.field for column in columns if column is not None]
    return Pasted(coupons, numbers, named, faults)


def _put(coupon: dict[str, Any], column: Column, cell: str, line: int, faults: list[LineFault]) -> None:
    try:
        value = read_day(cell) if column.is_day else _quantity(column, cell) if column.kind else cell
    except InputError as error:
        faults.append(LineFault(line, column.heading, cell[:60], str(error)))
        return
    if column.field.startswith("failure."):
        coupon.setdefault("failure", {})[column.field.removeprefix("failure.")] = value
    else:
        coupon[column.field] = value


def _quantity(column: Column, cell: str) -> str | float:
    """The cell with the unit of its heading; a cell that carries its own unit keeps that. Kept as typed."""
    bare = re.fullmatch(r"[-+]?[\d.,\s]*\d[\d.,]*(?:[eE][-+]?\d+)?|[-+]?\d+\s*[- ]?\s*\d*/\d+", cell) is not None
    text = f"{cell} {column.unit}" if bare and column.unit else cell
    if column.kind == "percent":
        units.parse("", re.sub(r"\s*%$", "", text), "factor")
        return text
    try:
        units.parse("", text, column.kind)
    except InputError as error:
        raise InputError("", _stress_for_a_load(column, text) or str(error)) from None
    return text


def _stress_for_a_load(column: Column, text: str) -> str:
    if column.field != "load":
        return ""
    try:
        units.parse("", text, "stress")
    except InputError:
        return ""
    return (
        f"{units.given(text)} is a stress, and a load is asked for; head the column 'stress', or 'gauge' where it is a "
        "gauge's pressure."
    )


def _filled(coupon: dict[str, Any], defaults: Mapping[str, object]) -> dict[str, Any]:
    """What every coupon of the block has alike, where its own line says nothing else."""
    filled = dict(coupon)
    for name, value in defaults.items():
        idle = (name in ("width", "length") and "area" in coupon) or (name == "ram_area" and "gauge" not in coupon)
        if name not in filled and value not in (None, "") and not idle:
            filled[name] = value
    return filled
