"""Measured waveforms: what is read, and the one sentence that refuses the rest."""

from __future__ import annotations

import errno
import os
import tempfile
from decimal import Decimal
from pathlib import Path

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from rlc.errors import SheetError
from rlc.front import records
from rlc.front.records import Record, read_record

HEADER = "time [us], voltage [V]\n"


def read(folder: Path, content: str | bytes) -> Record:
    path = folder / "trace.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return read_record(path)


def refusal(folder: Path, content: str | bytes) -> str:
    """What is said, without the directory."""
    with pytest.raises(SheetError) as caught:
        read(folder, content)
    assert len(caught.value.problems) == 1
    return str(caught.value).removeprefix(f"{folder}{os.sep}")


@pytest.mark.parametrize(
    "content",
    [
        HEADER + "0, 1.5\n1, -2\n4, 3e-1\n",
        HEADER + "0,1.5\n1,-2\n4,.3",
        "# a bench supply\n\n" + HEADER + "  \n0, 1.5 # closing\n# halfway\n\n1, -2.\n4, +0.3\n",
        "voltage [V], time [us]\n1.5, 0\n-2, 1\n0.3, 4\n",
        "time [us]; voltage [V]\n0; 1.5\n1; -2\n4; 0.3\n",
        "time [us]\tvoltage [V]\n0\t1.5\n1\t-2\n4\t0.3\n",
        "Time (us), Voltage (mV)\n0, 1500\n1, -2e3\n4, 300\n",
        "time [s], trigger, voltage [V]\n0, Ω on, 1.5\n1e-6, off, -2\n4E-6,, 0.3\n",
        '"time [us]","voltage [V]"\n0,1.5\n1,-2\n4,0.3\n',
        "time [us], voltage [V],\n0, 1.5,\n1, -2,\n4, 0.3,\n",
        "\ufeff" + HEADER + "0, 1.5\n1, -2\n4, 0.3\n",
        (HEADER + "0, 1.5\n1, -2\n4, 0.3\n").replace("\n", "\r\n"),
        (HEADER + "0, 1.5\n1, -2\n4, 0.3\n").replace("\n", "\r"),
    ],
    ids=[
        "plain", "no last line end", "comments", "other order", "semicolons", "tabs", "units",
        "other columns", "quoted names", "commas at the end", "byte-order mark", "crlf", "cr",
    ],
)  # fmt: skip
def test_one_record_in_many_spellings(tmp_path: Path, content: str) -> None:
    time, voltage = read(tmp_path, content)
    # A product of two rounded factors.
    np.testing.assert_allclose(time, [0.0, 1e-6, 4e-6], rtol=4e-16)
    np.testing.assert_allclose(voltage, [1.5, -2.0, 0.3], rtol=4e-16)


def test_time_may_begin_anywhere(tmp_path: Path) -> None:
    time, _ = read(tmp_path, "time [ms], voltage [V]\n-5, 1\n-4.75, 2\n0, 3\n")
    np.testing.assert_allclose(time, [-5e-3, -4.75e-3, 0.0], rtol=4e-16)


NUMBER = "Write a number such as 1.5 or 2e-3"
COLUMNS = 'Write for example "time [us], voltage [V]"'


