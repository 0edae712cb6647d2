"""Results as tables and sentences for a terminal or a pipe.

Markup is off, because it would delete "[ohm]"; a cell is never cut: a table that is too wide for
the terminal is printed wider.
"""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from rich.box import SIMPLE_HEAD
from rich.cells import cell_len
from rich.console import Console
from rich.table import Table
from rich.text import Text

from rlc.front.marking import show
from rlc.render.cautions import Caution
from rlc.solver.case import Case
from rlc.solver.extrema import Extrema
from rlc.solver.loop import ELEMENTS
from rlc.solver.quantities import REGISTER, Quantity
from rlc.solver.search import PROVED_GAP
from rlc.solver.spread import Outcome, Part
from rlc.solver.sweep import Sweep

_WIDEST_TEXT = 96
_NARROWEST = 24
_ENDLESS = 10_000
_VERDICT_STYLE = {"holds": "green", "holds by yield": "green", "fails": "bold red"}
_ELSEWHERE = {
    "natural_frequency", "ringing_frequency",
    "resistor_voltage", "inductor_voltage", "capacitor_voltage", "capacitor_voltage_amplitude",
    "voltage_magnification", "gain",
    "peak_current", "peak_current_time", "peak_capacitor_voltage", "peak_capacitor_voltage_time",
    "peak_inductor_voltage", "worst_closing_angle_current", "worst_closing_angle_capacitor_voltage",
}  # fmt: skip
_NO_ANGLE = 1e-12
_SAME = 1e-9
_WORDS = {"current": "current", "capacitor": "capacitor voltage"}
_PEAKS = (("current", "current"), ("capacitor", "voltage"), ("inductor", "voltage"))


def write(width: int, *pieces: Table | str) -> None:
    """Print tables and sentences; sentences are wrapped, numbers and names never.

    Parameters
    ----------
    width : int
        Of the terminal; a table that needs more is printed wider.
    pieces : Table or str
        In their order.
    """
    # A console as wide as the terminal would cut what does not fit.
    console = Console(width=_ENDLESS, markup=False, highlight=False, emoji=False)
    for before, piece in zip((None, *pieces), pieces, strict=False):
        if isinstance(before, Table) or (before is not None and isinstance(piece, Table)):
            console.print()
        if isinstance(piece, str):
            for line in textwrap.wrap(piece, min(width, _WIDEST_TEXT)) or [""]:
                console.print(Text(line))
        else:
            _fit(piece, width)
            console.print(piece)


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


def _table(
    title: str, *headings: str, words: int = 1, sentence: bool = False, leading: int = 0
) -> Table:
    """A table whose first `words` columns are text; only a sentence in the last is wrapped."""
    table = Table(
        title=title, title_justify="left", title_style="bold", box=SIMPLE_HEAD, show_edge=False,
        pad_edge=False, padding=(0, 1, 0, 0), leading=leading,
    )  # fmt: skip
    for index, heading in enumerate(headings):
        wrapped = sentence and index == len(headings) - 1
        left = wrapped or index < words
        table.add_column(heading, justify="left" if left else "right", no_wrap=not wrapped)
    return table


def loop(
    case: Case, parts: Iterable[Part] = (), tolerances: Mapping[str, str] | None = None
) -> Table:
    """Every resistance and inductance that adds up, named, then capacitance and load."""
    table = _table("Loop", "part", "value", "tolerance", "from", "to")
    limits = {part.field: part for part in parts if part.high > part.low}
    rows = (
        ("resistor", "resistance", "resistance"),
        ("inductor's winding", "winding_resistance", "resistance"),
        ("capacitor's series resistance", "series_resistance", "resistance"),
        ("source's resistance", "source_resistance", "resistance"),
        ("resistance in series, total", "total_resistance", "resistance"),
        ("inductor", "inductance", "inductance"),
        ("source's inductance", "source_inductance", "inductance"),
        ("inductance in series, total", "total_inductance", "inductance"),
        ("capacitor", "capacitance", "capacitance"),
        ("load across the capacitor", "load_resistance", "resistance"),
    )
    for words, name, kind in rows:
        value = float(getattr(case.loop, name))
        part = limits.get(name)
        ends = (show(part.low, kind), show(part.high, kind)) if part else ("", "")
        shown = "none" if math.isinf(value) else show(value, kind)
        total = name.startswith("total")
        table.add_row(
            words, shown, (tolerances or {}).get(name, ""), *ends,
            style="bold" if total else None, end_section=total,
        )  # fmt: skip
    return table


def source(case: Case) -> str:
    """The source and the states at closing, in one sentence."""
    level, found = case.source, []
    if level.kind == "dc":
        found.append(f"Source: dc, {show(float(level.amplitude), 'voltage')} stepped on at t = 0")
    else:
        found.append(
            f"Source: sine, {show(float(level.rms), 'voltage')} rms"
            f" ({show(abs(float(level.amplitude)), 'voltage')} peak),"
            f" {show(float(level.frequency), 'frequency')}"
        )
        angle: Any = level.closing_angle
        shown = "the worst one" if angle is None else show(float(angle), "angle")
        found.append(f"closing angle {shown} from the rising zero")
    found.append(f"{show(float(case.capacitor_voltage), 'voltage')} on the capacitor at closing")
    if float(case.initial_current):
        found.append(f"{show(float(case.initial_current), 'current')} in the loop")
    return "; ".join(found) + "."


