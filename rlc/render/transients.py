"""The picture of the switch-on: against time, in the state plane, and what passes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from rlc.render.bands import (
    Band,
    band_label,
    band_of_closings,
    band_of_loops,
    closings_label,
    signal,
    thinned,
)
from rlc.render.figures import CLOSINGS, NOMINAL, OTHER, SPREAD, name_axis
from rlc.render.panels import fit_columns, legend_above, two_columns
from rlc.render.passing import draw_let_through
from rlc.render.planes import draw_plane
from rlc.render.spans import MOST_CYCLES, READABLE_CYCLES, Span, span_of
from rlc.render.traces import (
    CURRENT,
    VOLTAGE,
    Trace,
    batch_words,
    closing_words,
    draw_envelope,
    draw_extra_low,
    draw_limits,
    draw_peak,
    draw_steady,
    set_range,
)
from rlc.solver.case import Case
from rlc.solver.shapes import Piecewise, Surge
from rlc.solver.targets import Target
from rlc.solver.waveforms import Waveforms

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

# Stretches of a curve, of which lowest and highest values are drawn, across a panel.
_STRETCHES = 1500
_BAND_POINTS, _BAND_POINTS_PER_CYCLE = 600, 12
# A source that is over before this share of the picture has a time axis of its own.
_SHORT = 0.03
# Until 2 % are left of a surge's tail, in its time constants.
_TAIL = 4.0


def switch_on(
    case: Case,
    targets: Sequence[Target] = (),
    batch: Case | None = None,
    cautions: Sequence[str] = (),
    title: str = "",
) -> Figure:
    """Source, current and capacitor voltage from closing on, state plane and let-through.

    Where the closing angle or the capacitor's polarity is open, each panel has what is worst
    for what it shows, and says so; so has each loop of the batch. A band shows what all
    closings that are possible may lead to.

    Parameters
    ----------
    case : Case
        One nominal loop.
    targets : sequence of Target
        Limits on ``peak_current`` [A], ``peak_capacitor_voltage`` [V] and ``let_through``
        [A^2 s] are drawn, and levels that are not to be exceeded for long, ratings and fuse
        included; others are not.
    batch : Case, optional
        Loops of any number, drawn as the band from the lowest to the highest at each time.
    cautions : sequence of str
        Printed small beneath the panels.
    title : str
        Stands above.

    Returns
    -------
    Figure
        Five panels: the source's inner voltage [V], loop current [A] and voltage at the
        capacitor's terminals [V] over time; the current over that voltage; let-through [A^2 s].
    """
    span = span_of(case, MOST_CYCLES)
    figure, ((source, *signals), (plane, passing)) = two_columns(title, cautions)
    closed = {trace: case.closed_for(trace.element) for trace in (CURRENT, VOLTAGE)}
    bands = band_of_closings(case, span.time) if closings_label(case) else {}
    waves = {CURRENT: closed[CURRENT].waveforms(span.time)}
    same = closed[CURRENT] is closed[VOLTAGE]
    waves[VOLTAGE] = waves[CURRENT] if same else closed[VOLTAGE].waveforms(span.time)
    _draw_source(source, case, waves, span, bands.get("source"))
    for panel, trace in zip(signals, closed, strict=True):
        one, values = closed[trace], signal(waves[trace], trace.element)
        extent = _plot(panel, span.time, values, NOMINAL, "nominal" if batch else "")
        if batch is not None:
            extent += _draw_loops(panel, one, trace, span, batch)
        if bands:
            extent += _draw_band(panel, case, span, bands[trace.element])
        draw_steady(panel, one, trace, span, extent)
        draw_envelope(panel, one, trace, span)
        draw_peak(panel, case, one, trace, span)
        set_range(panel, *draw_limits(panel, trace, targets, extent))
        if trace is VOLTAGE:
            draw_extra_low(panel, case)
        name_axis(panel.yaxis, trace.words, trace.kind)
        words = (closing_words(case, one, trace), batch_words(batch) if batch else "")
        legend_above(panel, "; ".join(word for word in words if word))
    _name_time(signals, span)
    # a late peak makes the picture so long that turns cannot be told apart
    turns = span if case.source.shape is not None else span_of(case, READABLE_CYCLES)
    draw_plane(plane, closed[CURRENT], turns)
    legend_above(plane, "state plane" + (", closed as for the current" if bands else ""))
    most = draw_let_through(passing, case, span, targets)
    nominal = "running let-through" + (" of the nominal loop" if batch else "")
    legend_above(passing, f"{nominal}; {most}" if most else nominal)
    fit_columns(figure, ([source, *signals], [plane, passing]))
    return figure


def _name_time(panels: Sequence[Axes], span: Span) -> None:
    """One axis for all panels above each other, named beneath the lowest one."""
    for panel in panels:
        panel.set_xlim(span.begin, span.end)
        name_axis(panel.xaxis, "time from closing", "time")
        if panel is not panels[-1]:
            panel.set_xlabel("")
            panel.tick_params(labelbottom=False)
    panels[-1].set_xlabel(panels[-1].get_xlabel() + span.remark)


def _draw_source(
    panel: Axes, case: Case, waves: dict[Trace, Waveforms], span: Span, band: Band | None
) -> None:
    """The source as it is at each panel's closing."""
    end, shape = _own_end(case), case.source.shape
    if shape is not None and 0 < end < _SHORT * (span.end - span.begin):
        time = np.linspace(0.0, 2 * end, _STRETCHES)
        if case.lines is not None:
            knots = case.lines.start
            time = np.unique(np.concatenate([time, knots, np.nextafter(knots, 0.0)]))
        extent = _plot(panel, time, shape.at(time), NOMINAL)
    else:
        time = span.time
        extent = _source_curves(panel, time, waves)
        panel.tick_params(labelbottom=False)
    if band is not None and case.source.alternating:
        extent += _draw_band(panel, case, span, band)
    set_range(panel, min(extent), max(extent))
    draw_extra_low(panel, case)
    panel.set_xlim(time[0], time[-1])
    name_axis(panel.yaxis, "source", "voltage")
    name_axis(panel.xaxis, "the source alone, time from closing", "time")
    if time is span.time:
        panel.set_xlabel("")
    legend_above(panel)


