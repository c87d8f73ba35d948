"""What else could explain the readings: rival causes ranked, those that cannot be told apart, and what to do about it."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.readings import ReachReadings
from fieldfit.field.section import Correlation
from fieldfit.inference.beliefs import NOTHING
from fieldfit.inference.causes import Hypothesis, hypotheses, together
from fieldfit.inference.conditions import Conditions, conditions_of, noise_of, pooled
from fieldfit.inference.fault_model import WALL
from fieldfit.inference.telling_apart import Action, actions, alike, named
from fieldfit.inference.weighing import Fitted, Size, Weighed, weigh

Array = NDArray[np.float64]

WITHIN = 20.0
"""Ratio of marginal likelihoods up to which the readings do not decide between two causes [-]."""
BESIDE_NEW = 5.0
"""Ratio of probabilities up to which a fault is a rival of the wall as new alone [-]: smaller ones could not be seen."""
LEAST = 0.01
"""Probability below which a cause is no rival, whatever the readings leave open [-]."""
RANKED = 0.01
"""Probability below which a pair of causes is not listed [-]."""
PULLED = 2.0
"""Standard deviations of a stated error that count as a strain [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanation:
    """One cause, or two together, and how it stands; K readings."""

    causes: tuple[str, ...]
    """One or two names; "nothing unusual" is the wall as new and nothing else."""
    probability: float
    """Probability after the readings, among all that were weighed [-]."""
    sizes: tuple[Size, ...]
    """How large it would be [SI]."""
    option: str
    """Which of several discrete faults, in words; empty without."""
    meter_upstream: bool | None
    """Whether the meter would sit upstream of the leak; None without one."""
    explains: bool
    """Whether its curve passes through the readings within noise and stated errors."""
    reduced_chi_square: float
    """Its misfit, readings and stated errors together, over the degrees of freedom [-]."""
    worst: tuple[float, float]
    """Flow [m³/s] and size [random standard errors] of the largest misfit."""
    strain: tuple[str, float] | None
    """The stated error it strains most, and by how many of its standard deviations, when beyond two; else None."""
    fitted: Fitted
    """Its curve."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanations:
    """All that may explain the readings of one reach."""

    ranked: tuple[Explanation, ...]
    """Most probable first."""
    alike: tuple[str, ...]
    """Names of those that cannot be told from the first, the first included; empty when it stands alone."""
    actions: tuple[Action, ...]
    """What would part the first from the others, most telling first."""
    unexplained: bool
    """Whether no single cause passes through the readings."""
    noise_scale: float
    """Factor by which the readings' noise was widened until the best explanation is content [-]."""
    readings: ReachReadings
    """The readings compared, pooled where there were many."""
    conditions: Conditions
    """Their conditions."""

    @property
    def nothing_unusual(self) -> bool:
        """Whether a new wall alone is the most probable."""
        return self.ranked[0].causes == (NOTHING,)

    def probability(self, cause: str) -> float:
        """Return the probability of a cause alone; a new wall counts as a rough wall too."""
        names = (cause, NOTHING) if cause == "rough wall" else (cause,)
        return sum(one.probability for one in self.ranked if len(one.causes) == 1 and one.causes[0] in names)


def explain(readings: ReachReadings, limit: Correlation, new_m: tuple[float, float] | None) -> Explanations | None:
    """Weigh everything that may explain the readings of one reach.

    Every cause is a forward model on the same readings, with the same shared errors and the friction correlation's
    own error in it, and priors of its own; they are compared by marginal likelihood. Where no single cause passes
    through the readings, two at once are tried.

    Parameters
    ----------
    readings : ReachReadings
        All turbulent readings of the reach, those of negative or unresolved head loss too.
    limit : Correlation
        How far friction correlations can be trusted.
    new_m : (float, float) or None
        Roughness of new pipe, low and high [m]; None when the material is unknown.

    Returns
    -------
    Explanations or None
        None without a reading.
    """
    if not len(readings.flow_m3_s):
        return None
    readings = pooled(readings)
    conditions, noise = conditions_of(readings, limit), noise_of(readings)
    tried = hypotheses(readings, new_m)
    found = weigh(tried, conditions, readings.head_loss_m, noise)
    if not any(one.explains for one in found):
        pairs = _pairs(tried)
        of_pairs = weigh(pairs, conditions, readings.head_loss_m, noise)
        if any(one.explains for one in of_pairs):
            tried, found = tried + pairs, found + of_pairs
    # Whether a cause passes through the readings is asked at the noise as it is, before any widening.
    passes = [one.explains for one in found]
    scale = max(float(np.sqrt(min(one.chi_square / one.freedom for one in found))), 1.0)
    if scale > 1.0:
        noise = scale * noise
        found = weigh(tried, conditions, readings.head_loss_m, noise)
    return _sum_up(found, passes, (readings, conditions, noise), scale)


def new_roughness(name: str | None) -> tuple[float, float] | None:
    """Return the roughness of new pipe of a material, low and high [m]; None when it is unknown.

    Examples
    --------
    >>> new_roughness("carbon steel"), new_roughness(None)
    ((2e-05, 0.0001), None)
    """
    if name is None:
        return None
    from fieldfit.hydraulics.materials import material

    low, _, high = material(name).roughness_m
    return low, high


def _pairs(singles: tuple[Hypothesis, ...]) -> tuple[Hypothesis, ...]:
    """Return two causes at once; wrong units, of many trials themselves, only beside a rough wall."""
    faults = [one for one in singles if one.causes != (NOTHING,)]
    rough, units = faults[0], faults[-1]
    return tuple(
        together(first, second) for first, second in combinations(faults, 2) if second is not units or first is rough
    )


def _sum_up(
    found: tuple[Weighed, ...], passes: list[bool], read: tuple[ReachReadings, Conditions, Array], scale: float
) -> Explanations:
    """Rank what was weighed and see what can be told apart."""
    readings, conditions, noise = read
    score = np.array([one.ln_weight for one in found])
    probability = np.exp(score - np.max(score))
    probability /= np.sum(probability)
    order = [
        index for index in np.argsort(-probability) if len(found[index].causes) == 1 or probability[index] >= RANKED
    ]
    ranked = tuple(_explanation(found[index], passes[index], float(probability[index]), conditions) for index in order)
    rivals = [
        ranked[place]
        for place, index in enumerate(order)
        if place and passes[index] and _rivals(found[order[0]], found[index], probability[index])
    ]
    others = [one for one in rivals if alike(ranked[0].fitted, one.fitted, conditions, noise)]
    first = ranked[0]
    return Explanations(
        ranked=ranked,
        alike=_names([first, *others]),
        actions=actions(first, others, read),
        unexplained=not any(ok for one, ok in zip(found, passes, strict=True) if len(one.causes) == 1),
        noise_scale=scale,
        readings=readings,
        conditions=conditions,
    )


def _rivals(first: Weighed, other: Weighed, probability: float) -> bool:
    """Return whether the readings leave open which of two it is.

    Against another fault what counts is what the readings say, not what was thought before. A wall as new needs no
    fault beside it: there the probability itself counts.
    """
    ahead = first.ln_weight - other.ln_weight
    if first.causes == (NOTHING,):
        return bool(ahead <= np.log(BESIDE_NEW))
    return bool(ahead - first.ln_prior + other.ln_prior <= np.log(WITHIN) and probability >= LEAST)


def _names(group: list[Explanation]) -> tuple[str, ...]:
    """Return the names of a group, a new and a rough wall as one; empty when only one is left."""
    names = tuple(dict.fromkeys(named(one.causes) for one in group))
    return names if len(names) > 1 else ()


def _explanation(one: Weighed, passes: bool, probability: float, conditions: Conditions) -> Explanation:
    """Say how one hypothesis stands."""
    trial = one.fitted.trial
    leak = float(trial.side[0]) != 0.0
    worst = int(np.argmax(np.abs(one.misfit)))
    return Explanation(
        causes=one.causes,
        probability=probability,
        sizes=one.sizes,
        option=one.option,
        meter_upstream=bool(trial.side[0] > 0.0) if leak else None,
        explains=passes,
        reduced_chi_square=one.chi_square / one.freedom,
        worst=(float(conditions.flow_m3_s[worst]), float(one.misfit[worst])),
        strain=_strain(one, conditions),
        fitted=one.fitted,
    )


def _strain(one: Weighed, conditions: Conditions) -> tuple[str, float] | None:
    """Return the stated error that a hypothesis moves furthest, if far."""
    free = len(one.fitted.u) - len(conditions.names) - len(conditions.correlation)
    names = ["wall as new", *conditions.names, *["friction correlation"] * len(conditions.correlation)]
    wall = 0.0 if "rough wall" in one.causes else one.fitted.u[WALL]
    pulls = np.append(wall, one.fitted.u[free:])
    most = int(np.argmax(np.abs(pulls)))
    return (names[most], float(pulls[most])) if abs(pulls[most]) >= PULLED else None
