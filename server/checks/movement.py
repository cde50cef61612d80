"""Movement of unlike materials: free strain from temperature and moisture, and what it does at the ends of bonds.

Temperatures count from cure, moisture from the glue-up. A free strain acts or does not, so limits at an end take the
worse of both. Reckoned wherever ``service`` is given; left out, it is a caution and never another verdict.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import product

import numpy as np

from server import documents
from server.checks.bond_ends import Bonded, End
from server.checks.crosssection import Body, Part, Site
from server.checks.curves import Curve
from server.checks.resistance import Findings
from server.checks.strip_ends import EndCheck, Strain, near, stresses_at, use_of
from server.mechanics.overlap_laps import BondLine
from server.working import Working

BELOW_SOFTENING = 20.0  # K under the glass transition: CEN/TS 19101 (clause from memory), common practice
SHEAR_LAG = "shear lag of two bars (W. T. Chen and C. W. Nelson, IBM J. Res. Dev. 23 (1979) 179)"
RATE = "sqrt(G*b/t_a*(1/EA_1 + 1/EA_2))"
END_SHEAR = "G*abs(Delta_epsilon)/(lamda*t_a)*tanh(lamda*l/2)"
END_SLIP = "tau*t_a/G"
SHEARED = "linear elastic bond in shear"
LEAST = 1e-9  # strain below which nothing moves


@dataclass(frozen=True)
class State:
    """One state of service: temperature change from cure [K] and whether the moisture change has happened."""

    change: float
    damp: bool
    words: str


def states_of(service: documents.Service, findings: Findings) -> list[State]:
    """The states of service in which bonds may find themselves; what is missing for them is named."""
    changes: list[tuple[float, str]] = [(0.0, "")]
    if service.temperature is not None:
        if service.cure_temperature is None:
            findings.miss(
                "service.cure_temperature: movement counts from the temperature at which the adhesive set, and "
                "without it the stress from heat and cold is not known."
            )
        else:
            low, high = (t - service.cure_temperature for t in service.temperature)
            changes += [(low, f"coldest, {low:+g} K from cure"), (high, f"hottest, {high:+g} K from cure")]
    damp = (False, True) if any(service.moisture_change.values()) else (False,)
    found = []
    for (change, words), wet in product(changes, damp):
        told = ", ".join(w for w in (words, "moisture changed" if wet else "") if w)
        if told:
            found.append(State(change, wet, told))
    return found


def strains_of(
    document: documents.MemberDocument,
    body: Body,
    strip: Part,
    others: Sequence[Part],
    states: Sequence[State],
    findings: Findings,
) -> list[Strain]:
    """Free strain of a piece over what it is bonded to, in every state; what materials lack for it is named."""
    names = dict.fromkeys((strip.spec.material, *(p.spec.material for p in others)))
    if len(names) < 2 or document.service is None:
        return []
    lacking = False
    for name in names:
        material = document.materials[name]
        assert isinstance(material, documents.Material)
        if any(s.change for s in states) and material.expansion is None:
            findings.miss(f"thermal expansion of {name!r}: it is bonded to another material and moves against it.")
            lacking = True
        if document.service.moisture_change.get(name) and material.moisture_expansion is None:
            findings.miss(
                f"moisture_expansion of {name!r} (strain along the member for 1 % of moisture): its moisture changes "
                "and it is bonded to another material."
            )
            lacking = True
    if lacking:
        return []
    found = []
    for state in states:
        weights = [p.material.E * area_of(p, body) for p in others]
        host = sum(w * _free(document, p, state) for w, p in zip(weights, others, strict=True)) / sum(weights)
        value = _free(document, strip, state) - host
        if abs(value) > LEAST:
            found.append(Strain(value, state.words))
    return found


def area_of(part: Part, body: Body) -> float:
    """Area of a piece [mm2]."""
    section = next(s for s in body.stretches if part.start <= s.start and part.end >= s.end).section
    return float(section.properties.pieces.area[[p.index for p in section.parts].index(part.index)])


def _free(document: documents.MemberDocument, part: Part, state: State) -> float:
    assert document.service is not None
    material = part.material
    strain = (material.expansion or 0.0) * state.change
    if state.damp:
        change = document.service.moisture_change.get(part.spec.material, 0.0)
        strain += (material.moisture_expansion or 0.0) * change
    return strain


def softening(document: documents.MemberDocument, body: Body, findings: Findings) -> None:
    """The hottest service temperature against the adhesive's glass transition."""
    service = document.service
    if service is None or service.temperature is None:
        return
    coldest, hottest = service.temperature
    for name in dict.fromkeys(site.spec.adhesive for site in body.sites if site.spec.adhesive is not None):
        adhesive = document.adhesives[name]
        assert isinstance(adhesive, documents.Adhesive)
        softens = adhesive.glass_transition
        if softens is None:
            findings.caution(
                "softening",
                f"No glass transition is given for adhesive {name!r}: whether it softens at {hottest:g} °C is not "
                "known.",
                answer=True,
            )
        elif softens <= coldest:
            findings.caution(
                "softening",
                f"Adhesive {name!r} softens at {softens:g} °C and works as a rubber over the whole of service, "
                f"{coldest:g} to {hottest:g} °C: its values must come from tests of that state, and it creeps.",
                answer=True,
            )
        elif hottest >= softens:
            findings.miss(
                f"strength of adhesive {name!r} at {hottest:g} °C: that is above its glass transition at "
                f"{softens:g} °C, where its values no longer hold. Choose another adhesive, or test it hot."
            )
        elif hottest > softens - BELOW_SOFTENING:
            findings.caution(
                "softening",
                f"Service reaches {hottest:g} °C and adhesive {name!r} softens at {softens:g} °C: less than "
                f"{BELOW_SOFTENING:g} K apart. Its values must come from tests at that temperature.",
                answer=True,
            )


