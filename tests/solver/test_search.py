"""The proof behind the peak under a sine: no interval holds more than its upper bound."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.equation import angular
from rlc.solver.loop import make_loop
from rlc.solver.peaks import Signal
from rlc.solver.search import _Search
from rlc.solver.source import sine


@pytest.mark.parametrize("seed", range(60))
def test_upper_bounds_of_intervals_hold(seed):
    rng = np.random.default_rng(seed)
    zeta, ratio = 10 ** rng.uniform(-3, 1.5), 10 ** rng.uniform(-1.3, 1.3)
    loop = make_loop(resistance=[2 * zeta], inductance=1.0, capacitance=1.0)
    angle = rng.uniform(0, 2 * np.pi)
    case = Case(loop, sine(10.0, ratio / (2 * np.pi), angle), *rng.uniform(-10, 10, 2))
    rotating, fixed = case.signals("current")
    omega = np.broadcast_to(angular(case.source.frequency)[0], (1,))
    turn = np.exp(1j * angle)
    projected = Signal(
        rotating.steady * turn,
        np.imag(rotating.value * turn) + fixed.value,
        np.imag(rotating.slope * turn) + fixed.slope,
    )
    # Intervals of all lengths, from before the fast transient to after the slow one.
    half = 10 ** rng.uniform(-3, 0.7, 40) / max(1.0, ratio)
    middle = half * (1 + 10 ** rng.uniform(-2, 2, 40))
    inside = middle[:, np.newaxis] + half[:, np.newaxis] * np.linspace(-1, 1, 401)
    which = np.zeros(40, dtype=np.intp)
    one = _Search(case.equation, omega, [projected], projected=True)
    both = _Search(case.equation, omega, [rotating, fixed], projected=False)
    fixed_angle = np.abs(case.waveforms(inside.ravel()).current).reshape(inside.shape)
    # At its worst angle each moment has |Y| + |y0|; the two quarter turns give Y.
    zero = Case(loop, case.source)
    rise = zero.waveforms(inside.ravel(), 0.0).current.reshape(inside.shape)
    crest = zero.waveforms(inside.ravel(), np.pi / 2).current.reshape(inside.shape)
    off = Case(loop, sine(0.0, 1.0), case.capacitor_voltage, case.initial_current)
    free = off.waveforms(inside.ravel()).current.reshape(inside.shape)
    for search, values in ((one, fixed_angle), (both, np.hypot(rise, crest) + np.abs(free))):
        bound = search._bounds(which, middle, half, np.zeros(1), np.zeros(1))
        top = np.max(values, axis=1)
        # Up to rounding of terms of at most 200 A.
        assert np.all(top <= bound + 1e-12)
        # Good for something: a short interval is known to the second order of its length.
        short = half * max(1.0, ratio, 2 * zeta) < 0.01
        size = np.abs(rotating.steady) + 40.0 * max(1.0, 2 * zeta)
        assert np.all(bound[short] - top[short] <= 0.01 * size)
