"""A recorded source against SciPy's linear simulation: python tests/benchmarks/records.py.

Both take the record as straight lines between its points. Time is a ratio within one run, the
error that of the capacitor voltage and the current against 50 digits, over their largest value.
With steps that are exact both are known to rounding. A record's time stamps are rounded decimals
after some delay, though: linear simulation takes the first step for all of them, and refuses
steps that differ.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
from mpmath import lu_solve, matrix, mp, mpf
from scipy import signal

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE.parent / "solver"), str(HERE.parent.parent)]

from exact import Exact  # noqa: E402

from rlc.solver.case import Case  # noqa: E402
from rlc.solver.loop import make_loop  # noqa: E402
from rlc.solver.shapes import recorded  # noqa: E402
from rlc.solver.source import shaped  # noqa: E402

EXACT_POINTS, POINTS, MANY = 5_000, 100_000, 1_000_000
INDUCTANCE, CAPACITANCE = 1e-3, 1e-6


def seconds(work: Callable[[], Any], repeats: int = 3) -> float:
    """The median of several runs."""
    taken = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        taken.append(time.perf_counter() - start)
    return statistics.median(taken)


def ours(resistance: float, times: np.ndarray, voltage: np.ndarray) -> tuple[np.ndarray, ...]:
    """States at the points of the record."""
    loop = make_loop(resistance=resistance, inductance=INDUCTANCE, capacitance=CAPACITANCE)
    course = Case(loop, shaped(recorded(times, voltage))).course
    return course.states


def simulated(resistance: float, times: np.ndarray, voltage: np.ndarray) -> tuple[np.ndarray, ...]:
    """The same by linear simulation."""
    system = signal.StateSpace(
        [[0, 1 / CAPACITANCE], [-1 / INDUCTANCE, -resistance / INDUCTANCE]],
        [[0], [1 / INDUCTANCE]], np.eye(2), np.zeros((2, 1)),
    )  # fmt: skip
    return tuple(signal.lsim(system, voltage, times)[1].T)


def exact(resistance: float, times: np.ndarray, voltage: np.ndarray) -> tuple[np.ndarray, ...]:
    """The same from point to point in 50 digits."""
    loop = make_loop(resistance=resistance, inductance=INDUCTANCE, capacitance=CAPACITANCE)
    case = Case(loop, shaped(recorded(times, voltage)))
    reference = Exact(case)
    with mp.workdps(50):
        stamps, given = ([mpf(float(each)) for each in part] for part in (times, voltage))
        rest = lu_solve(reference.A, matrix([0, -1 / reference.L]))
        lag = lu_solve(reference.A, rest)
        state = mpf(0), mpf(0)
        found = [state]
        for k, width in enumerate(b - a for a, b in pairwise(stamps)):
            rise = (given[k + 1] - given[k]) / width
            free = tuple(state[n] - rest[n] * given[k] - lag[n] * rise for n in (0, 1))
            moved = reference.propagate(width, free)
            state = tuple(rest[n] * given[k + 1] + lag[n] * rise + moved[n].real for n in (0, 1))
            found.append(state)
    return tuple(np.array([pair[k] for pair in found], dtype=object) for k in (0, 1))


def error(found: tuple[np.ndarray, ...], right: tuple[np.ndarray, ...]) -> float:
    """Largest difference over the largest value, of both states."""
    return max(
        float(max(abs(mpf(float(x)) - y) for x, y in zip(part, whole, strict=True)))
        / float(max(abs(y) for y in whole))
        for part, whole in zip(found, right, strict=True)
    )


def main() -> None:
    """Print errors by quality factor and pace of the record, then the times."""
    rng = np.random.default_rng(1)
    natural = 1 / np.sqrt(INDUCTANCE * CAPACITANCE)
    impedance = np.sqrt(INDUCTANCE / CAPACITANCE)
    print(f"{EXACT_POINTS} points; worst error of v_C and i: ours, linear simulation, ratio")
    for words, delay in (("exact steps", 0.0), ("decimal stamps from 0.1 s on", 0.1)):
        ratios = []
        for quality in (1e4, 30.0, 0.5, 0.01):
            for turn in (0.01, 0.1, 1.0):
                # a power of two keeps every multiple of the step exact
                step = 2.0 ** np.round(np.log2(turn / natural))
                step = float(f"{step:.1e}") if delay else step
                times = delay + step * np.arange(EXACT_POINTS)
                voltage = rng.normal(size=times.size).cumsum() * 0.1 + rng.normal(size=times.size)
                resistance = impedance / quality
                right = exact(resistance, times, voltage)
                mine = error(ours(resistance, times, voltage), right)
                theirs = error(simulated(resistance, times, voltage), right)
                ratios.append(theirs / mine)
                print(
                    f"Q {quality:<7g} w0 dt {turn:<6g} {mine:9.1e} {theirs:9.1e} {ratios[-1]:9.1f}"
                )
        spread = f"{min(ratios):.1f} to {max(ratios):.0f}, median {np.median(ratios):.0f}"
        print(f"{words}: ratio of errors {spread}")
    voltage = rng.normal(size=MANY)
    even, uneven = 3e-6 * np.arange(MANY), np.cumsum(rng.uniform(1e-6, 5e-6, MANY))
    some = slice(0, POINTS)
    theirs = seconds(lambda: simulated(0.1, even[some], voltage[some]), 1)
    mine = seconds(lambda: ours(0.1, even[some], voltage[some]))
    print(f"{POINTS} points: linear simulation takes {theirs / mine:.1f} x as long")
    for words, times in (("even", even), ("uneven", uneven)):
        taken = seconds(lambda: ours(0.1, times, voltage), 1)  # noqa: B023
        print(f"{MANY} points, {words} steps: {taken / mine:.1f} x the time of {POINTS} even ones")


if __name__ == "__main__":
    main()
