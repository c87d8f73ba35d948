"""Independent evidence of the bore as a likelihood of the bore that friction sees, each by its own kind of average.

Friction sees the mean of D⁻⁵ over a reach, a tracer the mean of D² (the volume), laminar flow the mean of D⁻⁴, a gauge
plate the narrowest place, a coupon or calliper one place. How far these lie apart depends on how unevenly the deposit
lies: with a relative standard deviation s of the bore along the reach, to second order, the mean bore is (1 + 3 s²)
times friction's, the volume's (1 + 3.5 s²) times, laminar flow's (1 + s²/2) times, and the narrowest place some 2 s
under the mean.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import BoreEvidence

Array = NDArray[np.float64]

CONTRADICTS = 0.01
"""Probability of evidence so far from what the readings allow under which the two contradict each other."""
NARROWEST = 2.0
"""Standard deviations by which the narrowest place of a reach lies under its mean bore, about."""


class Average(NamedTuple):
    """What a kind of evidence would read for a given bore of friction; same shape as the bores."""

    mean_m: Array
    """Bore it would give [m]."""
    standard_m: Array
    """Standard deviation of that for the unevenness alone [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Weighed:
    """One piece of evidence held against the readings."""

    evidence: BoreEvidence
    """The evidence."""
    tail: float
    """Probability that the readings give evidence so far off or farther [-]."""
    used: bool
    """Whether it entered the result; it does not when it contradicts the readings."""
    allowance_m: float
    """Standard uncertainty allowed for its kind of average, at the bore it gives [m]."""


def unevenness(bore_m: Array, laid_m: float, variation: float) -> Array:
    """Return the relative standard deviation of the bore along a reach [-], from that of the deposit's thickness."""
    return variation * np.maximum(laid_m - bore_m, 0.0) / bore_m


def average(kind: str, bore_m: Array, laid_m: float, variation: float) -> Average:
    """Return what evidence of a kind would read where friction sees a bore.

    Parameters
    ----------
    kind : str
        Kind of evidence.
    bore_m : array
        Bores that friction sees [m].
    laid_m : float
        As-new bore [m].
    variation : float
        Relative standard deviation of the deposit's thickness along the reach [-].

    Returns
    -------
    Average

    Examples
    --------
    >>> tracer = average("tracer", np.array([0.08]), 0.1, 0.4)
    >>> print(tracer.mean_m.round(5))
    [0.0828]
    """
    s = unevenness(bore_m, laid_m, variation)
    if kind == "tracer":
        return Average(bore_m * (1.0 + 3.5 * s**2), 1.75 * s**2 * bore_m)
    if kind == "laminar flow":
        return Average(bore_m * (1.0 + 0.5 * s**2), 0.25 * s**2 * bore_m)
    middle = bore_m * (1.0 + 3.0 * s**2)
    if kind == "gauge plate":
        return Average(middle * (1.0 - NARROWEST * s), s * bore_m)
    return Average(middle, s * bore_m)


def log_likelihood(evidence: BoreEvidence, bore_m: Array, laid_m: float, variation: float) -> Array:
    """Return the log likelihood of each bore of friction for one piece of evidence, up to a constant."""
    would = average(evidence.kind, bore_m, laid_m, variation)
    spread = np.maximum(np.hypot(evidence.bore.standard, would.standard_m), 1e-6 * laid_m)
    return np.asarray(-0.5 * ((evidence.bore.value - would.mean_m) / spread) ** 2 - np.log(spread / laid_m))


def weigh(evidence: BoreEvidence, bores: tuple[Array, Array], laid_m: float, variation: float) -> Weighed:
    """Hold evidence against what the readings say of the bore.

    Parameters
    ----------
    evidence : BoreEvidence
        The evidence.
    bores : (N,) and (N,) arrays
        Bores [m] and their probabilities by the readings.
    laid_m : float
        As-new bore [m].
    variation : float
        Relative standard deviation of the deposit's thickness [-].

    Returns
    -------
    Weighed
    """
    from scipy.special import ndtr

    bore_m, probability = bores
    would = average(evidence.kind, bore_m, laid_m, variation)
    spread = np.maximum(np.hypot(evidence.bore.standard, would.standard_m), 1e-6 * laid_m)
    below = float(probability @ ndtr((evidence.bore.value - would.mean_m) / spread))
    tail = 2.0 * min(below, 1.0 - below)
    own = average(evidence.kind, np.array([evidence.bore.value]), laid_m, variation)
    return Weighed(evidence=evidence, tail=tail, used=tail >= CONTRADICTS, allowance_m=float(own.standard_m[0]))
