r"""Capacitor voltage and current after closing as weighted sums of a few functions of time.

A loop moves in one of five ways: it rings or creeps, under a constant or a rotating source, and
if it rings the source may turn near its own frequency. The functions depend on the way, the
weights on the loop alone. With s1, s2 the roots, kappa/(LC) the gain and D(t) the divided
difference of the exponential at s1, s2 and j omega, from rest

.. math::

    v_C = \frac{\kappa}{LC} D, \qquad
    i = \frac{1}{L} \Bigl( s + \bigl(j\omega + \frac{G\kappa}{C}\bigr) D \Bigr), \qquad
    D = \frac{1}{j\omega - s_2}
        \Bigl( \frac{e^{j\omega t} - e^{s_1 t}}{j\omega - s_1} - s \Bigr).

Far from resonance this is the steady state and the free motion of what it leaves out at closing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from rlc.solver import doubledouble as dd
from rlc.solver.equation import Array, Complex, Equation, phase, steady_states
from rlc.solver.series import Drive, Series, slow_series, start_series, table

Functions = tuple[Any, ...]


@dataclass(frozen=True)
class Regime:
    """The states of loops that move in one way.

    Attributes
    ----------
    functions : callable
        From rates and times to the functions of time.
    rates : Array
        What the functions depend on, shape (rates, loops, 1) [1/s].
    weights : Array
        Of the functions in capacitor voltage and current, shape (functions, 2, loops, 1)
        [V], [A].
    series : tuple of Series
        What replaces them at small times, the last one first in time.
    """

    functions: Callable[[Array, Array], Functions]
    rates: Array
    weights: Array
    series: tuple[Series, ...]

    def at(self, loops: slice, time: Array) -> Array:
        """Both states of some of the loops.

        Parameters
        ----------
        loops : slice
            Which of them.
        time : Array
            Shape (loops or 1, n), zero or more [s].

        Returns
        -------
        Array
            Capacitor voltage and current, shape (2, loops, n) [V], [A].
        """
        functions = self.functions(self.rates[:, loops], time)
        weights = self.weights[:, :, loops]
        states: Array = weights[0] * functions[0]
        for weight, function in zip(weights[1:], functions[1:], strict=True):
            states += weight * function
        for series in self.series:
            series.put(states, loops, time, functions)
        return states


def ringing_under_constant(eq: Equation, drive: Drive) -> Regime:
    """Underdamped loops and a source that stands still.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Regime
    """
    voltage, current = _steady(eq, drive)
    weights = [*_free_ringing(eq, drive, voltage, current), (voltage.imag, current.imag)]
    rates = _rates(eq.damping, *eq.root)
    return Regime(_still_ringing, rates, table(weights), (start_series(eq, drive),))


def ringing_under_sine(eq: Equation, drive: Drive) -> Regime:
    """Underdamped loops and a sine that is not near their own frequency.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Regime
    """
    voltage, current = _steady(eq, drive)
    weights = [
        *_free_ringing(eq, drive, voltage, current),
        (voltage.imag, current.imag),
        (voltage.real, current.real),
    ]
    rates = _rates(eq.damping, *eq.root, *drive.omega)
    return Regime(_turned_ringing, rates, table(weights), (start_series(eq, drive),))


def resonant(eq: Equation, drive: Drive) -> Regime:
    """Underdamped loops and a sine near their own frequency.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Regime
    """
    omega = drive.omega
    detuning = dd.subtract(omega, eq.root)
    # 2^-90 of the frequency turns nothing in any time, and the quotient has its limit
    met = (eq.damping == 0) & (detuning[0] == 0)
    detuning = np.where(met, omega[0] * 2.0**-90, detuning[0]), detuning[1]
    pulls = _pulls(eq, drive, omega[0], eq.damping + 1j * (omega[0] + eq.root[0]))
    near = eq.damping + 1j * detuning[0]
    driven = pulls[0] / near, pulls[1] / near
    v0, i0 = drive.capacitor_voltage, drive.current
    _, to_voltage, to_current, _ = eq.matrix
    v_slope = eq.skew * v0 + to_voltage * i0 - pulls[0].imag
    i_slope = to_current * v0 - eq.skew * i0 - pulls[1].imag + eq.source_rate * drive.level
    weights = [
        (driven[0].imag, driven[1].imag),
        (driven[0].real, driven[1].real),
        (v0, i0),
        (v_slope / eq.root[0], i_slope / eq.root[0]),
    ]
    rates = _rates(eq.damping, *omega, *detuning)
    return Regime(_beating, rates, table(weights), (start_series(eq, drive),))


def creeping_under_constant(eq: Equation, drive: Drive) -> Regime:
    """Loops that do not ring and a source that stands still.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Regime
    """
    voltage, current = (state.imag for state in _steady(eq, drive))
    v0, i0 = drive.capacitor_voltage, drive.current
    v_slope, i_slope = _creeping_slopes(eq, v0, i0)
    v_slope = v_slope - eq.slow * voltage
    i_slope = i_slope - eq.slow * current + eq.source_rate * drive.level
    weights = [(v0, i0), (v_slope / eq.gap, i_slope / eq.gap), (voltage, current)]
    rates = _rates(eq.slow, eq.gap)
    return Regime(_still_creeping, rates, table(weights), (start_series(eq, drive),))


def creeping_under_sine(eq: Equation, drive: Drive) -> Regime:
    """Loops that do not ring and a sine.

    Parameters
    ----------
    eq : Equation
        One loop or a row of them.
    drive : Drive
        One for each loop.

    Returns
    -------
    Regime
    """
    voltage, current = _steady(eq, drive)
    v0, i0 = drive.capacitor_voltage, drive.current
    missing = v0 - voltage.imag, i0 - current.imag
    v_slope, i_slope = _creeping_slopes(eq, *missing)
    weights = [
        missing,
        (v_slope / eq.gap, i_slope / eq.gap),
        (voltage.imag, current.imag),
        (voltage.real, current.real),
    ]
    omega = drive.omega
    pulls = _pulls(eq, drive, omega[0], eq.fast + 1j * omega[0])
    v_slope, i_slope = _creeping_slopes(eq, v0, i0)
    v_slope = v_slope - pulls[0].imag
    i_slope = i_slope - pulls[1].imag + eq.source_rate * drive.level
    decays = table([(v0, i0), (v_slope / eq.gap, i_slope / eq.gap)])
    slow = slow_series(eq, omega[0], pulls, decays)
    rates = _rates(eq.slow, eq.gap, *omega)
    return Regime(_turned_creeping, rates, table(weights), (slow, start_series(eq, drive)))


def _rates(*values: Any) -> Array:
    """What the functions of time depend on, as for :class:`Regime`."""
    rates: Array = table([values])[0]
    return rates


def _steady(eq: Equation, drive: Drive) -> tuple[Complex, Complex]:
    """Phasors of the steady state; imaginary parts are its states at closing."""
    voltage, current = steady_states(eq, drive.frequency, drive.order)
    return drive.turn * voltage, drive.turn * current


def _free_ringing(eq: Equation, drive: Drive, voltage: Complex, current: Complex) -> list[Any]:
    """Weights of the damped cosine and sine: motion of what the steady state leaves out."""
    v, i = drive.capacitor_voltage - voltage.imag, drive.current - current.imag
    _, to_voltage, to_current, _ = eq.matrix
    return [
        (v, i),
        (
            (eq.skew * v + to_voltage * i) / eq.root[0],
            (to_current * v - eq.skew * i) / eq.root[0],
        ),
    ]


def _creeping_slopes(eq: Equation, voltage: Array, current: Array) -> tuple[Array, Array]:
    """What s adds to the slow decay of given states, per second."""
    _, to_voltage, to_current, _ = eq.matrix
    capacitor, through = eq.shares
    return (
        capacitor * voltage + to_voltage * current,
        to_current * voltage - through * current,
    )


def _pulls(eq: Equation, drive: Drive, omega: Array, far: Complex) -> tuple[Complex, Complex]:
    """Factors of the divided difference at s1 and j omega; `far` is j omega - s2."""
    pull = drive.turn * eq.source_rate / far
    return eq.matrix[1] * pull, (1j * omega - eq.matrix[0]) * pull


def _still_ringing(rates: Array, time: Array) -> Functions:
    damping, high, low = rates
    return (*phase((high, low), time, np.exp(-damping * time)), 1.0)


def _turned_ringing(rates: Array, time: Array) -> Functions:
    damping, high, low, omega, omega_low = rates
    ringing = phase((high, low), time, np.exp(-damping * time))
    return (*ringing, *phase((omega, omega_low), time))


def _beating(rates: Array, time: Array) -> Functions:
    """Real and imaginary part of exp(j omega t) - exp(s1 t), damped cosine and sine."""
    damping, omega, omega_low, detuning, detuning_low = rates
    cosine, sine = phase((omega, omega_low), time)
    # as exp(j omega t) (1 - exp(-(j omega - s1) t)), whose real part has two positive terms
    lost = -np.expm1(-damping * time)
    envelope = 1.0 - lost
    high, low = dd.two_product(detuning, time)
    low = low + detuning_low * time
    half = np.tan(0.5 * high)
    share = 2.0 * half * envelope / (1.0 + half * half)
    versine = half * share
    ahead = lost + (versine + low * share)
    aside = share + low * (envelope - versine)
    real, imag = cosine * ahead - sine * aside, cosine * aside + sine * ahead
    return real, imag, cosine - real, sine - imag


def _still_creeping(rates: Array, time: Array) -> Functions:
    slow, gap = rates
    grown = -np.expm1(-slow * time)
    return (*_decays(slow, gap, time), grown)


def _turned_creeping(rates: Array, time: Array) -> Functions:
    slow, gap, omega, omega_low = rates
    return (*_decays(slow, gap, time), *phase((omega, omega_low), time))


def _decays(slow: Array, gap: Array, time: Array) -> tuple[Array, Array]:
    """The slow decay, and how far the fast one is ahead."""
    decay = np.exp(-slow * time)
    return decay, -decay * np.expm1(-gap * time)
