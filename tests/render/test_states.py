"""Steady and final states as tables: by element, by order, of a train, after a pulse."""

from __future__ import annotations

import math

import numpy as np
import pytest
from stated import rows, unit

from rlc.render import states
from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import Order, Source, constant, shaped, sine

RESONANCE = 1 / (2 * math.pi)


def test_final_state_of_a_negative_dc_with_a_load() -> None:
    """-3 V over 1 ohm and a load of 2 ohm: -1 A, 3 W."""
    table = states.elements(unit(1.0, constant(-3.0), load_resistance=2.0))
    assert str(table.title) == "Final state"
    assert rows(table) == [
        ["source", "-3 V"], ["resistor", "-1 V"], ["inductor", "0 V"], ["capacitor", "-2 V"],
        ["current", "-1 A"], ["power from the source", "3 W"],
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("source", "words", "volts"),
    [
        (shaped(shapes.ramp(3.0, 1.0)), "source, at its level", ["3 V", "1 V", "2 V"]),
        (
            shaped(shapes.recorded([0.0, 1.0, 2.0], [9.0, -4.0, 3.0])),
            "source, last value held", ["3 V", "1 V", "2 V"],
        ),
        (shaped(shapes.pulse(3.0, 1.0)), "source, after its last pulse", ["0 V"] * 3),
        (shaped(shapes.surge(3.0, 1.0, 50.0)), "source, after the surge", ["0 V"] * 3),
    ],
)  # fmt: skip
def test_a_course_in_time_ends_on_its_last_value(
    source: Source, words: str, volts: list[str]
) -> None:
    """Source, resistor, capacitor: the last value over 1 ohm and a load of 2 ohm."""
    table = states.elements(unit(1.0, source, load_resistance=2.0))
    found = {row[0]: row[1] for row in rows(table)}
    assert [found[name] for name in (words, "resistor", "capacitor")] == volts


@pytest.mark.parametrize("amplitude", [3.0, -3.0])
def test_steady_state_at_resonance(amplitude: float) -> None:
    """R = 0.5 of impedances of 1: twice the source across inductor and capacitor."""
    table = states.elements(unit(0.5, sine(amplitude, RESONANCE)))
    assert str(table.title) == "Steady state by element"
    assert [column.header for column in table.columns] == [
        "across", "rms", "amplitude", "phase", "times source",
    ]  # fmt: skip
    assert rows(table) == [
        ["source", "2.121 V", "3 V", "0 deg", "1"],
        ["resistor", "2.121 V", "3 V", "0 deg", "1"],
        ["inductor", "4.243 V", "6 V", "90 deg", "2"],
        ["capacitor", "4.243 V", "6 V", "-90 deg", "2"],
    ]


def harmonic() -> Case:
    """Far below the loop's 159 mHz the capacitor has the source; the third is at resonance."""
    source = sine(rms=10.0, frequency=RESONANCE / 3, orders=[Order(3, 0.2)])
    return unit(0.5, source)


def test_each_order_and_the_totals() -> None:
    """Fundamental: X = 1/3 - 3 = -8/3, I = 10/|0.5 - 8j/3|; third: 2 V over 0.5 ohm, 4 A, 4 V."""
    size = abs(0.5 - 8j / 3)
    first, third = 10 / size, 4.0
    voltage = 3 * first
    expected = [
        ["1", "53.05 mHz", "10 V", f"{first:.4g} A", f"{voltage:.4g} V"],
        ["3", "159.2 mHz", "2 V", "4 A", "4 V"],
        [
            "total", "", f"{math.hypot(10, 2):.4g} V", f"{math.hypot(first, third):.4g} A",
            f"{math.hypot(voltage, 4):.4g} V",
        ],
    ]  # fmt: skip
    assert rows(states.orders(harmonic())) == expected
    assert "fundamental" in str(states.elements(harmonic()).title)


def test_a_train_shows_what_is_known_of_a_period() -> None:
    """No inductance to speak of and a charge that hardly moves: 5 V either way over 10 ohm."""
    loop = make_loop(resistance=10.0, inductance=1e-9, capacitance=1e-3)
    source = shaped(shapes.pulse(10.0, 1e-4, period=2e-4, count=None))
    # Moves by 5 V times 0.1 ms over 10 ms, a part in 100: squared, the rms by 1e-5.
    assert rows(states.elements(Case(loop, source))) == [
        ["current, rms over a period", "500 mA"], ["heat in the resistor, mean", "2.5 W"],
    ]  # fmt: skip


def test_what_becomes_of_the_charge_after_a_pulse() -> None:
    pulse, surge = shaped(shapes.pulse(3.0, 1.0)), shaped(shapes.surge(3.0, 1.0, 50.0))
    # R = 0.5: the envelope's time constant is 2 L/R = 4 s.
    told = states.after(unit(0.5, pulse))
    assert told.startswith("After the last pulse ")
    assert "time constant of 4 s" in told
    assert states.after(unit(0.5, surge)).startswith("After the surge ")
    assert "nothing damps" in states.after(unit(0.0, pulse))
    train = shaped(shapes.pulse(3.0, 1.0, period=9.0, count=None))
    for source in (constant(1.0), sine(1.0, 1.0), shaped(shapes.ramp(1.0, 1.0)), train):
        assert states.after(unit(0.5, source)) == ""


def test_rows_as_numbers_add_up() -> None:
    found = states.by_order(harmonic())
    assert [row["number"] for row in found] == [1, 3]
    assert found[1]["frequency"] == pytest.approx(RESONANCE, rel=1e-15)
    # at resonance, to which the frequency is known to one rounding
    assert found[1]["current"] == pytest.approx(4.0, rel=1e-14)
    assert np.hypot(found[0]["source"], found[1]["source"]) == pytest.approx(
        math.sqrt(104), rel=1e-14
    )
