"""A layout drawn as MathML for the page: elements and text only, no style and no script."""

from __future__ import annotations

from html import escape

from server.working.layout import Layout


def math(*nodes: Layout, kind: str = "") -> str:
    """One ``<math>`` element; the page may break the line between two of them."""
    marked = f' class="{kind}"' if kind else ""
    return f"<math{marked}><mrow>{''.join(element(node) for node in nodes)}</mrow></math>"


def element(node: Layout) -> str:
    """The MathML of one node."""
    match node:
        case ["name", base, below]:
            return _name(base, below)
        case ["number", digits, power]:
            return _number(digits, power)
        case ["word", text]:
            return f"<mtext>{escape(text)}</mtext>"
        case ["sign", sign]:
            return f"<mo>{escape(sign)}</mo>"
        case ["row", *inner]:
            return f"<mrow>{''.join(element(each) for each in inner)}</mrow>"
        case ["brackets", inner]:
            return f"<mrow><mo>(</mo>{element(inner)}<mo>)</mo></mrow>"
        case ["fraction", over, under]:
            return f"<mfrac>{element(over)}{element(under)}</mfrac>"
        case ["power", base, exponent]:
            return f"<msup>{element(base)}{element(exponent)}</msup>"
        case ["root", inner]:
            return f"<msqrt>{element(inner)}</msqrt>"
        case ["size", inner]:
            return f"<mrow><mo>|</mo>{element(inner)}<mo>|</mo></mrow>"
        case ["function", name, *inner]:
            listed = "<mo>,</mo>".join(element(each) for each in inner)
            return f"<mrow><mi>{escape(name)}</mi><mo>⁡</mo><mo>(</mo>{listed}<mo>)</mo></mrow>"
        case ["sum", index]:
            return f"<munder><mo>∑</mo><mi>{escape(index)}</mi></munder>"
    raise ValueError(f"unknown layout {node[:1]}")


def _name(base: str, below: str) -> str:
    identifier = f"<mi>{escape(base)}</mi>"
    return f"<msub>{identifier}<mtext>{escape(below)}</mtext></msub>" if below else identifier


def _number(digits: str, power: str) -> str:
    # The minus belongs to the number: inside one <mn> no space is put after it.
    shown = f"<mn>{digits}</mn>"
    if not power:
        return shown
    return f"<mrow>{shown}<mo>×</mo><msup><mn>10</mn><mn>{power}</mn></msup></mrow>"
