"""The figures: units on every axis, the right things drawn, the same bytes every time."""

from dataclasses import replace

import numpy as np
import pytest
from invented import no_estimate, plant_line, smooth_pipe, street_main

from fieldfit.hydraulics.friction import STANDARD_GRAVITY, colebrook_white
from fieldfit.report import figures


def six(finding):
    campaign = finding.campaigns[0]
    reach = campaign.reaches[0]
    curves = figures.curves(reach)
    return {
        "head loss": figures.head_loss(curves),
        "chart": figures.friction_chart(curves),
        "c": figures.hazen_williams(curves),
        "residuals": figures.residuals(campaign, reach),
        "budget": figures.budget(reach),
        "rows": figures.rows(campaign, finding.section),
    }


@pytest.fixture(scope="module")
def drawn():
    return six(plant_line())


def texts(figure):
    return [text.get_text() for ax in figure.axes for text in ax.texts]


def test_every_named_axis_carries_its_unit(drawn):
    for name, figure in drawn.items():
        labels = [label for ax in figure.axes for label in (ax.get_xlabel(), ax.get_ylabel()) if label]
        assert labels
        for label in labels:
            assert ("[" in label and "]" in label) or label == "the same over time", (name, label)


def test_the_fit_is_colebrook_white_at_the_best_roughness():
    reach = plant_line().campaigns[0].reaches[0]
    curves = figures.curves(reach)
    bore, length = reach.readings.bore.value, reach.readings.length.value
    velocity = curves.flow_m3_s / (np.pi / 4 * bore**2)
    reynolds = velocity * bore / reach.wall.viscosity_m2_s
    turbulent = reynolds >= 4000
    f = colebrook_white(reynolds[turbulent], reach.wall.roughness_m.best / bore)
    loss = f * length / bore * velocity[turbulent] ** 2 / (2 * STANDARD_GRAVITY)
    assert curves.loss_m(curves.by_flow.fit)[turbulent] == pytest.approx(loss, rel=1e-12)


def test_nothing_is_drawn_in_the_critical_zone():
    lines = figures.curves(plant_line(top_flow_m3_s=0.0006).campaigns[0].reaches[0]).by_flow
    critical = (lines.reynolds > 2100) & (lines.reynolds < 4000)
    assert critical.any()
    assert np.isnan(lines.fit[critical]).all()
    assert np.isfinite(lines.fit[~critical]).all()


def test_bands_lie_around_the_fit_and_end_where_the_wall_says():
    reach = plant_line().campaigns[0].reaches[0]
    lines = figures.curves(reach).chart
    assert (lines.wide[0] < lines.own[0]).all()
    assert (lines.own[0] < lines.fit).all()
    assert (lines.fit < lines.own[1]).all()
    assert (lines.own[1] < lines.wide[1]).all()
    at = [np.interp(np.log(reach.wall.reynolds), np.log(lines.reynolds), end) for end in lines.wide]
    assert at == pytest.approx(reach.wall.friction_factor.with_correlation, rel=2e-3)


def test_below_smooth_the_band_follows_the_friction_factor():
    reach = smooth_pipe().campaigns[0].reaches[0]
    lines = figures.curves(reach).chart
    assert lines.fit is None
    ratio = reach.wall.friction_factor.with_correlation[0] / reach.wall.smooth_friction_factor
    assert lines.wide[0] == pytest.approx(lines.smooth * ratio, rel=1e-12)


def test_readings_and_bars_are_where_the_values_are(drawn):
    values = plant_line().campaigns[0].reaches[0].wall.plateaus
    ax = drawn["head loss"].axes[0]
    dots = max((line for line in ax.lines if line.get_marker() == "o"), key=lambda line: len(line.get_xdata()))
    assert dots.get_xdata() == pytest.approx(values.flow_m3_s * 1e3)
    assert dots.get_ydata() == pytest.approx(values.friction_loss_m)


def test_lines_are_named_in_place(drawn):
    assert {"fit", "smooth", "new pipe\n± 10 %"} <= set(texts(drawn["head loss"]))
    assert {"laminar", "critical zone", "smooth", "0.05", "0.001"} <= set(texts(drawn["chart"]))
    assert {"253 rows used", "36 unsteady", "upstream", "downstream", "static", "2"} <= set(texts(drawn["rows"]))


def test_a_limit_is_drawn_as_a_limit():
    assert "highest that\nfits, 95 %" in texts(six(smooth_pipe())["head loss"])


def test_small_errors_share_one_bar():
    finding = plant_line()
    reach = finding.campaigns[0].reaches[0]
    small = tuple(
        replace(reach.wall.budget[-1], error=f"tiny {n}", share=0.001, measurement_share=0.0) for n in range(9)
    )
    wall = replace(reach.wall, budget=reach.wall.budget + small)
    labels = [tick.get_text() for tick in figures.budget(replace(reach, wall=wall)).axes[0].get_yticklabels()]
    assert "9 smaller ones" in labels or "10 smaller ones" in labels
    assert "bore" in labels


def test_the_same_figure_gives_the_same_bytes():
    assert figures.svg(six(plant_line())) == figures.svg(six(plant_line()))


def test_a_name_in_a_figure_stays_a_drawing():
    finding = plant_line(taps=("<script>", "a $x$ & b"))
    text = figures.svg({"rows": figures.rows(finding.campaigns[0], finding.section)})["rows"]
    assert "script" not in text
    assert "<text" not in text


def test_a_long_log_is_thinned():
    short, long = plant_line(), plant_line(repeat=60)
    sizes = [len(figures.svg(six(finding))["rows"]) for finding in (short, long)]
    assert long.campaigns[0].log.line.size > 10_000
    assert sizes[1] < 3 * sizes[0]


def test_a_spike_that_was_set_aside_does_not_squash_the_log():
    finding = plant_line()
    campaign = finding.campaigns[0]
    pressure = campaign.log.pressure_pa.copy()
    pressure[1, 150] = 5e6
    reason = campaign.screening.reason.copy()
    reason[150] = "outlier"
    spoiled = replace(
        campaign, log=replace(campaign.log, pressure_pa=pressure), screening=replace(campaign.screening, reason=reason)
    )
    assert figures.rows(spoiled, finding.section).axes[1].get_ylim()[1] < 600


@pytest.mark.parametrize("make", [no_estimate, street_main, lambda: plant_line(sheet=True, statics=False)])
def test_other_findings_can_be_drawn(make):
    finding = make()
    for campaign in finding.campaigns:
        drawn = {"rows": figures.rows(campaign, finding.section)}
        for k, reach in enumerate(campaign.reaches):
            curves = figures.curves(reach)
            drawn |= {f"a{k}": figures.head_loss(curves), f"b{k}": figures.friction_chart(curves)}
        assert all(text.startswith("<svg ") for text in figures.svg(drawn).values())
