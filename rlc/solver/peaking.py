"""From a switch-on to the rows that are searched for its peaks, and back."""

from __future__ import annotations

from operator import itemgetter
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver.course_peaks import course_peaks
from rlc.solver.equation import Equation, angular, equation_of, free_response, kernels
from rlc.solver.loop import Weights
from rlc.solver.motion import Index, Motion, Term
from rlc.solver.peaks import Peak, Signal, constant_source_peak
from rlc.solver.rows import Rows
from rlc.solver.search import Best, known_before, search
from rlc.solver.shapes import Surge
from rlc.solver.source import ANY_ANGLE, Window
from rlc.solver.surging import surge_from_rest

if TYPE_CHECKING:
    from rlc.solver.case import Case

Array = NDArray[np.float64]

_QUARTER_TURN = np.pi / 2
# Nearer to a root of the loop a rate of the surge is moved by so much in the search: partial
# fractions would not know its exponential. The gap that is then stated is ten times as much.
_APART, _MOVED, _MOVED_GAP = 1e-6, 1e-3, 1e-2
_ROUNDING = 8 * np.finfo(np.float64).eps


def find_peaks(case: Case, elements: tuple[str, ...]) -> dict[str, Peak]:
    """Largest magnitudes over all time, of several signals at once.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    elements : tuple of str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    dict of str to Peak
        Each with the batch's shape.
    """
    source = case.source
    # from rest but for the charge the other polarity is the other half of the turn
    alike = source.worst_angle and not source.orders and not np.any(case.initial_current)
    if case.polarity_open and not (alike and (source.window or ANY_ANGLE).whole_turn):
        first, second = (find_peaks(each, elements) for each in case.polarities())
        return {name: _worse(first[name], second[name]) for name in elements}
    if source.shape is not None:
        if isinstance(source.shape, Surge):
            return {element: _surge_peaks(case, element) for element in elements}
        return course_peaks(case, elements)
    if not source.alternating:
        return {
            element: constant_source_peak(case.equation, case.constant_signal(element))
            for element in elements
        }
    return _alternating_peaks(case, elements)


def steady_peak(case: Case, element: str) -> Array:
    """Largest magnitude of a signal in steady state, or its final one.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    element : str
        As for :meth:`rlc.solver.loop.Loop.weights`.

    Returns
    -------
    Array
        With the batch's shape; infinite at an undamped resonance, nan for a train of pulses
        [V, A or A/s].
    """
    if case.repeats:
        return np.full(case.shape, np.nan)
    if not case.source.orders:
        return np.broadcast_to(np.abs(case.signals(element)[0].steady), case.shape)
    return _waves(case, (element,)).steady_top()[0].reshape(case.shape)


def _worse(one: Peak, other: Peak) -> Peak:
    """The larger of two peaks, loop by loop; the second one is that of the other polarity."""
    second = other.value > one.value
    value, time, gap, angle = (
        np.where(second, b, a)
        for a, b in (
            (one.value, other.value),
            (one.time, other.time),
            (one.gap, other.gap),
            (one.angle, other.angle),
        )
    )
    return Peak(value, time, gap, angle, np.where(second, -1.0, 1.0))


def _alternating_peaks(case: Case, elements: tuple[str, ...]) -> dict[str, Peak]:
    """All signals and loops in one search, a row each."""
    shape = (len(elements), *case.shape)
    best = _waves(case, elements).highest()
    columns = (part.reshape(shape) for part in (best.value, best.time, best.gap, best.angle))
    return {name: Peak(*each) for name, *each in zip(elements, *columns, strict=True)}


def _waves(case: Case, elements: tuple[str, ...]) -> _Waves:
    shape = (len(elements), *case.shape)
    source = case.source

    def flat(value: Any) -> Any:
        return np.broadcast_to(value, shape).reshape(-1)

    def stacked(signals: Any) -> Signal:
        together = (
            np.stack([np.broadcast_to(part, case.shape) for part in parts])
            for parts in zip(*signals, strict=True)
        )
        return Signal(*(flat(part) for part in together))

    return _Waves(
        equation_of(case.loop.map(flat)),
        flat(angular(source.frequency)[0]),
        stacked([case.fixed_signal(element) for element in elements]),
        [
            stacked(each)
            for each in zip(*(case.rotating_signals(name) for name in elements), strict=True)
        ],
        tuple(order.number for order in source.every_order),
        None if source.closing_angle is None else flat(source.closing_angle),
        source.window or ANY_ANGLE,
    )


