"""Draws and evidence against what is known in closed form."""

import numpy as np
import pytest

from fieldfit.inference.sampling import sample_posterior


@pytest.mark.parametrize("sigma", [1.0, 0.1, 0.001])
def test_evidence_and_moments_of_a_normal_likelihood(sigma):
    seen = np.array([0.7, -1.1, 0.2])

    def ln_likelihood(z):
        return -0.5 * np.sum((z - seen) ** 2, axis=1) / sigma**2

    found = sample_posterior(ln_likelihood, 3, 4000, 7)
    shrink = 1.0 / (1.0 + sigma**2)
    exact = 3.0 * np.log(sigma) - 1.5 * np.log1p(sigma**2) - 0.5 * np.sum(seen**2) * shrink
    assert found.ln_evidence == pytest.approx(exact, abs=0.05)
    assert found.z.mean(axis=0) == pytest.approx(seen * shrink, abs=0.06 * sigma)
    assert found.z.std(axis=0) == pytest.approx(np.full(3, sigma * np.sqrt(shrink)), rel=0.06)


def test_a_ridge_is_followed():
    """Only a sum is seen: the rest stays as it was beforehand."""

    def ln_likelihood(z):
        return -0.5 * ((z[:, 0] + z[:, 1]) / 0.01) ** 2

    found = sample_posterior(ln_likelihood, 2, 4000, 3)
    assert found.z.std(axis=0) == pytest.approx([np.sqrt(0.5)] * 2, rel=0.08)
    assert np.corrcoef(found.z.T)[0, 1] < -0.99


def test_the_same_seed_draws_the_same():
    def ln_likelihood(z):
        return -np.sum(z**4, axis=1)

    assert np.array_equal(sample_posterior(ln_likelihood, 2, 500, 1).z, sample_posterior(ln_likelihood, 2, 500, 1).z)
