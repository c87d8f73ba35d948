"""Campaigns fitted jointly: one wall each, and every error that two of them share counted once."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.section import Correlation
from fieldfit.inference.campaign_errors import Key, Test, model_of, shape_rows
from fieldfit.inference.friction_curve import friction_curve, highest_ln_friction
from fieldfit.inference.head_model import HeadModel, Reference, head_model
from fieldfit.inference.shared_errors import SHAPE

Array = NDArray[np.float64]

STEPS = 50
TOLERANCE = 1e-11
WIDENINGS = 8
HARDLY = 1.02
"""Reduced χ² that needs no widening."""


@dataclass(frozen=True, slots=True, kw_only=True)
class JointFit:
    """Walls of n campaigns with their covariance; M distinct errors."""

    tests: tuple[Test, ...]
    """The campaigns, by date."""
    references: tuple[Reference, ...]
    """Where each ln f holds: one flow and one viscosity, in each campaign's own bore."""
    ln_friction: Array
    """(n,) best ln f at the reference [-]."""
    u: Array
    """(M,) fitted errors in standard deviations [-]."""
    covariance: Array
    """(n + M, n + M) covariance of ln f and the errors [-]."""
    keys: tuple[Key, ...]
    """What each error is."""
    ln_bore: Array
    """(n, M) what one standard deviation of each error does to ln bore [-]."""
    ln_length: Array
    """(n, M) what it does to ln length [-]."""
    reduced_chi_square: float | None
    """χ² over degrees of freedom; None with one reading for each wall."""
    limit: Correlation
    """How far friction correlations can be trusted."""

    @property
    def walls(self) -> Array:
        """(n, n) covariance of ln f alone [-]."""
        return self.covariance[: len(self.tests), : len(self.tests)]

    def shape_at(self, reynolds: float) -> Array:
        """Return the (M,) change of ln f at a Reynolds number by each error of the correlation's shape [-]."""
        distance = np.array([np.log10(reynolds / self.references[0].reynolds)])
        effect = np.zeros(len(self.keys))
        for order, row in enumerate(shape_rows(distance, self.limit)):
            index = [place for place, key in enumerate(self.keys) if key[0] == SHAPE and key[1] == order]
            effect[index] = row[0]
        return effect

    def loss_slopes(self) -> Array:
        """Return the (n, n + M) slopes of ln(head loss per metre at the reference flow) in ln f and the errors [-]."""
        return np.hstack([np.eye(len(self.tests)), -5.0 * self.ln_bore])


