"""A TOML file as tables that know where each key stands, so that an error can name the line."""

from __future__ import annotations

import datetime as dt
import re
import tomllib
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import NoReturn

from fieldfit.errors import InputError, near_miss
from fieldfit.field.section_keys import LISTS, PLACEHOLDER, TABLES, Key, keys_of
from fieldfit.field.units import shown

LARGEST_FILE_BYTES = 1_000_000
"""A section file beyond this size is none."""

_HEADER = re.compile(r"\s*(\[\[?)\s*([^\[\]]+?)\s*\]")
_KEY = re.compile(r"\s*([\w\-.\"' ]+?)\s*=")


@dataclass(frozen=True, slots=True, kw_only=True)
class TomlTable:
    """One table of a section file."""

    values: Mapping[str, object]
    """Its keys and values."""
    kind: str
    """Its name in the list of keys; empty for the top of the file."""
    path: str
    """Its name with its number, such as "tap[2]"."""
    file: str
    """Name of the file."""
    lines: Mapping[str, int]
    """Line of each dotted key, as far as it was found."""

    def where(self, key: str) -> str:
        """Return the place of a key, such as ``section.toml:12, key 'tap[2].station'``."""
        dotted = f"{self.path}.{key}" if self.path else key
        line = self.lines.get(dotted) or self.lines.get(self.path)
        return f"{self.file}:{line}, key '{shown(dotted)}'" if line else f"{self.file}, key '{shown(dotted)}'"

    @contextmanager
    def at(self, key: str) -> Iterator[None]:
        """Give every input error raised inside the place of a key, unless it has a closer one."""
        try:
            yield
        except InputError as error:
            raise (error if error.where else error.at(self.where(key))) from None

    def check_keys(self) -> None:
        """Refuse keys that the list does not have, and the absence of those it requires."""
        top = () if self.kind else (*TABLES, *LISTS)
        known = (*keys_of(self.kind), *top)
        for key in self.values:
            if key not in known:
                raise InputError(f"'{shown(key)}' is no key that fieldfit knows", self._advice(key, known)).at(
                    self.where(key)
                )
        for key, entry in keys_of(self.kind).items():
            if entry.required and key not in self.values and not (key == "bore" and "pipe" in self.values):
                self.missing(key)

    def _advice(self, key: str, known: tuple[str, ...]) -> str:
        """Return what to do about an unknown key."""
        if self.kind and key in keys_of(""):
            return f"'{key}' belongs at the top of the file, above the first table in brackets."
        place = f"In [{self.kind}] there" if self.kind else "There"
        return f"{near_miss(key, known)}{place} may be: {', '.join(known)}."

    def missing(self, key: str) -> NoReturn:
        """Refuse the table for want of a key."""
        choice = f" or {self._entry('pipe').line}" if key == "bore" and "pipe" in keys_of(self.kind) else ""
        raise InputError(f"'{key}' is missing", f"Write {self._entry(key).line}{choice}.").at(self.where(key))

    def _entry(self, key: str) -> Key:
        """Return what the list says of a key."""
        return keys_of(self.kind)[key]

    def text(self, key: str, longest: int = 200) -> str | None:
        """Return a text, trimmed and without control characters, or None where the key is absent."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, str):
            entry = self._entry(key)
            bare = isinstance(value, int | float) and re.match(r'"[0-9]', entry.example)
            seen = f"{_called(value)} {'has no unit' if bare else 'stands where text is wanted'}"
            raise InputError(seen, f"Write {entry.line}, in quotation marks.").at(self.where(key))
        if value == PLACEHOLDER:
            raise InputError(f"'{key}' is still to be filled in", f"Write {self._entry(key).line}.").at(self.where(key))
        text = " ".join("".join(sign if sign.isprintable() else " " for sign in value).split())
        if not text or len(text) > longest:
            seen = "the text is empty" if not text else f"'{shown(text)}' has {len(text)} characters"
            limit = "" if not text else f"Keep to {longest}. "
            raise InputError(seen, f"{limit}Write {self._entry(key).line}.").at(self.where(key))
        return text

    def needed(self, key: str, longest: int = 200) -> str:
        """Return a text that must be there."""
        text = self.text(key, longest)
        if text is None:
            self.missing(key)
        return text

    def number_or_text(self, key: str) -> str | None:
        """Return a text, or a bare number as text; None where the key is absent."""
        value = self.values.get(key)
        if isinstance(value, bool) or not isinstance(value, int | float):
            return self.text(key)
        if isinstance(value, int) and value.bit_length() > 100:
            advice = f"Write {self._entry(key).line}."
            raise InputError("the number has too many digits", advice).at(self.where(key))
        return repr(value)

    def date(self, key: str) -> dt.date | None:
        """Return a date, or None where the key is absent."""
        value = self.values.get(key)
        if isinstance(value, dt.datetime):
            return value.date()
        if value is None or isinstance(value, dt.date):
            return value
        seen = f"{_called(value)} stands where a date is wanted"
        raise InputError(seen, f"Write {self._entry(key).line}, without quotation marks.").at(self.where(key))

    def flag(self, key: str) -> bool:
        """Return true or false; false where the key is absent."""
        value = self.values.get(key, False)
        if isinstance(value, bool):
            return value
        raise InputError(f"{_called(value)} is neither true nor false", f"Write {key} = true.").at(self.where(key))

    def count(self, key: str) -> int:
        """Return a whole number from 1 up; 1 where the key is absent."""
        value = self.values.get(key, 1)
        if isinstance(value, int) and not isinstance(value, bool) and 1 <= value <= 100_000:
            return value
        seen = f"{_called(value)} is no whole number from 1 up"
        raise InputError(seen, f"Write {self._entry(key).line}.").at(self.where(key))

    def table(self, key: str) -> TomlTable | None:
        """Return a table of this one, with its keys checked, or None where it is absent."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, dict):
            advice = f"Write [{key}] on a line of its own and its keys below."
            raise InputError(f"{_called(value)} stands where a table is wanted", advice).at(self.where(key))
        return self._part(value, key, key)

    def tables(self, key: str) -> tuple[TomlTable, ...]:
        """Return the tables of one name, with their keys checked."""
        value = self.values.get(key, [])
        if not isinstance(value, list) or not all(isinstance(entry, dict) for entry in value):
            advice = f"Write [[{key}]] with double brackets on a line of its own and its keys below, once for each."
            seen = "a single table stands where a list is wanted" if isinstance(value, dict) else _called(value)
            raise InputError(seen, advice).at(self.where(key))
        return tuple(self._part(entry, key, f"{key}[{number}]") for number, entry in enumerate(value, start=1))

    def _part(self, values: Mapping[str, object], kind: str, path: str) -> TomlTable:
        """Return a checked table within this one."""
        part = TomlTable(values=values, kind=kind, path=path, file=self.file, lines=self.lines)
        part.check_keys()
        return part


