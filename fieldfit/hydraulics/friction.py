"""Darcy friction factor of a round pipe: laminar, Colebrook–White, and back to the roughness."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

STANDARD_GRAVITY = 9.80665
"""Standard acceleration of free fall [m/s²]."""
ROUGH = 3.7
"""Constant of the fully rough limit in Colebrook–White [-]."""
SMOOTH = 2.51
"""Constant of the smooth limit in Colebrook–White [-]."""

_C = 2.0 / math.log(10.0)
"""2 log10(y) = _C ln(y)."""
_BLOCK = 16384
"""Elements worked on at a time, so that all scratch arrays stay in the cache."""
_FLOAT32_OCTAVE = 2.0**23
_FLOAT32_BIAS = 127.0

# numpy takes a constant in an array without dimensions faster than a bare float, which short inputs feel.
_PER_ROUGH = np.array(1.0 / ROUGH)
_PER_C = np.array(1.0 / _C)
_SMOOTH = np.array(SMOOTH)
# A smooth pipe has 1/√f ≈ 0.54678 log2(Re) − 1.573 within 0.07 from Re 4e3 to 1e8.
_START_SLOPE = np.array(SMOOTH * 0.54678 / _FLOAT32_OCTAVE, dtype=np.float32)
_START = np.array(SMOOTH * (-1.573 - _FLOAT32_BIAS * 0.54678), dtype=np.float32)
_OCTAVES = np.array(-SMOOTH * 2.0 * math.log10(2.0), dtype=np.float32)
_PER_C_SMOOTH = np.array(1.0 / (_C * SMOOTH), dtype=np.float32)
_ONE = np.array(1.0, dtype=np.float32)


def laminar(reynolds: ArrayLike) -> Array:
    """Return the Darcy friction factor of laminar flow, 64/Re.

    Parameters
    ----------
    reynolds : array_like
        Reynolds number [-], above 0, any shape.

    Returns
    -------
    Array
        Friction factor [-], same shape.

    Examples
    --------
    >>> print(laminar(1600.0))
    0.04
    """
    return np.asarray(64.0 / np.asarray(reynolds, dtype=np.float64))


def smooth(reynolds: ArrayLike) -> Array:
    """Return the Darcy friction factor of a perfectly smooth pipe in turbulent flow.

    It is Colebrook–White at zero roughness: 1/√f = −2 log10(2.51/(Re √f)), within 0.03 % of f from Prandtl's
    rounded 1/√f = 2 log10(Re √f) − 0.8.

    Parameters
    ----------
    reynolds : array_like
        Reynolds number [-], 100 or more, any shape.

    Returns
    -------
    Array
        Friction factor [-], same shape.

    Examples
    --------
    >>> print(f"{smooth(1e5):.6f}")
    0.017990
    """
    return colebrook_white(reynolds, 0.0)


def colebrook_white(reynolds: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Return the Darcy friction factor of turbulent flow by Colebrook–White, solved exactly.

    1/√f = −2 log10(ε/(3.7 D) + 2.51/(Re √f)). Two steps in single precision reach seven digits, one Newton step in
    double precision does the rest: relative error below 1e-12 for Re from 2e3 to 1e9 and ε/D from 0 to 0.5, and
    still 1e-7 at Re 100. The law is one for turbulent flow: below Re 4000 it is an extrapolation, and the caller
    decides whether it means anything.

    Parameters
    ----------
    reynolds : array_like
        Reynolds number [-], finite, 100 or more.
    relative_roughness : array_like
        Equivalent sand-grain roughness over bore, ε/D [-], 0 or more. The two broadcast.

    Returns
    -------
    Array
        Friction factor [-], in the broadcast shape; NaN where an input is NaN.

    References
    ----------
    Colebrook, C. F. (1939), J. Inst. Civ. Eng. 11(4), 133-156, doi:10.1680/ijoti.1939.13150.

    Examples
    --------
    >>> print(f"{colebrook_white(1e5, 1e-3):.12f}")
    0.022174535945
    >>> colebrook_white([[1e5], [1e6]], [0.0, 1e-3, 1e-2]).shape
    (2, 3)
    """
    with _blocks(reynolds, relative_roughness, 1) as blocks:
        wide, narrow = _scratch(blocks.itersize)
        for re, rough, f in blocks:
            now = re.size
            _root(re, rough, f, wide[:, :now], narrow[:, :now])
            np.square(f, out=f)
        return np.asarray(blocks.operands[2])


def colebrook_white_with_slopes(reynolds: ArrayLike, relative_roughness: ArrayLike) -> tuple[Array, Array, Array]:
    """Return the Colebrook–White friction factor with its slopes, from the same pass.

    The slopes follow from the law itself and need no further logarithm; they are as exact as f.

    Parameters
    ----------
    reynolds : array_like
        Reynolds number [-], finite, 100 or more.
    relative_roughness : array_like
        Relative roughness ε/D [-], 0 or more. The two broadcast.

    Returns
    -------
    friction_factor : Array
        Friction factor f [-], in the broadcast shape.
    df_dreynolds : Array
        Slope of f with Re at constant ε/D [-], negative.
    df_drelative_roughness : Array
        Slope of f with ε/D at constant Re [-], positive.

    Examples
    --------
    >>> f, by_reynolds, by_roughness = colebrook_white_with_slopes(1e5, 1e-3)
    >>> print(f"{f:.6f} {by_reynolds:.4e} {by_roughness:.4f}")
    0.022175 -2.0990e-08 3.3657
    """
    with _blocks(reynolds, relative_roughness, 3) as blocks:
        wide, narrow = _scratch(blocks.itersize)
        for re, rough, f, by_reynolds, by_roughness in blocks:
            now = re.size
            _root(re, rough, f, wide[:, :now], narrow[:, :now])
            _slopes(re, f, by_reynolds, by_roughness, wide[:, :now])
        _, _, friction_factor, by_reynolds, by_roughness = blocks.operands
        return np.asarray(friction_factor), np.asarray(by_reynolds), np.asarray(by_roughness)


