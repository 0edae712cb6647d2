"""Settling, overshoot, let-through and decrement against their definitions."""

import numpy as np
import pytest
from exact import Exact
from mpmath import mp, mpf
from scipy.integrate import quad
from scipy.optimize import brentq

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.passed import let_through, total_let_through
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source, constant, sine
from rlc.solver.transient import overshoot, settling_time

EPS = np.finfo(float).eps


def unit_loop(zeta, **more):
    """A loop with L = C = 1, so that natural frequency and impedance are one."""
    return make_loop(resistance=2.0 * zeta, inductance=1.0, capacitance=1.0, **more)


def distance(case, time):
    """Capacitor voltage less its steady state, from waveforms and a phasor."""
    voltage = case.waveforms(np.atleast_1d(time)).capacitor_voltage
    omega = 2 * np.pi * float(case.source.frequency)
    turn = np.exp(1j * (omega * np.atleast_1d(time) + float(case.source.closing_angle)))
    steady = float(case.source.amplitude) * np.imag(case.steady.capacitor * turn)
    return voltage - steady


# Damping ratios off those at which a swing just touches the band and the time jumps.
SETTLING = [1e-3, 0.02, 0.2, 0.45, 0.6, 0.7, 0.9, 1.0, 1.2, 5.0, 60.0]


@pytest.mark.parametrize("zeta", SETTLING)
@pytest.mark.parametrize("band", [0.02, 0.05, 0.3])
@pytest.mark.parametrize(
    "states", [(0.0, 0.0), (7.0, -12.0), (-4.0, 30.0)], ids=["rest", "back", "forth"]
)
@pytest.mark.parametrize("ratio", [0.0, 0.6, 3.0])
def test_settling_time_is_the_last_time_outside_the_band(zeta, band, states, ratio):
    source = constant(10.0) if ratio == 0 else sine(10.0, ratio / (2 * np.pi), 0.8)
    case = Case(unit_loop(zeta), source, *states)
    settled = float(settling_time(case, band))
    # Of the step from the voltage at closing, or of the steady amplitude.
    step = 10.0 - states[0]
    limit = band * (abs(step) if ratio == 0 else 10.0 * abs(complex(case.steady.capacitor)))
    rate = zeta if zeta <= 1 else 1 / (zeta + np.sqrt(zeta**2 - 1))
    # The free part is at most (|value| + |slope| t) exp(-rate t); after 25/rate and more it is
    # below any of these bands, unless the steady state is a small share of the states.
    end = (25 + np.log(1 + 50 / limit)) / rate
    # Two swings around the answer finely, and the whole coarsely: a lightly damped swing passes
    # the band for a short while only.
    around = np.linspace(max(settled - 7, 0.0), settled + 7, 14001)
    times = np.unique(np.r_[around, np.linspace(0, end, 20001)])
    outside = np.abs(distance(case, times)) >= limit
    if not outside.any():
        assert settled <= times[1]
        return
    last = int(np.flatnonzero(outside)[-1])
    before, after = times[last], times[last + 1]

    def excess(time):
        return float(np.abs(distance(case, time))[0]) - limit

    crossing = brentq(excess, before, after, xtol=1e-12, rtol=4 * EPS)
    # The voltages are good to some ten roundings of up to 60 V and of the phase.
    slope = abs(excess(before) - excess(after)) / (after - before)
    size = 60.0 * EPS * (1 + crossing)
    assert abs(settled - crossing) <= 20 * size / slope + 1e-12
    assert excess(settled * (1 + 1e-6) + 20 * size / slope) < 0


def test_settling_time_where_there_is_nothing_to_settle():
    no_step = Case(unit_loop(0.3), constant(10.0), 10.0)
    assert np.isnan(settling_time(no_step))
    lossless = Case(unit_loop(0.0), constant(10.0))
    assert settling_time(lossless) == np.inf
    discharging, charging = (
        Case(unit_loop(0.3), constant(0.0), 10.0),
        Case(unit_loop(0.3), constant(10.0)),
    )
    assert settling_time(discharging) == pytest.approx(float(settling_time(charging)), rel=1e-13)


