"""Print the worst error of the waveforms by regime of damping, against 50 digits.

Run it from the top of the tree: ``python tests/benchmarks/accuracy.py [loops per regime]``.
The error is a share of the running peak, the largest magnitude from closing to that time.
Loops are random over twelve decades of quality factor, times over 1e-6 to 1e4 natural
periods, and half of the sines are at or within a millionth of resonance; the other sources
are as quick as the loop within four decades.
"""

import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE.parent / "solver"), str(HERE.parent.parent)]

from exact import worst_error  # noqa: E402
from sources import KINDS, drawn  # noqa: E402

from rlc.solver.case import Case  # noqa: E402
from rlc.solver.loop import Loop, make_loop  # noqa: E402
from rlc.solver.source import constant, sine  # noqa: E402

WAVES = {"capacitor": "capacitor_voltage", "current": "current"}
#: Fractions of a period: before each time, and in the first one of loop and source, for the
#: running peak.
BEFORE = np.array([0.0, 0.13, 0.29, 0.41, 0.63, 0.88])
FIRST = np.geomspace(0.02, 1.0, 20)

Draw = Callable[[np.random.Generator], float]


def decades(low: float, high: float) -> Draw:
    """Draw evenly in the logarithm."""
    return lambda rng: float(10 ** rng.uniform(low, high))


def near_one(rng: np.random.Generator) -> float:
    """Draw a damping ratio within a hundredth of critical, down to the last bit."""
    return 1 + float(rng.choice([-1, 1]) * 10 ** rng.uniform(-15.6, -2))


#: Damping ratio by regime: quality factors from 1e6 to 1e-4.
REGIMES: dict[str, Draw] = {
    "no losses": lambda rng: 0.0,
    "high quality": decades(-6.3, -1.3),
    "middle": decades(-1.3, -0.01),
    "near critical": near_one,
    "overdamped": decades(0.01, 3.7),
}


def random_loop(rng: np.random.Generator, zeta: float, parts: bool) -> Loop:
    """A loop of about the given damping ratio, with every further part or none."""
    natural, impedance = 10 ** rng.uniform(1, 8), 10 ** rng.uniform(-2, 4)
    inductance, capacitance = impedance / natural, 1 / (impedance * natural)
    loss = 2 * zeta * np.sqrt(inductance / capacitance)
    if not parts:
        return make_loop(resistance=loss, inductance=inductance, capacitance=capacitance)
    return make_loop(
        resistance=loss / 2,
        winding_resistance=loss * rng.random() / 4,
        source_resistance=loss * rng.random() / 4,
        inductance=inductance / 2,
        source_inductance=inductance * rng.random() / 2,
        capacitance=capacitance,
        series_resistance=loss * rng.random() / 4,
        load_resistance=impedance / max(zeta, 1e-6) * 10 ** rng.uniform(0, 2),
    )


def error_of(rng: np.random.Generator, loop: Loop, kind: str) -> float:
    """Worst error of capacitor voltage and current at ten times and those around knots."""
    natural = float(Case(loop, constant(1.0)).equation.natural)
    period = 2 * np.pi / natural
    first = [period * FIRST]
    if kind == "sine":
        close = rng.random() < 0.5
        ratio = 1 + rng.choice([-1, 0, 1]) * 10 ** rng.uniform(-12, -6) if close else None
        ratio = 10 ** rng.uniform(-4, 4) if ratio is None else ratio
        angle = rng.choice([0.0, np.pi / 2, rng.uniform(0, np.pi)])
        source = sine(1.0, ratio * natural / (2 * np.pi), angle)
        first.append(period / ratio * FIRST)
    else:
        source = drawn(kind, rng, natural, decades=4.0)
    case = Case(loop, source)
    if case.lines is not None:
        first.append(case.lines.start[-1] * np.r_[FIRST, 1 + 10 ** rng.uniform(-9, 0, 5)])
    times = 10 ** rng.uniform(-6, 4, 10) * period
    every = np.sort(np.r_[(times[:, np.newaxis] - period * BEFORE).ravel(), *first])
    within = (every > 0) & (every <= max(np.max(times), np.max(first[-1])))
    return max(worst_error(case, every[within], WAVES).values())


def main(loops: int) -> None:
    """Print one line for each regime and set of parts."""
    rng = np.random.default_rng(1)
    print(f"{loops} loops each; worst error of v_C and i over the running peak")
    print(f"{'':34}" + "".join(f"{kind:>10}" for kind in KINDS))
    for regime, draw in REGIMES.items():
        for parts in (False, True):
            worst = dict.fromkeys(KINDS, 0.0)
            for _ in range(loops):
                loop = random_loop(rng, draw(rng), parts)
                for kind in KINDS:
                    worst[kind] = max(worst[kind], error_of(rng, loop, kind))
            label = f"{regime}, {'all parts' if parts else 'R, L, C alone'}"
            print(f"{label:34}" + "".join(f"{worst[kind]:10.1e}" for kind in KINDS), flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 100)
