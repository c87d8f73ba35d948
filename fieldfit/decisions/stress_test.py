"""How far off an instrument or a dimension would have to be to change what was found."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.decisions.new_pipe import NewPipeComparison
from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.field.uncertain import Accuracy
from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white, relative_roughness, smooth
from fieldfit.inference.batch import Batch, readings_weight, solve_batch
from fieldfit.inference.head_model import HeadModel, head_model
from fieldfit.inference.verdict import ROUGHEST_WALL, SMOOTHEST_SHARE
from fieldfit.inference.wall import Wall

Array = NDArray[np.float64]

LARGEST = 0.6
"""Largest relative error that is thought through [-]."""
LARGEST_HEAD = 3.0
"""Largest error of head loss that is thought through, over the largest head loss [-]."""
SMALLEST = 1e-4
"""Smallest error over the largest [-]."""
STEPS, FINE = 40, 24
"""Errors tried in each direction, evenly by ratio, and again between the last that changes nothing and the first that does."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Stress:
    """The smallest error of one input that would change one part of the finding."""

    input: str
    """Which: meter, bore, length, elevations or gauges."""
    finding: str
    """What was found: "worse than new", "not worse than new", or the state."""
    becomes: str | None
    """What it would turn into; None when no error thought through changes it."""
    error: float | None
    """How much the input would have to read, or be stated, too high [-, or m of head loss]; None as above."""
    unit: str
    """"relative", or "m" of head loss."""
    limit: float
    """The limit stated for it, in the same unit; zero where it is exactly known."""

    @property
    def times_limit(self) -> float | None:
        """The error over the stated limit [-]; None without either."""
        return abs(self.error) / self.limit if self.error is not None and self.limit > 0.0 else None


class _Input(NamedTuple):
    """One input: how an error of it changes what the readings mean."""

    name: str
    unit: str
    limit: float
    largest: float
    shift: Callable[[dict[str, Array], Array], dict[str, Array]]


def stress_test(
    readings: ReachReadings, wall: Wall, limit: Correlation, against: NewPipeComparison | None
) -> tuple[Stress, ...]:
    """Find the smallest error of each input that would change the finding.

    The fit's weights stay as they are and the readings are solved again with each error in them, many at once. The
    finding is whether the pipe loses more head than new pipe by more than the correlation's limit (probability one
    half) and the state of the estimate.

    Parameters
    ----------
    readings : ReachReadings
        What the fit used.
    wall : Wall
        What it found.
    limit : Correlation
        How far friction correlations can be trusted.
    against : NewPipeComparison or None
        New pipe, and the ratio of head losses from which a pipe counts as worse; None when unknown.

    Returns
    -------
    tuple of Stress
        Empty when there is no estimate.
    """
    if wall.state == "no estimate" or wall.friction_factor.best is None:
        return ()
    model = head_model(readings, limit)
    judge = _Judge.of(wall, (against.roughness_m[1], against.limit) if against else None)
    inputs = _inputs(readings)
    solve = _Solver(model=model, weight=_weight(model, wall), judge=judge)
    ways = [(one, sign) for one in inputs for sign in (1.0, -1.0)]
    tries = [sign * one.largest * np.geomspace(SMALLEST, 1.0, STEPS) for one, sign in ways]
    coarse = solve.verdicts([one for one, _ in ways], tries)
    asked, finer = [], []
    for way, (errors, verdicts) in enumerate(zip(tries, coarse, strict=True)):
        for part in (0, 1):
            first = _first_change(verdicts[part], judge.now[part])
            if first is not None:
                asked.append((way, part))
                finer.append(np.linspace(errors[first - 1] if first else 0.0, errors[first], FINE))
    exact = solve.verdicts([ways[way][0] for way, _ in asked], finer)
    changes: dict[tuple[str, int], list[tuple[float, str]]] = {}
    for (way, part), errors, verdicts in zip(asked, finer, exact, strict=True):
        at = _first_change(verdicts[part], judge.now[part])
        if at is not None:
            found = changes.setdefault((ways[way][0].name, part), [])
            found.append((float(errors[at]), str(verdicts[part][at])))
    return tuple(
        _smallest(one, judge.now[part], changes.get((one.name, part), []))
        for one in inputs
        for part in (0, 1)
        if judge.now[part]
    )


