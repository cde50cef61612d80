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
Reader = Callable[..., tuple[float, str]]
_NO_LISTS: frozenset[str] = frozenset()
_SEEN = "__"  # before a quantity's name: its text


@lru_cache(maxsize=4096)
def formula(text: str) -> Formula:
    """The formula written as ``text``; read and compiled the first time it is asked for."""
    return Formula(text)


class Formula:
    """One formula: its tree, and its compiled forms, one for each order in which its quantities are handed over."""

    def __init__(self, text: str) -> None:
        self.text = text.strip()
        self.tree = parse(text)
        self.names = names(self.tree)
        self.trivial = isinstance(self.tree, Name)
        self._array: Callable[..., Any] | None = None

    def value(self, values: Mapping[str, float | list[float]], lists: frozenset[str]) -> float:
        """The formula's value; ``lists`` names the quantities that are lists (they may stand under ``sum`` only).

        Raises
        ------
        ArithmeticError, ValueError
            Where the numbers have no answer: division by zero, root of a negative number, overflow.
        """
        return ordered(self.text, tuple(values), lists).value(*values.values())

    def array(self, values: Mapping[str, Value]) -> NDArray[np.float64]:
        """The formula for arrays, element by element (no ``sum``): a curve drawn from the text that is printed."""
        if self._array is None:
            self._array = _compile(self, sorted(self.names), _NO_LISTS, "numpy")
        return np.asarray(self._array(**{name: np.asarray(each, dtype=float) for name, each in values.items()}))


@lru_cache(maxsize=8192)
def ordered(text: str, order: tuple[str, ...], lists: frozenset[str] = _NO_LISTS) -> Ordered:
    """The formula written as ``text`` for quantities handed over in this ``order``, ``lists`` naming those with terms.

    Raises
    ------
    FormulaError
        If they are not the formula's quantities.
    """
    return Ordered(formula(text), order, lists)


class Ordered:
    """A formula whose quantities come in a known order, so that numbers go in without their names."""

    def __init__(self, owner: Formula, order: tuple[str, ...], lists: frozenset[str]) -> None:
        if owner.names != set(order):
            missing, extra = sorted(owner.names - set(order)), sorted(set(order) - owner.names)
            raise FormulaError(f"The formula {owner.text!r} lacks values for {missing} and has no use for {extra}.")
        self.formula, self.order, self.lists = owner, order, lists
        self.value: Callable[..., float] = _compile(owner, order, lists, "math")
        self._readers: dict[int, Reader] = {}

    def count(self, values: Sequence[float | list[float]]) -> int:
        """How many terms the lists among the values have; 0 where there is none."""
        if not self.lists:
            return 0
        lengths = {len(each) for each in values if isinstance(each, list)}
        if len(lengths) > 1:
            raise FormulaError(f"The lists {sorted(self.lists)} have different lengths: {sorted(lengths)}.")
        return lengths.pop()

    def reader(self, count: int) -> Reader:
        """What a reader of the line sees and gets, sums having so many terms.

        Called with the numbers' written forms (a text and the number it says, by the number; a negative number's text
        brings its own brackets) and the numbers, it returns the value of the line as written and the line, in
        characters that can be read back and evaluated.
        """
        found = self._readers.get(count)
        if found is None:
            found = self._readers[count] = _reader(self, count)
        return found


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


def _compile(owner: Formula, order: Sequence[str], lists: frozenset[str], kind: str) -> Callable[..., Any]:
    """Compile the tree, which the grammar has already let in, to a function of its quantities in their order."""
    if kind == "numpy" and any(isinstance(each, Call) and each.function == "sum" for each in walk(owner.tree)):
        raise FormulaError(f"The formula {owner.text!r} sums, so it cannot run over arrays.")
    _lists_only_under_sum(owner, lists)
    code = f"lambda {', '.join(order)}: {_source(owner.tree, lists)}"
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


# --- the line with its numbers ----------------------------------------------------------------------------------------


def _reader(owner: Ordered, count: int) -> Reader:
    """A function that writes ``{V} * {S}``, ``{A[0]} * {u[0]} + {A[1]} * {u[1]}`` and works out what it says."""
    tree, lists = owner.formula.tree, owner.lists
    whole = _terms(tree.arguments[0], lists, count) if isinstance(tree, Call) and tree.function == "sum" else None
    line = "".join(whole or _line(tree, lists, count, None))
    taken = [
        f"{name} = [written[each] for each in {name}]; {_SEEN}{name} = [each[0] for each in {name}]; "
        f"{name} = [each[1] for each in {name}]"
        if name in lists
        else f"{_SEEN}{name}, {name} = written[{name}]"
        for name in owner.order
    ]
    code = "\n ".join(
        [f"def read({', '.join(['written', *owner.order])}):", *taken, f"return {_source(tree, lists)}, f{line!r}"]
    )
    made: dict[str, Any] = {}
    # As above: only names, numbers and signs that the grammar let in.
    exec(code, _MATH, made)  # noqa: S102
    return made["read"]  # type: ignore[no-any-return]


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
            return [f"{{{_SEEN}{name}[{index}]}}" if index is not None and name in lists else f"{{{_SEEN}{name}}}"]
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
