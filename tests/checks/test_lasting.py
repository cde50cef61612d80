"""Load that stays and load that repeats on a member's bonds; needs.md, demo 4 (impact is not counted twice)."""

from __future__ import annotations

import copy

import pytest

from server import checks, documents
from server.errors import DocumentError
from tests.checks.made import BOX, STACK, changed


def run(**changes):
    return checks.run(documents.read(changed(STACK, **changes)))


LINE = {"intercept": 1.71, "slope": 0.12, "cycles": 1e7}  # needs.md, rule 36: a published lap fit


def used(result):
    joint = result["joints"][0]
    return next(limit["utilisation"] for limit in joint["limits"] if limit["what"] == "adhesive glue")


def test_repeated_load_stands_against_the_share_borne_with_the_impact_taken_off():
    combination = {"all": {"factors": {"live": 1.0}, "fatigue": {"cycles": 2e6, "impact": 2.0}}}
    result = run(combinations=combination, adhesives__glue__fatigue=LINE)
    block = result["lasting"][0]
    share = 1.71 * 2e6**-0.12
    assert block["utilisation"] == pytest.approx(used(result) / 2.0 / share)
    assert block["impact_left_out"] == 2.0
    twice = run(
        combinations={"all": {"factors": {"live": 1.0}, "fatigue": {"cycles": 2e6}}}, adhesives__glue__fatigue=LINE
    )
    assert twice["lasting"][0]["utilisation"] == pytest.approx(2 * block["utilisation"])


def test_fatigue_can_govern_and_is_printed():
    combination = {"all": {"factors": {"live": 6.0}, "fatigue": {"cycles": 1e7, "factor": 2.5}}}
    result = run(combinations=combination, adhesives__glue__fatigue={"share": 0.25, "cycles": 1e7})
    assert result["verdict"] == "fail"
    assert "repeated load" in result["governing"]
    assert result["lasting"][0]["utilisation"] == pytest.approx(used(result) * 2.5 / 0.25)
    assert any(step["title"].startswith("Repeated load") for step in result["steps"])


def test_blocks_of_load_add_up_their_damage():
    blocks = [{"cycles": 1e4, "range": 1.0}, {"cycles": 1e6, "range": 0.5}]
    combination = {"all": {"factors": {"live": 4.0}, "fatigue": {"blocks": blocks}}}
    result = run(combinations=combination, adhesives__glue__fatigue=LINE)
    own = used(result)
    lives = [min((1.71 / (own * r)) ** (1 / 0.12), 1e7) for r in (1.0, 0.5)]
    assert result["lasting"][0]["utilisation"] == pytest.approx(1e4 / lives[0] + 1e6 / lives[1])


def test_a_fatigue_strength_that_is_missing_is_named():
    result = run(combinations={"all": {"factors": {"live": 1.0}, "fatigue": {"cycles": 2e6}}})
    assert result["verdict"] == "not proven"
    assert any("ISO 9664" in each for each in result["missing"])


def test_what_stays_stands_against_the_creep_limit():
    loads = {
        "own": [{"kind": "line", "from": 0, "to": 3000, "value": 0.4}],
        "live": [{"kind": "line", "from": 0, "to": 3000, "value": 0.8}],
    }
    combination = {"all": {"factors": {"own": 1.0, "live": 1.5}, "sustained": {"own": 1.0, "live": 0.3}}}
    judged = run(loads=loads, combinations=combination, adhesives__glue__creep_limit=0.3)
    share = (0.4 + 0.3 * 0.8) / (0.4 + 1.5 * 0.8)
    block = judged["lasting"][0]
    assert block["share"] == pytest.approx(share)
    assert block["utilisation"] == pytest.approx(share * used(judged) / 0.3)
    unjudged = run(loads=loads, combinations=combination)
    assert unjudged["lasting"] == []
    assert any(c["about"] == "creep" and c["answer"] for c in unjudged["cautions"])


def test_joints_of_one_adhesive_ask_for_one_answer_about_creep():
    box = {**copy.deepcopy(BOX), "adhesives": {"resin": {"shear_strength": 6}}}
    case = next(iter(box["loads"]))
    box["combinations"] = {
        name: {"factors": {case: 1.0}, "sustained": {case: share}} for name, share in (("a", 0.3), ("b", 0.5))
    }
    cautions = [c for c in checks.run(documents.read(box))["cautions"] if c["about"] == "creep"]
    assert [c["answer"] for c in cautions] == [True]
    assert all("/".join(joint["between"]) in cautions[0]["text"] for joint in box["section"]["joints"])
    assert "up to 50 %" in cautions[0]["text"]


def test_without_any_of_it_nothing_is_said():
    result = run()
    assert result["lasting"] == []
    assert not any(c["about"] == "creep" for c in result["cautions"])


@pytest.mark.parametrize(
    "fatigue", [{}, {"cycles": 10, "blocks": [{"cycles": 5}]}, {"cycles": 0.5}, {"cycles": 10, "impact": 0.5}]
)
def test_half_a_statement_is_refused(fatigue):
    with pytest.raises(DocumentError) as caught:
        run(combinations={"all": {"factors": {"live": 1.0}, "fatigue": fatigue}})
    assert all("fatigue" in fault.path for fault in caught.value.faults)


@pytest.mark.parametrize(
    "line", [{"cycles": 10}, {"intercept": 1.0, "cycles": 10}, {"share": 0.3}, LINE | {"share": 0.2}]
)
def test_half_a_line_is_refused(line):
    with pytest.raises(DocumentError) as caught:
        run(adhesives__glue__fatigue=line)
    assert all("adhesives.glue.fatigue" in fault.path for fault in caught.value.faults)


def test_every_number_of_it_stands_in_a_table_of_the_sheet():
    from server import sheets
    from server.web.panel import panel

    loads = {name: [{"kind": "line", "from": 0, "to": 3000, "value": 0.4}] for name in ("own", "live")}
    blocks = [{"cycles": 1e4, "range": 1.0}, {"cycles": 1e6, "range": 0.5}]
    combinations = {
        "crowd": {"factors": {"own": 1, "live": 1}, "sustained": {"own": 1}, "fatigue": {"cycles": 2e6, "impact": 2}},
        "traffic": {"factors": {"live": 4.0}, "fatigue": {"blocks": blocks}},
    }
    glue = {"adhesives__glue__fatigue": LINE, "adhesives__glue__creep_limit": 0.3}
    result = run(loads=loads, combinations=combinations, **glue)
    (part,) = [parts for title, parts in panel(result, "SI").blocks if title == sheets.LASTING]
    stays, repeats = [each["rows"] for each in part if each["kind"] == "table"]
    assert stays[0][0] == "joint lower/upper, combination crowd: adhesive glue"
    assert stays[0][1] == "50 %"
    assert stays[0][3] == "30 %"
    sustained = next(each for each in result["lasting"] if "creep_limit" in each)
    assert stays[0][4] == f"{sustained['utilisation']:.2f}"
    damage = next(each for each in result["lasting"] if len(each.get("cycles", ())) == 2)
    parts_of_it = [float(row[5]) for row in repeats[1:3]]
    assert sum(parts_of_it) == pytest.approx(damage["utilisation"], abs=0.011)
    assert repeats[3][5] == f"{damage['utilisation']:.2f}"
    assert "without the dynamic factor of 2" in sheets.terminal(result)
