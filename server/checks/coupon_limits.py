"""The characteristic value of a set of stresses, step by step, by the distribution that was chosen."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from server.documents.coupons import LEAST_SCATTER, Statistic
from server.mechanics import statistics_tolerance as tolerance
from server.mechanics.statistics_outliers import ALIKE
from server.mechanics.statistics_weibull import WeibullFit, fit_weibull, weibull_factor
from server.working import Working
from server.working.record import Given

NONCENTRAL = "ISO 16269-6:2014, one-sided, by the noncentral t distribution"
KNOWN = "ISO 16269-6:2014, one-sided, standard deviation known"
EN_14358 = "EN 14358:2016, 3.2.2"
LAWLESS = "J. F. Lawless, Technometrics 17 (1975) 255, conditional method"
RANKS = "S. S. Wilks, Ann. Math. Stat. 12 (1941) 91; ranks as in CMH-17-1G, Volume 1, 8.5"
NAMES = {
    "normal": "normal",
    "lognormal": "log-normal",
    "weibull": "Weibull",
    "nonparametric": "distribution-free",
}

Values = NDArray[np.float64]
Ahead = Callable[[int, float], float]
"""The value so many coupons and such a share of the scatter would give, at the same mean."""


@dataclass(frozen=True)
class Limit:
    """A characteristic value with what it is made of; ``characteristic`` None where there is none, for ``reason``.

    ``mean``, ``deviation`` and ``used`` (the scatter reckoned with) are those of the logarithms for "lognormal".
    """

    n: int
    mean: float
    deviation: float | None
    mean_stress: float
    deviation_stress: float | None
    of_logs: bool = False
    used: float | None = None
    used_symbol: str = "s"
    factor: float | None = None
    characteristic: float | None = None
    reason: str = ""
    ahead: Ahead | None = None
    extra: dict[str, object] = field(default_factory=dict)

    @property
    def variation(self) -> float | None:
        """The coefficient of variation of the stresses."""
        if self.deviation_stress is None or not self.mean_stress > 0:
            return None
        return self.deviation_stress / self.mean_stress


def alike(x: Values) -> bool:
    """Whether the results differ by no more than rounding."""
    return bool(np.ptp(x) <= ALIKE * np.abs(x).max())


def find(x: Values, statistic: Statistic, book: Working) -> Limit:
    """Return the characteristic value of the stresses ``x`` [MPa], with every step in ``book``."""
    book.begin("Mean and scatter")
    of_logs = statistic.distribution == "lognormal"
    mean_stress, deviation_stress = _moments(x, book if not of_logs else Working(record=False))
    if of_logs and not (x > 0).all():
        return Limit(x.size, mean_stress, deviation_stress, mean_stress, deviation_stress, reason=_no_logarithm(x))
    mean, deviation = _log_moments(x, book) if of_logs else (mean_stress, deviation_stress)
    plain = Limit(x.size, mean, deviation, mean_stress, deviation_stress, of_logs)
    book.begin("Characteristic value")
    if statistic.distribution == "weibull":
        return _weibull(x, plain, statistic, book)
    if statistic.distribution == "nonparametric":
        return _ranked(x, plain, statistic, book)
    return _normal(x, plain, statistic, book)


def _no_logarithm(x: Values) -> str:
    return f"{int((x <= 0).sum())} of the strengths is 0 and has no logarithm"


def _moments(x: Values, book: Working) -> tuple[float, float | None]:
    given: dict[str, Given] = {"x": (x, "MPa"), "n": (x.size, "")}
    mean = book.step("Mean of the stresses", "m", "sum(x)/n", given, "MPa")
    if x.size < tolerance.FEWEST:
        return mean, None
    given = {**given, "m": (mean, "MPa")}
    deviation = book.step("Standard deviation of the stresses", "s", "sqrt(sum((x - m)**2)/(n - 1))", given, "MPa")
    deviation = 0.0 if alike(x) else deviation
    if mean > 0:
        book.step("Coefficient of variation", "V", "s/m", {"s": (deviation, "MPa"), "m": (mean, "MPa")})
    return mean, deviation


def _log_moments(x: Values, book: Working) -> tuple[float, float | None]:
    given: dict[str, Given] = {"x": (x, "MPa"), "n": (x.size, "")}
    mean = book.step("Mean of the logarithms", "m_y", "sum(log(x))/n", given, source=f"{EN_14358}, formula (1)")
    if x.size < tolerance.FEWEST:
        return mean, None
    deviation = book.step(
        "Standard deviation of the logarithms",
        "s_y",
        "sqrt(sum((log(x) - m_y)**2)/(n - 1))",
        {**given, "m_y": (mean, "")},
        source=f"{EN_14358}, formula (3)",
    )
    return mean, 0.0 if alike(x) else deviation


def _shares(statistic: Statistic) -> dict[str, float]:
    return {"coverage": statistic.coverage, "confidence": statistic.confidence}


def _in_words(statistic: Statistic) -> str:
    return f"{statistic.coverage * 100:g} % lie above it, stated with {statistic.confidence * 100:g} % confidence"


def one_coupon(statistic: Statistic) -> str:
    """Why one coupon gives no value."""
    return (
        f"one coupon shows no scatter, so no value can be stated of which {_in_words(statistic)}. Needed: more coupons "
        "of the same bond (at least 5, better 10), or a scatter known beforehand (statistic.scatter)"
    )


# --- normal and log-normal --------------------------------------------------------------------------------------------


def _normal(x: Values, plain: Limit, statistic: Statistic, book: Working) -> Limit:
    known, n, of_logs = statistic.known_scatter, x.size, plain.of_logs
    if known is None and n < tolerance.FEWEST:
        return _with(plain, reason=one_coupon(statistic))
    symbol, used = _scatter_used(plain, statistic, book)
    if not used > 0:
        return _with(plain, used=used, reason=_no_scatter(plain, statistic))
    k = _factor(n, statistic, book)
    source = f"{EN_14358}, formula (5)" if of_logs else NONCENTRAL.split(",")[0]
    given = {**_mean_of(plain), "k": (k, ""), symbol: (used, _unit(plain))}
    value = book.step("Characteristic value", "f_k", _lower(plain, "k", symbol), given, "MPa", source)
    floor = statistic.floor * (1.0 if of_logs else plain.mean)
    own = used if known is not None else (plain.deviation or 0.0)

    def ahead(count: int, share: float) -> float:
        limit = plain.mean - _plain_factor(count, statistic) * max(own * share, floor)
        return math.exp(limit) if of_logs else limit

    return _with(plain, used=used, used_symbol=symbol, factor=k, characteristic=value, ahead=ahead)


def _unit(plain: Limit) -> str:
    return "" if plain.of_logs else "MPa"


def _mean_of(plain: Limit) -> dict[str, tuple[float, str]]:
    return {"m_y" if plain.of_logs else "m": (plain.mean, _unit(plain))}


def _lower(plain: Limit, factor: str, scatter: str) -> str:
    """The formula of a value so many times the scatter below the mean."""
    return f"exp(m_y - {factor}*{scatter})" if plain.of_logs else f"m - {factor}*{scatter}"


def _scatter_used(plain: Limit, statistic: Statistic, book: Working) -> tuple[str, float]:
    """Symbol and size of the scatter reckoned with: the coupons' own or the known one, no less than the least."""
    unit, known = _unit(plain), statistic.known_scatter
    symbol, own = ("s_y", plain.deviation or 0.0) if plain.of_logs else ("s", plain.deviation or 0.0)
    if known is not None and plain.of_logs:
        symbol, own = "s_0", known
        book.note("Scatter known beforehand", "Standard deviation of the logarithms, as given.", known, symbol=symbol)
    elif known is not None:
        symbol = "s_0"
        given = {"V_0": (known, ""), "m": (plain.mean, "MPa")}
        own = book.step("Scatter known beforehand", "s_0", "V_0*m", given, "MPa", "coefficient of variation as given")
    if not statistic.floor:
        return symbol, own
    if plain.of_logs:
        text, given = f"max({symbol}, s_min)", {symbol: (own, ""), "s_min": (statistic.floor, "")}
    else:
        text = f"max({symbol}, V_min*m)"
        given = {symbol: (own, "MPa"), "V_min": (statistic.floor, ""), "m": (plain.mean, "MPa")}
    source = "EN 14358:2016, 3.2.2: least scatter" if math.isclose(statistic.floor, LEAST_SCATTER) else "as given"
    return "s_k", book.step("Scatter reckoned with", "s_k", text, given, unit, source)


