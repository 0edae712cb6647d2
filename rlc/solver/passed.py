"""What passes: the integral of the squared current, which heats fuses, contacts and parts."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.driven import driven_from_rest
from rlc.solver.equation import Equation, angular, kernels, phase
from rlc.solver.shapes import TIME_CONSTANTS, Piecewise, Surge
from rlc.solver.source import ANY_ANGLE, Window
from rlc.solver.transient import settled
from rlc.solver.waveforms import states

Array = NDArray[np.float64]

_NODES, _FEW_NODES = 16, 4
_ANGLES, _NEWTON_STEPS = 256, 4
# Half a cycle of the fastest motion to a panel of the integral; so many panels at a time.
_PANELS_AT_ONCE = 4096
_ITERATIONS = 60
_SECTIONS, _SECTIONINGS = 64, 8


def total_let_through(case: Case) -> Array:
    r"""Integral of i^2 over all time; from a constant source (C e^2 + L i^2)/(2R).

    All energy that the loop loses passes through its resistance: e is the capacitor's
    distance from its final voltage at closing, i the initial current. What a source of another
    course leaves behind at its end passes in the same way.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Infinite where a steady current remains (a sine, a load, a train of pulses) or nothing
        is lost [A^2 s].

    Notes
    -----
    Energy balance of a series loop: any text on them, for instance OpenStax, University Physics
    vol. 2, section 14.6.
    """
    if case.polarity_open:
        return np.maximum(*(total_let_through(each) for each in case.polarities()))
    loop, shape = case.loop, case.source.shape
    voltage, current = case.capacitor_voltage, case.initial_current
    before = np.zeros(case.shape)
    end = shape.gone if shape is not None else 0.0
    if 0 < end < np.inf:
        before = let_through(case, end)
        if case.lines is not None:
            voltage, current = case.last_knot.states
        else:
            _, voltage, current = (part[..., 0] for part in states(case, np.array([end]), 0.0))
    distance = voltage - case.source.amplitude
    stored = loop.capacitance * distance**2 + loop.total_inductance * current**2
    with np.errstate(divide="ignore", invalid="ignore"):
        total = before + stored / (2 * loop.total_resistance)
    still = (loop.load_conductance == 0) | (case.source.amplitude == 0)
    ends = still & (not case.source.alternating) & (not case.repeats)
    if np.any(ends & (loop.load_conductance > 0)):
        # the load takes its part of the energy
        return let_through(case, end + TIME_CONSTANTS / case.equation.slowest)
    return np.where(stored + before == 0, 0.0, np.where(ends, total, np.inf))


def let_through(case: Case, until: Any) -> Array:
    r"""Integral of i^2 from closing to a given time.

    The current is linear in z = (v_C, i, source in phase, source in quadrature), so the
    integral is z' P z. P over a short span is a 16-point Gauss-Legendre sum; then
    P(2h) = P(h) + E(h)' P(h) E(h) doubles the span with exact propagators E. All terms are
    sums of squares: nothing cancels, at any damping or resonance.

    Parameters
    ----------
    case : Case
        One switch-on or a batch. Where angle or polarity are open, those that let through most;
        with harmonics the angle of the largest current.
    until : array_like
        End of the integral, zero or more; broadcasts against the batch [s].

    Returns
    -------
    Array
        With the shape of batch and `until` together, zero or more [A^2 s].

    Raises
    ------
    InputError
        If a time is below zero or not finite.

    References
    ----------
    .. [1] C. F. Van Loan, "Computing integrals involving the matrix exponential", IEEE
       Transactions on Automatic Control 23 (1978) 395-404 (from memory).
    """
    until = np.asarray(until, dtype=np.float64)
    if not np.all((until >= 0) & np.isfinite(until)):
        raise InputError("until", until.tolist(), "must be zero or more, and finite")
    if case.polarity_open:
        return np.maximum(*(let_through(each, until) for each in case.polarities()))
    shape = np.broadcast_shapes(case.shape, until.shape)
    if case.source.kind not in ("dc", "sine"):
        return _by_quadrature(case.closed_for("current"), np.broadcast_to(until, shape))
    eq, frequency = case.equation, np.broadcast_to(case.source.frequency, shape)
    until = np.broadcast_to(until, shape)
    turns = until * np.maximum(eq.quickest, angular(frequency)[0])
    doublings = max(0, int(np.ceil(np.log2(np.max(turns, initial=1.0)))))
    span = until / 2.0**doublings
    columns = case.equation.column()
    # Not at module level: the nodes cost more time than a whole steady state.
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    parts = np.concatenate([(nodes + 1) / 2, 2.0 ** np.arange(doublings)])
    times = span[..., np.newaxis] * parts
    row, step = _moved(columns, frequency[..., np.newaxis], times)
    row = row[..., :_NODES, :]
    gram = np.einsum("...ni,...nj,n->...ij", row, row, weights)
    gram = gram * span[..., np.newaxis, np.newaxis] / 2
    for k in range(_NODES, _NODES + doublings):
        ahead = step[..., k, :, :]
        gram = gram + np.swapaxes(ahead, -1, -2) @ gram @ ahead
    amplitude = np.broadcast_to(case.source.amplitude, shape)
    rest = np.zeros(shape)
    states = np.stack(
        [case.capacitor_voltage + rest, case.initial_current + rest, rest, rest], axis=-1
    )
    # In the closing angle the integral is a constant and waves of one and two turns.
    own = np.einsum("...i,...ij,...j->...", states, gram, states)
    once = 2 * amplitude[..., np.newaxis] * np.einsum("...i,...ij->...j", states, gram)[..., 2:]
    in_phase, quadrature = (gram[..., k, k] * amplitude**2 for k in (2, 3))
    mixed = gram[..., 2, 3] * amplitude**2
    waves = (once[..., 1], once[..., 0], (quadrature - in_phase) / 2, mixed)
    level = own + (in_phase + quadrature) / 2
    angle, window = case.source.closing_angle, case.source.window or ANY_ANGLE
    wave = _highest_wave(waves, window) if angle is None else _wave(waves, angle)
    passed: Array = level + wave
    return np.maximum(passed, 0.0)


def _wave(waves: tuple[Array, ...], angle: Array) -> Any:
    cosine, sine, double_cosine, double_sine = waves
    return (
        cosine * np.cos(angle)
        + sine * np.sin(angle)
        + double_cosine * np.cos(2 * angle)
        + double_sine * np.sin(2 * angle)
    )


def _highest_wave(waves: tuple[Array, ...], window: Window) -> Any:
    """Largest value over a window of angles: on a grid, then by Newton's method."""
    columns = tuple(np.asarray(wave)[..., np.newaxis] for wave in waves)
    grid = np.linspace(window.low, window.high, _ANGLES + 1)
    best = grid[np.argmax(_wave(columns, grid), axis=-1)]
    apart = grid[1] - grid[0]
    cosine, sine, double_cosine, double_sine = waves
    for _ in range(_NEWTON_STEPS):
        slope = _wave((sine, -cosine, 2 * double_sine, -2 * double_cosine), best)
        bend = -_wave((cosine, sine, 4 * double_cosine, 4 * double_sine), best)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.where(bend < 0, slope / bend, 0.0)
        best = np.clip(best - np.clip(step, -apart, apart), window.low, window.high)
    return np.maximum(_wave(waves, best), np.max(_wave(columns, grid), axis=-1))