def fit_jointly(tests: tuple[Test, ...], limit: Correlation, liquid_standard: float) -> JointFit:
    """Fit all campaigns of one reach at once.

    One wall for each campaign and one nuisance parameter for each distinct error, by Gauss–Newton on readings and
    priors together. An error that campaigns share moves all their walls alike, so it stays in the walls and cancels
    in their differences. Noise is widened, never narrowed, when the campaigns contradict each other.

    Parameters
    ----------
    tests : tuple of Test
        Campaigns by date, one or more, each with one reading or more.
    limit : Correlation
        How far friction correlations can be trusted.
    liquid_standard : float
        Relative standard uncertainty of the liquid's viscosity at a known temperature [-].

    Returns
    -------
    JointFit
    """
    references = _references(tests, limit)
    pairs = [
        model_of(test, number, reference, limit, liquid_standard)
        for number, (test, reference) in enumerate(zip(tests, references, strict=True))
    ]
    keys = tuple(dict.fromkeys(key for _, own in pairs for key in own))
    places = [np.array([keys.index(key) for key in own], dtype=np.int64) for _, own in pairs]
    system = _System(tests=tests, models=tuple(model for model, _ in pairs), places=tuple(places), errors=len(keys))
    freedom = system.readings - len(tests)
    scale, (walls, u, covariance, chi_square) = 1.0, system.solve(1.0)
    for _ in range(WIDENINGS):
        if freedom == 0 or chi_square / freedom <= HARDLY:
            break
        scale *= float(np.sqrt(chi_square / freedom))
        walls, u, covariance, chi_square = system.solve(scale)
    return JointFit(
        tests=tests,
        references=references,
        ln_friction=walls,
        u=u,
        covariance=covariance,
        keys=keys,
        ln_bore=system.spread("ln_bore"),
        ln_length=system.spread("ln_length"),
        reduced_chi_square=scale**2 * chi_square / freedom if freedom else None,
        limit=limit,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _System:
    """The equations of all campaigns with the place of each one's errors among all."""

    tests: tuple[Test, ...]
    models: tuple[HeadModel, ...]
    places: tuple[NDArray[np.int64], ...]
    errors: int

    @property
    def readings(self) -> int:
        """Number of readings."""
        return sum(len(test.random_m) for test in self.tests)

    def spread(self, name: str) -> Array:
        """Return an effect of each campaign's errors in the order of all errors, (n, M)."""
        table = np.zeros((len(self.models), self.errors))
        for row, model, place in zip(table, self.models, self.places, strict=True):
            row[place] = getattr(model.errors, name)
        return table

    def solve(self, scale: float) -> tuple[Array, Array, Array, float]:
        """Return walls, errors, their covariance and χ², with the noise widened by a factor."""
        walls: Array = self._start()
        u: Array = np.zeros(self.errors)
        for _ in range(STEPS):
            normal, gradient, _ = self._equations(walls, u, scale)
            step = np.linalg.solve(normal, gradient)
            walls = np.minimum(walls + np.clip(step[: len(walls)], -1.0, 1.0), self._highest())
            u = u + step[len(walls) :]
            if np.max(np.abs(step)) < TOLERANCE:
                break
        normal, _, chi_square = self._equations(walls, u, scale)
        return walls, u, np.asarray(np.linalg.inv(normal), dtype=np.float64), chi_square

    def _start(self) -> Array:
        """Return each campaign's own wall, carried to the shared reference."""
        found = [
            friction_curve(
                np.array([test.ln_friction]), np.array([model.reference.reynolds]), np.array([test.reynolds])
            ).friction_factor[0]
            for test, model in zip(self.tests, self.models, strict=True)
        ]
        return np.asarray(np.log(np.array(found)), dtype=np.float64)

    def _highest(self) -> Array:
        return highest_ln_friction(np.array([model.reference.reynolds for model in self.models]))

    def _equations(self, walls: Array, u: Array, scale: float) -> tuple[Array, Array, float]:
        """Return the normal matrix, its right side and χ² at a point."""
        count = len(walls)
        normal, gradient = np.zeros((count + self.errors,) * 2), np.zeros(count + self.errors)
        normal[count:, count:] = np.eye(self.errors)
        gradient[count:] = -u
        chi_square = float(u @ u)
        for index, (test, model, place) in enumerate(zip(self.tests, self.models, self.places, strict=True)):
            noise = scale * test.random_m
            prediction = model.predict(float(walls[index]), u[place])
            slopes = np.vstack([prediction.by_wall, prediction.by_error]) / noise
            misfit = (model.readings.head_loss_m - prediction.head_m) / noise
            rows = np.append(index, count + place)
            normal[np.ix_(rows, rows)] += slopes @ slopes.T
            gradient[rows] += slopes @ misfit
            chi_square += float(misfit @ misfit)
        return normal, gradient, chi_square


def _references(tests: tuple[Test, ...], limit: Correlation) -> tuple[Reference, ...]:
    """Return one flow and one viscosity for all, in each campaign's own bore."""
    own = [head_model(test.readings, limit).reference for test in tests]
    flow = float(np.exp(np.mean([np.log(reference.flow_m3_s) for reference in own])))
    viscosity = float(np.exp(np.mean([np.log(reference.viscosity_m2_s) for reference in own])))
    temperature = float(np.mean([reference.temperature_degc for reference in own]))
    return tuple(
        Reference(flow, 4.0 * flow / (np.pi * test.readings.bore.value * viscosity), temperature, viscosity)
        for test in tests
    )
