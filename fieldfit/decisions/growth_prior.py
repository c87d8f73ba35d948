"""What is believed of roughness and its growth before any campaign: published rates, each as a wide prior."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fieldfit.field.outlook import Outlook
from fieldfit.hydraulics.materials import material

YEAR_DAYS = 365.25
EIGHTFOLD = math.log(8.0) / (2.0 * 1.959963984540054)
"""Standard deviation of ln rate when 95 % of it span a factor of eight, as published rates for one water do [-]."""
CORRODING = (
    "carbon steel",
    "galvanized steel",
    "uncoated cast iron",
    "asphalt-dipped cast iron",
    "wrought iron",
    "riveted steel",
)
"""Materials whose walls the published rates are about."""
LAMONT = (
    ("slight", 0.0, 0.025e-3),
    ("moderate", -1.3, 0.076e-3),
    ("appreciable", -2.6, 0.25e-3),
    ("severe", -3.9, 0.76e-3),
)
"""Lamont's trends: attack, Langelier index, growth of roughness [m/year]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Belief:
    """A positive quantity known by its order of magnitude."""

    median: float
    """Median [SI]."""
    ln_standard: float
    """Standard deviation of its logarithm [-]."""
    source: str
    """Where it comes from, in words."""

    @property
    def span(self) -> tuple[float, float]:
        """Range of 95 % [SI]."""
        reach = math.exp(1.959963984540054 * self.ln_standard)
        return self.median / reach, self.median * reach


def lamont_rate(langelier: float) -> float:
    """Return the growth of roughness that a Langelier index goes with, by Lamont's trends [m/year].

    Between the four published trends ln rate goes in straight lines with the index, and so on beyond the severest; a
    water that does not attack (index above 0) is given the slightest.

    Parameters
    ----------
    langelier : float
        Langelier index [-].

    Returns
    -------
    float
        Rate [m/year].

    References
    ----------
    Lamont, P. A. (1981), Common pipe flow formulas compared with the theory of roughness, J. AWWA 73(5), 274-280,
    doi:10.1002/j.1551-8833.1981.tb04704.x.

    Examples
    --------
    >>> [round(1e3 * lamont_rate(index), 3) for index in (0.5, 0.0, -1.3, -2.6, -3.9)]
    [0.025, 0.025, 0.076, 0.25, 0.76]
    """
    attack = -np.array([index for _, index, _ in LAMONT])
    ln_rate = np.log([rate for _, _, rate in LAMONT])
    beyond = max(-langelier - float(attack[-1]), 0.0)
    last_slope = float((ln_rate[-1] - ln_rate[-2]) / (attack[-1] - attack[-2]))
    return float(np.exp(np.interp(-langelier, attack, ln_rate) + last_slope * beyond))


def colebrook_white_rate(ph: float) -> float:
    """Return the growth of roughness that a pH goes with, by Colebrook and White's relation [m/year].

    2 log10 α = 3.8 − pH with α in inches a year.

    Parameters
    ----------
    ph : float
        pH of the water [-].

    Returns
    -------
    float
        Rate [m/year].

    References
    ----------
    Colebrook, C. F. and White, C. M. (1937), The reduction of carrying capacity of pipes with age, J. Inst. Civ. Eng.
    7(1), 99-118, doi:10.1680/ijoti.1937.14682.

    Examples
    --------
    >>> [float(f"{1e3 * colebrook_white_rate(ph):.2g}") for ph in (6.0, 7.0, 8.0, 9.0)]
    [2.0, 0.64, 0.2, 0.064]
    """
    return float(10.0 ** ((3.8 - ph) / 2.0) * 0.0254)


