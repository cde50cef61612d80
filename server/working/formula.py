"""A formula's text, read once: its value for given numbers, and the same line with the numbers in it."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server.working import compiled
from server.working.grammar import Binary, Call, FormulaError, Name, Negative, Node, names, parse

Value = float | Sequence[float] | NDArray[np.float64]
Lists = tuple[tuple[str, int], ...]
"""The quantities that are lists, and how many terms each has."""


@lru_cache(maxsize=4096)
def formula(text: str) -> Formula:
    """The formula written as ``text``; read and compiled the first time it is asked for."""
    return Formula(text)


class Formula:
    """One formula: its text, its tree and its quantities."""

    def __init__(self, text: str) -> None:
        self.text = text.strip()
        self.tree = parse(text)
        self.names = names(self.tree)
        self.trivial = isinstance(self.tree, Name)
        self._array: Callable[..., Any] | None = None

    def value(self, values: Mapping[str, float | list[float]]) -> float:
        """The formula's value; quantities that are lists may stand under ``sum`` only.

        Raises
        ------
        ArithmeticError, ValueError
            Where the numbers have no answer: division by zero, root of a negative number, overflow.
        """
        return ordered(self.text, tuple(values), lists_among(values)).value(*values.values())

    def array(self, values: Mapping[str, Value]) -> NDArray[np.float64]:
        """The formula for arrays, element by element (no ``sum``): a curve drawn from the text that is printed."""
        if self._array is None:
            self._array = compiled.over_arrays(self.text, self.tree)
        return np.asarray(self._array(**{name: np.asarray(each, dtype=float) for name, each in values.items()}))


def lists_among(values: Mapping[str, float | list[float]]) -> Lists:
    """Which of some quantities are lists."""
    return tuple((name, len(each)) for name, each in values.items() if isinstance(each, list))


@lru_cache(maxsize=8192)
def ordered(text: str, order: tuple[str, ...], lists: Lists = ()) -> Ordered:
    """The formula written as ``text`` for quantities handed over in this ``order``.

    Raises
    ------
    FormulaError
        If they are not the formula's quantities, or the lists do not fit it or each other.
    """
    return Ordered(formula(text), order, lists)


class Ordered:
    """A formula whose quantities come in a known order, so that numbers go in without their names.

    ``value`` takes the numbers. ``read`` takes the written forms of numbers (a text and the number it says, by the
    number; a negative number's text brings its own brackets) and the numbers; it returns what the line as written
    gives, and the line, in characters that can be read back and evaluated.
    """

    def __init__(self, owner: Formula, order: tuple[str, ...], lists: Lists) -> None:
        if owner.names != set(order):
            missing, extra = sorted(owner.names - set(order)), sorted(set(order) - owner.names)
            raise FormulaError(f"The formula {owner.text!r} lacks values for {missing} and has no use for {extra}.")
        counts = {count for _, count in lists}
        if len(counts) > 1:
            raise FormulaError(f"The lists of {owner.text!r} have different lengths: {dict(lists)}.")
        self.formula = owner
        self.lists = frozenset(name for name, _ in lists)
        self.count = max(counts, default=0)
        _require_lists_under_sums(owner.text, owner.tree, self.lists)
        code = compiled.Code(owner.tree, order, self.lists, self.count)
        self.value, self.read = code.value(), code.reader()


def _require_lists_under_sums(text: str, node: Node, lists: frozenset[str]) -> None:
    match node:
        case Name(name) if name in lists:
            raise FormulaError(f"In {text!r} {name} is a list but stands outside a sum.")
        case Negative(of):
            _require_lists_under_sums(text, of, lists)
        case Binary(_, left, right):
            _require_lists_under_sums(text, left, lists)
            _require_lists_under_sums(text, right, lists)
        case Call("sum", (term,)):
            if not names(term) & lists:
                raise FormulaError(f"In {text!r} nothing under the sum is a list.")
        case Call(_, arguments):
            for each in arguments:
                _require_lists_under_sums(text, each, lists)
