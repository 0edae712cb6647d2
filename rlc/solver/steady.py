"""The steady state: phasors, element voltages, power, resonance, frequency response."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rlc.solver.equation import Equation, equation_of, steady_states
from rlc.solver.loop import ELEMENTS, Loop

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class SteadyState:
    """Phasors per volt of source amplitude, the source at phase zero.

    Attributes
    ----------
    frequency : Array
        Zero or more [Hz].
    impedance : Complex
        Of everything that the source's voltage meets, its own impedance included [ohm].
    current : Complex
        Loop current [A/V].
    resistor, inductor, capacitor : Complex
        Voltages across the parts' terminals, per volt [1].
    dielectric : Complex
        Voltage behind the capacitor's series resistance, per volt [1].
    """

    frequency: Array
    impedance: Complex
    current: Complex
    resistor: Complex
    inductor: Complex
    capacitor: Complex
    dielectric: Complex

    def across(self, element: str) -> Complex:
        """The phasor of one element's voltage, per volt of source.

        Parameters
        ----------
        element : {"resistor", "inductor", "capacitor"}
            The part whose terminals are meant.

        Returns
        -------
        Complex
            [1].

        Raises
        ------
        ValueError
            If there is no such element.
        """
        if element not in ELEMENTS:
            raise ValueError(element)
        voltage: Complex = getattr(self, element)
        return voltage


def steady_state(loop: Loop, frequency: Array, eq: Equation | None = None) -> SteadyState:
    r"""Solve for the state that is left when the transient has died.

    Parameters
    ----------
    loop : Loop
        One loop or a batch.
    frequency : array_like
        Zero or more; broadcasts against the batch [Hz].
    eq : Equation, optional
        The loop's equation, if it is at hand.

    Returns
    -------
    SteadyState
        Infinite at the resonance of a loop without losses, where no steady state exists.

    Notes
    -----
    The particular solution of the loop's equation for :math:`v = e^{j\omega t}`; without a
    load it is :math:`Z = R + j(\omega L - 1/\omega C)`, :math:`I = 1/Z`. Any text on ac
    circuits, for instance OpenStax, University Physics vol. 2, section 15.3.
    """
    frequency = np.asarray(frequency, dtype=np.float64)
    equation = equation_of(loop) if eq is None else eq
    state, current = steady_states(equation, frequency)

    def voltage(element: str) -> Complex:
        w = loop.weights(element)
        with np.errstate(invalid="ignore"):
            return w.capacitor_voltage * state + w.current * current + w.source

    with np.errstate(divide="ignore", invalid="ignore"):
        impedance = np.where(current == 0, np.inf + 0j, 1.0 / current)
    return SteadyState(
        frequency=frequency,
        impedance=np.where(np.isinf(current), 0j, impedance),
        current=current,
        resistor=voltage("resistor"),
        # from the current: as a rest of the source's volt it would cancel far below resonance
        inductor=(loop.winding_resistance + 2j * np.pi * frequency * loop.inductance) * current,
        capacitor=voltage("capacitor"),
        dielectric=state,
    )


def half_power_frequencies(eq: Equation) -> tuple[Array, Array]:
    r"""Frequencies at which the equation's power response is half its maximum.

    :math:`\omega_\pm = \sqrt{\omega_0^2 + \gamma^2/4} \pm \gamma/2`: their product is
    :math:`\omega_0^2` and their distance :math:`\gamma`, exactly and at any damping. Without
    a load they are the frequencies at which the current falls to 1/sqrt(2) of its maximum.
    The lower one is formed from the product, since the difference cancels at high damping.

    Parameters
    ----------
    eq : Equation
        A batch of loops.

    Returns
    -------
    lower, upper : Array
        More than zero [Hz].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5.
    """
    centre = np.hypot(eq.natural, eq.damping)
    upper = centre + eq.damping
    return eq.natural_squared[0] / upper / (2 * np.pi), upper / (2 * np.pi)


def capacitor_voltage_maximum(loop: Loop, eq: Equation) -> Array:
    r"""Frequency at which the capacitor's terminal voltage is largest.

    With :math:`\tau = rC` the voltage goes as :math:`(1 + j\omega\tau)/(\omega_0^2 - \omega^2
    + j\omega\gamma)`, which is largest at

    .. math::

        \omega^2 = \frac{m}{1 + \sqrt{1 + \tau^2 m}}, \qquad
        m = 2\omega_0^2 - \gamma^2 + \tau^2\omega_0^4,

    that is :math:`\omega_0^2 - \gamma^2/2` without series resistance.

    Parameters
    ----------
    loop : Loop
        One loop or a batch.
    eq : Equation
        The same loops as equations.

    Returns
    -------
    Array
        Zero where m is not positive and the voltage only falls with frequency [Hz].

    Notes
    -----
    A maximum by differentiation of the phasor of OpenStax, University Physics vol. 2, sections
    15.2 to 15.5: any text on calculus.
    """
    squared = eq.natural_squared[0]
    lead = (loop.series_resistance * loop.capacitance) ** 2
    excess = np.maximum(2 * squared - eq.gamma**2 + lead * squared**2, 0.0)
    highest: Array = np.sqrt(excess / (1 + np.sqrt(1 + lead * excess)))
    return highest / (2 * np.pi)
