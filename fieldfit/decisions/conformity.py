"""Does a measured value conform to a limit? Decision rules and risks by JCGM 106:2012.

All values are on a scale on which the measurement's error is normal: the value itself, or its logarithm.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

Rule = Literal["simple acceptance", "guarded acceptance", "guarded rejection"]
Outcome = Literal["pass", "fail", "undecided"]
RULES: tuple[Rule, ...] = ("simple acceptance", "guarded acceptance", "guarded rejection")

FAR = 10.0
"""Standard deviations beyond which nothing is built."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """What conforms, or what is accepted: everything between two ends."""

    low: float = float("-inf")
    """Lower end; minus infinity for none."""
    high: float = float("inf")
    """Upper end; infinity for none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Knowledge:
    """A normal state of knowledge of a value."""

    mean: float
    """Best value."""
    standard: float
    """Standard uncertainty, above 0."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Risks:
    """Probabilities that a decision harms one side or the other."""

    consumer: float
    """That an item is accepted and does not conform [-]."""
    producer: float
    """That an item is rejected and conforms [-]."""


def conformance_probability(known: Knowledge, tolerance: Interval) -> float:
    """Return the probability that the true value lies within the tolerance [-] (JCGM 106, 7.2).

    Parameters
    ----------
    known : Knowledge
        What is known of the value after measuring it.
    tolerance : Interval
        What conforms.

    Examples
    --------
    >>> round(conformance_probability(Knowledge(mean=135.0, standard=4.0), Interval(low=130.0)), 2)
    0.89
    """
    from scipy.special import ndtr

    high = float(ndtr((tolerance.high - known.mean) / known.standard))
    return high - float(ndtr((tolerance.low - known.mean) / known.standard))


def guard(tolerance: Interval, standard: float, risk: float) -> Interval:
    """Return the interval within which a measured value conforms but for the agreed risk (JCGM 106, 8.3.2).

    A guard band of the one-sided coverage factor times the standard uncertainty is taken off each end.

    Parameters
    ----------
    tolerance : Interval
        What conforms.
    standard : float
        Standard uncertainty of the measured value.
    risk : float
        Agreed risk, between 0 and 0.5 [-]; above 0.5 the guard band lies outside (guarded rejection).

    Returns
    -------
    Interval
        Accept within it.

    Examples
    --------
    >>> round(guard(Interval(low=130.0), 4.0, 0.05).low, 1)
    136.6
    """
    from scipy.special import ndtri

    band = -float(ndtri(risk)) * standard
    return Interval(low=tolerance.low + band, high=tolerance.high - band)


def decide(known: Knowledge, tolerance: Interval, rule: Rule, risk: float) -> Outcome:
    """Decide by the contract's rule (JCGM 106, 8.2 and 8.3).

    Simple acceptance goes by the measured value alone. Guarded acceptance passes only what conforms but for the
    agreed risk, guarded rejection fails only what does not conform but for that risk; in between nothing is decided,
    and who bears that is the contract's word.

    Parameters
    ----------
    known : Knowledge
        What was measured.
    tolerance : Interval
        What conforms.
    rule : str
        One of `RULES`.
    risk : float
        Agreed risk of either guard band [-].

    Returns
    -------
    str
        Pass, fail or undecided.
    """
    if rule == "simple acceptance":
        return "pass" if _inside(known.mean, tolerance) else "fail"
    if _inside(known.mean, guard(tolerance, known.standard, risk)):
        return "pass"
    if not _inside(known.mean, guard(tolerance, known.standard, 1.0 - risk)):
        return "fail"
    return "undecided"


def _inside(value: float, interval: Interval) -> bool:
    """Return whether a value lies within an interval, ends included."""
    return interval.low <= value <= interval.high


def global_risks(prior: Knowledge, standard: float, tolerance: Interval, acceptance: Interval) -> Risks:
    """Return the risks over all items of one make, before any is measured (JCGM 106, 9.5).

    The probability is taken over what may be built, a normal prior, and what may be measured of it.

    Parameters
    ----------
    prior : Knowledge
        What is built.
    standard : float
        Standard uncertainty of a measurement.
    tolerance : Interval
        What conforms.
    acceptance : Interval
        What is accepted.

    Returns
    -------
    Risks

    Notes
    -----
    Quadrature over the true value, cut at the tolerance's ends where the integrand jumps.
    """
    from scipy.integrate import quad
    from scipy.special import ndtr

    def accepted(z: float) -> float:
        true = prior.mean + prior.standard * z
        low, high = (acceptance.low - true) / standard, (acceptance.high - true) / standard
        return float(ndtr(high) - ndtr(low)) * _density(z)

    def rejected(z: float) -> float:
        return _density(z) - accepted(z)

    low, high = (min(max((end - prior.mean) / prior.standard, -FAR), FAR) for end in (tolerance.low, tolerance.high))
    consumer = quad(accepted, -FAR, low, limit=200)[0] + quad(accepted, high, FAR, limit=200)[0]
    return Risks(consumer=float(consumer), producer=float(quad(rejected, low, high, limit=200)[0]))


def _density(z: float) -> float:
    """Return the standard normal density."""
    return math.exp(-0.5 * z * z) / math.sqrt(2.0 * math.pi)


def chance_to_decide(known: Knowledge, tolerance: Interval, risk: float, new_standard: float) -> float:
    """Return the probability that a better measurement would end in pass or fail [-].

    What is known now says where the new result may fall: about the present one, with the variance that the new
    measurement takes away. It decides when the new result clears a guard band of its own.

    Parameters
    ----------
    known : Knowledge
        What is known now.
    tolerance : Interval
        What conforms.
    risk : float
        Agreed risk [-].
    new_standard : float
        Standard uncertainty after the better measurement; below the present one.

    Returns
    -------
    float
    """
    from scipy.special import ndtr

    spread = max(known.standard**2 - new_standard**2, 1e-30) ** 0.5
    passed, not_failed = guard(tolerance, new_standard, risk), guard(tolerance, new_standard, 1.0 - risk)

    def within(interval: Interval) -> float:
        if interval.low > interval.high:
            return 0.0
        high = float(ndtr((interval.high - known.mean) / spread))
        return high - float(ndtr((interval.low - known.mean) / spread))

    return within(passed) + 1.0 - within(not_failed)
