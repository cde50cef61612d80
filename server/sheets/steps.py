"""The working in its groups; a group that repeats another number for number is named once instead of printed twice."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import groupby
from typing import Any

Step = Mapping[str, Any]
LEAST_REPEATED = 4
"""Shorter groups are printed: pointing at them would not save a line."""


@dataclass(frozen=True)
class StepGroup:
    """Steps under one heading, numbered from ``first``; ``same`` says in words which steps they repeat, or is empty."""

    title: str
    first: int
    steps: tuple[Step, ...]
    same: str = ""


def working_groups(steps: Sequence[Step]) -> list[StepGroup]:
    """Consecutive steps of one group; mirrored joints and twin pieces are found by equal formulas and equal numbers."""
    groups: list[StepGroup] = []
    seen: dict[tuple[tuple[str, ...], ...], StepGroup] = {}
    first = 1
    for title, listed in groupby(steps, key=lambda step: str(step.get("group") or "")):
        members = tuple(listed)
        key = tuple(_fingerprint(step) for step in members)
        earlier = seen.get(key) if len(members) >= LEAST_REPEATED else None
        group = StepGroup(title, first, members, _same(first, members, earlier) if earlier else "")
        seen.setdefault(key, group)
        groups.append(group)
        first += len(members)
    return groups


def _fingerprint(step: Step) -> tuple[str, ...]:
    """What must be equal: formula, numbers, value and unit. Titles and sources name the twin and may differ."""
    value = step.get("value")
    shown = "" if value is None else f"{value:.9g}"
    return (step["symbol"], step["formula"], step["substituted"], shown, step["unit"], step.get("note", ""))


def _same(first: int, members: Sequence[Step], earlier: StepGroup) -> str:
    last, before = first + len(members) - 1, earlier.first + len(members) - 1
    return (
        f"Steps {first} to {last}: formula for formula and number for number those of {earlier.title or 'the steps'} "
        f"({earlier.first} to {before})."
    )
