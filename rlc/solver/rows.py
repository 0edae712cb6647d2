"""What is searched, and how signals add up that turn with the source's closing angle."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from rlc.solver.equation import Equation
from rlc.solver.motion import Array, Bounds, Index, Motion, Moved


@dataclass(frozen=True, eq=False)
class Rows:
    """What is searched: a row per loop, or per loop and line of its source.

    Attributes
    ----------
    eq : Equation
        Shape (n,).
    parts : tuple of Motion
        Signals whose magnitudes add up; turned by the closing angle if `turns` is given.
    group : Array of int
        Shape (n,), place of the loop that a row belongs to [1].
    start, duration : Array
        Shape (n,), since closing; a duration may be infinite [s].
    quickest : Array
        Shape (n,), the largest rate at which anything changes [1/s].
    top : Array, optional
        Shape (n,), what the held parts together never pass [V, A or A/s].
    turns : tuple of int, optional
        How many turns each part makes with one of the closing angle: the signal is the sum of
        Im(exp(j k angle) y_k), and of real parts without a turn.
    window : (Array, Array), optional
        Shape (n,) each: limits of the closing angle, with `turns` [rad].
    frame : Array, optional
        Shape (n,), the source's angular frequency, with `turns`. The source's angle at the time
        is then searched in place of that at closing: along a line on which it is constant late
        moments differ by free motion alone [rad/s].
    """

    eq: Equation
    parts: tuple[Motion, ...]
    group: Index
    start: Array
    duration: Array
    quickest: Array
    top: Array | None = None
    turns: tuple[int, ...] = ()
    window: tuple[Array, Array] | None = None
    frame: Array | None = None


def framed(rows: Rows, which: Index, time: Array, moved: Sequence[Moved]) -> Sequence[Moved]:
    """The parts as seen while turning with the source.

    Parameters
    ----------
    rows : Rows
        Each turning part has one term.
    which : Array of int
        Places of the rows, from zero [1].
    time : Array
        One per row, since its start [s].
    moved : sequence of Moved
        Each part then.

    Returns
    -------
    sequence of Moved
        The same, without a frame.
    """
    if rows.frame is None:
        return moved
    seen = []
    for k, part, each in zip(rows.turns, rows.parts, moved, strict=True):
        if not k:
            seen.append(each)
            continue
        rate = 1j * k * rows.frame[which]
        back = np.exp(-rate * time)
        (term,) = part.terms
        curve = each.bend - rate * rate * (each.value - each.free)
        seen.append(
            Moved(
                term.phasor[which] + back * each.free,
                back * (each.speed - rate * each.free),
                back * (curve - 2 * rate * each.speed + rate * rate * each.free),
                each.free,
                each.speed,
            )
        )
    return seen


def framed_bounds(rows: Rows, which: Index, bounds: Sequence[Bounds]) -> Sequence[Bounds]:
    """The bounds as seen while turning with the source: only free motion moves.

    Parameters
    ----------
    rows : Rows
        What is searched.
    which : Array of int
        Places of the rows, from zero [1].
    bounds : sequence of Bounds
        Of each part.

    Returns
    -------
    sequence of Bounds
        The same, without a frame.
    """
    if rows.frame is None:
        return bounds
    seen = []
    for k, each in zip(rows.turns, bounds, strict=True):
        rate = k * rows.frame[which]
        reach, speed, bend = each.free
        turning = speed + rate * reach, bend + 2 * rate * speed + rate * rate * reach
        seen.append(Bounds(each.value, *turning, each.free))
    return seen


def together(turns: Sequence[int], moved: Sequence[Moved], angle: Array) -> tuple[Array, ...]:
    """The signal at an angle.

    Parameters
    ----------
    turns : sequence of int
        As in :class:`Rows`.
    moved : sequence of Moved
        Each part.
    angle : Array
        One per row [rad].

    Returns
    -------
    tuple of Array
        Value [V, A or A/s], slopes in time and in angle, then the second derivatives in time,
        in both, and in angle; per second and per radian.
    """
    value, slope, bend, aslant, mixed, round_ = (np.zeros(angle.size) for _ in range(6))
    for k, part in zip(turns, moved, strict=True):
        if not k:
            value, slope, bend = value + part.value, slope + part.slope, bend + part.bend
            continue
        turn = np.exp(1j * k * angle)
        wave, pace = turn * part.value, turn * part.slope
        value, slope = value + wave.imag, slope + pace.imag
        bend = bend + (turn * part.bend).imag
        aslant, mixed = aslant + k * wave.real, mixed + k * pace.real
        round_ = round_ - k * k * wave.imag
    return value, slope, aslant, bend, mixed, round_
