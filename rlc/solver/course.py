"""A loop carried through straight lines of its source, from knot to knot.

Each line starts from the exact state that the last one left. Two sums are carried: the states,
and how far they are from balance with the source; a loop that follows a slow source is only
known through the second, one that a short pulse has hardly moved only through the first.
"""

from __future__ import annotations

from dataclasses import dataclass
from operator import itemgetter
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Array, Equation, free_response, kernels
from rlc.solver.lines import States, balance, lines
from rlc.solver.shapes import Piecewise

# So many knots are carried one after another, all blocks at once; a power of two keeps the
# blocks of an even record at exact multiples of its step.
_BLOCK = 256
# Knots of all loops together that are kept at one time.
_KNOTS_AT_ONCE = 500_000


States2x2 = tuple[Array, Array, Array, Array]


class _Step(NamedTuple):
    """From one knot to the next: the propagator by rows, and what the source adds."""

    a: Array
    b: Array
    c: Array
    d: Array
    to_states: States
    to_distance: States


Index = NDArray[np.intp]


@dataclass(frozen=True, eq=False)
class Course:
    """States at every knot; batch first, knots last.

    Attributes
    ----------
    eq : Equation
        The loops, with one more axis at the end.
    shape : Piecewise
        The source, without repetition.
    states : (Array, Array)
        Capacitor voltage behind the series resistance, and current [V], [A].
    distance : (Array, Array)
        The same, less the states in balance with the source just after the knot [V], [A].
    near_balance : (Array of bool, Array of bool)
        Where voltage and current are to be taken from the distance: it has been the smaller one.
    """

    eq: Equation
    shape: Piecewise
    states: States
    distance: States
    near_balance: tuple[NDArray[np.bool_], NDArray[np.bool_]]

    @property
    def free(self) -> States:
        """What keeps the states from balance just after each knot, the better known way."""
        _, near = self.near_balance
        level = self.shape.level
        voltage, current = (
            np.where(near, apart, state - rest * level)
            for apart, state, rest in zip(self.distance, self.states, balance(self.eq), strict=True)
        )
        return voltage, current

    @property
    def known(self) -> States:
        """The states at each knot, the better known way."""
        voltage, current = (
            np.where(near, rest * self.shape.level + apart, state)
            for near, rest, apart, state in zip(
                self.near_balance, balance(self.eq), self.distance, self.states, strict=True
            )
        )
        return voltage, current

    def at(self, time: Array) -> tuple[Array, Array]:
        """Capacitor voltage and current at given times.

        Parameters
        ----------
        time : Array
            Shape (n,), zero or more [s].

        Returns
        -------
        capacitor_voltage, current : Array
            Shape of the batch, then (n,) [V], [A].
        """
        index = np.searchsorted(self.shape.start, time, side="right") - 1
        since, lost = _difference(time, self.shape.start[index])
        voltage, current = self._along(self.eq, index, since, (Ellipsis, index))
        if lost.any():
            # what rounding took from the time: 1e-16 of it is 1e-11 of a turn after 1e4 periods
            a, b, c, d = self.eq.matrix
            source = self.shape.level[index] + self.shape.slope[index] * since
            voltage, current = (
                voltage + lost * (a * voltage + b * current),
                current + lost * (c * voltage + d * current + self.eq.source_rate * source),
            )
        return voltage, current

    def along(self, loop: Index, line: Index, since: Array) -> tuple[Array, Array]:
        """Capacitor voltage and current of some loops on some lines.

        Parameters
        ----------
        loop, line : Array of int
            Shape (n,) each, places in the batch, which has one axis, and among the lines [1].
        since : Array
            Shape (n,), from the line's start on [s].

        Returns
        -------
        capacitor_voltage, current : Array
            Shape (n,) [V], [A].
        """
        eq = self.eq.map(lambda part: part[loop, 0])
        return self._along(eq, line, since, (loop, line))

    def _along(self, eq: Equation, index: Index, since: Array, place: Any) -> States:
        level, slope = self.shape.level[index], self.shape.slope[index]
        line = lines(eq, since)
        moved = free_response(eq, line.kernel, *(part[place] for part in self.states))
        left = free_response(eq, line.kernel, *(part[place] for part in self.distance))
        source = level + slope * since
        rest = balance(eq)
        voltage, current = (
            np.where(
                self.near_balance[k][place],
                rest[k] * source + slope * line.lag[k] + left[k],
                moved[k] + level * line.step[k] + slope * line.ramp[k],
            )
            for k in (0, 1)
        )
        return voltage, current


