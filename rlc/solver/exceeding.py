"""When a limit is first exceeded, and for how long in all."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.peaking import steady_peak
from rlc.solver.transient import last_time_outside, settled, transient
from rlc.solver.turning_points import steps_until, turning_points

Array = NDArray[np.float64]

_HALVINGS = 60
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
    """
    peak = case.peak(element)
    if not float(peak.value) > limit * (1 + _ROUNDING):
        return Exceeded(np.nan, 0.0)
    closed = case.closed_for(element)
    lasting = float(steady_peak(closed, element)) > limit * (1 + _ROUNDING)
    lasting |= bool(case.repeats) and not np.isfinite(peak.time)
    end = _last(closed, element, limit)
    if not np.isfinite(end):
        # Without losses: up to the peak, or a few beats of source and ringing.
        lasting, end = True, _without_losses(closed, float(peak.time))
    if lasting and np.isfinite(peak.time):
        end = float(peak.time)
    steps = steps_until(closed, end)
    nodes = np.union1d(steps, turning_points(closed, element, steps))
    above = _excess(closed, element, nodes, limit) > 0
    if case.repeats:
        # what the last period of the train does is done by all that follow
        lasting |= bool(above[nodes > case.course_end - case.repeats].any())
    if not above.any():
        return Exceeded(float(peak.time), np.inf if lasting else np.nan)
    change = np.flatnonzero(above[1:] != above[:-1])
    low, high, rising = nodes[change], nodes[change + 1], above[change + 1]
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        beyond = (_excess(closed, element, middle, limit) > 0) == rising
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    first = 0.0 if above[0] else float(high[0])
    bounds = np.concatenate([[0.0] if above[0] else [], high, [end] if above[-1] else []])
    lasts = float(np.sum(bounds[1::2] - bounds[::2]))
    return Exceeded(first, np.inf if lasting else lasts)


def _last(case: Case, element: str, limit: float) -> float:
    """A time after which the limit is not exceeded for the first time, nor ever again if free
    motion alone exceeds it [s]."""
    if float(case.equation.damping) == 0:
        return np.inf
    value, slope, _, since = transient(case, element)
    period = _PERIODS / float(case.source.frequency) if case.source.alternating else 0.0
    room = limit - float(steady_peak(case, element))
    if room > 0 and np.isfinite(float(value)):
        last = last_time_outside(case.equation, value, slope, np.asarray(room))
        # rounding of the last crossing must not cut it off
        return (since + float(last)) * (1 + _ROUNDING) + period
    return float(settled(case)) + period


def _without_losses(case: Case, peak: float) -> float:
    periods = [2 * np.pi / float(case.equation.natural)]
    if case.source.alternating:
        periods.append(1.0 / float(case.source.frequency))
    last = 0.0 if case.lines is None else float(case.lines.start[-1])
    return last + max(100 * max(periods), peak if np.isfinite(peak) else 0.0)


def _excess(case: Case, element: str, time: Array, limit: float) -> Array:
    waves = case.waveforms(time)
    values = waves.current if element == "current" else waves.capacitor_voltage
    return np.abs(values) - limit


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
    """
    shape = np.broadcast_shapes(case.shape, np.shape(limit))
    limits = np.broadcast_to(limit, shape)
    found = [
        exceeded(case.one(index) if case.shape else case, element, float(limits[index]))
        for index in np.ndindex(shape)
    ]
    first, lasts = zip(*found, strict=True)
    return np.reshape(first, shape), np.reshape(lasts, shape)
