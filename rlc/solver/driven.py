"""Capacitor voltage and current under a sinusoid or a constant, for many loops and times.

Loops are sorted once by the way they move (:mod:`rlc.solver.regimes`) and then worked through in
pieces that stay in the processor's cache.
"""

from __future__ import annotations

import math
import operator
from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver import doubledouble as dd
from rlc.solver.equation import Array, Complex, Equation
from rlc.solver.regimes import (
    Regime,
    creeping_under_constant,
    creeping_under_sine,
    resonant,
    ringing_under_constant,
    ringing_under_sine,
)
from rlc.solver.series import Drive

#: Samples in one piece: its few arrays fill about the cache that a core has to itself.
_PIECE = 24576

#: A source is near a loop's own frequency within this share of the natural one.
_NEAR = 0.5

Build = Callable[[Equation, Drive], Regime]


def driven_states(
    eq: Equation,
    amplitude: Array,
    frequency: Array,
    closing_angle: Array,
    capacitor_voltage: Array,
    initial_current: Array,
    time: Array,
    order: Array | float = 1.0,
) -> tuple[Array, Array]:
    r"""States of loops that close onto :math:`A\sin(n\omega t + \varphi)`.

    Everything broadcasts together. Loops on the leading axes and times on the last one, which
    for everything else has length one, is the fast way: what belongs to the loop is then worked
    out once.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    amplitude : Array
        Peak of the source [V].
    frequency : Array
        Zero for a constant source, whose voltage is then the one at closing [Hz].
    closing_angle : Array
        The source's phase at closing, from its rising zero [rad].
    capacitor_voltage, initial_current : Array
        States at closing [V], [A].
    time : Array
        Since closing, zero or more [s].
    order : Array or float
        n, the number of the harmonic: n times the frequency is not rounded [1].

    Returns
    -------
    capacitor_voltage, current : Array
        Behind the series resistance, and of the loop [V], [A].

    Notes
    -----
    Worst error measured against 50-digit arithmetic, relative to the running peak, for
    quality factors 1e-4 to 1e6, up to 1e4 periods and frequency ratios 1e-4 to 1e4: below
    1e-14 (``tests/benchmarks/accuracy.py`` prints it by regime).
    """
    level, swing = amplitude * np.sin(closing_angle), amplitude * np.cos(closing_angle)
    drive = Drive(level, swing, frequency, np.asarray(order), capacitor_voltage, initial_current)
    voltage, current = _states(eq, drive, np.asarray(time))
    return voltage, current


def driven_from_rest(eq: Equation, frequency: Array, time: Array) -> tuple[Complex, Complex]:
    r"""States that a source of :math:`e^{j\omega t}` volts drives from rest.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    frequency : Array
        Source frequency, zero for a constant source [Hz].
    time : Array
        Times since closing, zero or more; broadcasts against the batch [s].

    Returns
    -------
    capacitor_voltage, current : Complex
        Real part for a cosine, imaginary part for a sine of 1 V [V], [A]. Each keeps its own
        digits, as in :func:`driven_states`.
    """
    zero, one = np.zeros(()), np.ones(())
    cosine, sine = (
        _states(eq, Drive(level, swing, frequency, one, zero, zero), np.asarray(time))
        for level, swing in ((one, zero), (zero, one))
    )
    return cosine[0] + 1j * sine[0], cosine[1] + 1j * sine[1]


def _states(eq: Equation, drive: Drive, time: Array) -> Array:
    """Both states, on a new first axis."""
    each_loop = np.broadcast_shapes(eq.damping.shape, *(np.shape(value) for value in drive))
    shape = np.broadcast_shapes(each_loop, time.shape)
    # Where the last axis tells loops apart, each sample is a loop of its own.
    batch = shape[:-1] if each_loop[-1:] in ((), (1,)) else shape
    count = shape[-1] if len(batch) < len(shape) else 1
    loops = math.prod(batch)

    def in_a_row(value: Any) -> Any:
        if loops == 1:
            # numpy calculates several times as fast with a number as with an array of one
            return np.reshape(value, ())[()]
        return np.broadcast_to(value, (*batch, 1) if count > 1 else batch).reshape(-1)

    if time.size == count:
        instants = time.reshape(1, count)
    else:
        instants = np.broadcast_to(time, shape).reshape(loops, count)
    states = np.empty((2, loops, count))
    if not states.size:
        return states.reshape(2, *shape)
    with np.errstate(invalid="ignore", divide="ignore", under="ignore"):
        rows, drives = eq.map(in_a_row), Drive(*(in_a_row(value) for value in drive))
        for build, members in _kinds(rows, drives, instants):
            chosen = members if loops > 1 else ()
            regime = build(
                rows.map(operator.itemgetter(chosen)), Drive(*(value[chosen] for value in drives))
            )
            _fill(states, regime, members, instants)
    return states.reshape(2, *shape)


def _kinds(eq: Equation, drive: Drive, time: Array) -> Iterator[tuple[Build, NDArray[np.intp]]]:
    """Loops of each kind, those first whose times are the earliest to their rates."""
    omega = drive.omega
    detuning = dd.subtract(omega, eq.root)[0]
    constant, rings = omega[0] == 0, eq.underdamped
    distance = eq.damping * eq.damping + detuning * detuning
    near = rings & (distance < _NEAR * _NEAR * eq.natural_squared[0])
    lateness = np.atleast_1d(np.maximum(eq.quickest, omega[0]) * np.mean(time, axis=1))
    for build, mask in (
        (ringing_under_constant, rings & constant),
        (resonant, near),
        (ringing_under_sine, rings & ~constant & ~near),
        (creeping_under_constant, ~rings & constant),
        (creeping_under_sine, ~rings & ~constant),
    ):
        members = np.flatnonzero(mask)
        if members.size:
            yield build, members[np.argsort(lateness[members])]


def _fill(states: Array, regime: Regime, members: NDArray[np.intp], time: Array) -> None:
    """Work out a motion piece by piece."""
    count = time.shape[1]
    step = max(1, _PIECE // count)
    for first in range(0, members.size, step):
        piece = slice(first, first + step)
        rows = members[piece]
        for left in range(0, count, _PIECE):
            columns = slice(left, left + _PIECE)
            instants = time[:, columns] if time.shape[0] == 1 else time[rows, columns]
            states[:, rows, columns] = regime.at(piece, instants)
