"""Every kind of source against 50 digits, against a numerical integrator, and its own peaks."""

from itertools import pairwise

import numpy as np
import pytest
from exact import worst_error
from scipy.integrate import solve_ivp
from sources import KINDS, drawn

from rlc.solver.case import Case
from rlc.solver.loop import make_loop

# Of the running peak.
ALLOWED = 1e-12
STATES = {"dielectric": "capacitor_voltage", "current": "current"}

REGIMES = {
    "no losses": lambda rng: 0.0,
    "high quality": lambda rng: 10 ** rng.uniform(-6.3, -2),
    "middle": lambda rng: 10 ** rng.uniform(-1.5, 0.3),
    "near critical": lambda rng: 1 + rng.choice([0.0, 1e-15, -1e-15, 1e-12, 1e-8]),
    "overdamped": lambda rng: 10 ** rng.uniform(0.5, 3.7),
}


def loop_of(zeta, rng, scale=1.0, load=False):
    """A loop of a damping ratio, at a random scale of frequency and impedance."""
    natural, impedance = 10 ** rng.uniform(2, 7) ** scale, 10 ** rng.uniform(-1, 3)
    return make_loop(
        resistance=2 * zeta * impedance,
        inductance=impedance / natural,
        capacitance=1 / (impedance * natural),
        load_resistance=impedance * 10 ** rng.uniform(-0.5, 2) if load else np.inf,
    )


def moments(case, rng):
    """Times from 1e-6 to 1e4 natural periods, and around every knot of the source [s]."""
    period = 2 * np.pi / float(case.equation.natural)
    times = period * 10 ** rng.uniform(-6, 4, 10)
    if case.lines is not None:
        end = case.lines.start[-1]
        times = np.r_[times, end * rng.uniform(0, 1, 6), end * (1 + 10 ** rng.uniform(-9, 0, 4))]
    return np.unique(times)


@pytest.mark.parametrize("kind", KINDS[2:])
@pytest.mark.parametrize("regime", REGIMES)
@pytest.mark.parametrize("seed", range(6))
def test_waveforms_against_50_digits(kind, regime, seed):
    rng = np.random.default_rng([seed, KINDS.index(kind), len(regime)])
    loop = loop_of(REGIMES[regime](rng), rng, load=seed % 3 == 2)
    natural = float(Case(loop, drawn("dc", rng, 1.0)).equation.natural)
    impedance = float(np.sqrt(loop.inductance / loop.capacitance))
    charged = rng.normal(size=2) * (5.0, 5.0 / impedance) * (seed % 2)
    case = Case(loop, drawn(kind, rng, natural, decades=4.0), *charged)
    for name, error in worst_error(case, moments(case, rng), STATES).items():
        assert error <= ALLOWED, (name, error)


def states_by_integration(case, times, rtol):
    """States at given times by a general integrator, restarted at every knot; and its steps."""
    loop, source = case.loop, case.source
    outer = float(loop.outer_resistance)
    series, conductance = float(loop.series_resistance), float(loop.load_conductance)
    omega = 2 * np.pi * float(source.frequency)

    def drive(t):
        if source.shape is not None:
            return float(case.source.shape.at(t)) if case.lines is None else None
        turn = omega * t + float(source.closing_angle)
        waves = (o.share * np.sin(o.number * turn + o.phase) for o in source.every_order)
        return float(source.amplitude) * sum(waves)

    def slope(t, state, line=None):
        voltage, current = state
        terminal = (voltage + series * current) / (1 + series * conductance)
        # a line is followed beyond its end: the integrator looks no further than it
        given = drive(t) if line is None else line[1] + line[2] * (t - line[0])
        return [
            (current - conductance * terminal) / float(loop.capacitance),
            (given - outer * current - terminal) / float(loop.inductance),
        ]

    knots = case.lines.start if case.lines is not None else np.zeros(1)
    level = max(float(source.largest), abs(float(case.capacitor_voltage)), 1.0)
    impedance = float(np.sqrt(loop.inductance / loop.capacitance))
    state, steps, found = [float(case.capacitor_voltage), float(case.initial_current)], 0, {}
    for interval in pairwise(np.union1d(np.union1d(knots, times), 0.0)):
        line = None
        if case.lines is not None:
            k = int(np.searchsorted(knots, interval[0], side="right") - 1)
            line = knots[k], case.lines.level[k], case.lines.slope[k]
        atol = rtol * np.array([level, level / impedance])
        done = solve_ivp(slope, interval, state, "DOP853", rtol=rtol, atol=atol, args=(line,))
        state, steps = done.y[:, -1], steps + done.t.size
        found[interval[1]] = state
    return np.array([found[time] for time in times]).T, steps


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("part", range(8))
def test_states_and_peaks_of_200_loops_against_an_integrator(kind, part):
    """DOP853 knows the states to its tolerance, and never comes above the peaks."""
    for seed in range(25 * part, 25 * part + 25):
        rng = np.random.default_rng([seed, KINDS.index(kind), 7])
        loop = make_loop(
            resistance=2 * 10 ** rng.uniform(-2, 0.7),
            inductance=1.0,
            capacitance=1.0,
            series_resistance=rng.choice([0.0, 0.1]),
            load_resistance=rng.choice([np.inf, 3.0]),
        )
        case = Case(loop, drawn(kind, rng, 1.0), *(rng.normal(size=2) * 5 * (seed % 2)))
        end = 15.0 if case.lines is None else min(40.0, 1.2 * case.lines.start[-1] + 8.0)
        times, rtol = np.sort(rng.uniform(0, end, 6)), 1e-10
        (voltage, current), steps = states_by_integration(case, times, rtol)
        waves = case.waveforms(times)
        share = float(loop.terminal_share)
        terminal = share * (voltage + float(loop.series_resistance) * current)
        size = 10.0 + np.max(np.abs([voltage, current]))
        # A step may err by rtol of `size` in each state, and free motion never grows.
        bound = np.sqrt(2) * steps * rtol * size * 1.1
        assert np.max(np.abs(waves.capacitor_voltage - terminal)) <= bound
        assert np.max(np.abs(waves.current - current)) <= bound
        if seed % 5 == 0:
            for name, values in (("current", current), ("capacitor", terminal)):
                peak = case.peak(name)
                top = float(peak.value) * (1 + float(peak.gap))
                assert np.max(np.abs(values)) <= top + bound
