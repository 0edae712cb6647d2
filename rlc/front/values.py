"""The solver's objects, built from SI numbers, text with units, or pint quantities."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.front.units import to_si
from rlc.solver import case as _case
from rlc.solver import loop as _loop
from rlc.solver import source as _source
from rlc.solver.case import Waveforms
from rlc.solver.quantities import lookup
from rlc.solver.source import Source
from rlc.solver.steady import SteadyState

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Loop(_loop.Loop):
    """One series loop, or an array of them.

    Parameters
    ----------
    resistance, inductance, capacitance : str, float, array_like or pint quantity
        The three parts: "4.7 ohm", 4.7, or a quantity [ohm], [H], [F].
    winding_resistance, series_resistance : str, float, array_like or pint quantity
        Losses inside inductor and capacitor [ohm].
    load_resistance : str, float, array_like or pint quantity
        Across the capacitor's terminals; infinite for none [ohm].
    source_resistance, source_inductance : str, float, array_like or pint quantity
        What the source adds to the loop [ohm], [H].

    Raises
    ------
    InputError
        If a value cannot be read or is out of its range.

    Examples
    --------
    >>> Loop(resistance="4.7 ohm", inductance=33e-3, capacitance="1u0").shape
    ()
    """

    def __post_init__(self) -> None:
        for field in fields(_loop.Loop):
            value = getattr(self, field.name)
            kind = field.name.rsplit("_", 1)[-1]
            if field.name == "load_resistance" and isinstance(value, float | np.ndarray):
                # Infinite for none, which no text can say; the solver checks the range.
                continue
            object.__setattr__(self, field.name, to_si(value, kind, field.name))
        super().__post_init__()


def constant(voltage: Any) -> Source:
    """A constant voltage, stepped on at t = 0.

    Parameters
    ----------
    voltage : str, float, array_like or pint quantity
        Its level [V].

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If it cannot be read.
    """
    return _source.constant(to_si(voltage, "voltage", "voltage"))


def sine(
    *, rms: Any = None, amplitude: Any = None, frequency: Any, closing_angle: Any = 0.0
) -> Source:
    """The voltage amplitude * sin(2 pi f t + closing angle), switched on at t = 0.

    Parameters
    ----------
    rms, amplitude : str, float, array_like or pint quantity
        Root mean square or peak value, one of them [V].
    frequency : str, float, array_like or pint quantity
        More than zero [Hz].
    closing_angle : str, float, array_like or pint quantity
        From the rising zero [rad], "30 deg"; or "worst", to be searched for.

    Returns
    -------
    Source

    Raises
    ------
    InputError
        If both or neither of `rms` and `amplitude` are given, or a value cannot be read.
    """
    worst = isinstance(closing_angle, str) and closing_angle == "worst"
    return _source.sine(
        None if amplitude is None else to_si(amplitude, "voltage", "amplitude"),
        to_si(frequency, "frequency", "frequency"),
        None if worst else to_si(closing_angle, "angle", "closing_angle"),
        rms=None if rms is None else to_si(rms, "voltage", "rms"),
    )


@dataclass(frozen=True, eq=False)
class Case(_case.Case):
    """One switch-on, or a batch of them: a loop, its source, its states at closing.

    Parameters
    ----------
    loop : Loop
        One loop or a batch; everything else broadcasts against it.
    source : Source
        From :func:`constant` or :func:`sine`.
    capacitor_voltage, initial_current : str, float, array_like or pint quantity
        States at closing [V], [A].

    Raises
    ------
    InputError
        If a state at closing cannot be read or is not finite.
    """

    def __post_init__(self) -> None:
        for name, kind in (("capacitor_voltage", "voltage"), ("initial_current", "current")):
            object.__setattr__(self, name, to_si(getattr(self, name), kind, name))
        super().__post_init__()

    def steady_at(self, frequency: Any) -> SteadyState:
        """The steady state at a stated frequency; text and pint quantities as well.

        Parameters
        ----------
        frequency : str, float, array_like or pint quantity
            Zero or more [Hz].

        Returns
        -------
        SteadyState

        Raises
        ------
        InputError
            If it cannot be read or is below zero.
        """
        return super().steady_at(to_si(frequency, "frequency", "frequency"))

    def waveforms(self, time: Any, closing_angle: Any = None) -> Waveforms:
        """The switch-on at given times; text and pint quantities as well.

        Parameters
        ----------
        time : array_like or pint quantity
            Shape (n,), zero or more [s].
        closing_angle : str, float or pint quantity, optional
            Replaces the source's own; needed where that is the worst one [rad].

        Returns
        -------
        Waveforms
            Shape of the batch, then (n,).

        Raises
        ------
        InputError
            If a value cannot be read, a time is below zero, or no closing angle is known.
        """
        angle = None if closing_angle is None else to_si(closing_angle, "angle", "closing_angle")
        return super().waveforms(np.atleast_1d(to_si(time, "time", "time")), angle)

    def quantity(self, name: str, at: Any = None, across: str | None = None) -> Array:
        """One registered quantity for each loop of the batch.

        Parameters
        ----------
        name : str
            In the register: ``rlc quantities`` lists it.
        at : str, float or pint quantity, optional
            Where it is asked for: a frequency [Hz], a time [s] or a band [1].
        across : str, optional
            Element whose voltage is meant: resistor, inductor or capacitor.

        Returns
        -------
        Array
            With the batch's shape; nan where it does not exist, infinite where unbounded [SI].

        Raises
        ------
        InputError
            If there is no such quantity, or it is not asked for like this.
        """
        entry = lookup(name, "name")
        place = at if at is None or entry.at is None else to_si(at, entry.at, "at")
        return entry(self, place, across)
