"""Cases in which a wrong number was found once, or in which digits are easily lost."""

import numpy as np
import pytest
from exact import Exact
from scipy.integrate import quad

from rlc.errors import InputError
from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.exceeding import exceeded
from rlc.solver.extrema import first_extrema
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.passed import let_through, total_let_through
from rlc.solver.search import PROVED_GAP
from rlc.solver.source import Order, Source, Window, constant, shaped, sine
from rlc.solver.spread import spread
from rlc.solver.targets import Target

NAMES = {"current": "current", "capacitor": "capacitor_voltage"}


def reached(case, element, extra):
    """Largest magnitude over dense times, and at the stated one."""
    peak = case.peak(element)
    times = np.unique(np.r_[float(peak.time), extra])
    values = np.abs(getattr(case.waveforms(times), NAMES[element]))
    return float(np.max(values)), float(values[times == float(peak.time)][0])


@pytest.mark.parametrize("share", [1e-2, 1e-4, 1e-6, 1e-8])
@pytest.mark.parametrize("resistance", [0.1, 1.0, 2.0, 1e3, 1e6])
@pytest.mark.parametrize("element", NAMES)
def test_pulses_far_shorter_than_the_loop(share, resistance, element):
    """Held and free motion are far more than their sum on such lines."""
    loop = make_loop(resistance=resistance, inductance=1.0, capacitance=1.0)
    case = Case(loop, shaped(shapes.pulse(5.0, share, share / 7, share / 5)))
    slow = 8 / float(case.equation.slowest)
    dense = np.r_[np.linspace(0, 3 * share, 4001), np.geomspace(share, slow, 8001)]
    highest, there = reached(case, element, dense)
    value = float(case.peak(element).value)
    assert highest <= value * (1 + PROVED_GAP)
    assert there == pytest.approx(value, rel=1e-9)


def test_pulse_of_nanoseconds_against_50_digits():
    """100 V for 20 ns with edges of 5 ns: the current rises by V/L t, less R/L of a part in 1e8."""
    loop = make_loop(resistance=10.0, inductance=1.0, capacitance=1e-5)
    case = Case(loop, shaped(shapes.pulse(100.0, 2e-8, 5e-9, 5e-9)))
    peak = case.peak("current")
    right = Exact(case).at(float(peak.time)).current
    assert float(peak.value) == pytest.approx(float(right), rel=1e-12)
    assert float(peak.value) == pytest.approx(2e-6, rel=1e-6)


@pytest.mark.parametrize("which", ["slow", "fast"])
@pytest.mark.parametrize("away", [0.0, 1e-12, -1e-9, 1e-9, 1e-7, 1e-5, -1e-3])
@pytest.mark.parametrize("element", NAMES)
def test_surge_at_a_double_root_of_the_loop(which, away, element):
    surge = shapes.surge(1000.0, 1.2e-6, 50e-6)
    rate = getattr(surge, which)
    loop = make_loop(
        resistance=2e-3 * rate * (1 + away), inductance=1e-3, capacitance=1e3 / rate**2
    )
    case = Case(loop, shaped(surge))
    highest, there = reached(case, element, np.geomspace(1e-9, 1e-2, 20001))
    peak = case.peak(element)
    assert highest <= float(peak.value) * (1 + float(peak.gap))
    assert there == pytest.approx(float(peak.value), rel=1e-11)
    # whatever the proof is worth, the value is that of the highest sample
    assert float(peak.value) == pytest.approx(highest, rel=1e-6)


def test_either_polarity_with_a_current_at_the_worst_angle():
    """The current tells the two halves of the turn apart."""
    loop = make_loop(resistance=1.0, inductance=1e-2, capacitance=1e-4)
    case = Case(loop, sine(10.0, 50.0, None), 20.0, 3.0, either_polarity=True)
    angles = np.linspace(0, 2 * np.pi, 361)
    scanned = max(
        float(np.max(Case(loop, sine(10.0, 50.0, angles), sign * 20.0, 3.0).peak("current").value))
        for sign in (1, -1)
    )
    assert scanned <= float(case.peak("current").value) * (1 + PROVED_GAP)
    assert float(case.peak("current").value) == pytest.approx(scanned, rel=1e-4)


