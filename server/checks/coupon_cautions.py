"""What a careful tester would ask about a set of coupons beside its characteristic value."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from server import units
from server.checks.coupon_limits import NAMES, Limit, Values, alike
from server.checks.resistance import Findings
from server.documents.coupons import Coupon, CouponsDocument, label

INDICATIVE, PROVISIONAL = 5, 10
GREAT_VARIATION = 0.20  # common practice: above it the process is to be mended first
ADHESIVE_SHARE = 25.0  # per cent; common practice: 20 to 25
TIMES_NEIGHBOURS = 4.0  # slips of unit: lbf for N 4.4, psi for kPa 6.9, kgf for N 9.8, a decimal 10
TYPED_DIGITS = 4  # a load read to fewer digits may well occur twice
SAME_DIGITS = 5
MOST_ALIKE = 8  # cautions of one sort; more would only be skipped
DOUBTFUL_SCATTER = 0.05

Kept = Sequence[tuple[int, Coupon]]


def add_cautions(
    document: CouponsDocument, kept: Kept, x: Values, limit: Limit, result: Mapping[str, object], findings: Findings
) -> None:
    """Everything that deserves a word; the order is the order in which the sheet prints them."""
    _number(len(kept), findings)
    _scatter(document, x, limit, findings)
    _tests(document, kept, result, findings)
    _failures(kept, result, findings)
    _slips(document, kept, x, findings)
    _records(kept, findings)
    _excluded(document, findings)


def _named(kept: Kept, places: Sequence[int]) -> str:
    """'coupon 3', 'coupons 3 and 8', 'coupons 1, 2, 3 and 5 more'."""
    coupons = dict(kept)
    if len(places) == 1:
        return label(places[0], coupons[places[0]])
    if len(places) > 8:
        return f"coupons {', '.join(str(place + 1) for place in places[:6])} and {len(places) - 6} more"
    return f"coupons {', '.join(str(p + 1) for p in places[:-1])} and {places[-1] + 1}"


def _begin(text: str) -> str:
    """A sentence's beginning; names keep their capitals."""
    return text[:1].upper() + text[1:]


def _number(n: int, findings: Findings) -> None:
    if n < INDICATIVE:
        findings.caution(
            "number of coupons",
            f"{n} {'coupon is' if n == 1 else 'coupons are'} fewer than {INDICATIVE}: the value is an indication only. "
            f"Break more; {PROVISIONAL} or more may carry an approved value.",
        )
    elif n < PROVISIONAL:
        findings.caution(
            "number of coupons",
            f"{n} coupons are fewer than {PROVISIONAL}: the value is provisional. Small numbers cost strength; see "
            "what more coupons would buy.",
        )


def _scatter(document: CouponsDocument, x: Values, limit: Limit, findings: Findings) -> None:
    statistic, variation = document.statistic, limit.variation
    if variation is not None and variation > GREAT_VARIATION:
        findings.caution(
            "scatter",
            f"The coefficient of variation is {variation * 100:.3g} %, above {GREAT_VARIATION * 100:g} %: find out "
            "what differs from coupon to coupon and mend the process before you design with the value.",
            answer=True,
        )
    if x.size > 1 and alike(x):
        findings.caution(
            "scatter",
            f"All {x.size} coupons have the same strength to the last digit: they were hardly read one by one. Look "
            "the readings up.",
            answer=True,
        )
    known = statistic.known_scatter
    own = limit.deviation if statistic.distribution == "lognormal" else variation
    if known is None:
        least = statistic.floor
        if least and own is not None and own < least:
            findings.caution(
                "least scatter",
                f"The coupons scatter by {own:.3g}; {least:g} is reckoned with instead, as EN 14358 asks, because few "
                "coupons of one day show less scatter than the work will have.",
            )
    elif own is not None and own > known * _most_likely(x.size):
        findings.caution(
            "scatter",
            f"These coupons scatter by {own:.3g}, more than the known {known:g} would let {x.size} of them with "
            f"{100 - DOUBTFUL_SCATTER * 100:g} % probability: the known scatter does not seem to hold here.",
            answer=True,
        )
    value = limit.characteristic
    if value is not None and not value > 0:
        findings.caution(
            "scatter",
            "The scatter is so great that the characteristic value comes out at or below 0: no value can be used. Mend "
            "the process, break more coupons, or see whether another distribution fits.",
            answer=True,
        )


