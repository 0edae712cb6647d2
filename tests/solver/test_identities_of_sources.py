"""What holds for every source: scaling, shifts in time, sums, the same source put in two ways."""

from dataclasses import replace

import numpy as np
import pytest
from sources import KINDS, drawn

from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Order, constant, shaped, sine

TIMES = np.r_[0.0, np.geomspace(1e-3, 60.0, 60)]
NAMES = ("current", "capacitor_voltage", "inductor_voltage", "resistor_voltage", "source")


def loop_of(zeta, natural=1.0, impedance=1.0, **more):
    return make_loop(
        resistance=2 * zeta * impedance,
        inductance=impedance / natural,
        capacitance=1 / (impedance * natural),
        **more,
    )


def slower(source, factor):
    """The same course in `factor` times the time; a power of two keeps every digit."""
    if source.alternating:
        return replace(source, frequency=source.frequency / factor)
    shape = source.shape
    if isinstance(shape, shapes.Surge):
        return shaped(shapes.Surge(shape.scale, shape.slow / factor, shape.fast / factor))
    if shape is None:
        return source
    return shaped(shapes.Piecewise(shape.kind, shape.start * factor, shape.level, shape.end))


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("zeta", [0.0, 0.05, 1.0, 7.0])
def test_frequency_and_impedance_scaling(kind, zeta):
    """A loop `factor` times slower, of `ohms` times the impedance, under a slower source."""
    factor, ohms = 2.0**7, 2.0**-3
    source = drawn(kind, np.random.default_rng(8), 1.0)
    one = Case(loop_of(zeta), source, 2.0, 0.5)
    other = Case(loop_of(zeta, 1 / factor, ohms), slower(source, factor), 2.0, 0.5 / ohms)
    first, second = one.waveforms(TIMES), other.waveforms(TIMES * factor)
    for name in NAMES:
        values = getattr(first, name) / (ohms if name == "current" else 1.0)
        size = max(np.max(np.abs(values)), 1e-300)
        assert np.max(np.abs(values - getattr(second, name))) <= 1e-12 * size, name
    for name in ("peak_capacitor_voltage", "overshoot"):
        assert float(REGISTER[name](other)) == pytest.approx(
            float(REGISTER[name](one)), rel=3e-9, nan_ok=True
        )
    assert float(REGISTER["let_through"](other)) * ohms**2 / factor == pytest.approx(
        float(REGISTER["let_through"](one)), rel=1e-9
    )


@pytest.mark.parametrize("kind", ["ramp", "pulse", "train", "recorded"])
@pytest.mark.parametrize("delay", [0.25, 8.0])
def test_a_source_that_starts_later_does_the_same_later(kind, delay):
    shape = drawn(kind, np.random.default_rng(9), 1.0).shape
    late = shapes.Piecewise(
        kind, np.r_[0.0, shape.start + delay], np.r_[0.0, shape.level], np.r_[0.0, shape.end]
    )
    loop = loop_of(0.1, series_resistance=0.1, load_resistance=5.0)
    first = Case(loop, shaped(shape)).waveforms(TIMES)
    second = Case(loop, shaped(late)).waveforms(TIMES + delay)
    for name in NAMES:
        values = getattr(first, name)
        # rounding of the shifted times moves the source by slope times 1e-16 of the time
        assert getattr(second, name) == pytest.approx(values, abs=1e-11 * np.max(np.abs(values)))


