"""The chart of individuals and moving ranges against printed examples, and what must hold for any numbers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import InputError
from server.mechanics.control_chart import D2, D4, RUN, control_chart

results = st.lists(st.floats(0.1, 100).map(lambda x: round(x, 3)), min_size=2, max_size=40)


# NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.2, ten batches (data from memory; the four results were seen
# quoted elsewhere and come out of these data to every printed digit).
def test_the_handbook_example_of_ten_batches() -> None:
    chart = control_chart([49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1])
    found = (chart.centre, chart.mean_range, chart.upper, chart.lower)
    assert found == pytest.approx((50.81, 1.8778, 55.8041, 45.8159), abs=5e-5)
    assert chart.signals == ()


# ISO 8258:1991 (now ISO 7870-2), moisture of ten lots of milk powder, from memory: the standard rounds the mean range
# to 0.38 before it goes on, so the limits agree to its two decimals only within that rounding.
def test_the_standards_example_of_ten_lots() -> None:
    chart = control_chart([2.9, 3.2, 3.6, 4.3, 3.8, 3.5, 3.0, 3.1, 3.6, 3.5])
    assert (chart.centre, round(chart.mean_range, 2)) == (pytest.approx(3.45), 0.38)
    assert (chart.upper, chart.lower) == pytest.approx((4.46, 2.44), abs=0.011)
    assert chart.range_upper == pytest.approx(1.24, abs=0.007)


def test_the_factors_are_those_of_the_range_of_two_normal_values() -> None:
    # d2 = 2/sqrt(pi) and d3 = sqrt(2 - 4/pi) follow from the half-normal distribution of |x1 - x2|.
    d2, d3 = 2 / np.sqrt(np.pi), np.sqrt(2 - 4 / np.pi)
    assert pytest.approx(d2, abs=5e-4) == D2
    assert pytest.approx(1 + 3 * d3 / d2, abs=5e-4) == D4


def test_a_result_beyond_the_limits_and_the_jump_to_it_are_told() -> None:
    chart = control_chart([5.0, 5.1, 4.9, 5.0, 5.1, 4.9, 5.0, 5.1, 3.0, 5.0, 5.1, 4.9])
    told = {(signal.rule, signal.points) for signal in chart.signals}
    assert ("beyond a limit", (8,)) in told
    assert ("range beyond its limit", (7, 8)) in told


def test_seven_on_one_side_are_a_run_and_six_are_none() -> None:
    low, high = [4.9, 4.8] * 5, [5.1, 5.2] * 5
    for count, told in ((RUN, True), (RUN - 1, False)):
        values = [*low[:count], *high[:count]]
        found = [signal.points for signal in control_chart(values).signals if signal.rule == "run on one side"]
        assert (tuple(range(count)) in found) is told


def test_seven_falling_are_a_trend_and_six_are_none() -> None:
    for count, told in ((RUN, True), (RUN - 1, False)):
        values = [5.0, 5.3, *(5.2 - 0.05 * i for i in range(count - 1)), 5.2]
        assert any(signal.rule == "trend" for signal in control_chart(values).signals) is told


@given(results)
@settings(max_examples=40)
def test_a_reversed_run_has_the_same_limits_and_as_many_signals(values: list[float]) -> None:
    there, back = control_chart(values), control_chart(values[::-1])
    assert (back.centre, back.lower, back.upper) == pytest.approx((there.centre, there.lower, there.upper))
    assert len(back.signals) == len(there.signals)


@given(results, st.floats(0.01, 100))
@settings(max_examples=40)
def test_another_unit_changes_the_numbers_and_no_signal(values: list[float], factor: float) -> None:
    factor = 2.0 ** round(np.log2(factor))  # exact in floats, so that no point on a limit changes sides
    there, scaled = control_chart(values), control_chart([factor * value for value in values])
    assert scaled.upper == pytest.approx(factor * there.upper)
    assert scaled.signals == there.signals


@given(results)
@settings(max_examples=40)
def test_the_limits_lie_even_about_the_mean(values: list[float]) -> None:
    chart = control_chart(values)
    assert chart.lower <= chart.centre <= chart.upper
    assert chart.upper - chart.centre == pytest.approx(chart.centre - chart.lower)
    assert chart.centre == pytest.approx(float(np.mean(values)))


def test_alike_results_have_no_signal() -> None:
    for value in (5.0, 0.1, 0.3, 1e-7):  # a mean of alike floats may be off in its last digit
        chart = control_chart([value] * 13)
        assert (chart.lower, chart.centre, chart.upper) == pytest.approx((value, value, value))
        assert chart.signals == ()


@pytest.mark.parametrize("values", [[], [5.0], [5.0, float("nan")], [5.0, float("inf")], [[1.0, 2.0]]])
def test_what_cannot_be_charted_is_refused(values: list[float]) -> None:
    with pytest.raises(InputError, match="result"):
        control_chart(values)
