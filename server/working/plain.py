"""A layout drawn in one line of plain characters, for the terminal."""

from __future__ import annotations

from server.working.layout import Layout
from server.working.numbers import superscript

NO_BREAK = "\u00a0"  # every terminal has it, and no line is broken there


def line(node: Layout) -> str:
    """The layout in one line, with brackets where a fraction bar or a raised exponent would have held it together."""
    match node:
        case ["name", base, below]:
            return f"{base}_{below}" if below else str(base)
        case ["number", digits, power]:
            digits = digits.replace("\u2009", NO_BREAK)
            return f"{digits}×10{superscript(power)}" if power else str(digits)
        case ["word", text]:
            return str(text)
        case ["sign", sign]:
            return str(sign)
        case ["row", *inner]:
            return _row(inner)
        case ["brackets", inner]:
            return f"({line(inner)})"
        case ["fraction", over, under]:
            return f"{_held(over)} / {_held(under, below=True)}"
        case ["power", base, exponent]:
            return f"{_held(base, below=True)}{_raised(exponent)}"
        case ["root", inner]:
            return f"√({line(inner)})"
        case ["size", inner]:
            return f"|{line(inner)}|"
        case ["function", name, *inner]:
            return f"{name}({', '.join(line(each) for each in inner)})"
        case ["sum", _]:
            return "Σ"
    raise ValueError(f"unknown layout {node[:1]}")


def _row(inner: list[Layout]) -> str:
    out = ""
    for position, each in enumerate(inner):
        if each[0] == "sign" and position:
            out += f" {each[1]} "
        elif each[0] == "sum":
            out += "Σ "
        else:
            # A fraction right of another factor keeps its own bar: a · (b / c).
            text = line(each)
            out += f"({text})" if each[0] == "fraction" and _right_of_times(inner, position) else text
    return out


def _right_of_times(inner: list[Layout], position: int) -> bool:
    return position > 0 and inner[position - 1] == ["sign", "⋅"]


def _held(node: Layout, below: bool = False) -> str:
    """A fraction's upper or lower part; rows are bracketed below the bar, sums and differences above it too."""
    text = line(node)
    if node[0] == "row":
        additive = any(each in (["sign", "+"], ["sign", "−"]) for each in node[2:])
        summed = node[1][0] == "sum"
        return f"({text})" if below or additive or summed else text
    if node[0] in ("fraction",) and below:
        return f"({text})"
    if node[0] == "number" and node[2] and below:
        return f"({text})"
    return text


def _raised(exponent: Layout) -> str:
    text = line(exponent)
    if exponent[0] == "number" and not exponent[2] and "." not in text:
        return superscript(text)
    return f"^{text}" if exponent[0] in ("name", "number") else f"^({text})"
