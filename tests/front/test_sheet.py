"""The sheet: what is read, what is refused, and where the errors point."""

from __future__ import annotations

import errno
import math
import os
from pathlib import Path

import pytest
from sheets import GOOD
from sheets import write_sheet as write

from rlc.errors import SheetError
from rlc.front.document import LARGEST_SHEET
from rlc.front.load import load


def problems(folder: Path, text: str) -> list[str]:
    with pytest.raises(SheetError) as caught:
        load(write(folder, text))
    # Paths vary between machines; what follows them does not.
    return [
        line.removeprefix(f"{folder / 'sheet.toml'}:") for line in str(caught.value).splitlines()
    ]


def test_every_value_arrives_in_si_units(tmp_path: Path) -> None:
    inputs = load(write(tmp_path, GOOD)).inputs
    case = inputs.case
    loop, source = case.loop, case.source
    assert (loop.resistance, loop.inductance, loop.capacitance) == (12.0, 33e-3, 1e-6)
    assert (loop.winding_resistance, loop.series_resistance) == (2.2, 0.1)
    assert (loop.source_resistance, loop.source_inductance) == (0.5, 10e-6)
    assert loop.load_resistance == 10e3
    assert source.amplitude == pytest.approx(24 * math.sqrt(2), rel=1e-15)
    assert source.frequency == 880.0
    assert source.closing_angle == pytest.approx(math.pi / 6, rel=1e-15)
    assert (case.capacitor_voltage, case.initial_current) == (-5.0, 0.01)
    limits = {part.field: (part.low, part.high) for part in inputs.parts}
    assert limits["resistance"] == pytest.approx((11.88, 12.12), rel=1e-15)
    assert limits["inductance"] == pytest.approx((32.5e-3, 33.5e-3), rel=1e-15)
    assert limits["capacitance"] == pytest.approx((0.8e-6, 1.8e-6), rel=1e-15)
    first, second, *ratings = inputs.targets
    assert (first.quantity, first.maximum, first.goal) == ("bandwidth", 80.0, 0.99)
    assert (second.across, second.at, second.maximum) == ("resistor", 300.0, 0.03)
    assert {(each.rating, each.quantity, each.maximum) for each in ratings} == {
        ("resistor.rated_power", "resistor_power", 5.0),
        ("inductor.rated_current", "current", 0.8),
        ("inductor.saturation_current", "peak_current", 2.0),
        ("capacitor.rated_voltage", "peak_capacitor_voltage", 250.0),
        ("capacitor.rated_voltage_rms", "capacitor_voltage", 160.0),
    }


def test_worst_closing_angle_is_a_word(tmp_path: Path) -> None:
    inputs = load(write(tmp_path, GOOD.replace("30 deg", "worst"))).inputs
    assert inputs.case.source.worst_angle


