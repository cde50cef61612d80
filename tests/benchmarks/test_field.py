"""What the field of shear costs beside the bare sparse solution of its own matrix, and how the cost grows.

    pytest tests/benchmarks/test_field.py --benchmark-enable -s

Times are of the processor, so that other work on the machine counts for little; ratio and exponent are printed. The
section is a floor of cells in two storeys: webs of unlike stiffness between three skins, two joints a web.
"""

from __future__ import annotations

import random
from time import process_time
from typing import Any

import numpy as np
import pytest
from scipy.sparse.linalg import splu, spsolve

from server.mechanics import field_system
from server.mechanics.contacts import contacts
from server.mechanics.field import Bond, Field, shear_field
from server.mechanics.section import Piece, SectionProperties, properties, rectangle

Section = tuple[list[Piece], SectionProperties, list[Bond]]


def floor(cells: int) -> Section:
    """Return two storeys of cells: 2 (cells + 1) webs, 3 skins, 4 (cells + 1) joints."""
    number = random.Random(7)
    pieces = [
        Piece(
            f"web {storey}, {k}",
            rectangle(12, 100, (112 * k, 120 * storey)),
            number.uniform(7000, 13000),
            number.uniform(400, 800),
        )
        for storey in range(2)
        for k in range(cells + 1)
    ]
    pieces += [Piece(f"skin {k}", rectangle(112 * cells + 12, 20, (0, 120 * k - 20)), 9000.0, 500.0) for k in range(3)]
    found = contacts([piece.rings for piece in pieces], np.full((len(pieces),) * 2, 0.05))
    return pieces, properties(pieces), [Bond(c.first, c.second, c.start, c.end, c.gap) for c in found]


def seconds(act: Any, rounds: int) -> float:
    taken = []
    for _ in range(rounds):
        begin = process_time()
        act()
        taken.append(process_time() - begin)
    return min(taken)


def bare(section: Section, monkeypatch: pytest.MonkeyPatch, rounds: int) -> tuple[float, float]:
    """Seconds that scipy takes for the matrix and its three loads: as ordered here, and with its defaults."""
    kept: list[field_system.System] = []
    own = field_system.System.solved

    def keep(system: field_system.System) -> Any:
        kept.append(system)
        return own(system)

    with monkeypatch.context() as patch:
        patch.setattr(field_system.System, "solved", keep)
        shear_field(*section)
    matrix, loads = kept[0].matrix[1:, 1:].tocsc(), kept[0].loads[1:]
    options = {"SymmetricMode": True}
    ordered = seconds(
        lambda: splu(matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=options).solve(loads), rounds
    )
    return ordered, seconds(lambda: spsolve(matrix, loads), rounds)


@pytest.mark.benchmark(group="field")
def test_sixty_pieces_against_the_bare_solution(benchmark: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    rounds = 1 if benchmark.disabled else 5
    joints, taken = [], []
    for cells in (3, 7, 14, 29) if not benchmark.disabled else (3,):
        section = floor(cells)
        found: Field = shear_field(*section)
        assert found.converged
        assert found.balance < 1e-9
        whole = seconds(lambda section=section: shear_field(*section), rounds)
        ordered, plain = bare(section, monkeypatch, rounds)
        joints.append(len(section[2]))
        taken.append(whole)
        print(
            f"\n{len(section[0])} pieces, {joints[-1]} joints, {found.unknowns} unknowns: field {whole * 1e3:.0f} ms;"
            f" bare solution {ordered * 1e3:.0f} ms (ratio {whole / ordered:.1f}),"
            f" with scipy's defaults {plain * 1e3:.0f} ms (ratio {whole / plain:.1f})",
            end="",
        )
    if len(joints) > 1:
        exponent = np.polyfit(np.log(joints), np.log(taken), 1)[0]
        print(f"\ncost grows with joints to the power {exponent:.2f} from {joints[0]} to {joints[-1]} joints")
    benchmark(shear_field, *floor(3))


@pytest.mark.benchmark(group="field")
def test_a_typical_box(benchmark: Any) -> None:
    pieces = [
        Piece("bottom", rectangle(90, 70, (12.5, 0)), 11000.0, 690.0),
        Piece("top", rectangle(90, 70, (12.5, 330)), 11000.0, 690.0),
        Piece("left", rectangle(12.5, 400, (0, 0)), 6500.0, 600.0),
        Piece("right", rectangle(12.5, 400, (102.5, 0)), 6500.0, 300.0),
    ]
    found = contacts([piece.rings for piece in pieces], np.full((4, 4), 0.05))
    bonds = [Bond(c.first, c.second, c.start, c.end, c.gap) for c in found]
    field = benchmark(shear_field, pieces, properties(pieces), bonds)
    assert field.converged
