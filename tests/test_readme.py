"""The README and the examples: what they show is what the tool does."""

from __future__ import annotations

import importlib.util
import json
import re
import shutil
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest
from typer.testing import CliRunner

from rlc.cli import app

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
EXAMPLES = sorted((ROOT / "examples").glob("*.toml"))


@pytest.fixture(scope="module")
def refresh() -> ModuleType:
    spec = importlib.util.spec_from_file_location("refresh", ROOT / "examples" / "refresh.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_every_command_prints_what_the_readme_shows(
    refresh: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    """After a change that is meant: python examples/refresh.py."""
    monkeypatch.setenv("COLUMNS", "80")
    assert README.count("```console") == len(re.findall(r"\$ rlc ", README)) == 4
    assert refresh.refreshed(README) == README


@pytest.mark.parametrize("sheet", EXAMPLES, ids=lambda path: path.stem)
def test_examples_hold_their_targets(sheet: Path) -> None:
    result = CliRunner().invoke(app, ["check", str(sheet), "--json"])
    assert result.exit_code == 0, result.output
    assert result.stderr == ""
    found = json.loads(result.stdout)
    assert found["title"]
    assert found["targets"]
    assert found["cautions"]


def test_one_example_for_each_verdict_that_passes() -> None:
    result = CliRunner().invoke(app, ["check", str(ROOT / "examples/fog_signal.toml"), "--json"])
    verdicts = {target["verdict"] for target in json.loads(result.stdout)["targets"]}
    assert verdicts == {"holds", "holds by yield"}


def different_tiles(new: np.ndarray, old: np.ndarray) -> float:
    """Share of tiles of 8 by 8 pixels whose mean shade differs."""
    rows, columns = (min(new.shape[k], old.shape[k]) // 8 for k in (0, 1))
    shades = [
        picture[: 8 * rows, : 8 * columns, :3].reshape(rows, 8, columns, 8, 3).mean(axis=(1, 3, 4))
        for picture in (new, old)
    ]
    return float(np.mean(np.abs(shades[0] - shades[1]) > 0.05))


def test_a_curve_that_moves_is_seen() -> None:
    """A line of two pixels, once across a picture of this size, and moved by ten."""
    old, new = np.ones((800, 800, 3)), np.ones((800, 800, 3))
    old[400:402], new[410:412] = 0.0, 0.0
    assert different_tiles(old, old) == 0.0
    assert different_tiles(new, old) >= 0.01


def test_pictures_are_those_that_the_script_draws(refresh: ModuleType, tmp_path: Path) -> None:
    from matplotlib.image import imread

    drawn = refresh.draw(tmp_path)
    kept = ROOT / "examples" / "pictures"
    assert sorted(path.name for path in drawn) == sorted(path.name for path in kept.iterdir())
    for path in drawn:
        assert f"examples/pictures/{path.name}" in README
        new, old = imread(path), imread(kept / path.name)
        assert new.shape[1] == old.shape[1]
        assert abs(new.shape[0] - old.shape[0]) <= 20
        # Another version of the drawing library may move letters by a pixel, never a curve by a
        # tile of eight.
        assert different_tiles(new, old) < 0.01
        assert path.stat().st_size < 150_000


def test_the_python_example_runs(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(ROOT)
    (code,) = re.findall(r"```python\n(.*?)```", README, flags=re.DOTALL)
    exec(compile(code, "README.md", "exec"), {})
    assert "holds" in capsys.readouterr().out


def test_the_error_messages_are_those_of_the_tool(tmp_path: Path) -> None:
    text = (ROOT / "rlc" / "front" / "starters" / "filter.toml").read_text(encoding="utf-8")
    path = tmp_path / "filter.toml"
    for right, wrong in (
        ('"15 ohm"', '"12,5 ohm"'), ('"10 mH"', '"10 mh"'), ('"bandwidth"', '"bandwith"'),
    ):  # fmt: skip
        assert text.count(right) == 1
        text = text.replace(right, wrong)
    path.write_text(text, encoding="utf-8")
    result = CliRunner().invoke(app, ["check", str(path)])
    (shown,) = re.findall(r"```text\n(.*?)```", README, flags=re.DOTALL)
    said = [line.removeprefix(f"{tmp_path}/") for line in result.stderr.splitlines()]
    starts = [line.removesuffix("...").rstrip() for line in shown.splitlines()]
    assert len(said) == len(starts)
    for line, start in zip(said, starts, strict=True):
        assert line.startswith(start)


def test_the_two_setup_lines_stand_alone() -> None:
    lines = re.findall(r"```sh\n(.*?)\n```", README, flags=re.DOTALL)
    assert len(lines) == 2
    for line in lines:
        assert "\n" not in line
        assert line.startswith("python3 -m venv .venv && .venv/bin/pip install")
    assert (ROOT / lines[0].split()[-1]).is_file()


def test_links_in_the_readme_lead_somewhere() -> None:
    headings = {
        "#" + line.lstrip("# ").lower().replace(" ", "-")
        for line in README.splitlines()
        if line.startswith("#")
    }
    for target in re.findall(r"\]\(([^)]+)\)", README):
        assert target in headings or (ROOT / target).exists(), target


def test_the_source_and_the_record_are_read_as_shown(tmp_path: Path) -> None:
    (table,) = re.findall(r"```toml\n(.*?)```", README, flags=re.DOTALL)
    (record,) = re.findall(r"```csv\n(.*?)```", README, flags=re.DOTALL)
    parts = (ROOT / "examples" / "fog_signal.toml").read_text(encoding="utf-8")
    parts = parts[: parts.index("[source]")]
    (tmp_path / "record.csv").write_text(record, encoding="utf-8")
    recorded = '[source]\nkind = "recorded"\nfile = "record.csv"\n'
    for source in (table, recorded):
        path = tmp_path / "sheet.toml"
        path.write_text(parts + source, encoding="utf-8")
        result = CliRunner().invoke(app, ["switch-on", str(path)])
        assert result.exit_code == 0, result.stderr


def test_the_project_stays_as_the_tests_found_it(tmp_path: Path) -> None:
    """A sheet that is checked is only read."""
    copy = shutil.copy(EXAMPLES[0], tmp_path / "sheet.toml")
    before = Path(copy).read_bytes()
    CliRunner().invoke(app, ["check", str(copy)])
    assert Path(copy).read_bytes() == before
    assert [path.name for path in tmp_path.iterdir()] == ["sheet.toml"]
