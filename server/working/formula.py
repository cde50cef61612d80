"""A formula's text, read once: its value for given numbers, and the same line with the numbers in it."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server.working.grammar import (
    CONSTANTS,
    Binary,
    Call,
    FormulaError,
    Name,
    Negative,
    Node,
    Number,
    names,
    operands_need_brackets,
    parse,
    precedence,
    walk,
)

MOST_TERMS = 12
"""A longer sum is printed as its first two terms and its last."""

Value = float | Sequence[float] | NDArray[np.float64]


@lru_cache(maxsize=4096)
def formula(text: str) -> Formula:
    """The formula written as ``text``; read and compiled the first time it is asked for."""
    return Formula(text)


class Formula:
    """One formula: its tree, its compiled forms and its line with places for numbers."""

    def __init__(self, text: str) -> None:
        self.text = text.strip()
        self.tree = parse(text)
        self.names = names(self.tree)
        self.trivial = isinstance(self.tree, Name)
        self._compiled: dict[frozenset[str], Callable[..., float]] = {}
        self._lines: dict[tuple[frozenset[str], int], Callable[..., str]] = {}

    def value(self, values: Mapping[str, float | list[float]], lists: frozenset[str]) -> float:
        """The formula's value; ``lists`` names the quantities that are lists (they may stand under ``sum`` only).

        Raises
        ------
        ArithmeticError, ValueError
            Where the numbers have no answer: division by zero, root of a negative number, overflow.
        """
        compiled = self._compiled.get(lists)
        if compiled is None:
            compiled = self._compiled[lists] = _compile(self, lists, "math")
        return compiled(**values)

    def array(self, values: Mapping[str, Value]) -> NDArray[np.float64]:
        """The formula for arrays, element by element (no ``sum``): a curve drawn from the text that is printed."""
        key = frozenset({"\0arrays"})
        compiled = self._compiled.get(key)
        if compiled is None:
            compiled = self._compiled[key] = _compile(self, frozenset(), "numpy")
        return np.asarray(compiled(**{name: np.asarray(each, dtype=float) for name, each in values.items()}))

    def substituted(self, texts: Mapping[str, str | list[str]], lists: frozenset[str], count: int) -> str:
        """The formula with the given texts of numbers in it, in characters that can be read back and evaluated.

        A negative number's text must bring its own brackets.
        """
        line = self._lines.get((lists, count))
        if line is None:
            line = self._lines[lists, count] = _line_maker(self, lists, count)
        return line(**texts)


def len_of(values: Mapping[str, float | list[float]], lists: frozenset[str]) -> int:
    """How many terms the lists have; 0 where there is none."""
    if not lists:
        return 0
    lengths = {len(values[name]) for name in lists}  # type: ignore[arg-type]
    if len(lengths) > 1:
        raise FormulaError(f"The lists {sorted(lists)} have different lengths: {sorted(lengths)}.")
    return lengths.pop()


# --- evaluation -------------------------------------------------------------------------------------------------------

_MATH: dict[str, Any] = {
    "__builtins__": {},
    "sqrt": math.sqrt,
    "exp": math.exp,
    "log": math.log,
    "tanh": math.tanh,
    "cosh": math.cosh,
    "sinh": math.sinh,
    "pi": math.pi,
    "abs": abs,
    "max": max,
    "min": min,
    "sum": math.fsum,
    "zip": zip,
}
_NUMPY: dict[str, Any] = {
    "__builtins__": {},
    "sqrt": np.sqrt,
    "exp": np.exp,
    "log": np.log,
    "tanh": np.tanh,
    "cosh": np.cosh,
    "sinh": np.sinh,
    "pi": math.pi,
    "abs": np.abs,
    "max": lambda *each: np.maximum.reduce(np.broadcast_arrays(*each)),
    "min": lambda *each: np.minimum.reduce(np.broadcast_arrays(*each)),
}


def _compile(owner: Formula, lists: frozenset[str], kind: str) -> Callable[..., Any]:
    """Compile the tree, which the grammar has already let in, to a function of its quantities."""
    if kind == "numpy" and any(isinstance(each, Call) and each.function == "sum" for each in walk(owner.tree)):
        raise FormulaError(f"The formula {owner.text!r} sums, so it cannot run over arrays.")
    _lists_only_under_sum(owner, lists)
    code = f"lambda {', '.join(sorted(owner.names))}: {_source(owner.tree, lists)}"
    # The text comes from our own modules and has passed the whitelist of the grammar; no built-ins are in reach.
    return eval(code, _MATH if kind == "math" else _NUMPY)  # type: ignore[no-any-return]  # noqa: S307


def _source(node: Node, lists: frozenset[str]) -> str:
    match node:
        case Number(value):
            return repr(value)
        case Name(name):
            return name
        case Negative(of):
            return f"(-{_source(of, lists)})"
        case Binary(operator, left, right):
            return f"({_source(left, lists)}{operator}{_source(right, lists)})"
        case Call("sum", (term,)):
            running = sorted(names(term) & lists)
            each = ", ".join(running)
            return f"sum([{_source(term, lists)} for {each}, in zip({each})])"
        case Call(function, arguments):
            return f"{function}({', '.join(_source(argument, lists) for argument in arguments)})"


def _lists_only_under_sum(owner: Formula, lists: frozenset[str]) -> None:
    def check(node: Node) -> None:
        match node:
            case Name(name) if name in lists:
                raise FormulaError(f"In {owner.text!r} {name} is a list but stands outside a sum.")
            case Negative(of):
                check(of)
            case Binary(_, left, right):
                check(left)
                check(right)
            case Call("sum", (term,)):
                if not names(term) & lists:
                    raise FormulaError(f"In {owner.text!r} nothing under the sum is a list.")
            case Call(_, arguments):
                for each in arguments:
                    check(each)

    check(owner.tree)


# --- the line with places for numbers ---------------------------------------------------------------------------------


def _line_maker(owner: Formula, lists: frozenset[str], count: int) -> Callable[..., str]:
    """A function of the numbers' texts that writes the line: ``{V} * {S}``, ``{A[0]} * {u[0]} + {A[1]} * {u[1]}``."""
    tree = owner.tree
    whole = _terms(tree.arguments[0], lists, count) if isinstance(tree, Call) and tree.function == "sum" else None
    line = "".join(whole or _line(tree, lists, count, None))
    # As above: only names, numbers and signs that the grammar let in.
    return eval(f"lambda {', '.join(sorted(owner.names))}: f{line!r}", _MATH)  # type: ignore[no-any-return]  # noqa: S307


