"""Each command in process: exit code, answer on stdout, talk on stderr, nothing else."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest
from typer.testing import CliRunner, Result

import rlc
from rlc.cli import app
from rlc.solver.quantities import REGISTER

EXAMPLES = Path(__file__).parents[1] / "examples"
LOOP = ["--resistance", "12 ohm", "--inductance", "33 mH", "--capacitance", "1u0"]
SINE = [*LOOP, "--source-rms", "24 V", "--frequency", "880 Hz"]
DC = [*LOOP, "--source-dc", "24 V"]


def run(*words: str | Path) -> Result:
    # A fixed width, and no colour codes, wherever the tests run.
    return CliRunner().invoke(
        app, [str(word) for word in words], env={"COLUMNS": "100", "NO_COLOR": "1"}
    )


def document(*words: str | Path) -> dict[str, Any]:
    result = run(*words, "--json")
    assert result.exit_code in (0, 3), result.output

    def refuse(constant: str) -> None:
        raise AssertionError(f"{constant} is no JSON")

    return json.loads(result.stdout, parse_constant=refuse)  # type: ignore[no-any-return]


@pytest.mark.parametrize("command", ["steady", "switch-on", "sweep", "spread", "check"])
@pytest.mark.parametrize("source", [SINE, DC], ids=["sine", "dc"])
def test_every_command_answers_from_flags_alone(command: str, source: list[str]) -> None:
    result = run(command, *source)
    assert result.exit_code == 0, result.output
    assert result.stderr == ""
    # L C = 33e-9: 1/(2 pi sqrt(33e-9)) = 876.1 Hz
    assert "876.1 Hz" in result.stdout
    assert not re.search(r"\b(nan|inf)\b", result.stdout)


def test_the_json_contract_of_check() -> None:
    found = document("check", EXAMPLES / "fog_signal.toml", "--samples", "50", "--seed", "3")
    contract = {
        "title", "sheet", "version", "seed", "samples", "loop", "quantities", "targets", "cautions",
    }  # fmt: skip
    assert contract <= set(found)
    assert (found["seed"], found["samples"]) == (3, 50)
    assert list(found["quantities"]) == list(REGISTER)
    assert set(found["quantities"]["bandwidth"]) == {"value", "unit"}
    assert found["quantities"]["bandwidth"]["unit"] == "Hz"
    for target in found["targets"]:
        assert {
            "quantity", "at", "across", "min", "max", "nominal",
            "worst_low", "worst_high", "yield", "verdict",
        } <= set(target)  # fmt: skip
        assert set(target["yield"]) == {"value", "low", "high", "confidence"}
        assert target["yield"]["confidence"] == 0.95
        assert target["verdict"] in ("holds", "holds by yield", "fails")
    assert all(set(caution) == {"id", "text"} for caution in found["cautions"])
    assert found["loop"]["total_resistance"] == pytest.approx(12.8, rel=1e-15)


def test_what_does_not_exist_is_null() -> None:
    found = document("check", *DC[:-1], "24 V", "--resistance", "1 kohm")
    # Overdamped without a load: no ringing, and the steady state has no impedance.
    assert found["quantities"]["ringing_frequency"]["value"] is None
    assert found["quantities"]["impedance"]["value"] is None
    assert found["loop"]["load_resistance"] is None


def test_parts_of_the_contract_from_the_other_commands() -> None:
    steady = document("steady", *SINE)
    assert {"loop", "quantities", "cautions"} <= set(steady)
    assert "targets" not in steady
    assert "peak_current" not in steady["quantities"]
    switch_on = document("switch-on", *SINE)
    assert "peak_current" in switch_on["quantities"]
    assert "current" not in switch_on["quantities"]
    spread = document("spread", *SINE, "--resistance-tolerance", "5 %", "--quantity", "bandwidth")
    assert [each["quantity"] for each in spread["spread"]] == ["bandwidth"]
    assert spread["targets"] == []
    sweep = document("sweep", *SINE, "--start", "100 Hz", "--stop", "1 kHz", "--points", "7")
    # Seven steps; beside them resonance, both band edges and the source.
    assert {len(column) for column in sweep["sweep"].values()} == {7 + 4}


def test_samples_and_seed_govern_the_spread() -> None:
    sheet = EXAMPLES / "signal_lamp_inlet.toml"
    one = document("spread", sheet, "--samples", "200")
    assert one == document("spread", sheet, "--samples", "200", "--seed", "1")
    assert one != document("spread", sheet, "--samples", "200", "--seed", "2")


def test_a_flag_beside_a_sheet_replaces_its_value_and_the_output_says_so() -> None:
    sheet = EXAMPLES / "fog_signal.toml"
    result = run("steady", sheet, "--resistance", "20 ohm")
    assert result.exit_code == 0
    said = 'Changed: --resistance replaces resistor.value = "10 ohm" by "20 ohm"'
    assert said in result.stdout.splitlines()
    found = document("steady", sheet, "--resistance", "20 ohm")
    assert found["loop"]["resistance"] == 20.0
    assert found["changed"] == [
        {"option": "--resistance", "key": "resistor.value", "old": "10 ohm", "new": "20 ohm"}
    ]


def test_a_missed_target_exits_with_3() -> None:
    for command in ("check", "spread"):
        result = run(
            command, EXAMPLES / "fog_signal.toml", "--resistance", "20 ohm", "--samples", "10"
        )
        assert result.exit_code == 3
        assert "fails" in result.stdout


def test_a_quantity_without_limits_is_no_target() -> None:
    overdamped = ["--resistance", "1 kohm", *DC[2:]]
    result = run("spread", *overdamped, "--quantity", "ringing_frequency")
    assert result.exit_code == 0
    assert "nothing is judged" in result.stdout


def test_version() -> None:
    assert run("--version").stdout == f"rlc {rlc.__version__}\n"


def test_worst_closing_angles_are_both_reported() -> None:
    found = document("switch-on", *SINE, "--closing-angle", "worst")
    angles = [
        found["quantities"][f"worst_closing_angle_{of}"]["value"]
        for of in ("current", "capacitor_voltage")
    ]
    assert None not in angles
    given = document("switch-on", *SINE, "--closing-angle", "30 deg")
    assert given["quantities"]["worst_closing_angle_current"]["value"] is None


@pytest.mark.parametrize("kind", ["filter", "inrush", "tolerance"])
def test_new_sheets_pass_check_as_they_stand(kind: str, tmp_path: Path) -> None:
    path = tmp_path / "mine.toml"
    assert run("new", kind, path).exit_code == 0
    result = run("check", path)
    assert result.exit_code == 0, result.output
    assert result.stderr == ""
    before = path.read_bytes()
    again = run("new", kind, path)
    assert again.exit_code == 2
    assert "exists, and nothing is overwritten" in again.stderr
    assert path.read_bytes() == before


def test_new_writes_its_kind_here_by_default(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    assert run("new", "inrush").exit_code == 0
    assert [path.name for path in tmp_path.iterdir()] == ["inrush.toml"]


def test_quantities_lists_the_register() -> None:
    result = run("quantities")
    assert result.exit_code == 0
    for entry in REGISTER.values():
        assert entry.name in result.stdout
        assert entry.symbol in result.stdout
    one = run("quantities", "let_through").stdout
    for word in ("symbol", "unit", "convention", "definition", "formula", "source", "A^2 s"):
        assert word in one
    rows = json.loads(run("quantities", "--json").stdout)["quantities"]
    assert [row["name"] for row in rows] == list(REGISTER)


def test_pictures_are_saved_and_never_overwritten(tmp_path: Path) -> None:
    sheet = EXAMPLES / "signal_lamp_inlet.toml"
    folder = tmp_path / "pictures"
    result = run("check", sheet, "--plots", folder, "--samples", "50")
    assert result.exit_code == 0, result.output
    names = sorted(path.name for path in folder.iterdir())
    assert names == [
        "frequency-response.png",
        "spread-1-peak_capacitor_voltage.png",
        "spread-2-peak_current.png",
        "spread-3-settling_time.png",
        "spread-4-peak_capacitor_voltage.png",
        "spread-5-let_through.png",
        "state-plane.png",
        "switch-on.png",
    ]
    assert result.stderr.count("Saved ") == len(names)
    before = {path: path.read_bytes() for path in folder.iterdir()}
    again = run("switch-on", sheet, "--plots", folder)
    assert again.exit_code == 2
    assert again.stdout == ""
    assert "would overwrite" in again.stderr
    assert {path: path.read_bytes() for path in folder.iterdir()} == before


@pytest.mark.parametrize(("suffix", "start"), [("svg", b"<?xml"), ("pdf", b"%PDF")])
def test_other_picture_formats(tmp_path: Path, suffix: str, start: bytes) -> None:
    assert run("sweep", *SINE, "--plots", tmp_path, "--picture-format", suffix).exit_code == 0
    assert (tmp_path / f"frequency-response.{suffix}").read_bytes().startswith(start)


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["check", "none.toml"], "none.toml: does not exist"),
        (["check", "."], "is a directory"),
        (["steady", *LOOP], "--source-rms, --source-amplitude or --source-dc: is missing"),
        (["steady", *SINE, "--source-dc", "1 V"], "are given together. A source has one of them"),
        (["steady", *DC, "--frequency", "50 Hz"], "does not go with --source-dc"),
        (["steady", *DC, "--load", "10"], "--load = '10': has no unit"),
        (["switch-on", *SINE, "--closing-angle", "30"], "--closing-angle = '30': has no unit"),
        (["sweep", *SINE, "--start", "1 rad/s"], "--start = '1 rad/s': is an angular rate"),
        (["sweep", *SINE, "--start", "2 kHz", "--stop", "1 kHz"], "must be above zero and below"),
        (["sweep", *SINE, "--points", "1"], "points = 1: must be from 2 to 100000"),
        (["spread", *SINE, "--samples", "-5"], "samples = -5: must be a whole number from 0"),
        (["spread", *SINE, "--quantity", "bandwith"], 'Did you mean "bandwidth"?'),
        (["quantities", "gian"], 'Did you mean "gain"?'),
        (["new", "filter", "none/there.toml"], "cannot be written: No such file or directory"),
        (["new", "phono"], "phono"),
        (["steady", *DC, "--loud"], "--loud"),
        (["steady", "a.toml", "b.toml"], "b.toml"),
    ],
)
def test_bad_input_is_one_message_and_nothing_else(
    words: list[str], said: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    result = run(*words)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert said in result.stderr
    assert "Traceback" not in result.stderr
    assert list(tmp_path.iterdir()) == []


def test_a_slip_that_may_be_meant_is_noted_on_stderr() -> None:
    result = run("steady", *SINE[:2], "--inductance", "10 MH", *SINE[4:])
    assert result.exit_code == 0
    assert "Note: --inductance: inductance of 10 MH is unusual" in result.stderr


@pytest.mark.parametrize("width", ["40", "80", "200"])
def test_no_value_is_ever_cut(width: str) -> None:
    sheet = EXAMPLES / "fog_signal.toml"
    result = CliRunner().invoke(
        app, ["check", str(sheet), "--samples", "20"], env={"COLUMNS": width, "NO_COLOR": "1"}
    )
    assert "\u2026" not in result.stdout
    for text in ("12.8 ohm", "capacitor_voltage_maximum_frequency", "min 840 Hz", "11.8 %"):
        assert text in result.stdout
