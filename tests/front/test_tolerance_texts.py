"""Tolerances as text: what is read, what is refused and with which sentence."""

import pytest

from rlc.errors import InputError
from rlc.front.marking import TOLERANCE_LETTERS
from rlc.front.units import Tolerance, read_tolerance


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
