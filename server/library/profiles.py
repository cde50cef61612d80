"""Profiles by name: the sizes of a piece that a standard or the mill fixes, to be chosen instead of typed.

They are sizes only, without strengths, so they carry no approval: a check keeps the sizes themselves, and the name
beside them as a label. The list is ``seed_data/profiles.csv``.
"""

from __future__ import annotations

import csv
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache

from server.paths import data_folder

SIZES = (
    *("width", "depth", "diameter", "wall", "web", "flange"),
    *("corner_radius", "root_radius", "toe_radius"),
)


@dataclass(frozen=True)
class Profile:
    """One profile: its shape as in the check file, its sizes as typed ("100 mm"), and where they come from."""

    name: str
    shape: str
    sizes: Mapping[str, str]
    source: str


@cache
def profiles() -> Mapping[str, Profile]:
    """Every profile by its name, in the order of the list."""
    with (data_folder("seed_data") / "profiles.csv").open(encoding="utf-8", newline="") as file:
        rows = csv.DictReader(line for line in file if not line.startswith("#"))
        return {row["name"]: _profile(row) for row in rows}


def find(name: str) -> Profile | None:
    """The profile called ``name``, in whichever letters and spaces it is typed; None where there is none."""
    return _by_key().get(_key(name))


@cache
def _by_key() -> Mapping[str, Profile]:
    return {_key(name): profile for name, profile in profiles().items()}


def _key(name: str) -> str:
    return "".join(name.lower().replace("×", "x").split())


def _profile(row: Mapping[str, str]) -> Profile:
    sizes = {name: f"{row[name]} {row['unit']}" for name in SIZES if row[name]}
    return Profile(row["name"], row["shape"], sizes, row["source"])
