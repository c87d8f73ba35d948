"""The fit of one reach: the wall and all shared errors at once, and profile-likelihood intervals."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import smooth
from fieldfit.inference.friction_curve import highest_ln_friction
from fieldfit.inference.head_model import HeadModel, friction_by_definition, reynolds_of

Array = NDArray[np.float64]

NORMAL_95 = 1.959963984540054
"""Two-sided 95 % point of the normal distribution."""
ALL_SCATTER = 1e4
"""Factor on the noise under which the shared errors stay where their priors put them."""
WIDENINGS = 30
FAR_BELOW_SMOOTH = 5.0
"""Distance under a smooth pipe's ln f that is followed: 1/150 of its f, a fault in the data long before [-]."""
FURTHEST = 20.0
"""Distance in ln f at which the search for an interval's end gives up [-]."""
ENOUGH = 0.98
"""Reduced χ² at which widened noise is content."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fit:
    """The best wall and shared errors for one reach; K readings, M shared errors."""

    model: HeadModel
    """The equation fitted."""
    ln_friction: float
    """Best ln f at the reference [-]."""
    u: Array
    """(M,) fitted shared errors in standard deviations [-]."""
    random_m: Array
    """(K,) random standard errors used, widened where the fit asked for it [m]."""
    chi_square: float
    """Misfit at the best point: readings and shared errors together [-]."""
    reduced_chi_square: float | None
    """χ² over degrees of freedom, or the factor the noise's variance was widened by [-]; None with one reading."""
    interval: tuple[float, float]
    """95 % profile-likelihood interval of ln f at the reference [-]."""
    share: Array
    """(M + 1,) share of each shared error, and last of the readings' noise, in the variance of ln f [-]."""
    standard: float
    """Linearised standard uncertainty of ln f [-]."""


def fit_reach(model: HeadModel) -> Fit:
    """Fit one reach by least squares with the shared errors as parameters of their own.

    Every shared error adds one residual, its own value in standard deviations, so that stated accuracies act as
    priors. Where the readings scatter more than their random errors allow (reduced χ² above 1) these are widened
    and the fit is done again; they are never narrowed.

    Parameters
    ----------
    model : HeadModel
        The equation, with its readings.

    Returns
    -------
    Fit
    """
    noise, reduced = _fitting_noise(model)
    ln_friction, u = _least_squares(model, noise)
    chi_square = _chi_square(model, noise, ln_friction, u)
    share, standard = _linearised(model, noise, ln_friction, u)
    return Fit(
        model=model,
        ln_friction=ln_friction,
        u=u,
        random_m=noise,
        chi_square=chi_square,
        reduced_chi_square=reduced,
        interval=_profile(model, noise, (ln_friction, u), standard),
        share=share,
        standard=standard,
    )


def _fitting_noise(model: HeadModel) -> tuple[Array, float | None]:
    """Return the random standard errors, widened until the fit is content, and the reduced χ².

    The widening comes down from above, from a fit that leaves all scatter to the noise: coming up from noise that
    is far too small, the shared errors would be bent to swallow the scatter and stay bent.
    """
    noise = model.readings.random_m
    freedom = len(noise) - 1
    if freedom == 0:
        return noise, None
    reduced = _chi_square(model, noise, *_least_squares(model, noise)) / freedom
    if reduced <= 1.0:
        return noise, reduced
    ln_friction, u = _least_squares(model, ALL_SCATTER * noise)
    scale = np.sqrt(_chi_square(model, noise, ln_friction, 0.0 * u) / freedom)
    for _ in range(WIDENINGS):
        at_scale = _chi_square(model, scale * noise, *_least_squares(model, scale * noise)) / freedom
        if at_scale > ENOUGH or scale <= 1.0:
            break
        scale = max(scale * np.sqrt(at_scale), 1.0)
    return scale * noise, float(scale**2)


