"""The pipe against new pipe of its material."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fieldfit.field.section import Correlation
from fieldfit.hydraulics.friction import colebrook_white
from fieldfit.hydraulics.hazen_williams import c_from_friction_factor
from fieldfit.hydraulics.materials import material
from fieldfit.inference.fit import NORMAL_95
from fieldfit.inference.wall import Wall


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


def compare_with_new(wall: Wall, name: str, bore_m: float, limit: Correlation) -> NewPipeComparison | None:
    """Compare what was measured with what new pipe would lose here.

    The ratio's band holds the measurement, the spread of new pipe of this material and the correlation's limit
    (one that gives new pipe's loss from its roughness). The probability counts only losses that exceed new pipe's
    by more than that limit, and so holds the correlation as the threshold instead of as a spread.

    Parameters
    ----------
    wall : Wall
        What was found.
    name : str
        Material, as the new-pipe table calls it.
    bore_m : float
        As-new bore [m].
    limit : Correlation
        How far friction correlations can be trusted.

    Returns
    -------
    NewPipeComparison or None
        None when no friction factor was measured.
    """
    from scipy.special import ndtr

    measured = wall.friction_factor
    if measured.best is None or measured.measurement is None or wall.roughness_m.with_correlation is None:
        return None
    new = material(name)
    low, typical, high = (float(colebrook_white(wall.reynolds, roughness / bore_m)) for roughness in new.roughness_m)
    spread = float(np.log(high / low)) / (2.0 * NORMAL_95)
    own = float(np.log(measured.measurement[1] / measured.measurement[0])) / (2.0 * NORMAL_95)
    ratio = measured.best / typical
    half_width = NORMAL_95 * float(np.sqrt(own**2 + spread**2 + limit.standard**2))
    threshold = float(np.exp(NORMAL_95 * limit.standard))
    clear = float(np.hypot(own, spread))
    above = float(np.log(ratio / threshold))
    return NewPipeComparison(
        material=new.name,
        roughness_m=new.roughness_m,
        hazen_williams_c=(
            float(c_from_friction_factor(high, wall.flow_m3_s, bore_m)),
            float(c_from_friction_factor(typical, wall.flow_m3_s, bore_m)),
            float(c_from_friction_factor(low, wall.flow_m3_s, bore_m)),
        ),
        source=new.source,
        head_loss_ratio=(ratio * float(np.exp(-half_width)), ratio, ratio * float(np.exp(half_width))),
        probability_worse=float(ndtr(above / clear)) if clear > 0.0 else float(above > 0.0),
        limit=threshold,
    )
