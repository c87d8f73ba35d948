"""What the reader must know beside an ageing: how the campaigns were compared, and what does not add up."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.decisions.growth import Growth
from fieldfit.decisions.visits import Stage, Visit
from fieldfit.inference.campaigns import JointFit

SCATTER = 3.0
"""Reduced χ² of the joint fit from which campaigns contradict each other."""
MISFIT = 6.63
"""χ² per degree of freedom beyond which no law follows the campaigns, 1 % of one degree."""
SEASON_K = 3.0
"""Difference of temperature that is worth a word [K]."""
FLOWS = 1.3
"""Ratio of middle flows that is worth a word [-]."""


def follows_no_law(growth: Growth) -> bool:
    """Return whether the campaigns stray from every law more than their errors allow."""
    return growth.freedom > 0 and growth.misfit > MISFIT * growth.freedom


def remarks_on(
    visits: Sequence[Visit], used: Sequence[Visit], stages: tuple[Stage, ...], fit: JointFit, growth: Growth
) -> tuple[str, ...]:
    """Return sentences, most weighty first.

    Parameters
    ----------
    visits, used : sequence of Visit
        All campaigns, and those with an estimate.
    stages : tuple of Stage
        Stages of the pipe's life.
    fit : JointFit
        The joint fit.
    growth : Growth
        The laws.

    Returns
    -------
    tuple of str
    """
    said = [*_improvements(stages, used), *_left_out(visits, used), *_contradictions(fit, growth)]
    return (*said, *_instruments(fit), *_conditions(used))


def _improvements(stages: tuple[Stage, ...], used: Sequence[Visit]) -> Iterator[str]:
    """Point out what became better without a word."""
    for stage in stages:
        if stage.event == "unmarked":
            before = used[stage.first - 1].date
            yield (
                f"Between {before} and {used[stage.first].date} the pipe became better by more than the tests' errors "
                "allow, and no pipe does so by itself. Cleaned but not declared? A valve in another state, or another "
                "instrument than written? It was not averaged away: growth is counted anew from the later test. "
                "Write cleaned = true, valve or meter in that [[campaign]] once you know."
            )


def _left_out(visits: Sequence[Visit], used: Sequence[Visit]) -> Iterator[str]:
    """Name campaigns without an estimate."""
    for visit in visits:
        if visit not in used:
            yield f"The campaign of {visit.date} gives no estimate and is left out: {visit.wall.because}"


def _contradictions(fit: JointFit, growth: Growth) -> Iterator[str]:
    """Say what does not fit together."""
    chi = fit.reduced_chi_square
    if chi is not None and chi > SCATTER:
        yield (
            f"Fitted together, the campaigns contradict each other (reduced χ² {chi:.1f}); the scatter was widened to "
            "match. An instrument that is declared the same may have drifted or been replaced."
        )
    if follows_no_law(growth):
        yield (
            "No single law of growth follows the campaigns within their errors; their errors were widened to match "
            "before looking ahead. Was the pipe cleaned, the water changed, or another stretch tested in between?"
        )


def _instruments(fit: JointFit) -> Iterator[str]:
    """Say when no instrument is declared the same."""
    if len(fit.tests) > 1:
        shared = [key for key in fit.keys if key[0] == "meter gain" or " of gauge " in str(key[0])]
        alone = [key for key in shared if len(key) > 1 and key[1] == "campaign"]
        if shared and len(alone) == len(shared):
            yield (
                "No instrument has a serial, so none is taken as the same in two campaigns and their errors count in "
                'full in every change. If they were the same, write meter = "..." and gauge = "...".'
            )


def _conditions(used: Sequence[Visit]) -> Iterator[str]:
    """Say how campaigns under different conditions were compared."""
    temperatures = [visit.wall.temperature_degc for visit in used]
    flows = [visit.wall.flow_m3_s for visit in used]
    lengths = np.array([visit.readings.length.value for visit in used])
    differ = []
    if max(temperatures) - min(temperatures) > SEASON_K:
        differ.append(f"the water had {min(temperatures):.0f} to {max(temperatures):.0f} °C")
    if max(flows) / min(flows) > FLOWS:
        differ.append("the flows differ")
    if differ:
        yield (
            f"Between campaigns {' and '.join(differ)}; they were compared at one flow and one temperature through the "
            "friction law, not as read."
        )
    if float(np.ptp(lengths)) > 0.001 * float(np.max(lengths)):
        yield (
            "The distance between the taps is not the same in all campaigns: they were compared per metre, and a "
            "difference between the stretches would pass for a change."
        )
