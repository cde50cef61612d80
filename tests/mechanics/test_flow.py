"""Joint flow in the layouts that shops build: which joints a cut or symmetry settles, with what share, and why not."""

from __future__ import annotations

import time
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.contacts import contacts
from server.mechanics.flow import JointFlow, JointLine, joint_flows, tied
from server.mechanics.section import Piece, properties, rectangle


def joints_of(pieces, leave_out=(), keys=None, gap=0.05):
    """A joint on every contact but those between the named pairs."""
    found = contacts([piece.rings for piece in pieces], np.full((len(pieces),) * 2, gap))
    named = [(c, frozenset((pieces[c.first].name, pieces[c.second].name))) for c in found]
    return [
        JointLine(c.first, c.second, c.start, c.end, (keys or {}).get(pair, "glue"))
        for c, pair in named
        if pair not in {frozenset(pair) for pair in leave_out}
    ]


def flows(pieces, **how) -> dict[str, JointFlow]:
    """By joint, named as first/second, "#2" and so on for further ones of the pair."""
    joints = joints_of(pieces, **how)
    result = {}
    for joint, flow in zip(joints, joint_flows(pieces, properties(pieces), joints), strict=True):
        name = f"{pieces[joint.first].name}/{pieces[joint.second].name}"
        count = sum(other.split("#")[0] == name for other in result)
        result[f"{name}#{count + 1}" if count else name] = flow
    return result


def piece(name, width, depth, at, E=1.0, G=None):
    return Piece(name, rectangle(width, depth, at), E, G)


def first_moment(pieces, names):
    """E-weighted first moment of the named pieces, by the textbook sum."""
    area = [np.prod(np.ptp(p.outline, axis=0)) for p in pieces]
    up = [p.outline[:, 1].min() + np.ptp(p.outline[:, 1]) / 2 for p in pieces]
    axis = sum(p.E * a * u for p, a, u in zip(pieces, area, up, strict=True)) / sum(
        p.E * a for p, a in zip(pieces, area, strict=True)
    )
    return sum(p.E * a * (u - axis) for p, a, u in zip(pieces, area, up, strict=True) if p.name in names)


def box(**changes):
    """Flanges between two webs; changes by piece name."""
    pieces = [
        piece("bottom", 90, 70, (12.5, 0), 11000.0, 690.0),
        piece("top", 90, 70, (12.5, 330), 11000.0, 690.0),
        piece("left", 12.5, 400, (0, 0), 6500.0, 600.0),
        piece("right", 12.5, 400, (102.5, 0), 6500.0, 600.0),
    ]
    return [replace(p, **changes.get(p.name, {})) for p in pieces]


BOX_JOINTS = {"bottom/left", "bottom/right", "top/left", "top/right"}


def test_a_box_beam_shares_each_flange_between_its_webs():
    found = flows(box())
    assert set(found) == BOX_JOINTS
    for name, flow in found.items():
        flange = name.split("/")[0]
        expected = first_moment(box(), {flange})
        assert flow.split == "symmetry"
        assert flow.first_moment == pytest.approx(expected, rel=1e-12)
        assert flow.first_moment_other_side == pytest.approx(-expected, rel=1e-12)
        assert flow.share == pytest.approx(expected / 2, rel=1e-12)
        assert len(flow.partners) == 2
        assert "vertical axis" in flow.reason
        assert f"share the flow of {flange} equally" in flow.reason


def test_a_box_with_unlike_flanges_is_still_settled():
    found = flows(box(top={"outline": rectangle(90, 45, (12.5, 355)), "E": 13000.0}))
    pieces = box(top={"outline": rectangle(90, 45, (12.5, 355)), "E": 13000.0})
    for name, flow in found.items():
        assert flow.share == pytest.approx(first_moment(pieces, {name.split("/")[0]}) / 2, rel=1e-12)


@pytest.mark.parametrize(
    "change",
    [
        {"right": {"E": 6600.0}},
        {"right": {"G": 640.0}},
        {"right": {"G": None}},
        {"right": {"outline": rectangle(15.0, 400, (102.5, 0))}},
        {"left": {"outline": rectangle(12.5, 399.0, (0, 0))}},
    ],
)
def test_a_box_whose_webs_differ_is_not_settled_and_says_which(change):
    for flow in flows(box(**change)).values():
        assert flow.split is None
        assert (flow.share, flow.first_moment, flow.cut_off, flow.partners) == (None, None, (), ())
        assert "form a ring that no single cut opens" in flow.reason
        assert "left and right have no mirror image" in flow.reason or "left" in flow.reason.split("vertical axis")[1]


