"""Steady states that textbooks print: reactance, impedance, current, phase and power."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import sine

from .printed import (
    DEGREE,
    NO_INDUCTANCE,
    TURN,
    Reading,
    ask,
    crosses,
    printed,
    readings,
    rms_sine,
)

READINGS = [
    # OpenStax, University Physics vol. 2, section 15.3, worked example (module m58658, element
    # fs-id1172101794402).
    *readings(
        "University Physics 15.3",
        Case(make_loop(resistance=4.00, inductance=3.00e-3, capacitance=8.00e-4), sine(0.100, 200)),
        Reading("capacitor_voltage", "0.995", over="current"),
        Reading("inductor_voltage", "3.77", over="current"),
        Reading("impedance", "4.87"),
        Reading("current_amplitude", "2.05e-2"),
        Reading("impedance_phase", "0.607"),
        Reading("current_phase", "-0.607"),
    ),
    # OpenStax, College Physics 2e, section 23.12, three worked examples and an exercise (module
    # m42431, elements fs-id1169737723572, ...738045330, ...737987472, ...738224784).
    *readings(
        "College Physics 23.12",
        Case(
            make_loop(resistance=40.0, inductance=3.00e-3, capacitance=5.00e-6),
            rms_sine(120, 60),
        ),
        Reading("inductor_voltage", "1.13", at=60, over="current"),
        Reading("capacitor_voltage", "531", at=60, over="current"),
        Reading("impedance", "531", at=60),
        Reading("current", "0.226", at=60),
        Reading("inductor_voltage", "188", at=10_000, over="current"),
        Reading("capacitor_voltage", "3.18", at=10_000, over="current"),
        Reading("impedance", "190", at=10_000),
        Reading("current", "0.633", at=10_000),
        Reading("power_factor", "0.0753", at=60),
        # Current before voltage: the capacitor's 531 ohm are the larger reactance.
        Reading("current_phase", "85.7", DEGREE, at=60),
        Reading("real_power", "2.04", at=60),
        Reading("real_power", "16.0", at=10_000),
        Reading("natural_frequency", "1.30", 1e3),
        Reading("current", "3.00", at="resonance"),
        Reading("real_power", "360", at="resonance"),
    ),
    # OpenStax, University Physics vol. 2, section 15.4, worked example and check question (module
    # m58490, elements fs-id1172102104328, fs-id1172102020245). The book goes on with 2.83 V and
    # 7.07 ohm, which makes its current 0.07 % too large, its power 0.14 %.
    *readings(
        "University Physics 15.4",
        Case(
            make_loop(resistance=5.00, inductance=2.00e-3, capacitance=4.00e-6),
            sine(4.00, 1.00e4 / TURN),
        ),
        Reading("apparent_power", "2.83", over="current"),
        Reading("impedance", "7.07"),
        Reading("real_power", "0.801", carried=1.5e-3),
        Reading("resistor_voltage", "2.00"),
        Reading("capacitor_voltage", "10.01", carried=0.8e-3),
        Reading("inductor_voltage", "8.01", carried=0.8e-3),
    ),
    # NCERT, Physics part I, class 12, chapter 7, example 7.8. The phase follows from the rounded
    # reactances 8 and 4 ohm: dropping 0.006 of 4 ohm turns it by 0.006 x 3/25 rad, 0.08 % of it.
    *readings(
        "NCERT 7.8",
        Case(make_loop(resistance=3, inductance=25.48e-3, capacitance=796e-6), sine(283, 50)),
        Reading("inductor_voltage", "8", over="current"),
        Reading("capacitor_voltage", "4", over="current"),
        Reading("impedance", "5"),
        Reading("current_phase", "-53.1", DEGREE, carried=0.8e-3),
        Reading("current", "40"),
        Reading("real_power", "4800", figures=2),
        Reading("power_factor", "0.6"),
    ),
    # J. Bird, Electrical Circuit Theory and Technology, example 15.15; digits of the companion
    # notebook (FOSSEE Python Textbook Companions, chapter_15.ipynb).
    *readings(
        "Bird 15.15",
        Case(
            make_loop(resistance=0, inductance=0.12, winding_resistance=5, capacitance=100e-6),
            rms_sine(300, 50),
        ),
        Reading("current", "38.91"),
        Reading("impedance_phase", "49.57", DEGREE),
        Reading("inductor_voltage", "1480"),
        Reading("capacitor_voltage", "1239"),
    ),
    # J. Bird, example 15.17 (as above): 5 A through a coil and a capacitor, each with its own
    # resistance. The supply is the printed quantity; at 1 A the supply's volts are the impedance.
    *readings(
        "Bird 15.17",
        Case(
            make_loop(
                resistance=0,
                inductance=0.286e-3,
                winding_resistance=4,
                capacitance=1.273e-6,
                series_resistance=8,
            ),
            rms_sine(1, 5e3),
        ),
        Reading("impedance", "100.08", 1 / 5),
        Reading("current_phase", "53.16", DEGREE),
    ),
    # OpenStax, College Physics 2e, section 23.12, exercise (m42431, element fs-id1169738137511).
    *readings(
        "College Physics 23.12 exercise",
        Case(
            make_loop(resistance=1.00e3, inductance=150e-6, capacitance=25.0e-9),
            rms_sine(408, 500),
        ),
        Reading("impedance", "12.8", 1e3, at=500),
        Reading("impedance", "1.31", 1e3, at=7.50e3),
        Reading("current", "31.9", 1e-3, at=500),
        Reading("current", "312", 1e-3, at=7.50e3),
        Reading("natural_frequency", "82.2", 1e3),
        Reading("current", "0.408", at="resonance"),
        Reading("real_power", "166", at="resonance"),
    ),
]


@pytest.mark.parametrize(("case", "reading"), READINGS)
def test_printed_steady_state(case, reading):
    assert reading.printed.covers(reading.of(case))


@pytest.mark.parametrize(
    ("quantity", "unit", "wrong", "at_hertz", "at_kilohertz"),
    [
        ("power_factor", 1.0, "0.159", "0.00118", "0.765"),
        ("current_phase", DEGREE, "80.9", "89.93", "40.1"),
        ("real_power", 1.0, "26.4", "0.231e-3", "97.4"),
    ],
)
def test_power_of_the_exercise_whose_answers_are_wrong(
    quantity, unit, wrong, at_hertz, at_kilohertz
):
    """The printed answers fit neither the printed 7.50 Hz nor the 7.50 kHz that was meant.

    The printed power also has the power factor once instead of squared.
    """
    # OpenStax, College Physics 2e, section 23.12, exercise (m42431, element fs-id1169737939490).
    # Right values by hand: reactances 848.826 and 7.069 ohm give 1307.12 ohm at 7.50 kHz, 848826
    # and 0.007 ohm give 848.8 kohm at 7.50 Hz; power factor 1000 ohm over these, power (408 V)^2
    # times its square over 1000 ohm.
    case = Case(
        make_loop(resistance=1.00e3, inductance=150e-6, capacitance=25.0e-9), rms_sine(408, 7.50)
    )
    for frequency, right in ((7.50, at_hertz), (7.50e3, at_kilohertz)):
        value = ask(quantity, case, frequency) / unit
        assert printed(right).covers(value)
        assert not printed(wrong).covers(value)


# OpenStax, University Physics vol. 2, section 15.3, exercise on a resistor and a capacitor (module
# m58658, element fs-id1172101922576).
RESISTOR_AND_CAPACITOR = Case(
    make_loop(resistance=400, inductance=NO_INDUCTANCE, capacitance=4.0e-6), sine(120, 60)
)


@pytest.mark.parametrize(
    ("case", "reading"),
    readings(
        "University Physics 15.3 exercise",
        RESISTOR_AND_CAPACITOR,
        Reading("impedance", "770", figures=2),
        # 120 V over the rounded 770 ohm, itself up to 0.6 % off.
        Reading("current_amplitude", "0.16", carried=5 / 770),
        Reading("resistor_voltage", "62", 1 / np.sqrt(2)),
        Reading("capacitor_voltage_amplitude", "103"),
    ),
)
def test_magnitudes_of_resistor_and_capacitor(case, reading):
    assert reading.printed.covers(reading.of(case))


@pytest.mark.parametrize(
    ("phasor", "wrong", "right"),
    [("current", "-0.33", "0.33"), ("resistor", "-0.33", "0.33"), ("capacitor", "-0.83", "-0.17")],
)
def test_current_leads_in_resistor_and_capacitor_where_the_book_lets_it_lag(phasor, wrong, right):
    """Phases in half turns; the printed sign is wrong, and the capacitor's angle follows it."""
    angle = float(np.angle(getattr(RESISTOR_AND_CAPACITOR.steady, phasor))) / np.pi
    assert printed(right).covers(angle)
    assert not printed(wrong).covers(angle)


