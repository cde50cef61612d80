"""The readable sheet for a terminal, 80 characters wide: the verdict first, the working after it."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

from server.sheets import coupon_tables, slip_parts, tables
from server.sheets.bond_ends import blocks as end_blocks
from server.sheets.composition import PRECEDENCE, STANDING_CAUTION, headline
from server.sheets.one_page import filled
from server.sheets.one_pages import ONE_PAGES
from server.sheets.steps import working_groups
from server.sheets.values import in_units, missing, utilisation, verdict
from server.working import plain

WIDTH = 80
GAP = 2
LEAST_FLEXIBLE = 12
_SHORT = {"Utilisation": "Used", "Combination": "Combi- nation", "Resistance": "Resist- ance"}

Part = Mapping[str, Any]


def terminal(result: Mapping[str, Any], display: str | None = None) -> str:
    """The result as text; ``display`` left out is the result's own."""
    chosen = display or str(result.get("display") or "SI")
    lines = [line.rstrip() for line in _lines(result, chosen)]
    return "\n".join(lines) + "\n"


def _lines(result: Mapping[str, Any], display: str) -> Iterator[str]:
    yield from _head(result, display)
    for title, parts in _blocks(result, display):
        yield from _block(title, parts)
    yield from _listed("What is missing", missing(result, display, names=True))
    yield from _listed("Cautions", (in_units(_caution(each), display) for each in result.get("cautions", ())))
    yield from _working(result, display)
    yield from _listed("Not checked", (str(line) for line in result.get("not_checked", ())))
    yield from ["", *_wrapped(PRECEDENCE), "", *_wrapped(STANDING_CAUTION), ""]
    yield str(result.get("engine", ""))


def _blocks(result: Mapping[str, Any], display: str) -> Iterable[tuple[str, Iterable[Part]]]:
    page = ONE_PAGES.get(str(result.get("kind")))
    if page is not None:
        return filled(page.blocks(result, display))
    return coupon_tables.blocks(result, display) if _coupons(result) else _member(result, display)


def _coupons(result: Mapping[str, Any]) -> bool:
    return bool(result.get("kind") == "coupons")


def _member(result: Mapping[str, Any], display: str) -> Iterator[tuple[str, Iterable[Part]]]:
    yield "Joints", tables.joints(result, display)
    yield from slip_parts.blocks(result, display)
    yield "Pieces", tables.pieces(result, display)
    yield "Deflection", tables.deflection(result, display)
    yield from end_blocks(result, display)
    yield "Section", tables.section(result, display)
    yield "Reactions, shear, moment", tables.actions(result, display)


def _head(result: Mapping[str, Any], display: str) -> Iterator[str]:
    word = verdict(result)
    used = result.get("utilisation")
    yield f"{word}   utilisation {utilisation(used)}" if used is not None else word
    line = coupon_tables.headline if _coupons(result) else headline
    yield from _wrapped(line(result, display))
    if result.get("title"):
        yield from ["", *_wrapped(str(result["title"]))]


def _title(text: str) -> list[str]:
    return ["", text.upper(), "-" * WIDTH]


def _block(title: str, parts: Iterable[Part]) -> Iterator[str]:
    listed = [part for part in parts if part["kind"] != "drawing"]
    if not listed:
        return
    yield from _title(title)
    for number, part in enumerate(listed):
        if part["kind"] == "sub":
            yield from ["", *_wrapped(part["title"] + (f" ({part['about']})" if part["about"] else ""))]
        elif part["kind"] == "pairs":
            for name, value in part["pairs"]:
                yield from _wrapped(f"{name:<33} {value}".rstrip(), "", " " * 34)
        elif part["kind"] == "text":
            yield from _wrapped(part["text"])
        elif part["kind"] == "list":
            for line in part["items"]:
                yield from _wrapped(line, "- ", "  ")
        elif part["kind"] == "table":
            if number and listed[number - 1]["kind"] == "table":
                yield ""
            yield from text_table(part)