def test_settling_time_jumps_where_a_swing_leaves_the_band():
    # The first overshoot is 2 % at zeta = ln(50)/sqrt(pi^2 + ln(50)^2) = 0.77970.
    touch = np.log(50) / np.hypot(np.pi, np.log(50))
    less, more = settling_time(Case(unit_loop(touch + np.array([-1e-6, 1e-6])), constant(1.0)))
    # Less damped, it lasts to the first crest, pi/w_d, and a bit beyond.
    assert less == pytest.approx(np.pi / np.sqrt(1 - touch**2), rel=3e-3)
    assert more < 0.8 * less


@pytest.mark.parametrize("zeta", [0.0, 1e-6, 0.01, 0.3, 0.7, 0.95])
def test_overshoot_of_a_step_from_rest(zeta):
    with mp.workdps(50):
        z = mpf(2.0 * zeta) / 2
        expected = float(mp.exp(-mp.pi * z / mp.sqrt(1 - z * z)))
    # The overshoot is what is left of a voltage of up to two.
    found = overshoot(Case(unit_loop(zeta), constant(24.0)))
    assert found == pytest.approx(expected, abs=4 * EPS, rel=1e-13)
    # It does not depend on where the step starts.
    assert overshoot(Case(unit_loop(zeta), constant(24.0), 9.0)) == pytest.approx(
        expected, abs=10 * EPS, rel=1e-13
    )
    assert overshoot(Case(unit_loop(zeta), constant(-24.0), 9.0)) == pytest.approx(
        expected, abs=10 * EPS, rel=1e-13
    )


@pytest.mark.parametrize("zeta", [1.0, 1 + 1e-9, 2.0, 1e3])
def test_no_overshoot_without_ringing(zeta):
    assert overshoot(Case(unit_loop(zeta), constant(24.0))) == 0


def test_no_overshoot_where_there_is_no_step():
    assert np.isnan(overshoot(Case(unit_loop(0.3), constant(24.0), 24.0)))


def test_overshoot_under_a_sine_is_the_peak_over_the_steady_amplitude():
    case = Case(unit_loop(0.1), sine(10.0, 0.4 / (2 * np.pi), 1.2))
    times = np.linspace(0, 60, 60001)
    top = np.max(np.abs(case.waveforms(times).capacitor_voltage))
    steady = 10.0 / abs(1 - 0.4**2 + 2j * 0.1 * 0.4)
    # Half a step of the grid at the largest curvature, 1/2 (0.0005)^2 of a swing.
    assert float(overshoot(case)) == pytest.approx(top / steady - 1, abs=1e-6)


def test_decrement_is_the_logarithm_of_one_swing_over_the_next():
    case = Case(unit_loop(0.08), constant(10.0))
    decrement = float(REGISTER["logarithmic_decrement"](case))
    period = 1 / float(REGISTER["ringing_frequency"](case))
    crests = distance(case, np.array([period / 2, 1.5 * period, 2.5 * period]))
    assert np.log(crests[:-1] / crests[1:]) == pytest.approx([decrement] * 2, rel=1e-12)
    assert decrement == pytest.approx(2 * np.pi * 0.08 / np.sqrt(1 - 0.08**2), rel=1e-14)
    # After one time constant 1/e of the envelope is left.
    tau = float(REGISTER["time_constant"](case))
    assert np.exp(-period / tau) == pytest.approx(np.exp(-decrement), rel=1e-13)


@pytest.mark.parametrize("zeta", [0.01, 0.3, 1.0, 1 + 1e-10, 8.0])
@pytest.mark.parametrize("states", [(0.0, 0.0), (-3.0, 7.0)])
def test_let_through_over_all_time(zeta, states):
    # All energy that is lost passes the resistance: from rest C V^2/(2 R).
    case = Case(unit_loop(zeta), constant(10.0), *states)
    expected = ((10.0 - states[0]) ** 2 + states[1] ** 2) / (4 * zeta)
    assert total_let_through(case) == pytest.approx(expected, rel=4 * EPS)
    assert REGISTER["let_through"](case) == pytest.approx(expected, rel=4 * EPS)
    # The same by adding up: 60 time constants leave exp(-120).
    rate = zeta if zeta <= 1 else 1 / (zeta + np.sqrt(zeta**2 - 1))
    assert let_through(case, 60 / rate) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("zeta", [0.0, 0.05, 1.0, 30.0])
