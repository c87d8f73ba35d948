"""Tables of rival explanations and of the bias stress test."""

from __future__ import annotations

from fieldfit.decisions.stress_test import LARGEST, Stress
from fieldfit.inference.beliefs import NOTHING
from fieldfit.inference.explanations import Explanations
from fieldfit.inference.telling_apart import named
from fieldfit.report import explanation_words as words
from fieldfit.report.digits import fixed, percent, significant
from fieldfit.report.tables import Table

SHOWN = 0.01
"""Probability below which a cause stands in the last row with all such [-]."""


def ranking(found: Explanations, bore_m: float) -> Table:
    """Return each cause with its probability, its size, and how it fits."""
    shown = [
        one
        for index, one in enumerate(found.ranked)
        if index == 0 or one.probability >= SHOWN or named(one.causes) in found.alike
    ]
    rows = [
        (
            "nothing unusual" if one.causes == (NOTHING,) else " with ".join(one.causes),
            percent(one.probability),
            words.sizes(one, bore_m),
            words.fit(one),
        )
        for one in shown
    ]
    rest = [one for one in found.ranked if one not in shown]
    if rest:
        names = ", ".join("wall as new" if one.causes == (NOTHING,) else " with ".join(one.causes) for one in rest)
        rows.append((names, percent(sum(one.probability for one in rest)), "", "together"))
    return Table(head=("cause", "probability", "how large (95 %)", "how it fits"), rows=tuple(rows))


def actions(found: Explanations) -> Table | None:
    """Return what would part the first cause from those that cannot be told from it."""
    if not found.alike or not found.actions:
        return None
    rows = []
    for one in found.actions:
        far = f"over {words.CLEAR:.0f}" if one.separation > words.CLEAR else significant(one.separation, 2)
        rows.append((one.text, f"{one.parts[0]} from {one.parts[1]}", far))
    return Table(head=("what to do", "it parts", "standard errors apart"), rows=tuple(rows))


def stress_lines(stress: tuple[Stress, ...]) -> tuple[str, ...]:
    """Return one sentence for each input."""
    names = dict.fromkeys(one.input for one in stress)
    return tuple(_stress_line([one for one in stress if one.input == name]) for name in names)


def _stress_line(parts: list[Stress]) -> str:
    """Say how far off one input would have to be to change each part of the finding."""
    name, unit = parts[0].input, parts[0].unit
    changes = [f"{_error(one)} to turn ‘{one.finding}’ into ‘{one.becomes}’" for one in parts if one.becomes]
    far = f"{100.0 * LARGEST:.0f} %" if unit == "relative" else "three times the largest head loss"
    left = " or ".join(f"‘{one.finding}’" for one in parts if not one.becomes)
    if not changes:
        return f"{_SUBJECTS[name]}: no error up to {far} changes {left}."
    rest = f"; no error up to {far} changes {left}" if left else ""
    return f"{_SUBJECTS[name]} would have to {_VERBS[name]} {', and '.join(changes)}{rest}."


def _error(one: Stress) -> str:
    """Return an error with its sign in words, and how far it lies beyond its limit."""
    error, times = one.error or 0.0, one.times_limit
    sign = "high" if error > 0.0 else "low"
    if one.input in ("bore", "length"):
        sign = "large" if error > 0.0 else "small"
    how = (
        f"{significant(100.0 * abs(error), 2)} %"
        if one.unit == "relative"
        else f"{significant(abs(error), 2)} m of head"
    )
    beyond = "" if times is None else f" ({fixed(times, 1 if times < 10.0 else 0)} times its limit)"
    return f"{how} too {sign}{beyond}"


_SUBJECTS = {
    "meter": "The meter",
    "bore": "The bore",
    "length": "The length",
    "elevations": "The difference of elevations",
    "gauges": "The difference of the gauges",
}
_VERBS = {
    "meter": "read",
    "bore": "be stated",
    "length": "be stated",
    "elevations": "be stated",
    "gauges": "read",
}
