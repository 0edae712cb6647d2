"""Kinds of quantity: their table, and numbers and quantities taken as one of them."""

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

from rlc.errors import InputError
from rlc.front.marking import PREFIXES
from rlc.front.units import KINDS, read, show, to_si

SYMBOLS = [(kind, symbol) for kind, entry in KINDS.items() for symbol in entry.units]


@pytest.fixture(scope="module")
def ureg():
    """A registry that is not the package's own."""
    return pint.UnitRegistry()


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