def test_discharge_through_a_load_lets_less_through():
    """What the load burns does not pass the resistance: against adaptive quadrature."""
    loop = make_loop(resistance=1.0, inductance=1e-2, capacitance=1e-4, load_resistance=5.0)
    case = Case(loop, constant(0.0), 20.0)
    passed, _ = quad(
        lambda t: float(case.waveforms(np.array([t])).current[0]) ** 2, 0, 0.05, limit=400
    )
    assert float(total_let_through(case)) == pytest.approx(passed, rel=1e-6)


def test_steady_train_goes_on_beyond_the_pulses_that_are_carried():
    loop = make_loop(resistance=1.0, inductance=1e-4, capacitance=1e-4)
    endless = Case(loop, shaped(shapes.pulse(10.0, 2e-3, period=5e-3, count=None)))
    counted = Case(loop, shaped(shapes.pulse(10.0, 2e-3, period=5e-3, count=30)))
    times = np.linspace(0.0, 0.149, 400)
    for name in ("current", "capacitor_voltage", "source"):
        assert getattr(endless.waveforms(times), name) == pytest.approx(
            getattr(counted.waveforms(times), name), abs=1e-8
        )
    for until in (0.012, 0.06, 0.1234):
        assert float(let_through(endless, until)) == pytest.approx(
            float(let_through(counted, until)), rel=1e-8
        )


def test_spread_meets_the_resonance_with_a_train_of_pulses():
    """A square wave of 10 V has the fundamental 2 * 10/pi; at resonance R alone limits it."""
    train = shapes.pulse(10.0, 0.5e-3, period=1e-3, count=None)
    loop = make_loop(resistance=2.0, inductance=11e-3, capacitance=2.533e-6)
    parts = (Part("inductance", 11e-3, 8.8e-3, 13.2e-3),)
    found = spread(Case(loop, shaped(train)), parts, 0, 1).outcome(Target("peak_current"))
    assert found.worst_high == pytest.approx(2 * 10 / np.pi / 2.0, rel=2e-3)


def test_limit_exceeded_from_closing_on():
    loop = make_loop(resistance=100.0, inductance=1e-2, capacitance=1e-5)
    case = Case(loop, sine(None, 50.0, 0.0, rms=120.0), 200.0)
    assert exceeded(case, "capacitor", 70.7) == (0.0, np.inf)


@pytest.mark.parametrize("element", ["inductor", "resistor"])
def test_limits_are_those_of_current_and_capacitor(element):
    case = Case(make_loop(resistance=1.0, inductance=1.0, capacitance=1.0), constant(1.0))
    with pytest.raises(InputError, match="is neither current nor capacitor"):
        exceeded(case, element, 1.0)
    with pytest.raises(InputError, match="must be more than zero"):
        exceeded(case, "current", -1.0)


def test_nothing_turns_on_a_slow_ramp():
    """Overdamped: the current only rises to C times the slope, and falls when the ramp ends."""
    loop = make_loop(resistance=100.0, inductance=1e-4, capacitance=1e-6)
    found = first_extrema(Case(loop, shaped(shapes.ramp(10.0, 1.0))))
    assert len(found.of) == 1
    assert found.of[0] == "current"
    assert found.current[0] == pytest.approx(1e-6 * 10.0, rel=1e-9)


def test_largest_value_of_a_source_with_harmonics():
    """Against a grid a hundred times as fine as any that is meant to be enough."""
    source = sine(100.0, 50.0, 0.0, orders=[Order(2, 3.0, 2.4)])
    turn = np.linspace(0, 2 * np.pi, 2_000_001)
    wave = 100.0 * (np.sin(turn) + 3.0 * np.sin(2 * turn + 2.4))
    assert float(source.largest) == pytest.approx(np.max(np.abs(wave)), rel=1e-10)


