"""Steady values of a source with harmonics, and of a train of pulses, against independent sums."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Order, shaped, sine
from rlc.solver.spread import spread
from rlc.solver.targets import Target

R, WINDING, L, C, SERIES, LOAD = 3.0, 0.5, 4e-3, 20e-6, 0.2, 150.0
RMS, FREQUENCY = 230.0, 50.0
# The fifth is near the loop's resonance at 563 Hz, the eleventh at it.
ORDERS = (Order(5, 0.06, math.pi), Order(7, 0.05), Order(11, 0.03, 1.0))
# A few roundings in each of four phasors, magnified by a quality factor of four.
FEW_ROUNDINGS = 1e-13


def harmonic_case(orders=ORDERS):
    loop = make_loop(
        resistance=R, inductance=L, capacitance=C, winding_resistance=WINDING,
        series_resistance=SERIES, load_resistance=LOAD,
    )  # fmt: skip
    return Case(loop, sine(frequency=FREQUENCY, rms=RMS, orders=orders))


def phasors(number):
    """Current and element voltages per volt, by hand from impedances in series and parallel."""
    omega = 2 * np.pi * FREQUENCY * number
    branch = SERIES + 1 / (1j * omega * C)
    parallel = branch * LOAD / (branch + LOAD)
    coil = WINDING + 1j * omega * L
    current = 1 / (R + coil + parallel)
    return {
        "current": current, "resistor_voltage": R * current,
        "inductor_voltage": coil * current, "capacitor_voltage": parallel * current,
    }  # fmt: skip


def by_hand():
    rows = [(1, RMS), *((order.number, order.share * RMS) for order in ORDERS)]
    total = {
        name: math.sqrt(sum(abs(phasors(number)[name] * level) ** 2 for number, level in rows))
        for name in phasors(1)
    }
    power = sum(phasors(number)["current"].real * level**2 for number, level in rows)
    source = math.sqrt(sum(level**2 for _, level in rows))
    apparent = source * total["current"]
    return total | {
        "resistor_power": R * total["current"] ** 2,
        "real_power": power,
        "apparent_power": apparent,
        "power_factor": power / apparent,
        "reactive_power": -phasors(1)["current"].imag * RMS**2,
        "current_amplitude": abs(phasors(1)["current"]) * RMS * math.sqrt(2),
        "capacitor_voltage_amplitude": abs(phasors(1)["capacitor_voltage"]) * RMS * math.sqrt(2),
    }


@pytest.mark.parametrize("name", by_hand())
def test_totals_are_the_sums_over_the_orders(name):
    found = float(REGISTER[name](harmonic_case()))
    assert found == pytest.approx(by_hand()[name], rel=FEW_ROUNDINGS)


@pytest.mark.parametrize("name", ["current", "capacitor_voltage", "resistor_power", "real_power"])
def test_at_a_stated_frequency_the_fundamentals_level_stands_alone(name):
    at = 11 * FREQUENCY
    alone = Case(harmonic_case().loop, sine(frequency=at, rms=RMS))
    found = float(REGISTER[name](harmonic_case(), at))
    assert found == pytest.approx(float(REGISTER[name](alone)), rel=FEW_ROUNDINGS)


def test_totals_against_an_integration_in_time():
    """Mean squares and mean power over a period, after all else has died."""
    omega = 2 * np.pi * FREQUENCY
    peak = RMS * math.sqrt(2)

    def source(time):
        harmonics = (o.share * np.sin(o.number * omega * time + o.phase) for o in ORDERS)
        return peak * (np.sin(omega * time) + sum(harmonics))

    share = LOAD / (LOAD + SERIES)

    def terminals(voltage, current):
        # the capacitor's branch and the load share the loop's current
        return share * (voltage + SERIES * current)

    def slopes(time, state):
        voltage, current, *_ = state
        across = terminals(voltage, current)
        rate = (source(time) - (R + WINDING) * current - across) / L
        return [(current - across / LOAD) / C, rate, current**2, across**2, source(time) * current]

    period, settled = 1 / FREQUENCY, 5
    solved = solve_ivp(
        slopes, (0, (settled + 1) * period), np.zeros(5), method="DOP853", rtol=1e-11, atol=1e-11,
        t_eval=[settled * period, (settled + 1) * period],
    )  # fmt: skip
    _, _, current, voltage, power = (np.diff(row)[0] / period for row in solved.y)
    case = harmonic_case()
    # 5 periods are 48 time constants of 2 ms; the integrator keeps 1e-11 of each step.
    assert float(REGISTER["current"](case)) == pytest.approx(math.sqrt(current), rel=1e-8)
    assert float(REGISTER["capacitor_voltage"](case)) == pytest.approx(math.sqrt(voltage), rel=1e-8)
    assert float(REGISTER["real_power"](case)) == pytest.approx(power, rel=1e-8)


def test_a_continuous_rating_is_held_against_all_orders():
    """The fundamental alone keeps a limit that all orders together break."""
    total, fundamental = by_hand()["current"], abs(phasors(1)["current"]) * RMS
    limit = (total + fundamental) / 2
    rated = Target("current", maximum=limit, rating="inductor.rated_current")
    assert spread(harmonic_case(), (), 0, 1).outcome(rated).verdict == "fails"
    assert spread(harmonic_case(()), (), 0, 1).outcome(rated).verdict == "holds"


def test_a_resonance_with_a_harmonic_inside_the_tolerances_is_met():
    """C from 18 to 22 uF: between them the eleventh, 550 Hz, is the resonance, at its worst."""
    loop = make_loop(resistance=0.5, inductance=L, capacitance=C)
    case = Case(loop, sine(frequency=FREQUENCY, rms=RMS, orders=[Order(11, 0.1)]))
    part = Part("capacitance", C, 18e-6, 22e-6)
    found = spread(case, (part,), 0, 1).outcome(Target("current"))
    at_resonance = 0.1 * RMS / 0.5
    assert found.worst_high >= at_resonance
    # the fundamental adds 1.6 A across, 0.0007 of the current at resonance
    assert found.worst_high == pytest.approx(math.hypot(at_resonance, 1.6), rel=1e-3)


def train():
    loop = make_loop(resistance=10.0, inductance=1e-6, capacitance=1.0)
    return Case(loop, shaped(shapes.pulse(10.0, 1e-3, period=2e-3, count=None)))


def test_a_train_of_pulses_has_the_rms_of_its_last_periods():
    """A capacitor that only holds the mean: 5 V either way over 10 ohm, 0.5 A rms."""
    loop = make_loop(resistance=10.0, inductance=1e-9, capacitance=10e-3)
    case = Case(loop, shaped(shapes.pulse(10.0, 1e-3, period=2e-3, count=None)))
    # The voltage moves by 5 V times 1 ms over tau = 0.1 s: by a part in 100, half to each side,
    # which enters squared; L/R is 1e-7 of a pulse.
    assert float(REGISTER["current"](case)) == pytest.approx(0.5, rel=1e-4)
    assert float(REGISTER["resistor_power"](case)) == pytest.approx(2.5, rel=2e-4)


def test_each_loop_of_a_batch_has_the_rms_that_it_has_alone():
    """Time constants from 1 to 100 ms: each loop alone is steady after another number of pulses."""
    source = shaped(shapes.pulse(10.0, 1e-3, period=2e-3, count=None))
    values = np.array([1e-4, 1e-3, 1e-2])
    batch = Case(make_loop(resistance=10.0, inductance=1e-3, capacitance=values), source)
    alone = [REGISTER["current"](batch.one((index,))) for index in range(values.size)]
    # Each train is steady to 1e-12, and the quadrature sums some hundred panels.
    np.testing.assert_allclose(REGISTER["current"](batch), alone, rtol=1e-11)


def test_a_train_of_pulses_has_no_phasor():
    case = train()
    for name in ("current_amplitude", "capacitor_voltage", "real_power", "power_factor"):
        assert math.isnan(float(REGISTER[name](case)))


def test_units_keep_either_polarity_of_the_charge():
    """Closing onto -V doubles the swing: 3 V from 1 V and a charge of either sign."""
    loop = make_loop(resistance=0.0, inductance=1.0, capacitance=1.0)
    case = Case(loop, sine(1.0, 1e-6, math.pi / 2), 1.0, either_polarity=True)
    batch = spread(case, (Part("capacitance", 1.0, 0.9, 1.1),), 10, 1).case
    assert np.all(batch.peak("capacitor").value > 2.9)
