r"""The 2x2 propagator of the damped, driven second-order equation.

Every loop is :math:`\ddot y + \gamma\dot y + \omega_0^2 y = f(t)` with
:math:`\gamma = -\operatorname{tr} A` and :math:`\omega_0^2 = \det A`. With
:math:`a = \gamma/2` and :math:`\delta = a^2 - \omega_0^2` all free motion is made of

.. math::

    s(t) = e^{-at}\,\frac{\sinh(t\sqrt\delta)}{\sqrt\delta}, \qquad
    c(t) = e^{-at}\cosh(t\sqrt\delta), \qquad
    e^{At} = c\,I + s\,(A + aI),

which are entire functions of :math:`\delta`: one formula serves all damping, and no tolerance
decides what "critical" is. The response from rest to :math:`e^{j\omega t}` is the divided
difference of the exponential at the two roots and :math:`j\omega`, so that driving an
undamped loop at its resonance is an ordinary limit.

Divided differences of the exponential: C. R. de Boor, "Divided differences", Surveys in
Approximation Theory 1 (2005), and N. J. Higham, Functions of Matrices (SIAM 2008), ch. 10.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.solver import doubledouble as dd
from rlc.solver.loop import Loop

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class Equation:
    """The equation's constants, one per loop of the batch.

    Attributes
    ----------
    damping : Array
        a = gamma/2 [1/s].
    natural_squared : (Array, Array)
        Square of the natural angular frequency, as a pair of doubles [1/s^2].
    root : (Array, Array)
        Ringing angular frequency if underdamped, else half the distance of the two real
        rates, as a pair of doubles [1/s].
    underdamped : Array of bool
        Whether the loop rings.
    slow, fast : Array
        The two decay rates of an overdamped loop, slow without cancellation [1/s].
    matrix : tuple of Array
        The state matrix A, row by row [1/s], [V/(A s)], [A/(V s)], [1/s].
    source_rate : Array
        What the source's voltage adds to di/dt [1/H].
    """

    damping: Array
    natural_squared: dd.Pair
    root: dd.Pair
    underdamped: NDArray[np.bool_]
    slow: Array
    fast: Array
    matrix: tuple[Array, Array, Array, Array]
    source_rate: Array

    def map(self, change: Callable[[Any], Any]) -> Equation:
        """The equation with ``change`` applied to each of its arrays (indexing, reshaping).

        Parameters
        ----------
        change : callable
            From one array to another; the same for every constant.

        Returns
        -------
        Equation
        """
        a, b, c, d = self.matrix
        return Equation(
            damping=change(self.damping),
            natural_squared=(change(self.natural_squared[0]), change(self.natural_squared[1])),
            root=(change(self.root[0]), change(self.root[1])),
            underdamped=change(self.underdamped),
            slow=change(self.slow),
            fast=change(self.fast),
            matrix=(change(a), change(b), change(c), change(d)),
            source_rate=change(self.source_rate),
        )

    def column(self) -> Equation:
        """The batch with one more axis at the end, to meet an axis of times or frequencies.

        Returns
        -------
        Equation
            Shape of the batch, then (1,).
        """
        return self.map(lambda value: value[..., np.newaxis])

    @property
    def natural(self) -> Array:
        """Natural angular frequency [rad/s]."""
        return np.sqrt(self.natural_squared[0])

    @property
    def slowest(self) -> Array:
        """Rate at which what lasts longest decays: of the envelope, or the slow one [1/s]."""
        return np.where(self.underdamped, self.damping, self.slow)

    @property
    def gamma(self) -> Array:
        """Damping coefficient of the equation, 2 a [1/s]."""
        return 2 * self.damping

    @property
    def damping_ratio(self) -> Array:
        """a / omega_0, one at critical damping [1]."""
        return self.damping / self.natural

    @property
    def skew(self) -> Array:
        """Half the difference of the rates at which current and capacitor decay alone [1/s]."""
        return (self.matrix[0] - self.matrix[3]) / 2

    @property
    def gap(self) -> Array:
        """Difference of the two decay rates of an overdamped loop, never zero [1/s]."""
        # 2^-60 of the rate tells the two decays apart by less than half a unit in the last place
        return np.maximum(2 * self.root[0], self.slow * 2.0**-60)

    @property
    def shares(self) -> tuple[Array, Array]:
        """skew - root and skew + root of an overdamped loop, neither cancelling [1/s]."""
        # one of the two cancels; their product is the coupling of the two states
        upward = self.skew >= 0
        large = self.skew + np.where(upward, self.root[0], -self.root[0])
        small = -self.matrix[1] * self.matrix[2] / large
        return np.where(upward, small, large), np.where(upward, large, small)

    @property
    def quickest(self) -> Array:
        """The largest rate at which free motion changes [1/s]."""
        return np.where(self.underdamped, self.natural, self.fast)


def equation_of(loop: Loop) -> Equation:
    """Map loops onto the second-order equation.

    The discriminant is formed in pairs of doubles, since it decides the ringing frequency
    near critical damping, where plain doubles keep half of their digits.

    Parameters
    ----------
    loop : Loop
        One loop or a batch.

    Returns
    -------
    Equation
        Constants with the batch's shape.

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6, for the loop without a load.
    """
    one = dd.exact(np.ones(loop.shape))
    conductance = loop.load_conductance
    outer = dd.add(
        dd.two_sum(loop.resistance, loop.winding_resistance), dd.exact(loop.source_resistance)
    )
    # half a unit in the last place of the sum is 1e-12 of a turn after 1e4 periods
    inductance = dd.two_sum(loop.inductance, loop.source_inductance)
    capacitance = dd.exact(loop.capacitance)
    series_term = dd.add(one, dd.two_product(conductance, loop.series_resistance))
    share = dd.divide(one, series_term)
    natural_squared = dd.divide(
        dd.add(one, dd.multiply(dd.exact(conductance), outer)),
        dd.multiply(series_term, dd.multiply(inductance, capacitance)),
    )
    inner = dd.add(outer, dd.multiply(share, dd.exact(loop.series_resistance)))
    gamma = dd.add(
        dd.divide(inner, inductance),
        dd.divide(dd.multiply(share, dd.exact(conductance)), capacitance),
    )
    damping = (gamma[0] / 2, gamma[1] / 2)
    discriminant = dd.subtract(dd.multiply(damping, damping), natural_squared)
    underdamped = discriminant[0] < 0
    sign = np.where(underdamped, -1.0, 1.0)
    root = dd.square_root((np.abs(discriminant[0]), sign * discriminant[1]))
    fast = damping[0] + root[0]
    return Equation(
        damping=damping[0],
        natural_squared=natural_squared,
        root=root,
        underdamped=underdamped,
        slow=natural_squared[0] / fast,
        fast=fast,
        matrix=loop.state_matrix(),
        source_rate=1.0 / loop.total_inductance,
    )


def phase(
    angular_frequency: dd.Pair, time: Array, size: Array | float = 1.0
) -> tuple[Array, Array]:
    """Cosine and sine of omega t, with the product's rounding error carried along.

    Without it the phase is off by 1e-16 times its own size: 1e-11 after 1e4 periods.

    Parameters
    ----------
    angular_frequency : (Array, Array)
        omega as a pair of doubles, zero or more [rad/s].
    time : Array
        Zero or more; broadcasts against omega [s].
    size : Array or float
        Factor of both; broadcasts against the phase [1].

    Returns
    -------
    cosine, sine : Array
        From -size to size [1].
    """
    high, low = dd.two_product(angular_frequency[0], time)
    low = low + angular_frequency[1] * time
    # Numpy's tangent is several times as fast as its sine or cosine; both follow from that of
    # half the angle.
    half = np.tan(0.5 * high)
    square = half * half
    share = size / (1.0 + square)
    cosine, sine = (1.0 - square) * share, 2.0 * half * share
    return cosine - low * sine, sine + low * cosine


class Kernels(NamedTuple):
    """The free motion's building blocks at given times.

    Attributes
    ----------
    s : Array
        As in the module's text [s].
    base : Array
        c if underdamped, else exp(-slow t) [1].
    regular : Array
        c + a s, the decay of a state that starts at rest [1].
    capacitor, current : Array
        The diagonal of exp(A t) [1].
    """

    s: Array
    base: Array
    regular: Array
    capacitor: Array
    current: Array


def kernels(eq: Equation, time: Array) -> Kernels:
    """Evaluate the free motion's building blocks.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    time : Array
        Times, zero or more, broadcasting against the batch [s].

    Returns
    -------
    Kernels
        With the shape of batch and times together.
    """
    with np.errstate(invalid="ignore", divide="ignore", under="ignore"):
        if np.all(eq.underdamped):
            parts = _ringing(eq, time)
        elif not np.any(eq.underdamped):
            parts = _creeping(eq, time)
        else:
            both = zip(_ringing(eq, time), _creeping(eq, time), strict=True)
            parts = tuple(np.where(eq.underdamped, *each) for each in both)
        s, base, capacitor, current = parts
        return Kernels(s, base, base + eq.slowest * s, capacitor, current)


def _ringing(eq: Equation, time: Array) -> tuple[Array, ...]:
    """s, base, capacitor and current of underdamped loops."""
    cosine, sine = phase(eq.root, time, np.exp(-eq.damping * time))
    s = sine / eq.root[0]
    return s, cosine, cosine + eq.skew * s, cosine - eq.skew * s


def _creeping(eq: Equation, time: Array) -> tuple[Array, ...]:
    """s, base, capacitor and current of loops that do not ring."""
    decay = np.exp(-eq.slow * time)
    # exp(-slow t) times a factor in [0, 1]: neither overflow nor cancellation
    s = decay * (-np.expm1(-eq.gap * time) / eq.gap)
    capacitor_rate, current_rate = eq.shares
    return s, decay, decay + capacitor_rate * s, decay - current_rate * s


def free_response(
    eq: Equation, kernel: Kernels, capacitor_voltage: Array, current: Array
) -> tuple[Array, Array]:
    """States that evolve from given ones without a source.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    kernel : Kernels
        At the times wanted.
    capacitor_voltage, current : Array
        States at closing; broadcast against the kernel [V], [A].

    Returns
    -------
    capacitor_voltage, current : Array
        States at those times [V], [A].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, section 14.6, for the underdamped loop.
    """
    _, to_voltage, to_current, _ = eq.matrix
    return (
        capacitor_voltage * kernel.capacitor + to_voltage * current * kernel.s,
        current * kernel.current + to_current * capacitor_voltage * kernel.s,
    )


def angular(frequency: Array, order: Array | float = 1.0) -> dd.Pair:
    """Angular frequency as a pair of doubles.

    Parameters
    ----------
    frequency : Array
        Zero or more [Hz].
    order : Array or float
        Number of the harmonic; their product is not rounded [1].

    Returns
    -------
    (Array, Array)
        2 pi n f [rad/s].
    """
    return dd.multiply(dd.two_product(frequency, np.asarray(order)), dd.TWO_PI)


def steady_states(
    eq: Equation, frequency: Array, order: Array | float = 1.0
) -> tuple[Complex, Complex]:
    """Phasors (V_C, I) of the steady state for a source of 1 V at phase zero.

    The reactance's difference is formed in pairs of doubles; at an undamped resonance the
    phasors are infinite.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    frequency : Array
        Zero or more; broadcasts against the batch [Hz].
    order : Array or float
        Number of the harmonic, as for :func:`angular` [1].

    Returns
    -------
    capacitor_voltage, current : Complex
        Behind the series resistance, and of the loop, per volt of source [1], [A/V].

    References
    ----------
    .. [1] OpenStax, University Physics vol. 2, sections 15.2 to 15.5, for the loop without a load.
    """
    omega = angular(frequency, order)
    detuning = dd.subtract(eq.natural_squared, dd.multiply(omega, omega))[0]
    with np.errstate(divide="ignore", invalid="ignore"):
        denominator = detuning + 1j * eq.gamma * omega[0]
        voltage = eq.matrix[1] * eq.source_rate / denominator
        current = (1j * omega[0] - eq.matrix[0]) * eq.source_rate / denominator
    infinite = denominator == 0
    return (
        np.where(infinite, np.inf + 0j, voltage),
        np.where(infinite, np.inf + 0j, current),
    )
