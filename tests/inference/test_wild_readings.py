"""Whatever the readings, the estimate ends in one of three states and never in an error or a NaN where a number is due."""

import numpy as np
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st
from readings_maker import make_readings

from fieldfit.field.section import Correlation
from fieldfit.inference.estimate import estimate

HEADS = st.lists(st.floats(-5.0, 60.0), min_size=1, max_size=6)


@example(head=[1.0, -1.0], top=1.0, noise=1e-6, bore_relative=0.0, others=(False, 0.0))
@example(head=[34.0], top=0.25, noise=1e-6, bore_relative=0.1, others=(False, 0.0))
@settings(deadline=None, max_examples=25, suppress_health_check=[HealthCheck.too_slow])
@given(
    head=HEADS,
    top=st.floats(0.2, 8.0),
    noise=st.sampled_from([1e-6, 1e-3, 0.1, 3.0]),
    bore_relative=st.sampled_from([0.0, 0.003, 0.1]),
    others=st.tuples(st.booleans(), st.sampled_from([0.0, 0.05, 0.3])),
)
def test_any_readings_end_in_a_state(head, top, noise, bore_relative, others):
    levelled, correlation = others
    velocities = np.linspace(0.4 * top, top, len(head)) if len(head) > 1 else (top,)
    readings = make_readings(
        head=np.array(head), velocities=velocities, noise=noise, bore_relative=bore_relative, levelled=levelled
    )
    wall = estimate(readings, Correlation(standard=correlation))
    assert wall.state in ("measured", "upper limit", "no estimate")
    if wall.state == "measured":
        low, high = wall.roughness_m.with_correlation
        assert 0.0 < low <= wall.roughness_m.best <= high
    if wall.state == "upper limit":
        assert 0.0 <= wall.roughness_m.measurement[1] <= wall.roughness_m.with_correlation[1] * (1.0 + 1e-6)
    if wall.state == "no estimate":
        assert wall.because
        assert wall.advice
        assert wall.roughness_m.best is None
    if wall.friction_factor.best is not None:
        assert np.isfinite(wall.friction_factor.best)
        assert wall.friction_factor.measurement[0] <= wall.friction_factor.best <= wall.friction_factor.measurement[1]