def test_a_box_whose_joints_differ_is_not_settled_and_says_which():
    found = flows(box(), keys={frozenset(("top", "right")): "half as wide"})
    assert {flow.split for flow in found.values()} == {None}
    reason = found["top/left"].reason
    assert "about the vertical axis the joints top/left and top/right have no mirror image" in reason


def test_a_box_with_one_joint_left_out_is_cut_clean_all_round():
    found = flows(box(), leave_out=[("top", "right")])
    assert {flow.split for flow in found.values()} == {"cut"}
    assert found["top/left"].share == pytest.approx(first_moment(box(), {"top"}), rel=1e-12)
    assert found["bottom/left"].share == pytest.approx(first_moment(box(), {"bottom", "right"}), rel=1e-12)


def test_three_webs_with_equal_outer_ones_leave_the_middle_open():
    pieces = [
        piece("bottom", 200, 40, (0, 0)),
        piece("web a", 20, 200, (0, 40), 2.0),
        piece("web b", 20, 200, (90, 40), 3.0),
        piece("web c", 20, 200, (180, 40), 2.0),
        piece("top", 200, 40, (0, 240)),
    ]
    found = flows(pieces)
    assert {flow.split for flow in found.values()} == {None}
    assert "makes some flows alike, but leaves open how they divide here" in found["bottom/web a"].reason
    without = [p for p in pieces if p.name != "web b"]
    assert {flow.split for flow in flows(without).values()} == {"symmetry"}


def test_a_middle_web_glued_below_only_is_a_clean_cut_and_leaves_the_ring_settled():
    pieces = [
        piece("bottom", 200, 40, (0, 0)),
        piece("web a", 20, 200, (0, 40), 2.0),
        piece("stub", 20, 100, (90, 40), 3.0),
        piece("web c", 20, 200, (180, 40), 2.0),
        piece("top", 200, 40, (0, 240)),
    ]
    found = flows(pieces)
    assert found["bottom/stub"].split == "cut"
    assert found["bottom/stub"].cut_off == (2,)
    assert found["web a/top"].share == pytest.approx(-first_moment(pieces, {"top"}) / 2, rel=1e-12)
    assert found["bottom/web a"].share == pytest.approx(first_moment(pieces, {"bottom", "stub"}) / 2, rel=1e-12)


def test_side_lamellas_on_a_box_are_clean_cuts():
    pieces = [*box(), piece("outer left", 20, 300, (-20, 50), 9000.0), piece("outer right", 20, 300, (115, 50), 9000.0)]
    found = flows(pieces)
    assert found["left/outer left"].split == found["right/outer right"].split == "cut"
    assert found["left/outer left"].cut_off == (4,)
    assert found["top/left"].split == "symmetry"
    assert found["top/left"].share == pytest.approx(first_moment(pieces, {"top"}) / 2, rel=1e-12)


def test_an_i_beam_with_halved_flanges_is_cut_clean():
    pieces = [
        piece("web", 20, 200, (50, 0)),
        *(
            piece(f"{up} {side}", 50, 30, (x, u))
            for up, u in (("low", 0), ("high", 170))
            for side, x in (("l", 0), ("r", 70))
        ),
    ]
    found = flows(pieces)
    assert {flow.split for flow in found.values()} == {"cut"}
    for flow in found.values():
        assert abs(flow.share) == pytest.approx(50 * 30 * 85.0)
        assert len(flow.cut_off) == 1


def test_twin_webs_glued_back_to_back_carry_nothing_between_them():
    pieces = [
        piece("left", 20, 200, (0, 30), 3.0),
        piece("right", 20, 200, (20, 30), 3.0),
        piece("top", 60, 30, (-10, 230)),
        piece("bottom", 60, 40, (-10, -10), 2.0),
    ]
    found = flows(pieces)
    middle = found["left/right"]
    assert (middle.split, middle.share, middle.first_moment, middle.cut_off) == ("symmetry", 0.0, 0.0, ())
    assert "carries nothing" in middle.reason
    assert found["left/top"].share == pytest.approx(-first_moment(pieces, {"top"}) / 2, rel=1e-12)
    assert {flow.split for flow in found.values()} == {"symmetry"}


def test_twin_halves_side_by_side_are_a_cut_that_carries_nothing():
    found = flows([piece("left", 20, 100, (0, 0)), piece("right", 20, 100, (20, 0))])
    assert found["left/right"].split == "cut"
    assert found["left/right"].share == 0.0


def test_a_joint_on_the_neutral_axis_between_mirror_images_carries_the_most():
    pieces = [piece("lower", 50, 100, (0, 0)), piece("upper", 50, 100, (0, 100))]
    assert flows(pieces)["lower/upper"].share == pytest.approx(-50 * 100 * 50.0)


