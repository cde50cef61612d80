r"""The two-parameter Weibull distribution: maximum likelihood, and an exact lower tolerance limit.

Everything is worked on the logarithms :math:`y = \ln x`, which then follow the smallest-extreme-value distribution with
location :math:`u = \ln(\text{scale})` and spread :math:`b = 1/\text{shape}`. Stresses in MPa; any one unit will do.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError, positive

MOST_SHAPE = 1e12
"""A larger shape says that there is no scatter."""
POINTS = 600  # of the quadrature over the spread; half as many give the same nine digits from three results on


@dataclass(frozen=True)
class WeibullFit:
    """What the maximum of the likelihood gave: ``scale`` in the unit of the results, ``shape`` without unit."""

    scale: float
    shape: float

    @property
    def location(self) -> float:
        """u, the logarithm of the scale."""
        return math.log(self.scale)


def fit_weibull(values: ArrayLike) -> WeibullFit:
    r"""Maximum-likelihood scale and shape of a Weibull sample.

    The shape is the root of

    .. math:: \frac{\sum x_i^\beta \ln x_i}{\sum x_i^\beta} - \frac{1}{\beta} - \frac{1}{n}\sum \ln x_i = 0,
       \quad \eta = \Bigl(\tfrac{1}{n}\sum x_i^\beta\Bigr)^{1/\beta}

    Parameters
    ----------
    values : array_like
        The results [MPa], each above zero, at least two of them different.

    Returns
    -------
    WeibullFit
        Scale [MPa] and shape [-].

    Raises
    ------
    InputError
        If there are fewer than two results, one is not above zero, or they are all alike.

    Notes
    -----
    The left side grows with the shape, so the root is the only one. The maximum-likelihood shape is too large on
    average in small samples; the tolerance limit below takes that into account exactly.

    References
    ----------
    .. [1] J. F. Lawless, "Statistical Models and Methods for Lifetime Data", 2nd ed., Wiley 2003, 5.2.

    Examples
    --------
    >>> fit = fit_weibull([18.2, 20.1, 19.4, 14.8, 20.6, 17.3])
    >>> round(fit.scale, 3), round(fit.shape, 3)
    (19.233, 12.433)
    """
    x = positive("values", values, "MPa").ravel()
    if x.size < 2:
        raise InputError("values", f"values holds {x.size} result; enter at least two.")
    y = np.log(x)
    centred = y - y.mean()
    spread = float(centred.std())
    if spread < 1 / MOST_SHAPE:
        raise InputError("values", "the results are all alike; a Weibull shape needs results that differ.")

    def slope(shape: float) -> float:
        weight = np.exp(shape * (centred - centred.max()))
        return float(np.dot(weight, centred) / weight.sum()) - 1 / shape

    shape = _root(slope, math.pi / (math.sqrt(6) * spread))
    top = float(centred.max())
    log_scale = float(y.mean()) + top + math.log(float(np.exp(shape * (centred - top)).mean())) / shape
    return WeibullFit(math.exp(log_scale), shape)


def _root(slope: Callable[[float], float], start: float) -> float:
    """The root of a function that grows, bracketed by doubling from the estimate of moments."""
    from scipy import optimize

    low = high = start
    while slope(low) > 0:
        low /= 2
    while slope(high) < 0:
        high *= 2
    return low if low == high else float(optimize.brentq(slope, low, high, xtol=1e-300, rtol=1e-14))


def weibull_factor(values: ArrayLike, fit: WeibullFit, *, coverage: float, confidence: float) -> float:
    r"""Exact one-sided tolerance factor of a Weibull sample, by the conditional method.

    The limit is :math:`\eta \exp(-k/\beta)` with the fitted scale :math:`\eta` and shape :math:`\beta`. Given
    the ancillaries :math:`a_i = (y_i - \hat u)/\hat b`, the pivotal :math:`z = \hat b/b` has the density

    .. math:: h(z) \propto z^{n-2} \exp\Bigl(z \sum a_i\Bigr) \Bigl(\sum e^{a_i z}\Bigr)^{-n}

    and k solves, with P the regularised lower incomplete gamma function and :math:`w = \ln(-\ln p)` for the coverage p,

    .. math:: \int_0^\infty h(z)\, P\Bigl(n,\; e^{w + k z} \sum e^{a_i z}\Bigr) dz = \gamma

    Parameters
    ----------
    values : array_like
        The results [MPa], as given to ``fit_weibull``.
    fit : WeibullFit
        What ``fit_weibull`` made of them: scale [MPa], shape [-].
    coverage : float
        Share of all results that shall lie above the limit [-].
    confidence : float
        Probability that they do [-].

    Returns
    -------
    float
        k [-].

    Raises
    ------
    InputError
        If a share is not between 0 and 1.

    Notes
    -----
    Exact for a complete sample of any size, coverage and confidence, without tables or random numbers; only the
    integral is numerical (Gauss-Legendre where the density is not negligible). The factors V of CMH-17 are fitted to
    the average of such limits over samples and hold for 90 and 99 % coverage at 95 % confidence only; in their words
    :math:`k = -w + V/\sqrt n`.

    References
    ----------
    .. [1] J. F. Lawless, "Construction of tolerance bounds for the extreme-value and Weibull distributions",
       Technometrics 17 (1975), 255-261.
    .. [2] J. F. Lawless, "Statistical Models and Methods for Lifetime Data", 2nd ed., Wiley 2003, 5.2 and appendix E.

    Examples
    --------
    >>> x = [18.2, 20.1, 19.4, 14.8, 20.6, 17.3]
    >>> fit = fit_weibull(x)
    >>> k = weibull_factor(x, fit, coverage=0.95, confidence=0.75)
    >>> round(k, 3), round(fit.scale * math.exp(-k / fit.shape), 2)
    (4.772, 13.1)
    """
    from scipy import optimize, special

    for field, share in (("coverage", coverage), ("confidence", confidence)):
        if not 0 < share < 1:
            raise InputError(field, f"{field} is {share:g}; enter a share between 0 and 1, such as 0.95.")
    y = np.log(positive("values", values, "MPa").ravel())
    n = y.size
    z, weight, log_sum = _spread_density((y - fit.location) * fit.shape)
    w = math.log(-math.log(coverage))

    def excess(k: float) -> float:
        gamma = special.gammainc(n, np.exp(np.minimum(w + k * z + log_sum, 700.0)))
        return float(np.dot(weight, gamma)) - confidence

    low, high = -1.0, max(1.0, -2 * w)
    while excess(low) > 0:
        low *= 2
    while excess(high) < 0:
        high *= 2
    return float(optimize.brentq(excess, low, high, xtol=1e-12, rtol=1e-13))


Nodes = NDArray[np.float64]


@lru_cache(maxsize=1)
def _rule() -> tuple[Nodes, Nodes]:
    """Nodes and weights of Gauss and Legendre on -1 to 1."""
    nodes, weights = np.polynomial.legendre.leggauss(POINTS)
    return nodes, weights


def _spread_density(a: Nodes) -> tuple[Nodes, Nodes, Nodes]:
    """Nodes z of the quadrature, the weights h(z) dz (which sum to 1), and the logarithm of the sum of exp(a z)."""
    n, total, top = a.size, float(a.sum()), float(a.max())

    def log_sums(z: Nodes) -> Nodes:
        return np.asarray(top * z + np.log(np.exp(np.outer(z, a - top)).sum(axis=1)))

    def log_density(t: Nodes) -> Nodes:  # of t = ln z, in which small samples have no edge at z = 0
        z = np.exp(t)
        return np.asarray((n - 1) * t + z * total - n * log_sums(z))

    coarse = np.linspace(math.log(1e-13), math.log(200.0), 1500)
    heights = log_density(coarse)
    seen = np.flatnonzero(heights > heights.max() - 45)  # e^-45: nothing that nine digits could notice
    low, high = coarse[max(seen[0] - 1, 0)], coarse[min(seen[-1] + 1, coarse.size - 1)]
    nodes, weights = _rule()
    t = low + (high - low) * (nodes + 1) / 2
    logs = log_density(t)
    density = weights * np.exp(logs - logs.max())
    z = np.exp(t)
    return z, np.asarray(density / density.sum()), log_sums(z)
