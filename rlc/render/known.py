"""What is known of a peak, for tables and JSON alike."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np

from rlc.front.marking import show
from rlc.solver.case import Case
from rlc.solver.peaking import steady_peak
from rlc.solver.search import PROVED_GAP

if TYPE_CHECKING:
    from rlc.solver.extrema import Extrema


class Signal(NamedTuple):
    """One of the two signals that a switch-on is judged by."""

    quantity: str
    words: str
    kind: str


#: By name of the element.
SIGNALS = {
    "current": Signal("peak_current", "current", "current"),
    "capacitor": Signal("peak_capacitor_voltage", "capacitor voltage", "voltage"),
}

#: Signals whose peaks are shown, with the kind of their unit.
PEAKS = (("current", "current"), ("capacitor", "voltage"), ("inductor", "voltage"))

#: Four digits are printed: a peak that passes the steady state by less is that.
AS_STEADY = 1e-4
# An extremum and the peak that it is are each known to a part in 1e9.
_SAME = 1e-8
# What is reached in such a share of the loop's quickest radian is there at closing.
_AT_CLOSING = 1e-9


class Known(NamedTuple):
    """The peak of one signal.

    Attributes
    ----------
    value, time : float
        Magnitude, and when it is reached; no time if it is only approached or is the steady
        state but for parts in ten thousand [A or V], [s].
    angle : float or None
        Closing angle of an alternating source; None if every angle is as bad [rad].
    polarity : float
        Sign that the stated capacitor voltage has at closing for this peak, 1 or -1 [1].
    steady : float
        Largest value in steady state, or size of the final one; not a number for a train of
        pulses that is repeated until steady [A or V].
    gap : float
        The true peak is higher by at most this share [1].
    known : str
        How it is known.
    """

    value: float
    time: float
    angle: float | None
    polarity: float
    steady: float
    gap: float
    known: str


def steady_of(case: Case, element: str) -> Any:
    """Largest magnitude in steady state, or size of the final value.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : {"current", "resistor", "inductor", "capacitor", "dielectric"}
        The current, or a part's voltage.

    Returns
    -------
    Array
        With harmonics that of the whole wave; not a number for a train of pulses [A or V].
    """
    if case.source.orders or case.repeats:
        return steady_peak(case, element)
    with np.errstate(invalid="ignore"):
        return np.abs(case.source.amplitude) * np.abs(getattr(case.steady, element))


def peak_of(case: Case, element: str) -> Known:
    """What is known of a peak.

    Parameters
    ----------
    case : Case
        One loop.
    element : {"current", "resistor", "inductor", "capacitor"}
        The current, or the voltage across a part's terminals.

    Returns
    -------
    Known
    """
    peak = case.peak(element)
    value, time, gap = float(peak.value), float(peak.time), float(peak.gap)
    if time * float(case.equation.quickest) < _AT_CLOSING:
        time = 0.0
    steady = float(steady_of(case, element))
    some = math.isfinite(time) and (time > 0 or element == "inductor")
    angle = float(case.closing_angle_for(element)) if some or not case.source.worst_angle else None
    if math.isinf(value):
        known = "grows without bound"
    elif not math.isfinite(time):
        known = "reached by the steady train" if case.repeats else "approached, never reached"
    elif gap > PROVED_GAP:
        known = f"searched; at most {show(gap, 'ratio', 2)} more"
    elif 0 < value <= steady * (1 + AS_STEADY):
        # Driven near resonance a late crest may pass the steady state by parts in a million.
        known, time = "proved: the steady state", np.nan
    else:
        known = "proved"
    time = time if math.isfinite(time) else math.nan
    return Known(value, time, angle, float(peak.polarity), steady, gap, known)


def largest_among(found: Extrema, case: Case) -> list[bool]:
    """Which turning points are the largest of their signal over the whole switch-on.

    Parameters
    ----------
    found : Extrema
        The turning points.
    case : Case
        The loop that they are of; with angle or polarity open, closed for its largest current.

    Returns
    -------
    list of bool
        One per turning point.
    """
    closed = case.closed_for("current")
    rows = zip(found.current, found.capacitor_voltage, found.of, strict=True)
    return [
        math.isclose(
            abs(current if of == "current" else voltage),
            float(closed.peak(of).value),
            rel_tol=_SAME,
        )
        for current, voltage, of in rows
    ]
