"""The response from rest to a sinusoid (or a constant, at zero frequency).

With D(t) the divided difference of the exponential at the two roots and j omega, the states
are v_C = (kappa/LC) D and i = (s + (j omega + G kappa/C) D)/L. Three ways to evaluate them,
each where it keeps its digits; the real part answers cos(omega t), the imaginary part
sin(omega t), and the two are formed in real arithmetic because the smaller one would drown in
the rounding of the larger.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rlc.solver import doubledouble as dd
from rlc.solver.equation import (
    Array,
    Complex,
    Equation,
    Kernels,
    angular,
    kernels,
    phase,
    steady_states,
)

_TERMS = 30
_FACTORIAL = np.cumprod(np.r_[1.0, np.arange(1.0, _TERMS + 3)])

Mask = NDArray[np.bool_]
Pick = Callable[[Any], Any]


def driven_from_rest(eq: Equation, frequency: Array, time: Array) -> tuple[Complex, Complex]:
    r"""States that a source of :math:`e^{j\omega t}` volts drives from rest.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    frequency : Array
        Source frequency, zero for a constant source [Hz].
    time : Array
        Times since closing, zero or more; broadcasts against the batch [s].

    Returns
    -------
    capacitor_voltage, current : Complex
        Real part for a cosine, imaginary part for a sine of 1 V [V], [A].

    Notes
    -----
    Worst error measured against 50-digit arithmetic, relative to the running peak, for
    quality factors 1e-4 to 1e6, up to 1e4 periods and frequency ratios 1e-4 to 1e4: below
    1e-14 (``tests/benchmarks/accuracy.py`` prints it by regime).
    """
    omega = angular(frequency)
    kernel = kernels(eq, time)
    cosine, sine = phase(omega, time)
    shape = np.broadcast_shapes(kernel.s.shape, cosine.shape)
    parts = _steady_and_transient(eq, frequency, kernel, cosine, sine)
    out = tuple(np.array(np.broadcast_to(part, shape)) for part in parts)

    def spread_out(value: Any) -> Any:
        return np.broadcast_to(value, shape)

    early: Mask = spread_out(np.maximum(eq.quickest, omega[0]) * time < 2.0)
    ringing = np.where(eq.underdamped, eq.root[0], 0.0), np.where(eq.underdamped, eq.root[1], 0.0)
    detuning = dd.subtract(omega, ringing)[0]
    close = eq.underdamped & (np.hypot(eq.damping, detuning) < 0.5 * eq.natural)
    creeping = ~eq.underdamped & (np.maximum(eq.slow, omega[0]) * time < 1.0)
    near: Mask = spread_out(close | creeping) & ~early
    for mask, evaluate in ((near, _divided_difference), (early, _power_series)):
        if not mask.any():
            continue

        def pick(value: Any, mask: Mask = mask) -> Any:
            return spread_out(value)[mask]

        replaced = evaluate(eq, pick, omega, time, kernel, (cosine, sine, detuning))
        for target, values in zip(out, replaced, strict=True):
            target[mask] = values
    return out[0] + 1j * out[1], out[2] + 1j * out[3]


def _steady_and_transient(
    eq: Equation, frequency: Array, kernel: Kernels, cosine: Array, sine: Array
) -> tuple[Array, ...]:
    voltage, current = steady_states(eq, frequency)
    _, to_voltage, to_current, _ = eq.matrix
    with np.errstate(invalid="ignore"):
        return (
            voltage.real * (cosine - kernel.capacitor)
            - voltage.imag * sine
            - to_voltage * current.real * kernel.s,
            voltage.real * sine
            + voltage.imag * (cosine - kernel.capacitor)
            - to_voltage * current.imag * kernel.s,
            current.real * (cosine - kernel.current)
            - current.imag * sine
            - to_current * voltage.real * kernel.s,
            current.real * sine
            + current.imag * (cosine - kernel.current)
            - to_current * voltage.imag * kernel.s,
        )


def _states(
    eq: Equation, pick: Pick, omega: Array, s_real: Array, s_imag: Array, d: tuple[Array, Array]
) -> tuple[Array, ...]:
    """States from D and from the s-like term that the current adds to j omega D."""
    gain = pick(eq.matrix[1] * eq.source_rate)
    rate = pick(eq.source_rate)
    leak = pick(-eq.matrix[0])
    real, imag = d
    return (
        gain * real,
        gain * imag,
        rate * (s_real - omega * imag + leak * real),
        rate * (s_imag + omega * real + leak * imag),
    )


def _divided_difference(
    eq: Equation,
    pick: Pick,
    omega: dd.Pair,
    time: Array,
    kernel: Kernels,
    trig: tuple[Array, Array, Array],
) -> tuple[Array, ...]:
    """D = (E - s)/(j omega - s2) with E the first divided difference at s1 and j omega."""
    under = pick(eq.underdamped)
    w, t, s = pick(omega[0]), pick(time), pick(kernel.s)
    cosine, sine, detuning = (pick(value) for value in trig)
    ringing = np.where(under, pick(eq.root[0]), 0.0)
    # j omega - s1
    x: Any = np.where(under, pick(eq.damping), pick(eq.slow))
    y: Any = np.where(under, detuning, w)
    # exp(j omega t) - exp(s1 t)
    difference = cosine - pick(kernel.base), sine - ringing * s
    size = x * x + y * y
    size = np.where(size == 0, 1.0, size)
    e_real = (difference[0] * x + difference[1] * y) / size
    e_imag = (difference[1] * x - difference[0] * y) / size
    small: Any = (x * x + y * y) * t * t < 1.0
    if small.any():
        real, imag = _phi(-x[small] * t[small], -y[small] * t[small])
        e_real[small] = t[small] * (cosine[small] * real - sine[small] * imag)
        e_imag[small] = t[small] * (cosine[small] * imag + sine[small] * real)
    # j omega - s2
    x, y = np.where(under, pick(eq.damping), pick(eq.fast)), w + ringing
    size = x * x + y * y
    d_real = ((e_real - s) * x + e_imag * y) / size
    d_imag = (e_imag * x - (e_real - s) * y) / size
    return _states(eq, pick, w, s, np.zeros_like(s), (d_real, d_imag))


def _phi(real: Array, imag: Array) -> tuple[Array, Array]:
    """(exp(z) - 1)/z for |z| <= 1 by Horner's rule, componentwise."""
    terms = 20
    sum_real, sum_imag = np.full_like(real, 1 / _FACTORIAL[terms]), np.zeros_like(real)
    for k in range(terms - 1, 0, -1):
        sum_real, sum_imag = (
            real * sum_real - imag * sum_imag + 1 / _FACTORIAL[k],
            real * sum_imag + imag * sum_real,
        )
    return sum_real, sum_imag


