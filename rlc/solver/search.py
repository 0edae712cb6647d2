r"""The largest value of a signal under a sine, over all time, with an upper bound.

Branch and bound over intervals of time, for a batch of loops at once. An interval is dropped
when what the signal can reach there is no more than the best value found; the rest is cut
into four. Upper bounds on an interval of half width h around m, the smallest of:

- Taylor: :math:`\max|y(m) \pm h\,y'(m)| + \tfrac12 h^2 \max|y''|`, the remainder from the
  energy norm of the free motion, which never grows, or from its two decaying exponentials;
- steady amplitude plus the free motion's envelope at the interval's start;
- underdamped: the beat of source and ringing, which is slow where the two are close.

Bounds hold up to the rounding of double precision.
"""

from __future__ import annotations

from dataclasses import fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Equation, kernels
from rlc.solver.peaks import Peak, Signal

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]

#: Relative gap between the value found and the proved upper bound.
PROVED_GAP = 1e-9

_CELLS_AT_ONCE = 200_000
# A loop of extreme quality rings through billions of periods; its search ends with a wider gap.
_MOST_CELLS, _MOST_CELLS_PER_LOOP = 2_000_000, 20_000
_EXPONENT_LIMIT = 300.0
_GRID, _ZOOMS = np.linspace(-1.0, 1.0, 257), 5


def sine_peak(
    eq: Equation,
    angular_frequency: Array,
    rotating: Signal,
    fixed: Signal,
    closing_angle: Array | None,
) -> Peak:
    r"""Largest magnitude under a sine over all time.

    Parameters
    ----------
    eq : Equation
        A batch of loops, shape (n,).
    angular_frequency : Array
        Of the source, shape (n,), more than zero [rad/s].
    rotating : Signal
        Complex response from rest to :math:`e^{j\omega t}` times the amplitude; the response
        to the sine is its imaginary part after turning by the closing angle [V, A or A/s].
    fixed : Signal
        Response to the initial states alone; its steady part is zero [V, A or A/s].
    closing_angle : Array or None
        Shape (n,) [rad]; None for the angle that makes the peak largest.

    Returns
    -------
    Peak
        Shape (n,); its gap is at most `PROVED_GAP` unless the search had to stop before.

    Notes
    -----
    At one moment the largest :math:`|\Im(e^{j\varphi}Y) + y_0|` over all closing angles is
    :math:`|Y| + |y_0|`, so the worst angle needs one search over time and no scan of angles.
    A loop without losses never loses its free motion, which comes into step with the source
    arbitrarily closely; its peak is the sum of their largest values, approached and not reached.
    """
    if closing_angle is None:
        parts = [rotating, fixed]
    else:
        turn = np.exp(1j * closing_angle)
        parts = [
            Signal(
                rotating.steady * turn,
                np.imag(rotating.value * turn) + np.real(fixed.value),
                np.imag(rotating.slope * turn) + np.real(fixed.slope),
            )
        ]
    search = _Search(eq, angular_frequency, parts, projected=closing_angle is not None)
    value, time, left = search.run(PROVED_GAP)
    angle = search.angles(time) if closing_angle is None else closing_angle
    return Peak(value, time, left, angle)


def _take(eq: Equation, which: Index) -> Equation:
    def pick(value: object) -> object:
        if isinstance(value, tuple):
            return tuple(pick(item) for item in value)
        return np.asarray(value)[which]

    return Equation(**{f.name: pick(getattr(eq, f.name)) for f in fields(Equation)})  # type: ignore[arg-type]


class _Part:
    """One signal's constants, with what bounds its free motion."""

    def __init__(self, eq: Equation, omega: Array, signal: Signal) -> None:
        zero = np.zeros(omega.shape)
        self.steady = signal.steady + zero
        self.value, self.slope = signal.value + zero, signal.slope + zero
        self.omega = omega
        self.amplitude = np.abs(self.steady)
        self.energy = np.hypot(np.abs(self.value), np.abs(self.slope) / eq.natural)
        with np.errstate(all="ignore"):
            root = np.where(eq.underdamped, 1j, 1.0) * eq.root[0]
            first = np.where(eq.underdamped, -eq.damping + root, -eq.slow)
            second = -eq.damping - root
            # amplitudes of the two exponentials; infinite at critical damping
            self.first = (self.slope - second * self.value) / (first - second)
            self.second = (first * self.value - self.slope) / (first - second)


