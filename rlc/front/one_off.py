"""A one-off question: everything from flags, without a sheet."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rlc.errors import InputError, SheetError
from rlc.front.door import Charge
from rlc.front.flags import FLAGS, SOURCE_LEVELS, TOLERANCE_FLAGS
from rlc.front.inputs import Inputs, Loaded
from rlc.front.marking import KINDS
from rlc.front.units import Tolerance, read_tolerance
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.source import constant, sine
from rlc.solver.targets import Ratings

_FIELDS = {
    "--resistance": "resistance",
    "--inductance": "inductance",
    "--capacitance": "capacitance",
    "--winding-resistance": "winding_resistance",
    "--series-resistance": "series_resistance",
    "--load": "load_resistance",
    "--source-resistance": "source_resistance",
    "--source-inductance": "source_inductance",
}
_PARTS = tuple(_FIELDS)[:3]


def read_flags(given: Mapping[str, str]) -> Loaded:
    """Read a loop and its source from flags that do not contradict each other.

    Parameters
    ----------
    given : mapping of str to str
        Option, such as ``--resistance``, to its text.

    Returns
    -------
    Loaded

    Raises
    ------
    SheetError
        With every flag that is missing or cannot be read.
    """
    problems: list[InputError] = []
    if not given:
        hint = "Name one, or give at least these flags"
        problems.append(InputError("", None, "no sheet is named", hint))
    values: dict[str, Any] = {}
    notes: list[str] = []
    for flag in FLAGS:
        if flag.option not in given:
            continue
        try:
            value = values[flag.option] = flag.door.open(given[flag.option])
        except InputError as error:
            problems.append(InputError(flag.option, error.value, error.rule, error.hint))
            continue
        note = flag.door.note(value)
        notes += [f"{flag.option}: {note}"] if note else []
    problems += _missing(given)
    tolerances: dict[str, Tolerance] = {}
    for flag in TOLERANCE_FLAGS:
        if flag.option in given:
            kind = flag.door.kind
            try:
                nominal = values.get(f"--{kind}")
                tolerances[kind] = read_tolerance(given[flag.option], kind, flag.option, nominal)
            except InputError as error:
                problems.append(error)
    if problems:
        raise SheetError("", tuple((None, problem) for problem in problems))
    parts = []
    for option in _PARTS:
        nominal, field = values[option], _FIELDS[option]
        tolerance = tolerances.get(field)
        parts.append(
            Part(field, nominal, *(tolerance.limits(nominal) if tolerance else [nominal] * 2))
        )
    typed = {field: tolerance.text for field, tolerance in tolerances.items()}
    inputs = Inputs("", _case(values), tuple(parts), typed, Ratings(), ())
    return Loaded(inputs, notes=tuple(notes))


def _missing(given: Mapping[str, str]) -> list[InputError]:
    levels = [flag for flag in FLAGS if flag.key in SOURCE_LEVELS]
    level = next((flag for flag in levels if flag.option in given), None)
    needed = [flag for flag in FLAGS if flag.option in _PARTS]
    if level and SOURCE_LEVELS[level.key] == "sine":
        needed += [flag for flag in FLAGS if flag.option == "--frequency"]
    missing = [
        InputError(
            flag.option, None, "is missing", f'For example "{KINDS[flag.door.kind].example}"'
        )
        for flag in needed
        if flag.option not in given
    ]
    if level is None:
        *some, last = (flag.option for flag in levels)
        missing.append(InputError(f"{', '.join(some)} or {last}", None, "is missing"))
    return missing


def _case(values: Mapping[str, Any]) -> Case:
    loop = make_loop(
        **{field: values[option] for option, field in _FIELDS.items() if option in values}
    )
    if "--source-dc" in values:
        source = constant(values["--source-dc"])
    else:
        source = sine(
            values.get("--source-amplitude"),
            values["--frequency"],
            values.get("--closing-angle", 0.0),
            rms=values.get("--source-rms"),
        )
    charge = values.get("--capacitor-voltage", Charge(0.0))
    current = values.get("--initial-current", 0.0)
    return Case(loop, source, charge.voltage, current, charge.either_polarity)
