"""What a joint or piece resists, and what it is used to.

Resistance, for one combination, is the characteristic strength x the duration factor of the
combination x the product of the named factors / the safety or partial factor (contract of the check).
All limits of a check are weighed at once, one row a limit and one column a strength combination; the
governing cell of each row is then written out step by step.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Literal, NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.curves import TIE
from server.checks.places import Places
from server.checks.rules import Origin, Printed, Reduction, chosen
from server.working import Working, formula

Kind = Literal["adhesive", "fastener", "material"]
Holder = documents.Material | documents.Adhesive | documents.Fastener
UNPROVEN = ("indicative", "draft", "on hold", "withdrawn")
STRENGTH_SYMBOL = {"MPa": "f_k", "N": "R_k"}
RESISTANCE_SYMBOL = {"MPa": "f_d", "N": "R_d"}


@lru_cache(maxsize=64)
def resistance_formula(strength: str, factors: int) -> str:
    """The formula of a resistance: the strength's symbol, times k_dur and so many named factors, over gamma."""
    named = "".join(f"*k_{i}" for i in range(1, factors + 1))
    return f"{strength}*k_dur{named}/gamma"


@dataclass
class Findings:
    """What the check finds on its way, beside the numbers: what is missing, what deserves a caution."""

    missing: list[str] = field(default_factory=list)
    cautions: list[dict[str, object]] = field(default_factory=list)

    def miss(self, text: str) -> None:
        if text not in self.missing:
            self.missing.append(text)

    def caution(self, about: str, text: str, answer: bool = False) -> None:
        entry: dict[str, object] = {"about": about, "text": text, "answer": answer}
        if entry not in self.cautions:
            self.cautions.append(entry)


class Strength(NamedTuple):
    """One characteristic strength with everything that multiplies and divides it.

    ``owner`` is the value's name in the document; ``duration`` one factor a strength combination,
    NaN where the value's table has none for it; ``reductions`` what rules take off; ``before`` steps that led to the
    value.
    """

    what: str
    value: float
    unit: str
    owner: str
    duration: tuple[float, ...]
    factors: tuple[tuple[str, float], ...]
    divisor: float
    source: str
    reductions: tuple[Reduction, ...] = ()
    before: tuple[Printed, ...] = ()

    @property
    def multipliers(self) -> tuple[tuple[str, float], ...]:
        """Every named factor on the strength: the value's own, then what rules take off."""
        if not self.reductions:
            return self.factors
        return (*self.factors, *((reduction.rule, reduction.value) for reduction in self.reductions))

    def reduced(self, reductions: tuple[Reduction, ...]) -> Strength:
        """The same strength with what rules take off."""
        return self._replace(reductions=reductions) if reductions else self

    def arguments(self, row: int) -> dict[str, tuple[float, str]]:
        """What multiplies and divides the strength in one combination, with units, for a printed step."""
        found = {"k_dur": (self.duration[row], ""), "gamma": (self.divisor, "")}
        for i, (_, value) in enumerate(self.multipliers, 1):
            found[f"k_{i}"] = (value, "")
        return found


class Claim(NamedTuple):
    """A demand set against a strength, one entry a strength combination, with the place and stretch of each.

    ``symbol`` is the demand's in the printed working; ``origin`` how it came about, where no other step says so.
    """

    strength: Strength
    symbol: str
    demand: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: NDArray[np.intp]
    origin: Origin | None = None


class Weighed(NamedTuple):
    """A claim at its governing combination ``row``; ``resistance``, ``utilisation`` and place there.

    ``used`` what part of its resistance every combination uses, below 0 where the resistance is not known.
    """

    claim: Claim
    row: int
    resistance: float
    utilisation: float
    at: float
    used: list[float]

    @property
    def stretch(self) -> int:
        return int(self.claim.stretch[self.row])


class _Terms(NamedTuple):
    """What all strengths of one holder have in common: what multiplies and divides them, and where they come from.

    ``divisor`` is None where the basis has no factor for them.
    """

    duration: tuple[float, ...]
    factors: tuple[tuple[str, float], ...]
    divisor: float | None
    source: str