def _power_series(
    eq: Equation,
    pick: Pick,
    omega: dd.Pair,
    time: Array,
    kernel: Kernels,
    trig: tuple[Array, Array, Array],
) -> tuple[Array, ...]:
    """Taylor series of D: complete symmetric polynomials of the three exponents over k!."""
    t, w = pick(time), pick(omega[0])
    turn = w * t
    linear, quadratic = -pick(eq.gamma) * t, -pick(eq.natural_squared[0]) * t * t
    previous, current = np.zeros_like(t), np.ones_like(t)
    real, imag = np.ones_like(t), np.zeros_like(t)
    d_real, d_imag = real / _FACTORIAL[2], imag
    # s + j omega D has the same series with (k + 1)! in place of (k + 2)!
    s_real, s_imag = real / _FACTORIAL[1], imag
    for k in range(1, _TERMS):
        previous, current = current, linear * current + quadratic * previous
        real, imag = current - turn * imag, turn * real
        d_real, d_imag = d_real + real / _FACTORIAL[k + 2], d_imag + imag / _FACTORIAL[k + 2]
        s_real, s_imag = s_real + real / _FACTORIAL[k + 1], s_imag + imag / _FACTORIAL[k + 1]
    # the series already holds j omega D, so the frequency handed on is zero
    return _states(
        eq, pick, np.zeros_like(t), t * s_real, t * s_imag, (t * t * d_real, t * t * d_imag)
    )