def frequencies(case: Case, values: Mapping[str, float]) -> Table:
    """Natural, ringing and source frequency side by side."""
    driven = float(case.source.frequency) if case.source.kind == "sine" else math.nan
    natural = values["natural_frequency"]
    table = _table("Frequencies", "natural", "ringing", "source", "source/natural", words=0)
    table.add_row(
        show(natural, "frequency"),
        show(values["ringing_frequency"], "frequency"),
        show(driven, "frequency") if math.isfinite(driven) else "dc",
        show(driven / natural, "number"),
    )
    return table


def quantities(title: str, values: Mapping[str, float], group: str) -> Table:
    """Registered quantities of a group, those left out that have a table of their own."""
    table = _table(title, "quantity", "symbol", "value", "convention", words=2, sentence=True)
    for name, value in values.items():
        entry = REGISTER[name]
        if entry.group == group and name not in _ELSEWHERE:
            table.add_row(name, entry.symbol, _shown(value, entry.kind), entry.convention)
    return table


def elements(case: Case) -> Table:
    """The steady state, element by element."""
    steady, level = case.steady, abs(float(case.source.amplitude))
    if case.source.kind == "dc":
        table = _table("Final state", "across", "voltage")
        table.add_row("source", show(level, "voltage"))
        for element in ELEMENTS:
            table.add_row(element, show(level * float(np.real(steady.across(element))), "voltage"))
        return table
    table = _table("Steady state by element", "across", "rms", "amplitude", "phase", "times source")
    phasors = {"source": np.complex128(1)} | {name: steady.across(name) for name in ELEMENTS}
    for name, phasor in phasors.items():
        ratio = abs(complex(phasor))
        table.add_row(
            name,
            show(ratio * level * case.source.rms_per_amplitude, "voltage"),
            show(ratio * level, "voltage"),
            _shown(float(np.angle(phasor)), "angle"),
            show(ratio, "number"),
        )
    return table


def peaks(case: Case) -> Table:
    """The true peaks from closing on, when they come, and how they are known."""
    table = _table(
        "Switch-on peaks", "of", "peak", "at", "closing angle", "steady amplitude", "known"
    )
    for element, kind in _PEAKS:
        peak = case.peak(element)
        steady = case.steady.current if element == "current" else case.steady.across(element)
        amplitude = abs(complex(case.source.amplitude * steady))
        angle = float(case.closing_angle_for(element))
        if case.source.worst_angle and not np.isfinite(peak.time):
            shown = "any"
        else:
            shown = show(angle, "angle") if case.source.kind == "sine" else ""
        table.add_row(
            "current" if element == "current" else f"{element} voltage",
            show(float(peak.value), kind),
            show(float(peak.time), "time") if np.isfinite(peak.time) else "-",
            shown,
            show(amplitude, kind),
            _knowledge(float(peak.value), float(peak.time), float(peak.gap), amplitude),
        )
    return table


def extrema(found: Extrema, case: Case) -> Table:
    """The first turning points, and which of them is the largest of all."""
    angle = f", closed at {show(found.angle, 'angle')}" if case.source.kind == "sine" else ""
    table = _table(f"First extrema{angle}", "time", "current", "capacitor voltage", "", words=0)
    for time, current, voltage, of in zip(
        found.time, found.current, found.capacitor_voltage, found.of, strict=True
    ):
        peak, value = case.peak(of), current if of == "current" else voltage
        governs = math.isclose(abs(value), float(peak.value), rel_tol=_SAME)
        words = f"{'largest' if governs else 'turn of the'} {_WORDS[of]}"
        table.add_row(show(time, "time"), show(current, "current"), show(voltage, "voltage"), words)
    table.columns[-1].justify = "left"
    return table


def _knowledge(value: float, time: float, gap: float, steady: float) -> str:
    if math.isinf(value):
        return "grows without bound"
    if gap > PROVED_GAP:
        return f"searched; at most {show(gap, 'ratio', 2)} more"
    if not math.isfinite(time):
        return "approached, never reached"
    # Driven near resonance a crest may pass the steady state by parts in a million, after long.
    return "proved, as in steady state" if 0 < value <= steady * (1 + 1e-4) else "proved"


def _name(outcome: Outcome) -> str:
    """The quantity, where it is asked for, and the rating that it stands for."""
    target = outcome.target
    lines = [target.quantity]
    if target.across:
        lines.append(f"across {target.across}")
    if target.at and target.entry.at:
        lines.append(f"at {show(target.at, target.entry.at)}")
    return "\n".join([*lines, *[target.rating] * bool(target.rating)])


