"""Reaches of other pipe and side flows of a section file."""

from __future__ import annotations

import itertools

from fieldfit.errors import InputError, near_miss
from fieldfit.field.quantities import quantity, uncertain
from fieldfit.field.section import Branch, ReachPipe, Tap
from fieldfit.field.section_pipe import read_pipe
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.units import shown

BRANCH_LIMIT = "10 %"
"""Limit of a side flow that nothing is said of."""
UNKNOWN = "unknown"
"""What a side flow to be inferred is written as."""


def read_reach_pipes(tables: tuple[TomlTable, ...], taps: tuple[Tap, ...], said: list[str]) -> tuple[ReachPipe, ...]:
    """Return the reaches whose pipe differs from the section's.

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[reach]]` tables.
    taps : tuple of Tap
        Taps in order of their stations.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When a tap is not known, the two are not neighbours in the order of flow, or the bore cannot be read.
    """
    found: list[ReachPipe] = []
    neighbours = [(upper.column, lower.column) for upper, lower in itertools.pairwise(taps)]
    for table in tables:
        ends = tap_named(table, "from", taps), tap_named(table, "to", taps)
        if ends not in neighbours:
            seen = f"no reach runs from '{shown(ends[0])}' to '{shown(ends[1])}'"
            listed = ", ".join(f"from '{shown(upper)}' to '{shown(lower)}'" for upper, lower in neighbours)
            raise InputError(seen, f"Name two neighbouring taps in the order of flow: {listed}.").at(table.where("to"))
        if ends in [(other.upper, other.lower) for other in found]:
            seen = f"the reach from '{shown(ends[0])}' to '{shown(ends[1])}' is described twice"
            raise InputError(seen, "Keep one [[reach]] table for it.").at(table.where("from"))
        pipe = read_pipe(table, said)
        found.append(
            ReachPipe(upper=ends[0], lower=ends[1], bore=pipe.bore, bore_source=pipe.source, material=pipe.material)
        )
    if found:
        said.append(
            "Where the bore changes at a tap, the tap was taken to sit in the pipe above the joint: its velocity head is "
            "that pipe's."
        )
    return tuple(found)


def read_branches(
    tables: tuple[TomlTable, ...], taps: tuple[Tap, ...], meter_station_m: float | None, said: list[str]
) -> tuple[Branch, ...]:
    """Return the side flows in the order of their stations.

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[branch]]` tables.
    taps : tuple of Tap
        Taps in order of their stations.
    meter_station_m : float or None
        Where the meter stands [m].
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When a station or flow cannot be read, a branch lies below the last tap, or two flows are unknown.
    """
    branches = tuple(sorted((_branch(table, taps) for table in tables), key=lambda branch: branch.station))
    unknown = [branch.name for branch in branches if branch.flow is None]
    if len(unknown) > 1:
        seen = f"the flows of {len(unknown)} branches are unknown ({', '.join(unknown)})"
        advice = "The readings can tell one at the most: meter or shut the others, and write their flow."
        raise InputError(seen, advice).at(tables[0].where("flow"))
    guessed = [branch.name for branch in branches if branch.flow is not None and branch.flow.assumed]
    if guessed:
        said.append(f"The flow of {', '.join(guessed)} was taken as good to ±{BRANCH_LIMIT}.")
    if branches and meter_station_m is None:
        said.append('The meter was taken to stand above every branch: write station = "0 m" in [flow] to change it.')
    return branches


def read_meter_station(table: TomlTable) -> float | None:
    """Return where the meter stands along the pipe [m]; None when the `[flow]` table does not say.

    Parameters
    ----------
    table : TomlTable
        The `[flow]` table.

    Raises
    ------
    InputError
        When it cannot be read.
    """
    text = table.text("station")
    if text is None:
        return None
    with table.at("station"):
        return quantity(text, "length", "0 m")


def tap_named(table: TomlTable, key: str, taps: tuple[Tap, ...]) -> str:
    """Return the column of the tap that a key names, as the file writes it."""
    name = table.needed(key)
    columns = [tap.column for tap in taps]
    for column in columns:
        if column.casefold() == name.casefold():
            return column
    advice = f"{near_miss(name, columns)}The taps are: {', '.join(columns)}."
    raise InputError(f"there is no tap '{shown(name)}'", advice).at(table.where(key))


def _branch(table: TomlTable, taps: tuple[Tap, ...]) -> Branch:
    """Return one side flow."""
    station_text, flow_text = table.needed("station"), table.needed("flow")
    with table.at("station"):
        station = quantity(station_text, "length", "120 m")
        if not 0.0 <= station < taps[-1].station.value:
            seen = f"the branch is at {station:g} m, and the last tap at {taps[-1].station.value:g} m"
            raise InputError(seen, "Leave out what is not above the last tap: it changes no reading.")
    name = table.text("name") or f"the branch at {station:g} m"
    if flow_text.casefold() == UNKNOWN:
        return Branch(name=name, station=station, flow=None)
    with table.at("flow"):
        return Branch(name=name, station=station, flow=uncertain(flow_text, "flow", "1.2 L/s", BRANCH_LIMIT))
