"""Results as tables and sentences for a terminal or a pipe."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING

from rich.table import Table
from rich.text import Text

from rlc.front.marking import KINDS, show
from rlc.render.cautions import Caution
from rlc.render.layout import named_rows, new_table
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.quantity import Quantity

if TYPE_CHECKING:
    from rlc.solver.parts import Part
    from rlc.solver.spread import Outcome
    from rlc.solver.sweep import Sweep

_VERDICT_STYLE = {"holds": "green", "holds by yield": "green", "fails": "bold red"}
_ELSEWHERE = {
    "natural_frequency", "ringing_frequency",
    "resistor_voltage", "inductor_voltage", "capacitor_voltage", "capacitor_voltage_amplitude",
    "voltage_magnification", "gain",
    "peak_current", "peak_current_time", "peak_capacitor_voltage", "peak_capacitor_voltage_time",
    "peak_inductor_voltage", "worst_closing_angle_current", "worst_closing_angle_capacitor_voltage",
    "current_exceeding_time", "current_exceeding_duration",
    "capacitor_voltage_exceeding_time", "capacitor_voltage_exceeding_duration",
}  # fmt: skip
_NO_ANGLE = 1e-12


def loop(
    case: Case, parts: Iterable[Part] = (), tolerances: Mapping[str, str] | None = None
) -> Table:
    """Every resistance and inductance that adds up, named, then capacitance and load.

    Parameters
    ----------
    case : Case
        One loop.
    parts : iterable of Part
        What is spread; its limits are shown.
    tolerances : mapping of str to str, optional
        As typed, by field of the loop.
    """
    table = new_table("Loop", "part", "value", "tolerance", "from", "to")
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


def frequencies(case: Case, values: Mapping[str, float]) -> Table:
    """Natural, ringing and source frequency side by side.

    Parameters
    ----------
    case : Case
        One loop.
    values : mapping of str to float
        Its ``natural_frequency`` and ``ringing_frequency`` among them [Hz].
    """
    driven = float(case.source.frequency) if case.source.alternating else math.nan
    natural = values["natural_frequency"]
    table = new_table("Frequencies", "natural", "ringing", "source", "source/natural", words=0)
    table.add_row(
        show(natural, "frequency"),
        show(values["ringing_frequency"], "frequency"),
        show(driven, "frequency") if math.isfinite(driven) else case.source.kind,
        show(driven / natural, "number"),
    )
    return table


def quantities(title: str, values: Mapping[str, float], group: str) -> Table:
    """Registered quantities of a group, those left out that have a table of their own.

    Parameters
    ----------
    title : str
        Above the table.
    values : mapping of str to float
        By name in the register [SI unit of the quantity].
    group : {"loop", "steady", "switch-on"}
        Which of them are shown.
    """
    table = new_table(title, "quantity", "symbol", "value", "convention", words=2, sentence=True)
    for name, value in values.items():
        entry = REGISTER[name]
        if entry.group == group and name not in _ELSEWHERE:
            table.add_row(name, entry.symbol, shown(value, entry.kind), entry.convention)
    return table


def _name(outcome: Outcome) -> str:
    """The quantity, where it is asked for, and the rating that it stands for."""
    target = outcome.target
    place = f" at {show(target.at, target.entry.at)}" if target.at and target.entry.at else ""
    across = f" across {target.across}" if target.across else ""
    rating = f" ({target.rating})" if target.rating else ""
    unit = ", rms" if target.entry.convention.startswith("rms") else ""
    return f"{target.quantity}{unit}{across}{place}{rating}"


def targets(outcomes: Iterable[Outcome]) -> Text:
    """One row per target: limits, nominal and margin, worst case, yield, verdict.

    Parameters
    ----------
    outcomes : iterable of Outcome
        Of quantities with limits.
    """
    headings = (
        "  limits", "nominal\nmargin", "worst low\nworst high", "yield\n95 % interval", "verdict",
    )  # fmt: skip
    rows = []
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        cells = (
            _limits(outcome, kind),
            f"{show(outcome.nominal, kind)}\n{show(outcome.margin, 'ratio', 3)}",
            f"{show(outcome.worst_low, kind)}\n{show(outcome.worst_high, kind)}",
            _share(outcome),
            _verdict(outcome),
        )
        rows.append((_name(outcome), cells))
    text = named_rows("Targets", headings, rows)
    for verdict, style in _VERDICT_STYLE.items():
        text.highlight_words([f" {verdict}"], style)
    return text


def _verdict(outcome: Outcome) -> str:
    """The verdict, and what misses where it fails."""
    reason = outcome.miss
    if outcome.verdict == "fails" and outcome.target.goal is not None:
        reason = "yield" if outcome.share else "no samples"
    return f"{outcome.verdict}\n{reason if outcome.verdict == 'fails' else ''}".rstrip()


def summary(outcomes: Iterable[Outcome]) -> str:
    """How many targets hold, in one sentence."""
    verdicts: list[str] = [outcome.verdict for outcome in outcomes]
    if not verdicts:
        return "No target and no rating is stated: nothing is judged."
    counts = ", ".join(f"{word} {verdicts.count(word)}" for word in _VERDICT_STYLE)
    return f"Targets: {len(verdicts)} in all, {counts}."


def _limits(outcome: Outcome, kind: str) -> str:
    target = outcome.target
    ends = (("min", target.minimum), ("max", target.maximum))
    found = [f"  {word} {show(value, kind)}" for word, value in ends if value is not None]
    if target.goal is not None:
        found.append(f"  for {show(target.goal, 'ratio')}")
    return "\n".join(found)


def _share(outcome: Outcome) -> str:
    if outcome.share is None:
        return "-"
    # To hundredths of a per cent; 0.57 times 1e4 is 5700, but for its last bit.
    value, low, high = (round(each * 1e4, 6) for each in outcome.share[:3])
    # Rounded against the loop: a yield is not printed as 100 % unless it is.
    low, value, high = math.floor(low) / 100, math.floor(value) / 100, math.ceil(high) / 100
    return f"{value:g} %\n{low:g} to {high:g}"


def spread(outcomes: Iterable[Outcome]) -> Text:
    """How each quantity is spread over the samples, and which part moves it most.

    Parameters
    ----------
    outcomes : iterable of Outcome
        With samples or without.
    """
    headings = (
        "  nominal", "minimum\nmaximum", "1 % point\n99 % point", "median\nmean",
        "moved most by\nfrom its low to its high limit",
    )  # fmt: skip
    rows = []
    for outcome in outcomes:
        kind = outcome.target.entry.kind
        pairs = (
            (outcome.minimum, outcome.maximum),
            (outcome.percent_1, outcome.percent_99),
            (outcome.percent_50, outcome.mean),
        )
        cells = (
            f"  {show(outcome.nominal, kind)}",
            *(f"{show(first, kind)}\n{show(second, kind)}" for first, second in pairs),
            _blame(outcome),
        )
        rows.append((_name(outcome), cells))
    return named_rows("Spread", headings, rows)


def _blame(outcome: Outcome) -> str:
    if not outcome.effects:
        return "-"
    kind, first = outcome.target.entry.kind, outcome.effects[0]
    return f"{first.field}\n{show(first.low, kind)} to {show(first.high, kind)}"


def sweep(found: Sweep) -> Table:
    """A frequency response, one row per frequency."""
    headings = [
        (f"{column.across} gain" if column.across else _titled(column.quantity)).replace("_", " ")
        for column in found.columns
    ]
    stacked = (heading.replace(" ", "\n") for heading in headings)
    table = new_table("Frequency response", "frequency", *stacked, "", words=0)
    for index, frequency in enumerate(found.frequency):
        table.add_row(
            show(frequency, "frequency", 5),
            *(
                shown(column.values[index], REGISTER[column.quantity].kind)
                for column in found.columns
            ),
            found.marks.get(float(frequency), ""),
        )
    return table


def _titled(quantity: str) -> str:
    rms = REGISTER[quantity].convention.startswith("rms")
    return f"{quantity} rms" if rms else quantity


def shown(value: float, kind: str) -> str:
    """As `show`, with the rounding that is left of an angle of zero taken away.

    Parameters
    ----------
    value : float
        [SI unit of the kind].
    kind : str
        Key of :data:`rlc.front.marking.KINDS`.
    """
    return show(0.0 if kind == "angle" and abs(value) < _NO_ANGLE else value, kind)


def register() -> Table:
    """All quantities that have a name."""
    table = new_table(
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
    return KINDS[entry.kind].symbol or "1"


def cautions(found: Iterable[Caution]) -> list[str]:
    """Each caution as a sentence of its own, under a heading."""
    return [
        "",
        "Cautions",
        *(f"{index}. {caution.text}" for index, caution in enumerate(found, start=1)),
    ]
