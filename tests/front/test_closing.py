"""The states at closing: angles, windows, words, and charge of either polarity."""

from __future__ import annotations

import math
import subprocess
import sys
from pathlib import Path

import pytest
from sheets import problems, write

from rlc.errors import SheetError
from rlc.front.load import load
from rlc.solver.case import Case
from rlc.solver.source import ANY_ANGLE

SINE = 'kind = "sine"\nrms = "24 V"\nfrequency = "50 Hz"\n'
FLAGS = {
    "--resistance": "12 ohm",
    "--inductance": "33 mH",
    "--capacitance": "1 uF",
    "--source-rms": "24 V",
    "--frequency": "50 Hz",
}


def case_from(how: str, folder: Path, key: str, text: str) -> Case:
    """The same text as a key of the sheet, as a flag beside one, and as a flag alone."""
    option = f"--{key.replace('_', '-')}"
    if how == "sheet":
        return load(write(folder, f'{SINE}[switch_on]\n{key} = "{text}"\n')).inputs.case
    if how == "flag beside a sheet":
        return load(write(folder, SINE), {option: text}).inputs.case
    return load(None, FLAGS | {option: text}).inputs.case


WAYS = pytest.mark.parametrize("how", ["sheet", "flag beside a sheet", "flag alone"])


@WAYS
@pytest.mark.parametrize(
    ("text", "low", "high"),
    [
        ("0 deg ± 15 deg", -15, 15),
        ("90deg +- 1.5 deg", 88.5, 91.5),
        ("-90 deg+/-90 deg", -180, 0),
        ("350° +/\u2212 30°", 320, 380),
        ("0 rad ± 15 deg", -15, 15),
        ("710 deg ± 30 deg", 320, 380),
    ],
)
def test_windows(how: str, tmp_path: Path, text: str, low: float, high: float) -> None:
    source = case_from(how, tmp_path, "closing_angle", text).source
    assert source.closing_angle is None
    assert source.window is not None
    # Angles of up to four turns, rounded a few times.
    expected = (math.radians(low), math.radians(high))
    assert tuple(source.window) == pytest.approx(expected, abs=1e-14)


@WAYS
@pytest.mark.parametrize("text", ["random", "0 deg ± 180 deg", "77 deg +- 3.141592653589793 rad"])
def test_any_angle(how: str, tmp_path: Path, text: str) -> None:
    source = case_from(how, tmp_path, "closing_angle", text).source
    assert source.closing_angle is None
    assert source.window == ANY_ANGLE


@WAYS
def test_the_worst_angle_has_no_window(how: str, tmp_path: Path) -> None:
    source = case_from(how, tmp_path, "closing_angle", "worst").source
    assert (source.closing_angle, source.window) == (None, None)


def test_harmonics_close_in_a_window_too(tmp_path: Path) -> None:
    text = SINE.replace("sine", "harmonics") + 'orders = [{ number = 5, share = "6 %" }]\n'
    path = write(tmp_path, text + '[switch_on]\nclosing_angle = "random"\n')
    source = load(path).inputs.case.source
    assert (source.kind, source.window) == ("harmonics", ANY_ANGLE)
    path = write(tmp_path, text + '[switch_on]\nclosing_angle = "30 deg"\n')
    angle = load(path).inputs.case.source.closing_angle
    assert angle is not None
    assert float(angle) == pytest.approx(math.pi / 6, rel=1e-15)


@WAYS
@pytest.mark.parametrize(
    ("text", "volts", "either"),
    [
        ("± 325 V", 325.0, True),
        ("±325V", 325.0, True),
        ("+- 0.3 kV", 300.0, True),
        ("+/-325 V", 325.0, True),
        ("+\u2212 325 V", 325.0, True),
        ("-325 V", -325.0, False),
        ("+325 V", 325.0, False),
        ("0 V", 0.0, False),
    ],
)
def test_charge(how: str, tmp_path: Path, text: str, volts: float, either: bool) -> None:
    case = case_from(how, tmp_path, "capacitor_voltage", text)
    assert (float(case.capacitor_voltage), case.either_polarity) == (volts, either)


