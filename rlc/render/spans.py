"""Which part of a switch-on is drawn, and at which times."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import show
from rlc.render.figures import item
from rlc.render.known import AS_STEADY
from rlc.solver.case import Case
from rlc.solver.peaking import steady_peak
from rlc.solver.quantities import REGISTER
from rlc.solver.shapes import Piecewise, Surge

Array = NDArray[np.float64]

# The free motion has fallen below 2 % after four time constants.
_TIME_CONSTANTS = 4.0
#: Swings are told apart up to about this number of cycles across the picture ...
READABLE_CYCLES = 40.0
#: ... and up to this number the outline is right; only a late peak makes the picture so long.
MOST_CYCLES = 200.0
_POINTS_PER_CYCLE = 70
_LEAST_POINTS, _MOST_POINTS, _EARLY_POINTS = 1200, 3000, 200
_HARMONIC_POINTS, _MOST_HARMONIC_POINTS = 16, 12_000
# Periods of a train that are shown at least, and pulses of which all are shown.
_FEWEST_PERIODS, _MOST_PULSES = 3.0, 40
# After each of so many knots the times are close together.
_FEW_KNOTS = 160
_ROUNDING = 1e-9
# Room after a late peak, as a share of the picture, and a decay's length after its peak.
_ROOM, _DECAY = 0.05, 5.0
# A record at rest: within this share of its range.
_STILL = 0.03


class Span(NamedTuple):
    """The part of the switch-on that is drawn.

    Attributes
    ----------
    begin, end : float
        In time from closing [s].
    ringing, turning : float
        Frequency at which the loop rings, and of the source or a train; else zero [Hz].
    time : Array
        Shape (n,), rising, peaks and knots among them [s].
    remark : str
        What is left out; goes beneath the time axis.
    """

    begin: float
    end: float
    ringing: float
    turning: float
    time: Array
    remark: str

    def readable(self, frequency: float, since: float = 0.0) -> bool:
        """Whether the swings of a frequency [Hz] are told apart from a time [s] on."""
        return frequency * (self.end - max(since, self.begin)) <= READABLE_CYCLES + 1


def only_steady(case: Case, element: str) -> bool:
    """Whether the switch-on never passes its steady state by what the digits show."""
    steady = item(steady_peak(case, element))
    return item(case.peak(element).value) <= steady * (1 + AS_STEADY)


def span_of(case: Case, most_cycles: float) -> Span:
    """The whole transient, or as much of it as can be read; longer for a late peak.

    Parameters
    ----------
    case : Case
        One loop.
    most_cycles : float
        Of ringing or source, to which a late peak may make the picture longer [1].

    Returns
    -------
    Span
    """
    eq = case.equation
    rate = item(eq.slowest)
    ringing = ringing_of(case)
    course, period = _course(case)
    turning = item(case.source.frequency) or (1 / period if period else 0.0)
    constant = 1.0 / rate if rate > 0 else np.inf
    lasting = _TIME_CONSTANTS * constant
    whole = max(lasting + 2.0 / turning, 3.0 / turning) if turning > 0 else lasting
    quick = max(ringing, turning)
    end = min(whole, READABLE_CYCLES / quick) if quick > 0 else whole
    if whole > end and ringing > turning:
        # periods of a slow source would crowd a short ringing into the picture's edge
        end = min(end, 2 * lasting)
    end = course + max(end, _FEWEST_PERIODS * period)
    longest = course + (most_cycles / quick if quick > 0 else np.inf)
    begin, cut = 0.0, ""
    if case.source.kind == "recorded":
        begin, end, cut = _eventful(case, end, end - course)
    elements = [name for name in ("current", "capacitor") if not only_steady(case, name)]
    peaks = np.array([item(case.peak(name).time) for name in elements])
    peaks = peaks[np.isfinite(peaks)]
    latest = float(np.max(peaks, initial=0.0))
    if course:
        end = max(end, min(latest + _ROOM * (end - begin), longest))
    elif 0.9 * end < latest < 0.9 * longest:
        end = min(2.0 * latest, longest)
    if case.source.kind == "surge" and not ringing:
        # nothing but a slow decay follows
        end = min(end, max(_DECAY * latest, 2 * course))
    begin = min(begin, float(np.min(peaks, initial=np.inf)))
    end = min(end, case.course_end)
    time = np.union1d(times_between(case, begin, end, quick), peaks)
    time = time[(time >= begin) & (time <= end)]
    if end - course < lasting * (1 - _ROUNDING) and not cut:
        dies = f"its time constant is {show(constant, 'time')}" if rate > 0 else "it never dies"
        cut = f"the first {show(end, 'time', 3)} of the transient; {dies}"
    if period and not case.repeats:
        cut = f"the first of the pulses, which end after {show(_settled(case), 'time')}"
    elif case.repeats:
        cut = f"{cut}; the pulses go on" if cut else "the pulses go on"
    return Span(begin, end, ringing, turning, time, f"\n{cut}" if cut else "")


def _settled(case: Case) -> float:
    assert isinstance(case.source.shape, Piecewise)
    return case.source.shape.gone


def ringing_of(case: Case) -> float:
    """Frequency at which the loop rings; zero if it does not [Hz]."""
    underdamped = bool(np.all(case.equation.underdamped))
    return item(REGISTER["ringing_frequency"](case)) if underdamped else 0.0


def _course(case: Case) -> tuple[float, float]:
    """How long the source moves once, and the period of a train of many pulses, or zero [s]."""
    shape = case.source.shape
    if isinstance(shape, Surge):
        return _TIME_CONSTANTS / shape.slow, 0.0
    if not isinstance(shape, Piecewise) or case.repeats:
        return 0.0, case.repeats
    if shape.kind == "pulse":
        # a pulse has two to four lines, all pulses the same ones
        for lines in (2, 3, 4):
            pulses = shape.start.size // lines
            if pulses > _MOST_PULSES and np.all(shape.end[lines:] == shape.end[:-lines]):
                return 0.0, float(shape.start[lines])
    return shape.gone, 0.0


def _eventful(case: Case, end: float, tail: float) -> tuple[float, float, str]:
    """A record from where it starts to move to where the loop has come to rest after it."""
    shape = case.source.shape
    assert isinstance(shape, Piecewise)
    level, start = shape.level, shape.start
    still = _STILL * float(np.ptp(level))
    moving = np.abs(level - level[-1]) > still
    over = float(start[np.flatnonzero(moving)[-1] + 1]) if moving.any() else 0.0
    begin, cut = 0.0, []
    if over + tail < 0.8 * end:
        end = over + tail
        cut.append(f"after {show(end, 'time', 3)} the source hardly moves")
    quiet = case.at_rest and abs(float(level[0])) <= still
    if quiet and np.any(np.abs(level) > still):
        first = float(start[np.argmax(np.abs(level) > still)])
        lead = first - 0.1 * (end - first)
        if lead > 0.3 * end:
            begin = lead
            cut.insert(0, f"before {show(begin, 'time', 3)} it is at rest")
    return begin, end, "; ".join(cut)


def times_between(case: Case, begin: float, end: float, quick: float) -> Array:
    """Times to draw at: even, and closer where something fast goes on.

    Parameters
    ----------
    case : Case
        One loop.
    begin, end : float
        From closing [s].
    quick : float
        The quicker one of ringing and source [Hz].

    Returns
    -------
    Array
        Rising [s].
    """
    eq, source, length = case.equation, case.source, end - begin
    points = int(np.clip(_POINTS_PER_CYCLE * quick * length, _LEAST_POINTS, _MOST_POINTS))
    if source.orders:
        highest = max(order.number for order in source.orders) * item(source.frequency)
        wanted = _HARMONIC_POINTS * highest * length
        points = int(np.clip(wanted, points, _MOST_HARMONIC_POINTS))
    time = np.linspace(begin, end, points)
    offsets = [np.zeros(1)]
    if not np.all(eq.underdamped):
        # the fast one of the two rates may be over long before the first even step
        offsets.append(np.geomspace(1e-6 * end, end, _EARLY_POINTS))
    elif item(eq.damping) * length > 4 * _TIME_CONSTANTS:
        offsets.append(np.linspace(0.0, _TIME_CONSTANTS / item(eq.damping), _EARLY_POINTS))
    if isinstance(source.shape, Surge):
        offsets.append(np.geomspace(1e-2 / source.shape.fast, 2 * end, 2 * _EARLY_POINTS))
        if np.all(eq.underdamped):
            offsets.append(np.linspace(0.0, min(end, 2.0 / item(eq.root[0])), _EARLY_POINTS))
    after = np.unique(np.concatenate(offsets))
    if case.lines is None:
        time = np.union1d(time, after)
        return time[(time >= begin) & (time <= end)]
    knots = case.lines.start
    inside = (knots >= begin) & (knots <= end)
    jumps = np.append(False, case.lines.level[1:] != case.lines.end[:-1])
    # a jump of the source takes no time: one point just before it, one on it
    before = np.nextafter(knots[inside & jumps], 0.0)
    if np.count_nonzero(inside) <= _FEW_KNOTS:
        time = np.union1d(time, (knots[inside, np.newaxis] + after).ravel())
    time = np.unique(np.concatenate([time, knots[inside], before]))
    return time[(time >= begin) & (time <= end)]
