"""The grammar of a formula: what may be written, and the tree it becomes.

A formula is an arithmetic expression in Python's own notation: numbers, names, ``+ - * / **``, a leading minus,
brackets, ``pi``, and the functions ``sqrt abs max min exp log tanh cosh sinh sum``. ``sum(...)`` runs over the
names that stand for lists. Anything else is refused when the formula is first read, so a slip in a formula shows
in the first test that reaches it and never on a sheet.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass

FUNCTIONS = frozenset({"sqrt", "abs", "max", "min", "exp", "log", "tanh", "cosh", "sinh", "sum"})
ONE_ARGUMENT = FUNCTIONS - {"max", "min"}
CONSTANTS = frozenset({"pi"})
_OPERATORS: dict[type[ast.operator], str] = {
    ast.Add: "+",
    ast.Sub: "-",
    ast.Mult: "*",
    ast.Div: "/",
    ast.Pow: "**",
}
PRECEDENCE = {"+": 1, "-": 1, "*": 2, "/": 2, "negative": 3, "**": 4}


class FormulaError(RuntimeError):
    """A formula, or the call that gives it its values, is written wrongly: a mistake in the program, not of a user."""


@dataclass(frozen=True)
class Number:
    """A number written in the formula itself."""

    value: float
    text: str


@dataclass(frozen=True)
class Name:
    """A quantity, or the constant pi."""

    name: str


@dataclass(frozen=True)
class Negative:
    """A leading minus."""

    of: Node


@dataclass(frozen=True)
class Binary:
    """Two terms and the operator between them."""

    operator: str
    left: Node
    right: Node


@dataclass(frozen=True)
class Call:
    """A function of one or more terms."""

    function: str
    arguments: tuple[Node, ...]


Node = Number | Name | Negative | Binary | Call


def parse(text: str) -> Node:
    """Read a formula into its tree; raise FormulaError for anything outside the grammar."""
    try:
        tree = ast.parse(text.strip(), mode="eval").body
    except SyntaxError as error:
        raise FormulaError(f"The formula {text!r} cannot be read: {error.msg}.") from None
    return _convert(tree, text)


def _convert(node: ast.expr, text: str) -> Node:
    match node:
        case ast.Constant(value=bool()):
            pass
        case ast.Constant(value=int() | float() as value):
            return Number(float(value), ast.get_source_segment(text.strip(), node) or repr(value))
        case ast.Name(id=name) if name not in FUNCTIONS:
            return Name(name)
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return Negative(_convert(operand, text))
        case ast.BinOp(op=operator, left=left, right=right) if type(operator) in _OPERATORS:
            return Binary(_OPERATORS[type(operator)], _convert(left, text), _convert(right, text))
        case ast.Call(func=ast.Name(id=function), args=arguments, keywords=[]) if function in FUNCTIONS:
            return _call(function, tuple(_convert(each, text) for each in arguments), text)
    raise FormulaError(f"The formula {text!r} has {ast.unparse(node)!r}, which the grammar does not know.")


def _call(function: str, arguments: tuple[Node, ...], text: str) -> Call:
    least, most = (1, 1) if function in ONE_ARGUMENT else (2, 99)
    if not least <= len(arguments) <= most:
        raise FormulaError(f"The formula {text!r} gives {function} {len(arguments)} arguments.")
    if function == "sum" and any(isinstance(each, Call) and each.function == "sum" for each in walk(arguments[0])):
        raise FormulaError(f"The formula {text!r} has a sum inside a sum.")
    return Call(function, arguments)


def walk(node: Node) -> list[Node]:
    """Every node of a tree, in the order in which it is written."""
    match node:
        case Negative(of):
            return [node, *walk(of)]
        case Binary(_, left, right):
            return [*walk(left), node, *walk(right)]
        case Call(_, arguments):
            return [node, *(inner for each in arguments for inner in walk(each))]
    return [node]


def names(node: Node) -> frozenset[str]:
    """The quantities a formula needs."""
    return frozenset(each.name for each in walk(node) if isinstance(each, Name) and each.name not in CONSTANTS)


def precedence(node: Node) -> int:
    """How tightly a node holds together when written in one line; 5 never needs brackets."""
    match node:
        case Binary(operator):
            return PRECEDENCE[operator]
        case Negative():
            return PRECEDENCE["negative"]
    return 5


def operands_need_brackets(node: Binary) -> tuple[bool, bool]:
    """Whether the left and the right term of an operator need brackets when written in one line."""
    own = PRECEDENCE[node.operator]
    if node.operator == "**":
        return precedence(node.left) <= own, precedence(node.right) < own
    right = precedence(node.right)
    # A minus or a division takes everything to its left first; a leading minus never follows an operator bare.
    return precedence(node.left) < own, right <= own or isinstance(node.right, Negative)
