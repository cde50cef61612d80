"""What is judged of a splice: which demand stands against which strength, and what is missing for it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from server.checks import surfaces
from server.checks.resistance import Claim, Findings, Kind, Strength, Weigher
from server.checks.splice_model import SIDES, Model
from server.working import Working

SYMBOLS = {
    "shear": "tau_max",
    "peel": "sigma_peel",
    "inner": "sigma_i",
    "outer": "sigma_o",
    "inner_turn": "tau_i",
    "outer_turn": "tau_o",
}


@dataclass(frozen=True)
class Cases:
    """The one load of a splice, as the judge weighs combinations."""

    names: tuple[str, ...]
    durations: tuple[str | None, ...]
    strength: tuple[int, ...] = (0,)

    @property
    def strength_names(self) -> tuple[str, ...]:
        """As ``names``."""
        return self.names


def cases_of(duration: str | None) -> Cases:
    """The load of a splice with its duration."""
    return Cases(("as given",), (duration,))


@dataclass(frozen=True)
class Demands:
    """The largest stresses [MPa] and where they are [mm]; ``peel`` 0 where nothing pulls.

    ``turning``: shear that a torque puts into the walls of inner and outer tube.
    """

    shear: float
    peel: float
    inner: float
    outer: float
    at: Mapping[str, float]
    turning: tuple[float, float] = (0.0, 0.0)

    def of(self, name: str) -> float:
        """One of them; 'inner_turn' and 'outer_turn' name the walls' shear."""
        if name.endswith("_turn"):
            return self.turning[SIDES.index(name.removesuffix("_turn"))]
        return float(getattr(self, name))


@dataclass(frozen=True)
class Limit:
    """A strength and the demand it stands against: 'shear', 'peel', 'inner', 'outer' or 'load'."""

    demand: str
    strength: Strength


def limits_of(model: Model, demands: Demands | None, judge: Weigher, book: Working) -> list[Limit]:
    """Every limit whose strength is known; the others are named in the findings. Without demands: all of them."""
    book.begin("Strengths")
    elastic = model.document.response == "elastic"
    pulled = demands is None or demands.peel > 0
    found = []
    if elastic:
        found.append(("shear", surfaces.shear_yield(judge, model.document.bond, model.adhesive)))
    if pulled:
        found.append(("peel", surfaces.peel(judge, model.document.bond, model.adhesive)))
    for side, name in enumerate(SIDES):
        found.append((name, _stretched(model, side, judge)))
        found.append(("shear", _surface_shear(model, side, judge, book)))
        if demands is not None and demands.turning[side]:
            found.append((f"{name}_turn", _wall(_surface_shear(model, side, judge, Working(record=False)))))
        if pulled:
            found.append(("peel", _surface_peel(model, side, judge)))
    return [Limit(demand, strength) for demand, strength in found if strength is not None]


def claim(limit: Limit, demands: Demands) -> Claim:
    """The limit as the judge weighs it."""
    symbol = SYMBOLS[limit.demand]
    at = demands.at.get(limit.demand, 0.0)
    return Claim(
        limit.strength, symbol, np.array([demands.of(limit.demand)]), np.array([at]), np.zeros(1, dtype=np.intp)
    )


def joint_load(model: Model, ultimate: float, judge: Weigher) -> Strength | None:
    """The load at which a yielding bond reaches its strain limit, as a strength of the adhesive."""
    name = model.document.bond
    return judge.strength(
        ultimate,
        what=f"adhesive {name}, shear strain of the yielding bond",
        unit="N",
        kind="adhesive",
        owner=name,
        holder=model.adhesive,
    )


def yield_values(model: Model, findings: Findings) -> tuple[float, float] | None:
    """Yield stress and strain limit; None with what is missing named."""
    adhesive, name = model.adhesive, model.document.bond
    for value, what in ((adhesive.shear_yield, "shear_yield"), (adhesive.shear_strain_limit, "shear_strain_limit")):
        if value is None:
            findings.miss(
                f"{what} of adhesive {name!r}: an elastic-plastic bond needs the whole shear stress-strain curve, from "
                "thick-adherend or napkin-ring tests (ISO 11003)."
            )
    if adhesive.shear_yield is None or adhesive.shear_strain_limit is None:
        return None
    return adhesive.shear_yield, adhesive.shear_strain_limit


def _material(model: Model, side: int, judge: Weigher, value: float | None, what: str) -> Strength | None:
    kind: Kind = "material"
    return judge.strength(
        value, what=what, unit="MPa", kind=kind, owner=model.names[side], holder=model.materials[side]
    )


def _stretched(model: Model, side: int, judge: Weigher) -> Strength | None:
    """Tension along an adherend; yield where the material has no tension strength."""
    material, name = model.materials[side], SIDES[side]
    tension = material.strengths.tension
    value = tension if tension is not None else material.yield_
    word = "tension" if tension is not None or value is None else "yield"
    if value is None:
        judge.findings.miss(
            f"tension strength (or yield) of {model.names[side]!r}: the {name} adherend carries the load and bends at "
            "the overlap's edge."
        )
    return _material(model, side, judge, value, f"{word} of the {name} adherend")


def _surface_shear(model: Model, side: int, judge: Weigher, book: Working) -> Strength | None:
    again = side == 1 and model.names[0] == model.names[1]
    return surfaces.surface_shear(
        judge,
        model.names[side],
        model.materials[side],
        f"the {SIDES[side]} adherend",
        rolls=model.rolls(side),
        book=Working(record=False) if again else book,
    )


def _surface_peel(model: Model, side: int, judge: Weigher) -> Strength | None:
    return surfaces.surface_peel(judge, model.names[side], model.materials[side], f"the {SIDES[side]} adherend")


def _wall(strength: Strength | None) -> Strength | None:
    """The shear strength of a tube's wall is that of its surface."""
    return None if strength is None else strength._replace(what=strength.what.replace("in the surface", "in the wall"))