def test_the_same_source_put_in_two_ways():
    loop = loop_of(0.2, load_resistance=4.0)
    pairs = (
        (shapes.ramp(5.0, 3.0), shapes.recorded([0, 3.0, 4.0], [0, 5.0, 5.0])),
        (
            shapes.pulse(5.0, 3.0, 1.0, 0.5),
            shapes.recorded([7.0, 8.0, 10.25, 10.75], [0, 5.0, 5.0, 0.0]),
        ),
        (
            shapes.pulse(5.0, 2.0, 1.0, 1.0, 4.0, 2),
            shapes.recorded([0, 1, 2, 3, 4, 5, 6, 7.0], [0, 5, 5, 0, 0, 5, 5, 0.0]),
        ),
    )
    for one, other in pairs:
        first, second = (Case(loop, shaped(each)) for each in (one, other))
        for name in NAMES:
            assert getattr(first.waveforms(TIMES), name) == pytest.approx(
                getattr(second.waveforms(TIMES), name), abs=1e-13
            )
        for element in ("current", "capacitor", "inductor"):
            assert float(first.peak(element).value) == pytest.approx(
                float(second.peak(element).value), rel=3e-9
            )
    silent = Case(loop, sine(5.0, 0.2, 0.3, orders=[Order(5, 0.0)]))
    alone = Case(loop, sine(5.0, 0.2, 0.3))
    assert silent.waveforms(TIMES).current == pytest.approx(alone.waveforms(TIMES).current)
    assert float(silent.peak("current").value) == pytest.approx(
        float(alone.peak("current").value), rel=3e-9
    )
    step = Case(loop, shaped(shapes.Piecewise("recorded", [0.0], [5.0], [5.0])))
    dc = Case(loop, constant(5.0))
    assert step.waveforms(TIMES).current == pytest.approx(dc.waveforms(TIMES).current, abs=1e-14)
    assert float(step.peak("capacitor").value) == pytest.approx(float(dc.peak("capacitor").value))


def test_responses_add_up():
    """A record that is the sum of two, from the sum of the initial states."""
    rng = np.random.default_rng(2)
    times = np.cumsum(rng.uniform(0.1, 1.0, 30))
    one, other = rng.normal(size=30), rng.normal(size=30)
    loop = loop_of(0.3)
    found = [
        Case(loop, shaped(shapes.recorded(times, voltage)), *states).waveforms(TIMES)
        for voltage, states in (
            (one, (1.0, 0.0)), (other, (2.0, -1.0)), (one + other, (3.0, -1.0)),
        )
    ]  # fmt: skip
    for name in NAMES:
        first, second, both = (getattr(each, name) for each in found)
        assert first + second == pytest.approx(both, abs=1e-13)


def test_fine_record_of_a_sine_is_the_sine():
    """Straight lines between samples of a sine are off by (w h)^2/8 of its amplitude."""
    step, omega = 1e-3, 1.7
    times = np.arange(0, 30.0, step)
    record = shaped(shapes.recorded(times, 10 * np.sin(omega * times + 0.4)))
    loop = loop_of(0.5)
    wave = sine(10.0, omega / (2 * np.pi), 0.4)
    at = np.linspace(0, 29.9, 200)
    first, second = (Case(loop, each).waveforms(at) for each in (record, wave))
    # the step response's largest swing passes such an error on at most twice
    allowed = 2 * 10 * (omega * step) ** 2 / 8
    assert np.max(np.abs(first.capacitor_voltage - second.capacitor_voltage)) <= allowed
    assert np.max(np.abs(first.current - second.current)) <= allowed
    assert np.max(np.abs(first.current - second.current)) > 0


#: What jumps or ends where ringing does, by its own definition.
RINGING = {
    "ringing_frequency", "logarithmic_decrement", "current_frequency_product", "beat_frequency",
    "time_constant", "overshoot", "peak_capacitor_voltage_time",
}  # fmt: skip


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("name", [name for name in REGISTER if name not in RINGING])
def test_every_result_is_continuous_through_critical_damping(kind, name):
    source = drawn(kind, np.random.default_rng(6), 1.0)
    entry = REGISTER[name]
    at = {"current": 0.5, "voltage": 1.0}.get(entry.at or "")
    zetas = np.array([1 - 1e-9, 1 - 1e-15, 1.0, 1 + 1e-15, 1 + 1e-9])
    values = entry(Case(loop_of(zetas), source), at)
    finite = np.isfinite(values)
    assert np.all(finite == finite[0])
    if finite[0] and np.abs(values[2]) > 1e-12:
        # the rates differ by the root of twice 1e-9
        assert np.ptp(values) <= 1e-7 * np.abs(values[2])