def targets(outcomes: Iterable[Outcome]) -> Table:
    """One row per target: limits, nominal and margin, worst case, yield, verdict."""
    table = _table(
        "Targets", "quantity", "limits", "nominal\nmargin", "worst low\nworst high",
        "yield\n95 % interval", "verdict", words=2, leading=1,
    )  # fmt: skip
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        table.add_row(
            _name(outcome),
            _limits(outcome, kind),
            f"{show(outcome.nominal, kind)}\n{_margin(outcome)}",
            f"{show(outcome.worst_low, kind)}\n{show(outcome.worst_high, kind)}",
            _share(outcome),
            Text(outcome.verdict.replace(" ", "\n", 1), style=_VERDICT_STYLE[outcome.verdict]),
        )
    return table


def _limits(outcome: Outcome, kind: str) -> str:
    target = outcome.target
    ends = (("min", target.minimum), ("max", target.maximum))
    found = [f"{word} {show(value, kind)}" for word, value in ends if value is not None]
    if target.goal is not None:
        found.append(f"for {show(target.goal, 'ratio')}")
    return "\n".join(found)


def _margin(outcome: Outcome) -> str:
    """How far the nominal value is inside the nearest limit, as a share of that limit."""
    target, room = outcome.target, []
    if target.minimum:
        room.append((outcome.nominal - target.minimum) / abs(target.minimum))
    if target.maximum:
        room.append((target.maximum - outcome.nominal) / abs(target.maximum))
    return show(min(room), "ratio", 3) if room else "-"


def _share(outcome: Outcome) -> str:
    if outcome.share is None:
        return "no spread"
    # Rounded against the loop: a yield is not printed as 100 % unless it is.
    low, value, high = (
        math.floor(outcome.share.low * 1e4) / 100,
        math.floor(outcome.share.value * 1e4) / 100,
        math.ceil(outcome.share.high * 1e4) / 100,
    )
    return f"{value:g} %\n{low:g} to {high:g}"


def spread(outcomes: Iterable[Outcome]) -> Table:
    """How each quantity is spread over the samples, and which part moves it most."""
    table = _table(
        "Spread", "quantity", "nominal", "minimum\nmaximum", "1 % point\n99 % point",
        "median\nmean", "moved most by", leading=1,
    )  # fmt: skip
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        pairs = (
            (outcome.minimum, outcome.maximum),
            (outcome.percent_1, outcome.percent_99),
            (outcome.percent_50, outcome.mean),
        )
        table.add_row(
            _name(outcome),
            show(outcome.nominal, kind),
            *(f"{show(first, kind)}\n{show(second, kind)}" for first, second in pairs),
            _blame(outcome),
        )
    return table


def _blame(outcome: Outcome) -> str:
    if not outcome.effects:
        return "-"
    kind, first = outcome.target.entry.kind, outcome.effects[0]
    return f"{first.field}\n{show(first.low, kind)} to {show(first.high, kind)}"


def sweep(found: Sweep) -> Table:
    """A frequency response, one row per frequency."""
    headings = [
        (f"{column.across} gain" if column.across else column.quantity).replace("_", " ")
        for column in found.columns
    ]
    stacked = (heading.replace(" ", "\n") for heading in headings)
    table = _table("Frequency response", "frequency", *stacked, "", words=0)
    for index, frequency in enumerate(found.frequency):
        table.add_row(
            show(frequency, "frequency", 5),
            *(
                _shown(column.values[index], REGISTER[column.quantity].kind)
                for column in found.columns
            ),
            found.marks.get(float(frequency), ""),
        )
    return table


def _shown(value: float, kind: str) -> str:
    """As `show`, with the rounding that is left of an angle of zero taken away."""
    return show(0.0 if kind == "angle" and abs(value) < _NO_ANGLE else value, kind)


def register() -> Table:
    """All quantities that have a name."""
    table = _table(
        "Quantities", "name", "symbol", "unit", "group", "convention", words=4, sentence=True
    )
    for entry in REGISTER.values():
        table.add_row(entry.name, entry.symbol, _unit(entry), entry.group, entry.convention)
    return table


def definition(entry: Quantity) -> Table:
    """One quantity of the register in full."""
    table = Table(box=None, show_header=False, pad_edge=False)
    table.add_column(no_wrap=True)
    table.add_column(overflow="fold")
    asked = [f"at a {entry.at}"] * bool(entry.at) + ["across an element"] * entry.across
    for words, text in (
        ("name", entry.name),
        ("symbol", entry.symbol),
        ("unit", _unit(entry)),
        ("convention", entry.convention or "-"),
        ("definition", entry.definition),
        ("formula", entry.formula),
        ("asked for", " and ".join(asked) or "as it is"),
        ("source", entry.source),
    ):
        table.add_row(words, text)
    return table


def _unit(entry: Quantity) -> str:
    from rlc.front.marking import KINDS

    return KINDS[entry.kind].symbol or "1"


def cautions(found: Iterable[Caution]) -> list[str]:
    """Each caution as a sentence of its own, under a heading."""
    return [
        "Cautions",
        *(f"{index}. {caution.text}" for index, caution in enumerate(found, start=1)),
    ]
