"""The working of the deflection: by beam tables where they hold, else by the method's name.

The solver has found the numbers; these steps reach them again for the members a pocket calculator can manage.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body, CrossSection
from server.checks.curves import Curve, Peak, largest
from server.mechanics.beam import LineLoad, Load, PointLoad
from server.mechanics.beam_model import SAME_PLACE
from server.working import Working
from server.working.record import Given

AT_ONCE, LASTING = "Deflection", "Long-term deflection"
SIDEWAYS = ", sideways"
POINT_SAG = "sum(P*b*x*(L**2 - b**2 - x**2)/(6*L*EI))"
UNIFORM_SAG = "w*x*(L**3 - 2*L*x**2 + x**3)/(24*EI)"
POINT_MOMENT = "sum(P*b*x/L)"
UNIFORM_MOMENT = "w*x*(L - x)/2"
SOFT_AXIS = "sum(E*A*u/(1 + k_def))/sum(E*A/(1 + k_def))"
SOFT_EI = "sum(E*(I + A*(u - u_0)**2)/(1 + k_def))"
BEAM_TABLE = "beam formula tables (AWC Design Aid No. 6, figures 1 and 8; superposition)"
CREEP = "EN 1995-1-1:2004 2.2.3: load that stays acts on stiffness over 1 + k_def"

Loaded = Sequence[tuple[float, Load]]
"""Loads, each with the factor it counts with."""


def spans(member: documents.Member) -> list[tuple[float, float, str]]:
    """The lengths between supports ("span") and beyond the outer ones ("overhang"), left to right."""
    places, least = sorted(s.at for s in member.supports), SAME_PLACE * member.length
    found = [(a, b, "span") for a, b in pairwise(places)]
    if places[0] > least:
        found.insert(0, (0.0, places[0], "overhang"))
    if places[-1] < member.length - least:
        found.append((places[-1], member.length, "overhang"))
    return found


@dataclass(frozen=True)
class Length:
    """A length between supports ("span") or beyond them ("overhang"), and where it bends away most.

    ``peak`` counts the size alone; ``upward`` whether it is against the sign of the curve.
    """

    start: float
    end: float
    kind: str
    peak: Peak
    combination: str
    upward: bool

    @property
    def words(self) -> str:
        """Which length it is."""
        return f"{self.kind} {self.start:g} to {self.end:g} mm"


def lengths(member: documents.Member, curve: Curve) -> list[Length]:
    """The greatest deflection of every span and overhang, left to right."""
    found = []
    for start, end, kind in spans(member):
        extremes = curve.over(start, end)
        peak = largest(*extremes.absolute())
        upward = max(extremes.max.tolist()) < peak.value
        found.append(Length(start, end, kind, peak, curve.names[peak.row], upward))
    return found


def write_sag(
    document: documents.MemberDocument,
    body: Body,
    actions: Actions,
    sagging: Sequence[Length],
    group: str,
    book: Working,
) -> None:
    """The greatest deflection of one curve: by tables for a simple span, else of every span and overhang."""
    peak = sagging[0].peak
    k = actions.deflection[peak.row]
    if SIDEWAYS in group or not _tabulated(document, body, actions, k):
        _name_method(actions, sagging, book, group)
    elif group == AT_ONCE:
        _short_term(body, actions, peak.at, k, book)
    else:
        _long_term(body, actions, peak.at, k, book)


def _tabulated(document: documents.MemberDocument, body: Body, actions: Actions, k: int) -> bool:
    """Two pins at the ends, one section without slip, point loads and full uniform loads only."""
    supports = document.member.supports
    return (
        sorted(s.at for s in supports) == [0.0, body.length]
        and all(s.kind == "pin" for s in supports)
        and not document.member.hinges
        and not actions.slips
        and actions.across is None
        and all(s.section is body.stretches[0].section for s in body.stretches)
        and all(_in_tables(load, body.length) for _, load in _loaded(actions, actions.factors[k]))
    )


def _in_tables(load: Load, length: float) -> bool:
    if isinstance(load, LineLoad):
        return load.start == 0 and load.end == length and load.value_start == load.value_end
    return isinstance(load, PointLoad) or load.value == 0


def _loaded(actions: Actions, factors: NDArray[np.float64]) -> Loaded:
    return [
        (factor, load)
        for factor, loads in zip(factors.tolist(), actions.case_loads, strict=True)
        if factor
        for load in loads
    ]


def _name_method(actions: Actions, sagging: Sequence[Length], book: Working, group: str) -> None:
    """The method, with the greatest deflection it gives for each length between supports."""
    lasting = LASTING in group
    how, source = (
        "The moment and shear polynomials over EI and GA, integrated exactly between the breaks",
        ("Euler-Bernoulli with Timoshenko's shear part"),
    )
    if actions.slips:
        how, source = (
            "Deflection of the layers that slide, with shear deformation by GA",
            "exact solution between breaks",
        )
    if actions.across is not None or SIDEWAYS in group:
        how, source = (
            "Curvatures (EI_l M + EI_p M_l)/(EI EI_l - EI_p^2) down and (EI_p M + EI M_l)/(EI EI_l - EI_p^2) sideways, "
            "with the strains of shear, integrated exactly between the breaks, both planes together",
            "unsymmetrical bending (Timoshenko and Gere, Mechanics of Materials)",
        )
    if lasting:
        how += "; the load that stays on stiffnesses over 1 + creep, the rest on the full ones"
        source += f"; {CREEP}"
    way = ", to the right positive" if SIDEWAYS in group else ""
    for each in sagging:
        size = each.peak.value
        book.note(
            f"Greatest {'long-term ' if lasting else ''}deflection{way}, {each.words}",
            f"{how}; at {each.peak.at:.6g} mm, combination {each.combination}.",
            value=-size if each.upward else size, unit="mm", source=source, group=group,
        )  # fmt: skip


@dataclass(frozen=True)
class _Span:
    """A simple span and the place looked at: L and x [mm], EI [N mm2], GA [N] or None where shear is left out.

    ``which`` says which part of the loads counts, in the printed sources.
    """

    L: float
    x: float
    EI: float
    GA: float | None
    group: str
    which: str
    book: Working

    def sag(self, loads: Loaded, symbol: str, title: str) -> float:
        """Deflection from point loads, full uniform loads and shear, step by step."""
        points = [(factor * load.value, load.at) for factor, load in loads if isinstance(load, PointLoad)]
        lines = [(factor, load.value_start) for factor, load in loads if isinstance(load, LineLoad)]
        bent: dict[str, Given] = {}
        moment: dict[str, Given] = {}
        if points:
            self._points(points, bent, moment)
        if lines or not points:
            self._uniform(lines or [(1.0, 0.0)], bent, moment)
        if self.GA is not None:
            formula = f"({' + '.join(moment)})/GA" if len(moment) > 1 else f"{next(iter(moment))}/GA"
            shear = self.book.step(
                "Deflection from shear", "u_V", formula, {**moment, "GA": (self.GA, "N")},
                "mm", "simple span: integral of V/GA is M/GA", self.group,
            )  # fmt: skip
            bent["u_V"] = (shear, "mm")
        return self.book.step(title, symbol, " + ".join(bent), bent, "mm", "superposition", self.group)

    def _points(self, points: Sequence[tuple[float, float]], bent: dict[str, Given], moment: dict[str, Given]) -> None:
        P, a = (np.array(column) for column in zip(*points, strict=True))
        right = a >= self.x
        given: dict[str, Given] = {
            "P": (P, "N"), "b": (np.where(right, self.L - a, a), "mm"),
            "x": (np.where(right, self.x, self.L - self.x), "mm"), "L": (self.L, "mm"),
        }  # fmt: skip
        source = f"{BEAM_TABLE}; b and x from the end beyond the load; P times its factor{self.which}"
        self._pair("point loads", "P", (POINT_SAG, POINT_MOMENT), given, source, bent, moment)

    def _uniform(self, lines: Sequence[tuple[float, float]], bent: dict[str, Given], moment: dict[str, Given]) -> None:
        factors, values = ([each[i] for each in lines] for i in (0, 1))
        w = self.book.step(
            "Uniform load", "w", "sum(gamma*p)", {"gamma": (factors, ""), "p": (values, "N/mm")},
            "N/mm", f"loads times their factors{self.which}", self.group,
        )  # fmt: skip
        given: dict[str, Given] = {"w": (w, "N/mm"), "x": (self.x, "mm"), "L": (self.L, "mm")}
        self._pair("uniform load", "w", (UNIFORM_SAG, UNIFORM_MOMENT), given, BEAM_TABLE, bent, moment)

    def _pair(
        self,
        of: str,
        sign: str,
        texts: tuple[str, str],
        given: dict[str, Given],
        source: str,
        bent: dict[str, Given],
        moment: dict[str, Given],
    ) -> None:
        """Deflection, and where shear counts the moment at the place, of one sort of load."""
        both = given | {"EI": (self.EI, "N*mm2")}
        sag = self.book.step(f"Deflection from {of}", f"u_{sign}", texts[0], both, "mm", source, self.group)
        bent[f"u_{sign}"] = (sag, "mm")
        if self.GA is not None:
            M = self.book.step(f"Moment from {of}", f"M_{sign}", texts[1], given, "N*mm", source, self.group)
            moment[f"M_{sign}"] = (M, "N*mm")


def _short_term(body: Body, actions: Actions, x: float, k: int, book: Working) -> None:
    section = body.stretches[0].section
    GA = section.shear_stiffness if actions.shear_deformation else None
    span = _Span(body.length, x, section.properties.EI, GA, AT_ONCE, "", book)
    title = f"Greatest deflection at {x:.6g} mm, combination {actions.labels[k]}"
    span.sag(_loaded(actions, actions.factors[k]), "u", title)


def _long_term(body: Body, actions: Actions, x: float, k: int, book: Working) -> None:
    """The part that does not stay on the full stiffness, the part that stays on the softened one, and their sum."""
    section, stays, group = body.stretches[0].section, actions.sustained[k], LASTING
    passing, lasting = _loaded(actions, actions.factors[k] - stays), _loaded(actions, stays)
    parts: dict[str, Given] = {}
    if passing or not lasting:
        GA = section.shear_stiffness if actions.shear_deformation else None
        span = _Span(body.length, x, section.properties.EI, GA, group, " less the share that stays", book)
        parts["u_i"] = (span.sag(passing, "u_i", "Deflection from the load that does not stay"), "mm")
    if lasting:
        EI, GA = _softened(section, actions.shear_deformation, group, book)
        span = _Span(body.length, x, EI, GA, group, ": the shares that stay", book)
        parts["u_s"] = (span.sag(lasting, "u_s", "Deflection from the load that stays, on softened stiffness"), "mm")
    title = f"Greatest long-term deflection at {x:.6g} mm, combination {actions.labels[k]}"
    book.step(title, "u_fin", " + ".join(parts), parts, "mm", CREEP, group)


def _softened(section: CrossSection, shear: bool, group: str, book: Working) -> tuple[float, float | None]:
    """Stiffnesses with each piece's moduli over 1 + k_def."""
    parts = section.properties.pieces
    values: dict[str, Given] = {
        "E": ([p.E for p in section.pieces], "MPa"),
        "A": (parts.area.tolist(), "mm2"),
        "u": (parts.centroid[:, 1].tolist(), "mm"),
        "k_def": ([part.material.creep or 0.0 for part in section.parts], ""),
    }
    names = f"in order: {', '.join(part.name for part in section.parts)}"
    u_0 = book.step("Neutral axis, softened", "u_0", SOFT_AXIS, values, unit="mm", source=names, group=group)
    values |= {"I": (parts.inertia[:, 0].tolist(), "mm4"), "u_0": (u_0, "mm")}
    EI = book.step("Bending stiffness, softened", "EI", SOFT_EI, values, unit="N*mm2", source=CREEP, group=group)
    GA = section.softened[1] if shear else None
    if GA is not None:
        text = "As the shear stiffness of the section, each G over 1 + k_def."
        book.note("Shear stiffness, softened", text, value=GA, unit="N", source=CREEP, group=group)
    return EI, GA
