"""The equation's constants and building blocks, and the pairs of doubles that they rest on."""

from fractions import Fraction

import numpy as np
import pytest
from exact import Exact
from hypothesis import given
from hypothesis import strategies as st
from mpmath import mp, mpf

from rlc.errors import InputError
from rlc.solver import doubledouble as dd
from rlc.solver.case import Case
from rlc.solver.equation import equation_of, kernels, phase
from rlc.solver.loop import make_loop
from rlc.solver.source import Source, constant, sine

ULP = np.finfo(float).eps
numbers = st.floats(1e-12, 1e12) | st.floats(-1e12, -1e-12)


def fraction(pair):
    return Fraction(float(pair[0])) + Fraction(float(pair[1]))


def as_double(value):
    return np.asarray(value, dtype=float)


@given(numbers, numbers)
def test_sum_and_product_of_two_doubles_are_exact(a, b):
    assert fraction(dd.two_sum(as_double(a), as_double(b))) == Fraction(a) + Fraction(b)
    assert fraction(dd.two_product(as_double(a), as_double(b))) == Fraction(a) * Fraction(b)


@given(st.floats(1e-12, 1e12), st.floats(1e-12, 1e12), st.floats(1e-12, 1e12))
def test_pairs_keep_thirty_digits(a, b, c):
    # Every operation on pairs keeps at least 100 of their 106 bits.
    allowed = Fraction(1, 2**100)
    first, second = (
        dd.divide(dd.exact(as_double(a)), dd.exact(as_double(c))),
        dd.exact(as_double(b)),
    )
    quotient = Fraction(a) / Fraction(c)
    assert abs(fraction(first) - quotient) <= allowed * quotient
    x = fraction(first)
    assert abs(fraction(dd.multiply(first, second)) - x * Fraction(b)) <= allowed * x * Fraction(b)
    assert abs(fraction(dd.add(first, second)) - (x + Fraction(b))) <= allowed * (x + Fraction(b))
    # A difference may cancel: its error is a share of the terms.
    difference = fraction(dd.subtract(first, second)) - (x - Fraction(b))
    assert abs(difference) <= allowed * (x + Fraction(b))
    root = fraction(dd.square_root(first))
    assert abs(root**2 - x) <= 2 * allowed * x


def test_square_root_of_nothing():
    high, low = dd.square_root(dd.exact(np.zeros(2)))
    assert np.all(high == 0)
    assert np.all(low == 0)


@given(st.floats(1e-3, 1e9), st.floats(1e-9, 1e3))
def test_phase_keeps_its_digits_however_many_turns(frequency, time):
    omega = as_double(frequency), as_double(frequency * 2.0**-54 / 3)
    cosine, sine_ = phase(omega, as_double(time))
    with mp.workdps(50):
        turn = (mpf(frequency) + mpf(float(omega[1]))) * mpf(time)
        # Two roundings of a number up to one, and the second-order rest of the correction,
        # half the square of the product's rounding error.
        rest = (float(turn) * ULP) ** 2
        assert abs(mpf(float(cosine)) - mp.cos(turn)) <= 2 * ULP + rest
        assert abs(mpf(float(sine_)) - mp.sin(turn)) <= 2 * ULP + rest


PARTS = [
    {"resistance": 0.0, "inductance": 1e-3, "capacitance": 1e-6},
    {"resistance": 12.0, "inductance": 33e-3, "capacitance": 1e-6, "winding_resistance": 2.2},
    {"resistance": 2.0 * (1 + 1e-13), "inductance": 1.0, "capacitance": 1.0},
    {"resistance": 2.0 * (1 - 3e-16), "inductance": 1.0, "capacitance": 1.0},
    {"resistance": 5e4, "inductance": 1e-6, "capacitance": 1e-6, "source_inductance": 3e-7},
    {"resistance": 1.0, "inductance": 1e-3, "capacitance": 1e-6, "load_resistance": 7.0},
    {
        "resistance": 0.3,
        "inductance": 1e-5,
        "capacitance": 1e-4,
        "series_resistance": 0.2,
        "load_resistance": 2.0,
        "source_resistance": 0.07,
    },
]


