"""The ``[source]`` of a sheet in all its kinds, and the solver's source that each becomes."""

from __future__ import annotations

import math
from abc import abstractmethod
from dataclasses import replace
from functools import cached_property
from pathlib import Path
from typing import Annotated, Any, Literal, get_args

from pydantic import ValidationInfo, field_validator, model_validator

from rlc.errors import InputError, SheetError
from rlc.front.door import UNTIL_STEADY, Door, WholeDoor
from rlc.front.records import Record, read_record
from rlc.front.table import (
    Henries,
    Hertz,
    Ohms,
    Radians,
    Seconds,
    SecondsAbove,
    Table,
    Volts,
    VoltsAbove,
    VoltsZero,
)
from rlc.solver import shapes
from rlc.solver.source import MOST_ORDER, Order, Source, Window, constant, shaped, sine


class SourceTable(Table):
    """What every kind of source has.

    Attributes
    ----------
    resistance, inductance : float
        Inside the source, zero or more [ohm], [H].
    """

    kind: str
    resistance: Ohms = 0.0
    inductance: Henries = 0.0

    @model_validator(mode="after")
    def _stands(self) -> SourceTable:
        # What the solver refuses is an error of the sheet like any other.
        self.drive(0.0)
        return self

    @abstractmethod
    def drive(self, closing_angle: float | Window | None) -> Source:
        """The solver's source.

        Parameters
        ----------
        closing_angle : float, Window or None
            From the rising zero, None for the worst one; for sources that have one [rad].

        Returns
        -------
        Source

        Raises
        ------
        InputError
            If values that are right one by one do not go together.
        """


class Dc(SourceTable):
    """``[source]`` with kind = "dc".

    Attributes
    ----------
    voltage : float
        Level, of either sign [V].
    """

    kind: Literal["dc"]
    voltage: Volts

    def drive(self, closing_angle: float | Window | None) -> Source:
        """The solver's source; it has no closing angle."""
        return constant(self.voltage)


class Alternating(SourceTable):
    """What a sine has, alone or with harmonics: rms or amplitude, never both.

    Attributes
    ----------
    rms, amplitude : float or None
        Root mean square or peak value of the fundamental, more than zero [V].
    frequency : float
        Of the fundamental, more than zero [Hz].
    """

    rms: VoltsAbove | None = None
    amplitude: VoltsAbove | None = None
    frequency: Hertz


class Sine(Alternating):
    """``[source]`` with kind = "sine".

    Attributes
    ----------
    kind : str
        Always "sine".
    """

    kind: Literal["sine"]

    def drive(self, closing_angle: float | Window | None) -> Source:
        """The solver's source."""
        return sine(self.amplitude, self.frequency, closing_angle, rms=self.rms)


class OrderTable(Table):
    """``[[source.orders]]``: one harmonic, by its share, rms or amplitude.

    Attributes
    ----------
    number : int
        Multiple of the fundamental's frequency, 2 to 1000.
    share : float or None
        Its amplitude over the fundamental's, zero to 1 [1].
    rms, amplitude : float or None
        Its root mean square or peak value, zero or more [V].
    phase : float
        Its own phase at the fundamental's rising zero [rad].
    """

    number: Annotated[int, WholeDoor(2, MOST_ORDER)]
    # "6" for "6 %" would be six times the fundamental; a harmonic that is above it has an rms.
    share: Annotated[float | None, Door("ratio", "zero", most=1.0)] = None
    rms: VoltsZero | None = None
    amplitude: VoltsZero | None = None
    phase: Radians = 0.0

    @model_validator(mode="after")
    def _agrees(self) -> OrderTable:
        if [self.share, self.rms, self.amplitude].count(None) != 2:
            raise InputError("share, rms, amplitude", None, "one of them is given")
        return self

    def order(self, fundamental: float) -> Order:
        """The solver's order.

        Parameters
        ----------
        fundamental : float
            Peak value of the fundamental, more than zero [V].

        Returns
        -------
        Order
        """
        if self.share is not None:
            return Order(self.number, self.share, self.phase)
        peak = math.sqrt(2) * self.rms if self.rms is not None else self.amplitude or 0.0
        return Order(self.number, peak / fundamental, self.phase)


