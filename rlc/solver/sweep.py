"""The steady state over a range of frequencies."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS
from rlc.solver.quantities import REGISTER

Array = NDArray[np.float64]

MOST_POINTS = 100_000

_MARKED = ("lower_half_power_frequency", "natural_frequency", "upper_half_power_frequency")


class Column(NamedTuple):
    """One registered quantity at each frequency.

    Attributes
    ----------
    quantity : str
        Name in the register.
    across : str or None
        The element whose voltage is meant, if the quantity names one.
    values : Array
        Shape (n,) [SI unit of the quantity].
    """

    quantity: str
    across: str | None
    values: Array


@dataclass(frozen=True)
class Sweep:
    """The loop's response.

    Attributes
    ----------
    frequency : Array
        Shape (n,), rising [Hz].
    columns : tuple of Column
        Each of the same length.
    marks : mapping of float to str
        Frequencies that were put in besides the even steps, and the symbol of each [Hz].
    """

    frequency: Array
    columns: tuple[Column, ...]
    marks: dict[float, str]


def sweep(case: Case, start: float | None, stop: float | None, points: int) -> Sweep:
    """Solve for the steady state at frequencies spaced by a constant ratio.

    The natural and half-power frequencies and that of the source are put in where they fall
    inside the range, so that the narrowest resonance is met at its top.

    Parameters
    ----------
    case : Case
        One loop.
    start, stop : float, optional
        First and last frequency, more than zero and rising; if not given, a decade beyond the
        natural frequency and that of the source [Hz].
    points : int
        How many even steps, 2 to 1e5.

    Returns
    -------
    Sweep

    Raises
    ------
    InputError
        If the range is empty or `points` is out of range.
    """
    alternating = case.source.alternating
    within = [
        float(REGISTER["natural_frequency"](case)),
        *[float(case.source.frequency)] * alternating,
    ]
    first = min(within) / 10 if start is None else start
    last = max(within) * 10 if stop is None else stop
    if not 0 < first < last:
        raise InputError(
            "start", f"{first:g} Hz", f"must be above zero and below stop, {last:g} Hz"
        )
    if not 2 <= points <= MOST_POINTS:
        raise InputError("points", points, f"must be from 2 to {MOST_POINTS}")
    marks = {float(REGISTER[name](case)): REGISTER[name].symbol for name in _MARKED}
    if alternating:
        marks.setdefault(float(case.source.frequency), "source")
    marks = {place: name for place, name in marks.items() if first <= place <= last}
    steps = np.geomspace(first, last, points)
    # A step that falls on a marked frequency, but for rounding, is the same row.
    apart = [not any(math.isclose(step, mark) for mark in marks) for step in steps]
    frequency = np.sort(np.concatenate([steps[apart], list(marks)]))
    asked: list[tuple[str, str | None]] = [("impedance", None), ("impedance_phase", None)]
    if alternating:
        asked += [("current", None)]
    asked += [("current_phase", None), *(("gain", element) for element in ELEMENTS)]
    columns = (
        Column(name, across, REGISTER[name](case, frequency, across)) for name, across in asked
    )
    return Sweep(frequency, tuple(columns), marks)
