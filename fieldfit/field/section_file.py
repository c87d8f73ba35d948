"""The section file: what is known of the pipe before anyone looks at readings."""

from __future__ import annotations

import datetime as dt
import itertools
from pathlib import Path

from fieldfit.errors import InputError
from fieldfit.field.quantities import quantity
from fieldfit.field.section import Campaign, Correlation, Fitting, Section, Tap
from fieldfit.field.section_bore_evidence import read_bore_evidence, read_deposit
from fieldfit.field.section_contract import read_contract
from fieldfit.field.section_devices import fill_in, read_device, read_differential, said_of_devices
from fieldfit.field.section_log import read_log_hints
from fieldfit.field.section_loggers import read_loggers, read_wave_speed, texts
from fieldfit.field.section_outlook import read_changes, read_cleaned, read_outlook
from fieldfit.field.section_pipe import Pipe, read_duty, read_fittings, read_liquid, read_pipe, read_temperature
from fieldfit.field.section_screen import read_screen_limits, read_screen_mode
from fieldfit.field.section_survey import read_branches, read_meter_station, read_reach_pipes
from fieldfit.field.section_taps import check_columns, read_meter, read_taps
from fieldfit.field.section_wishes import read_wishes
from fieldfit.field.toml_table import TomlTable, read_toml
from fieldfit.field.units import shown

FILE_NAME = "section.toml"
"""Name of the file in the folder of a test section."""
LONGEST_NAME = 120
"""Characters a section's name may have."""


def read_section(path: str | Path) -> Section:
    """Read what is known of a test section.

    Every key is checked. Where the file is silent on how far a value may be off, a limit is assumed and said: bore
    ±1 %, distance between taps ±0.5 %, elevation of a gauge ±0.05 m, K of a fitting ±30 %, temperature ±1 K. The
    distance's limit is put on the stations, see `section_taps.read_taps`: the standard uncertainty of the reach's
    length is that of both stations added as squares.

    Parameters
    ----------
    path : str or Path
        The folder of the test section, or the file in it.

    Raises
    ------
    InputError
        With file, line and key, what was seen, and what would be right.
    """
    file = _file(Path(path))
    top = fill_in(read_toml(file))
    said: list[str] = []
    pipe = read_pipe(top, said)
    liquid = read_liquid(top, said)
    temperature, temperature_standard = read_temperature(top, said)
    flow = top.table("flow")
    if flow is None:
        raise _no_flow(top)
    degrees = temperature.value if temperature else 15.0
    meter = read_device(top, flow, (pipe.bore, liquid, degrees), lambda: read_meter(flow, said))
    with top.at("tap"):
        taps = read_taps(top.tables("tap"), said)
        check_columns(meter, taps)
    differential, taps = read_differential(top.table("differential"), taps, liquid)
    said += said_of_devices(top, meter)
    fittings = read_fittings(top.tables("fitting"), pipe.bore.value, said)
    _check_sizes(top, pipe, taps, fittings)
    reach_pipes = read_reach_pipes(top.tables("reach"), taps, said)
    meter_station = read_meter_station(flow)
    branches = read_branches(top.tables("branch"), taps, meter_station, said)
    installed = top.date("installed")
    return Section(
        name=top.needed("name", LONGEST_NAME),
        path=file,
        material=pipe.material,
        installed=installed,
        bore=pipe.bore,
        bore_source=pipe.source,
        liquid=liquid,
        temperature=temperature,
        temperature_standard=temperature_standard,
        meter=meter,
        taps=taps,
        fittings=fittings,
        campaigns=tuple(_campaign(table, file.parent, installed) for table in top.tables("campaign")),
        correlation=_correlation(top.table("correlation")),
        outlook=read_outlook(top),
        duty_flow_m3_s=read_duty(top.table("duty"), said),
        reach_pipes=reach_pipes,
        branches=branches,
        meter_station_m=meter_station,
        bore_evidence=read_bore_evidence(top.tables("bore_evidence"), taps),
        deposit=read_deposit(top.table("deposit")),
        differential=differential,
        loggers=read_loggers(top.tables("logger"), (meter.column, *(tap.column for tap in taps))),
        wave_speed_m_s=read_wave_speed(top),
        log_hints=read_log_hints(top.table("log")),
        screen_limits=read_screen_limits(top.table("screen")),
        screen_mode=read_screen_mode(top.table("screen")),
        contract=read_contract(top.table("contract")),
        wishes=read_wishes(top.table("plan")),
        assumed=tuple(dict.fromkeys(said)),
    )


