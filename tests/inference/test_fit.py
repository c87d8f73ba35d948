"""The fit against general-purpose fitting on independent physics, and its own promises."""

import lmfit
import numpy as np
import pytest
from readings_maker import GRAVITY, colebrook, make_readings
from scipy.optimize import least_squares
from scipy.stats import chi2

from fieldfit.field.section import Correlation
from fieldfit.field.uncertain import Accuracy
from fieldfit.inference.fit import fit_reach
from fieldfit.inference.head_model import head_model

LIMIT = Correlation()


def model_of(**changes):
    return head_model(make_readings(**changes), LIMIT)


def ln_truth(model, roughness):
    readings = model.readings
    return float(np.log(colebrook(model.reference.reynolds, roughness / readings.bore.value)))


@pytest.mark.parametrize("roughness", [2e-5, 2e-4, 2e-3])
@pytest.mark.parametrize("levelled", [True, False])
def test_exact_readings_give_the_wall_back(roughness, levelled):
    model = model_of(roughness=roughness, levelled=levelled)
    fit = fit_reach(model)
    assert fit.ln_friction == pytest.approx(ln_truth(model, roughness), abs=1e-9)
    assert fit.chi_square < 1e-12


def test_slopes_are_those_of_the_equation():
    model = model_of(roughness=3e-4, fitting_k=(4.0, 1.0), levelled=False, senses="velocity")
    rng = np.random.default_rng(3)
    u = rng.normal(size=len(model.errors.names))
    at = model.predict(-3.4, u)
    step = 1e-6
    by_wall = (model.predict(-3.4 + step, u).head_m - model.predict(-3.4 - step, u).head_m) / (2.0 * step)
    np.testing.assert_allclose(at.by_wall, by_wall, rtol=1e-6)
    for index in range(len(u)):
        move = np.zeros_like(u)
        move[index] = step
        numeric = (model.predict(-3.4, u + move).head_m - model.predict(-3.4, u - move).head_m) / (2.0 * step)
        np.testing.assert_allclose(at.by_error[index], numeric, rtol=2e-5, atol=1e-8, err_msg=model.errors.names[index])


def test_best_point_agrees_with_scipy_on_the_fluids_library():
    """Same posterior mode from scipy.optimize.least_squares with friction from fluids: an independent path."""
    readings = make_readings(roughness=4e-4, seed=11, noise=0.02, bore_relative=0.01)
    model = head_model(readings, Correlation(standard=1e-9))
    fit = fit_reach(model)
    gain, span = readings.meter.accuracy.gain, readings.upstream.accuracy.fixed / 1e6
    weight = readings.density_kg_m3 * GRAVITY

    def residual(x):
        relative, bore_u, gain_u, length_u, visc_u, up_u, down_u, level_u = x
        flow = readings.flow_m3_s * (1.0 + gain * gain_u)
        bore = readings.bore.value * np.exp(0.01 * bore_u)
        velocity = flow / (np.pi * bore**2 / 4.0)
        viscosity = 1e-6 * np.exp(0.02 * visc_u)
        friction = np.array([colebrook(v * bore / viscosity, np.exp(relative)) for v in velocity])
        head = friction * readings.length.value * np.exp(0.002 * length_u) / bore * velocity**2 / (2.0 * GRAVITY)
        rise = (readings.pressure_pa - 4e5) * span / weight
        head = head + up_u * rise[0] - down_u * rise[1] + 0.01 * level_u
        return np.concatenate([(readings.head_loss_m - head) / fit.random_m, x[1:]])

    found = least_squares(residual, [-5.0, *([0.0] * 7)], xtol=1e-14, ftol=1e-14, gtol=1e-14)
    relative = float(np.exp(found.x[0]))
    assert fit.ln_friction == pytest.approx(np.log(colebrook(model.reference.reynolds, relative)), abs=2e-6)
    covariance = np.linalg.inv(found.jac.T @ found.jac)
    # d ln f / d ln(ε/D) turns the spread of the one parameter into that of the other.
    step = 1e-4
    slope = np.log(
        colebrook(model.reference.reynolds, relative * np.exp(step))
        / colebrook(model.reference.reynolds, relative * np.exp(-step))
    ) / (2.0 * step)
    assert fit.standard == pytest.approx(float(np.sqrt(covariance[0, 0])) * slope, rel=0.02)