def relative_roughness(friction_factor: ArrayLike, reynolds: ArrayLike) -> Array:
    """Return the relative roughness that a friction factor means by Colebrook–White.

    ε/D = 3.7 (10^(−1/(2√f)) − 2.51/(Re √f)), exact. The result is signed: below 0 the readings lie below the smooth
    pipe, "smoother than smooth", by as much as the value says. A value above about 0.05 is not a roughness.

    Parameters
    ----------
    friction_factor : array_like
        Darcy friction factor [-], above 0.
    reynolds : array_like
        Reynolds number [-], above 0. The two broadcast.

    Returns
    -------
    Array
        Relative roughness ε/D [-], signed, in the broadcast shape.

    Examples
    --------
    >>> print(f"{relative_roughness(0.0221745359445, 1e5):.6e}")
    1.000000e-03
    >>> print(relative_roughness(0.017, 1e5) < 0.0)
    True
    """
    x = 1.0 / np.sqrt(np.asarray(friction_factor, dtype=np.float64))
    return np.asarray(ROUGH * (np.exp(x / -_C) - SMOOTH * x / np.asarray(reynolds, dtype=np.float64)))


def _blocks(reynolds: ArrayLike, relative_roughness: ArrayLike, outputs: int) -> np.nditer:
    """Return an iterator over flat float64 blocks of both inputs, broadcast, and of new outputs."""
    return np.nditer(
        (np.asarray(reynolds), np.asarray(relative_roughness), *(None,) * outputs),
        flags=("external_loop", "buffered", "zerosize_ok"),
        op_flags=(("readonly",), ("readonly",), *(("writeonly", "allocate"),) * outputs),
        op_dtypes=(np.float64,) * (2 + outputs),
        buffersize=_BLOCK,
        casting="same_kind",
    )


def _scratch(elements: int) -> tuple[Array, NDArray[np.float32]]:
    """Return the scratch rows of one call, double and single precision."""
    size = min(elements, _BLOCK)
    return np.empty((4, size)), np.empty((4, size), dtype=np.float32)


def _root(re: Array, rough: Array, root: Array, wide: Array, narrow: NDArray[np.float32]) -> None:
    """Write √f to `root`; leave k = Re ε/(3.7 D) in the first row of `wide`.

    With x = 1/√f, w = k + 2.51 x and c = 2/ln 10 the law is x + c ln(w/Re) = 0, and Newton's step from x₀ is
    x = (2.51 x₀ − w ln(w/Re)) / (w/c + 2.51): a ratio of sums of positive terms, so nothing cancels.
    """
    k, guess, w, log = wide
    np.multiply(re, rough, out=k)
    np.multiply(k, _PER_ROUGH, out=k)
    _guess(re, k, guess, narrow)
    np.add(k, guess, out=w)
    np.divide(w, re, out=log)
    np.log(log, out=log)
    np.multiply(log, w, out=log)
    np.subtract(guess, log, out=log)
    np.multiply(w, _PER_C, out=w)
    np.add(w, _SMOOTH, out=w)
    np.divide(w, log, out=root)


def _guess(re: Array, k: Array, guess: Array, narrow: NDArray[np.float32]) -> None:
    """Write 2.51/√f to seven digits, by one substitution and one Newton step in single precision."""
    re32, k32, x, log = narrow
    re32[:] = re
    k32[:] = k
    # The bits of a float, read as an integer, are its logarithm well enough for a start.
    x[:] = re32.view(np.int32)
    np.multiply(x, _START_SLOPE, out=x)
    np.add(x, _START, out=x)
    np.add(x, k32, out=x)
    np.divide(x, re32, out=x)
    np.log2(x, out=x)
    np.multiply(x, _OCTAVES, out=x)
    np.add(k32, x, out=k32)
    np.divide(k32, re32, out=log)
    np.log(log, out=log)
    np.multiply(log, k32, out=log)
    np.subtract(x, log, out=log)
    np.multiply(k32, _PER_C_SMOOTH, out=k32)
    np.add(k32, _ONE, out=k32)
    np.divide(log, k32, out=log)
    guess[:] = log


def _slopes(re: Array, f: Array, by_reynolds: Array, by_roughness: Array, wide: Array) -> None:
    """Turn √f in `f` into f, and write both slopes: 2c f/(w + 2.51 c) times √f Re/3.7 and −2.51/Re."""
    k, w, common, _ = wide
    np.divide(SMOOTH, f, out=w)
    np.add(w, k, out=w)
    np.add(w, SMOOTH * _C, out=w)
    np.multiply(f, 2.0 * _C / ROUGH, out=by_roughness)
    np.multiply(by_roughness, re, out=by_roughness)
    np.square(f, out=f)
    np.divide(f, w, out=common)
    np.multiply(by_roughness, common, out=by_roughness)
    np.multiply(common, -2.0 * _C * SMOOTH, out=common)
    np.divide(common, re, out=by_reynolds)