def test_symmetry_about_the_horizontal_axis_reverses_the_flow():
    # Two unlike posts, each its own image about the horizontal axis: the joint from post to post crosses the axis and
    # carries nothing; how a chord divides between unlike posts stays open.
    pieces = [
        piece("post a", 30, 200, (0, 0), 2.0),
        piece("post b", 40, 200, (30, 0), 3.0),
        piece("top", 70, 20, (0, 200)),
        piece("bottom", 70, 20, (0, -20)),
    ]
    found = flows(pieces)
    assert (found["post a/post b"].split, found["post a/post b"].share) == ("symmetry", 0.0)
    assert "horizontal axis" in found["post a/post b"].reason
    assert found["post a/top"].split is None


def test_a_pinwheel_box_is_settled_by_half_a_turn():
    pieces = [
        piece("bottom", 90, 10, (10, 0)),
        piece("right", 10, 90, (90, 10)),
        piece("top", 90, 10, (0, 90)),
        piece("left", 10, 90, (0, 0)),
    ]
    found = flows(pieces)
    assert len(found) == 4
    assert {flow.split for flow in found.values()} == {"symmetry"}
    assert all("Half a turn" in flow.reason for flow in found.values())
    assert abs(found["right/top"].share) == pytest.approx(first_moment(pieces, {"top", "left"}) / 2, rel=1e-12)
    assert abs(found["top/left"].share) == pytest.approx(abs(first_moment(pieces, {"top", "right"})) / 2, rel=1e-12)


def test_a_pair_joined_along_two_lines_is_a_ring_of_two():
    fork = Piece("fork", np.array([(0, 0), (60, 0), (60, 50), (50, 50), (50, 10), (20, 10), (20, 50), (0, 50.0)]), 1.0)
    found = flows([fork, piece("lid", 60, 10, (0, 50))])
    assert {flow.split for flow in found.values()} == {None}
    assert "joined along more than one line" in found["fork/lid"].reason
    even = Piece("fork", np.array([(0, 0), (60, 0), (60, 50), (50, 50), (50, 10), (10, 10), (10, 50), (0, 50.0)]), 1.0)
    settled = flows([even, piece("lid", 60, 10, (0, 50))])
    assert settled["fork/lid"].share == settled["fork/lid#2"].share
    assert {flow.split for flow in settled.values()} == {"symmetry"}


def test_pieces_that_touch_without_a_joint_carry_nothing_between_them():
    pieces = [piece("base", 60, 20, (0, 0)), piece("a", 30, 100, (0, 20)), piece("b", 30, 100, (30, 20))]
    assert {flow.split for flow in flows(pieces).values()} == {"symmetry"}  # with a/b glued the three are a ring
    loose = flows(pieces, leave_out=[("a", "b")])
    assert {flow.split for flow in loose.values()} == {"cut"}
    assert loose["base/a"].share == pytest.approx(-first_moment(pieces, {"a"}), rel=1e-12)


@given(
    st.lists(st.tuples(st.floats(5, 60), st.floats(20, 200), st.floats(500, 200_000)), min_size=2, max_size=7),
)
@settings(max_examples=40)
def test_a_stack_is_cut_between_all_its_layers(layers):
    pieces, up = [], 0.0
    for number, (depth, width, E) in enumerate(layers):
        pieces.append(piece(f"{number}", width, depth, (-width / 2, up), E))
        up += depth
    found = flows(pieces)
    scale = max(abs(properties(pieces).first_moments))
    assert len(found) == len(layers) - 1
    for number, flow in enumerate(found.values()):
        below = {f"{k}" for k in range(number + 1)}
        assert flow.split == "cut"
        assert flow.share == pytest.approx(first_moment(pieces, below), rel=1e-9, abs=1e-9 * scale)
        assert flow.share <= 1e-9 * scale  # all that lies below an inner joint pulls one way


@pytest.mark.parametrize("flip", [(-1, 1), (1, -1), (-1, -1)])
def test_a_mirrored_section_has_mirrored_flows(flip):
    pieces = [*box(), piece("strip", 60, 8, (20, 400), 205_000.0), piece("side", 20, 100, (115, 0), 9000.0)]
    there = [replace(p, outline=p.outline * flip) for p in pieces]
    before, after = flows(pieces), flows(there)
    for name, flow in before.items():
        assert after[name].split == flow.split
        if flow.share is not None:
            assert after[name].share == pytest.approx(flip[1] * flow.share, rel=1e-12)


