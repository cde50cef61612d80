r"""Where the results of a sample stand on probability paper.

Results are in MPa; shares and places on the probability axis are dimensionless.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError


def median_ranks(n: int) -> NDArray[np.float64]:
    r"""Share of the population that lies below each of ``n`` ranked results, as likely too great as too small.

    .. math:: I_{p_i}(i,\, n - i + 1) = 1/2

    with the regularized incomplete beta function :math:`I`.

    Parameters
    ----------
    n : int
        Number of results [-], at least 1.

    Returns
    -------
    numpy.ndarray
        Shares p_1 < ... < p_n [-].

    Raises
    ------
    InputError
        If n is below 1.

    Notes
    -----
    For drawing only: a plot by eye decides nothing that a test of fit does not decide better.

    References
    ----------
    .. [1] L. G. Johnson, "The median ranks of sample values in their population with an application to certain fatigue
       studies", Industrial Mathematics 2 (1951), 1-9.

    Examples
    --------
    >>> median_ranks(5).round(4).tolist()
    [0.1294, 0.3138, 0.5, 0.6862, 0.8706]
    """
    from scipy import special

    if n < 1:
        raise InputError("n", f"n is {n}; a plot needs at least one result.")
    i = np.arange(1, n + 1)
    return np.asarray(special.betaincinv(i, n - i + 1, 0.5))


def normal_place(share: ArrayLike) -> NDArray[np.float64]:
    r"""Place of a share on normal probability paper: :math:`z = \Phi^{-1}(p)`.

    Parameters
    ----------
    share : array_like
        Shares between 0 and 1 [-].

    Returns
    -------
    numpy.ndarray
        Places [-], in standard deviations from the middle.

    References
    ----------
    .. [1] R. B. D'Agostino and M. A. Stephens, Goodness-of-Fit Techniques (1986), chapter 2.

    Examples
    --------
    >>> normal_place([0.05, 0.5]).round(3).tolist()
    [-1.645, 0.0]
    """
    from scipy import special

    return np.asarray(special.ndtri(np.asarray(share, dtype=float)))


def weibull_place(share: ArrayLike) -> NDArray[np.float64]:
    r"""Place of a share on Weibull probability paper: :math:`\ln(-\ln(1 - p))`.

    Parameters
    ----------
    share : array_like
        Shares between 0 and 1 [-].

    Returns
    -------
    numpy.ndarray
        Places [-]; 0 at 63.2 %.

    References
    ----------
    .. [1] W. Weibull, "A statistical distribution function of wide applicability", J. Appl. Mech. 18 (1951), 293-297.

    Examples
    --------
    >>> round(float(weibull_place(0.05)), 3)
    -2.97
    """
    return np.asarray(np.log(-np.log1p(-np.asarray(share, dtype=float))))
