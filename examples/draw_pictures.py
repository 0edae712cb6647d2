"""Draw the README's pictures: python examples/draw_pictures.py [DIRECTORY]."""

from __future__ import annotations

import sys
from pathlib import Path

import rlc
from rlc.render.plots import save

HERE = Path(__file__).parent

PICTURES = {
    "fog_signal": "frequency-response",
    "signal_lamp_inlet": "switch-on",
    "capacitor_step": "switch-on",
}


def draw(directory: Path) -> list[Path]:
    """Save one picture per example, in place of an older one."""
    directory.mkdir(parents=True, exist_ok=True)
    drawn = []
    for example, picture in PICTURES.items():
        review = rlc.check(HERE / f"{example}.toml")
        path = directory / f"{example}-{picture}.png"
        path.unlink(missing_ok=True)
        save(review.pictures([picture])[picture](), path)
        drawn.append(path)
    return drawn


if __name__ == "__main__":
    for saved in draw(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE / "pictures"):
        print(saved)
