"""What the beam solver costs beside the bare solution of its own equations, and a typical member with its extremes.

    pytest tests/benchmarks/test_beam.py --benchmark-enable -s

Absolute times say nothing on another machine; the ratio is printed, and only the answers are asserted.
"""

from __future__ import annotations

import random
from statistics import median
from time import perf_counter

import numpy as np
import pytest
from scipy.linalg import solve_banded

from server.mechanics.beam import Beam, Couple, LineLoad, Load, PointLoad, Response, Stretch, Support, solve
from server.mechanics.beam_loads import lay_out
from server.mechanics.beam_system import BAND, assemble, sweep

SPANS, LOADS = 20, 200
FACTORS = np.array([[1.35, 1.5, 0.75], [1.0, 1.0, 1.0], [1.35, 1.0, 1.5]])


def long_member() -> tuple[Beam, list[list[Load]]]:
    """Return 20 spans with 200 loads in three cases."""
    number = random.Random(20)
    length = 3000.0 * SPANS
    supports = [Support(3000.0 * i, "pin") for i in range(SPANS + 1)]
    cases: list[list[Load]] = [[], [], []]
    for i in range(LOADS):
        start = number.uniform(0, length - 1)
        end = min(length, start + number.uniform(300, 3000))
        cases[i % 3].append(
            LineLoad(start, end, number.uniform(0, 5), number.uniform(0, 5))
            if i % 2
            else PointLoad(start, number.uniform(0, 5000))
        )
    return Beam(length, supports, [], [Stretch(0.0, length, 4.5e11, 5e6)]), cases


def typical_member() -> tuple[Beam, list[list[Load]]]:
    """Return a span with an overhang, five stretches, ten loads in three cases."""
    stretches = [Stretch(1000.0 * i, 1000.0 * (i + 1), 4.5e11 * (1 + 0.1 * i), 5e6) for i in range(5)]
    imposed = [LineLoad(0, 4000, 5, 5), LineLoad(1000, 3000, 0, 2), PointLoad(1500, 3000), PointLoad(2500, 3000)]
    snow = [PointLoad(5000, 1000), PointLoad(600, 500), LineLoad(4000, 5000, 2, 1), PointLoad(3300, 800)]
    cases = [[LineLoad(0, 5000, 1, 1)], [*imposed, Couple(700, 1e6)], snow]
    return Beam(5000.0, [Support(0, "pin"), Support(4000, "pin")], [], stretches), cases


def banded(A: np.ndarray) -> np.ndarray:
    """Return the diagonals of A as solve_banded wants them."""
    rows = np.zeros((2 * BAND + 1, len(A)))
    for offset in range(-BAND, BAND + 1):
        diagonal = np.diagonal(A, offset)
        rows[BAND - offset, max(offset, 0) : max(offset, 0) + len(diagonal)] = diagonal
    return rows


def seconds(act, rounds: int) -> float:
    taken = []
    for _ in range(rounds):
        begin = perf_counter()
        act()
        taken.append(perf_counter() - begin)
    return median(taken)


@pytest.mark.benchmark(group="beam")
def test_twenty_spans_against_the_bare_solution_of_their_matrix(benchmark):
    member, cases = long_member()
    grid = lay_out([member], cases)
    (A,), (rhs,), _ = assemble(grid, sweep(grid))
    bands = banded(A)
    np.testing.assert_allclose(A @ solve_banded((BAND, BAND), bands, rhs), rhs, atol=1e-8 * np.abs(rhs).max())

    response: Response = benchmark(solve, member, cases)
    total = sum(
        load.value if isinstance(load, PointLoad) else (load.end - load.start) * (load.value_start + load.value_end) / 2
        for case in cases
        for load in case
    )
    assert response.reaction_force.sum() == pytest.approx(total, rel=1e-9)

    rounds = 3 if benchmark.disabled else 100
    whole = seconds(lambda: solve(member, cases), rounds)
    dense = seconds(lambda: np.linalg.solve(A, rhs), rounds)
    bare = seconds(lambda: solve_banded((BAND, BAND), bands, rhs), rounds)
    print(
        f"\n{SPANS} spans, {LOADS} loads in 3 cases, {len(A)} unknowns: solver {whole * 1e6:.0f} us;"
        f" bare numpy solve {dense * 1e6:.0f} us (ratio {whole / dense:.1f});"
        f" bare banded solve {bare * 1e6:.0f} us (ratio {whole / bare:.1f})"
    )


@pytest.mark.benchmark(group="beam")
def test_typical_member_with_extremes_of_three_combinations(benchmark):
    member, cases = typical_member()
    found = benchmark(lambda: solve(member, cases).combine(FACTORS).extremes())
    assert found.max.shape == (3, 3)
    assert (found.max[1] > 0).all()
