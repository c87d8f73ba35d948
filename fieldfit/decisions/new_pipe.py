"""The pipe against new pipe of its material."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class NewPipeComparison:
    """Head loss against that of new pipe of the same bore at the same flow."""

    material: str
    """Material in the new-pipe table."""
    roughness_m: tuple[float, float, float]
    """New roughness: low, typical, high [m]."""
    hazen_williams_c: tuple[float, float, float]
    """C that new pipe would have at the tested flow, bore and temperature: low, typical, high [-]."""
    source: str
    """Where the new-pipe values come from."""
    head_loss_ratio: tuple[float, float, float]
    """Head loss over that of new pipe: 95 % low, best, 95 % high, correlation and spread of new pipe included [-]."""
    probability_worse: float
    """Probability that the head loss exceeds new pipe's by more than the correlation's limit [-]."""
    limit: float
    """That limit as a ratio, such as 1.10 [-]."""
