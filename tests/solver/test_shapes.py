"""Courses of a source in time: definitions, limits, and what is refused."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import brentq

from rlc.errors import InputError
from rlc.solver import shapes
from rlc.solver.source import Order, Window, constant, shaped, sine


def crossing(wave, level, low, high):
    return brentq(lambda t: float(wave.at(t)) - level, low, high, xtol=1e-20, rtol=1e-14)


def defining_times(wave, top, end):
    """Front time and time to half value, read off the waveform as IEC 60060-1 says."""
    peak = float(wave.at(top))
    t30, t90 = (crossing(wave, share * peak, 0.0, top) for share in (0.3, 0.9))
    front = (t90 - t30) / 0.6
    origin = t30 - 0.3 * front
    return front, crossing(wave, 0.5 * peak, top, end) - origin


def test_lightning_impulse_voltage():
    """1.2/50 us: front and half-value times recovered from the waveform.

    IEC 60060-1, tolerances 30 % and 20 % (confirmed on a low-grade public page); the two
    exponentials' constants as computed from the definitions elsewhere: alpha 1.46585e4 1/s,
    beta 2.46925e6 1/s for the model 1.037 (1 - exp(-t/0.4074 us)) exp(-t/68.22 us), which
    itself has 1.1999 us and 50.002 us; constants of the model from memory.
    """
    wave = shapes.surge(1000.0, 1.2e-6, 50e-6)
    top = np.log(wave.fast / wave.slow) / (wave.fast - wave.slow)
    front, half = defining_times(wave, top, 1e-3)
    assert front == pytest.approx(1.2e-6, rel=1e-9)
    assert half == pytest.approx(50e-6, rel=1e-9)
    assert float(wave.at(top)) == pytest.approx(1000.0, rel=1e-12)
    # the model's own times are 1e-4 off the definition, and so are its constants but for more
    assert wave.slow == pytest.approx(1.46585e4, rel=1e-3)
    assert wave.fast == pytest.approx(2.46925e6, rel=1e-3)
    assert wave.scale == pytest.approx(1037.0, rel=1e-3)


@given(ratio=st.floats(3.6, 2e4), front=st.floats(1e-9, 1.0), peak=st.floats(-1e6, -1e-3))
def test_surge_has_its_defining_times(ratio, front, peak):
    wave = shapes.surge(peak, front, ratio * front)
    top = np.log(wave.fast / wave.slow) / (wave.fast - wave.slow)
    flipped = shapes.Surge(-wave.scale, wave.slow, wave.fast)
    found, half = defining_times(flipped, top, 3 * ratio * front)
    assert found == pytest.approx(front, rel=1e-7)
    assert half == pytest.approx(ratio * front, rel=1e-7)
    assert wave.largest == pytest.approx(-peak, rel=1e-12)


EDGES = st.just(0.0) | st.floats(1e-9, 0.9)


@given(
    width=st.floats(0.1, 10.0), rise=EDGES, fall=EDGES,
    gap=st.floats(1.1, 3.0), count=st.integers(2, 6),
)  # fmt: skip
def test_pulse_keeps_its_width_between_half_levels(width, rise, fall, gap, count):
    one = shapes.pulse(5.0, width, rise * width, fall * width)
    up, down = rise * width / 2, rise * width / 2 + width
    assert float(one.at(np.nextafter(up, 9.0) + 1e-9 * width)) >= 2.5
    assert float(one.at(down + 1e-9 * width)) <= 2.5
    assert float(one.at((up + down) / 2)) == pytest.approx(5.0, rel=1e-9)
    period = gap * (width + (rise + fall) * width)
    train = shapes.pulse(5.0, width, rise * width, fall * width, period, count)
    times = np.linspace(0, one.start[-1] * 0.999, 50)
    for k in range(count):
        assert train.at(times + k * period) == pytest.approx(one.at(times), abs=1e-8)
    assert train.final == 0.0
    assert train.largest == 5.0


def test_record_goes_through_its_points():
    time, voltage = np.array([2.0, 2.5, 4.0]), np.array([1.0, -3.0, 2.0])
    record = shapes.recorded(time, voltage)
    assert np.all(record.at(time - 2.0) == voltage)
    assert float(record.at(1.25)) == pytest.approx(-0.5)
    assert float(record.at(99.0)) == 2.0
    assert record.gone == 2.0
    assert shaped(record).amplitude == 2.0
    assert shaped(record).largest == 3.0


@pytest.mark.parametrize(
    ("make", "sentence"),
    [
        (lambda: shapes.ramp(1.0, 0.0), "rise_time = 0.0: must be more than zero; a step is dc"),
        (lambda: shapes.pulse(1.0, 0.0), "width = 0.0: must be more than zero"),
        (
            lambda: shapes.pulse(1.0, 1.0, 2.0, 1.0),
            "width = 1.0: must be at least half of rise and fall time together",
        ),
        (lambda: shapes.pulse(1.0, 1.0, -1.0), "rise_time = -1.0: must be zero or more"),
        (
            lambda: shapes.pulse(1.0, 1.0, period=1.0, count=2),
            "period = 1.0: must be more than the pulse lasts, 1 s",
        ),
        (lambda: shapes.pulse(1.0, 1.0, period=2.0), "period = 2.0: goes with a count"),
        (lambda: shapes.pulse(1.0, 1.0, count=3), "period: goes with a count"),
        (lambda: shapes.surge(1.0, 8e-6, 20e-6), "half_value_time = 2e-05: must be 3.47 to"),
        (lambda: shapes.recorded([0.0, 1.0, 1.0], [1, 2, 3]), "time = 1.0: does not rise"),
        (lambda: shapes.recorded([0.0, np.nan], [1, 2]), "time, voltage: must be finite"),
        (lambda: shapes.recorded([0.0], [1.0]), "time, voltage: must be two rows of one length"),
        (
            lambda: sine(1.0, 50.0, orders=[Order(1, 0.1)]),
            "order = 1: must be a whole number from 2 to 1000",
        ),
        (lambda: sine(1.0, 50.0, orders=[Order(3, 0.1)] * 2), "order = 3: is given twice"),
        (lambda: sine(1.0, 50.0, Window(1.0, 1.0)), "window = (1.0, 1.0): must be above zero"),
    ],
)
def test_what_is_refused(make, sentence):
    with pytest.raises(InputError) as caught:
        make()
    assert str(caught.value).startswith(sentence)


def test_rms_of_a_source_with_harmonics():
    """Root of the sum of squares, against the mean square over a period."""
    source = sine(None, 50.0, 0.0, rms=230.0, orders=[Order(3, 0.3, 1.0), Order(5, 0.2, 2.0)])
    turn = np.linspace(0, 2 * np.pi, 1000, endpoint=False)
    wave = float(source.amplitude) * source.per_fundamental(turn)
    assert float(source.rms) == pytest.approx(np.sqrt(np.mean(wave**2)), rel=1e-12)
    assert np.max(np.abs(wave)) <= float(source.largest) * (1 + 1e-3)
    assert float(constant(-3.0).largest) == 3.0
