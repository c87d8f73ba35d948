"""Growth laws: which one the campaigns favour, and what is believed without them."""

import numpy as np
import pytest
from fluids.friction import Colebrook

from fieldfit.decisions.growth import LAWS, History, weigh_laws
from fieldfit.decisions.growth_prior import as_new, colebrook_white_rate, open_rate, published_rate
from fieldfit.field.outlook import Outlook
from fieldfit.field.uncertain import Uncertain

YEARS = np.array([1.0, 4.0, 9.0, 16.0, 25.0])
GROWTH = {
    "linear": 0.1e-3 * YEARS,
    "parabolic": 0.5e-3 * np.sqrt(YEARS),
    "saturating": 2.0e-3 * (1.0 - np.exp(-YEARS / 5.0)),
}


def history(grown, own=0.002, common=0.02):
    wall = 0.26e-3 + grown
    f = np.log([Colebrook(Re=1e5, eD=e / 0.15, tol=1e-13) for e in wall])
    count = len(grown)
    return History(
        years=YEARS[:count],
        stage=np.zeros(count, dtype=np.int64),
        ln_friction=f,
        covariance=common**2 * np.ones((count, count)) + own**2 * np.eye(count),
        reynolds=np.full(count, 1e5),
        bore_m=np.full(count, 0.15),
        starts=(as_new("uncoated cast iron", False),),
        rate=open_rate("uncoated cast iron"),
        correlation_standard=0.05,
    )


@pytest.mark.parametrize("name", GROWTH)
def test_the_law_behind_the_campaigns_is_favoured(name):
    found = weigh_laws(history(GROWTH[name]))
    assert max(found.probabilities, key=lambda pair: pair[1])[0] == name
    assert sum(share for _, share in found.probabilities) == pytest.approx(1.0)


def test_laws_are_averaged_when_two_campaigns_do_not_decide():
    found = weigh_laws(history(GROWTH["linear"][:2], own=0.01))
    assert min(share for _, share in found.probabilities) > 0.05
    assert sum(len(draws.level) for draws in found.draws) == pytest.approx(4000, abs=3)


def test_the_rate_comes_back_and_widens_with_what_is_shared():
    def span(**errors):
        found = weigh_laws(history(GROWTH["linear"], **errors))
        rates = np.concatenate([draws.rate_m_year[:, 0] for draws in found.draws if draws.law.name == "linear"])
        return np.quantile(rates, (0.025, 0.975))

    low, high = span()
    assert low < 0.1e-3 < high
    wide = span(common=0.08)
    assert np.log(wide[1] / wide[0]) > np.log(high / low)


def test_campaigns_that_follow_no_law_are_noticed():
    zigzag = np.array([0.1e-3, 1.4e-3, 0.4e-3, 1.8e-3, 0.6e-3])
    found = weigh_laws(history(zigzag))
    assert found.misfit > 6.63 * found.freedom
    assert weigh_laws(history(GROWTH["linear"])).misfit < found.freedom * 6.63


@pytest.mark.parametrize("law", LAWS, ids=[law.name for law in LAWS])
def test_each_law_starts_at_nothing_rises_and_has_its_inverse(law):
    years, constant = np.linspace(0.0, 40.0, 9), np.full(9, 12.0)
    grown = law.grown(years, constant)
    assert grown[0] == 0.0
    assert np.all(np.diff(grown) > 0.0)
    assert law.until(grown, constant) == pytest.approx(years, abs=1e-9)


def test_what_is_believed_of_the_rate_in_order():
    own = Outlook(rate_m_year=Uncertain(value=0.05e-3, standard=0.0145e-3), langelier=-1.3, ph=7.0)
    assert published_rate(own, "carbon steel").source == "your own rate"
    assert "Lamont" in published_rate(Outlook(langelier=-1.3, ph=7.0), "carbon steel").source
    assert published_rate(Outlook(ph=7.0), None).median == colebrook_white_rate(7.0)
    low, high = published_rate(Outlook(), None).span
    assert low < 0.025e-3
    assert high > 0.76e-3
    assert "no published growth rate for PVC" in published_rate(Outlook(), "PVC").source


def test_a_test_of_the_pipe_as_new_outdoes_the_table():
    assert as_new("uncoated cast iron", True).ln_standard > as_new("uncoated cast iron", False).ln_standard