@pytest.mark.parametrize("ratio", [0.0, 1.0, 6.0])
@pytest.mark.parametrize("until", [1e-3, 7.0])
def test_let_through_by_quadrature_of_the_waveform(zeta, ratio, until):
    source = constant(10.0) if ratio == 0 else sine(10.0, ratio / (2 * np.pi), 0.5)
    for states in ((0.0, 0.0), (5.0, -4.0)):
        case = Case(unit_loop(zeta), source, *states)

        def squared(time, case=case):
            return float(case.waveforms(np.array([time])).current[0]) ** 2

        quick = 5 / float(case.equation.quickest)
        breaks = [b for b in (quick, 2.0, 4.0) if b < until]
        expected, error = quad(
            squared, 0, until, points=breaks or None, epsabs=0, epsrel=1e-10, limit=400
        )
        assert let_through(case, until) == pytest.approx(expected, rel=1e-12, abs=error)


@pytest.mark.parametrize("zeta", [1e-3, 1 - 1e-9, 40.0])
def test_let_through_in_fifty_digits(zeta):
    case = Case(unit_loop(zeta), sine(10.0, 1 / (2 * np.pi), 0.2), 3.0, 0.0)
    exact = Exact(case)
    until = 3.0
    with mp.workdps(20):
        quick = 1 / mpf(float(case.equation.quickest))
        knots = [0, quick, 5 * quick, 25 * quick, 90 * quick, 1, 2, 3]
        knots = sorted({min(mpf(k), mpf(until)) for k in knots})
        expected = float(mp.quad(lambda t: exact.at(t).current ** 2, knots))
    # Some hundred sums of squares; nothing cancels.
    assert let_through(case, until) == pytest.approx(expected, rel=1e-13)


def test_let_through_is_unbounded_where_a_current_stays_or_nothing_is_lost():
    assert total_let_through(Case(unit_loop(0.3, load_resistance=5.0), constant(1.0))) == np.inf
    assert total_let_through(Case(unit_loop(0.0), constant(1.0))) == np.inf
    assert total_let_through(Case(unit_loop(0.3), sine(1.0, 0.1))) == np.inf
    assert total_let_through(Case(unit_loop(0.0), constant(1.0), 1.0)) == 0


def test_let_through_without_a_stated_time_is_that_of_each_loops_first_period():
    frequencies = np.array([0.05, 0.3, 2.0])
    together = REGISTER["let_through"](Case(unit_loop(0.2), Source(10.0, frequencies, 0.3)))
    for frequency, found in zip(frequencies, together, strict=True):
        alone = Case(unit_loop(0.2), sine(10.0, frequency, 0.3))
        assert found == pytest.approx(float(let_through(alone, 1 / frequency)), rel=1e-13)


def test_let_through_to_several_times_at_once():
    case = Case(unit_loop(np.array([0.1, 1.0, 9.0])), sine(10.0, 0.3))
    times = np.array([[0.5], [4.0]])
    together = let_through(case, times)
    assert together.shape == (2, 3)
    for row, time in zip(together, (0.5, 4.0), strict=True):
        assert row == pytest.approx(let_through(case, time), rel=1e-13)
    assert np.all(let_through(case, 0.0) == 0)


@pytest.mark.parametrize("states", [(0.0, 0.0), (80.0, 0.0), (-30.0, 4.0)])
@pytest.mark.parametrize("until", [3e-4, 2e-3])
def test_let_through_at_the_worst_angle_is_the_largest_of_a_scan(states, until):
    loop = make_loop(resistance=4.0, inductance=1e-3, capacitance=100e-6)
    angles = np.linspace(0, 2 * np.pi, 2001)
    scanned = let_through(Case(loop, sine(100.0, 550.0, angles), *states), until)
    worst = float(let_through(Case(loop, sine(100.0, 550.0, None), *states), until))
    assert worst >= max(scanned) * (1 - 4 * EPS)
    # Half a step from the largest, a wave of one and two turns falls by less than 2 (pi/2000)^2.
    assert worst <= max(scanned) + 2 * (np.pi / 2000) ** 2 * (max(scanned) - min(scanned))
