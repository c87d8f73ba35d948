"""Draws from a posterior with its evidence, by importance sampling that learns where to look."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

ROUNDS = 25
FREEDOM = 6.0
"""Degrees of freedom of the proposal's Student distribution: tails that the posterior does not outreach."""
FIRST_SHARE, SHARE = 0.05, 0.4
"""Shares of effective draws that each step towards the whole likelihood keeps."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sample:
    """Equally weighted draws of d parameters."""

    z: Array
    """(N, d) draws."""
    ln_evidence: float
    """Logarithm of the marginal likelihood [-]."""
    effective: float
    """Effective number of draws before resampling [-]."""
    best: float
    """Largest log-likelihood seen [-]."""


def sample_posterior(ln_likelihood: Callable[[Array], Array], dimensions: int, draws: int, seed: int) -> Sample:
    """Draw from the posterior of parameters that are standard normal beforehand.

    Starts from the prior, brings the likelihood in by steps and fits a Student proposal to what each step leaves
    (adaptive importance sampling), until the whole likelihood counts; the mean weight of the last rounds is the
    evidence.

    Parameters
    ----------
    ln_likelihood : callable
        (N, d) parameters to (N,) log-likelihoods [-].
    dimensions : int
        d.
    draws : int
        N of each round and of the result.
    seed : int
        Seed of the generator.

    Returns
    -------
    Sample

    References
    ----------
    Cappé et al. (2004), Population Monte Carlo, J. Comput. Graph. Stat. 13(4), doi:10.1198/106186004X12803.

    Examples
    --------
    >>> found = sample_posterior(lambda z: -0.5 * ((z[:, 0] - 1.0) / 0.5) ** 2, 1, 4000, 1)
    >>> bool(abs(found.z.mean() - 0.8) < 0.03), round(found.ln_evidence, 1)
    (True, -1.2)
    """
    rng = np.random.default_rng(seed)
    z = rng.standard_normal((draws, dimensions))
    ln_proposal = _ln_normal(z)
    kept: list[tuple[Array, Array, float]] = []
    best, power = -np.inf, 0.0
    for turn in range(ROUNDS):
        ln_target = ln_likelihood(z)
        best = max(best, float(np.max(ln_target)))
        ln_prior = _ln_normal(z) - ln_proposal
        power = _power(ln_target, ln_prior, power, (FIRST_SHARE if turn == 0 else SHARE) * draws)
        ln_weight = power * ln_target + ln_prior
        weight = np.exp(ln_weight - np.max(ln_weight))
        if power >= 1.0:
            kept.append((z, ln_target + ln_prior, _effective(weight)))
        if (len(kept) >= 2 and kept[-1][2] > 0.3 * draws) or len(kept) >= 5:
            break
        z, ln_proposal = _propose(rng, z, weight)
    return _pooled(rng, kept or [(z, ln_target + ln_prior, _effective(weight))], draws, best)


def _power(ln_target: Array, ln_prior: Array, reached: float, wanted: float) -> float:
    """Return the largest power of the likelihood, from the one reached to one, that leaves so many effective draws."""

    def left(power: float) -> float:
        ln_weight = power * ln_target + ln_prior
        return _effective(np.exp(ln_weight - np.max(ln_weight)))

    if left(1.0) >= wanted:
        return 1.0
    low, high = reached, 1.0
    for _ in range(30):
        middle = (low + high) / 2.0
        low, high = (middle, high) if left(middle) >= wanted else (low, middle)
    return low


def _propose(rng: np.random.Generator, z: Array, weight: Array) -> tuple[Array, Array]:
    """Draw from a Student distribution fitted to weighted draws; return draws and their log-density."""
    draws, dimensions = z.shape
    share = weight / np.sum(weight)
    middle = share @ z
    apart = z - middle
    spread = (apart * share[:, None]).T @ apart + 1e-10 * np.eye(dimensions)
    root = np.linalg.cholesky(spread)
    radius = np.sqrt(FREEDOM / rng.chisquare(FREEDOM, draws))
    step = rng.standard_normal((draws, dimensions)) * radius[:, None]
    ln_density = -0.5 * (FREEDOM + dimensions) * np.log1p(np.sum(step**2, axis=1) / FREEDOM)
    constant = _ln_student_constant(dimensions) - float(np.sum(np.log(np.diag(root))))
    return middle + step @ root.T, ln_density + constant


def _ln_student_constant(dimensions: int) -> float:
    """Return the logarithm of the Student density's constant, for unit spread."""
    from math import lgamma, log, pi

    return lgamma((FREEDOM + dimensions) / 2.0) - lgamma(FREEDOM / 2.0) - 0.5 * dimensions * log(FREEDOM * pi)


def _ln_normal(z: Array) -> Array:
    """Return the log-density of the standard normal distribution."""
    return np.asarray(-0.5 * np.sum(z**2, axis=1) - 0.5 * z.shape[1] * np.log(2.0 * np.pi))


def _effective(weight: Array) -> float:
    """Return the effective number of draws (Kish)."""
    return float(np.sum(weight) ** 2 / np.sum(weight**2))


def _pooled(rng: np.random.Generator, kept: list[tuple[Array, Array, float]], draws: int, best: float) -> Sample:
    """Pool the rounds that count and draw equally weighted ones."""
    z = np.concatenate([one for one, _, _ in kept])
    ln_weight = np.concatenate([one for _, one, _ in kept])
    top = float(np.max(ln_weight))
    weight = np.exp(ln_weight - top)
    ladder = np.cumsum(weight / np.sum(weight))
    places = (np.arange(draws) + rng.random()) / draws
    chosen = np.minimum(np.searchsorted(ladder, places), len(z) - 1)
    return Sample(
        z=rng.permutation(z[chosen]),
        ln_evidence=top + float(np.log(np.mean(weight))),
        effective=_effective(weight),
        best=best,
    )
