"""Waveforms against 50 digits and against a numerical integrator, neither sharing our formulas."""

from itertools import pairwise

import mpmath
import numpy as np
import pytest
from exact import Exact, worst_error
from mpmath import mp, mpf
from scipy.integrate import solve_ivp

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant, sine

# Of the running peak. Phases of 1e4 periods are computed from exact products, so that rounding
# does not grow with time; what is left is a few dozen roundings of 1.1e-16.
ALLOWED = 1e-12

STATES = {"dielectric": "capacitor_voltage", "current": "current"}
TERMINALS = {"capacitor": "capacitor_voltage", "current": "current", "resistor": "resistor_voltage"}

# Natural frequency in rad/s and characteristic impedance: power line to radio.
SCALES = [(2.0e2, 40.0), (3.1e5, 0.7), (7.7e7, 330.0)]


def loop_of(zeta, scale=SCALES[1], **more):
    """A loop of about the given damping ratio; parts are whatever doubles come out."""
    natural, impedance = scale
    return make_loop(
        resistance=2 * zeta * impedance,
        inductance=impedance / natural,
        capacitance=1 / (impedance * natural),
        **more,
    )


def moments(natural, number=13):
    """Times from 1e-6 to 1e4 natural periods, off any round number of them [s]."""
    return np.geomspace(1e-6, 1e4, number) * 1.0123 * 2 * np.pi / natural


def check(case, names=STATES, number=13):
    natural = float(case.equation.natural)
    for name, error in worst_error(case, moments(natural, number), names).items():
        assert error <= ALLOWED, (name, error)


QUALITY = [1e-4, 1e-2, 0.3, 0.5, 0.7, 3.0, 40.0, 1e3, 1e6]
RATIOS = [1e-4, 0.03, 0.5, 1 - 1e-12, 1.0, 1 + 1e-12, 1.7, 60.0, 1e4]


@pytest.mark.parametrize("quality", QUALITY)
@pytest.mark.parametrize("scale", SCALES)
def test_step_from_rest(quality, scale):
    check(Case(loop_of(0.5 / quality, scale), constant(24.0)))


@pytest.mark.parametrize("quality", QUALITY)
@pytest.mark.parametrize("ratio", RATIOS)
def test_sine_from_rest(quality, ratio):
    case_loop = loop_of(0.5 / quality)
    frequency = ratio * SCALES[1][0] / (2 * np.pi)
    for angle in (0.0, 1.1):
        check(Case(case_loop, sine(325.0, frequency, angle)))


@pytest.mark.parametrize("distance", [1e-15, 1e-13, 1e-11, 1e-9, 1e-6, 1e-3])
@pytest.mark.parametrize("side", [-1, 1])
def test_near_critical_damping(distance, side):
    zeta = 1 + side * distance
    frequency = 0.8 * SCALES[1][0] / (2 * np.pi)
    check(Case(loop_of(zeta), constant(5.0), 3.0, -2.0))
    check(Case(loop_of(zeta), sine(5.0, frequency, 0.4)))


@pytest.mark.parametrize("ratio", [0.0, 1e-3, 1.0, 7.0, 1e3])
def test_exactly_critical_damping(ratio):
    # R = 2, L = C = 1: the two roots are the same double.
    critical = make_loop(resistance=2.0, inductance=1.0, capacitance=1.0)
    source = constant(5.0) if ratio == 0 else sine(5.0, ratio / (2 * np.pi), 0.4)
    case = Case(critical, source, 1.0, 0.5)
    assert float(case.equation.root[0]) == 0.0
    check(case)


def test_exactly_critical_step_is_the_textbook_polynomial():
    # Critically damped step with a = w0 = 1/s: v = V(1 - (1 + t) exp(-t)), i = (V/L) t exp(-t).
    critical = make_loop(resistance=2.0, inductance=1.0, capacitance=1.0)
    times = np.array([1e-5, 0.1, 1.0, 3.0, 30.0])
    waves = Case(critical, constant(1.0)).waveforms(times)
    for t, v, i in zip(times, waves.capacitor_voltage, waves.current, strict=True):
        with mp.workdps(50):
            true_v = float(1 - (1 + mpf(t)) * mp.exp(-mpf(t)))
            true_i = float(mpf(t) * mp.exp(-mpf(t)))
        assert v == pytest.approx(true_v, rel=ALLOWED, abs=0)
        assert i == pytest.approx(true_i, rel=ALLOWED, abs=0)


