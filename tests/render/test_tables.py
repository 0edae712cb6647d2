"""Tables and sentences: what stands in which cell, and that no cell is cut."""

from __future__ import annotations

import math
import re
from dataclasses import replace

import numpy as np
import pytest
from rich.table import Table

from rlc.render import layout, tables
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.source import Source, constant, sine
from rlc.solver.spread import Effect, Outcome, spread, yield_interval
from rlc.solver.sweep import Column, Sweep
from rlc.solver.targets import Target

RESONANCE = 1 / (2 * math.pi)


def unit(resistance: float, source: Source, *states: float, **more: float) -> Case:
    """L = C = 1: natural angular frequency and characteristic impedance are 1."""
    loop = make_loop(resistance=resistance, inductance=1.0, capacitance=1.0, **more)
    return Case(loop, source, *states)  # type: ignore[arg-type]


def rows(table: Table) -> list[list[str]]:
    return [list(row) for row in zip(*(column.cells for column in table.columns), strict=True)]  # type: ignore[arg-type]


def block(text: str, name: str) -> list[list[str]]:
    """Cells of the lines below a name that has a line of its own."""
    lines = text.splitlines()
    start = lines.index(name) + 1
    found = []
    for line in lines[start:]:
        if not line.startswith(" "):
            break
        found.append(re.split(r"\s{2,}", line.strip()))
    return found


# --- the loop and its source


def test_each_part_beside_its_value_and_limits() -> None:
    loop = make_loop(
        resistance=2.0, inductance=3.0, capacitance=5.0, winding_resistance=7.0,
        series_resistance=11.0, load_resistance=13.0, source_resistance=17.0,
        source_inductance=19.0,
    )  # fmt: skip
    parts = (Part("resistance", 2.0, 1.5, 4.0), Part("capacitance", 5.0, 5.0, 5.0))
    found = rows(tables.loop(Case(loop, constant(1.0)), parts, {"resistance": "-25 % / +100 %"}))
    assert found == [
        ["resistor", "2 ohm", "-25 % / +100 %", "1.5 ohm", "4 ohm"],
        ["inductor's winding", "7 ohm", "", "", ""],
        ["capacitor's series resistance", "11 ohm", "", "", ""],
        ["source's resistance", "17 ohm", "", "", ""],
        ["resistance in series, total", "37 ohm", "", "", ""],
        ["inductor", "3 H", "", "", ""],
        ["source's inductance", "19 H", "", "", ""],
        ["inductance in series, total", "22 H", "", "", ""],
        ["capacitor", "5 F", "", "", ""],
        ["load across the capacitor", "13 ohm", "", "", ""],
    ]
    assert rows(tables.loop(unit(1.0, constant(1.0))))[-1][1] == "none"


def test_frequencies_side_by_side() -> None:
    """R = 1.2: rings at sqrt(1 - 0.36) = 0.8 rad/s; natural 1 rad/s is 159.15 mHz."""
    values = {"natural_frequency": RESONANCE, "ringing_frequency": 0.8 * RESONANCE}
    driven = rows(tables.frequencies(unit(1.2, sine(1.0, 2 * RESONANCE)), values))
    assert driven == [["159.2 mHz", "127.3 mHz", "318.3 mHz", "2"]]
    stepped = rows(tables.frequencies(unit(1.2, constant(1.0)), values))
    assert stepped == [["159.2 mHz", "127.3 mHz", "dc", "-"]]


# --- sweep


def test_sweep_rows_carry_their_marks() -> None:
    found = Sweep(
        np.array([1.0, 2.0, 4.0]),
        (
            Column("impedance", None, np.array([10.0, 20.0, np.inf])),
            Column("current", None, np.array([1.0, 2.0, 3.0])),
            Column("current_phase", None, np.array([math.pi / 2, 1e-17, -math.pi / 2])),
            Column("gain", "resistor", np.array([0.1, 0.2, 0.3])),
        ),
        {2.0: "f_0", 4.0: "source"},
    )
    table = tables.sweep(found)
    assert [str(column.header).split() for column in table.columns] == [
        ["frequency"], ["impedance"], ["current", "rms"], ["current", "phase"],
        ["resistor", "gain"], [],
    ]  # fmt: skip
    assert rows(table) == [
        ["1 Hz", "10 ohm", "1 A", "90 deg", "0.1", ""],
        ["2 Hz", "20 ohm", "2 A", "0 deg", "0.2", "f_0"],
        ["4 Hz", "unbounded", "3 A", "-90 deg", "0.3", "source"],
    ]


