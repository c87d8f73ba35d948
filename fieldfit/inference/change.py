"""What has changed between two campaigns, by the joint fit and by plain subtraction."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.hydraulics.friction import relative_roughness
from fieldfit.inference.campaigns import JointFit
from fieldfit.inference.fit import NORMAL_95

Array = NDArray[np.float64]
Triple = tuple[float, float, float]

ONE_SIDED_95 = 1.6448536269514722
POWER_90 = 1.2815515655446004
"""A change of 1.64 + 1.28 standard uncertainties is called, one-sided at 95 %, nine times in ten."""
C_BY_FRICTION = -0.54
"""d ln C / d ln f at one flow, by the exponents of Hazen–Williams."""
C_BY_BORE = 5.0 * 0.54 - 2.63
"""d ln C / d ln bore at one flow and one friction factor [-]."""
DRAWS = 20_000
SEED = 19370501
AT_SMOOTH = 0.025
"""Share of draws without roughness from which no ratio of roughness is given."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """From one campaign to a later one; triples are 95 % low, best, 95 % high."""

    earlier: int
    """Number of the earlier campaign, from 0."""
    later: int
    """Number of the later one."""
    since: dt.date
    """Day of the earlier one."""
    until: dt.date
    """Day of the later one."""
    head_loss_ratio: Triple
    """Head loss over the earlier one at equal flow and temperature [-]."""
    c_ratio: Triple
    """C over the earlier one at equal flow and temperature [-]."""
    roughness_ratio: Triple | None
    """Roughness over the earlier one [-]; None when one of them may be smooth."""
    roughness_change_m: Triple
    """Roughness less the earlier one [m]."""
    standard: float
    """Standard uncertainty of ln(head loss ratio) by the joint fit [-]."""
    naive_standard: float
    """The same from the two single fits, subtracted as if nothing were shared [-]."""
    probability_worse: float
    """Probability that the head loss has risen at all [-]."""
    probability_worse_by: float
    """Probability that it has risen by more than `worse_by` [-]."""
    worse_by: float
    """That amount [-]."""
    smallest: float
    """Rise of head loss that these tests would have called, with 95 % confidence, nine times in ten [-]."""

    @property
    def years(self) -> float:
        """Time between them [years]."""
        return (self.until - self.since).days / 365.25


def change(fit: JointFit, pair: tuple[int, int], naive: tuple[float, float], worse_by: float) -> Change:
    """Compare two campaigns at equal flow and temperature.

    Parameters
    ----------
    fit : JointFit
        All campaigns.
    pair : (int, int)
        Numbers of the earlier and the later one.
    naive : (float, float)
        Standard uncertainty of ln f of each by its own fit [-].
    worse_by : float
        Rise of head loss whose probability is wanted [-].

    Returns
    -------
    Change

    References
    ----------
    Changes by a shared error cancel: JCGM 100:2008 (GUM), 5.2 and F.1.2.
    """
    from scipy.special import ndtr

    first, last = pair
    contrast = fit.loss_slopes()[last] - fit.loss_slopes()[first]
    standard = float(np.sqrt(contrast @ fit.covariance @ contrast))
    bores = [fit.tests[index].readings.bore.value for index in pair]
    by_wall = float(fit.ln_friction[last] - fit.ln_friction[first])
    rise = by_wall - 5.0 * float(np.log(bores[1] / bores[0]))
    walls = np.zeros(len(fit.tests))
    walls[[first, last]] = -1.0, 1.0
    of_c = abs(C_BY_FRICTION) * float(np.sqrt(walls @ fit.walls @ walls))
    # C belongs to its own bore, so a lining that narrows the pipe hardly moves it while the head loss rises.
    ln_c = C_BY_FRICTION * by_wall + C_BY_BORE * float(np.log(bores[1] / bores[0]))
    ratio, difference = _roughness(fit, pair)
    return Change(
        earlier=first,
        later=last,
        since=fit.tests[first].date,
        until=fit.tests[last].date,
        head_loss_ratio=_exp(rise, standard),
        c_ratio=_exp(ln_c, of_c),
        roughness_ratio=ratio,
        roughness_change_m=difference,
        standard=standard,
        naive_standard=float(np.hypot(*naive)),
        probability_worse=float(ndtr(rise / standard)),
        probability_worse_by=float(ndtr((rise - np.log1p(worse_by)) / standard)),
        worse_by=worse_by,
        smallest=float(np.expm1((ONE_SIDED_95 + POWER_90) * standard)),
    )


def _roughness(fit: JointFit, pair: tuple[int, int]) -> tuple[Triple | None, Triple]:
    """Return ratio and difference of the two roughnesses, by drawing both walls together."""
    rows = np.array(pair)
    rng = np.random.default_rng(SEED)
    drawn = rng.multivariate_normal(fit.ln_friction[rows], fit.walls[np.ix_(rows, rows)], DRAWS, method="cholesky")
    drawn = np.vstack([fit.ln_friction[rows], drawn])
    found = np.array(
        [
            np.maximum(relative_roughness(np.exp(walls), fit.references[index].reynolds), 0.0)
            * fit.tests[index].readings.bore.value
            for walls, index in zip(drawn.T, pair, strict=True)
        ]
    )
    difference = found[1] - found[0]
    if np.any(np.mean(found <= 0.0, axis=1) > AT_SMOOTH):
        return None, _triple(difference)
    return _triple(found[1] / np.maximum(found[0], 1e-12)), _triple(difference)


def _triple(values: Array) -> Triple:
    """Return low, best and high; the first value is the best."""
    low, high = np.quantile(values[1:], (0.025, 0.975))
    return float(low), float(values[0]), float(high)


def _exp(value: float, standard: float) -> Triple:
    """Return a lognormal value with its 95 % ends."""
    low, best, high = np.exp(value + NORMAL_95 * standard * np.array([-1.0, 0.0, 1.0]))
    return float(low), float(best), float(high)
