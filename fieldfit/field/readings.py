"""What the plateaus of one campaign say of each reach: the readings that the fit uses."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.field.row_runs import RowRuns
from fieldfit.field.section import Meter, Tap
from fieldfit.field.uncertain import Uncertain

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Screening:
    """What became of every row of a log; N rows."""

    reason: NDArray[np.str_]
    """(N,) why a row was set aside; empty for a row that is used."""
    plateau: NDArray[np.int64]
    """(N,) number of the plateau a used row belongs to, from 1; 0 for none."""
    counts: tuple[tuple[str, int], ...]
    """Rows set aside by reason, most first."""
    block: NDArray[np.int64] | None = None
    """(N,) time block of each row of a service log, whose plateaus are groups of blocks of like flow; else None."""

    runs: RowRuns | None = None
    """What became of every row of a log too long to keep them all, of which the rows here are some; else None."""

    @property
    def rows(self) -> int:
        """Number of rows of the log."""
        return len(self.reason) if self.runs is None else self.runs.total

    @property
    def used(self) -> int:
        """Number of rows used."""
        return int(np.count_nonzero(self.plateau)) if self.runs is None else self.runs.used

    def rows_of(self, numbers: NDArray[np.int64]) -> int:
        """Return how many rows are used in some plateaus."""
        if self.runs is None:
            return int(np.count_nonzero(np.isin(self.plateau, numbers[numbers > 0])))
        return int(np.sum(self.runs.rows[np.isin(self.runs.plateau, numbers[numbers > 0])]))


@dataclass(frozen=True, slots=True, kw_only=True)
class Plateaus:
    """Steady windows of a log, statics included; K plateaus, T taps, R = T − 1 reaches."""

    number: NDArray[np.int64]
    """(K,) number of each plateau, from 1."""
    static: NDArray[np.bool_]
    """(K,) whether no water flowed."""
    start_s: Array
    """(K,) first moment [s since the log's first row]."""
    end_s: Array
    """(K,) last moment [s since the log's first row]."""
    rows: NDArray[np.int64]
    """(K,) rows in it."""
    flow_m3_s: Array
    """(K,) mean flow [m³/s]."""
    flow_slope_m3_s2: Array
    """(K,) rate of change of the flow over the plateau [m³/s²]."""
    pressure_pa: Array
    """(T, K) mean gauge pressure at each tap [Pa]."""
    temperature_degc: Array
    """(K,) mean temperature of the liquid [°C]."""
    random_pa: Array
    """(R, K) standard error of each reach's mean pressure difference at the mean flow [Pa]."""
    independent_rows: Array
    """(R, K) rows that count as independent [-]."""
    curvature_pa: Array
    """(R, K) how far the mean pressure difference lies above the one at the mean flow [Pa]."""
    flow_slope_standard_m3_s2: Array | None = None
    """(K,) standard error of `flow_slope_m3_s2` [m³/s²]; None where it is not known."""
    middle_s: Array | None = None
    """(K,) mean time of the rows of each group of a service log [s since the log's first row]; else None."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Levelling:
    """Zero-flow readings of one reach: what the gauges differ by when nothing flows."""

    offset_m: float
    """Apparent head loss at zero flow that was taken off the readings [m], mean of all statics."""
    standard_m: float
    """Standard uncertainty of what was taken off [m], drift included."""
    drift_m: float | None
    """Last static less the first [m]; None when there is only one."""
    plateaus: int
    """Number of static plateaus."""
    pressure_pa: tuple[float, float]
    """Gauge pressure at either end while static [Pa]."""
    expected_m: float
    """Standard uncertainty that the stated limits of gauges and survey allow the offset [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachReadings:
    """Readings of the reach between two taps; K flowing plateaus."""

    upstream: Tap
    """Tap at its upper end."""
    downstream: Tap
    """Tap at its lower end."""
    meter: Meter
    """The flow meter."""
    length: Uncertain
    """Distance between the taps [m]."""
    bore: Uncertain
    """As-new inside diameter [m]."""
    fitting_k: Uncertain
    """Sum of the loss coefficients between the taps [-]."""
    elevation_drop: Uncertain | None
    """Upper gauge's elevation less the lower one's [m]; None when not surveyed."""
    levelling: Levelling | None
    """What the statics gave; None without a static."""
    number: NDArray[np.int64]
    """(K,) plateau numbers."""
    flow_m3_s: Array
    """(K,) mean flow [m³/s], as metered."""
    head_loss_m: Array
    """(K,) head loss, fittings included, statics or survey already taken off [m]."""
    random_m: Array
    """(K,) standard error of the head loss at the mean flow [m], independent between plateaus."""
    pressure_pa: Array
    """(2, K) gauge pressure at either end [Pa]."""
    temperature_degc: Array
    """(K,) temperature of the liquid [°C]."""
    density_kg_m3: Array
    """(K,) its density [kg/m³]."""
    viscosity_m2_s: Array
    """(K,) its kinematic viscosity [m²/s]."""
    viscosity_standard: float
    """Relative standard uncertainty of the viscosity, temperature included [-]."""
    turbulent_from_m3_s: float
    """Flow from which the reach is surely turbulent [m³/s]."""
    set_aside: tuple[tuple[int, str], ...]
    """Plateaus of this reach that carry no roughness: number and reason."""
