"""Extremes of shear and moment of the strength combinations, stretch by stretch."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions
from server.checks.crosssection import Body
from server.checks.curves import Curve
from server.mechanics.piecewise import Extremes

Sized = tuple[NDArray[np.float64], NDArray[np.float64]]


@dataclass(frozen=True, eq=False)
class Scan:
    """``shear`` size and place of the largest shear of each combination, ``moment`` both extremes; by stretch."""

    curve: Curve | None
    shear: tuple[Sized, ...]
    moment: tuple[Extremes, ...]


def scan(body: Body, actions: Actions) -> Scan:
    """Scan every stretch; empty where no combination is for strength."""
    shear, moment = actions.shear, actions.moment
    if shear is None or moment is None:
        return Scan(None, (), ())
    return Scan(
        shear,
        tuple(shear.over(s.start, s.end).absolute() for s in body.stretches),
        tuple(moment.over(s.start, s.end) for s in body.stretches),
    )