@pytest.mark.parametrize(
    ("make", "sentence"),
    [
        (lambda: Source(3.0, shape=shapes.ramp(1.0, 1.0)), "amplitude = 3.0: is not the shape's"),
        (lambda: Source(1.0, 50.0, shape=shapes.ramp(1.0, 1.0)), "shape = 'ramp': has no"),
        (lambda: Source(1.0, orders=(Order(3, 0.1),)), "orders: need a frequency above zero"),
        (lambda: shapes.Surge(1.0, 2.0, 1.0), "slow, fast = (2.0, 1.0): must be two rates"),
        (lambda: shapes.Surge(np.inf, 1.0, 2.0), "voltage = inf: must be finite"),
        (lambda: shapes.pulse(1.0, np.inf), "width = inf: must be finite"),
        (lambda: shapes.pulse(1.0, 1.0, period=9.0, count=2.5), "count = 2.5: must be a whole"),
    ],
)
def test_what_does_not_go_together_is_refused(make, sentence):
    with pytest.raises(InputError) as caught:
        make()
    assert str(caught.value).startswith(sentence)


@pytest.mark.parametrize("until", [-1.0, np.inf, np.nan])
def test_times_are_finite(until):
    case = Case(make_loop(resistance=1.0, inductance=1.0, capacitance=1.0), constant(1.0))
    with pytest.raises(InputError, match="must be zero or more, and finite"):
        let_through(case, until)
    with pytest.raises(InputError, match="must be zero or more, and finite"):
        case.waveforms([until])


def test_a_gain_of_one_keeps_the_limit_of_one():
    """At dc without a load the capacitor has the whole voltage, but for rounding."""
    loop = make_loop(resistance=2.2, inductance=1e-3, capacitance=47e-6, winding_resistance=0.4)
    parts = (Part("resistance", 2.2, 2.0, 2.4), Part("capacitance", 47e-6, 40e-6, 55e-6))
    found = spread(Case(loop, constant(24.0)), parts, 200, 1).outcome(Target("gain", maximum=1.0))
    assert found.verdict == "holds"


def test_a_target_on_exceeding_needs_its_limit():
    with pytest.raises(InputError, match="is missing: the current that is exceeded"):
        Target("current_exceeding_duration", maximum=1e-3)


def test_a_peak_at_closing_is_there_and_not_a_femtosecond_later():
    """The inductor takes the source's whole voltage at closing, largest at the window's edge."""
    loop = make_loop(resistance=2.2, inductance=1e-3, capacitance=47e-6, winding_resistance=0.4)
    source = sine(None, 50.0, Window(-np.pi / 12, np.pi / 12), rms=230.0)
    peak = Case(loop, source).peak("inductor")
    assert float(peak.time) == 0.0
    assert float(peak.value) == pytest.approx(230 * np.sqrt(2) * np.sin(np.pi / 12), rel=1e-12)


def test_lossless_loop_that_a_pulse_leaves_at_rest_exceeds_only_during_it():
    """v = 10 (1 - cos t) for one natural period: above 15 V from 120 to 240 degrees, then still."""
    loop = make_loop(resistance=0.0, inductance=1.0, capacitance=1.0)
    case = Case(loop, shaped(shapes.pulse(10.0, 2 * np.pi)))
    first, lasts = exceeded(case, "capacitor", 15.0)
    assert first == pytest.approx(2 * np.pi / 3, rel=1e-12)
    assert lasts == pytest.approx(2 * np.pi / 3, rel=1e-12)
    # half a period leaves it ringing by 20 V for ever
    ringing = Case(loop, shaped(shapes.pulse(10.0, np.pi)))
    assert exceeded(ringing, "capacitor", 15.0).lasts == np.inf
