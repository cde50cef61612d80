r"""Tolerance factors: how far below the mean of a sample its characteristic value lies.

A lower tolerance limit :math:`m - k s` is exceeded by at least the share *coverage* of all that could be made, with the
stated *confidence*. Factors are exact (noncentral t), not read from a table. Everything here is dimensionless.
"""

from __future__ import annotations

import math

from server.errors import InputError

FEWEST = 2
"""A scatter needs two results."""


def _count(n: int, least: int) -> int:
    if n < least:
        raise InputError("n", f"n is {n}; at least {least} results are needed.")
    return n


def _share(field: str, value: float) -> float:
    if not 0 < value < 1:
        raise InputError(field, f"{field} is {value:g}; enter a share between 0 and 1, such as 0.95.")
    return value


def factor(n: int, *, coverage: float, confidence: float) -> float:
    r"""One-sided tolerance factor of a normal sample whose scatter is found from the sample itself.

    .. math:: k = t'_{\gamma;\,n-1,\,\delta} / \sqrt{n}, \quad \delta = z_p \sqrt{n}

    with :math:`t'` the quantile of the noncentral t distribution at the confidence :math:`\gamma`.

    Parameters
    ----------
    n : int
        Number of results [-], at least 2.
    coverage : float
        Share of all results that shall lie above the limit [-], such as 0.95.
    confidence : float
        Probability that they do [-], such as 0.75.

    Returns
    -------
    float
        k [-].

    Raises
    ------
    InputError
        If n is below 2, or a share is not between 0 and 1.

    Notes
    -----
    Holds for independent results of one normal population; for the logarithms of a log-normal one. Accurate to about
    1e-9 of the confidence.

    References
    ----------
    .. [1] ISO 16269-6:2014, one-sided statistical tolerance intervals, standard deviation unknown.
    .. [2] EN 14358:2016, 3.2.2.

    Examples
    --------
    >>> round(factor(10, coverage=0.95, confidence=0.75), 4)
    2.1037
    """
    from scipy import special

    _count(n, FEWEST)
    z = float(special.ndtri(_share("coverage", coverage)))
    _share("confidence", confidence)
    k = float(special.nctdtrit(n - 1, z * math.sqrt(n), confidence)) / math.sqrt(n)
    if not math.isfinite(k):
        raise InputError("n", f"no factor was found for {n} results; choose a smaller coverage or confidence.")
    return k


def factor_known(n: int, *, coverage: float, confidence: float) -> float:
    r"""One-sided tolerance factor of a normal sample whose scatter is known beforehand.

    .. math:: k = z_p + z_\gamma / \sqrt{n}

    Parameters
    ----------
    n : int
        Number of results [-], at least 1.
    coverage : float
        Share of all results that shall lie above the limit [-].
    confidence : float
        Probability that they do [-].

    Returns
    -------
    float
        k [-], to be multiplied by the known scatter.

    Raises
    ------
    InputError
        If n is below 1, or a share is not between 0 and 1.

    References
    ----------
    .. [1] ISO 16269-6:2014, one-sided statistical tolerance intervals, standard deviation known.

    Examples
    --------
    >>> round(factor_known(4, coverage=0.95, confidence=0.75), 4)
    1.9821
    """
    from scipy import special

    _count(n, 1)
    z_p = float(special.ndtri(_share("coverage", coverage)))
    z_c = float(special.ndtri(_share("confidence", confidence)))
    return z_p + z_c / math.sqrt(n)


def prediction_factor(n: int, *, probability: float, known: bool) -> float:
    r"""Factor of EN 1990 Annex D: one further result falls below the value with ``probability``.

    .. math:: k_n = t_{1-P;\,n-1} \sqrt{1 + 1/n} \quad\text{or, scatter known,}\quad k_n = z_{1-P} \sqrt{1 + 1/n}

    Parameters
    ----------
    n : int
        Number of results [-]; at least 2, with known scatter at least 1.
    probability : float
        Probability of a lower result [-]: 0.05 for a characteristic value, 0.001 for a design value.
    known : bool
        Whether the scatter is known beforehand.

    Returns
    -------
    float
        k_n or k_d,n [-].

    Raises
    ------
    InputError
        If n is too small, or the probability is not between 0 and 1.

    Notes
    -----
    Bayesian prediction with vague prior. The printed tables D1 and D2 are rounded and differ by up to 0.02 (D1) and
    about 1 % (D2, whose entries follow from 0.1 %; its limit for many tests is 3.04, that of 0.1 % is 3.09).

    References
    ----------
    .. [1] EN 1990:2002+A1:2005, Annex D, D7.2 and D7.3, Tables D1 and D2.

    Examples
    --------
    >>> round(prediction_factor(10, probability=0.05, known=False), 2)
    1.92
    """
    from scipy import special

    _count(n, 1 if known else FEWEST)
    share = 1 - _share("probability", probability)
    quantile = special.ndtri(share) if known else special.stdtrit(n - 1, share)
    return float(quantile) * math.sqrt(1 + 1 / n)


