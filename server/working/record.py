"""The working: steps recorded while a check runs, and a recorded step shown to people.

A formula is written once. ``Working.step`` evaluates that text and keeps the step as plain data; ``mathml``,
``typst_math`` and ``plain`` draw it again from the stored step alone, in SI or in inch-pound units, so an old sheet
can be shown without its document and without the mechanics that made it.

The numbers of a line have as many digits as it takes: whoever types the printed line into a pocket calculator gets
the printed value.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import isfinite
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server import units
from server.errors import InputError
from server.working import mathml as _mathml
from server.working import names, numbers
from server.working import plain as _plain
from server.working.formula import Lists, Ordered, lists_among, ordered
from server.working.layout import Layout, breakable, number, spread, symbol, symbolic, with_numbers

Step = dict[str, Any]
Given = tuple[float | Sequence[float] | NDArray[np.float64], str]
_NO_LISTS: frozenset[str] = frozenset()
_PRINTED = numbers.IN_LINE[numbers.DIGITS]
_RUNGS = tuple(numbers.IN_LINE.items())


class Working:
    """Collects the steps of one check, in the order in which they are made.

    With ``record`` false every formula is evaluated just the same, but no step is kept: a live preview shows results
    long before anybody opens the working.

    Examples
    --------
    >>> w = Working()
    >>> given = {"V": (14600.0, "N"), "S": (1.04e6, "mm3"), "I": (4.27e8, "mm4")}
    >>> round(w.step("Shear flow", "q", "V * S / I", given, "N/mm"), 3)
    35.56
    >>> w.steps[0]["substituted"]
    '14600 * 1.04e6 / 4.27e8'
    """

    def __init__(self, *, record: bool = True) -> None:
        self.record = record
        self.steps: list[Step] = []
        self.group = ""

    def begin(self, group: str) -> None:
        """Put the steps that follow under this heading, unless they name their own."""
        self.group = group

    def step(
        self,
        title: str,
        symbol: str,
        text: str,
        values: Mapping[str, Given],
        unit: str = "",
        source: str = "",
        group: str | None = None,
        note: str = "",
    ) -> float:
        """Evaluate a formula, record the step and return the value.

        Raises
        ------
        FormulaError
            If the formula's quantities and ``values`` do not match: a mistake in the program.
        InputError
            If a value is not a finite number, or the numbers have no answer; it carries the symbol.
        """
        given: list[float | list[float]] = []
        kept: dict[str, dict[str, Any]] = {}
        lists: Lists = ()
        for name, (each, its_unit) in values.items():
            if type(each) is float and isfinite(each):
                taken: float | list[float] = each
            else:
                taken = _plain_numbers(name, each, title)
                if isinstance(taken, list):
                    lists += ((name, len(taken)),)
            given.append(taken)
            kept[name] = {"value": taken, "unit": its_unit}
        known = ordered(text, tuple(values), lists)
        value = _evaluate(known, given, symbol, title)
        if self.record:
            self.steps.append(
                {
                    "title": title,
                    "symbol": symbol,
                    "formula": known.formula.text,
                    "substituted": _line(known, given, value)[1],
                    "value": value,
                    "unit": unit,
                    "source": source,
                    "group": self.group if group is None else group,
                    "values": kept,
                    "note": note,
                }
            )
        return value

    def note(
        self,
        title: str,
        text: str,
        value: float | None = None,
        unit: str = "",
        source: str = "",
        group: str | None = None,
        symbol: str = "",
    ) -> None:
        """Record what a numerical method did, in words, with the value it gave."""
        if value is not None and not isfinite(value):
            raise InputError(symbol or title, _not_finite(symbol or title, value, title))
        if not self.record:
            return
        self.steps.append(
            {
                "title": title,
                "symbol": symbol,
                "formula": "",
                "substituted": "",
                "value": None if value is None else float(value),
                "unit": unit,
                "source": source,
                "group": self.group if group is None else group,
                "values": {},
                "note": text,
            }
        )


def _not_finite(name: str, value: object, title: str) -> str:
    return f"{names.plain(name)} is {value} in “{title}”; a finite number is needed. Check the values it is made from."


def _plain_numbers(name: str, given: Any, title: str) -> float | list[float]:
    """A number of any kind, a sequence or an array as plain numbers, all finite."""
    if not isinstance(given, (list, tuple)) and np.ndim(given) == 0:
        scalar = float(given)
        if not isfinite(scalar):
            raise InputError(name, _not_finite(name, given, title))
        return scalar
    taken = list(map(float, given))
    if not all(map(isfinite, taken)):
        position = next(i for i, each in enumerate(taken) if not isfinite(each))
        raise InputError(name, _not_finite(f"{name}_{position + 1}", taken[position], title))
    return taken


def _evaluate(known: Ordered, given: Sequence[float | list[float]], symbol: str, title: str) -> float:
    try:
        value = known.value(*given)
    except ZeroDivisionError:
        raise InputError(symbol, _no_answer(known, symbol, title, "divides by zero")) from None
    except (ValueError, OverflowError):
        raise InputError(symbol, _no_answer(known, symbol, title, "has no real answer")) from None
    if type(value) is float and isfinite(value):
        return value
    if isinstance(value, complex) or not isfinite(value):
        raise InputError(symbol, _no_answer(known, symbol, title, "has no finite real answer"))
    return float(value)


def _no_answer(known: Ordered, symbol: str, title: str, why: str) -> str:
    return (
        f"{names.plain(symbol)} in “{title}” {why}: {_plain.line(symbolic(known.formula.tree, _NO_LISTS))}. "
        "Every quantity must keep it finite; check the values it is made from."
    )


def _line(known: Ordered, given: Sequence[float | list[float]], value: float) -> tuple[int, str]:
    """How many digits the numbers must show so that the printed line gives the printed value, and that line."""
    target = _PRINTED[value][0]
    line = ""
    for digits, written in _RUNGS:
        try:
            reached, line = known.read(written, *given)
            if _PRINTED[reached][0] == target:
                return digits, line
        except (ArithmeticError, ValueError, TypeError):
            continue
    return numbers.LADDER[-1], line


# --- a stored step, shown ---------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Shown:
    """One step laid out: any part but the value's may be None."""

    symbol: Layout | None
    formula: Layout | None
    numbers: Layout | None
    value: Layout | None
    unit: str


