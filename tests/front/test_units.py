"""Text to SI and back: what is read, what is refused and with which sentence, what is printed."""

import math
import subprocess
import sys
import unicodedata
from decimal import Decimal
from fractions import Fraction

import mpmath
import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rlc.errors import InputError
from rlc.front.marking import PREFIXES, TOLERANCE_LETTERS, VALUE_LETTERS
from rlc.front.units import KINDS, Tolerance, read, read_tolerance, show, to_si

# IEC 60063, E24.
E24 = [
    *("10", "11", "12", "13", "15", "16", "18", "20", "22", "24", "27", "30"),
    *("33", "36", "39", "43", "47", "51", "56", "62", "68", "75", "82", "91"),
]
PREFIXED = [kind for kind, entry in KINDS.items() if entry.prefixes]
SYMBOLS = [(kind, symbol) for kind, entry in KINDS.items() for symbol in entry.units]


@pytest.fixture(scope="module")
def ureg():
    """A registry that is not the package's own."""
    return pint.UnitRegistry()


def refusal(text, kind, name="part.value"):
    with pytest.raises(InputError) as caught:
        read(text, kind, name)
    return caught.value


# ---------------------------------------------------------------- the table of kinds


# What pint does not know by our symbol, in words that it knows. The ohm sign U+2126 is the same
# character as a capital omega in every Unicode normal form.
IN_PINT = {
    "\u2126": unicodedata.normalize("NFC", "\u2126"),
    "Ohm": "ohm",
    "A2s": "A^2 s",
    "var": "volt_ampere",
    "": "dimensionless",
}


@pytest.mark.parametrize(("kind", "symbol"), SYMBOLS)
def test_symbols_have_the_value_that_pint_gives_them(kind, symbol, ureg):
    entry = KINDS[kind]
    unit = ureg.parse_units(IN_PINT.get(symbol, symbol))
    # A step of one unit: on degC that leaves out the offset, which has its own test.
    step = ureg.Quantity(1, unit).to(entry.pint) - ureg.Quantity(0, unit).to(entry.pint)
    scale = float(entry.units[symbol])
    # pint rounds twice or three times; near 273 K the difference has the last bit of 274.15.
    allowed = 3 * math.ulp(scale) + (math.ulp(274.15) if kind == "temperature" else 0.0)
    assert abs(step.magnitude - scale) <= allowed


@pytest.mark.parametrize("prefix", PREFIXES)
def test_prefixes_have_the_value_that_pint_gives_them(prefix, ureg):
    scale = ureg.Quantity(Fraction(1), prefix + "V").to("V").magnitude
    assert float(scale) == pytest.approx(float(Decimal(1).scaleb(PREFIXES[prefix])), rel=4e-16)


def test_degree_is_pi_over_180():
    with mpmath.workdps(60):
        degree = mpmath.mpf(str(KINDS["angle"].units["deg"]))
        assert abs(degree * 180 / mpmath.pi - 1) < mpmath.mpf("1e-58")


@pytest.mark.parametrize("kind", KINDS)
def test_examples_can_be_pasted(kind):
    entry = KINDS[kind]
    reading = read(entry.example, kind, "x")
    assert reading.note == ""
    assert show(reading.value, kind) == entry.example
    assert entry.example.isascii()
    assert entry.symbol in entry.units


# ---------------------------------------------------------------- reading


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


# ---------------------------------------------------------------- refusing


