"""Turning points of a signal: zeros of its slope, bracketed on steps and closed by sectioning."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.shapes import Surge

Array = NDArray[np.float64]

_STEPS_PER_CYCLE, _FEWEST_STEPS, _MOST_STEPS = 64, 1024, 200_000
_SECTIONS, _SECTIONINGS = 32, 9


def longest_stepped(case: Case) -> float:
    """Up to when even steps are a 64th of the shortest period.

    Parameters
    ----------
    case : Case
        One loop, shape ().

    Returns
    -------
    float
        Since closing; infinite if nothing swings [s].
    """
    highest = _highest_frequency(case)
    return _MOST_STEPS / (highest * _STEPS_PER_CYCLE) if highest else np.inf


def _highest_frequency(case: Case) -> float:
    """Of ringing and source [Hz]."""
    source, eq = case.source, case.equation
    driven = max(order.number for order in source.every_order) * float(source.frequency)
    return max(driven, float(np.where(eq.underdamped, eq.root[0], 0.0)) / (2 * np.pi))


def steps_until(case: Case, end: float) -> Array:
    """Times so close together that a signal turns at most once between two of them.

    Parameters
    ----------
    case : Case
        One loop, shape ().
    end : float
        The last time, up to :func:`longest_stepped`; beyond that steps are longer [s].

    Returns
    -------
    Array
        A 64th of the shortest period, ringing, source or surge, and finer after closing and
        the source's knots [s].
    """
    shape, quick = case.source.shape, float(case.equation.quickest)
    if isinstance(shape, Surge):
        quick = max(quick, shape.fast)
    cycles = end * _highest_frequency(case)
    steps = int(np.clip(np.ceil(cycles * _STEPS_PER_CYCLE), _FEWEST_STEPS, _MOST_STEPS))
    # An overdamped current turns within its fast time constant, long before the slow one.
    start = min(1e-9 * end, 1e-3 / quick)
    fine = np.geomspace(start, end, _FEWEST_STEPS)
    times = np.union1d(np.linspace(0.0, end, steps), fine)
    if case.lines is None:
        return times
    knots = case.lines.start[case.lines.start < end]
    few = knots[: _FEWEST_STEPS // 8, np.newaxis] + fine[:: _FEWEST_STEPS // 64]
    times = np.union1d(np.union1d(times, knots), few.ravel())
    return times[times <= end]


def turning_points(case: Case, signal: str, times: Array, count: int | None = None) -> Array:
    """The first times at which the slope of a signal changes its sign.

    Parameters
    ----------
    case : Case
        One loop, shape (), with one closing angle and polarity.
    signal : {"current", "capacitor"}
        Which signal.
    times : Array
        Shape (n,), rising, the steps that bracket them [s].
    count : int, optional
        How many of them; all if not given.

    Returns
    -------
    Array
        Rising, at most `count` [s].
    """
    slope = _slope(case, signal, times)
    before = np.flatnonzero(np.sign(slope[:-1]) * np.sign(slope[1:]) < 0)[:count]
    sign = np.sign(slope[before])
    low, high = narrowed(
        times[before], times[before + 1], lambda at: np.sign(_slope(case, signal, at)), sign
    )
    return (low + high) / 2


def narrowed(
    low: Array, high: Array, state: Callable[[Array], Any], before: Array
) -> tuple[Array, Array]:
    """Close brackets of a first change to rounding, all at once.

    Parameters
    ----------
    low, high : Array
        Shape (n,), times before and after the change [s].
    state : callable
        What changes, a sign or whether something holds, from times of shape (m,) [s].
    before : Array
        Shape (n,), what it is at `low` [1].

    Returns
    -------
    low, high : Array
        The last time found before the change, and the first one after [s].
    """
    parts = np.linspace(0.0, 1.0, _SECTIONS + 1)[:, np.newaxis]
    for _ in range(_SECTIONINGS):
        cuts = low + (high - low) * parts
        same = state(cuts.ravel()).reshape(cuts.shape) == before
        # The last cut before the change.
        last = np.maximum(np.argmin(same[1:], axis=0), 0)
        low = np.take_along_axis(cuts, last[np.newaxis], axis=0)[0]
        high = np.take_along_axis(cuts, last[np.newaxis] + 1, axis=0)[0]
    return low, high


def _slope(case: Case, signal: str, times: Array) -> Array:
    waves = case.waveforms(times)
    return waves.current_rate if signal == "current" else waves.capacitor_voltage_rate
