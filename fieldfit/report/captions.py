"""One sentence under each figure that says what to see in it."""

from __future__ import annotations

import numpy as np

from fieldfit.report.cautions import SCATTER
from fieldfit.report.digits import litres, percent, significant, value_with_band
from fieldfit.report.finding import ReachFinding, ScreenedLog

LONG_LOG = (
    "Of a log so long the drawing shows the extremes of many short windows, and the file of its rows has one line for "
    "each run of rows with one fate. The results stand on every row."
)


def head_loss(reach: ReachFinding) -> str:
    """Say how the readings lie against the fit and new pipe."""
    wall, new = reach.wall, reach.new_pipe
    if wall.state == "no estimate":
        return "No line is fitted: these readings carry no roughness."
    if wall.reduced_chi_square is not None and wall.reduced_chi_square > SCATTER:
        follow = "The readings stray from one line more than their own scatter allows"
    elif wall.state == "upper limit":
        follow = "The readings run along the smooth line, closer to it than friction formulas can be trusted"
    else:
        follow = "One roughness explains all readings"
    if new is None:
        return f"{follow}."
    low, best, high = new.head_loss_ratio
    times = f"{value_with_band(best, (low, high)).split(' (')[0]} times what new pipe would lose at {litres(wall.flow_m3_s)}"
    if low > new.limit:
        return f"{follow}, and they lie clear above new pipe: {times}."
    where = "lie below" if high < 1.0 else "do not stand clear of"
    return f"{follow}; they {where} new pipe: {times}."


def friction_chart(reach: ReachFinding) -> str:
    """Say where on the chart the pipe lies."""
    wall, best = reach.wall, reach.wall.roughness_m.best
    if wall.state == "no estimate":
        return "Readings left of the critical zone do not feel the wall; readings right of it do."
    if best is None:
        return "The readings follow the dotted smooth line, so the wall cannot be told from smooth."
    relative = significant(best / reach.readings.bore.value, 2)
    over = wall.friction_factor.best
    above = (
        f", {significant(over / wall.smooth_friction_factor, 2)} times the friction of a smooth wall" if over else ""
    )
    return (
        f"The readings follow the line of relative roughness {relative}{above}; none of them lies in the critical zone."
    )


def hazen_williams(reach: ReachFinding) -> str:
    """Say how C goes with flow."""
    new, wall = reach.new_pipe, reach.wall
    told = "C is not one number for a pipe: it moves with flow, bore and temperature, so compare it at equal flow only."
    if new is None:
        return told
    low, _, high = (significant(c) for c in new.hazen_williams_c)
    return f"{told} At {litres(wall.flow_m3_s)} new pipe has {low} to {high}."


def residuals(reach: ReachFinding) -> str:
    """Say whether the residuals look sound."""
    values = reach.wall.plateaus
    if values is None or not values.residual.size:
        return ""
    inside = int(np.count_nonzero(np.abs(values.residual) < 1.96))
    return (
        f"{inside} of {values.residual.size} plateaus lie in the grey band, where 95 % of sound readings fall. "
        "A bend along the flow would point to a wrong zero or local loss, a slope over time to drift."
    )


def budget(reach: ReachFinding) -> str:
    """Say what to improve."""
    entries = reach.wall.budget
    by_c = max(entries, key=lambda entry: entry.measurement_share)
    first = max(entries, key=lambda entry: entry.share)
    told = f"The longest bar for the roughness is {first.error} ({percent(first.share)})"
    if by_c.error == first.error:
        return f"{told}, and it is the longest for C as well."
    beyond = ", which no better instrument can shorten" if first.measurement_share == 0.0 else ""
    return f"{told}{beyond}; for C it is {by_c.error} ({percent(by_c.measurement_share)})."


def rows(campaign: ScreenedLog) -> str:
    """Say how much of the log is used."""
    used, total = campaign.screening.used, campaign.log.rows
    thinned = "" if campaign.screening.runs is None else f" {LONG_LOG}"
    if used == total:
        return f"All {total} rows are used.{thinned}"
    lanes = "the lanes below show where the others lie and why they were set aside."
    return f"{used} of {total} rows are used; {lanes}{thinned}"