@pytest.mark.parametrize(
    ("text", "kind", "rule"),
    [
        (None, "voltage", "must be a text"),
        (True, "voltage", "must be a text"),
        ([1], "voltage", "must be a text"),
        (5.0, "voltage", "must be a text"),
        (b"5 V", "voltage", "must be a text"),
        ("", "voltage", "is empty"),
        (" \t", "voltage", "is empty"),
        ("5", "voltage", "has no unit"),
        ("1e3", "resistance", "has no unit"),
        ("V", "voltage", "does not begin with a number"),
        ("\u0663 V", "voltage", "does not begin with a number"),
        ("R47", "voltage", "does not begin with a number"),
        # commas and separators
        ("4,7 uF", "capacitance", "uses a comma"),
        (",5 uF", "capacitance", "uses a comma"),
        ("1,000 uF", "capacitance", "thousands with no separator"),
        ("1 000 uF", "capacitance", "separates thousands"),
        ("1\u202f000 uF", "capacitance", "separates thousands"),
        ("-1 000 000 uF", "capacitance", "separates thousands"),
        ("1'000 uF", "capacitance", "separates thousands"),
        ("1_000 uF", "capacitance", "separates thousands"),
        # not one number
        ("2*3 uF", "capacitance", "is an expression"),
        ("9**9**9 uF", "capacitance", "is an expression"),
        ("(5) V", "voltage", "is an expression"),
        ("1/2 V", "voltage", "is an expression"),
        ("2+3 V", "voltage", "is an expression"),
        ("10^3 ohm", "resistance", "is an expression"),
        ("10 mH 5%", "inductance", "holds several numbers"),
        ("10 mH ± 5 %", "inductance", "holds several numbers"),
        ("10mH±5%", "inductance", "holds several numbers"),
        ("10 mH, 5 %", "inductance", "holds several numbers"),
        ("5 V - 3 V", "voltage", "holds several numbers"),
        ("1.2.3 V", "voltage", "holds several numbers"),
        ("nan ohm", "resistance", "must be a finite number"),
        ("NaN", "ratio", "must be a finite number"),
        ("-inf V", "voltage", "must be a finite number"),
        ("infinity V", "voltage", "must be a finite number"),
        ("3+4j ohm", "resistance", "is a complex number"),
        ("5j", "energy", "is a complex number"),
        ("5 i", "number", "is a complex number"),
        ("1e309 V", "voltage", "is too large"),
        ("1e300 GV", "voltage", "is too large"),
        ("1e99999999999999 min", "time", "is too large"),
        ("1e-400 V", "voltage", "is too small"),
        ("-1e-320 pV", "voltage", "is too small"),
        ("-300 degC", "temperature", "is below absolute zero"),
        ("-1 K", "temperature", "is below absolute zero"),
        # prefixes
        ("1k", "voltage", "has a prefix but no unit"),
        ("4.7K", "resistance", "has a prefix but no unit"),
        ("10 m", "inductance", "has a prefix but no unit"),
        ("4.7 Kohm", "resistance", "kilo is a small k"),
        ("5 KV", "voltage", "kilo is a small k"),
        ("5 KHZ", "frequency", "kilo is a small k"),
        ("4.7 kkohm", "resistance", "has two prefixes"),
        ("4.7 uuF", "capacitance", "has two prefixes"),
        ("4.7 k ohm", "resistance", "has a space after the prefix"),
        # letters and digits
        ("4m7", "resistance", "one letter of R k K M G T"),
        ("4R7", "inductance", "is no letter-and-digit value"),
        ("4k7 ohm", "resistance", "is no letter-and-digit value"),
        ("4K7J", "resistance", "is no letter-and-digit value"),
        ("-4k7", "resistance", "is no letter-and-digit value"),
        # wrong units
        ("5 xyz", "voltage", "has the unknown unit 'xyz'"),
        ("50 hz", "frequency", "has the unknown unit 'hz'"),
        ("5 kg", "voltage", "is in kilogram and voltage is expected"),
        ("10 mh", "inductance", "is in millihour, a unit of time, and inductance is expected"),
        ("5 V", "current", "is in V, a unit of voltage, and current is expected"),
        ("5 mV", "time", "is in mV, a unit of voltage, and time is expected"),
        ("5 VA", "power", "is in VA, a unit of apparent power, and power is expected"),
        ("5 kW", "reactive_power", "a unit of power, and reactive power is expected"),
        ("5 hp", "apparent_power", "a unit of power, and apparent power is expected"),
        ("10 degC", "temperature_difference", "a unit of temperature, and temperature diff"),
        ("10 degF", "temperature_difference", "a unit of temperature, and temperature diff"),
        ("3 %", "angle", "is in %, a unit of ratio"),
        ("3 deg", "ratio", "is in deg, a unit of angle"),
        ("5 %", "number", "is in %, a unit of ratio"),
        ("5 rad V", "voltage", "is in radian * volt and voltage is expected"),
        ("5 dBm", "power", "is in decibelmilliwatt and power is expected"),
        ("3 dB", "ratio", "is no unit of ratio"),
        ("3 alpha", "ratio", "is no unit of ratio"),
        ("50 rad/s", "frequency", "divide rad/s by 2 pi"),
        ("3000 rpm", "frequency", "or rpm by 60"),
        ("50 turn/s", "frequency", "is an angular rate"),
        ("50 s^-1", "frequency", "frequency is given in hertz"),
        ("50 Bq", "frequency", "frequency is expected"),
        # texts that a unit library should not get to see
        ("5 m**9**9", "voltage", "has a unit that cannot be read"),
        ("5 m**9", "voltage", "has a unit that cannot be read"),
        ("5 V.__class__", "voltage", "has a unit that cannot be read"),
        ("5 " + "V*" * 20 + "V", "voltage", "has a unit that cannot be read"),
        ("1 ohm\x1b[31m", "resistance", "has a unit that cannot be read"),
    ],
)
def test_refusals_have_their_own_sentence(text, kind, rule):
    error = refusal(text, kind)
    assert rule in error.rule
    assert (error.name, error.value) == ("part.value", text)
    assert '"' in error.hint


