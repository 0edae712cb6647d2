"""What the register's rows compute, where one expression does not say it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.exceeding import exceeded_of
from rlc.solver.passed import let_through, whole_let_through

Array = NDArray[np.float64]

# A damping ratio of one but for two units in the last place.
_CRITICAL = np.sqrt(4 * np.finfo(np.float64).eps)


def rings(case: Case) -> Any:
    """Whether it rings by more than the rounding of parts that are meant to be critical.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array of bool
    """
    eq = case.equation
    return eq.underdamped & (eq.root[0] > _CRITICAL * eq.natural)


def ringing(case: Case) -> Array:
    """Ringing frequency.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        sqrt(omega_0^2 - gamma^2/4)/(2 pi); not a number where nothing rings [Hz].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6.
    """
    return np.where(rings(case), case.equation.root[0] / (2 * np.pi), np.nan)


def beat(case: Case) -> Any:
    """Distance of source and ringing frequency.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Zero or more; not a number for a constant source or where nothing rings [Hz].
    """
    if not case.source.alternating:
        return np.nan
    return np.abs(case.source.frequency - ringing(case))


def time_constant(case: Case) -> Any:
    """Time constant of the ringing's envelope, or of the slower of two decays.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Infinite without losses [s].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6, for the envelope.
    """
    return 1.0 / case.equation.slowest


def until(case: Case, at: Any) -> Array:
    """Let-through to a stated time, else over all time or a period of the source.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        End of the integral, zero or more [s].

    Returns
    -------
    Array
        Integral of the squared current [A^2 s].
    """
    if at is not None:
        return let_through(case, at)
    return whole_let_through(case)


def exceeding(case: Case, element: str, limit: Any, which: int) -> Any:
    """When a limit is first exceeded, or for how long.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : {"current", "capacitor"}
        The loop current, or the voltage at the capacitor's terminals.
    limit : array_like or None
        Of the magnitude; nothing is exceeded without one [A or V].
    which : int
        0 for the first moment, 1 for the duration [1].

    Returns
    -------
    Array
        Not a number without a limit; infinite if it is never exceeded [s].
    """
    if limit is None:
        return np.nan
    found = exceeded_of(case, element, limit)[which]
    # a limit that is never exceeded is one that takes for ever
    return found if which else np.where(np.isnan(found), np.inf, found)


def peak_time(case: Case, element: str) -> Array:
    """When a peak occurs.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    Array
        Zero or more; not a number where it is only approached [s].
    """
    time = case.peak(element).time
    return np.where(np.isfinite(time), time, np.nan)


def worst_angle(case: Case, element: str) -> Array:
    """Worst closing angle.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    Array
        From the rising zero; not a number if none was asked for or all are as bad [rad].
    """
    if not case.source.worst_angle:
        return np.full(case.loop.shape, np.nan)
    time = case.peak(element).time
    # Where it is only approached, or is the state at closing, every angle is as bad.
    some = np.isfinite(time) & (time > 0)
    return np.where(some, case.closing_angle_for(element), np.nan)
