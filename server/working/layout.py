"""A formula laid out as mathematics: one tree of plain lists that the page, the print and the terminal draw.

Each node is ``[kind, ...]``::

    ["name", base, below]          ["number", digits, power]     ["word", text]
    ["sign", character]            ["row", node, ...]            ["brackets", node]
    ["fraction", over, under]      ["power", base, exponent]     ["root", node]
    ["size", node]                 ["function", name, node...]   ["sum", index]

The tree holds only lists and strings, so it travels as JSON; nothing in it is ever run as program text.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from server.working import names, numbers
from server.working.compiled import shown_terms
from server.working.grammar import PRECEDENCE, Binary, Call, Name, Negative, Node, Number

Layout = list[Any]
TIMES, MINUS, PLUS = "⋅", "−", "+"
_ADDITIVE = (["sign", PLUS], ["sign", MINUS])
INDEX = "i"
_FUNCTION_NAMES = {"log": "ln"}

Leaf = Callable[[str, int | None], Layout]  # a quantity, and which term of a sum it stands in (-1: the i-th)


def symbolic(tree: Node, lists: frozenset[str]) -> Layout:
    """The formula in its own symbols; lists get the index i under a sum sign."""

    def leaf(name: str, term: int | None) -> Layout:
        return symbol(name, INDEX if term is not None and name in lists else "")

    return _Writer(leaf, lists, None).write(tree)


def with_numbers(
    tree: Node, values: Mapping[str, float | list[float]], lists: frozenset[str], count: int, digits: int
) -> Layout:
    """The formula with its numbers, sums written out term by term."""

    def leaf(name: str, term: int | None) -> Layout:
        value = values.get(name)
        if value is None:
            return symbol(name)
        if isinstance(value, list):
            value = value[term or 0]
        return number(value, digits)

    return _Writer(leaf, lists, count).write(tree)


def symbol(name: str, index: str = "") -> Layout:
    """A quantity's symbol."""
    base, below = names.split(name)
    return ["name", base, ",".join(each for each in (below, index) if each)]


def number(value: float, digits: int = numbers.DIGITS) -> Layout:
    """A number, grouped, with its power of ten."""
    return ["number", *numbers.parts(numbers.canonical(value, digits))]


class _Writer:
    """Walks a formula; ``count`` is the number of a sum's terms to write out, None for a sum sign."""

    def __init__(self, leaf: Leaf, lists: frozenset[str], count: int | None) -> None:
        self.leaf, self.lists, self.count = leaf, lists, count

    def write(self, node: Node, term: int | None = None) -> Layout:
        match node:
            case Number(value):
                return number(value, 15)
            case Name(name):
                return self.leaf(name, term)
            case Negative(of):
                held = self._held(of, PRECEDENCE["*"], term)
                held = ["brackets", held] if starts_with_minus(held) else held
                return ["row", ["sign", MINUS], *spread(held)]
            case Binary("/", over, under):
                return ["fraction", self.write(over, term), self.write(under, term)]
            case Binary("**", base, exponent):
                return ["power", self._base(base, term), self.write(exponent, term)]
            case Binary(operator, left, right):
                return self._operator(operator, left, right, term)
            case Call("sqrt", (of,)):
                return ["root", self.write(of, term)]
            case Call("abs", (of,)):
                return ["size", self.write(of, term)]
            case Call("sum", (of,)):
                return self._sum(of)
            case Call(function, arguments):
                inner = [self.write(each, term) for each in arguments]
                return ["function", _FUNCTION_NAMES.get(function, function), *inner]

    def _operator(self, operator: str, left: Node, right: Node, term: int | None) -> Layout:
        own = PRECEDENCE[operator]
        # A leading minus stays bare: −a·b is read as it is meant.
        first = self.write(left, term) if isinstance(left, Negative) else self._held(left, own, term)
        if first[0] == "row" and first[1][0] == "sum" and operator == "*":
            first = ["brackets", first]  # (sum of a) times b, not the sum of a times b
        # Standing right of a sign, whatever begins with a minus is bracketed.
        kept = operator == "-" or (operator == "+" and isinstance(right, Binary))  # brackets as they were written
        second = self._held(right, own + kept, term)
        if starts_with_minus(second):
            second = ["brackets", second]
        sign = {"*": TIMES, "-": MINUS}.get(operator, operator)
        return ["row", *spread(first), ["sign", sign], *spread(second)]

    def _held(self, node: Node, level: int, term: int | None) -> Layout:
        """A term, bracketed where its own operator holds less tightly than ``level``; fractions hold by themselves."""
        out = self.write(node, term)
        match node:
            case Binary("/" | "**", _, _) | Number() | Name():
                loose = False
            case Binary(operator, _, _):
                loose = PRECEDENCE[operator] < level
            case Negative():
                loose = level > 1
            case Call("sum", _):
                loose = level > 1 and self.count not in (None, 1)
            case _:
                loose = False
        return ["brackets", out] if loose else out

    def _base(self, node: Node, term: int | None) -> Layout:
        out = self.write(node, term)
        simple = out[0] in ("name", "root", "size", "brackets", "function") or (out[0] == "number" and not out[2])
        return out if simple and not starts_with_minus(out) else ["brackets", out]

    def _sum(self, of: Node) -> Layout:
        if self.count is None:
            return ["row", ["sum", INDEX], *spread(self._held(of, PRECEDENCE["*"], -1))]
        terms: list[Layout] = []
        for index in shown_terms(self.count):
            if terms:
                terms.append(["sign", PLUS])
            if index is None:
                terms.append(["word", f"… ({self.count} terms)"])
                continue
            written = self._held(of, PRECEDENCE["+"], index)
            terms += [["brackets", written]] if len(terms) and starts_with_minus(written) else spread(written)
        return ["row", *terms] if terms else ["number", "0", ""]


