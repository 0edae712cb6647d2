"""What the switch-on leaves behind: settling, overshoot, let-through, damping in time."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver.case import Case
from rlc.solver.driven import driven_from_rest
from rlc.solver.equation import Equation, angular, equation_of, kernels, phase
from rlc.solver.peaks import first_extremum
from rlc.solver.search import PROVED_GAP

Array = NDArray[np.float64]

_NODES, _ITERATIONS = 16, 100
_ANGLES, _NEWTON_STEPS = 256, 4


def capacitor_transient(case: Case) -> tuple[Array, Array, Array]:
    """Value and slope at closing of the capacitor voltage's free part, and what it settles on.

    The last is the steady amplitude of a sine, or the step from the voltage at closing to the
    final one, whose size the free part has. Where the closing angle is the worst one, it is that
    of the largest capacitor voltage.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    value, slope, settles_on : Array
        Free part at closing, its slope, and the size of what it is compared with; they broadcast
        against the batch [V], [V/s], [V].
    """
    rotating, fixed = case.signals("capacitor")
    turn = np.exp(1j * case.closing_angle_for("capacitor"))
    value = np.imag(turn * rotating.value) + np.real(fixed.value)
    slope = np.imag(turn * rotating.slope) + np.real(fixed.slope)
    return value, slope, np.abs(value if case.source.kind == "dc" else rotating.steady)


def settling_time(case: Case, band: float | Array = 0.02) -> Array:
    """Time after which the capacitor voltage stays within a band of its steady state.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.
    band : float or Array
        Half width of the band, as a share of the steady amplitude; for a constant source of the
        step from the voltage at closing to the final one; more than zero [1].

    Returns
    -------
    Array
        The last moment at which the free part is at or outside the band: infinite without
        losses, zero if it is never outside, nan if there is no step, or if the steady state is
        zero or unbounded [s].

    References
    ----------
    .. [1] K. Ogata, Modern Control Engineering (from memory), for the band of a step response.
    """
    value, slope, steady = np.broadcast_arrays(*capacitor_transient(case))
    with np.errstate(invalid="ignore"):
        settled = last_time_outside(case.equation, value, slope, band * steady)
    return np.where((steady > 0) & np.isfinite(steady), settled, np.nan)


def last_time_outside(eq: Equation, value: Array, slope: Array, band: Array) -> Array:
    """Last time at which free motion of given value and slope at closing is outside a band.

    The extrema of free motion form a lattice (underdamped: half a ringing period apart, each
    smaller by the same factor), which brackets the only crossing; bisection and Newton's
    method close the bracket to rounding.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    value, slope : Array
        Of the free motion at closing [V or A], [V/s or A/s].
    band : Array
        Half width of the band, more than zero [V or A].

    Returns
    -------
    Array
        Zero if it is never outside, infinite without losses [s].
    """
    with np.errstate(all="ignore"):
        turn = first_extremum(eq, value, slope)
        turn = np.where(np.isfinite(turn), turn, 0.0)
        at_turn = np.abs(_free(eq, value, slope, turn)[0])
        half_period = np.pi / eq.root[0]
        swings = np.floor(np.log(at_turn / band) / (eq.damping * half_period))
        last = turn + np.maximum(swings, 0) * half_period
        outside = at_turn >= band
        low = np.where(outside, np.where(eq.underdamped, last, turn), 0.0)
        high = np.where(eq.underdamped, last + half_period, 2 * turn + 1 / eq.slow)
    # rounding of the logarithm may put the lattice one swing too far or too near
    beyond = eq.underdamped & outside & (np.abs(_free(eq, value, slope, low)[0]) < band)
    low = np.where(beyond, np.maximum(low - half_period, turn), low)
    for _ in range(_ITERATIONS):
        still = ~eq.underdamped & outside & (np.abs(_free(eq, value, slope, high)[0]) > band)
        if not still.any():
            break
        high = np.where(still, 2 * high, high)
    high = np.where(outside, high, turn)
    never = (np.abs(value) < band) & ~outside
    time = _cross(eq, value, slope, band, low, high)
    time = np.where(never, 0.0, time)
    return np.where((eq.damping == 0) & ~never, np.inf, time)


def _free(eq: Equation, value: Array, slope: Array, time: Array) -> tuple[Array, Array]:
    kernel = kernels(eq, time)
    rest = kernel.regular - eq.gamma * kernel.s
    return (
        value * kernel.regular + slope * kernel.s,
        slope * rest - eq.natural_squared[0] * value * kernel.s,
    )


def _cross(eq: Equation, value: Array, slope: Array, band: Array, low: Array, high: Array) -> Array:
    sign = np.sign(_free(eq, value, slope, low)[0])
    time = (low + high) / 2
    for _ in range(_ITERATIONS):
        motion, speed = _free(eq, value, slope, time)
        excess = sign * motion - band
        low, high = np.where(excess >= 0, time, low), np.where(excess >= 0, high, time)
        with np.errstate(all="ignore"):
            step = time - excess / (sign * speed)
        inside = (step > low) & (step < high)
        following = np.where(inside, step, (low + high) / 2)
        if np.all(np.abs(following - time) <= 4e-16 * following):
            return following
        time = following
    return time


def overshoot(case: Case) -> Array:
    """How far the capacitor voltage passes its steady state, as a share of it.

    Constant source: the largest excursion beyond the final value, over the step from the voltage
    at closing to the final one. Sine: the largest magnitude over the steady amplitude, less 1.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Zero if it never passes by more than a peak is known to; nan if there is no step [1].

    References
    ----------
    .. [1] K. Ogata, Modern Control Engineering (from memory), for the step response.
    """
    if case.source.kind == "dc":
        _, values = case.extrema("capacitor")
        start, final = values[0], values[-1]
        with np.errstate(invalid="ignore", divide="ignore"):
            beyond = np.max((values - final) / (final - start), axis=0)
        beyond = np.where(final == start, np.nan, beyond)
    else:
        steady = np.abs(case.source.amplitude * case.steady.capacitor)
        with np.errstate(invalid="ignore", divide="ignore"):
            beyond = case.peak("capacitor").value / steady - 1
    return np.where(beyond < PROVED_GAP, 0.0, beyond)


def logarithmic_decrement(eq: Equation) -> Array:
    """Natural logarithm of the ratio of successive swings to the same side.

    Parameters
    ----------
    eq : Equation
        A batch of loops.

    Returns
    -------
    Array
        Zero without losses, infinite if nothing rings [1].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6, for the envelope of the ringing.
    """
    with np.errstate(divide="ignore"):
        ringing = np.where(eq.underdamped, eq.root[0], 0.0)
        return 2 * np.pi * eq.damping / ringing


def total_let_through(case: Case) -> Array:
    r"""Integral of i^2 over all time, (C e^2 + L i^2)/(2R).

    All energy that the loop loses passes through its resistance: e is the capacitor's
    distance from its final voltage at closing, i the initial current.

    Parameters
    ----------
    case : Case
        One switch-on or a batch.

    Returns
    -------
    Array
        Infinite where a steady current remains (a sine, a load) or nothing is lost [A^2 s].

    Notes
    -----
    Energy balance of a series loop: any text on them, for instance OpenStax, University Physics
    vol. 2, section 14.6.
    """
    loop = case.loop
    distance = case.capacitor_voltage - case.source.amplitude
    stored = loop.capacitance * distance**2 + loop.total_inductance * case.initial_current**2
    with np.errstate(divide="ignore", invalid="ignore"):
        total = stored / (2 * loop.total_resistance)
    ends = (case.source.kind == "dc") & (loop.load_conductance == 0)
    return np.where(stored == 0, 0.0, np.where(ends, total, np.inf))


def let_through(case: Case, until: Any) -> Array:
    r"""Integral of i^2 from closing to a given time.

    The current is linear in z = (v_C, i, source in phase, source in quadrature), so the
    integral is z' P z. P over a short span is a 16-point Gauss-Legendre sum; then
    P(2h) = P(h) + E(h)' P(h) E(h) doubles the span with exact propagators E. All terms are
    sums of squares: nothing cancels, at any damping or resonance.

    Parameters
    ----------
    case : Case
        One switch-on or a batch; with the worst closing angle, the one that lets through most.
    until : array_like
        End of the integral, zero or more; broadcasts against the batch [s].

    Returns
    -------
    Array
        With the shape of batch and `until` together, zero or more [A^2 s].

    References
    ----------
    .. [1] C. F. Van Loan, "Computing integrals involving the matrix exponential", IEEE
       Transactions on Automatic Control 23 (1978) 395-404 (from memory).
    """
    until = np.asarray(until, dtype=np.float64)
    shape = np.broadcast_shapes(case.shape, until.shape)
    eq, frequency = case.equation, np.broadcast_to(case.source.frequency, shape)
    until = np.broadcast_to(until, shape)
    turns = until * np.maximum(eq.quickest, angular(frequency)[0])
    doublings = max(0, int(np.ceil(np.log2(np.max(turns, initial=1.0)))))
    span = until / 2.0**doublings
    columns = equation_of(case.loop.column())
    # Not at module level: the nodes cost more time than a whole steady state.
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    times = span[..., np.newaxis] * (nodes + 1) / 2
    row = _current_row(columns, frequency[..., np.newaxis], times)
    gram = np.einsum("...ni,...nj,n->...ij", row, row, weights)
    gram = gram * span[..., np.newaxis, np.newaxis] / 2
    for k in range(doublings):
        step = _propagator(eq, frequency, span * 2.0**k)
        gram = gram + np.swapaxes(step, -1, -2) @ gram @ step
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
    angle = case.source.closing_angle
    passed: Array = level + (_wave(waves, angle) if angle is not None else _highest_wave(waves))
    return np.maximum(passed, 0.0)


def _wave(waves: tuple[Array, ...], angle: Array) -> Any:
    cosine, sine, double_cosine, double_sine = waves
    return (
        cosine * np.cos(angle)
        + sine * np.sin(angle)
        + double_cosine * np.cos(2 * angle)
        + double_sine * np.sin(2 * angle)
    )


def _highest_wave(waves: tuple[Array, ...]) -> Any:
    """Largest value over a turn: on a grid, then by Newton's method."""
    columns = tuple(np.asarray(wave)[..., np.newaxis] for wave in waves)
    grid = np.linspace(0, 2 * np.pi, _ANGLES, endpoint=False)
    best = grid[np.argmax(_wave(columns, grid), axis=-1)]
    cosine, sine, double_cosine, double_sine = waves
    for _ in range(_NEWTON_STEPS):
        slope = _wave((sine, -cosine, 2 * double_sine, -2 * double_cosine), best)
        bend = -_wave((cosine, sine, 4 * double_cosine, 4 * double_sine), best)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.where(bend < 0, slope / bend, 0.0)
        best = best - np.clip(step, -2 * np.pi / _ANGLES, 2 * np.pi / _ANGLES)
    return np.maximum(_wave(waves, best), np.max(_wave(columns, grid), axis=-1))


def _current_row(eq: Equation, frequency: Array, time: Array) -> Array:
    kernel = kernels(eq, time)
    _, driven = driven_from_rest(eq, frequency, time)
    parts = (eq.matrix[2] * kernel.s, kernel.current, driven.real, driven.imag)
    return np.stack(np.broadcast_arrays(*parts), axis=-1)


def _propagator(eq: Equation, frequency: Array, time: Array) -> Array:
    kernel = kernels(eq, time)
    voltage, _ = driven_from_rest(eq, frequency, time)
    cosine, sine = phase(angular(frequency), time)
    zero = np.zeros_like(kernel.s)
    rows = (
        (kernel.capacitor, eq.matrix[1] * kernel.s, voltage.real, voltage.imag),
        (zero, zero, cosine, sine),
        (zero, zero, -sine, cosine),
    )
    stacked = [np.stack(np.broadcast_arrays(*row, zero)[:4], axis=-1) for row in rows]
    stacked.insert(1, _current_row(eq, frequency, time))
    return np.stack(stacked, axis=-2)