def _first_change(verdicts: NDArray[np.str_], now: str) -> int | None:
    """Return the first place where a part of the finding is no longer what it was."""
    changed = np.flatnonzero(verdicts != now) if now else np.array([], dtype=np.int64)
    return int(changed[0]) if changed.size else None


def _smallest(one: _Input, now: str, changes: list[tuple[float, str]]) -> Stress:
    """Return the nearest of the changes either way."""
    error, becomes = min(changes, key=lambda change: abs(change[0])) if changes else (None, None)
    return Stress(input=one.name, finding=now, becomes=becomes, error=error, unit=one.unit, limit=one.limit)


class _Judge(NamedTuple):
    """The rules of the finding, with the bands as wide as they were found."""

    reynolds: float
    bore_m: float
    own_above: float
    wide_below: float
    new: tuple[float, float] | None
    now: tuple[str, str]

    @classmethod
    def of(cls, wall: Wall, new: tuple[float, float] | None) -> _Judge:
        """Set the rules up from what was found."""
        factor = wall.friction_factor
        best, own, wide = factor.best, factor.measurement, factor.with_correlation
        if best is None or own is None or wide is None:
            raise ValueError("a wall without an estimate has no finding to stress")
        bore = 4.0 * wall.flow_m3_s / (np.pi * wall.viscosity_m2_s * wall.reynolds)
        rules = cls(
            reynolds=wall.reynolds,
            bore_m=bore,
            own_above=float(np.log(own[1] / best)),
            wide_below=float(np.log(best / wide[0])),
            new=new,
            now=("", wall.state),
        )
        against = str(rules.against_new(np.array([best]), np.array([bore]))[0]) if new else ""
        return rules._replace(now=(against, wall.state))

    def against_new(self, factor: Array, bore_m: Array) -> NDArray[np.str_]:
        """Say of friction factors whether they are worse than new."""
        if self.new is None:
            return np.full(factor.shape, "")
        ratio = factor / colebrook_white(self.reynolds, self.new[0] / bore_m)
        return np.where(ratio > self.new[1], "worse than new", "not worse than new")

    def state(self, factor: Array) -> NDArray[np.str_]:
        """Say of friction factors what the state of the estimate would be."""
        above = np.log(factor / smooth(self.reynolds))
        below_smooth = above + self.own_above < np.log(SMOOTHEST_SHARE)
        too_rough = relative_roughness(factor, self.reynolds) > ROUGHEST_WALL
        state = np.where(above <= self.wide_below, "upper limit", "measured")
        return np.where(below_smooth | too_rough | ~np.isfinite(factor), "no estimate", state)


class _Solver(NamedTuple):
    """The readings, ready to be solved again with errors in them."""

    model: HeadModel
    weight: Array
    judge: _Judge

    def verdicts(self, inputs: list[_Input], errors: list[Array]) -> list[list[NDArray[np.str_]]]:
        """Return both parts of the finding for rows of errors, each of one input, all solved in one array."""
        readings, count = self.model.readings, sum(len(row) for row in errors)
        values = {
            "flow_m3_s": np.repeat(readings.flow_m3_s[:, None], count, axis=1),
            "head_loss_m": np.repeat(readings.head_loss_m[:, None], count, axis=1),
            "bore_m": np.full(count, readings.bore.value),
            "length_m": np.full(count, readings.length.value),
        }
        ends = np.cumsum([0, *(len(row) for row in errors)])
        places = [slice(start, stop) for start, stop in pairwise(ends.tolist())]
        for one, row, place in zip(inputs, errors, places, strict=True):
            part = {name: value[..., place] for name, value in values.items()}
            for name, shifted in one.shift(part, row).items():
                values[name][..., place] = shifted
        factor = self._factors(values, count)
        against, state = self.judge.against_new(factor, values["bore_m"]), self.judge.state(factor)
        return [[against[place], state[place]] for place in places]

    def _factors(self, values: dict[str, Array], count: int) -> Array:
        """Return the friction factor at the reference of every set of values; NaN where there is none."""
        readings, reynolds = self.model.readings, self.model.reference.reynolds
        batch = Batch(
            **values,
            viscosity_m2_s=np.repeat(readings.viscosity_m2_s[:, None], count, axis=1),
            fitting_k=np.full(count, readings.fitting_k.value),
            ln_friction_error=np.zeros((len(readings.flow_m3_s), count)),
            reference_reynolds=np.full(count, reynolds),
        )
        start = np.full(count, np.log(smooth(reynolds)) + 0.5)
        return np.asarray(np.exp(solve_batch(batch, self.weight, start)[0]))


