"""Weigh hypotheses on the readings of one reach: their probability, how they fit, and how large each cause would be."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.inference.causes import Hypothesis
from fieldfit.inference.conditions import Conditions
from fieldfit.inference.evidence import Evidence, laplace, posterior_covariance
from fieldfit.inference.fault_model import BY_RATIO, OFFSET, SIZES, WALL, Trials, read, unknowns

Array = NDArray[np.float64]

TOO_FAR = 0.001
"""Probability of so large a misfit under which a cause does not explain the readings [-]."""
TOO_MUCH = 3.0
"""Reduced χ² that the misfit must exceed as well [-]: stated noise is itself only known to a factor of that kind."""


NEARLY, MOST_OPTIONS = 0.2, 3
"""Share of the best one's probability from which another discrete fault is named too [-], and how many are."""
PULLED_FAR = 3.5
"""Standard deviations beyond which no stated error, nor a wall as new, may be strained by a cause that explains [-]."""


class Size(NamedTuple):
    """How large a cause would be."""

    of: str
    """Which size: one of SIZES."""
    best: float
    """Middle of its distribution [SI]."""
    low: float
    """95 % from here [SI] …"""
    high: float
    """… to here [SI]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitted:
    """A hypothesis at its best trial; M unknowns, K readings."""

    trial: Trials
    """That trial, alone."""
    flow_m3_s: Array
    """(K,) flows of the readings it was fitted to [m³/s]."""
    u: Array
    """(M,) most probable unknowns [-]."""
    covariance: Array
    """(M, M) their covariance [-]."""

    def predict(self, conditions: Conditions) -> tuple[Array, Array]:
        """Return head losses as they would read (K,) and their standard uncertainties (K,) [m]."""
        order = np.argsort(self.flow_m3_s)
        shift = np.interp(conditions.flow_m3_s, self.flow_m3_s[order], self.trial.shift_m[0][order])
        reading = read(conditions, self.trial.shifted(shift), self.u[None, :])
        slopes = reading.slopes[0]
        variance = np.einsum("mk,mn,nk->k", slopes, self.covariance, slopes)
        return reading.head_m[0], np.sqrt(np.maximum(variance, 0.0))

    def size(self, column: int) -> tuple[float, float]:
        """Return one size and its standard uncertainty [SI]; a ratio's from its logarithm; zero where absent."""
        spread = float(self.trial.spread[0, column])
        middle = float(self.trial.centre[0, column]) + spread * float(self.u[column])
        doubt = spread * float(np.sqrt(max(self.covariance[column, column], 0.0)))
        if column not in BY_RATIO:
            return middle, doubt
        return float(np.exp(middle)), float(np.exp(middle)) * doubt

    def at_rest(self, conditions: Conditions) -> tuple[float, float]:
        """Return the head loss that would read at rest, all valves shut, and its standard uncertainty [m]."""
        sizes, lowest = len(SIZES), int(np.argmin(conditions.flow_m3_s))
        slopes = np.zeros(len(self.u))
        slopes[OFFSET] = self.trial.spread[0, OFFSET]
        slopes[sizes : sizes + len(conditions.names)] = conditions.head_errors_m[:, lowest]
        head = float(self.trial.centre[0, OFFSET] + slopes @ self.u) + float(np.mean(self.trial.shift_m))
        variance = float(slopes @ self.covariance @ slopes)
        return head, float(np.sqrt(max(variance, 0.0)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Weighed:
    """A hypothesis after the readings; K readings."""

    causes: tuple[str, ...]
    """Names."""
    ln_weight: float
    """Logarithm of prior times marginal likelihood [-]."""
    ln_prior: float
    """Logarithm of the prior probability [-]."""
    chi_square: float
    """Misfit at the best trial: readings and stated errors together [-]."""
    pull: float
    """Largest strain on a stated error, or on the wall as new [its standard deviations]."""
    freedom: int
    """Readings less free sizes, at least one."""
    misfit: Array
    """(K,) reading less the cause's curve, in random standard errors [-]."""
    fitted: Fitted
    """Its best trial."""
    sizes: tuple[Size, ...]
    """Sizes of its causes."""
    option: str
    """Which of several discrete faults; empty without."""

    @property
    def explains(self) -> bool:
        """Whether stated errors and noise could have made this misfit."""
        from scipy.special import gammaincc

        if self.pull > PULLED_FAR:
            return False
        reduced = self.chi_square / self.freedom
        chance = float(gammaincc(self.freedom / 2.0, self.chi_square / 2.0))
        return bool(reduced <= TOO_MUCH or chance >= TOO_FAR)


def weigh(
    hypotheses: tuple[Hypothesis, ...], conditions: Conditions, head_loss_m: Array, noise_m: Array
) -> tuple[Weighed, ...]:
    """Weigh hypotheses on K readings.

    Parameters
    ----------
    hypotheses : tuple of Hypothesis
        What to weigh.
    conditions : Conditions
        The readings' conditions.
    head_loss_m : (K,) array
        Head losses read [m].
    noise_m : (K,) array
        Their random standard errors [m].

    Returns
    -------
    tuple of Weighed
        In the same order.
    """
    counts = [len(one.trials.side) for one in hypotheses]
    trials = _joined([one.trials for one in hypotheses])

    def model(u: Array, rows: NDArray[np.int64]) -> tuple[Array, Array]:
        return read(conditions, trials.take(rows), u)

    found = laplace(model, len(trials.side), unknowns(conditions), (head_loss_m, noise_m))
    ends = np.cumsum(counts)
    return tuple(
        _weighed(one, trials, found, (np.arange(end - count, end), conditions.flow_m3_s, noise_m))
        for one, count, end in zip(hypotheses, counts, ends, strict=True)
    )


def _joined(several: list[Trials]) -> Trials:
    """Return all trials one after another."""
    return Trials(**{name: np.concatenate([getattr(one, name) for one in several]) for name in Trials.__slots__})


def _weighed(
    one: Hypothesis, trials: Trials, found: Evidence, place: tuple[NDArray[np.int64], Array, Array]
) -> Weighed:
    """Sum up the trials of one hypothesis."""
    rows, flow, noise = place
    score = trials.ln_weight[rows] + found.ln_evidence[rows]
    best = rows[int(np.argmax(score))]
    weight = np.exp(score - np.max(score))
    free = np.flatnonzero(trials.spread[best] > 0.0)
    if "rough wall" not in one.causes:
        free = free[free != WALL]
    u, misfit = found.u[best], found.misfit[best]
    stated = np.delete(u, free)
    heavy = rows[weight > 1e-3]
    covariance = posterior_covariance(found.slopes[heavy], noise)
    at_best = covariance[int(np.flatnonzero(heavy == best)[0])]
    return Weighed(
        causes=one.causes,
        ln_weight=float(np.max(score) + np.log(np.sum(weight))),
        ln_prior=float(np.log(np.sum(np.exp(one.trials.ln_weight)))),
        chi_square=float(misfit @ misfit + stated @ stated),
        pull=float(np.max(np.abs(stated), initial=0.0)),
        freedom=max(len(misfit) - len(free), 1),
        misfit=misfit,
        fitted=Fitted(trial=trials.take(np.array([best])), flow_m3_s=flow, u=u, covariance=at_best),
        sizes=tuple(
            _size(int(column), trials.take(heavy), found.u[heavy], (weight[weight > 1e-3], covariance))
            for column in free
        ),
        option=_options(one.options, weight),
    )


def _options(names: tuple[str, ...], weight: Array) -> str:
    """Return the most probable of several discrete faults, and those nearly as probable."""
    if not names or not names[int(np.argmax(weight))]:
        return ""
    order = [index for index in np.argsort(-weight) if weight[index] >= NEARLY][:MOST_OPTIONS]
    return "; or ".join(dict.fromkeys(names[index] for index in order if names[index]))


def _size(column: int, trials: Trials, u: Array, parts: tuple[Array, Array]) -> Size:
    """Return the middle and the 95 % range of one size, from its mixture of normal parts."""
    from scipy.special import ndtr

    weight, covariance = parts
    has = trials.spread[:, column] > 0.0
    middle = trials.centre[has, column] + trials.spread[has, column] * u[has, column]
    variance = np.maximum(covariance[has, column, column], 0.0)
    spread = np.maximum(trials.spread[has, column] * np.sqrt(variance), 1e-9)
    grid = np.linspace(float(np.min(middle - 4.0 * spread)), float(np.max(middle + 4.0 * spread)), 400)
    below = weight[has] @ ndtr((grid - middle[:, None]) / spread[:, None]) / np.sum(weight[has])
    low, best, high = np.interp([0.025, 0.5, 0.975], below, grid)
    if column in BY_RATIO:
        low, best, high = np.exp([low, best, high])
    return Size(SIZES[column], float(best), float(low), float(high))
