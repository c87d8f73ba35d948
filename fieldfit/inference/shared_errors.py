"""The errors that all readings of a test share, each with what it does to the head-loss equation.

Every error is a number ``u`` of zero mean and unit standard deviation; the tables below say by how much one
standard deviation of it moves an input. Accuracies given as a limit are rectangular (GUM 4.3.7).
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.field.uncertain import Accuracy, Shape
from fieldfit.hydraulics.friction import STANDARD_GRAVITY

Array = NDArray[np.float64]

SHAPE = "shape of the friction law"
SHAPE_ORDERS = (1, 2)


@dataclass(frozen=True, slots=True, kw_only=True)
class SharedErrors:
    """M shared errors of one reach and what one standard deviation of each does; K readings."""

    names: tuple[str, ...]
    """In trade words; one name may stand for several independent terms."""
    shapes: tuple[Shape, ...]
    """Distribution of each."""
    flow_m3_s: Array
    """(M, K) change of the true flow [m³/s]."""
    ln_bore: Array
    """(M,) change of ln bore [-]."""
    ln_length: Array
    """(M,) change of ln length [-]."""
    ln_viscosity: Array
    """(M,) change of ln viscosity [-]."""
    fitting_k: Array
    """(M,) change of ΣK [-]."""
    head_m: Array
    """(M, K) change of the head loss as read [m]."""
    ln_friction: Array
    """(M, K) change of ln f against the correlation's shape [-]."""


@dataclass(slots=True)
class _Collector:
    """Rows of the tables while they are being gathered."""

    readings: int
    names: list[str] = field(default_factory=list)
    shapes: list[Shape] = field(default_factory=list)
    rows: list[dict[str, Array]] = field(default_factory=list)

    def add(self, name: str, shape: Shape, **effect: Array) -> None:
        """Add one error unless it has no effect."""
        if any(np.any(part != 0.0) for part in effect.values()):
            self.names.append(name)
            self.shapes.append(shape)
            self.rows.append(effect)

    def table(self, key: str, *, per_reading: bool) -> Array:
        """Stack one kind of effect, zero where an error has none."""
        shape = (self.readings,) if per_reading else ()
        rows = [np.broadcast_to(row.get(key, np.zeros(shape)), shape) for row in self.rows]
        table = np.array(rows, dtype=np.float64).reshape(len(rows), *shape)
        table.setflags(write=False)
        return table


def shared_errors(readings: ReachReadings, limit: Correlation, distance: Array, tilt: Array) -> SharedErrors:
    """List the shared errors of a reach.

    Parameters
    ----------
    readings : ReachReadings
        What the plateaus say; K readings.
    limit : Correlation
        How far friction correlations can be trusted.
    distance : (K,) array
        Decades of Re from the reference [-].
    tilt : (K,) array
        d ln f / d ln f at the reference, less one, along the curve near the wall's [-].

    Returns
    -------
    SharedErrors
        Errors without effect are left out.
    """
    found = _Collector(len(readings.flow_m3_s))
    _add_meter(found, readings)
    _add_gauges(found, readings)
    _add_pipe(found, readings)
    _add_shape(found, limit, distance, tilt)
    return SharedErrors(
        names=tuple(found.names),
        shapes=tuple(found.shapes),
        flow_m3_s=found.table("flow_m3_s", per_reading=True),
        ln_bore=found.table("ln_bore", per_reading=False),
        ln_length=found.table("ln_length", per_reading=False),
        ln_viscosity=found.table("ln_viscosity", per_reading=False),
        fitting_k=found.table("fitting_k", per_reading=False),
        head_m=found.table("head_m", per_reading=True),
        ln_friction=found.table("ln_friction", per_reading=True),
    )


def _add_meter(found: _Collector, readings: ReachReadings) -> None:
    """Add the meter's gain, zero and, for a fixed accuracy, its span."""
    accuracy, flow = readings.meter.accuracy, readings.flow_m3_s
    found.add("meter gain", accuracy.shape, flow_m3_s=accuracy.gain_at(flow) * flow)
    fixed = accuracy.fixed_at(flow)
    span = accuracy.span or float(np.max(np.abs(flow)))
    found.add("meter zero", accuracy.shape, flow_m3_s=fixed)
    found.add("meter span", accuracy.shape, flow_m3_s=fixed * (flow - np.mean(flow)) / span)


