"""What the register's rows compute, where one expression does not say it."""

from __future__ import annotations

import functools
from collections.abc import Callable
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


def level(case: Case) -> Any:
    """What phasors per volt are multiplied by: the fundamental's peak, or the final voltage.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Zero or more; not a number for a train of pulses, which has no phasor [V].
    """
    return np.nan if case.repeats else np.abs(case.source.amplitude)


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
    return level(case) * steady_at(case, at).current


def steady_orders(case: Case, at: Any) -> list[tuple[float, SteadyState]]:
    """The steady states that add up: of fundamental and harmonics, or of a stated frequency.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more; None for the source's own ones [Hz].

    Returns
    -------
    list of (float, SteadyState)
        Each with its amplitude over the fundamental's [1].
    """
    if at is not None or not case.source.orders:
        return [(1.0, steady_at(case, at))]
    frequency = case.source.frequency
    harmonics = [
        (order.share, case.steady_at(order.number * frequency)) for order in case.source.orders
    ]
    return [(1.0, case.steady), *harmonics]


def rms(case: Case, at: Any, pick: Callable[[SteadyState], Any]) -> Any:
    """Rms value of a signal in steady state, all orders of the source together.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency at which the fundamental's level is applied alone; None for the source as it
        is [Hz].
    pick : callable
        From a steady state to the phasor per volt, of a voltage or the current [1 or A/V].

    Returns
    -------
    Array
        Zero or more; of a source that comes to a level the final value itself; not a number for
        a train of pulses [V or A].

    Notes
    -----
    Different frequencies do not disturb each other's mean squares: Parseval's theorem.
    """
    sizes = (share * np.abs(pick(steady)) for share, steady in steady_orders(case, at))
    return functools.reduce(np.hypot, sizes) * level(case) * case.source.rms_per_amplitude


def current(case: Case, at: Any) -> Any:
    """Rms value of the loop current.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        As for :func:`rms` [Hz].

    Returns
    -------
    Array
        Of a train of pulses that is repeated until steady, over one of its last periods [A].
    """
    if case.repeats:
        return np.sqrt(whole_let_through(case) / case.repeats)
    return rms(case, at, lambda steady: steady.current)


def real_power(case: Case, at: Any) -> Any:
    """Mean power from the source.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        As for :func:`rms` [Hz].

    Returns
    -------
    Array
        Zero or more; not a number for a train of pulses [W].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5, for one frequency.
    """
    parts = (share**2 * np.real(steady.current) for share, steady in steady_orders(case, at))
    return sum(parts) * (level(case) * case.source.rms_per_amplitude) ** 2


def apparent_power(case: Case, at: Any) -> Any:
    """Rms voltage of the source times rms current.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        As for :func:`rms` [Hz].

    Returns
    -------
    Array
        Zero or more; not a number for a train of pulses [VA].
    """
    source = rms(case, at, lambda steady: 1.0)
    return source * rms(case, at, lambda steady: steady.current)


def power_factor(case: Case, at: Any) -> Any:
    """Real over apparent power.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        As for :func:`rms` [Hz].

    Returns
    -------
    Array
        0 to 1; not a number where there is no power, or for a train of pulses [1].
    """
    # Two roundings may put a pure resistance above one.
    return np.minimum(real_power(case, at) / apparent_power(case, at), 1.0)


def reactive_power(case: Case, at: Any) -> Any:
    """Power that goes to and fro at one frequency.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        Frequency, zero or more; None for the source's, with harmonics the fundamental's [Hz].

    Returns
    -------
    Array
        Positive if inductive; not a number for a train of pulses [var].
    """
    squared = (level(case) * case.source.rms_per_amplitude) ** 2
    return -np.imag(steady_at(case, at).current) * squared


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


def resistor_power(case: Case, at: Any) -> Any:
    """Heat in the resistor alone.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    at : array_like or None
        As for :func:`current` [Hz].

    Returns
    -------
    Array
        Mean, R I^2 with I rms [W].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5.
    """
    return current(case, at) ** 2 * case.loop.resistance