def _listed(title: str, items: Iterable[str]) -> Iterator[str]:
    lines = list(items)
    if lines:
        yield from _title(title)
        for line in lines:
            yield from _wrapped(line, "- ", "  ")


def _caution(caution: Mapping[str, Any]) -> str:
    answer = " [answer before issue]" if caution.get("answer") else ""
    return f"{caution.get('about', '')}: {caution.get('text', '')}{answer}"


def _working(result: Mapping[str, Any], display: str) -> Iterator[str]:
    steps = result.get("steps", ())
    if not steps:
        return
    yield from _title("Working")
    for group in working_groups(steps):
        if group.title:
            yield from ["", group.title]
        if group.same:
            yield from _wrapped(group.same, "     ", "     ")
        else:
            yield from _steps(group.steps, group.first, display)


def _steps(steps: Sequence[Mapping[str, Any]], first: int, display: str) -> Iterator[str]:
    for number, step in enumerate(steps, first):
        source = f"  [{step['source']}]" if step.get("source") else ""
        yield from _wrapped(in_units(f"{step['title']}{source}", display), f"{number:>3}  ", "     ")
        indent = 0
        for position, line in enumerate(plain(step, display)):
            if not position:
                indent = max(line.find(" = "), 0)
            before = " " * (7 + (indent + 1 if position and indent else 0))
            yield from _wrapped(line, before, " " * (9 + indent))
        if step.get("note"):
            yield from _wrapped(in_units(step["note"], display), "       ", "       ")


def _wrapped(text: str, first: str = "", later: str = "") -> list[str]:
    return textwrap.wrap(
        text, WIDTH, initial_indent=first, subsequent_indent=later, break_long_words=True, break_on_hyphens=False
    ) or [first]


def text_table(part: Part) -> Iterator[str]:
    """A table in fixed columns; headings and long words wrap inside their column, so that it keeps to 80 characters."""
    columns = [{**column, "title": _SHORT.get(column["title"], column["title"])} for column in part["columns"]]
    rows = [[_cell(cell) for cell in row] for row in part["rows"]]
    widths = _widths(columns, rows)
    yield from _row([column["title"] for column in columns], widths, columns, bottom=True)
    yield from _row(["-" * width for width in widths], widths, columns)
    for row in rows:
        yield from _row(row, widths, columns)


def _cell(cell: str | Mapping[str, str]) -> str:
    return (cell if isinstance(cell, str) else f"{cell['strong']} !").replace("\u2009", "\u00a0")


def _widths(columns: Sequence[Part], rows: list[list[str]]) -> list[int]:
    """Every column as wide as its content; where that is too wide, the texts give way first, longest first."""
    widths = []
    for position, column in enumerate(columns):
        words = column["title"].split(" ") or [""]
        widths.append(max([len(word) for word in words] + [len(row[position]) for row in rows]))
    flexible = [i for i, column in enumerate(columns) if column["side"] == "left"] or list(range(len(columns)))
    while sum(widths) + GAP * (len(widths) - 1) > WIDTH:
        widest = max(flexible, key=lambda i: widths[i])
        if widths[widest] <= LEAST_FLEXIBLE:
            widest = max(range(len(widths)), key=lambda i: widths[i])
        if widths[widest] <= 1:
            break
        widths[widest] -= 1
    return widths


def _row(cells: list[str], widths: list[int], columns: Sequence[Part], bottom: bool = False) -> Iterator[str]:
    wrapped = [textwrap.wrap(cell, width) or [""] for cell, width in zip(cells, widths, strict=True)]
    height = max(len(lines) for lines in wrapped)
    for line in range(height):
        out = []
        for lines, width, column in zip(wrapped, widths, columns, strict=True):
            index = line - (height - len(lines)) if bottom else line
            text = lines[index] if 0 <= index < len(lines) else ""
            out.append(text.rjust(width) if column["side"] == "right" else text.ljust(width))
        yield (" " * GAP).join(out)
