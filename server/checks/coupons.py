"""Kind "coupons": a set of broken coupons, from the document to its characteristic value."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server import ENGINE, units
from server.checks import coupon_limits as limits
from server.checks.coupon_cautions import add_cautions
from server.checks.coupon_limits import Limit, Values
from server.checks.coupon_plot import probability_plot
from server.checks.coupon_tests import find_batches, find_fit, find_outliers
from server.checks.resistance import Findings
from server.documents.coupons import Coupon, CouponsDocument, Failure, label, stress_of
from server.working import Working

WRITTEN_OUT = 60  # stresses that are written step by step; a longer list fills no sheet
NOT_CHECKED = (
    "whether the coupons stand for the joint: adherends, surface preparation, cure, bond-line thickness, size",
    "temperature, moisture, lasting load, fatigue and workmanship: each needs its own factor with its own tests",
    "whether the coupon's test measures what a check needs: a mean over a lap is no shear strength of a long bond",
    "calibration of the test machine or gauge, and rate of loading",
)


def run(document: CouponsDocument, *, working: bool = True) -> dict[str, object]:
    """Find the characteristic value of a set of coupons as contract.md's kind "coupons" says.

    ``working`` false leaves the steps out.
    """
    book, findings, statistic = Working(record=working), Findings(), document.statistic
    kept = [(index, coupon) for index, coupon in enumerate(document.coupons) if coupon.counts]
    places, coupons = [index for index, _ in kept], [coupon for _, coupon in kept]
    every = _stresses(document.coupons, book)
    x = every[places]
    limit = limits.find(x, statistic, book)
    found: dict[str, object] = {
        "factor": limit.factor,
        "characteristic": limit.characteristic,
        "needed_for_1_percent_gain": limits.needed_for_gain(limit, book),
        **limits.what_if(limit),
        **limit.extra,
        "design_from_tests": limits.en_1990(limit, statistic, book),
        "outliers": find_outliers(x, places, statistic, book),
    }
    found["fit"], found["fit_shapiro_wilk"] = find_fit(x, statistic, book)
    found["batches"] = find_batches(x, coupons, statistic, book)
    found["failure"] = _failures(coupons)
    found["probability_plot"] = probability_plot(x, places, limit, statistic)
    found["without_exclusions"] = _without_exclusions(every, document, limit, book)
    if limit.reason:
        findings.miss(f"characteristic value: {limit.reason}.")
    elif limit.characteristic is None or not limit.characteristic > 0:
        findings.miss("characteristic value above 0: the scatter is too great for the distribution chosen.")
    add_cautions(document, kept, x, limit, found, findings)
    return {
        **document.head,
        "verdict": "not proven" if findings.missing else "pass",
        "utilisation": None,
        "governing": _governing(document, limit, findings),
        "statistic": _statistic(document),
        **_summary(limit, x),
        **found,
        "coupons": _listed(document, every, found["outliers"]),
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "steps": book.steps,
        "values_used": {"materials": {}, "adhesives": {}, "fasteners": {}},
        "engine": ENGINE,
    }


def _stresses(coupons: Sequence[Coupon], book: Working) -> Values:
    """The stress of every coupon [MPa]; the first of them written out where they were found from loads."""
    book.begin("Stresses")
    reckoned = [index for index, coupon in enumerate(coupons) if coupon.stress is None]
    written = set(reckoned[:WRITTEN_OUT])
    found = [
        _stress(index, coupon, book) if index in written else stress_of(coupon) for index, coupon in enumerate(coupons)
    ]
    if len(reckoned) > WRITTEN_OUT:
        book.note("Stresses of the other coupons", f"{len(reckoned) - WRITTEN_OUT} more, found in the same way.")
    return np.array(found)


def _stress(index: int, coupon: Coupon, book: Working) -> float:
    values: dict[str, tuple[float, str]] = {}
    if coupon.load is not None:
        above, values["F"] = "F", (coupon.load, "N")
    else:
        assert coupon.gauge is not None
        assert coupon.ram_area is not None
        above, values["p"], values["A_ram"] = "p*A_ram", (coupon.gauge, "MPa"), (coupon.ram_area, "mm2")
    if coupon.area is not None:
        below, values["A"] = "A", (coupon.area, "mm2")
    else:
        assert coupon.width is not None
        assert coupon.length is not None
        below, values["b"], values["l"] = "(b*l)", (coupon.width, "mm"), (coupon.length, "mm")
    title = f"Stress of {label(index, coupon)}{'' if coupon.counts else ', excluded'}"
    return book.step(title, f"x_{index + 1}", f"{above}/{below}", values, "MPa")


def _statistic(document: CouponsDocument) -> dict[str, object]:
    chosen = document.statistic
    return {
        "distribution": chosen.distribution,
        "coverage": chosen.coverage,
        "confidence": chosen.confidence,
        "scatter": "unknown" if chosen.known_scatter is None else chosen.known_scatter,
        "least_scatter": chosen.floor,
        "level": chosen.level,
    }


def _summary(limit: Limit, x: Values) -> dict[str, object]:
    return {
        "n": limit.n,
        "mean": limit.mean,
        "standard_deviation": limit.deviation,
        "scatter_used": limit.used,
        "variation": limit.variation,
        "minimum": float(x.min()),
        "maximum": float(x.max()),
        "mean_stress": limit.mean_stress,
        "standard_deviation_stress": limit.deviation_stress,
        "share_of_mean": _share(limit),
        "of_logarithms": limit.of_logs,
    }


def _share(limit: Limit) -> float | None:
    """The characteristic value over the mean stress."""
    if limit.characteristic is None or not limit.mean_stress > 0:
        return None
    return limit.characteristic / limit.mean_stress


def _without_exclusions(every: Values, document: CouponsDocument, limit: Limit, book: Working) -> object:
    """The same with every coupon in it; None where none is excluded."""
    if limit.n == every.size:
        return None
    silent = Working(record=False)
    whole = limits.find(every, document.statistic, silent)
    book.begin("With the excluded coupons")
    if whole.characteristic is not None:
        book.note(
            "Characteristic value with every coupon",
            f"All {whole.n} coupons, none excluded: the same method, mean {whole.mean_stress:.5g} MPa.",
            whole.characteristic,
            "MPa",
            symbol="f_k_all",
        )
    return {
        **_summary(whole, every),
        "factor": whole.factor,
        "characteristic": whole.characteristic,
        "outliers": find_outliers(every, range(every.size), document.statistic, silent),
        "reason": whole.reason,
    }


SHARES = tuple(Failure.model_fields)


def _failures(coupons: Sequence[Coupon]) -> dict[str, object] | None:
    """Mean shares of where the coupons broke [%], of those for which it is recorded."""
    told = [coupon.failure for coupon in coupons if coupon.failure is not None]
    if not told:
        return None
    shares = {name: sum(getattr(failure, name) for failure in told) / len(told) for name in SHARES}
    return {**shares, "coupons": len(told), "most_adhesive": max(failure.adhesive for failure in told)}


def _listed(document: CouponsDocument, every: Values, outliers: object) -> list[dict[str, object]]:
    assert isinstance(outliers, list)
    beyond = {each["index"] for each in outliers}
    return [
        {
            "index": index,
            "name": coupon.name,
            "stress": float(stress),
            "batch": coupon.batch,
            "excluded": coupon.excluded,
            "outlier": index in beyond,
            "failure": None if coupon.failure is None else coupon.failure.model_dump(),
        }
        for index, (coupon, stress) in enumerate(zip(document.coupons, every, strict=True))
    ]


def _governing(document: CouponsDocument, limit: Limit, findings: Findings) -> str:
    if limit.characteristic is None:
        return findings.missing[0]
    statistic = document.statistic
    return (
        f"characteristic value {units.show(limit.characteristic, 'stress')} from {limit.n} "
        f"{'coupon' if limit.n == 1 else 'coupons'}: {statistic.coverage * 100:g} % lie above it, stated with "
        f"{statistic.confidence * 100:g} % confidence ({limits.NAMES[statistic.distribution]})"
    )
