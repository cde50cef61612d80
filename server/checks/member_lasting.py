"""Load that stays and load that repeats on a member's bonds.

A combination says how its load repeats (``fatigue``) and what of it stays (``sustained``); an adhesive says what share
of its resistance it bears for so many cycles (``fatigue``), and for ever (``creep_limit``).
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import lasting
from server.checks.actions import Actions, Curve, act
from server.checks.crosssection import Body
from server.checks.joints import JointCheck
from server.checks.member_ends import Governs, MemberEnds
from server.checks.resistance import Claim, Findings
from server.checks.strip_ends import resistances
from server.mechanics.piecewise import evaluate
from server.working import Working

Array = NDArray[np.float64]


def check_lasting(
    document: documents.MemberDocument,
    body: Body,
    actions: Actions,
    joints: Sequence[JointCheck],
    book: Working,
    findings: Findings,
    found: MemberEnds,
) -> list[dict[str, object]]:
    """Every bond under every combination that says how its load repeats or stays; what governs goes to ``found``."""
    told: list[dict[str, object]] = []
    lasting_actions: Actions | None = None
    for name, combination in document.combinations.items():
        if combination.for_ == "deflection" or not (combination.fatigue or any(combination.sustained.values())):
            continue
        rows = [i for i, k in enumerate(actions.strength) if actions.names[k] == name]
        if any(combination.sustained.values()) and lasting_actions is None:
            lasting_actions = act(_lasting_document(document), body)
        for joint in joints:
            told += _joint(document, name, combination, rows, (actions, lasting_actions), joint, book, findings, found)
    return told


def _joint(
    document: documents.MemberDocument,
    name: str,
    combination: documents.Combination,
    rows: Sequence[int],
    acting: tuple[Actions, Actions | None],
    joint: JointCheck,
    book: Working,
    findings: Findings,
    found: MemberEnds,
) -> list[dict[str, object]]:
    bond = joint.site.spec.adhesive
    own = next((c for c in joint.claims if bond is not None and c.strength.owner == bond and c.symbol == "tau"), None)
    if bond is None or own is None or not rows:
        return []
    adhesive = document.adhesives[bond]
    assert isinstance(adhesive, documents.Adhesive)
    used = (own.demand / resistances([own])[0])[list(rows)]
    if np.isnan(used).all():
        return []
    where = f"joint {joint.site.id}, combination {name}"
    row = rows[int(np.nanargmax(used))]
    whole, at = float(np.nanmax(used)), float(own.at[row])
    each = [lasting.repeated(combination.fatigue, adhesive, bond, lambda part: part * whole, book, findings, where)]
    actions, stays = acting
    share = 0.0 if stays is None else _stays(actions, stays, name, own, row)
    if share > 0 and adhesive.creep_limit is not None:
        each.append(lasting.sustained(share, adhesive, bond, lambda part: part * whole, book, findings, where))
    elif share > 0:
        findings.caution(
            "creep",
            f"{joint.site.id}: {share * 100:.3g} % of the governing load stays, and adhesive {bond!r} has no "
            "creep_limit: what it bears for ever was not judged. PVA, hot-melt and rubbery adhesives creep; have "
            "sustained-load tests made.",
            answer=True,
        )
    kept = [one for one in each if one is not None]
    found.governs += [Governs(one.utilisation, f"{one.line}, {where}", at) for one in kept]
    return [one.result for one in kept]


def _lasting_document(document: documents.MemberDocument) -> documents.MemberDocument:
    """The document with only what stays of every case, before the combination's own factor."""
    first = next(iter(document.loads))
    kept = {
        name: c.model_copy(update={"factors": dict(c.sustained) or {first: 0.0}})
        for name, c in document.combinations.items()
    }
    return document.model_copy(update={"combinations": kept})


def _stays(actions: Actions, lasting_actions: Actions, name: str, own: Claim, row: int) -> float:
    """The shear that stays over the governing shear, where the joint is used hardest."""
    if actions.shear is None or lasting_actions.shear is None:
        return 0.0
    at = float(own.at[row])
    whole = _shear(actions.shear, row, at)
    rows = [i for i, k in enumerate(lasting_actions.strength) if lasting_actions.names[k] == name]
    stays = max((_shear(lasting_actions.shear, i, at) for i in rows), default=0.0)
    return stays / whole if whole > 0 else 0.0


def _shear(curve: Curve, row: int, at: float) -> float:
    """The larger shear on both sides of a place [N]."""
    sides: tuple[Literal["left", "right"], ...] = ("left", "right")
    x = np.array([min(max(at, float(curve.breaks[0])), float(curve.breaks[-1]))])
    return max(
        abs(float(evaluate(curve.breaks, curve.coefficients[row : row + 1], x, side=side)[0, 0])) for side in sides
    )
