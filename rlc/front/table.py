"""What the tables of a sheet share: unknown keys are errors, and every value passes a door."""

from __future__ import annotations

from typing import Annotated

from pydantic import BaseModel, ConfigDict

from rlc.front.door import Door

Ohms = Annotated[float, Door("resistance", "zero")]
OhmsAbove = Annotated[float, Door("resistance", "above zero")]
Henries = Annotated[float, Door("inductance", "zero")]
HenriesAbove = Annotated[float, Door("inductance", "above zero")]
Farads = Annotated[float, Door("capacitance", "above zero")]
Volts = Annotated[float, Door("voltage")]
VoltsZero = Annotated[float, Door("voltage", "zero")]
VoltsAbove = Annotated[float, Door("voltage", "above zero")]
Amperes = Annotated[float, Door("current")]
AmperesAbove = Annotated[float, Door("current", "above zero")]
Watts = Annotated[float, Door("power", "above zero")]
Hertz = Annotated[float, Door("frequency", "above zero")]
Seconds = Annotated[float, Door("time", "zero")]
SecondsAbove = Annotated[float, Door("time", "above zero")]
Radians = Annotated[float, Door("angle")]


class Table(BaseModel):
    """A table of the sheet; unknown keys are errors."""

    # Built once, for the whole sheet, when the first one is read.
    model_config = ConfigDict(extra="forbid", frozen=True, defer_build=True)