@pytest.mark.parametrize("scale", SCALES)
@pytest.mark.parametrize("angle", [0.0, np.pi / 2, 2.0])
def test_lossless_loop_at_resonance_grows_without_end(scale, angle):
    natural, impedance = scale
    frequency = natural / (2 * np.pi)
    case = Case(loop_of(0.0, scale), sine(10.0, frequency, angle))
    check(case, number=19)
    # At resonance i = (V/2L) t sin(w t + phi) + (V/2 w L) sin(w t) cos(phi), from the table of
    # Laplace transforms: its envelope after n periods is n pi V/Z0, less than one swing more.
    times = (1e4 + np.linspace(0, 1, 201)) / frequency
    top = np.max(np.abs(case.waveforms(times).current)) * impedance / 10.0
    assert 1e4 * np.pi <= top * (1 + 2e-4)
    assert top <= (1e4 + 1) * np.pi + 0.5


@pytest.mark.parametrize("load", [0.1, 3.0, 500.0, 1e6])
@pytest.mark.parametrize("series", [0.0, 1e-3, 0.4, 20.0])
def test_load_and_series_resistance(load, series):
    impedance = SCALES[1][1]
    for zeta in (0.0, 1e-3, 0.6, 5.0):
        case_loop = loop_of(
            zeta,
            load_resistance=load * impedance,
            series_resistance=series * impedance,
        )
        check(Case(case_loop, constant(24.0)), TERMINALS)
        frequency = 1.3 * SCALES[1][0] / (2 * np.pi)
        check(Case(case_loop, sine(24.0, frequency, 2.5), -7.0, 3.0), TERMINALS)


@pytest.mark.parametrize("zeta", [0.0, 1e-5, 0.3, 1.0, 80.0])
def test_trapped_charge_and_initial_current(zeta):
    impedance = SCALES[1][1]
    frequency = 0.2 * SCALES[1][0] / (2 * np.pi)
    for voltage, current in ((-24.0, 0.0), (0.0, 5.0), (11.0, -30.0)):
        for source in (constant(24.0), constant(0.0), sine(24.0, frequency, 0.3)):
            check(Case(loop_of(zeta), source, voltage, current / impedance))


@pytest.mark.parametrize("zeta", [0.0, 1e-6, 0.1])
def test_inductances_of_source_and_inductor_add_up_exactly(zeta):
    # Half a unit in the last place of their sum is 1.7e-12 of a radian after 1e4 periods.
    for share in (0.1, 0.37, 0.77):
        natural, impedance = SCALES[1]
        case_loop = loop_of(
            zeta,
            source_inductance=share * impedance / natural,
            winding_resistance=zeta * impedance / 3,
            source_resistance=zeta * impedance / 7,
        )
        check(Case(case_loop, constant(24.0)), number=25)


@pytest.mark.parametrize("ratio", [1e-3, 1.0, 1e4])
def test_source_and_inductor_voltage(ratio):
    # The inductor's voltage is what the others leave over, so its error is a share of the
    # source's amplitude; at rest both start with the source.
    frequency = ratio * SCALES[1][0] / (2 * np.pi)
    case_loop = loop_of(0.05, winding_resistance=0.01, source_inductance=3e-7)
    case = Case(case_loop, sine(10.0, frequency, 0.5))
    times = moments(SCALES[1][0])
    waves, exact = case.waveforms(times), Exact(case)
    for k, time in enumerate(times):
        moment = exact.at(time)
        assert abs(float(moment.source - mpf(waves.source[k]))) <= 10.0 * ALLOWED
        assert abs(float(moment.inductor - mpf(waves.inductor_voltage[k]))) <= 10.0 * ALLOWED