class Combinations(Protocol):
    """The combinations that strengths are weighed over; ``strength`` picks those for strength among ``names``."""

    @property
    def names(self) -> tuple[str, ...]: ...

    @property
    def durations(self) -> tuple[str | None, ...]: ...

    @property
    def strength(self) -> tuple[int, ...]: ...

    @property
    def strength_names(self) -> tuple[str, ...]: ...


class Judged(Protocol):
    """What is read of a document: how strengths are divided."""

    @property
    def basis(self) -> documents.Allowable | documents.LimitState: ...


class Weigher:
    """Gathers strengths for one document, with what is missing or doubtful about them, and weighs claims."""

    def __init__(self, document: Judged, actions: Combinations, working: Working, findings: Findings) -> None:
        self.basis, self.combinations, self.working, self.findings = document.basis, actions, working, findings
        self._terms: dict[tuple[Kind, str], _Terms] = {}
        self._common: float | None = None

    def place(self, at: float) -> str:
        """What stands at a place, in words; '' where nothing has a name."""
        return ""

    def strength(
        self,
        value: float | None,
        *,
        what: str,
        unit: str,
        kind: Kind,
        owner: str,
        holder: Holder,
        divisor: float | None = None,
    ) -> Strength | None:
        """One strength, or None where it was not given; ``divisor`` stands in for the basis's own factor."""
        if value is None:
            return None
        terms = self._terms_of(kind, owner, holder)
        divided = divisor or self._common or terms.divisor
        assert divided is not None  # documents refuses a basis without a factor that the check uses
        return Strength(what, value, unit, owner, terms.duration, terms.factors, divided, terms.source)

    def duration(self, kind: Kind, owner: str, holder: Holder) -> tuple[float, ...]:
        """Duration factors over the strength combinations; doubts about the value are named the first time."""
        return self._terms_of(kind, owner, holder).duration

    def _terms_of(self, kind: Kind, owner: str, holder: Holder) -> _Terms:
        found = self._terms.get((kind, owner))
        if found is None:
            duration = self._duration(f"{kind} {owner!r}", holder)
            divisor = self.basis.factor(kind, owner)
            found = _Terms(duration, tuple(holder.factors.items()), divisor, describe(holder))
            self._terms[kind, owner] = found
        return found

    def _duration(self, label: str, holder: Holder) -> tuple[float, ...]:
        table = holder.duration_factors
        found = []
        for k in self.combinations.strength:
            wanted = self.combinations.durations[k]
            if wanted is None or not table:
                found.append(1.0)
            elif wanted in table:
                found.append(table[wanted])
            else:
                found.append(np.nan)
                self.findings.miss(
                    f"duration factor of {label} for {wanted!r} (combination {self.combinations.names[k]!r}): its "
                    f"table has only {', '.join(table)}; add it to the record from the code you work to."
                )
        if not table:
            self.findings.caution(
                "load duration",
                f"{label[:1].upper() + label[1:]} has no duration factors: 1.0 was used for every combination.",
            )
        self.judge_status(label, holder)
        return tuple(found)

    def judge_status(self, label: str, holder: Holder) -> None:
        """A doubtful value never lets a check pass; a provisional or superseded one is named."""
        status = holder.status
        if status in UNPROVEN:
            self.findings.miss(
                f"approved value for {label}: its values are {status!r}; the verdict may rest only on values approved "
                "from tests of these parts. Test coupons and have the record approved."
            )
        elif status == "provisional":
            self.findings.caution(
                "value status", f"{label[:1].upper() + label[1:]} is provisional: few tests so far.", True
            )
        elif status == "superseded":
            self.findings.caution(
                "value status", f"{label[:1].upper() + label[1:]} is superseded: a newer revision exists.", True
            )

    def weigh(self, claims: Sequence[Claim]) -> list[Weighed | None]:
        """The governing combination of every claim; None where no combination can be judged."""
        if not claims:
            return []
        demand = np.array([c.demand for c in claims])
        places = np.array([c.at for c in claims])
        resists = resistances(claims)
        usage = np.where(np.isnan(resists), -1.0, demand / resists)
        top = usage.max(axis=1, keepdims=True)
        near = np.where(usage >= top - TIE * np.maximum(top, 1e-300), places, np.inf)
        rows = near.argmin(axis=1).tolist()
        each = zip(claims, rows, resists.tolist(), usage.tolist(), places.tolist(), strict=True)
        return [
            None if used[row] < 0 else Weighed(claim, row, resistance[row], used[row], at[row], used)
            for claim, row, resistance, used, at in each
        ]

    def write(self, weighed: Weighed, group: str) -> dict[str, object]:
        """The limit's block of the result, its resistance and utilisation reached step by step."""
        claim, row = weighed.claim, weighed.row
        found, unit = claim.strength, claim.strength.unit
        given, resists = STRENGTH_SYMBOL[unit], RESISTANCE_SYMBOL[unit]
        combination = self.combinations.strength_names[row]
        duration = self.combinations.durations[self.combinations.strength[row]]
        named = "".join(f"; k_{i} = {name}" for i, (name, _) in enumerate(found.multipliers, 1))
        demand, at = float(claim.demand[row]), weighed.at
        if claim.origin is not None:
            claim.origin.write(self.working, group, claim.symbol, unit, row, weighed.stretch)
        for printed in found.before:
            printed.write(self.working, group)
        for reduction in found.reductions:
            reduction.step.write(self.working, group)
        resistance = self.working.step(
            f"Resistance: {found.what}",
            resists,
            resistance_formula(given, len(found.multipliers)),
            {given: (found.value, unit), **found.arguments(row)},
            unit=unit,
            source=f"{found.source}; k_dur: {duration or 'no duration stated'}{named}",
            group=group,
        )
        utilisation = self.working.step(
            f"Utilisation: {found.what}",
            "eta",
            f"{claim.symbol}/{resists}",
            {claim.symbol: (demand, unit), resists: (resistance, unit)},
            unit="",
            source=f"combination {combination}",
            group=group,
        )
        return {
            "what": found.what,
            "demand": demand,
            "demand_unit": unit,
            "resistance": resistance,
            "utilisation": utilisation,
            "reductions": [{"rule": each.rule, "value": each.value} for each in found.reductions],
            "combination": combination,
            "at": at,
            "place": self.place(at),
            "strength": found.value,
            "duration_factor": found.duration[row],
            "factors": dict(found.factors),
            "safety_factor": found.divisor,
        }


