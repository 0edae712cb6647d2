"""Values from flags: alone, or in place of those of a sheet."""

from __future__ import annotations

from pathlib import Path

import pytest
from sheets import GOOD, problems, write, write_sheet

from rlc.errors import InputError, SheetError
from rlc.front.flags import FLAGS, TOLERANCE_FLAGS
from rlc.front.load import load
from rlc.front.marking import KINDS

SINE = 'frequency = "50 Hz"\nrms = "230 V"\n'
HARMONICS = f'kind = "harmonics"\n{SINE}'
FIFTH = '[[source.orders]]\nnumber = 5\nshare = "6 %"\n'
RAMP = 'kind = "ramp"\nvoltage = "-5 V"\nrise_time = "2 ms"\n'
PULSE = 'kind = "pulse"\nvoltage = "5 V"\nwidth = "2 ms"\n'
SURGE = 'kind = "surge"\nvoltage = "6 kV"\nfront_time = "1.2 us"\nhalf_value_time = "50 us"\n'


def test_flags_alone_make_the_same_loop_as_a_sheet(tmp_path: Path) -> None:
    flags = {
        "--resistance": "12 ohm",
        "--inductance": "33 mH",
        "--capacitance": "1u0",
        "--winding-resistance": "2.2 ohm",
        "--series-resistance": "0.1 ohm",
        "--load": "10 kohm",
        "--source-rms": "24 V",
        "--frequency": "880 Hz",
        "--source-resistance": "0.5 ohm",
        "--source-inductance": "10 uH",
        "--closing-angle": "30 deg",
        "--capacitor-voltage": "-5 V",
        "--initial-current": "10 mA",
    }
    assert repr(load(None, flags).inputs.case) == repr(
        load(write_sheet(tmp_path, GOOD)).inputs.case
    )


def test_a_flag_replaces_a_value_and_is_named_in_errors(tmp_path: Path) -> None:
    path = write_sheet(tmp_path, GOOD)
    loaded = load(path, {"--resistance": "15 ohm", "--source-amplitude": "10 V"})
    assert loaded.inputs.case.loop.resistance == 15.0
    assert loaded.inputs.case.source.amplitude == 10.0
    assert [str(change) for change in loaded.changes] == [
        '--resistance replaces resistor.value = "12 ohm" by "15 ohm"',
        '--source-amplitude adds source.amplitude = "10 V"',
        '--source-amplitude drops source.rms = "24 V"',
    ]
    with pytest.raises(SheetError) as caught:
        load(path, {"--resistance": "15"})
    assert str(caught.value).startswith("--resistance = '15': has no unit")


def test_a_dc_flag_turns_a_sine_sheet_into_dc(tmp_path: Path) -> None:
    loaded = load(write_sheet(tmp_path, GOOD), {"--source-dc": "48 V"})
    case = loaded.inputs.case
    assert [str(change) for change in loaded.changes] == [
        '--source-dc adds source.voltage = "48 V"',
        '--source-dc replaces source.kind = "sine" by "dc"',
        '--source-dc drops source.rms = "24 V"',
        '--source-dc drops source.frequency = "880 Hz"',
        '--source-dc drops switch_on.closing_angle = "30 deg"',
    ]
    assert case.source.kind == "dc"
    assert case.source.amplitude == 48.0
    assert case.loop.source_resistance == 0.5


def test_flags_that_contradict_each_other() -> None:
    with pytest.raises(InputError, match="--source-rms and --source-dc: are given together"):
        load(None, {"--source-rms": "1 V", "--source-dc": "1 V"})
    with pytest.raises(InputError, match="--frequency = '50 Hz': does not go with --source-dc"):
        load(None, {"--source-dc": "1 V", "--frequency": "50 Hz"})


def test_an_unknown_flag_is_refused_with_the_nearest_known() -> None:
    with pytest.raises(InputError, match=r"is no flag .* Did you mean \"--resistance\"\?"):
        load(None, {"--resistence": "1 ohm"})


def test_nothing_at_all_asks_for_a_sheet() -> None:
    with pytest.raises(SheetError) as caught:
        load()
    first, *rest = str(caught.value).splitlines()
    assert first == "no sheet is named. Name one, or give at least these flags"
    assert len(rest) == 4


