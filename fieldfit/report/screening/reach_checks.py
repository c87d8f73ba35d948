"""Whether the readings of a reach are good enough to assess: checks as data, each with what to do about it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.reaches import ReachHeads
from fieldfit.field.screens import CRITICAL, LAMINAR, NEGATIVE, limit
from fieldfit.field.section import Section
from fieldfit.report.digits import fixed, litres, percent, significant
from fieldfit.report.screening.finding import Check

Array = NDArray[np.float64]

FLOWS = 3
"""Different flows without which one wrong reading cannot be told from the rest."""
FLOW_RANGE = 1.5
"""Largest over smallest flow under which the readings cannot show a wrong zero."""
CLEAR = 5.0
"""Standard uncertainties that the largest head loss must stand clear of zero."""
STATICS = 2
"""Statics, before and after, that show drift."""
AGREE = 2.5
"""Standard uncertainties by which a static may differ from survey and gauges."""
DRIFT = 0.05
"""Share of the smallest head loss that the gauges may drift between statics."""
IN_ORDER = 0.8
"""Share of pairs of flows of which the larger one must lose more head."""
LARGER = "Test at larger flows: only turbulent water feels the wall."


def reach_checks(heads: ReachHeads, section: Section, moving: bool) -> tuple[Check, ...]:
    """Return the checks of one reach.

    Parameters
    ----------
    heads : ReachHeads
        Head loss of every plateau.
    section : Section
        The test section.
    moving : bool
        Whether water flows in any row of the log, steady or not.

    Returns
    -------
    tuple of Check
        The needed ones first.
    """
    found = [_flows(heads, section, moving), _reynolds(heads, section), _clear(heads), *_order(heads, section)]
    return tuple([*found, *_range(heads), *_statics(heads)])


def used_plateaus(heads: ReachHeads) -> NDArray[np.bool_]:
    """Return which plateaus carry roughness."""
    return np.asarray(~heads.plateaus.static & (heads.reason == ""))


def _flows(heads: ReachHeads, section: Section, moving: bool) -> Check:
    """Count the different flows that carry roughness."""
    flow = np.sort(heads.plateaus.flow_m3_s[used_plateaus(heads)])
    apart = np.diff(flow) > limit(section, "flow_step") / 2.0 * flow[1:]
    count = int(np.count_nonzero(apart)) + 1 if flow.size else 0
    enough = count >= FLOWS
    counted = f"{count} different flow{'' if count == 1 else 's'}" if count else "No flow"
    verb = "is" if count <= 1 else "are"
    return Check(
        what="Flows that carry roughness",
        value=float(count),
        limit=float(FLOWS),
        unit="-",
        passed=enough,
        because=f"{counted} {verb} steady, turbulent and clear of the gauges' uncertainty{_lost(heads)}.",
        do="" if enough else _more_flows(heads, section, moving),
        needed=True,
    )


def _lost(heads: ReachHeads) -> str:
    """Return in words why the other flowing plateaus do not count."""
    reasons = heads.reason[heads.reason != ""].tolist()
    if not reasons:
        return ""
    counted = [f"{reasons.count(why)} {why}" for why in dict.fromkeys(reasons)]
    return f"; set aside: {', '.join(counted)}"


def _more_flows(heads: ReachHeads, section: Section, moving: bool) -> str:
    """Return what would give more flows."""
    reasons = heads.reason[heads.reason != ""].tolist()
    if not np.any(~heads.plateaus.static):
        rows = int(limit(section, "plateau_rows"))
        hold = f"old each of three flows or more for at least {rows} rows of the logger, better two minutes."
        if not moving:
            return f"Let water flow, and h{hold}"
        return f"H{hold} If the flow cannot be held, log a day of ordinary service."
    if reasons.count(NEGATIVE) > len(reasons) / 2.0:
        return (
            "Check whether the columns of the taps are swapped, or the stations counted against the flow: the pressure "
            "rises along the pipe."
        )
    if reasons.count(LAMINAR) + reasons.count(CRITICAL) > len(reasons) / 2.0:
        return LARGER
    return "Take at least three flows, the largest as high as the supply allows and the smallest a third of it."


def _reynolds(heads: ReachHeads, section: Section) -> Check:
    """Look at the largest Reynolds number."""
    plateaus, lowest = heads.plateaus, limit(section, "turbulent")
    flowing = ~plateaus.static
    viscosity = section.liquid.viscosity_m2_s(plateaus.temperature_degc)
    reynolds = 4.0 * plateaus.flow_m3_s / (np.pi * section.bore.value * viscosity)
    highest = float(np.max(reynolds[flowing])) if np.any(flowing) else None
    enough = highest is not None and highest >= lowest
    return Check(
        what="Largest Reynolds number",
        value=highest,
        limit=lowest,
        unit="-",
        passed=enough,
        because="No steady stretch has flow in it."
        if highest is None
        else f"The largest steady flow is {litres(float(np.max(plateaus.flow_m3_s[flowing])))}, and it is "
        f"{'turbulent' if enough else 'not surely turbulent, so it does not feel the wall'}.",
        do="" if enough or highest is None else LARGER,
        needed=True,
    )


def _clear(heads: ReachHeads) -> Check:
    """Hold the largest head loss against its uncertainty."""
    flowing = ~heads.plateaus.static
    levelled = heads.levelling is not None or heads.elevation_drop is not None
    ratio = heads.head_loss_m[flowing] / heads.standard_m[flowing]
    best = float(np.max(ratio)) if levelled and ratio.size else None
    enough = best is not None and best >= CLEAR
    if not levelled:
        because = "Nothing levels the gauges: no static in the log, no elevation of both taps in the section file."
        do = "Read the gauges with the flow stopped, or survey both and write their elevations."
    elif best is None:
        because, do = "No steady stretch has flow in it.", ""
    else:
        where = int(np.argmax(ratio))
        because = (
            f"The best reading loses {significant(float(heads.head_loss_m[flowing][where]))} m, known to "
            f"±{significant(1.96 * float(heads.standard_m[flowing][where]), 2)} m."
        )
        do = "Raise the flow, lengthen the section, or use finer gauges levelled on a static." if best > 0.0 else ""
    return Check(
        what="Largest head loss over its standard uncertainty",
        value=best,
        limit=CLEAR,
        unit="-",
        passed=enough,
        because=because,
        do="" if enough else do,
        needed=True,
    )


def _order(heads: ReachHeads, section: Section) -> Iterator[Check]:
    """Look whether more flow loses more head, where there are pairs of flows that differ."""
    used = used_plateaus(heads)
    flow, head = heads.plateaus.flow_m3_s[used], heads.head_loss_m[used]
    apart = flow[:, None] - flow > limit(section, "flow_step") * flow
    if np.count_nonzero(apart) < FLOWS:
        return
    share = float(np.mean((head[:, None] > head)[apart]))
    enough = share >= IN_ORDER
    yield Check(
        what="Pairs of flows of which the larger loses more head",
        value=share,
        limit=IN_ORDER,
        unit="-",
        passed=enough,
        because=f"In {percent(share)} of all pairs{'' if enough else ': these pressures do not follow this flow'}.",
        do=""
        if enough
        else "Check that the columns belong together: taps, meter and clocks of the same test, in the right order.",
        needed=True,
    )


def _range(heads: ReachHeads) -> Iterator[Check]:
    """Hold the largest flow against the smallest."""
    flow = heads.plateaus.flow_m3_s[used_plateaus(heads)]
    if not flow.size:
        return
    ratio = float(np.max(flow) / np.min(flow))
    enough = ratio >= FLOW_RANGE
    yield Check(
        what="Largest flow over smallest",
        value=ratio,
        limit=FLOW_RANGE,
        unit="-",
        passed=enough,
        because=f"From {litres(float(np.min(flow)))} to {litres(float(np.max(flow)))}"
        + ("." if enough else ": a wrong zero, a leak or a half-shut valve would look just like roughness."),
        do="" if enough else "Test at flows that differ by a factor of three.",
        needed=False,
    )


def _statics(heads: ReachHeads) -> Iterator[Check]:
    """Look at the statics: their number, drift, and agreement with the survey."""
    level = heads.levelling
    count = level.plateaus if level else 0
    told = {0: "There is no static, so the zeros of the gauges count in full.", 1: "One static cannot show drift."}
    yield Check(
        what="Statics",
        value=float(count),
        limit=float(STATICS),
        unit="-",
        passed=count >= STATICS,
        because=told.get(count, f"{count} stretches without flow level the gauges."),
        do="" if count >= STATICS else "Stop the flow for a few minutes before and after the test.",
        needed=False,
    )
    if level is None:
        return
    if heads.elevation_drop is not None:
        off = abs(level.offset_m) / max(level.expected_m, 1e-12)
        yield Check(
            what="Statics against survey, in standard uncertainties",
            value=off,
            limit=AGREE,
            at_most=True,
            unit="-",
            passed=off <= AGREE,
            because=f"At rest the gauges differ from the survey by {fixed(level.offset_m, 2)} m; their stated limits allow "
            f"about ±{significant(2.0 * level.expected_m, 2)} m.",
            do="" if off <= AGREE else "Check elevations, gauge zeros, and whether the water really stood still.",
            needed=False,
        )
    yield from _drift(heads)


def _drift(heads: ReachHeads) -> Iterator[Check]:
    """Hold the drift between statics against the smallest head loss."""
    used = used_plateaus(heads)
    if heads.levelling is None or heads.levelling.drift_m is None or not np.any(used):
        return
    drift, smallest = abs(heads.levelling.drift_m), float(np.min(heads.head_loss_m[used]))
    share = drift / smallest
    random = heads.random_m[heads.plateaus.static]
    # A drift within the statics' own noise and steps is none that anyone could show.
    seen = drift > 2.0 * float(np.hypot(random[0], random[-1]))
    fine = share <= DRIFT or not seen
    yield Check(
        what="Drift between statics over the smallest head loss",
        value=share,
        limit=DRIFT,
        at_most=True,
        unit="-",
        passed=fine,
        because=f"The gauges drifted by {fixed(drift, 3)} m against each other{'' if seen else ', no more than their noise'}; the "
        f"smallest head loss used is {significant(smallest)} m.",
        do="" if fine else "Let the gauges settle, keep them out of the sun, and level them more often.",
        needed=False,
    )
