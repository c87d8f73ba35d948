"""What a gradient survey found, as data."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.field.survey_readings import SurveyReadings
from fieldfit.inference.grade import GradeLine
from fieldfit.inference.survey_explanations import Cause
from fieldfit.inference.survey_wall import SurveyWall
from fieldfit.inference.wall import Band, Span


@dataclass(frozen=True, slots=True, kw_only=True)
class SurveyReach:
    """What a survey says of one reach."""

    upper: str
    """Column of the tap at its upper end."""
    lower: str
    """Column of the tap at its lower end."""
    wall: SurveyWall | None
    """Its wall when every reach is left its own; None where a dead tap hides the reach in its neighbour."""
    explained: SurveyWall
    """Its wall by the likeliest explanation of the whole survey."""
    rival: SurveyWall | None
    """Its wall by an explanation that cannot be told from that one, where it says another thing of this reach."""
    smallest_k: float | None
    """Smallest local loss here that would have been seen 19 times in 20 [-]; None where none could have been."""
    smallest_m: float | None
    """The same as head at the largest flow [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Likely:
    """One explanation of the whole survey."""

    cause: Cause
    """What it is."""
    reaches: tuple[int, ...]
    """Reaches it is in, from 0; all for a wall."""
    probability: float
    """Its probability among all explanations tried [-]."""
    local_k: tuple[Band, ...] = ()
    """Loss coefficient of each local loss [-]; both bands alike, as no correlation is in it."""
    head_m: tuple[float, ...] = ()
    """Head each takes at the largest flow [m]."""
    wall: SurveyWall | None = None
    """Wall of a bad reach."""
    friction_ratio: float | None = None
    """Friction factor of a bad reach over that of the rest [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SameWall:
    """Test whether one roughness serves all reaches of one material."""

    chi_square: float
    """Misfit that one wall adds to that of free walls [-]."""
    degrees_of_freedom: int
    """Walls saved."""
    probability: float
    """Probability of so large a misfit if the walls were alike [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Suspect:
    """A tap that the others contradict."""

    column: str
    """Its column."""
    offset_m: float
    """How much too high it reads, all else as stated [m]."""
    share: float
    """Share of the misfit that this would take away [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SideFlow:
    """A side flow that was inferred."""

    name: str
    """As the user calls it."""
    flow_m3_s: float
    """Best value [m³/s]."""
    interval_m3_s: Span
    """95 % interval, if one wall serves all reaches [m³/s]."""
    free_interval_m3_s: Span
    """95 % interval when every reach may have its own wall [m³/s]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """What a gradient survey found; R reaches."""

    readings: SurveyReadings
    """What was fitted."""
    reaches: tuple[SurveyReach, ...]
    """Each reach."""
    pooled: tuple[SurveyWall, ...]
    """The wall common to all reaches of each material, in the order of flow."""
    same_wall: SameWall | None
    """Test of one roughness; None where no two reaches can be compared."""
    likely: tuple[Likely, ...]
    """Explanations of some probability, likeliest first."""
    alike: tuple[int, ...]
    """Which of them cannot be told from the first, by index; empty when it stands alone."""
    apart: float | None
    """Standard uncertainties by which a tap halfway would part the first two; None where it would not help."""
    side_flow: SideFlow | None
    """The side flow that was inferred."""
    reduced_chi_square: float | None
    """Reduced χ² with free walls, or the factor the noise's variance was widened by [-]."""
    pulls: tuple[tuple[str, float], ...]
    """Fitted shared errors over their stated standard uncertainties, largest first."""
    suspect: Suspect | None
    """A tap whose gauge or height would account for most of a disagreement; None where there is none to account for."""
    grade: GradeLine
    """The hydraulic grade line at the largest flow."""
