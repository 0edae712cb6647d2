"""A switch-on under straight lines of its source, which the loop is carried through."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.course import Course, LastKnot, at_last_knot, follow
from rlc.solver.shapes import MOST_PULSES, Piecewise

if TYPE_CHECKING:
    from rlc.solver.case import Case

Array = NDArray[np.float64]

# A train of pulses is steady when so many time constants have passed: 1e-12 is left.
_STEADY = float(np.log(1e12))


def lines_of(case: Case) -> Piecewise | None:
    """The source's straight lines, a train that is to become steady repeated so often.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Piecewise or None
        Without a period; none if the source has no lines.

    Raises
    ------
    InputError
        If a train takes more pulses than a course may have.
    """
    shape = case.source.shape
    if not isinstance(shape, Piecewise) or shape.period is None:
        return shape if isinstance(shape, Piecewise) else None
    with np.errstate(divide="ignore"):
        needed = np.max(_STEADY / (case.equation.slowest * shape.period))
    if not needed < MOST_PULSES:
        rule = f"needs more than {MOST_PULSES} pulses, for little is lost in each"
        raise InputError("count", "until steady", rule, "State a count of pulses")
    return shape.repeated(int(np.ceil(needed)) + 1)


def train_end(case: Case) -> float:
    """When the last line of a train that is repeated until steady ends.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    float
        Infinite for other sources [s].
    """
    shape, lines = case.source.shape, case.lines
    if lines is None or not isinstance(shape, Piecewise) or not case.repeats:
        return np.inf
    return lines.start.size // shape.start.size * case.repeats


def course_of(case: Case) -> Course:
    """The loop carried through its source's lines.

    Parameters
    ----------
    case : Case
        One switch-on or a batch, under lines.

    Returns
    -------
    Course
    """
    assert case.lines is not None
    return follow(case.equation.column(), case.lines, *_starts(case))


def last_knot_of(case: Case) -> LastKnot:
    """Where the last line of the source finds the loop.

    Parameters
    ----------
    case : Case
        One switch-on or a batch, under lines.

    Returns
    -------
    LastKnot
    """
    assert case.lines is not None
    return at_last_knot(case.equation.column(), case.lines, *_starts(case))


def _starts(case: Case) -> tuple[Array, Array]:
    voltage, current = (
        np.broadcast_to(part, case.shape)[..., np.newaxis]
        for part in (case.capacitor_voltage, case.initial_current)
    )
    return voltage, current