@pytest.mark.parametrize(
    ("text", "kind", "hint"),
    [
        ("5", "capacitance", 'Write for example "4.7 uF"'),
        ("4,7 uF", "capacitance", 'Write for example "4.7 uF"'),
        ("4.7 Kohm", "resistance", 'Write "4.7 kohm"'),
        ("4.7K", "resistance", 'Write "4.7 kohm"'),
        ("10 m", "inductance", 'Write "10 mH"'),
        ("1 k ohm", "resistance", 'Write "1 kohm"'),
        ("10 mh", "inductance", 'Capital letters matter: millihenry is written mH, as in "10 mH"'),
        ("50 HZ", "frequency", 'Capital letters matter: hertz is written Hz, as in "50 Hz"'),
        ("5 ms", "conductance", 'millisiemens is written mS, as in "5 mS"'),
        ("2 VAR", "reactive_power", 'reactive power is written var, as in "2 var"'),
    ],
)
def test_hints_are_lines_to_paste(text, kind, hint):
    error = refusal(text, kind)
    assert error.hint.endswith(hint)
    assert read(error.hint.split('"')[1], kind, "x").note == ""


def test_long_texts_are_refused_and_not_repeated():
    error = refusal("5" * 10**6 + " V", "voltage")
    assert error.rule == "is longer than 60 characters"
    assert len(str(error)) < 200
    assert read("5" + " " * 57 + "mV", "voltage", "v").value == 5e-3  # 60 characters


@settings(deadline=None)  # the first example that needs pint builds the registry
@given(
    unit=st.text(alphabet="abcdefghkmnopsuAFGHKMRTVW\u00b5Ω°%²^*/ -()0123", max_size=42),
    kind=st.sampled_from(sorted(KINDS)),
)
def test_nothing_but_input_errors_comes_out(unit, kind):
    try:
        value = read(f"5 {unit}", kind, "x").value
    except InputError:
        return
    assert math.isfinite(value)


# ---------------------------------------------------------------- numbers and quantities


@pytest.mark.parametrize("value", [5, 5.0, np.float32(5), np.int64(5), np.array(5), Decimal(5)])
def test_numbers_are_taken_as_si(value):
    found = to_si(value, "voltage", "v")
    assert type(found) is float
    assert found == 5.0


def test_text_is_read():
    assert to_si("4.7 uF", "capacitance", "c") == 4.7e-6


def test_arrays_keep_their_shape_and_are_copied():
    given_array = np.array([[1, 2], [3, 4]])
    found = to_si(given_array, "voltage", "v")
    assert found.dtype == np.float64
    np.testing.assert_array_equal(found, given_array)
    floats = np.array([1.0, 2.0])
    to_si(floats, "voltage", "v")[0] = 9.0
    assert floats[0] == 1.0


@pytest.mark.parametrize(
    ("value", "rule"),
    [
        (None, "must be a number in SI units"),
        (True, "must be a number in SI units"),
        (np.True_, "must be a number in SI units"),
        ({1.0}, "must be a number in SI units"),
        (["5 V"], "must hold real numbers"),
        (1 + 2j, "must be a number in SI units"),
        (np.complex128(1), "must be a number in SI units"),
        (np.array([1j]), "must hold real numbers, not complex128"),
        (np.array([True]), "must hold real numbers, not bool"),
        (np.array(["5 V"]), "must hold real numbers"),
        (math.nan, "must be finite"),
        (-math.inf, "must be finite"),
        (np.array([1.0, math.nan]), "must be finite"),
        (10**400, "is too large"),
    ],
)
def test_other_values_are_refused(value, rule):
    with pytest.raises(InputError, match=rule) as caught:
        to_si(value, "voltage", "source.rms")
    assert caught.value.name == "source.rms"


