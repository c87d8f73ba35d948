"""Sentences on clocks."""

from __future__ import annotations

from fieldfit.field.logger_clock import LoggerClock


def say_clock(clock: LoggerClock, others: tuple[LoggerClock, ...]) -> str:
    """Return what was taken of one clock, in one sentence.

    Examples
    --------
    >>> one = LoggerClock(file="down.csv", sha256="", columns=("down",), rows=9, how="recovered", offset_s=61.3,
    ...                   best_s=61.3, interval_s=(60.9, 61.7))
    >>> say_clock(one, ())
    'The clock of down.csv is 61.3 s ahead (95 %: 60.9 to 61.7 s), as the readings show, and was set back.'
    """
    name = _name(clock, others)
    if clock.how == "given":
        told = "as stated" if clock.offset_s == 0.0 else f"{ahead(clock.offset_s)}, as the section file says"
        return f"The clock of {name} was taken {told}{_drift(clock)}."
    if clock.how == "agrees" and clock.interval_s is not None:
        return (
            f"The clock of {name} agrees: the readings put it {_span(clock.interval_s)} ahead (95 %), so it was left."
        )
    if clock.how == "taken as equal":
        return f"The clock of {name} was taken to agree, for the readings cannot tell: {clock.because}."
    span = f" (95 %: {_span(clock.interval_s)})" if clock.interval_s else ""
    moved = "set back" if clock.offset_s > 0.0 else "set forward"
    return (
        f"The clock of {name} is {ahead(clock.offset_s)}{span}, as the readings show, and was {moved}{_drift(clock)}."
    )


def ahead(seconds: float) -> str:
    """Return how far a clock is ahead or behind, in words.

    Examples
    --------
    >>> ahead(-3600.04), ahead(2.0)
    ('3600.0 s behind', '2.0 s ahead')
    """
    return f"{abs(seconds):.1f} s {'ahead' if seconds >= 0.0 else 'behind'}"


def _span(interval: tuple[float, float]) -> str:
    """Return an interval in seconds."""
    places = 1 if interval[1] - interval[0] > 0.3 else 2
    low, high = (f"{end:.{places}f}".replace("-", "−") for end in interval)
    return f"{low} to {high} s"


def _drift(clock: LoggerClock) -> str:
    """Return what a clock gains, where it does."""
    if clock.drift == 0.0:
        return ""
    verb = "gains" if clock.drift > 0.0 else "loses"
    return f"; it {verb} {abs(clock.drift) * 86400.0:.1f} s a day, which was taken off too"


def _name(clock: LoggerClock, others: tuple[LoggerClock, ...]) -> str:
    """Return a logger's name: its file, with its columns where the file has several loggers."""
    shared = [one for one in others if one.file == clock.file]
    return f"{clock.file} ({', '.join(clock.columns)})" if len(shared) > 1 else clock.file
