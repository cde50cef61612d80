"""Load that stays and load that repeats: what a document may say of it, and of what an adhesive bears of it."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field, model_validator

from server.documents.model import Model
from server.documents.quantities import Quantity, Safety

Cycles = Annotated[float, Quantity("factor", least=1.0, most=1e9)]
Part = Annotated[float, Quantity("factor", above=0.0, most=1.0)]


class Block(Model):
    """So many cycles between no load and ``range`` times the load (the load of the check, impact taken off)."""

    cycles: Cycles
    range: Part = 1.0


class Fatigue(Model):
    """How the load repeats: ``cycles`` (with ``range``), or ``blocks`` of them.

    ``impact`` is a dynamic factor that is in the loads of the check already: the static check keeps it, the range that
    repeats is reckoned without it, so that it is not counted twice. ``factor`` divides the fatigue strength further, as
    for a joint that nobody can inspect.
    """

    cycles: Cycles | None = None
    range: Part = 1.0
    blocks: list[Block] = Field(default_factory=list, max_length=50)
    impact: Safety = 1.0
    factor: Safety = 1.0

    @model_validator(mode="after")
    def _one_or_many(self) -> Fatigue:
        if (self.cycles is None) == (not self.blocks):
            raise ValueError("give either 'cycles' (with 'range'), or 'blocks' of cycles and range.")
        return self

    @property
    def every(self) -> list[Block]:
        """The blocks of load."""
        return self.blocks or [Block(cycles=self.cycles or 1.0, range=self.range)]


class FatigueStrength(Model):
    r"""What share of its static strength a bond bears for so many cycles.

    Either the line of the shop's own tests (ISO 9664), share = ``intercept`` x cycles ** -``slope``, up to ``cycles``
    (how far it was tested), or one tested point: ``share`` at ``cycles``, with no claim beyond them.
    """

    intercept: Annotated[float, Quantity("factor", above=0.0, most=10.0)] | None = None
    slope: Annotated[float, Quantity("factor", above=0.0, most=1.0)] | None = None
    share: Part | None = None
    cycles: Cycles

    @model_validator(mode="after")
    def _line_or_point(self) -> FatigueStrength:
        line = self.intercept is not None and self.slope is not None
        partly = (self.intercept is None) != (self.slope is None)
        if partly or line == (self.share is not None):
            raise ValueError("give either 'intercept' and 'slope' of the line, or the 'share' tested at 'cycles'.")
        return self

    def share_at(self, cycles: float) -> float | None:
        """The share of static strength borne for so many cycles; None beyond what was tested."""
        if cycles > self.cycles:
            return None
        if self.share is not None:
            return self.share
        assert self.intercept is not None
        assert self.slope is not None
        return float(min(1.0, self.intercept * cycles**-self.slope))

    def cycles_at(self, share: float) -> float | None:
        """Cycles borne at a share of static strength; infinite below what was tested to the end, None above a point."""
        if self.share is not None:
            return self.cycles if share <= self.share else None
        assert self.intercept is not None
        assert self.slope is not None
        return float((self.intercept / share) ** (1 / self.slope)) if share <= 1 else 0.0