def test_reference_is_the_matrix_exponential():
    # The 50-digit reference itself, against mpmath's own exponential of the driven system.
    case_loop = loop_of(0.3, SCALES[0], load_resistance=500.0, series_resistance=3.0)
    exact = Exact(Case(case_loop, sine(10.0, 41.0, 0.7), 2.0, 0.05))
    for time in (1e-4, 0.02, 0.3):
        with mp.workdps(50):
            system = mpmath.zeros(4)
            system[:2, :2] = exact.A
            system[1, 2] = 1 / exact.L
            system[2, 3], system[3, 2] = exact.omega, -exact.omega
            u, quadrature = 10 * mp.sin(exact.angle), 10 * mp.cos(exact.angle)
            state = mpmath.matrix([*exact.start, u, quadrature])
            found = mpmath.expm(system * mpf(time)) * state
            moment = exact.at(time)
            assert abs(found[0] - moment.dielectric) < mpf(10) ** -40
            assert abs(found[1] - moment.current) < mpf(10) ** -40


def random_case(seed):
    rng = np.random.default_rng(seed)
    natural, impedance = 10 ** rng.uniform(2, 6), 10 ** rng.uniform(-1, 3)
    zeta = 10 ** rng.uniform(-2, 0.7)
    more = {}
    if rng.random() < 0.5:
        more["load_resistance"] = impedance * 10 ** rng.uniform(-0.5, 2)
    if rng.random() < 0.5:
        more["series_resistance"] = zeta * impedance * rng.random()
    case_loop = loop_of(zeta, (natural, impedance), **more)
    level = 10 ** rng.uniform(0, 2)
    if seed % 2:
        source = constant(level)
    else:
        frequency = 10 ** rng.uniform(-1, 1) * natural / (2 * np.pi)
        source = sine(level, frequency, rng.uniform(0, 2 * np.pi))
    voltage = level * rng.uniform(-1, 1) * rng.integers(2)
    current = level / impedance * rng.uniform(-1, 1) * rng.integers(2)
    return Case(case_loop, source, voltage, current), natural


@pytest.mark.parametrize("seed", range(40))
def test_integrator_agrees(seed):
    case, natural = random_case(seed)
    loop, source = case.loop, case.source
    omega, angle = 2 * np.pi * float(source.frequency), float(source.closing_angle)
    resistance, series = float(loop.resistance), float(loop.series_resistance)
    conductance = 1 / float(loop.load_resistance)

    def slope(t, state):
        # Kirchhoff's laws as drawn: the terminal voltage carries the capacitor's own drop.
        voltage, current = state
        terminal = (voltage + series * current) / (1 + series * conductance)
        drive = float(source.amplitude) * np.sin(omega * t + angle)
        return [
            (current - conductance * terminal) / float(loop.capacitance),
            (drive - resistance * current - terminal) / float(loop.inductance),
        ]

    times = np.linspace(0, 6 * 2 * np.pi / natural, 25)
    state = [float(case.capacitor_voltage), float(case.initial_current)]
    impedance = float(np.sqrt(loop.inductance / loop.capacitance))
    level = max(float(source.amplitude), abs(state[0]), abs(state[1]) * impedance)
    rtol, steps, states = 1e-11, 0, [state]
    # From one time to the next, since the values inside a step are not held to the tolerance.
    for interval in pairwise(times):
        atol = rtol * np.array([level, level / impedance])
        solution = solve_ivp(slope, interval, states[-1], "DOP853", rtol=rtol, atol=atol)
        states.append(solution.y[:, -1])
        steps += solution.t.size - 1
    voltage, current = np.transpose(states)
    terminal = (voltage + series * current) / (1 + series * conductance)
    waves = case.waveforms(times)
    size = level + max(np.max(np.abs(voltage)), np.max(np.abs(current)) * impedance)
    # A step may err by rtol of `size` in each state (root mean square: hence the root of two),
    # and free motion never grows in energy: the errors of the steps at most add up.
    bound = np.sqrt(2) * steps * rtol * size
    share = series / impedance
    assert np.max(np.abs(terminal - waves.capacitor_voltage)) <= bound * (1 + share)
    assert np.max(np.abs(current - waves.current)) * impedance <= bound