def read_toml(path: Path) -> TomlTable:
    """Return a section file as a table, its top keys checked.

    Parameters
    ----------
    path : Path
        The file.

    Raises
    ------
    InputError
        When it is not there, not text, not TOML, or has keys that nobody knows.
    """
    text = _text(path)
    try:
        values = tomllib.loads(text)
    except RecursionError:
        raise InputError("brackets are nested too deep", "A section file needs no more than two.", path.name) from None
    except ValueError as error:
        raise _no_toml(str(error), text, path.name) from None
    top = TomlTable(values=values, kind="", path="", file=path.name, lines=_key_lines(text))
    top.check_keys()
    return top


def _text(path: Path) -> str:
    """Return the text of a small file."""
    try:
        size = path.stat().st_size
        data = path.read_bytes() if size <= LARGEST_FILE_BYTES else b""
    except OSError as error:
        reason = error.strerror or "it cannot be opened"
        raise InputError(f"the file cannot be read: {reason}", "Check its name and place.", str(path)) from None
    if size > LARGEST_FILE_BYTES:
        raise InputError(f"{size} bytes are no section file", "A section file has a few dozen lines.", path.name)
    utf_16 = data[:2] in (b"\xff\xfe", b"\xfe\xff")
    try:
        return data.decode("utf-16" if utf_16 else "utf-8-sig").replace("\r\n", "\n")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        advice = "Save the file as UTF-8 text in the editor."
        raise InputError("the file is not UTF-8 text", advice, f"{path.name}:{line}") from None


def _no_toml(reason: str, text: str, file: str) -> InputError:
    """Return the error for a text that is no TOML."""
    found = re.search(r"\(at line (\d+)", reason)
    reason = re.sub(r"\s*\(at .*\)", "", reason)
    lines = text.split("\n")
    number = int(found[1]) if found else len(lines)
    line = lines[number - 1] if number <= len(lines) else ""
    if "date" in reason:
        advice = "Write a day that there is, as year, month and day: 2009-03-01."
    elif "overwrite" in reason or "twice" in reason or "already" in reason:
        advice = "Each key and each [table] may stand once."
    else:
        advice = 'Text stands in quotation marks: bore = "52.5 mm".'
    return InputError(f"'{shown(line)}' is not TOML ({shown(reason)})", advice, f"{file}:{number}")


def _key_lines(text: str) -> dict[str, int]:
    """Return the line of every table and key, as far as a look at each line's beginning tells."""
    lines: dict[str, int] = {}
    counts: dict[str, int] = {}
    path = ""
    for number, line in enumerate(text.split("\n"), start=1):
        header, key = _HEADER.match(line), _KEY.match(line)
        if header:
            path = header[2].strip("\"'")
            if header[1] == "[[":
                counts[path] = counts.get(path, 0) + 1
                lines.setdefault(path, number)
                path = f"{path}[{counts[path]}]"
            lines.setdefault(path, number)
        elif key:
            name = key[1].replace('"', "").replace("'", "").replace(" ", "")
            lines.setdefault(f"{path}.{name}" if path else name, number)
    return lines


def _called(value: object) -> str:
    """Return what a TOML value is, with the value."""
    kinds = {bool: "", int: "the number ", float: "the number ", str: "the text ", dict: "a table", list: "a list"}
    kind = kinds.get(type(value), "the date ")
    if isinstance(value, dict | list):
        return kind
    if isinstance(value, int) and value.bit_length() > 200:
        return "a number of many digits"
    return f"{kind}'{shown(str(value).lower() if isinstance(value, bool) else str(value))}'"
