"""The answer in plain words."""

from __future__ import annotations

from fieldfit.field.readings import ReachReadings
from fieldfit.inference.wall import Wall
from fieldfit.report.digits import COVERAGE, decimals, fixed, limit, litres, percent, span, value_with_band
from fieldfit.report.finding import ReachFinding


def headline(reach: ReachFinding) -> str:
    """Return the answer in half a dozen words."""
    wall, new = reach.wall, reach.new_pipe
    if wall.state == "no estimate":
        return "No estimate from these readings"
    if new is None:
        return "Cannot be told from smooth" if wall.state == "upper limit" else "Measured, with no new pipe to compare"
    smooth = wall.state == "upper limit"
    if new.probability_worse >= 0.95:
        return "Worse than new"
    if new.probability_worse >= 0.5:
        return "Probably worse than new"
    if new.probability_worse > 0.05:
        return "Not shown to be worse than new"
    return "As good as new, and not to be told from smooth" if smooth else "As good as new"


def answer(reach: ReachFinding) -> str:
    """Return the answer on one reach in one paragraph of plain words.

    Parameters
    ----------
    reach : ReachFinding
        What was found between two taps.

    Returns
    -------
    str
        What the pipe is like, how sure, against new, and what limits the certainty; or why there is no answer and
        what to do next.
    """
    if reach.wall.state == "no estimate":
        parts = [
            f"{_place(reach.readings)} gives no roughness.",
            sentence(reach.wall.because),
            sentence(reach.wall.advice),
        ]
        return " ".join(part for part in parts if part)
    told = [_wall_words(reach), _c_words(reach), _new_words(reach), _limit_words(reach.wall)]
    return " ".join(part for part in told if part)


def sentence(text: str) -> str:
    """Return text that starts with a capital and ends with a stop."""
    text = text.strip()
    return "" if not text else text[0].upper() + text[1:] + ("" if text[-1] in ".!?" else ".")


def bore_words(readings: ReachReadings) -> str:
    """Return the as-new bore to the digits it is known to."""
    bore = readings.bore
    if bore.standard <= 0.0:
        return f"{bore.value * 1e3:.5g} mm"
    return f"{fixed(bore.value * 1e3, max(decimals(COVERAGE * bore.standard * 1e3), 0))} mm"


def _place(readings: ReachReadings) -> str:
    length = fixed(readings.length.value, 1 if readings.length.value < 100.0 else 0)
    return f"The {length} m between {readings.upstream.column} and {readings.downstream.column}"


def _wall_words(reach: ReachFinding) -> str:
    band = reach.wall.roughness_m
    own, wide = band.measurement, band.with_correlation
    if own is None or wide is None:
        return ""
    own, wide = (own[0] * 1e3, own[1] * 1e3), (wide[0] * 1e3, wide[1] * 1e3)
    if band.best is None:
        return (
            f"{_place(reach.readings)} cannot be told from a smooth pipe: the wall is not rougher than {limit(wide[1])} mm, "
            f"with 95 % confidence. That limit allows for how far friction formulas can be trusted; by the readings alone "
            f"it is {limit(own[1])} mm."
        )
    value = value_with_band(band.best * 1e3, own, "mm").split(" (")
    return (
        f"{_place(reach.readings)} behaves like a pipe with a wall {value[0]} rough. "
        f"By these readings alone the roughness lies between {value[1][:-1].replace(' to ', ' and ')}; allowing for how far "
        f"friction formulas can be trusted, as any comparison with a handbook must, between "
        f"{span(*wide, 'mm').replace(' to ', ' and ')} (both 95 %)."
    )


def _c_words(reach: ReachFinding) -> str:
    band, wall = reach.wall.hazen_williams_c, reach.wall
    if band.best is None or band.measurement is None:
        return ""
    return (
        f"Hazen–Williams C is {value_with_band(band.best, band.measurement)} at {litres(wall.flow_m3_s)}, "
        f"{fixed(wall.temperature_degc, 0)} °C and a bore of {bore_words(reach.readings)}."
    )


def _new_words(reach: ReachFinding) -> str:
    new = reach.new_pipe
    if new is None:
        return "There is no value for new pipe to compare it with."
    low, best, high = new.head_loss_ratio
    times, between = value_with_band(best, (low, high)).split(" (")
    return (
        f"This stretch loses {times} times the head of new {new.material} ({between}; the probability that it loses "
        f"over {100.0 * (new.limit - 1.0):.0f} % more than new is {percent(new.probability_worse)}."
    )


def _limit_words(wall: Wall) -> str:
    """Say what is largest in the budget, and what is largest among the measurements when that is something else."""
    if not wall.budget:
        return ""
    first = max(wall.budget, key=lambda entry: entry.share)
    measured = max(wall.budget, key=lambda entry: entry.measurement_share)
    told = f"What limits the certainty most: {first.error} ({percent(first.share)} of the variance)"
    if measured is first:
        return f"{told}."
    return f"{told}; among the measurements themselves: {measured.error} ({percent(measured.measurement_share)})."
