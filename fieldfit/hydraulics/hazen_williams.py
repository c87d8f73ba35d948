"""Hazen–Williams: head loss, flow and C, each from the others, and the C that a roughness amounts to.

One form is used throughout, V = 0.849182 C R^0.63 S^0.54 (R hydraulic radius [m], S slope [-]), and its exact inverses:
h = 10.67 L Q^1.852/(C^1.852 D^4.870) with all digits kept. Printed forms with rounded exponents differ by up to 0.4 % of C.

C, head loss and friction factor follow the sign of their argument, so a head loss against the flow gives a negative C
and no NaN; a C from a head loss of 0 is infinite.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, laminar
from fieldfit.hydraulics.regime import LAMINAR_LIMIT

Array = NDArray[np.float64]

SLOPE_EXPONENT = 0.54
"""Power of the slope S in Hazen–Williams [-]."""
BORE_EXPONENT = 2.63
"""Power of the bore in Q = _FLOW C D^2.63 S^0.54 [-]: 2 of the area and 0.63 of the hydraulic radius."""
_FLOW = 0.849182 * math.pi / 4.0 * 0.25**0.63
"""Flow of a pipe of C 1 and bore 1 m at slope 1 [m³/s]."""


def head_loss(flow_m3_s: ArrayLike, c: ArrayLike, bore_m: ArrayLike, length_m: ArrayLike) -> Array:
    """Return the head loss of a pipe by Hazen–Williams.

    Parameters
    ----------
    flow_m3_s : array_like
        Flow [m³/s]; the head loss has its sign.
    c : array_like
        Hazen–Williams C [-], above 0.
    bore_m : array_like
        Inside diameter [m], above 0.
    length_m : array_like
        Length [m]. All broadcast.

    Returns
    -------
    Array
        Head loss [m], in the broadcast shape.

    Examples
    --------
    >>> print(f"{head_loss(0.03, 120.0, 0.2, 500.0):.3f}")
    2.890
    """
    flow, c, bore, length = _floats(flow_m3_s, c, bore_m, length_m)
    return np.asarray(length * _signed_power(flow / (_FLOW * c * bore**BORE_EXPONENT), 1.0 / SLOPE_EXPONENT))


def flow_from_head_loss(head_loss_m: ArrayLike, c: ArrayLike, bore_m: ArrayLike, length_m: ArrayLike) -> Array:
    """Return the flow that a head loss drives by Hazen–Williams.

    Parameters
    ----------
    head_loss_m : array_like
        Head loss [m]; the flow has its sign.
    c : array_like
        Hazen–Williams C [-].
    bore_m : array_like
        Inside diameter [m], above 0.
    length_m : array_like
        Length [m], above 0. All broadcast.

    Returns
    -------
    Array
        Flow [m³/s], in the broadcast shape.

    Examples
    --------
    >>> print(f"{flow_from_head_loss(head_loss(0.03, 120.0, 0.2, 500.0), 120.0, 0.2, 500.0):.6f}")
    0.030000
    """
    loss, c, bore, length = _floats(head_loss_m, c, bore_m, length_m)
    return np.asarray(_FLOW * c * bore**BORE_EXPONENT * _signed_power(loss / length, SLOPE_EXPONENT))


def c_from_head_loss(flow_m3_s: ArrayLike, head_loss_m: ArrayLike, bore_m: ArrayLike, length_m: ArrayLike) -> Array:
    """Return the Hazen–Williams C that a measured flow and head loss amount to.

    Parameters
    ----------
    flow_m3_s : array_like
        Flow [m³/s].
    head_loss_m : array_like
        Head loss to friction [m], not 0; C is negative when it runs against the flow.
    bore_m : array_like
        Inside diameter [m], above 0.
    length_m : array_like
        Length [m], above 0. All broadcast.

    Returns
    -------
    Array
        C at that flow [-], in the broadcast shape; infinite where the head loss is 0.

    Examples
    --------
    >>> print(f"{c_from_head_loss(0.03, 2.890, 0.2, 500.0):.2f}")
    120.00
    """
    flow, loss, bore, length = _floats(flow_m3_s, head_loss_m, bore_m, length_m)
    return _c_from_slope(flow, loss / length, bore)


def c_from_friction_factor(friction_factor: ArrayLike, flow_m3_s: ArrayLike, bore_m: ArrayLike) -> Array:
    """Return the Hazen–Williams C that gives the same head loss as a Darcy friction factor at one flow.

    Parameters
    ----------
    friction_factor : array_like
        Darcy friction factor [-], not 0; C has its sign.
    flow_m3_s : array_like
        Flow [m³/s], above 0.
    bore_m : array_like
        Inside diameter [m], above 0. All broadcast.

    Returns
    -------
    Array
        C at that flow [-], in the broadcast shape; infinite where the friction factor is 0.

    Examples
    --------
    >>> print(f"{c_from_friction_factor(0.02, 0.03, 0.2):.1f}")
    135.0
    """
    factor, flow, bore = _floats(friction_factor, flow_m3_s, bore_m)
    return _c_from_slope(flow, factor * _velocity_head(flow, bore) / bore, bore)


def friction_factor_from_c(c: ArrayLike, flow_m3_s: ArrayLike, bore_m: ArrayLike) -> Array:
    """Return the Darcy friction factor that gives the same head loss as a Hazen–Williams C at one flow.

    Parameters
    ----------
    c : array_like
        Hazen–Williams C [-], not 0; the friction factor has its sign.
    flow_m3_s : array_like
        Flow [m³/s], above 0.
    bore_m : array_like
        Inside diameter [m], above 0. All broadcast.

    Returns
    -------
    Array
        Darcy friction factor at that flow [-], in the broadcast shape.

    Examples
    --------
    >>> print(f"{friction_factor_from_c(130.0, 0.03, 0.2):.4f}")
    0.0214
    """
    c, flow, bore = _floats(c, flow_m3_s, bore_m)
    slope = _signed_power(flow / (_FLOW * c * bore**BORE_EXPONENT), 1.0 / SLOPE_EXPONENT)
    return np.asarray(slope * bore / _velocity_head(flow, bore))


def c_of_roughness(roughness_m: ArrayLike, flow_m3_s: ArrayLike, bore_m: ArrayLike, viscosity_m2_s: ArrayLike) -> Array:
    """Return the Hazen–Williams C that a roughness amounts to at one flow, bore and viscosity.

    The head loss is that of Colebrook–White, or of laminar flow below Re 2100, where C says nothing of the wall. In the
    critical zone above it, up to Re 4000, Colebrook–White is an extrapolation. C drifts with flow, bore and
    temperature in one and the same pipe.

    Parameters
    ----------
    roughness_m : array_like
        Equivalent sand-grain roughness [m], 0 or more.
    flow_m3_s : array_like
        Flow [m³/s], above 0.
    bore_m : array_like
        Inside diameter [m], above 0.
    viscosity_m2_s : array_like
        Kinematic viscosity [m²/s], above 0. All broadcast.

    Returns
    -------
    Array
        C at that flow [-], in the broadcast shape.

    Examples
    --------
    >>> print(f"{c_of_roughness(1e-3, 0.0177, 0.15, 1.14e-6):.1f}")
    103.9
    """
    roughness, flow, bore, viscosity = _floats(roughness_m, flow_m3_s, bore_m, viscosity_m2_s)
    reynolds = 4.0 * flow / (math.pi * bore * viscosity)
    turbulent = colebrook_white(np.maximum(reynolds, LAMINAR_LIMIT), roughness / bore)
    return c_from_friction_factor(np.where(reynolds < LAMINAR_LIMIT, laminar(reynolds), turbulent), flow, bore)


def _c_from_slope(flow: Array, slope: Array, bore: Array) -> Array:
    """Return C from flow [m³/s], slope of the grade line [-] and bore [m]."""
    with np.errstate(divide="ignore"):
        return np.asarray(flow / (_FLOW * bore**BORE_EXPONENT * _signed_power(slope, SLOPE_EXPONENT)))


def _velocity_head(flow: Array, bore: Array) -> Array:
    """Return V²/2g [m]."""
    return np.asarray((4.0 * flow / (math.pi * bore**2)) ** 2 / (2.0 * STANDARD_GRAVITY))


def _signed_power(value: Array, exponent: float) -> Array:
    """Return |value|^exponent with the sign of the value."""
    return np.asarray(np.copysign(np.abs(value) ** exponent, value))


def _floats(*values: ArrayLike) -> tuple[Array, ...]:
    """Return each input as an array of floats."""
    return tuple(np.asarray(value, dtype=np.float64) for value in values)
