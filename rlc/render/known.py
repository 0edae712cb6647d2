"""What is known of a peak, for tables and JSON alike."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from rlc.front.marking import show
from rlc.solver.case import Case
from rlc.solver.search import PROVED_GAP

#: Signals whose peaks are shown, with the kind of their unit.
PEAKS = (("current", "current"), ("capacitor", "voltage"), ("inductor", "voltage"))

#: Four digits are printed: a peak that passes the steady state by less is that.
AS_STEADY = 1e-4


class Known(NamedTuple):
    """The peak of one signal.

    Attributes
    ----------
    value, time : float
        Magnitude, and when it is reached; no time if it is only approached or is the steady
        state but for parts in ten thousand [A or V], [s].
    angle : float or None
        Closing angle of a sine; None if every angle is as bad [rad].
    steady : float
        Steady amplitude, or size of the final value [A or V].
    gap : float
        The true peak is higher by at most this share [1].
    known : str
        How it is known.
    """

    value: float
    time: float
    angle: float | None
    steady: float
    gap: float
    known: str


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
    phasor = case.steady.current if element == "current" else case.steady.across(element)
    steady = abs(complex(case.source.amplitude * phasor))
    some = math.isfinite(time) and (time > 0 or element == "inductor")
    angle = float(case.closing_angle_for(element)) if some or not case.source.worst_angle else None
    if math.isinf(value):
        known = "grows without bound"
    elif not math.isfinite(time):
        known = "approached, never reached"
    elif gap > PROVED_GAP:
        known = f"searched; at most {show(gap, 'ratio', 2)} more"
    elif 0 < value <= steady * (1 + AS_STEADY):
        # Driven near resonance a late crest may pass the steady state by parts in a million.
        known, time = "proved: the steady state", np.nan
    else:
        known = "proved"
    return Known(value, time if math.isfinite(time) else math.nan, angle, steady, gap, known)