def _by_quadrature(case: Case, until: Array) -> Array:
    """Loop by loop; all moments of one loop at once."""
    if case.repeats:
        # beyond the end of the train whole periods of the steady one, and a part of it
        more = np.maximum(until - case.course_end, 0.0)
        periods = np.floor(more / case.repeats)
        start = np.broadcast_to(case.course_end - case.repeats, until.shape)
        part = start + (more - periods * case.repeats)
        later = _integrated(case, part) - _integrated(case, start)
        whole = np.where(periods > 0, periods * _last_period(case), 0.0)
        return _integrated(case, np.minimum(until, case.course_end)) + whole + later
    return _integrated(case, until)


def _integrated(case: Case, until: Array) -> Array:
    if not case.shape:
        return running_let_through(case, until.ravel()).reshape(until.shape)
    return np.array(
        [
            running_let_through(case.one(index), until[(Ellipsis, *index)].reshape(1))[0]
            for index in np.ndindex(case.shape)
        ]
    ).reshape(until.shape)


def let_through_time(case: Case, fraction: Any) -> Array:
    """When the running let-through has come to a share of the whole.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    fraction : array_like
        Above zero to 1 [1].

    Returns
    -------
    Array
        Of the let-through over all time, else over the source's first period; not a number
        where that is zero or infinite, or the share is above 1 [s].
    """
    whole = whole_let_through(case)
    wanted = np.asarray(fraction) * whole
    end = 1.0 / case.source.frequency if case.source.alternating else settled(case)
    end = np.broadcast_to(end, wanted.shape)
    with np.errstate(invalid="ignore"):
        known = np.isfinite(wanted) & (wanted > 0) & (np.asarray(fraction) <= 1)
    known &= np.isfinite(end) & (not case.repeats)
    if case.source.kind in ("dc", "sine"):
        return np.where(known, _bracketed(case, wanted, np.where(known, end, 0.0)), np.nan)
    closed, found = case.closed_for("current"), np.full(wanted.shape, np.nan)
    for index in np.ndindex(wanted.shape):
        if not known[index]:
            continue
        one = closed.one(index) if closed.shape else closed
        found[index] = _section(one, float(wanted[index]), float(end[index]))
    return found


