"""What the statistical tests say of a set of coupons: outliers, fit of the distribution, batches."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from server.checks.coupon_limits import NAMES, Values, alike
from server.documents.coupons import Coupon, Statistic
from server.mechanics import statistics_fit as fit
from server.mechanics.statistics_batches import FEWEST as FEWEST_IN_BATCHES
from server.mechanics.statistics_batches import k_sample_anderson_darling
from server.mechanics.statistics_outliers import LEVEL, Outlier, grubbs_critical, largest_normed_residual, outliers
from server.mechanics.statistics_weibull import fit_weibull
from server.working import Working

ACCEPTED = 0.05
RESIDUAL = "F. E. Grubbs, Technometrics 11 (1969) 1; CMH-17-1G, Volume 1, 8.3.3"
FIT = "R. B. D'Agostino and M. A. Stephens, Goodness-of-Fit Techniques (1986)"
WEIBULL = "CMH-17-1G (2012), Volume 1, 8.3.4"
SHAPIRO = "P. Royston, Appl. Statist. 44 (1995) 547"
BATCHES = "CMH-17-1G (2012), Volume 1, 8.3.2.2; F. W. Scholz and M. A. Stephens, JASA 82 (1987) 918"
NO_FIT: dict[str, object] = {"test": None, "statistic": None, "p_value": None, "accepted": None}


def as_tested(x: Values, statistic: Statistic) -> Values:
    """Logarithms where the distribution is of the logarithms, else the stresses."""
    return np.log(x) if statistic.distribution == "lognormal" and (x > 0).all() else x


def find_outliers(x: Values, places: Sequence[int], statistic: Statistic, book: Working) -> list[dict[str, object]]:
    """Every outlier; ``places`` says where each stress stands in the document's list."""
    values = as_tested(x, statistic)
    if values.size < 3 or alike(x):
        return []
    book.begin("Outliers")
    found = outliers(values)
    index, residual = largest_normed_residual(values)
    shown = [*found] or [Outlier(index, residual, grubbs_critical(values.size))]
    of = "logarithms" if values is not x else "stresses"
    for number, each in enumerate(shown):
        count = values.size - number
        told = "beyond the critical value" if found else "within the critical value"
        book.note(
            f"Largest normed residual of {count} {of}",
            f"Coupon {places[each.index] + 1} lies {each.statistic:.4g} standard deviations from the mean, {told} "
            f"{each.critical:.4g} (two-sided, {LEVEL * 100:g} %).",
            each.statistic,
            "",
            RESIDUAL,
            symbol="MNR",
        )
    return [
        {"index": places[each.index], "statistic": each.statistic, "critical": each.critical, "of": of}
        for each in found
    ]


def find_fit(x: Values, statistic: Statistic, book: Working) -> tuple[dict[str, object], dict[str, object]]:
    """Anderson-Darling for the distribution chosen, and Shapiro-Wilk where that is normal or log-normal."""
    if statistic.distribution == "nonparametric":
        return _none("no distribution was supposed"), _none("no distribution was supposed")
    if x.size < fit.FEWEST:
        return _none("fewer than 3 coupons"), _none("fewer than 3 coupons")
    if alike(x):
        return _none("the coupons are all alike"), _none("the coupons are all alike")
    book.begin("Fit of the distribution")
    if statistic.distribution == "weibull":
        first = _tell(
            fit.anderson_darling_weibull(x, fit_weibull(x)), "CMH-17-1G (2012), Volume 1, 8.3.4", statistic, book
        )
        return first, _none("made for the normal distribution")
    values = as_tested(x, statistic)
    return (
        _tell(fit.anderson_darling_normal(values), FIT, statistic, book),
        _tell(fit.shapiro_wilk(values), SHAPIRO, statistic, book),
    )


def _none(why: str) -> dict[str, object]:
    return {**NO_FIT, "note": f"not tested: {why}"}


def _tell(found: fit.FitTest, source: str, statistic: Statistic, book: Working) -> dict[str, object]:
    accepted = found.p_value >= ACCEPTED
    p = "below 0.0001" if found.p_value < 1e-4 else f"{found.p_value:.3g}"
    text = (
        f"A sample of a {NAMES[statistic.distribution]} distribution is as far off with a probability of {p}: "
        f"{'accepted' if accepted else 'not accepted'} at {ACCEPTED * 100:g} %."
    )
    symbol = "W" if found.test == "Shapiro-Wilk" else "A2"
    book.note(found.test, text, found.statistic, "", source, symbol=symbol)
    return {
        "test": found.test,
        "statistic": found.statistic,
        "adjusted": found.adjusted,
        "p_value": found.p_value,
        "accepted": accepted,
        "level": ACCEPTED,
    }


def find_batches(x: Values, coupons: Sequence[Coupon], statistic: Statistic, book: Working) -> dict[str, object]:
    """Whether the batches may be taken as one sample; ``pooled`` None where that was not tested."""
    by_batch: dict[str, list[float]] = {}
    for coupon, stress in zip(coupons, x, strict=True):
        by_batch.setdefault(coupon.batch.strip(), []).append(float(stress))
    listed = [
        {"batch": name, "n": len(values), "mean": sum(values) / len(values), "minimum": min(values)}
        for name, values in by_batch.items()
    ]
    result: dict[str, object] = {
        "pooled": None,
        "statistic": None,
        "critical": None,
        "level": statistic.level,
        "batches": listed,
    }
    if len(by_batch) < 2:
        return {**result, "note": "not tested: no batches are named" if "" in by_batch else "not tested: one batch"}
    if x.size < FEWEST_IN_BATCHES:
        return {**result, "note": f"not tested: fewer than {FEWEST_IN_BATCHES} coupons"}
    if alike(x):
        return {**result, "note": "not tested: the coupons are all alike"}
    book.begin("Batches")
    found = k_sample_anderson_darling(list(by_batch.values()), level=statistic.level)
    sizes = ", ".join(f"{name or 'without a name'}: {len(values)}" for name, values in by_batch.items())
    book.note(
        "k-sample Anderson-Darling",
        f"{len(by_batch)} batches ({sizes}); critical value {found.critical:.4g} at {found.level * 100:g} %: "
        f"{'nothing speaks against taking them as one' if found.pooled else 'they are not one population'}.",
        found.statistic,
        "",
        BATCHES,
        symbol="ADK",
    )
    return {**result, "pooled": found.pooled, "statistic": found.statistic, "critical": found.critical}