@pytest.mark.parametrize(
    ("content", "said"),
    [
        ("", 'trace.csv: is empty. Its first line names the columns: "time [us], voltage [V]"'),
        (
            "# nothing yet\n\n",
            'trace.csv: is empty. Its first line names the columns: "time [us], voltage [V]"',
        ),
        (HEADER, "trace.csv: has no point, and a record has two or more"),
        (HEADER + "0, 1\n", "trace.csv: has one point, and a record has two or more"),
        # the header
        ("0, 1\n1, 2\n", f"trace.csv:1: header = '0, 1': names no column \"time\". {COLUMNS}"),
        (
            "# 1\ntime [s], level [V]\n0, 1\n",
            f"trace.csv:2: header = 'time [s], level [V]': names no column \"voltage\". {COLUMNS}",
        ),
        (
            "time [s], voltage [V], time [ms]\n",
            "trace.csv:1: header = 'time [s], voltage [V], time [ms]': names two columns"
            f' "time". {COLUMNS}',
        ),
        (
            "time, voltage [V]\n0, 1\n",
            f"trace.csv:1: header = 'time': has no unit in brackets. {COLUMNS}",
        ),
        (
            "time [s], voltage []\n0, 1\n",
            f"trace.csv:1: header = 'voltage []': has no unit in brackets. {COLUMNS}",
        ),
        (
            "time [s], voltage [A]\n0, 1\n",
            "trace.csv:1: header = 'voltage [A]': is in A, a unit of current, and voltage is"
            f" expected. {COLUMNS}",
        ),
        (
            "time [2 us], voltage [V]\n",
            "trace.csv:1: header = 'time [2 us]': holds several numbers, and one is expected."
            f" {COLUMNS}",
        ),
        (
            "x" * 5000,
            f"trace.csv:1: header = '{'x' * 60}': is longer than 4000 characters. {COLUMNS}",
        ),
        # a row
        (
            HEADER + "0, 1\n0, 2\n",
            "trace.csv:3: time [us] = '0': does not rise: the row before has 0. Every time is"
            " later than the one before",
        ),
        (
            HEADER + "0, 1\n# pause\n5, 2\n4.5, 2\n",
            "trace.csv:5: time [us] = '4.5': does not rise: the row before has 5. Every time is"
            " later than the one before",
        ),
        (
            HEADER + "-1e9, 1\n1e-30, 2\n2e-30, 2\n",
            "trace.csv:4: time [us] = '2e-30': does not rise: the row before has 1e-30. Every"
            " time is later than the one before",
        ),
        (
            HEADER + "0, 1\n1, high\n",
            f"trace.csv:3: voltage [V] = 'high': does not begin with a number. {NUMBER}",
        ),
        (
            HEADER + "0, 1\n1, nan\n",
            f"trace.csv:3: voltage [V] = 'nan': must be a finite number. {NUMBER}",
        ),
        (
            HEADER + "0, 1\n-Infinity, 2\n",
            f"trace.csv:3: time [us] = '-Infinity': must be a finite number. {NUMBER}",
        ),
        (HEADER + "0, 1\n1,\n", f"trace.csv:3: voltage [V] = '': is empty. {NUMBER}"),
        (
            "time [us]; voltage [V]\n0; 1,5\n",
            "trace.csv:2: voltage [V] = '1,5': uses a comma; write the decimal mark as a point, and"
            f" thousands with no separator. {NUMBER}",
        ),
        (
            HEADER + "0,0\n0,5,1,5\n",
            "trace.csv:3: row = '0,5,1,5': has 4 columns, and the header names 2. If the comma is"
            " a decimal mark, write a point instead, as in 1.5",
        ),
        (
            HEADER + "0; 1\n1; 2\n",
            "trace.csv:2: row = '0; 1': has 1 column, and the header names 2. Columns are"
            " separated as in the header",
        ),
        (
            HEADER + "0, 1\n1, 1_000\n",
            "trace.csv:3: voltage [V] = '1_000': separates thousands; write the digits of the"
            f" number together. {NUMBER}",
        ),
        (
            HEADER + "0, 1 V\n",
            "trace.csv:2: voltage [V] = '1 V': is in V, a unit of voltage, and number is"
            f" expected. {NUMBER}",
        ),
        (
            HEADER + "0, \u22121\n",
            f"trace.csv:2: voltage [V] = '\u22121': is no plain decimal number. {NUMBER}",
        ),
        (HEADER + "0, 1\n1, 1e400\n", "trace.csv:3: voltage [V] = '1e400': is beyond any circuit"),
        (HEADER + "0, 1\n1e-50, 2\n", "trace.csv:3: time [us] = '1e-50': is beyond any circuit"),
        # no text
        (
            "time [s], voltage [V]\n0, 1 # 5 \u00b5s\n".encode("latin-1"),
            "trace.csv: is no text in UTF-8. Save it as such, as a table in text",
        ),
        (
            "time [s], voltage [V]\n0, 1\n".encode("utf-16"),
            "trace.csv: is no text in UTF-8. Save it as such, as a table in text",
        ),
        (
            b"\x89PNG\r\n\x1a\n\0",
            "trace.csv: is no text in UTF-8. Save it as such, as a table in text",
        ),
    ],
)
def test_each_slip_has_its_sentence(tmp_path: Path, content: str | bytes, said: str) -> None:
    assert refusal(tmp_path, content) == said


def test_long_values_are_not_repeated(tmp_path: Path) -> None:
    assert len(refusal(tmp_path, HEADER + "0, " + "9" * 10**5 + "x\n")) < 250


