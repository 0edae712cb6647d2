"""Text to SI: what is read, and to which value."""

import math
from fractions import Fraction

import mpmath
import pytest
from hypothesis import given
from hypothesis import strategies as st

from rlc.front.marking import PREFIXES, VALUE_LETTERS
from rlc.front.units import read

# IEC 60063, E24.
E24 = [
    *("10", "11", "12", "13", "15", "16", "18", "20", "22", "24", "27", "30"),
    *("33", "36", "39", "43", "47", "51", "56", "62", "68", "75", "82", "91"),
]


@pytest.mark.parametrize(("prefix", "power"), [("", 0), *PREFIXES.items()])
def test_decimals_are_correctly_rounded(prefix, power):
    for digits in E24:
        for text, exponent in ((f"{digits[0]}.{digits[1]}", 0), (digits, 1), (digits + "0", 2)):
            expected = float(f"{digits}e{power + exponent - 1}")
            assert read(f"{text} {prefix}F", "capacitance", "c").value == expected
            assert read(f"{text}{prefix}ohm", "resistance", "r").value == expected


@pytest.mark.parametrize("kind", VALUE_LETTERS)
def test_letter_values_are_correctly_rounded(kind):
    for letter, power in VALUE_LETTERS[kind].items():
        for digits in E24:
            expected = float(f"{digits}e{power - 1}")
            assert read(f"{digits[0]}{letter}{digits[1]}", kind, "x").value == expected
            assert read(f"{digits}{letter}", kind, "x").value == float(f"{digits}e{power}")


@given(
    number=st.decimals(
        allow_nan=False, allow_infinity=False, places=9, min_value=-1e9, max_value=1e9
    ),
    prefix=st.sampled_from(sorted(PREFIXES)),
)
def test_any_decimal_is_correctly_rounded(number, prefix):
    expected = float(Fraction(number) * Fraction(10) ** PREFIXES[prefix])
    assert read(f"{number:f} {prefix}V", "voltage", "v").value == expected


@given(st.decimals(allow_nan=False, allow_infinity=False, places=6, min_value=-720, max_value=720))
def test_degrees_are_correctly_rounded(number):
    with mpmath.workdps(60):
        expected = float(mpmath.mpf(str(number)) * mpmath.pi / 180)
    assert read(f"{number:f} deg", "angle", "a").value == expected


@pytest.mark.parametrize(
    ("text", "kind", "value"),
    [
        ("4.7 uF", "capacitance", 4.7e-6),
        ("4.7uF", "capacitance", 4.7e-6),
        ("  4.7\u00a0uF ", "capacitance", 4.7e-6),
        ("4.7e-6 F", "capacitance", 4.7e-6),
        ("+.5 V", "voltage", 0.5),
        ("5. V", "voltage", 5.0),
        ("-5 V", "voltage", -5.0),
        ("\u22125 V", "voltage", -5.0),
        ("1e\u22123 V", "voltage", 1e-3),
        ("1E3 ohm", "resistance", 1e3),
        ("0 V", "voltage", 0.0),
        ("0e99999999999 V", "voltage", 0.0),
        ("5e-324", "number", 5e-324),
        ("1k", "resistance", 1e3),
        ("100R", "resistance", 100.0),
        ("1F", "capacitance", 1.0),
        ("25 degC", "temperature", 298.15),
        ("-40°C", "temperature", 233.15),
        ("300 K", "temperature", 300.0),
        ("90°", "angle", math.pi / 2),
        ("0.02", "ratio", 0.02),
        ("2 %", "ratio", 0.02),
        ("20000 ppm", "ratio", 0.02),
        ("0.7", "number", 0.7),
        ("50 ppm/K", "temperature_coefficient", 5e-5),
        ("0.0039 1/K", "temperature_coefficient", 0.0039),
        ("0.39 %/K", "temperature_coefficient", 0.0039),
        ("5 kV/s", "voltage_rate", 5e3),
        ("3 A2s", "let_through", 3.0),
        ("3 A²s", "let_through", 3.0),
    ],
)
def test_our_own_units(text, kind, value):
    assert read(text, kind, "x") == (value, "")


@pytest.mark.parametrize(
    ("text", "kind", "value"),
    [
        ("3 min", "time", 180.0),
        ("2 hour", "time", 7200.0),
        ("0.1 kWh", "energy", 3.6e5),
        # 550 foot-pounds-force per second, exact: 550 * 0.3048 * 0.45359237 * 9.80665.
        ("1 hp", "power", 745.69987158227022),
        ("1 turn", "angle", math.tau),
        ("5 mrad", "angle", 5e-3),
        ("77 degF", "temperature", 298.15),
        ("50 ppm/°C", "temperature_coefficient", 5e-5),
        ("5 V/us", "voltage_rate", 5e6),
        ("0.3 A/ns", "current_rate", 3e8),
        # The prefix goes with the ampere: (kA)^2 s.
        ("2 kA^2 s", "let_through", 2e6),
        ("3 A^2*s", "let_through", 3.0),
        ("50 kilohertz", "frequency", 5e4),
        ("2 mho", "conductance", 2.0),
        ("5 kg*m^2/s^3/A", "voltage", 5.0),
    ],
)
def test_other_units_of_the_right_kind(text, kind, value):
    assert read(text, kind, "x") == (value, "")


@pytest.mark.parametrize(
    ("text", "kind", "value", "words"),
    [
        ("10 MH", "inductance", 1e7, "inductance of 10 MH is unusual"),
        ("-10 MH", "inductance", -1e7, "inductance of -10 MH is unusual"),
        ("1 MF", "capacitance", 1e6, "from 10 fF to 10 kF"),
        ("25 K", "temperature", 25.0, "from -100 degC to 500 degC"),
        ("1 mHz", "frequency", 1e-3, "m is milli, M is mega"),
    ],
)
def test_implausible_values_are_taken_with_a_note(text, kind, value, words):
    reading = read(text, kind, "x")
    assert reading.value == value
    assert words in reading.note
