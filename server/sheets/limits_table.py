"""The limits of a check as a table: what resists, how much, what of it is used."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.sheets.one_page import Part
from server.sheets.tables import column, table, used
from server.sheets.values import quantity


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
        told = [quantity(each.get(key), stored, display) if each.get(key) is not None else "" for key in _KEYS]
        rows.append([str(each["what"]), *told, used(each["utilisation"])])
    yield table(columns, rows)


_KEYS = ("demand", "resistance")
