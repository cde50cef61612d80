"""Load that stays and load that repeats on a member's bonds.

A combination says how its load repeats (``fatigue``) and what of it stays (``sustained``); an adhesive says what share
of its resistance it bears for so many cycles (``fatigue``), and for ever (``creep_limit``).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import lasting
from server.checks.actions import Actions
from server.checks.curves import Curve
from server.checks.joints import JointCheck
from server.checks.member_ends import Governs, MemberEnds
from server.checks.resistance import Findings, Weighed
from server.mechanics.piecewise import both_sides
from server.working import Working


class _Bond(NamedTuple):
    """A glued joint where one combination uses its adhesive most: what part of its resistance, and at what place.

    ``share`` is the shear that stays over the shear that governs there.
    """

    combination: str
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
    for bond in _bonds(document, actions, joints):
        unjudged += [bond] if bond.share > 0 and bond.adhesive.creep_limit is None else []
        told += _judge(document.combinations[bond.combination], bond, book, findings, found)
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


def _bonds(document: documents.MemberDocument, actions: Actions, joints: Sequence[JointCheck]) -> list[_Bond]:
    """Every bond under every combination that says how its load repeats or stays; all places are worked out at once.

    A combination with moving axles has several rows, of which the hardest counts.
    """
    if actions.shear is None:
        return []
    claimed = [(joint, own) for joint in joints if (own := _own_limit(joint)) is not None]
    rows_of: dict[str, list[int]] = {}
    for row, name in enumerate(actions.strength_names):
        combination = document.combinations[name]
        if combination.fatigue or any(combination.sustained.values()):
            rows_of.setdefault(name, []).append(row)
    hardest = []
    for name, rows in rows_of.items():
        for joint, own in claimed:
            row = max(rows, key=own.used.__getitem__)
            if own.used[row] >= 0:
                hardest.append((name, rows, row, joint, own))
    places = [own.claim.at.item(row) for _, _, row, _, own in hardest]
    whole, stays = _shear(actions, actions.shear, np.array(places))
    found = []
    for i, (name, rows, row, joint, own) in enumerate(hardest):
        owner = own.claim.strength.owner
        adhesive = document.adhesives[owner]
        assert isinstance(adhesive, documents.Adhesive)
        share = max(stays[i][each] for each in rows) / whole[i][row] if whole[i][row] > 0 else 0.0
        found.append(_Bond(name, joint, owner, adhesive, own.used[row], places[i], share))
    return found


def _own_limit(joint: JointCheck) -> Weighed | None:
    """What is asked of a joint's adhesive, not of the surfaces beside it; None where it could not be weighed."""
    bond = joint.site.spec.adhesive
    own = (
        weighed
        for claim, weighed in zip(joint.claims, joint.weighed, strict=True)
        if bond is not None and claim.strength.owner == bond and claim.symbol == "tau"
    )
    return next(own, None)


def _judge(
    combination: documents.Combination, bond: _Bond, book: Working, findings: Findings, found: MemberEnds
) -> list[dict[str, object]]:
    """Load that repeats, and load that stays where the adhesive's creep limit is known."""
    adhesive, name, share = bond.adhesive, bond.name, bond.share

    def use(part: float) -> float:
        return part * bond.used

    where = f"joint {bond.joint.site.id}, combination {bond.combination}"
    each = [lasting.repeated(combination.fatigue, adhesive, name, use, book, findings, where)]
    if share > 0 and adhesive.creep_limit is not None:
        each.append(lasting.sustained(share, adhesive, name, use, book, findings, where))
    kept = [one for one in each if one is not None]
    found.governs += [Governs(one.utilisation, f"{one.line}, {where}", bond.at) for one in kept]
    return [one.result for one in kept]


def _shear(actions: Actions, curve: Curve, at: NDArray[np.float64]) -> tuple[list[list[float]], list[list[float]]]:
    """The larger shear on both sides of every place, whole and what stays of it, one value a combination [N].

    What stays is a share of each case, before the combination's own factors.
    """
    whole = both_sides(curve.breaks, curve.coefficients, at).swapaxes(0, 1)
    cases = both_sides(actions.each_case.breaks, actions.each_case.shear, at).swapaxes(0, 1)
    stays = actions.sustained[list(actions.strength)] @ cases  # (sides, combinations, places)
    return _larger(whole), _larger(stays)


def _larger(sides: NDArray[np.float64]) -> list[list[float]]:
    found: list[list[float]] = np.abs(sides).max(axis=0).T.tolist()
    return found