def _most_likely(n: int) -> float:
    """How much greater than the true one the scatter of n results is with a probability of 5 % only."""
    from scipy import special

    return float(np.sqrt(special.chdtri(n - 1, DOUBTFUL_SCATTER) / (n - 1)))


def _tests(document: CouponsDocument, kept: Kept, result: Mapping[str, object], findings: Findings) -> None:
    places = [each["index"] for each in _listed(result["outliers"])]
    if places:
        findings.caution(
            "outlier",
            f"{_begin(_named(kept, places))} {'lies' if len(places) == 1 else 'lie'} "
            "farther from the others than chance explains (largest normed residual, 5 %). Look for the cause. A coupon "
            "is excluded only for a cause that can be named, and then something must stop that cause on the job.",
            answer=True,
        )
    name = NAMES[document.statistic.distribution]
    for key in ("fit", "fit_shapiro_wilk"):
        fit = result[key]
        assert isinstance(fit, Mapping)
        if fit["accepted"] is False:
            findings.caution(
                "fit",
                f"The coupons do not look {name} ({fit['test']}, p = {fit['p_value']:.2g}, below 0.05): the "
                "characteristic value rests on a distribution that they do not show. Look for outliers and mixed "
                "batches first, then try another distribution.",
                answer=True,
            )
    batches = result["batches"]
    assert isinstance(batches, Mapping)
    listed = _listed(batches["batches"])
    if batches["pooled"] is False:
        means = ", ".join(f"{each['batch'] or 'without a name'} {_mpa(document, each['mean'])}" for each in listed)
        findings.caution(
            "batches",
            f"The batches are not one population ({document.statistic.level * 100:g} %); their means: {means}. Find "
            "out what differs, or find a value for each batch and use the lowest.",
            answer=True,
        )
    small = [str(each["batch"] or "without a name") for each in listed if each["n"] < 3]
    if len(listed) > 1 and small:
        findings.caution(
            "batches",
            f"Fewer than 3 coupons in {', '.join(small[:10])}{' and more' if len(small) > 10 else ''}: so few hardly "
            "tell a batch apart.",
        )
    if len(listed) == 1 and listed[0]["batch"] and len(kept) > 1:
        findings.caution(
            "batches", "All coupons are of one batch: what differs from batch to batch is not in this value."
        )
    if len(listed) > 1 and any(not each["batch"] for each in listed):
        findings.caution("batches", "Some coupons name no batch; they were taken together as one more batch.")


def _listed(value: object) -> list[dict[str, Any]]:
    assert isinstance(value, list)
    return value


def _mpa(document: CouponsDocument, value: object) -> str:
    assert isinstance(value, float)
    return units.show(value, "stress", document.display)


def _failures(kept: Kept, result: Mapping[str, object], findings: Findings) -> None:
    summary = result["failure"]
    if not isinstance(summary, Mapping):
        findings.caution(
            "failure pattern",
            "Where the coupons broke is not recorded: without it nobody can tell a sound bond from a peeled one.",
        )
        return
    if summary["adhesive"] > ADHESIVE_SHARE:
        findings.caution(
            "failure pattern",
            f"On average {summary['adhesive']:.3g} % of the bonded area failed by adhesion, above {ADHESIVE_SHARE:g} "
            "%: it peeled off the surface. Long-term and wet strength cannot be trusted, however strong it was; mend "
            "the surface preparation.",
            answer=True,
        )
    peeled = [i for i, coupon in kept if coupon.failure is not None and coupon.failure.adhesive > ADHESIVE_SHARE]
    if peeled and not summary["adhesive"] > ADHESIVE_SHARE:
        findings.caution(
            "failure pattern",
            f"More than {ADHESIVE_SHARE:g} % adhesive failure in {_named(kept, peeled)}: find out what was different.",
        )
    unread = [i for i, coupon in kept if coupon.failure is None]
    if unread:
        findings.caution("failure pattern", f"Where it broke is not recorded for {_named(kept, unread)}.")


