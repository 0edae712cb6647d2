"""The switch-on as tables: peaks, turning points, closings, limits in time."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING

import numpy as np
from rich.table import Table

from rlc.front.marking import show
from rlc.render.known import AS_STEADY, PEAKS, SIGNALS, largest_among, peak_of
from rlc.render.layout import new_table
from rlc.render.sources import closing
from rlc.solver.case import Case
from rlc.solver.source import ANY_ANGLE

if TYPE_CHECKING:
    from rlc.render.limits import Passing
    from rlc.solver.closing import Closings
    from rlc.solver.extrema import Extrema

# What is smaller than this share of the peak is rounding of zero.
_ZERO = 1e-9


def peaks(case: Case) -> Table:
    """The true peaks from closing on, when they come, and how they are known.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    Table
    """
    source = case.source
    alternating, open_charge = source.alternating, case.either_polarity
    lasting = "final"
    if alternating:
        lasting = "steady\npeak" if source.orders else "steady\namplitude"
    table = new_table(
        "Switch-on peaks", "of", "peak", "at", *["angle"] * alternating,
        *["charge"] * open_charge, lasting, "known", sentence=True,
    )  # fmt: skip
    for element, kind in PEAKS:
        found = peak_of(case, element)
        angle = "any" if found.angle is None else show(found.angle, "angle")
        charge = show(found.polarity * float(case.capacitor_voltage), "voltage")
        table.add_row(
            "current" if element == "current" else f"{element} voltage",
            show(found.value, kind),
            show(found.time, "time"),
            *[angle] * alternating,
            *["any" if math.isnan(found.time) else charge] * open_charge,
            show(found.steady, kind),
            found.known,
        )
    return table


def closings(found: Mapping[str, Closings], case: Case) -> Table:
    """How peaks are distributed over the closings that are possible, beside the worst one.

    Parameters
    ----------
    found : mapping of str to Closings
        By signal, as from :func:`rlc.solver.closing.over_closings`.
    case : Case
        The loop that they are of.

    Returns
    -------
    Table
    """
    where = "at any angle" if case.source.window == ANY_ANGLE else closing(case.source)
    table = new_table(
        f"Peaks over closings {where.removesuffix(' from the rising zero')}",
        "of", "1 % point", "median", "99 % point", "worst", "at angle",
    )  # fmt: skip
    for element, points in found.items():
        _, words, kind = SIGNALS[element]
        worst = peak_of(case, element)
        angle = "any" if worst.angle is None else show(worst.angle, "angle")
        table.add_row(
            words, *(show(point, kind) for point in points), show(worst.value, kind), angle
        )
    return table


def limits(found: Iterable[Passing], case: Case) -> Table:
    """When limits are first exceeded, and for how long in all.

    Parameters
    ----------
    found : iterable of Passing
        Of the nominal loop.
    case : Case
        That loop.

    Returns
    -------
    Table
    """
    open_closing = case.source.alternating and case.source.worst_angle
    worst = ", each at its worst closing" if open_closing else ""
    if case.polarity_open and not open_closing:
        worst = ", each at its worse polarity"
    table = new_table(
        f"Limits in time, nominal parts{worst}",
        "of", "limit", "above from", "in all", "what it is", sentence=True,
    )  # fmt: skip
    for row in found:
        _, words, kind = SIGNALS[row.element]
        never = row.lasts == 0
        first = "never" if never else show(row.first, "time")
        lasts = "lasting" if math.isinf(row.lasts) else show(row.lasts, "time")
        if math.isnan(row.lasts):
            lasts = "not known"
        table.add_row(words, show(row.limit, kind), first, "-" if never else lasts, row.words)
    return table


def extrema(found: Extrema, case: Case) -> Table:
    """The first turning points, and which of them is the largest of the whole switch-on.

    Parameters
    ----------
    found : Extrema
        The turning points.
    case : Case
        The loop that they are of.

    Returns
    -------
    Table
    """
    angle = f", closed at {show(found.angle, 'angle')}" if case.source.alternating else ""
    table = new_table(f"First extrema{angle}", "time", "current", "capacitor voltage", "", words=0)
    closed = case.closed_for("current")
    rows = zip(
        found.time, found.current, found.capacitor_voltage, found.of,
        largest_among(found, case), strict=True,
    )  # fmt: skip
    for time, current, voltage, of, largest in rows:
        cells = [
            show(0.0 if abs(value) < _ZERO * float(closed.peak(signal).value) else value, kind)
            for value, signal, kind in (
                (current, "current", "current"), (voltage, "capacitor", "voltage"),
            )
        ]  # fmt: skip
        words = f"{'largest' if largest else 'turn of the'} {SIGNALS[of].words}"
        table.add_row(show(time, "time"), *cells, words)
    table.columns[-1].justify = "left"
    return table


def beyond(found: Extrema, case: Case) -> str:
    """Where the largest values are that are not among these turning points; may be empty.

    Parameters
    ----------
    found : Extrema
        The turning points.
    case : Case
        The loop that they are of.

    Returns
    -------
    str
        A sentence for each of current and capacitor voltage that needs one, and for each that
        another closing makes larger.
    """
    closed, flags = case.closed_for("current"), largest_among(found, case)
    told = []
    of_this = " of this closing" if closed is not case else ""
    for signal, (_, words, kind) in SIGNALS.items():
        if any(flag and of == signal for flag, of in zip(flags, found.of, strict=True)):
            continue
        peak = closed.peak(signal)
        value, time = float(peak.value), float(peak.time)
        if value == 0 or math.isinf(value):
            continue
        head = f"The largest {words}{of_this}, {show(value, kind)},"
        last = float(np.max(found.time, initial=0.0))
        if math.isinf(time):
            how = "comes when the train is steady" if case.repeats else "is only approached"
        elif time == 0:
            how = "is that at closing"
        elif time > last:
            how = f"comes later, at {show(time, 'time')}"
        else:
            how = f"is no turning point: it comes at {show(time, 'time')}"
        told.append(f"{head} {how}.")
    for signal, (_, words, kind) in SIGNALS.items():
        worst = float(case.peak(signal).value)
        if worst > float(closed.peak(signal).value) * (1 + AS_STEADY):
            told.append(f"At its own worst closing the {words} reaches {show(worst, kind)}.")
    return " ".join(told)
