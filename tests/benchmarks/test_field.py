"""What the field of shear costs beside the bare sparse solution of its own matrix, and how the cost grows.

    pytest tests/benchmarks/test_field.py --benchmark-enable -s

Times are of the processor, so that other work on the machine counts for little; ratio and exponent are printed. The
section is a floor of cells in two storeys: webs of unlike stiffness between three skins, two joints a web.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from dataclasses import replace
from functools import partial
from time import process_time
from typing import Any

import numpy as np
import pytest
from scipy.sparse.linalg import splu, spsolve

from server.mechanics import field, field_system
from server.mechanics.contacts import contacts
from server.mechanics.field import Bond, Field, shear_field
from server.mechanics.section import Piece, SectionProperties, properties, rectangle
from server.remembered import Remembered

MOST_RATIO, MOST_POWER = 3.0, 1.3
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


def in_turns(acts: Sequence[Callable[[], object]], rounds: int) -> list[float]:
    """Least processor seconds of each, taken in turns, so that what else runs falls on all alike."""
    taken = [[_once(act) for act in acts] for _ in range(rounds)]
    return [min(column) for column in zip(*taken, strict=True)]


def _once(act: Callable[[], object]) -> float:
    begin = process_time()
    act()
    return process_time() - begin


def bare(section: Section, monkeypatch: pytest.MonkeyPatch) -> list[Callable[[], object]]:
    """What scipy does with the matrix and its three loads: as ordered here, and with its defaults."""
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
    return [
        lambda: splu(matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=options).solve(loads),
        lambda: spsolve(matrix, loads),
    ]


@pytest.mark.benchmark(group="field")
def test_sixty_pieces_against_the_bare_solution(
    benchmark: Any, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Nothing is remembered from one round to the next: every one lays out, meshes, solves and reads off."""
    monkeypatch.setattr(field, "_meshes", Remembered(0))
    joints, taken, lines = [], [], []
    for cells in (3, 7, 14, 29):
        section = floor(cells)
        found: Field = shear_field(*section)
        assert found.converged
        assert found.balance < 1e-9
        acts = [partial(shear_field, *section), *bare(section, monkeypatch)]
        whole, ordered, plain = in_turns(acts, 2 if benchmark.disabled else 7)
        joints.append(len(section[2]))
        taken.append(whole)
        lines.append(
            f"{len(section[0])} pieces, {joints[-1]} joints, {found.unknowns} unknowns: field {whole * 1e3:.0f} ms;"
            f" bare solution {ordered * 1e3:.0f} ms (ratio {whole / ordered:.1f}),"
            f" with scipy's defaults {plain * 1e3:.0f} ms (ratio {whole / plain:.1f})"
        )
    exponent = float(np.polyfit(np.log(joints), np.log(taken), 1)[0])
    with capsys.disabled():
        print("", *lines, sep="\n")
        print(
            f"{joints[-1]} joints: {whole / ordered:.2f} times the bare sparse solution (at most {MOST_RATIO:g});"
            f" cost grows with joints to the power {exponent:.2f} from {joints[0]} to {joints[-1]} joints"
            f" (at most {MOST_POWER:g})"
        )
    benchmark.extra_info.update(ratio=whole / ordered, exponent=exponent)
    if not benchmark.disabled:
        assert whole / ordered <= MOST_RATIO
        assert exponent <= MOST_POWER
    benchmark(shear_field, *floor(3))


def test_new_moduli_are_solved_on_the_same_mesh(capsys: pytest.CaptureFixture[str]) -> None:
    pieces, _, bonds = floor(7)
    stiffer = [replace(piece, E=2 * piece.E, G=3.0 * (piece.G or 0.0)) for piece in pieces]
    first = _once(lambda: shear_field(pieces, properties(pieces), bonds))
    again = _once(lambda: shear_field(stiffer, properties(stiffer), bonds))
    one, other = shear_field(pieces, properties(pieces), bonds), shear_field(stiffer, properties(stiffer), bonds)
    assert one.mesh is other.mesh
    np.testing.assert_allclose(other.share, 2 * one.share, rtol=1e-6, atol=1e-6 * np.abs(one.share).max())
    with capsys.disabled():
        print(f"\nfield of a section {first * 1e3:.0f} ms, with new moduli {again * 1e3:.0f} ms")


@pytest.mark.benchmark(group="field")
def test_a_typical_box(benchmark: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    pieces = [
        Piece("bottom", rectangle(90, 70, (12.5, 0)), 11000.0, 690.0),
        Piece("top", rectangle(90, 70, (12.5, 330)), 11000.0, 690.0),
        Piece("left", rectangle(12.5, 400, (0, 0)), 6500.0, 600.0),
        Piece("right", rectangle(12.5, 400, (102.5, 0)), 6500.0, 300.0),
    ]
    found = contacts([piece.rings for piece in pieces], np.full((4, 4), 0.05))
    bonds = [Bond(c.first, c.second, c.start, c.end, c.gap) for c in found]
    monkeypatch.setattr(field, "_meshes", Remembered(0))
    found_field = benchmark(shear_field, pieces, properties(pieces), bonds)
    assert found_field.converged
