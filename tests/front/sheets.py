"""A sheet around a source that is asked for, and what is wrong with it."""

from __future__ import annotations

from pathlib import Path

import pytest

from rlc.errors import SheetError
from rlc.front.load import load

#: Every table and nearly every key.
GOOD = """\
title = "Buoy light"
[resistor]
value = "12 ohm"
tolerance = "1 %"
rated_power = "5 W"
[inductor]
value = "33 mH"
tolerance = "0.5 mH"
winding_resistance = "2.2 ohm"
rated_current = "0.8 A"
saturation_current = "2 A"
[capacitor]
value = "1u0"
tolerance = "-20 % / +80 %"
series_resistance = "0.1 ohm"
rated_voltage = "250 V"
rated_voltage_rms = "160 V"
[load]
resistance = "10 kohm"
[source]
kind = "sine"
rms = "24 V"
frequency = "880 Hz"
resistance = "0.5 ohm"
inductance = "10 uH"
[switch_on]
closing_angle = "30 deg"
capacitor_voltage = "-5 V"
initial_current = "10 mA"
[[target]]
quantity = "bandwidth"
max = "80 Hz"
yield = "99 %"
[[target]]
quantity = "gain"
across = "resistor"
at = "300 Hz"
max = 0.03
"""

PARTS = """\
[resistor]
value = "12 ohm"
[inductor]
value = "33 mH"
[capacitor]
value = "1 uF"
[source]
"""


def write_sheet(folder: Path, text: str) -> Path:
    """Write a whole sheet."""
    path = folder / "sheet.toml"
    path.write_text(text, encoding="utf-8")
    return path


def write(folder: Path, source: str) -> Path:
    """Write a sheet from what stands below its [source]."""
    return write_sheet(folder, PARTS + source)


def problems(folder: Path, source: str, flags: dict[str, str] | None = None) -> list[str]:
    """What is said of a sheet, each line without the path that it begins with."""
    path = write(folder, source)
    with pytest.raises(SheetError) as caught:
        load(path, flags)
    return [line.removeprefix(f"{path}:") for line in str(caught.value).splitlines()]
