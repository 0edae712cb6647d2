"""The switch-on in time: every voltage and the current, at given moments."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.driven import driven_states
from rlc.solver.equation import angular, free_response, kernels, phase
from rlc.solver.shapes import Surge
from rlc.solver.surging import surge_from_rest

if TYPE_CHECKING:
    from rlc.solver.case import Case

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Waveforms:
    """The switch-on in time; all arrays share one shape, times on the last axis.

    The last two are slopes; they follow from the states, without any difference in time.

    Attributes
    ----------
    time : Array
        Since closing [s].
    source : Array
        The source's inner voltage [V].
    current : Array
        Of the loop [A].
    resistor_voltage, inductor_voltage, capacitor_voltage : Array
        Across the parts' terminals [V].
    current_rate : Array
        Slope of the current [A/s].
    capacitor_voltage_rate : Array
        Slope of the capacitor's terminal voltage [V/s].
    """

    time: Array
    source: Array
    current: Array
    resistor_voltage: Array
    inductor_voltage: Array
    capacitor_voltage: Array
    current_rate: Array
    capacitor_voltage_rate: Array


def _column(value: Any) -> Array:
    return np.asarray(value, dtype=np.float64)[..., np.newaxis]


def states(case: Case, time: Array, closing_angle: Any) -> tuple[Array, Array, Array]:
    """Source voltage, capacitor voltage and current at given times.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    time : Array
        Shape (n,), zero or more [s].
    closing_angle : array_like
        Of an alternating source; else not read [rad].

    Returns
    -------
    source, capacitor_voltage, current : Array
        Shape of the batch, then (n,); the capacitor's behind its series resistance [V], [V], [A].
    """
    source, shape = case.source, case.source.shape
    if case.repeats:
        # beyond the end of the train its last, steady period again and again
        beyond = np.mod(time - case.course_end, case.repeats)
        late = case.course_end - case.repeats + beyond
        time = np.where(time < case.course_end, time, late)
    if case.lines is not None:
        return case.lines.at(time), *case.course.at(time)
    eq = case.equation.column()
    start = _column(case.capacitor_voltage), _column(case.initial_current)
    if isinstance(shape, Surge):
        voltage, current = surge_from_rest(eq, shape, time)
        free_voltage, free_current = free_response(eq, kernels(eq, time), *start)
        return shape.at(time), voltage + free_voltage, current + free_current
    amplitude, frequency = _column(source.amplitude), _column(source.frequency)
    angle = _column(closing_angle)
    level: Any = 0.0
    voltage, current = np.zeros(1), np.zeros(1)
    for order in source.every_order:
        share, number = amplitude * order.share, order.number
        turned = number * angle + order.phase
        driven = driven_states(eq, share, frequency, turned, *start, time, number)
        voltage, current = voltage + driven[0], current + driven[1]
        cosine, sine = phase(angular(frequency, number), time)
        level = level + share * (sine * np.cos(turned) + cosine * np.sin(turned))
        # the initial states count once
        start = np.zeros(1), np.zeros(1)
    return level, voltage, current


def waveforms(case: Case, time: Array, closing_angle: Any) -> Waveforms:
    """Every voltage and the current at given times.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    time : Array
        Shape (n,), zero or more [s].
    closing_angle : array_like
        Of an alternating source; else not read [rad].

    Returns
    -------
    Waveforms
        Shape of the batch, then (n,).

    Notes
    -----
    Worst error of capacitor voltage and current against 50 digits, relative to the running peak,
    for quality factors 1e-4 to 1e6, up to 1e4 natural periods and sources within four decades of
    the loop: constant 1e-15, sine 1e-14 (at resonance without losses), harmonics 4e-13 without
    losses and 2e-13 else, ramp 1e-15, pulses 2e-13 without losses and 5e-15 else, surge 1e-14,
    recorded 5e-15. ``tests/benchmarks/accuracy.py`` prints it by regime.
    """
    source, state, current = states(case, time, closing_angle)
    source = source + 0.0 * current
    loop = case.loop.column()
    a, b, _, _ = loop.state_matrix()

    def across(element: str) -> Any:
        w = loop.weights(element)
        return w.capacitor_voltage * state + w.current * current + w.source * source

    terminals, rate = loop.weights("capacitor"), across("current_rate")
    return Waveforms(
        np.broadcast_to(time, current.shape),
        source,
        current,
        across("resistor"),
        across("inductor"),
        across("capacitor"),
        rate,
        terminals.capacitor_voltage * (a * state + b * current) + terminals.current * rate,
    )
