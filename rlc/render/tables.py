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
from rich.console import Console
from rich.table import Table
from rich.text import Text

from rlc.front.marking import show
from rlc.render.cautions import Caution
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS
from rlc.solver.quantities import REGISTER, Quantity
from rlc.solver.spread import Outcome, Part
from rlc.solver.sweep import Sweep

_WIDEST_TEXT = 96
_VERDICT_STYLE = {"holds": "green", "holds by yield": "green", "fails": "bold red"}
_ELSEWHERE = {
    "natural_frequency", "ringing_frequency",
    "resistor_voltage", "inductor_voltage", "capacitor_voltage", "capacitor_voltage_amplitude",
    "voltage_magnification", "gain",
    "peak_current", "peak_current_time", "peak_capacitor_voltage", "peak_capacitor_voltage_time",
    "peak_inductor_voltage", "worst_closing_angle_current", "worst_closing_angle_capacitor_voltage",
}  # fmt: skip
_PEAKS = (("current", "current"), ("capacitor", "voltage"), ("inductor", "voltage"))


def write(console: Console, *pieces: Table | str) -> None:
    """Print tables and sentences; long sentences are wrapped, tables are not."""
    for piece in pieces:
        if isinstance(piece, str):
            width = min(console.width, _WIDEST_TEXT)
            for line in textwrap.wrap(piece, width) or [""]:
                console.print(Text(line), soft_wrap=True)
            continue
        needed = console.measure(piece).maximum
        if needed > console.width:
            console = Console(file=console.file, width=needed, markup=False, highlight=False)
        console.print(piece)


def _table(title: str, *headings: str, words: int = 1) -> Table:
    """A table whose first `words` columns are text and the rest numbers."""
    table = Table(
        title=title, title_justify="left", title_style="bold", box=SIMPLE_HEAD, pad_edge=False
    )
    for index, heading in enumerate(headings):
        table.add_column(heading, justify="left" if index < words else "right", no_wrap=True)
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
    table = _table(title, "quantity", "symbol", "value", "convention", words=2)
    table.columns[-1].justify = "left"
    for name, value in values.items():
        entry = REGISTER[name]
        if entry.group == group and name not in _ELSEWHERE:
            table.add_row(name, entry.symbol, show(value, entry.kind), entry.convention)
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
            show(float(np.angle(phasor)), "angle"),
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
        sine = case.source.kind == "sine"
        table.add_row(
            "current" if element == "current" else f"{element} voltage",
            show(float(peak.value), kind),
            show(float(peak.time), "time"),
            show(float(case.closing_angle_for(element)), "angle") if sine else "",
            show(amplitude, kind),
            _knowledge(float(peak.value), float(peak.time)),
        )
    return table


def _knowledge(value: float, time: float) -> str:
    if math.isinf(value):
        return "grows without bound"
    return "approached, never reached" if math.isnan(time) else "proved"


def name_of(outcome: Outcome) -> str:
    """The quantity, where it is asked for, and the rating that it stands for."""
    target = outcome.target
    place = f" at {show(target.at, target.entry.at)}" if target.at and target.entry.at else ""
    across = f" across {target.across}" if target.across else ""
    return f"{target.quantity}{across}{place}" + (f" ({target.rating})" if target.rating else "")


def targets(outcomes: Iterable[Outcome]) -> Table:
    """One row per target: limits, nominal and margin, worst case, yield, verdict."""
    table = _table(
        "Targets", "quantity", "limits", "nominal", "margin",
        "worst low", "worst high", "yield (95 % interval)", "verdict", words=2,
    )  # fmt: skip
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        table.add_row(
            name_of(outcome),
            _limits(outcome, kind),
            show(outcome.nominal, kind),
            _margin(outcome),
            show(outcome.worst_low, kind),
            show(outcome.worst_high, kind),
            _share(outcome),
            Text(outcome.verdict, style=_VERDICT_STYLE[outcome.verdict]),
        )
    return table


def _limits(outcome: Outcome, kind: str) -> str:
    target = outcome.target
    ends = (("min", target.minimum), ("max", target.maximum))
    found = [f"{word} {show(value, kind)}" for word, value in ends if value is not None]
    if target.goal is not None:
        found.append(f"for {show(target.goal, 'ratio')}")
    return ", ".join(found)


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
    return f"{value:g} % ({low:g} to {high:g})"


def spread(outcomes: Iterable[Outcome]) -> Table:
    """How each quantity is spread over the samples, and which part moves it most."""
    table = _table(
        "Spread", "quantity", "nominal", "minimum", "1 %", "50 %", "mean", "99 %", "maximum",
        "moved most by",
    )  # fmt: skip
    table.columns[-1].justify = "left"
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        points = (
            outcome.nominal, outcome.minimum, outcome.percent_1, outcome.percent_50,
            outcome.mean, outcome.percent_99, outcome.maximum,
        )  # fmt: skip
        table.add_row(name_of(outcome), *(show(point, kind) for point in points), _blame(outcome))
    return table


def _blame(outcome: Outcome) -> str:
    if not outcome.effects:
        return "-"
    kind, first = outcome.target.entry.kind, outcome.effects[0]
    return f"{first.field}: {show(first.low, kind)} to {show(first.high, kind)}"


def sweep(found: Sweep) -> Table:
    """A frequency response, one row per frequency."""
    headings = [
        (f"{column.across} gain" if column.across else column.quantity.replace("_", " "))
        for column in found.columns
    ]
    table = _table("Frequency response", "frequency", *headings, "", words=0)
    for index, frequency in enumerate(found.frequency):
        table.add_row(
            show(frequency, "frequency", 5),
            *(show(each.values[index], REGISTER[each.quantity].kind) for each in found.columns),
            found.marks.get(float(frequency), ""),
        )
    return table


def register() -> Table:
    """All quantities that have a name."""
    table = _table("Quantities", "name", "symbol", "unit", "group", "convention", words=5)
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
    """Each caution as a sentence of its own."""
    return [f"{index}. {caution.text}" for index, caution in enumerate(found, start=1)]
