"""A section file to fill in."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from fieldfit.errors import InputError
from fieldfit.field.section_file import FILE_NAME
from fieldfit.field.section_keys import LISTS, PLACEHOLDER, TABLES, keys_of
from fieldfit.field.units import shown

_INTRODUCTION = f"""\
# What is known of the test section before anyone looks at readings.
# Replace every "{PLACEHOLDER}". Lines that begin with # are optional: take the # away to use them.
# A value with a dimension is text with its unit: "412 m", "8 in", "150 psi". Behind it may stand how far it
# may be off: "52.5 mm ± 0.2 mm" is a limit; "(k=2)" or "(95 %)" behind that says what else it is.
"""

ABOUT = {
    "flow": "The flow meter.",
    "tap": "A pressure tap and its gauge: one such table each, in the order of the flow.",
    "differential": "One transmitter of the pressure difference between the two taps, instead of their gauges.",
    "outlet": "A hydrant outlet with its pitot: one such table each, where the flow comes from pitots.",
    "logger": "A logger whose clock something is known of: one such table each; other clocks are found.",
    "fitting": "A bend, valve or tee between the taps: one such table for each kind.",
    "reach": "A reach whose pipe differs from the rest: one such table each; not needed when all is one pipe.",
    "branch": "A side flow between meter and last tap: one such table each.",
    "bore_evidence": "What something other than friction says of the bore today: one such table each.",
    "deposit": "What is known of a deposit, for its volume and mass.",
    "campaign": "A day of testing and its log: one such table each. Not needed when the log is named in the command.",
    "log": "How the logs are written, where they leave it open.",
    "plan": "What is wanted of a test still to be made, for fieldfit plan.",
    "contract": "What a contract asks of the pipe, for fieldfit accept: one of c, roughness and head_loss.",
    "duty": "What the pipe must carry.",
    "water": "What the water is like: it tells how fast a pipe roughens when there is one campaign only.",
    "growth": "How the roughness grows, and how far to look ahead.",
    "threshold": "What the pipe must not fall short of: the dates come out as probabilities.",
    "correlation": "How far friction correlations are trusted; the trade's ±10 % when it is left out.",
    "screen": "Limits that decide which rows count; shown with the values that hold when they are left out.",
}
"""What each table of a section file is for."""


def write_blank_section(folder: str | Path) -> Path:
    """Write a section file with every key explained, to be filled in.

    Parameters
    ----------
    folder : str or Path
        Folder of the test section; made when it is not there.

    Returns
    -------
    Path
        The file.

    Raises
    ------
    InputError
        When there is such a file already, or it cannot be written.
    """
    file = Path(folder) / FILE_NAME
    try:
        file.parent.mkdir(parents=True, exist_ok=True)
        with file.open("x", encoding="utf-8", newline="\n") as text:
            text.write(blank_section())
    except FileExistsError:
        seen = "there is one already" if file.exists() else "a file of this name stands where the folder should be"
        raise InputError(seen, "Name another folder; nothing was overwritten.", str(file)) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"it cannot be written: {shown(reason)}", "Name another folder.", str(file)) from None
    return file


def blank_section() -> str:
    """Return the text of a blank section file.

    Examples
    --------
    >>> print(blank_section().splitlines()[5])
    name = "FILL IN"  # printed name; file names are made from it, such as "Kiln cooling supply"
    """
    parts = [_INTRODUCTION, *_keys("")]
    for table in ("flow", "tap", "tap", *LISTS[1:], *TABLES[1:]):
        needed = table in {"flow", "tap"}
        header = f"[[{table}]]" if table in LISTS else f"[{table}]"
        parts += ["", f"# {ABOUT[table]}", header if needed else f"# {header}", *_keys(table, needed)]
    first, second, rest = "\n".join(parts).split("[[tap]]", 2)
    return f"{first}[[tap]]{second}[[tap]]{rest.replace('upstream', 'downstream', 1)}\n"


def _keys(table: str, needed: bool = True) -> Iterator[str]:
    """Yield a line for each key of a table."""
    for key in keys_of(table).values():
        if key.required and needed:
            yield f'{key.name} = "{PLACEHOLDER}"  # {key.meaning}, such as {key.example}'
        else:
            yield f"# {key.line}  # {key.meaning}"
        if key.name == "fluid":
            yield f"# fluid = {{ {', '.join(entry.line for entry in keys_of('fluid').values())} }}"
