"""Whether a log as a whole is good enough to assess: checks as data, each with what to do about it."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.log import Log
from fieldfit.field.quantisation import ChannelSteps
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.screens import CLOCK, MISSING, RANGE, REVERSED, STUCK, UNSTEADY
from fieldfit.hydraulics.friction import STANDARD_GRAVITY
from fieldfit.report.digits import significant
from fieldfit.report.screening.finding import Check, ReachScreen
from fieldfit.report.screening.reach_checks import used_plateaus

Array = NDArray[np.float64]

ASIDE = 0.5
"""Share of rows set aside from which the log itself is in question."""
INDEPENDENT = 3.0
"""Independent rows without which a plateau does not know its own noise."""
FAULTY = 0.1
"""Share of rows set aside for a fault of instruments or logger from which these are in question."""
FAULTS = {
    MISSING: "Find out why the logger left values out.",
    CLOCK: "Look at the logger's clock, and whether two downloads were pasted together.",
    RANGE: "Check range, unit and wiring of the gauges.",
    STUCK: "Look at the gauge that repeats itself: a closed cock, a frozen line or a full memory.",
    REVERSED: "Find out why water ran backwards, or whether the meter's sign changed.",
}
"""What to do about each kind of fault."""
LONGER = "Hold each flow longer."
FEW_VALUES = 5
"""Different values of the liveliest column from which another one should not stand still."""
HARDLY = 1e-4
"""Share of the smallest head loss that the steps leave under which they hardly count."""
TREMBLING = "The readings tremble over their steps, so a mean lies between them."
STEP = 0.02
"""Share of the smallest head loss that the steps of the columns may leave uncertain."""


def log_checks(
    log: Log,
    screening: Screening,
    plateaus: Plateaus,
    reaches: tuple[ReachScreen, ...],
    steps: tuple[ChannelSteps, ...],
) -> tuple[Check, ...]:
    """Return the checks of a log as a whole."""
    return tuple(
        [
            _aside(screening),
            _faults(screening),
            *_constant(log, steps),
            *_independent(log, screening, plateaus),
            *_resolution(reaches, steps),
        ]
    )


def _aside(screening: Screening) -> Check:
    """Look at the share of rows set aside."""
    rows = screening.rows
    aside = rows - screening.used
    share = aside / rows
    first = screening.counts[0][0] if screening.counts else ""
    most = f", most of them for '{first}'" if first else ""
    do = {UNSTEADY: LONGER}.get(first, "" if first in FAULTS else "See the timeline for where these rows lie.")
    return Check(
        what="Share of rows set aside",
        value=share,
        limit=ASIDE,
        at_most=True,
        unit="-",
        passed=share <= ASIDE,
        because=f"{aside} of {rows} rows are set aside{most}.",
        do="" if share <= ASIDE else do,
        needed=False,
    )


def _faults(screening: Screening) -> Check:
    """Look at the share of rows that instruments or logger have spoilt."""
    faults = [(reason, number) for reason, number in screening.counts if reason in FAULTS]
    share = sum(number for _, number in faults) / screening.rows
    listed = ", ".join(f"{number} {reason}" for reason, number in faults)
    return Check(
        what="Share of rows with a fault",
        value=share,
        limit=FAULTY,
        at_most=True,
        unit="-",
        passed=share <= FAULTY,
        because=f"Faults of instruments, logger or direction: {listed}." if faults else "No row has a fault.",
        do="" if share <= FAULTY else " ".join(FAULTS[reason] for reason, _ in faults[:2]),
        needed=False,
    )


def _constant(log: Log, steps: tuple[ChannelSteps, ...]) -> Iterator[Check]:
    """Look for columns that never change while others do."""
    if log.kind == "sheet" or max((one.values for one in steps), default=0) < FEW_VALUES:
        return
    still = [one.column for one in steps if one.constant]
    yield Check(
        what="Columns that never change",
        value=float(len(still)),
        limit=0.0,
        at_most=True,
        unit="-",
        passed=not still,
        because=f"'{', '.join(still)}' holds one value throughout, so its step is only known by how it is written."
        if still
        else "Every column moves.",
        do="Check that the instrument is alive, and that its column is the right one." if still else "",
        needed=False,
    )


def _independent(log: Log, screening: Screening, plateaus: Plateaus) -> Iterator[Check]:
    """Look at the shortest plateau; rows of a hand sheet stand for themselves."""
    flowing = ~plateaus.static & (plateaus.rows > 1)
    if log.kind == "sheet" or not np.any(flowing):
        return
    fewest = float(np.min(plateaus.independent_rows[:, flowing]))
    number = int(plateaus.number[flowing][np.argmin(np.min(plateaus.independent_rows[:, flowing], axis=0))])
    kind, part = ("Group", "time blocks") if screening.block is not None else ("Plateau", "rows")
    yield Check(
        what=f"Independent {part} of the shortest {kind.lower()}",
        value=fewest,
        limit=INDEPENDENT,
        unit="-",
        passed=fewest >= INDEPENDENT,
        because=f"{kind} {number} is worth {significant(fewest, 2)} independent {part}.",
        do="" if fewest >= INDEPENDENT else LONGER,
        needed=False,
    )


def _resolution(reaches: tuple[ReachScreen, ...], steps: tuple[ChannelSteps, ...]) -> Iterator[Check]:
    """Hold the steps of the pressure columns against the smallest head loss."""
    by_column = {one.column: one.standard for one in steps}
    worst, told = -1.0, ""
    for reach in reaches:
        used = used_plateaus(reach.heads)
        if np.any(used):
            gauges = [by_column.get(tap.column, 0.0) for tap in (reach.upstream, reach.downstream)]
            # One transmitter between the taps has a column of its own.
            pascals = math.hypot(*gauges) if any(gauges) or len(steps) > 2 else steps[-1].standard
            smallest = float(np.min(reach.heads.head_loss_m[used]))
            left = pascals / (1000.0 * STANDARD_GRAVITY)
            if smallest > 0.0 and left / smallest > worst:
                worst = left / smallest
                told = f"The gauges' steps leave ±{significant(1.96 * left, 2)} m in a smallest loss of {significant(smallest)} m."
    told = TREMBLING if worst < HARDLY else told
    if worst >= 0.0:
        yield Check(
            what="Steps of the gauges over the smallest head loss",
            value=worst,
            limit=STEP,
            at_most=True,
            unit="-",
            passed=worst <= STEP,
            because=told,
            do="" if worst <= STEP else "Log the pressures with more digits, or test at larger flows only.",
            needed=False,
        )