ANGLES = 'Write for example "30 deg", "0 deg +- 15 deg", "random" or "worst"'
AROUND = 'Write for example "0 deg +- 15 deg"'
HALF = "must have a half width above zero and at most 180 deg"


@pytest.mark.parametrize(
    ("key", "text", "said"),
    [
        ("closing_angle", "30", f"has no unit. {ANGLES}"),
        ("closing_angle", "Random", f"does not begin with a number. {ANGLES}"),
        ("closing_angle", "0 ± 15 deg", f"'0' has no unit. {ANGLES}"),
        ("closing_angle", "0 deg ± 15", f"'15' has no unit. {ANGLES}"),
        ("closing_angle", "0 deg ± 15 V", f"'15 V' is in V, a unit of voltage, and angle is"
         f" expected. {ANGLES}"),
        ("closing_angle", "± 15 deg", f"needs an angle on both sides of the sign. {AROUND}"),
        ("closing_angle", "15 deg ±", f"needs an angle on both sides of the sign. {AROUND}"),
        ("closing_angle", "0 deg ± 0 deg", f"{HALF}. {AROUND}"),
        ("closing_angle", "0 deg ± -5 deg", f"{HALF}. {AROUND}"),
        ("closing_angle", "0 deg ± 181 deg", f"{HALF}. {AROUND}"),
        ("capacitor_voltage", "± 325", 'has no unit. Write for example "24 V" or "+- 325 V"'),
        ("capacitor_voltage", "± -325 V", 'has a sign too many. Write for example "+- 325 V"'),
        ("capacitor_voltage", "±", 'is empty. Write for example "24 V" or "+- 325 V"'),
        ("capacitor_voltage", "random",
         'does not begin with a number. Write for example "24 V" or "+- 325 V"'),
    ],
)  # fmt: skip
def test_each_slip_has_its_sentence_in_a_sheet_and_as_a_flag(
    tmp_path: Path, key: str, text: str, said: str
) -> None:
    found = problems(tmp_path, f'{SINE}[switch_on]\n{key} = "{text}"\n')
    assert found == [f"12: switch_on.{key} = {text!r}: {said}"]
    option = f"--{key.replace('_', '-')}"
    with pytest.raises(SheetError) as caught:
        load(None, FLAGS | {option: text})
    assert str(caught.value) == f"{option} = {text!r}: {said}"


def test_a_number_without_quotes_is_no_angle_and_no_charge(tmp_path: Path) -> None:
    text = f"{SINE}[switch_on]\nclosing_angle = 30\ncapacitor_voltage = 325\n"
    assert problems(tmp_path, text) == [
        f"12: switch_on.closing_angle = 30: must be a text with a number and a unit. {ANGLES}",
        "13: switch_on.capacitor_voltage = 325: must be a text with a number and a unit."
        ' Write for example "24 V" or "+- 325 V"',
    ]


def test_charge_beyond_the_usual_gets_a_note(tmp_path: Path) -> None:
    path = write(tmp_path, f'{SINE}[switch_on]\ncapacitor_voltage = "± 25 MV"\n')
    (note,) = load(path).notes
    assert note.startswith("switch_on.capacitor_voltage: voltage of 25 MV is unusual")
    (note,) = load(None, FLAGS | {"--capacitor-voltage": "+- 25 MV"}).notes
    assert note.startswith("--capacitor-voltage: voltage of 25 MV is unusual")


def test_a_one_off_question_reads_them_without_the_models_of_a_sheet() -> None:
    given = FLAGS | {"--closing-angle": "0 deg +- 5 deg", "--capacitor-voltage": "+- 5 V"}
    code = (
        f"import sys; from rlc.front.load import load; load(None, {given!r});"
        "print([name for name in ('pydantic', 'pint', 'scipy') if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
