"""What the register's rows compute, where one expression does not say it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.exceeding import exceeded_of
from rlc.solver.passed import let_through, whole_let_through
from rlc.solver.steady import SteadyState

Array = NDArray[np.float64]

# A damping ratio of one but for two units in the last place.
_CRITICAL = np.sqrt(4 * np.finfo(np.float64).eps)


def steady_at(case: Case, at: Any) -> SteadyState:
    """The steady state at a stated frequency, else at the source's.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more [Hz].

    Returns
    -------
    SteadyState
    """
    return case.steady if at is None else case.steady_at(at)


def phasor_current(case: Case, at: Any) -> Any:
    """Phasor of the loop current for the source's level.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more; None for the source's [Hz].

    Returns
    -------
    Complex
        Peak value and phase against the source [A].
    """
    return np.abs(case.source.amplitude) * steady_at(case, at).current


def rms(case: Case, phasor: Any) -> Any:
    """Rms value of a phasor per volt, for the source's level.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    phasor : Complex
        Per volt of the source's amplitude, of a voltage or the current [1 or A/V].

    Returns
    -------
    Array
        Zero or more; of a constant source the value itself [V or A].
    """
    return np.abs(phasor) * np.abs(case.source.amplitude) * case.source.rms_per_amplitude


def apparent(case: Case, at: Any) -> Any:
    """Complex power, real plus j reactive, from rms values.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more; None for the source's [Hz].

    Returns
    -------
    Complex
        Real and reactive power, the latter positive if inductive [W], [var].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5, for the real part.
    """
    return np.conj(steady_at(case, at).current) * case.source.rms**2


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
        Not a number where it does not exist [s].
    """
    if limit is None:
        return np.nan
    return exceeded_of(case, element, limit)[which]


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


def resistor_power(case: Case, at: Any) -> Any:
    """Heat in the resistor alone.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more; None for the source's [Hz].

    Returns
    -------
    Array
        Mean, R I^2 with I rms [W].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5.
    """
    return rms(case, steady_at(case, at).current) ** 2 * case.loop.resistance
