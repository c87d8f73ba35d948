"""The kind of flow, against its limits worked out with the `fluids` library."""

import fluids.friction
import numpy as np
import pytest

from fieldfit.hydraulics.regime import LAMINAR_LIMIT, TURBULENT_LIMIT, regime


def reynolds_at(k_plus, rough):
    """Return the Reynolds number at which a wall has a given roughness Reynolds number."""
    re = 1e5
    for _ in range(60):
        re = k_plus / (rough * np.sqrt(fluids.friction.Colebrook(re, rough) / 8.0))
    return re


@pytest.mark.parametrize(
    ("reynolds", "kind"),
    [(0.0, "laminar"), (2099.9, "laminar"), (2100.0, "critical"), (3999.9, "critical"), (4000.0, "smooth turbulent")],
)
def test_reynolds_limits(reynolds, kind):
    assert (LAMINAR_LIMIT, TURBULENT_LIMIT) == (2100.0, 4000.0)
    assert regime(reynolds, 1e-5) == kind


@pytest.mark.parametrize("rough", [1e-4, 1e-3, 5e-3])
def test_wall_limits(rough):
    at = [0.999 * reynolds_at(5.0, rough), 1.001 * reynolds_at(5.0, rough)]
    at += [0.999 * reynolds_at(70.0, rough), 1.001 * reynolds_at(70.0, rough)]
    assert regime(at, rough).tolist() == ["smooth turbulent", "transitional", "transitional", "fully rough"]


def test_smooth_wall_is_smooth_at_any_flow():
    assert set(regime(np.geomspace(4e3, 1e9, 30), [[0.0], [-1e-4]]).ravel()) == {"smooth turbulent"}


def test_shape_is_the_broadcast_one():
    assert regime(np.full((4, 1), 1e5), np.full(3, 1e-3)).shape == (4, 3)
    assert regime(1e5, 1e-3).shape == ()


def test_missing_value_has_no_regime():
    assert regime([np.nan, 1e5, 1e3], [1e-3, np.nan, 1e-3]).tolist() == ["", "", "laminar"]
