"""What else could explain the readings, in words: sizes, fits, one paragraph, and the next step."""

from __future__ import annotations

import math

from fieldfit.inference.beliefs import NOTHING
from fieldfit.inference.explanations import Explanation, Explanations
from fieldfit.inference.telling_apart import TELLING, Action, named
from fieldfit.inference.weighing import Size
from fieldfit.report.digits import fixed, litres, percent, significant, value_with_band

MOST_ACTIONS = 2
"""Most actions that the next step names."""
LISTED = 0.05
"""Probability from which a cause is named in the terminal [-]."""
CLEAR = 99.0
"""Standard errors beyond which a separation is only called clear."""
WIDENED = 1.05
"""Factor on the noise from which its widening is told."""


def natural(size: Size, bore_m: float) -> tuple[str, float, float, float]:
    """Return a size as a reader knows it: its key with the unit, best value, and both ends of its 95 % range.

    Examples
    --------
    >>> key, *values = natural(Size("gain", 0.0488, 0.0, 0.0953), 0.1)
    >>> key, [round(value, 3) for value in values]
    ('meter_gain', [0.05, 0.0, 0.1])
    """
    best, low, high = size.best, size.low, size.high
    if size.of == "bore":
        best, low, high = (1e3 * bore_m * math.exp(-value) for value in (best, high, low))
    elif size.of == "wall":
        best, low, high = 1e3 * best, 1e3 * low, 1e3 * high
    elif size.of == "gain":
        best, low, high = math.expm1(best), math.expm1(low), math.expm1(high)
    elif size.of in ("place", "branch"):
        best, low, high = (min(max(value, 0.0), 1.0) for value in (best, low, high))
    return _KEYS[size.of], best, low, high


def sizes(one: Explanation, bore_m: float) -> str:
    """Return how large a cause would be."""
    if one.causes == (NOTHING,):
        return "wall as new"
    parts = [_size(size, bore_m) for size in one.sizes]
    if one.option:
        parts.append(one.option)
    if one.meter_upstream is not None:
        parts.append(f"meter {'upstream' if one.meter_upstream else 'downstream'} of it")
    return "; ".join(parts)


def _size(size: Size, bore_m: float) -> str:
    """Return one size with its 95 % range."""
    key, best, low, high = natural(size, bore_m)
    scale = 100.0 if key in _SHARES else 1e3 if key.endswith("m3_s") else 1.0
    much = "much"
    if key in _SIGNED and best < 0.0:
        best, low, high, much = -best, -high, -low, "little"
    value = value_with_band(scale * best, (scale * low, scale * high), _UNITS.get(key, ""))
    return _WORDS[key].format(value, much)


_SHARES = ("branch_share", "meter_gain", "share_of_length_upstream")
_SIGNED = ("meter_gain", "meter_zero_m3_s", "offset_m")
_KEYS = {
    "bore": "bore_mm",
    "wall": "roughness_mm",
    "gain": "meter_gain",
    "local": "k",
    "offset": "offset_m",
    "air": "head_step_m",
    "leak": "leak_m3_s",
    "branch": "branch_share",
    "zero": "meter_zero_m3_s",
    "place": "share_of_length_upstream",
}
_UNITS = {
    "bore_mm": "mm",
    "roughness_mm": "mm",
    "meter_gain": "%",
    "offset_m": "m",
    "head_step_m": "m",
    "leak_m3_s": "L/s",
    "branch_share": "%",
    "meter_zero_m3_s": "L/s",
    "share_of_length_upstream": "%",
}
_WORDS = {
    "bore_mm": "bore {}",
    "roughness_mm": "{} rough",
    "k": "K {}",
    "offset_m": "head loss reads {} too {}",
    "head_step_m": "head step {}",
    "leak_m3_s": "{} lost or drawn",
    "branch_share": "{} of the flow through a branch",
    "meter_gain": "meter reads {} too {}",
    "meter_zero_m3_s": "meter reads {} too {} at every flow",
    "share_of_length_upstream": "{} of the length upstream of it",
}


def fit(one: Explanation) -> str:
    """Return what the readings say for or against a cause."""
    if one.explains:
        told = "passes through all readings"
    else:
        flow, misfit = one.worst
        told = f"misses the reading at {litres(flow)} by {fixed(abs(misfit), 1)} standard errors of its noise"
    if one.strain is not None:
        told += f", and only with the {one.strain[0]} {fixed(abs(one.strain[1]), 1)} standard uncertainties off"
    return told


