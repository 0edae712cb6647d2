"""Peaks under every kind of source: never exceeded, attained, and the worst closing the worst."""

from dataclasses import replace

import numpy as np
import pytest
from sources import KINDS, drawn

from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.search import PROVED_GAP
from rlc.solver.source import ANY_ANGLE, Order, Window, constant, shaped, sine

NAMES = {
    "current": "current", "capacitor": "capacitor_voltage", "inductor": "inductor_voltage",
}  # fmt: skip


def random_case(kind, seed):
    rng = np.random.default_rng([seed, KINDS.index(kind), 3])
    loop = make_loop(
        resistance=2 * 10 ** rng.uniform(-2.3, 1.2),
        inductance=1.0,
        capacitance=1.0,
        series_resistance=rng.choice([0.0, 0.3]),
        load_resistance=rng.choice([np.inf, np.inf, 2.0]),
    )
    return Case(loop, drawn(kind, rng, 1.0), *(rng.normal(size=2) * 8 * (seed % 2)))


def dense(case):
    """Times close together, on both sides of every knot."""
    slowest = float(case.equation.slowest)
    source, end = case.source, 12 / slowest
    if case.lines is not None:
        end += case.lines.start[-1]
    if source.kind == "surge":
        end += 8 / source.shape.slow
    if source.alternating:
        end += 3 / float(source.frequency)
    end = min(end, 1500.0, case.course_end)
    times = np.r_[np.linspace(0, end, 12001), np.geomspace(1e-4, end, 1500)]
    if case.lines is not None:
        knots = case.lines.start[case.lines.start < end]
        times = np.r_[times, knots, np.nextafter(knots[1:], 0)]
    return np.unique(times[times < case.course_end])


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("seed", range(10))
def test_no_sample_is_above_the_peak_and_one_attains_it(kind, seed):
    case = random_case(kind, seed)
    waves = case.waveforms(dense(case))
    for element, name in NAMES.items():
        peak = case.peak(element)
        assert float(peak.gap) <= PROVED_GAP
        limit = float(peak.value) * (1 + PROVED_GAP) + 1e-12
        assert np.max(np.abs(getattr(waves, name))) <= limit
        if np.isfinite(peak.time):
            # a jump of the source belongs to both of its sides
            times = np.array([float(peak.time), np.nextafter(float(peak.time), 0) * (1 - 1e-14)])
            reached = np.max(np.abs(getattr(case.waveforms(times), name)))
            assert reached == pytest.approx(float(peak.value), rel=1e-9)


@pytest.mark.parametrize("seed", range(12))
@pytest.mark.parametrize("window", ["any", "narrow"])
@pytest.mark.parametrize("harmonics", [False, True])
def test_scan_of_angles_never_above_the_worst(seed, window, harmonics):
    case = random_case("harmonics" if harmonics else "sine", seed)
    rng = np.random.default_rng(seed)
    low = rng.uniform(-3, 3)
    limits = ANY_ANGLE if window == "any" else Window(low, low + rng.uniform(0.1, 2.0))
    worst = replace(case, source=replace(case.source, closing_angle=None, window=limits))
    angles = np.linspace(limits.low, limits.high, 40)
    each = replace(case, source=replace(case.source, closing_angle=angles))
    for element in NAMES:
        top = worst.peak(element)
        assert np.all(each.peak(element).value <= top.value * (1 + 2 * PROVED_GAP))
        # never far above either: 40 angles are at most a 39th of the window apart
        assert np.max(each.peak(element).value) >= 0.9 * top.value
        if window == "narrow":
            assert limits.low <= top.angle <= limits.high
        again = worst.closed_for(element).peak(element)
        assert again.value == pytest.approx(float(top.value), rel=3 * PROVED_GAP)


