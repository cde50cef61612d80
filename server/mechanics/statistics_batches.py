r"""Whether several batches may be taken as one sample: the k-sample Anderson-Darling test.

The statistic depends on the order of the results only; they may be in any one unit (MPa here).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError

LEVELS = {
    # level: coefficients of the critical value, Scholz and Stephens (1987), Table 2
    0.25: (0.675, -0.245, -0.105),
    0.10: (1.281, 0.250, -0.305),
    0.05: (1.645, 0.678, -0.362),
    0.025: (1.960, 1.149, -0.391),
    0.01: (2.326, 1.822, -0.396),
}
FEWEST = 4


@dataclass(frozen=True)
class BatchTest:
    """The statistic ADK, its critical value ADC at ``level``, and the standard deviation the latter is made with."""

    statistic: float
    critical: float
    level: float
    deviation: float

    @property
    def pooled(self) -> bool:
        """Whether nothing speaks against taking the batches as one sample."""
        return self.statistic <= self.critical


def k_sample_anderson_darling(batches: Sequence[ArrayLike], *, level: float = 0.05) -> BatchTest:
    r"""Test of the hypothesis that all batches come from one population, whichever it is.

    .. math:: ADK = \frac{n-1}{n^2(k-1)} \sum_{i=1}^k \frac{1}{n_i} \sum_{j=1}^L h_j
       \frac{(n F_{ij} - n_i H_j)^2}{H_j (n - H_j) - n h_j/4}, \qquad
       ADC = 1 + \sigma_n \Bigl(b_0 + \frac{b_1}{\sqrt{k-1}} + \frac{b_2}{k-1}\Bigr)

    over the L different results, with h how often one occurs, H (and F within a batch) how many are lower plus half of
    those that are equal; ties are counted so. At 5 % the bracket is 1.645 + 0.678/sqrt(k-1) - 0.362/(k-1).

    Parameters
    ----------
    batches : sequence of array_like
        The results of each batch [MPa]; at least two batches, none empty, at least 4 results in all.
    level : float
        Probability of telling batches apart that are alike [-]; one of 0.25, 0.10, 0.05, 0.025, 0.01.

    Returns
    -------
    BatchTest
        ADK [-], ADC [-], the level [-] and sigma_n [-].

    Raises
    ------
    InputError
        If there are fewer than two batches, one is empty, there are fewer than 4 results or they are all alike, or the
        level is none of those.

    Notes
    -----
    ADK is the statistic of Scholz and Stephens with midranks, divided by k - 1. The critical value interpolates
    asymptotic points; with batches of fewer than about five results it is approximate, and the test seldom tells
    batches apart.

    References
    ----------
    .. [1] CMH-17-1G (2012), Volume 1, 8.3.2.2 (k-sample Anderson-Darling test).
    .. [2] F. W. Scholz and M. A. Stephens, "K-sample Anderson-Darling tests", J. Amer. Statist. Assoc. 82 (1987),
       918-924, equation (7).

    Examples
    --------
    >>> found = k_sample_anderson_darling([[21.4, 22.6, 20.8, 23.1], [18.2, 20.1, 19.6, 19.4], [22.0, 21.0, 22.8]])
    >>> round(found.statistic, 3), round(found.critical, 3), found.pooled
    (2.184, 1.84, False)
    """
    groups = [np.asarray(batch, dtype=float).ravel() for batch in batches]
    k = len(groups)
    if k < 2:
        raise InputError("batches", f"there is {k} batch; comparing batches needs at least two.")
    if any(group.size == 0 for group in groups):
        raise InputError("batches", "a batch holds no result; leave it out.")
    if level not in LEVELS:
        raise InputError("level", f"level is {level:g}; choose one of {', '.join(f'{each:g}' for each in LEVELS)}.")
    pooled = np.concatenate(groups)
    n = pooled.size
    if n < FEWEST:
        raise InputError("batches", f"the batches hold {n} results; comparing them needs at least {FEWEST}.")
    points, h = np.unique(pooled, return_counts=True)
    if points.size == 1:
        raise InputError("batches", "the results are all alike; comparing batches needs results that differ.")
    H = np.cumsum(h) - h / 2
    total = 0.0
    for group in groups:
        values = np.sort(group)
        F = (np.searchsorted(values, points, "left") + np.searchsorted(values, points, "right")) / 2
        total += float((h * (n * F - group.size * H) ** 2 / (H * (n - H) - n * h / 4)).sum()) / group.size
    statistic = (n - 1) / (n**2 * (k - 1)) * total
    deviation = _deviation(n, k, sum(1 / group.size for group in groups))
    b0, b1, b2 = LEVELS[level]
    critical = 1 + deviation * (b0 + b1 / math.sqrt(k - 1) + b2 / (k - 1))
    return BatchTest(statistic, critical, level, deviation)


def _deviation(n: int, k: int, S: float) -> float:
    """The standard deviation of ADK; S is the sum of the batches' inverse sizes. Symbols as in the paper."""
    inverse = 1 / np.arange(1, n)
    T = float(inverse.sum())
    # g is the sum over i < j < n of 1 / ((n - i) j): for each j the inverses of n - i, i < j, summed
    below = np.cumsum(inverse[::-1])  # 1/(n-1), 1/(n-1) + 1/(n-2), ...
    g = float((below[:-1] * inverse[1:]).sum())
    a = (4 * g - 6) * (k - 1) + (10 - 6 * g) * S
    b = (2 * g - 4) * k**2 + 8 * T * k + (2 * g - 14 * T - 4) * S - 8 * T + 4 * g - 6
    c = (6 * T + 2 * g - 2) * k**2 + (4 * T - 4 * g + 6) * k + (2 * T - 6) * S + 4 * T
    d = (2 * T + 6) * k**2 - 4 * T * k
    variance = (a * n**3 + b * n**2 + c * n + d) / ((n - 1) * (n - 2) * (n - 3) * (k - 1) ** 2)
    return math.sqrt(max(variance, 0.0))
