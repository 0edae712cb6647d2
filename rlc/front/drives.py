"""What drives a loop, built from SI numbers, text with units, or pint quantities."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from rlc.errors import InputError
from rlc.front.door import UNTIL_STEADY, ClosingAngleDoor, WholeDoor, open_as
from rlc.front.units import to_si
from rlc.solver import shapes
from rlc.solver import source as _source
from rlc.solver.source import MOST_ORDER, Order, Source, Window


def constant(voltage: Any) -> Source:
    """A constant voltage, stepped on at t = 0.

    Parameters
    ----------
    voltage : str, float, array_like or pint quantity
        Its level [V].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If it cannot be read.
    """
    return _source.constant(to_si(voltage, "voltage", "voltage"))


def sine(
    *, rms: Any = None, amplitude: Any = None, frequency: Any, closing_angle: Any = 0.0
) -> Source:
    """The voltage amplitude * sin(2 pi f t + closing angle), switched on at t = 0.

    Parameters
    ----------
    rms, amplitude : str, float, array_like or pint quantity
        Root mean square or peak value, one of them [V].
    frequency : str, float, array_like or pint quantity
        More than zero [Hz].
    closing_angle : str, float, array_like, Window or pint quantity
        From the rising zero [rad], "30 deg"; "worst", to be searched for; "random", or a
        window of equally likely ones such as "0 deg ± 15 deg".

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If both or neither of `rms` and `amplitude` are given, or a value cannot be read.
    """
    return _source.sine(
        None if amplitude is None else to_si(amplitude, "voltage", "amplitude"),
        to_si(frequency, "frequency", "frequency"),
        _closing_angle(closing_angle),
        rms=None if rms is None else to_si(rms, "voltage", "rms"),
    )


def harmonics(
    *,
    rms: Any = None,
    amplitude: Any = None,
    frequency: Any,
    orders: Iterable[Sequence[Any]],
    closing_angle: Any = 0.0,
) -> Source:
    """A sine with harmonics, switched on at t = 0.

    Parameters
    ----------
    rms, amplitude : str, float, array_like or pint quantity
        Root mean square or peak value of the fundamental, one of them [V].
    frequency : str, float, array_like or pint quantity
        Of the fundamental, more than zero [Hz].
    orders : iterable of tuple
        One or more of (number, share) or (number, share, phase): multiple of the frequency, 2
        to 1000; amplitude over the fundamental's, 0.06 or "6 %" [1]; the harmonic's own phase
        at the fundamental's rising zero [rad], "180 deg".
    closing_angle : str, float, array_like, Window or pint quantity
        Of the fundamental, as for :func:`sine` [rad].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If both or neither of `rms` and `amplitude` are given, there is no order, or a value
        cannot be read.

    Examples
    --------
    >>> harmonics(rms="230 V", frequency="50 Hz", orders=[(5, "6 %"), (7, "4 %", "180 deg")]).kind
    'harmonics'
    """
    read = [_order(each) for each in orders]
    if not read:
        raise InputError("orders", [], "is empty; without harmonics it is a sine")
    alone = sine(rms=rms, amplitude=amplitude, frequency=frequency, closing_angle=closing_angle)
    return replace(alone, orders=tuple(read))


def _order(given: Sequence[Any]) -> Order:
    if isinstance(given, str) or not isinstance(given, Sequence) or len(given) not in (2, 3):
        rule = "must hold (number, share) or (number, share, phase)"
        raise InputError("orders", given, rule, 'Write for example (5, "6 %")')
    number, share, phase = (*given, 0.0)[:3]
    return Order(
        open_as(WholeDoor(2, MOST_ORDER), number, "orders"),
        _one(share, "ratio", "orders"),
        _one(phase, "angle", "orders"),
    )


def ramp(voltage: Any, rise_time: Any) -> Source:
    """A straight rise from zero to a level that is held.

    Parameters
    ----------
    voltage : str, float or pint quantity
        The level, of either sign [V].
    rise_time : str, float or pint quantity
        From zero to the level, more than zero [s].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If a value cannot be read, or the rise time is not above zero.
    """
    level, rise = _one(voltage, "voltage", "voltage"), _one(rise_time, "time", "rise_time")
    return _source.shaped(shapes.ramp(level, rise))


def pulse(
    voltage: Any,
    width: Any,
    rise_time: Any = 0.0,
    fall_time: Any = 0.0,
    period: Any = None,
    count: int | str = 1,
) -> Source:
    """A pulse from zero, once or repeated.

    Parameters
    ----------
    voltage : str, float or pint quantity
        Its level, of either sign [V].
    width : str, float or pint quantity
        Between the half levels of rise and fall, more than zero [s].
    rise_time, fall_time : str, float or pint quantity
        From zero to the level and back, zero or more, half of both at most the width [s].
    period : str, float or pint quantity, optional
        From one pulse to the next, more than a pulse lasts; with `count` [s].
    count : int or str
        How many pulses, 1 to 1e5; "until steady" to repeat them until the loop is steady.

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If a value cannot be read, or the times do not go together.
    """
    course = shapes.pulse(
        _one(voltage, "voltage", "voltage"),
        _one(width, "time", "width"),
        _one(rise_time, "time", "rise_time"),
        _one(fall_time, "time", "fall_time"),
        None if period is None else _one(period, "time", "period"),
        open_as(WholeDoor(1, shapes.MOST_PULSES, UNTIL_STEADY), count, "count"),
    )
    return _source.shaped(course)


def surge(voltage: Any, front_time: Any, half_value_time: Any) -> Source:
    """An impulse of two exponentials, by the times that define it.

    Parameters
    ----------
    voltage : str, float or pint quantity
        Peak, of either sign [V].
    front_time, half_value_time : str, float or pint quantity
        As :func:`rlc.solver.shapes.surge` defines them, such as "1.2 us" and "50 us" [s].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If a value cannot be read, or no two exponentials have these times.
    """
    course = shapes.surge(
        _one(voltage, "voltage", "voltage"),
        _one(front_time, "time", "front_time"),
        _one(half_value_time, "time", "half_value_time"),
    )
    return _source.shaped(course)


def recorded(time: Any, voltage: Any) -> Source:
    """A measured course: straight lines between its points, the last value held.

    Parameters
    ----------
    time : array_like or pint quantity
        Shape (n,), n of 2 or more, rising; the switch closes at the first point [s].
    voltage : array_like or pint quantity
        Shape (n,) [V].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If a value is not finite, or the points do not go together.
    """
    course = shapes.recorded(to_si(time, "time", "time"), to_si(voltage, "voltage", "voltage"))
    return _source.shaped(course)


def _one(value: Any, kind: str, name: str) -> float:
    """One SI number, where an array would make no sense."""
    number = to_si(value, kind, name)
    if isinstance(number, np.ndarray):
        raise InputError(name, value, "must be one value, not several")
    return number


def _closing_angle(value: Any) -> Any:
    if isinstance(value, Window):
        return value
    if isinstance(value, str):
        return open_as(ClosingAngleDoor(), value, "closing_angle")
    return to_si(value, "angle", "closing_angle")
