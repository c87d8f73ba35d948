"""What would tell rival causes apart in the field, and how far apart they would then be."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.inference.beliefs import NOTHING
from fieldfit.inference.causes import offset_standard
from fieldfit.inference.conditions import Conditions
from fieldfit.inference.fault_model import AIR, BORE, BRANCH, GAIN, LEAK, LOCAL, ZERO
from fieldfit.inference.weighing import Fitted

if TYPE_CHECKING:
    from fieldfit.inference.explanations import Explanation

Array = NDArray[np.float64]

CLOSE = 2.0
"""Combined standard errors within which two curves count as one [-]."""
TELLING = 2.0
"""Combined standard errors from which an action is worth naming [-]."""
CALLIPER = 0.01
"""Standard uncertainty of a bore check by coupon, calliper, gauge plate or tracer time [-]."""
SECOND_METER = 0.01
"""Standard uncertainty of a second meter, portable or by volume and time [-]."""
LOW_FLOW, HIGH_FLOW = 0.4, 1.6
"""Further flows that are thought through, as shares of the smallest and of the largest tested [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Action:
    """Something to do in the field, and what it would show."""

    name: str
    """Short name."""
    text: str
    """What to do, as the start of a sentence."""
    parts: tuple[str, str]
    """The two causes it parts."""
    separation: float
    """How far apart they would then be [combined standard errors]."""


def apart(first: Fitted, second: Fitted, conditions: Conditions, noise_m: Array) -> Array:
    """Return by how many combined standard errors two causes' readings differ.

    Parameters
    ----------
    first, second : Fitted
        Two causes, fitted to the same readings.
    conditions : Conditions
        Where they are compared; K readings.
    noise_m : (K,) array
        Random standard error of a reading there [m].

    Returns
    -------
    (K,) array
        First less second, over the root of a new reading's variance, which holds its noise and the mean of what
        either cause leaves open [-].
    """
    one, two = first.predict(conditions), second.predict(conditions)
    return np.asarray((one[0] - two[0]) / np.sqrt(noise_m**2 + 0.5 * (one[1] ** 2 + two[1] ** 2)))


def alike(first: Fitted, second: Fitted, conditions: Conditions, noise_m: Array) -> bool:
    """Return whether two causes' curves are one within the errors at every flow tested."""
    return bool(np.all(np.abs(apart(first, second, conditions, noise_m)) < CLOSE))


class _Pair(NamedTuple):
    """Two rival causes and where they were read."""

    first: Fitted
    second: Fitted
    names: tuple[str, str]
    causes: tuple[tuple[str, ...], tuple[str, ...]]
    readings: ReachReadings
    conditions: Conditions
    noise_m: float

    def only(self, cause: str) -> Fitted | None:
        """Return the one of the two that holds a cause, when the other does not."""
        holds = [cause in causes for causes in self.causes]
        if holds[0] == holds[1]:
            return None
        return self.first if holds[0] else self.second

    @property
    def top_flow(self) -> float:
        """Largest flow tested [m³/s]."""
        return float(np.max(self.conditions.flow_m3_s))


def actions(
    first: Explanation,
    others: list[Explanation],
    read: tuple[ReachReadings, Conditions, Array],
) -> tuple[Action, ...]:
    """Say what to do in the field to part the first cause from others.

    Parameters
    ----------
    first : Explanation
        The most probable.
    others : list of Explanation
        Its rivals.
    read : (ReachReadings, Conditions, (K,) array)
        The readings, their conditions and their noise [m].

    Returns
    -------
    tuple of Action
        For each rival what tells it apart best, most telling first; at least one of each that any action reaches.
    """
    readings, conditions, noise = read
    found: list[Action] = []
    for other in others:
        pair = _Pair(
            first=first.fitted,
            second=other.fitted,
            names=(named(first.causes), named(other.causes)),
            causes=(first.causes, other.causes),
            readings=readings,
            conditions=conditions,
            noise_m=float(np.median(noise)),
        )
        if pair.names[0] == pair.names[1]:
            continue
        of_pair = sorted((one for check in _CHECKS if (one := check(pair))), key=lambda one: -one.separation)
        found += [one for index, one in enumerate(of_pair) if index == 0 or one.separation >= TELLING]
    return tuple(sorted(found, key=lambda one: -one.separation))


def named(causes: tuple[str, ...]) -> str:
    """Return one or two causes as one name; a new wall is a wall.

    Examples
    --------
    >>> named(("rough wall", "gauge offset")), named(("nothing unusual",))
    ('rough wall with gauge offset', 'rough wall')
    """
    return " with ".join(causes).replace(NOTHING, "rough wall")


def _static(pair: _Pair) -> Action | None:
    """Stop the water: an offset stays, everything else goes."""
    of_units = None if pair.readings.levelling else pair.only("wrong unit or swapped channel")
    if pair.only("gauge offset") is None and of_units is None:
        return None
    one, two = pair.first.at_rest(pair.conditions), pair.second.at_rest(pair.conditions)
    doubt = np.sqrt(pair.noise_m**2 + 0.5 * (one[1] ** 2 + two[1] ** 2))
    text = "Take a static: read both gauges with the flow stopped"
    if pair.readings.levelling:
        text = "Repeat the static, making sure that no water runs"
    return Action(name="static", text=text, parts=pair.names, separation=float(abs(one[0] - two[0]) / doubt))


def _third_tap(pair: _Pair) -> Action | None:
    """Read at mid-length: a local loss sits in one half, friction in both."""
    holds = pair.only("local loss")
    if holds is None:
        return None
    velocity = pair.top_flow / (np.pi * (pair.conditions.bore_m * np.exp(-holds.size(BORE)[0])) ** 2 / 4.0)
    loss = holds.size(LOCAL)[0] * velocity**2 / (2.0 * STANDARD_GRAVITY)
    doubt = np.hypot(pair.noise_m, offset_standard(pair.readings))
    return Action(
        name="third tap",
        text="Read a third tap at mid-length, at the largest flow",
        parts=pair.names,
        separation=float(0.5 * loss / doubt),
    )


def _bore_check(pair: _Pair) -> Action | None:
    """Measure the bore."""
    holds = pair.only("reduced bore")
    if holds is None:
        return None
    shrink, doubt = holds.size(BORE)
    return Action(
        name="bore check",
        text="Check the bore by coupon, calliper, gauge plate or tracer time, to 1 %",
        parts=pair.names,
        separation=float(shrink / np.hypot(doubt, CALLIPER)),
    )


def _in_and_out(pair: _Pair) -> Action | None:
    """Meter in and out: a leak is the difference."""
    holds = pair.only("leak or open branch")
    if holds is None:
        return None
    lost = holds.size(LEAK)[0] + holds.size(BRANCH)[0] * pair.top_flow
    doubt = np.hypot(SECOND_METER, _meter_standard(pair)) * pair.top_flow
    return Action(
        name="meter in and out",
        text="Shut every branch valve and meter the flow in and out",
        parts=pair.names,
        separation=float(lost / doubt),
    )


def _vent(pair: _Pair) -> Action | None:
    """Let the air out: its head step goes."""
    holds = pair.only("trapped air")
    if holds is None:
        return None
    return Action(
        name="vent",
        text="Vent the high points until no air comes and repeat one flow",
        parts=pair.names,
        separation=float(holds.size(AIR)[0] / (np.sqrt(2.0) * pair.noise_m)),
    )


def _second_meter(pair: _Pair) -> Action | None:
    """Put a second meter beside the first."""
    holds = pair.only("meter error")
    if holds is None:
        return None
    gain, zero = holds.size(GAIN), holds.size(ZERO)
    lowest = float(np.min(np.abs(pair.conditions.flow_m3_s)))
    wrong = max(abs(gain[0]), abs(zero[0]) / lowest)
    doubt = np.hypot(SECOND_METER, max(gain[1], zero[1] / lowest))
    return Action(
        name="second meter",
        text="Check the meter against a second one, or by volume and time, at the smallest and the largest flow",
        parts=pair.names,
        separation=float(wrong / doubt),
    )


def _units(pair: _Pair) -> Action | None:
    """Read the unit on the instrument's face."""
    holds = pair.only("wrong unit or swapped channel")
    if holds is None:
        return None
    ratios = abs(float(holds.trial.head_ratio[0])), float(holds.trial.flow_ratio[0])
    by_ratio = sum(abs(float(np.log(ratio))) for ratio in ratios) / SECOND_METER
    by_shift = float(np.max(np.abs(holds.trial.shift_m))) / offset_standard(pair.readings)
    swapped = float(holds.trial.head_ratio[0]) < 0.0
    return Action(
        name="units",
        text="Compare one reading of each logged channel with its instrument's face, unit and tap",
        parts=pair.names,
        separation=max(by_ratio, by_shift, 2.0 / SECOND_METER if swapped else 0.0),
    )


def _other_flow(pair: _Pair) -> Action | None:
    """Test at a flow beyond those tested."""
    flows = np.abs(pair.conditions.flow_m3_s)
    low = max(LOW_FLOW * float(np.min(flows)), pair.readings.turbulent_from_m3_s)
    wanted = np.array([low, HIGH_FLOW * float(np.max(flows))])
    noise = np.full(2, pair.noise_m)
    separations = np.abs(apart(pair.first, pair.second, pair.conditions.at(wanted), noise))
    best = int(np.argmax(separations))
    return Action(
        name=("lower flow", "higher flow")[best],
        text=f"Test at {1000.0 * wanted[best]:.3g} L/s too",
        parts=pair.names,
        separation=float(separations[best]),
    )


def _meter_standard(pair: _Pair) -> float:
    """Return the meter's stated relative standard uncertainty at the largest flow [-]."""
    top = np.array([pair.top_flow])
    return float(pair.readings.meter.accuracy.standard_at(top)[0] / top[0])


_CHECKS = (_static, _third_tap, _bore_check, _in_and_out, _vent, _second_meter, _units, _other_flow)
