"""Load that stays and load that repeats on the bonds: two tables, alike for members and splices."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from server.sheets.one_page import Part
from server.sheets.tables import Cell, column, table, used
from server.sheets.values import DASH
from server.working import readable

TITLE = "Load that stays or repeats"
Entry = Mapping[str, Any]


def lasting(listed: Sequence[Entry]) -> Iterator[Part]:
    """Both tables, each where there is something for it; results of before the tables have their limits only."""
    stays = [each for each in listed if "creep_limit" in each]
    repeats = [each for each in listed if "cycles" in each]
    if stays:
        heads = _heads("Bond, combination", "Share that stays", "Resistance used by it", "Creep limit")
        yield table(heads, [_stays(each) for each in stays])
    if repeats:
        heads = _heads("Bond, combination", "Cycles", "Range, of resistance", "Borne of static", "Life, cycles")
        yield table(heads, [row for each in repeats for row in _repeats(each)])
        impacts = sorted({float(each.get("impact_left_out") or 1.0) for each in repeats} - {1.0})
        if impacts:
            told = ", ".join(readable(each, 3) for each in impacts)
            yield {"kind": "text", "text": f"Ranges are without the dynamic factor of {told} that the loads hold."}
        if any(len(each["cycles"]) > 1 for each in repeats):
            words = "Blocks of load: each row its share of the damage, cycles over life; the last row their sum, which "
            yield {"kind": "text", "text": words + "must not exceed 1 (linear damage sum of Palmgren and Miner)."}


def _heads(*names: str) -> list[dict[str, Any]]:
    return [column(names[0], share=1), *(column(name, side="right") for name in (*names[1:], "Utilisation"))]


def _bond(each: Entry) -> str:
    """'joint strip/timber, combination all', and the adhesive."""
    name = str(each["what"]).rpartition(" on ")[2]
    where = str(each.get("where") or "")
    return f"{where}: {name}" if where and where != "under its load" else name


def _stays(each: Entry) -> list[Cell]:
    shares = (each["share"], each["use"], each["creep_limit"])
    return [_bond(each), *(_percent(share) for share in shares), used(each["utilisation"])]


def _repeats(each: Entry) -> Iterator[list[Cell]]:
    name, lives = _bond(each), each.get("lives")
    blocks = list(zip(each["cycles"], each["ranges"], strict=True))
    if not lives:
        for cycles, span in blocks:
            yield [name, _count(cycles), _percent(span), _percent(each.get("borne")), DASH, used(each["utilisation"])]
        return
    for (cycles, span), life in zip(blocks, lives, strict=True):
        yield [name, _count(cycles), _percent(span), DASH, _count(life), f"{cycles / life:.2f}"]
    yield [f"{name}, sum", "", "", "", "", used(each["utilisation"])]


def _percent(share: object) -> str:
    return f"{readable(float(share) * 100, 3)} %" if isinstance(share, int | float) else DASH


def _count(number: float) -> str:
    return readable(float(number), 3)
