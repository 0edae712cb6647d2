"""A sheet around a source that is asked for, and what is wrong with it."""

from __future__ import annotations

from pathlib import Path

import pytest

from rlc.errors import SheetError
from rlc.front.load import load

PARTS = """\
[resistor]
value = "12 ohm"
[inductor]
value = "33 mH"
[capacitor]
value = "1 uF"
[source]
"""
#: Line of the first key below [source].
FIRST = PARTS.count("\n") + 1


def write(folder: Path, source: str) -> Path:
    path = folder / "sheet.toml"
    path.write_text(PARTS + source, encoding="utf-8")
    return path


def problems(folder: Path, source: str, flags: dict[str, str] | None = None) -> list[str]:
    """What is said of a sheet, each line without the path that it begins with."""
    path = write(folder, source)
    with pytest.raises(SheetError) as caught:
        load(path, flags)
    return [line.removeprefix(f"{path}:") for line in str(caught.value).splitlines()]
