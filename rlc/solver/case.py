"""A loop, its source and its states at closing: what every named result is a function of."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.driven import driven_from_rest
from rlc.solver.equation import Equation, angular, equation_of, free_response, kernels, phase
from rlc.solver.loop import Loop
from rlc.solver.peaks import Peak, Signal, constant_source_extrema, constant_source_peak
from rlc.solver.search import sine_peak
from rlc.solver.source import Source
from rlc.solver.steady import SteadyState, steady_state

Array = NDArray[np.float64]

_PEAKED = ("current", "current_rate", "capacitor", "inductor", "dielectric")
_FEW_LOOPS = 32
_ANGLE = 1e-12


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


@dataclass(frozen=True, eq=False)
class Case:
    """One switch-on, or a batch of them.

    Parameters
    ----------
    loop : Loop
        One loop or a batch; everything else broadcasts against it.
    source : Source
        What drives it from t = 0.
    capacitor_voltage : array_like
        Voltage behind the capacitor's series resistance at closing [V].
    initial_current : array_like
        Loop current at closing [A].
    either_polarity : bool
        Whether the capacitor's voltage may be of either sign; the worse one counts.

    Raises
    ------
    InputError
        If a state at closing is not finite.
    """

    loop: Loop
    source: Source
    capacitor_voltage: Array = 0.0  # type: ignore[assignment]
    initial_current: Array = 0.0  # type: ignore[assignment]
    either_polarity: bool = False
    _peaks: dict[str, Peak] = field(default_factory=dict, repr=False, init=False)

    def __post_init__(self) -> None:
        for name in ("capacitor_voltage", "initial_current"):
            value = np.asarray(getattr(self, name), dtype=np.float64)
            if not np.all(np.isfinite(value)):
                raise InputError(name, getattr(self, name), "must be finite")
            object.__setattr__(self, name, value)

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the batch, from everything that may be an array."""
        source, angle = self.source, self.source.closing_angle
        given = (source.amplitude, source.frequency, self.capacitor_voltage, self.initial_current)
        return np.broadcast_shapes(
            self.loop.shape,
            *(np.shape(value) for value in given),
            () if angle is None else np.shape(angle),
        )

    @property
    def at_rest(self) -> bool:
        """Whether every loop closes without charge and current."""
        return not (np.any(self.capacitor_voltage) or np.any(self.initial_current))

    @cached_property
    def equation(self) -> Equation:
        """The loop as the second-order equation."""
        return equation_of(self.loop)

    @cached_property
    def steady(self) -> SteadyState:
        """The steady state at the source's frequency."""
        return self.steady_at(self.source.frequency)

    def steady_at(self, frequency: Any) -> SteadyState:
        """The steady state at a stated frequency.

        Parameters
        ----------
        frequency : array_like
            Zero or more; broadcasts against the batch [Hz].

        Returns
        -------
        SteadyState

        Raises
        ------
        InputError
            If a frequency is below zero or not a number.
        """
        if not np.all(np.asarray(frequency) >= 0):
            raise InputError("frequency", frequency, "must be zero or more")
        return steady_state(self.loop, frequency, self.equation)

    def signals(self, element: str) -> tuple[Signal, Signal]:
        """An element's response from rest to exp(j omega t), and to the initial states alone.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        rotating, fixed : Signal
            For the source's amplitude [V], [A] or [A/s]; slopes per second.

        Raises
        ------
        InputError
            If there is no such element.
        """
        w = self.loop.weights(element)
        a, b, c, d = self.equation.matrix
        amplitude = self.source.amplitude
        omega = angular(self.source.frequency)[0]
        zero = np.zeros(self.loop.shape)
        full = self.steady
        with np.errstate(invalid="ignore"):
            state, current = amplitude * full.dielectric, amplitude * full.current
            steady = w.capacitor_voltage * state + w.current * current + w.source * amplitude
            free = w.capacitor_voltage * state + w.current * current
            # the free part's slope is w(A x0 + b v) - j omega w X: exactly zero where x' is
            pushed = w.current * self.equation.source_rate * amplitude
            rotating = Signal(steady, -free, pushed - 1j * omega * free)
        v0, i0 = self.capacitor_voltage, self.initial_current
        fixed = Signal(
            zero,
            w.capacitor_voltage * v0 + w.current * i0 + zero,
            w.capacitor_voltage * (a * v0 + b * i0) + w.current * (c * v0 + d * i0) + zero,
        )
        return rotating, fixed

    def constant_signal(self, element: str) -> Signal:
        """The element's signal under a constant source, initial states included.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Signal
            Real: final value, free value and slope at closing [V], [A] or [A/s]; slopes per second.
        """
        rotating, fixed = self.signals(element)
        return Signal(
            np.real(rotating.steady),
            np.real(rotating.value) + np.real(fixed.value),
            np.real(rotating.slope) + np.real(fixed.slope),
        )

    def extrema(self, element: str) -> tuple[Array, Array]:
        """Times and values of the candidates for a peak under a constant source.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        times, values : Array
            As from :func:`rlc.solver.peaks.constant_source_extrema` [s], [V, A or A/s].
        """
        return constant_source_extrema(self.equation, self.constant_signal(element))

    def peak(self, element: str) -> Peak:
        """Largest magnitude of ``"current"`` or of an element's voltage over all time.

        With the worst closing angle asked for, each element has its own.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Peak
            With the batch's shape, its value in [V], [A] or [A/s].

        Raises
        ------
        InputError
            If there is no such element.
        """
        if element not in self._peaks:
            # A search costs about the same for a few signals as for one.
            few = element in _PEAKED and self.loop.resistance.size <= _FEW_LOOPS
            self._peaks.update(self._find_peaks(_PEAKED if few else (element,)))
        return self._peaks[element]

    def _find_peaks(self, elements: tuple[str, ...]) -> dict[str, Peak]:
        if self.source.kind == "dc":
            return {
                element: constant_source_peak(self.equation, self.constant_signal(element))
                for element in elements
            }
        shape = (len(elements), *self.shape)

        def flat(value: Any) -> Any:
            return np.broadcast_to(value, shape).reshape(-1)

        def stacked(signals: tuple[Signal, ...]) -> Signal:
            together = (
                np.stack([np.broadcast_to(part, self.shape) for part in parts])
                for parts in zip(*signals, strict=True)
            )
            return Signal(*(flat(part) for part in together))

        rotating, fixed = zip(*(self.signals(element) for element in elements), strict=True)
        angle = self.source.closing_angle
        found = sine_peak(
            equation_of(self.loop.map(flat)),
            flat(angular(self.source.frequency)[0]),
            stacked(rotating),
            stacked(fixed),
            None if angle is None else flat(angle),
        )
        parts = (part.reshape(shape) for part in (found.value, found.time, found.gap, found.angle))
        return {element: Peak(*each) for element, *each in zip(elements, *parts, strict=True)}

    def closing_angle_for(self, element: str) -> Array:
        """The closing angle: as given, or the worst one for this element.

        The worst one is within a turn from the rising zero, from rest within half a turn: the
        other half only changes signs. Where a peak is only approached every angle is as bad.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Array
            From the source's rising zero [rad].
        """
        if self.source.closing_angle is not None:
            return self.source.closing_angle
        turn = np.pi if self.at_rest else 2 * np.pi
        angle: Array = np.mod(self.peak(element).angle, turn)
        # What rounding leaves beside the rising zero is the zero itself.
        return np.where((angle < _ANGLE) | (turn - angle < _ANGLE), 0.0, angle)

    def waveforms(self, time: Any, closing_angle: Any = None) -> Waveforms:
        """The switch-on at given times.

        Parameters
        ----------
        time : array_like
            Shape (n,), zero or more [s].
        closing_angle : array_like, optional
            Replaces the source's own; needed where that is the worst one [rad].

        Returns
        -------
        Waveforms
            Shape of the batch, then (n,).

        Raises
        ------
        InputError
            If a time is below zero or not a number, or no closing angle is known.
        """
        time = np.asarray(time, dtype=np.float64)
        if not np.all(time >= 0):
            raise InputError("time", float(np.min(time)), "must be zero or more")
        loop = self.loop.column()
        eq = equation_of(loop)

        def column(value: Any) -> Array:
            return np.asarray(value, dtype=np.float64)[..., np.newaxis]

        angle = self.source.closing_angle if closing_angle is None else closing_angle
        if angle is None:
            raise InputError("closing_angle", "worst", "waveforms need one closing angle")
        amplitude, frequency = column(self.source.amplitude), column(self.source.frequency)
        turn = np.exp(1j * column(angle))
        driven_voltage, driven_current = driven_from_rest(eq, frequency, time)
        free_voltage, free_current = free_response(
            eq, kernels(eq, time), column(self.capacitor_voltage), column(self.initial_current)
        )
        state = amplitude * np.imag(turn * driven_voltage) + free_voltage
        current = amplitude * np.imag(turn * driven_current) + free_current
        cosine, sine = phase(angular(frequency), time)
        source = amplitude * np.imag(turn * (cosine + 1j * sine)) + 0 * current

        def across(element: str) -> Any:
            w = loop.weights(element)
            return w.capacitor_voltage * state + w.current * current + w.source * source

        terminals, rate = loop.weights("capacitor"), across("current_rate")
        a, b, _, _ = eq.matrix
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
