"""What the methods for one fastener share: the wooden members, their densities, slip and spacing."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from server.checks.resistance import Findings
from server.documents.fastener import FastenerDocument, Part
from server.errors import DocumentError, Fault
from server.mechanics import dowel_distances as distances
from server.mechanics.dowel_distances import Distances
from server.mechanics.yield_limit import Mode
from server.working import Working

PANELS = ("plywood", "osb", "particleboard", "hardboard")
NAMES = {"side": "side member", "main": "main member"}
NUMBERS = {"side": "1", "main": "2"}
MOISTURE = 12.0  # per cent, at which densities are stated
MEAN_OVER_CHARACTERISTIC = 1.2
CODE = "EN 1995-1-1:2004+A1:2008"


@dataclass
class Found:
    """What a method finds: its modes with their loads, and what is said beside them."""

    modes: dict[str, float]
    governing: str
    resistance: float
    shapes: dict[str, Mode]
    more: dict[str, Any] = field(default_factory=dict)


@dataclass(frozen=True)
class Case:
    """One document on its way through a method."""

    document: FastenerDocument
    book: Working
    findings: Findings

    def parts(self) -> tuple[tuple[str, Part], tuple[str, Part]]:
        """The members by their name in the document."""
        return ("side", self.document.side), ("main", self.document.main)

    def wooden(self) -> list[tuple[str, Part]]:
        """The members that are not metal."""
        return [(name, part) for name, part in self.parts() if not part.metal]

    def plate(self) -> str:
        """Which member is a steel plate: "side", "main", or "" for none."""
        return next((name for name, part in self.parts() if part.metal), "")


def depth(case: Case) -> tuple[float, float]:
    """How far the fastener stands in the side and in the main member [mm]; a length that does not reach is refused."""
    document = case.document
    side, main, length = document.side.thickness, document.main.thickness, document.dowel.length
    if length is None or document.dowel.type in ("bolt", "dowel"):
        return side, main
    if document.shear_planes == 2:
        return min(side, length - side - main), main
    if length <= side:
        raise DocumentError(
            [
                Fault(
                    "fastener.length",
                    f"{length:g} mm does not reach into the main member behind {side:g} mm; enter a longer one.",
                )
            ]
        )
    return side, min(main, length - side)


def characteristic_density(case: Case, name: str, part: Part) -> float:
    """The characteristic density [kg/m3]; from the specific gravity with a caution where only that is given."""
    if part.density is not None:
        return part.density
    mean = mean_density(case, name, part)
    case.findings.caution(
        "density",
        f"The characteristic density of the {NAMES[name]} is taken from its specific gravity: mean density at "
        f"{MOISTURE:g} % moisture over {MEAN_OVER_CHARACTERISTIC:g}. Enter the characteristic density of the grade.",
    )
    return case.book.step(
        f"Characteristic density of the {NAMES[name]}",
        f"rho_k{NUMBERS[name]}",
        f"rho_m{NUMBERS[name]}/{MEAN_OVER_CHARACTERISTIC}",
        {f"rho_m{NUMBERS[name]}": (mean, "kg/m3")},
        "kg/m3",
        "common practice",
    )


def mean_density(case: Case, name: str, part: Part) -> float:
    """The mean density [kg/m3], for the slip modulus."""
    symbol = f"rho_m{NUMBERS[name]}"
    title = f"Mean density of the {NAMES[name]}"
    if part.density_mean is not None:
        return part.density_mean
    if part.specific_gravity is not None:
        return case.book.step(
            f"{title}, at {MOISTURE:g} % moisture",
            symbol,
            "1000*G*(1 + m/100)/(1 + 0.009*G*m)",
            {"G": (part.specific_gravity, ""), "m": (MOISTURE, "%")},
            "kg/m3",
            "ANSI/AWC NDS-2018, 3.1.3, Supplement (density from specific gravity)",
        )
    if part.density is None:
        return 0.0
    case.findings.caution(
        "mean density",
        f"No mean density is given for the {NAMES[name]}; {MEAN_OVER_CHARACTERISTIC:g} times the characteristic one "
        "is used for the slip modulus.",
    )
    return case.book.step(
        title,
        symbol,
        f"{MEAN_OVER_CHARACTERISTIC}*rho_k{NUMBERS[name]}",
        {f"rho_k{NUMBERS[name]}": (part.density, "kg/m3")},
        "kg/m3",
        "common practice (EN 338:2016: mean over characteristic density is 1.2)",
    )


def slip(case: Case, diameter: float, *, nailed: bool) -> dict[str, Any]:
    """The slip modulus of EN 1995-1-1 Table 7.1 [N/mm], or why there is none."""
    book, document = case.book, case.document
    book.begin("Slip modulus")
    means = {name: mean_density(case, name, part) for name, part in case.wooden()}
    if not all(means.values()):
        lacking = ", ".join(NAMES[name] for name, mean in means.items() if not mean)
        case.findings.caution("slip modulus", f"There is none: the density of the {lacking} is not given.")
        return {"slip_modulus": None, "slip_modulus_ultimate": None}
    if len(means) == 2:
        mean = book.step(
            "Mean density of both members",
            "rho_m",
            "sqrt(rho_m1*rho_m2)",
            {f"rho_m{NUMBERS[name]}": (value, "kg/m3") for name, value in means.items()},
            "kg/m3",
            f"{CODE} 7.1(2)",
        )
    else:
        mean = next(iter(means.values()))
    text = "rho_m**1.5*d**0.8/30" if nailed and not document.predrilled else "rho_m**1.5*d/23"
    text = f"2*{text}" if case.plate() else text
    stiffness = book.step(
        "Slip modulus in service, each shear plane",
        "K_ser",
        text,
        {"rho_m": (mean, "kg/m3"), "d": (diameter, "mm")},
        "N/mm",
        f"{CODE} Table 7.1" + (", 7.1(3) for a steel plate" if case.plate() else ""),
    )
    final = book.step(
        "Slip modulus for strength", "K_u", "2/3*K_ser", {"K_ser": (stiffness, "N/mm")}, "N/mm", f"{CODE} 2.2.2(2)"
    )
    if document.dowel.type == "bolt":
        case.findings.caution(
            "bolt holes", "The play of a bolt in its hole comes before this stiffness: add it to the slip separately."
        )
    return {"slip_modulus": stiffness, "slip_modulus_ultimate": final}


def spacings(case: Case, of: dict[str, Distances]) -> dict[str, Any]:
    """The least distances of every member, and the spacing that satisfies all of them."""
    case.book.begin("Least distances")
    listed = []
    for name, each in of.items():
        listed.append({"member": name, "source": each.source, **{key: getattr(each, key) for key in distances.NAMES}})
    if not listed:
        return {"spacing_min": None, "distances": []}
    least = max(of.items(), key=lambda item: item[1].a1)
    case.book.note(
        "Least spacing along the grain",
        f"The largest of all members: that of the {NAMES[least[0]]}.",
        least[1].a1,
        "mm",
        least[1].source,
        symbol="a_1",
    )
    return {"spacing_min": least[1].a1, "distances": listed}
