"""Everything one assessment found: what every report is printed from."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

from fieldfit.decisions.new_pipe import NewPipeComparison
from fieldfit.decisions.stress_test import Stress
from fieldfit.field.log import Log
from fieldfit.field.readings import Plateaus, ReachReadings, Screening
from fieldfit.field.section import Campaign, Section
from fieldfit.inference.explanations import Explanations
from fieldfit.inference.wall import Wall


class ScreenedLog(Protocol):
    """A log whose rows have been judged, with or without a fit to follow."""

    @property
    def log(self) -> Log:
        """The log."""

    @property
    def screening(self) -> Screening:
        """What became of its rows."""

    @property
    def plateaus(self) -> Plateaus:
        """Its steady windows."""


if TYPE_CHECKING:
    from fieldfit.decisions.ageing import Ageing
    from fieldfit.decisions.deposit import DepositFinding
    from fieldfit.inference.survey_finding import Survey


@dataclass(frozen=True, slots=True, kw_only=True)
class Caution:
    """Something the reader must know beside the answer."""

    about: str
    """One word: static, bore, elevation, clock, fit, …"""
    text: str
    """The sentence."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachFinding:
    """What was found between two taps."""

    readings: ReachReadings
    """What the fit used."""
    wall: Wall
    """What the fit says."""
    new_pipe: NewPipeComparison | None
    """Against new pipe; None when the material is unknown or there is no estimate."""
    explanations: Explanations | None = None
    """What else could explain the readings; None without a turbulent reading."""
    stress: tuple[Stress, ...] = ()
    """How wrong each input would have to be to change the finding; empty without an estimate."""
    deposit: DepositFinding | None = None
    """The loss read as roughness, as bore, and as every mixture of the two; None when nothing was fitted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CampaignFinding:
    """What one log says."""

    date: dt.date | None
    """Day of the test."""
    log: Log
    """The log."""
    screening: Screening
    """What became of its rows."""
    plateaus: Plateaus
    """Its steady windows."""
    reaches: tuple[ReachFinding, ...]
    """One per pair of neighbouring taps."""
    cautions: tuple[Caution, ...]
    """What to know beside the answer."""
    campaign: Campaign | None = None
    """What the section file says of that day; None for a log that it does not name."""
    survey: Survey | None = None
    """What all taps together say; None with two taps, or when no plateau can be used."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """The whole answer on one section."""

    section: Section
    """What was known beforehand."""
    campaigns: tuple[CampaignFinding, ...]
    """One per log."""
    ageing: tuple[Ageing, ...] = ()
    """How each reach ages; empty with one campaign, unless it was asked for."""
    no_ageing: str = ""
    """Why several campaigns give no ageing."""

    @property
    def answered(self) -> bool:
        """Whether every reach of every campaign reached an estimate."""
        return all(reach.wall.state != "no estimate" for campaign in self.campaigns for reach in campaign.reaches)

    def _repr_html_(self) -> str:
        """Show the page in a notebook."""
        from fieldfit.report.page import page_in_notebook

        return page_in_notebook(self)
