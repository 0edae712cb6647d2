"""Values of the loop that differ from unit to unit."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Distribution = Literal["uniform", "normal", "triangular"]


@dataclass(frozen=True)
class Part:
    """A value of the loop that differs from unit to unit.

    Parameters
    ----------
    field : str
        Field of :class:`~rlc.solver.loop.Loop`, such as ``inductance``.
    nominal, low, high : float
        Nominal value and limits [SI unit of the field].
    distribution : {"uniform", "normal", "triangular"}
        How units lie between the limits. A normal one is centred between them and cut off
        there; a triangular one has its peak at the nominal value.
    sigmas : float
        How many standard deviations the limits of a normal distribution are from its centre [1];
        of no meaning for the others.
    """

    field: str
    nominal: float
    low: float
    high: float
    distribution: Distribution = "uniform"
    sigmas: float = 3.0

    def draw(self, count: int, seed: tuple[int, int]) -> Array:
        """Random values, the same for the same seed.

        Parameters
        ----------
        count : int
            How many, zero or more.
        seed : tuple of int
            The spread's seed, and the part's place among all parts.

        Returns
        -------
        Array
            Shape (count,), from the lower to the upper limit [SI unit of the field].
        """
        generator = np.random.default_rng(seed)
        width = self.high - self.low
        if self.distribution == "triangular" and width > 0:
            return generator.triangular(self.low, self.nominal, self.high, count)
        share = generator.random(count)
        if self.distribution == "normal":
            from scipy.special import ndtr, ndtri

            tail = ndtr(-self.sigmas)
            deviation = ndtri(tail + share * (1 - 2 * tail)) / self.sigmas
            drawn: Array = np.clip(self.low + width * (1 + deviation) / 2, self.low, self.high)
            return drawn
        return self.low + width * share