@pytest.mark.parametrize("style", ["", "~P", ".3f~C"])
@pytest.mark.parametrize(
    ("magnitude", "unit", "kind", "value"),
    [
        (2.0, "kiloohm", "resistance", 2000.0),
        (2, "kiloohm", "resistance", 2000.0),
        (50.0, "Hz", "frequency", 50.0),
        (25.0, "degC", "temperature", 298.15),
        (5.0, "delta_degC", "temperature_difference", 5.0),
        (180.0, "deg", "angle", math.pi),
        (0.5, "hour", "time", 1800.0),
        (5.0, "VA", "apparent_power", 5.0),
        (5.0, "VA", "reactive_power", 5.0),
        (5.0, "W", "power", 5.0),
        (0.5, "dimensionless", "number", 0.5),
    ],
)
def test_quantities_from_any_registry(magnitude, unit, kind, value, style):
    registry = pint.UnitRegistry()
    registry.formatter.default_format = style
    assert to_si(registry.Quantity(magnitude, unit), kind, "x") == value


def test_quantities_from_a_decimal_registry():
    registry = pint.UnitRegistry(non_int_type=Decimal)
    assert to_si(registry.Quantity(Decimal("4.7"), "uF"), "capacitance", "c") == 4.7e-6


def test_arrays_of_quantities(ureg):
    found = to_si(ureg.Quantity(np.array([1.0, 2.0]), "kV"), "voltage", "v")
    np.testing.assert_array_equal(found, [1000.0, 2000.0])


@pytest.mark.parametrize(
    ("magnitude", "unit", "kind", "rule"),
    [
        (50.0, "rad/s", "frequency", "divide rad/s by 2 pi"),
        (50.0, "rpm", "frequency", "is an angular rate"),
        (50.0, "1/s", "frequency", "frequency is given in hertz"),
        (50.0, "Bq", "frequency", "is in becquerel and frequency is expected"),
        (5.0, "V", "current", "is in volt, a unit of voltage, and current is expected"),
        (5.0, "VA", "power", "power is given in watt"),
        (5.0, "W", "apparent_power", "a unit of power, and apparent power is expected"),
        (5.0, "degC", "temperature_difference", "a unit of temperature"),
        (5.0, "delta_degC", "temperature", "temperature is given in kelvin"),
        (5.0, "dB", "ratio", "ratio is given in dimensionless"),
        (5.0, "rad", "ratio", "a unit of angle, and ratio is expected"),
        (math.nan, "V", "voltage", "must be finite"),
        (5j, "V", "voltage", "must be a number in SI units"),
    ],
)
def test_quantities_of_the_wrong_kind(magnitude, unit, kind, rule, ureg):
    with pytest.raises(InputError, match=rule):
        to_si(ureg.Quantity(magnitude, ureg.parse_units(unit)), kind, "x")


def test_pint_is_loaded_only_for_units_that_are_not_ours():
    program = (
        "import sys; from rlc.front.units import read, show, to_si\n"
        "read('4.7 uF', 'capacitance', 'c'); to_si(5.0, 'voltage', 'v'); show(1.0, 'time')\n"
        "assert 'pint' not in sys.modules\n"
        "read('3 min', 'time', 't')\n"
        "assert 'pint' in sys.modules"
    )
    subprocess.run([sys.executable, "-c", program], check=True)


# ---------------------------------------------------------------- printing


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


# ---------------------------------------------------------------- tolerances


