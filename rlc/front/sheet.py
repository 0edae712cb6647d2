"""The sheet: what its tables and keys mean, and the solver's objects that they become."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import Field, ValidationInfo, field_validator, model_validator

from rlc.errors import InputError
from rlc.front.door import Charge, ChargeDoor, ClosingAngleDoor, Door, WholeDoor
from rlc.front.inputs import Inputs
from rlc.front.sources import AnySource
from rlc.front.table import (
    Amperes,
    AmperesAbove,
    Farads,
    HenriesAbove,
    Ohms,
    OhmsAbove,
    Table,
    VoltsAbove,
    Watts,
)
from rlc.front.units import Tolerance, read_tolerance
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS, Loop, make_loop
from rlc.solver.parts import Distribution, Part
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Window
from rlc.solver.targets import MOST_OPERATIONS, Fuse, Ratings, Target


class Toleranced(Table):
    """A part whose value differs from unit to unit.

    Attributes
    ----------
    value : float
        Nominal, in the kind's unit [SI].
    tolerance : Tolerance or None
        Limits around it; none if the value is exact.
    distribution : {"uniform", "normal", "triangular"}
        How units lie between the limits.
    sigmas : float or None
        Standard deviations from centre to limit, more than zero; with "normal" only [1].
    """

    kind: ClassVar[str]
    field: ClassVar[str]

    value: float
    tolerance: Tolerance | None = None
    distribution: Distribution = "uniform"
    sigmas: Annotated[float | None, Door("number", "above zero")] = None

    @field_validator("tolerance", mode="plain")
    @classmethod
    def _read_tolerance(cls, text: Any, info: ValidationInfo) -> Tolerance:
        return read_tolerance(text, cls.kind, "", info.data.get("value"))

    @model_validator(mode="after")
    def _agrees(self) -> Toleranced:
        if self.distribution != "uniform" and self.tolerance is None:
            raise InputError("distribution", self.distribution, "needs a tolerance")
        if (self.distribution == "normal") != (self.sigmas is not None):
            rule = "go together: the tolerance is so many standard deviations"
            raise InputError(
                'distribution = "normal" and sigmas', None, rule, "Write sigmas = 3 for example"
            )
        return self

    def part(self) -> Part:
        """The value with its limits.

        Returns
        -------
        Part
        """
        limits = self.tolerance.limits(self.value) if self.tolerance else (self.value, self.value)
        return Part(self.field, self.value, *limits, self.distribution, self.sigmas or 0.0)


class Resistor(Toleranced):
    """``[resistor]``.

    Attributes
    ----------
    value : float
        Zero or more [ohm].
    rated_power : float or None
        Continuous, more than zero [W].
    """

    kind, field = "resistance", "resistance"

    value: Ohms
    rated_power: Watts | None = None


class Inductor(Toleranced):
    """``[inductor]``.

    Attributes
    ----------
    value : float
        More than zero [H].
    winding_resistance : float
        Zero or more [ohm].
    rated_current : float or None
        Continuous rms, more than zero [A].
    saturation_current : float or None
        Peak, more than zero [A].
    """

    kind, field = "inductance", "inductance"

    value: HenriesAbove
    winding_resistance: Ohms = 0.0
    rated_current: AmperesAbove | None = None
    saturation_current: AmperesAbove | None = None


class Capacitor(Toleranced):
    """``[capacitor]``.

    Attributes
    ----------
    value : float
        More than zero [F].
    series_resistance : float
        Zero or more [ohm].
    rated_voltage : float or None
        Dc or peak, at every instant; more than zero [V].
    rated_voltage_rms : float or None
        Rms in steady state, more than zero [V].
    """

    kind, field = "capacitance", "capacitance"

    value: Farads
    series_resistance: Ohms = 0.0
    rated_voltage: VoltsAbove | None = None
    rated_voltage_rms: VoltsAbove | None = None


class LoadTable(Table):
    """``[load]``: what lies across the capacitor.

    Attributes
    ----------
    resistance : float
        More than zero [ohm].
    """

    resistance: OhmsAbove


class FuseTable(Table):
    """``[fuse]``: what melts it at once, and how often the switch closes in its life.

    Attributes
    ----------
    melting_let_through : float
        More than zero [A^2 s].
    operations : int
        1 to 1e5.
    """

    melting_let_through: Annotated[float, Door("let_through", "above zero")]
    operations: Annotated[int, WholeDoor(1, MOST_OPERATIONS)]


class SwitchOn(Table):
    """``[switch_on]``: the states at closing.

    Attributes
    ----------
    closing_angle : float, Window or None
        Of a sine, from its rising zero; None for the worst one [rad].
    capacitor_voltage : Charge
        Behind the series resistance, of stated or of either polarity.
    initial_current : float
        In the loop [A].
    """

    closing_angle: Annotated[float | Window | None, ClosingAngleDoor()] = 0.0
    capacitor_voltage: Annotated[Charge, ChargeDoor()] = Charge(0.0)
    initial_current: Amperes = 0.0


class TargetTable(Table):
    """``[[target]]``: limits on one registered quantity.

    Attributes
    ----------
    quantity : str
        Name in the register.
    at : float or None
        Frequency, time or band, more than zero [Hz], [s], [1].
    across : {"resistor", "inductor", "capacitor"} or None
        Element whose voltage is meant.
    min, max : float or None
        Limits, one of them at least [SI unit of the quantity].
    goal : float or None
        ``yield`` in a sheet: share of units, above zero to 1 [1].
    """

    quantity: Literal[tuple(REGISTER)]  # type: ignore[valid-type]
    at: float | None = None
    across: Literal[ELEMENTS] | None = None  # type: ignore[valid-type]
    min: float | None = None
    max: float | None = None
    goal: Annotated[float | None, Door("ratio", "above zero", most=1.0)] = Field(
        default=None, alias="yield"
    )

    @field_validator("at", "min", "max", mode="plain")
    @classmethod
    def _read_limit(cls, text: Any, info: ValidationInfo) -> float | None:
        entry = REGISTER.get(info.data.get("quantity", ""))
        if entry is None:
            # The quantity's name is the error to mend first.
            return None
        is_place = info.field_name == "at"
        if is_place and entry.at is None:
            entry.refuse(text, None, "")
        door = Door(entry.at or "", "above zero") if is_place else Door(entry.kind)
        value: float = door.open(text)
        return value

    @model_validator(mode="after")
    def _agrees(self) -> TargetTable:
        entry = REGISTER[self.quantity]
        entry.refuse(None, self.across, "")
        if self.min is None and self.max is None:
            raise InputError("min or max", None, "is missing")
        self.target()
        return self

    def target(self) -> Target:
        """The solver's target.

        Returns
        -------
        Target
        """
        return Target(self.quantity, self.min, self.max, self.at, self.across, self.goal)


class Sheet(Table):
    """A whole sheet, in SI units.

    Attributes
    ----------
    title : str
        One line of at most 120 characters; may be empty.
    resistor, inductor, capacitor : Resistor, Inductor, Capacitor
        The three parts.
    source : SourceTable
        What drives them, of one of the kinds.
    load, fuse : LoadTable or None, FuseTable or None
        None if the sheet has no such table.
    switch_on : SwitchOn
        At rest, from the rising zero, if the sheet has no such table.
    target : tuple of TargetTable
        In the order of the sheet.
    """

    title: str = Field(default="", max_length=120)
    resistor: Resistor
    inductor: Inductor
    capacitor: Capacitor
    source: Annotated[AnySource, Field(discriminator="kind")]
    load: LoadTable | None = None
    fuse: FuseTable | None = None
    switch_on: SwitchOn = Field(default_factory=SwitchOn)
    target: tuple[TargetTable, ...] = ()

    @field_validator("title")
    @classmethod
    def _is_one_line(cls, title: str) -> str:
        if not title.isprintable():
            raise InputError("", title, "must be one line of printable characters")
        return title

    def _loop(self) -> Loop:
        return make_loop(
            resistance=self.resistor.value,
            inductance=self.inductor.value,
            capacitance=self.capacitor.value,
            winding_resistance=self.inductor.winding_resistance,
            series_resistance=self.capacitor.series_resistance,
            load_resistance=self.load.resistance if self.load else float("inf"),
            source_resistance=self.source.resistance,
            source_inductance=self.source.inductance,
        )

    def inputs(self) -> Inputs:
        """The solver's objects.

        Returns
        -------
        Inputs

        Raises
        ------
        InputError
            If values that are right one by one do not go together.
        """
        states = self.switch_on
        parts: tuple[Toleranced, ...] = (self.resistor, self.inductor, self.capacitor)
        ratings = Ratings(
            resistor_power=self.resistor.rated_power,
            inductor_current=self.inductor.rated_current,
            inductor_saturation=self.inductor.saturation_current,
            capacitor_voltage=self.capacitor.rated_voltage,
            capacitor_voltage_rms=self.capacitor.rated_voltage_rms,
        )
        case = Case(
            self._loop(),
            self.source.drive(states.closing_angle),
            states.capacitor_voltage.voltage,  # type: ignore[arg-type]
            states.initial_current,  # type: ignore[arg-type]
            states.capacitor_voltage.either_polarity,
        )
        fuse = Fuse(self.fuse.melting_let_through, self.fuse.operations) if self.fuse else None
        rated = ratings.targets() + ((fuse.target(case),) if fuse else ())
        return Inputs(
            self.title,
            case,
            tuple(part.part() for part in parts),
            {part.field: part.tolerance.text for part in parts if part.tolerance},
            ratings,
            tuple(row.target() for row in self.target) + rated,
            fuse,
        )
