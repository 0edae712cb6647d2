"""Parts in series, as the second-order equation sees them."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rlc.errors import InputError

Array = NDArray[np.float64]

#: Where a voltage or the current can be asked for.
ELEMENTS = ("resistor", "inductor", "capacitor")


#: Products of such values are still far from the ends of the floating-point range [SI units].
BEYOND = 1e50


class Weights(NamedTuple):
    """A voltage or current as a weighted sum of the two states and the source.

    Attributes
    ----------
    capacitor_voltage : Array
        Weight of the voltage behind the series resistance [1]; of a slope [A/(V s)]; of the
        current [S].
    current : Array
        Weight of the loop current [ohm]; of a slope [1/s]; of the current itself [1].
    source : Array
        Weight of the source's voltage [1]; of a slope [1/H]; of the current [S].
    """

    capacitor_voltage: Array
    current: Array
    source: Array


@dataclass(frozen=True, eq=False)
class Loop:
    r"""One series loop, or an array of them.

    All fields broadcast against each other; a nominal circuit is a batch of one. With
    :math:`r` the capacitor's series resistance, :math:`G` the load's conductance and
    :math:`\kappa = 1/(1 + rG)` the states are the voltage :math:`v_C` behind the series
    resistance and the loop current :math:`i`:

    .. math::

        C\,\dot v_C = \kappa i - G\kappa v_C, \qquad
        L\,\dot i = v - (R + \kappa r)\, i - \kappa v_C

    where :math:`R` adds up resistor, winding and source, and :math:`L` inductor and source.

    Parameters
    ----------
    resistance : array_like
        Resistor, zero or more [ohm].
    inductance : array_like
        Inductor, more than zero [H].
    capacitance : array_like
        Capacitor, more than zero [F].
    winding_resistance : array_like
        Resistance of the inductor's winding [ohm].
    series_resistance : array_like
        Resistance in series with the capacitor, inside the part [ohm].
    load_resistance : array_like
        Resistance across the capacitor's terminals, more than zero; infinite for none [ohm].
    source_resistance, source_inductance : array_like
        What the source itself adds to the loop [ohm], [H].

    Raises
    ------
    InputError
        If a value is out of its range or not finite.
    """

    resistance: Array
    inductance: Array
    capacitance: Array
    winding_resistance: Array = 0.0  # type: ignore[assignment]
    series_resistance: Array = 0.0  # type: ignore[assignment]
    load_resistance: Array = np.inf  # type: ignore[assignment]
    source_resistance: Array = 0.0  # type: ignore[assignment]
    source_inductance: Array = 0.0  # type: ignore[assignment]

    def __post_init__(self) -> None:
        names = [field.name for field in fields(Loop)]
        values = [np.asarray(getattr(self, name), dtype=np.float64) for name in names]
        for name, value in zip(names, values, strict=True):
            _refuse_out_of_range(name, value)
        try:
            together = np.broadcast_arrays(*values)
        except ValueError:
            shapes = ", ".join(
                f"{name} {value.shape}" for name, value in zip(names, values, strict=True)
            )
            raise InputError("shapes", None, f"do not go together: {shapes}") from None
        for name, value in zip(names, together, strict=True):
            object.__setattr__(self, name, value)

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the batch; () for one loop."""
        return self.resistance.shape

    def map(self, change: Any) -> Loop:
        """The loop with ``change`` applied to each of its arrays (indexing, reshaping).

        Parameters
        ----------
        change : callable
            From one array to another; the same for every field.

        Returns
        -------
        Loop
        """
        return Loop(**{field.name: change(getattr(self, field.name)) for field in fields(Loop)})

    def column(self) -> Loop:
        """The batch with one more axis at the end, to meet an axis of times or frequencies.

        Returns
        -------
        Loop
            Shape of the batch, then (1,).
        """
        return self.map(lambda value: value[..., np.newaxis])

    @property
    def load_conductance(self) -> Array:
        """Conductance across the capacitor's terminals [S]."""
        return 1.0 / self.load_resistance

    @property
    def outer_resistance(self) -> Array:
        """Resistor, winding and source in series; the capacitor's own not included [ohm]."""
        return self.resistance + self.winding_resistance + self.source_resistance

    @property
    def total_resistance(self) -> Array:
        """Everything in series, the capacitor's own resistance included [ohm]."""
        return self.outer_resistance + self.series_resistance

    @property
    def total_inductance(self) -> Array:
        """Inductor and source in series [H]."""
        return self.inductance + self.source_inductance

    @property
    def terminal_share(self) -> Array:
        """The factor kappa = 1/(1 + r G) [1]."""
        return 1.0 / (1.0 + self.series_resistance * self.load_conductance)

    @property
    def inner_resistance(self) -> Array:
        """Resistance that the current meets in the equation, R + kappa r [ohm]."""
        return self.outer_resistance + self.terminal_share * self.series_resistance

    def state_matrix(self) -> tuple[Array, Array, Array, Array]:
        """A of x' = A x + b v for x = (v_C, i), row by row.

        Returns
        -------
        tuple of Array
            Four, each with the batch's shape [1/s], [V/(A s)], [A/(V s)], [1/s].
        """
        share = self.terminal_share
        return (
            -self.load_conductance * share / self.capacitance,
            share / self.capacitance,
            -share / self.total_inductance,
            -self.inner_resistance / self.total_inductance,
        )

    def weights(self, element: str) -> Weights:
        """How a quantity follows from the states and the source.

        Parameters
        ----------
        element : {"current", "current_rate", "resistor", "inductor", "capacitor", "dielectric"}
            ``current`` is the loop current [A], ``current_rate`` its slope [A/s]. The voltages
            are those across the part's terminals [V]: the inductor's includes its winding
            resistance, the capacitor's its series resistance; ``dielectric`` is the voltage
            behind the latter.

        Returns
        -------
        Weights
            Each with the batch's shape.

        Raises
        ------
        InputError
            If there is no such element.
        """
        zero, one = np.zeros(self.shape), np.ones(self.shape)
        if element == "current":
            return Weights(zero, one, zero)
        if element == "current_rate":
            return Weights(*self.state_matrix()[2:], one / self.total_inductance)
        if element == "resistor":
            return Weights(zero, self.resistance, zero)
        if element == "dielectric":
            return Weights(one, zero, zero)
        share = self.terminal_share
        if element == "capacitor":
            return Weights(share, share * self.series_resistance, zero)
        if element == "inductor":
            part = self.inductance / self.total_inductance
            return Weights(
                -part * share, self.winding_resistance - part * self.inner_resistance, part
            )
        raise InputError("element", element, f"is none of {', '.join(ELEMENTS)}")


def _refuse_out_of_range(name: str, value: Array) -> None:
    positive = name in ("inductance", "capacitance", "load_resistance")
    good = (value > 0) if positive else (value >= 0)
    rule = "must be more than zero" if positive else "must be zero or more"
    if name != "load_resistance":
        good &= np.isfinite(value)
        rule += " and finite"
    if np.all(good):
        good = (value == 0) | np.isinf(value) | ((value >= 1 / BEYOND) & (value <= BEYOND))
        rule = f"is beyond any circuit; values lie from {1 / BEYOND:g} to {BEYOND:g} in SI units"
    if not np.all(good):
        raise InputError(name, float(value[~good].flat[0]), rule)


def make_loop(**values: ArrayLike) -> Loop:
    """Build a Loop from anything that numpy reads as numbers, in SI units.

    Parameters
    ----------
    **values : array_like
        Fields of :class:`Loop` by name, with its ranges [SI unit of the field].

    Returns
    -------
    Loop

    Raises
    ------
    InputError
        If a value is out of its range, or shapes do not go together.
    """
    return Loop(**{name: np.asarray(value, dtype=np.float64) for name, value in values.items()})
