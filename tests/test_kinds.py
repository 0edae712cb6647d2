"""Every command on a sheet of every kind of source, in process: words, numbers, JSON."""

from __future__ import annotations

import json
import math
import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from typer.testing import CliRunner, Result

from rlc.cli import app
from rlc.review import check

PARTS = """title = "Bench loop"
[resistor]
value = "2.5 ohm"
tolerance = "5 %"
[inductor]
value = "100 uH"
saturation_current = "20 A"
rated_current = "100 A"
[capacitor]
value = "10 uF"
tolerance = "10 %"
rated_voltage = "450 V"
[[target]]
quantity = "peak_current"
max = "100 A"
"""
ORDERS = (
    'orders = [{ number = 5, share = "6 %", phase = "180 deg" }, { number = 7, share = "8 %" }]'
)
KINDS = {
    "dc": 'kind = "dc"\nvoltage = "48 V"',
    "sine": 'kind = "sine"\nrms = "24 V"\nfrequency = "50 Hz"',
    "harmonics": f'kind = "harmonics"\nrms = "24 V"\nfrequency = "50 Hz"\n{ORDERS}',
    "ramp": 'kind = "ramp"\nvoltage = "48 V"\nrise_time = "50 us"',
    "pulse": 'kind = "pulse"\nvoltage = "48 V"\nwidth = "100 us"',
    "pulses": 'kind = "pulse"\nvoltage = "48 V"\nwidth = "100 us"\nperiod = "250 us"\ncount = 3',
    "train": (
        'kind = "pulse"\nvoltage = "48 V"\nwidth = "100 us"\nperiod = "250 us"\n'
        'count = "until steady"'
    ),
    "surge": 'kind = "surge"\nvoltage = "1 kV"\nfront_time = "1.2 us"\nhalf_value_time = "50 us"',
    "recorded": 'kind = "recorded"\nfile = "record.csv"',
}
#: What the sentence on the source begins with.
WORDS = {
    "dc": "Source: dc, 48 V", "sine": "Source: sine, 24 V rms",
    "harmonics": "Source: sine, 24 V rms (33.94 V peak), 50 Hz, with harmonics",
    "ramp": "Source: ramp, from 0 V to 48 V in 50 us", "pulse": "Source: one pulse of 48 V",
    "pulses": "Source: 3 pulses of 48 V", "train": "Source: pulses of 48 V until the loop",
    "surge": "Source: surge, 1 kV peak", "recorded": "Source: recorded, 401 points over 400 us",
}  # fmt: skip
COMMANDS = ["steady", "switch-on", "sweep", "spread", "check"]
ALTERNATING = ("sine", "harmonics")


def run(*words: str | Path) -> Result:
    return CliRunner().invoke(
        app, [str(word) for word in words], env={"COLUMNS": "100", "NO_COLOR": "1"}
    )


def sheet(folder: Path, kind: str, switch_on: str = "") -> Path:
    time = np.arange(401)
    rows = [f"{t},{24 * math.sin(t / 60):.5f}" for t in time]
    (folder / "record.csv").write_text("\n".join(["time [us], voltage [V]", *rows]))
    path = folder / f"{kind}.toml"
    path.write_text(f"{PARTS}[source]\n{KINDS[kind]}\n[switch_on]\n{switch_on}\n", encoding="utf-8")
    return path


def answer(command: str, path: Path) -> Result:
    few = ["--samples", "20"] if command in ("spread", "check") else []
    result = run(command, path, *few)
    assert result.exit_code in (0, 3), result.output
    return result


def document(command: str, path: Path) -> dict[str, Any]:
    few = ["--samples", "20"] if command in ("spread", "check") else []
    result = run(command, path, *few, "--json")
    assert result.exit_code in (0, 3), result.output
    return json.loads(result.stdout)  # type: ignore[no-any-return]


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize("kind", KINDS)
def test_every_command_answers_in_words_that_fit(kind: str, command: str, tmp_path: Path) -> None:
    result = answer(command, sheet(tmp_path, kind))
    assert result.stderr == ""
    assert WORDS[kind] in result.stdout.replace("\n", " ")
    assert not re.search(r"\b(nan|inf|None)\b", result.stdout)
    if kind not in ALTERNATING:
        assert "closing angle:" not in result.stdout
        assert "0 Hz" not in result.stdout
    if kind not in ("dc", "ramp"):
        assert not re.search(r"Source: dc|V dc, is", result.stdout)


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize("kind", KINDS)
def test_every_command_answers_in_json(kind: str, command: str, tmp_path: Path) -> None:
    found = document(command, sheet(tmp_path, kind))
    source = found["loop"]["source"]
    keys = {"kind", "amplitude", "rms", "frequency", "largest", "closing_angle", "orders"}
    assert keys <= set(source)
    assert source["kind"] == {"pulses": "pulse", "train": "pulse"}.get(kind, kind)
    assert (source["frequency"] == 50.0) is (kind in ALTERNATING)
    assert (source["rms"] is None) is (kind not in ("dc", *ALTERNATING))
    assert ("exceeded" in found) is (command in ("switch-on", "check"))
    assert "closings" not in found
    assert ("orders" in found) is (kind == "harmonics" and command in ("steady", "check"))


