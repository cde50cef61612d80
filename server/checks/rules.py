"""The rules that ``analysis.rules`` may name, and what a rule adds to the working: steps, and reductions of limits."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.working import Working, formula
from server.working.record import Given

EDITION = "EN 1995-1-1:2004+A2:2014"
WEBS = "EN 1995-1-1 9.1.1"
SKINS = "EN 1995-1-1 9.1.2"
ULTIMATE_SLIP = "EN 1995-1-1 2.2.2"
KNOWN: Mapping[str, str] = {
    WEBS: "glued thin-webbed beams: deep glue lines, slender webs, panel shear",
    SKINS: "glued thin-flanged beams: wide glue lines, effective width of skins",
    ULTIMATE_SLIP: "slip modulus 2/3 K_ser in ultimate limit states",
}
_SPELLING = re.compile(r"EN\s*1995-1-1(?::[\w+:-]+)?\s*,?\s*(?:clause\s*)?(9\.1\.[12]|2\.2\.2)", re.IGNORECASE)


@dataclass(frozen=True)
class Printed:
    """A step of the working that is written when its limit is."""

    title: str
    symbol: str
    formula: str
    values: Mapping[str, Given]
    unit: str
    source: str

    @property
    def value(self) -> float:
        """What the step gives."""
        return self.write(Working(record=False), "")

    def write(self, working: Working, group: str) -> float:
        """Evaluate and record the step."""
        return working.step(
            self.title, self.symbol, self.formula, self.values, unit=self.unit, source=self.source, group=group
        )


@dataclass(frozen=True)
class Reduction:
    """A factor below 1 that a rule puts on a resistance; ``value`` is what ``step`` gives."""

    rule: str
    value: float
    step: Printed


@dataclass(frozen=True, eq=False)
class Origin:
    """How a demand came about: its formula on ``arrays``, one entry a strength combination, and on constants.

    ``before`` are steps to write first, by the stretch that governs.
    """

    title: str
    formula: str
    arrays: Mapping[str, tuple[NDArray[np.float64], str]]
    given: Mapping[str, Given]
    source: str
    before: Mapping[int, tuple[Printed, ...]] = field(default_factory=dict)

    def demand(self) -> NDArray[np.float64]:
        """The demand of every combination."""
        values = {name: value for name, (value, _) in (*self.arrays.items(), *self.given.items())}
        return formula(self.formula).array(values)

    def write(self, working: Working, group: str, symbol: str, unit: str, row: int, stretch: int) -> float:
        """The steps to the demand of one combination."""
        for printed in self.before.get(stretch, ()):
            printed.write(working, group)
        arrays: dict[str, Given] = {name: (float(value[row]), unit) for name, (value, unit) in self.arrays.items()}
        values = {**arrays, **self.given}
        return working.step(self.title, symbol, self.formula, values, unit=unit, source=self.source, group=group)


def chosen(document: documents.MemberDocument) -> frozenset[str]:
    """The known rules that the document names, in whichever edition it spells them."""
    return frozenset(name for text in document.analysis.rules if (name := _known(text)))


def unknown(document: documents.MemberDocument) -> list[str]:
    """Rules named that are not known here."""
    return [text for text in document.analysis.rules if not _known(text)]


def _known(text: str) -> str:
    match = _SPELLING.fullmatch(text.strip())
    return f"EN 1995-1-1 {match[1]}" if match else ""
