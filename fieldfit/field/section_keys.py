"""Every key of a section file: what it means and how it is written."""

from __future__ import annotations

from dataclasses import dataclass

from fieldfit.field.screens import LIMITS

PLACEHOLDER = "FILL IN"
"""What a blank section file has in place of a value."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """One key of a section file."""

    table: str
    """Table it stands in; empty for the top of the file."""
    name: str
    """The key."""
    example: str
    """How its value is written, in TOML."""
    meaning: str
    """What it says, in one sentence without its stop."""
    required: bool = False
    """Whether the file is refused without it."""

    @property
    def line(self) -> str:
        """The key as a line of the file."""
        return f"{self.name} = {self.example}"


def _key(place: str, example: str, meaning: str, required: bool = False) -> Key:
    """Return a key from its dotted place."""
    table, _, name = place.rpartition(".")
    return Key(table=table, name=name, example=example, meaning=meaning, required=required)


KEYS: tuple[Key, ...] = (
    _key("name", '"Kiln cooling supply"', "printed name; file names are made from it", required=True),
    _key("material", '"carbon steel"', 'picks the values of new pipe; "unknown" for no comparison with new'),
    _key("installed", "2009-03-01", "day of laying"),
    _key("bore", '"52.5 mm ± 0.2 mm"', "as-new inside diameter and its limit; this or pipe", required=True),
    _key("pipe", '"NPS 2 schedule 40"', "pipe size that the bore is looked up for; this or bore"),
    _key("fluid", '"water"', "what flows: water, a library's name, or a table with density and viscosity"),
    _key(
        "temperature", '"18 degC ± 1 degC"', "of the liquid, where the log has no such column; its limit holds for both"
    ),
    _key("fluid.name", '"gear oil"', "printed name of the liquid"),
    _key("fluid.density", '"870 kg/m3"', "its density", required=True),
    _key("fluid.viscosity", '"32 cSt"', "its viscosity, kinematic or dynamic by the unit", required=True),
    _key("wave_speed", '"1200 m/s"', "speed of a pressure wave in the pipe, for clocks of loggers at its two ends"),
    _key("flow.column", '"flow"', "heading in the log, without its unit", required=True),
    _key("flow.unit", '"L/s"', "unit of that column; it wins over the heading's"),
    _key("flow.accuracy", '"0.5 % of reading"', "how far the meter may be off", required=True),
    _key("flow.meter", '"MAG-118"', "serial; campaigns that name the same meter share its error"),
    _key("flow.senses", '"volume"', '"velocity" for clamp-on and insertion meters that use the same bore'),
    _key("flow.totaliser", "true", "whether the column counts on from row to row, or false for the volume of each row"),
    _key("flow.pulse", '"10 L"', "volume of one pulse, where the column counts pulses"),
    _key("flow.signal", '"4-20 mA"', "raw signal of that column: 4-20 mA, 0-20 mA, 0-10 V, 2-10 V, 1-5 V or 0-5 V"),
    _key("flow.range", '"0 to 50 L/s"', "what that signal stands for at its ends"),
    _key("flow.device", '"pitot"', "meter, weir, bucket, pitot, orifice, a nozzle or a venturi; meter when left out"),
    _key(
        "flow.throat", '"60 mm ± 0.1 %"', "opening of an orifice, nozzle or venturi whose pressure difference is logged"
    ),
    _key("flow.throat_pipe", '"100 mm ± 0.4 %"', "inside diameter of the pipe that sits in; the bore when left out"),
    _key("flow.tappings", '"corner"', "pressure tappings of an orifice: corner, flange, or D and D/2"),
    _key("flow.station", '"0 m"', "where the meter stands along the pipe; needed only with branches above it"),
    _key("tap.column", '"upstream"', "heading in the log, without its unit", required=True),
    _key("tap.unit", '"kPa"', "unit of that column; it wins over the heading's"),
    _key("tap.station", '"38.2 m ± 0.1 m"', "distance along the pipe, with the flow, and its limit", required=True),
    _key("tap.elevation", '"1.20 m ± 0.02 m"', "of the gauge over any datum, and its limit"),
    _key("tap.accuracy", '"0.25 % of 10 bar"', "how far the gauge may be off", required=True),
    _key("tap.signal", '"4-20 mA"', "raw signal of that column, as for the flow"),
    _key("tap.range", '"0 to 10 bar"', "what that signal stands for at its ends; bara for absolute pressure"),
    _key("tap.gauge", '"PG-07"', "serial of the gauge"),
    _key("outlet.column", '"pitot"', "heading of its pitot pressure in the log, without the unit", required=True),
    _key("outlet.unit", '"psi"', "unit of that column; it wins over the heading's"),
    _key("outlet.diameter", '"2.5 in ± 0.5 %"', "inside diameter of the outlet", required=True),
    _key("outlet.edge", '"rounded"', "its inner edge, by touch: rounded 0.90, square 0.80, projecting 0.70"),
    _key("outlet.coefficient", '"0.90 ± 5 %"', "its discharge coefficient; this or edge"),
    _key("outlet.pumper", "false", "whether it is a large pumper outlet, whose flow is reduced further"),
    _key("outlet.accuracy", '"2 % of 60 psi"', "how far the pitot gauge may be off", required=True),
    _key("differential.column", '"dp"', "heading of upper less lower pressure, without its unit", required=True),
    _key("differential.unit", '"kPa"', "unit of that column; it wins over the heading's"),
    _key("differential.accuracy", '"0.1 % of 1 bar"', "how far the transmitter may be off", required=True),
    _key("differential.serial", '"DP-03"', "serial of the transmitter"),
    _key("differential.signal", '"4-20 mA"', "raw signal of that column, as for the flow"),
    _key("differential.range", '"0 to 1 bar"', "what that signal stands for at its ends"),
    _key(
        "differential.hose_temperature",
        '"25 degC ± 2 K"',
        "of the water in impulse lines or a parallel hose, where it differs from the main's",
    ),
    _key("logger.file", '"up.csv"', "file of a logger whose clock something is known of"),
    _key("logger.columns", '["upstream"]', "columns that the logger wrote; all of its file when left out"),
    _key("logger.offset", '"+3600 s"', "how far its clock is ahead; found from the readings when left out"),
    _key("logger.drift", '"20 ppm"', "how fast its clock gains, or in s/day"),
    _key("fitting.name", '"two long-radius bends"', "printed name"),
    _key("fitting.k", '"0.5 ± 20 %"', "loss coefficient of one, on the velocity in the pipe; this or kind"),
    _key("fitting.kind", '"gate valve, open"', "kind of fitting that K is looked up for; this or k"),
    _key("fitting.count", "2", "how many there are"),
    _key("fitting.station", '"12 m"', "distance along the pipe; needed with more than two taps"),
    _key("reach.from", '"upstream"', "column of the tap at the upper end of a reach of other pipe", required=True),
    _key("reach.to", '"downstream"', "column of the next tap, where that reach ends", required=True),
    _key("reach.bore", '"102.3 mm ± 0.5 mm"', "as-new inside diameter of that reach; this or pipe", required=True),
    _key("reach.pipe", '"NPS 4 schedule 40"', "pipe size that its bore is looked up for; this or bore"),
    _key("reach.material", '"cast iron"', "its material; picks the values of new pipe for that reach"),
    _key("branch.name", '"service to the laundry"', "printed name"),
    _key("branch.station", '"12 m"', "distance along the pipe", required=True),
    _key(
        "branch.flow",
        '"1.2 L/s ± 5 %"',
        'flow that leaves there, negative where it comes in, or "unknown"',
        required=True,
    ),
    _key("bore_evidence.kind", '"coupon"', "coupon, calliper, gauge plate or tracer", required=True),
    _key("bore_evidence.bore", '"47 mm ± 1 mm"', "bore that was found; for a tracer this, or time, flow and length"),
    _key("bore_evidence.time", '"95 s ± 1 s"', "transit time of a tracer"),
    _key("bore_evidence.flow", '"2.4 L/s ± 1 %"', "flow during the tracer's run"),
    _key("bore_evidence.length", '"120 m ± 0.5 m"', "length that the tracer ran"),
    _key("bore_evidence.date", "2026-05-12", "day it was found"),
    _key("bore_evidence.from", '"upstream"', "column of the tap that it holds from; the first one when left out"),
    _key("bore_evidence.to", '"downstream"', "column of the tap that it holds to; the last one when left out"),
    _key("deposit.density", '"1900 kg/m3 ± 20 %"', "density of the deposit as it sits in the pipe, for its mass"),
    _key("deposit.variation", '"30 %"', "how unevenly the deposit lies: standard deviation over mean thickness"),
    _key("campaign.date", "2026-05-12", "day of the test"),
    _key(
        "campaign.log", '"2026-05-12.csv"', "its log, beside this file; a list of files, one per logger", required=True
    ),
    _key("campaign.cleaned", "true", "whether the pipe was cleaned since the campaign before, or the day it was"),
    _key("campaign.relined", '"epoxy-lined steel"', "material of a lining put in since the campaign before, or true"),
    _key("campaign.bore", '"51.0 mm ± 0.3 mm"', "bore after lining, where it changed"),
    _key("campaign.promised_c", "120", "C that the cleaning or lining was to reach"),
    _key("campaign.valve", '"gate valve at 12 m replaced"', "what was done to a valve; its loss is then a new one"),
    _key("campaign.length", '"38.2 m ± 0.1 m"', "distance between the taps on that day, where they were elsewhere"),
    _key("campaign.meter", '"MAG-205"', "serial of the meter, where it was another one"),
    _key("campaign.meter_accuracy", '"1 % of reading"', "how far that meter may be off, where it differs"),
    _key("campaign.gauges", '{ upstream = "PG-21" }', "serial of the gauge at a tap, where it was another one"),
    _key("campaign.gauge_accuracy", '"0.1 % of 6 bar"', "how far those gauges may be off, where it differs"),
    _key("campaign.recalibrated", '["MAG-118"]', "instruments calibrated anew since the campaign before, by serial"),
    _key("campaign.note", '"after the drought"', "anything the reader should know of that day"),
    _key("plan.c", '"3 %"', "wanted 95 % half-width of C"),
    _key("plan.roughness", '"30 %"', "wanted 95 % half-width of the roughness, by the readings alone"),
    _key("plan.flow", '"30 L/s"', "largest flow there is", required=True),
    _key("plan.static", '"4.5 bar"', "gauge pressure at the first tap at rest", required=True),
    _key("plan.supply_loss", '"0.5 bar"', "what that pressure falls by at the largest flow"),
    _key("plan.residual", '"140 kPa"', "least pressure to be kept anywhere; 140 kPa (20 psi) when left out"),
    _key("plan.flows", "6", "number of flows to hold"),
    _key("plan.hold", '"5 min"', "time each flow is held once it is steady"),
    _key("plan.scatter", '"0.5 kPa"', "scatter of a single reading of the pressure difference"),
    _key("plan.gauges", '"0.1 % of 10 bar; 0.25 % of 10 bar"', "gauges that could be taken, parted by semicolons"),
    _key("plan.meters", '"0.5 % of reading; 2 % of reading"', "meters that could be taken, parted by semicolons"),
    _key("contract.c", "130", "least Hazen–Williams C; this, roughness or head_loss"),
    _key("contract.roughness", '"0.1 mm"', "greatest roughness; this, c or head_loss"),
    _key(
        "contract.head_loss", '"4.2 m"', "greatest head loss of the reach at the contract's flow; this, c or roughness"
    ),
    _key("contract.flow", '"25 L/s"', "flow the limit holds at; without it the flow that was tested best"),
    _key("contract.temperature", '"15 degC"', "temperature the limit holds at; without it the tested one"),
    _key("contract.bore", '"200 mm"', "bore that C is reckoned with by convention; without it the true bore"),
    _key("contract.fittings", '"out"', 'whether fittings count: "in" (usual for head_loss) or "out" (usual else)'),
    _key(
        "contract.rule",
        '"guarded acceptance"',
        "decision rule: simple acceptance, guarded acceptance or guarded rejection",
        required=True,
    ),
    _key("contract.risk", '"5 %"', "agreed risk of a guard band"),
    _key(
        "contract.built", '"145 ± 8"', "what is usually built, on the limit's scale; for the risks over many hand-overs"
    ),
    _key("log.dates", '"day first"', "order of day and month in a log's dates, where they may be read in two ways"),
    _key("log.decimal", '"comma"', "decimal mark, where commas may also part thousands; else point"),
    _key("log.start", "2026-05-12T08:00:00", "time of the first row, for a log without a clock"),
    _key("log.interval", '"10 s"', "time from row to row, for a log without a clock"),
    _key("log.sheet", '"Readings"', "sheet of a workbook; the first that has the headings when left out"),
    _key("log.barometer", '"1013 hPa"', "pressure of the air at the pipe for absolute gauges, or its heading"),
    _key("duty.flow", '"3.0 L/s"', "flow the pipe must carry", required=True),
    _key("duty.head", '"15 m"', "head available over the section, for its capacity"),
    _key("water.langelier", "-1.3", "Langelier index of the water, for a published growth rate"),
    _key("water.ph", "7.2", "pH of the water, for a published growth rate"),
    _key("growth.rate", '"0.05 mm/year ± 50 %"', "your own growth rate of the roughness, used with a single campaign"),
    _key("growth.until", "2046-01-01", "day the forecast reaches; 20 years after the last test when left out"),
    _key("growth.worse_by", '"10 %"', "rise of the head loss whose probability is printed"),
    _key("threshold.c", "95", "lowest C at the duty flow, for the date it is reached"),
    _key("threshold.head_loss", '"12 m"', "largest head loss at the duty flow"),
    _key("threshold.capacity", '"2.5 L/s"', "smallest flow at the available head"),
    _key("threshold.by", "2035-01-01", "day that the probability of a crossing is wanted for"),
    _key("correlation.standard_uncertainty", '"5 %"', "standard uncertainty of f from a friction correlation"),
    _key("correlation.decades", "1.5", "range of Reynolds number over which its error keeps together, in decades"),
    _key("screen.mode", '"auto"', 'how logs are read: "plateaus" for a test in steps, "service" for long service logs'),
    *(_key(f"screen.{limit.name}", f"{limit.value:g}", limit.meaning.rstrip(".")) for limit in LIMITS.values()),
)
"""Every key, table by table."""

TABLES = (
    "flow",
    "differential",
    "log",
    "duty",
    "deposit",
    "correlation",
    "screen",
    "contract",
    "plan",
    "water",
    "growth",
    "threshold",
)
"""Tables that may stand once."""
LISTS = ("tap", "outlet", "fitting", "logger", "reach", "branch", "bore_evidence", "campaign")
"""Tables that may stand several times."""


def keys_of(table: str) -> dict[str, Key]:
    """Return the keys of a table by name.

    Examples
    --------
    >>> list(keys_of("duty"))
    ['flow', 'head']
    """
    return {key.name: key for key in KEYS if key.table == table}
