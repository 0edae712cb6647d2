"""What a loop is asked to keep: limits on registered quantities, and the ratings of its parts."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER, lookup
from rlc.solver.quantity import Quantity

Array = NDArray[np.float64]

# Of a limit: what some operations round away.
_ROUNDING = 1e-12


@dataclass(frozen=True)
class Target:
    """Limits on one registered quantity.

    Parameters
    ----------
    quantity : str
        Name in the register.
    minimum, maximum : float, optional
        Limits, themselves allowed [SI unit of the quantity]. Without any, the quantity is only
        asked for over the spread.
    at : float, optional
        Where the quantity is asked for: a frequency [Hz], a time [s] or a band [1].
    across : str, optional
        Element whose voltage is meant.
    goal : float, optional
        Share of units that has to keep the limits [1]; without it every unit has to.
    rating : str
        The part's rating that it stands for, such as ``capacitor.rated_voltage``; or empty.

    Raises
    ------
    InputError
        If there is no such quantity, or the lower limit is above the upper one.
    """

    quantity: str
    minimum: float | None = None
    maximum: float | None = None
    at: float | None = None
    across: str | None = None
    goal: float | None = None
    rating: str = ""

    def __post_init__(self) -> None:
        entry = lookup(self.quantity, "quantity")
        if self.at is None and entry.at in ("current", "voltage"):
            unit = "A" if entry.at == "current" else "V"
            rule = f"is missing: the {entry.at} that is exceeded"
            raise InputError("at", None, rule, f'For example at = "20 {unit}"')
        if None not in (self.minimum, self.maximum) and self.minimum > self.maximum:  # type: ignore[operator]
            raise InputError("min", self.minimum, "is above max")

    @property
    def entry(self) -> Quantity:
        """The quantity's row in the register."""
        return REGISTER[self.quantity]

    @property
    def limited(self) -> bool:
        """Whether there is anything to keep."""
        return self.minimum is not None or self.maximum is not None

    def values(self, case: Case) -> Array:
        """The quantity for each loop of a batch.

        Parameters
        ----------
        case : Case
            One switch-on or a batch.

        Returns
        -------
        Array
            With the batch's shape [SI unit of the quantity].

        Raises
        ------
        InputError
            If the quantity is not asked for like this of the source.
        """
        return self.entry(case, self.at, self.across)

    def kept(self, values: Any) -> NDArray[np.bool_]:
        """Which values are within the limits; one that does not exist is not.

        Parameters
        ----------
        values : array_like
            Of the quantity [SI unit of the quantity].

        Returns
        -------
        Array of bool
            With the shape of `values`.
        """
        values = np.asarray(values, dtype=np.float64)
        # a value that is the limit but for rounding keeps it
        low = -np.inf if self.minimum is None else self.minimum - _ROUNDING * abs(self.minimum)
        high = np.inf if self.maximum is None else self.maximum + _ROUNDING * abs(self.maximum)
        within: NDArray[np.bool_] = (values >= low) & (values <= high)
        return within


# Share of the melting let-through that a fuse withstands for so many pulses, by the decimal
# logarithm of their number: common practice in fuse makers' guides, no source.
_PULSES = (2.0, 3.0, 4.0, 5.0)
_SHARES = (0.48, 0.38, 0.29, 0.22)
MOST_OPERATIONS = 100_000

_PULSE_TIME_CONSTANTS = 5.0


@dataclass(frozen=True)
class Fuse:
    """A fuse that has to survive every switch-on of its life.

    Parameters
    ----------
    melting_let_through : float
        What melts it at once [A^2 s].
    operations : int
        How often the switch closes, 1 to 1e5; up to a hundred are taken as a hundred.
    """

    melting_let_through: float
    operations: int

    @property
    def share(self) -> float:
        """Share of the melting let-through that so many pulses may have [1].

        Between table values by the logarithm of their number.
        """
        return float(np.interp(np.log10(self.operations), _PULSES, _SHARES))

    def target(self, case: Case) -> Target:
        """The limit on one switch-on: the whole of it, or five time constants where current stays.

        They are counted from when the source has come to its level; of a source with a frequency
        and of a train of pulses a period counts.

        Parameters
        ----------
        case : Case
            The nominal switch-on, one loop.

        Returns
        -------
        Target
            An upper limit on the let-through [A^2 s].
        """
        source, until = case.source, None
        held = not source.alternating and bool(np.any(source.amplitude))
        if held and bool(np.any(case.loop.load_conductance > 0)):
            end = 0.0 if source.shape is None else source.shape.gone
            until = end + _PULSE_TIME_CONSTANTS * float(REGISTER["time_constant"](case))
        allowed = self.share * self.melting_let_through
        return Target("let_through", maximum=allowed, at=until, rating="fuse.melting_let_through")


class _Rating(NamedTuple):
    key: str
    quantity: str


_RATED = {
    "resistor_power": _Rating("resistor.rated_power", "resistor_power"),
    "inductor_current": _Rating("inductor.rated_current", "current"),
    "inductor_saturation": _Rating("inductor.saturation_current", "peak_current"),
    "capacitor_voltage": _Rating("capacitor.rated_voltage", "peak_capacitor_voltage"),
    "capacitor_voltage_rms": _Rating("capacitor.rated_voltage_rms", "capacitor_voltage"),
}


@dataclass(frozen=True)
class Ratings:
    """What the parts are made for; None where nothing is stated.

    Attributes
    ----------
    resistor_power : float or None
        Continuous heat in the resistor [W].
    inductor_current : float or None
        Continuous current [A rms].
    inductor_saturation : float or None
        Peak current up to which the inductance holds [A].
    capacitor_voltage : float or None
        Highest voltage at any instant, dc or peak [V].
    capacitor_voltage_rms : float or None
        Continuous alternating voltage [V rms].
    """

    resistor_power: float | None = None
    inductor_current: float | None = None
    inductor_saturation: float | None = None
    capacitor_voltage: float | None = None
    capacitor_voltage_rms: float | None = None

    def targets(self) -> tuple[Target, ...]:
        """Each stated rating as the target that it is.

        Returns
        -------
        tuple of Target
            In the order of the fields, upper limits all.
        """
        stated = ((_RATED[field.name], getattr(self, field.name)) for field in fields(self))
        return tuple(
            Target(rated.quantity, maximum=value, rating=rated.key)
            for rated, value in stated
            if value is not None
        )
