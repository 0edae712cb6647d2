"""A loop and its switch-on, built from SI numbers, text with units, or pint quantities."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.front.door import ChargeDoor, open_as
from rlc.front.units import to_si
from rlc.solver import case as _case
from rlc.solver import loop as _loop
from rlc.solver.quantities import lookup
from rlc.solver.steady import SteadyState
from rlc.solver.waveforms import Waveforms

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


@dataclass(frozen=True, eq=False)
class Case(_case.Case):
    """One switch-on, or a batch of them: a loop, its source, its states at closing.

    Parameters
    ----------
    loop : Loop
        One loop or a batch; everything else broadcasts against it.
    source : Source
        From :mod:`rlc.front.drives`, such as :func:`rlc.front.drives.sine`.
    capacitor_voltage, initial_current : str, float, array_like or pint quantity
        States at closing [V], [A]; "± 325 V" is of either polarity.
    either_polarity : bool
        Whether the capacitor's voltage may be of either sign; the worse one counts.

    Raises
    ------
    InputError
        If a state at closing cannot be read or is not finite.
    """

    def __post_init__(self) -> None:
        if isinstance(self.capacitor_voltage, str):
            charge = open_as(ChargeDoor(), self.capacitor_voltage, "capacitor_voltage")
            object.__setattr__(self, "capacitor_voltage", charge.voltage)
            either = charge.either_polarity or self.either_polarity
            object.__setattr__(self, "either_polarity", either)
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
