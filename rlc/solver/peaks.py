"""Signals of the loop, and their largest values under a constant source in closed form.

A signal is a steady part plus free motion of the loop's own equation,

    y(t) = Im or Re(S exp(j omega t)) + q0 g(t) + q1 s(t),

with g and s the kernels of :mod:`rlc.solver.equation` and q0, q1 the free part's value and
slope at closing. Any voltage or current of the loop is such a signal.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Equation, kernels

Array = NDArray[np.float64]


class Signal(NamedTuple):
    """A signal's steady and free part at closing; real or complex arrays of one shape.

    Attributes
    ----------
    steady : Array or Complex
        Phasor of the steady part, or the final value of a constant source [V, A or A/s].
    value : Array or Complex
        The free part at closing [V, A or A/s].
    slope : Array or Complex
        The free part's slope at closing [V/s, A/s or A/s^2].
    """

    steady: Any
    value: Any
    slope: Any


@dataclass(frozen=True)
class Peak:
    """The largest magnitude of a signal over all time.

    Attributes
    ----------
    value : Array
        Magnitude [V, A or A/s]; infinite for an undamped loop driven at its resonance.
    time : Array
        When it is reached [s]; infinite where it is only approached.
    gap : Array
        The true value exceeds ``value`` by no more than this share of it [1].
    angle : Array
        Closing angle of the source at which it occurs [rad].
    polarity : Array
        Sign of the capacitor's voltage at closing, if either is possible: 1 as given, else
        -1 [1].
    """

    value: Array
    time: Array
    gap: Array
    angle: Array
    polarity: Array = 1.0  # type: ignore[assignment]


def first_extremum(eq: Equation, value: Array, slope: Array) -> Array:
    """First time after closing at which free motion turns.

    Underdamped: tan(omega' t) = omega' slope/(omega0^2 value + a slope). Overdamped: the
    matching area tangent, as the logarithm of a quotient that does not cancel.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    value, slope : Array
        Of the free motion at closing [V or A], [V/s or A/s].

    Returns
    -------
    Array
        More than zero; infinite where it never turns [s].

    Notes
    -----
    Where the slope of the free motion of OpenStax, University Physics vol. 2, section 14.6, is
    zero: any text on calculus.
    """
    with np.errstate(all="ignore"):
        divisor = eq.natural_squared[0] * value + eq.damping * slope
        # adding zero turns -0.0 into 0.0: at rest the next extremum is half a period away
        turning = np.arctan2(slope * eq.root[0] + 0.0, divisor) / eq.root[0]
        turning = np.where(turning <= 0, turning + np.pi / eq.root[0], turning)
        near = slope / divisor
        high = eq.natural_squared[0] * value + eq.fast * slope
        low = eq.natural_squared[0] * value + eq.slow * slope
        reach = eq.root[0] * near
        creeping = np.where(
            np.abs(reach) < 0.5,
            near * _area_tangent_ratio(reach),
            0.5 * np.log(high / low) / eq.root[0],
        )
        real = (high * low > 0) & (near > 0) & np.isfinite(creeping)
    return np.where(eq.underdamped, turning, np.where(real, creeping, np.inf))


def _area_tangent_ratio(x: Array) -> Array:
    """artanh(x)/x, 1 at zero."""
    safe = np.where(np.abs(x) < 1e-9, 1e-9, x)
    return np.arctanh(safe) / safe


def constant_source_extrema(eq: Equation, signal: Signal) -> tuple[Array, Array]:
    """Every value that can be the largest or smallest under a constant source.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    signal : Signal
        Broadcasts against the batch; its real part counts [V, A or A/s].

    Returns
    -------
    times, values : Array
        Stacked on a new first axis of four: at closing, the first two extrema, the final value
        [s], [V, A or A/s]. Later extrema lie between the first two, since each swing is shorter
        than the last.
    """
    steady, value, slope = np.broadcast_arrays(
        *(np.real(part) + 0.0 * eq.damping for part in signal)
    )
    first = first_extremum(eq, value, slope)
    with np.errstate(divide="ignore", invalid="ignore"):
        second = np.where(eq.underdamped, first + np.pi / eq.root[0], first)
    times, values = [np.zeros_like(value)], [steady + value]
    for time in (first, second):
        reached = np.where(np.isfinite(time), time, 0.0)
        times.append(reached)
        kernel = kernels(eq, reached)
        values.append(steady + value * kernel.regular + slope * kernel.s)
    times.append(np.full_like(value, np.inf))
    values.append(steady)
    return np.stack(times), np.stack(values)


def constant_source_peak(eq: Equation, signal: Signal) -> Peak:
    """Largest magnitude under a constant source, in closed form.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    signal : Signal
        Broadcasts against the batch; its real part counts [V, A or A/s].

    Returns
    -------
    Peak
        With no gap.
    """
    times, values = constant_source_extrema(eq, signal)
    index = np.abs(values).argmax(axis=0)[np.newaxis]
    value = np.abs(np.take_along_axis(values, index, axis=0))[0]
    time = np.take_along_axis(times, index, axis=0)[0]
    return Peak(value, time, np.zeros_like(value), np.full_like(value, np.pi / 2))