def test_flags_that_are_missing_are_named_as_flags() -> None:
    with pytest.raises(SheetError) as caught:
        load(None, {"--resistance": "1 ohm", "--source-rms": "1 V"})
    assert str(caught.value).splitlines() == [
        '--inductance: is missing. For example "10 mH"',
        '--capacitance: is missing. For example "4.7 uF"',
        '--frequency: is missing. For example "50 Hz"',
    ]


def test_a_flag_and_its_key_in_the_sheet_pass_the_same_door(tmp_path: Path) -> None:
    """Each flag once beside a sheet and once alone, with texts that some doors refuse."""
    sine = {"--source-rms": "24 V", "--frequency": "880 Hz"}
    beside = {
        "rms": {"--frequency": "880 Hz"},
        "amplitude": {"--frequency": "880 Hz"},
        "voltage": {},
    }
    parts = {"--resistance": "12 ohm", "--inductance": "33 mH", "--capacitance": "1u0"}
    path = write_sheet(tmp_path, GOOD)
    for flag in FLAGS + TOLERANCE_FLAGS:
        unit = "%" if flag.key == "tolerance" else KINDS[flag.door.kind].symbol
        for number in ("-1", "0", "1"):
            given = {flag.option: f"{number} {unit}"}
            alone = parts | beside.get(flag.key, sine) | given
            said = []
            for sheet, flags in ((path, given), (None, alone)):
                try:
                    load(sheet, flags)
                    said.append("")
                except SheetError as error:
                    said.append(str(error).removeprefix(f"{path}: "))
            assert said[0] == said[1]


@pytest.mark.parametrize(
    ("source", "dropped"),
    [
        (
            HARMONICS + FIFTH,
            ['rms = "230 V"', 'frequency = "50 Hz"', "orders, 1 of them"],
        ),
        (RAMP, ['rise_time = "2 ms"']),
        (PULSE + 'rise_time = "1 us"\nperiod = "5 ms"\ncount = 7\n',
         ['rise_time = "1 us"', 'width = "2 ms"', 'period = "5 ms"', 'count = "7"']),
        (SURGE, ['front_time = "1.2 us"', 'half_value_time = "50 us"']),
        ('kind = "recorded"\nfile = "none.csv"\n', ['file = "none.csv"']),
    ],
    ids=["harmonics", "ramp", "pulse", "surge", "recorded"],
)  # fmt: skip
def test_a_level_from_a_flag_drops_what_does_not_go_with_it(
    tmp_path: Path, source: str, dropped: list[str]
) -> None:
    path = write(tmp_path, source + '[load]\nresistance = "1 kohm"\n')
    loaded = load(path, {"--source-dc": "48 V"})
    assert loaded.inputs.case.source.kind == "dc"
    assert loaded.inputs.case.source.amplitude == 48.0
    said = [str(change) for change in loaded.changes[1:]]
    kind = source.split('"')[1]
    assert said[0] == f'--source-dc replaces source.kind = "{kind}" by "dc"'
    assert said[1:] == [f"--source-dc drops source.{key}" for key in dropped]


def test_a_sine_from_flags_in_place_of_a_course(tmp_path: Path) -> None:
    path = write(tmp_path, PULSE + 'resistance = "1 ohm"\n')
    loaded = load(path, {"--source-rms": "5 V", "--frequency": "1 kHz", "--closing-angle": "worst"})
    source = loaded.inputs.case.source
    assert (source.kind, source.frequency, source.worst_angle) == ("sine", 1000.0, True)
    assert loaded.inputs.case.loop.source_resistance == 1.0


def test_a_frequency_from_a_flag_keeps_the_harmonics(tmp_path: Path) -> None:
    source = load(write(tmp_path, HARMONICS + FIFTH), {"--frequency": "60 Hz"}).inputs.case.source
    assert (source.kind, source.frequency) == ("harmonics", 60.0)


def test_a_frequency_for_a_ramp_is_an_error_of_the_flag(tmp_path: Path) -> None:
    assert problems(tmp_path, RAMP, {"--frequency": "50 Hz"}) == [
        '--frequency = \'50 Hz\': belongs to a source of kind "sine" or "harmonics", and this'
        ' one is "ramp"'
    ]