def _no_scatter(plain: Limit, statistic: Statistic) -> str:
    if not plain.mean_stress > 0 and (statistic.floor or statistic.known_scatter):
        return "every coupon has the strength 0, so there is nothing to take a share of"
    return (
        f"the {plain.n} coupons have the same strength to the last digit, so they show no scatter and no limit below "
        "their mean. Needed: results read one by one, or a least scatter (statistic.least_scatter, 0.05 in EN 14358)"
    )


def _plain_factor(n: int, statistic: Statistic) -> float:
    if statistic.known_scatter is not None:
        return tolerance.factor_known(n, **_shares(statistic))
    return tolerance.factor(n, **_shares(statistic))


def _factor(n: int, statistic: Statistic, book: Working) -> float:
    if statistic.known_scatter is None:
        k = tolerance.factor(n, **_shares(statistic))
        text = (
            f"For {n} coupons, so that {_in_words(statistic)}: the {statistic.confidence * 100:g} % quantile of the "
            f"noncentral t distribution with {n - 1} degrees of freedom and noncentrality z_p times the root of n, "
            "divided by the root of n. Found to nine digits; no table is read."
        )
        book.note("Tolerance factor", text, k, "", NONCENTRAL, symbol="k")
        return k
    from scipy import special

    z = {"z_p": statistic.coverage, "z_c": statistic.confidence}
    quantiles = {name: float(special.ndtri(share)) for name, share in z.items()}
    for name, share in z.items():
        book.note(
            f"Quantile of the normal distribution at {share * 100:g} %",
            "From the inverse of the normal distribution function.",
            quantiles[name],
            symbol=name,
        )
    given = {"z_p": (quantiles["z_p"], ""), "z_c": (quantiles["z_c"], ""), "n": (n, "")}
    return book.step("Tolerance factor", "k", "z_p + z_c/sqrt(n)", given, "", KNOWN)


