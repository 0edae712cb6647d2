"""Text that is not read, and the sentence that refuses it."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rlc.errors import InputError
from rlc.front.units import KINDS, read


def refusal(text, kind, name="part.value"):
    with pytest.raises(InputError) as caught:
        read(text, kind, name)
    return caught.value


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
