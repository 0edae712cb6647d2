"""Courses of a source in time: straight lines between knots, and the surge of two exponentials."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.loop import BEYOND

Array = NDArray[np.float64]

#: Knots that a course may have.
MOST_KNOTS = 4_000_000
#: Pulses that a train may have.
MOST_PULSES = 100_000
#: After so many time constants nothing is left of a decay but rounding: 4e-18.
TIME_CONSTANTS = 40.0

# IEC 60060-1: the front is 1/0.6 of the time from 30 % to 90 % of the peak.
_LOW, _HIGH, _HALF = 0.3, 0.9, 0.5
# An edge that is a smaller share of its pulse is a jump: the sum of both rounds it away.
_NO_TIME = 1e-15


@dataclass(frozen=True, eq=False)
class Piecewise:
    """Straight lines from knot to knot; the last one is level and lasts for ever.

    Parameters
    ----------
    kind : str
        What it is called: ``ramp``, ``pulse`` or ``recorded``.
    start : array_like
        Shape (n,), rising from zero [s].
    level : array_like
        Shape (n,), the source's voltage just after each knot [V].
    end : array_like
        Shape (n,), just before the next knot; of the last line its level [V].
    period : float, optional
        The lines are repeated after so long until the loop is steady; more than the last
        knot [s].
    given : mapping of str to float or None
        What it was made from, by the names of the function that did [s], [V], [1].

    Raises
    ------
    InputError
        If the lines do not go together.
    """

    kind: str
    start: Array
    level: Array
    end: Array
    period: float | None = None
    given: Mapping[str, float | None] = field(default_factory=dict)

    def __post_init__(self) -> None:
        for name in ("start", "level", "end"):
            value = np.asarray(getattr(self, name), dtype=np.float64)
            if not np.all(np.abs(value) <= BEYOND):
                raise InputError(name, None, "must be finite, and of some circuit's size")
            object.__setattr__(self, name, value)
        if not self.start.shape == self.level.shape == self.end.shape or self.start.ndim != 1:
            raise InputError("start, level, end", None, "must be three rows of one length")
        if not 1 <= self.start.size <= MOST_KNOTS:
            raise InputError("start", self.start.size, f"has from 1 to {MOST_KNOTS} knots")
        if self.start[0] != 0 or not np.all(np.diff(self.start) > 0):
            raise InputError("start", None, "must rise from zero")
        if self.period is not None and not self.start[-1] < self.period <= BEYOND:
            raise InputError("period", self.period, "must be more than the time to the last knot")
        if self.end[-1] != self.level[-1]:
            raise InputError("end", float(self.end[-1]), "the last line must be level")

    @property
    def final(self) -> float:
        """The voltage that it ends on [V]."""
        return float(self.level[-1])

    @property
    def largest(self) -> float:
        """Largest magnitude at any time [V]."""
        return float(max(np.max(np.abs(self.level)), np.max(np.abs(self.end))))

    @cached_property
    def slope(self) -> Array:
        """Of each line, shape (n,) [V/s]."""
        return np.append((self.end - self.level)[:-1] / np.diff(self.start), 0.0)

    @property
    def gone(self) -> float:
        """When it has come to its final voltage; infinite if it is repeated [s]."""
        return float(self.start[-1]) if self.period is None else np.inf

    def repeated(self, count: int) -> Piecewise:
        """The lines one after another.

        Parameters
        ----------
        count : int
            How many times, one or more.

        Returns
        -------
        Piecewise
            Without a period of its own.

        Raises
        ------
        InputError
            If it has no period.
        """
        if self.period is None:
            raise InputError("period", None, "is missing: there is nothing to repeat")
        start = np.add.outer(np.arange(count) * self.period, self.start).ravel()
        level, end = np.tile(self.level, count), np.tile(self.end, count)
        return Piecewise(self.kind, start, level, end, given=self.given)

    def at(self, time: Any) -> Array:
        """The voltage at given times.

        Parameters
        ----------
        time : array_like
            Zero or more [s].

        Returns
        -------
        Array
            With the shape of `time` [V].
        """
        time = np.asarray(time, dtype=np.float64)
        if self.period is not None:
            time = np.mod(time, self.period)
        index = np.searchsorted(self.start, time, side="right") - 1
        voltage: Array = self.level[index] + self.slope[index] * (time - self.start[index])
        return voltage


@dataclass(frozen=True)
class Surge:
    r"""An impulse voltage of two exponentials, :math:`k(e^{-\alpha t} - e^{-\beta t})`.

    Parameters
    ----------
    scale : float
        k, of the sign of the peak [V].
    slow, fast : float
        alpha and beta, 0 < alpha < beta [1/s].
    given : mapping of str to float
        What it was made from, by the names of :func:`surge` [s], [V].

    Raises
    ------
    InputError
        If a value is out of its range.
    """

    kind: ClassVar[str] = "surge"
    final: ClassVar[float] = 0.0

    scale: float
    slow: float
    fast: float
    given: Mapping[str, float | None] = field(default_factory=dict, compare=False)

    def __post_init__(self) -> None:
        if not abs(self.scale) <= BEYOND:
            raise InputError("voltage", self.scale, "must be finite, and of some circuit's size")
        if not 1 / BEYOND <= self.slow < self.fast <= BEYOND:
            rule = "must be two rates above zero, the slow one first"
            raise InputError("slow, fast", (self.slow, self.fast), rule)

    @property
    def gone(self) -> float:
        """When nothing of it is left but rounding [s]."""
        return TIME_CONSTANTS / self.slow

    @property
    def largest(self) -> float:
        """Its peak, without sign [V]."""
        top = np.log(self.fast / self.slow) / (self.fast - self.slow)
        return float(np.abs(self.at(top)))

    def at(self, time: Any) -> Array:
        """The voltage at given times.

        Parameters
        ----------
        time : array_like
            Zero or more [s].

        Returns
        -------
        Array
            With the shape of `time` [V].
        """
        time = np.asarray(time, dtype=np.float64)
        # exp(-alpha t) taken out: no cancellation at small times
        rise = -np.expm1(-(self.fast - self.slow) * time)
        return np.asarray(self.scale * np.exp(-self.slow * time) * rise)


def ramp(voltage: float, rise_time: float) -> Piecewise:
    """A straight rise from zero to a level that is held.

    Parameters
    ----------
    voltage : float
        The level, of either sign [V].
    rise_time : float
        From zero to the level, more than zero [s].

    Returns
    -------
    Piecewise

    Raises
    ------
    InputError
        If the rise time is not above zero.
    """
    if not rise_time > 0:
        raise InputError("rise_time", rise_time, "must be more than zero; a step is dc")
    level, end = np.array([0.0, voltage]), np.array([voltage, voltage])
    given = {"voltage": voltage, "rise_time": rise_time}
    return Piecewise("ramp", np.array([0.0, rise_time]), level, end, given=given)


def pulse(
    voltage: float,
    width: float,
    rise_time: float = 0.0,
    fall_time: float = 0.0,
    period: float | None = None,
    count: int | None = 1,
) -> Piecewise:
    """A pulse from zero, once or repeated.

    Parameters
    ----------
    voltage : float
        Its level, of either sign [V].
    width : float
        Between the half levels of rise and fall, more than zero [s].
    rise_time, fall_time : float
        From zero to the level and back, zero or more, half of both at most the width [s].
    period : float, optional
        From one pulse to the next, at least the time a pulse lasts; with `count` [s].
    count : int or None
        How many pulses, 1 to 1e5; None to repeat them until the loop is steady.

    Returns
    -------
    Piecewise

    Raises
    ------
    InputError
        If the times do not go together.
    """
    if not width > 0:
        raise InputError("width", width, "must be more than zero")
    times = {"width": width, "rise_time": rise_time, "fall_time": fall_time, "period": period}
    for name, time in times.items():
        if time is not None and not time >= 0:
            raise InputError(name, time, "must be zero or more")
        if time and not 1 / BEYOND <= time <= BEYOND:
            raise InputError(name, time, "must be finite, and of some circuit's size")
    flat = width - (rise_time + fall_time) / 2
    # rounding may leave a triangle with a top of no length
    flat = 0.0 if abs(flat) <= 1e-12 * width else flat
    if flat < 0:
        rule = "must be at least half of rise and fall time together"
        raise InputError("width", width, rule)
    lasts = rise_time + flat + fall_time
    if (period is None) != (count == 1):
        raise InputError("period", period, "goes with a count of more than one pulse")
    if count is not None and not (count == int(count) and 1 <= count <= MOST_PULSES):
        raise InputError("count", count, f"must be a whole number from 1 to {MOST_PULSES}")
    if period is not None and period <= lasts * (1 + 1e-12):
        raise InputError("period", period, f"must be more than the pulse lasts, {lasts:g} s")
    lines = [
        line
        for line in ((rise_time, 0.0, voltage), (flat, voltage, voltage), (fall_time, voltage, 0.0))
        if line[0] > _NO_TIME * lasts
    ]
    lengths, level, end = zip(*lines, strict=True)
    start = np.cumsum([0.0, *lengths])
    given = times | {"voltage": voltage, "count": count}
    one = Piecewise("pulse", start, np.array([*level, 0.0]), np.array([*end, 0.0]), period, given)
    if count is None:
        return one
    return one if count == 1 else one.repeated(count)


def recorded(time: Any, voltage: Any) -> Piecewise:
    """A measured course: straight lines between its points, the last value held.

    Parameters
    ----------
    time : array_like
        Shape (n,), n of 2 or more, rising; the first point is the closing of the switch [s].
    voltage : array_like
        Shape (n,) [V].

    Returns
    -------
    Piecewise

    Raises
    ------
    InputError
        If the points do not go together.
    """
    time, voltage = (np.asarray(each, dtype=np.float64) for each in (time, voltage))
    if time.shape != voltage.shape or time.ndim != 1 or time.size < 2:
        rule = "must be two rows of one length, two points or more"
        raise InputError("time, voltage", None, rule)
    if not (np.all(np.isfinite(time)) and np.all(np.isfinite(voltage))):
        raise InputError("time, voltage", None, "must be finite")
    steps = np.diff(time)
    if not np.all(steps > 0):
        raise InputError("time", float(time[1:][steps <= 0][0]), "does not rise")
    return Piecewise("recorded", time - time[0], voltage, np.append(voltage[1:], voltage[-1]))


def surge(voltage: float, front_time: float, half_value_time: float) -> Surge:
    r"""An impulse by the times that define it.

    The front time is 1/0.6 of the time from 30 % to 90 % of the peak; a straight line through
    these two points meets zero at the virtual origin, from which the time to half value on the
    tail is counted. Both rates are solved for.

    Parameters
    ----------
    voltage : float
        Peak, of either sign [V].
    front_time, half_value_time : float
        T1 and T2, more than zero, such as 1.2 us and 50 us [s].

    Returns
    -------
    Surge

    Raises
    ------
    InputError
        If no two exponentials have these times.

    References
    ----------
    .. [1] IEC 60060-1, definitions of the lightning impulse voltage (from memory).
    """
    from scipy.optimize import brentq

    for name, each in (("front_time", front_time), ("half_value_time", half_value_time)):
        if not 1 / BEYOND <= each <= BEYOND:
            raise InputError(name, each, "must be more than zero, and of some circuit's size")
    wanted = half_value_time / front_time

    def ratio(decades: float) -> float:
        front, half = _defining_times(1.0, 1.0 + 10.0**decades)
        return half / front

    least, most = ratio(-3.0), ratio(6.0)
    if not least < wanted < most:
        rule = f"must be {least:.3g} to {most:.3g} front times for two exponentials"
        hint = "Are they swapped?" if wanted < 1 else "Give another course as a record"
        raise InputError("half_value_time", half_value_time, rule, hint)
    decades = brentq(lambda x: np.log(ratio(x) / wanted), -3.0, 6.0, xtol=1e-13, rtol=1e-13)
    fast = 1.0 + 10.0**decades
    pace = _defining_times(1.0, fast)[0] / front_time
    unit = Surge(1.0, pace, fast * pace)
    given = {"voltage": voltage, "front_time": front_time, "half_value_time": half_value_time}
    return Surge(voltage / unit.largest, unit.slow, unit.fast, given)


def _defining_times(slow: float, fast: float) -> tuple[float, float]:
    """Front time and time to half value of two exponentials."""
    from scipy.optimize import brentq

    wave = Surge(1.0, slow, fast)
    top, peak = np.log(fast / slow) / (fast - slow), wave.largest

    def when(share: float, low: float, high: float) -> float:
        return float(brentq(lambda t: float(wave.at(t)) - share * peak, low, high, xtol=1e-300))

    low, high = when(_LOW, 0.0, top), when(_HIGH, 0.0, top)
    end = top
    while float(wave.at(end)) > _HALF * peak:
        end *= 2
    front = (high - low) / (_HIGH - _LOW)
    return front, when(_HALF, top, end) - (low - _LOW * front)
