"""Peaks under straight lines of the source: line by line, but for those that hold none."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.course import Course, follow
from rlc.solver.equation import Equation, equation_of
from rlc.solver.lines import balance, final_lag
from rlc.solver.loop import Loop, Weights
from rlc.solver.motion import Index, Motion
from rlc.solver.peaks import Peak, Signal, constant_source_peak
from rlc.solver.rows import Rows
from rlc.solver.search import PROVED_GAP, Best, known_before, search
from rlc.solver.shapes import Piecewise

if TYPE_CHECKING:
    from rlc.solver.case import Case

Array = NDArray[np.float64]

_QUARTER_TURN = np.pi / 2
# Lines of all loops together that are looked at in one go; of one loop all, at some 200 B each.
_LINES_AT_ONCE = 500_000
# Parts of a line that is cut up, and what rounding takes from a sum of terms.
_PARTS, _ROUNDING = 16, 8 * np.finfo(np.float64).eps


def course_peaks(case: Case, elements: tuple[str, ...]) -> dict[str, Peak]:
    """Largest magnitudes over all time under straight lines of the source.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    elements : tuple of str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    dict of str to Peak
        Each with the batch's shape. Where the largest value of a train of pulses belongs to its
        last period, it is that of the steady train and approached.
    """
    lines = case.lines
    assert lines is not None
    shape, end = case.shape, case.course_end if case.repeats else np.inf
    size = int(np.prod(shape))

    def flat(value: Array) -> Array:
        return np.broadcast_to(value, shape).reshape(-1)

    loop = case.loop.map(flat)
    states = flat(case.capacitor_voltage), flat(case.initial_current)
    step = max(1, _LINES_AT_ONCE // lines.start.size)
    pieces = []
    for first in range(0, size, step):
        some = slice(first, first + step)
        pieces.append(
            _piece(loop.map(lambda part, some=some: part[some]), lines, end,
                   tuple(part[some] for part in states), elements)
        )  # fmt: skip
    found = {}
    for element, bests in zip(elements, zip(*pieces, strict=True), strict=True):
        value, time, gap = (
            np.concatenate([getattr(best, name) for best in bests]).reshape(shape)
            for name in ("value", "time", "gap")
        )
        if case.repeats:
            time = np.where(time > end - case.repeats, np.inf, time)
        found[element] = Peak(value, time, gap, np.full(shape, _QUARTER_TURN))
    return found


def _piece(
    loop: Loop, lines: Piecewise, end: float, states: tuple[Array, ...], elements: tuple[str, ...]
) -> list[Best]:
    """Some loops, carried through the lines once for all signals."""
    eq = equation_of(loop)
    course = follow(equation_of(loop.column()), lines, *(part[:, np.newaxis] for part in states))
    return [_highest(eq, course, end, loop.weights(each)) for each in elements]


class _OnLines(NamedTuple):
    """A signal on each line, shape (loops, lines).

    Attributes
    ----------
    at_start, at_end : Array
        Its value just after the line's knot, and just before the next one.
    held, rise, free, pace : Array
        Held part at the start and its slope, free motion at the start and its slope: far more
        than the signal itself where a line is short to the loop.
    bend, turn : Array
        Second and third derivative at the start; on a line they move freely.
    """

    at_start: Array
    at_end: Array
    held: Array
    rise: Array
    free: Array
    pace: Array
    bend: Array
    turn: Array


def _on_lines(eq: Equation, course: Course, w: Weights) -> _OnLines:
    shape, (a, b, c, d) = course.shape, (entry[:, np.newaxis] for entry in eq.matrix)
    weight_v, weight_i, weight_s = (part[:, np.newaxis] for part in w)
    rest, lag = ([part[:, np.newaxis] for part in pair] for pair in (balance(eq), final_lag(eq)))

    def weighed(voltage: Array, current: Array) -> Array:
        return weight_v * voltage + weight_i * current

    def moved(voltage: Array, current: Array) -> tuple[Array, Array]:
        return a * voltage + b * current, c * voltage + d * current

    states, apart = course.known, course.free
    # what is free on each line: the distance from balance, less the lag behind a ramp
    free = apart[0] - lag[0] * shape.slope, apart[1] - lag[1] * shape.slope
    at_rest = weighed(*rest) + weight_s
    # the slopes of the states are those of their distance from balance
    second, pulled = moved(*moved(*apart))
    bend = second, pulled + eq.source_rate[:, np.newaxis] * shape.slope
    ahead = states[0][:, 1:], states[1][:, 1:]
    return _OnLines(
        weighed(*states) + weight_s * shape.level,
        # the source may jump at a knot, the states do not
        weighed(*ahead) + weight_s * shape.end[:-1],
        at_rest * shape.level + weighed(*lag) * shape.slope,
        at_rest * shape.slope,
        weighed(*free),
        weighed(*moved(*free)),
        weighed(*bend),
        weighed(*moved(*bend)),
    )


def _highest(eq: Equation, course: Course, end: float, w: Weights) -> Best:
    signal, start = _on_lines(eq, course, w), course.shape.start
    at_start, at_end = np.abs(signal.at_start), np.abs(signal.at_end)
    loops = np.arange(at_start.shape[0])
    first = at_start.argmax(axis=1)
    best = known_before(at_start[loops, first], start[first])
    if start.size > 1:
        late = at_end.argmax(axis=1)
        _raise(best, at_end[loops, late], start[1:][late])
    width = np.diff(start, append=end)
    count = start.size
    if np.isinf(end):
        last = constant_source_peak(
            eq, Signal(signal.held[:, -1], signal.free[:, -1], signal.pace[:, -1])
        )
        _raise(best, last.value, start[-1] + last.time)
        count -= 1
    best.gap[:] = PROVED_GAP
    # |y| <= larger end + h^2/8 max|y''|, and the energy of y'' never grows
    bend = np.hypot(signal.bend, signal.turn / eq.natural[:, np.newaxis])[:, :count]
    top = at_start[:, :count] + width[:count] ** 2 / 8 * bend
    within = min(count, start.size - 1)
    top[:, :within] += np.maximum(at_end[:, :within] - at_start[:, :within], 0.0)
    top[:, within:] = np.inf
    group, line = np.nonzero(top > best.value[:, np.newaxis] * (1 + PROVED_GAP))
    # Where held part and free motion are far more than the signal their sum has lost its digits.
    terms = np.abs(signal.held[group, line]) + np.abs(signal.free[group, line])
    lost = (terms * _ROUNDING > PROVED_GAP * best.value[group]) & np.isfinite(width[line])
    _cut_up(course, w, best, _Pieces(group[lost], line[lost], width[line[lost]]))
    group, line = group[~lost], line[~lost]
    if group.size:
        rows = eq.map(lambda part: part[group])
        motion = Motion(
            rows,
            Signal(0.0, signal.free[group, line], signal.pace[group, line]),
            line=(signal.held[group, line], signal.rise[group, line]),
            real=True,
        )
        search(Rows(rows, (motion,), group, start[line], width[line], rows.natural), best)
    return best


class _Pieces(NamedTuple):
    """Lines whose peaks are looked for from exact states alone."""

    group: Index
    line: Index
    width: Array


def _cut_up(course: Course, w: Weights, best: Best, pieces: _Pieces) -> None:
    """Cut lines ever finer, by the same bound, until no piece may hold more."""
    shape = course.shape
    group, line, width = pieces
    begin = np.zeros(group.size)
    steps = np.linspace(0.0, 1.0, _PARTS + 1)
    while group.size:
        loop, on = np.repeat(group, _PARTS + 1), np.repeat(line, _PARTS + 1)
        since = (begin[:, np.newaxis] + width[:, np.newaxis] * steps).ravel()
        voltage, current = course.along(loop, on, since)
        eq = _rows(course.eq, loop)
        rest, (a, b, c, d) = balance(eq), eq.matrix
        weight_v, weight_i, weight_s = (part[loop] for part in w)
        source = shape.level[on] + shape.slope[on] * since
        size = np.abs(weight_v * voltage + weight_i * current + weight_s * source)
        higher = np.flatnonzero(size > best.value[loop])
        # the largest of each loop last: it is the one that stays
        higher = higher[np.argsort(size[higher], kind="stable")]
        best.value[loop[higher]] = size[higher]
        best.time[loop[higher]] = (shape.start[on] + since)[higher]
        voltage, current = voltage - rest[0] * source, current - rest[1] * source
        for _ in range(2):
            voltage, current = a * voltage + b * current, c * voltage + d * current
        current = current + eq.source_rate * shape.slope[on]
        turn_v, turn_i = a * voltage + b * current, c * voltage + d * current
        bend = np.hypot(
            weight_v * voltage + weight_i * current,
            (weight_v * turn_v + weight_i * turn_i) / eq.natural,
        )
        grid = (group.size, _PARTS + 1)
        size, bend = size.reshape(grid), bend.reshape(grid)
        width = width / _PARTS
        top = np.maximum(size[:, 1:], size[:, :-1]) + width[:, np.newaxis] ** 2 / 8 * bend[:, :-1]
        kept, part = np.nonzero(top > best.value[group][:, np.newaxis] * (1 + PROVED_GAP))
        # below the spacing of doubles in time there is nothing left to cut
        fine = width[kept] > _ROUNDING * (shape.start[line[kept]] + width[kept])
        kept, part = kept[fine], part[fine]
        begin = begin[kept] + width[kept] * part
        group, line, width = group[kept], line[kept], width[kept]


def _rows(eq: Equation, loop: Index) -> Equation:
    return eq.map(lambda part: part[loop, 0])


def _raise(best: Best, value: Array, time: Array) -> None:
    higher = value > best.value
    best.value, best.time = np.where(higher, value, best.value), np.where(higher, time, best.time)