def _add_gauges(found: _Collector, readings: ReachReadings) -> None:
    """Add each gauge's gain, zero and span; a gauge that reads both taps has one of each.

    A levelling takes the zeros and the survey off together and leaves what the gauges do between the static
    pressure and the pressures of the test.
    """
    weight = readings.density_kg_m3 * STANDARD_GRAVITY
    levelling = readings.levelling
    effects: dict[tuple[str, str], Array] = {}
    shapes: dict[tuple[str, str], Shape] = {}
    for end, tap, sign in ((0, readings.upstream, 1.0), (1, readings.downstream, -1.0)):
        name = tap.gauge or tap.column
        pressure = readings.pressure_pa[end]
        base = np.full_like(pressure, levelling.pressure_pa[end]) if levelling else None
        for part, effect in gauge_parts(tap.accuracy, pressure, base).items():
            effects[name, part] = effects.get((name, part), np.zeros_like(weight)) + sign * effect / weight
            shapes[name, part] = tap.accuracy.shape
    for (name, part), effect in effects.items():
        found.add(f"{part} of gauge {name}", shapes[name, part], head_m=effect)
    if levelling:
        found.add("static levelling", "normal", head_m=np.full_like(weight, levelling.standard_m))
    elif readings.elevation_drop is not None:
        drop = readings.elevation_drop
        found.add("elevations", drop.shape, head_m=np.full_like(weight, drop.standard))


def gauge_parts(accuracy: Accuracy, pressure: Array, base: Array | None) -> dict[str, Array]:
    """Return what one standard deviation of each of a gauge's errors does to its reading [Pa], levelled or not."""
    fixed = accuracy.fixed_at(pressure)
    span = accuracy.span or float(max(np.max(np.abs(pressure)), 1.0))
    if base is None:
        middle = np.mean(pressure)
        return {
            "gain": accuracy.gain_at(pressure) * pressure,
            "zero": fixed,
            "span": fixed * (pressure - middle) / span,
        }
    return {"gain": accuracy.gain_at(pressure) * (pressure - base), "span": fixed * (pressure - base) / span}


def _add_pipe(found: _Collector, readings: ReachReadings) -> None:
    """Add bore, length, fittings and viscosity; a velocity meter's flow follows the bore."""
    bore, length, fitting_k = readings.bore, readings.length, readings.fitting_k
    through_meter = 2.0 if readings.meter.senses == "velocity" else 0.0
    found.add(
        "bore",
        bore.shape,
        ln_bore=np.asarray(bore.relative),
        flow_m3_s=through_meter * bore.relative * readings.flow_m3_s,
    )
    found.add("length", length.shape, ln_length=np.asarray(length.relative))
    found.add("fittings", fitting_k.shape, fitting_k=np.asarray(fitting_k.standard))
    found.add("viscosity and temperature", "normal", ln_viscosity=np.asarray(readings.viscosity_standard))


def _add_shape(found: _Collector, limit: Correlation, distance: Array, tilt: Array) -> None:
    """Add how the correlation may be wrong in shape about the reference: a slope, a bend, and a neighbour's curve.

    Slope and bend are the leading terms of a squared-exponential process in log Re. Its level, one at the
    reference, is left out: the readings could only learn it from the curve's shape, which is just what a
    correlation does not promise, so it is added to the result afterwards and no number of readings shrinks it. But
    a wall whose f is off by the level follows the shape of another wall's curve; that is the third term.
    """
    position = distance / limit.decades
    decay = limit.standard * np.exp(-0.5 * position**2)
    for order in SHAPE_ORDERS:
        found.add(SHAPE, "normal", ln_friction=decay * position**order / np.sqrt(float(order)))
    found.add(SHAPE, "normal", ln_friction=limit.standard * tilt)
