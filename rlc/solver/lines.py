r"""The response from rest to a step and to a ramp, and how far a loop lags behind a ramp.

With D2 and D3 the divided differences of the exponential at the two roots and once or twice
zero, a step of 1 V gives v_C = (kappa/LC) D2 and i = (s + (G kappa/C) D2)/L, and a ramp of
1 V/s the integrals of both. Far behind the start the response to a ramp is the ramp itself but
for a lag, which is formed on its own: the difference of the two would drown in rounding.

Divided differences: see :mod:`rlc.solver.equation`.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from rlc.solver.equation import Array, Equation, Kernels, kernels

_TERMS = 30
# A term that is no more of the first one, nor the one before it, ends a series.
_NEGLIGIBLE = 1e-19
_FACTORIAL = np.cumprod(np.r_[1.0, np.arange(1.0, _TERMS + 4)])

States = tuple[Array, Array]


class Lines(NamedTuple):
    """States driven from rest, each as (capacitor voltage, current).

    Attributes
    ----------
    kernel : Kernels
        Of the free motion at the same times.
    step, ramp : (Array, Array)
        For a source of 1 V from t = 0, and for one of t volts per second [V], [A].
    lag : (Array, Array)
        The ramp's states less those that would balance the source at each moment [V], [A].
    """

    kernel: Kernels
    step: States
    ramp: States
    lag: States


def balance(eq: Equation) -> States:
    """The states in which the loop rests under a constant source of 1 V.

    Parameters
    ----------
    eq : Equation
        A batch of loops.

    Returns
    -------
    capacitor_voltage, current : Array
        Behind the series resistance, and of the loop [1], [A/V].
    """
    natural = eq.natural_squared[0]
    return (
        eq.matrix[1] * eq.source_rate / natural,
        -eq.matrix[0] * eq.source_rate / natural,
    )


def final_lag(eq: Equation) -> States:
    """What the lag behind a ramp of 1 V/s comes to.

    Parameters
    ----------
    eq : Equation
        A batch of loops.

    Returns
    -------
    capacitor_voltage, current : Array
        Per volt per second [s], [A s/V].
    """
    natural = eq.natural_squared[0]
    delay = eq.gamma / natural
    voltage = -eq.matrix[1] * eq.source_rate * delay / natural
    return voltage, eq.source_rate * (1.0 + eq.matrix[0] * delay) / natural


def lines(eq: Equation, time: Array) -> Lines:
    """Evaluate the responses to a step and a ramp.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    time : Array
        Zero or more; broadcasts against the batch [s].

    Returns
    -------
    Lines
        With the shape of batch and times together.
    """
    kernel = kernels(eq, time)
    shape = kernel.s.shape
    time = np.broadcast_to(time, shape)

    def spread_out(value: Any) -> Any:
        return np.broadcast_to(value, shape)

    natural, s = spread_out(eq.natural_squared[0]), kernel.s
    over = spread_out(~eq.underdamped)
    once = np.array((1.0 - kernel.regular) / natural)
    if over.any():
        slow = spread_out(eq.slow)[over]
        once[over] = (-np.expm1(-slow * time[over]) - slow * s[over]) / natural[over]
    turns = spread_out(eq.quickest) * time
    _put_series(once, turns < 1.0, eq, time, 2)
    twice = np.array((time - spread_out(eq.gamma) * once - s) / natural)
    creeping = over & (spread_out(eq.slow) * time < 1.0)
    if creeping.any():
        t = time[creeping]
        phi = _phi_two(-spread_out(eq.slow)[creeping] * t)
        twice[creeping] = (t * t * phi - once[creeping]) / spread_out(eq.fast)[creeping]
    _put_series(twice, turns < 3.0, eq, time, 3)
    gain, leak = eq.matrix[1] * eq.source_rate, -eq.matrix[0]
    behind = (eq.gamma * once + s) / natural
    return Lines(
        kernel,
        (gain * once, eq.source_rate * (s + leak * once)),
        (gain * twice, eq.source_rate * (once + leak * twice)),
        (-gain * behind, eq.source_rate * (once - leak * behind)),
    )


def _put_series(out: Array, where: Any, eq: Equation, time: Array, order: int) -> None:
    """Taylor series of a divided difference at the two roots and zeros, in place."""
    if not where.any():
        return
    t = time[where]
    linear = -np.broadcast_to(eq.gamma, out.shape)[where] * t
    quadratic = -np.broadcast_to(eq.natural_squared[0], out.shape)[where] * t * t
    previous, current = np.zeros_like(t), np.ones_like(t)
    total = current / _FACTORIAL[order]
    for k in range(1, _TERMS):
        previous, current = current, linear * current + quadratic * previous
        total = total + current / _FACTORIAL[order + k]
        left = max(np.max(np.abs(current)), np.max(np.abs(previous)))
        if left < _NEGLIGIBLE * _FACTORIAL[order + k] / _FACTORIAL[order]:
            break
    out[where] = total * t**order


def _phi_two(x: Array) -> Array:
    """(exp(x) - 1 - x)/x^2 for |x| <= 1 by Horner's rule."""
    total = np.full_like(x, 1 / _FACTORIAL[22])
    for k in range(21, 1, -1):
        total = total * x + 1 / _FACTORIAL[k]
    return total