@dataclass(frozen=True)
class Moves:
    """What movement does to one bonded piece: the block of the result."""

    result: dict[str, object]
    line: str


def at_end(check: EndCheck, strains: Sequence[Strain], book: Working) -> Moves:
    """Movement at an end that was solved with its loads: slip, transfer length, what another bond line brings."""
    end, bond, bonded, found = check.end, check.bond, check.end.bonded, check.stresses
    assert bonded is not None
    k = int(np.abs(found.strain_shear).argmax())
    strain, shear = strains[k], float(abs(found.strain_shear[k]))
    rate = transfer_rate(bonded, bond)
    book.begin(f"Movement at the {end.title}")
    book.note(
        "Free strain", f"{bonded.part.name} over what it is bonded to: {strain.cause}.", strain.value,
        symbol="Delta_epsilon", source="expansion x change of temperature, and of moisture",
    )  # fmt: skip
    half = strain.value * bonded.length / 2
    book.note("Free movement of half the length, if nothing held it", "", half, "mm", symbol="u_0")
    book.note(
        "End shear from the free strain alone", "", shear, "MPa", symbol="tau_epsilon", source="the same solution"
    )
    slip = book.step(
        "Slip of the bond at the end", "s_end", END_SLIP,
        {"tau": (shear, "MPa"), "t_a": (bond.thickness, "mm"), "G": (bond.shear_modulus, "MPa")}, "mm",
        SHEARED,
    )  # fmt: skip
    return Moves(
        {
            "piece": bonded.part.name,
            "joint": ", ".join(site.id for site in bonded.sites),
            "at": end.at,
            "free_strain": strain.value,
            "cause": strain.cause,
            "free_movement": abs(half),
            "end_shear": shear,
            "end_peel": float(found.strain_peel[k]),
            "end_slip": slip,
            "shear_strain": slip / bond.thickness,
            "transfer_length": 1 / rate,
            "with_load_shear": float(found.peak_shear.max()),
            "with_load_peel": float(found.peak_peel.max()),
            "distribution": {} if found.free is None else near(end, found.free, k),
            "what_if": [],
        },
        end.title,
    )


