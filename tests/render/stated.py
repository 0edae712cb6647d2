"""Unit loops, and tables read back cell by cell."""

from __future__ import annotations

from typing import Any

import numpy as np
from rich.table import Table

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.peaks import Peak
from rlc.solver.source import Source


def unit(resistance: float, source: Source, *states: float, **more: Any) -> Case:
    """L = C = 1: natural angular frequency and characteristic impedance are 1."""
    either = more.pop("either_polarity", False)
    loop = make_loop(resistance=resistance, inductance=1.0, capacitance=1.0, **more)
    return Case(loop, source, *states, either_polarity=either)  # type: ignore[arg-type]


class Stated(Case):
    """A unit loop whose peaks are stated instead of solved for."""

    peaks: dict[str, tuple[float, ...]]

    def peak(self, element: str) -> Peak:
        value, time, gap, angle = (np.asarray(each) for each in self.peaks[element])
        return Peak(value, time, gap, angle)


def stated(source: Source, **peaks: tuple[float, ...]) -> Case:
    """Value, time, gap and angle of the peak of each element."""
    case = Stated(make_loop(resistance=1.0, inductance=1.0, capacitance=1.0), source)
    object.__setattr__(case, "peaks", peaks)
    return case


def rows(table: Table) -> list[list[str]]:
    return [list(row) for row in zip(*(column.cells for column in table.columns), strict=True)]  # type: ignore[arg-type]
