"""Flitches: what bolts hand over where planks or plate alone bear, judged; and what is not said, asked."""

from __future__ import annotations

import numpy as np
import pytest

from server import checks, documents
from server.errors import DocumentError
from server.mechanics.beam import LineLoad, Support
from server.mechanics.side_by_side import Tie, solve_side_by_side
from server.web import forms
from tests.checks.made import Raw, changed
from tests.checks.test_slip import flitch

PLANK, PLATE = 10000 * 50 * 200**3 / 12, 210000 * 6 * 200**3 / 12
BOLTS = np.arange(200.0, 4000, 400)


def run(**changes: object) -> Raw:
    return checks.run(documents.read(changed(flitch(), **changes)))


def handed(result: Raw, joint: int = 0) -> Raw:
    return next(own for own in result["joints"][joint]["limits"] if "side by side" in own["what"])


def by_hand(planks_bear: bool = True) -> tuple[np.ndarray, np.ndarray]:
    """Force of the bolts of one joint, and moments of a plank and of the plate, both planks as they are."""
    ties = [Tie(0, 1, x, 6000) for x in BOLTS] + [Tie(1, 2, x, 6000) for x in BOLTS]
    bears = (planks_bear, not planks_bear, planks_bear)
    supports = [Support(0, "pin"), Support(4000, "pin")]
    found = solve_side_by_side(4000, (PLANK, PLATE, PLANK), bears, supports, ties, [[LineLoad(0, 4000, 5, 5)]])
    return found.tie[: len(BOLTS), 0], found.moment[:, 1, :, 0].max(axis=1)


def by_hand_alone() -> tuple[float, float]:
    """Where the left plank alone bears: place and force of the bolt of the first joint that carries most."""
    ties = [Tie(0, 1, x, 6000) for x in BOLTS] + [Tie(1, 2, x, 6000) for x in BOLTS]
    supports = [Support(0, "pin"), Support(4000, "pin")]
    load = [[LineLoad(0, 4000, 5, 5)]]
    found = solve_side_by_side(4000, (PLANK, PLATE, PLANK), (True, False, False), supports, ties, load)
    force = np.abs(found.tie[: len(BOLTS), 0])
    return float(BOLTS[int((force > force.max() * (1 - 1e-6)).argmax())]), float(force.max())


@pytest.mark.parametrize(("bears_on", "planks"), [(["left", "right"], True), (["plate"], False)])
def test_bolts_pieces_and_deflection_are_judged_by_what_is_handed_over(bears_on: list[str], planks: bool) -> None:
    result = run(member__bears_on=bears_on, member__deflection_limit=200)
    force, moment = by_hand(planks)
    bolt = handed(result)
    assert bolt["demand"] == pytest.approx(np.abs(force).max(), rel=1e-6)
    assert bolt["resistance"] == pytest.approx(4000)
    assert bolt["at"] in (200, 3800)  # the bolt next to a support
    plank = next(piece for piece in result["pieces"] if piece["id"] == "left")
    bending = next(own for own in plank["limits"] if "side by side" in own["what"])
    assert bending["demand"] == pytest.approx(10000 * moment[0] * 100 / PLANK, rel=1e-6)
    share = PLANK / (2 * PLANK + PLATE)
    assert moment[0] / (share * 5 * 4000**2 / 8) == pytest.approx(1, abs=0.03)  # near its share at midspan
    sags = [each["deflection"] for each in result["deflection_limits"]]
    assert len(sags) == 2
    assert sags[1] > 1.01 * sags[0]
    text = next(each for each in result["cautions"] if each["about"] == "load sharing")
    assert " and ".join(bears_on) in text["text"]
    assert text.get("answer") is not True
    assert any(step["symbol"] == "F_h" for step in result["steps"])


def test_where_all_bear_nothing_is_handed_over() -> None:
    result = run(member__bears_on=["left", "plate", "right"])
    assert not any("side by side" in own["what"] for joint in result["joints"] for own in joint["limits"])
    assert any("nothing is handed over" in each["text"] for each in result["cautions"])


def test_what_bears_is_asked_before_issue_with_what_one_alone_would_ask_of_the_bolts() -> None:
    result = run(fasteners__bolt__shear_resistance=2000)
    asked = [each for each in result["cautions"] if each["about"] == "load sharing"]
    assert len(asked) == 2
    assert all(each["answer"] for each in asked)
    alone = by_hand_alone()
    assert (
        f"bore on left alone, the fastener at {alone[0]:g} mm would be used to {alone[1] / 1000:.3g}"
        in asked[0]["text"]
    )
    assert run(fasteners__bolt__shear_resistance=2000, member__bears_on=["plate"])["verdict"] == "fail"


def test_stiff_bolts_hand_the_share_over_at_once() -> None:
    """Rigid ties close by a support: together they hand over the plate's share of the reaction."""
    share = PLATE / (2 * PLANK + PLATE)
    raw = {f"section__joints__{i}__spacing": 100 for i in (0, 1)}
    result = run(**raw, fasteners__bolt__slip_modulus=1e7, member__bears_on=["left", "right"])
    assert 0.5 * share * 10000 / 2 < handed(result)["demand"] < 1.5 * share * 10000 / 2
    plate = next(piece for piece in result["pieces"] if piece["id"] == "plate")
    assert plate["stress_bottom"] == pytest.approx(210000 * 1e7 / (2 * PLANK + PLATE) * 100, rel=1e-9)


def test_names_and_lacks_are_told() -> None:
    with pytest.raises(DocumentError) as caught:
        run(member__bears_on=["midle"])
    assert caught.value.faults[0].path == "member.bears_on[0]"
    missing = run(fasteners__bolt__slip_modulus=..., analysis={"slip": False}, member__bears_on=["plate"])["missing"]
    assert any("slip modulus" in text and "side by side" in text for text in missing)
    moving = {"all": [{"kind": "moving", "axles": [[0, 5000]]}]}
    assert any("axles move" in text for text in run(loads=moving, member__bears_on=["plate"])["missing"])


def test_the_form_says_what_bears_and_reads_it_back() -> None:
    values = forms.write(changed(flitch(), member__bears_on=["left", "right"]))
    assert values["bears_on"] == "left, right"
    raw, faults = forms.read(values)
    assert not faults
    assert raw["member"]["bears_on"] == ["left", "right"]
