"""How likely each cause was before anyone looked, and how large it might be: every prior in one table, with its reason."""

from __future__ import annotations

from typing import NamedTuple


class Belief(NamedTuple):
    """One line of the table of priors."""

    probability: float
    """Prior probability of the cause [-]."""
    size: str
    """Prior of its size, in words."""
    because: str
    """Why that prior."""


BELIEFS: dict[str, Belief] = {
    "nothing unusual": Belief(
        0.34,
        "the wall within new pipe's range, or up to twice its roughest",
        "most sections tested are sound; without a material the range is that of all new pipe",
    ),
    "rough wall": Belief(
        0.26,
        "roughness log-uniform from there to 0.05 of the bore",
        "roughening is what ages most pipes; beyond 0.05 of the bore it is not a roughness",
    ),
    "reduced bore": Belief(
        0.10,
        "bore less by 0.5 to 37 %, log-uniform (area down to 40 %); wall as new",
        "scale and deposits; a pipe choked further is known before it is tested",
    ),
    "local loss": Belief(
        0.10,
        "K log-uniform from 0.5 to 500; wall as new",
        "a valve not fully open: half shut has K about 3 to 30, nearly shut some hundred",
    ),
    "gauge offset": Belief(
        0.05,
        "normal, 3 or 10 times what is stated of gauges and survey, or of the levelling where there is a static",
        "knocked gauges and wrong elevations go far beyond limits; after a static it is a fifth as likely",
    ),
    "leak or open branch": Belief(
        0.05,
        "a steady flow log-uniform from 0.5 to 50 % of the largest metered, anywhere; or a like share of the flow",
        "a service or a valve left open between meter and section end, or a parallel main",
    ),
    "trapped air": Belief(
        0.03,
        "head step log-uniform from 0.03 to 6 m whenever water flows; wall as new",
        "an air pocket stands as high as the dip it hides behind",
    ),
    "meter error": Belief(
        0.05,
        "gain normal with 3 times what is stated or 5 %, with 15 % or with 40 %; zero normal with 1 or 6 % of the largest flow",
        "wrong meter factor, worn parts, bad mounting; a low-flow cut-off hides a flow, also during a static",
    ),
    "wrong unit or swapped channel": Belief(
        0.02,
        "the ratios between common units, gauge for absolute pressure, taps swapped; wall as new",
        "it happens once in a while, and then it is exact",
    ),
}
"""Priors of all causes; two together have the product of theirs."""
NOTHING = "nothing unusual"
AFTER_STATIC = 0.2
"""How much less likely a gauge offset is once a static has taken it off: it would have to come afterwards [-]."""
BRANCH_SHARE = 0.25
"""Prior share of a branch that takes a share of the flow among all leaks and branches [-]."""
