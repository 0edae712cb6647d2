"""Bands over time: of a batch of loops, and of the closings that are possible."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import show
from rlc.solver.case import Case
from rlc.solver.source import ANY_ANGLE, Window, constant
from rlc.solver.waveforms import Waveforms

Array = NDArray[np.float64]
Band = tuple[Array, Array]

# Loops, or closing angles, times points computed at once, so that any batch fits into memory.
_VALUES_AT_ONCE = 200_000
# Closing angles over the window under harmonics, and over each turn of the highest of them.
_ANGLES, _ANGLES_PER_TURN = 361, 16


def band_label(batch: Case) -> str:
    """Over which loops the band of a batch reaches."""
    return f"nominal, corners and samples ({math.prod(batch.shape)} loops)"


def pieces(batch: Case, points: int) -> Iterator[Case]:
    """A batch cut into flat ones that fit into memory with a number of points per loop.

    Parameters
    ----------
    batch : Case
        Any number of loops.
    points : int
        Times or frequencies at which each will be evaluated.
    """
    shape, source = batch.shape, batch.source
    knots = 1 if batch.lines is None else batch.lines.start.size
    length = max(1, _VALUES_AT_ONCE // max(points, knots))
    for start in range(0, math.prod(shape), length):
        part = slice(start, start + length)

        def cut(value: Any, part: slice = part) -> Any:
            return None if value is None else np.broadcast_to(value, shape).reshape(-1)[part]

        yield Case(
            batch.loop.map(cut),
            replace(
                source,
                amplitude=cut(source.amplitude),
                frequency=cut(source.frequency),
                closing_angle=cut(source.closing_angle),
            ),
            cut(batch.capacitor_voltage),
            cut(batch.initial_current),
            batch.either_polarity,
        )


def signal(waves: Waveforms, element: str) -> Array:
    """One of the waveforms that are drawn.

    Parameters
    ----------
    waves : Waveforms
        Of any shape.
    element : {"source", "current", "capacitor"}
        Which one.

    Returns
    -------
    Array
        [V] or [A].
    """
    if element == "source":
        return waves.source
    return waves.current if element == "current" else waves.capacitor_voltage


def band_of_loops(batch: Case, element: str, time: Array, nominal: Case) -> Band:
    """Lowest and highest value over a batch at each time, the nominal loop included.

    Each loop has its own worst closing for the element where that is open.

    Parameters
    ----------
    batch : Case
        Any number of loops.
    element : {"current", "capacitor"}
        Which signal.
    time : Array
        Shape (n,) [s].
    nominal : Case
        One loop, closed.

    Returns
    -------
    low, high : Array
        Shape (n,) [A] or [V].
    """
    closed, source = batch.closed_for(element), batch.source
    if source.alternating and source.worst_angle and source.window in (None, ANY_ANGLE):
        odd = all(order.number % 2 for order in source.orders)
        angle, own = nominal.source.closing_angle, closed.source.closing_angle
        if batch.at_rest and odd and angle is not None and own is not None:
            # from rest half a turn only changes the sign: take the one next to the nominal
            own = own + np.pi * np.round((angle - own) / np.pi)
            closed = replace(closed, source=replace(closed.source, closing_angle=own))
    low = high = signal(nominal.waveforms(time), element)
    for piece in pieces(closed, time.size):
        values = signal(piece.waveforms(time), element)
        low = np.minimum(low, values.min(axis=0))
        high = np.maximum(high, values.max(axis=0))
    return low, high


def open_angle(case: Case) -> bool:
    """Whether the switch may close at more than one angle of the source."""
    return case.source.alternating and case.source.worst_angle


def open_polarity(case: Case) -> bool:
    """Whether the capacitor's voltage may be of either sign."""
    return case.either_polarity and bool(np.any(case.capacitor_voltage))


def closings_label(case: Case) -> str:
    """Over which closings their band reaches; empty if there is only one."""
    words = []
    if open_angle(case):
        low, high = case.source.window or ANY_ANGLE
        several = case.source.window not in (None, ANY_ANGLE)
        ends = f"closed at {show(low, 'angle')} to {show(high, 'angle')}"
        words.append(ends if several else "closed at any angle")
    if open_polarity(case):
        words.append("charged either way")
    return ", ".join(words)