class _Waves(NamedTuple):
    """Rows under a sine and its harmonics: what the search is built from."""

    eq: Equation
    omega: Array
    fixed: Signal
    waves: list[Signal]
    numbers: tuple[int, ...]
    angle: Array | None
    window: Window

    def highest(self) -> Best:
        """Search the rows that decay; those that never do have a largest value of their own."""
        top, gap = self.steady_top()
        best = known_before(top)
        best.gap = np.where(np.isfinite(top), gap, 0.0)
        if not self._whole_turn:
            # where a peak is only approached any possible angle will do
            best.angle += (self.window.low + self.window.high) / 2
        undamped = self.eq.damping == 0
        lossless, lossy = np.flatnonzero(undamped), np.flatnonzero(~undamped)
        if lossless.size:
            # free motion comes into step with the source arbitrarily closely
            free = known_before(np.zeros(top.size))
            bounded = lossless[np.isfinite(top[lossless])]
            period = 2 * np.pi / self.eq.natural[bounded]
            search(self._rows(bounded, period, top, held=False), free)
            best.value[bounded] += free.value[bounded]
            best.angle[bounded] = free.angle[bounded]
            best.gap[bounded] = np.maximum(best.gap, free.gap)[bounded]
        if lossy.size:
            forever = np.full(lossy.size, np.inf)
            search(self._rows(lossy, forever, top * (1 + gap)), best)
        if self.angle is not None:
            best.angle = self.angle
        elif not self._turned:
            best.angle = self._worst_angles(best)
        elif self._whole_turn:
            best.angle = np.mod(best.angle, ANY_ANGLE.high)
        else:
            best.angle = np.clip(best.angle, self.window.low, self.window.high)
        return best

    @property
    def _turned(self) -> bool:
        """Whether the angle's effect is no single wave, or the angle may not be any."""
        return self.angle is None and (len(self.waves) > 1 or not self._whole_turn)

    @property
    def _whole_turn(self) -> bool:
        return self.window.whole_turn

    def steady_top(self) -> tuple[Array, Array]:
        """Largest magnitude of the steady state, the same at any closing angle, and its gap."""
        sizes = [np.abs(each.steady) for each in self.waves]
        total: Array = np.sum(sizes, axis=0)
        which = np.flatnonzero(np.isfinite(total))
        if len(sizes) == 1 or not which.size:
            return total, np.zeros(total.shape)
        eq, still = self.eq.map(itemgetter(which)), Signal(0.0, 0.0, 0.0)
        steady = Motion(eq, still, self._terms(which, 1.0), real=True)
        best = known_before(np.zeros(total.size))
        slowest, fastest = self.omega[which], max(self.numbers) * self.omega[which]
        period = 2 * np.pi / slowest
        search(Rows(eq, (steady,), which, 0.0 * period, period, fastest), best)
        total[which] = best.value[which]
        return total, best.gap

    def _terms(self, which: Index, turn: Any) -> list[Term]:
        """The steady waves as real parts, each turned by its share of the closing angle."""
        return [
            Term(-1j * turn**k * each.steady[which], 1j * k * self.omega[which])
            for k, each in zip(self.numbers, self.waves, strict=True)
        ]

    def _rows(self, which: Index, duration: Array, top: Array, held: bool = True) -> Rows:
        eq = self.eq.map(itemgetter(which))
        fixed = Signal(*(np.real(np.broadcast_to(each, top.shape))[which] for each in self.fixed))
        parts: list[Motion] = []
        turns: tuple[int, ...] = ()
        limits, frame = None, None
        if self.angle is not None:
            turn = np.exp(1j * self.angle[which])
            value, slope = (
                np.real(start)
                + np.sum(
                    [
                        np.imag(turn**k * getattr(each, name)[which])
                        for k, each in zip(self.numbers, self.waves, strict=True)
                    ],
                    axis=0,
                )
                for name, start in (("value", fixed.value), ("slope", fixed.slope))
            )
            terms = self._terms(which, turn) if held else []
            free = Signal(0.0, value, slope)
            parts = [Motion(eq, free, terms, real=True)]
        else:
            for k, each in zip(self.numbers, self.waves, strict=True):
                free = Signal(0.0, each.value[which], each.slope[which])
                term = Term(each.steady[which], 1j * k * self.omega[which])
                parts.append(Motion(eq, free, [term] if held else [], real=False))
            parts.append(Motion(eq, fixed, real=True))
            if self._turned:
                zero = np.zeros(which.size)
                turns = (*self.numbers, 0)
                limits = (self.window.low + zero, self.window.high + zero)
                frame = self.omega[which] if held else None
        quickest = np.maximum(eq.natural, max(self.numbers) * self.omega[which] * held)
        start = np.zeros(which.size)
        held_top = top[which] if held else None
        return Rows(
            eq, tuple(parts), which, start, duration, quickest, held_top, turns, limits, frame
        )

    def _worst_angles(self, best: Best) -> Array:
        """Closing angle at which the rotating part stands across, on the initial states' side."""
        every = np.arange(best.value.size)
        reached = np.isfinite(best.time)
        at = np.where(reached, best.time, 0.0)
        rows = self._rows(every, at, best.value)
        kernel = kernels(self.eq, at)
        moved = [part.at(self.eq, kernel, every, at) for part in rows.parts]
        rotating = np.where(reached, moved[0].value, self.waves[0].steady)
        against = np.where(np.real(moved[1].value) < 0, -_QUARTER_TURN, _QUARTER_TURN)
        angle: Array = np.mod(against - np.angle(rotating), 2 * np.pi)
        return angle