def _line(node: Node, lists: frozenset[str], count: int, index: int | None) -> list[str]:
    def line(inner: Node, brackets: bool = False) -> list[str]:
        pieces = _line(inner, lists, count, index)
        return ["(", *pieces, ")"] if brackets else pieces

    match node:
        case Number(_, text):
            return [text]
        case Name(name):
            if name in CONSTANTS:
                return [name]
            return [f"{{{name}[{index}]}}" if index is not None and name in lists else f"{{{name}}}"]
        case Negative(of):
            return ["-", *line(of, precedence(of) < 4)]
        case Binary(operator, left, right):
            left_brackets, right_brackets = operands_need_brackets(node)
            between = operator if operator == "**" else f" {operator} "
            return [*line(left, left_brackets), between, *line(right, right_brackets)]
        case Call("sum", (term,)):
            return ["(", *_terms(term, lists, count), ")"]
        case Call(function, arguments):
            inner = line(arguments[0])
            for each in arguments[1:]:
                inner = [*inner, ", ", *line(each)]
            return [f"{function}(", *inner, ")"]


def shown_terms(count: int) -> list[int | None]:
    """Which terms of a sum are printed; None stands for those left out."""
    return list(range(count)) if count <= MOST_TERMS else [0, 1, None, count - 1]


def _terms(term: Node, lists: frozenset[str], count: int) -> list[str]:
    out: list[str] = []
    for index in shown_terms(count):
        if out:
            out.append(" + ")
        if index is None:
            out.append(f"... ({count} terms)")
        else:
            out += _line(term, lists, count, index)
    return out or ["0"]
