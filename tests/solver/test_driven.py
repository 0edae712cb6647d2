"""States of many loops at once, against 50 digits; every way of moving, in every layout."""

import numpy as np
import pytest
from exact import Exact
from mpmath import mp, mpf

from rlc.solver import driven
from rlc.solver.case import Case
from rlc.solver.driven import driven_from_rest, driven_states
from rlc.solver.equation import equation_of
from rlc.solver.loop import Loop, make_loop
from rlc.solver.source import Source

# Of the largest value so far. Up to fifty roundings of 1.1e-16 in sums of terms that are up to
# twice as large as what is left of them.
ALLOWED = 1e-14

NATURAL, IMPEDANCE = 3.1e5, 0.7
#: Damping ratio and source frequency over the natural one, a pair for each way of moving.
WAYS = {
    "no losses, constant": (0.0, 0.0),
    "no losses, met": (0.0, 1.0),
    "no losses, met within 1e-12": (0.0, 1 + 1e-12),
    "no losses, far": (0.0, 30.0),
    "rings, constant": (0.05, 0.0),
    "rings, met": (0.01, 1.0),
    "rings, edge of near": (0.02, 1.4995),
    "rings, just not near": (0.02, 1.5005),
    "rings, slow source": (0.3, 1e-3),
    "nearly critical from below": (1 - 1e-14, 0.8),
    "nearly critical from above": (1 + 1e-14, 0.8),
    "creeps, constant": (20.0, 0.0),
    "creeps, slow source": (40.0, 1e-4),
    "creeps, source between the rates": (40.0, 1.0),
    "creeps, fast source": (3.0, 500.0),
}
#: At closing, about where series end and where the slow decay does, and late.
TIMES = np.r_[0.0, np.geomspace(1e-5, 1e4, 40), 1.5 * (1 + 1e-9 * np.array([-1, 1]))] / NATURAL


def loop_of(zeta: np.ndarray | float, **more: float) -> Loop:
    return make_loop(
        resistance=2 * IMPEDANCE * np.asarray(zeta),
        inductance=IMPEDANCE / NATURAL,
        capacitance=1 / (IMPEDANCE * NATURAL),
        **more,
    )


BATCH = loop_of(np.array([zeta for zeta, _ in WAYS.values()]))
FREQUENCY = np.array([ratio for _, ratio in WAYS.values()]) * NATURAL / (2 * np.pi)
ANGLE = np.linspace(0.0, 3.0, len(WAYS))
VOLTAGE, CURRENT = np.linspace(-9.0, 14.0, len(WAYS)), np.linspace(8.0, -6.0, len(WAYS))


def column(value):
    return np.asarray(value)[..., np.newaxis]


def exact_states(loop, amplitude, frequency, angle, voltage, current, times):
    """Capacitor voltage and current in 50 digits, shape (2, times)."""
    # a constant source is closed at its top: its voltage is the one at closing
    level, turn = (amplitude, angle) if frequency else (amplitude * np.sin(angle), np.pi / 2)
    exact = Exact(Case(loop, Source(level, frequency, turn), voltage, current))
    moments = [exact.at(time) for time in times]
    return [[m.dielectric for m in moments], [m.current for m in moments]]


def worst(found, exact, times):
    """Largest error over the largest magnitude up to the same time."""
    largest = 0.0
    for wave, values in zip(found, exact, strict=True):
        peak = mpf(0)
        for k in np.argsort(times, kind="stable"):
            peak = max(peak, abs(values[k]))
            error = abs(mpf(float(wave[k])) - values[k])
            largest = max(largest, float(error / peak) if peak else float(error != 0))
    return largest


@pytest.mark.parametrize("start", [0.0, 1.0], ids=["at rest", "charged"])
def test_batch_of_every_kind_of_loop(start):
    found = driven_states(
        equation_of(BATCH).column(), 24.0, column(FREQUENCY), column(ANGLE),
        column(start * VOLTAGE), column(start * CURRENT), TIMES,
    )  # fmt: skip
    for k, way in enumerate(WAYS):
        one = BATCH.map(lambda value, k=k: value[k])
        given = 24.0, FREQUENCY[k], ANGLE[k], start * VOLTAGE[k], start * CURRENT[k]
        exact = exact_states(one, *given, TIMES)
        assert worst([state[k] for state in found], exact, TIMES) <= ALLOWED, way


@pytest.mark.parametrize("way", WAYS)
def test_one_loop_with_every_part(way):
    zeta, ratio = WAYS[way]
    frequency = ratio * NATURAL / (2 * np.pi)
    loop = loop_of(zeta, series_resistance=0.02, load_resistance=90.0, winding_resistance=0.01)
    given = -5.0, frequency, 2.0, 3.0, -1.0
    found = driven_states(equation_of(loop), *given, TIMES)
    assert worst(found, exact_states(loop, *given, TIMES), TIMES) <= ALLOWED