@given(st.tuples(st.floats(-1e4, 1e4), st.floats(-1e4, 1e4)), st.floats(0.1, 10.0))
@settings(max_examples=20)
def test_moving_and_scaling_change_nothing_but_the_scale(shift, k):
    there = [replace(p, outline=(p.outline + shift) * k) for p in box()]
    for name, flow in flows(box()).items():
        assert flows(there, gap=0.05 * k)[name].share == pytest.approx(flow.share * k**3, rel=1e-7)


@given(st.floats(5.0, 65.0))
@settings(max_examples=20)
def test_splitting_a_flange_into_two_glued_layers_adds_a_joint_and_keeps_the_section(height):
    whole = box()
    section = properties(whole)
    split = [
        replace(whole[1], name="low", outline=rectangle(90, height, (12.5, 330))),
        replace(whole[1], name="high", outline=rectangle(90, 70 - height, (12.5, 330 + height))),
        *(p for p in whole if p.name != "top"),
    ]
    found = flows(split)
    found_EI = properties(split).EI
    assert found_EI == pytest.approx(section.EI, rel=1e-12)
    # both layers touch both webs: how the flange's flow divides over them is open, the other flange is as it was
    assert found["low/left"].split is None
    assert found["bottom/left"].share == pytest.approx(flows(whole)["bottom/left"].share, rel=1e-12)
    on_top = [
        replace(whole[1], outline=rectangle(90, height, (12.5, 330))),
        replace(whole[1], name="cap", outline=rectangle(115, 20, (0, 400))),
        *(p for p in whole if p.name != "top"),
    ]
    assert {flow.split for flow in flows(on_top, leave_out=[("cap", "left")]).values()} == {"cut", None}


@given(st.integers(1, 11), st.booleans())
@settings(max_examples=20)
def test_splitting_a_web_across_into_two_glued_ones_changes_no_other_flow(cut, lower):
    pieces = [
        piece("web", 40, 200, (0, 0)),
        piece("flange", 120, 30, (-40, 200), 2.0),
        piece("foot", 80, 25, (-20, -25)),
    ]
    height = 200 * cut / 12
    split = [
        piece("web low", 40, height, (0, 0)),
        piece("web high", 40, 200 - height, (0, height)),
        *pieces[1:],
    ]
    before, after = flows(pieces), flows(split)
    assert abs(after["web high/flange"].share) == pytest.approx(abs(before["web/flange"].share), rel=1e-12)
    assert abs(after["web low/foot"].share) == pytest.approx(abs(before["web/foot"].share), rel=1e-12)


def test_order_and_direction_of_joints_change_only_the_sign():
    pieces = box()
    joints = joints_of(pieces)
    plain = joint_flows(pieces, properties(pieces), joints)
    turned = [JointLine(j.second, j.first, j.end, j.start, j.key) for j in joints[::-1]]
    for one, other in zip(plain, joint_flows(pieces, properties(pieces), turned)[::-1], strict=True):
        assert other.share == pytest.approx(-one.share, rel=1e-12)
        assert other.cut_off == one.cut_off


def test_extra_corners_in_straight_sides_do_not_spoil_symmetry():
    outline = np.array([(0, 0), (12.5, 0), (12.5, 70), (12.5, 400), (0, 400), (0, 200.0)])
    assert {flow.split for flow in flows(box(left={"outline": outline})).values()} == {"symmetry"}


def test_untied_pieces_are_refused_by_name():
    pieces = [*box(), piece("shelf", 50, 20, (30, 150))]
    with pytest.raises(InputError, match="No chain of joints ties shelf to bottom"):
        joint_flows(pieces, properties(pieces), joints_of(pieces))
    assert tied(5, joints_of(pieces)) == [4]
    assert tied(4, joints_of(box())) == []


@pytest.mark.parametrize(("first", "second"), [(0, 4), (-1, 2), (1, 1)])
def test_a_joint_of_pieces_that_are_not_there_is_refused(first, second):
    line = JointLine(first, second, np.zeros(2), np.ones(2))
    with pytest.raises(InputError, match="Joint 5 joins"):
        joint_flows(box(), properties(box()), [*joints_of(box()), line])


def test_two_hundred_pieces_take_a_fraction_of_a_second():
    started = time.perf_counter()
    pieces = [piece(f"{k}", 10, 10, (10 * (k % 20), 10 * (k // 20))) for k in range(200)]
    found = flows(pieces)
    assert len(found) == 370
    stack = [piece(f"{k}", 10, 1, (0, k)) for k in range(200)]
    assert {flow.split for flow in flows(stack).values()} == {"cut"}
    assert time.perf_counter() - started < 5.0  # 0.5 s on a quiet machine
