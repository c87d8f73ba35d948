"""Campaigns of one reach in order of time, checked, with the stages that cleaning and lining divide them into."""

from __future__ import annotations

import datetime as dt
import itertools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from fieldfit.decisions.growth_prior import YEAR_DAYS
from fieldfit.errors import InputError
from fieldfit.field.outlook import Changes
from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Campaign
from fieldfit.inference.campaign_errors import Test
from fieldfit.inference.wall import Wall

Event = Literal["laid", "first test", "cleaned", "lined", "unmarked"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Visit:
    """One campaign at one reach."""

    date: dt.date
    """Day of the test."""
    file: str
    """Its log."""
    readings: ReachReadings
    """What the fit used."""
    wall: Wall
    """What its own fit says."""
    campaign: Campaign | None
    """What the section file says of that day."""

    @property
    def changes(self) -> Changes:
        """What changed since the campaign before."""
        return self.campaign.changes if self.campaign else Changes()

    @property
    def event(self) -> Event | None:
        """Whether the wall was made new before it."""
        if self.changes.relined:
            return "lined"
        return "cleaned" if self.campaign and self.campaign.cleaned else None

    @property
    def naive_standard(self) -> float:
        """Standard uncertainty of ln f by its own fit [-]."""
        band = self.wall.friction_factor.measurement
        return float("nan") if band is None else float(np.log(band[1] / band[0])) / (2.0 * 1.959963984540054)


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """A time over which the wall grew without being made new."""

    start: dt.date
    """When it began."""
    event: Event
    """What began it."""
    first: int
    """Number of its first campaign, from 0."""
    material: str | None
    """Material of the wall, as the new-pipe table calls it."""


def events_between(before: Visit | None, visit: Visit) -> tuple[str, ...]:
    """Return what happened between two campaigns, in words.

    Parameters
    ----------
    before : Visit or None
        The campaign before; None for the first.
    visit : Visit
        The later one.

    Returns
    -------
    tuple of str
        Nothing for what stayed the same.
    """
    changes, told = visit.changes, []
    if visit.event == "lined":
        told.append(f"lined with {changes.lining}" if changes.lining else "lined")
    elif visit.event == "cleaned":
        told.append(f"cleaned on {changes.cleaned_on.isoformat()}" if changes.cleaned_on else "cleaned")
    if before is not None:
        old, new = before.readings, visit.readings
        if new.meter.serial != old.meter.serial:
            told.append(f"meter {new.meter.serial or 'unknown'}")
        for was, tap in ((old.upstream, new.upstream), (old.downstream, new.downstream)):
            if tap.gauge != was.gauge:
                told.append(f"gauge {tap.gauge or 'unknown'} at {tap.column}")
    if changes.recalibrated:
        told.append("calibrated anew: " + ", ".join(changes.recalibrated))
    return tuple([*told, *(text for text in (changes.valve, changes.note) if text)])


def check_dates(dates: Sequence[tuple[dt.date | None, str, bool]], installed: dt.date | None, where: str) -> None:
    """Refuse campaigns that cannot be put in order of time.

    Parameters
    ----------
    dates : sequence of (date, log, made new)
        One per campaign; whether it was cleaned or lined before.
    installed : date or None
        Day of laying.
    where : str
        Section file, for the error.

    Raises
    ------
    InputError
        When a date is missing, two are equal with nothing done between, or one is before the pipe was laid.
    """
    for date, log, _ in dates:
        if date is None:
            advice = f'Write date = 2026-05-12 in its [[campaign]] table: log = "{log}".'
            raise InputError(f"the campaign with the log '{log}' has no date", advice, where)
        if installed is not None and date < installed:
            seen = f"the campaign of {date} ('{log}') is older than the pipe, installed {installed}"
            raise InputError(seen, "Check both dates: year, month, day.", where)
    ordered = sorted(dates, key=lambda entry: entry[0] or dt.date.min)
    for before, after in itertools.pairwise(ordered):
        if before[0] == after[0] and not after[2]:
            seen = f"two campaigns are of {after[0]}: '{before[1]}' and '{after[1]}'"
            advice = "Correct a date; if the pipe was cleaned between them, write cleaned = true in the second one."
            raise InputError(seen, advice, where)


def tests_of(visits: Sequence[Visit]) -> tuple[Test, ...]:
    """Return the campaigns as the joint fit wants them, with what was replaced or calibrated anew counted."""
    found: list[Test] = []
    calibrations: dict[str, int] = {}
    linings = valves = 0
    for visit in visits:
        changes, wall = visit.changes, visit.wall
        for serial in changes.recalibrated:
            calibrations[serial] = calibrations.get(serial, 0) + 1
        linings += changes.relined
        valves += changes.valve is not None
        assert wall.plateaus is not None  # the caller left the others out
        assert wall.friction_factor.best is not None
        found.append(
            Test(
                date=visit.date,
                readings=visit.readings,
                random_m=wall.plateaus.friction_factor_random * np.abs(wall.plateaus.friction_loss_m),
                ln_friction=float(np.log(wall.friction_factor.best)),
                reynolds=wall.reynolds,
                calibrations=tuple(calibrations.items()),
                linings=linings,
                valves=valves,
                own_length=changes.length is not None,
            )
        )
    return tuple(found)


def stages_of(
    visits: Sequence[Visit], installed: dt.date | None, material: str | None, unmarked: Sequence[int]
) -> tuple[Stage, ...]:
    """Return the stages of a pipe's life.

    Parameters
    ----------
    visits : sequence of Visit
        Campaigns by date.
    installed : date or None
        Day of laying; without it the first stage begins with the first test.
    material : str or None
        Material of the pipe as laid.
    unmarked : sequence of int
        Campaigns before which the pipe became better and nobody said why.

    Returns
    -------
    tuple of Stage
    """
    begun = Stage(
        start=installed or visits[0].date, event="laid" if installed else "first test", first=0, material=material
    )
    stages = [begun]
    for number, visit in enumerate(visits):
        event = visit.event or ("unmarked" if number in unmarked else None)
        if event is None:
            continue
        lined = visit.changes.lining or material if event == "lined" else stages[-1].material
        stage = Stage(start=visit.changes.cleaned_on or visit.date, event=event, first=number, material=lined)
        # A first campaign after a cleaning says nothing of the wall before it.
        stages = [stage] if number == 0 else [*stages, stage]
    return tuple(stages)


def years_between(start: dt.date, end: dt.date) -> float:
    """Return the time from one day to another [years].

    Examples
    --------
    >>> round(years_between(dt.date(2000, 1, 1), dt.date(2010, 7, 1)), 1)
    10.5
    """
    return (end - start).days / YEAR_DAYS
