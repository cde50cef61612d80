"""A kind of check that fits on one page: how its result reads in the terminal, on paper and on the screen.

One description serves all three. ``blocks`` gives titled lists of parts, which are plain data: ``pairs`` (name and
value), ``table`` (``tables.table``), ``sub`` (a small heading), ``text``, ``list`` and ``drawing`` (``figure``). The
terminal leaves drawings out.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from server.sheets.asked import AskGroup, given
from server.sheets.given import Group

Part = Mapping[str, Any]
Result = Mapping[str, Any]
Blocks = Iterator[tuple[str, Iterable[Part]]]


@dataclass(frozen=True)
class OnePage:
    """One kind of check on one page."""

    kind: str
    title: str
    """What the sheet is headed with: "Resistance of one fastener"."""
    one: str
    """What one is called in a sentence: "fastener"."""
    groups: tuple[AskGroup, ...]
    headline: Callable[[Result, str], str]
    """The line under the verdict."""
    blocks: Callable[[Result, str], Blocks]
    """Titles and parts between the verdict and what is missing."""
    waits_for: Callable[[Mapping[str, Any]], Iterable[str]] = lambda raw: ()
    """What must be typed before a result is worth looking for, in words; while any is left, nobody is found at
    fault."""
    fixed: tuple[tuple[str, str], ...] = ()
    """Places of the document that the form fills by itself, such as the names of its values."""
    finish: Callable[[dict[str, Any]], None] = lambda raw: None
    """What the answers still need to be a document, put in after they are read."""
    normal: Callable[[Mapping[str, Any]], Mapping[str, Any]] = lambda raw: raw
    """The same document with its names as the form has them, for one that was written elsewhere."""

    act: str = "Check"
    """What one does with it, on the button of the job's page: "Plan a glue-up"."""

    def given(self, raw: Mapping[str, Any], values_used: Mapping[str, Any], display: str) -> tuple[Group, ...]:
        """The given values, as typed and as used."""
        return given(self.groups, self.normal(raw), self.normal({**raw, **values_used}), display, self.kind)


def figure(svg: str, caption: str, share: float = 0.86, alt: str = "") -> dict[str, Any]:
    """A drawing as a part; ``share`` is that of the sheet's width."""
    return {"kind": "drawing", "svg": svg, "caption": caption, "alt": alt or caption, "share": share}


def pairs(rows: Iterable[tuple[str, str]]) -> dict[str, Any]:
    """Names and values as a part; a name without a value is left out."""
    return {"kind": "pairs", "pairs": [[name, value] for name, value in rows if value]}


def filled(blocks: Iterable[tuple[str, Iterable[Part]]]) -> Blocks:
    """Blocks with something in them: a list of pairs without a pair, and a title over nothing, are left out."""
    for title, parts in blocks:
        kept = [part for part in parts if part.get("kind") != "pairs" or part["pairs"]]
        if kept:
            yield title, kept


def sub(title: str, about: str = "") -> dict[str, Any]:
    """A small heading as a part."""
    return {"kind": "sub", "title": title, "about": about}
