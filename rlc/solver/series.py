"""Power series in time, for the moments at which closed forms cancel.

Just after closing the states are differences of terms that are much larger than they are. Their
Taylor series has no such loss, and its coefficients belong to the loop, so that a sample costs
two operations a term.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np

from rlc.solver import doubledouble as dd
from rlc.solver.equation import Array, Complex, Equation, angular

#: Where the series take over, as largest rate times time [1]. Closed forms lose a factor of about
#: 6 / reach^3, the series one of about exp(2 reach).
_START_REACH, _START_TERMS = 1.5, 25
_SLOW_REACH, _SLOW_TERMS = 1.0, 21


class Drive(NamedTuple):
    """What moves the loops: a source level cos(omega t) + swing sin(omega t), and states.

    Attributes
    ----------
    level, swing : Array
        Amplitudes in step and in quadrature with closing [V].
    frequency, order : Array
        Of the source, zero for a constant one [Hz], and the number of its harmonic [1].
    capacitor_voltage, current : Array
        States at closing [V], [A].
    """

    level: Array
    swing: Array
    frequency: Array
    order: Array
    capacitor_voltage: Array
    current: Array

    @property
    def omega(self) -> dd.Pair:
        """Angular frequency of the source [rad/s]."""
        return angular(self.frequency, self.order)

    @property
    def turn(self) -> Complex:
        """Phasor of the source: it is the imaginary part of turn exp(j omega t) [V]."""
        return self.swing + 1j * self.level


def table(rows: Sequence[Sequence[Any]]) -> Array:
    """Values of each loop side by side, to meet an axis of times.

    Parameters
    ----------
    rows : sequence of sequences of Array
        Each Array has one value for each loop, or all are of a single loop [SI].

    Returns
    -------
    Array
        Shape (rows, entries, loops, 1) [SI].
    """
    values = np.array(rows, dtype=np.float64)
    return values.reshape(*values.shape[:2], -1, 1)


@dataclass(frozen=True)
class Series:
    """States at small times: a polynomial and, weighted, the first few functions of a motion.

    Attributes
    ----------
    rate : Array
        What the polynomial's variable is measured by, shape (loops, 1) [1/s].
    reach : float
        Value of rate times time up to which it holds [1].
    coefficients : Array
        Of capacitor voltage and current, shape (terms, 2, loops, 1) [V], [A].
    weights : Array
        Of the motion's functions, shape (functions, 2, loops, 1) [V], [A].
    """

    rate: Array
    reach: float
    coefficients: Array
    weights: Array

    def put(self, states: Array, loops: slice, time: Array, functions: tuple[Array, ...]) -> None:
        """Replace the states at the times within reach.

        Parameters
        ----------
        states : Array
            Shape (2, loops, n), changed in place [V], [A].
        loops : slice
            Which loops these are.
        time : Array
            Shape (loops or 1, n) [s].
        functions : tuple of Array
            The motion's functions of time, each of shape (loops, n) [1].
        """
        rate = self.rate[loops]
        columns = np.flatnonzero(np.min(time, axis=0) * np.min(rate) < self.reach)
        if not columns.size:
            return
        scaled = rate * time[:, columns]
        near = np.minimum(scaled, self.reach)
        coefficients = self.coefficients[:, :, loops]
        found = coefficients[-1] * near
        for coefficient in coefficients[-2:0:-1]:
            found += coefficient
            found *= near
        found += coefficients[0]
        for weight, function in zip(self.weights[:, :, loops], functions, strict=False):
            found += weight * function[:, columns]
        states[..., columns] = np.where(scaled < self.reach, found, states[..., columns])


def start_series(eq: Equation, drive: Drive) -> Series:
    """Taylor series of the state equation itself, for times before anything has turned.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Series
    """
    omega = drive.omega[0]
    rate = np.maximum(eq.quickest, omega)
    leak, to_voltage, to_current, damping = (entry / rate for entry in eq.matrix)
    push, turn = eq.source_rate / rate, omega / rate
    voltage, current = drive.capacitor_voltage, drive.current
    source, quadrature = drive.level, drive.swing
    rows = [(voltage, current)]
    for k in range(1, _START_TERMS):
        voltage, current, source, quadrature = (
            (leak * voltage + to_voltage * current) / k,
            (to_current * voltage + damping * current + push * source) / k,
            turn * quadrature / k,
            -turn * source / k,
        )
        rows.append((voltage, current))
    none = np.empty((0, 2, np.size(rate), 1))
    return Series(np.reshape(rate, (-1, 1)), _START_REACH, table(rows), none)


def slow_series(
    eq: Equation, omega: Array, pulls: tuple[Complex, Complex], weights: Array
) -> Series:
    r"""The slow decay's response to a rotating source, once the fast decay has died.

    With :math:`y = (e^{j\omega t} - e^{s_1 t})/(j\omega - s_1)` the states are the imaginary
    parts of pull times y, and what the weights add. Real and imaginary part of y are of
    different order in time, which the quotient does not keep.

    Parameters
    ----------
    eq : Equation
        Overdamped loops.
    omega : Array
        Of the source [rad/s].
    pulls : (Complex, Complex)
        For capacitor voltage and current [V/s], [A/s].
    weights : Array
        As for :class:`Series` [V], [A].

    Returns
    -------
    Series
    """
    rate = np.maximum(eq.slow, omega)
    decay, turn = eq.slow / rate, 1j * omega / rate
    response: Any = 0.0 * turn
    source = 1.0 / rate + response
    rows = []
    for k in range(1, _SLOW_TERMS + 1):
        rows.append(tuple((pull * response).imag for pull in pulls))
        response, source = (source - decay * response) / k, turn * source / k
    return Series(np.reshape(rate, (-1, 1)), _SLOW_REACH, table(rows), weights)
