r"""Results that stand apart from the others: the largest normed residual.

Residuals and critical values are dimensionless; results may be in any one unit (MPa here), or logarithms.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError

FEWEST = 3
LEVEL = 0.05
ALIKE = 1e-9
"""Results that differ by less than this part of their size have no scatter to be measured by."""


@dataclass(frozen=True)
class Outlier:
    """One result beyond the critical value: where it stands in the list, and how many standard deviations off."""

    index: int
    statistic: float
    critical: float


def grubbs_critical(n: int, *, level: float = LEVEL, two_sided: bool = True) -> float:
    r"""Critical value of the largest normed residual of a normal sample.

    .. math:: C = \frac{n-1}{\sqrt n} \sqrt{\frac{t^2}{n - 2 + t^2}}, \quad t = t_{1-\alpha/(2n);\,n-2}

    (one-sided: :math:`\alpha/n`).

    Parameters
    ----------
    n : int
        Number of results [-], at least 3.
    level : float
        Probability of calling an outlier in a sample that has none [-].
    two_sided : bool
        Whether outliers on both sides are looked for.

    Returns
    -------
    float
        C [-].

    Raises
    ------
    InputError
        If n is below 3, or the level is not between 0 and 1.

    References
    ----------
    .. [1] F. E. Grubbs, "Procedures for detecting outlying observations in samples", Technometrics 11 (1969), 1-21.
    .. [2] CMH-17-1G (2012), Volume 1, 8.3.3 (maximum normed residual).

    Examples
    --------
    >>> round(grubbs_critical(12), 3), round(grubbs_critical(12, two_sided=False), 3)
    (2.412, 2.285)
    """
    from scipy import special

    if n < FEWEST:
        raise InputError("n", f"n is {n}; the test for outliers needs at least {FEWEST} results.")
    if not 0 < level < 1:
        raise InputError("level", f"level is {level:g}; enter a probability between 0 and 1, such as 0.05.")
    t = float(special.stdtrit(n - 2, 1 - level / ((2 if two_sided else 1) * n)))
    return (n - 1) / math.sqrt(n) * math.sqrt(t * t / (n - 2 + t * t))


def largest_normed_residual(values: ArrayLike) -> tuple[int, float]:
    r"""Which result is farthest from the mean, in standard deviations: :math:`\max |x_i - \bar x| / s`.

    Parameters
    ----------
    values : array_like
        The results [MPa], or their logarithms [-]; at least 3.

    Returns
    -------
    tuple of int and float
        Its place in the list, from 0, and the residual [-]; residual 0 where the results are all alike.

    Raises
    ------
    InputError
        If there are fewer than three results.

    Examples
    --------
    >>> index, residual = largest_normed_residual([5.6, 6.3, 4.9, 5.8, 6.1, 5.2, 3.1, 5.9, 5.5, 6.0])
    >>> index, round(residual, 3)
    (6, 2.532)
    """
    x = np.asarray(values, dtype=float).ravel()
    if x.size < FEWEST:
        raise InputError("values", f"values holds {x.size} results; the test for outliers needs at least {FEWEST}.")
    size = float(np.abs(x).max())
    if not np.ptp(x) > ALIKE * size:
        return 0, 0.0
    x = x / size
    off = np.abs(x - x.mean())
    index = int(off.argmax())
    return index, float(off[index] / x.std(ddof=1))


def outliers(values: ArrayLike, *, level: float = LEVEL) -> list[Outlier]:
    r"""Every outlier by the largest normed residual, two-sided: tested, set aside, and the rest tested again.

    Parameters
    ----------
    values : array_like
        The results [MPa], or their logarithms [-].
    level : float
        Probability of calling an outlier in a sample that has none [-].

    Returns
    -------
    list of Outlier
        In the order in which they were found; each with the residual and the critical value of its own round. Empty
        where there are fewer than three results.

    Raises
    ------
    InputError
        If the level is not between 0 and 1.

    Notes
    -----
    The test supposes a normal sample. Two outliers close together can hide each other. An outlier is a question about
    its coupon, never a reason to drop it.

    References
    ----------
    .. [1] CMH-17-1G (2012), Volume 1, 8.3.3 (maximum normed residual, repeated until none is found).

    Examples
    --------
    >>> [found.index for found in outliers([5.6, 6.3, 4.9, 5.8, 6.1, 5.2, 3.1, 5.9, 5.5, 6.0])]
    [6]
    """
    x = np.asarray(values, dtype=float).ravel()
    left = list(range(x.size))
    found: list[Outlier] = []
    while len(left) >= FEWEST:
        place, residual = largest_normed_residual(x[left])
        critical = grubbs_critical(len(left), level=level)
        if not residual > critical:
            break
        found.append(Outlier(left.pop(place), residual, critical))
    return found
