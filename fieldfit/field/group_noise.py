"""How well a group of time blocks tells its mean pressure difference."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.row_noise import MeanNoise, curvature, step_variance
from fieldfit.field.variances import pooled_variance

Array = NDArray[np.float64]
Rows = NDArray[np.int64]

FARTHEST = 200
"""Most blocks apart over which memory is looked for."""


def noise_of_groups(log: Log, block: Rows, members: list[Rows], reach: int, slopes: Array) -> MeanNoise:
    """Find the standard error of each group's pressure difference from the scatter of its time blocks.

    Rows of a block depend on each other in ways that hardly matter here: the block's mean is one number, and the
    scatter of such numbers about the group's line holds all noise, meter's and gauges'. Blocks that follow each
    other may still be alike (a slow wander), so their memory is taken from all blocks in order of time, and each pair
    of blocks in a group counts by its distance in time.

    Parameters
    ----------
    log : Log
        The log.
    block : (N,) array
        Time block of every row.
    members : list of (n,) int arrays
        Rows of each group; K of them.
    reach : int
        Which pair of neighbouring taps.
    slopes : (K,) array
        Change of the pressure difference with flow in each group [Pa s/m³].

    Returns
    -------
    MeanNoise
        Blocks count as the independent rows.
    """
    difference = log.pressure_pa[reach] - log.pressure_pa[reach + 1]
    place, group, residual, curved = [], [], [], []
    for number, (rows, slope) in enumerate(zip(members, slopes, strict=True)):
        flow = log.flow_m3_s[rows] - np.mean(log.flow_m3_s[rows])
        above = difference[rows] - np.mean(difference[rows])
        curved.append(curvature(flow, above, float(slope), float(np.mean(log.flow_m3_s[rows]))))
        blocks, means = _block_means(block[rows], above - slope * flow)
        place.append(blocks)
        group.append(np.full(len(blocks), number))
        residual.append(means)
    which = np.concatenate(group) if group else np.empty(0, dtype=np.int64)
    where = np.concatenate(place) if place else np.empty(0, dtype=np.int64)
    values = np.concatenate(residual) if residual else np.empty(0)
    count = np.bincount(which, minlength=len(members)).astype(np.float64)
    alike = _alikeness(where, which, values)
    pairs = np.array([_pairs(where[which == k], alike) for k in range(len(members))])
    independent = np.maximum(count / np.maximum(pairs, 1.0), 1.0)
    spread = np.bincount(which, weights=values**2, minlength=len(members)) / np.maximum(count - pairs, 1.0)
    spread = pooled_variance(spread, np.maximum(independent - 1.0, 1.0))
    steps = step_variance(log, members, reach, slopes)
    return MeanNoise(np.sqrt(spread / independent + steps), independent, np.array(curved))


def _block_means(block: Rows, values: Array) -> tuple[Rows, Array]:
    """Return the blocks that occur and the mean of each."""
    found, index, count = np.unique(block, return_inverse=True, return_counts=True)
    return found, np.bincount(index, weights=values) / count


def _alikeness(place: Rows, group: Rows, values: Array) -> Array:
    """Return the autocorrelation of block means by their distance in blocks, from 0 to where it has died away."""
    if place.size < 3 or not np.any(values):
        return np.ones(1)
    start = int(np.min(place))
    line = np.zeros(int(np.max(place)) - start + 1)
    here = np.zeros_like(line)
    scale = np.sqrt(np.bincount(group, weights=values**2) / np.bincount(group))[group]
    line[place - start] = values / np.maximum(scale, 1e-300)
    here[place - start] = 1.0
    found = [1.0]
    for lag in range(1, min(FARTHEST, len(line) - 1)):
        both = float(here[lag:] @ here[:-lag])
        rho = float(line[lag:] @ line[:-lag]) / both if both else 0.0
        # What the loss of the groups' means hides is given back roughly; beyond the first that is lost in its own
        # chance there is nothing to see.
        if rho < 2.0 / np.sqrt(max(both, 1.0)):
            break
        found.append(rho)
    return np.array(found)


def _pairs(place: Rows, alike: Array) -> float:
    """Return how many blocks of a group one independent block is worth [-], at least 1."""
    if place.size == 0:
        return 1.0
    line = np.zeros(int(np.max(place)) - int(np.min(place)) + 1)
    line[place - np.min(place)] = 1.0
    total = float(place.size)
    for lag, rho in enumerate(alike[1:], start=1):
        total += 2.0 * rho * float(line[lag:] @ line[:-lag]) if lag < len(line) else 0.0
    return total / place.size
