"""A formula's tree turned into functions: its value, and the line with its numbers.

A step of the working asks for both again and again, so they are compiled once for the order in which the quantities
come and the number of terms of its sums; short sums are written out term by term, which is several times faster than
running over lists. The source is made of names, numbers and signs that the grammar has let in, and of nothing else.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np

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
    precedence,
    walk,
)

MOST_TERMS = 12
"""A longer sum is printed as its first two terms and its last."""

_SEEN = "__"  # before a quantity's name: its text
_TERM = "__"  # between a list's name and the number of its term

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


def over_arrays(text: str, tree: Node) -> Callable[..., Any]:
    """A function of arrays, by the names of the quantities of the formula written as ``text``.

    Raises
    ------
    FormulaError
        If the formula sums.
    """
    if any(isinstance(each, Call) and each.function == "sum" for each in walk(tree)):
        raise FormulaError(f"The formula {text!r} sums, so it cannot run over arrays.")
    code = Code(tree, tuple(sorted(names(tree))), frozenset(), 0)
    return _function(code.order, [], code.source(tree), _NUMPY)


def _function(order: tuple[str, ...], before: list[str], result: str, known: dict[str, Any]) -> Callable[..., Any]:
    body = "".join(f"    {line}\n" for line in (*before, f"return {result}"))
    made: dict[str, Any] = {}
    # The text comes from our own modules and has passed the whitelist of the grammar; no built-ins are in reach.
    exec(f"def made({', '.join(order)}):\n{body}", known, made)  # noqa: S102
    return made["made"]  # type: ignore[no-any-return]


def shown_terms(count: int) -> list[int | None]:
    """Which terms of a sum are printed; None stands for those left out."""
    return list(range(count)) if count <= MOST_TERMS else [0, 1, None, count - 1]


class Code:
    """A formula as the source of a function of its quantities, ``lists`` among them having ``count`` terms each."""

    def __init__(self, tree: Node, order: tuple[str, ...], lists: frozenset[str], count: int) -> None:
        self.tree, self.order, self.lists, self.count = tree, order, lists, count
        self.spelled = count <= MOST_TERMS

    def value(self) -> Callable[..., float]:
        """A function of the numbers."""
        return _function(self.order, self._apart(), self.source(self.tree), _MATH)

    def reader(self) -> Callable[..., tuple[float, str]]:
        """A function of the written forms of numbers and of the numbers: what the line gives, and the line."""
        before = self._apart()
        for name in self.order:
            if name in self.lists and not self.spelled:
                before.append(f"{name} = [written[each] for each in {name}]")
                before.append(f"{_SEEN}{name} = [each[0] for each in {name}]")
                before.append(f"{name} = [each[1] for each in {name}]")
            else:
                single = self._terms(name) if name in self.lists else [name]
                before += [f"{_SEEN}{each}, {each} = written[{each}]" for each in single]
        return _function(("written", *self.order), before, f"{self.source(self.tree)}, f{self.line()!r}", _MATH)

    def _terms(self, name: str) -> list[str]:
        return [f"{name}{_TERM}{index}" for index in range(self.count)]

    def _apart(self) -> list[str]:
        """Lists taken apart into their terms, where those are few."""
        return [
            f"[{', '.join(self._terms(name))}] = {name}" for name in self.order if name in self.lists and self.spelled
        ]

    def source(self, node: Node, index: int | None = None) -> str:
        """The part of the formula from ``node`` on; inside a sum that is spelled out, its term ``index``."""
        match node:
            case Number(value):
                return repr(value)
            case Name(name):
                return name if index is None or name not in self.lists else f"{name}{_TERM}{index}"
            case Negative(of):
                return f"(-{self.source(of, index)})"
            case Binary(operator, left, right):
                return f"({self.source(left, index)}{operator}{self.source(right, index)})"
            case Call("sum", (term,)):
                if self.spelled:
                    return f"sum([{', '.join(self.source(term, each) for each in range(self.count))}])"
                running = ", ".join(sorted(names(term) & self.lists))
                return f"sum([{self.source(term)} for {running}, in zip({running})])"
            case Call(function, arguments):
                return f"{function}({', '.join(self.source(each, index) for each in arguments)})"

    def line(self) -> str:
        """The line with a place for each number's text: ``{__V} * {__S}``."""
        if isinstance(self.tree, Call) and self.tree.function == "sum":  # alone in its line it needs no brackets
            return self._sum(self.tree.arguments[0])
        return self._line(self.tree, None)

    def _line(self, node: Node, index: int | None) -> str:
        def inner(of: Node, brackets: bool = False) -> str:
            text = self._line(of, index)
            return f"({text})" if brackets else text

        match node:
            case Number(_, text):
                return text
            case Name(name) if name in CONSTANTS:
                return name
            case Name(name) if index is None or name not in self.lists:
                return f"{{{_SEEN}{name}}}"
            case Name(name):
                return f"{{{_SEEN}{name}{_TERM}{index}}}" if self.spelled else f"{{{_SEEN}{name}[{index}]}}"
            case Negative(of):
                return "-" + inner(of, precedence(of) < 4)
            case Binary(operator, left, right):
                left_brackets, right_brackets = operands_need_brackets(node)
                between = operator if operator == "**" else f" {operator} "
                return inner(left, left_brackets) + between + inner(right, right_brackets)
            case Call("sum", (term,)):
                return f"({self._sum(term)})"
            case Call(function, arguments):
                return f"{function}({', '.join(inner(each) for each in arguments)})"

    def _sum(self, term: Node) -> str:
        terms = [
            f"... ({self.count} terms)" if index is None else self._line(term, index)
            for index in shown_terms(self.count)
        ]
        return " + ".join(terms) or "0"
