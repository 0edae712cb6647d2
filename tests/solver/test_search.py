"""The proof behind a searched peak: no interval holds more than its upper bound."""

from dataclasses import replace

import numpy as np
import pytest
from sources import drawn

from rlc.solver import course_peaks, peaking, search
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import Order, Window, sine

CELLS = 40


def searches(case, element):
    """The searches that a peak is found by, each from what was known before it."""
    found, run = [], search.search

    def keep(rows, best, gap=search.PROVED_GAP):
        found.append(search._Search(rows, search.known_before(best.value)))
        run(rows, best, gap)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(peaking, "search", keep)
        patch.setattr(course_peaks, "search", keep)
        case.peak(element)
    return found


@pytest.mark.parametrize("seed", range(15))
@pytest.mark.parametrize("angle", ["given", "worst", "window", "worst with harmonics"])
def test_upper_bounds_of_intervals_hold(seed, angle):
    rng = np.random.default_rng(seed)
    zeta, ratio = 10 ** rng.uniform(-3, 1.5), 10 ** rng.uniform(-1.3, 1.3)
    loop = make_loop(resistance=[2 * zeta], inductance=1.0, capacitance=1.0)
    first = rng.uniform(0, 2 * np.pi)
    closing = {"given": first, "window": Window(first, first + 0.5)}.get(angle)
    orders = (Order(3, 0.3, 1.0), Order(5, 0.2, 2.0)) if "harmonics" in angle else ()
    source = sine(10.0, ratio / (2 * np.pi), closing, orders=orders)
    case = Case(loop, source, *rng.uniform(-10, 10, 2))
    # Intervals of all lengths, from before the fast transient to after the slow one.
    half = 10 ** rng.uniform(-3, 0.7, CELLS) / max(1.0, ratio)
    middle = half * (1 + 10 ** rng.uniform(-2, 2, CELLS))
    swing = np.zeros(CELLS) if angle in ("given", "worst") else 10 ** rng.uniform(-3, 0.3, CELLS)
    at_closing = rng.uniform(0, 2 * np.pi, CELLS)
    found = searches(case, "current")[-1]
    framed = found.rows.frame is not None
    seen = at_closing + framed * 2 * np.pi * source.frequency * middle
    zero = np.zeros(CELLS, dtype=np.intp)
    cells = search._Cells(zero, middle, half, seen, swing, np.full(CELLS, np.inf))
    bound, *_ = found._bound(cells)
    at_rest = Case(loop, source)
    charged = Case(loop, sine(0.0, 1.0), case.capacitor_voltage, case.initial_current)
    sides = np.linspace(-1, 1, 101)
    for k in range(CELLS):
        times = middle[k] + half[k] * sides
        if angle == "given":
            values = np.abs(case.waveforms(times).current)
        elif angle == "worst":
            # At its worst angle each moment has |Y| + |y0|; the two quarter turns give Y.
            rise, crest = (at_rest.waveforms(times, turn).current for turn in (0.0, np.pi / 2))
            values = np.hypot(rise, crest) + np.abs(charged.waveforms(times).current)
        else:
            few = times[::10]
            turned = (seen[k] + swing[k] * sides[::20])[:, np.newaxis]
            angles = turned - framed * 2 * np.pi * source.frequency * few
            waves = (
                Case(
                    case.loop,
                    replace(source, closing_angle=angles.ravel(), window=None),
                    case.capacitor_voltage,
                    case.initial_current,
                )
                .waveforms(few)
                .current
            )
            own = np.tile(np.arange(few.size), turned.size)
            values = np.abs(waves[np.arange(own.size), own])
            if angle == "window":
                # what closes outside the window does not count
                away = np.mod(angles.ravel() - first - 0.25 + np.pi, 2 * np.pi) - np.pi
                values = np.append(values[np.abs(away) <= 0.25], 0.0)
        # Up to rounding of terms of at most 200 A.
        assert np.max(values) <= bound[k] + 1e-12
        # Good for something: a short interval is known to the second order of its size.
        rate = max(1.0, ratio, 2 * zeta)
        if half[k] * rate < 0.01 and swing[k] < 0.01 and np.max(values) > 0:
            size = np.sum(found.top) + 100.0 * rate
            assert bound[k] - np.max(values) <= 0.03 * size


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("kind", ["surge", "recorded"])
def test_upper_bounds_under_lines_and_surges(seed, kind):
    rng = np.random.default_rng([seed, 5])
    loop = make_loop(resistance=[2 * 10 ** rng.uniform(-2, 1)], inductance=1.0, capacitance=1.0)
    case = Case(loop, drawn(kind, rng, 1.0), *rng.uniform(-10, 10, 2))
    found = searches(case, "current")
    if kind == "recorded" and not found:
        pytest.skip("no line may hold the peak")
    rows = found[0].rows
    row = rng.integers(rows.group.size, size=CELLS)
    longest = np.minimum(rows.duration[row], 10.0)
    half = longest / 2 * 10 ** rng.uniform(-3, 0, CELLS)
    middle = half + (longest - 2 * half) * rng.uniform(0, 1, CELLS)
    zero = np.zeros(CELLS)
    cells = search._Cells(row, middle, half, zero, zero, np.full(CELLS, np.inf))
    bound, *_ = found[0]._bound(cells)
    for k in range(CELLS):
        times = rows.start[row[k]] + middle[k] + half[k] * np.linspace(-0.999, 0.999, 101)
        values = np.abs(case.waveforms(times).current)
        # partial fractions and exact states differ by the rounding of terms of some 1e4
        assert np.max(values) <= bound[k] + 1e-10
