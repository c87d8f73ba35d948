"""Which errors campaigns share, and which each has to itself."""

from __future__ import annotations

import datetime as dt
from collections.abc import Hashable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.inference.friction_curve import friction_curve
from fieldfit.inference.head_model import HeadModel, Reference, reynolds_of
from fieldfit.inference.shared_errors import SHAPE, SHAPE_ORDERS, SharedErrors, shared_errors

Array = NDArray[np.float64]
Key = tuple[Hashable, ...]

VISCOSITY = "viscosity and temperature"


@dataclass(frozen=True, slots=True, kw_only=True)
class Test:
    """One campaign's readings of one reach, with what tells its instruments from other campaigns'."""

    __test__ = False  # not a class of tests

    date: dt.date
    """Day of the test."""
    readings: ReachReadings
    """What its plateaus say; K readings."""
    random_m: Array
    """(K,) random standard errors, widened where its own fit asked for it [m]."""
    ln_friction: float
    """Best ln f of its own fit [-]."""
    reynolds: float
    """Reynolds number which that is for [-]."""
    calibrations: tuple[tuple[str, int], ...] = ()
    """Instruments by serial, and how often each has been calibrated anew."""
    linings: int = 0
    """How often the pipe has been lined; a bore error lasts until the next time."""
    valves: int = 0
    """How often a valve has been changed; errors of ΣK last until the next time."""
    own_length: bool = False
    """Whether the taps were elsewhere on that day."""


def model_of(
    test: Test, number: int, reference: Reference, limit: Correlation, liquid_standard: float
) -> tuple[HeadModel, tuple[Key, ...]]:
    """Return a campaign's head-loss equation at a reference that all campaigns share, and a key for each error.

    Errors with equal keys are one and the same error. Bore, length, survey and the correlation's shape, which is a
    function of the Reynolds number, are shared by nature; instruments are shared when they have a serial and were
    not calibrated anew; anything else belongs to its campaign alone.

    Parameters
    ----------
    test : Test
        The campaign.
    number : int
        Its number, for the keys of what is its own.
    reference : Reference
        Where ln f is the wall's parameter.
    limit : Correlation
        How far friction correlations can be trusted.
    liquid_standard : float
        Relative standard uncertainty of the liquid's viscosity at a known temperature, which campaigns share [-].

    Returns
    -------
    model : HeadModel
        The equation.
    keys : tuple
        One per error.
    """
    readings = test.readings
    nothing = np.zeros_like(readings.flow_m3_s)
    own = shared_errors(readings, Correlation(standard=0.0, decades=limit.decades), nothing, nothing)
    keys = [_key(name, test, number) for name in own.names]
    errors = _with_viscosity(own, keys, liquid_standard, number)
    reynolds = reynolds_of(readings)
    at = friction_curve(np.array([test.ln_friction]), np.array([reference.reynolds]), np.array([test.reynolds]))
    curve = friction_curve(np.log(at.friction_factor), reynolds, np.array([reference.reynolds]))
    distance = np.log10(reynolds / reference.reynolds)
    rows = np.vstack([shape_rows(distance, limit), limit.standard * (curve.slope_parameter - 1.0)])
    keys += [(SHAPE, order) for order in range(len(rows))]
    return HeadModel(readings=readings, errors=_with_shape(errors, rows), reference=reference), tuple(keys)


def shape_rows(distance: Array, limit: Correlation) -> Array:
    """Return what one standard deviation of the correlation's slope and bend does to ln f.

    Parameters
    ----------
    distance : (K,) array
        Decades of Reynolds number from the reference [-].
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    (2, K) array
        Changes of ln f [-].
    """
    position = distance / limit.decades
    decay = limit.standard * np.exp(-0.5 * position**2)
    return np.array([decay * position**order / np.sqrt(float(order)) for order in SHAPE_ORDERS])


def _key(name: str, test: Test, number: int) -> Key:
    """Return what an error is the same as."""
    alone: Key = (name, "campaign", number)
    by_nature: dict[str, Key] = {
        "bore": (name, test.linings),
        "fittings": (name, test.valves, test.linings),
        "length": alone if test.own_length else (name,),
        "elevations": alone if test.own_length else (name,),
    }
    if name in by_nature:
        return by_nature[name]
    serial = _serial(name, test.readings)
    return alone if serial is None else (name, serial, dict(test.calibrations).get(serial, 0))


def _serial(name: str, readings: ReachReadings) -> str | None:
    """Return the serial of the instrument that an error belongs to, or None when none was given."""
    if name.startswith("meter "):
        return readings.meter.serial
    _, said, gauge = name.partition(" of gauge ")
    return gauge if said and gauge in (readings.upstream.gauge, readings.downstream.gauge) else None


def _with_viscosity(errors: SharedErrors, keys: list[Key], liquid_standard: float, number: int) -> SharedErrors:
    """Split the viscosity into the liquid's own part, which campaigns share, and the day's temperature."""
    if VISCOSITY not in errors.names:
        return errors
    row = errors.names.index(VISCOSITY)
    whole = float(errors.ln_viscosity[row])
    shared = min(liquid_standard, whole)
    keys[row] = (VISCOSITY, "temperature", number)
    keys.append((VISCOSITY, "liquid"))
    day = errors.ln_viscosity.copy()
    day[row] = np.sqrt(whole**2 - shared**2)
    return _longer(errors, VISCOSITY, ln_viscosity=np.append(day, shared))


def _with_shape(errors: SharedErrors, rows: Array) -> SharedErrors:
    """Add the correlation's shape as the last errors."""
    for row in rows:
        errors = _longer(errors, SHAPE, ln_friction=np.vstack([errors.ln_friction, row]))
    return errors


def _longer(errors: SharedErrors, name: str, **given: Array) -> SharedErrors:
    """Return the errors with one more, which does nothing but what is given."""
    fields = ("flow_m3_s", "ln_bore", "ln_length", "ln_viscosity", "fitting_k", "head_m", "ln_friction")
    tables = {
        key: given.get(key, np.concatenate([getattr(errors, key), np.zeros((1, *getattr(errors, key).shape[1:]))]))
        for key in fields
    }
    return SharedErrors(names=(*errors.names, name), shapes=(*errors.shapes, "normal"), **tables)
