"""What drives the loop."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.loop import BEYOND

Array = NDArray[np.float64]

_QUARTER_TURN = np.pi / 2


@dataclass(frozen=True)
class Source:
    r"""The voltage :math:`A\sin(\omega t + \varphi)` from the switch's closing at t = 0.

    A constant source is the same term at zero frequency, closed a quarter turn after the
    rising zero, so that one formula serves both.

    Parameters
    ----------
    amplitude : array_like
        Peak value of a sine, or the level of a constant source [V].
    frequency : array_like
        Zero or more [Hz].
    closing_angle : array_like or None
        Angle of the sine at closing, from its rising zero [rad]; None for the worst one.

    Raises
    ------
    InputError
        If a value is not finite, or the frequency is negative.
    """

    amplitude: Array
    frequency: Array = 0.0  # type: ignore[assignment]
    closing_angle: Array | None = _QUARTER_TURN  # type: ignore[assignment]

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

    @property
    def kind(self) -> Literal["dc", "sine"]:
        """``dc`` for a constant source, else ``sine``."""
        return "dc" if np.all(self.frequency == 0) else "sine"

    @property
    def worst_angle(self) -> bool:
        """Whether the closing angle is to be searched for."""
        return self.closing_angle is None

    @property
    def rms(self) -> Array:
        """Root mean square of the steady source; the level itself if constant [V]."""
        return np.abs(self.amplitude) * self.rms_per_amplitude

    @property
    def rms_per_amplitude(self) -> float:
        """What turns an amplitude of this source's frequency into an rms value [1]."""
        return 1.0 if self.kind == "dc" else float(np.sqrt(0.5))


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
    closing_angle: float | Array | None = 0.0,
    *,
    rms: float | Array | None = None,
) -> Source:
    """A sinusoid.

    Parameters
    ----------
    amplitude : array_like, optional
        Peak value; this or `rms` [V].
    frequency : array_like
        More than zero [Hz].
    closing_angle : array_like or None
        From the rising zero; None for the worst one [rad].
    rms : array_like, optional
        Root mean square; this or `amplitude` [V].

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
    angle = None if closing_angle is None else np.asarray(closing_angle, dtype=np.float64)
    return Source(np.asarray(peak, dtype=np.float64), np.asarray(frequency), angle)
