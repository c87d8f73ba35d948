"""Published figures on the ageing of pipes, through the whole chain.

READ: seen in the source or a quotation of it; MEM: recalled from the named publication; CALC: computed independently.
"""

import datetime as dt

import numpy as np
import pytest

from fieldfit.decisions.ageing_history import new_roughness
from fieldfit.decisions.duty import Duty
from fieldfit.decisions.forecast import Carried, forecast
from fieldfit.decisions.growth import LAWS, Draws
from fieldfit.decisions.growth_prior import (
    as_new,
    colebrook_white_rate,
    lamont_rate,
    published_rate,
    sharp_walski_c,
)
from fieldfit.decisions.visits import Stage
from fieldfit.field.outlook import Outlook
from fieldfit.hydraulics.hazen_williams import c_of_roughness

INCH = 0.0254
BORES_IN = (3.0, 6.0, 12.0, 24.0, 48.0)
VELOCITY, VISCOSITY = 0.9, 1.138e-6
# Lamont, J. AWWA 73(5), 1981: C at 0.9 m/s of uncoated cast iron by bore (MEM; three cells READ).
LAMONT = {
    (0.0, None): (121, 125, 130, 132, 134),
    (30.0, 0.0): (100, 106, 112, 117, 120),
    (30.0, -1.3): (83, 90, 97, 102, 107),
    (30.0, -2.6): (59, 70, 78, 83, 89),
    (30.0, -3.9): (41, 50, 58, 66, 73),
    (60.0, 0.0): (90, 97, 102, 107, 112),
    (60.0, -1.3): (69, 79, 85, 92, 96),
    (60.0, -2.6): (49, 58, 66, 72, 78),
    (60.0, -3.9): (30, 39, 48, 56, 62),
}
RATES_MM_YEAR = {0.0: 0.025, -1.3: 0.076, -2.6: 0.25, -3.9: 0.76}


LAMONT_NEW = 0.25e-3
"""Lamont's new uncoated cast iron [m] (MEM)."""


def forecast_c(years, rate, bore, start=LAMONT_NEW):
    """C that the chain forecasts for a main of uncoated cast iron, so many years after laying."""
    laid = dt.date(1950, 1, 1)
    duty = Duty(
        flow_m3_s=VELOCITY * np.pi / 4.0 * bore**2,
        given=True,
        temperature_degc=15.0,
        viscosity_m2_s=VISCOSITY,
        density_kg_m3=999.1,
        bore_m=bore,
        length_m=300.0,
        fitting_k=0.0,
        head_m=None,
    )
    draws = Draws(
        law=LAWS[0],
        rate_m_year=np.full((4, 1), rate),
        constant_years=np.ones(4),
        start_m=np.full((4, 1), start),
        level=np.zeros(4),
    )
    stage = Stage(start=laid, event="laid", first=0, material="uncoated cast iron")
    until = laid + dt.timedelta(days=max(1, round(365.25 * years)))
    carried = (Carried(draws=draws, to_c=np.zeros(4), to_loss=np.zeros(4)),)
    return forecast(carried, (stage,), (duty,), until, new_roughness("uncoated cast iron")).c.middle[-1]


@pytest.mark.parametrize(("years", "langelier"), LAMONT)
@pytest.mark.parametrize("column", range(5))
def test_lamonts_table_comes_out_of_material_rate_and_bore(years, langelier, column):
    rate = 1e-12 if langelier is None else published_rate(Outlook(langelier=langelier), "uncoated cast iron").median
    c = forecast_c(years, rate, BORES_IN[column] * INCH)
    assert c == pytest.approx(LAMONT[years, langelier][column], abs=2.5)


def test_our_own_new_pipe_stays_as_close_to_lamonts_table():
    # Our table's new uncoated cast iron is 0.26 mm, after ASHRAE, and not Lamont's 0.25: 0.1 C at the most.
    ours = as_new("uncoated cast iron", False).median
    apart = []
    for (years, langelier), row in LAMONT.items():
        rate = 1e-12 if langelier is None else lamont_rate(langelier)
        apart += [forecast_c(years, rate, bore * INCH, ours) - c for bore, c in zip(BORES_IN, row, strict=True)]
    assert max(map(abs, apart)) < 2.6
    assert np.std(apart) < 1.2


@pytest.mark.parametrize(("langelier", "rate"), RATES_MM_YEAR.items())
def test_lamonts_growth_by_langelier_index(langelier, rate):
    # Lamont 1981, the growth that belongs to each trend (MEM).
    assert 1e3 * lamont_rate(langelier) == pytest.approx(rate, rel=1e-6)


@pytest.mark.parametrize(("ph", "rate"), [(6.0, 2.0), (7.0, 0.64), (8.0, 0.20), (9.0, 0.064)])
def test_colebrook_and_whites_growth_by_ph(ph, rate):
    # Colebrook and White 1937, 2 log10 α = 3.8 − pH with α in inches a year (MEM).
    assert 1e3 * colebrook_white_rate(ph) == pytest.approx(rate, rel=0.02)


@pytest.mark.parametrize(("relative", "c"), [(1e-3, 129.6), (1e-2, 92.4), (5e-2, 66.4)])
def test_sharp_and_walskis_relation(relative, c):
    # Sharp and Walski 1988 (CALC from their formula).
    assert sharp_walski_c(relative * 0.15, 0.15, 160.0) == pytest.approx(c, abs=0.05)


def test_sharp_and_walskis_relation_is_capped_where_it_passes_the_smooth_limit():
    bore = 0.15
    smooth = float(c_of_roughness(0.0, VELOCITY * np.pi / 4.0 * bore**2, bore, VISCOSITY))
    # It exceeds the smooth limit below about 2e-4.
    assert 18.0 - 37.2 * np.log10(1.5e-4) > smooth
    assert sharp_walski_c(1.5e-4 * bore, bore, smooth) == smooth
    assert sharp_walski_c(0.0, bore, smooth) == smooth
    assert sharp_walski_c(1e-3 * bore, bore, smooth) < smooth


@pytest.mark.parametrize("relative", [1e-3, 3e-3, 1e-2, 5e-2])
def test_sharp_and_walskis_data_band_holds_our_hydraulics(relative):
    # Their 319 points scatter by ±15 C, 95 %.
    bore = 0.15
    ours = float(c_of_roughness(relative * bore, VELOCITY * np.pi / 4.0 * bore**2, bore, VISCOSITY))
    assert ours == pytest.approx(sharp_walski_c(relative * bore, bore, 160.0), abs=15.0)


def test_published_rates_are_as_wide_as_published_rates_differ():
    # NEWWA 1935 (READ): rates for one water differ by up to 8 times.
    for outlook in (Outlook(langelier=-1.3), Outlook(ph=7.0)):
        low, high = published_rate(outlook, "uncoated cast iron").span
        assert high / low == pytest.approx(8.0, rel=1e-6)