def test_a_directory_a_missing_file_and_one_without_permission(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with pytest.raises(SheetError, match=r"is a directory\. Name the record in it"):
        read_record(tmp_path)
    with pytest.raises(SheetError, match=r"does not exist\. A record is looked for beside"):
        read_record(tmp_path / "none.csv")
    with pytest.raises(SheetError, match="is no ordinary file"):
        read_record(os.devnull)
    with pytest.raises(SheetError, match=r"does not exist|embedded null"):
        read_record("a\0b")
    path = tmp_path / "trace.csv"
    path.write_text(HEADER)

    def refuse(path: Path, encoding: str) -> None:
        # As the system does it; whoever runs the tests may be allowed to read everything.
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(path))

    monkeypatch.setattr(Path, "open", refuse)
    with pytest.raises(SheetError, match="cannot be read: Permission denied"):
        read_record(path)


def test_files_far_too_large_are_not_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert records.LARGEST_RECORD >= 4_000_000 * 50
    monkeypatch.setattr(records, "LARGEST_RECORD", 30)
    assert refusal(tmp_path, HEADER + "0, 1\n1, 2\n") == (
        "trace.csv: has 33 bytes, and a record has at most 30. Is it the right file?"
    )


def test_more_points_than_a_course_may_have(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert records.MOST_KNOTS == 4_000_000
    monkeypatch.setattr(records, "MOST_KNOTS", 3)
    assert read(tmp_path, HEADER + "0, 1\n1, 2\n2, 3\n").time.size == 3
    assert refusal(tmp_path, HEADER + "0, 1\n1, 2\n2, 3\n3, 4\n4, 5\n") == (
        "trace.csv: has more than 3 points. Leave out some of them"
    )


def test_long_records_of_uneven_steps_arrive_to_the_last_bit(tmp_path: Path) -> None:
    random = np.random.default_rng(5)
    time = np.cumsum(random.uniform(1e-9, 1e-6, 200_000))
    voltage = random.normal(0.0, 300.0, time.size)
    rows = (f"{t!r},{v!r}" for t, v in zip(time.tolist(), voltage.tolist(), strict=True))
    found = read(tmp_path, "time [s],voltage [V]\n" + "\n".join(rows))
    np.testing.assert_array_equal(found.time, time)
    np.testing.assert_array_equal(found.voltage, voltage)


def test_a_slip_late_in_a_long_record_is_found(tmp_path: Path) -> None:
    rows = [f"{index}, {index % 7}" for index in range(100_000)]
    rows[76_543] = "76543, 1,5"
    said = refusal(tmp_path, HEADER + "\n".join(rows))
    assert said.startswith("trace.csv:76545: row = '76543, 1,5': has 3 columns")


FINITE = st.floats(min_value=-1e9, max_value=1e9)
TIMES = FINITE.filter(lambda time: time == 0 or abs(time) > 1e-30)


@given(
    times=st.lists(TIMES, min_size=2, max_size=30, unique=True).map(sorted),
    data=st.data(),
    separator=st.sampled_from([",", ";", "\t", " , "]),
    units=st.sampled_from([("s", "1", "V", "1"), ("us", "1e-6", "kV", "1e3")]),
    noise=st.sampled_from(["", "# note, 5\n", "\n", "  \n"]),
)
def test_what_is_written_is_read(
    times: list[float],
    data: st.DataObject,
    separator: str,
    units: tuple[str, str, str, str],
    noise: str,
) -> None:
    # Steps that vanish against the first time are refused, with a test of their own.
    assume(bool(np.all(np.diff(np.array(times) - times[0]) > 0)))
    size = len(times)
    voltages = data.draw(st.lists(FINITE, min_size=size, max_size=size))
    time_unit, second, voltage_unit, volt = units
    lines = [f"time [{time_unit}]{separator}voltage [{voltage_unit}]"]
    lines += [f"{t!r}{separator}{v!r}" for t, v in zip(times, voltages, strict=True)]
    with tempfile.TemporaryDirectory() as folder:
        found = read(Path(folder), f"\n{noise}".join(lines))
    for typed, scale, numbers in ((times, second, found.time), (voltages, volt, found.voltage)):
        exact = [float(Decimal(repr(number)) * Decimal(scale)) for number in typed]
        if scale == "1":
            assert numbers.tolist() == exact
        else:
            # The unit, the product and the expected value are rounded once each; below the
            # normal numbers a rounding is half of the smallest one.
            np.testing.assert_allclose(numbers, exact, rtol=4e-16, atol=1e-320)
