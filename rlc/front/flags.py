"""The flags that stand for values of a sheet. Listed once: the command line and errors read it."""

from __future__ import annotations

from typing import NamedTuple

#: Random units unless stated otherwise: enough to tell 99.9 % from 99 %, at seconds of work.
SAMPLES = 2000
SEED = 1


class Flag(NamedTuple):
    """One value that can be given without a sheet.

    Attributes
    ----------
    option : str
        As typed on the command line.
    table, key : str
        Where the value stands in a sheet.
    help : str
        What it is, with an example.
    """

    option: str
    table: str
    key: str
    help: str


FLAGS: tuple[Flag, ...] = (
    Flag("--resistance", "resistor", "value", 'Resistor, "12 ohm" or 4R7.'),
    Flag("--inductance", "inductor", "value", 'Inductor, "33 mH".'),
    Flag("--capacitance", "capacitor", "value", 'Capacitor, "1 uF" or 4n7.'),
    Flag("--winding-resistance", "inductor", "winding_resistance", "Of the inductor's winding."),
    Flag("--series-resistance", "capacitor", "series_resistance", "Inside the capacitor."),
    Flag("--load", "load", "resistance", "Resistance across the capacitor."),
    Flag("--source-rms", "source", "rms", 'Sine source, rms: "230 V".'),
    Flag("--source-amplitude", "source", "amplitude", 'Sine source, peak: "325 V".'),
    Flag("--source-dc", "source", "voltage", 'Constant source, stepped on: "24 V".'),
    Flag("--frequency", "source", "frequency", 'Of a sine source, "50 Hz".'),
    Flag("--source-resistance", "source", "resistance", "Inside the source."),
    Flag("--source-inductance", "source", "inductance", "Inside the source."),
    Flag(
        "--closing-angle", "switch_on", "closing_angle",
        'Of a sine at closing, from its rising zero: "30 deg", or worst.',
    ),
    Flag(
        "--capacitor-voltage", "switch_on", "capacitor_voltage",
        "On the capacitor before closing.",
    ),
    Flag("--initial-current", "switch_on", "initial_current", "In the loop at closing."),
)  # fmt: skip

#: The flags of `rlc spread` and `rlc check` alone.
TOLERANCE_FLAGS: tuple[Flag, ...] = (
    Flag("--resistance-tolerance", "resistor", "tolerance", 'Of the resistor, "1 %" or J.'),
    Flag("--inductance-tolerance", "inductor", "tolerance", 'Of the inductor, "10 %".'),
    Flag("--capacitance-tolerance", "capacitor", "tolerance", 'Of the capacitor, "-20 % / +80 %".'),
)

#: Of these a source has one; each says what kind of source it is.
SOURCE_LEVELS = {"rms": "sine", "amplitude": "sine", "voltage": "dc"}


def option_for(table: str, key: str) -> str:
    """The flag that stands for a value of a sheet, or nothing."""
    for flag in FLAGS + TOLERANCE_FLAGS:
        if (flag.table, flag.key) == (table, key):
            return flag.option
    return ""
