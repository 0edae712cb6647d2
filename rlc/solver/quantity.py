"""What a named result is: its name, unit, convention, source and function."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS

Array = NDArray[np.float64]
At = float | Array | None
Across = str | None


@dataclass(frozen=True)
class Quantity:
    """One named result.

    Attributes
    ----------
    name, symbol, kind : str
        Key, formula symbol, and the kind of unit (see :mod:`rlc.front.units`).
    group : {"loop", "steady", "switch-on"}
        What it needs: the parts, the source, or the closing as well.
    convention, definition, formula, source : str
        Peak or rms and signs; words; formula; where it is published.
    compute : callable
        From a Case, ``at`` and ``across`` to an array with the batch's shape, in SI units.
        Not a number where the quantity does not exist, infinite where it is unbounded.
    at : str or None
        Kind of the optional ``at``: "frequency", "time", "ratio", "current" or "voltage".
    across : bool
        Whether the quantity names an element.
    """

    name: str
    symbol: str
    kind: str
    group: Literal["loop", "steady", "switch-on"]
    convention: str
    definition: str
    formula: str
    source: str
    compute: Callable[[Case, At, Across], Any]
    at: str | None = None
    across: bool = False

    def refuse(self, at: At, across: Across, source: str) -> None:
        """Check that it can be asked for like this.

        Parameters
        ----------
        at : float or Array or None
            Frequency, time, share or limit, more than zero [Hz], [s], [1], [A], [V].
        across : str or None
            One of the loop's elements.
        source : str
            Kind of the source; or empty if it is not known yet.

        Raises
        ------
        InputError
            If `at` or `across` is out of range, or does not go with the quantity or the source.
        """
        if at is not None and self.at is None:
            raise InputError("at", at, f"{self.name} is not asked for at a stated value")
        if at is not None and not np.all(np.isfinite(at) & (np.asarray(at) > 0)):
            raise InputError("at", at, "must be more than zero and finite")
        still = source not in ("", "sine", "harmonics")
        if at is not None and self.at == "frequency" and still and not self.per_volt:
            rule = f"{self.name} of a {source} source is not asked for at a frequency"
            raise InputError("at", at, rule)
        if across is not None and not self.across:
            raise InputError("across", across, f"{self.name} does not name an element")
        if across is not None and across not in ELEMENTS:
            raise InputError("across", across, f"is none of {', '.join(ELEMENTS)}")

    @property
    def per_volt(self) -> bool:
        """Whether the source's level does not matter."""
        return self.kind in ("resistance", "angle", "number")

    def __call__(self, case: Case, at: At = None, across: Across = None) -> Array:
        """Evaluate for a batch; an array ``at`` broadcasts against it.

        Raises
        ------
        InputError
            If ``at`` or ``across`` is given and the quantity has none, or is out of range.
        """
        self.refuse(at, across, case.source.kind)
        shape = np.broadcast_shapes(
            case.loop.shape, np.shape(case.source.amplitude), np.shape(case.source.frequency)
        )
        with np.errstate(all="ignore"):
            value = np.asarray(self.compute(case, at, across), dtype=np.float64)
        return np.broadcast_to(value, np.broadcast_shapes(shape, value.shape))
