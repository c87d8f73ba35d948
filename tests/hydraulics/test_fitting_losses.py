"""Loss coefficients of fittings: names, sense of the values, refusals."""

import math

import pytest
from fluids import fittings
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.errors import InputError
from fieldfit.hydraulics.fitting_losses import FITTING_KINDS, fitting_k


@given(st.sampled_from(FITTING_KINDS), st.floats(0.01, 2.0))
def test_every_fitting_has_a_sensible_loss_at_any_bore(kind, bore_m):
    loss = fitting_k(kind, bore_m)
    assert 0.01 < loss.k < 30.0
    assert loss.relative_standard == pytest.approx(0.3 / math.sqrt(3))
    assert kind in loss.source


@pytest.mark.parametrize(
    ("kind", "low", "high"),
    [
        # MEM, Crane TP-410 multiples of its f_T (0.015 for 6 in pipe): 14, 20, 30, 16, 20, 60, 8, 3, 18, 340, 45, 100.
        ("90 degree long-radius bend", 14, 14),
        ("90 degree short-radius bend", 20, 20),
        ("90 degree threaded elbow", 30, 30),
        ("45 degree threaded elbow", 16, 16),
        ("threaded tee, flow through the run", 20, 20),
        ("threaded tee, flow through the branch", 60, 60),
        ("gate valve, open", 8, 8),
        ("ball valve, open", 3, 3),
        ("plug valve, open", 18, 18),
        ("globe valve, open", 340, 340),
        ("butterfly valve, open", 45, 45),
        ("swing check valve", 50, 100),
    ],
)
def test_losses_agree_with_the_multiples_the_trade_knows(kind, low, high):
    k = fitting_k(kind, 0.154).k
    assert 0.95 * low * 0.015 <= k <= 1.06 * high * 0.015


def test_other_handbooks_lie_within_the_stated_scatter():
    bore, reynolds = 0.154, 1e7
    size = bore / 0.0254
    others = {
        "90 degree long-radius bend": fittings.Hooper2K(
            Di=size, Re=reynolds, name="Elbow, 90°, Long-radius (R/D = 1.5), All types"
        ),
        "90 degree short-radius bend": fittings.Hooper2K(
            Di=size, Re=reynolds, name="Elbow, 90°, Standard (R/D = 1), Flanged/welded"
        ),
        "gate valve, open": fittings.Hooper2K(Di=size, Re=reynolds, name="Valve, Gate, Full line size, Beta = 1"),
        "globe valve, open": fittings.Hooper2K(Di=size, Re=reynolds, name="Valve, Globe, Standard"),
        "swing check valve": fittings.Hooper2K(Di=size, Re=reynolds, name="Valve, Check, Swing"),
        "tilting-disc check valve": fittings.Hooper2K(Di=size, Re=reynolds, name="Valve, Check, Tilting-disc"),
        "90 degree mitre bend": fittings.bend_miter(90.0, Re=1e6, method="Miller", Di=bore),
        "entrance, sharp-edged": fittings.entrance_sharp("Rennels"),
    }
    ratios = {kind: fitting_k(kind, bore).k / k for kind, k in others.items()}
    assert sum(0.7 <= ratio <= 1.3 for ratio in ratios.values()) >= 6, ratios
    assert all(0.5 <= ratio <= 2.0 for ratio in ratios.values()), ratios


@pytest.mark.parametrize("kind", FITTING_KINDS)
def test_a_wider_pipe_never_loses_more(kind):
    ks = [fitting_k(kind, bore_m).k for bore_m in (0.025, 0.05, 0.1, 0.2, 0.4)]
    assert ks == sorted(ks, reverse=True)


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("Open gate valve", "gate valve, open"),
        ("gate valve (fully open)", "gate valve, open"),
        ("90° long radius bend", "90 degree long-radius bend"),
        ("long-radius elbow, 90 deg", "90 degree long-radius bend"),
        ("Screwed elbow 45 degrees", "45 degree threaded elbow"),
        ("90 degree miter bend", "90 degree mitre bend"),
        ("swing non-return valve", "swing check valve"),
        ("tilting disk check valve", "tilting-disc check valve"),
        ("tee run", "tee, flow through the run"),
    ],
)
def test_the_ways_it_is_said(text, kind):
    assert fitting_k(text, 0.1) == fitting_k(kind, 0.1)


def test_no_two_fittings_share_a_name():
    assert len({fitting_k(kind, 0.1).source for kind in FITTING_KINDS}) == len(FITTING_KINDS)


@pytest.mark.parametrize(
    ("kind", "message"),
    [
        ("gate valve", r"'gate valve' is not known\. Did you mean 'gate valve, open'"),
        ("90 degree bend", "Did you mean '90 degree"),
        ("whirligig", "Known: 90 degree long-radius bend"),
        ("", "not known"),
    ],
)
def test_an_unknown_fitting_is_refused_with_the_list(kind, message):
    with pytest.raises(InputError, match=message):
        fitting_k(kind, 0.1)


@pytest.mark.parametrize("bore_m", [0.0, -0.1, math.nan, math.inf])
def test_a_bore_that_is_none_is_refused(bore_m):
    with pytest.raises(InputError, match="bore"):
        fitting_k("gate valve, open", bore_m)
