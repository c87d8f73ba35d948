"""How probable the readings are under each of many trials: every error integrated out by Laplace's method."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

STEPS = 12
"""Most Gauss–Newton steps."""
SETTLED = 1e-4
"""Step in prior standard deviations below which a trial is done [-]."""
FAR = 6.0
"""Prior standard deviations beyond which no unknown is followed [-]."""
STRIDE = 2.0
"""Longest step of one unknown [prior standard deviations]."""

LOST_DIGITS = 1e-12
"""Share of a trial's own variance below which noise cannot be told from rounding [-]."""


class Evidence(NamedTuple):
    """What T trials make of K readings; M unknowns, each normal with zero mean and unit variance beforehand."""

    ln_evidence: Array
    """(T,) logarithm of the readings' probability density [ln 1/m^K]."""
    u: Array
    """(T, M) most probable unknowns [-]."""
    slopes: Array
    """(T, M, K) slopes of the head loss there [m]."""
    misfit: Array
    """(T, K) readings less head loss there, over the noise [-]."""


def laplace(model: Callable[[Array, NDArray[np.int64]], tuple[Array, Array]], trials: int, unknowns: int,
            readings: tuple[Array, Array]) -> Evidence:  # fmt: skip
    """Integrate the unknowns of every trial out of the probability of the readings.

    With the head loss linear in the unknowns u near the most probable ones, the readings are normal about
    ``h(û) − J û`` with covariance ``noise² + J Jᵀ``; û is found by Gauss–Newton.

    Parameters
    ----------
    model : callable
        ``model(u, rows)`` returns head losses (T, K) and slopes (T, M, K) of the trials `rows`.
    trials : int
        T.
    unknowns : int
        M.
    readings : (K,) array, (K,) array
        Head losses and their random standard errors [m].

    Returns
    -------
    Evidence

    References
    ----------
    MacKay, D. J. C. (2003), Information Theory, Inference, and Learning Algorithms, ch. 27 and 28.

    Examples
    --------
    >>> def one(u, rows):
    ...     return u * 0.5 + 1.0, np.full((len(u), 1, 1), 0.5)
    >>> found = laplace(one, 1, 1, (np.array([2.0]), np.array([0.5])))
    >>> found.u.round(6).tolist(), found.ln_evidence.round(6).tolist()
    ([[1.0]], [-1.572365])
    """
    head, noise = readings
    u = np.zeros((trials, unknowns))
    going = np.arange(trials)
    for _ in range(STEPS):
        at, slopes = model(u[going], going)
        step = np.clip(_towards(u[going], head - at, slopes, noise) - u[going], -STRIDE, STRIDE)
        u[going] = np.clip(u[going] + step, -FAR, FAR)
        going = going[np.max(np.abs(step), axis=1, initial=0.0) > SETTLED]
        if not going.size:
            break
    at, slopes = model(u, np.arange(trials))
    centred = head - at + np.einsum("tm,tmk->tk", u, slopes)
    spread = _spread(slopes, noise)
    _, ln_determinant = np.linalg.slogdet(spread)
    square = np.einsum("tk,tk->t", centred, np.linalg.solve(spread, centred[..., None])[..., 0])
    return Evidence(
        ln_evidence=-0.5 * (square + ln_determinant + len(head) * np.log(2.0 * np.pi)),
        u=u,
        slopes=slopes,
        misfit=(head - at) / noise,
    )


def posterior_covariance(slopes: Array, noise: Array) -> Array:
    """Return the covariance that the readings leave to the unknowns.

    Parameters
    ----------
    slopes : (T, M, K) array
        Slopes of the head loss [m].
    noise : (K,) array
        Random standard errors [m].

    Returns
    -------
    (T, M, M) array

    Examples
    --------
    >>> posterior_covariance(np.full((1, 1, 1), 0.5), np.array([0.5])).round(6).tolist()
    [[[0.5]]]
    """
    gained = slopes @ np.linalg.solve(_spread(slopes, noise), np.swapaxes(slopes, 1, 2))
    return np.asarray(np.eye(slopes.shape[1]) - gained)


def _spread(slopes: Array, noise: Array) -> Array:
    """Return (T, K, K) covariances of the readings beforehand [m²]."""
    spread = np.asarray(np.swapaxes(slopes, 1, 2) @ slopes)
    rows = np.arange(len(noise))
    # A wild trial may reach a thousand kilometres of head: its digits would swallow the noise and leave no inverse.
    spread[:, rows, rows] += noise**2 + LOST_DIGITS * spread[:, rows, rows]
    return spread


def _towards(u: Array, misfit: Array, slopes: Array, noise: Array) -> Array:
    """Return the most probable unknowns of the linearised model."""
    centred = misfit + np.einsum("tm,tmk->tk", u, slopes)
    pull = np.linalg.solve(_spread(slopes, noise), centred[..., None])
    return np.asarray((slopes @ pull)[..., 0])