@pytest.mark.parametrize("parts", PARTS)
def test_constants_of_the_equation(parts):
    loop = make_loop(**parts)
    eq = equation_of(loop)
    exact = Exact(Case(loop, constant(1.0)))
    with mp.workdps(50):
        a = exact.gamma / 2
        delta = a * a - exact.w0_squared
        root = mp.sqrt(abs(delta))
        expected = {
            "damping": a,
            "natural": exact.w0,
            "fast": a + (root if delta >= 0 else 0),
            "slow": a - root,
        }
        assert bool(eq.underdamped) == (delta < 0)
        names = ["damping", "natural"] if delta < 0 else list(expected)
        for name in names:
            found = mpf(float(getattr(eq, name)))
            assert abs(found - expected[name]) <= 4 * ULP * expected[name], name
        # The load's conductance is a rounded double; its half unit is amplified where the two
        # terms of the discriminant cancel. Without a load they are exact.
        loss = float((a * a + exact.w0_squared) / abs(delta)) if exact.G else 0.0
        found = mpf(float(eq.root[0])) + mpf(float(eq.root[1]))
        assert abs(found - root) <= ULP * (1e-10 + loss) * root


@pytest.mark.parametrize("parts", PARTS)
def test_free_motion_and_its_building_blocks(parts):
    loop = make_loop(**parts)
    eq = equation_of(loop)
    exact = Exact(Case(loop, constant(1.0)))
    for time in np.geomspace(1e-4, 30, 9) / float(eq.natural):
        kernel = kernels(eq, as_double(time))
        with mp.workdps(50):
            t = mpf(float(time))
            first = exact.propagate(t, (mpf(1), mpf(0)))
            second = exact.propagate(t, (mpf(0), mpf(1)))
            capacitor, current = mp.re(first[0]), mp.re(second[1])
            s = mp.re(second[0]) / exact.A[0, 1]
            size = max(mpf(1), abs(s) * exact.gamma)
            # Entries of the propagator fall from one: an absolute error of some roundings.
            assert abs(mpf(float(kernel.capacitor)) - capacitor) <= 20 * ULP * size
            assert abs(mpf(float(kernel.current)) - current) <= 20 * ULP * size
            largest = min(t, 1 / exact.w0)
            assert abs(mpf(float(kernel.s)) - s) <= 20 * ULP * largest


@pytest.mark.parametrize(
    ("change", "name"),
    [
        ({"resistance": -1.0}, "resistance"),
        ({"resistance": np.nan}, "resistance"),
        ({"inductance": 0.0}, "inductance"),
        ({"inductance": np.inf}, "inductance"),
        ({"capacitance": [1e-6, -1e-6]}, "capacitance"),
        ({"winding_resistance": -0.1}, "winding_resistance"),
        ({"series_resistance": np.inf}, "series_resistance"),
        ({"load_resistance": 0.0}, "load_resistance"),
        ({"load_resistance": np.nan}, "load_resistance"),
        ({"source_inductance": -1e-9}, "source_inductance"),
    ],
)
def test_parts_out_of_range_are_refused_by_name(change, name):
    parts = {"resistance": 1.0, "inductance": 1e-3, "capacitance": 1e-6} | change
    with pytest.raises(InputError) as caught:
        make_loop(**parts)
    assert caught.value.name == name


def test_sources_out_of_range_are_refused_by_name():
    with pytest.raises(InputError, match="amplitude"):
        constant(np.inf)
    with pytest.raises(InputError, match="frequency"):
        Source(1.0, -50.0)
    with pytest.raises(InputError, match="frequency"):
        sine(1.0, 0.0)
    with pytest.raises(InputError, match="closing_angle"):
        sine(1.0, 50.0, np.nan)


def test_states_that_are_no_numbers_are_refused_by_name():
    loop = make_loop(resistance=1.0, inductance=1e-3, capacitance=1e-6)
    with pytest.raises(InputError, match="capacitor_voltage"):
        Case(loop, constant(1.0), np.nan)
    with pytest.raises(InputError, match="initial_current"):
        Case(loop, constant(1.0), 0.0, np.inf)


def test_waveforms_at_the_worst_angle_need_one_angle():
    loop = make_loop(resistance=1.0, inductance=1e-3, capacitance=1e-6)
    case = Case(loop, sine(1.0, 50.0, None))
    with pytest.raises(InputError, match="closing_angle"):
        case.waveforms([0.0])
    assert case.waveforms([0.0], closing_angle=np.pi / 2).source[0] == pytest.approx(1.0)
