"""How a peak is spread over the closing angles that are possible."""

from __future__ import annotations

from dataclasses import replace
from typing import NamedTuple

import numpy as np

from rlc.solver.case import Case
from rlc.solver.source import ANY_ANGLE

_ANGLES = 720


class Closings(NamedTuple):
    """A peak over equally likely closing angles.

    Attributes
    ----------
    percent_1, percent_50, percent_99 : float
        Points of its distribution [V, A or A/s].
    """

    percent_1: float
    percent_50: float
    percent_99: float


def over_closings(case: Case, element: str) -> Closings:
    """Distribution of a peak over the window of closing angles, a turn if there is none.

    Peaks are searched at 720 angles in the middle of equal parts of the window.

    Parameters
    ----------
    case : Case
        One loop, shape (), under an alternating source.
    element : str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    Closings
    """
    low, high = case.source.window or ANY_ANGLE
    angles = low + (high - low) * (np.arange(_ANGLES) + 0.5) / _ANGLES
    each = replace(case, source=replace(case.source, closing_angle=angles, window=None))
    points = np.quantile(each.peak(element).value, (0.01, 0.5, 0.99))
    return Closings(*(float(point) for point in points))
