"""What the keys of a sheet say against each other."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from rlc.errors import InputError
from rlc.front.document import KeyPath
from rlc.front.door import UNTIL_STEADY
from rlc.front.sources import ALTERNATING, SOURCES
from rlc.solver.quantities import REGISTER

Contradictions = Iterator[tuple[KeyPath, InputError]]

#: The way out where a sine has no level, and where a source has no harmonic.
LEVEL = 'Write rms = "24 V" or amplitude = "34 V"'
ORDER = 'Write [[source.orders]] and below it number = 5, share = "6 %"'


def contradictions(data: Mapping[str, Any]) -> Contradictions:
    """Look for contradictions, even where single values are wrong.

    Parameters
    ----------
    data : mapping
        Tables of raw values.

    Returns
    -------
    iterator of (tuple of str and int, InputError)
        Path of the key to change, and the error.
    """
    source = data.get("source")
    if not isinstance(source, dict):
        return
    kind = source.get("kind")
    if kind in ALTERNATING:
        yield from _levels(source)
    elif kind in SOURCES:
        yield from _without_frequency(kind, data)
    if kind == "harmonics":
        yield from _orders(source.get("orders"))
    if kind == "pulse":
        yield from _train(source)


def _levels(source: Mapping[str, Any]) -> Contradictions:
    levels = [key for key in ("rms", "amplitude") if key in source]
    if len(levels) == 2:
        rule = "is given beside rms, and a sine is given by one of them"
        yield ("source", "amplitude"), InputError("", source["amplitude"], rule)
    elif not levels and "voltage" in source:
        rule = "does not say whether the sine's rms or its amplitude (peak) is meant"
        yield ("source", "voltage"), InputError("", source["voltage"], rule, LEVEL)
    elif not levels:
        yield ("source",), InputError("", None, "has neither rms nor amplitude", LEVEL)


def _without_frequency(kind: str, data: Mapping[str, Any]) -> Contradictions:
    switch_on, targets = data.get("switch_on"), data.get("target")
    if isinstance(switch_on, dict) and "closing_angle" in switch_on:
        rule = f"belongs to a sine source, alone or with harmonics, and this one is {kind}"
        angle = switch_on["closing_angle"]
        yield ("switch_on", "closing_angle"), InputError("", angle, rule)
    for index, row in enumerate(targets if isinstance(targets, list) else ()):
        entry = REGISTER.get(str(row.get("quantity"))) if isinstance(row, dict) else None
        if entry and entry.at == "frequency" and "at" in row and not entry.per_volt:
            rule = f"{entry.name} of a {kind} source is not asked for at a frequency"
            yield ("target", index, "at"), InputError("", row["at"], rule)


def _orders(orders: Any) -> Contradictions:
    if orders == []:
        yield ("source", "orders"), InputError("", orders, "is empty", ORDER)
    numbers: list[Any] = []
    for index, row in enumerate(orders if isinstance(orders, list) else ()):
        if not isinstance(row, dict):
            continue
        at = ("source", "orders", index)
        levels = [key for key in ("share", "rms", "amplitude") if key in row]
        if not levels:
            hint = 'Write share = "6 %", of the fundamental'
            yield at, InputError("", None, "has neither share nor rms nor amplitude", hint)
        for key in levels[1:]:
            rule = f"is given beside {levels[0]}, and a harmonic is given by one of them"
            yield (*at, key), InputError("", row[key], rule)
        number = row.get("number")
        if number is not None and number in numbers:
            yield (*at, "number"), InputError("", number, "is given twice")
        numbers.append(number)


def _train(source: Mapping[str, Any]) -> Contradictions:
    if "count" in source and "period" not in source:
        rule = "needs a period, from one pulse to the next"
        hint = 'Write period = "20 ms"'
        yield ("source", "count"), InputError("", source["count"], rule, hint)
    if "period" in source and "count" not in source:
        rule = "needs a count of pulses"
        hint = f'Write count = 10 or count = "{UNTIL_STEADY}"'
        yield ("source", "period"), InputError("", source["period"], rule, hint)
