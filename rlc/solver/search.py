r"""The largest value of a signal over all time, with an upper bound.

Branch and bound over intervals of time, for a batch of loops at once. An interval is dropped
when what the signal can reach there is no more than the best value found; the rest is cut
into four. Upper bounds on an interval of half width h around m, the smaller of:

- Taylor: :math:`\max|y(m) \pm h\,y'(m)| + \tfrac12 h^2 \max|y''|`;
- what the held part and free motion come to at most (:mod:`rlc.solver.motion`).

Where the closing angle is to be found as well and its effect is no single wave, an interval is
a rectangle of time and angle. Bounds hold up to the rounding of double precision.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from operator import itemgetter
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Equation, kernels
from rlc.solver.motion import Array, Bounds, Index, Moved
from rlc.solver.rows import Rows, framed, framed_bounds, together

#: Relative gap between the value found and the proved upper bound.
PROVED_GAP = 1e-9

_CELLS_AT_ONCE = 200_000
# A loop of extreme quality rings through billions of periods; its search ends with a wider gap.
_MOST_CELLS, _MOST_CELLS_PER_LOOP = 2_000_000, 20_000
_POLISH_STEPS = 6


@dataclass(eq=False)
class Best:
    """The best value of each loop so far; filled in by :func:`search`.

    Attributes
    ----------
    value : Array
        Shape (loops,) [V, A or A/s].
    time : Array
        Since closing; infinite where it is only approached [s].
    gap : Array
        The true value is higher by no more than this share [1].
    angle : Array
        Closing angle, if it was searched for as well [rad].
    row : Array of int
        Place of the row where it was found; -1 for a value known beforehand [1].
    """

    value: Array
    time: Array
    gap: Array
    angle: Array
    row: NDArray[np.intp]


def known_before(value: Array, time: Array | None = None) -> Best:
    """What is known before a search, such as the amplitude that is approached.

    Parameters
    ----------
    value : Array
        Shape (loops,) [V, A or A/s].
    time : Array, optional
        When it is reached; never if not given [s].

    Returns
    -------
    Best
    """
    never = np.full(value.shape, np.inf) if time is None else time.copy()
    zero = np.zeros(value.shape)
    return Best(value.copy(), never, zero, zero.copy(), np.full(value.shape, -1))


class _Cells(NamedTuple):
    """Intervals: row, middle and half width in time, the same in angle, upper bound."""

    which: Index
    at: Array
    half: Array
    angle: Array
    swing: Array
    bound: Array

    def pick(self, where: Any) -> _Cells:
        return _Cells(*(part[where] for part in self))


def search(rows: Rows, best: Best, gap: float = PROVED_GAP) -> None:
    """Raise the best values to the largest ones over all rows.

    Parameters
    ----------
    rows : Rows
        What is searched.
    best : Best
        What is known beforehand; changed in place. Its gap becomes `gap`, or wider where the
        search had to stop before.
    gap : float
        Relative gap to be proved, more than zero [1].
    """
    _Search(rows, best).run(gap)


class _Search:
    def __init__(self, rows: Rows, best: Best) -> None:
        self.rows, self.best = rows, best
        self.eq = rows.eq
        zero = np.zeros(rows.group.size)
        low, high = rows.window or (zero, zero)
        self.angle, self.swing = (low + high) / 2, (high - low) / 2
        self.frame = zero if rows.frame is None else rows.frame
        self.energy = np.sum([part.energy for part in rows.parts], axis=0)
        amplitude = np.sum([part.amplitude for part in rows.parts], axis=0)
        self.top = amplitude if rows.top is None else np.minimum(amplitude, rows.top)

    def run(self, gap: float) -> None:
        rows, best = self.rows, self.best
        every = np.arange(rows.group.size)
        self._record(every, np.zeros(every.size), self.angle)
        best.gap = np.maximum(best.gap, gap)
        ends = np.flatnonzero(np.isfinite(rows.duration))
        self._record(ends, rows.duration[ends], self.angle[ends])
        cells = self._first_cells(gap, every)
        seen, most = 0, _MOST_CELLS + _MOST_CELLS_PER_LOOP * best.value.size
        while cells.which.size:
            cells = cells.pick(cells.bound > best.value[rows.group[cells.which]] * (1 + gap))
            if seen > most:
                self._give_up(cells)
                break
            now = cells.pick(slice(max(0, cells.which.size - _CELLS_AT_ONCE), None))
            later = cells.pick(slice(0, cells.which.size - now.which.size))
            seen += now.which.size
            children = self._cut(now, gap)
            cells = _Cells(*(np.concatenate(pair) for pair in zip(later, children, strict=True)))
        if self._turned:
            self._snap()
        self._polish()
        self._snap()

    def _give_up(self, cells: _Cells) -> None:
        best, group = self.best, self.rows.group[cells.which]
        if cells.which.size:
            anywhere = self.top[cells.which] + self.energy[cells.which]
            top = np.minimum(cells.bound, anywhere) if not self._lines() else cells.bound
            np.maximum.at(best.gap, group, top / best.value[group] - 1)

    def _lines(self) -> bool:
        return any(part.line is not None for part in self.rows.parts)

    @property
    def _turned(self) -> bool:
        return bool(self.rows.turns)

    def _first_cells(self, gap: float, which: Index) -> _Cells:
        """Intervals that double in length until nothing but the source is left."""
        rows, eq = self.rows, self.eq.map(itemgetter(which))
        unit, duration = 1.0 / rows.quickest[which], rows.duration[which]
        # what is left out may add to what is proved of the rest
        floor = gap / 4 * np.maximum(self.best.value[rows.group[which]], 1e-9 * self.energy[which])
        rate = eq.slowest
        lasting = any(part.lasting for part in rows.parts)
        whole = np.isfinite(duration) & ((eq.damping == 0) | lasting)
        found: list[tuple[Index, Array, Array]] = []
        for k in range(-1, 200):
            start, end = (0.0 * unit, unit) if k < 0 else (unit * 2.0**k, unit * 2.0 ** (k + 1))
            end = np.minimum(end, duration)
            with np.errstate(divide="ignore", invalid="ignore"):
                memory = np.minimum(1.0 / eq.root[0], np.maximum(start, 1.0 / rate))
                memory = np.where(rate > 0, memory, 0.0)
            tail = np.sum([part.tail(which, start, memory, rate) for part in rows.parts], axis=0)
            live = (start < duration) & ((tail > floor) | whole)
            if not live.any():
                break
            half = (end - start) / 2
            found.append((which[live], (start + half)[live], half[live]))
        if not found:
            return _Cells(which[:0], *(unit[:0] for _ in range(5)))
        row, middle, half = (np.concatenate(part) for part in zip(*found, strict=True))
        bound = np.full(row.size, np.inf)
        # what closes within the window has turned on by then
        seen = self.angle[row] + self.frame[row] * middle
        swing = np.minimum(self.swing[row] + self.frame[row] * half, np.pi)
        return _Cells(row, middle, half, seen, swing if self._turned else 0.0 * seen, bound)

    def _closing(self, which: Index, time: Array, angle: Array) -> tuple[Array, Array]:
        """Closing angle of an angle as it is searched, less the window's middle; and the same
        cut to the window."""
        away = angle - self.frame[which] * time - self.angle[which]
        if self.rows.frame is not None:
            away = np.mod(away + np.pi, 2 * np.pi) - np.pi
        return away, np.clip(away, -self.swing[which], self.swing[which])

    def _moved(self, which: Index, time: Array, eq: Equation) -> Sequence[Moved]:
        kernel = kernels(eq, time)
        return [part.at(eq, kernel, which, time) for part in self.rows.parts]

    def _size(self, which: Index, time: Array, angle: Array, moved: Sequence[Moved]) -> Any:
        """Magnitude of the signal, at an angle as it is searched."""
        if not self._turned:
            return _sum(moved)
        seen = framed(self.rows, which, time, moved)
        return np.abs(together(self.rows.turns, seen, angle)[0])

    def _record(self, which: Index, time: Array, angle: Array) -> None:
        """Record values at given times and closing angles."""
        moved = self._moved(which, time, self.eq.map(itemgetter(which)))
        size = self._size(which, time, angle + self.frame[which] * time, moved)
        self._keep(which, time, angle, size)

    def _keep(self, which: Index, time: Array, angle: Array, size: Array) -> None:
        best, rows = self.best, self.rows
        group = rows.group[which]
        better = size > best.value[group]
        if better.any():
            which, time, angle, size = which[better], time[better], angle[better], size[better]
            group = group[better]
            np.maximum.at(best.value, group, size)
            top = size >= best.value[group]
            group, which, time, angle = group[top], which[top], time[top], angle[top]
            best.time[group] = rows.start[which] + time
            best.angle[group], best.row[group] = angle, which

    def _cut(self, cells: _Cells, gap: float) -> _Cells:
        """Intervals in quarters, along time or angle, those left out that hold nothing more."""
        top, in_time, in_angle = self._bound(cells)
        keep = top > self.best.value[self.rows.group[cells.which]] * (1 + gap)
        kept = cells.pick(keep)
        across = (in_angle > in_time)[keep]
        steps = np.array([-0.75, -0.25, 0.25, 0.75])
        along, aside = (
            np.where(side, 0.0, width)[:, np.newaxis] * steps
            for side, width in ((across, kept.half), (~across, kept.swing))
        )
        cut = _Cells(
            np.repeat(kept.which, 4),
            (kept.at[:, np.newaxis] + along).ravel(),
            np.repeat(np.where(across, kept.half, kept.half / 4), 4),
            (kept.angle[:, np.newaxis] + aside).ravel(),
            np.repeat(np.where(across, kept.swing / 4, kept.swing), 4),
            np.repeat(top[keep], 4),
        )
        if self.rows.frame is None:
            return cut
        away, within = self._closing(cut.which, cut.at, cut.angle)
        reach = cut.swing + self.frame[cut.which] * cut.half
        return cut.pick(np.abs(away - within) <= reach)

    def _bound(self, cells: _Cells) -> tuple[Array, Array, Array]:
        """Upper bounds, and what time and angle add to them; middles are recorded on the way."""
        which, at, half, angle, swing, _ = cells
        eq = self.eq.map(itemgetter(which))
        moved = self._moved(which, at, eq)
        bounds = [
            part.bounds(eq, which, at, half, each)
            for part, each in zip(self.rows.parts, moved, strict=True)
        ]
        anywhere = np.sum([each.value for each in bounds], axis=0)
        if not self._lines():
            reach = np.sum([each.free[0] for each in bounds], axis=0)
            anywhere = np.fmin(anywhere, self.top[which] + reach)
        in_angle = np.zeros(which.size)
        if self._turned:
            value, slope, aslant, *_ = together(
                self.rows.turns, framed(self.rows, which, at, moved), angle
            )
            size, seen = np.abs(value), framed_bounds(self.rows, which, bounds)
            pairs = list(zip(self.rows.turns, seen, strict=True))
            mixed = np.sum([k * each.slope for k, each in pairs], axis=0)
            round_ = np.sum([k * k * each.value for k, each in pairs], axis=0)
            bend = np.sum([each.bend for each in seen], axis=0)
            in_time = half * (np.abs(slope) + half / 2 * bend)
            in_angle = swing * (np.abs(aslant) + swing / 2 * round_)
            taylor = size + in_time + in_angle + half * swing * mixed
            away, within = self._closing(which, at, angle)
            angle = self.angle[which] + within
            if self.rows.frame is not None and np.any(self.swing < np.pi):
                reach = swing + self.frame[which] * half
                edges = np.clip([away - reach, away + reach], -self.swing[which], self.swing[which])
                size, nearby = self._at_closing(moved, bounds, half, angle, edges - within)
                # not where the interval meets the window from its other side as well
                once = np.abs(away) + reach + self.swing[which] < 2 * np.pi
                taylor = np.where(once, np.fmin(taylor, nearby), taylor)
        else:
            size = _sum(moved)
            # the parts' slopes cancel at the top of their sum, so their lines are taken together
            before, after = (
                np.sum([np.abs(each.value + side * each.slope) for each in moved], axis=0)
                for side in (-half, half)
            )
            in_time = half * half / 2 * np.sum([each.bend for each in bounds], axis=0)
            taylor = np.maximum(before, after) + in_time
        self._keep(which, at, angle, size)
        return np.fmin(anywhere, taylor), in_time, in_angle

    def _at_closing(
        self, moved: Sequence[Moved], bounds: Sequence[Bounds], half: Array, angle: Array, to: Array
    ) -> tuple[Array, Array]:
        """Value at a possible closing angle, and a bound up to both ends of those beside it.

        At the edge of a window the largest value may lie on a slope: only the side counts that
        is possible.
        """
        turns = self.rows.turns
        value, slope, aslant, *_ = together(turns, moved, angle)
        size, toward = np.abs(value), np.sign(value) * aslant * to
        upward = np.maximum(size + np.max(toward, axis=0), np.max(-toward, axis=0) - size)
        pairs = list(zip(turns, bounds, strict=True))
        mixed = np.sum([k * each.slope for k, each in pairs], axis=0)
        round_ = np.sum([k * k * each.value for k, each in pairs], axis=0)
        bend = np.sum([each.bend for each in bounds], axis=0)
        away = np.max(np.abs(to), axis=0)
        curved = half * half / 2 * bend + half * away * mixed + away * away / 2 * round_
        return size, upward + half * np.abs(slope) + curved

    def _polish(self) -> None:
        """Newton's method on the slopes, kept only where it raises the value."""
        best, rows = self.best, self.rows
        for _ in range(_POLISH_STEPS):
            loops = np.flatnonzero((best.row >= 0) & np.isfinite(best.time))
            which = best.row[loops]
            time, angle = best.time[loops] - rows.start[which], best.angle[loops]
            inside = (time > 0) & (time < rows.duration[which])
            loops, which, time, angle = loops[inside], which[inside], time[inside], angle[inside]
            if not which.size:
                return
            moved = self._moved(which, time, self.eq.map(itemgetter(which)))
            step, turned = self._newton(framed(rows, which, time, moved), which, time, angle)
            later = time + step
            good = np.isfinite(later) & (later > 0) & (later <= rows.duration[which])
            loops, which, later, turned = loops[good], which[good], later[good], turned[good]
            moved = self._moved(which, later, self.eq.map(itemgetter(which)))
            size = self._size(which, later, turned + self.frame[which] * later, moved)
            # the value is flat to rounding around the top; the time still gains digits
            keep = size >= best.value[loops] * (1 - 1e-15)
            loops = loops[keep]
            best.time[loops] = (rows.start[which] + later)[keep]
            best.angle[loops] = turned[keep]
            best.value[loops] = np.maximum(best.value[loops], size[keep])

    def _snap(self) -> None:
        """To the edges of the window, and to the row's start, where the value is no less there."""
        best, rows = self.best, self.rows
        loops = np.flatnonzero((best.row >= 0) & np.isfinite(best.time))
        which = best.row[loops]
        time, angle = best.time[loops] - rows.start[which], best.angle[loops]
        sides = (-1, 1) if self._turned else ()
        edges = [self.angle[which] + side * self.swing[which] for side in sides]
        tried = [(time, edge) for edge in edges]
        tried += [(np.zeros(time.size), each) for each in (angle, *edges)]
        for at, closing in tried:
            moved = self._moved(which, at, self.eq.map(itemgetter(which)))
            size = self._size(which, at, closing + self.frame[which] * at, moved)
            same = size >= best.value[loops] * (1 - 1e-14)
            best.value[loops[same]] = np.maximum(size, best.value[loops])[same]
            best.time[loops[same]] = (rows.start[which] + at)[same]
            if self._turned:
                best.angle[loops[same]] = closing[same]

    def _newton(
        self, moved: Sequence[Moved], which: Index, time: Array, angle: Array
    ) -> tuple[Array, Array]:
        """The step in time, and the next closing angle; not a number away from a top."""
        with np.errstate(all="ignore"):
            if self._turned:
                pace = self.frame[which]
                value, slope, aslant, bend, mixed, round_ = together(
                    self.rows.turns, moved, angle + pace * time
                )
                # at a fixed closing angle the angle as it is searched turns with the source
                slope, mixed = slope + pace * aslant, mixed + pace * round_
                bend = bend + pace * (mixed + (mixed - pace * round_))
                away = angle - self.angle[which]
                determinant = bend * round_ - mixed * mixed
                free = (np.abs(away) < self.swing[which]) & (determinant > 0)
                both = (mixed * aslant - round_ * slope) / determinant
                step = np.where(free, both, -slope / bend)
                turned = np.where(free, (mixed * slope - bend * aslant) / determinant, 0.0)
                ahead = np.clip(away + turned, -self.swing[which], self.swing[which])
                return np.where(np.sign(value) * bend < 0, step, np.nan), self.angle[which] + ahead
            slope, bend = np.zeros(which.size), np.zeros(which.size)
            for each in moved:
                size = np.abs(each.value)
                along = np.where(size > 0, np.real(np.conj(each.value) * each.slope) / size, 0.0)
                turn = np.abs(each.slope) ** 2 + np.real(np.conj(each.value) * each.bend)
                slope += along
                bend += np.where(size > 0, (turn - along**2) / size, 0.0)
            return np.where(bend < 0, -slope / bend, np.nan), angle


def _sum(moved: Sequence[Moved]) -> Any:
    """The largest that the parts come to when their magnitudes add up."""
    return np.sum([np.abs(each.value) for each in moved], axis=0)