@pytest.mark.parametrize(
    ("text", "kind", "low", "high", "relative"),
    [
        ("5 %", "resistance", -0.05, 0.05, True),
        ("5%", "voltage", -0.05, 0.05, True),
        ("±5 %", "resistance", -0.05, 0.05, True),
        ("+/-5 %", "resistance", -0.05, 0.05, True),
        ("+/- 5 %", "resistance", -0.05, 0.05, True),
        ("100 ppm", "frequency", -1e-4, 1e-4, True),
        ("0 %", "resistance", 0.0, 0.0, True),
        ("0.5 pF", "capacitance", -5e-13, 5e-13, False),
        ("± 0.5 ohm", "resistance", -0.5, 0.5, False),
        ("0R5", "resistance", -0.5, 0.5, False),
        ("2 K", "temperature", -2.0, 2.0, False),
        ("+80 % / -20 %", "capacitance", -0.2, 0.8, True),
        ("-20 % / +80 %", "capacitance", -0.2, 0.8, True),
        ("\u221220%/+80%", "capacitance", -0.2, 0.8, True),
        ("+80/-20 %", "capacitance", -0.2, 0.8, True),
        ("-15 % / +0 %", "capacitance", -0.15, 0.0, True),
        ("-1 pF / +2 pF", "capacitance", -1e-12, 2e-12, False),
        ("-5 V/s / +3 V/s", "voltage_rate", -5.0, 3.0, False),
        ("K", "resistance", -0.1, 0.1, True),
        ("Z", "capacitance", -0.2, 0.8, True),
    ],
)
def test_tolerances(text, kind, low, high, relative):
    assert read_tolerance(text, kind, "t") == Tolerance(low, high, relative, text)


@pytest.mark.parametrize(
    ("nominal", "low", "relative"),
    [(4.7e-12, -2.5e-13, False), (10e-12, -0.0025, True), (None, -0.0025, True)],
)
def test_letters_on_small_capacitors(nominal, low, relative):
    found = read_tolerance("C", "capacitance", "t", nominal)
    assert (found.low, found.relative) == (low, relative)


@pytest.mark.parametrize(
    ("text", "kind", "nominal", "rule"),
    [
        (None, "resistance", None, "must be a text"),
        (5, "resistance", None, "must be a text"),
        ("", "resistance", None, "is empty"),
        ("5", "resistance", None, "has no unit"),
        ("±5", "resistance", None, "has no unit"),
        ("-5 %", "resistance", None, "one side only"),
        ("+5 %", "resistance", None, "one side only"),
        ("±-5 %", "resistance", None, "has a sign too many"),
        ("+-5 % / -3 %", "resistance", None, "has a sign too many"),
        ("+5 % / +3 %", "resistance", None, "one side with + and one with -"),
        ("-5 % / -3 %", "resistance", None, "one side with + and one with -"),
        ("+5 % / -3 ohm", "resistance", None, "mixes a share"),
        ("100 %", "resistance", None, "reach zero"),
        ("-100 % / +0 %", "resistance", None, "reach zero"),
        ("-120 % / +5 %", "voltage", None, "reach zero"),
        ("1 pF", "capacitance", 1e-12, "reach zero"),
        ("G", "capacitance", 1e-12, "reach zero"),
        ("X", "resistance", None, " ".join(TOLERANCE_LETTERS)),
        ("j", "resistance", None, "is no tolerance letter"),
        ("P", "capacitance", None, "has two meanings"),
        ("K", "voltage", None, "letters are for resistance, inductance, capacitance"),
        ("5,5 %", "resistance", None, "uses a comma"),
        ("5 % 3 %", "resistance", None, "holds several numbers"),
        ("5 V", "resistance", None, "a unit of voltage, and resistance is expected"),
        ("2 degC", "temperature", None, "a unit of temperature, and temperature difference"),
    ],
)
def test_tolerances_that_are_refused(text, kind, nominal, rule):
    with pytest.raises(InputError) as caught:
        read_tolerance(text, kind, "part.tolerance", nominal)
    error = caught.value
    assert rule in error.rule
    assert (error.name, error.value) == ("part.tolerance", text)
    assert read_tolerance(error.hint.split('"')[1], "resistance", "t").relative


def test_a_bare_tolerance_asks_for_per_cent():
    with pytest.raises(InputError) as caught:
        read_tolerance("5", "resistance", "t")
    assert caught.value.hint == 'Did you mean "5 %"?'


def test_long_tolerances_are_refused_and_not_repeated():
    with pytest.raises(InputError, match="longer than 60") as caught:
        read_tolerance("5" * 10**6 + " %", "resistance", "t")
    assert len(str(caught.value)) < 200


def test_an_absolute_tolerance_on_a_voltage_may_pass_zero():
    assert read_tolerance("2 V", "voltage", "t", 1.0).limits(1.0) == (-1.0, 3.0)