class Harmonics(Alternating):
    """``[source]`` with kind = "harmonics".

    Attributes
    ----------
    orders : tuple of OrderTable
        One at least.
    """

    kind: Literal["harmonics"]
    orders: tuple[OrderTable, ...]

    def drive(self, closing_angle: float | Window | None) -> Source:
        """The solver's source."""
        alone = sine(self.amplitude, self.frequency, closing_angle, rms=self.rms)
        peak = float(alone.amplitude)
        return replace(alone, orders=tuple(each.order(peak) for each in self.orders))


class Shaped(SourceTable):
    """What the kinds have that follow a course in time."""

    @property
    @abstractmethod
    def course(self) -> shapes.Piecewise | shapes.Surge:
        """The course in time."""

    def drive(self, closing_angle: float | Window | None) -> Source:
        """The solver's source; it has no closing angle."""
        return shaped(self.course)


class Ramp(Shaped):
    """``[source]`` with kind = "ramp".

    Attributes
    ----------
    voltage : float
        The level that is held, of either sign [V].
    rise_time : float
        From zero to the level, more than zero [s].
    """

    kind: Literal["ramp"]
    voltage: Volts
    rise_time: SecondsAbove

    @cached_property
    def course(self) -> shapes.Piecewise:
        """The course in time."""
        return shapes.ramp(self.voltage, self.rise_time)


class Pulse(Shaped):
    """``[source]`` with kind = "pulse": one, or a train of them.

    Attributes
    ----------
    voltage : float
        Its level, of either sign [V].
    width : float
        Between the half levels of rise and fall, more than zero [s].
    rise_time, fall_time : float
        From zero to the level and back, zero or more [s].
    period : float or None
        From one pulse to the next, more than zero; with `count` [s].
    count : int or None
        How many pulses; None for a train that goes on until the loop is steady.
    """

    kind: Literal["pulse"]
    voltage: Volts
    width: SecondsAbove
    rise_time: Seconds = 0.0
    fall_time: Seconds = 0.0
    period: SecondsAbove | None = None
    count: Annotated[int | None, WholeDoor(2, shapes.MOST_PULSES, UNTIL_STEADY)] = 1

    @cached_property
    def course(self) -> shapes.Piecewise:
        """The course in time."""
        return shapes.pulse(
            self.voltage, self.width, self.rise_time, self.fall_time, self.period, self.count
        )


class Surge(Shaped):
    """``[source]`` with kind = "surge".

    Attributes
    ----------
    voltage : float
        Peak, of either sign [V].
    front_time, half_value_time : float
        The two times that define it, more than zero [s].
    """

    kind: Literal["surge"]
    voltage: Volts
    front_time: SecondsAbove
    half_value_time: SecondsAbove

    @cached_property
    def course(self) -> shapes.Surge:
        """The course in time."""
        return shapes.surge(self.voltage, self.front_time, self.half_value_time)


class Recorded(Shaped):
    """``[source]`` with kind = "recorded".

    Attributes
    ----------
    file : Record
        Points of the file that the sheet names, relative to the sheet's own directory.
    """

    kind: Literal["recorded"]
    file: Record

    @field_validator("file", mode="plain")
    @classmethod
    def _read_file(cls, name: Any, info: ValidationInfo) -> Record:
        if not isinstance(name, str):
            raise InputError("", name, "must be the name of a file, in quotes")
        # Only who reads the sheet knows its directory.
        assert isinstance(info.context, Path)
        try:
            return read_record(info.context / name)
        except SheetError as error:
            raise InputError("", name, f"cannot be used: {error}") from None

    @cached_property
    def course(self) -> shapes.Piecewise:
        """The course in time."""
        return shapes.recorded(self.file.time, self.file.voltage)


AnySource = Dc | Sine | Harmonics | Ramp | Pulse | Surge | Recorded

#: The table of each kind.
SOURCES: dict[str, type[SourceTable]] = {
    get_args(table.model_fields["kind"].annotation)[0]: table for table in get_args(AnySource)
}
#: The kinds that have a closing angle.
ALTERNATING = tuple(kind for kind, table in SOURCES.items() if issubclass(table, Alternating))
