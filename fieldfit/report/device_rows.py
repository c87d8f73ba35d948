"""What was taken as known of flow devices and of a transmitter between taps, as rows of a table."""

from __future__ import annotations

from fieldfit.field.section import Section
from fieldfit.report.digits import fixed, known

Row = tuple[str, ...]


def device_rows(section: Section) -> list[Row]:
    """Return rows on hydrant outlets, a constriction and a differential transmitter; none for plain instruments.

    Parameters
    ----------
    section : Section
        The test section.

    Returns
    -------
    list of tuple of str
        What, and what is known of it.
    """
    meter, told = section.meter, list[Row]()
    for index, one in enumerate(meter.outlets, start=1):
        kind = "pumper outlet" if one.pumper else "outlet"
        told.append(
            (
                f"Hydrant {kind} {index}",
                f"pitot in column {one.column}, diameter {known(one.diameter, 1e3)} mm, coefficient "
                f"{known(one.coefficient)}, gauge {one.accuracy.text}",
            )
        )
    if meter.throat is not None:
        throat = meter.throat
        tappings = f", {throat.tappings} tappings" if throat.kind == "orifice" else ""
        told.append(
            (
                throat.kind.capitalize() if throat.kind != "ISA 1932 nozzle" else throat.kind,
                f"{known(throat.throat, 1e3)} mm in a pipe of {known(throat.pipe, 1e3)} mm{tappings}, by ISO 5167; "
                f"transmitter {throat.accuracy.text}",
            )
        )
    if section.differential is not None:
        between = section.differential
        hose = between.hose_temperature
        lines = "the main's water" if hose is None else f"water of {fixed(hose.value, 1)} °C"
        name = f"{between.column} ({between.serial})" if between.serial else between.column
        told.append(("Transmitter between the taps", f"{name}, {between.accuracy.text}; its lines hold {lines}"))
    return told
