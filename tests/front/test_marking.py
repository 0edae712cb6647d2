"""Letters on parts: values, tolerances, and the limits that follow."""

from decimal import Decimal

import pytest

from rlc.front.marking import (
    CONTESTED_LETTERS,
    TOLERANCE_LETTERS,
    VALUE_LETTERS,
    Tolerance,
    decode_tolerance,
    decode_value,
)

# The pairs for resistors are those of public pages on IEC 60062 (R47 to 4M7 confirmed); those for
# capacitors are unconfirmed, from memory, and those for inductors by analogy.
VALUES = [
    ("R47", "resistance", "0.47"),
    ("4R7", "resistance", "4.7"),
    ("470R", "resistance", "470"),
    ("4K7", "resistance", "4700"),
    ("2k2", "resistance", "2200"),
    ("47K", "resistance", "47000"),
    ("47K3", "resistance", "47300"),
    ("470K", "resistance", "470000"),
    ("4M7", "resistance", "4700000"),
    ("1G0", "resistance", "1e9"),
    ("1T", "resistance", "1e12"),
    ("3p3", "capacitance", "3.3e-12"),
    ("p33", "capacitance", "0.33e-12"),
    ("4n7", "capacitance", "4.7e-9"),
    ("100n", "capacitance", "100e-9"),
    ("1u0", "capacitance", "1e-6"),
    ("2µ2", "capacitance", "2.2e-6"),
    ("2\u03bc2", "capacitance", "2.2e-6"),
    ("1m0", "capacitance", "1e-3"),
    ("1F5", "capacitance", "1.5"),
    ("22n", "inductance", "22e-9"),
    ("10u", "inductance", "10e-6"),
    ("6µ8", "inductance", "6.8e-6"),
    ("6\u03bc8", "inductance", "6.8e-6"),
    ("4m7", "inductance", "4.7e-3"),
    ("1H5", "inductance", "1.5"),
]


@pytest.mark.parametrize(("text", "kind", "value"), VALUES)
def test_letter_and_digit_values(text, kind, value):
    assert decode_value(text, kind) == Decimal(value)


def test_every_value_letter_is_exercised():
    used = {(kind, letter) for text, kind, _ in VALUES for letter in text if not letter.isdigit()}
    assert used == {(kind, letter) for kind, row in VALUE_LETTERS.items() for letter in row}


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("", "resistance"),
        ("R", "resistance"),
        ("47", "resistance"),
        ("4R7R", "resistance"),
        ("4 R7", "resistance"),
        ("-4R7", "resistance"),
        ("4.7k", "resistance"),
        ("4k7 ohm", "resistance"),
        ("4m7", "resistance"),  # neither milli nor mega without being asked
        ("4r7", "resistance"),
        ("4R7", "inductance"),  # microhenries with some makers
        ("1M0", "capacitance"),
        ("1K0", "capacitance"),
        ("٤R7", "resistance"),
        ("4R7", "voltage"),
    ],
)
def test_other_texts_are_left_alone(text, kind):
    assert decode_value(text, kind) is None


# Letters of IEC 60062 as public pages give them; TOLERANCE_LETTERS says which are confirmed.
PER_CENT = {
    "E": (-0.005, 0.005),
    "L": (-0.01, 0.01),
    "P": (-0.02, 0.02),
    "W": (-0.05, 0.05),
    "B": (-0.1, 0.1),
    "C": (-0.25, 0.25),
    "D": (-0.5, 0.5),
    "F": (-1, 1),
    "G": (-2, 2),
    "J": (-5, 5),
    "K": (-10, 10),
    "M": (-20, 20),
    "N": (-30, 30),
    "Q": (-10, 30),
    "S": (-20, 50),
    "T": (-10, 50),
    "Z": (-20, 80),
}
PICOFARADS = {"B": 0.1, "C": 0.25, "D": 0.5, "F": 1, "G": 2}


@pytest.mark.parametrize("letter", TOLERANCE_LETTERS)
def test_tolerance_letters_in_per_cent(letter):
    low, high = PER_CENT[letter]
    found = decode_tolerance(letter, "resistance")
    assert found.relative
    assert found.text == letter
    # Both sides are one correctly rounded division by a hundred.
    assert (found.low, found.high) == (low / 100, high / 100)


def test_tolerance_letters_are_all_of_the_published_ones():
    assert TOLERANCE_LETTERS.keys() == PER_CENT.keys()
    assert CONTESTED_LETTERS.keys() <= TOLERANCE_LETTERS.keys()


@pytest.mark.parametrize("letter", TOLERANCE_LETTERS)
def test_small_capacitors_have_picofarad_letters(letter):
    small = decode_tolerance(letter, "capacitance", 9.9e-12)
    if letter in PICOFARADS:
        offset = float(f"{PICOFARADS[letter]}e-12")
        assert (small.low, small.high, small.relative) == (-offset, offset, False)
    else:
        assert small.relative


@pytest.mark.parametrize("letter", PICOFARADS)
@pytest.mark.parametrize(
    ("kind", "nominal"),
    [("capacitance", 10e-12), ("capacitance", None), ("resistance", 1e-12), ("inductance", 1e-12)],
)
def test_picofarads_only_below_ten_and_only_on_capacitors(letter, kind, nominal):
    assert decode_tolerance(letter, kind, nominal).relative


@pytest.mark.parametrize("text", ["X", "j", "", "JJ"])
def test_unknown_tolerance_letters(text):
    assert decode_tolerance(text, "resistance") is None


@pytest.mark.parametrize(
    ("tolerance", "nominal", "limits"),
    [
        (Tolerance(-0.1, 0.1, True, ""), 100.0, (90.0, 110.0)),
        (Tolerance(-0.25, 0.75, True, ""), 8.0, (6.0, 14.0)),
        (Tolerance(-0.5, 2.0, False, ""), 8.0, (7.5, 10.0)),
        # A negative voltage: +75 % makes it larger in magnitude.
        (Tolerance(-0.25, 0.75, True, ""), -8.0, (-14.0, -6.0)),
        (Tolerance(-0.5, 2.0, False, ""), -8.0, (-8.5, -6.0)),
    ],
)
def test_limits(tolerance, nominal, limits):
    assert tolerance.limits(nominal) == limits