def test_third_harmonic_made_resonant():
    """Each harmonic drives the same loop alone; the third one is at resonance."""
    # J. Bird, Electrical Circuit Theory and Technology, example 36.14 (companion notebook,
    # chapter_36.ipynb).
    loop = make_loop(resistance=2, inductance=0.5, capacitance=0.2e-6)
    third = ask("natural_frequency", Case(loop, sine(10, 1)))
    assert printed("167.76").covers(third / 3)
    assert printed("0.095").covers(ask("current_amplitude", Case(loop, sine(400, third / 3))))
    assert printed("5.0").covers(ask("current_amplitude", Case(loop, sine(10, third))))


def test_added_reactance_that_makes_the_power_factor_one():
    """60 ohm at power factor 0.50, voltage behind current: 52 ohm of inductance cancel it."""
    # OpenStax, University Physics vol. 2, section 15.4, exercise (m58490, fs-id1172102104614).
    frequency = 60.0
    omega = TURN * frequency
    resistance = 60 * 0.50
    capacitance = 1 / (omega * np.sqrt(60**2 - resistance**2))

    def with_reactance(ohms):
        return Case(
            make_loop(resistance=resistance, inductance=ohms / omega, capacitance=capacitance),
            rms_sine(1, frequency),
        )

    given = with_reactance(1e-9)
    assert ask("impedance", given) == pytest.approx(60, rel=1e-9)
    assert ask("power_factor", given) == pytest.approx(0.50, rel=1e-9)
    assert ask("current_phase", given) > 0
    added = printed("52")
    ends = [ask("reactive_power", with_reactance(ohms)) for ohms in (added.low, added.high)]
    assert crosses(0.0, *ends)
