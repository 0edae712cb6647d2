"""Printed numbers: what their digits allow, and how the solver is asked for the same thing."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal
from typing import Literal, NamedTuple

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source, sine

DEGREE = np.pi / 180
TURN = 2 * np.pi

#: The solver's loop always has three parts: where a published circuit lacks one, it is made so
#: small (a capacitor so large) that no printed digit feels it.
NO_INDUCTANCE = 1e-12
NO_CAPACITOR = 1e20  # F: as good as a wire
NO_RESISTANCE = 1e-6


@dataclass(frozen=True)
class Printed:
    """A published number and how far the exact one may be from it."""

    value: float
    tolerance: float

    @property
    def low(self) -> float:
        return self.value - self.tolerance

    @property
    def high(self) -> float:
        return self.value + self.tolerance

    def covers(self, value: float) -> bool:
        return abs(value - self.value) <= self.tolerance


def printed(text: str, figures: int | None = None, carried: float = 0.0) -> Printed:
    """Read a number as printed; half a unit in its last digit is its tolerance.

    Parameters
    ----------
    text : str
        The number, digit by digit.
    figures : int, optional
        How many of the digits are significant, where closing zeros only hold a place.
    carried : float
        What the source's own rounded intermediate results add, as a share of the number.
    """
    number = Decimal(text)
    last = number.as_tuple().exponent
    assert isinstance(last, int)
    if figures is not None:
        last = number.adjusted() - figures + 1
    return Printed(float(number), 0.5 * 10.0**last + carried * abs(float(number)))


def ask(quantity: str, case: Case, at: float | None = None, across: str | None = None) -> float:
    """One registered quantity of one loop [SI]."""
    return float(REGISTER[quantity](case, at, across))


def rms_sine(volts: float, frequency: float, closing_angle: float | None = 0.0) -> Source:
    """A sine whose rms value is printed."""
    return sine(np.sqrt(2) * volts, frequency, closing_angle)


def crosses(target: float, at_low: float, at_high: float) -> bool:
    """Whether a quantity passes a target between the ends of a printed interval."""
    return (at_low - target) * (at_high - target) < 0


class Reading(NamedTuple):
    """A printed number and the registered quantity that it is.

    ``unit`` is the printed unit [SI]; with ``over`` the number is a quotient of two
    quantities, such as a reactance.
    """

    quantity: str
    text: str
    unit: float = 1.0
    at: float | Literal["resonance"] | None = None
    over: str | None = None
    figures: int | None = None
    carried: float = 0.0

    @property
    def printed(self) -> Printed:
        return printed(self.text, self.figures, self.carried)

    def of(self, case: Case) -> float:
        """The solver's number in the printed unit."""
        at = ask("natural_frequency", case) if self.at == "resonance" else self.at
        value = ask(self.quantity, case, at) / self.unit
        return value if self.over is None else value / ask(self.over, case, at)


def readings(source: str, case: Case, *rows: Reading) -> list:
    """Parameters (case, reading), with ids that name the source and the quantity."""
    params = []
    for row in rows:
        over = f" over {row.over}" if row.over else ""
        at = f" at {row.at}" if row.at is not None else ""
        params.append(pytest.param(case, row, id=f"{source}: {row.quantity}{over}{at}"))
    return params
