"""Which kind of flow a pipe has: laminar, critical, or turbulent from smooth to fully rough."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from fieldfit.hydraulics.friction import colebrook_white

LAMINAR_LIMIT = 2100.0
"""Reynolds number below which flow in a pipe is laminar [-]."""
TURBULENT_LIMIT = 4000.0
"""Reynolds number from which flow in a pipe is turbulent [-]."""
SMOOTH_LIMIT = 5.0
"""Roughness Reynolds number below which the wall acts as smooth [-]."""
FULLY_ROUGH_LIMIT = 70.0
"""Roughness Reynolds number above which viscosity no longer matters [-]."""


def regime(reynolds: ArrayLike, relative_roughness: ArrayLike) -> NDArray[np.str_]:
    """Return the kind of flow: laminar, critical, smooth turbulent, transitional or fully rough.

    Between Re 2100 and 4000 the flow is critical: neither laminar nor turbulent for certain, and no use for an
    estimate. Turbulent flow is told by the roughness Reynolds number k⁺ = ε u*/ν = (ε/D) Re √(f/8): below 5 the
    viscous layer covers the wall, above 70 only the wall counts. The limits were found on sand grains; the walls of
    ordinary pipe pass from smooth to rough more gradually.

    Parameters
    ----------
    reynolds : array_like
        Reynolds number [-], 0 or more.
    relative_roughness : array_like
        Relative roughness ε/D [-]; below 0 counts as smooth. The two broadcast.

    Returns
    -------
    NDArray[np.str_]
        Kind of flow, in the broadcast shape; an empty text where an input is NaN.

    References
    ----------
    Schlichting, H. (1979), Boundary-Layer Theory, 7th ed., ch. 20: limits 5 and 70 from Nikuradse's pipes.

    Examples
    --------
    >>> print(regime([1500.0, 3000.0, 1e5, 1e5, 1e5], [1e-3, 1e-3, 0.0, 2e-3, 0.03]))
    ['laminar' 'critical' 'smooth turbulent' 'transitional' 'fully rough']
    """
    re, rough = np.broadcast_arrays(
        np.asarray(reynolds, dtype=np.float64), np.maximum(np.asarray(relative_roughness, dtype=np.float64), 0.0)
    )
    f = colebrook_white(np.maximum(re, TURBULENT_LIMIT), rough)
    k_plus = rough * re * np.sqrt(f / 8.0)
    kinds = (
        (np.isnan(k_plus), ""),
        (re < LAMINAR_LIMIT, "laminar"),
        (re < TURBULENT_LIMIT, "critical"),
        (k_plus < SMOOTH_LIMIT, "smooth turbulent"),
        (k_plus <= FULLY_ROUGH_LIMIT, "transitional"),
    )
    return np.asarray(np.select([where for where, _ in kinds], [kind for _, kind in kinds], default="fully rough"))
