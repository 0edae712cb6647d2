"""Redraw the README's pictures and run its commands again: python examples/refresh.py."""

from __future__ import annotations

import contextlib
import io
import os
import re
import shlex
from pathlib import Path

import rlc
from rlc.cli import app
from rlc.render.plots import save

ROOT = Path(__file__).parents[1]

PICTURES = {
    "fog_signal": "frequency-response",
    "signal_lamp_inlet": "switch-on",
    "capacitor_step": "switch-on",
}

# A command line that follows a dollar sign, and what it printed.
_EXAMPLE = re.compile(r"(?<=```console\n)\$ rlc (?P<line>.*)\n(?P<output>(?s:.*?))(?=```)")


def draw(directory: Path) -> list[Path]:
    """Save one picture per example, in place of an older one."""
    directory.mkdir(parents=True, exist_ok=True)
    drawn = []
    for example, picture in PICTURES.items():
        review = rlc.check(ROOT / "examples" / f"{example}.toml")
        path = directory / f"{example}-{picture}.png"
        path.unlink(missing_ok=True)
        save(review.pictures([picture])[picture](), path)
        drawn.append(path)
    return drawn


def answer(line: str) -> str:
    """What a command prints to a terminal of 80 columns, without blanks at line ends."""
    printed = io.StringIO()
    os.environ["COLUMNS"] = "80"
    with contextlib.chdir(ROOT), contextlib.redirect_stdout(printed):
        app(shlex.split(line), standalone_mode=False)
    return "".join(f"{row.rstrip()}\n" for row in printed.getvalue().splitlines())


def refreshed(text: str) -> str:
    """The text of a README with every command run again."""
    return _EXAMPLE.sub(lambda found: f"$ rlc {found['line']}\n{answer(found['line'])}", text)


if __name__ == "__main__":
    for saved in draw(ROOT / "examples" / "pictures"):
        print(saved)
    readme = ROOT / "README.md"
    readme.write_text(refreshed(readme.read_text(encoding="utf-8")), encoding="utf-8")