def _slips(document: CouponsDocument, kept: Kept, x: Values, findings: Findings) -> None:
    """Readings that look like a slip of the pen: asked about, never changed."""
    copied = _copied(document, kept)
    for places in copied[:MOST_ALIKE]:
        what = "stress" if dict(kept)[places[0]].measured == "stress" else "load"
        findings.caution(
            "identical readings",
            f"The same {what} to {SAME_DIGITS} digits in {_named(kept, places)}: was one copied from the other?",
        )
    if len(copied) > MOST_ALIKE:
        findings.caution("identical readings", f"{len(copied) - MOST_ALIKE} more readings occur several times.")
    far = _far_off(x)
    for place, middle in far[:MOST_ALIKE]:
        index, coupon = kept[place]
        stress = float(x[place])
        much = f"{stress / middle:.3g} times" if stress > middle else f"only {stress / middle:.2g} times"
        findings.caution(
            "far from its neighbours",
            f"{_begin(label(index, coupon))} gives {_mpa(document, stress)}, {much} the middle of the others "
            f"({_mpa(document, middle)}): a slip of unit, decimal or size?",
            answer=True,
        )
    if len(far) > MOST_ALIKE:
        findings.caution(
            "far from its neighbours", f"{len(far) - MOST_ALIKE} more coupons lie as far from the others.", answer=True
        )
    nought = [index for (index, _), stress in zip(kept, x, strict=True) if stress == 0]
    if nought:
        findings.caution(
            "no strength",
            f"A strength of 0 is entered for {_named(kept, nought)}: is that what was meant?",
            answer=True,
        )


def _far_off(x: Values) -> list[tuple[int, float]]:
    """Places of stresses several times the median of the others, or a small part of it, with that median."""
    if x.size < 3:
        return []
    order = np.argsort(x, kind="stable")
    ranked, found = x[order], []
    for rank, place in enumerate(order):
        others = np.delete(ranked, rank)
        middle = float((others[(others.size - 1) // 2] + others[others.size // 2]) / 2)
        if ranked[rank] > TIMES_NEIGHBOURS * middle > 0 or 0 < ranked[rank] < middle / TIMES_NEIGHBOURS:
            found.append((int(place), middle))
    return sorted(found)


def _copied(document: CouponsDocument, kept: Kept) -> list[list[int]]:
    """Groups of coupons whose readings agree in five digits, where they were read to enough digits to tell."""
    listed = document.raw.get("coupons")
    alike_readings: dict[tuple[str, str], list[int]] = defaultdict(list)
    for index, coupon in kept:
        field = coupon.measured
        value = getattr(coupon, field)
        typed = listed[index].get(field) if isinstance(listed, list) and isinstance(listed[index], Mapping) else value
        if _digits(typed) >= TYPED_DIGITS and value:
            alike_readings[field, f"{value:.{SAME_DIGITS}g}"].append(index)
    return [places for places in alike_readings.values() if len(places) > 1]


def _digits(typed: object) -> int:
    """How many digits a reading was typed with: 4 for '5.210 kN', 3 for 0.121."""
    text = f"{typed:.15g}" if isinstance(typed, float) else str(typed)
    number = re.match(r"\s*[+-]?([\d.,\s]*)", text.split("e")[0].split("E")[0])
    return len(re.sub(r"\D", "", number[1]).lstrip("0")) if number else 0


def _records(kept: Kept, findings: Findings) -> None:
    preparations = sorted({coupon.preparation.strip() for _, coupon in kept if coupon.preparation.strip()})
    if len(preparations) > 1:
        findings.caution(
            "mixed preparations",
            f"The coupons were prepared in {len(preparations)} ways ({', '.join(preparations[:6])}"
            f"{', ...' if len(preparations) > 6 else ''}): these are different joints. Make one set for each.",
            answer=True,
        )


def _excluded(document: CouponsDocument, findings: Findings) -> None:
    for index, coupon in enumerate(document.coupons):
        if coupon.excluded is None:
            continue
        cause = " ".join(coupon.excluded.split())
        shown = cause if len(cause) <= 200 else cause[:199] + "…"
        if coupon.prevented_by.strip():
            findings.caution(
                "excluded coupon",
                f"{_begin(label(index, coupon))} is excluded ({shown}). What now stops it on the job: "
                f"{' '.join(coupon.prevented_by.split())[:200]}",
            )
        else:
            findings.caution(
                "excluded coupon",
                f"{_begin(label(index, coupon))} is excluded ({shown}). The same can happen on the job: what now "
                "stops it? Both answers, with and without it, are shown.",
                answer=True,
            )