def test_profile_agrees_with_lmfit_conf_interval():
    model = model_of(roughness=2e-4, seed=5, noise=0.03, velocities=(0.6, 1.0, 1.5))
    fit = fit_reach(model)
    count = len(model.errors.names)
    parameters = lmfit.Parameters()
    parameters.add("ln_friction", value=fit.ln_friction)
    for index in range(count):
        parameters.add(f"u{index}", value=fit.u[index])

    def residual(values):
        u = np.array([values[f"u{index}"].value for index in range(count)])
        misfit = (model.readings.head_loss_m - model.predict(values["ln_friction"].value, u).head_m) / fit.random_m
        return np.concatenate([misfit, u])

    minimiser = lmfit.Minimizer(residual, parameters, scale_covar=False)
    result = minimiser.minimize()
    table = lmfit.conf_interval(
        minimiser,
        result,
        p_names=["ln_friction"],
        sigmas=[0.95],
        prob_func=lambda best, new: chi2.cdf(new.chisqr - best.chisqr, 1),
    )
    ends = [value for level, value in table["ln_friction"] if level == pytest.approx(0.95)]
    np.testing.assert_allclose(fit.interval, ends, atol=2e-5)


def test_scatter_beyond_the_stated_noise_widens_and_less_never_narrows():
    stated = model_of(roughness=2e-4, noise=0.005)
    quiet = fit_reach(stated)
    np.testing.assert_array_equal(quiet.random_m, stated.readings.random_m)
    rng = np.random.default_rng(8)
    head = stated.readings.head_loss_m + rng.normal(0.0, 0.05, len(stated.readings.head_loss_m))
    noisy = fit_reach(model_of(noise=0.005, head=head))
    assert noisy.reduced_chi_square > 3.0
    assert np.all(noisy.random_m > stated.readings.random_m)
    assert noisy.standard > quiet.standard


def test_shares_add_up_and_the_larger_error_has_the_larger_share():
    fit = fit_reach(model_of(bore_relative=0.01))
    assert float(np.sum(fit.share)) == pytest.approx(1.0, abs=1e-12)
    shares = dict(zip(fit.model.errors.names, fit.share, strict=False))
    assert max(shares, key=shares.get) == "bore"
    # d ln f is 5 d ln D, less what the curve's shape tells of the bore.
    assert fit.standard * np.sqrt(shares["bore"]) == pytest.approx(0.05, rel=0.1)


@pytest.mark.parametrize(("senses", "power"), [("volume", 5.0), ("velocity", 1.0)])
def test_bore_acts_by_what_the_meter_senses(senses, power):
    """d ln f/d ln D is 5, or 1 where the flow was computed with the same bore (a matter of definition)."""
    nothing = Accuracy(text="0")
    fit = fit_reach(
        model_of(
            senses=senses,
            bore_relative=0.01,
            meter=nothing,
            gauge_pa=0.0,
            length_relative=0.0,
            velocities=(2.0,),
            noise=1e-6,
        )
    )
    shares = dict(zip(fit.model.errors.names, fit.share, strict=False))
    assert fit.standard * np.sqrt(shares["bore"]) == pytest.approx(power * 0.01, rel=0.06)


def test_more_readings_shrink_noise_but_not_the_shared_errors():
    few = fit_reach(model_of(velocities=(1.0, 2.0)))
    many = fit_reach(model_of(velocities=np.tile([1.0, 2.0], 50)))
    assert many.share[-1] < few.share[-1]
    shared_few = few.standard * np.sqrt(1.0 - few.share[-1])
    shared_many = many.standard * np.sqrt(1.0 - many.share[-1])
    assert shared_many == pytest.approx(shared_few, rel=0.05)


def test_one_gauge_moved_between_the_taps_shares_its_zero():
    from dataclasses import replace

    readings = make_readings(levelled=False)
    same = replace(readings, downstream=replace(readings.downstream, gauge="PG-07"))
    names = head_model(same, LIMIT).errors.names
    assert "zero of gauge PG-07" not in names
    assert "zero of gauge PG-11" in head_model(readings, LIMIT).errors.names