def _least_squares(model: HeadModel, noise: Array) -> tuple[float, Array]:
    """Minimise with lmfit; return ln f and the shared errors."""
    import lmfit

    parameters = lmfit.Parameters()
    parameters.add("ln_friction", value=_first_guess(model))
    names = [f"u{index}" for index in range(len(model.errors.names))]
    for name in names:
        parameters.add(name, value=0.0)

    def unpack(values: Any) -> tuple[float, Array]:
        return _bounded(model, values["ln_friction"].value), np.array([values[name].value for name in names])

    def residual(values: Any) -> Array:
        ln_friction, u = unpack(values)
        misfit = (model.readings.head_loss_m - model.predict(ln_friction, u).head_m) / noise
        return np.concatenate([misfit, u])

    def slopes(values: Any) -> Array:
        return _jacobian(model, noise, *unpack(values))

    found = lmfit.minimize(
        residual, parameters, method="leastsq", scale_covar=False, Dfun=slopes, col_deriv=True, xtol=1e-12, ftol=1e-12
    )
    return _polished(model, noise, *unpack(found.params))


def _polished(model: HeadModel, noise: Array, ln_friction: float, u: Array) -> tuple[float, Array]:
    """Take two Gauss–Newton steps from where the search stopped, so that the digits do not hang on its path."""
    for _ in range(2):
        slopes = _jacobian(model, noise, ln_friction, u)
        misfit = (model.readings.head_loss_m - model.predict(ln_friction, u).head_m) / noise
        step = _least_step(slopes, np.concatenate([misfit, u]))
        ln_friction, u = _bounded(model, ln_friction + float(step[0])), u + step[1:]
    return ln_friction, u


def _bounded(model: HeadModel, ln_friction: float) -> float:
    """Keep ln f where the curve is followed and still felt; a best value at either end is told apart by its state."""
    reynolds = np.array(model.reference.reynolds)
    lowest = float(np.log(smooth(reynolds))) - FAR_BELOW_SMOOTH
    return min(max(ln_friction, lowest), float(highest_ln_friction(reynolds)))


def _first_guess(model: HeadModel) -> float:
    """Start from the largest loss, which knows f best; from smooth pipe where it makes no sense."""
    _, factor = friction_by_definition(model.readings)
    guess = float(factor[np.argmax(model.readings.head_loss_m)])
    at_smooth = float(smooth(np.array(reynolds_of(model.readings).max())))
    return _bounded(model, float(np.log(guess if guess > 0.2 * at_smooth else at_smooth)))


def _jacobian(model: HeadModel, noise: Array, ln_friction: float, u: Array) -> Array:
    """Return (1 + M, K + M) slopes of the residuals, parameters along the first axis."""
    prediction = model.predict(ln_friction, u)
    free = len(u)
    slopes = np.zeros((1 + free, len(noise) + free))
    slopes[0, : len(noise)] = -prediction.by_wall / noise
    slopes[1:, : len(noise)] = -prediction.by_error / noise
    slopes[1:, len(noise) :] = np.eye(free)
    return slopes


def _least_step(slopes: Array, residual: Array) -> Array:
    """Return the step that takes most off the residuals, to first order; slopes have parameters along the first axis.

    By orthogonal decomposition, not by normal equations: next to readings of hardly any noise the priors' ones would
    be lost in the squares.
    """
    return np.asarray(np.linalg.lstsq(slopes.T, -residual, rcond=None)[0])


def _chi_square(model: HeadModel, noise: Array, ln_friction: float, u: Array) -> float:
    """Return the misfit of readings and shared errors together."""
    misfit = (model.readings.head_loss_m - model.predict(ln_friction, u).head_m) / noise
    return float(misfit @ misfit + u @ u)


