"""Flow devices, a differential transmitter, loggers and wave speed of a section file."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import get_args

import numpy as np

from fieldfit.errors import InputError, near_miss
from fieldfit.field.accuracy import accuracy
from fieldfit.field.constrictions import CONSTRICTIONS, TAPPINGS, Constriction, Tappings, Throat, constriction_accuracy
from fieldfit.field.differential import Differential, as_gauges
from fieldfit.field.flow_devices import COEFFICIENT_LIMIT, OUTLET_COEFFICIENTS, Outlet, pitot_accuracy
from fieldfit.field.quantities import uncertain
from fieldfit.field.section import Meter, Tap
from fieldfit.field.section_log import read_signal
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Accuracy, Uncertain
from fieldfit.field.units import shown, unit
from fieldfit.hydraulics.liquids import Liquid

PLAIN = ("meter", "weir", "bucket")
"""Devices that log a flow as it is."""
DEVICES = (*PLAIN, "pitot", *CONSTRICTIONS)
"""Every flow device."""
FLOW = "flow"
"""Name of a flow that is summed over outlets and has no column of its own."""


def fill_in(top: TomlTable) -> TomlTable:
    """Return a section file with what its devices make superfluous: gauges of a transmitter's taps, a pitot's column."""
    values = dict(top.values)
    taps = values.get("tap")
    if "differential" in values and isinstance(taps, list):
        values["tap"] = [{"accuracy": "0", **one} if isinstance(one, dict) else one for one in taps]
    flow = values.get("flow")
    if "outlet" in values and isinstance(flow, dict):
        values["flow"] = {"column": FLOW, "accuracy": "0", **flow}
    return replace(top, values=values)


def read_device(
    top: TomlTable, flow: TomlTable, pipe: tuple[Uncertain, Liquid, float], plain: Callable[[], Meter]
) -> Meter:
    """Return the meter: as it is, or a device whose flow is worked out from pressures.

    Parameters
    ----------
    top, flow : TomlTable
        The file and its `[flow]` table.
    pipe : tuple of Uncertain, Liquid and float
        Bore of the section [m], what flows, and its temperature [°C].
    plain : callable
        Reads a meter that logs its flow.

    Raises
    ------
    InputError
        When a device or its measures cannot be read.
    """
    name = flow.text("device") or ("pitot" if "outlet" in top.values else "meter")
    if name not in DEVICES:
        advice = f"{near_miss(name, DEVICES)}Devices are: {', '.join(DEVICES)}."
        raise InputError(f"'{shown(name)}' is no flow device that fieldfit knows", advice).at(flow.where("device"))
    tables = top.tables("outlet")
    if (name == "pitot") != bool(tables):
        seen = "a pitot has no [[outlet]]" if name == "pitot" else f"there is an [[outlet]], and the device is a {name}"
        advice = 'Write [[outlet]] for each hydrant outlet: column = "pitot", diameter = "2.5 in", edge = "rounded".'
        raise InputError(seen, advice).at(flow.where("device"))
    if name in PLAIN:
        return plain()
    bore, liquid, degrees = pipe
    density = float(liquid.density_kg_m3(np.array([degrees]))[0])
    if name == "pitot":
        outlets = tuple(_outlet(table) for table in tables)
        return Meter(
            column=flow.text("column") or FLOW,
            accuracy=pitot_accuracy(outlets, density),
            serial=flow.text("meter"),
            outlets=outlets,
        )
    throat = _throat(flow, name, bore)
    return Meter(
        column=flow.needed("column"),
        accuracy=constriction_accuracy(throat, density),
        serial=flow.text("meter"),
        unit=_pressure_unit(flow),
        throat=throat,
    )


def said_of_devices(top: TomlTable, meter: Meter) -> list[str]:
    """Return sentences on what the file says and a device makes superfluous."""
    said = []
    flow, taps = top.values.get("flow"), top.values.get("tap")
    if isinstance(flow, dict) and meter.outlets and flow.get("accuracy") != "0":
        said.append("The accuracy in [flow] was not used: that of a pitot follows from its outlets.")
    if isinstance(flow, dict) and meter.throat is None and {"throat", "throat_pipe", "tappings"} & set(flow):
        said.append("The throat in [flow] was not used: the device is no orifice, nozzle or venturi.")
    if "differential" in top.values and isinstance(taps, list) and any(one.get("accuracy") != "0" for one in taps):
        said.append("The gauges of the taps were not used: one transmitter reads the difference between them.")
    outlets = top.values.get("outlet")
    if isinstance(outlets, list) and any("coefficient" not in one for one in outlets):
        said.append(
            f"Coefficients of hydrant outlets were taken as good to ±{100.0 * COEFFICIENT_LIMIT:g} %: write "
            'coefficient = "0.90 ± 3 %" to change it.'
        )
    return said


def _outlet(table: TomlTable) -> Outlet:
    """Return one hydrant outlet."""
    with table.at("diameter"):
        diameter = _positive(uncertain(table.needed("diameter"), "length", "2.5 in", "0.5 %"))
    edge, given = table.text("edge"), table.number_or_text("coefficient")
    if edge is not None and edge not in OUTLET_COEFFICIENTS:
        advice = f"{near_miss(edge, OUTLET_COEFFICIENTS)}Write one of: {', '.join(OUTLET_COEFFICIENTS)}."
        raise InputError(f"'{shown(edge)}' is no edge of an outlet", advice).at(table.where("edge"))
    if edge is None and given is None:
        advice = (
            'Write edge = "rounded", "square" or "projecting" after feeling inside the outlet, or coefficient = "0.9".'
        )
        raise InputError("the outlet's coefficient is not known", advice).at(table.where("coefficient"))
    usual = f"{100.0 * COEFFICIENT_LIMIT:g} %"
    with table.at("coefficient"):
        text = given or f"{OUTLET_COEFFICIENTS[edge or 'rounded']:g}"
        coefficient = _positive(uncertain(text, "ratio", "0.9", usual))
        if coefficient.value > 1.05:
            raise InputError(f"a coefficient of {coefficient.value:g} is more than all", "Write it like 0.9.")
    return Outlet(
        column=table.needed("column"),
        diameter=diameter,
        coefficient=coefficient,
        accuracy=_accuracy(table),
        pumper=table.flag("pumper"),
        unit=_pressure_unit(table),
    )


def _throat(flow: TomlTable, name: str, bore: Uncertain) -> Throat:
    """Return a constriction."""
    with flow.at("throat"):
        text = flow.text("throat")
        if text is None:
            raise InputError(f"the throat of the {name} is missing", 'Write throat = "60 mm ± 0.1 %" in [flow].')
        throat = _positive(uncertain(text, "length", "60 mm", "0.1 %"))
    with flow.at("throat_pipe"):
        text = flow.text("throat_pipe")
        pipe = bore if text is None else _positive(uncertain(text, "length", "100 mm", "0.4 %"))
        if not 0.1 <= throat.value / pipe.value <= 0.8:
            seen = f"the throat is {throat.value / pipe.value:.2f} of the pipe it sits in ({1e3 * pipe.value:.4g} mm)"
            raise InputError(seen, "ISO 5167 holds from 0.1 to 0.8: check throat and throat_pipe.")
    tappings = flow.text("tappings") or "corner"
    if tappings not in TAPPINGS:
        advice = f"{near_miss(tappings, TAPPINGS)}Write one of: {', '.join(TAPPINGS)}."
        raise InputError(f"'{shown(tappings)}' are no tappings of ISO 5167", advice).at(flow.where("tappings"))
    kind: Constriction = next(one for one in get_args(Constriction) if one == name)
    taken: Tappings = next(one for one in TAPPINGS if one == tappings)
    return Throat(
        kind=kind,
        throat=throat,
        pipe=pipe,
        tappings=taken,
        accuracy=_accuracy(flow),
        signal=read_signal(flow, ("pressure",)),
    )


def read_differential(
    table: TomlTable | None, taps: tuple[Tap, ...], liquid: Liquid
) -> tuple[Differential | None, tuple[Tap, ...]]:
    """Return the transmitter between two taps, and the taps as a pair of gauges that read what it does.

    Parameters
    ----------
    table : TomlTable or None
        The `[differential]` table.
    taps : tuple of Tap
        The taps as places.
    liquid : Liquid
        What flows, and fills the lines.

    Raises
    ------
    InputError
        When there are other than two taps, or the hose's water is given without the taps' elevations.
    """
    if table is None:
        return None, taps
    if len(taps) != 2:
        seen = f"a differential transmitter joins two taps, and there are {len(taps)}"
        raise InputError(seen, "Keep the two taps that it joins.").at(table.where("column"))
    hose = None
    text = table.text("hose_temperature")
    upper, lower = (tap.elevation for tap in taps)
    rise = None
    if upper is not None and lower is not None:
        rise = Uncertain(value=lower.value - upper.value, standard=float(np.hypot(upper.standard, lower.standard)))
    if text is not None:
        with table.at("hose_temperature"):
            hose = uncertain(text, "temperature", "25 degC", "2 K")
        if rise is None:
            advice = (
                'Write elevation = "1.20 m" for both taps: columns of other water weigh by the height between them.'
            )
            raise InputError("the hose's water needs the taps' elevations", advice).at(table.where("hose_temperature"))
    found = Differential(
        column=table.needed("column"),
        accuracy=_accuracy(table),
        serial=table.text("serial"),
        unit=_pressure_unit(table),
        signal=read_signal(table, ("pressure",)),
        rise=rise,
        hose_temperature=hose,
        hose_density=None if hose is None else _density(liquid, hose),
    )
    return found, as_gauges(found, taps)


def _density(liquid: Liquid, degrees: Uncertain) -> Uncertain:
    """Return the density of the liquid at a temperature that is not quite known [kg/m³]."""
    span = max(degrees.standard, 0.01)
    below, here, above = liquid.density_kg_m3(degrees.value + span * np.array([-1.0, 0.0, 1.0]))
    return Uncertain(value=float(here), standard=abs(float(above - below)) / 2.0 * degrees.standard / span)


def _accuracy(table: TomlTable) -> Accuracy:
    """Return the accuracy of a gauge or transmitter."""
    with table.at("accuracy"):
        return accuracy(table.number_or_text("accuracy") or "", "pressure")


def _pressure_unit(table: TomlTable) -> str | None:
    """Return the unit of a pressure column, checked."""
    text = table.text("unit")
    if text is not None:
        with table.at("unit"):
            unit(text, "pressure")
    return text


def _positive(value: Uncertain) -> Uncertain:
    """Return a size that is one."""
    if value.value <= 0.0:
        raise InputError(f"{value.value:g} is no size", "Write a size above zero.")
    return value