def test_layouts_agree():
    """The same numbers come from loops in one row, in a grid, and with times of their own."""
    eq = equation_of(BATCH)
    given = 24.0, FREQUENCY, ANGLE, VOLTAGE, CURRENT
    expected = driven_states(eq.column(), 24.0, *(column(each) for each in given[1:]), TIMES)
    size = [np.max(np.abs(state), axis=-1, keepdims=True) for state in expected]

    def same(found, sizes):
        for state, other, most in zip(found, expected, sizes, strict=True):
            assert state.shape == other.shape
            # Loops are computed alike; numpy may round differently by the length of a row.
            assert np.max(np.abs(state - other) / most) <= ALLOWED

    own_times = np.broadcast_to(TIMES, (len(WAYS), TIMES.size))
    same(driven_states(eq.column(), 24.0, *(column(each) for each in given[1:]), own_times), size)
    each = [driven_states(eq, *given, time) for time in TIMES]
    same([np.stack(states, axis=-1) for states in zip(*each, strict=True)], size)
    backward = [
        state[:, ::-1]
        for state in driven_states(
            eq.column(), 24.0, *(column(each) for each in given[1:]), TIMES[::-1]
        )
    ]
    same(backward, size)
    scattered = driven_states(
        eq.map(lambda value: np.repeat(value, TIMES.size)),
        24.0, *(np.repeat(each, TIMES.size) for each in given[1:]), np.tile(TIMES, len(WAYS)),
    )  # fmt: skip
    same([state.reshape(len(WAYS), -1) for state in scattered], size)


def test_pieces_fit_together(monkeypatch):
    given = 24.0, column(FREQUENCY), column(ANGLE), column(VOLTAGE), column(CURRENT)
    eq = equation_of(BATCH).column()
    whole = driven_states(eq, *given, TIMES)
    monkeypatch.setattr(driven, "_PIECE", 7)
    for state, other in zip(driven_states(eq, *given, TIMES), whole, strict=True):
        size = np.max(np.abs(other), axis=-1, keepdims=True)
        assert np.max(np.abs(state - other) / size) <= ALLOWED


def responses_from_rest(exact, omega):
    """States that exp(j omega t) volts drives from rest, a row of complex numbers for each."""
    steady = exact.phasors(omega)
    rows = [[], []]
    for time in TIMES:
        t = mpf(float(time))
        gone = exact.propagate(t, steady)
        for row, phasor, left in zip(rows, steady, gone, strict=True):
            row.append(mp.expj(omega * t) * phasor - left)
    return rows


@pytest.mark.parametrize("way", WAYS)
def test_cosine_and_sine_from_rest_keep_digits_of_their_own(way):
    zeta, ratio = WAYS[way]
    loop, frequency = loop_of(zeta), ratio * NATURAL / (2 * np.pi)
    found = driven_from_rest(equation_of(loop), np.asarray(frequency), TIMES)
    with mp.workdps(50):
        exact = Exact(Case(loop, Source(1.0, frequency, 0.0)))
        rows = responses_from_rest(exact, exact.omega)
    cosine = [[value.real for value in row] for row in rows]
    sine = [[value.imag for value in row] for row in rows]
    assert worst(np.real(found), cosine, TIMES) <= ALLOWED
    if ratio == 0:
        assert not np.any(np.imag(found))
    else:
        assert worst(np.imag(found), sine, TIMES) <= ALLOWED


@pytest.mark.parametrize("zeta", [0.0, 0.2, 30.0])
@pytest.mark.parametrize("order", [1, 3, 7, 11])
def test_harmonics_are_exact_multiples(zeta, order):
    """Half a unit in the last place of n f would be 1e-12 of a turn after 1e4 periods."""
    loop, frequency, angle = loop_of(zeta), NATURAL / 29.3, 0.4
    found = driven_states(equation_of(loop), 24.0, frequency, angle, 0.0, 0.0, TIMES, order)
    with mp.workdps(50):
        exact = Exact(Case(loop, Source(1.0, frequency, angle)))
        turn = 24 * mp.expj(mpf(angle))
        rows = responses_from_rest(exact, order * exact.omega)
        values = [[(turn * value).imag for value in row] for row in rows]
    assert worst(found, values, TIMES) <= ALLOWED


def test_no_times_and_a_single_moment():
    eq = equation_of(loop_of(0.1))
    given = 24.0, 50.0, 0.3, 2.0, 1.0
    assert [state.shape for state in driven_states(eq, *given, np.zeros(0))] == [(0,), (0,)]
    voltage, current = driven_states(eq, *given, np.zeros(()))
    assert (voltage.shape, float(voltage), float(current)) == ((), 2.0, 1.0)