# --- Weibull ----------------------------------------------------------------------------------------------------------


def _weibull(x: Values, plain: Limit, statistic: Statistic, book: Working) -> Limit:
    if x.size < tolerance.FEWEST:
        return _with(plain, reason=one_coupon(statistic))
    if not (x > 0).all():
        return _with(plain, reason=_no_logarithm(x))
    if alike(x):
        return _with(plain, reason=_no_scatter(plain, statistic).replace(_LEAST, ""))
    fit = fit_weibull(x)
    book.note("Weibull shape", "Maximum of the likelihood.", fit.shape, "", LAWLESS.split(",")[0], symbol="beta")
    book.note("Weibull scale", "Maximum of the likelihood.", fit.scale, "MPa", LAWLESS.split(",")[0], symbol="eta")
    k = weibull_factor(x, fit, **_shares(statistic))
    text = (
        f"So that {_in_words(statistic)}: exact lower limit of the quantile given the ancillaries of this sample, by "
        "one integral over the spread (Gauss-Legendre, 600 points); no table and no random numbers. The sample's own "
        "pattern enters, so the factor is not that of n alone."
    )
    book.note("Tolerance factor", text, k, "", LAWLESS, symbol="k")
    given = {"eta": (fit.scale, "MPa"), "k": (k, ""), "beta": (fit.shape, "")}
    value = book.step("Characteristic value", "f_k", "eta*exp(-k/beta)", given, "MPa", LAWLESS)
    return _with(
        plain,
        used=1 / fit.shape,
        factor=k,
        characteristic=value,
        ahead=_weibull_ahead(fit, k, x.size, statistic.coverage),
        extra={"weibull": {"shape": fit.shape, "scale": fit.scale}},
    )


_LEAST = ", or a least scatter (statistic.least_scatter, 0.05 in EN 14358)"


def _weibull_ahead(fit: WeibullFit, k: float, n: int, coverage: float) -> Ahead:
    """More coupons bring the limit closer to the quantile as one over the root of their number, to a first order."""
    quantile = -math.log(-math.log(coverage))

    def ahead(count: int, share: float) -> float:
        further = quantile + (k - quantile) * math.sqrt(n / count)
        return fit.scale * math.exp(-further * share / fit.shape)

    return ahead


# --- distribution-free ------------------------------------------------------------------------------------------------