# --- targets and spread


def judged(target: Target, samples: int = 2000) -> Outcome:
    """L = C = 1, R = 1 within 10 %: the damping ratio R/2 is 0.5, from 0.45 to 0.55."""
    part = Part("resistance", 1.0, 0.9, 1.1)
    return spread(unit(1.0, constant(1.0)), (part,), samples, 1).outcome(target)


def damping(**limits: float | None) -> Target:
    return Target("damping_ratio", **limits)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("target", "samples", "verdict", "reason", "margin"),
    [
        # Margins: (0.6 - 0.5)/0.6, (0.5 - 0.46)/0.46, (0.54 - 0.5)/0.54, (0.4 - 0.5)/0.4.
        (damping(maximum=0.6), 100, "holds", [], "16.7 %"),
        (damping(maximum=0.54, goal=0.5), 2000, "holds by yield", [], "7.41 %"),
        (damping(maximum=0.4), 100, "fails", ["nominal"], "-25 %"),
        (damping(minimum=0.46), 100, "fails", ["worst low"], "8.7 %"),
        (damping(maximum=0.54), 100, "fails", ["worst high"], "7.41 %"),
        # One unit in ten is below 0.46.
        (damping(maximum=0.46, goal=0.5), 2000, "fails", ["yield"], "-8.7 %"),
        (damping(maximum=0.54, goal=0.5), 0, "fails", ["no samples"], "7.41 %"),
    ],
)
def test_one_target_per_verdict_and_its_reason(
    target: Target, samples: int, verdict: str, reason: list[str], margin: str
) -> None:
    text = tables.targets([judged(target, samples)]).plain
    first, second, *_ = block(text, "damping_ratio")
    assert [first[1], first[2], first[-1]] == ["0.5", "0.45", verdict]
    limit = f"min {target.minimum}" if target.minimum else f"max {target.maximum}"
    assert first[0] == limit
    share = ["for 50 %"] if target.goal else []
    # Beside them the interval of the yield, where there are samples.
    interval = second[len(share) + 2 : len(share) + 2 + bool(samples)]
    assert second == [*share, margin, "0.55", *interval, *reason]


def test_names_stand_on_lines_of_their_own() -> None:
    target = Target("capacitor_voltage", maximum=7.0, at=50.0, rating="capacitor.rated_voltage_rms")
    driven = spread(unit(1.0, sine(1.0, RESONANCE)), (), 0, 1)
    outcomes = [driven.outcome(target), driven.outcome(Target("gain", 0.5, across="resistor"))]
    names = [
        "capacitor_voltage, rms at 50 Hz (capacitor.rated_voltage_rms)",
        "gain across resistor",
    ]
    for text in (tables.targets(outcomes), tables.spread(outcomes)):
        lines = text.plain.splitlines()
        assert [line for line in lines if "capacitor" in line or "gain" in line] == names
        # What belongs to a name is indented below it.
        assert all(lines[lines.index(name) + 1].startswith("  ") for name in names)
    assert block(tables.targets(outcomes).plain, names[0])[0][0] == "max 7 V"
    assert block(tables.targets(outcomes).plain, names[1])[0][0] == "min 0.5"


@pytest.mark.parametrize(
    ("kept", "samples", "share", "low", "high"),
    [
        # Of n units without a miss the low end is 0.025^(1/n): 0.998157 for 2000.
        (2000, 2000, "100 %", "99.81", "100"),
        # With one miss the high end is 0.975^(1/n): 0.9999873.
        (1999, 2000, "99.95 %", None, "100"),
        (19_999, 20_000, "99.99 %", None, "100"),
        (999_999, 1_000_000, "99.99 %", None, "100"),
        # 1 - 0.025^(1/n) for none: 0.001843.
        (0, 2000, "0 %", "0", "0.19"),
        # In doubles 0.57 times 1e4 is less than 5700, by its last bit.
        (114, 200, "57 %", None, None),
        (1140, 2000, "57 %", None, None),
        (1, 3, "33.33 %", None, None),
    ],
)
def test_a_yield_is_rounded_against_the_loop(
    kept: int, samples: int, share: str, low: str | None, high: str | None
) -> None:
    outcome = replace(judged(damping(maximum=0.6), 0), share=yield_interval(kept, samples))
    first, second = block(tables.targets([outcome]).plain, "damping_ratio")[:2]
    assert first[3] == share
    found_low, found_high = second[2].split(" to ")
    assert low in (None, found_low)
    assert high in (None, found_high)


