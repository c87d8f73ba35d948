"""Which tap the others contradict, when all of them cannot be right."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from fieldfit.inference.survey_errors import with_more
from fieldfit.inference.survey_finding import Suspect
from fieldfit.inference.survey_fit import fit_survey, free_walls
from fieldfit.inference.survey_model import SurveyModel

ANYTHING_M = 100.0
"""Standard deviation of a head that is left open [m]."""
MOST = 0.7
"""Share of the misfit that one tap must account for to be named."""


def suspect(model: SurveyModel) -> Suspect | None:
    """Find the tap that, read too high or too low by one amount throughout, would account for most of the misfit.

    Parameters
    ----------
    model : SurveyModel
        The equations of the survey.

    Returns
    -------
    Suspect or None
        None when no single tap does.
    """
    layout, noise = free_walls(model), model.readings.noise_m2
    whole = fit_survey(model, layout, noise).chi_square
    taps, between = model.readings.section.taps, model.readings.between
    found = []
    for index in range(len(taps)):
        errors = with_more(model.errors, "offset", head_m=ANYTHING_M * between[:, index : index + 1].T)
        fit = fit_survey(replace(model, errors=errors), layout, noise)
        found.append((fit.chi_square, float(ANYTHING_M * fit.u[-1]), taps[index].column))
    least, offset, column = min(found)
    share = 1.0 - least / whole if whole > 0.0 else 0.0
    return Suspect(column=column, offset_m=offset, share=float(np.clip(share, 0.0, 1.0))) if share >= MOST else None