def follow(eq: Equation, shape: Piecewise, voltage: Array, current: Array) -> Course:
    """Carry loops through a course of straight lines.

    Parameters
    ----------
    eq : Equation
        A batch of loops, with one more axis of length one at the end.
    shape : Piecewise
        The source, without repetition.
    voltage, current : Array
        States at closing; broadcast against the batch with its last axis [V], [A].

    Returns
    -------
    Course
    """
    batch = np.broadcast_shapes(eq.damping.shape, np.shape(voltage), np.shape(current))
    rest_voltage, rest_current = balance(eq)
    level = shape.level[0]
    first = np.broadcast_to(voltage, batch), np.broadcast_to(current, batch)
    apart = first[0] - rest_voltage * level, first[1] - rest_current * level
    if shape.start.size > 1:
        step = _steps(eq, shape)
        across = _across_blocks(eq, shape.start)
        states = _carry(step, step.to_states, first, across)
        distance = _carry(step, step.to_distance, apart, across)
    else:
        states, distance = first, apart
    scale = np.abs(eq.matrix[1] / eq.matrix[2])  # squared impedance of the two states
    size, far = (
        np.maximum.accumulate(part[0] ** 2 + scale * part[1] ** 2, axis=-1)
        for part in (states, distance)
    )
    near = far < size
    lower = np.maximum.accumulate(np.abs(distance[0]), axis=-1) < np.maximum.accumulate(
        np.abs(states[0]), axis=-1
    )
    return Course(eq, shape, states, distance, (near & lower, near))


class LastKnot(NamedTuple):
    """Loops at the last knot of their source; each array has the batch's shape.

    Attributes
    ----------
    states, free : (Array, Array)
        Capacitor voltage and current, and what keeps them from balance [V], [A].
    """

    states: States
    free: States


