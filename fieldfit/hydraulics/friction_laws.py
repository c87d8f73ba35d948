"""Friction laws by their published names, for comparison with reports that were written with them.

fieldfit itself computes with Colebrook–White. Haaland, Swamee–Jain and Churchill approximate it in closed form; the sand
grain law has the other extreme of transition between smooth and rough, so the effect of that choice can be shown.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike, NDArray

from fieldfit.errors import InputError, near_miss
from fieldfit.hydraulics.friction import SMOOTH, colebrook_white, relative_roughness

Array = NDArray[np.float64]

_C = 2.0 / math.log(10.0)
"""2 log10(y) = _C ln(y)."""
_SAND_STARTS, _SAND_FULL = 2.25, 90.0
"""Roughness Reynolds numbers between which sand grains come to matter [-]."""
_SAND_SPAN = math.log(_SAND_FULL / _SAND_STARTS)
_SAND_ROUGH = 1.74
"""Nikuradse's constant of the fully rough limit [-]."""
_SAND_MEETS = 2.0 * math.log10(SMOOTH / (2.0 * math.sqrt(8.0))) + _SAND_ROUGH
"""Where the smooth and the fully rough law cross: 2 log10(k⁺) = _SAND_MEETS."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Law:
    """A law for the Darcy friction factor of turbulent flow."""

    friction_factor: Callable[[ArrayLike, ArrayLike], Array]
    """Friction factor [-] from Reynolds number and ε/D [-], arrays in, array out, broadcasting."""
    relative_roughness: Callable[[float, float], float | None]
    """ε/D [-] from friction factor and Reynolds number; None when smoother than the law's smooth pipe."""
    source: str
    """Where it was published."""


def relative_roughness_by_law(name: str, friction_factor: float, reynolds: float) -> float | None:
    """Return the relative roughness that a friction factor means under a named law.

    Parameters
    ----------
    name : str
        Published name, a key of `LAWS`.
    friction_factor : float
        Darcy friction factor [-], above 0.
    reynolds : float
        Reynolds number [-], turbulent.

    Returns
    -------
    float or None
        Relative roughness ε/D [-]; None when the friction factor is below that of the law's own smooth pipe.

    Raises
    ------
    InputError
        If no law has that name.

    Examples
    --------
    >>> for name in LAWS:
    ...     print(f"{name}: {relative_roughness_by_law(name, 0.0222, 1e5):.6f}")
    Colebrook–White: 0.001008
    Haaland: 0.001068
    Swamee–Jain: 0.000959
    Churchill: 0.000959
    Nikuradse sand grain: 0.002531
    """
    if name not in LAWS:
        raise InputError(
            f"there is no friction law '{name}'", f"{near_miss(name, LAWS)}The laws are: {', '.join(LAWS)}."
        )
    return LAWS[name].relative_roughness(friction_factor, reynolds)


def _colebrook_white_inverse(friction_factor: float, reynolds: float) -> float | None:
    """Return ε/D by Colebrook–White [-]."""
    return _roughness_or_none(float(relative_roughness(friction_factor, reynolds)))