def _weight(model: HeadModel, wall: Wall) -> Array:
    """Return the weights of the readings in the fit, (K, 1)."""
    best = float(np.log(wall.friction_factor.best or 1.0))
    prediction = model.predict(best, np.zeros(len(model.errors.names)))
    noise = model.readings.random_m * np.sqrt(max(wall.reduced_chi_square or 1.0, 1.0))
    return readings_weight(prediction.by_wall, prediction.by_error, noise)


def _inputs(readings: ReachReadings) -> list[_Input]:
    """List the inputs that matter for a reach, each with its stated limit."""
    power = 2.0 if readings.meter.senses == "velocity" else 0.0
    head = LARGEST_HEAD * float(np.max(readings.head_loss_m))
    middle = np.array([float(np.median(readings.flow_m3_s))])
    meter = _limit(readings.meter.accuracy, middle) / middle[0]
    found = [
        _Input("meter", "relative", meter, LARGEST, lambda v, x: {"flow_m3_s": v["flow_m3_s"] / (1.0 + x)}),
        _Input(
            "bore",
            "relative",
            _wide(readings.bore.relative, readings.bore.shape),
            LARGEST,
            lambda v, x: {"bore_m": v["bore_m"] / (1.0 + x), "flow_m3_s": v["flow_m3_s"] / (1.0 + x) ** power},
        ),
        _Input(
            "length",
            "relative",
            _wide(readings.length.relative, readings.length.shape),
            LARGEST,
            lambda v, x: {"length_m": v["length_m"] / (1.0 + x)},
        ),
    ]
    drop = readings.elevation_drop
    if readings.levelling is None and drop is not None:
        found.append(_Input("elevations", "m", _wide(drop.standard, drop.shape), head, _less_head))
    return [*found, _Input("gauges", "m", _gauge_limit(readings), head, _less_head)]


def stated_limits(readings: ReachReadings) -> dict[str, float]:
    """Return the limit stated for each input by its name, in the unit its error is told in.

    Parameters
    ----------
    readings : ReachReadings
        What the fit used.

    Returns
    -------
    dict
        Relative for meter, bore and length; metres of head for elevations and gauges.
    """
    return {one.name: one.limit for one in _inputs(readings)}


def _less_head(values: dict[str, Array], error: Array) -> dict[str, Array]:
    """Take an error off the head loss."""
    return {"head_loss_m": values["head_loss_m"] - error}


def _gauge_limit(readings: ReachReadings) -> float:
    """Return how far the head loss may be off by the gauges [m]: by the levelling, or by both gauges' limits."""
    if readings.levelling:
        return _wide(readings.levelling.standard_m, "normal")
    weight = float(np.mean(readings.density_kg_m3)) * STANDARD_GRAVITY
    ends = zip((readings.upstream, readings.downstream), readings.pressure_pa, strict=True)
    upper, lower = (_limit(tap.accuracy, pressure) for tap, pressure in ends)
    return float(np.hypot(upper, lower)) / weight


def _limit(accuracy: Accuracy, reading: Array) -> float:
    """Return an instrument's limit [SI], the mean over readings."""
    return _wide(float(np.mean(accuracy.standard_at(reading))), accuracy.shape)


def _wide(standard: float, shape: str) -> float:
    """Return the limit that a standard uncertainty came from: a rectangle's edge, or two standard uncertainties."""
    return standard * (float(np.sqrt(3.0)) if shape == "rectangular" else 2.0)
