"""Marginal likelihood: exact where the model is linear, and close to brute integration where it is not."""

import numpy as np
import pytest
from scipy.stats import multivariate_normal, norm

from fieldfit.inference.evidence import laplace, posterior_covariance

HEAD = np.array([1.3, 2.9, 4.1])
NOISE = np.array([0.1, 0.2, 0.15])


def test_a_linear_model_gives_the_exact_density():
    slopes = np.array([[0.3, 0.5, 0.9], [0.2, -0.1, 0.4]])
    start = np.array([1.0, 2.5, 4.0])

    def model(u, rows):
        return start + u @ slopes, np.broadcast_to(slopes, (len(u), 2, 3))

    found = laplace(model, 1, 2, (HEAD, NOISE))
    exact = multivariate_normal(start, slopes.T @ slopes + np.diag(NOISE**2)).logpdf(HEAD)
    assert found.ln_evidence[0] == pytest.approx(exact, rel=1e-9)
    precision = slopes @ np.diag(NOISE**-2) @ slopes.T + np.eye(2)
    assert posterior_covariance(found.slopes, NOISE)[0] == pytest.approx(np.linalg.inv(precision), rel=1e-8)
    assert found.u[0] == pytest.approx(np.linalg.solve(precision, slopes @ ((HEAD - start) / NOISE**2)), rel=1e-8)


def test_a_curved_model_comes_close_to_brute_integration():
    """The size of a fault enters by its exponential, as in the forward model."""
    centres = np.array([0.2, 1.1])
    spread, power = 0.42, np.array([1.0, 1.8, 2.4])

    def head_of(size, other):
        return np.exp(size) * power * (1.0 + 0.05 * other)

    def model(u, rows):
        size = centres[rows] + spread * u[:, 0]
        head = np.array([head_of(*pair) for pair in zip(size, u[:, 1], strict=True)])
        by_other = np.array([0.05 * np.exp(s) * power for s in size])
        return head, np.stack([spread * head, by_other], axis=1)

    found = laplace(model, 2, 2, (np.array([1.5, 2.6, 3.3]), np.array([0.1, 0.1, 0.1])))
    size, other = np.meshgrid(np.linspace(-6.0, 6.0, 1201), np.linspace(-6.0, 6.0, 121), indexing="ij")
    for centre, ln_evidence in zip(centres, found.ln_evidence, strict=True):
        density = norm.pdf(size) * norm.pdf(other)
        for head, share in zip([1.5, 2.6, 3.3], power, strict=True):
            density = density * norm.pdf(head, np.exp(centre + spread * size) * share * (1.0 + 0.05 * other), 0.1)
        assert ln_evidence == pytest.approx(np.log(np.sum(density) * 0.01 * 0.1), abs=0.02)


def test_a_trial_far_from_the_readings_ends_all_the_same():
    def model(u, rows):
        return np.exp(5.0 * u) + np.zeros(3), 5.0 * np.exp(5.0 * u)[:, None] * np.ones((1, 3))

    found = laplace(model, 1, 1, (np.array([-50.0, -50.0, -50.0]), NOISE))
    assert np.all(np.isfinite(found.ln_evidence))
    assert np.all(np.abs(found.u) <= 6.0)
