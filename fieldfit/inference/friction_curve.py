"""One friction curve through all flows, told by the friction factor at one reference Reynolds number.

The wall's only parameter is ``ln f`` at the reference Reynolds number. Roughness, Hazen–Williams C and f there
are monotone functions of it, so an interval for one is an interval for all; and it stays regular where
``ln ε`` does not exist, on walls that read smoother than smooth.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import colebrook_white, colebrook_white_with_slopes, relative_roughness, smooth

Array = NDArray[np.float64]

TURBULENT_LAW_FROM = 100.0
"""Reynolds number below which the turbulent law is not solved; no reading used lies there, only a wild trial step."""
ROUGHEST = 0.5
"""Relative roughness beyond which the curve is not followed: ten times what may be called a roughness."""


class FrictionCurve(NamedTuple):
    """Friction factors along the curve, with their slopes; same shape as the Reynolds numbers."""

    friction_factor: Array
    """Darcy friction factor [-]."""
    slope_parameter: Array
    """d ln f / d(ln f at the reference) [-]."""
    slope_reynolds: Array
    """d ln f / d ln Re [-]."""


def friction_curve(ln_friction: Array, reynolds: Array, reference_reynolds: Array) -> FrictionCurve:
    """Follow the Colebrook–White curve that has a given friction factor at the reference.

    Below the smooth pipe's value the curve is the smooth one times a constant.

    Parameters
    ----------
    ln_friction : (N,) array
        ln f at the reference [-].
    reynolds : (K, N) or (N,) array
        Reynolds numbers asked for [-].
    reference_reynolds : (N,) array
        Reynolds number of the reference [-].

    Returns
    -------
    FrictionCurve
        Shape of `reynolds`.

    Examples
    --------
    >>> curve = friction_curve(np.log([0.03]), np.array([[1e5], [1e6]]), np.array([1e5]))
    >>> curve.friction_factor.round(4).tolist()
    [[0.03], [0.0291]]
    """
    at_smooth = smooth(reference_reynolds)
    friction = np.exp(ln_friction)
    rough = friction > at_smooth
    wall = np.clip(relative_roughness(np.where(rough, friction, at_smooth), reference_reynolds), 0.0, ROUGHEST)
    factor, by_reynolds, by_roughness = colebrook_white_with_slopes(reynolds, wall)
    _, _, reference_by_roughness = colebrook_white_with_slopes(reference_reynolds, wall)
    ratio = np.where(rough, 1.0, friction / at_smooth)
    slope = np.where(rough, by_roughness / factor * friction / reference_by_roughness, 1.0)
    return FrictionCurve(factor * ratio, slope, by_reynolds * reynolds / factor)


def highest_ln_friction(reference_reynolds: Array) -> Array:
    """Return the largest ln f the curve is followed to [-], same shape."""
    return np.log(colebrook_white(reference_reynolds, np.full(np.shape(reference_reynolds), ROUGHEST)))