def shown(step: Mapping[str, Any], display: str = "SI") -> Shown:
    """Lay out a stored step, its numbers in the units of ``display``.

    A formula that only balances in the units it was written in (one with a dimensional constant) stays in those.
    """
    head = symbol(step["symbol"]) if step["symbol"] else None
    if not step["formula"]:
        unit, factor = _display_unit(step["unit"], display)
        found = None if step["value"] is None else number(step["value"] * factor)
        return Shown(head, None, None, found, numbers.readable_unit(unit))
    values: dict[str, float | list[float]] = {name: each["value"] for name, each in step["values"].items()}
    known = ordered(step["formula"], tuple(values), lists_among(values))
    given, value, unit = _in_units(step, known, display)
    digits = _line(known, given, value)[0]
    named = dict(zip(values, given, strict=True))
    with_values = with_numbers(known.formula.tree, named, known.lists, known.count, digits)
    repeats = spread(with_values) == [number(value)]
    says_itself = known.formula.trivial and known.formula.names <= {step["symbol"]}
    return Shown(
        head,
        None if says_itself else symbolic(known.formula.tree, known.lists),
        None if repeats else with_values,
        number(value),
        numbers.readable_unit(unit),
    )


def _display_unit(unit: str, display: str) -> tuple[str, float]:
    if display == "SI" or not unit:
        return unit, 1.0
    shown_unit, factor = units.display_unit(unit, display)
    return shown_unit, factor


def _in_units(step: Mapping[str, Any], known: Ordered, display: str) -> tuple[list[float | list[float]], float, str]:
    """The step's numbers in the order of its quantities, its value and its unit."""
    stored: list[float | list[float]] = [each["value"] for each in step["values"].values()]
    value: float = step["value"]
    if display == "SI":
        return stored, value, step["unit"]
    unit, factor = _display_unit(step["unit"], display)
    converted: list[float | list[float]] = []
    for each in step["values"].values():
        own, given = _display_unit(each["unit"], display)[1], each["value"]
        converted.append([item * own for item in given] if isinstance(given, list) else given * own)
    try:
        balances = math.isclose(known.value(*converted), value * factor, rel_tol=1e-6, abs_tol=1e-300)
    except (ArithmeticError, ValueError, TypeError):
        balances = False
    return (converted, value * factor, unit) if balances else (stored, value, step["unit"])


def mathml(step: Mapping[str, Any], display: str = "SI") -> str:
    """The step's line for the page: several ``<math>`` elements, between which the line may break."""
    parts = shown(step, display)
    equals: Layout = ["sign", "="]
    out = []
    if parts.symbol:
        out.append(_mathml.math(parts.symbol, kind="working-symbol"))
    if parts.formula:
        out.append(_mathml.math(equals, breakable(parts.formula), kind="working-formula"))
    if parts.numbers:
        first, *others = _split(breakable(parts.numbers))
        out.append(_mathml.math(equals, *first, kind="working-numbers"))
        out += [_mathml.math(*each, kind="working-numbers") for each in others]
    if parts.value:
        unit = [["word", "\u2009" + parts.unit]] if parts.unit else []
        head = [equals] if out else []
        out.append(_mathml.math(*head, parts.value, *unit, kind="working-value"))
    return " ".join(out)


def _split(layout: Layout) -> list[list[Layout]]:
    """Split a long sum before its plus and minus signs."""
    groups: list[list[Layout]] = [[]]
    pieces = spread(layout)
    for each in pieces:
        if len(pieces) > 6 and groups[-1] and each in (["sign", "+"], ["sign", "−"]):
            groups.append([])
        groups[-1].append(each)
    return groups


def typst_math(step: Mapping[str, Any], display: str = "SI") -> dict[str, Any]:
    """The step's line for print: layouts (JSON) under ``symbol``, ``formula``, ``numbers``, ``value``, and ``unit``."""
    parts = shown(step, display)
    return {
        "symbol": parts.symbol,
        "formula": parts.formula and breakable(parts.formula),
        "numbers": parts.numbers and breakable(parts.numbers),
        "value": parts.value,
        "unit": parts.unit,
    }


def plain(step: Mapping[str, Any], display: str = "SI") -> list[str]:
    """The step in plain characters: ``q = V ⋅ S / I``, ``= 14 600 ⋅ …``, ``= 35.56 N/mm``; one entry a part."""
    parts = shown(step, display)
    lines = [_plain.line(each) for each in (parts.formula, parts.numbers) if each]
    if parts.value:
        lines.append(f"{_plain.line(parts.value)} {parts.unit}".rstrip())
    head = _plain.line(parts.symbol) if parts.symbol else ""
    return (
        [f"{head if not position else ''} = {each}".strip() for position, each in enumerate(lines)] if head else lines
    )
