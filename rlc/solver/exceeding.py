"""When a limit is first exceeded, and for how long in all."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.lines import balance
from rlc.solver.peaking import steady_peak
from rlc.solver.transient import last_time_outside, settled, transient
from rlc.solver.turning_points import longest_stepped, narrowed, steps_until, turning_points

Array = NDArray[np.float64]

# A lasting source is looked at for so many of its periods beyond the transient.
_PERIODS = 2.0
# What stays within the limit but for rounding does not exceed it.
_ROUNDING = 1e-9


class Exceeded(NamedTuple):
    """How a signal's magnitude exceeds a limit.

    Attributes
    ----------
    first : float
        When it does for the first time; not a number if it never does [s].
    lasts : float
        For how long in all; infinite if it does again and again, not a number if it is too
        short among too many swings to be told [s].
    """

    first: float
    lasts: float


def exceeded(case: Case, element: str, limit: float) -> Exceeded:
    """Solve for the moments at which a signal passes a limit.

    The limit is passed between neighbouring turning points, each of which is solved for; the
    crossings are closed by bisection. With the angle or polarity open, they are those of the
    signal's largest value.

    Parameters
    ----------
    case : Case
        One loop, shape ().
    element : {"current", "capacitor"}
        The loop current, or the voltage at the capacitor's terminals.
    limit : float
        Of the magnitude, more than zero [A or V].

    Returns
    -------
    Exceeded

    Raises
    ------
    InputError
        If there is no such element, or the limit is not above zero.
    """
    first, lasts = exceeded_of(case, element, limit)
    return Exceeded(float(first), float(lasts))


class _Known(NamedTuple):
    """What is known of a loop before its crossings are looked for."""

    peak_time: float
    lasting: bool
    last: float


def _crossings(case: Case, element: str, limit: float, known: _Known) -> Exceeded:
    """Of one loop that does exceed the limit, with one closing angle and polarity."""
    lasting, end = known.lasting, known.last
    if not np.isfinite(end):
        # Without losses: up to the peak, or a few beats of source and ringing.
        end = _without_losses(case, known.peak_time)
        lasting = case.source.alternating or _rings_beyond(case, element, limit)
        if not lasting:
            assert case.source.shape is not None
            end = case.source.shape.gone
    if lasting and np.isfinite(known.peak_time):
        end = known.peak_time
    if end <= 0:
        return Exceeded(0.0, np.inf if lasting else 0.0)
    whole, end = end, min(end, longest_stepped(case))
    steps = steps_until(case, end)
    nodes = np.union1d(steps, turning_points(case, element, steps))

    def above(time: Array) -> Any:
        waves = case.waveforms(time)
        values = waves.current if element == "current" else waves.capacitor_voltage
        return np.abs(values) > limit

    there = above(nodes)
    if case.repeats:
        # what the last period of the train does is done by all that follow
        lasting |= bool(there[nodes > case.course_end - case.repeats].any())
    if not there.any():
        return Exceeded(known.peak_time, np.inf if lasting else np.nan)
    change = np.flatnonzero(there[1:] != there[:-1])
    _, crossed = narrowed(nodes[change], nodes[change + 1], above, there[change])
    before = np.zeros(int(there[0]))
    edges = np.concatenate([before, crossed, np.full(int(there[-1]), end)])
    lasts = float(np.sum(edges[1::2] - edges[::2])) if end == whole else np.nan
    return Exceeded(float(edges[0]), np.inf if lasting else lasts)


def _last(case: Case, element: str, limit: Array) -> Array:
    """Times after which the limit is not exceeded for the first time, nor ever again if free
    motion alone exceeds it [s]."""
    value, slope, _, since = transient(case, element)
    period = _PERIODS / case.source.frequency if case.source.alternating else 0.0
    room = limit - steady_peak(case, element)
    alone = (room > 0) & np.isfinite(value)
    with np.errstate(all="ignore"):
        outside = last_time_outside(case.equation, value, slope, np.where(alone, room, 1.0))
    # rounding of the last crossing must not cut it off
    last = np.where(alone, (since + outside) * (1 + _ROUNDING), settled(case)) + period
    return np.where(case.equation.damping == 0, np.inf, last)


def _rings_beyond(case: Case, element: str, limit: float) -> bool:
    """Whether the ringing that a lossless loop keeps when its source stands still is above."""
    shape = case.source.shape
    waves = case.waveforms(np.array([0.0 if shape is None else shape.gone]))
    value, slope = waves.current[0], waves.current_rate[0]
    if element == "capacitor":
        value, slope = waves.capacitor_voltage[0], waves.capacitor_voltage_rate[0]
    w, rest = case.loop.weights(element), balance(case.equation)
    share = w.capacitor_voltage * rest[0] + w.current * rest[1] + w.source
    final = float(share * case.source.amplitude)
    swing = np.hypot(value - final, slope / float(case.equation.natural))
    return abs(final) + float(swing) > limit * (1 + _ROUNDING)


def _without_losses(case: Case, peak: float) -> float:
    periods = [2 * np.pi / float(case.equation.natural)]
    if case.source.alternating:
        periods.append(1.0 / float(case.source.frequency))
    last = 0.0 if case.lines is None else float(case.lines.start[-1])
    return last + max(100 * max(periods), peak if np.isfinite(peak) else 0.0)


def exceeded_of(case: Case, element: str, limit: Any) -> tuple[Array, Array]:
    """The same, loop by loop.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : {"current", "capacitor"}
        As for :func:`exceeded`.
    limit : array_like
        More than zero; broadcasts against the batch [A or V].

    Returns
    -------
    first, lasts : Array
        With the batch's shape [s], [s].

    Raises
    ------
    InputError
        If there is no such element, or a limit is not above zero.
    """
    if element not in ("current", "capacitor"):
        raise InputError("element", element, "is neither current nor capacitor")
    if not np.all((np.asarray(limit) > 0) & np.isfinite(limit)):
        raise InputError("limit", limit, "must be more than zero, and finite")
    shape = np.broadcast_shapes(case.shape, np.shape(limit))
    limits = np.broadcast_to(limit, shape)
    peak, closed = case.peak(element), case.closed_for(element)
    value, peak_time = np.broadcast_to(peak.value, shape), np.broadcast_to(peak.time, shape)
    lasting = np.broadcast_to(steady_peak(closed, element) > limits * (1 + _ROUNDING), shape)
    lasting = lasting | (bool(case.repeats) & ~np.isfinite(peak_time))
    last = np.broadcast_to(_last(closed, element, limits), shape)
    first, lasts = np.full(shape, np.nan), np.zeros(shape)
    for index in zip(*np.nonzero(np.atleast_1d(value > limits * (1 + _ROUNDING))), strict=True):
        place = index if shape else ()
        one = closed.one(place[len(shape) - len(case.shape) :]) if case.shape else closed
        known = _Known(float(peak_time[place]), bool(lasting[place]), float(last[place]))
        first[place], lasts[place] = _crossings(one, element, float(limits[place]), known)
    return first, lasts