def at_last_knot(eq: Equation, shape: Piecewise, voltage: Array, current: Array) -> LastKnot:
    """Carry loops through a course, some at a time, and keep where they come to.

    Parameters
    ----------
    eq : Equation
        A batch of loops, with one more axis of length one at the end.
    shape : Piecewise
        The source, without repetition.
    voltage, current : Array
        States at closing; broadcast against the batch with its last axis [V], [A].

    Returns
    -------
    LastKnot
    """
    batch = np.broadcast_shapes(eq.damping.shape, voltage.shape, current.shape)
    size = int(np.prod(batch))

    def flat(value: Any) -> Array:
        return np.broadcast_to(value, batch).reshape(size, 1)

    rows, starts = eq.map(flat), (flat(voltage), flat(current))
    some = max(1, _KNOTS_AT_ONCE // shape.start.size)
    ends = []
    for first in range(0, size, some):
        piece = slice(first, first + some)
        course = follow(rows.map(itemgetter(piece)), shape, *(part[piece] for part in starts))
        ends.append([part[:, -1] for part in (*course.known, *course.free)])
    found = [np.concatenate(part).reshape(batch[:-1]) for part in zip(*ends, strict=True)]
    return LastKnot((found[0], found[1]), (found[2], found[3]))


def _difference(a: Array, b: Array) -> tuple[Array, Array]:
    """a - b, and what rounding takes from it."""
    high = a - b
    part = high - a
    return high, (a - (high - part)) - (b + part)


def _steps(eq: Equation, shape: Piecewise) -> _Step:
    width, lost = _difference(shape.start[1:], shape.start[:-1])
    if np.all(width == width[0]):
        width, lost = width[:1], lost[:1]
    level, end, slope = shape.level[:-1], shape.end[:-1], shape.slope[:-1]
    jump = shape.level[1:] - end
    line = lines(eq, width)
    kernel, (a, b, c, d) = line.kernel, eq.matrix
    propagator = (kernel.capacitor, b * kernel.s, c * kernel.s, kernel.current)
    states = tuple(level * s + slope * r for s, r in zip(line.step, line.ramp, strict=True))
    left = tuple(slope * lag for lag in line.lag)
    if lost.any():
        p, q, r, s = propagator
        propagator = (
            p + lost * (a * p + b * r), q + lost * (a * q + b * s),
            r + lost * (c * p + d * r), s + lost * (c * q + d * s),
        )  # fmt: skip
        states = (
            states[0] + lost * (a * states[0] + b * states[1]),
            states[1] + lost * (c * states[0] + d * states[1] + eq.source_rate * end),
        )
        rest = balance(eq)
        left = (
            left[0] + lost * (a * left[0] + b * left[1] - rest[0] * slope),
            left[1] + lost * (c * left[0] + d * left[1] - rest[1] * slope),
        )
    left = tuple(part - rest * jump for part, rest in zip(left, balance(eq), strict=True))
    return _Step(*propagator, states, left)  # type: ignore[arg-type]


def _blocks(values: Array) -> Array:
    """Steps on the last axis cut into blocks: step in the block first, blocks last."""
    count = values.shape[-1]
    if count == 1:
        return values[np.newaxis]
    block = min(_BLOCK, count)
    number = -(-count // block)
    padded = np.zeros((*values.shape[:-1], number * block))
    padded[..., :count] = values
    return np.ascontiguousarray(
        np.moveaxis(padded.reshape(*values.shape[:-1], number, block), -1, 0)
    )


def _across_blocks(eq: Equation, start: Array) -> States2x2 | None:
    """Propagators from the first knot of a block to each of its steps' ends."""
    count = start.size - 1
    if count <= _BLOCK:
        return None
    origin = np.repeat(start[:-1:_BLOCK], _BLOCK)[:count]
    kernel = kernels(eq, start[1:] - origin)
    _, b, c, _ = eq.matrix
    parts = (kernel.capacitor, b * kernel.s, c * kernel.s, kernel.current)
    return tuple(_blocks(part) for part in parts)  # type: ignore[return-value]


def _carry(step: _Step, added: States, first: States, across: States2x2 | None) -> States:
    """All blocks are advanced together from zero, the first one from the states at closing;
    then each gets what the block before it has ended on."""
    count = added[0].shape[-1]
    a, b, c, d = (_blocks(part) for part in (step.a, step.b, step.c, step.d))
    voltage, current = (_blocks(part) for part in added)
    v, i = np.zeros_like(voltage[0]), np.zeros_like(voltage[0])
    v[..., 0], i[..., 0] = (part[..., 0] for part in first)
    for row in range(voltage.shape[0]):
        k = min(row, a.shape[0] - 1)
        voltage[row] += a[k] * v + b[k] * i
        current[row] += c[k] * v + d[k] * i
        v, i = voltage[row], current[row]
    if across is not None:
        p, q, r, s = across
        before, behind = np.zeros_like(v), np.zeros_like(v)
        for block in range(1, voltage.shape[-1]):
            last = block - 1
            x, y = before[..., last], behind[..., last]
            before[..., block] = p[-1, ..., last] * x + q[-1, ..., last] * y + v[..., last]
            behind[..., block] = r[-1, ..., last] * x + s[-1, ..., last] * y + i[..., last]
        voltage += p * before + q * behind
        current += r * before + s * behind

    def joined(start: Array, rows: Array) -> Array:
        steps = np.moveaxis(rows, 0, -1)
        steps = steps.reshape(*steps.shape[:-2], -1)[..., :count]
        return np.concatenate([np.broadcast_to(start, (*steps.shape[:-1], 1)), steps], axis=-1)

    return joined(first[0], voltage), joined(first[1], current)
