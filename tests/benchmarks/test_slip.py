"""What the slip solver costs beside the bare solution of its own equations: 20 layers, 400 stations.

    pytest tests/benchmarks/test_slip.py --benchmark-enable -s

Absolute times say nothing on another machine; the ratio is printed, and only the answers are asserted.
"""

from __future__ import annotations

from itertools import pairwise
from statistics import median
from time import process_time

import numpy as np
import pytest
from scipy.linalg import solve_banded

from server.mechanics.beam import Load, PointLoad, Support
from server.mechanics.beam_loads import lay_out
from server.mechanics.slip import FlexibleJoint, Layer, LayeredMember, SlipResponse, Zone, solve_slip
from server.mechanics.slip_stacks import plant, stack
from server.mechanics.slip_system import System, assemble, banded, link

LAYERS, STATIONS, LENGTH = 20, 400, 8000.0


def wide_member(zones: int) -> tuple[LayeredMember, list[list[Load]]]:
    """Return 20 unlike layers with joints in so many zones, and a load at each of 399 places in two cases."""
    number = np.random.default_rng(20)
    layers = [Layer(0, LENGTH, 1e7 * a, 1e9 * b, 20.0 * i) for i, (a, b) in enumerate(number.uniform(0.5, 2, (20, 2)))]
    ends = np.linspace(0, LENGTH, zones + 1)
    joints = [
        FlexibleJoint(i, i + 1, tuple(Zone(a, b, number.uniform(1, 50)) for a, b in pairwise(ends)))
        for i in range(LAYERS - 1)
    ]
    places = np.linspace(0, LENGTH, STATIONS + 1)[1:-1]
    cases: list[list[Load]] = [[PointLoad(x, 100.0) for x in places], [PointLoad(x, 0.1 * x) for x in places]]
    supports = [Support(0, "pin"), Support(5000, "pin"), Support(LENGTH, "pin")]
    return LayeredMember(LENGTH, supports, [], layers, joints), cases


def equations(member: LayeredMember, cases: list[list[Load]]) -> System:
    grid = lay_out([member.outline()], cases)
    tree = plant(member)
    stacks = stack(member, tree, grid.breaks)
    return assemble(member, tree, stacks, link(grid, stacks))


@pytest.mark.parametrize("zones", [8, STATIONS], ids=["eight zones", "every station its own zone"])
@pytest.mark.benchmark(group="slip")
def test_wide_member(benchmark: object, zones: int) -> None:
    member, cases = wide_member(zones)
    system = equations(member, cases)
    K, b, c = system.rhs.shape
    w = 2 * b - 1
    A, rhs = np.ascontiguousarray(banded(system)[w:]), system.rhs.reshape(K * b, c)
    bare, whole = [], []
    for _ in range(3):
        start = process_time()
        x = solve_banded((w, w), A, rhs)
        middle = process_time()
        solve_slip(member, cases)
        bare.append(middle - start)
        whole.append(process_time() - middle)
    print(f"\n{K * b} unknowns, {zones} zones: {median(whole) / median(bare):.2f} times the bare banded solution")
    response: SlipResponse = benchmark(solve_slip, member, cases)  # type: ignore[operator]
    expected = x.reshape(K, b, c) * system.scale[:, None]
    size = np.abs(expected).max(axis=(0, 2), keepdims=True)
    np.testing.assert_allclose(response.states / size, expected / size, atol=1e-7)
