"""What a gradient survey found, in plain words."""

from __future__ import annotations

from fieldfit.inference.survey_finding import Likely, SameWall, Survey
from fieldfit.inference.survey_wall import SurveyWall
from fieldfit.report.digits import fixed, limit, litres, percent, significant, span, value_with_band

NOT_ALIKE = 0.01
"""Probability under which one roughness does not serve all."""
DOUBTFUL = 0.05
"""Probability under which it is in doubt."""
NEGATIVE_SD = 2.5
"""Standard uncertainties by which a reach may gain head before it is named."""


def place(found: Survey, reaches: tuple[int, ...]) -> str:
    """Return a stretch in words: from the tap above it to the tap below it."""
    return f"{found.reaches[reaches[0]].upper} and {found.reaches[reaches[-1]].lower}"


def headline(found: Survey) -> str:
    """Return the answer of a survey in half a dozen words."""
    first = found.likely[0]
    causes = {found.likely[index].cause for index in (0, *found.alike)}
    same_place = all(found.likely[index].reaches == first.reaches for index in found.alike)
    if first.cause == "one wall":
        return "One roughness serves the whole length"
    if first.cause == "uneven wall":
        return "The wall differs a little from reach to reach"
    if first.cause == "two local losses":
        return "Two local losses"
    if causes >= {"local loss", "bad reach"} and same_place:
        return f"Too much is lost between {place(found, first.reaches)}"
    if first.cause == "local loss":
        return f"A local loss between {place(found, first.reaches)}"
    rougher = (first.friction_ratio or 1.0) > 1.0
    return f"Between {place(found, first.reaches)} the pipe is {'worse' if rougher else 'better'} than the rest"


def paragraph(found: Survey) -> str:
    """Return the answer of a survey in one paragraph."""
    first = found.likely[0]
    told = [
        _likely_words(found, first),
        *_alike_words(found),
        *_pooled_words(found),
        _same_words(found.same_wall, first),
    ]
    if found.side_flow is not None:
        told.append(_side_words(found))
    return " ".join(part for part in told if part)


def _likely_words(found: Survey, one: Likely) -> str:
    """Say what the likeliest explanation is, with its size."""
    sure = percent(one.probability)
    if one.cause == "one wall":
        return f"All taps together are explained best by one wall from end to end (probability {sure})."
    if one.cause == "uneven wall":
        return (
            f"The reaches differ by more than the instruments explain, but by no more than an old wall does from place to "
            f"place (probability {sure})."
        )
    if one.cause == "bad reach" and one.wall is not None and one.friction_ratio is not None:
        return (
            f"Between {place(found, one.reaches)} the friction factor is {significant(one.friction_ratio, 3)} times that of "
            f"the rest (probability {sure}): a wall {_wall_words(one.wall)}."
        )
    parts = [
        f"{value_with_band(k.best, k.measurement)} between {place(found, spot)}, {significant(head, 2)} m of head at "
        f"{litres(found.grade.flow_m3_s)}"
        for k, head, spot in zip(one.local_k, one.head_m, _spots(one), strict=True)
        if k.best is not None and k.measurement is not None
    ]
    return f"The readings ask for a local loss of K {'; and of K '.join(parts)} (probability {sure})."


def _alike_words(found: Survey) -> list[str]:
    """Say what cannot be told from the likeliest explanation, and what would."""
    rivals = [found.likely[index] for index in found.alike]
    listed = [f"{short(found, one)} (probability {percent(one.probability)})" for one in rivals]
    told = [f"Not to be told from it: {'; '.join(listed)}."] if listed else []
    if found.apart is not None:
        reach = found.likely[0].reaches
        told.append(
            f"A tap halfway between {place(found, reach)} would part a step from a slope by about "
            f"{significant(found.apart, 2)} standard uncertainties."
        )
    return told


def _spots(one: Likely) -> list[tuple[int, ...]]:
    """Return the reaches of each local loss; one alone may lie anywhere between two taps that gave readings."""
    return [one.reaches] if one.cause == "local loss" else [(reach,) for reach in one.reaches]


def short(found: Survey, one: Likely) -> str:
    """Return an explanation in a few words."""
    if one.cause == "one wall":
        return "one wall for all reaches"
    if one.cause == "uneven wall":
        return "a wall that differs a little from reach to reach"
    if one.cause == "bad reach":
        times = f", {significant(one.friction_ratio, 3)} times the friction of the rest" if one.friction_ratio else ""
        return f"another wall between {place(found, one.reaches)}{times}"
    where = "; ".join(place(found, spot) for spot in _spots(one))
    return f"{'a local loss' if one.cause == 'local loss' else 'local losses'} between {where}"


