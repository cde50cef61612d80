"""Kind "load-slip": the shop's own fastener tests, from readings to strength and slip modulus of one fastener."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from server import ENGINE, units
from server.checks import coupon_limits as limits
from server.checks.resistance import Findings
from server.documents.load_slip import LoadSlipDocument, Specimen
from server.errors import DocumentError, Fault, InputError
from server.mechanics import load_slip
from server.working import Working

CODE = "EN 26891:1991"
NEAR = 0.2  # of the estimate, by which the mean may differ before each test's own greatest load is taken
WRITTEN_OUT = 30
DRAWN = 400  # readings of a specimen kept for its drawing
READABLE = 1e-6  # mm, a slip that no gauge tells from nothing; a modulus over less would be noise
NOT_CHECKED = (
    "whether the specimens stand for the joint: wood, moisture, spacing, edge distances, workmanship",
    "duration of load, moisture and repeated load: each needs its own factor",
    "the loading procedure and its speed, and calibration of gauges and load cell",
)


@dataclass(frozen=True)
class Tested:
    """One test: greatest load and slips of the whole specimen; NaN where there are none."""

    index: int
    maximum: float
    reference: float
    v01: float
    v04: float


def run(document: LoadSlipDocument, *, working: bool = True) -> dict[str, object]:
    """Find strength and slip modulus of one fastener and shear plane; ``working`` false leaves the steps out.

    Raises
    ------
    DocumentError
        If readings cannot be used; every fault names its specimen.
    """
    book, findings = Working(record=working), Findings()
    share = document.fastener_count * document.shear_planes
    kept = [(i, each) for i, each in enumerate(document.specimens) if each.excluded is None]
    tests = _tests(document, kept, findings)
    moduli = _moduli(tests, share, book)
    loads = np.array([each.maximum / share for each in tests])
    strength, steps = _strength(loads, document, book)
    if strength.characteristic is None or not strength.characteristic > 0:
        reason = strength.reason or "the scatter is too great for the distribution chosen"
        findings.miss(f"characteristic strength: {reason.replace('coupon', 'specimen')}.")
    slips = np.array([k for k in moduli if k is not None])
    if not slips.size:
        findings.miss("slip modulus: no specimen has the slips at a tenth and four tenths of the load; enter readings.")
    _cautions(tests, slips, findings)
    modulus = float(slips.mean()) if slips.size else None
    if modulus is not None:
        book.begin("Slip modulus")
        book.step("Mean slip modulus", "k_s", "sum(k)/n", {"k": (slips, "N/mm"), "n": (slips.size, "")}, "N/mm", CODE)
    return {
        **document.head,
        "verdict": "not proven" if findings.missing else "pass",
        "utilisation": None,
        "governing": _governing(strength.characteristic, modulus, len(tests)),
        "n": len(tests),
        "shear_resistance": strength.characteristic,
        "mean": strength.mean_stress,
        "standard_deviation": strength.deviation_stress,
        "variation": strength.variation,
        "factor": strength.factor,
        "slip_modulus": modulus,
        "slip_modulus_deviation": float(slips.std(ddof=1)) if slips.size > 1 else None,
        "specimens": _listed(document.specimens, tests, moduli, share),
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "steps": [*book.steps[: steps[0]], *_as_loads(book.steps[slice(*steps)]), *book.steps[steps[1] :]],
        "values_used": {"materials": {}, "adhesives": {}, "fasteners": {}},
        "engine": ENGINE,
    }


def _tests(document: LoadSlipDocument, kept: Sequence[tuple[int, Specimen]], findings: Findings) -> list[Tested]:
    """Greatest load and slips of every specimen; the reference load is the estimate where it is near the mean."""
    faults: list[Fault] = []
    greatest = []
    for index, each in kept:
        try:
            greatest.append(_maximum(each))
        except InputError as error:
            faults.append(Fault(f"specimens[{index}].readings", str(error)))
    if faults:
        raise DocumentError(faults)
    mean, estimate = float(np.mean(greatest)), document.estimated
    if estimate is not None and abs(estimate - mean) > NEAR * estimate:
        findings.caution(
            "estimated load",
            f"The mean of the greatest loads differs from the estimate by more than {NEAR * 100:g} %: a tenth and four "
            "tenths are taken of each test's own greatest load.",
        )
        estimate = None
    return [
        Tested(index, most, estimate or most, *_slips(each, estimate or most))
        for (index, each), most in zip(kept, greatest, strict=True)
    ]


def _maximum(each: Specimen) -> float:
    if each.readings is None:
        assert each.maximum is not None
        return each.maximum
    return load_slip.greatest_load([load for load, _ in each.readings], [slip for _, slip in each.readings])


def _slips(each: Specimen, reference: float) -> tuple[float, float]:
    if each.readings is None:
        return (np.nan, np.nan) if each.v01 is None or each.v04 is None else (each.v01, each.v04)
    try:
        loads, slips = [load for load, _ in each.readings], [slip for _, slip in each.readings]
        found = [load_slip.slip_at(loads, slips, part * reference) for part in (0.1, 0.4)]
    except InputError:
        return np.nan, np.nan
    return found[0], found[1]


def _moduli(tests: Iterable[Tested], share: int, book: Working) -> list[float | None]:
    """Slip modulus of every test, of one fastener and plane; None where its slips are not known or do not grow."""
    book.begin("Slip modulus of each test")
    found: list[float | None] = []
    for each in tests:
        if not each.v04 - each.v01 > READABLE:
            found.append(None)
            continue
        writer = book if len(found) < WRITTEN_OUT else Working(record=False)
        given = {
            "F_max": (each.maximum, "N"),
            "v_04": (each.v04, "mm"),
            "v_01": (each.v01, "mm"),
            "n": (float(share), ""),
        }
        title = f"Specimen {each.index + 1}"
        found.append(
            writer.step(title, f"k_{each.index + 1}", "0.4*F_max/(4/3*(v_04 - v_01))/n", given, "N/mm", f"{CODE} 8.5")
        )
    return found


def _strength(loads: limits.Values, document: LoadSlipDocument, book: Working) -> tuple[limits.Limit, tuple[int, int]]:
    """The characteristic load by the statistics of coupons, and which steps say so."""
    before = len(book.steps)
    try:
        found = limits.find(loads, document.statistic, book)
    except InputError as error:
        raise DocumentError([Fault("specimens", str(error))]) from error
    return found, (before, len(book.steps))


def _as_loads(steps: Sequence[dict[str, Any]]) -> list[dict[str, Any]]:
    """Steps written for stresses of coupons, read as loads of specimens: their MPa are N."""

    def words(text: str) -> str:
        for old, new in (("stresses", "loads"), ("coupons", "specimens"), ("coupon", "specimen")):
            text = text.replace(old, new)
        return text

    def unit(name: str) -> str:
        return "N" if name == "MPa" else name

    return [
        {
            **step,
            "title": words(step["title"]),
            "note": words(step["note"]),
            "unit": unit(step["unit"]),
            "values": {name: {**each, "unit": unit(each["unit"])} for name, each in step["values"].items()},
        }
        for step in steps
    ]


def _cautions(tests: Sequence[Tested], slips: limits.Values, findings: Findings) -> None:
    if 0 < slips.size < len(tests):
        findings.caution(
            "slip modulus",
            f"It is the mean of {slips.size} of {len(tests)} specimens; the others have no usable slips.",
        )
    if len(tests) < 5:
        findings.caution(
            "number of tests", "Few tests give a low characteristic value: at least 5, better 10, are usual."
        )


def _listed(
    specimens: Sequence[Specimen], tests: Sequence[Tested], moduli: Sequence[float | None], share: int
) -> list[dict[str, object]]:
    known = {each.index: (each, k) for each, k in zip(tests, moduli, strict=True)}
    listed: list[dict[str, object]] = []
    for index, each in enumerate(specimens):
        test, modulus = known.get(index, (None, None))
        listed.append(
            {
                "index": index,
                "name": each.name,
                "excluded": each.excluded,
                "load": None if test is None else test.maximum / share,
                "reference": None if test is None else test.reference / share,
                "v01": None if test is None or np.isnan(test.v01) else test.v01,
                "v04": None if test is None or np.isnan(test.v04) else test.v04,
                "slip_modulus": modulus,
                "curve": _curve(each, share),
            }
        )
    return listed


def _curve(each: Specimen, share: int) -> dict[str, list[float]] | None:
    """The readings for the drawing, load of one fastener and plane; of very many the ends of every short stretch."""
    if each.readings is None:
        return None
    load, slip = np.asarray(each.readings, dtype=float).T
    if load.size > DRAWN:
        parts = np.array_split(np.arange(load.size), DRAWN // 2)
        ends = [part[pick(load[part])] for part in parts for pick in (np.argmin, np.argmax)]
        chosen = np.unique([0, *ends, load.size - 1])
        load, slip = load[chosen], slip[chosen]
    return {"slip": slip.tolist(), "load": (load / share).tolist()}


def _governing(strength: float | None, modulus: float | None, count: int) -> str:
    load = "no characteristic load" if strength is None else f"characteristic load {units.show(strength, 'force')}"
    slip = "" if modulus is None else f", slip modulus {units.show(modulus, 'stiffness')}"
    return f"{load}{slip}, one fastener and shear plane, from {count} {'specimen' if count == 1 else 'specimens'}"
