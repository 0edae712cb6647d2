"""The kinds of source in a sheet: what they become, and the sentences that refuse them."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest
from sheets import problems, write

from rlc.front.load import load
from rlc.solver import shapes
from rlc.solver.source import Source

SINE = 'frequency = "50 Hz"\nrms = "230 V"\n'
HARMONICS = f'kind = "harmonics"\n{SINE}'
FIFTH = '[[source.orders]]\nnumber = 5\nshare = "6 %"\n'
RAMP = 'kind = "ramp"\nvoltage = "-5 V"\nrise_time = "2 ms"\n'
PULSE = 'kind = "pulse"\nvoltage = "5 V"\nwidth = "2 ms"\n'
SURGE = 'kind = "surge"\nvoltage = "6 kV"\nfront_time = "1.2 us"\nhalf_value_time = "50 us"\n'


def source_of(folder: Path, text: str) -> Source:
    return load(write(folder, text)).inputs.case.source


def test_harmonics_by_share_rms_and_amplitude(tmp_path: Path) -> None:
    text = HARMONICS + FIFTH + (
        '[[source.orders]]\nnumber = 7\nrms = "9.2 V"\nphase = "180 deg"\n'
        '[[source.orders]]\nnumber = 11\namplitude = "11.5 V"\n'
    )  # fmt: skip
    source = source_of(tmp_path, text)
    assert source.kind == "harmonics"
    assert float(source.amplitude) == pytest.approx(230 * math.sqrt(2), rel=1e-15)
    assert float(source.frequency) == 50.0
    # 9.2 over 230 is 4 %; 11.5 over 230 times the square root of two is 0.05 over it.
    # Three roundings at most, of 1.1e-16 each.
    shares = [order.share for order in source.orders]
    assert shares == pytest.approx([0.06, 0.04, 0.05 / math.sqrt(2)], rel=5e-16)
    assert [order.number for order in source.orders] == [5, 7, 11]
    assert [order.phase for order in source.orders] == [0.0, math.pi, 0.0]


def test_harmonics_of_an_amplitude_and_in_one_line(tmp_path: Path) -> None:
    text = (
        'kind = "harmonics"\namplitude = "100 V"\nfrequency = "400 Hz"\nresistance = "0.2 ohm"\n'
        'orders = [{ number = 3, rms = "10 V" }, { number = 2, amplitude = "5 V" }]\n'
    )
    loaded = load(write(tmp_path, text)).inputs.case
    assert loaded.loop.source_resistance == 0.2
    assert [(order.number, order.share) for order in loaded.source.orders] == [
        (3, pytest.approx(0.1 * math.sqrt(2), rel=5e-16)),
        (2, 0.05),
    ]


@pytest.mark.parametrize("level", ["5 V", "-5 V"])
def test_a_ramp_rises_in_its_time_and_stays(tmp_path: Path, level: str) -> None:
    text = RAMP.replace("-5 V", level) + 'inductance = "3 uH"\n'
    case = load(write(tmp_path, text)).inputs.case
    volts = float(level.split()[0])
    assert case.source.kind == "ramp"
    assert case.loop.source_inductance == 3e-6
    assert isinstance(case.source.shape, shapes.Piecewise)
    found = case.source.shape.at([0.0, 1e-3, 2e-3, 1.0])
    np.testing.assert_allclose(found, [0.0, volts / 2, volts, volts], rtol=5e-16)


def test_a_pulse_has_its_width_between_half_levels(tmp_path: Path) -> None:
    source = source_of(tmp_path, PULSE + 'rise_time = "1 ms"\nfall_time = "400 us"\n')
    assert source.kind == "pulse"
    assert isinstance(source.shape, shapes.Piecewise)
    # Half of the rise at 0.5 ms, half of the fall 2 ms later; its end half the fall later still.
    found = source.shape.at([0.0, 0.5e-3, 1e-3, 2.3e-3, 2.5e-3, 2.7e-3, 1.0])
    np.testing.assert_allclose(found, [0, 2.5, 5, 5, 2.5, 0, 0], atol=1e-13)


def test_a_pulse_without_more_keys_is_square_and_comes_once(tmp_path: Path) -> None:
    shape = source_of(tmp_path, PULSE).shape
    assert isinstance(shape, shapes.Piecewise)
    np.testing.assert_array_equal(shape.at([0.0, 1.9e-3, 2.1e-3, 22e-3]), [5.0, 5.0, 0.0, 0.0])


def test_a_train_of_pulses_ends_or_goes_on(tmp_path: Path) -> None:
    train = PULSE + 'period = "10 ms"\n'
    three = source_of(tmp_path, train + "count = 3\n").shape
    steady = source_of(tmp_path, train + 'count = "until steady"\n').shape
    assert isinstance(three, shapes.Piecewise)
    assert isinstance(steady, shapes.Piecewise)
    times = [1e-3, 9e-3, 11e-3, 21e-3, 31e-3]
    np.testing.assert_array_equal(three.at(times), [5.0, 0.0, 5.0, 5.0, 0.0])
    np.testing.assert_array_equal(steady.at(times), [5.0, 0.0, 5.0, 5.0, 5.0])
    assert (three.period, steady.period) == (None, 10e-3)


def test_a_surge_is_the_one_of_its_times(tmp_path: Path) -> None:
    source = source_of(tmp_path, SURGE)
    assert source.kind == "surge"
    assert source.shape == shapes.surge(6e3, 1.2e-6, 50e-6)


def test_a_record_lies_beside_its_sheet(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = tmp_path / "bench"
    folder.mkdir()
    (folder / "trace.csv").write_text("time [ms], voltage [V]\n5, 1\n6, 3\n8, -2\n")
    write(folder, 'kind = "recorded"\nfile = "trace.csv"\n')
    monkeypatch.chdir(tmp_path)
    shape = load("bench/sheet.toml").inputs.case.source.shape
    assert isinstance(shape, shapes.Piecewise)
    assert shape.kind == "recorded"
    # The switch closes at the first point; the last value is held.
    np.testing.assert_allclose(shape.at([0.0, 0.5e-3, 1e-3, 2e-3, 9.0]), [1, 2, 3, 0.5, -2], 1e-12)


HOW = 'Write [[source.orders]] and below it number = 5, share = "6 %"'
KINDS = '"dc", "sine", "harmonics", "ramp", "pulse", "surge" or "recorded"'


@pytest.mark.parametrize(
    ("source", "said"),
    [
        # harmonics
        (HARMONICS, [f"7: source.orders: is missing. {HOW}"]),
        (HARMONICS + "orders = []\n", [f"11: source.orders = []: is empty. {HOW}"]),
        (
            HARMONICS + "orders = [5]\n",
            ["11: source.orders[1] = 5: must be tables, each below a line [[source.orders]]"],
        ),
        (
            HARMONICS + "[source.orders]\nnumber = 5\n",
            [
                "11: source.orders = {'number': 5}: must be tables, each below a line"
                " [[source.orders]]"
            ],
        ),
        (
            HARMONICS.replace('rms = "230 V"\n', "") + FIFTH,
            [
                '7: source: has neither rms nor amplitude. Write rms = "24 V" or amplitude ='
                ' "34 V"'
            ],
        ),
        (
            HARMONICS + 'amplitude = "325 V"\n' + FIFTH,
            [
                "11: source.amplitude = '325 V': is given beside rms, and a sine is given by one"
                " of them"
            ],
        ),
        (
            HARMONICS + FIFTH + 'rms = "14 V"\namplitude = "20 V"\n',
            [
                "14: source.orders[1].rms = '14 V': is given beside share, and a harmonic is given"
                " by one of them",
                "15: source.orders[1].amplitude = '20 V': is given beside share, and a harmonic is"
                " given by one of them",
            ],
        ),
        (
            HARMONICS + "[[source.orders]]\nnumber = 5\n",
            [
                "11: source.orders[1]: has neither share nor rms nor amplitude."
                ' Write share = "6 %", of the fundamental'
            ],
        ),
        (HARMONICS + FIFTH + FIFTH, ["15: source.orders[2].number = 5: is given twice"]),
        (
            HARMONICS + FIFTH.replace("number = 5\n", ""),
            ["11: source.orders[1].number: is missing. Write below [[source.orders]] number = 5"],
        ),
        *(
            (
                HARMONICS + FIFTH.replace("number = 5", f"number = {typed}"),
                [
                    f"12: source.orders[1].number = {shown}: must be a whole number from 2 to 1000,"
                    " without quotes"
                ],
            )
            for typed, shown in (
                ("1", "1"), ("1001", "1001"), ("5.0", "5.0"), ('"5"', "'5'"), ("true", "True"),
            )
        ),
        (
            HARMONICS + FIFTH.replace('"6 %"', '"-6 %"'),
            ["13: source.orders[1].share = '-6 %': must be zero or more"],
        ),
        (
            HARMONICS + FIFTH.replace('"6 %"', '"6"'),
            ["13: source.orders[1].share = '6': is more than 100 %"],
        ),
        (
            HARMONICS + FIFTH + 'phase = "180"\n',
            [
                "14: source.orders[1].phase = '180': has no unit. Write for example \"30 deg\"",
            ],
        ),
        (
            HARMONICS + FIFTH + 'fase = "0 deg"\n',
            [
                "14: source.orders[1].fase = '0 deg': is an unknown key. Did you mean \"phase\"?",
            ],
        ),
        # ramp
        (
            'kind = "ramp"\n',
            [
                '7: source.voltage: is missing. Write below [source] voltage = "24 V"',
                '7: source.rise_time: is missing. Write below [source] rise_time = "2 ms"',
            ],
        ),
        (
            RAMP.replace("2 ms", "0 s"),
            ["10: source.rise_time = '0 s': must be more than zero"],
        ),
        (
            RAMP + 'width = "1 s"\nfrequency = "50 Hz"\nlength = "1 s"\n',
            [
                "11: source.width = '1 s': belongs to a source of kind \"pulse\", and this one is"
                ' "ramp"',
                "12: source.frequency = '50 Hz': belongs to a source of kind \"sine\" or"
                ' "harmonics", and this one is "ramp"',
                "13: source.length = '1 s': is an unknown key."
                " Known here: kind, resistance, inductance, voltage, rise_time",
            ],
        ),
        # pulse
        (
            PULSE.replace('width = "2 ms"\n', ""),
            ['7: source.width: is missing. Write below [source] width = "5 ms"'],
        ),
        (
            PULSE + "count = 3\n",
            [
                "11: source.count = 3: needs a period, from one pulse to the next."
                ' Write period = "20 ms"'
            ],
        ),
        (
            PULSE + 'period = "20 ms"\n',
            [
                "11: source.period = '20 ms': needs a count of pulses."
                ' Write count = 10 or count = "until steady"'
            ],
        ),
        *(
            (
                PULSE + f'period = "20 ms"\ncount = {typed}\n',
                [
                    f"12: source.count = {shown}: must be a whole number from 2 to 100000 or"
                    ' "until steady"'
                ],
            )
            for typed, shown in (("1", "1"), ('"4"', "'4'"), ('"for ever"', "'for ever'"))
        ),
        (
            PULSE + 'rise_time = "-1 ms"\n',
            ["11: source.rise_time = '-1 ms': must be zero or more"],
        ),
        # surge
        (
            SURGE.replace("1.2 us", "1.2 uV").replace('half_value_time = "50 us"\n', ""),
            [
                '7: source.half_value_time: is missing. Write below [source] half_value_time ='
                ' "50 us"',
                "10: source.front_time = '1.2 uV': is in uV, a unit of voltage, and time is"
                ' expected. Write for example "20 ms"',
            ],
        ),
        # recorded
        (
            'kind = "recorded"\n',
            ['7: source.file: is missing. Write below [source] file = "record.csv"'],
        ),
        (
            'kind = "recorded"\nfile = 5\n',
            ["9: source.file = 5: must be the name of a file, in quotes"],
        ),
        # any
        (
            'kind = "square"\n',
            [f"8: source.kind = 'square': is no kind of source. Write kind = {KINDS}"],
        ),
        (
            RAMP + '[switch_on]\nclosing_angle = "30 deg"\n',
            [
                "12: switch_on.closing_angle = '30 deg': belongs to a sine source, alone or with"
                " harmonics, and this one is ramp"
            ],
        ),
        (
            SURGE + '[[target]]\nquantity = "current"\nat = "50 Hz"\nmax = "1 A"\n',
            [
                "14: target[1].at = '50 Hz': current of a surge source is not asked for at a"
                " frequency"
            ],
        ),
    ],
)  # fmt: skip
def test_each_slip_has_its_sentence(tmp_path: Path, source: str, said: list[str]) -> None:
    assert problems(tmp_path, source) == said


@pytest.mark.parametrize(
    ("source", "begins"),
    [
        (
            PULSE + 'rise_time = "1 ms"\nfall_time = "4 ms"\n',
            "10: source.width = '2 ms': must be at least half of rise and fall time",
        ),
        (
            PULSE + 'period = "2 ms"\ncount = 4\n',
            "11: source.period = '2 ms': must be more than the pulse lasts",
        ),
        (
            SURGE.replace("50 us", "1 us"),
            "11: source.half_value_time = '1 us': must be 3.47 to",
        ),
        (
            HARMONICS.replace("230 V", "9e49 V") + FIFTH,
            "7: source: amplitude: is beyond any circuit",
        ),
        (
            HARMONICS.replace("230", "1e-10") + '[[source.orders]]\nnumber = 5\nrms = "1e45 V"\n',
            "7: source: share: must be zero or more and finite",
        ),
    ],
    ids=["width", "period", "half value", "level", "share"],
)  # fmt: skip
def test_what_the_solver_refuses_has_its_line_in_the_sheet(
    tmp_path: Path, source: str, begins: str
) -> None:
    """With another error beside it, so that both are there at once."""
    text = source + '[load]\nresistance = "0 ohm"\n'
    first, second = problems(tmp_path, text)
    assert first.startswith(begins)
    assert second.endswith("load.resistance = '0 ohm': must be more than zero")


def test_errors_in_orders_over_several_lines_have_the_lines_of_their_rows(tmp_path: Path) -> None:
    text = HARMONICS + (
        "orders = [  # of the supply\n"
        '    { number = 5, share = "6" },\n'
        "    # the next one is small\n"
        '    { number = 7, share = "4" }, { number = 11, share = "2" },\n'
        "]\n"
        'resistance = "1"\n'
    )
    assert [line.split(" = ")[0] for line in problems(tmp_path, text)] == [
        "12: source.orders[1].share",
        "14: source.orders[2].share",
        "14: source.orders[3].share",
        "16: source.resistance",
    ]


def test_all_errors_of_a_source_come_at_once(tmp_path: Path) -> None:
    text = HARMONICS.replace('"50 Hz"', '"50"') + (
        FIFTH + 'rms = "9 A"\n[switch_on]\nclosing_angle = "x"\ncapacitor_voltage = "y"\n'
    )
    assert [line.partition(": ")[0] for line in problems(tmp_path, text)] == ["9", "14", "16", "17"]


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (None, "{path}: does not exist. A record is looked for beside its sheet"),
        (
            "time [us], voltage [V]\n0, 1\n1, 2 V\n",
            "{path}:3: voltage [V] = '2 V': is in V, a unit of voltage, and number is expected."
            " Write a number such as 1.5 or 2e-3",
        ),
    ],
    ids=["missing", "bad row"],
)
def test_an_error_of_a_record_names_both_files(
    tmp_path: Path, content: str | None, said: str
) -> None:
    record = tmp_path / "trace.csv"
    if content is not None:
        record.write_text(content)
    found = problems(tmp_path, 'kind = "recorded"\nfile = "trace.csv"\nresistance = "1"\n')
    assert found == [
        f"9: source.file = 'trace.csv': cannot be used: {said.format(path=record)}",
        "10: source.resistance = '1': has no unit. Write for example \"4.7 kohm\"",
    ]
