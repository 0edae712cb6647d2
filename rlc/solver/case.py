"""A loop, its source and its states at closing: what every named result is a function of."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.carried import course_of, last_knot_of, lines_of, train_end
from rlc.solver.course import Course, LastKnot
from rlc.solver.equation import Equation, angular, equation_of
from rlc.solver.loop import Loop
from rlc.solver.peaking import find_peaks
from rlc.solver.peaks import Peak, Signal, constant_source_extrema
from rlc.solver.shapes import Piecewise
from rlc.solver.source import ANY_ANGLE, Order, Source
from rlc.solver.steady import SteadyState, steady_state
from rlc.solver.waveforms import Waveforms, waveforms

Array = NDArray[np.float64]

_PEAKED = ("current", "current_rate", "capacitor", "inductor", "dielectric")
_FEW_LOOPS = 32
_ANGLE = 1e-12


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

    @property
    def polarity_open(self) -> bool:
        """Whether the capacitor's voltage may be of either sign, and is not zero."""
        return self.either_polarity and bool(np.any(self.capacitor_voltage))

    def polarities(self) -> tuple[Case, Case]:
        """The two cases of which the worse one counts: with the voltage as given, and reversed."""
        one = replace(self, either_polarity=False)
        return one, replace(one, capacitor_voltage=-self.capacitor_voltage)

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
        return self._rotating(element, Order(1, 1.0)), self.fixed_signal(element)

    def rotating_signals(self, element: str) -> list[Signal]:
        """An element's responses from rest, one for the fundamental and each harmonic.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        list of Signal
            Each to exp(j n omega t) for the order's amplitude and phase; slopes per second
            [V], [A] or [A/s].
        """
        return [self._rotating(element, order) for order in self.source.every_order]

    def _rotating(self, element: str, order: Order) -> Signal:
        w = self.loop.weights(element)
        amplitude = self.source.amplitude
        if order.number > 1:
            amplitude = amplitude * (order.share * np.exp(1j * order.phase))
        frequency = order.number * self.source.frequency
        omega = angular(frequency)[0]
        full = self.steady if order.number == 1 else self.steady_at(frequency)
        with np.errstate(invalid="ignore"):
            state, current = amplitude * full.dielectric, amplitude * full.current
            steady = w.capacitor_voltage * state + w.current * current + w.source * amplitude
            free = w.capacitor_voltage * state + w.current * current
            # the free part's slope is w(A x0 + b v) - j omega w X: exactly zero where x' is
            pushed = w.current * self.equation.source_rate * amplitude
            return Signal(steady, -free, pushed - 1j * omega * free)

    def fixed_signal(self, element: str) -> Signal:
        """An element's response to the initial states alone.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Signal
            Its steady part is zero; slopes per second [V], [A] or [A/s].
        """
        w, zero = self.loop.weights(element), np.zeros(self.loop.shape)
        a, b, c, d = self.equation.matrix
        v0, i0 = self.capacitor_voltage, self.initial_current
        return Signal(
            zero,
            w.capacitor_voltage * v0 + w.current * i0 + zero,
            w.capacitor_voltage * (a * v0 + b * i0) + w.current * (c * v0 + d * i0) + zero,
        )

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
            self._peaks.update(find_peaks(self, _PEAKED if few else (element,)))
        return self._peaks[element]

    @cached_property
    def lines(self) -> Piecewise | None:
        """The source's straight lines, a train that is to become steady repeated so often."""
        return lines_of(self)

    @property
    def repeats(self) -> float:
        """Period of a train that is repeated until the loop is steady; else zero [s]."""
        shape = self.source.shape
        return (isinstance(shape, Piecewise) and shape.period) or 0.0

    @property
    def course_end(self) -> float:
        """When the last line of such a train ends; infinite for other sources [s]."""
        return train_end(self)

    @cached_property
    def course(self) -> Course:
        """The loop carried through the source's straight lines."""
        return course_of(self)

    @cached_property
    def last_knot(self) -> LastKnot:
        """Where the last line of the source finds the loop."""
        return last_knot_of(self)

    def closing_angle_for(self, element: str) -> Array:
        """The closing angle: as given, or the worst one for this element.

        The worst one is within its window, else within a turn from the rising zero; from rest
        without even harmonics within half a turn: the other half only changes signs. Where a
        peak is only approached every angle is as bad.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Array
            From the source's rising zero [rad].
        """
        source = self.source
        if source.closing_angle is not None:
            return source.closing_angle
        if not (source.window or ANY_ANGLE).whole_turn:
            return self.peak(element).angle
        odd = all(order.number % 2 for order in source.orders)
        turn = np.pi if self.at_rest and odd else 2 * np.pi
        angle: Array = np.mod(self.peak(element).angle, turn)
        # What rounding leaves beside the rising zero is the zero itself.
        return np.where((angle < _ANGLE) | (turn - angle < _ANGLE), 0.0, angle)

    def one(self, index: tuple[int, ...]) -> Case:
        """One switch-on out of the batch.

        Parameters
        ----------
        index : tuple of int
            Its place in the batch.

        Returns
        -------
        Case
            Of shape ().
        """

        def pick(value: Any) -> Any:
            return None if value is None else np.broadcast_to(value, self.shape)[index]

        source = self.source
        source = replace(
            source,
            amplitude=pick(source.amplitude),
            frequency=pick(source.frequency),
            closing_angle=pick(source.closing_angle),
        )
        states = pick(self.capacitor_voltage), pick(self.initial_current)
        return Case(self.loop.map(pick), source, *states, self.either_polarity)

    def closed_for(self, element: str) -> Case:
        """The switch-on with angle and polarity settled: as given, or the worst for an element.

        Parameters
        ----------
        element : str
            As for :meth:`rlc.solver.loop.Loop.weights`.

        Returns
        -------
        Case
            With one closing angle and one capacitor voltage for each loop.
        """
        source, voltage = self.source, self.capacitor_voltage
        if self.polarity_open:
            voltage = voltage * self.peak(element).polarity
        elif not (source.alternating and source.worst_angle):
            return self
        if source.alternating and source.worst_angle:
            angle = self.closing_angle_for(element)
            source = replace(source, closing_angle=angle, window=None)
        return Case(self.loop, source, voltage, self.initial_current)

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
        if not np.all((time >= 0) & np.isfinite(time)):
            raise InputError("time", float(np.min(time)), "must be zero or more, and finite")
        angle = self.source.closing_angle if closing_angle is None else closing_angle
        if angle is None and self.source.alternating:
            raise InputError("closing_angle", "worst", "waveforms need one closing angle")
        if self.polarity_open:
            raise InputError("capacitor_voltage", None, "waveforms need one polarity")
        return waveforms(self, time, angle)
