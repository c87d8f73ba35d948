"""A plan for a test: the recommended layout, what it would tell, and the limits it keeps to."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.decisions.expected import Expected, Layout
from fieldfit.field.section import Section
from fieldfit.field.wishes import Wishes


@dataclass(frozen=True, slots=True, kw_only=True)
class Wall:
    """A state the wall may be in."""

    name: str
    """In words."""
    roughness_m: float
    """Its roughness [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Option:
    """One choice of one thing, all else as recommended."""

    of: str
    """What is varied."""
    value: str
    """The choice, in words."""
    chosen: bool
    """Whether it is the recommended one."""
    expected: tuple[Expected, ...]
    """What it would tell of each wall."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """A limit of the real world."""

    what: str
    """What is checked."""
    value: str
    """What the plan comes to, with its unit."""
    limit: str
    """The limit, with its unit."""
    passed: bool
    """Whether the plan keeps to it."""
    because: str
    """Why it matters, or what to do."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Gain:
    """What one change to the recommended plan would do to u(ln C) of the middle wall."""

    what: str
    """The change."""
    ln_c: float
    """Standard uncertainty of ln C with it [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """The recommended test and what it is worth."""

    section: Section
    """The test section."""
    wishes: Wishes
    """What was wanted and what there is."""
    layout: Layout
    """The recommended layout."""
    walls: tuple[Wall, ...]
    """States of the wall it was reckoned for."""
    expected: tuple[Expected, ...]
    """What it would tell of each."""
    reached: bool
    """Whether it gives what is wanted for every wall."""
    options: tuple[Option, ...]
    """Other choices, one thing at a time."""
    budget: tuple[tuple[str, float], ...]
    """Errors and their share in the variance of ln C for the middle wall, largest first [-]."""
    floor_ln_c: float
    """u(ln C) that no better gauge can beat: bore, meter and length alone [-]."""
    gains: tuple[Gain, ...]
    """What a static levelling, a differential transmitter and better dimensions are worth."""
    smallest_loss_m: float
    """Smallest local loss at the largest flow that the test would see [m]."""
    smallest_k: float
    """The same as K [-]."""
    smallest_change: float
    """Smallest relative change of head loss that a second test with the same instruments would see [-]."""
    flows_m3_s: tuple[float, ...]
    """Flows to hold, in their order [m³/s]."""
    duration_s: float
    """Time of the whole test [s]."""
    volume_m3: float
    """Water discharged [m³]."""
    checks: tuple[Check, ...]
    """Limits of the real world."""