def paragraph(found: Explanations) -> str:
    """Return in one paragraph what explains the readings and what cannot be told apart."""
    parts = [_leading(found), _together(found), _not_apart(found)]
    if found.noise_scale > WIDENED:
        parts.append(
            f"The noise of the readings had to be taken as {fixed(found.noise_scale, 1)} times what it seems, "
            "or no cause would be content."
        )
    if found.alike or not found.ranked[0].explains:
        parts.append(next_step(found))
    return " ".join(part for part in parts if part)


def ranked(found: Explanations) -> str:
    """Return the most probable causes in one line."""
    shown = [one for index, one in enumerate(found.ranked) if index == 0 or one.probability >= LISTED][:4]
    return ", ".join(f"{' with '.join(one.causes)} {percent(one.probability)}" for one in shown)


def caption(found: Explanations) -> str:
    """Return what to see in the figure."""
    told = "Left: the curve of each leading cause, with the errors it needs, through the readings. "
    if not found.alike:
        return told + "Right: how far the others lie from the first; beyond the dashed lines a reading there can tell."
    return told + (
        "Right: how far each lies from the first, in combined standard errors; within the dashed lines no reading can tell, and "
        "white are flows that were not tested."
    )


def _leading(found: Explanations) -> str:
    """Say what comes first."""
    first = found.ranked[0]
    if found.nothing_unusual:
        return (
            f"Nothing unusual: a wall as new, and nothing else, explains the readings (probability "
            f"{percent(first.probability)} among all causes weighed)."
        )
    name, sure = _article(named(first.causes)), percent(first.probability)
    if len(first.causes) > 1 and first.explains:
        return f"No single cause passes through the readings; two together do: {name} (probability {sure})."
    if found.unexplained:
        return (
            f"No cause, and no two together, pass through the readings: no one law fits them. Nearest comes {name}. "
            "Look at the log before believing any number drawn from it."
        )
    return f"Of the causes weighed, {name} is the most probable ({sure})."


def _together(found: Explanations) -> str:
    """Say what no two taps can part."""
    if found.ranked[0].causes not in (("rough wall",), ("reduced bore",)):
        return ""
    return "A rougher wall and a smaller bore together, in any mixture, would do as well."


def _not_apart(found: Explanations) -> str:
    """Say which causes the readings leave open."""
    if not found.alike:
        return ""
    first, *others = (_article(name) for name in found.alike)
    return (
        f"The readings cannot tell {first} from {_listed(others)}: at every flow tested their curves lie within two "
        "standard errors of each other."
    )


def next_step(found: Explanations) -> str:
    """Return what to do in the field to part the causes that cannot be told apart, and how far apart they would be."""
    if not found.alike:
        if found.nothing_unusual:
            return "Nothing need be done to tell causes apart."
        if not found.ranked[0].explains:
            return "Test again: several flows, each held until it is steady, with a static before and after."
        return "No rival is left to tell apart; confirm the cause where it can be seen."
    chosen: list[Action] = []
    said: set[str] = set()
    for one in found.actions:
        if not said & {one.name, one.parts[1]} and len(chosen) < MOST_ACTIONS:
            chosen.append(one)
            said |= {one.name, one.parts[1]}
    if not chosen:
        return "Test at flows that differ by a factor of three, with a static before and after."
    return " ".join(f"{one.text}: {_separation(one)}." for one in chosen)


def _separation(one: Action) -> str:
    """Say how far apart two causes would be."""
    far = f"over {CLEAR:.0f}" if one.separation > CLEAR else significant(one.separation, 2)
    doubt = "" if one.separation >= TELLING else ", which is not enough alone"
    return f"{_article(one.parts[0])} and {_article(one.parts[1])} would then lie {far} standard errors apart{doubt}"


def _article(name: str) -> str:
    """Return a cause with its article.

    Examples
    --------
    >>> _article("rough wall"), _article("leak or open branch"), _article("rough wall with trapped air")
    ('a rough wall', 'a leak or an open branch', 'a rough wall with trapped air')
    """
    first, *second = name.split(" with ")
    if second:
        return f"{_article(first)} with {_article(second[0])}"
    return first if first == "trapped air" else f"a {first.replace('or open', 'or an open')}"


def _listed(names: list[str]) -> str:
    """Return names as a list in words."""
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} or {names[-1]}"
