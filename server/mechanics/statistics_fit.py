r"""Whether a sample looks like a normal, log-normal or Weibull one: Anderson-Darling and Shapiro-Wilk.

Log-normal is normal in the logarithms: give those. Statistics and probabilities are dimensionless; results may be in
any one unit (MPa here).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError, positive
from server.mechanics.statistics_weibull import WeibullFit

FEWEST = 3
MOST_SHAPIRO = 5000


@dataclass(frozen=True)
class FitTest:
    """One test of fit: its statistic, the statistic adjusted for the sample's size, and the probability of a larger."""

    test: str
    statistic: float
    adjusted: float
    p_value: float


def _sample(values: ArrayLike) -> NDArray[np.float64]:
    """Ordered results, reduced to the order of 1 so that neither unit nor offset costs digits."""
    x = np.sort(np.asarray(values, dtype=float).ravel())
    if x.size < FEWEST:
        raise InputError("values", f"values holds {x.size} results; a test of fit needs at least {FEWEST}.")
    if not np.isfinite(x).all():
        raise InputError("values", "values holds a number that is not finite; enter finite results.")
    middle, reach = x[x.size // 2], x[-1] - x[0]
    if not reach > 0:
        raise InputError("values", "the results are all alike; a test of fit needs results that differ.")
    return np.asarray((x - middle) / reach)


def _anderson_darling(log_below: NDArray[np.float64], log_above: NDArray[np.float64]) -> float:
    """The statistic, from the logarithms of F and 1 - F at the ordered results."""
    n = log_below.size
    i = np.arange(1, n + 1)
    return float(-n - np.mean((2 * i - 1) * (log_below + log_above[::-1])))


def anderson_darling_normal(values: ArrayLike) -> FitTest:
    r"""Anderson-Darling test of a normal distribution, mean and scatter found from the sample.

    .. math:: A^2 = -n - \frac1n \sum_{i=1}^n (2i-1)\,[\ln\Phi(z_i) + \ln(1-\Phi(z_{n+1-i}))],
       \quad A^{*2} = A^2 (1 + 0.75/n + 2.25/n^2)

    Parameters
    ----------
    values : array_like
        The results [MPa], or their logarithms [-]; at least 3, not all alike.

    Returns
    -------
    FitTest
        The statistic A2, the adjusted one, and its p-value [-].

    Raises
    ------
    InputError
        If there are fewer than three results, one is not finite, or they are all alike.

    Notes
    -----
    The p-value is the published approximation of the adjusted statistic's distribution, made for n of 8 and more;
    below, the test has little power whatever its p-value.

    References
    ----------
    .. [1] R. B. D'Agostino and M. A. Stephens (eds.), "Goodness-of-Fit Techniques", Dekker 1986, Table 4.9.

    Examples
    --------
    >>> found = anderson_darling_normal([1.92, 1.78, 2.05, 1.66, 1.84, 1.71, 1.97, 1.12, 1.88, 1.75, 1.80, 1.69])
    >>> round(found.statistic, 4), round(found.p_value, 4)
    (0.788, 0.0289)
    """
    from scipy import special

    x = _sample(values)
    n = x.size
    z = (x - x.mean()) / x.std(ddof=1)
    statistic = _anderson_darling(special.log_ndtr(z), special.log_ndtr(-z))
    adjusted = statistic * (1 + 0.75 / n + 2.25 / n**2)
    return FitTest("Anderson-Darling", statistic, adjusted, _p_normal(adjusted))


def _p_normal(a: float) -> float:
    if a < 0.2:
        p = 1 - math.exp(-13.436 + 101.14 * a - 223.73 * a**2)
    elif a < 0.34:
        p = 1 - math.exp(-8.318 + 42.796 * a - 59.938 * a**2)
    elif a < 0.6:
        p = math.exp(0.9177 - 4.279 * a - 1.38 * a**2)
    elif a < 10:
        p = math.exp(1.2937 - 5.709 * a + 0.0186 * a**2)
    else:
        p = 0.0
    return min(max(p, 0.0), 1.0)


def anderson_darling_weibull(values: ArrayLike, fit: WeibullFit) -> FitTest:
    r"""Anderson-Darling test of a two-parameter Weibull distribution, both found from the sample.

    With :math:`z_i = (x_i/\eta)^\beta` and :math:`F = 1 - e^{-z}`, the statistic A2 as for the normal distribution, and

    .. math:: A^{*2} = A^2 (1 + 0.2/\sqrt n), \quad p = \frac{1}{1 + \exp(-0.10 + 1.24 \ln A^{*2} + 4.48 A^{*2})}

    Parameters
    ----------
    values : array_like
        The results [MPa], each above zero; at least 3, not all alike.
    fit : WeibullFit
        The fitted scale [MPa] and shape [-].

    Returns
    -------
    FitTest
        The statistic A2, the adjusted one, and its p-value [-].

    Raises
    ------
    InputError
        If there are fewer than three results, one is not above zero, or they are all alike.

    Notes
    -----
    The formula of p is a curve through the published critical points between 1 and 25 %; outside it is a guide only.

    References
    ----------
    .. [1] CMH-17-1G (2012), Volume 1, 8.3.4 (goodness of fit, two-parameter Weibull).
    .. [2] R. B. D'Agostino and M. A. Stephens (eds.), "Goodness-of-Fit Techniques", Dekker 1986, Table 4.17.

    Examples
    --------
    >>> from server.mechanics.statistics_weibull import fit_weibull
    >>> x = [18.2, 20.1, 19.4, 14.8, 20.6, 17.3]
    >>> round(anderson_darling_weibull(x, fit_weibull(x)).statistic, 4)
    0.2283
    """
    _sample(values)
    x = np.sort(positive("values", values, "MPa").ravel())
    z = np.exp(np.clip(fit.shape * (np.log(x) - fit.location), -700.0, 700.0))
    statistic = _anderson_darling(np.log(-np.expm1(-z)), -z)
    adjusted = statistic * (1 + 0.2 / math.sqrt(x.size))
    odds = -0.10 + 1.24 * math.log(max(adjusted, 1e-300)) + 4.48 * adjusted
    return FitTest("Anderson-Darling", statistic, adjusted, 1 / (1 + math.exp(min(max(odds, -700.0), 700.0))))


def shapiro_wilk(values: ArrayLike) -> FitTest:
    r"""Shapiro-Wilk test of a normal distribution, in Royston's form for 3 to 5000 results.

    .. math:: W = \frac{(\sum a_i x_{(i)})^2}{\sum (x_i - \bar x)^2}

    with weights from the normal scores :math:`m_i = \Phi^{-1}((i - 3/8)/(n + 1/4))`, the outermost by polynomials in
    :math:`1/\sqrt n`; ln(1 - W) is then brought to a standard normal variable.

    Parameters
    ----------
    values : array_like
        The results [MPa], or their logarithms [-]; 3 to 5000, not all alike.

    Returns
    -------
    FitTest
        W twice (there is no adjusted form), and its p-value [-].

    Raises
    ------
    InputError
        If there are fewer than 3 or more than 5000 results, one is not finite, or they are all alike.

    Notes
    -----
    Ties, as of coarsely read gauges, lower W.

    References
    ----------
    .. [1] P. Royston, "Remark AS R94: a remark on algorithm AS 181: the W-test for normality", Appl. Statist. 44
       (1995), 547-551.

    Examples
    --------
    >>> found = shapiro_wilk([1.92, 1.78, 2.05, 1.66, 1.84, 1.71, 1.97, 1.12, 1.88, 1.75, 1.80, 1.69])
    >>> round(found.statistic, 4), round(found.p_value, 4)
    (0.8168, 0.0146)
    """
    x = _sample(values)
    if x.size > MOST_SHAPIRO:
        raise InputError("values", f"values holds {x.size} results; this test takes at most {MOST_SHAPIRO}.")
    a = _weights(x.size)
    centred = x - x.mean()
    # 1 - W from the distance between the results and their regression: no digits are lost where W is near 1.
    a, b = a / math.sqrt(float(a @ a)), centred / math.sqrt(float(centred @ centred))
    cosine = float(a @ b)
    off = float(((b - cosine * a) ** 2).sum())
    return FitTest("Shapiro-Wilk", 1 - off, 1 - off, _p_shapiro(off, x.size))


def _weights(n: int) -> NDArray[np.float64]:
    from scipy import special

    if n == 3:
        return np.array([-math.sqrt(0.5), 0.0, math.sqrt(0.5)])
    m = special.ndtri((np.arange(1, n + 1) - 0.375) / (n + 0.25))
    square, u = float(m @ m), 1 / math.sqrt(n)
    last = m[-1] / math.sqrt(square) + _polynomial(u, 0.221157, -0.147981, -2.07119, 4.434685, -2.706056)
    a = np.empty(n)
    if n > 5:
        second = m[-2] / math.sqrt(square) + _polynomial(u, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633)
        scale = (square - 2 * m[-1] ** 2 - 2 * m[-2] ** 2) / (1 - 2 * last**2 - 2 * second**2)
        a[:] = m / math.sqrt(scale)
        a[[1, -2]] = -second, second
    else:
        a[:] = m / math.sqrt((square - 2 * m[-1] ** 2) / (1 - 2 * last**2))
    a[[0, -1]] = -last, last
    return a


def _polynomial(u: float, *coefficients: float) -> float:
    """c1 u + c2 u^2 + ..."""
    return sum(c * u**power for power, c in enumerate(coefficients, 1))


def _p_shapiro(off: float, n: int) -> float:
    from scipy import special

    if n == 3:
        angle = math.asin(math.sqrt(max(1 - off, 0.0))) - math.asin(math.sqrt(0.75))
        return min(max(6 / math.pi * angle, 0.0), 1.0)
    y = math.log(max(off, 1e-300))
    if n <= 11:
        gamma = -2.273 + 0.459 * n
        if y >= gamma:
            return 0.0
        y = -math.log(gamma - y)
        mean = 0.544 + _polynomial(n, -0.39978, 0.025054, -6.714e-4)
        scatter = math.exp(1.3822 + _polynomial(n, -0.77857, 0.062767, -0.0020322))
    else:
        u = math.log(n)
        mean = -1.5861 + _polynomial(u, -0.31082, -0.083751, 0.0038915)
        scatter = math.exp(-0.4803 + _polynomial(u, -0.082676, 0.0030302))
    return float(special.ndtr(-(y - mean) / scatter))