def test_without_samples_there_is_no_yield() -> None:
    first, second = block(tables.targets([judged(damping(maximum=0.6), 0)]).plain, "damping_ratio")
    assert first == ["max 0.6", "0.5", "0.45", "-", "holds"]
    assert second == ["16.7 %", "0.55"]


def test_the_summary_counts_each_verdict() -> None:
    outcomes = [judged(damping(maximum=limit)) for limit in (0.6, 0.7, 0.4)]
    outcomes += [judged(damping(maximum=0.54, goal=0.5))]
    said = "Targets: 4 in all, holds 2, holds by yield 1, fails 1."
    assert tables.summary(outcomes) == said
    assert tables.summary([]) == "No target and no rating is stated: nothing is judged."


def test_a_spread_row_cell_by_cell() -> None:
    outcome = Outcome(
        Target("gain"), nominal=4.0, worst_low=1.0, worst_high=11.0, minimum=2.0, maximum=8.0,
        mean=4.5, percent_1=2.5, percent_50=4.25, percent_99=7.5, samples=np.zeros(0), share=None,
        effects=(Effect("capacitance", 3.0, 6.0), Effect("resistance", 5.0, 3.5)),
    )  # fmt: skip
    found = block(tables.spread([outcome]).plain, "gain")
    assert found == [["4", "2", "2.5", "4.25", "capacitance"], ["8", "7.5", "4.5", "3 to 6"]]
    alone = block(tables.spread([replace(outcome, effects=())]).plain, "gain")
    assert alone[0][-1] == "-"


# --- layout

SENTENCE = "This sentence goes on for longer than the narrowest column that a terminal leaves it"


def test_a_sentence_is_wrapped_and_numbers_are_never_cut(
    capsys: pytest.CaptureFixture[str],
) -> None:
    table = layout.new_table("Title", "quantity", "value", "meaning", words=1, sentence=True)
    table.add_row("a_name_that_fills_twenty_9", "-123.4567891 Mohm", SENTENCE)
    layout.write(40, table)
    lines = capsys.readouterr().out.splitlines()
    row = [line for line in lines if "a_name_that" in line]
    assert len(row) == 1
    assert row[0].startswith("a_name_that_fills_twenty_9")
    assert "-123.4567891 Mohm" in row[0]
    start = row[0].index("This")
    below = [line[start:].strip() for line in lines[lines.index(row[0]) :]]
    assert " ".join(below).split() == SENTENCE.split()
    # The narrowest column for a sentence has 24 characters; this one needs four lines of them.
    assert max(map(len, below)) <= 24
    assert len([line for line in below if line]) >= 4


def test_a_wide_terminal_wraps_no_cell(capsys: pytest.CaptureFixture[str]) -> None:
    table = layout.new_table("Title", "quantity", "meaning", words=1, sentence=True)
    table.add_row("name [ohm]", SENTENCE)
    layout.write(200, table)
    out = capsys.readouterr().out
    assert SENTENCE in out
    assert "name [ohm]" in out


def test_a_table_of_numbers_is_printed_wider_than_the_terminal(
    capsys: pytest.CaptureFixture[str],
) -> None:
    found = tables.loop(unit(1.0, constant(1.0)), (), {"resistance": "-20 % / +80 %"})
    layout.write(40, found)
    out = capsys.readouterr().out
    assert "\u2026" not in out
    (row,) = (line for line in out.splitlines() if line.startswith("resistor "))
    assert re.split(r"\s{2,}", row.strip()) == ["resistor", "1 ohm", "-20 % / +80 %"]


def test_sentences_are_wrapped_at_the_terminal_and_at_96(
    capsys: pytest.CaptureFixture[str],
) -> None:
    for width, widest in ((40, 40), (200, 96)):
        layout.write(width, SENTENCE + " " + SENTENCE, "second [mH]", "")
        *lines, second, empty = capsys.readouterr().out.splitlines()
        assert (second, empty) == ("second [mH]", "")
        assert " ".join(lines).split() == (SENTENCE + " " + SENTENCE).split()
        # The longest word has eight letters: no line stops earlier than it must.
        assert widest - 9 < max(map(len, lines)) <= widest


def test_one_blank_line_around_tables(capsys: pytest.CaptureFixture[str]) -> None:
    outcome = judged(damping(maximum=0.6), 0)
    layout.write(80, "before", "still before", tables.targets([outcome]), "after")
    lines = capsys.readouterr().out.splitlines()
    assert lines[:4] == ["before", "still before", "", "Targets"]
    assert lines[-2:] == ["", "after"]
    assert lines.count("") == 2