@pytest.mark.parametrize("kind", KINDS)
def test_limits_in_time_have_a_row_for_each_limit_on_a_peak(kind: str, tmp_path: Path) -> None:
    path = sheet(tmp_path, kind)
    rows = document("switch-on", path)["exceeded"]
    extra_low = 50 * math.sqrt(2) if kind in ALTERNATING else 120.0
    assert [(row["of"], row["limit"]) for row in rows] == [
        ("current", 100.0), ("current", 20.0), ("capacitor_voltage", 450.0),
        ("capacitor_voltage", pytest.approx(extra_low, rel=1e-15)),
    ]  # fmt: skip
    peaks = document("switch-on", path)["peaks"]
    for row in rows:
        signal = "current" if row["of"] == "current" else "capacitor"
        assert row["exceeded"] is (peaks[signal]["value"] > row["limit"])
        assert (row["first"] is not None) is row["exceeded"]
    text = answer("switch-on", path).stdout
    assert "Limits in time, nominal parts" in text
    assert "capacitor_voltage_exceeding_time" not in text


@pytest.mark.parametrize(
    ("closing", "worded", "numbered"),
    [
        ("random", "any (random)", "random"),
        (
            "0 deg ± 15 deg", "between -15 deg and 15 deg",
            {"low": -math.pi / 12, "high": math.pi / 12},
        ),
    ],
)  # fmt: skip
@pytest.mark.parametrize("kind", ALTERNATING)
def test_closings_that_are_left_to_chance(
    kind: str, closing: str, worded: str, numbered: Any, tmp_path: Path
) -> None:
    path = sheet(tmp_path, kind, f'closing_angle = "{closing}"')
    text = answer("switch-on", path).stdout
    assert f"closing angle: {worded}" in text.replace("\n", " ")
    assert "Peaks over closings" in text
    found = document("switch-on", path)
    angle = found["loop"]["source"]["closing_angle"]
    assert angle == (numbered if isinstance(numbered, str) else pytest.approx(numbered, rel=1e-15))
    assert set(found["closings"]) == {"current", "capacitor"}
    for signal, points in found["closings"].items():
        assert points["percent_1"] <= points["percent_50"] <= points["percent_99"]
        # the worst is above all but for what a peak is proved to
        assert points["percent_99"] <= points["worst"] * (1 + 1e-9)
        assert points["worst"] == found["peaks"][signal]["value"]
    assert "closings" not in document("steady", path)
    assert "closings" not in document("spread", path)


def test_the_worst_angle_has_no_distribution(tmp_path: Path) -> None:
    path = sheet(tmp_path, "sine", 'closing_angle = "worst"')
    assert "Peaks over closings" not in answer("switch-on", path).stdout
    assert "closings" not in document("switch-on", path)


def test_a_charge_of_either_polarity(tmp_path: Path) -> None:
    path = sheet(tmp_path, "dc", 'capacitor_voltage = "± 30 V"')
    assert "± 30 V, whichever polarity is worse" in answer("switch-on", path).stdout
    found = document("check", path)
    assert found["loop"]["either_polarity"] is True
    # Closing onto the other sign drives the larger current.
    assert found["peaks"]["current"]["polarity"] == -1.0
    # The nominal unit of the spread is that of the peaks.
    spread = next(row for row in found["spread"] if row["quantity"] == "peak_current")
    assert spread["nominal"] == pytest.approx(found["peaks"]["current"]["value"], rel=1e-9)


def test_check_from_python_says_the_same(tmp_path: Path) -> None:
    path = sheet(tmp_path, "harmonics", 'closing_angle = "random"')
    assert check(path, samples=20).document() == document("check", path)


def test_the_continuous_current_of_a_train_is_judged(tmp_path: Path) -> None:
    found = document("check", sheet(tmp_path, "train"))
    rated = next(row for row in found["targets"] if row["rating"] == "inductor.rated_current")
    # Between nothing and the peak, and the heat goes with its square.
    assert 0 < rated["nominal"] < found["peaks"]["current"]["value"]
    power = found["quantities"]["resistor_power"]["value"]
    assert power == pytest.approx(2.5 * rated["nominal"] ** 2, rel=1e-12)
    assert found["elements"]["capacitor"] == {"amplitude": None, "phase": None}


@pytest.mark.parametrize("command", ["check", "spread"])
def test_a_long_spread_is_announced(
    command: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = sheet(tmp_path, "recorded")
    # 401 points and 20 units
    monkeypatch.setattr("rlc.review._LONG", 401 * 20 - 1)
    said = (
        "Note: the spread takes a while: 20 units, each followed through 401 points of the source;"
        " --samples sets how many units\n"
    )
    assert run(command, path, "--samples", "20").stderr == said
    monkeypatch.setattr("rlc.review._LONG", 401 * 20)
    assert run(command, path, "--samples", "20").stderr == ""
    if command == "spread":
        # nothing is followed in time for this one
        monkeypatch.setattr("rlc.review._LONG", 0)
        assert run(command, path, "--quantity", "bandwidth").stderr == ""


def test_signs_of_ours_in_a_narrow_encoding(tmp_path: Path) -> None:
    from rlc.render.layout import _printable

    assert _printable("± 30 V ─", "ascii") == "+/- 30 V -"
    assert _printable("± 30 V ─", "utf-8") == "± 30 V ─"
