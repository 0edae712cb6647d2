"""The flags that stand for values of a sheet. Listed once: the command line and errors read it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

from rlc.errors import InputError
from rlc.front.door import ChargeDoor, ClosingAngleDoor, Door

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
    door : Door
        How its text is read; of a tolerance, how the value itself is read.
    help : str
        What it is, with an example.
    """

    option: str
    table: str
    key: str
    door: Door
    help: str


_OHMS, _VOLTS, _ABOVE = Door("resistance", "zero"), Door("voltage"), Door("voltage", "above zero")
_R, _L, _C = _OHMS, Door("inductance", "above zero"), Door("capacitance", "above zero")

FLAGS: tuple[Flag, ...] = (
    Flag("--resistance", "resistor", "value", _R, 'Resistor, "12 ohm" or 4R7.'),
    Flag("--inductance", "inductor", "value", _L, 'Inductor, "33 mH".'),
    Flag("--capacitance", "capacitor", "value", _C, 'Capacitor, "1 uF" or 4n7.'),
    Flag(
        "--winding-resistance", "inductor", "winding_resistance", _OHMS,
        "Of the inductor's winding.",
    ),
    Flag(
        "--series-resistance", "capacitor", "series_resistance", _OHMS, "Inside the capacitor.",
    ),
    Flag(
        "--load", "load", "resistance", Door("resistance", "above zero"),
        "Resistance across the capacitor.",
    ),
    Flag("--source-rms", "source", "rms", _ABOVE, 'Sine source, rms: "230 V".'),
    Flag("--source-amplitude", "source", "amplitude", _ABOVE, 'Sine source, peak: "325 V".'),
    Flag("--source-dc", "source", "voltage", _VOLTS, 'Constant source, stepped on: "24 V".'),
    Flag(
        "--frequency", "source", "frequency", Door("frequency", "above zero"),
        'Of a sine source, "50 Hz".',
    ),
    Flag("--source-resistance", "source", "resistance", _OHMS, "Inside the source."),
    Flag(
        "--source-inductance", "source", "inductance", Door("inductance", "zero"),
        "Inside the source.",
    ),
    Flag(
        "--closing-angle", "switch_on", "closing_angle", ClosingAngleDoor(),
        'Of a sine at closing, from its rising zero: "30 deg", "0 deg +- 15 deg", random, worst.',
    ),
    Flag(
        "--capacitor-voltage", "switch_on", "capacitor_voltage", ChargeDoor(),
        'On the capacitor before closing: "-5 V"; of either polarity: "+- 325 V".',
    ),
    Flag(
        "--initial-current", "switch_on", "initial_current", Door("current"),
        "In the loop at closing.",
    ),
)  # fmt: skip

#: The flags of `rlc spread` and `rlc check` alone.
TOLERANCE_FLAGS: tuple[Flag, ...] = (
    Flag("--resistance-tolerance", "resistor", "tolerance", _R, 'Of the resistor, "1 %" or J.'),
    Flag("--inductance-tolerance", "inductor", "tolerance", _L, 'Of the inductor, "10 %".'),
    Flag(
        "--capacitance-tolerance", "capacitor", "tolerance", _C,
        'Of the capacitor, "-20 % / +80 %".',
    ),
)  # fmt: skip

#: Of these a source has one; each says what kind of source it is.
SOURCE_LEVELS = {"rms": "sine", "amplitude": "sine", "voltage": "dc"}


def source_levels(given: Mapping[str, str]) -> list[Flag]:
    """The flags among these that give a source's level.

    Parameters
    ----------
    given : mapping of str to str
        Option, such as ``--source-rms``, to its text.
    """
    return [flag for flag in FLAGS if flag.key in SOURCE_LEVELS and flag.option in given]


def check_flags(given: Mapping[str, str]) -> None:
    """Check that every flag is known, and that flags do not contradict each other.

    Parameters
    ----------
    given : mapping of str to str
        Option, such as ``--resistance``, to its text.

    Raises
    ------
    InputError
        For the first flag that does not pass.
    """
    known = [flag.option for flag in FLAGS + TOLERANCE_FLAGS]
    for option in given:
        if option not in known:
            from difflib import get_close_matches

            near = get_close_matches(option, known, 1)
            hint = f'Did you mean "{near[0]}"?' if near else ""
            raise InputError(option, given[option], "is no flag for a value of a sheet", hint)
    levels = source_levels(given)
    if len(levels) > 1:
        named = " and ".join(flag.option for flag in levels)
        raise InputError(named, None, "are given together", "A source has one of them")
    if levels and SOURCE_LEVELS[levels[0].key] == "dc":
        for option in ("--frequency", "--closing-angle"):
            if option in given:
                raise InputError(option, given[option], "does not go with --source-dc")
