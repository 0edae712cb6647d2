"""Speed of the switch-on as ratios within one run: python tests/benchmarks/speed.py.

References: ``scipy.integrate.solve_ivp`` (DOP853, at the tolerance that gives about the same
accuracy), ``scipy.signal.lsim`` on the same grid, and the elementary functions that a waveform
cannot do without.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from typing import Any

import numpy as np
from scipy import signal
from scipy.integrate import solve_ivp

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import Source, constant

POINTS, LOOPS, REPEATS = 500, 10_000, 5
LEVEL, FREQUENCY = 10.0, 3e3


def seconds(work: Callable[[], Any], repeats: int = REPEATS) -> float:
    """The fastest of several runs."""
    best = np.inf
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        best = min(best, time.perf_counter() - start)
    return best


def random_case(count: int, sine: bool, seed: int = 1) -> Case:
    """Loops with quality factors from 0.3 to 30, a source within a decade of resonance."""
    rng = np.random.default_rng(seed)
    inductance = 10 ** rng.uniform(-3.5, -2.5, count)
    capacitance = 10 ** rng.uniform(-6.5, -5.5, count)
    resistance = np.sqrt(inductance / capacitance) / 10 ** rng.uniform(-0.5, 1.5, count)
    source: Source = constant(LEVEL)
    if sine:
        natural = 1 / (2 * np.pi * np.sqrt(inductance * capacitance))
        source = Source(
            np.full(count, LEVEL), natural * 10 ** rng.uniform(-1, 1, count), np.zeros(count)
        )
    return Case(
        make_loop(resistance=resistance, inductance=inductance, capacitance=capacitance), source
    )


def one(case: Case, index: int) -> tuple[float, float, float]:
    """Resistance, inductance and capacitance of one loop of the batch."""
    loop = case.loop
    return (
        float(loop.resistance[index]),
        float(loop.inductance[index]),
        float(loop.capacitance[index]),
    )


def integrate(case: Case, index: int, grid: np.ndarray, peak: bool = False) -> Any:
    """The step by an integrator; with `peak` only until the current turns."""
    resistance, inductance, capacitance = one(case, index)

    def rates(_: float, x: np.ndarray) -> list[float]:
        return [x[1] / capacitance, (LEVEL - resistance * x[1] - x[0]) / inductance]

    def turns(t: float, x: np.ndarray) -> float:
        return rates(t, x)[1]

    turns.terminal = True  # type: ignore[attr-defined]
    return solve_ivp(
        rates, (0, grid[-1]), [0.0, 0.0], "DOP853", None if peak else grid,
        events=turns if peak else None, rtol=1e-12, atol=1e-14,
    )  # fmt: skip


def simulate(case: Case, index: int, grid: np.ndarray) -> Any:
    """The step by SciPy's linear simulation."""
    resistance, inductance, capacitance = one(case, index)
    system = signal.StateSpace(
        [[0, 1 / capacitance], [-1 / inductance, -resistance / inductance]],
        [[0], [1 / inductance]], np.eye(2), np.zeros((2, 1)),
    )  # fmt: skip
    return signal.lsim(system, np.full(grid.size, LEVEL), grid)


def main() -> None:
    """Print each ratio."""
    batch, grid = random_case(LOOPS, sine=False), np.linspace(0, 1e-3, POINTS)
    few = range(20)
    single = Case(batch.loop.map(lambda value: value[0]), batch.source)

    ours_one = seconds(lambda: single.waveforms(grid), 50)
    ours_batch = seconds(lambda: batch.waveforms(grid), 2) / LOOPS
    by_integrator = seconds(lambda: [integrate(batch, k, grid) for k in few], 2) / len(few)
    by_simulation = seconds(lambda: [simulate(batch, k, grid) for k in few], 3) / len(few)
    for words, ours in (("one loop", ours_one), (f"{LOOPS} loops", ours_batch)):
        integrator, simulation = by_integrator / ours, by_simulation / ours
        print(f"waveform, {words}: solve_ivp {integrator:.0f} x, lsim {simulation:.0f} x as long")

    def peaks() -> None:
        Case(batch.loop, batch.source).peak("current")

    ours_peak = seconds(peaks) / LOOPS
    peak = seconds(lambda: [integrate(batch, k, grid, peak=True) for k in few], 2) / len(few)
    integrator, simulation = peak / ours_peak, by_simulation / ours_peak
    print(f"peak of a step, {LOOPS} loops: solve_ivp {integrator:.0f} x, lsim {simulation:.0f} x")

    x = np.linspace(0, 30, LOOPS * 50)
    floor = seconds(lambda: (np.exp(-x), np.sin(x), np.cos(x))) / x.size
    print(f"waveform, per sample: {ours_batch / POINTS / floor:.1f} x exp, sin and cos of it")

    for words, angle in (("closing at 0", 0.0), ("worst angle", None)):
        found = random_case(2000, sine=True, seed=2)
        source = Source(found.source.amplitude, found.source.frequency, angle)  # type: ignore[arg-type]
        for element in ("current", "capacitor"):
            case = Case(found.loop, source)
            start = time.perf_counter()
            case.peak(element)
            rate = 2000 / (time.perf_counter() - start)
            print(f"proved peaks under a sine, {words}, {element}: {rate:.0f} loops per second")


if __name__ == "__main__":
    main()