def band_of_closings(case: Case, time: Array) -> dict[str, Band]:
    """Lowest and highest value at each time over the closings that are possible.

    The signal is the sum of what the source drives, whose phase turns with the closing angle,
    and of what the charge leaves behind, whose sign turns with the polarity. Under a sine the
    extremes over the angles follow from amplitude and phase; harmonics are evaluated on a fine
    set of angles.

    Parameters
    ----------
    case : Case
        One loop.
    time : Array
        Shape (n,) [s].

    Returns
    -------
    dict of str to (Array, Array)
        Lowest and highest source voltage [V], current [A] and capacitor voltage [V], each of
        shape (n,).
    """
    names = ("source", "current", "capacitor")
    charge = Case(case.loop, constant(0.0), case.capacitor_voltage).waveforms(time)
    driven = _driven(case, time)
    bands = {}
    for name in names:
        low, high = driven[name]
        own = signal(charge, name)
        size = np.abs(own)
        below, above = (-size, size) if open_polarity(case) else (own, own)
        bands[name] = (low + below, high + above)
    return bands


def _driven(case: Case, time: Array) -> dict[str, Band]:
    """The band without the capacitor's voltage at closing."""
    names, source = ("source", "current", "capacitor"), case.source
    moving = replace(case, capacitor_voltage=np.zeros(()), either_polarity=False)
    if not open_angle(case):
        waves = moving.waveforms(time)
        return {name: (signal(waves, name),) * 2 for name in names}
    window = source.window or ANY_ANGLE
    if not source.orders:
        rest = replace(moving, initial_current=np.zeros(()))
        sine, cosine = (rest.waveforms(time, closing_angle=angle) for angle in (0.0, np.pi / 2))
        kept = replace(moving, source=constant(0.0)).waveforms(time)
        bands = {}
        for name in names:
            turning = signal(cosine, name) + 1j * signal(sine, name)
            low, high = _turned(turning, window)
            bands[name] = (signal(kept, name) + low, signal(kept, name) + high)
        return bands
    highest = max(order.number for order in source.orders)
    angles = np.linspace(*window, max(_ANGLES, _ANGLES_PER_TURN * highest + 1))
    length = max(1, _VALUES_AT_ONCE // time.size)
    bands = {}
    for start in range(0, angles.size, length):
        waves = moving.waveforms(time, closing_angle=angles[start : start + length])
        for name in names:
            values = signal(waves, name)
            values = np.broadcast_to(values, np.broadcast_shapes(values.shape, (1, time.size)))
            low, high = bands.get(name, (values[0], values[0]))
            bands[name] = (
                np.minimum(low, values.min(axis=0)),
                np.maximum(high, values.max(axis=0)),
            )
    return bands


def _turned(turning: Any, window: Window) -> Band:
    """Least and greatest imaginary part of exp(j angle) * turning over a window of angles."""
    size, phase = np.abs(turning), np.angle(turning)
    first, last = window.low + phase, window.high + phase
    ends = np.sin(first), np.sin(last)

    def passes(angle: float) -> Any:
        """Whether this angle, or one some turns on, lies in the turned window."""
        return np.ceil((first - angle) / (2 * np.pi)) <= np.floor((last - angle) / (2 * np.pi))

    high = np.where(passes(np.pi / 2), 1.0, np.maximum(*ends))
    low = np.where(passes(-np.pi / 2), -1.0, np.minimum(*ends))
    return size * low, size * high


def thinned(across: Array, count: int, *curves: Array) -> NDArray[np.intp]:
    """Points that draw curves as all of them would: lowest and highest of each stretch.

    Parameters
    ----------
    across : Array
        Shape (n,), rising.
    count : int
        Even stretches of it, each a fraction of a pixel wide.
    *curves : Array
        Shape (n,) each.

    Returns
    -------
    Array of int
        Rising, for each curve at most two points of each stretch; all if there are few.
    """
    size = across.size
    if size <= 4 * count:
        return np.arange(size)
    stretch = np.searchsorted(np.linspace(across[0], across[-1], count), across)
    kept = [np.array([0, size - 1])]
    for curve in curves:
        order = np.lexsort((curve, stretch))
        first = np.flatnonzero(np.diff(stretch[order], prepend=-1))
        kept += [order[first], order[np.append(first[1:], size) - 1]]
    return np.unique(np.concatenate(kept))
