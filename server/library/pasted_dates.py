"""Days as they stand in spreadsheets; only what reads in one way is read."""

from __future__ import annotations

import re
from datetime import date

from server import units
from server.errors import InputError

_MONTHS = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_ISO = re.compile(r"(\d{4})-(\d{1,2})-(\d{1,2})(?:[T ]00:00(?::00)?)?")
_NAMED = re.compile(r"(\d{1,2})[ .-]*([A-Za-z]{3})[a-z]*[ .,-]*(\d{4})")
_BY_NUMBERS = re.compile(r"\d{1,4}[/.-]\d{1,2}[/.-]\d{1,4}")


def read_day(cell: str) -> str:
    """Return the day as year-month-day.

    >>> read_day("2025-4-3"), read_day("3 April 2025")
    ('2025-04-03', '2025-04-03')

    Raises
    ------
    InputError
        For every other spelling; 03/04/25 may be two days, and which one nobody can tell.
    """
    text = cell.strip()
    iso, named = _ISO.fullmatch(text), _NAMED.fullmatch(text)
    try:
        if iso:
            return date(int(iso[1]), int(iso[2]), int(iso[3])).isoformat()
        if named and named[2].lower() in _MONTHS:
            return date(int(named[3]), _MONTHS.index(named[2].lower()) + 1, int(named[1])).isoformat()
    except ValueError:
        raise InputError("", f"{units.given(cell)} is no day of the calendar; correct it.") from None
    if _BY_NUMBERS.fullmatch(text):
        raise InputError(
            "",
            f"{units.given(cell)} can be read as more than one day; write year-month-day, such as 2025-04-03.",
        )
    raise InputError("", f"{units.given(cell)} is no date; write year-month-day, such as 2025-04-03.")
