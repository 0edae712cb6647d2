"""Sources of every kind to put before a loop, drawn at random but seeded."""

import numpy as np

from rlc.solver import shapes
from rlc.solver.source import Order, constant, shaped, sine

KINDS = (
    "dc", "sine", "harmonics", "ramp", "pulse", "train", "surge", "recorded",
)  # fmt: skip


def drawn(kind, rng, natural, decades=1.0):
    """A source of 10 V and a pace within some decades of the natural angular frequency."""
    pace = natural * 10 ** rng.uniform(-decades, decades)
    if kind == "dc":
        return constant(10.0)
    if kind in ("sine", "harmonics"):
        numbers = rng.choice(np.arange(2, 12), 3, replace=False)
        orders = [Order(int(n), rng.uniform(0, 0.4), rng.uniform(0, 6)) for n in numbers]
        angle = rng.uniform(0, 2 * np.pi)
        return sine(10.0, pace / (2 * np.pi), angle, orders=orders if kind == "harmonics" else ())
    width = 2 * np.pi / pace
    if kind == "ramp":
        return shaped(shapes.ramp(10.0, width))
    edges = width * rng.uniform(0, 0.9, 2) * rng.integers(2, size=2)
    if kind == "pulse":
        return shaped(shapes.pulse(-10.0, width, *edges))
    if kind == "train":
        period = width * rng.uniform(2.0, 4.0)
        return shaped(shapes.pulse(10.0, width, *edges, period, int(rng.integers(2, 12))))
    if kind == "surge":
        return shaped(shapes.Surge(10.0, pace / 10 ** rng.uniform(0.1, 2), pace))
    times = np.cumsum(rng.uniform(0.05, 1.0, 40)) * width / 10
    return shaped(shapes.recorded(times, rng.normal(size=40).cumsum()))
