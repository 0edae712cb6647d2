"""What is drawn over frequency: current, gains and phase, of one loop and of a batch."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import KINDS
from rlc.render.bands import pieces
from rlc.render.figures import GREEN, NOMINAL, ORANGE, item
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.steady import steady_state
from rlc.solver.targets import Target

Array = NDArray[np.float64]

# Gains across other elements than the capacitor.
_OTHERS: dict[str, dict[str, Any]] = {
    "resistor": {"color": ORANGE, "linewidth": 1.4, "linestyle": (0, (9, 1.5)), "zorder": 2.9},
    "inductor": {"color": GREEN, "linewidth": 1.4, "linestyle": (0, (6, 1.5, 1, 1.5, 1, 1.5)),
                 "zorder": 2.9},
}  # fmt: skip


#: What turns a target's value into a curve's, by quantity and by the element that is named.
Limits = dict[tuple[str, str | None], float]


class Curve(NamedTuple):
    """One line over frequency."""

    name: str
    label: str
    limits: Limits
    look: dict[str, Any]
    #: Quantities that fundamental and harmonics make up together: on no curve of one frequency.
    together: frozenset[str] = frozenset()


class Row(NamedTuple):
    """One panel; its first curve is the one that is marked at the source's frequency."""

    heading: str
    words: str
    kind: str
    unit: str | None
    curves: tuple[Curve, ...]


def rows_of(case: Case, targets: Sequence[Target], source: float | None) -> tuple[Row, Row, Row]:
    """Panels of current, gain and phase; the source's frequency [Hz] is None for a constant one."""
    current: Limits = {("current", None): 1.0}
    current["current_amplitude", None] = case.source.rms_per_amplitude
    together = frozenset({"current"} if case.source.orders else ())
    flowing = Curve("current", "", current if source else {}, NOMINAL, together)
    degree = float(KINDS["angle"].units["deg"])
    phase: Limits = {("current_phase", None): 1 / degree, ("impedance_phase", None): -1 / degree}
    words, kind = ("current, rms", "current") if source else ("admittance", "conductance")
    heading, gains = "capacitor voltage over source voltage", [_gain(case, "capacitor", NOMINAL)]
    for element, look in _OTHERS.items():
        curve = _gain(case, element, look)
        if any(place_of(curve, target, source) for target in targets):
            gains.append(curve)
    if len(gains) > 1:
        heading = "voltage over source voltage"
        gains = [curve._replace(label=f"across the {curve.name}") for curve in gains]
    lag = "current against source, negative: lags"
    return (
        Row("", words, kind, None, (flowing,)),
        Row(heading, "gain", "number", "V/V", tuple(gains)),
        Row(lag, "phase", "angle", None, (Curve("phase", "", phase, NOMINAL),)),
    )


def _gain(case: Case, element: str, look: dict[str, Any]) -> Curve:
    """The voltage across an element over the source's."""
    limits: Limits = {("gain", element): 1.0}
    if element == "capacitor":
        limits |= {("gain", None): 1.0, ("voltage_magnification", None): 1.0}
    share = case.source.rms_per_amplitude
    level = share * abs(item(case.source.amplitude))
    if case.source.alternating and level:
        limits[f"{element}_voltage", None] = 1 / level
        limits[f"{element}_voltage_amplitude", None] = share / level
    together = frozenset({f"{element}_voltage"} if case.source.orders else ())
    return Curve(element, "", limits, look, together)


def response(case: Case, frequency: Array, names: Iterable[str]) -> dict[str, Array]:
    """Curves by name, frequencies on the last axis.

    Current that the fundamental's voltage drives [A rms] or admittance [S], phase [deg], and
    gains by element [1].
    """
    steady = steady_state(case.loop.column(), frequency)
    level = np.ones(())
    if case.source.alternating:
        fundamental = np.abs(case.source.amplitude) * case.source.rms_per_amplitude
        level = fundamental[..., np.newaxis]

    def value(name: str) -> Array:
        if name == "current":
            return np.asarray(level * np.abs(steady.current))
        if name == "phase":
            return np.degrees(np.angle(steady.current))
        return np.abs(steady.across(name))

    return {name: value(name) for name in names}


def response_bands(
    batch: Case, frequency: Array, nominal: Mapping[str, Array]
) -> dict[str, tuple[Array, Array]]:
    """Lowest and highest of each curve over the batch, the nominal included.

    Each loop's resonance counts at the nearest frequency drawn: between two of them a sharp
    peak would be lost.
    """
    low = {name: value.copy() for name, value in nominal.items()}
    high = {name: value.copy() for name, value in nominal.items()}
    for piece in pieces(batch, frequency.size):
        for name, value in response(piece, frequency, nominal).items():
            low[name] = np.fmin(low[name], np.fmin.reduce(value, axis=0))
            high[name] = np.fmax(high[name], np.fmax.reduce(value, axis=0))
        natural = REGISTER["natural_frequency"](piece)
        nearest = np.searchsorted(np.sqrt(frequency[1:] * frequency[:-1]), natural)
        for name, top in response(piece, natural[..., np.newaxis], nominal).items():
            if name != "phase":
                np.fmax.at(high[name], nearest, top[..., 0])
    return {name: (low[name], high[name]) for name in nominal}


def place_of(curve: Curve, target: Target, source: float | None) -> tuple[float, float] | None:
    """The frequency at which a limit stands at a curve, and what turns it into the curve's value.

    None if the limit does not belong to the curve.
    """
    at = source if target.at is None else target.at
    factor = curve.limits.get((target.quantity, target.across))
    if target.at is None and target.quantity in curve.together:
        return None
    return None if at is None or factor is None else (at, factor)
