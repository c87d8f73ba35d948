"""What the reader must know beside the answer: small checks, each with its limit, each ending in what to do."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, ReachReadings, Screening
from fieldfit.field.section import Section
from fieldfit.report.finding import Caution, ReachFinding
from fieldfit.report.static_cautions import disagreement_cautions, doubt_cautions, drift_cautions

SCATTER = 3.0
"""Reduced χ² from which the readings do not follow one curve."""
PULL = 2.5
"""Standard uncertainties by which a stated accuracy may be exceeded in the fit."""
FITTINGS_SHARE = 0.2
"""Share of the head loss that fittings may make."""
FLOW_RANGE = 1.5
"""Largest over smallest flow under which the readings cannot show a wrong zero."""
LIKELY = 0.5
"""Probability of a wall alone below which something else is to be looked at first [-]."""
SET_ASIDE_SHARE = 0.5
"""Share of rows set aside from which the log itself is in question."""
CROSS_CHECK = 1.1
"""Width of the propagated band over the likelihood's from which the likelihood is too narrow."""


def cautions(
    section: Section, log: Log, screening: Screening, plateaus: Plateaus, reaches: tuple[ReachFinding, ...]
) -> tuple[Caution, ...]:
    """Run every check on a campaign and return what it has to say, most weighty first."""
    found: list[Caution] = []
    for reach in reaches:
        prefix = f"{reach.readings.upstream.column} to {reach.readings.downstream.column}: " if len(reaches) > 1 else ""
        found += [Caution(about=one.about, text=prefix + one.text) for one in _of_reach(reach, section)]
    found += _of_log(section, log, screening, plateaus)
    return tuple(found)


def _of_reach(reach: ReachFinding, section: Section) -> Iterator[Caution]:
    """Check one reach."""
    if reach.wall.state == "no estimate":
        yield Caution(about="no estimate", text=reach.wall.because)
    yield from _rivals(reach)
    yield from _statics(reach.readings, section)
    yield from _fit(reach)
    yield from _coverage(reach)
    yield from _against_new(reach, section)


def _rivals(reach: ReachFinding) -> Iterator[Caution]:
    """Check whether something other than the wall explains the readings better."""
    found = reach.explanations
    if found is None:
        return
    first = " with ".join(found.ranked[0].causes)
    if found.unexplained:
        best = f"; nearest comes {first}" if not found.ranked[0].explains else f"; together, {first} would"
        text = f"No single cause explains the readings: neither a rough wall nor any one fault weighed{best}."
    elif found.probability("rough wall") < LIKELY:
        text = (
            f"What explains these readings best is not the wall but {first} (probability "
            f"{100.0 * found.ranked[0].probability:.0f} %; a wall alone {100.0 * found.probability('rough wall'):.0f} %)."
        )
    else:
        return
    yield Caution(about="explanation", text=f"{text} See what else could explain it before using the roughness.")


def _statics(readings: ReachReadings, section: Section) -> Iterator[Caution]:
    """Check the levelling against survey and gauges, and its drift."""
    levelling = readings.levelling
    if levelling is None:
        yield Caution(
            about="static",
            text="The log has no zero-flow reading, so the gauges' zeros and the survey count in full. "
            "A few minutes with the flow stopped, before and after, would level them.",
        )
        return
    yield from disagreement_cautions(readings, section)
    yield from drift_cautions(readings)


def _fit(reach: ReachFinding) -> Iterator[Caution]:
    """Check whether one curve and the stated accuracies explain the readings."""
    wall = reach.wall
    if wall.reduced_chi_square is not None and wall.reduced_chi_square > SCATTER:
        yield Caution(
            about="fit",
            text=f"The readings scatter about the best curve more than their noise and stated errors explain (reduced χ² "
            f"{wall.reduced_chi_square:.1f}); the random part was widened to match. One roughness may not be the whole "
            "story: look at the residuals.",
        )
    for entry in wall.budget:
        if abs(entry.pull) > PULL:
            yield Caution(
                about="fit",
                text=f"To fit the readings, '{entry.error}' had to be {abs(entry.pull):.1f} times its stated standard "
                "uncertainty. Check that instrument or dimension.",
            )
    check = wall.monte_carlo
    if check is not None and wall.friction_factor.measurement is not None:
        low, high = wall.friction_factor.measurement
        width = np.log(check.friction_factor[1] / check.friction_factor[0]) / np.log(high / low)
        if check.unconverged or width > CROSS_CHECK:
            yield Caution(
                about="interval",
                text=f"Propagating the stated distributions gives a measurement band {width:.2f} times as wide as the "
                "likelihood does: take the wider one.",
            )


def _coverage(reach: ReachFinding) -> Iterator[Caution]:
    """Check whether the flows tested can show what is wrong."""
    readings, wall = reach.readings, reach.wall
    if wall.state == "no estimate" or wall.plateaus is None:
        return
    flow = readings.flow_m3_s
    if float(np.max(flow) / np.min(flow)) < FLOW_RANGE:
        count = "One flow" if len(flow) == 1 else "Flows"
        verb = "was" if len(flow) == 1 else "of nearly one size were"
        yield Caution(
            about="flows",
            text=f"{count} {verb} tested: a wrong zero, a leak or a half-shut valve would look just like roughness. "
            "Test at flows that differ by a factor of three.",
        )
    share = 1.0 - float(np.min(wall.plateaus.friction_loss_m / readings.head_loss_m))
    if share > FITTINGS_SHARE:
        yield Caution(
            about="fittings",
            text=f"Fittings make {100.0 * share:.0f} % of the head loss by their stated K: what is said of the wall "
            "stands on them. Taps on straight pipe would free it.",
        )


def _against_new(reach: ReachFinding, section: Section) -> Iterator[Caution]:
    """Check that a comparison with new pipe was possible and makes sense."""
    if section.material is None:
        yield Caution(
            about="material",
            text="The material is not known, so there is no comparison with new pipe.",
        )
    new = reach.new_pipe
    if new is not None and new.head_loss_ratio[2] < 1.0:
        yield Caution(
            about="new pipe",
            text=f"The head loss is {new.head_loss_ratio[1]:.2f} of new {new.material}'s, less than any new pipe should "
            "lose: check bore, meter and material.",
        )


def _of_log(section: Section, log: Log, screening: Screening, plateaus: Plateaus) -> Iterator[Caution]:
    """Check the log itself."""
    yield from doubt_cautions(log, screening, plateaus, section)
    rows = log.rows
    aside = rows - screening.used
    if aside > SET_ASIDE_SHARE * rows:
        reasons = ", ".join(f"{why} {count}" for why, count in screening.counts)
        yield Caution(about="log", text=f"{aside} of {rows} rows were set aside ({reasons}).")
    if log.kind == "logger" and len(plateaus.rows) and np.max(plateaus.rows) == 1:
        yield Caution(
            about="log",
            text="No stretch of the log is steady over enough rows, and the rows are few and far apart: each was taken as a "
            "reading of its own, as on a hand sheet.",
        )
    if screening.block is not None:
        yield Caution(
            about="log",
            text="The flow seldom stands still, so the log was read as ordinary service: rows in blocks of time, blocks of like "
            'flow in groups. Write mode = "plateaus" in the [screen] table to read it as a test in steps.',
        )
    if section.meter.senses == "velocity":
        yield Caution(
            about="meter",
            text="The meter senses velocity: its flow was taken to be computed with the section's as-new bore.",
        )
    if np.all(plateaus.static):
        yield Caution(about="log", text="Every steady stretch of the log is static: no flow, no friction.")