def mean_factor(n: int, *, confidence: float) -> float:
    r"""Factor of the lower confidence limit of a mean, scatter found from the sample.

    .. math:: k_m = t_{\gamma;\,n-1} / \sqrt{n}

    Parameters
    ----------
    n : int
        Number of results [-], at least 2.
    confidence : float
        Probability that the true mean lies above the limit [-].

    Returns
    -------
    float
        k_m [-].

    Raises
    ------
    InputError
        If n is below 2, or the confidence is not between 0 and 1.

    References
    ----------
    .. [1] EN 14358:2016, 3.3 (mean of a stiffness).

    Examples
    --------
    >>> round(mean_factor(10, confidence=0.75), 4)
    0.2222
    """
    from scipy import special

    return float(special.stdtrit(_count(n, FEWEST) - 1, _share("confidence", confidence))) / math.sqrt(n)


def rank(n: int, *, coverage: float, confidence: float) -> int:
    r"""Which of the ordered results, counted from the lowest, is a distribution-free tolerance limit; 0 for none.

    The largest r for which at least r of n results fall in the lowest share :math:`1-p` with the confidence:

    .. math:: P[\mathrm{Bin}(n, 1-p) \ge r] = I_{1-p}(r, n-r+1) \ge \gamma

    Parameters
    ----------
    n : int
        Number of results [-], at least 1.
    coverage : float
        Share of all results that shall lie above the limit [-].
    confidence : float
        Probability that they do [-].

    Returns
    -------
    int
        The rank [-].

    Raises
    ------
    InputError
        If n is below 1, or a share is not between 0 and 1.

    References
    ----------
    .. [1] S. S. Wilks, "Determination of sample sizes for setting tolerance limits", Ann. Math. Stat. 12 (1941), 91-96.
    .. [2] CMH-17-1G (2012), Volume 1, 8.5 (ranks for an unknown distribution).

    Examples
    --------
    >>> rank(28, coverage=0.95, confidence=0.75), rank(27, coverage=0.95, confidence=0.75)
    (1, 0)
    """
    from scipy import special

    _count(n, 1)
    low, high = 0, n  # the probability falls as r grows: bisect
    tail = 1 - _share("coverage", coverage)
    _share("confidence", confidence)
    while low < high:
        middle = (low + high + 1) // 2
        if float(special.betainc(middle, n - middle + 1, tail)) >= confidence:
            low = middle
        else:
            high = middle - 1
    return low


def fewest_for_rank(r: int, *, coverage: float, confidence: float) -> int:
    r"""The fewest results of which the r-th lowest is a distribution-free tolerance limit.

    The smallest n with :math:`I_{1-p}(r, n-r+1) \ge \gamma`.

    Parameters
    ----------
    r : int
        Rank [-], 1 for the lowest result.
    coverage : float
        Share of all results that shall lie above the limit [-].
    confidence : float
        Probability that they do [-].

    Returns
    -------
    int
        Number of results [-].

    Raises
    ------
    InputError
        If r is below 1, or a share is not between 0 and 1.

    References
    ----------
    .. [1] S. S. Wilks, "Determination of sample sizes for setting tolerance limits", Ann. Math. Stat. 12 (1941), 91-96.

    Examples
    --------
    >>> fewest_for_rank(1, coverage=0.95, confidence=0.75)
    28
    """
    _count(r, 1)
    high = r
    while rank(high, coverage=coverage, confidence=confidence) < r:
        high *= 2
    low = high // 2
    while low + 1 < high:
        middle = (low + high) // 2
        if rank(middle, coverage=coverage, confidence=confidence) < r:
            low = middle
        else:
            high = middle
    return high
