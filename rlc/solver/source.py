"""What drives the loop."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.loop import BEYOND
from rlc.solver.shapes import Piecewise, Surge

Array = NDArray[np.float64]

_QUARTER_TURN = np.pi / 2
_ZOOMS = 4

#: The highest order of a harmonic; far above it a supply's voltage is no longer given so.
MOST_ORDER = 1000


class Order(NamedTuple):
    """One harmonic of a sine: share * amplitude * sin(number * theta + phase).

    Attributes
    ----------
    number : int
        Multiple of the fundamental's frequency, 2 to 1000.
    share : float
        Its amplitude over the fundamental's, zero or more [1].
    phase : float
        Its own phase at the fundamental's rising zero, theta = 0 [rad].
    """

    number: int
    share: float
    phase: float = 0.0


class Window(NamedTuple):
    """Closing angles that are equally likely.

    Attributes
    ----------
    low, high : float
        From the source's rising zero; `high` is above `low` by a turn at most [rad].
    """

    low: float
    high: float

    @property
    def whole_turn(self) -> bool:
        """Whether every angle is possible."""
        return self.high - self.low >= 2 * np.pi


#: A switch that closes at any moment.
ANY_ANGLE = Window(0.0, 2 * np.pi)


@dataclass(frozen=True)
class Source:
    r"""The voltage :math:`A\sin(\omega t + \varphi)` from the switch's closing at t = 0.

    A constant source is the same term at zero frequency, closed a quarter turn after the
    rising zero, so that one formula serves both. A source of another course has a `shape`; its
    amplitude is then the voltage that it ends on, at zero frequency.

    Parameters
    ----------
    amplitude : array_like
        Peak value of a sine (with harmonics, of its fundamental), or the final level [V].
    frequency : array_like
        Zero or more [Hz].
    closing_angle : array_like or None
        Angle of the sine at closing, from its rising zero [rad]; None for the worst one.
    window : Window, optional
        Where the closing angle may lie, without a closing angle only; else anywhere.
    orders : tuple of Order
        Harmonics beside the fundamental.
    shape : Piecewise or Surge, optional
        The course in time.

    Raises
    ------
    InputError
        If a value is not finite, the frequency is negative, or an order is out of its range.
    """

    amplitude: Array
    frequency: Array = 0.0  # type: ignore[assignment]
    closing_angle: Array | None = _QUARTER_TURN  # type: ignore[assignment]
    window: Window | None = None
    orders: tuple[Order, ...] = ()
    shape: Piecewise | Surge | None = None

    def __post_init__(self) -> None:
        for name in ("amplitude", "frequency", "closing_angle"):
            given = getattr(self, name)
            if given is None:
                continue
            value = np.asarray(given, dtype=np.float64)
            if not np.all(np.isfinite(value)):
                raise InputError(name, given, "must be finite")
            if np.any(np.abs(value) > BEYOND):
                raise InputError(name, given, f"is beyond any circuit, more than {BEYOND:g}")
            object.__setattr__(self, name, value)
        if np.any(self.frequency < 0):
            raise InputError("frequency", float(np.min(self.frequency)), "must be zero or more")
        if self.window is not None and not 0 < self.window.high - self.window.low <= 2 * np.pi:
            raise InputError("window", tuple(self.window), "must be above zero and at most a turn")
        self._refuse_contradictions()
        seen: set[int] = set()
        for order in self.orders:
            if not (order.number == int(order.number) and 2 <= order.number <= MOST_ORDER):
                rule = f"must be a whole number from 2 to {MOST_ORDER}"
                raise InputError("order", order.number, rule)
            if order.number in seen:
                raise InputError("order", order.number, "is given twice")
            if not (0 <= order.share <= BEYOND and np.isfinite(order.phase)):
                raise InputError("share", order.share, "must be zero or more and finite")
            seen.add(order.number)

    def _refuse_contradictions(self) -> None:
        if self.shape is not None:
            if np.any(self.frequency > 0) or self.orders or self.worst_angle:
                raise InputError("shape", self.shape.kind, "has no frequency, order or angle")
            if np.any(self.amplitude != self.shape.final):
                raise InputError("amplitude", self.amplitude.tolist(), "is not the shape's last")
        elif self.orders and not np.all(self.frequency > 0):
            raise InputError("orders", None, "need a frequency above zero")
        if self.window is not None and not self.worst_angle:
            raise InputError("window", tuple(self.window), "does not go with a closing angle")

    @property
    def kind(self) -> str:
        """``dc``, ``sine``, ``harmonics``, ``ramp``, ``pulse``, ``surge`` or ``recorded``."""
        if self.shape is not None:
            return self.shape.kind
        if not self.alternating:
            return "dc"
        return "harmonics" if self.orders else "sine"

    @property
    def alternating(self) -> bool:
        """Whether it has a frequency, and so a closing angle."""
        return self.shape is None and bool(np.any(self.frequency > 0))

    @property
    def worst_angle(self) -> bool:
        """Whether the closing angle is to be searched for."""
        return self.closing_angle is None

    @property
    def every_order(self) -> tuple[Order, ...]:
        """The fundamental, then the harmonics."""
        return (Order(1, 1.0), *self.orders)

    @property
    def rms(self) -> Array:
        """Root mean square, harmonics included; of a constant source the level itself [V]."""
        total = float(np.sqrt(sum(order.share**2 for order in self.every_order)))
        return np.abs(self.amplitude) * self.rms_per_amplitude * total

    @property
    def rms_per_amplitude(self) -> float:
        """What turns an amplitude of this source's frequency into an rms value [1]."""
        return float(np.sqrt(0.5)) if self.alternating else 1.0

    @property
    def largest(self) -> Array:
        """Largest magnitude at any time [V]."""
        if self.shape is not None:
            return np.asarray(self.shape.largest)
        if not self.orders:
            return np.abs(np.asarray(self.amplitude))
        number = 64 * max(order.number for order in self.orders)
        turn = np.linspace(0.0, 2 * np.pi, number)
        for _ in range(_ZOOMS):
            # ever finer around the best point so far
            best = turn[np.argmax(np.abs(self.per_fundamental(turn)))]
            apart = turn[1] - turn[0]
            turn = np.linspace(best - apart, best + apart, 65)
        return np.abs(self.amplitude) * float(np.max(np.abs(self.per_fundamental(turn))))

    def per_fundamental(self, angle: Array) -> Array:
        """The waveform over a turn, per volt of the fundamental's amplitude.

        Parameters
        ----------
        angle : Array
            Of the fundamental, from its rising zero [rad].

        Returns
        -------
        Array
            With the shape of `angle` [1].
        """
        waves = (o.share * np.sin(o.number * angle + o.phase) for o in self.every_order)
        return np.asarray(np.sum(list(waves), axis=0))