class Judge(Weigher):
    """Weighs the claims of a member, whose places have names."""

    def __init__(
        self,
        document: documents.MemberDocument,
        actions: Actions,
        working: Working,
        findings: Findings,
        places: Places | None = None,
    ) -> None:
        super().__init__(document, actions, working, findings)
        self.document, self.actions, self.rules = document, actions, chosen(document)
        self.places = places or Places(document)

    def with_divisor(self, divisor: float | None) -> Judge:
        """A judge of the same check that divides every strength by one factor, such as the fall-back's."""
        other = Judge(self.document, self.actions, self.working, self.findings, self.places)
        other._common = divisor
        return other

    def place(self, at: float) -> str:
        """What stands at a place of the member."""
        return self.places.at(at)


def resistances(claims: Sequence[Claim]) -> NDArray[np.float64]:
    """Resistances (claims, combinations), NaN where a duration factor is missing.

    One evaluation of the printed formula serves all claims with as many factors.
    """
    strengths = [claim.strength for claim in claims]
    alike: dict[int, list[int]] = {}
    for i, strength in enumerate(strengths):
        alike.setdefault(len(strength.factors) + len(strength.reductions), []).append(i)
    found = np.empty((len(claims), len(strengths[0].duration)))
    for factors, places in alike.items():
        own = [strengths[i] for i in places]
        values = {
            "f_k": np.array([s.value for s in own])[:, None],
            "k_dur": np.array([s.duration for s in own]),
            "gamma": np.array([s.divisor for s in own])[:, None],
        }
        for n in range(factors):
            values[f"k_{n + 1}"] = np.array([s.multipliers[n][1] for s in own])[:, None]
        found[places] = formula(resistance_formula("f_k", factors)).array(values)
    return found


def describe(holder: Holder) -> str:
    """Where a value comes from, in one line."""
    if holder.record:
        return f"record {holder.record} revision {holder.revision}"
    return holder.source or "as typed in this check"


def worst(weighed: Iterable[Weighed | None]) -> Weighed | None:
    """The one with the greatest utilisation; the first wins a tie."""
    most: Weighed | None = None
    for each in weighed:
        if each is not None and (most is None or each.utilisation > most.utilisation):
            most = each
    return most
