"""The picture in the plane of the two states: capacitor voltage and current."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from rlc.render.bands import thinned
from rlc.render.figures import MARK, NOMINAL, STEADY, arrows, item, name_axis, note
from rlc.render.panels import fit_height, legend_above, panels
from rlc.render.spans import READABLE_CYCLES, Span, ringing_of, span_of, times_between
from rlc.render.traces import CURRENT, VOLTAGE, bounded, closing_words, steady_wave
from rlc.solver.case import Case

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

# Wide enough to be seen around the mark of the final point.
_START = {**MARK, "markerfacecolor": "white", "markersize": 8}
# The plane is some hundred pixels wide and a path may fill it.
_STRETCHES = 4000


def state_plane(case: Case, cautions: Sequence[str] = (), title: str = "") -> Figure:
    """The loop current against the capacitor voltage, from closing on.

    Where angle or polarity are open they are those worst for the current.

    Parameters
    ----------
    case : Case
        One loop.
    cautions : sequence of str
        Printed small beneath.
    title : str
        Stands above.

    Returns
    -------
    Figure
        One panel: voltage at the capacitor's terminals [V] across, loop current [A] up.
    """
    span = span_of(case, READABLE_CYCLES)
    figure, (panel,) = panels(1, title, cautions)
    closed = case.closed_for(CURRENT.element)
    draw_plane(panel, closed, span)
    panel.set_xlabel(panel.get_xlabel() + span.remark)
    legend_above(panel, closing_words(case, closed, CURRENT))
    fit_height(figure, 4.8)
    return figure


def draw_plane(panel: Axes, closed: Case, span: Span) -> None:
    """Draw the path of a loop with one closing, where it starts and where it ends."""
    waves = closed.waveforms(span.time)
    every = np.arange(float(span.time.size))
    kept = thinned(every, _STRETCHES, waves.capacitor_voltage, waves.current)
    across, up = waves.capacitor_voltage[kept], waves.current[kept]
    label = "from closing on" if span.begin == 0 else "over the time shown"
    panel.plot(across, up, label=label, **{**NOMINAL, "linewidth": 1.0})
    start = "closing" if span.begin == 0 else "start"
    panel.plot(across[:1], up[:1], label=start, **_START)
    _limit_set(panel, closed)
    arrows(panel, across, up)
    panel.margins(0.07)
    name_axis(panel.xaxis, "capacitor voltage", "voltage")
    name_axis(panel.yaxis, "current", "current")


def _limit_set(panel: Axes, closed: Case) -> None:
    """Where the motion ends: a point where the source does, else a closed curve."""
    if not bounded(closed):
        note(panel, "no steady state: driven at the resonance without losses")
        return
    if closed.source.alternating or closed.repeats:
        period = closed.repeats or 1 / item(closed.source.frequency)
        turn = np.linspace(0.0, period, 361 * len(closed.source.every_order))
        if closed.repeats:
            turn = times_between(closed, 0.0, period, ringing_of(closed))
        across, up = (steady_wave(closed, trace, turn) for trace in (VOLTAGE, CURRENT))
        label = "steady state, one period of the source"
        panel.plot(across, up, label=label, **{**STEADY, "linewidth": 2.4, "zorder": 4})
        return
    final = (steady_wave(closed, trace, np.zeros(1)) for trace in (VOLTAGE, CURRENT))
    label = "final" if item(closed.equation.damping) > 0 else "centre, never reached"
    panel.plot(*final, label=label, **{**MARK, "marker": "s"})