def constant(voltage: float | Array) -> Source:
    """A constant voltage, stepped on at t = 0.

    Parameters
    ----------
    voltage : float or Array
        Its level, of either sign [V].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If it is not finite, or beyond any circuit.
    """
    return Source(np.asarray(voltage, dtype=np.float64))


def sine(
    amplitude: float | Array | None = None,
    frequency: float | Array = 0.0,
    closing_angle: float | Array | Window | None = 0.0,
    *,
    rms: float | Array | None = None,
    orders: Iterable[Order] = (),
) -> Source:
    """A sinusoid, alone or with harmonics.

    Parameters
    ----------
    amplitude : array_like, optional
        Peak value, with harmonics of the fundamental; this or `rms` [V].
    frequency : array_like
        More than zero [Hz].
    closing_angle : array_like, Window or None
        From the rising zero; None for the worst one, a window for the worst one in it [rad].
    rms : array_like, optional
        Root mean square, with harmonics of the fundamental; this or `amplitude` [V].
    orders : iterable of Order
        Harmonics beside the fundamental.

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If both or neither of `amplitude` and `rms` are given, or a value is out of range.
    """
    if (rms is None) == (amplitude is None):
        raise InputError("rms, amplitude", None, "one of them is given, not both or neither")
    if not np.all(np.asarray(frequency) > 0):
        raise InputError("frequency", frequency, "a sine needs a frequency above zero")
    peak = amplitude if rms is None else np.sqrt(2.0) * np.asarray(rms, dtype=np.float64)
    window = closing_angle if isinstance(closing_angle, Window) else None
    angle = None if window or closing_angle is None else np.asarray(closing_angle, np.float64)
    level = np.asarray(peak, dtype=np.float64)
    return Source(level, np.asarray(frequency), angle, window, tuple(orders))


def shaped(shape: Piecewise | Surge) -> Source:
    """A source of a stated course in time.

    Parameters
    ----------
    shape : Piecewise or Surge
        From :mod:`rlc.solver.shapes`.

    Returns
    -------
    Source
    """
    return Source(np.asarray(shape.final), shape=shape)
