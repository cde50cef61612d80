"""Extremes of shear and moment of the strength combinations, stretch by stretch."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions, absolute, extremes
from server.checks.crosssection import Body
from server.mechanics.beam import Extremes

Sized = tuple[NDArray[np.float64], NDArray[np.float64]]


@dataclass(frozen=True, eq=False)
class Scan:
    """``shear`` size and place of the largest shear of each combination, ``moment`` both extremes; by stretch."""

    breaks: NDArray[np.float64]
    shear_rows: NDArray[np.float64]
    shear: tuple[Sized, ...]
    moment: tuple[Extremes, ...]


def scan(body: Body, actions: Actions) -> Scan:
    """Scan every stretch; empty where no combination is for strength."""
    chosen = list(actions.strength)
    breaks, response = actions.breaks, actions.response
    shear, moment = response.shear[chosen], response.moment[chosen]
    if not chosen:
        return Scan(breaks, shear, (), ())
    return Scan(
        breaks,
        shear,
        tuple(absolute(extremes(breaks, shear, s.start, s.end)) for s in body.stretches),
        tuple(extremes(breaks, moment, s.start, s.end) for s in body.stretches),
    )