class _Search:
    def __init__(self, eq: Equation, omega: Array, parts: list[Signal], projected: bool) -> None:
        self.eq, self.omega, self.projected = eq, omega, projected
        self.parts = [_Part(eq, omega, part) for part in parts]
        self.rate = eq.slowest
        self.amplitude = np.sum([part.amplitude for part in self.parts], axis=0)
        self.energy = np.sum([part.energy for part in self.parts], axis=0)

    def run(self, gap: float) -> tuple[Array, Array, Array]:
        """Values, times and the gaps that are left."""
        every = np.arange(self.omega.size)
        best, when = self.amplitude.copy(), np.full(self.omega.size, np.inf)
        self._improve(every, np.zeros(every.size), best, when)
        left = np.full(self.omega.size, gap)
        undamped = self.eq.damping == 0
        if undamped.any():
            best[undamped] = self._never_decaying(np.flatnonzero(undamped))
            when[undamped] = np.inf
            left[undamped] = 0.0
        which, middle, half = self._first_cells(best, gap, np.flatnonzero(~undamped))
        bound = np.full(which.size, np.inf)
        seen, most = 0, _MOST_CELLS + _MOST_CELLS_PER_LOOP * self.omega.size
        while which.size:
            live = bound > best[which] * (1 + gap)
            which, middle, half, bound = which[live], middle[live], half[live], bound[live]
            if seen > most:
                anywhere = self.amplitude[which] + self.energy[which]
                np.maximum.at(left, which, np.minimum(bound, anywhere) / best[which] - 1)
                break
            now = slice(max(0, which.size - _CELLS_AT_ONCE), None)
            cells, at, width = which[now], middle[now], half[now]
            seen += cells.size
            top = self._bounds(cells, at, width, best, when)
            keep = top > best[cells] * (1 + gap)
            cut = width[keep, np.newaxis] / 4
            children = (at[keep, np.newaxis] + cut * np.array([-3.0, -1.0, 1.0, 3.0])).ravel()
            which = np.r_[which[: now.start], np.repeat(cells[keep], 4)]
            middle = np.r_[middle[: now.start], children]
            half = np.r_[half[: now.start], np.repeat(cut.ravel(), 4)]
            bound = np.r_[bound[: now.start], np.repeat(top[keep], 4)]
        self._polish(best, when)
        return best, when, left

    def _first_cells(self, best: Array, gap: float, loops: Index) -> tuple[Index, Array, Array]:
        """Intervals that double in length until the free motion no longer matters."""
        eq = _take(self.eq, loops)
        unit = 1.0 / np.maximum(eq.natural, self.omega[loops])
        floor = gap * np.maximum(best[loops], 1e-9 * self.energy[loops])
        rate = self.rate[loops]
        cells: list[tuple[Index, Array, Array]] = []
        for k in range(-1, 200):
            start, end = (0.0 * unit, unit) if k < 0 else (unit * 2.0**k, unit * 2.0 ** (k + 1))
            with np.errstate(divide="ignore"):
                memory = np.minimum(1.0 / eq.root[0], np.maximum(start, 1.0 / rate))
            tail = np.zeros(loops.size)
            for part in self.parts:
                value, slope = np.abs(part.value[loops]), np.abs(part.slope[loops])
                tail += value * (1 + rate * memory) + slope * memory
            live = np.exp(-rate * start) * tail > floor
            if not live.any():
                break
            half = (end - start) / 2
            cells.append((loops[live], (start + half)[live], half[live]))
        if not cells:
            return loops[:0], unit[:0], unit[:0]
        loop_column, middle, half_width = zip(*cells, strict=True)
        return np.concatenate(loop_column), np.concatenate(middle), np.concatenate(half_width)

    def _never_decaying(self, loops: Index) -> Array:
        """Steady amplitude plus the largest that free motion of constant size comes to.

        The parts swing together, so the largest of their sum is sought over one turn: on a
        grid, then on ever finer ones around its best point.
        """
        rate = self.eq.natural[loops, np.newaxis]
        best, width = np.zeros((loops.size, 1)), np.pi / 2
        largest = np.zeros(loops.size)
        for _ in range(_ZOOMS):
            turn = best + width * _GRID
            size = np.zeros(turn.shape)
            with np.errstate(invalid="ignore"):
                for part in self.parts:
                    value, slope = part.value[loops, np.newaxis], part.slope[loops, np.newaxis]
                    size += np.abs(value * np.cos(turn) + slope / rate * np.sin(turn))
            at = size.argmax(axis=-1)[:, np.newaxis]
            best = np.take_along_axis(turn, at, axis=-1)
            largest = np.take_along_axis(size, at, axis=-1)[:, 0]
            width *= 2 * (_GRID[1] - _GRID[0])
        total: Array = self.amplitude[loops] + largest
        return np.where(np.isfinite(total), total, np.inf)

    def _motion(self, which: Index, time: Array) -> list[tuple[Any, Any, Any, Any, Any]]:
        """Per part: value, slope, curvature, and the free part's value and slope."""
        eq = _take(self.eq, which)
        omega = self.omega[which]
        kernel = kernels(eq, time)
        turn = np.exp(1j * omega * time)
        rest = kernel.regular - eq.gamma * kernel.s
        stiffness = eq.natural_squared[0]
        motion = []
        for part in self.parts:
            value, slope = part.value[which], part.slope[which]
            free = value * kernel.regular + slope * kernel.s
            speed = slope * rest - stiffness * value * kernel.s
            steady = part.steady[which] * turn
            held: Any = (steady, 1j * omega * steady, -omega * omega * steady)
            if self.projected:
                held = (np.imag(held[0]), np.imag(held[1]), np.imag(held[2]))
            curve = -eq.gamma * speed - stiffness * free
            motion.append((held[0] + free, held[1] + speed, held[2] + curve, free, speed))
        return motion

    def _improve(self, which: Index, time: Array, best: Array, when: Array) -> None:
        size = np.sum([np.abs(m[0]) for m in self._motion(which, time)], axis=0)
        self._record(which, time, size, best, when)

    @staticmethod
    def _record(which: Index, time: Array, size: Array, best: Array, when: Array) -> None:
        better = size > best[which]
        if better.any():
            which, time, size = which[better], time[better], size[better]
            np.maximum.at(best, which, size)
            top = size >= best[which]
            when[which[top]] = time[top]

    def _bounds(self, which: Index, at: Array, half: Array, best: Array, when: Array) -> Array:
        """Upper bounds on intervals; the values at their middles are recorded on the way."""
        eq = _take(self.eq, which)
        start = at - half
        size, top = np.zeros(which.size), np.zeros(which.size)
        before, after, bend = np.zeros(which.size), np.zeros(which.size), np.zeros(which.size)
        omega = self.omega[which]
        growth = np.exp(np.minimum(eq.gamma * half, _EXPONENT_LIMIT))
        with np.errstate(all="ignore"):
            slow = np.exp(-eq.slow * start)
            fast = np.exp(-eq.fast * start)
        for part, (value, slope, _, free, speed) in zip(
            self.parts, self._motion(which, at), strict=True
        ):
            magnitude = np.abs(value)
            size += magnitude
            energy = np.hypot(np.abs(free), np.abs(speed) / eq.natural) * growth
            energy = np.minimum(energy, part.energy[which])
            curvature = eq.natural * (eq.gamma + eq.natural) * energy
            reach = energy
            with np.errstate(all="ignore"):
                first, second = np.abs(part.first[which]), np.abs(part.second[which])
                two = first * slow + second * fast
                bent = first * slow * eq.slow**2 + second * fast * eq.fast**2
                over = ~eq.underdamped
                reach = np.where(over, np.fmin(reach, two), reach)
                curvature = np.where(over, np.fmin(curvature, bent), curvature)
            curvature = curvature + omega * omega * part.amplitude[which]
            before += np.abs(value - half * slope)
            after += np.abs(value + half * slope)
            bend += curvature
            top += np.fmin(part.amplitude[which] + reach, self._beat(part, eq, which, at, half))
        self._record(which, at, size, best, when)
        # the parts' slopes cancel at the top of their sum, so their lines are taken together
        return np.fmin(top, np.maximum(before, after) + 0.5 * half * half * bend)

    def _beat(self, part: _Part, eq: Equation, which: Index, at: Array, half: Array) -> Array:
        """Bound for a ringing loop: |S + A exp((s1 - j omega) t)| turns slowly near resonance."""
        with np.errstate(all="ignore"):
            gap_rate = -eq.damping + 1j * (eq.root[0] - self.omega[which])
            first: Any = part.first[which]
            together: Any
            if self.projected:
                # a real free part is twice the real part of its first exponential
                together, apart = 2j * first, np.zeros(which.size)
            else:
                together = first
                apart = np.abs(part.second[which]) * np.exp(-eq.damping * (at - half))
            drift = together * np.exp(gap_rate * at)
            spread = np.expm1(np.minimum(np.abs(gap_rate) * half, _EXPONENT_LIMIT))
            bound = np.abs(part.steady[which] + drift) + np.abs(drift) * spread + apart
            return np.where(eq.underdamped, bound, np.inf)

    def _polish(self, best: Array, when: Array) -> None:
        """Newton's method on the magnitude's slope, kept only where it raises the value."""
        for _ in range(6):
            which = np.flatnonzero(np.isfinite(when) & (when > 0))
            if not which.size:
                return
            time = when[which]
            slope, bend = np.zeros(which.size), np.zeros(which.size)
            with np.errstate(all="ignore"):
                for value, speed, curve, _, _ in self._motion(which, time):
                    size = np.abs(value)
                    along = np.where(size > 0, np.real(np.conj(value) * speed) / size, 0.0)
                    turn = np.abs(speed) ** 2 + np.real(np.conj(value) * curve)
                    slope += along
                    bend += np.where(size > 0, (turn - along**2) / size, 0.0)
                step = -slope / bend
            good = np.isfinite(step) & (bend < 0) & (time + step > 0)
            which, time = which[good], (time + step)[good]
            size = np.sum([np.abs(m[0]) for m in self._motion(which, time)], axis=0)
            # the value is flat to rounding around the top; the time still gains digits
            keep = size >= best[which] * (1 - 1e-15)
            when[which[keep]] = time[keep]
            best[which[keep]] = np.maximum(best[which[keep]], size[keep])

    def angles(self, time: Array) -> Array:
        """Closing angle at which the peak occurs, from 0 to 2 pi; half a turn is immaterial
        from rest [rad]."""
        at = np.where(np.isfinite(time), time, 0.0)
        motion = self._motion(np.arange(time.size), at)
        rotating = np.where(np.isfinite(time), motion[0][0], self.parts[0].steady)
        against = np.where(np.real(motion[1][0]) < 0, -np.pi / 2, np.pi / 2)
        angle: Array = np.mod(against - np.angle(rotating), 2 * np.pi)
        return angle