@pytest.mark.parametrize("kind", [*KINDS, "worst"])
@pytest.mark.parametrize("seed", range(4))
def test_either_polarity_is_the_worse_of_both(kind, seed):
    case = random_case("sine" if kind == "worst" else kind, 2 * seed + 1)
    if kind == "worst":
        case = replace(case, source=replace(case.source, closing_angle=None))
    case = replace(case, initial_current=0.0)
    both = replace(case, either_polarity=True)
    other = replace(case, capacitor_voltage=-case.capacitor_voltage)
    for element in NAMES:
        larger = max(float(each.peak(element).value) for each in (case, other))
        found = both.peak(element)
        assert found.value == pytest.approx(larger, rel=2 * PROVED_GAP)
        again = both.closed_for(element).peak(element)
        assert again.value == pytest.approx(larger, rel=3 * PROVED_GAP)


@pytest.mark.parametrize("seed", range(6))
def test_train_until_steady_repeats_itself_at_its_end(seed):
    rng = np.random.default_rng(seed)
    loop = make_loop(resistance=10 ** rng.uniform(-1, 1), inductance=1.0, capacitance=1.0)
    train = shapes.pulse(10.0, 2.0, 0.5, 0.2, rng.uniform(3.0, 9.0), None)
    case = Case(loop, shaped(train))
    times = case.course_end - case.repeats * np.linspace(0.01, 0.99, 40)
    last, before = case.waveforms(times), case.waveforms(times - case.repeats)
    size = float(case.peak("capacitor").value)
    assert np.max(np.abs(last.capacitor_voltage - before.capacitor_voltage)) <= 1e-10 * size
    # a long train by count has the same peaks
    count = round(case.course_end / case.repeats)
    counted = Case(loop, shaped(shapes.pulse(10.0, 2.0, 0.5, 0.2, case.repeats, count)))
    assert float(case.peak("capacitor").value) == pytest.approx(
        float(counted.peak("capacitor").value), rel=1e-9
    )


def test_train_that_never_settles_is_refused():
    case = Case(make_loop(resistance=0.0, inductance=1.0, capacitance=1.0),
                shaped(shapes.pulse(1.0, 1.0, period=3.0, count=None)))  # fmt: skip
    with pytest.raises(ValueError, match="needs more than 100000 pulses"):
        case.peak("current")


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("element", NAMES)
def test_peaks_are_continuous_through_critical_damping(kind, element):
    rng = np.random.default_rng(5)
    source = drawn(kind, rng, 1.0)
    zetas = np.array([1 - 1e-7, 1 - 1e-15, 1.0, 1 + 1e-15, 1 + 1e-7])
    peaks = Case(
        make_loop(resistance=2 * zetas, inductance=1.0, capacitance=1.0), source
    ).peak(element).value  # fmt: skip
    assert np.ptp(peaks) <= 1e-6 * peaks[2]


def test_lossless_loop_keeps_the_ringing_that_a_surge_leaves():
    """All of the surge's area is given at once to a slow loop: i = area/L, v = i sqrt(L/C)."""
    surge = shapes.Surge(1e4, 1e5, 1e7)
    area = surge.scale * (1 / surge.slow - 1 / surge.fast)
    case = Case(make_loop(resistance=0.0, inductance=1.0, capacitance=1.0), shaped(surge))
    # the surge is over within 1e-5 rad of the loop
    assert float(case.peak("current").value) == pytest.approx(area, rel=2e-5)
    assert float(case.peak("capacitor").value) == pytest.approx(area, rel=2e-5)


def test_harmonic_at_resonance_without_losses_is_unbounded():
    loop = make_loop(resistance=0.0, inductance=1.0, capacitance=1.0 / (2 * np.pi) ** 2)
    case = Case(loop, sine(1.0, 0.2, 0.0, orders=[Order(3, 0.1)]))
    assert np.isfinite(case.peak("current").value)
    still = Case(loop, constant(1.0))
    assert float(still.peak("capacitor").value) == pytest.approx(2.0)
