"""The first extrema after closing, one by one: what the peaks are the largest of."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER

Array = NDArray[np.float64]

SIGNALS = ("current", "capacitor")

_STEPS_PER_CYCLE, _FEWEST_STEPS, _MOST_STEPS = 64, 1024, 400_000
_SECTIONS, _SECTIONINGS = 32, 9
_TIME_CONSTANTS = 40.0


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

    A turning point is a zero of the slope, which follows exactly from the two states. Zeros are
    bracketed on steps of a 64th of the shorter period, ringing or source, and closed by
    sectioning to rounding. With the worst closing angle it is that of the largest current.

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
    angle = float(case.closing_angle_for("current"))
    grid = _grid(case, count)
    times, kinds = [np.zeros(0)], [np.zeros(0, dtype=int)]
    for index, signal in enumerate(SIGNALS):
        found = _zeros(case, signal, angle, grid, count)
        times.append(found)
        kinds.append(np.full(found.size, index))
    time, kind = np.concatenate(times), np.concatenate(kinds)
    order = np.argsort(time, kind="stable")[:count]
    time = time[order]
    waves = case.waveforms(time, angle)
    of = tuple(SIGNALS[index] for index in kind[order])
    return Extrema(angle, time, waves.current, waves.capacitor_voltage, of)


def _grid(case: Case, count: int) -> Array:
    """Steps over as many periods as extrema are asked for; finer near closing."""
    eq = case.equation
    ringing = np.nan_to_num(float(REGISTER["ringing_frequency"](case)))
    frequencies = [each for each in (ringing, float(case.source.frequency)) if each]
    with np.errstate(divide="ignore"):
        end = float(_TIME_CONSTANTS / eq.slowest)
    if frequencies:
        end = min(end, (count + 1) / min(frequencies))
    cycles = end * max(frequencies, default=0.0)
    steps = int(np.clip(cycles * _STEPS_PER_CYCLE, _FEWEST_STEPS, _MOST_STEPS))
    # An overdamped current turns within its fast time constant, long before the slow one.
    start = min(1e-9 * end, 1e-3 / float(eq.quickest))
    return np.union1d(np.linspace(0.0, end, steps), np.geomspace(start, end, _FEWEST_STEPS))


def _zeros(case: Case, signal: str, angle: float, grid: Array, count: int) -> Array:
    """The first times at which the slope of a signal changes its sign."""
    slope = _slope(case, signal, grid, angle)
    before = np.flatnonzero(np.sign(slope[:-1]) * np.sign(slope[1:]) < 0)[:count]
    low, high, sign = grid[before], grid[before + 1], np.sign(slope[before])
    parts = np.linspace(0.0, 1.0, _SECTIONS + 1)[:, np.newaxis]
    for _ in range(_SECTIONINGS):
        cuts = low + (high - low) * parts
        same = np.sign(_slope(case, signal, cuts.ravel(), angle).reshape(cuts.shape)) == sign
        # The last cut before the sign has changed for the first time.
        last = np.maximum(np.argmin(same[1:], axis=0), 0)
        low = np.take_along_axis(cuts, last[np.newaxis], axis=0)[0]
        high = np.take_along_axis(cuts, last[np.newaxis] + 1, axis=0)[0]
    return (low + high) / 2


def _slope(case: Case, signal: str, time: Array, angle: float) -> Array:
    waves = case.waveforms(time, angle)
    return waves.current_rate if signal == "current" else waves.capacitor_voltage_rate