def sharp_walski_c(roughness_m: float, bore_m: float, smooth_c: float) -> float:
    """Return the C that a roughness amounts to by Sharp and Walski's relation, capped at the smooth pipe's.

    C = 18.0 − 37.2 log10(ε/D) exceeds any pipe's C below ε/D of about 2e-4. Their own data scatter by ±15 about it;
    fieldfit computes C from the hydraulics and offers this for comparison with reports written with it.

    Parameters
    ----------
    roughness_m : float
        Equivalent roughness [m], 0 or more.
    bore_m : float
        Bore [m].
    smooth_c : float
        C of a smooth pipe at the flow in question [-].

    Returns
    -------
    float
        C [-].

    References
    ----------
    Sharp, W. W. and Walski, T. M. (1988), Predicting internal roughness in water mains, J. AWWA 80(11), 34-40,
    doi:10.1002/j.1551-8833.1988.tb03132.x.

    Examples
    --------
    >>> [round(sharp_walski_c(ratio, 1.0, 150.0), 1) for ratio in (1e-3, 1e-2, 5e-2, 1e-5)]
    [129.6, 92.4, 66.4, 150.0]
    """
    if roughness_m <= 0.0:
        return smooth_c
    return min(18.0 - 37.2 * math.log10(roughness_m / bore_m), smooth_c)


def published_rate(outlook: Outlook, name: str | None) -> Belief:
    """Return the growth rate to believe in when the campaigns cannot tell one.

    The user's own rate comes first, then Lamont's trends by the Langelier index, then Colebrook and White's relation by
    the pH; without any, the whole range of Lamont's trends for a metal wall, and hardly any growth for others.

    Parameters
    ----------
    outlook : Outlook
        Water and growth, as the section file has them.
    name : str or None
        Material, as the new-pipe table calls it.

    Returns
    -------
    Belief
    """
    own = outlook.rate_m_year
    if own is not None:
        # A stated ± share of a positive rate, carried to its logarithm.
        spread = float(np.sqrt(np.log1p(own.relative**2)))
        return Belief(median=own.value, ln_standard=max(spread, 1e-3), source="your own rate")
    if outlook.langelier is not None:
        return Belief(
            median=lamont_rate(outlook.langelier),
            ln_standard=EIGHTFOLD,
            source=f"Lamont's trends (1981) at a Langelier index of {outlook.langelier:g}".replace("-", "−"),
        )
    if outlook.ph is not None:
        return Belief(
            median=colebrook_white_rate(outlook.ph),
            ln_standard=EIGHTFOLD,
            source=f"Colebrook and White's relation (1937) at pH {outlook.ph:g}",
        )
    if name is None or name in CORRODING:
        low, high = LAMONT[0][2], LAMONT[-1][2]
        spread = math.log(high / low) / (2.0 * 1.645)
        return Belief(
            median=math.sqrt(low * high),
            ln_standard=spread,
            source="Lamont's trends (1981) from slight to severe attack, for nothing is said of the water",
        )
    return Belief(
        median=0.003e-3, ln_standard=1.6, source=f"a guess: there is no published growth rate for {name} walls"
    )


def open_rate(name: str | None) -> Belief:
    """Return a rate wide enough for the campaigns to decide."""
    if name is None or name in CORRODING:
        return Belief(median=0.08e-3, ln_standard=1.8, source="the campaigns themselves")
    return Belief(median=0.02e-3, ln_standard=2.2, source="the campaigns themselves")


def as_new(name: str | None, tested_new: bool) -> Belief:
    """Return the roughness a pipe starts with: its material's when new, only as a guide when it was tested as new.

    Parameters
    ----------
    name : str or None
        Material, as the new-pipe table calls it.
    tested_new : bool
        Whether a campaign within the first months says more than the table.

    Returns
    -------
    Belief
    """
    if name is None:
        return Belief(median=0.1e-3, ln_standard=1.5, source="a wide guess, for the material is not known")
    new = material(name)
    low, typical, high = new.roughness_m
    spread = max(math.log(high / low) / (2.0 * 1.959963984540054), 0.3)
    if tested_new:
        return Belief(median=typical, ln_standard=max(2.0 * spread, 1.2), source="the test of the pipe as new")
    return Belief(median=typical, ln_standard=spread, source=f"new {new.name}: {new.source}")
