"""The working of a result as pages show it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from markupsafe import Markup

from server import sheets, working

LONG_LINE = 60  # characters of numbers beyond which a line may have to be scrolled, so it takes the keyboard's focus


def working_of(result: Mapping[str, Any]) -> list[tuple[str, list[dict[str, object]]]]:
    """Return the stored steps by their groups, formulas as MathML in the units shown."""
    display = "US" if result.get("display") == "US" else "SI"
    groups: dict[str, list[dict[str, object]]] = {}
    for step in result["steps"]:
        groups.setdefault(step.get("group") or "Check", []).append(
            {
                "title": sheets.in_units(step["title"], display),
                "long": len(step["substituted"]) > LONG_LINE,
                "math": Markup(working.mathml(step, display)),  # noqa: S704 -- our own printer escapes every text
                "note": sheets.in_units(step.get("note", ""), display),
                "source": sheets.in_units(step["source"], display),
            }
        )
    return list(groups.items())
