"""Some values of a column, however long it is."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.resolution import SAMPLE

Array = NDArray[np.float64]


class Sample:
    """Values of a column, evenly spaced and few, however long the column is."""

    def __init__(self) -> None:
        self._stride, self._skip, self._taken = 1, 0, np.empty(0)

    def add(self, values: Array) -> None:
        """Take every so many of the finite values."""
        known = np.isfinite(values)
        finite = values if known.all() else values[known]
        self._taken = np.append(self._taken, finite[self._skip :: self._stride])
        self._skip = (self._skip - len(finite)) % self._stride
        while len(self._taken) > 2 * SAMPLE:
            self._skip += self._stride if len(self._taken) % 2 else 0
            self._taken, self._stride = self._taken[::2].copy(), 2 * self._stride

    @property
    def values(self) -> Array:
        """What was taken."""
        return self._taken
