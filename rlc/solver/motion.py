r"""Signals row by row: what the source holds, free motion, and bounds of both over intervals.

A row is one signal from some moment on,

.. math:: y(t) = \sum_n S_n e^{p_n t} + c + d\,t + q_0 g(t) + q_1 s(t),

held by a source of sinusoids (p = j omega), decaying exponentials (p = -r) or a straight line,
plus free motion of the loop. A real row is the real part of it.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Equation, Kernels
from rlc.solver.peaks import Signal

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]

_EXPONENT_LIMIT = 300.0


class Term(NamedTuple):
    """One exponential of the held part.

    Attributes
    ----------
    phasor, exponent : Array or Complex
        One per row; the exponent's real part is zero or less [V, A or A/s], [1/s].
    """

    phasor: Any
    exponent: Any


class Moved(NamedTuple):
    """A signal at given times.

    Attributes
    ----------
    value, slope, bend : Array or Complex
        The signal and its first two derivatives [V, A or A/s], per second, per second squared.
    free, speed : Array or Complex
        Value and slope of the free part alone [V, A or A/s], per second.
    """

    value: Any
    slope: Any
    bend: Any
    free: Any
    speed: Any


class Bounds(NamedTuple):
    """What a signal cannot pass on an interval; magnitudes, one per row.

    Attributes
    ----------
    value, slope, bend : Array
        Of the signal and its first two derivatives [V, A or A/s], per second, per second squared.
    free : (Array, Array, Array)
        The same of its free part alone [V, A or A/s], per second, per second squared.
    """

    value: Array
    slope: Array
    bend: Array
    free: tuple[Array, Array, Array]


class Motion:
    """Rows of one kind of signal.

    Parameters
    ----------
    eq : Equation
        Shape (n,).
    free : Signal
        Value and slope of the free part at the row's start; its steady part is not read.
    terms : sequence of Term
        The held part; may be empty.
    line : tuple of Array, optional
        c and d of a straight line [V, A or A/s], per second.
    real : bool
        Whether the real part is meant.
    """

    def __init__(
        self,
        eq: Equation,
        free: Signal,
        terms: Sequence[Term] = (),
        line: tuple[Array, Array] | None = None,
        *,
        real: bool,
    ) -> None:
        zero = np.zeros(eq.damping.shape)
        self.terms = [Term(each.phasor + zero, each.exponent + zero) for each in terms]
        self.line = None if line is None else (line[0] + zero, line[1] + zero)
        self.value, self.slope, self.real = free.value + zero, free.slope + zero, real
        amplitudes = [np.abs(each.phasor) for each in self.terms]
        self.amplitude: Array = np.sum(amplitudes, axis=0) if amplitudes else zero
        self.lasting = any(np.any(np.real(each.exponent) == 0) for each in self.terms)
        self.decaying = any(np.any(np.real(each.exponent) < 0) for each in self.terms)
        self.energy = np.hypot(np.abs(self.value), np.abs(self.slope) / eq.natural)
        with np.errstate(all="ignore"):
            root = np.where(eq.underdamped, 1j, 1.0) * eq.root[0]
            first = np.where(eq.underdamped, -eq.damping + root, -eq.slow)
            second = -eq.damping - root
            # amplitudes of the two exponentials; infinite at critical damping
            self.first = (self.slope - second * self.value) / (first - second)
            self.second = (first * self.value - self.slope) / (first - second)

    def held(self, which: Index, time: Array) -> tuple[Any, Any, Any]:
        """The held part and its first two derivatives.

        Parameters
        ----------
        which : Array of int
            Places of the rows, from zero [1].
        time : Array
            One per row, since its start [s].

        Returns
        -------
        value, slope, bend : Array or Complex
            One per row [V, A or A/s], per second, per second squared.
        """
        value: Any = np.zeros(which.size)
        slope: Any = np.zeros(which.size)
        bend: Any = np.zeros(which.size)
        for term in self.terms:
            rate = term.exponent[which]
            wave = term.phasor[which] * np.exp(rate * time)
            value, slope, bend = value + wave, slope + rate * wave, bend + rate * rate * wave
        if self.real:
            value, slope, bend = np.real(value), np.real(slope), np.real(bend)
        if self.line is not None:
            value = value + self.line[0][which] + self.line[1][which] * time
            slope = slope + self.line[1][which]
        return value, slope, bend

    def at(self, eq: Equation, kernel: Kernels, which: Index, time: Array) -> Moved:
        """The signal at given times.

        Parameters
        ----------
        eq : Equation
            Of these rows.
        kernel : Kernels
            Of these rows at these times.
        which : Array of int
            Places of the rows, from zero [1].
        time : Array
            One per row, since its start [s].

        Returns
        -------
        Moved
        """
        value, slope = self.value[which], self.slope[which]
        stiffness = eq.natural_squared[0]
        free = value * kernel.regular + slope * kernel.s
        speed = slope * (kernel.regular - eq.gamma * kernel.s) - stiffness * value * kernel.s
        held = self.held(which, time)
        curve = -eq.gamma * speed - stiffness * free
        return Moved(held[0] + free, held[1] + speed, held[2] + curve, free, speed)

    def bounds(self, eq: Equation, which: Index, at: Array, half: Array, moved: Moved) -> Bounds:
        """Upper bounds on intervals at - half to at + half.

        Free motion is bounded by its energy norm, which never grows, and if overdamped by its
        two exponentials; a ringing loop near the source's frequency by the beat of both.

        Parameters
        ----------
        eq : Equation
            Of these rows.
        which : Array of int
            Places of the rows, from zero [1].
        at, half : Array
            Middle and half width of each interval, not before the row's start [s].
        moved : Moved
            The signal at the middle.

        Returns
        -------
        Bounds
        """
        start = at - half
        growth = np.exp(np.minimum(eq.gamma * half, _EXPONENT_LIMIT))
        energy = np.hypot(np.abs(moved.free), np.abs(moved.speed) / eq.natural) * growth
        energy = np.minimum(energy, self.energy[which])
        reach, speed = energy, eq.natural * energy
        bend = eq.natural * (eq.gamma + eq.natural) * energy
        over = ~eq.underdamped
        with np.errstate(all="ignore"):
            slow = np.abs(self.first[which]) * np.exp(-eq.slow * start)
            fast = np.abs(self.second[which]) * np.exp(-eq.fast * start)
            reach = np.where(over, np.fmin(reach, slow + fast), reach)
            speed = np.where(over, np.fmin(speed, slow * eq.slow + fast * eq.fast), speed)
            bent = slow * eq.slow**2 + fast * eq.fast**2
            bend = np.where(over, np.fmin(bend, bent), bend)
        value, slope, held_bend = self._held_bounds(which, start, half)
        value = np.fmin(value + reach, self._beat(eq, which, at, half))
        return Bounds(value, slope + speed, held_bend + bend, (reach, speed, bend))

    def _held_bounds(self, which: Index, start: Array, half: Array) -> tuple[Array, Array, Array]:
        value, slope, bend = (np.zeros(which.size) for _ in range(3))
        for term in self.terms:
            rate = np.abs(term.exponent[which])
            size = np.abs(term.phasor[which])
            if self.decaying:
                size = size * np.exp(np.real(term.exponent[which]) * start)
            value, slope, bend = value + size, slope + rate * size, bend + rate * rate * size
        if self.line is not None:
            level, rise = self.line[0][which], self.line[1][which]
            value = value + np.maximum(
                np.abs(level + rise * start), np.abs(level + rise * (start + 2 * half))
            )
            slope = slope + np.abs(rise)
        return value, slope, bend

    def _beat(self, eq: Equation, which: Index, at: Array, half: Array) -> Any:
        """|S + A exp((s1 - j omega) t)|, which turns slowly near resonance, and all the rest."""
        if not self.terms or self.decaying or not eq.underdamped.any():
            return np.inf
        with np.errstate(all="ignore"):
            rates = np.array([np.imag(each.exponent[which]) for each in self.terms])
            nearest = np.argmin(np.abs(rates - eq.root[0]), axis=0), np.arange(which.size)
            phasor = np.array([each.phasor[which] for each in self.terms])[nearest]
            gap_rate = -eq.damping + 1j * (eq.root[0] - rates[nearest])
            first: Any = self.first[which]
            if self.real:
                # a real free part is twice the real part of its first exponential
                together, apart = 2 * first, np.zeros(which.size)
            else:
                together = first
                apart = np.abs(self.second[which]) * np.exp(-eq.damping * (at - half))
            drift = together * np.exp(gap_rate * at)
            spread = np.expm1(np.minimum(np.abs(gap_rate) * half, _EXPONENT_LIMIT))
            rest = self.amplitude[which] - np.abs(phasor)
            bound = np.abs(phasor + drift) + np.abs(drift) * spread + apart + rest
            return np.where(eq.underdamped, bound, np.inf)

    def tail(self, which: Index, start: Array, memory: Array, rate: Array) -> Array:
        """What free motion and decaying terms can still come to after a time.

        Parameters
        ----------
        which : Array of int
            Places of the rows, from zero [1].
        start : Array
            The time [s].
        memory : Array
            How long the slope at the row's start counts [s].
        rate : Array
            At which free motion decays; zero without losses, where it is left out [1/s].

        Returns
        -------
        Array
            Magnitude, one per row [V, A or A/s].
        """
        value, slope = np.abs(self.value[which]), np.abs(self.slope[which])
        free = np.exp(-rate * start) * (value * (1 + rate * memory) + slope * memory)
        total = np.where(rate > 0, free, 0.0)
        if self.decaying:
            for term in self.terms:
                fading = np.real(term.exponent[which])
                size = np.abs(term.phasor[which]) * np.exp(fading * start)
                total = total + np.where(fading < 0, size, 0.0)
        return total
