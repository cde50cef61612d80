"""Knock-down chains in words: the line of multiplication, and the chains that multiply a value."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from server import units
from server.library import reading
from server.library.properties import PINNED, PROPERTIES
from server.library.record import Factor, Record
from server.library.references import multiplication, standing
from server.library.uses import links_to
from server.storage import Session


@dataclass(frozen=True)
class ValueChain:
    """The chain of one bond, fastener or material that pins a value: the record, what it counts as today, the line."""

    record: Record
    standing: str
    line: str


def chain_line(chain: Sequence[Factor], value: object, kind: str, display: str = "SI") -> str:
    """Return a chain on a value as one line: '1.58 MPa × 0.85 (moisture) = 1.34 MPa'; '' where there is no chain.

    ``value`` is a quantity of the unit kind ``kind``, as typed or as a plain number.
    """
    if not chain:
        return ""
    number, product = units.parse("", value, kind), math.prod(factor.value for factor in chain)
    line = multiplication(chain, units.show(number, kind, display))
    return f"{line.rsplit(' = ', 1)[0]} = {units.show(number * product, kind, display)}"


def chains_on(session: Session, record: Record, display: str = "SI") -> list[ValueChain]:
    """Return the chains that multiply a value's revision, by the newest revision of each record that pins it.

    Factors multiply what resists, so a stiffness has none; a withdrawn record multiplies nothing.
    """
    known = PROPERTIES.get(str(record.values.get("property")))
    if record.group != "values" or known is None or known.takes != "characteristic":
        return []
    linking = [link for role, link in links_to(session, record.key, record.revision) if role.startswith(PINNED)]
    newest = {link.key: link for link in linking}
    found = reading.many(session, newest.values())
    return [
        ValueChain(each, standing(each), chain_line(each.chain, record.values["value"], known.kind, display))
        for link in newest.values()
        if (each := found.get(link)) is not None and each.chain and standing(each) != "withdrawn"
    ]