def spread(layout: Layout) -> list[Layout]:
    """The parts of a row, or the node itself: rows inside rows are not wanted."""
    return layout[1:] if layout[0] == "row" else [layout]


def starts_with_minus(layout: Layout) -> bool:
    """Whether the first thing written is a minus."""
    match layout:
        case ["number", digits, _]:
            return str(digits).startswith(MINUS)
        case ["sign", sign]:
            return bool(sign == MINUS)
        case ["row", first, *_]:
            return starts_with_minus(first)
    return False


WIDEST = 46.0
"""Characters of a fraction or a bracket that still fits beside others in one line of a page or a sheet."""


def width(node: Layout) -> float:
    """About how many characters wide a layout is drawn."""
    match node:
        case ["name", base, below]:
            return len(base) + 0.6 * len(below)
        case ["number", digits, power]:
            return len(digits) + (3.5 + 0.6 * len(power) if power else 0.0)
        case ["word", text]:
            return len(text)
        case ["sign", _]:
            return 2.0
        case ["fraction", over, under]:
            return max(width(over), width(under))
        case ["power", base, exponent]:
            return width(base) + 0.6 * width(exponent)
        case ["function", name, *inner]:
            return len(name) + 2.0 + sum(width(each) + 1.0 for each in inner)
        case ["sum", _]:
            return 2.0
        case [_, *inner]:
            return 1.0 + sum(width(each) for each in inner)
    return 0.0


def breakable(node: Layout) -> Layout:
    """The same mathematics with fractions and brackets that are too wide for a line set in one row, which can break."""
    match node:
        case ["row", *inner]:
            return ["row", *(part for each in inner for part in spread(breakable(each)))]
        case ["fraction", over, under] if width(node) > WIDEST:
            return ["row", *_in_line(over, _additive(over)), ["sign", "/"], *_in_line(under, under[0] == "row")]
        case ["brackets", inner] if width(node) > WIDEST:
            return ["row", *_in_line(inner, True)]
        case ["root", inner] if width(node) > WIDEST:  # a root sign cannot break; the exponent 1/2 says the same
            *kept, last = _in_line(inner, True)
            return ["row", *kept, ["power", last, ["row", number(1, 1), ["sign", "/"], number(2, 1)]]]
        case ["function", name, *inner] if width(node) > WIDEST:
            listed = [["sign", ","] if part is None else part for part in _listed(inner)]
            return ["row", ["word", name], ["sign", "("], *listed, ["sign", ")"]]
    return node


def _listed(arguments: list[Layout]) -> list[Layout | None]:
    """The parts of a function's arguments in one row; None stands between two arguments."""
    found: list[Layout | None] = []
    for each in arguments:
        found += [*([None] if found else []), *spread(breakable(each))]
    return found


def _in_line(node: Layout, brackets: bool) -> list[Layout]:
    inner = spread(breakable(node))
    return [["sign", "("], *inner, ["sign", ")"]] if brackets else inner


def _additive(node: Layout) -> bool:
    return bool(node[0] == "row" and (node[1][0] == "sum" or any(each in _ADDITIVE for each in node[2:])))
