"""Pictures as files: same bytes, nothing overwritten, paths that are refused."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest
from matplotlib.image import imread
from pictures import CAUTIONS, INRUSH, TARGETS, audio, drawn

from rlc.errors import InputError
from rlc.render import plots
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant


@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf", ".PNG"])
def test_same_figure_gives_the_same_bytes(tmp_path, suffix):
    paths = [tmp_path / f"{name}{suffix}" for name in ("first", "second")]
    for path in paths:
        plots.save(plots.switch_on(Case(make_loop(**INRUSH), constant(24.0))), path)
    first, second = (path.read_bytes() for path in paths)
    assert first == second
    start = {".png": b"\x89PNG", ".svg": b"<?xml", ".pdf": b"%PDF"}[suffix.lower()]
    assert first.startswith(start)
    assert sorted(tmp_path.iterdir()) == sorted(paths)


def test_png_has_the_pixels_of_the_figure(tmp_path):
    """Another reader of PNG gives them back, to half of the 16 levels' distance."""
    figure = drawn(plots.state_plane(audio()))
    pixels = np.asarray(figure.canvas.buffer_rgba())[..., :3]
    plots.save(figure, tmp_path / "picture.png")
    read = imread(tmp_path / "picture.png")[..., :3] * 255
    assert read.shape == pixels.shape
    assert np.max(np.abs(read - pixels)) <= 17 / 2 + 1e-4
    assert len(np.unique(read.reshape(-1, 3), axis=0)) > 16


def test_png_is_small(tmp_path):
    path = tmp_path / "picture.png"
    plots.save(plots.frequency_response(audio(), TARGETS, audio(), CAUTIONS, "Horn"), path)
    assert path.stat().st_size < 120_000


def test_nothing_is_overwritten(tmp_path):
    path = tmp_path / "picture.svg"
    path.write_text("mine")
    with pytest.raises(InputError, match="nothing is overwritten"):
        plots.save(plots.state_plane(audio()), path)
    assert path.read_text() == "mine"


@pytest.mark.parametrize(
    ("name", "rule"),
    [
        ("picture.jpg", "must end with .png, .svg, .pdf"),
        ("picture", "must end with"),
        ("nowhere/picture.png", "cannot be written: No such file"),
        ("nowhere/picture.pdf", "cannot be written: No such file"),
        # cannot even be looked for
        (f"{'x' * 300}.png", "cannot be written: File name too long"),
    ],
)
def test_path_that_cannot_be_written(tmp_path, name, rule):
    with pytest.raises(InputError, match=rule):
        plots.save(plots.state_plane(audio()), tmp_path / name)
    assert not list(tmp_path.iterdir())


def test_directory_that_cannot_be_searched(tmp_path, monkeypatch):
    def refuse(path, *args, **kwargs):
        raise PermissionError(13, "Permission denied")

    figure = plots.state_plane(audio())
    for name in ("exists", "unlink"):
        monkeypatch.setattr(f"pathlib.Path.{name}", refuse)
    with pytest.raises(InputError, match="cannot be written: Permission denied"):
        plots.save(figure, tmp_path / "picture.png")
    monkeypatch.undo()
    assert not list(tmp_path.iterdir())


def test_no_global_state_of_matplotlib_is_touched(tmp_path):
    """Importing loads no matplotlib; drawing and saving load no pyplot."""
    program = f"""
import sys
from rlc.render import plots
assert "matplotlib" not in sys.modules
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant
case = Case(make_loop(resistance=1.0, inductance=1e-3, capacitance=1e-6), constant(1.0))
for number, suffix in enumerate((".png", ".svg", ".pdf")):
    plots.save(plots.switch_on(case), r"{tmp_path}/" + str(number) + suffix)
plots.frequency_response(case), plots.state_plane(case)
assert "matplotlib.figure" in sys.modules
assert "matplotlib.pyplot" not in sys.modules
"""
    subprocess.run([sys.executable, "-c", program], check=True)
