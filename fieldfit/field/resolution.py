"""The smallest step a column was written in."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

SAMPLE = 5000
"""Values looked at."""
ENOUGH = 6
"""Distinct values from which a common divisor of their differences is no accident."""
SMALLEST_PART = 6
"""Parts of the smallest gap that are tried as a step."""
CLOSE = 1e-4
"""Distance from a whole number of steps that conversion may leave [steps]."""
_MOST_DECIMALS = 9


def written_step(values: Array) -> float:
    """Return the resolution of a column: the largest step that all its values are multiples of, from a common start.

    Values with few decimals are taken as written: 412.1 and 400.3 have a step of 0.1, or of 0.2 when six different
    values or more all keep to that. Values with many decimals were converted from another unit: their step is the
    common divisor of their differences, or 0 when there is none.

    Parameters
    ----------
    values : ndarray
        (N,) values in the unit they were written in; NaN is left out.

    Returns
    -------
    float
        The step [same unit]; 0 when none can be seen.

    Examples
    --------
    >>> written_step(np.array([412.1, 400.3]))
    0.1
    >>> written_step(np.array([400.0, 402.0, 408.0, 412.0, 396.0, 390.0, 384.0]))
    2.0
    """
    sample = values[np.isfinite(values)]
    different = np.unique(sample[:: max(1, sample.size // SAMPLE)])
    if different.size == 0 or different[-1] - different[0] > 1e15:
        return 0.0
    decimals = _decimals(different)
    if decimals is None:
        return _common_step(different) if different.size >= ENOUGH else 0.0
    if different.size < ENOUGH:
        return float(10.0**-decimals)
    whole = np.rint(different * 10.0**decimals).astype(np.int64)
    return int(np.gcd.reduce(np.diff(whole))) / float(10.0**decimals)


def _decimals(values: Array) -> int | None:
    """Return how many decimals the values were written with; None when there are too many to be written by hand."""
    largest = float(np.max(np.abs(values)))
    for decimals in range(_MOST_DECIMALS + 1):
        scaled = values * 10.0**decimals
        rounding = 16.0 * float(np.spacing(largest * 10.0**decimals))
        if rounding > 0.01:
            return None
        if np.all(np.abs(scaled - np.rint(scaled)) <= rounding):
            return decimals
    return None


def _common_step(values: Array) -> float:
    """Return the step that sorted values are all multiples of, from the first one on; 0 for none.

    It is the smallest gap or a small part of it: conversion leaves each value right to its last few digits only,
    so a divisor is tried against all values instead of being worked out by Euclid, which multiplies such errors.
    """
    gaps = np.diff(values)
    real = gaps[gaps > 64.0 * float(np.spacing(np.max(np.abs(values))))]
    if real.size == 0:
        return 0.0
    from_first = values - values[0]
    for parts in range(1, SMALLEST_PART + 1):
        step = float(np.min(real)) / parts
        steps = np.rint(from_first / step)
        if np.all(np.abs(from_first / step - steps) < CLOSE):
            return float(from_first[-1] / steps[-1])
    return 0.0
