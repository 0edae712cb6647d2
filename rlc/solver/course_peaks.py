"""Peaks under straight lines of the source: line by line, but for those that hold none."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.course import follow
from rlc.solver.equation import Equation, equation_of
from rlc.solver.lines import balance, final_lag
from rlc.solver.loop import Loop, Weights
from rlc.solver.motion import Motion, take
from rlc.solver.peaks import Peak, Signal, constant_source_peak
from rlc.solver.rows import Rows
from rlc.solver.search import PROVED_GAP, Best, known_before, search
from rlc.solver.shapes import Piecewise

if TYPE_CHECKING:
    from rlc.solver.case import Case

Array = NDArray[np.float64]

_QUARTER_TURN = np.pi / 2
# Lines of all loops together that are looked at in one go: some 100 MB.
_LINES_AT_ONCE = 500_000


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
    return [_highest(eq, lines, end, course.free, loop.weights(each)) for each in elements]


class _Ends(NamedTuple):
    """A signal on each line, shape (loops, lines): held part and free motion at its start."""

    held: Array
    rise: Array
    free: Array
    pace: Array
    at_end: Array


def _on_lines(eq: Equation, lines: Piecewise, apart: tuple[Array, Array], w: Weights) -> _Ends:
    def column(value: Array) -> Array:
        return value[:, np.newaxis]

    rest, lag = balance(eq), final_lag(eq)
    # what is free on each line: the distance from balance, less the lag behind a ramp
    voltage, current = (
        part - column(behind) * lines.slope for part, behind in zip(apart, lag, strict=True)
    )
    a, b, c, d = (column(entry) for entry in eq.matrix)
    weight_v, weight_i = column(w.capacitor_voltage), column(w.current)
    still = weight_v * column(rest[0]) + weight_i * column(rest[1])
    at_rest = still + column(w.source)
    behind = weight_v * column(lag[0]) + weight_i * column(lag[1])
    # at the end of a line the states are those at the next knot, the source is not
    ahead = still * lines.level[1:] + weight_v * apart[0][:, 1:] + weight_i * apart[1][:, 1:]
    return _Ends(
        at_rest * lines.level + behind * lines.slope,
        at_rest * lines.slope,
        weight_v * voltage + weight_i * current,
        weight_v * (a * voltage + b * current) + weight_i * (c * voltage + d * current),
        ahead + column(w.source) * lines.end[:-1],
    )


def _highest(
    eq: Equation, lines: Piecewise, end: float, apart: tuple[Array, Array], w: Weights
) -> Best:
    signal = _on_lines(eq, lines, apart, w)
    at_start = np.abs(signal.held + signal.free)
    loops = np.arange(at_start.shape[0])
    first = at_start.argmax(axis=1)
    best = known_before(at_start[loops, first], lines.start[first])
    if lines.start.size > 1:
        late = np.abs(signal.at_end).argmax(axis=1)
        _raise(best, np.abs(signal.at_end)[loops, late], lines.start[1:][late])
    width = np.diff(lines.start, append=end)
    count = lines.start.size
    if np.isinf(end):
        last = constant_source_peak(
            eq, Signal(signal.held[:, -1], signal.free[:, -1], signal.pace[:, -1])
        )
        _raise(best, last.value, lines.start[-1] + last.time)
        count -= 1
    best.gap[:] = PROVED_GAP
    # |y| <= larger end + h^2/8 max|y''|, the bend being that of free motion alone
    energy = np.hypot(signal.free[:, :count], signal.pace[:, :count] / eq.natural[:, np.newaxis])
    bend = (eq.natural * (eq.gamma + eq.natural))[:, np.newaxis] * energy
    ends = at_start[:, :count]
    within = min(count, lines.start.size - 1)
    ends[:, :within] = np.maximum(ends[:, :within], np.abs(signal.at_end[:, :within]))
    top = ends + width[:count] ** 2 / 8 * bend
    top[:, within:] = np.inf
    group, line = np.nonzero(top > best.value[:, np.newaxis] * (1 + PROVED_GAP))
    if group.size:
        rows = take(eq, group)
        motion = Motion(
            rows,
            Signal(0.0, signal.free[group, line], signal.pace[group, line]),
            line=(signal.held[group, line], signal.rise[group, line]),
            real=True,
        )
        search(Rows(rows, (motion,), group, lines.start[line], width[line], rows.natural), best)
    return best


def _raise(best: Best, value: Array, time: Array) -> None:
    higher = value > best.value
    best.value, best.time = np.where(higher, value, best.value), np.where(higher, time, best.time)