def _bracketed(case: Case, wanted: Array, end: Array) -> Array:
    """When the running let-through comes to a value, by false position (Illinois) within a
    bracket, all loops at once."""
    low, high = np.zeros(wanted.shape), end
    below, above = -wanted, let_through(case, end) - wanted
    for _ in range(_ITERATIONS):
        with np.errstate(all="ignore"):
            cut = (low * above - high * below) / (above - below)
        cut = np.where((cut > low) & (cut < high), cut, (low + high) / 2)
        value = let_through(case, cut) - wanted
        left = value < 0
        # an end that stays is given half its weight
        above = np.where(left, above / 2, value)
        below = np.where(left, value, below / 2)
        low, high = np.where(left, cut, low), np.where(left, high, cut)
        if np.all((high - low <= 4e-16 * high) | (np.abs(value) <= 1e-14 * np.abs(wanted))):
            break
    return np.where(np.abs(below) < np.abs(above), low, high)


def _section(case: Case, wanted: float, high: float) -> float:
    """The same for one loop: in which panel of the integral, then sections of that panel."""
    edges = _edges(case, high)
    place = int(np.searchsorted(np.cumsum(_panels(case, edges)), wanted)) + 1
    before = float(np.sum(_panels(case, edges[:place])))
    low, high = float(edges[place - 1]), float(edges[min(place, edges.size - 1)])
    for _ in range(_SECTIONINGS):
        cuts = np.linspace(low, high, _SECTIONS + 1)
        passed = before + np.cumsum(_panels(case, cuts))
        cut = min(int(np.searchsorted(passed, wanted)), _SECTIONS - 1)
        before = float(passed[cut - 1]) if cut else before
        low, high = float(cuts[cut]), float(cuts[cut + 1])
    return high


def whole_let_through(case: Case) -> Array:
    """Let-through over all time, or over a period where the source never ends.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Of an alternating source over its first period, of a train of pulses that is repeated
        until steady over one of its last; else as :func:`total_let_through` [A^2 s].
    """
    if case.source.alternating:
        return let_through(case, 1.0 / case.source.frequency)
    if case.repeats:
        return _last_period(case)
    return total_let_through(case)


def _last_period(case: Case) -> Array:
    """Of a train that has become steady: one more pulse, from the states before the last one.

    Loops of a batch have become steady by the end of the batch, not each at an end of its own.
    """
    closed = case.closed_for("current")
    shape = closed.source.shape
    assert isinstance(shape, Piecewise)
    begin = np.array([closed.course_end - closed.repeats])
    _, voltage, current = (part[..., 0] for part in states(closed, begin, 0.0))
    once = replace(closed.source, shape=shape.repeated(1))
    return let_through(Case(closed.loop, once, voltage, current), closed.repeats)