def transfer_rate(bonded: Bonded, bond: BondLine) -> float:
    """1 over the length in which a free strain's stress falls by e: stretching, and what the host bends."""
    strip, host = bonded.strip.beam(bonded.strip.thickness, 0.0, bond.thickness), bonded.free
    stretch, bend, arm = (float(np.asarray(each)) for each in (strip.stretch, strip.bend, strip.arm))
    apart = arm + host.distance + bond.thickness / 2
    soft = stretch + 1 / host.EA + apart**2 / (host.EI + 1 / bend)
    return math.sqrt(bond.shear_modulus * bonded.width / bond.thickness * soft)


def what_if(check: EndCheck, strains: Sequence[Strain], moment: Curve) -> list[dict[str, object]]:
    """What a thicker or softer bond line would bring at an end."""
    bond = check.bond
    found = []
    for what, other in (
        (f"bond line {3 * bond.thickness:g} mm", replace(bond, thickness=3 * bond.thickness)),
        (f"bond line {10 * bond.thickness:g} mm", replace(bond, thickness=10 * bond.thickness)),
        (
            f"shear modulus {bond.shear_modulus / 10:g} MPa",
            replace(bond, shear_modulus=bond.shear_modulus / 10, E=bond.E / 10),
        ),
    ):
        stresses = stresses_at(check.end, other, moment, strains)
        found.append(
            {
                "what": what,
                "end_shear": float(np.abs(stresses.strain_shear).max()),
                "end_slip": float(np.abs(stresses.strain_shear).max()) * other.thickness / other.shear_modulus,
                "utilisation": use_of(check, stresses),
            }
        )
    return found


def side_bonds(body: Body, flat: Sequence[End]) -> Iterator[tuple[Part, tuple[Site, ...]]]:
    """Pieces bonded to another material on faces that the beam model does not serve, the softer of each pair once."""
    served = {site.index for end in flat if end.bonded is not None for site in end.bonded.sites}
    grouped: dict[int, list[Site]] = {}
    for site in body.sites:
        if not site.bonded or site.index in served or site.first.spec.material == site.second.spec.material:
            continue
        stiff = [p.material.E * area_of(p, body) for p in (site.first, site.second)]
        softer = site.first if stiff[0] <= stiff[1] else site.second
        grouped.setdefault(softer.index, []).append(site)
    for index, sites in grouped.items():
        yield body.parts[index], tuple(sites)


def lag(
    part: Part, sites: Sequence[Site], body: Body, bond: BondLine, strains: Sequence[Strain], book: Working
) -> Moves:
    """Shear lag of a piece on the rest of the section, for a bond on its sides: no bending, no peel."""
    stretch = next(s for s in body.stretches if part.start <= s.start and part.end >= s.end)
    own = part.material.E * area_of(part, body)
    rest = stretch.section.properties.EA - own
    width = sum(site.width * site.spec.coverage for site in sites)
    strain = max(strains, key=lambda s: abs(s.value))
    length = part.end - part.start
    book.begin(f"Movement of {part.name}")
    line = {"G": (bond.shear_modulus, "MPa"), "t_a": (bond.thickness, "mm")}
    rate = book.step(
        "Rate at which the stress decays", "lamda", RATE,
        {**line, "b": (width, "mm"), "EA_1": (own, "N"), "EA_2": (rest, "N")}, "1/mm",
        f"{SHEAR_LAG}; {part.name} against the rest of the section",
    )  # fmt: skip
    shear = book.step(
        "End shear from the free strain", "tau_epsilon", END_SHEAR,
        {**line, "Delta_epsilon": (strain.value, ""), "lamda": (rate, "1/mm"), "l": (length, "mm")}, "MPa", SHEAR_LAG,
    )  # fmt: skip
    slip = book.step("Slip of the bond at the end", "s_end", END_SLIP, {"tau": (shear, "MPa"), **line}, "mm", SHEARED)
    return Moves(
        {
            "piece": part.name,
            "joint": ", ".join(site.id for site in sites),
            "at": part.start,
            "free_strain": strain.value,
            "cause": strain.cause,
            "free_movement": abs(strain.value) * length / 2,
            "end_shear": shear,
            "end_peel": None,
            "end_slip": slip,
            "shear_strain": slip / bond.thickness,
            "transfer_length": 1 / rate,
            "what_if": [],
        },
        f"ends of {part.name}",
    )