def _surge_peaks(case: Case, element: str) -> Peak:
    """Under two exponentials, by partial fractions."""
    surge = case.source.shape
    assert isinstance(surge, Surge)
    batch, w = case.shape, case.loop.weights(element)
    eq = equation_of(case.loop.map(lambda part: np.broadcast_to(part, batch).ravel()))

    def flat(value: Any) -> Array:
        return np.broadcast_to(value, batch).ravel()

    weight_v, weight_i, weight_s = (flat(part) for part in w)
    a, b, c, d = eq.matrix
    voltage, current = flat(case.capacitor_voltage), flat(case.initial_current)
    moved, terms = np.zeros(voltage.size, bool), []
    for size, rate in ((surge.scale, surge.slow), (-surge.scale, surge.fast)):
        pace = np.full(voltage.size, rate)
        near = _below(eq, pace) < _APART * (eq.natural_squared[0] + pace * pace)
        moved |= near
        pace = np.where(near, pace * (1 + _MOVED), pace)
        below = _below(eq, pace, signed=True)
        held_v = size * eq.matrix[1] * eq.source_rate / below
        held_i = size * (-pace - a) * eq.source_rate / below
        terms.append(Term(weight_v * held_v + weight_i * held_i + weight_s * size, -pace))
        voltage, current = voltage - held_v, current - held_i
    free = Signal(
        0.0,
        weight_v * voltage + weight_i * current,
        weight_v * (a * voltage + b * current) + weight_i * (c * voltage + d * current),
    )
    # without losses the ringing stays when the surge has gone
    motion = Motion(eq, free, terms, real=True)
    best = known_before(np.where(eq.damping == 0, motion.energy, 0.0))
    every = np.arange(voltage.size)
    quickest = np.maximum(eq.natural, surge.fast)
    forever = np.full(every.size, np.inf)
    start = flat(case.capacitor_voltage), flat(case.initial_current)
    with np.errstate(divide="ignore", invalid="ignore"):
        search(Rows(eq, (motion,), every, np.zeros(every.size), forever, quickest), best)
        _as_reached(best, eq, surge, start, w)
        rounding = _ROUNDING * (motion.amplitude + motion.energy) / best.value
    best.gap = np.maximum(best.gap, np.where(moved, _MOVED_GAP, rounding))
    value, time, gap = (part.reshape(batch) for part in (best.value, best.time, best.gap))
    return Peak(value, time, gap, np.full(batch, _QUARTER_TURN))


def _below(eq: Equation, pace: Array, signed: bool = False) -> Array:
    """p^2 + gamma p + omega_0^2 at p = -pace, from its roots: the sum would cancel near one."""
    away = eq.damping - pace
    product = np.where(
        eq.underdamped,
        away * away + eq.root[0] ** 2,
        (eq.slow - pace) * (eq.fast - pace),
    )
    return product if signed else np.abs(product)


def _as_reached(
    best: Best, eq: Equation, surge: Surge, start: tuple[Array, Array], w: Weights
) -> None:
    """The values at the peaks' times from exact states, which partial fractions only near."""
    reached = np.flatnonzero(np.isfinite(best.time) & (best.time > 0))
    time, some = best.time[reached], eq.map(itemgetter(reached))
    driven = surge_from_rest(some, surge, time)
    free = free_response(some, kernels(some, time), *(part[reached] for part in start))
    voltage, current = driven[0] + free[0], driven[1] + free[1]
    weight_v, weight_i, weight_s = (
        np.broadcast_to(part, w.current.shape).ravel()[reached] for part in w
    )
    source = surge.at(time)
    best.value[reached] = np.abs(weight_v * voltage + weight_i * current + weight_s * source)
