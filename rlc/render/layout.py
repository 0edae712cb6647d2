"""Tables and sentences as lines of text.

Markup is off, because it would delete "[ohm]"; a cell is never cut: a table that is too wide for
the terminal is printed wider.
"""

from __future__ import annotations

import io
import textwrap
from collections.abc import Iterable

from rich.box import SIMPLE_HEAD
from rich.cells import cell_len
from rich.console import Console
from rich.table import Table
from rich.text import Text

_WIDEST_TEXT = 96
_NARROWEST = 24
_ENDLESS = 10_000


def write(width: int, *pieces: Table | Text | str) -> None:
    """Print tables and sentences; sentences are wrapped, numbers and names never.

    Parameters
    ----------
    width : int
        Of the terminal; a table that needs more is printed wider.
    pieces : Table, Text or str
        In their order; a Text has its lines already.
    """
    # A console as wide as the terminal would cut what does not fit.
    console = Console(width=_ENDLESS, markup=False, highlight=False, emoji=False)
    for before, piece in zip((None, *pieces), pieces, strict=False):
        laid_out = Table | Text
        apart = isinstance(before, laid_out) or (before is not None and isinstance(piece, laid_out))
        if apart and piece != "":
            console.print()
        if isinstance(piece, str):
            for line in textwrap.wrap(piece, min(width, _WIDEST_TEXT)) or [""]:
                console.print(Text(_printable(line, console.encoding)))
        elif isinstance(piece, Text):
            plain = _printable(piece.plain, console.encoding)
            console.print(piece if plain == piece.plain else Text(plain))
        else:
            _fit(piece, width)
            console.print(piece)


def _printable(text: str, encoding: str) -> str:
    """As rich does it for the rules of tables where a terminal has no such signs."""
    return text if encoding.startswith("utf") else text.replace("─", "-").replace("±", "+/-")


def _fit(table: Table, width: int) -> None:
    """Give every column what it needs, and a sentence in the last one what is left."""
    lengths = [
        [
            cell_len(line)
            for cell in (column.header, *column.cells)
            for line in str(cell).splitlines()
        ]
        for column in table.columns
    ]
    needed = [max(length, default=0) for length in lengths]
    last = table.columns[-1]
    if not last.no_wrap:
        words = [cell_len(word) for cell in last.cells for word in str(cell).split()]
        # Two blanks between columns.
        left = width - sum(needed[:-1]) - 2 * (len(needed) - 1)
        needed[-1] = min(needed[-1], max(left, *words, _NARROWEST))
    for column, size in zip(table.columns, needed, strict=True):
        column.width = size


def new_table(
    title: str, *headings: str, words: int = 1, sentence: bool = False, leading: int = 0
) -> Table:
    """A table whose first columns are text, the others numbers.

    Parameters
    ----------
    title : str
        Above the table.
    *headings : str
        One per column.
    words : int
        How many columns from the left are text.
    sentence : bool
        Whether the last column holds sentences, which are wrapped; nothing else is.
    leading : int
        Empty lines between rows.

    Returns
    -------
    Table
        Without rows.
    """
    table = Table(
        title=title, title_justify="left", title_style="bold", box=SIMPLE_HEAD, show_edge=False,
        pad_edge=False, padding=(0, 1, 0, 0), leading=leading,
    )  # fmt: skip
    for index, heading in enumerate(headings):
        wrapped = sentence and index == len(headings) - 1
        left = wrapped or index < words
        table.add_column(heading, justify="left" if left else "right", no_wrap=not wrapped)
    return table


def named_rows(
    title: str, headings: tuple[str, ...], rows: Iterable[tuple[str, tuple[str, ...]]]
) -> Text:
    """A table whose rows each have a line of their own for a long name above them.

    Parameters
    ----------
    title : str
        First line.
    headings : tuple of str
        Of the columns; the first is set to the left.
    rows : iterable of (str, tuple of str)
        Name, and one cell per column; cells may have several lines.

    Returns
    -------
    Text
        Lines as they are to be printed.
    """
    table, names = new_table("", *headings, words=1), []
    for name, cells in rows:
        names.append(name)
        table.add_row(*cells)
    _fit(table, 0)
    with (
        console := Console(width=_ENDLESS, file=io.StringIO(), color_system=None)
    ).capture() as taken:
        console.print(table)
    lines = [line.rstrip() for line in taken.get().splitlines()]
    depth = max(heading.count("\n") for heading in headings) + 2
    found, at = [title, *lines[:depth]], depth
    for row, name in enumerate(names):
        height = max(
            str(cell).count("\n") + 1
            for column in table.columns
            for cell in [list(column.cells)[row]]
        )
        found += [name, *lines[at : at + height]]
        at += height
    text = Text("\n".join(found))
    text.stylize("bold", 0, len(title))
    return text
