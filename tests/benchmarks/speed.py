"""Speed of the switch-on as ratios within one run: python tests/benchmarks/speed.py.

References: ``scipy.integrate.solve_ivp`` (DOP853, at the tolerance that gives about the same
accuracy), ``scipy.signal.lsim`` on the same grid, and the elementary functions that a waveform
cannot do without. Loops are solved from their parts each time.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable
from typing import Any

import numpy as np
from scipy import signal
from scipy.integrate import solve_ivp

from rlc.solver.case import Case
from rlc.solver.driven import driven_states
from rlc.solver.equation import equation_of
from rlc.solver.loop import make_loop
from rlc.solver.source import Source, constant

POINTS, LOOPS, REPEATS = 500, 10_000, 7
LEVEL = 10.0
#: Samples that elementary functions are timed on, few enough to stay in the cache.
SAMPLES = 16_384


def seconds(work: Callable[[], Any]) -> float:
    """One run."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def ratio(reference: Callable[[], Any], ours: Callable[[], Any], repeats: int = REPEATS) -> float:
    """How many times longer the reference takes, median of runs in turns.

    A busy moment of the machine meets both of a pair.
    """
    ours()
    return statistics.median(seconds(reference) / seconds(ours) for _ in range(repeats))


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


def states(case: Case, grid: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Capacitor voltage and current of every loop, from the parts on."""
    source = case.source
    given = source.amplitude, source.frequency, source.closing_angle
    given += case.capacitor_voltage, case.initial_current
    columns = (np.asarray(value, dtype=float)[..., np.newaxis] for value in given)
    return driven_states(equation_of(case.loop).column(), *columns, grid)


def elementary(sine: bool) -> None:
    """What a damped sine needs for each sample, and a source that turns if there is one."""
    x = np.linspace(-30, 0, SAMPLES)
    buffer = np.empty_like(x)
    functions = (np.exp, np.sin, np.cos, *((np.sin, np.cos) if sine else ()))
    for _ in range(LOOPS * POINTS // SAMPLES):
        for function in functions:
            function(x, out=buffer)


def main() -> None:
    """Print each ratio."""
    batch, grid = random_case(LOOPS, sine=False), np.linspace(0, 1e-3, POINTS)
    turning = random_case(LOOPS, sine=True)
    single = Case(batch.loop.map(lambda value: value[0]), batch.source)

    for words, case in (("dc", batch), ("sine", turning)):
        taken = 1 / ratio(lambda: elementary(case is turning), lambda: states(case, grid))  # noqa: B023
        print(f"v_C and i under {words}, {LOOPS} loops, per sample: {taken:.1f} x exp, sin and cos")

    few = range(20)

    def integrators(peak: bool = False) -> None:
        for k in few:
            integrate(batch, k, grid, peak)

    def simulations() -> None:
        for k in few:
            simulate(batch, k, grid)

    def twenty(work: Callable[[], Any]) -> Callable[[], None]:
        def repeated() -> None:
            for _ in few:
                work()

        return repeated

    def step_peaks() -> None:
        Case(batch.loop, batch.source).peak("current")

    each, all_loops = 1.0, LOOPS / len(few)
    for words, ours, share, peak in (
        ("v_C and i of a step, one loop", twenty(lambda: states(single, grid)), each, False),
        ("v_C and i of a step", lambda: states(batch, grid), all_loops, False),
        ("every waveform of a step, one loop", twenty(lambda: single.waveforms(grid)), each, False),
        ("every waveform of a step", lambda: batch.waveforms(grid), all_loops, False),
        ("peak of a step", step_peaks, all_loops, True),
    ):
        integrator = share * ratio(lambda: integrators(peak), ours, 3)  # noqa: B023
        simulation = share * ratio(simulations, ours)
        count = "" if share == each else f", {LOOPS} loops"
        print(f"{words}{count}: solve_ivp {integrator:.0f} x, lsim {simulation:.0f} x as long")

    for words, angle in (("closing at 0", 0.0), ("worst angle", None)):
        found = random_case(2000, sine=True, seed=2)
        source = Source(found.source.amplitude, found.source.frequency, angle)  # type: ignore[arg-type]
        for element in ("current", "capacitor"):
            rate = 2000 / seconds(lambda: Case(found.loop, source).peak(element))  # noqa: B023
            print(f"proved peaks under a sine, {words}, {element}: {rate:.0f} loops per second")


if __name__ == "__main__":
    main()
