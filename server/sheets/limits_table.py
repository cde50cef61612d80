"""The limits of a check as a table: what resists, how much, what of it is used."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.sheets.one_page import Part
from server.sheets.tables import column, table
from server.sheets.values import quantity, utilisation
from server.working import exceeds


def limits_table(limits: Sequence[Mapping[str, Any]], display: str) -> Iterator[Part]:
    """Every limit, the hardest used first; a used one beyond 1 is set strong."""
    if not limits:
        return
    columns = [
        column("Limit", share=1),
        column("Demand", side="right"),
        column("Resistance", side="right"),
        column("Utilisation", side="right"),
    ]
    rows: list[list[Any]] = []
    for each in sorted(limits, key=lambda limit: -float(limit["utilisation"])):
        stored = str(each.get("demand_unit") or "")
        used = utilisation(each["utilisation"])
        told = [quantity(each.get(key), stored, display) if each.get(key) is not None else "" for key in _KEYS]
        rows.append([str(each["what"]), *told, {"strong": used} if exceeds(float(each["utilisation"])) else used])
    yield table(columns, rows)


_KEYS = ("demand", "resistance")
