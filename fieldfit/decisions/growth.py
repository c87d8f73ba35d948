"""How roughness grows: published laws, their evidence, and draws of every parameter together."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.growth_prior import Belief
from fieldfit.hydraulics.friction import colebrook_white
from fieldfit.inference.friction_curve import ROUGHEST
from fieldfit.inference.sampling import Sample, sample_posterior

Array = NDArray[np.float64]

DRAWS = 4000
SEED = 19880101
PARABOLA_YEARS = 20.0
"""Years over which the parabolic law's mean rate is the parameter."""
SATURATION_YEARS, SATURATION_SPREAD = 20.0, 0.8
"""Median and ln standard deviation of the saturating law's time constant."""
REGROWTH_SPREAD = 0.8
"""Standard deviation of ln(rate after a cleaning over rate before) [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Law:
    """A law of growth: how much has grown after t years, at a rate of one."""

    name: str
    """In words."""
    formula: str
    """As printed."""
    grown: Callable[[Array, Array], Array]
    """(years, time constant) to years of growth at the starting rate [years]."""
    until: Callable[[Array, Array], Array]
    """Its inverse: (growth over rate, time constant) to years; infinite where it is never reached."""
    has_constant: bool
    """Whether it has a time constant."""


def _saturated(years: Array, constant: Array) -> Array:
    return np.asarray(constant * -np.expm1(-years / constant))


def _until_saturated(grown: Array, constant: Array) -> Array:
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where(grown < constant, -constant * np.log1p(-np.minimum(grown / constant, 1.0)), np.inf)


LAWS = (
    Law(
        name="linear",
        formula="ε = ε₀ + αt",
        grown=lambda years, _: years + 0.0,
        until=lambda grown, _: grown + 0.0,
        has_constant=False,
    ),
    Law(
        name="parabolic",
        formula="ε = ε₀ + β√t",
        grown=lambda years, _: np.sqrt(years * PARABOLA_YEARS),
        until=lambda grown, _: np.sign(grown) * grown**2 / PARABOLA_YEARS,
        has_constant=False,
    ),
    Law(
        name="saturating",
        formula="ε = ε₀ + ατ(1 − exp(−t/τ))",
        grown=_saturated,
        until=_until_saturated,
        has_constant=True,
    ),
)
"""The laws; each starts anew at every cleaning or lining."""


@dataclass(frozen=True, slots=True, kw_only=True)
class History:
    """What the joint fit hands over: n campaigns in stages, each stage starting at laying, cleaning or lining."""

    years: Array
    """(n,) years since the start of its stage."""
    stage: NDArray[np.int64]
    """(n,) number of the stage, from 0."""
    ln_friction: Array
    """(n,) best ln f [-]."""
    covariance: Array
    """(n, n) covariance of ln f [-]."""
    reynolds: Array
    """(n,) Reynolds number that ln f is for [-]."""
    bore_m: Array
    """(n,) bore that it is for [m]."""
    starts: tuple[Belief, ...]
    """Roughness at the start of each stage, beforehand [m]."""
    rate: Belief
    """Growth rate beforehand [m/year]."""
    correlation_standard: float
    """Standard uncertainty of f from a friction correlation [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Draws:
    """Equally weighted draws by one law; N draws, s stages."""

    law: Law
    """The law."""
    rate_m_year: Array
    """(N, s) starting rate of each stage [m/year]."""
    constant_years: Array
    """(N,) time constant [years]; one where the law has none."""
    start_m: Array
    """(N, s) roughness at the start of each stage [m]."""
    level: Array
    """(N,) ln of the pipe's f over the correlation's [-]."""

    def roughness_m(self, years: Array, stage: NDArray[np.int64]) -> Array:
        """Return the roughness (N, T) at T moments, given as years since the start of a stage [m]."""
        grown = self.law.grown(np.maximum(years, 0.0)[None, :], self.constant_years[:, None])
        return self.start_m[:, stage] + self.rate_m_year[:, stage] * grown


@dataclass(frozen=True, slots=True, kw_only=True)
class Growth:
    """All laws weighed against each other."""

    probabilities: tuple[tuple[str, float], ...]
    """Probability of each law, in the order of `LAWS`."""
    draws: tuple[Draws, ...]
    """Draws by each law, as many as its probability deserves."""
    misfit: float
    """Smallest χ² of the campaigns about any law [-]."""
    freedom: int
    """Campaigns less the parameters that they alone decide."""


def weigh_laws(history: History, draws: int = DRAWS) -> Growth:
    """Fit every law and average them by their evidence.

    The laws are equally likely beforehand. The level of the friction correlation is a parameter with its own prior,
    so that a true roughness grows and a measured one is compared.

    Parameters
    ----------
    history : History
        Campaigns; n of them.
    draws : int
        Draws to keep, all laws together.

    Returns
    -------
    Growth

    References
    ----------
    Laws: Colebrook and White (1937), doi:10.1680/ijoti.1937.14682 (linear); averaging: Hoeting et al. (1999), Bayesian
    model averaging, Stat. Sci. 14(4), 382-417, doi:10.1214/ss/1009212519.
    """
    samples = [_sample(history, law, draws, SEED + number) for number, law in enumerate(LAWS)]
    evidence = np.array([sample.ln_evidence for sample in samples])
    weight = np.exp(evidence - np.max(evidence))
    weight = weight / np.sum(weight)
    counts = np.floor(weight * draws + 0.5).astype(int)
    kept = tuple(
        _unfold(history, law, sample.z[:count])
        for law, sample, count in zip(LAWS, samples, counts, strict=True)
        if count > 0
    )
    return Growth(
        probabilities=tuple((law.name, float(share)) for law, share in zip(LAWS, weight, strict=True)),
        draws=kept,
        misfit=-2.0 * max(sample.best for sample in samples),
        freedom=len(history.years) - len(history.starts) - 1,
    )


def _sample(history: History, law: Law, draws: int, seed: int) -> Sample:
    """Draw the parameters of one law; all are standard normal beforehand."""
    weight = np.linalg.inv(history.covariance)

    def ln_likelihood(z: Array) -> Array:
        one = _unfold(history, law, z)
        relative = np.minimum(one.roughness_m(history.years, history.stage) / history.bore_m, ROUGHEST)
        apart = np.log(colebrook_white(history.reynolds, relative)) + one.level[:, None] - history.ln_friction
        return np.asarray(-0.5 * np.sum(apart @ weight * apart, axis=1))

    return sample_posterior(ln_likelihood, 2 + law.has_constant + 2 * len(history.starts) - 1, draws, seed)


def _unfold(history: History, law: Law, z: Array) -> Draws:
    """Turn standard normal parameters into those of a law: level, rate, starts, changes of rate, time constant."""
    stages = len(history.starts)
    medians = np.array([start.median for start in history.starts])
    spreads = np.array([start.ln_standard for start in history.starts])
    ln_rate = np.log(history.rate.median) + history.rate.ln_standard * z[:, 1:2]
    changes = np.hstack([np.zeros((len(z), 1)), REGROWTH_SPREAD * z[:, 2 + stages : 1 + 2 * stages]])
    constant = np.ones(len(z))
    if law.has_constant:
        constant = SATURATION_YEARS * np.exp(SATURATION_SPREAD * z[:, -1])
    return Draws(
        law=law,
        rate_m_year=np.exp(ln_rate + changes),
        constant_years=constant,
        start_m=medians * np.exp(spreads * z[:, 2 : 2 + stages]),
        level=history.correlation_standard * z[:, 0],
    )