def _file(path: Path) -> Path:
    """Return the section file that a path means."""
    file = path / FILE_NAME if path.is_dir() else path
    if file.suffix.casefold() == ".csv":
        advice = "Name the folder of the test section first, then its logs: fieldfit assess FOLDER LOG.csv"
        raise InputError("this is a log, not a section file", advice, str(path))
    if not file.is_file():
        seen = f"there is no {FILE_NAME} in the folder" if path.is_dir() else "there is no such file or folder"
        folder = shown(str(path))
        called = f'"{folder}"' if " " in folder else folder
        raise InputError(seen, f"Check the name, or write one with: fieldfit start {called}", str(path))
    return file


def _no_flow(top: TomlTable) -> InputError:
    """Return the error for a file without a meter."""
    advice = 'Write [flow] on a line of its own, and below it column = "flow" and accuracy = "0.5 % of reading".'
    return InputError("the table of the flow meter is missing", advice).at(top.where("flow"))


def _check_sizes(top: TomlTable, pipe: Pipe, taps: tuple[Tap, ...], fittings: tuple[Fitting, ...]) -> None:
    """Refuse taps closer than a bore, and fittings that are not between the taps."""
    for above, below in itertools.pairwise(taps):
        length = below.station.value - above.station.value
        if length <= pipe.bore.value:
            seen = f"the bore ({pipe.bore.value:g} m) is larger than the length between two taps ({length:g} m)"
            advice = f"Check the units of the bore and of the stations of '{above.column}' and '{below.column}'."
            raise InputError(seen, advice).at(top.where("pipe" if "pipe" in top.values else "bore"))
    first, last = taps[0].station.value, taps[-1].station.value
    for number, fitting in enumerate(fittings, start=1):
        if fitting.station is not None and not first <= fitting.station < last:
            seen = f"the fitting is at {fitting.station:g} m, and the taps are from {first:g} m to {last:g} m"
            advice = "Leave out fittings that are not between the taps."
            raise InputError(seen, advice).at(top.where(f"fitting[{number}].station"))


def _campaign(table: TomlTable, folder: Path, installed: dt.date | None) -> Campaign:
    """Return one campaign."""
    date = table.date("date")
    if date is not None and installed is not None and date < installed:
        seen = f"the test of {date} is older than the pipe, installed {installed}"
        raise InputError(seen, "Check both dates: year, month, day.").at(table.where("date"))
    logs = [folder / name for name in texts(table, "log")]
    return Campaign(
        date=date,
        log=logs[0],
        parts=tuple(logs[1:]),
        cleaned=read_cleaned(table)[0],
        meter=table.text("meter"),
        changes=read_changes(table),
    )


def _correlation(table: TomlTable | None) -> Correlation:
    """Return how far friction correlations are trusted."""
    if table is None:
        return Correlation()
    usual = Correlation()
    return Correlation(
        standard=_ratio(table, "standard_uncertainty", usual.standard, (0.0, 0.5)),
        decades=_ratio(table, "decades", usual.decades, (0.1, 20.0)),
    )


def _ratio(table: TomlTable, key: str, usual: float, ends: tuple[float, float]) -> float:
    """Return a number or a percentage within two ends."""
    text = table.number_or_text(key)
    if text is None:
        return usual
    with table.at(key):
        value = quantity(text, "ratio", "5 %")
        if not ends[0] <= value <= ends[1]:
            raise InputError(f"'{shown(text)}' is out of range", f"Keep between {ends[0]:g} and {ends[1]:g}.")
    return value