def size(one: Likely) -> str:
    """Return how large the fault of an explanation is."""
    if one.wall is not None:
        return f"wall {_wall_words(one.wall)}"
    sizes = [value_with_band(k.best, k.measurement) for k in one.local_k if k.best is not None and k.measurement]
    return "K " + "; ".join(sizes) if sizes else "–"


def _wall_words(wall: SurveyWall) -> str:
    """Return a roughness in words, correlation included."""
    band = wall.roughness_m
    if band.with_correlation is None:
        return "that is no roughness at all"
    low, high = band.with_correlation[0] * 1e3, band.with_correlation[1] * 1e3
    if band.best is None:
        return f"not rougher than {limit(high)} mm"
    return f"{value_with_band(band.best * 1e3, (low, high), 'mm')} rough"


def _pooled_words(found: Survey) -> list[str]:
    """Say what the wall is by all taps together, what stands out left aside."""
    first = found.likely[0]
    if first.cause == "uneven wall":
        return []
    normal = [index for index in range(len(found.reaches)) if first.cause != "bad reach" or index not in first.reaches]
    seen: dict[tuple[float, float], str] = {}
    for index in normal:
        wall = found.reaches[index].explained
        c = wall.hazen_williams_c
        if c.best is not None and c.measurement is not None:
            key = (round(c.best, 6), wall.bore_m)
            seen.setdefault(
                key,
                f"{_wall_words(wall)}, Hazen–Williams C {value_with_band(c.best, c.measurement)} at {litres(wall.flow_m3_s)}",
            )
    aside = {"one wall": "It is", "bad reach": "The rest is"}.get(first.cause, "With that taken out, the pipe is")
    return [f"{aside} {'; and '.join(seen.values())}."] if seen else []


def _same_words(test: SameWall | None, first: Likely) -> str:
    """Say in words whether one roughness serves all."""
    if test is None:
        return "No two reaches are of one material, so their walls cannot be held against each other."
    chance = probability_words(test.probability)
    if test.probability < NOT_ALIKE:
        ruled_out = "One roughness and no local loss for all reaches is out of the question"
        return f"{ruled_out}: chance alone makes the taps stray so far {chance}."
    doubt = "in doubt" if test.probability < DOUBTFUL else "in keeping with the readings"
    told = f"One roughness for all reaches is {doubt}: chance alone makes them differ as much {chance}."
    return told if first.cause == "one wall" or test.probability < DOUBTFUL else told.replace("is in", "would be in", 1)


def probability_words(probability: float) -> str:
    """Return how often something happens, in words.

    Examples
    --------
    >>> probability_words(0.32), probability_words(0.004), probability_words(1e-9)
    ('32 times in 100', '4 times in 1000', 'less than once in 1000 times')
    """
    if probability < 0.001:
        return "less than once in 1000 times"
    of = 100 if probability >= 0.0995 else 1000
    return f"{fixed(probability * of, 0)} times in {of}"


def _side_words(found: Survey) -> str:
    """Say what the side flow is, or that it cannot be told."""
    side = found.side_flow
    assert side is not None
    low, high = (end * 1e3 for end in side.interval_m3_s)
    best = value_with_band(side.flow_m3_s * 1e3, (low, high), "L/s")
    told = f"The flow of {side.name} comes out as {best} if one wall serves all."
    free = (side.free_interval_m3_s[0] * 1e3, side.free_interval_m3_s[1] * 1e3)
    if free[1] - free[0] > 3.0 * (high - low):
        return (
            f"{told} Were every reach left its own wall, the readings could only say {span(*free, 'L/s')}: a side flow and a "
            "smoother wall below it look alike. Meter it, or shut it and test again."
        )
    return told


def caption(found: Survey) -> str:
    """Say what to see in the grade line."""
    return f"{_seen(found)} Dots are readings; their 95 % bars hold gauges and heights, against the first tap."


def _seen(found: Survey) -> str:
    """Say what the line does."""
    first = found.likely[0]
    flow = litres(found.grade.flow_m3_s)
    if first.cause == "local loss":
        return f"At {flow} the line steps down between {place(found, first.reaches)} and runs on with one slope on either side."
    if first.cause == "bad reach":
        steeper = "steeper" if (first.friction_ratio or 1.0) > 1.0 else "less steeply"
        return f"At {flow} the line falls {steeper} between {place(found, first.reaches)} than elsewhere."
    if first.cause == "two local losses":
        return f"At {flow} the line steps down in two places and has one slope elsewhere."
    if first.cause == "uneven wall":
        return f"At {flow} the slope changes a little from reach to reach; below, the same against one wall for all."
    return f"At {flow} the readings follow one line from end to end; below, what they leave over."