def _source_curves(panel: Axes, time: Array, waves: dict[Trace, Waveforms]) -> list[float]:
    """One curve, or two where the closings differ; what they reach."""
    current, voltage = (waves[trace].source for trace in (CURRENT, VOLTAGE))
    if np.array_equal(current, voltage):
        return _plot(panel, time, current, NOMINAL)
    return [
        *_plot(panel, time, current, NOMINAL, "closed as for the current"),
        *_plot(panel, time, voltage, OTHER, "closed as for the capacitor voltage"),
    ]


def _own_end(case: Case) -> float:
    """How long the source takes to come to its end; zero if it has none [s]."""
    shape = case.source.shape
    if isinstance(shape, Surge):
        return _TAIL / shape.slow
    return shape.gone if isinstance(shape, Piecewise) and not case.repeats else 0.0


def _draw_loops(panel: Axes, closed: Case, trace: Trace, span: Span, batch: Case) -> list[float]:
    """The band of a batch; what it reaches."""
    time = span.time
    cycles = max(span.ringing, span.turning) * (span.end - span.begin)
    points = max(_BAND_POINTS, int(_BAND_POINTS_PER_CYCLE * cycles))
    thin = np.unique(np.r_[0 : time.size : max(1, time.size // points), time.size - 1])
    low, high = band_of_loops(batch, trace.element, time[thin], closed)
    panel.fill_between(time[thin], low, high, label=band_label(batch), **SPREAD)
    return [float(np.min(low)), float(np.max(high))]


def _plot(
    panel: Axes, time: Array, values: Array, look: dict[str, Any], label: str = ""
) -> list[float]:
    """A curve; what it reaches, zero among it."""
    kept = thinned(time, _STRETCHES, values)
    panel.plot(time[kept], values[kept], label=label, **look)
    return [0.0, float(np.min(values)), float(np.max(values))]


def _draw_band(panel: Axes, case: Case, span: Span, band: Band) -> list[float]:
    """What all closings that are possible may lead to."""
    low, high = band
    kept = thinned(span.time, _STRETCHES, low, high)
    panel.fill_between(
        span.time[kept], low[kept], high[kept], label=closings_label(case), **CLOSINGS
    )
    return [float(np.min(low)), float(np.max(high))]
