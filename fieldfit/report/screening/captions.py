"""One sentence under each figure of the screening page."""

from __future__ import annotations

import numpy as np

from fieldfit.report.digits import fixed
from fieldfit.report.figures.cloud import MOST
from fieldfit.report.screening.finding import CampaignScreen


def cloud(campaign: CampaignScreen, reach: int) -> str:
    """Say what to see in the cloud of rows."""
    heads = campaign.reaches[reach].heads
    many = max([campaign.screening.used, *(number for _, number in campaign.screening.counts)], default=0) > MOST
    thinned = " Many rows are drawn thinned." if many else ""
    if heads.levelling is None and heads.elevation_drop is None:
        return f"Nothing levels the gauges, so the whole cloud may stand too high or too low.{thinned}"
    if not np.any(~heads.plateaus.static):
        return f"No steady flow: there is no curve to see.{thinned}"
    return (
        "Sound rows lie on one curve that leaves zero flow at zero head loss and steepens with flow; a second curve, a tilt "
        f"or a cloud without one points to a fault.{thinned}"
    )


def statics(campaign: CampaignScreen, reach: int) -> str:
    """Say what to see in the statics."""
    heads = campaign.reaches[reach].heads
    level = heads.levelling
    if level is None:
        return ""
    drift = "" if level.drift_m is None else f" From first to last they drifted by {fixed(level.drift_m, 3)} m."
    if heads.elevation_drop is None:
        return f"The heights of the gauges were not surveyed, so the statics alone level them.{drift}"
    agree = abs(level.offset_m) <= 2.5 * level.expected_m
    told = "agree with" if agree else "lie off"
    return (
        f"At rest the gauges {told} the surveyed heights within their stated limits.{drift}"
        if agree
        else (
            f"At rest the gauges {told} the surveyed heights by more than the stated limits allow: a wrong elevation, a wrong "
            f"zero, or water that did not stand still.{drift}"
        )
    )
