"""What a contract asks of a new pipe: a limit, the basis it holds on, and the rule that decides."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from fieldfit.field.uncertain import Uncertain

Subject = Literal["c", "roughness", "head_loss"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Contract:
    """A stated limit, the basis it holds on, and the rule that decides."""

    subject: Subject
    """What is limited: C from below; roughness or head loss from above."""
    limit: float
    """The limit [-, m or m]."""
    flow_m3_s: float | None
    """Flow it holds at [m³/s]; None for the flow that was tested best."""
    temperature_degc: float | None
    """Temperature it holds at [°C]; None for the tested one."""
    bore_m: float | None
    """Bore that C is reckoned with by convention [m]; None for the true bore."""
    fittings: bool
    """Whether the fittings' losses count."""
    rule: str
    """Decision rule, simple acceptance, guarded acceptance or guarded rejection."""
    risk: float | None
    """Agreed risk [-]; None under simple acceptance."""
    built: Uncertain | None
    """What is usually built, on the limit's own scale; None for the new-pipe table's word."""
