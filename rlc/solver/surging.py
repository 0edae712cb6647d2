r"""The response from rest to a surge of two exponentials.

The source is a constant times d(t), the divided difference of the exponential at -alpha and
-beta; with q = exp(-beta t) it moves as d' = -alpha d + q, q' = -beta q. What both drive from
rest over a short span is a Taylor series; from there the span is doubled,

.. math:: F(2t) = e^{At} F(t) + F(t) e^{Mt},

with exact propagators of loop and source. No pole of the source is divided by its distance to
a root of the loop, so that none may coincide with another.

References
----------
.. [1] C. F. Van Loan, "Computing integrals involving the matrix exponential", IEEE
   Transactions on Automatic Control 23 (1978) 395-404 (from memory).
"""

from __future__ import annotations

from typing import Any

import numpy as np

from rlc.solver.equation import Array, Equation, kernels
from rlc.solver.lines import balance
from rlc.solver.shapes import Surge

_TERMS = 26
_SHORT = 0.5


def surge_from_rest(eq: Equation, surge: Surge, time: Array) -> tuple[Array, Array]:
    """States that a surge drives from rest.

    Parameters
    ----------
    eq : Equation
        A batch of loops.
    surge : Surge
        The source.
    time : Array
        Zero or more; broadcasts against the batch [s].

    Returns
    -------
    capacitor_voltage, current : Array
        With the shape of batch and times together [V], [A].
    """
    scale = surge.scale * (surge.fast - surge.slow)
    rest = balance(eq)
    zero = np.zeros(np.shape(eq.damping))
    # driven by d as it is, and by its slope away from the states that balance it
    moved = _driven(eq, surge, time, (zero, eq.source_rate), (1.0, 0.0))
    apart = _driven(eq, surge, time, (-rest[0], -rest[1]), (-surge.slow, 1.0))
    # a loop that follows a slow surge is only known through its distance from balance
    near = apart[3] < moved[3]
    source = surge.at(time)
    voltage, current = (
        np.where(close, part * source + scale * distance, scale * state)
        for close, part, distance, state in zip(
            (near & (apart[2] < moved[2]), near), rest, apart[:2], moved[:2], strict=True
        )
    )
    return voltage, current


def _driven(
    eq: Equation, surge: Surge, time: Array, push: tuple[Array, Array], row: tuple[float, float]
) -> tuple[Array, ...]:
    """States driven from rest by push times row of (d, q), for d = 0 and q = 1 at the start.

    With them the largest voltage that they had on the way, and the square of the largest size.
    """
    shape = np.broadcast_shapes(np.shape(eq.damping), np.shape(time))
    quickest = np.maximum(eq.quickest, surge.fast)
    turns = np.broadcast_to(quickest * time, shape)
    with np.errstate(divide="ignore"):
        doublings = np.maximum(0.0, np.ceil(np.log2(turns / _SHORT)))
    span = np.broadcast_to(time, shape) / 2.0**doublings
    first = _series(eq, surge, span, push, row, (1.0, 0.0))
    second = _series(eq, surge, span, push, row, (0.0, 1.0))
    gap = surge.fast - surge.slow
    squared = np.abs(eq.matrix[1] / eq.matrix[2])
    highest, largest = np.abs(second[0]), second[0] ** 2 + squared * second[1] ** 2
    for done in range(int(np.max(doublings, initial=0.0))):
        more = doublings > done
        kernel = kernels(eq, span)
        ending = np.exp(-surge.fast * span)
        lasting = np.exp(-surge.slow * span)
        between = lasting * -np.expm1(-gap * span) / gap
        old = first
        first = _doubled(more, eq, kernel, first, tuple(lasting * part for part in first))
        second = _doubled(
            more, eq, kernel, second,
            tuple(between * a + ending * b for a, b in zip(old, second, strict=True)),
        )  # fmt: skip
        span = np.where(more, 2 * span, span)
        highest = np.maximum(highest, np.abs(second[0]))
        largest = np.maximum(largest, second[0] ** 2 + squared * second[1] ** 2)
    return *second, highest, largest


def _doubled(more: Any, eq: Equation, kernel: Any, column: Any, carried: Any) -> Any:
    """One column of F after twice the span, where the span is doubled."""
    _, b, c, _ = eq.matrix
    voltage, current = column
    return (
        np.where(more, voltage * kernel.capacitor + b * current * kernel.s + carried[0], voltage),
        np.where(more, current * kernel.current + c * voltage * kernel.s + carried[1], current),
    )


def _series(
    eq: Equation, surge: Surge, span: Array, push: Any, row: Any, start: Any
) -> tuple[Array, Array]:
    """Taylor series of the states over a span in which nothing moves far."""
    a, b, c, d = eq.matrix
    voltage, current = np.zeros(span.shape), np.zeros(span.shape)
    v, i, x, q = voltage, current, start[0] + voltage, start[1] + voltage
    for k in range(1, _TERMS):
        pace = span / k
        pushed = row[0] * x + row[1] * q
        v, i = pace * (a * v + b * i + push[0] * pushed), pace * (c * v + d * i + push[1] * pushed)
        x, q = pace * (q - surge.slow * x), pace * (-surge.fast * q)
        voltage, current = voltage + v, current + i
    return voltage, current
