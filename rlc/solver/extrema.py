"""The first extrema after closing, one by one: what the peaks are the largest of."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.results import ringing
from rlc.solver.shapes import Surge
from rlc.solver.transient import settled
from rlc.solver.turning_points import steps_until, turning_points

Array = NDArray[np.float64]

SIGNALS = ("current", "capacitor")

# What a signal that stands still seems to move by, over its largest value.
_ROUNDING = 1e-10


@dataclass(frozen=True)
class Extrema:
    """Turning points of current and capacitor voltage, in time order.

    Attributes
    ----------
    angle : float
        Closing angle [rad].
    time, current, capacitor_voltage : Array
        Shape (n,): when, and both values then [s], [A], [V at the terminals].
    of : tuple of str
        Which of the two turns: ``current`` or ``capacitor``.
    """

    angle: float
    time: Array
    current: Array
    capacitor_voltage: Array
    of: tuple[str, ...]


def first_extrema(case: Case, count: int = 8) -> Extrema:
    """Solve for the first turning points of current and capacitor voltage.

    A turning point is a zero of the slope, which follows exactly from the two states. Where
    angle or polarity are open they are those of the largest current.

    Parameters
    ----------
    case : Case
        One loop, shape ().
    count : int
        How many of them, at most.

    Returns
    -------
    Extrema
        Fewer than `count`, or none, where the loop settles without turning.
    """
    closed = case.closed_for("current")
    angle = float(np.asarray(closed.source.closing_angle))
    steps = steps_until(closed, _end(closed, count))
    times, kinds = [np.zeros(0)], [np.zeros(0, dtype=int)]
    for index, signal in enumerate(SIGNALS):
        found = _that_turn(closed, signal, turning_points(closed, signal, steps), steps[-1])[:count]
        times.append(found)
        kinds.append(np.full(found.size, index))
    time, kind = np.concatenate(times), np.concatenate(kinds)
    order = np.argsort(time, kind="stable")[:count]
    time = time[order]
    waves = closed.waveforms(time)
    of = tuple(SIGNALS[index] for index in kind[order])
    return Extrema(angle, time, waves.current, waves.capacitor_voltage, of)


def _that_turn(case: Case, signal: str, time: Array, end: float) -> Array:
    """Those turning points between which the signal moves by more than its rounding.

    Where it stands still in between, the last of them counts.
    """
    waves = case.waveforms(np.concatenate([[0.0], time, [end]]))
    values = waves.current if signal == "current" else waves.capacitor_voltage
    still = _ROUNDING * float(np.max(np.abs(values)))
    turned: list[int] = []
    way, extreme, place = 0.0, float(values[0]), -1
    for index, value in enumerate(values[1:]):
        ahead = float(value) - extreme
        if way == 0.0 and abs(ahead) > still:
            way = float(np.sign(ahead))
        if way * ahead >= -still:
            extreme, place = float(value), index
        else:
            turned.append(place)
            way, extreme, place = -way, float(value), index
    kept: Array = time[[index for index in turned if index >= 0]]
    return kept


def _end(case: Case, count: int) -> float:
    """Over as many periods as extrema are asked for, after which there is no more."""
    source = case.source
    frequencies = [float(np.nan_to_num(ringing(case))), float(source.frequency)]
    slowest = min((each for each in frequencies if each), default=0.0)
    end = float(settled(case))
    if not slowest:
        return end
    # A source that takes its time has turning points of its own.
    course = case.lines.start[: count + 1] if case.lines is not None else np.zeros(1)
    fading = 1.0 / source.shape.slow if isinstance(source.shape, Surge) else 0.0
    return min(end, float(course[-1]) + fading + (count + 1) / slowest)
