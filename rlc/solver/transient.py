"""What the switch-on leaves behind: settling, overshoot, damping in time."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.equation import Equation, kernels
from rlc.solver.lines import balance
from rlc.solver.peaking import steady_peak
from rlc.solver.peaks import first_extremum
from rlc.solver.search import PROVED_GAP
from rlc.solver.shapes import TIME_CONSTANTS, Piecewise

Array = NDArray[np.float64]

_ITERATIONS = 100


class Transient(NamedTuple):
    """A signal's free part from some moment on.

    Attributes
    ----------
    value, slope : Array
        At that moment; they broadcast against the batch [V or A], per second.
    settles_on : Array
        The size that it is compared with [V or A].
    since : float
        The moment: closing, or when the source has come to its final level [s].
    """

    value: Array
    slope: Array
    settles_on: Array
    since: float = 0.0


def transient(case: Case, element: str = "capacitor") -> Transient:
    """A signal's free part, and what it settles on.

    It settles on the steady state's largest value; for a constant source on the step from the
    value at closing to the final one; for a source that comes to a level on what its largest
    voltage would lead to. Where angle or polarity are the worst ones, they are those of the
    signal's largest value.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    Transient
        Not a number for a source that never comes to a level, such as a surge.
    """
    closed = case.closed_for(element)
    source, shape = closed.source, closed.source.shape
    if isinstance(shape, Piecewise) and not case.repeats:
        w = closed.loop.weights(element)
        a, b, c, d = closed.equation.matrix
        voltage, current = closed.last_knot.free
        value = w.capacitor_voltage * voltage + w.current * current
        slope = w.capacitor_voltage * (a * voltage + b * current)
        slope = slope + w.current * (c * voltage + d * current)
        rest_voltage, rest_current = balance(closed.equation)
        rest = w.capacitor_voltage * rest_voltage + w.current * rest_current + w.source
        size = source.largest * np.abs(rest)
        return Transient(value, slope, size, shape.gone)
    if shape is not None:
        unknown = np.full(case.shape, np.nan)
        return Transient(unknown, unknown, unknown)
    fixed = closed.fixed_signal(element)
    value, slope = np.real(fixed.value), np.real(fixed.slope)
    turn = np.exp(1j * np.asarray(source.closing_angle))
    for order, wave in zip(source.every_order, closed.rotating_signals(element), strict=True):
        value = value + np.imag(turn**order.number * wave.value)
        slope = slope + np.imag(turn**order.number * wave.slope)
    on = np.abs(value) if source.kind == "dc" else steady_peak(closed, element)
    return Transient(value, slope, on)


def settled(case: Case) -> Array:
    """When free motion has gone and the source has come to its end.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Since closing; infinite without losses. Of a train of pulses that is repeated until
        steady its end [s].
    """
    if case.repeats:
        return np.full(case.shape, case.course_end)
    end = case.source.shape.gone if case.source.shape is not None else 0.0
    with np.errstate(divide="ignore"):
        return end + TIME_CONSTANTS / case.equation.slowest


def settling_time(case: Case, band: float | Array = 0.02) -> Array:
    """Time after which the capacitor voltage stays within a band of its steady state.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    band : float or Array
        Half width of the band, as a share of what :func:`transient` says that the
        voltage settles on; more than zero [1].

    Returns
    -------
    Array
        The last moment at which the free part is at or outside the band: infinite without
        losses, zero if it is never outside, nan if there is no step, or if the steady state is
        zero or unbounded. Not before a source has come to its level; nan if it never does [s].

    References
    ----------
    .. [1] K. Ogata, Modern Control Engineering (from memory), for the band of a step response.
    """
    *found, since = transient(case)
    value, slope, steady = np.broadcast_arrays(*found)
    with np.errstate(invalid="ignore"):
        settled = since + last_time_outside(case.equation, value, slope, band * steady)
    return np.where((steady > 0) & np.isfinite(steady), settled, np.nan)


def last_time_outside(eq: Equation, value: Array, slope: Array, band: Array) -> Array:
    """Last time at which free motion of given value and slope at closing is outside a band.

    The extrema of free motion form a lattice (underdamped: half a ringing period apart, each
    smaller by the same factor), which brackets the only crossing; bisection and Newton's
    method close the bracket to rounding.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    value, slope : Array
        Of the free motion at closing [V or A], [V/s or A/s].
    band : Array
        Half width of the band, more than zero [V or A].

    Returns
    -------
    Array
        Zero if it is never outside, infinite without losses [s].
    """
    with np.errstate(all="ignore"):
        turn = first_extremum(eq, value, slope)
        turn = np.where(np.isfinite(turn), turn, 0.0)
        at_turn = np.abs(_free(eq, value, slope, turn)[0])
        half_period = np.pi / eq.root[0]
        swings = np.floor(np.log(at_turn / band) / (eq.damping * half_period))
        last = turn + np.maximum(swings, 0) * half_period
        outside = at_turn >= band
        low = np.where(outside, np.where(eq.underdamped, last, turn), 0.0)
        high = np.where(eq.underdamped, last + half_period, 2 * turn + 1 / eq.slow)
    # rounding of the logarithm may put the lattice one swing too far or too near
    beyond = eq.underdamped & outside & (np.abs(_free(eq, value, slope, low)[0]) < band)
    low = np.where(beyond, np.maximum(low - half_period, turn), low)
    for _ in range(_ITERATIONS):
        still = ~eq.underdamped & outside & (np.abs(_free(eq, value, slope, high)[0]) > band)
        if not still.any():
            break
        high = np.where(still, 2 * high, high)
    high = np.where(outside, high, turn)
    never = (np.abs(value) < band) & ~outside
    time = _cross(eq, value, slope, band, low, high)
    time = np.where(never, 0.0, time)
    return np.where((eq.damping == 0) & ~never, np.inf, time)


def _free(eq: Equation, value: Array, slope: Array, time: Array) -> tuple[Array, Array]:
    kernel = kernels(eq, time)
    rest = kernel.regular - eq.gamma * kernel.s
    return (
        value * kernel.regular + slope * kernel.s,
        slope * rest - eq.natural_squared[0] * value * kernel.s,
    )


def _cross(eq: Equation, value: Array, slope: Array, band: Array, low: Array, high: Array) -> Array:
    sign = np.sign(_free(eq, value, slope, low)[0])
    time = (low + high) / 2
    for _ in range(_ITERATIONS):
        motion, speed = _free(eq, value, slope, time)
        excess = sign * motion - band
        low, high = np.where(excess >= 0, time, low), np.where(excess >= 0, high, time)
        with np.errstate(all="ignore"):
            step = time - excess / (sign * speed)
        inside = (step > low) & (step < high)
        following = np.where(inside, step, (low + high) / 2)
        if np.all(np.abs(following - time) <= 4e-16 * following):
            return following
        time = following
    return time


def overshoot(case: Case) -> Array:
    """How far the capacitor voltage passes its steady state, as a share of it.

    Constant source: the largest excursion beyond the final value, over the step from the voltage
    at closing to the final one. Else: the largest magnitude over the steady state's largest
    value, or over the final value, less 1.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Zero if it never passes by more than a peak is known to; nan if there is no step, or
        the final value is zero [1].

    References
    ----------
    .. [1] K. Ogata, Modern Control Engineering (from memory), for the step response.
    """
    if case.source.kind == "dc":
        _, values = case.extrema("capacitor")
        start, final = values[0], values[-1]
        with np.errstate(invalid="ignore", divide="ignore"):
            beyond = np.max((values - final) / (final - start), axis=0)
        beyond = np.where(final == start, np.nan, beyond)
    else:
        steady = steady_peak(case, "capacitor")
        with np.errstate(invalid="ignore", divide="ignore"):
            beyond = case.peak("capacitor").value / steady - 1
        beyond = np.where(steady > 0, beyond, np.nan)
    return np.where(beyond < PROVED_GAP, 0.0, beyond)


def logarithmic_decrement(eq: Equation) -> Array:
    """Natural logarithm of the ratio of successive swings to the same side.

    Parameters
    ----------
    eq : Equation
        A batch of loops.

    Returns
    -------
    Array
        Zero without losses, infinite if nothing rings [1].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6, for the envelope of the ringing.
    """
    with np.errstate(divide="ignore"):
        ringing = np.where(eq.underdamped, eq.root[0], 0.0)
        return 2 * np.pi * eq.damping / ringing
