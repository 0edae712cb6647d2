"""SI to text, and back from what is printed."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rlc.front.units import KINDS, read, show

PREFIXED = [kind for kind, entry in KINDS.items() if entry.prefixes]


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (4.7e-7, "capacitance", "470 nF"),
        (4.7 * 1e-7, "capacitance", "470 nF"),
        (999.96, "resistance", "1 kohm"),
        (999.94, "resistance", "999.9 ohm"),
        (1e-15, "capacitance", "1 fF"),
        (1e-18, "capacitance", "1e-18 F"),
        (1.5e16, "resistance", "15e15 ohm"),
        (-0.0123456, "current", "-12.35 mA"),
        (0.0, "voltage", "0 V"),
        (-0.0, "voltage", "0 V"),
        (0.0, "number", "0"),
        (0.0, "temperature_coefficient", "0 ppm/K"),
        (None, "voltage", "-"),
        (math.nan, "voltage", "-"),
        (math.inf, "voltage", "unbounded"),
        (-math.inf, "voltage", "-unbounded"),
        (math.pi / 6, "angle", "30 deg"),
        (-0.928, "angle", "-53.17 deg"),
        (0.05, "ratio", "5 %"),
        (12.5, "ratio", "1250 %"),
        (1e-8, "ratio", "1e-6 %"),
        (0.7071067811865476, "number", "0.7071"),
        (123456.0, "number", "123.5e3"),
        (298.15, "temperature", "25 degC"),
        (273.25, "temperature", "0.1 degC"),
        (math.nextafter(273.15, 300), "temperature", "0 degC"),
        (5e-5, "temperature_coefficient", "50 ppm/K"),
        (120.0, "let_through", "120 A^2 s"),
        (1.234e6, "let_through", "1.234e6 A^2 s"),
        (5e6, "voltage_rate", "5 MV/s"),
        (np.float64(0.05), "voltage", "50 mV"),
        (1e300, "temperature", "1e300 degC"),
    ],
)
def test_printing(value, kind, text):
    assert show(value, kind) == text


def test_digits_are_asked_for():
    assert show(math.pi, "voltage", digits=3) == "3.14 V"
    assert show(math.pi, "voltage", digits=7) == "3.141593 V"


# The largest values print rounded up past the largest double, and cannot be read back.
FINITE = st.floats(min_value=-1e300, max_value=1e300)


@given(value=FINITE, kind=st.sampled_from(sorted(KINDS)), digits=st.integers(3, 6))
def test_what_is_printed_reads_back_to_the_digits_printed(value, kind, digits):
    if kind == "temperature":
        # Rounding what is colder could print a temperature below absolute zero.
        value = max(abs(value), 0.1)
    text = show(value, kind, digits)
    assert text.isascii()
    back = read(text, kind, "x").value
    assert show(back, kind, digits) == text
    zero = 273.15 if kind == "temperature" else 0.0
    # Half a unit of the last digit; the last bit of the value, and of the offset on degC.
    step = abs(value - zero) * 10.0 ** (1 - digits) / 2
    assert abs(back - value) <= step * (1 + 1e-9) + 2 * math.ulp(value) + (5.1e-10 if zero else 0)


@pytest.mark.parametrize("kind", PREFIXED)
@pytest.mark.parametrize("power", range(-15, 15))
def test_every_prefix_reads_back(kind, power):
    for digits in ("1", "4.7", "9.999"):
        value = float(f"{digits}e{power}")
        text = show(value, kind)
        assert "e" not in text.split()[0]
        assert read(text, kind, "x").value == value
