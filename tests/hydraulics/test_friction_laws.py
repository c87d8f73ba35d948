"""The named friction laws: against the `fluids` library, their limits, and back to the roughness."""

from functools import partial

import fluids.friction
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.hydraulics.friction import colebrook_white, smooth
from fieldfit.hydraulics.friction_laws import LAWS, relative_roughness_by_law

SAND = "Nikuradse sand grain"
turbulent = st.floats(3.7, 8.0).map(lambda exponent: 10.0**exponent)
wall = st.floats(-6.0, -1.3).map(lambda exponent: 10.0**exponent)
names = st.sampled_from(list(LAWS))


def k_plus(reynolds, rough):
    """Return the roughness Reynolds number of a sand-grain wall."""
    return rough * reynolds * np.sqrt(LAWS[SAND].friction_factor(reynolds, rough) / 8.0)


def test_laws_bear_their_published_names():
    assert list(LAWS) == ["Colebrook–White", "Haaland", "Swamee–Jain", "Churchill", SAND]
    assert all(law.source for law in LAWS.values())


@pytest.mark.parametrize(
    ("name", "theirs", "within"),
    [
        ("Colebrook–White", partial(fluids.friction.Clamond, fast=False), 1e-11),
        ("Haaland", fluids.friction.Haaland, 1e-13),
        # The library has (6.97/Re)^0.9 where 5.74/Re^0.9 was published: the same to 5 digits.
        ("Swamee–Jain", fluids.friction.Swamee_Jain_1976, 1e-5),
        ("Churchill", fluids.friction.Churchill_1977, 1e-12),
    ],
)
def test_law_agrees_with_the_fluids_library(name, theirs, within):
    random = np.random.default_rng(83)
    re, rough = 10.0 ** random.uniform(3.61, 8.0, 100), 10.0 ** random.uniform(-7.0, -1.3, 100)
    wanted = [theirs(*at) for at in zip(re.tolist(), rough.tolist(), strict=True)]
    np.testing.assert_allclose(LAWS[name].friction_factor(re, rough), wanted, rtol=within)


@pytest.mark.parametrize("name", LAWS)
def test_law_takes_scalars_and_broadcasts(name):
    law = LAWS[name].friction_factor
    table = law(np.array([[1e4], [1e5], [1e6]]), np.array([0.0, 1e-3]))
    assert table.shape == (3, 2)
    assert float(law(1e5, 1e-3)) == pytest.approx(table[1, 1], rel=1e-12)


@settings(deadline=None)
@given(names, turbulent, wall)
def test_roughness_comes_back_through_every_law(name, reynolds, rough):
    f = float(LAWS[name].friction_factor(reynolds, rough))
    back = relative_roughness_by_law(name, f, reynolds)
    if back is None:
        # Not felt at all: one rounding below smooth is the same pipe.
        assert f == pytest.approx(float(LAWS[name].friction_factor(reynolds, 0.0)), rel=1e-12)
        return
    assert LAWS[name].friction_factor(reynolds, back) == pytest.approx(f, rel=1e-10)
    if name != SAND or k_plus(reynolds, rough) > 4.0:
        assert back == pytest.approx(rough, rel=1e-6, abs=1e-11)


@settings(deadline=None)
@given(names, turbulent, wall, st.floats(1.001, 100.0))
def test_friction_factor_never_falls_as_roughness_grows(name, reynolds, rough, times):
    law = LAWS[name].friction_factor
    assert law(reynolds, rough) <= law(reynolds, min(rough * times, 0.5)) * (1.0 + 1e-12)


@settings(deadline=None)
@given(names, turbulent, st.floats(0.01, 0.999))
def test_smoother_than_smooth_has_no_roughness(name, reynolds, share):
    factor = share * float(LAWS[name].friction_factor(reynolds, 0.0))
    assert relative_roughness_by_law(name, factor, reynolds) is None


@settings(deadline=None)
@given(names, turbulent, st.floats(0.1, 2.0))
def test_absurd_friction_factor_is_an_absurd_roughness_not_an_error(name, reynolds, factor):
    assert relative_roughness_by_law(name, factor, reynolds) > 0.05


def test_unknown_law_is_an_error_that_names_the_near_one():
    with pytest.raises(InputError, match=r"no friction law 'Haland'\. Did you mean 'Haaland'\?"):
        relative_roughness_by_law("Haland", 0.02, 1e5)


class TestSandGrain:
    law = staticmethod(LAWS[SAND].friction_factor)

    def test_fine_sand_is_smooth(self):
        re = np.geomspace(4e3, 1e8, 60)
        rough = 2.0 / (re * np.sqrt(smooth(re) / 8.0))
        np.testing.assert_allclose(self.law(re, rough), smooth(re), rtol=1e-12)

    def test_coarse_sand_obeys_the_fully_rough_law(self):
        rough = np.geomspace(1e-4, 0.05, 30)
        wanted = (1.74 + 2.0 * np.log10(0.5 / rough)) ** -2
        re = 95.0 / (rough * np.sqrt(wanted / 8.0))
        np.testing.assert_allclose(self.law(re, rough), wanted, rtol=1e-12)

    def test_equation_is_solved_to_convergence(self):
        # The published form, written down apart: B 5.2 smooth and 8.5 rough become the smooth and rough laws of f.
        re, rough = np.geomspace(4e3, 1e7, 50)[:, None], np.geomspace(1e-4, 0.05, 40)[None, :]
        f = self.law(re, rough)
        k = rough * re * np.sqrt(f / 8.0)
        smooth_x = -2.0 * np.log10(2.51 / (re * np.sqrt(f)))
        rough_x = 1.74 - 2.0 * np.log10(2.0 * rough)
        share = np.sin(0.4258 * (np.log(np.clip(k, 2.25, 90.0)) - 0.811))
        share = np.where(smooth_x < rough_x, 0.0, share)
        np.testing.assert_allclose(1.0 / np.sqrt(f), smooth_x + share * (rough_x - smooth_x), rtol=2e-4)

    def test_transition_dips_below_fully_rough(self):
        # Nikuradse's curves fall below their fully rough level before they reach it; Colebrook–White never does.
        rough = 1.0 / 252.0
        re = np.geomspace(4e3, 1e7, 400)
        level = (1.74 + 2.0 * np.log10(126.0)) ** -2
        assert 0.86 < np.min(self.law(re, rough)) / level < 0.90
        assert np.min(colebrook_white(re, rough)) / level > 0.999

    def test_lies_below_colebrook_white_in_transition(self):
        re = np.geomspace(4e3, 1e7, 200)
        ratio = self.law(re, 2e-3) / colebrook_white(re, 2e-3)
        assert np.min(ratio) < 0.88
        assert np.max(ratio) < 1.002

    def test_first_sign_of_roughness_is_the_finest_sand_that_is_felt(self):
        rough = relative_roughness_by_law(SAND, 1.0001 * float(smooth(1e5)), 1e5)
        assert 3.2 < k_plus(1e5, rough) < 4.0
