"""Figures of a finding, each a matplotlib figure without pyplot."""

from __future__ import annotations

from fieldfit.report.figures.budget import budget
from fieldfit.report.figures.clocks import clocks
from fieldfit.report.figures.cloud import cloud
from fieldfit.report.figures.curves import Curves, curves
from fieldfit.report.figures.explanations import explanations
from fieldfit.report.figures.friction_chart import friction_chart
from fieldfit.report.figures.hazen_williams import hazen_williams
from fieldfit.report.figures.head_loss import head_loss
from fieldfit.report.figures.residuals import residuals
from fieldfit.report.figures.rows import rows
from fieldfit.report.figures.statics import statics
from fieldfit.report.figures.svg import svg

__all__ = [
    "Curves",
    "budget",
    "clocks",
    "cloud",
    "curves",
    "explanations",
    "friction_chart",
    "hazen_williams",
    "head_loss",
    "residuals",
    "rows",
    "statics",
    "svg",
]
