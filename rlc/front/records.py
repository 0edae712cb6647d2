"""Measured waveforms: a table of time and voltage as text, read into arrays."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from itertools import chain
from pathlib import Path
from typing import NamedTuple, TextIO

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError, SheetError
from rlc.front.textfile import check_file, unreadable, whole
from rlc.front.units import read
from rlc.solver.loop import BEYOND
from rlc.solver.shapes import MOST_KNOTS

Array = NDArray[np.float64]

#: A hundred characters for each row of the longest record; anything beyond is some other file.
LARGEST_RECORD = 100 * MOST_KNOTS

_EXAMPLE = "time [us], voltage [V]"
_COLUMN = re.compile(r"(.*?)\s*(?:\[(.*)\]|\((.*)\))")
_PLAIN = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_SHOWN, _LONGEST_HEADER = 60, 4000


class Record(NamedTuple):
    """A measured course; the switch closes at its first point.

    Attributes
    ----------
    time : Array
        Shape (n,), n of 2 or more, rising [s].
    voltage : Array
        Shape (n,) [V].
    """

    time: Array
    voltage: Array


class _Column(NamedTuple):
    """One of the two columns that count, with its name as typed."""

    kind: str
    name: str
    place: int
    scale: float


class _Header(NamedTuple):
    """What the first line that is no comment says."""

    separator: str
    columns: int
    time: _Column
    voltage: _Column


def read_record(path: str | Path) -> Record:
    """Read a measured waveform from a table in text.

    The first line names the columns, with the unit of each in brackets: ``time [us],
    voltage [V]``. Columns of other names do not count. Columns are separated by commas,
    semicolons or tabs; decimal marks are points. What follows a ``#`` is a comment.

    Parameters
    ----------
    path : str or Path
        A file in UTF-8 of at most 4 million points.

    Returns
    -------
    Record

    Raises
    ------
    SheetError
        With the first thing that is wrong with it, its line and its column.
    """
    check_file(path, "record", LARGEST_RECORD, "A record is looked for beside its sheet")
    try:
        with Path(path).open(encoding="utf-8-sig") as file:
            rows = _rows(file)
            header = _header(path, rows)
            found = _columns(rows, header)
        if found is None or not _is_sound(found):
            with Path(path).open(encoding="utf-8-sig") as file:
                raise _first_fault(path, file, header)
    except UnicodeDecodeError:
        raise whole(path, "is no text in UTF-8", "Save it as such, as a table in text") from None
    except OSError as error:
        raise unreadable(path, error) from None
    return found


def _rows(file: TextIO) -> Iterator[tuple[int, str]]:
    """Number and text of every line that says something."""
    for number, line in enumerate(file, start=1):
        text = line.partition("#")[0]
        if text.strip():
            yield number, text


def _header(path: str | Path, rows: Iterator[tuple[int, str]]) -> _Header:
    line, text = next(rows, (None, ""))
    if line is None:
        raise whole(path, "is empty", f'Its first line names the columns: "{_EXAMPLE}"')

    def refuse(name: str, value: str, rule: str, hint: str = "") -> SheetError:
        hint = hint or f'Write for example "{_EXAMPLE}"'
        return SheetError(str(path), ((line, InputError(name, value[:_SHOWN], rule, hint)),))

    if len(text) > _LONGEST_HEADER:
        raise refuse("header", text, f"is longer than {_LONGEST_HEADER} characters")
    separator = next((mark for mark in "\t;" if mark in text), ",")
    cells = [cell.strip(' "\r\n') for cell in text.split(separator)]
    parts = [_COLUMN.fullmatch(cell) for cell in cells]
    names = [(part[1] if part else cell).lower() for part, cell in zip(parts, cells, strict=True)]

    def column(kind: str) -> _Column:
        places = [place for place, name in enumerate(names) if name == kind]
        if len(places) != 1:
            rule = f'names {"two columns" if places else "no column"} "{kind}"'
            raise refuse("header", text.strip(), rule)
        (place,) = places
        part = parts[place]
        unit = (part[2] or part[3] or "").strip() if part else ""
        if not unit:
            raise refuse("header", cells[place], "has no unit in brackets")
        try:
            return _Column(kind, cells[place], place, read(f"1 {unit}", kind, "").value)
        except InputError as error:
            raise refuse("header", cells[place], error.rule) from None

    return _Header(separator, len(cells), column("time"), column("voltage"))


def _columns(rows: Iterator[tuple[int, str]], header: _Header) -> Record | None:
    """The two columns, or None where a row is not as it should be."""
    first = next(rows, None)
    if first is None:
        return None
    numbers = (header.time.place, header.voltage.place)
    # Named columns, so that a row with one too many or too few is refused.
    kinds = [(str(place), "f8" if place in numbers else "U1") for place in range(header.columns)]
    try:
        table = np.loadtxt(
            (text for _, text in chain([first], rows)),
            dtype=kinds,
            delimiter=header.separator,
            comments=None,
            ndmin=1,
            max_rows=MOST_KNOTS + 1,
        )
    except UnicodeDecodeError:
        raise
    except ValueError:
        return None
    with np.errstate(over="ignore"):
        return Record(*(table[str(each.place)] * each.scale for each in header[2:]))


def _is_sound(record: Record) -> bool:
    time, voltage = record
    since = np.abs(time)
    return bool(
        2 <= time.size <= MOST_KNOTS
        and np.all(np.abs(voltage) <= BEYOND)
        and np.all((since == 0) | ((since >= 1 / BEYOND) & (since <= BEYOND)))
        and np.all(np.diff(time - time[0]) > 0)
    )


def _first_fault(path: str | Path, file: TextIO, header: _Header) -> SheetError:
    """The first row that is not as it should be, in words."""
    rows = _rows(file)
    next(rows)
    count, begin, before, before_as_typed = 0, 0.0, -math.inf, ""
    for line, text in rows:
        cells = [cell.strip() for cell in text.split(header.separator)]
        try:
            if len(cells) != header.columns:
                raise _other_count(text.strip(), len(cells), header)
            time, _ = (_value(each, cells[each.place]) for each in header[2:])
            begin = begin if count else time
            if not time - begin > before:
                rule = f"does not rise: the row before has {before_as_typed}"
                hint = "Every time is later than the one before"
                raise InputError(header.time.name, cells[header.time.place], rule, hint)
        except InputError as error:
            return SheetError(str(path), ((line, error),))
        count, before, before_as_typed = count + 1, time - begin, cells[header.time.place]
        if count > MOST_KNOTS:
            return whole(path, f"has more than {MOST_KNOTS} points", "Leave out some of them")
    points = "no point" if not count else "one point"
    return whole(path, f"has {points}, and a record has two or more")


def _other_count(text: str, count: int, header: _Header) -> InputError:
    rule = f"has {count} column{'s' * (count > 1)}, and the header names {header.columns}"
    hint = "Columns are separated as in the header"
    if count > header.columns and header.separator == ",":
        hint = "If the comma is a decimal mark, write a point instead, as in 1.5"
    return InputError("row", text[:_SHOWN], rule, hint)


def _value(column: _Column, text: str) -> float:
    """A number in SI, or what is wrong with it."""
    number = float(text) if _PLAIN.fullmatch(text) else None
    if number is None:
        rule = "is no plain decimal number"
        try:
            read(text, "number", "")
        except InputError as error:
            rule = error.rule
        raise InputError(column.name, text[:_SHOWN], rule, "Write a number such as 1.5 or 2e-3")
    value = number * column.scale
    small = column.kind == "time" and 0 < abs(value) < 1 / BEYOND
    if small or abs(value) > BEYOND:
        raise InputError(column.name, text[:_SHOWN], "is beyond any circuit")
    return value
