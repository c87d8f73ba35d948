"""Everything that screening found: what its page, summary and record are printed from."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from fieldfit.field.log import Log
from fieldfit.field.quantisation import ChannelSteps
from fieldfit.field.reaches import ReachHeads
from fieldfit.field.readings import Plateaus, Screening
from fieldfit.field.section import Section, Tap


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One question to a log, and its answer."""

    what: str
    """What was looked at."""
    value: float | None
    """What was found; None where there is nothing to look at."""
    limit: float
    """What it is held against."""
    unit: str
    """Unit of both, "-" for none."""
    passed: bool
    """Whether it is good."""
    because: str
    """The answer, as a sentence."""
    do: str
    """What to do about it, as a sentence; empty when passed."""
    needed: bool
    """Whether an assessment makes no sense without it; else it only weakens one."""
    at_most: bool = False
    """Whether the value should be at most the limit; else at least."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachScreen:
    """What screening found between two taps."""

    upstream: Tap
    """Tap at the upper end."""
    downstream: Tap
    """Tap at the lower end."""
    heads: ReachHeads
    """Head loss of every plateau."""
    checks: tuple[Check, ...]
    """Checks of this reach."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CampaignScreen:
    """What screening found in one log."""

    date: dt.date | None
    """Day of the test."""
    log: Log
    """The log."""
    screening: Screening
    """What became of its rows."""
    plateaus: Plateaus
    """Its steady windows, or its groups of like flow."""
    steps: tuple[ChannelSteps, ...]
    """How finely each column was written."""
    reaches: tuple[ReachScreen, ...]
    """One per pair of neighbouring taps."""
    checks: tuple[Check, ...]
    """Checks of the log as a whole."""

    @property
    def all_checks(self) -> tuple[Check, ...]:
        """Every check, reach by reach, then those of the log."""
        return (*(check for reach in self.reaches for check in reach.checks), *self.checks)

    @property
    def good(self) -> bool:
        """Whether the log is good enough to assess."""
        return all(check.passed for check in self.all_checks if check.needed)


@dataclass(frozen=True, slots=True, kw_only=True)
class ScreenFinding:
    """Everything that screening found of one section's logs."""

    section: Section
    """What was known beforehand."""
    campaigns: tuple[CampaignScreen, ...]
    """One per log."""

    @property
    def good(self) -> bool:
        """Whether every log is good enough to assess."""
        return all(campaign.good for campaign in self.campaigns)

    def _repr_html_(self) -> str:
        """Show the page in a notebook."""
        from fieldfit.report.page import in_a_frame
        from fieldfit.report.screening.page import screen_page

        return in_a_frame(screen_page(self))