def _moved(eq: Equation, frequency: Array, time: Array) -> tuple[Array, Array]:
    """Row of the current in z, and the propagator of z, at each time."""
    kernel = kernels(eq, time)
    voltage, current = driven_from_rest(eq, frequency, time)
    cosine, sine = phase(angular(frequency), time)
    zero = np.zeros_like(kernel.s)
    rows = (
        (kernel.capacitor, eq.matrix[1] * kernel.s, voltage.real, voltage.imag),
        (eq.matrix[2] * kernel.s, kernel.current, current.real, current.imag),
        (zero, zero, cosine, sine),
        (zero, zero, -sine, cosine),
    )
    stacked = [np.stack(np.broadcast_arrays(*row, zero)[:4], axis=-1) for row in rows]
    return stacked[1], np.stack(stacked, axis=-2)


def running_let_through(case: Case, until: Array) -> Array:
    """Integral of i^2 up to each of several moments, by quadrature of the exact current.

    Sixteen-point Gauss-Legendre sums over half cycles of the fastest motion, cut at the knots
    of the source and ever finer before a fast decay.

    Parameters
    ----------
    case : Case
        One loop, shape (), with one closing angle and polarity.
    until : Array
        Shape (n,), zero or more [s].

    Returns
    -------
    Array
        Shape (n,), rising with `until` [A^2 s].
    """
    if not until.size:
        return until
    edges = np.union1d(_edges(case, float(np.max(until))), until)
    passed = np.append(0.0, np.cumsum(_panels(case, edges)))
    found: Array = passed[np.searchsorted(edges, until)]
    return found


def _panels(case: Case, edges: Array) -> Array:
    """Integral of i^2 over each panel between neighbouring edges [A^2 s]."""
    count = edges.size - 1
    if count < 1:
        return np.zeros(0)
    # over a tenth of a radian of the fastest motion four nodes leave 1e-16
    short = float(np.max(np.diff(edges))) * _fastest(case) < 0.1
    nodes, weights = np.polynomial.legendre.leggauss(_FEW_NODES if short else _NODES)
    total = np.zeros(count)
    for first in range(0, count, _PANELS_AT_ONCE):
        part = edges[first : first + _PANELS_AT_ONCE + 1]
        half, middle = np.diff(part) / 2, (part[1:] + part[:-1]) / 2
        times = middle[:, np.newaxis] + half[:, np.newaxis] * nodes
        current = case.waveforms(times.ravel()).current.reshape(times.shape)
        total[first : first + half.size] = half * (current**2 @ weights)
    return total


def _fastest(case: Case) -> float:
    """The largest rate at which the loop or its source moves [1/s]."""
    source, shape = case.source, case.source.shape
    driven = 2 * np.pi * max(o.number for o in source.every_order) * float(source.frequency)
    rate = shape.fast if isinstance(shape, Surge) else driven
    return max(float(case.equation.quickest), rate)


def _edges(case: Case, end: float) -> Array:
    """Ends of the panels from closing on."""
    eq, shape = case.equation, case.source.shape
    knots = case.lines.start if case.lines is not None else np.zeros(1)
    rate, quick = float(eq.natural), float(eq.quickest)
    rate = max([rate, *(2 * np.pi * o.number * float(case.source.frequency)
                        for o in case.source.every_order)])  # fmt: skip
    last = knots[-1]
    if isinstance(shape, Surge):
        quick, last = max(quick, shape.fast), shape.gone
    with np.errstate(divide="ignore"):
        tail = float(last + TIME_CONSTANTS / eq.slowest)
    until = end if case.source.alternating else min(end, tail)
    steps = np.arange(0.0, until, np.pi / rate)
    # what decays faster than a half cycle is met in steps that double
    fine = np.geomspace(0.1 / quick, max(1.0 / rate, 0.2 / quick), 2 * _NODES)
    stiff = quick * np.pi / rate > 4 and knots.size < _PANELS_AT_ONCE
    near = (knots[:, np.newaxis] + fine).ravel() if stiff else fine[:0]
    edges = np.concatenate([[0.0], steps, knots, near, [until]])
    return np.unique(edges[edges <= until])
