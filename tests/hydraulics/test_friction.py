"""Colebrook–White against arithmetic of 40 digits and against the `fluids` library."""

import fluids.friction
import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldfit.hydraulics.friction import (
    STANDARD_GRAVITY,
    colebrook_white,
    colebrook_white_with_slopes,
    laminar,
    relative_roughness,
    smooth,
)

DIGITS = 40
turbulent = st.floats(3.6, 8.0).map(lambda exponent: 10.0**exponent)
wall = st.one_of(st.just(0.0), st.floats(-8.0, -1.3).map(lambda exponent: 10.0**exponent))


def exact(reynolds, rough):
    """Solve Colebrook–White to 40 digits."""
    reynolds, rough = mpmath.mpf(reynolds), mpmath.mpf(rough)
    a, b = rough / mpmath.mpf("3.7"), mpmath.mpf("2.51") / reynolds
    return mpmath.findroot(lambda x: x + 2 * mpmath.log10(a + b * x), 7.0) ** -2


def points(count, *, reynolds=(4e3, 1e8), rough=(1e-9, 0.05), seed=1939):
    """Return random points over a domain, its corners and some smooth ones among them."""
    random = np.random.default_rng(seed)
    re = np.exp(random.uniform(*np.log(reynolds), count))
    wall = np.exp(random.uniform(*np.log(rough), count))
    wall[: count // 8] = 0.0
    corners = np.array([(re, wall) for re in reynolds for wall in (0.0, *rough)])
    return np.append(re, corners[:, 0]), np.append(wall, corners[:, 1])


@pytest.mark.parametrize(
    ("count", "reynolds", "rough"),
    [(300, (4e3, 1e8), (1e-9, 0.05)), (100, (4e3, 2e4), (1e-4, 0.05)), (100, (2e3, 1e9), (1e-9, 0.5))],
    ids=["stated domain", "its hardest corner", "beyond it"],
)
def test_friction_factor_is_exact(count, reynolds, rough):
    re, wall = points(count, reynolds=reynolds, rough=rough)
    f = colebrook_white(re, wall)
    with mpmath.workdps(DIGITS):
        worst = max(abs(mpmath.mpf(got) / exact(*at) - 1) for got, *at in zip(f, re, wall, strict=True))
    assert worst < 1e-12


def test_slopes_are_those_of_the_exact_solution():
    re, wall = points(60, rough=(1e-7, 0.05))
    wall = np.maximum(wall, 1e-9)
    _, by_reynolds, by_roughness = colebrook_white_with_slopes(re, wall)
    with mpmath.workdps(DIGITS):
        for at, got_reynolds, got_roughness in zip(zip(re, wall, strict=True), by_reynolds, by_roughness, strict=True):
            for order, got in (((1, 0), got_reynolds), ((0, 1), got_roughness)):
                slope = mpmath.diff(exact, at, order, h=mpmath.mpf(10) ** -16 * at[order.index(1)])
                assert abs(mpmath.mpf(got) / slope - 1) < 1e-11


def test_slope_with_roughness_holds_at_a_smooth_wall():
    _, _, slope = colebrook_white_with_slopes(1e5, 0.0)
    step = 1e-9
    assert slope == pytest.approx((colebrook_white(1e5, step) - colebrook_white(1e5, 0.0)) / step, rel=1e-4)


def test_both_functions_give_the_same_friction_factor():
    re, wall = points(500)
    np.testing.assert_array_equal(colebrook_white_with_slopes(re, wall)[0], colebrook_white(re, wall))


def test_agrees_with_the_fluids_library():
    # Its exact solution (tol=0) goes another way, Lambert's W in 50 digits, but holds one constant, 18.574, as a float:
    # that costs it 2e-11 where Re and roughness are both large.
    re, wall = (column.tolist() for column in points(60, rough=(1e-7, 0.05), seed=5))
    theirs = [fluids.friction.Colebrook(*at, tol=0) for at in zip(re, wall, strict=True)]
    np.testing.assert_allclose(colebrook_white(re, wall), theirs, rtol=1e-10)


def test_agrees_with_the_default_of_the_fluids_library():
    # Its default for turbulent flow is Clamond's iteration.
    re, wall = (column.tolist() for column in points(200, rough=(1e-7, 0.05), seed=6))
    theirs = [fluids.friction.friction_factor(Re=at[0], eD=at[1]) for at in zip(re, wall, strict=True)]
    np.testing.assert_allclose(colebrook_white(re, wall), theirs, rtol=1e-11)


@settings(deadline=None)
@given(turbulent, wall)
def test_roughness_comes_back_from_the_friction_factor(reynolds, rough):
    f, _, slope = colebrook_white_with_slopes(reynolds, rough)
    # What 1e-12 of f can hide in ε/D is the limit of any inverse.
    assert relative_roughness(f, reynolds) == pytest.approx(rough, rel=1e-9, abs=float(1e-12 * f / slope))


@settings(deadline=None)
@given(turbulent, wall, st.floats(1e-6, 1.0))
def test_friction_factor_grows_with_roughness(reynolds, rough, more):
    assert colebrook_white(reynolds, rough) < colebrook_white(reynolds, rough + more * 0.05)


@settings(deadline=None)
@given(turbulent, wall, st.floats(1.001, 10.0))
def test_friction_factor_falls_with_reynolds(reynolds, rough, more):
    _, slope, _ = colebrook_white_with_slopes(reynolds, rough)
    assert slope < 0.0
    assert colebrook_white(reynolds * more, rough) <= colebrook_white(reynolds, rough) * (1.0 + 1e-12)


@settings(deadline=None)
@given(turbulent, st.floats(1e-9, 0.999999))
def test_smoother_than_smooth_is_a_negative_number(reynolds, share):
    below = relative_roughness(share * smooth(reynolds), reynolds)
    assert np.isfinite(below)
    assert below < 0.0


@settings(deadline=None)
@given(st.floats(1e-9, 1e3), st.floats(1.0, 1e12))
def test_inverse_is_finite_for_every_friction_factor(friction_factor, reynolds):
    assert np.isfinite(relative_roughness(friction_factor, reynolds))


def test_smooth_is_the_law_without_roughness():
    re = np.geomspace(4e3, 1e8, 50)
    np.testing.assert_array_equal(smooth(re), colebrook_white(re, 0.0))
    np.testing.assert_allclose(relative_roughness(smooth(re), re), 0.0, atol=1e-14)


def test_laminar_flow():
    np.testing.assert_array_equal(laminar([64.0, 640.0, 2000.0]), [1.0, 0.1, 0.032])
    np.testing.assert_allclose(
        laminar([800.0, 1999.0]), [fluids.friction.friction_laminar(re) for re in (800.0, 1999.0)]
    )


def test_low_reynolds_number_is_no_trouble():
    re = np.geomspace(100.0, 2e3, 40)
    with mpmath.workdps(DIGITS):
        wanted = [float(exact(at, 1e-3)) for at in re]
    np.testing.assert_allclose(colebrook_white(re, 1e-3), wanted, rtol=1e-6)


@pytest.mark.parametrize("count", [1, 2, 16384, 16385, 3 * 16384 + 17])
def test_every_element_is_solved_whatever_the_length(count):
    re, wall = np.geomspace(4e3, 1e8, count), np.geomspace(0.05, 1e-6, count)
    f, by_reynolds, by_roughness = colebrook_white_with_slopes(re, wall)
    assert f.shape == by_reynolds.shape == by_roughness.shape == (count,)
    np.testing.assert_allclose(relative_roughness(f, re), wall, rtol=1e-9, atol=1e-13)
    again = colebrook_white_with_slopes(re[::-1], wall[::-1])
    for forward, backward in zip((f, by_reynolds, by_roughness), again, strict=True):
        np.testing.assert_allclose(forward, backward[::-1], rtol=1e-14)


def test_inputs_broadcast_in_any_layout():
    re, wall = np.geomspace(4e3, 1e8, 300), np.geomspace(1e-6, 0.05, 200)
    whole = colebrook_white(np.repeat(re, 200), np.tile(wall, 300)).reshape(300, 200)
    for got in (
        colebrook_white(re[:, None], wall),
        colebrook_white(re, wall[:, None]).T,
        colebrook_white(np.asfortranarray(np.tile(re, (200, 1)).T), wall),
        colebrook_white(np.repeat(re, 2)[::2, None], wall[None, :]),
    ):
        np.testing.assert_allclose(got, whole, rtol=1e-14)


def test_scalars_whole_numbers_and_lists_are_taken():
    wanted = colebrook_white(np.array([1e5]), np.array([1e-3]))[0]
    assert colebrook_white(100_000, 1e-3).shape == ()
    assert float(colebrook_white(100_000, 1e-3)) == wanted
    assert colebrook_white([100_000], 1e-3)[0] == wanted
    assert colebrook_white(np.float32(1e5), 1e-3).dtype == np.float64


def test_empty_in_empty_out():
    assert colebrook_white(np.empty((0, 3)), np.ones(3)).shape == (0, 3)
    assert all(result.shape == (0,) for result in colebrook_white_with_slopes([], []))


def test_missing_value_stays_missing_and_spoils_nothing_else():
    f, by_reynolds, by_roughness = colebrook_white_with_slopes([1e5, np.nan, 1e6], [1e-3, 1e-3, np.nan])
    for result in (f, by_reynolds, by_roughness):
        np.testing.assert_array_equal(np.isnan(result), [False, True, True])


def test_inputs_are_left_alone():
    re, wall = points(50)
    for held in (re, wall):
        held.setflags(write=False)
    f = colebrook_white(re, wall)
    assert not np.shares_memory(f, re)
    assert not np.shares_memory(f, wall)


def test_standard_gravity():
    # ISO 80000-3: the conventional value of the acceleration of free fall.
    assert STANDARD_GRAVITY == 9.80665
