"""What the commands share: headings, exit codes, and pictures that cannot be saved."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

from rlc.cli import app

#: L = C = 1 and R = 1 within 10 %: a damping ratio of 0.5, from 0.45 to 0.55.
SHEET = """title = "Unit loop"
[resistor]
value = "1 ohm"
tolerance = "10 %"
[inductor]
value = "1 H"
[capacitor]
value = "1 F"
[source]
kind = "sine"
rms = "1 V"
frequency = "0.1 Hz"
[switch_on]
closing_angle = "30 deg"
"""
LOOP = ["--resistance", "1 ohm", "--inductance", "1 H", "--capacitance", "1 F"]
DC = [*LOOP, "--source-dc", "-1 V"]
SINE = [*LOOP, "--source-rms", "1 V", "--frequency", "0.1 Hz"]


def run(*words: str | Path, width: int = 100) -> Result:
    return CliRunner().invoke(
        app, [str(word) for word in words], env={"COLUMNS": str(width), "NO_COLOR": "1"}
    )


def sheet(folder: Path, *limits: str) -> Path:
    """A sheet with these limits on the damping ratio."""
    path = folder / "unit.toml"
    targets = [f'[[target]]\nquantity = "damping_ratio"\n{limit}\n' for limit in limits]
    path.write_text(SHEET + "".join(targets))
    return path


def refused(result: Result, said: str) -> None:
    """One message on stderr, exit code 2, no trace and no answer."""
    assert result.exit_code == 2
    assert isinstance(result.exception, SystemExit)
    assert result.stdout == ""
    assert result.stderr == said + "\n"


# --- pictures


def test_a_file_in_the_way_of_the_directory(tmp_path: Path) -> None:
    blocked = tmp_path / "pictures"
    blocked.write_text("mine")
    result = run("steady", *SINE, "--plots", blocked)
    refused(result, f"--plots = '{blocked}': cannot be made: File exists")
    assert blocked.read_text() == "mine"


def test_a_file_in_the_way_above_the_directory(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("mine")
    blocked = tmp_path / "file" / "pictures"
    result = run("steady", *SINE, "--plots", blocked)
    refused(result, f"--plots = '{blocked}': cannot be made: Not a directory")


def test_a_directory_that_may_not_be_searched(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """As for anyone but root: whether a picture exists there cannot be asked."""
    exists = Path.exists

    def forbidden(path: Path, **given: bool) -> bool:
        if path.parent == tmp_path / "closed":
            raise PermissionError(13, "Permission denied", str(path))
        return exists(path, **given)

    (tmp_path / "closed").mkdir()
    monkeypatch.setattr(Path, "exists", forbidden)
    result = run("steady", *SINE, "--plots", tmp_path / "closed")
    refused(result, f"--plots = '{tmp_path / 'closed'}': cannot be made: Permission denied")
    assert list((tmp_path / "closed").iterdir()) == []


def test_a_directory_is_made_with_those_above_it(tmp_path: Path) -> None:
    folder = tmp_path / "a" / "b"
    result = run("steady", *SINE, "--plots", folder, "--picture-format", "svg")
    assert result.exit_code == 0, result.output
    assert [path.name for path in folder.iterdir()] == ["frequency-response.svg"]
    assert result.stderr == f"Saved {folder / 'frequency-response.svg'}\n"
    assert result.stdout
    again = run("switch-on", *SINE, "--plots", folder)
    assert again.exit_code == 0, again.output
    assert len(list(folder.iterdir())) == 3


def test_what_would_be_overwritten_is_named(tmp_path: Path) -> None:
    (tmp_path / "state-plane.png").write_text("mine")
    result = run("switch-on", *SINE, "--plots", tmp_path)
    said = f"would overwrite {tmp_path / 'state-plane.png'}. Name another directory"
    refused(result, f"--plots = '{tmp_path}': {said}")
    assert [path.name for path in tmp_path.iterdir()] == ["state-plane.png"]


# --- verdicts


@pytest.mark.parametrize("command", ["check", "spread"])
@pytest.mark.parametrize(
    ("limits", "code", "summary"),
    [
        (["max = 0.6"], 0, "Targets: 1 in all, holds 1, holds by yield 0, fails 0."),
        # The worst case is 0.55; nine units in ten are below 0.54.
        (["max = 0.54"], 3, "Targets: 1 in all, holds 0, holds by yield 0, fails 1."),
        (
            ['max = 0.54\nyield = "50 %"'], 0,
            "Targets: 1 in all, holds 0, holds by yield 1, fails 0.",
        ),
        (
            ["max = 0.6", "min = 0.5", "max = 0.4"], 3,
            "Targets: 3 in all, holds 1, holds by yield 0, fails 2.",
        ),
        ([], 0, "No target and no rating is stated: nothing is judged."),
    ],
)  # fmt: skip
def test_the_exit_code_is_the_verdict(
    tmp_path: Path, command: str, limits: list[str], code: int, summary: str
) -> None:
    result = run(command, sheet(tmp_path, *limits))
    assert result.exit_code == code, result.output
    assert summary in result.stdout.splitlines()
    assert result.stderr == ""
    assert run(command, sheet(tmp_path, *limits), "--json").exit_code == code


def test_a_target_that_was_not_looked_at_fails_nothing(tmp_path: Path) -> None:
    path = sheet(tmp_path, "max = 0.54")
    assert run("spread", path, "--quantity", "bandwidth").exit_code == 0
    named = run("spread", path, "--quantity", "bandwidth", "--quantity", "damping_ratio")
    assert named.exit_code == 3


def test_spread_says_how_it_was_found(tmp_path: Path) -> None:
    path = sheet(tmp_path)
    out = run("spread", path, "--samples", "30", "--seed", "7").stdout
    assert "30 random units, seed 7; worst case searched among corners" in out
    usual = (
        "natural_frequency", "bandwidth", "quality_factor", "peak_current",
        "peak_capacitor_voltage",
    )  # fmt: skip
    lines = out.splitlines()
    spread = lines[lines.index("Spread") :]
    assert [name for name in spread if name in usual] == list(usual)
    # What has no limits is no target.
    assert "Targets" not in lines
    without = run("spread", path, "--samples", "0").stdout.splitlines()
    assert "Spread" not in without
    exact = run("spread", *SINE).stdout.splitlines()
    assert "No part has a tolerance: there is no spread." in exact
    assert "Spread" not in exact


# --- headings


def test_the_heading_names_the_sheet_and_each_change(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    sheet(tmp_path)
    monkeypatch.chdir(tmp_path)
    lines = run("steady", "unit.toml").stdout.splitlines()
    assert lines[:3] == ["Unit loop", "Sheet: unit.toml", ""]
    given = ["--resistance", "2 ohm", "--load", "5 ohm", "--source-dc", "-1 V"]
    lines = run("steady", "unit.toml", *given).stdout.splitlines()
    assert lines[: lines.index("")] == [
        "Unit loop",
        "Sheet: unit.toml",
        'Changed: --resistance replaces resistor.value = "1 ohm" by "2 ohm"',
        'Changed: --load adds load.resistance = "5 ohm"',
        'Changed: --source-dc adds source.voltage = "-1 V"',
        'Changed: --source-dc replaces source.kind = "sine" by "dc"',
        'Changed: --source-dc drops source.rms = "1 V"',
        'Changed: --source-dc drops source.frequency = "0.1 Hz"',
        'Changed: --source-dc drops switch_on.closing_angle = "30 deg"',
    ]
    assert any(line.startswith("Source: dc, -1 V stepped on at t = 0") for line in lines)


def test_flags_alone_have_no_heading() -> None:
    lines = run("steady", *SINE).stdout.splitlines()
    assert lines[0].strip() == "Loop"
    assert not [line for line in lines if line.startswith(("Sheet:", "Changed:"))]


# --- what each command shows


@pytest.mark.parametrize(
    ("command", "source", "shown"),
    [
        ("steady", SINE, ["Steady state by element", "Steady state"]),
        ("steady", DC, ["Final state"]),
        ("switch-on", SINE, ["Switch-on peaks", "Switch-on", "First extrema, closed at 0 deg"]),
        ("switch-on", DC, ["Switch-on peaks", "Switch-on", "First extrema"]),
        ("sweep", SINE, ["Frequency response"]),
        ("spread", SINE, []),
        ("check", DC, ["Final state", "Switch-on peaks", "Switch-on"]),
        (
            "check", SINE,
            ["Steady state by element", "Steady state", "Switch-on peaks", "Switch-on"],
        ),
    ],
)  # fmt: skip
def test_tables_of_each_command(command: str, source: list[str], shown: list[str]) -> None:
    every = {
        "Final state", "Steady state by element", "Steady state", "Switch-on peaks", "Switch-on",
        "First extrema", "First extrema, closed at 0 deg", "Frequency response",
        "Loop", "Frequencies", "Loop quantities", "Cautions",
    }  # fmt: skip
    lines = [line.strip() for line in run(command, *source).stdout.splitlines()]
    titles = [line for line in lines if line in every]
    assert titles == ["Loop", "Frequencies", "Loop quantities", *shown, "Cautions"]


def test_a_negative_level_keeps_its_sign_from_flag_to_answer() -> None:
    """-1 V over 1 ohm and a load of 1 ohm: -0.5 A, -0.5 V, 0.5 W."""
    result = run("steady", *DC, "--load", "1 ohm", "--initial-current", "-2 A")
    lines = [line.split() for line in result.stdout.splitlines()]
    for row in ("capacitor -500 mV", "current -500 mA", "power from the source 500 mW"):
        assert row.split() in lines
    assert "stepped on at t = 0; 0 V on the capacitor at closing; -2 A in" in result.stdout


def test_a_sweep_keeps_to_its_ends() -> None:
    ends = ["--start", "10 mHz", "--stop", "1 Hz", "--points", "3"]
    found = json.loads(run("sweep", *SINE, *ends, "--json").stdout)["sweep"]["frequency"]
    assert (found[0], found[-1]) == (0.01, 1.0)
    # The middle of the ratio, 0.1 Hz, is the source itself; resonance and its edges are put in.
    assert len(found) == 3 + 3
    lines = run("sweep", *SINE, *ends).stdout.splitlines()
    marks = [line.split()[-1] for line in lines if line.strip()]
    assert [mark for mark in marks if mark in ("f_0", "f_1", "f_2", "source")] == [
        "f_1", "source", "f_0", "f_2",
    ]  # fmt: skip
