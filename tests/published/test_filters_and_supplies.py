"""Detuned filters, stored energy of a bank, and what a plugged-in supply may ring up to."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant

from .printed import (
    NO_INDUCTANCE,
    NO_RESISTANCE,
    TURN,
    Reading,
    ask,
    crosses,
    printed,
    readings,
    rms_sine,
)


def detuned(share, reactive_power, rated, applied):
    """One phase of a star: a capacitor step and the coil with a share of its reactance, at 50 Hz.

    Per-phase values with the line voltage give the power of all three phases.
    """
    omega = TURN * 50
    capacitance = reactive_power / (omega * rated**2)
    return Case(
        make_loop(
            resistance=0, inductance=share / (omega**2 * capacitance), capacitance=capacitance
        ),
        rms_sine(applied, 50),
    )


@pytest.mark.parametrize(
    ("case", "reading"),
    [
        # Worked calculation sheet of a 7 % detuned step, 80 kvar at 525 V
        # (studylib.net/doc/27030577). It goes on with rounded numbers: 189 for 188.98 Hz, 0.01 %,
        # in the reactance at tuning, and 3.445 - 0.241 for 3.2041 ohm, 0.005 %, in the power.
        *readings(
            "detuned step at 525 V",
            detuned(0.07, 80e3, 525, 525),
            Reading("capacitor_voltage", "3.445", over="current"),
            Reading("inductor_voltage", "0.241", over="current"),
            Reading("natural_frequency", "189"),
            Reading("characteristic_impedance", "0.911", carried=1e-4),
            Reading("reactive_power", "-86.025", 1e3, carried=5e-5),
        ),
        *readings(
            "detuned step at 400 V",
            detuned(0.07, 80e3, 525, 400),
            Reading("reactive_power", "-49.9", 1e3),
        ),
        # Note on reactor factors, 6 %, 50 kvar on 400 V (erbar.id, article of 2022-11-17): the
        # capacitor sees more than the network's voltage.
        *readings(
            "reactor factor 6 %",
            detuned(0.06, 50e3, 400, 400),
            Reading("capacitor_voltage", "425.5"),
            Reading("reactive_power", "-53", 1e3),
        ),
    ],
)
def test_detuned_capacitor_step(case, reading):
    assert reading.printed.covers(reading.of(case))


@pytest.mark.parametrize(
    ("part", "text", "unit"),
    [("capacitance", "0.924", 1e-3), ("inductance", "0.768", 1e-3)],
)
def test_printed_parts_of_the_detuned_step(part, text, unit):
    """Between the printed part's ends the tuning passes 50 Hz over sqrt(0.07)."""
    # studylib.net/doc/27030577, as above; the other part is the exact one.
    loop = detuned(0.07, 80e3, 525, 525).loop
    ends = []
    for value in (printed(text).low, printed(text).high):
        parts = {"inductance": loop.inductance, "capacitance": loop.capacitance}
        parts[part] = value * unit
        ends.append(ask("natural_frequency", Case(make_loop(resistance=0, **parts), constant(0))))
    assert crosses(50 / np.sqrt(0.07), *ends)


def test_energy_stored_by_a_kilovar():
    """1 kvar at 60 Hz holds 2.65 J at the crest of its voltage."""
    # Rule printed in a manufacturer's data sheet of shunt capacitors.
    volts, crest = 1e3, 1e3 * np.sqrt(2)
    loop = make_loop(
        resistance=NO_RESISTANCE,
        inductance=NO_INDUCTANCE,
        capacitance=1e3 / (TURN * 60 * volts**2),
    )
    # Closed at the crest onto a capacitor that is charged to it: no transient.
    case = Case(loop, rms_sine(volts, 60, closing_angle=np.pi / 2), capacitor_voltage=crest)
    assert ask("reactive_power", case) == pytest.approx(-1e3, rel=1e-6)
    assert printed("2.65").covers(ask("stored_energy", case))


def supply_lead(inductance, resistance=0.0, volts=12.0):
    """A supply plugged onto 9 uF through leads."""
    return Case(
        make_loop(resistance=resistance, inductance=inductance, capacitance=9e-6), constant(volts)
    )


def test_lead_inductance_behind_the_measured_ringing():
    """Just under 100 kHz with about 9 uF: 0.3 uH of leads."""
    # pololu.com/docs/0J16, measured: 12 V bench supply, 36-inch leads, about 9 uF of ceramic.
    inductance = printed("0.3")
    ends = [
        ask("natural_frequency", supply_lead(1e-6 * henries))
        for henries in (inductance.low, inductance.high)
    ]
    assert crosses(100e3, *ends)


@pytest.mark.parametrize("resistance", [0.0, 0.02, 0.3])
def test_no_linear_loop_reaches_the_measured_spike(resistance):
    """Almost 40 V from 12 V, a ratio of 3.3: from rest a linear loop stays below 2.

    The ceramic's capacitance falls with voltage, which this loop does not have.
    """
    # pololu.com/docs/0J16, measured.
    peak = ask("peak_capacitor_voltage", supply_lead(0.28e-6, resistance))
    assert 12 <= peak <= 24 * (1 + 1e-15)
    assert peak / 12 < printed("3.3").low


def test_the_second_measured_spike_is_within_reach():
    """25 V from 13 V, a ratio of 1.92: a damping ratio between 0.01 and 0.05 gives it."""
    # pololu.com/docs/0J16, measured; overshoot exp(-pi zeta/sqrt(1 - zeta^2)) = 0.92 at 0.0265.
    characteristic = np.sqrt(0.28e-6 / 9e-6)
    ends = [
        ask("peak_capacitor_voltage", supply_lead(0.28e-6, 2 * zeta * characteristic, 13))
        for zeta in (0.01, 0.05)
    ]
    assert crosses(25, *ends)
