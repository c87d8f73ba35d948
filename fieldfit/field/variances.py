"""Variances of short stretches, each strengthened by what the others say."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

FEWEST = 3
"""Variances from which their common level can be judged."""
MOST = 1e4
"""Degrees of freedom that the common level may count for."""


def pooled_variance(variance: Array, freedom: Array) -> Array:
    """Return each variance pulled towards the common level, the more the fewer rows it stands on.

    The variance of a short stretch is often far too small by chance, and its mean then far too trusted. The true
    variances are taken to be scattered about one level (scaled inverse chi-square), and both level and scatter are
    found from the mean and the scatter of the logarithms: where the variances are alike to within chance they are
    pooled, where they truly differ each is left alone.

    Parameters
    ----------
    variance : (K,) array
        Variances found, each from its own stretch.
    freedom : (K,) array
        Degrees of freedom of each [-], effective ones where rows depend on each other.

    Returns
    -------
    (K,) array
        Variances to use.

    References
    ----------
    G. K. Smyth, Stat. Appl. Genet. Mol. Biol. 3 (2004) art. 3, eqs. (5) to (7), doi:10.2202/1544-6115.1027

    Examples
    --------
    >>> pooled_variance(np.array([1.0, 0.8, 1.2, 0.1]), np.full(4, 3.0)).round(2)
    array([0.78, 0.72, 0.85, 0.48])
    """
    from scipy.special import digamma, polygamma

    # A stretch in which a display stood still has no variance and no logarithm: it borrows, and lends nothing.
    seen = variance > 0.0
    if np.count_nonzero(seen) < FEWEST:
        return variance
    half = freedom[seen] / 2.0
    level = np.log(variance[seen]) - digamma(half) + np.log(half)
    excess = float(np.var(level, ddof=1) - np.mean(polygamma(1, half)))
    prior = min(2.0 * _inverse_trigamma(excess), MOST) if excess > 0.0 else MOST
    common = float(np.exp(np.mean(level) + digamma(prior / 2.0) - np.log(prior / 2.0)))
    return np.asarray((prior * common + freedom * variance) / (prior + freedom))


def _inverse_trigamma(value: float) -> float:
    """Return x of trigamma(x) = value, by Newton on the reciprocal, which is nearly straight."""
    from scipy.special import polygamma

    x = 0.5 + 1.0 / value
    for _ in range(50):
        here = float(polygamma(1, x))
        step = here * (1.0 - here / value) / float(polygamma(2, x))
        x += step
        if abs(step) < 1e-9 * x:
            break
    return x
