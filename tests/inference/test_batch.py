"""The batched solver: same estimate as the full fit, and no silent NaN."""

import numpy as np
import pytest
from readings_maker import colebrook, make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.batch import Batch, solve_batch
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model
from fieldfit.inference.monte_carlo import monte_carlo


def batch_of(factors, *, bore=0.15, length=300.0, velocities=(0.5, 1.0, 2.0)):
    """Sections whose measured f is a stated multiple of smooth pipe's at every flow."""
    factors = np.asarray(factors, dtype=np.float64)
    velocity = np.asarray(velocities)[:, None]
    smooth = np.array([[colebrook(v * bore / 1e-6, 0.0)] for v in velocity[:, 0]])
    head = smooth * factors * length / bore * velocity**2 / (2.0 * 9.80665)
    ones = np.ones(len(factors))
    return Batch(
        flow_m3_s=velocity * np.pi * bore**2 / 4.0 * ones,
        head_loss_m=head,
        bore_m=bore * ones,
        length_m=length * ones,
        viscosity_m2_s=np.full_like(head, 1e-6),
        fitting_k=0.0 * ones,
        ln_friction_error=np.zeros_like(head),
        reference_reynolds=np.full(len(factors), 1.5e5),
    )


def test_smoother_than_smooth_converges_to_a_number():
    factors = np.array([0.3, 0.7, 0.9, 0.999, 1.0, 1.001, 1.3, 3.0])
    found, converged = solve_batch(batch_of(factors), np.ones((3, 1)), np.full(8, -4.0))
    assert np.all(converged)
    smooth = colebrook(1.5e5, 0.0)
    np.testing.assert_allclose(np.exp(found[:5]), factors[:5] * smooth, rtol=1e-9)


def test_a_section_without_a_root_is_nan_and_not_converged():
    batch = batch_of([1.5, 1.5])
    head = batch.head_loss_m.copy()
    head[:, 1] = -5.0
    broken = Batch(**{**{name: getattr(batch, name) for name in batch.__slots__}, "head_loss_m": head})
    found, converged = solve_batch(broken, np.ones((3, 1)), np.full(2, -4.0))
    assert converged.tolist() == [True, False]
    assert np.isfinite(found[0])
    assert np.isnan(found[1])


@pytest.mark.parametrize("roughness", [0.0, 2e-5, 1e-3])
@pytest.mark.parametrize("levelled", [True, False])
def test_monte_carlo_agrees_with_the_profile(roughness, levelled):
    fit = fit_reach(
        head_model(make_readings(roughness=roughness, levelled=levelled, seed=2, shape="normal"), Correlation())
    )
    check = monte_carlo(fit, 0.05, draws=20_000, seed=7)
    assert check.unconverged == 0
    likelihood = fit.interval[1] - fit.interval[0]
    propagated = np.log(check.friction_factor[1] / check.friction_factor[0])
    assert propagated == pytest.approx(likelihood, rel=0.08)
    assert np.mean(np.log(check.friction_factor)) == pytest.approx(np.mean(fit.interval), abs=0.06 * likelihood)
    wide = np.log(check.with_correlation[1] / check.with_correlation[0])
    assert wide == pytest.approx(2.0 * 1.96 * np.hypot(fit.standard, 0.05), rel=0.05)


def test_monte_carlo_is_seeded():
    fit = fit_reach(head_model(make_readings(seed=2), Correlation()))
    assert monte_carlo(fit, 0.05, draws=500, seed=1) == monte_carlo(fit, 0.05, draws=500, seed=1)
    assert monte_carlo(fit, 0.05, draws=500, seed=1) != monte_carlo(fit, 0.05, draws=500, seed=2)


def test_a_dominant_limit_gives_the_narrower_band_of_its_rectangle():
    """A rectangle's 95 % is 0.95 of its half-width (GUM Supplement 1), not 1.96 standard deviations."""
    from fieldfit.field.uncertain import Accuracy

    readings = make_readings(
        bore_relative=0.02,
        meter=Accuracy(text="0"),
        gauge_pa=0.0,
        length_relative=0.0,
        velocities=(2.5,),
        noise=1e-4,
    )
    fit = fit_reach(head_model(readings, Correlation(standard=1e-6)))
    check = monte_carlo(fit, 1e-6, draws=40_000)
    width = np.log(check.friction_factor[1] / check.friction_factor[0]) / (fit.interval[1] - fit.interval[0])
    assert width == pytest.approx(0.95 * np.sqrt(3.0) / 1.96, rel=0.02)