def test_all_errors_come_at_once_each_with_its_line(tmp_path: Path) -> None:
    text = (
        GOOD.replace('"12 ohm"', '"12"')
        .replace('"33 mH"', '"10 mh"')
        .replace('"1u0"', '"1,0 uF"')
        .replace("winding_resistance", "winding_resistence")
        .replace('"30 deg"', '"wrst"')
        .replace('"bandwidth"', '"bandwith"')
        .replace('"resistor"', '"resister"')
    )
    assert problems(tmp_path, text) == [
        "3: resistor.value = '12': has no unit. Write for example \"4.7 kohm\"",
        "7: inductor.value = '10 mh': is in millihour, a unit of time, and inductance is expected."
        ' Capital letters matter: millihenry is written mH, as in "10 mH"',
        "9: inductor.winding_resistence = '2.2 ohm': is an unknown key."
        ' Did you mean "winding_resistance"?',
        "13: capacitor.value = '1,0 uF': uses a comma; write the decimal mark as a point, and"
        ' thousands with no separator. Write for example "4.7 uF"',
        "27: switch_on.closing_angle = 'wrst': does not begin with a number."
        ' Write for example "30 deg", "0 deg +- 15 deg", "random" or "worst"',
        "31: target[1].quantity = 'bandwith': is not in the register of quantities."
        ' Did you mean "bandwidth"?',
        '36: target[2].across = \'resister\': is none of "resistor", "inductor", "capacitor".'
        ' Did you mean "resistor"?',
    ]


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ('rms = "24 V"\n', "", "20: source: has neither rms nor amplitude. Write rms"),
        (
            'rms = "24 V"',
            'rms = "24 V"\namplitude = "34 V"',
            "23: source.amplitude = '34 V': is given beside rms",
        ),
        (
            'rms = "24 V"',
            'voltage = "24 V"',
            "22: source.voltage = '24 V': does not say whether the sine's rms or its amplitude",
        ),
        ('"880 Hz"', '"880 rad/s"', "23: source.frequency = '880 rad/s': is an angular rate"),
        ('"880 Hz"', '"0 Hz"', "23: source.frequency = '0 Hz': must be more than zero"),
        (
            '"sine"',
            '"square"',
            "21: source.kind = 'square': is no kind of source. Write kind = \"dc\"",
        ),
        (
            'kind = "sine"\n',
            "",
            '20: source.kind: is missing. Write kind = "dc", "sine", "harmonics", "ramp"',
        ),
        ('"12 ohm"', '"-1 ohm"', "3: resistor.value = '-1 ohm': must be zero or more"),
        ('"33 mH"', '"0 H"', "7: inductor.value = '0 H': must be more than zero"),
        ('"33 mH"', "33", "7: inductor.value = 33: must be a text with a number and a unit"),
        (
            'value = "33 mH"\n',
            "",
            '6: inductor.value: is missing. Write below [inductor] value = "33',
        ),
        ('"10 kohm"', '"0 ohm"', "19: load.resistance = '0 ohm': must be more than zero"),
        ('"0.5 mH"', '"5"', "8: inductor.tolerance = '5': has no unit"),
        ('"1 %"', '"100 %"', "4: resistor.tolerance = '100 %': would let the value reach zero"),
        (
            "rated_power",
            "rated_voltage",
            "5: resistor.rated_voltage = '5 W': is a key of [capacitor]",
        ),
        ('max = "80 Hz"', "", "30: target[1]: min or max: is missing"),
        ('max = "80 Hz"', 'max = "80 V"', "32: target[1].max = '80 V': is in V, a unit of voltage"),
        (
            'max = "80 Hz"',
            'min = "90 Hz"\nmax = "80 Hz"',
            "32: target[1].min = '90 Hz': is above max",
        ),
        ('yield = "99 %"', 'yield = "101 %"', "33: target[1].yield = '101 %': is more than 100 %"),
        (
            'yield = "99 %"',
            'at = "1 Hz"',
            "33: target[1].at = '1 Hz': bandwidth is not asked for at",
        ),
        (
            'yield = "99 %"',
            'across = "inductor"',
            "33: target[1].across = 'inductor': bandwidth does not name an element",
        ),
        ("[load]", "[lode]", "18: lode = {'resistance': '10 kohm'}: is an unknown key."),
        (
            'tolerance = "1 %"',
            'tolerance = "1 %"\ndistribution = "normal"',
            '2: resistor: distribution = "normal" and sigmas: go together',
        ),
        (
            'tolerance = "1 %"',
            'distribution = "triangular"',
            "4: resistor.distribution = 'triangular': needs a tolerance",
        ),
        (
            "[source]",
            '[fuse]\nmelting_let_through = "2 A"\noperations = 10\n[source]',
            "21: fuse.melting_let_through = '2 A': is in A, a unit of current",
        ),
        (
            "[source]",
            '[fuse]\nmelting_let_through = "2 A^2 s"\noperations = 200000\n[source]',
            "22: fuse.operations = 200000: must be a whole number from 1 to 100000",
        ),
        (
            "[source]",
            '[fuse]\nmelting_let_through = "2 A^2 s"\n[source]',
            "20: fuse.operations: is missing. Write below [fuse] operations = 10000",
        ),
        ('"Buoy light"', '"a\\u001b[31mb"', "1: title = 'a\\x1b[31mb': must be one line"),
        ("[switch_on]", "[switch_on", "26: is no TOML: expected ']' at the end of a table"),
    ],
)
def test_one_slip_one_sentence(tmp_path: Path, old: str, new: str, said: str) -> None:
    assert GOOD.count(old) >= 1
    found = problems(tmp_path, GOOD.replace(old, new, 1))
    assert len(found) == 1
    assert found[0].startswith(said)


def test_dc_source_has_no_angle_and_no_level_at_a_frequency(tmp_path: Path) -> None:
    text = GOOD.replace('kind = "sine"\nrms', 'kind = "dc"\nvoltage').replace(
        'frequency = "880 Hz"\n', ""
    )
    text = text.replace('"bandwidth"\nmax = "80 Hz"', '"current"\nat = "50 Hz"\nmax = "1 A"')
    assert problems(tmp_path, text) == [
        "26: switch_on.closing_angle = '30 deg': belongs to a sine source, alone or with"
        " harmonics, and this one is dc",
        "31: target[1].at = '50 Hz': current of a dc source is not asked for at a frequency",
    ]


