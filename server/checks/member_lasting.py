"""Load that stays and load that repeats on a member's bonds.

A combination says how its load repeats (``fatigue``) and what of it stays (``sustained``); an adhesive says what share
of its resistance it bears for so many cycles (``fatigue``), and for ever (``creep_limit``).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import lasting
from server.checks.actions import Actions, Curve
from server.checks.joints import JointCheck
from server.checks.member_ends import Governs, MemberEnds
from server.checks.resistance import Claim, Findings, resistances
from server.mechanics.piecewise import evaluate
from server.working import Working

SIDES: tuple[Literal["left", "right"], ...] = ("left", "right")


@dataclass(frozen=True)
class _Bond:
    """A glued joint where one combination uses its adhesive most: what part of its resistance, and at what place.

    ``share`` is the shear that stays over the shear that governs there.
    """

    joint: JointCheck
    name: str
    adhesive: documents.Adhesive
    used: float
    at: float
    share: float


def check_lasting(
    document: documents.MemberDocument,
    actions: Actions,
    joints: Sequence[JointCheck],
    book: Working,
    findings: Findings,
    found: MemberEnds,
) -> list[dict[str, object]]:
    """Every bond under every combination that says how its load repeats or stays; what governs goes to ``found``."""
    told: list[dict[str, object]] = []
    unjudged: list[_Bond] = []
    claimed = [(joint, claim) for joint in joints if (claim := _own_claim(joint)) is not None]
    if not claimed:
        return []
    used = np.array([claim.demand for _, claim in claimed]) / resistances([claim for _, claim in claimed])
    for name, combination in document.combinations.items():
        if combination.for_ == "deflection" or not (combination.fatigue or any(combination.sustained.values())):
            continue
        for bond in _bonds(document, name, actions, claimed, used):
            unjudged += [bond] if bond.share > 0 and bond.adhesive.creep_limit is None else []
            told += _judge(combination, bond, f"joint {bond.joint.site.id}, combination {name}", book, findings, found)
    _caution_creep(unjudged, findings)
    return told


def _caution_creep(bonds: Sequence[_Bond], findings: Findings) -> None:
    """One caution an adhesive, which one answer can settle: its joints, and the most of any one's load that stays."""
    for name in dict.fromkeys(bond.name for bond in bonds):
        own = [bond for bond in bonds if bond.name == name]
        findings.caution(
            "creep",
            f"{', '.join(dict.fromkeys(bond.joint.site.id for bond in own))}: up to "
            f"{max(bond.share for bond in own) * 100:.3g} % of the governing load stays, and adhesive {name!r} has no "
            "creep_limit: what it bears for ever was not judged. PVA, hot-melt and rubbery adhesives creep; have "
            "sustained-load tests made.",
            answer=True,
        )


def _bonds(
    document: documents.MemberDocument,
    name: str,
    actions: Actions,
    claimed: Sequence[tuple[JointCheck, Claim]],
    use: NDArray[np.float64],
) -> list[_Bond]:
    """The bonds that a combination uses; one with moving axles has several rows, of which the hardest counts.

    ``use``: what part of its resistance each claim uses in every row.
    """
    rows = [i for i, k in enumerate(actions.strength) if actions.names[k] == name]
    if not rows or actions.shear is None or actions.staying_shear is None:
        return []
    claims = [claim for _, claim in claimed]
    used = use[:, rows]
    known = ~np.isnan(used).all(axis=1)
    hardest = np.where(np.isnan(used), -1.0, used).argmax(axis=1)
    row = np.array(rows)[hardest]
    joint = np.arange(len(claims))
    at = np.array([claim.at for claim in claims])[joint, row]
    whole = _shear(actions.shear, at)[row, joint]
    stays = _shear(actions.staying_shear, at)[rows].max(axis=0)
    share = np.divide(stays, whole, out=np.zeros_like(stays), where=whole > 0)
    found = []
    for i in np.flatnonzero(known).tolist():
        owner = claims[i].strength.owner
        adhesive = document.adhesives[owner]
        assert isinstance(adhesive, documents.Adhesive)
        most = float(used[i, hardest[i]])
        found.append(_Bond(claimed[i][0], owner, adhesive, most, float(at[i]), float(share[i])))
    return found


def _own_claim(joint: JointCheck) -> Claim | None:
    """What is asked of a joint's adhesive, not of the surfaces beside it."""
    bond = joint.site.spec.adhesive
    return next((c for c in joint.claims if bond is not None and c.strength.owner == bond and c.symbol == "tau"), None)


def _judge(
    combination: documents.Combination, bond: _Bond, where: str, book: Working, findings: Findings, found: MemberEnds
) -> list[dict[str, object]]:
    """Load that repeats, and load that stays where the adhesive's creep limit is known."""

    def use(part: float) -> float:
        return part * bond.used

    adhesive, name, share = bond.adhesive, bond.name, bond.share
    each = [lasting.repeated(combination.fatigue, adhesive, name, use, book, findings, where)]
    if share > 0 and adhesive.creep_limit is not None:
        each.append(lasting.sustained(share, adhesive, name, use, book, findings, where))
    kept = [one for one in each if one is not None]
    found.governs += [Governs(one.utilisation, f"{one.line}, {where}", bond.at) for one in kept]
    return [one.result for one in kept]


def _shear(curve: Curve, at: NDArray[np.float64]) -> NDArray[np.float64]:
    """The larger shear on both sides of some places, a row a combination [N]."""
    places = np.clip(at, curve.breaks[0], curve.breaks[-1])
    sides = [np.abs(evaluate(curve.breaks, curve.coefficients, places, side)) for side in SIDES]
    return np.maximum(*sides)
