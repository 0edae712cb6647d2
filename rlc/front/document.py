"""The text of a sheet, where its keys stand, and the flags that replace its values."""

from __future__ import annotations

import re
from collections.abc import Mapping
from copy import deepcopy
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from rlc.errors import InputError, SheetError
from rlc.front.flags import FLAGS, SOURCE_LEVELS, TOLERANCE_FLAGS, Flag, source_levels
from rlc.front.inputs import Change
from rlc.front.sources import ALTERNATING, SOURCES
from rlc.front.textfile import check_file, unreadable, whole

#: A sheet is a page or two; anything far beyond is some other file.
LARGEST_SHEET = 256 * 1024

KeyPath = tuple[str | int, ...]

_NAME = r"""(?:[A-Za-z0-9_-]+|"[^"]*"|'[^']*')"""
_DOTTED = rf"{_NAME}(?:\s*\.\s*{_NAME})*"
_HEADER = re.compile(rf"\s*(\[\[?)\s*({_DOTTED})\s*\]")
_KEY = re.compile(rf"\s*({_DOTTED})\s*=(.*)")
_TUPLE = re.compile(r"\('(\w+)',\)")
_WHERE = re.compile(r" \(at line (\d+), column (\d+)\)$")


@dataclass(frozen=True)
class Document:
    """A sheet before its values are read.

    Attributes
    ----------
    name : str
        The file as it was given; empty if everything came from flags.
    data : dict
        Tables of raw values.
    lines : dict
        Line number of each key path.
    options : dict
        The flag that a value came from, by key path.
    changes : tuple of Change
        What flags have done to a sheet.
    """

    name: str = ""
    data: dict[str, Any] = field(default_factory=dict)
    lines: dict[KeyPath, int] = field(default_factory=dict)
    options: dict[KeyPath, str] = field(default_factory=dict)
    changes: tuple[Change, ...] = ()

    def line_of(self, path: KeyPath) -> int | None:
        """Line of a key, or of the nearest table around it.

        Parameters
        ----------
        path : tuple of str and int
            Tables, their place in a list of tables, and the key.

        Returns
        -------
        int or None
            From one; None if not even the table is in the sheet.
        """
        for end in range(len(path), 0, -1):
            if path[:end] in self.lines:
                return self.lines[path[:end]]
        return None


def read_document(path: str | Path) -> Document:
    """Read a sheet's text.

    Parameters
    ----------
    path : str or Path
        A TOML file of at most 256 kB.

    Returns
    -------
    Document

    Raises
    ------
    SheetError
        If it is no readable text file, or no TOML.
    """
    # A question from flags alone reads no sheet.
    import tomllib

    text = _text(path)
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        where = _WHERE.search(str(error))
        rule = _TUPLE.sub(r"[\1]", _WHERE.sub("", str(error)).rstrip("."))
        column = f", in column {where[2]}" if where else ""
        rule = f"is no TOML: {rule[:1].lower()}{rule[1:]}{column}"
        hint = 'Each line is a [table], or a key with a value in quotes: value = "12 ohm"'
        line = int(where[1]) if where else None
        raise SheetError(str(path), ((line, InputError("", None, rule, hint)),)) from None
    except RecursionError:
        raise whole(path, "is nested too deeply for a sheet") from None
    return Document(str(path), data, _key_lines(text))


def with_flags(document: Document, given: Mapping[str, str]) -> Document:
    """Put the values of flags in place of those of the sheet.

    Parameters
    ----------
    document : Document
        A sheet.
    given : mapping of str to str
        Option, such as ``--resistance``, to its text.

    Returns
    -------
    Document
    """
    levels = source_levels(given)
    data, options = deepcopy(document.data), dict(document.options)
    changes: list[Change] = []
    for flag in FLAGS + TOLERANCE_FLAGS:
        if flag.option not in given:
            continue
        table = data.setdefault(flag.table, {})
        if not isinstance(table, dict):
            # An error of the sheet, reported as such when its values are read.
            continue
        old, new = table.get(flag.key), given[flag.option]
        table[flag.key] = new
        options[(flag.table, flag.key)] = flag.option
        changes.append(Change(flag.option, f"{flag.table}.{flag.key}", old, new))
        if flag in levels:
            changes += _other_source(data, flag)
    return Document(document.name, data, document.lines, options, tuple(changes))


def _other_source(data: dict[str, Any], level: Flag) -> list[Change]:
    """Drop what does not go with the level that a flag has given, and say so."""
    kind, source, switch_on = SOURCE_LEVELS[level.key], data["source"], data.get("switch_on")
    known = dict.fromkeys(key for table in SOURCES.values() for key in table.model_fields)
    kept = SOURCES[kind].model_fields.keys() - (SOURCE_LEVELS.keys() - {level.key})
    useless = [("source", key) for key in known if key not in kept]
    if kind not in ALTERNATING:
        useless.append(("switch_on", "closing_angle"))
    changes = []
    if source.get("kind") not in (None, kind):
        changes.append(Change(level.option, "source.kind", source["kind"], kind))
    source["kind"] = kind
    for table, key in useless:
        holder = source if table == "source" else switch_on
        if isinstance(holder, dict) and key in holder:
            changes.append(Change(level.option, f"{table}.{key}", holder.pop(key), None))
    return changes


def _text(path: str | Path) -> str:
    check_file(path, "sheet", LARGEST_SHEET, 'Write one with "rlc new filter FILE"')
    try:
        raw = Path(path).read_bytes()
    except OSError as error:
        raise unreadable(path, error) from None
    try:
        # Windows editors put a byte-order mark in front.
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        rule = f"is no text in UTF-8: byte {error.start + 1} is out of place"
        raise whole(path, rule, "Is it the right file?") from None
    if "\0" in text:
        raise whole(path, "is no text: it holds zero bytes", "Is it the right file?")
    return text


def _key_lines(text: str) -> dict[KeyPath, int]:
    """Line of each table and key, first mention; TOML readers do not tell."""
    lines: dict[KeyPath, int] = {}
    counts: dict[KeyPath, int] = {}
    table: KeyPath = ()
    rows: KeyPath = ()
    closing = ""
    for number, line in enumerate(text.splitlines(), start=1):
        if closing:
            closing = "" if closing in line else closing
            continue
        if header := _HEADER.match(line):
            table = _names(header[2])
            if header[1] == "[[":
                counts[table] = counts.get(table, -1) + 1
                lines.setdefault(table, number)
                table = (*table, counts[table])
            lines.setdefault(table, number)
        elif rows and line.lstrip().startswith("{"):
            # The tables of a list that goes on over several lines.
            for _ in range(line.count("{")):
                counts[rows] = counts.get(rows, -1) + 1
                lines[(*rows, counts[rows])] = number
        elif key := _KEY.match(line):
            names = _names(key[1])
            rows = table + names if key[2].partition("#")[0].strip() == "[" else ()
            for end in range(1, len(names) + 1):
                lines.setdefault(table + names[:end], number)
            for mark in ('"""', "'''"):
                if key[2].count(mark) == 1:
                    closing = mark
    return lines


def _names(dotted: str) -> KeyPath:
    return tuple(name.strip("\"'") for name in re.findall(_NAME, dotted))