def test_missing_parts_are_all_named(tmp_path: Path) -> None:
    assert problems(tmp_path, "") == [
        f" {line}"
        for line in (
            'resistor.value: is missing. Write below [resistor] value = "12 ohm"',
            'inductor.value: is missing. Write below [inductor] value = "33 mH"',
            'capacitor.value: is missing. Write below [capacitor] value = "1 uF"',
            'source: is missing. Write [source] and below it kind = "sine", rms = "24 V",'
            ' frequency = "50 Hz"',
        )
    ]


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"\x89PNG\r\n\x1a\n\xff\xfe", "is no text in UTF-8: byte 1 is out of place"),
        (b'title = "a\0b"', "is no text: it holds zero bytes"),
        (b"# " + b"x" * 1_000_000, f"has 1000002 bytes, and a sheet has at most {LARGEST_SHEET}"),
        (b"a = " + b"[" * 5000 + b"]" * 5000, "is nested too deeply"),
    ],
    ids=["binary", "zero bytes", "1 MB", "nested"],
)
def test_files_that_are_no_sheets(tmp_path: Path, content: bytes, said: str) -> None:
    path = tmp_path / "sheet.toml"
    path.write_bytes(content)
    with pytest.raises(SheetError) as caught:
        load(path)
    assert said in str(caught.value)
    assert len(str(caught.value).splitlines()) == 1


def test_a_directory_a_missing_file_and_one_without_permission(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with pytest.raises(SheetError, match="is a directory"):
        load(tmp_path)
    with pytest.raises(SheetError, match=r"does not exist\. Write one with"):
        load(tmp_path / "none.toml")
    locked = write(tmp_path, GOOD)

    def refuse(path: Path) -> bytes:
        # As the system does it; whoever runs the tests may be allowed to read everything.
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(path))

    monkeypatch.setattr(Path, "read_bytes", refuse)
    with pytest.raises(SheetError, match="cannot be read: Permission denied"):
        load(locked)


def test_a_byte_order_mark_is_no_error(tmp_path: Path) -> None:
    path = tmp_path / "sheet.toml"
    path.write_text(GOOD, encoding="utf-8-sig")
    assert load(path).inputs.title == "Buoy light"


def test_lines_are_found_in_dotted_inline_and_multiline_toml(tmp_path: Path) -> None:
    text = (
        'title = """\\\n  [resistor] \\\n  value = 3"""\n'
        'resistor.value = "12"\n'
        'inductor = { value = "33" }\n'
        '["capacitor"]\n"value" = "1 uV"\n'
        '[source]\nkind = "dc"\nvoltage = "1"\n'
    )
    assert [line.split(":")[0] for line in problems(tmp_path, text)] == ["4", "5", "7", "10"]


def test_a_slip_that_may_be_meant_gets_a_note(tmp_path: Path) -> None:
    loaded = load(write(tmp_path, GOOD.replace('"33 mH"', '"10 MH"').replace('"0.5 mH"', '"5 %"')))
    assert loaded.inputs.case.loop.inductance == 10e6
    assert [note.split(":")[0] for note in loaded.notes] == ["inductor.value"]


def test_a_part_of_zero_cannot_go_below_and_may_have_a_plus_side(tmp_path: Path) -> None:
    zero = GOOD.replace('"12 ohm"', '"0 ohm"')
    found = problems(tmp_path, zero.replace('"1 %"', '"0.5 ohm"'))
    assert found == [
        "4: resistor.tolerance = '0.5 ohm': would let the value reach zero."
        ' Write for example "5 %" or "-20 % / +80 %"'
    ]
    inputs = load(write(tmp_path, zero.replace('"1 %"', '"-0 ohm / +0.5 ohm"'))).inputs
    assert (inputs.parts[0].low, inputs.parts[0].high) == (0.0, 0.5)


def test_distributions_arrive_with_their_sigmas(tmp_path: Path) -> None:
    text = GOOD.replace('"1 %"', '"1 %"\ndistribution = "normal"\nsigmas = 2.5').replace(
        '"0.5 mH"', '"0.5 mH"\ndistribution = "triangular"'
    )
    resistor, inductor, capacitor = load(write(tmp_path, text)).inputs.parts
    assert (resistor.distribution, resistor.sigmas) == ("normal", 2.5)
    assert inductor.distribution == "triangular"
    assert capacitor.distribution == "uniform"


@pytest.mark.parametrize("value", ["1e-300 H", "1e300 H"])
def test_values_beyond_any_circuit_are_refused(tmp_path: Path, value: str) -> None:
    text = GOOD.replace('"33 mH"', f'"{value}"').replace('"0.5 mH"', '"5 %"')
    assert problems(tmp_path, text) == [f"7: inductor.value = '{value}': is beyond any circuit"]
