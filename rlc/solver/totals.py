"""The steady state for the source's level: values at one frequency, totals over all orders."""

from __future__ import annotations

import functools
from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.passed import whole_let_through
from rlc.solver.steady import SteadyState

Array = NDArray[np.float64]


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