def _haaland(reynolds: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Return f = (−1.8 log10((ε/3.7D)^1.11 + 6.9/Re))⁻² [-]."""
    re, rough = _floats(reynolds, relative_roughness)
    return np.asarray((-1.8 * np.log10((rough / 3.7) ** 1.11 + 6.9 / re)) ** -2)


def _haaland_inverse(friction_factor: float, reynolds: float) -> float | None:
    """Return ε/D by Haaland [-]."""
    wall = 10.0 ** (-1.0 / (1.8 * math.sqrt(friction_factor))) - 6.9 / reynolds
    return None if wall < 0.0 else 3.7 * wall ** (1.0 / 1.11)


def _swamee_jain(reynolds: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Return f = 0.25 (log10(ε/3.7D + 5.74/Re^0.9))⁻² [-]."""
    re, rough = _floats(reynolds, relative_roughness)
    return np.asarray(0.25 * np.log10(rough / 3.7 + 5.74 / re**0.9) ** -2)


def _swamee_jain_inverse(friction_factor: float, reynolds: float) -> float | None:
    """Return ε/D by Swamee–Jain [-]."""
    return _roughness_or_none(3.7 * (10.0 ** (-0.5 / math.sqrt(friction_factor)) - 5.74 / reynolds**0.9))


def _churchill(reynolds: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Return f = 8 ((8/Re)^12 + (A + B)^−1.5)^(1/12), A = (−2.457 ln((7/Re)^0.9 + 0.27 ε/D))^16, B = (37530/Re)^16."""
    re, rough = _floats(reynolds, relative_roughness)
    turbulent = (-2.457 * np.log((7.0 / re) ** 0.9 + 0.27 * rough)) ** 16
    return np.asarray(8.0 * ((8.0 / re) ** 12 + (turbulent + (37530.0 / re) ** 16) ** -1.5) ** (1.0 / 12.0))


def _churchill_inverse(friction_factor: float, reynolds: float) -> float | None:
    """Return ε/D by Churchill [-]."""
    beyond_laminar = (friction_factor / 8.0) ** 12 - (8.0 / reynolds) ** 12
    if beyond_laminar <= 0.0:
        return None
    turbulent = max(beyond_laminar ** (-2.0 / 3.0) - (37530.0 / reynolds) ** 16, 0.0)
    return _roughness_or_none((math.exp(-(turbulent ** (1.0 / 16.0)) / 2.457) - (7.0 / reynolds) ** 0.9) / 0.27)


def _sand_grain(reynolds: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Return f of a pipe lined with sand grains [-].

    1/√f = 2 log10(Re √f/2.51) less the shift that the grains cause. Newton's step cannot miss: the slope of the left
    side less the right lies between 0.9 and 1.2 everywhere.
    """
    re, rough = _floats(reynolds, relative_roughness)
    x = 1.0 / np.sqrt(colebrook_white(re, rough))
    for _ in range(20):
        shift, slope = _sand_shift(rough * re / (math.sqrt(8.0) * x))
        step = (x + _C * np.log(SMOOTH * x / re) + shift) / (1.0 + (_C - slope) / x)
        x = x - step
        if np.all(np.abs(step) < 1e-13 * x):
            break
    return np.asarray(x**-2)


def _sand_shift(k_plus: Array) -> tuple[Array, Array]:
    """Return how far sand grains of roughness Reynolds number k⁺ lower 1/√f [-], and its slope with ln k⁺.

    The published sine also lies between 2.25 and 3.3, where it would make a grain smoother than no grain; there the
    shift is held at 0, so that f never falls as ε grows.
    """
    ln_k = np.log(np.maximum(k_plus, _SAND_STARTS))
    rough = np.maximum(_C * ln_k - _SAND_MEETS, 0.0)
    angle = 0.5 * math.pi * np.minimum((ln_k - math.log(_SAND_STARTS)) / _SAND_SPAN, 1.0)
    slope = _C * np.sin(angle) + rough * np.cos(angle) * 0.5 * math.pi / _SAND_SPAN
    return rough * np.sin(angle), np.where(rough > 0.0, slope, 0.0)


def _sand_grain_inverse(friction_factor: float, reynolds: float) -> float | None:
    """Return ε/D of sand grains [-]: the smallest that is felt, k⁺ 3.3, as soon as f is above smooth."""
    x = 1.0 / math.sqrt(friction_factor)
    shift = _C * math.log(reynolds / (SMOOTH * x)) - x
    if shift <= 0.0:
        return None if shift < 0.0 else 0.0
    ln_k = (shift + _SAND_MEETS) / _C
    if ln_k < math.log(_SAND_FULL):
        from scipy.optimize import brentq

        ln_k = brentq(
            lambda trial: float(_sand_shift(np.exp(trial))[0]) - shift,
            _SAND_MEETS / _C,
            math.log(_SAND_FULL),
            xtol=1e-13,
        )
    return math.exp(ln_k) * math.sqrt(8.0) * x / reynolds


def _floats(*values: ArrayLike) -> tuple[Array, ...]:
    """Return each input as an array of floats."""
    return tuple(np.asarray(value, dtype=np.float64) for value in values)


def _roughness_or_none(signed: float) -> float | None:
    """Return a signed relative roughness [-], or None when it lies below smooth."""
    return None if signed < 0.0 else signed


LAWS: Mapping[str, Law] = MappingProxyType(
    {
        "Colebrook–White": Law(
            friction_factor=colebrook_white,
            relative_roughness=_colebrook_white_inverse,
            source="Colebrook (1939), J. Inst. Civ. Eng. 11(4), 133-156, doi:10.1680/ijoti.1939.13150",
        ),
        "Haaland": Law(
            friction_factor=_haaland,
            relative_roughness=_haaland_inverse,
            source="Haaland (1983), J. Fluids Eng. 105(1), 89-90, doi:10.1115/1.3240948",
        ),
        "Swamee–Jain": Law(
            friction_factor=_swamee_jain,
            relative_roughness=_swamee_jain_inverse,
            source="Swamee and Jain (1976), J. Hydraul. Div. 102(5), 657-664",
        ),
        "Churchill": Law(
            friction_factor=_churchill,
            relative_roughness=_churchill_inverse,
            source="Churchill (1977), Chem. Eng. 84(24), 91-92",
        ),
        "Nikuradse sand grain": Law(
            friction_factor=_sand_grain,
            relative_roughness=_sand_grain_inverse,
            source=(
                "limits of Nikuradse (1933), NACA TM 1292; transition by the sine of Ioselevich and Pilipenko (1974), "
                "as in Cebeci and Bradshaw (1977), Momentum Transfer in Boundary Layers"
            ),
        ),
    }
)
"""The laws on offer, by published name."""