def _ranked(x: Values, plain: Limit, statistic: Statistic, book: Working) -> Limit:
    shares = _shares(statistic)
    r = tolerance.rank(x.size, **shares)
    if not r:
        needed = tolerance.fewest_for_rank(1, **shares)
        return _with(
            plain,
            reason=(
                f"{x.size} coupons are too few for a distribution-free value of which {_in_words(statistic)}: even the "
                f"lowest of them is none. Needed: {needed} coupons, or a distribution that fits them"
            ),
            extra={"rank": None, "needed_for_a_value": needed},
        )
    value = float(np.sort(x)[r - 1])
    text = (
        f"The number {r} from below of {x.size} results: the highest rank at which, by the binomial distribution, "
        f"{_in_words(statistic)}."
    )
    book.note("Rank", text, r, "", RANKS, symbol="r")
    book.note("Characteristic value", "The result of that rank.", value, "MPa", RANKS, symbol="f_k")
    return _with(plain, characteristic=value, extra={"rank": r})


def _with(plain: Limit, **more: object) -> Limit:
    return Limit(**{**plain.__dict__, **more})


# --- what else the numbers say ----------------------------------------------------------------------------------------

GAIN = 0.01
FARTHEST = 10_000  # further coupons that anybody might think of


def needed_for_gain(limit: Limit, book: Working) -> int | None:
    """How many further coupons raise the value by 1 % at the same mean and scatter; None where no number does."""
    ahead, value, n = limit.ahead, limit.characteristic, limit.n
    if ahead is None or value is None or not value > 0:
        return None
    goal = value * (1 + GAIN)
    if ahead(n + FARTHEST, 1.0) < goal:
        return None
    low, high = 0, 1
    while ahead(n + high, 1.0) < goal:
        low, high = high, high * 2
    while low + 1 < high:
        middle = (low + high) // 2
        low, high = (low, middle) if ahead(n + middle, 1.0) >= goal else (middle, high)
    text = "The fewest further coupons with which the factor of so many, at the same mean and scatter, gives 1 % more."
    book.note("Further coupons for 1 % more", text, high)
    return high


def what_if(limit: Limit) -> dict[str, object]:
    """What more coupons, and what less scatter, would buy at the same mean."""
    ahead, value = limit.ahead, limit.characteristic
    if ahead is None or value is None or not value > 0:
        return {"more_coupons": [], "less_scatter": []}

    def row(count: int, share: float) -> dict[str, object]:
        found = ahead(count, share)
        return {"n": count, "scatter": share, "characteristic": found, "gain": found / value - 1}

    n = limit.n
    return {
        "more_coupons": [row(count, 1.0) for count in sorted({n + 1, max(n + 1, 10), 2 * n})],
        "less_scatter": [row(n, share) for share in (0.75, 0.5)],
    }


FEWEST_EN_1990 = {True: 1, False: 3}
FEWEST_DESIGN = {True: 1, False: 4}
EN_1990 = "EN 1990:2002+A1:2005, Annex D"


def en_1990(limit: Limit, statistic: Statistic, book: Working) -> dict[str, object] | None:
    """Characteristic and design value directly from tests, conversion factor 1; None where the annex has no factor."""
    known = statistic.known_scatter is not None
    if limit.used is None or not limit.used > 0 or limit.n < FEWEST_EN_1990[known]:
        return None
    if statistic.distribution not in ("normal", "lognormal"):
        return None
    book.begin("EN 1990 Annex D")
    found: dict[str, object] = {"source": EN_1990, "conversion_factor": 1.0}
    for what, probability, clause, least, names in (
        ("characteristic", 0.05, "D7.2, Table D1", FEWEST_EN_1990, ("k_n", "X_k")),
        ("design", 0.001, "D7.3, Table D2", FEWEST_DESIGN, ("k_d_n", "X_d")),
    ):
        found[what] = found[f"{what}_factor"] = None
        if limit.n < least[known]:
            continue
        k = tolerance.prediction_factor(limit.n, probability=probability, known=known)
        text = f"One further coupon falls below with a probability of {probability * 100:g} %; scatter "
        text += "known beforehand (normal distribution)." if known else "found from the coupons (t distribution)."
        book.note(f"Factor of the {what} value", text, k, "", f"{EN_1990}, {clause}", symbol=names[0])
        given = {**_mean_of(limit), names[0]: (k, ""), limit.used_symbol: (limit.used, _unit(limit))}
        formula = _lower(limit, names[0], limit.used_symbol)
        value = book.step(f"{what.capitalize()} value", names[1], formula, given, "MPa", f"{EN_1990}, {clause}")
        found[what], found[f"{what}_factor"] = value, k
    return found