def fit_known(model: HeadModel, ln_friction: float) -> Fit:
    """Return what a fit would say of a wall that is known, to first order: for tests still to be made.

    Parameters
    ----------
    model : HeadModel
        The equation, with readings that the known wall would give.
    ln_friction : float
        ln f at the reference [-].

    Returns
    -------
    Fit
        Shared errors at zero, intervals by the linearised uncertainty, nothing to judge the scatter by.
    """
    u, noise = np.zeros(len(model.errors.names)), model.readings.random_m
    share, standard = _linearised(model, noise, ln_friction, u)
    half = NORMAL_95 * standard
    return Fit(
        model=model,
        ln_friction=ln_friction,
        u=u,
        random_m=noise,
        chi_square=0.0,
        reduced_chi_square=None,
        interval=(ln_friction - half, ln_friction + half),
        share=share,
        standard=standard,
    )


def covariance(fit: Fit, better: Array | None = None) -> Array:
    """Return the covariance of ln f at the reference and of the shared errors, (1 + M, 1 + M), at the best point.

    Parameters
    ----------
    fit : Fit
        A fitted reach.
    better : (M + 1,) array, optional
        How many times smaller each shared error, and last the readings' noise, is to be taken; all ones by default.

    Returns
    -------
    Array
        The wall first, then the shared errors in their order.
    """
    slopes = _jacobian(fit.model, fit.random_m, fit.ln_friction, fit.u)
    count = len(fit.random_m)
    factor = np.ones(len(fit.u) + 1) if better is None else better
    weight = np.concatenate([np.full(count, factor[-1]), factor[:-1]])
    root = np.linalg.pinv((slopes * weight).T)
    return np.asarray(root @ root.T)


def _linearised(model: HeadModel, noise: Array, ln_friction: float, u: Array) -> tuple[Array, float]:
    """Return each error's share in the variance of ln f, noise last, and the standard uncertainty.

    The estimate is, near the best point, a linear function of the readings and of the priors' zeros, each of unit
    variance; the squares of its coefficients are the contributions and add up to the whole.
    """
    slopes = _jacobian(model, noise, ln_friction, u)
    coefficient = np.linalg.pinv(slopes.T)[0]
    squares = coefficient**2
    share = np.append(squares[len(noise) :], np.sum(squares[: len(noise)]))
    variance = float(np.sum(squares))
    return share / variance, float(np.sqrt(variance))


def _profile(model: HeadModel, noise: Array, best: tuple[float, Array], standard: float) -> tuple[float, float]:
    """Find where χ², minimised over the shared errors, has risen by the 95 % point of one degree of freedom."""
    ln_friction, u_best = best
    floor = _chi_square(model, noise, ln_friction, u_best)
    ends = []
    for sign in (-1.0, 1.0):

        def rise(distance: float, sign: float = sign) -> float:
            at = _bounded(model, ln_friction + sign * distance)
            return _chi_square(model, noise, at, _best_errors(model, noise, at, u_best)) - floor - NORMAL_95**2

        ends.append(ln_friction + sign * _crossing(rise, NORMAL_95 * standard))
    return ends[0], ends[1]


def _crossing(rise: Callable[[float], float], expected: float) -> float:
    """Return where a rise from below crosses zero; what was expected where it never does, or starts above.

    The latter are readings that contradict themselves so far that no best point holds; their state says so.
    """
    from scipy.optimize import brentq

    far = min(expected, FURTHEST)
    while rise(far) < 0.0 and far < FURTHEST:
        far *= 1.5
    if far >= FURTHEST or rise(0.0) >= 0.0:
        return far
    return float(brentq(rise, 0.0, far, xtol=1e-10, rtol=1e-10))


def _best_errors(model: HeadModel, noise: Array, ln_friction: float, start: Array) -> Array:
    """Minimise over the shared errors alone by Gauss–Newton; the model is nearly linear in them."""
    u = start
    for _ in range(20):
        prediction = model.predict(ln_friction, u)
        slopes = prediction.by_error / noise
        misfit = (model.readings.head_loss_m - prediction.head_m) / noise
        step = _least_step(np.hstack([-slopes, np.eye(len(slopes))]), np.concatenate([misfit, u]))
        u = u + step
        if np.max(np.abs(step), initial=0.0) < 1e-9:
            break
    return u
