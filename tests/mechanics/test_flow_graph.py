"""Joint flow against plain linear algebra, on random grids of pieces with and without symmetry.

The oracle writes down every piece's equilibrium and every symmetry as rows of one matrix: a joint is settled exactly
where its unit row lies in the row space, and its flow is then that of the least-squares solution.
"""

from __future__ import annotations

import itertools
import random

import numpy as np
import pytest

from server.mechanics.contacts import contacts
from server.mechanics.flow import JointLine, joint_flows, tied
from server.mechanics.section import Piece, properties, rectangle

MOVES = {
    "none": [],
    "vertical": [(-1, 1)],
    "horizontal": [(1, -1)],
    "both": [(-1, 1), (1, -1)],
    "half turn": [(-1, -1)],
}


def _image(cell, size, move):
    (x, y), (columns, rows), (a, b) = cell, size, move
    return (columns - 1 - x if a < 0 else x, rows - 1 - y if b < 0 else y)


def _group(moves):
    """The moves and their products."""
    found = {(1, 1), *moves}
    for p, q in itertools.product(list(found), repeat=2):
        found.add((p[0] * q[0], p[1] * q[1]))
    return found


def random_grid(seed: int, kind: str):
    """Cells of a grid as pieces, some bonds left out, made symmetric as asked."""
    rng = random.Random(seed)
    columns, rows = rng.choice([(2, 2), (3, 2), (2, 3), (3, 3), (4, 2), (3, 4)])
    size, group = (columns, rows), _group(MOVES[kind])
    widths = [rng.choice([10.0, 14.0]) for _ in range(columns)]
    heights = [rng.choice([8.0, 15.0]) for _ in range(rows)]
    if kind != "none":
        widths = [widths[min(k, columns - 1 - k)] for k in range(columns)]
        heights = [heights[min(k, rows - 1 - k)] for k in range(rows)]
    if kind == "vertical":
        heights = [rng.choice([8.0, 15.0]) for _ in range(rows)]
    cells = list(itertools.product(range(columns), range(rows)))
    orbit = {cell: min(_image(cell, size, move) for move in group) for cell in cells}
    modulus = {cell: rng.choice([1.0, 1.0, 3.0]) for cell in cells}
    gone = {cell for cell in cells if rng.random() < 0.15}
    cells = [cell for cell in cells if orbit[cell] not in gone]
    rng.shuffle(cells)
    if not cells:
        return [], [], [], size
    x, y = np.concatenate(([0.0], np.cumsum(widths))), np.concatenate(([0.0], np.cumsum(heights)))
    pieces = [Piece(f"{a},{b}", rectangle(widths[a], heights[b], (x[a], y[b])), modulus[orbit[a, b]]) for a, b in cells]
    left_out = {}
    joints = []
    for contact in contacts([piece.outline for piece in pieces], np.full((len(pieces),) * 2, 0.05)):
        pair = frozenset((cells[contact.first], cells[contact.second]))
        same = min(tuple(sorted(_image(cell, size, move) for cell in pair)) for move in group)
        if left_out.setdefault(same, rng.random() < 0.3):
            continue
        ends = (contact.first, contact.second) if rng.random() < 0.5 else (contact.second, contact.first)
        joints.append(JointLine(*ends, contact.start, contact.end, "glue"))
    return pieces, joints, cells, size


def holding_moves(pieces, joints, cells, size):
    """Moves of the grid that map pieces and joints on themselves, as (piece images, load sign)."""
    lines = {frozenset((joint.first, joint.second)) for joint in joints}
    outline = np.concatenate([piece.outline for piece in pieces])
    middle = (outline.min(axis=0) + outline.max(axis=0)) / 2
    for move in ((-1, 1), (1, -1), (-1, -1)):
        images = []
        for piece in pieces:
            there = middle + np.array(move) * (piece.outline.mean(axis=0) - middle)
            near = [
                k
                for k, other in enumerate(pieces)
                if np.allclose(other.outline.mean(axis=0), there)
                and np.isclose(other.E, piece.E)
                and np.allclose(np.ptp(other.outline, axis=0), np.ptp(piece.outline, axis=0))
            ]
            images.append(near[0] if near else -1)
        if -1 not in images and {frozenset(images[k] for k in line) for line in lines} == lines:
            yield images, move[1]


def oracle(pieces, joints, moves):
    """(settled by equilibrium, settled with symmetry, flow) of each joint."""
    section = properties(pieces)
    m = len(joints)
    equilibrium = np.zeros((len(pieces), m))
    for j, joint in enumerate(joints):
        equilibrium[joint.first, j], equilibrium[joint.second, j] = 1.0, -1.0
    rows, right = [*equilibrium], [*section.first_moments]
    for images, sign in moves:
        for j, joint in enumerate(joints):
            target = (images[joint.first], images[joint.second])
            for k, other in enumerate(joints):
                if {other.first, other.second} == set(target):
                    row = np.zeros(m)
                    row[k] += 1.0
                    row[j] -= sign * (1.0 if other.first == target[0] else -1.0)
                    rows.append(row)
                    right.append(0.0)
    whole = np.array(rows)

    def in_row_space(matrix):
        _, values, vectors = np.linalg.svd(matrix)
        rank = int((values > 1e-9).sum())
        return np.abs(vectors[rank:]).max(axis=0, initial=0.0) < 1e-9

    flow = np.linalg.lstsq(whole, np.array(right), rcond=None)[0]
    assert whole @ flow == pytest.approx(np.array(right), abs=1e-8 * np.abs(section.first_moments).max() + 1e-9)
    return in_row_space(equilibrium), in_row_space(whole), flow


@pytest.mark.parametrize("kind", list(MOVES))
def test_settles_exactly_what_linear_algebra_settles_with_the_same_flow(kind):
    seen = {"cut": 0, "symmetry": 0, None: 0}
    for seed in range(150):
        pieces, joints, cells, size = random_grid(seed, kind)
        if len(pieces) < 2 or tied(len(pieces), joints):
            continue
        by_cut, by_symmetry, flow = oracle(pieces, joints, list(holding_moves(pieces, joints, cells, size)))
        scale = np.abs(properties(pieces).first_moments).max()
        for j, found in enumerate(joint_flows(pieces, properties(pieces), joints)):
            expected = "cut" if by_cut[j] else "symmetry" if by_symmetry[j] else None
            assert found.split == expected, (seed, j, found.reason)
            seen[expected] += 1
            if expected:
                assert found.share == pytest.approx(flow[j], abs=1e-9 * scale), (seed, j)
                assert abs(found.share) * len(found.partners) == pytest.approx(
                    abs(found.first_moment), abs=1e-9 * scale
                )
                assert found.first_moment == pytest.approx(-found.first_moment_other_side, abs=1e-9 * scale)
    assert seen["cut"] > 20
    assert seen[None] > 20 or kind == "both"
    assert seen["symmetry"] > 20 or kind == "none"
