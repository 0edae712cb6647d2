"""Pictures of the switch-on: against time, and in the plane of the two states."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import show
from rlc.render.figures import (
    ENVELOPE,
    MARK,
    NOMINAL,
    SPREAD,
    STEADY,
    arrows,
    band_label,
    fit_height,
    item,
    legend_above,
    limit_label,
    limit_line,
    limits,
    name_axis,
    note,
    panels,
    pieces,
    shown,
)
from rlc.render.known import AS_STEADY
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.search import PROVED_GAP
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

# The free motion has fallen below 2 % after four time constants.
_TIME_CONSTANTS = 4.0
# Swings are told apart up to about this number of cycles across the picture ...
_READABLE_CYCLES = 40.0
# ... and up to this number the outline is right; only a late peak makes the picture so long.
_MOST_CYCLES = 200.0
_POINTS_PER_CYCLE = 70
_LEAST_POINTS, _MOST_POINTS, _EARLY_POINTS, _BAND_POINTS = 1200, 3000, 200, 600
_BAND_POINTS_PER_CYCLE = 12
# Above this damping ratio the envelope is no outline of a motion that hardly swings.
_ENVELOPE_DAMPING = 0.5
# Where the ringing is not this much quicker than the source, an envelope that follows the source
# cannot be told from it.
_ENVELOPE_FREQUENCIES = 3.0
# A limit further out than this, in multiples of the data, would flatten the curve.
_LIMIT_REACH = 1.6
# Steady state per volt above which the source cannot be told from the lossless resonance.
_UNBOUNDED = 1e12


class _Trace(NamedTuple):
    """What one panel draws, and the registered quantities that belong to it."""

    element: str
    words: str
    kind: str
    peak: str


_CURRENT = _Trace("current", "current", "current", "peak_current")
_VOLTAGE = _Trace("capacitor", "capacitor voltage", "voltage", "peak_capacitor_voltage")


class _Span(NamedTuple):
    """The part of the switch-on that is drawn: its end [s], cycles and times [s]."""

    end: float
    cycles: float
    time: Array
    remark: str

    @property
    def readable(self) -> bool:
        """Whether swings are told apart."""
        return self.cycles <= _READABLE_CYCLES + 1


def switch_on(
    case: Case,
    targets: Sequence[Target] = (),
    batch: Case | None = None,
    cautions: Sequence[str] = (),
    title: str = "",
) -> Figure:
    """Current and capacitor voltage against time from closing.

    With the worst closing angle asked for, each panel has the angle that is worst for what it
    shows, and says so; so has each loop of the batch.

    Parameters
    ----------
    case : Case
        One nominal loop.
    targets : sequence of Target
        Limits on ``peak_current`` [A] and ``peak_capacitor_voltage`` [V], ratings included,
        are drawn; others are not.
    batch : Case, optional
        Loops of any number, drawn as the band from the lowest to the highest at each time.
    cautions : sequence of str
        Printed small beneath the panels.
    title : str
        Stands above.

    Returns
    -------
    Figure
        Two panels: loop current [A], voltage at the capacitor's terminals [V].
    """
    span = _span(case, _MOST_CYCLES)
    figure, axes = panels(2, title, cautions)
    for panel, trace in zip(axes, (_CURRENT, _VOLTAGE), strict=True):
        angle = case.closing_angle_for(trace.element)
        curve = _waveform(case, trace, span.time, angle).ravel()
        panel.plot(span.time, curve, label="nominal" if batch else None, **NOMINAL)
        extent = [0.0, float(np.min(curve)), float(np.max(curve))]
        if batch is not None:
            points = max(_BAND_POINTS, int(_BAND_POINTS_PER_CYCLE * span.cycles))
            thin = np.r_[0 : span.time.size : max(1, span.time.size // points), span.time.size - 1]
            low, high = _band(batch, trace, span.time[thin], angle, curve[thin])
            panel.fill_between(span.time[thin], low, high, label=band_label(batch), **SPREAD)
            extent += [float(np.min(low)), float(np.max(high))]
        _steady(panel, case, trace, span, angle, extent)
        _envelope(panel, case, trace, span, angle)
        _peak(panel, case, trace, span, angle)
        _peak_limits(panel, trace, targets, extent)
        panel.axhline(0.0, color="0.55", linewidth=0.8, zorder=0.5)
        name_axis(panel.yaxis, trace.words, trace.kind)
        legend_above(panel, _closed_at(case, trace, angle, batch))
    axes[-1].set_xlim(0.0, span.end)
    name_axis(axes[-1].xaxis, "time from closing", "time")
    axes[-1].set_xlabel(axes[-1].get_xlabel() + span.remark)
    fit_height(figure, 2.1)
    return figure


def state_plane(case: Case, cautions: Sequence[str] = (), title: str = "") -> Figure:
    """The loop current against the capacitor voltage, from closing on.

    With the worst closing angle asked for, it is the one worst for the current.

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
    span = _span(case, _READABLE_CYCLES)
    angle = case.closing_angle_for(_CURRENT.element)
    figure, (panel,) = panels(1, title, cautions)
    across, up = (
        _waveform(case, trace, span.time, angle).ravel() for trace in (_VOLTAGE, _CURRENT)
    )
    panel.plot(across, up, label="from closing on", **{**NOMINAL, "linewidth": 1.0})
    panel.plot(across[:1], up[:1], label="closing", **{**MARK, "markerfacecolor": "white"})
    _limit_set(panel, case, angle)
    arrows(panel, across, up)
    panel.margins(0.07)
    name_axis(panel.xaxis, "capacitor voltage", "voltage")
    panel.set_xlabel(panel.get_xlabel() + span.remark)
    name_axis(panel.yaxis, "current", "current")
    legend_above(panel, _closed_at(case, _CURRENT, angle))
    fit_height(figure, 4.8)
    return figure


def _closed_at(case: Case, trace: _Trace, angle: Any, batch: Case | None = None) -> str:
    """At which angle of the source the nominal loop is closed, and those of a batch."""
    if case.source.kind == "dc":
        return ""
    others = ""
    if batch is not None:
        others = "at its own worst" if batch.source.worst_angle else "at the same angle"
        others = f"; each loop of the band {others}"
    worst = f", worst for the {trace.words}" if case.source.worst_angle else ""
    return f"closed at {shown(item(angle), 'angle')} from the source's rising zero{worst}{others}"


def _waveform(case: Case, trace: _Trace, time: Array, angle: Any) -> Array:
    waves = case.waveforms(time, closing_angle=angle)
    return waves.current if trace is _CURRENT else waves.capacitor_voltage


def _span(case: Case, most_cycles: float) -> _Span:
    """The whole transient, or as much of it as can be read; longer for a late peak."""
    eq = case.equation
    rate = item(eq.slowest)
    underdamped = bool(np.all(eq.underdamped))
    ringing = item(REGISTER["ringing_frequency"](case)) if underdamped else 0.0
    source = item(case.source.frequency)
    constant = 1.0 / rate if rate > 0 else np.inf
    whole = _TIME_CONSTANTS * constant
    if source > 0:
        whole = max(whole + 2.0 / source, 3.0 / source)
    quick = max(ringing, source)
    traces = [trace for trace in (_CURRENT, _VOLTAGE) if not _only_steady(case, trace)]
    peaks = np.array([item(case.peak(trace.element).time) for trace in traces])
    latest = float(np.max(peaks[np.isfinite(peaks)], initial=0.0))
    end = min(whole, _READABLE_CYCLES / quick) if quick > 0 else whole
    if whole > end and ringing > source:
        # periods of a slow source would crowd a short ringing into the picture's edge
        end = min(end, 2 * _TIME_CONSTANTS * constant)
    longest = most_cycles / quick if quick > 0 else np.inf
    if 0.9 * end < latest < 0.9 * longest:
        end = min(2.0 * latest, longest)
    cycles = quick * end
    points = int(np.clip(_POINTS_PER_CYCLE * cycles, _LEAST_POINTS, _MOST_POINTS))
    time = np.linspace(0.0, end, points)
    if not underdamped:
        # the fast one of the two rates may be over long before the first even step
        time = np.union1d(time, np.geomspace(1e-6 * end, end, _EARLY_POINTS))
    time = np.union1d(time, peaks[peaks <= end])
    remark = ""
    if end < _TIME_CONSTANTS * constant:
        lasting = f"its time constant is {show(constant, 'time')}" if rate > 0 else "it never dies"
        remark = f"\nthe first {show(end, 'time', 3)} of the transient; {lasting}"
    return _Span(end, cycles, time, remark)


def _band(
    batch: Case, trace: _Trace, time: Array, nominal_angle: Any, nominal: Array
) -> tuple[Array, Array]:
    """Lowest and highest value over the batch at each time, the nominal included."""
    angle = batch.closing_angle_for(trace.element)
    if batch.source.worst_angle and batch.at_rest:
        # from rest half a turn only changes the sign: take the one next to the nominal
        angle = angle + np.pi * np.round((nominal_angle - angle) / np.pi)
    low, high = nominal, nominal
    for piece in pieces(batch, time.size, np.broadcast_to(angle, batch.shape)):
        values = _waveform(piece, trace, time, None)
        low = np.minimum(low, values.min(axis=0))
        high = np.maximum(high, values.max(axis=0))
    return low, high


def _only_steady(case: Case, trace: _Trace) -> bool:
    """Whether the switch-on never passes its steady state by what the digits show."""
    steady = item(np.abs(case.signals(trace.element)[0].steady))
    return item(case.peak(trace.element).value) <= steady * (1 + AS_STEADY)


def _bounded(case: Case) -> bool:
    """Whether there is a steady state that the loop gets to or swings about."""
    steady = item(np.abs(case.steady.capacitor))
    return bool(steady < _UNBOUNDED)


def _steady(
    panel: Axes, case: Case, trace: _Trace, span: _Span, angle: Any, extent: list[float]
) -> None:
    """Draw the steady state if it is within reach of what is drawn, and add to its extent."""
    if not _bounded(case):
        note(panel, "no steady state: driven at the resonance without losses")
        return
    phasor = np.exp(1j * angle) * case.signals(trace.element)[0].steady
    if case.source.kind == "dc":
        final = item(np.imag(phasor))
        if final != 0:
            label = f"final value {show(final, trace.kind)}"
            panel.axhline(final, label=label, **STEADY)
        extent.append(final)
        return
    amplitude = item(np.abs(phasor))
    label = f"steady state, amplitude {show(amplitude, trace.kind)}"
    if amplitude > _LIMIT_REACH * max(-min(extent), max(extent)):
        note(panel, f"{label} (beyond the picture)")
        return
    if span.readable:
        wave = _steady_wave(case, phasor, span.time)
        panel.plot(span.time, wave, label=label, **STEADY)
        extent += [float(np.min(wave)), float(np.max(wave))]
    else:
        extent += [-amplitude, amplitude]
        panel.axhline(amplitude, label=label, **STEADY)
        panel.axhline(-amplitude, **STEADY)


def _steady_wave(case: Case, phasor: Any, time: Array) -> Array:
    """The waveform of a steady state; of a constant source, its final value."""
    wave: Array = np.imag(phasor * np.exp(2j * np.pi * case.source.frequency * time)).ravel()
    return wave


def _envelope(panel: Axes, case: Case, trace: _Trace, span: _Span, angle: Any) -> None:
    """The outline exp(-t/tau) of the ringing about the steady state, or tau in words."""
    eq = case.equation
    lasting = show(item(REGISTER["time_constant"](case)), "time")
    quick = eq.root[0] >= 2 * np.pi * _ENVELOPE_FREQUENCIES * case.source.frequency
    if not (0 < item(eq.damping_ratio) < _ENVELOPE_DAMPING and item(quick) and span.readable):
        if trace is _CURRENT and not span.remark:
            note(panel, f"time constant {lasting}")
        return
    rotating, fixed = case.signals(trace.element)
    turn = np.exp(1j * angle)
    value = np.imag(turn * rotating.value) + fixed.value
    slope = np.imag(turn * rotating.slope) + fixed.slope
    reach = np.hypot(value, (slope + eq.damping * value) / eq.root[0])
    outline = (reach * np.exp(-eq.damping * span.time)).ravel()
    steady = _steady_wave(case, turn * rotating.steady, span.time)
    look = ENVELOPE if case.source.kind == "dc" else {**ENVELOPE, "linewidth": 1.0}
    panel.plot(span.time, steady + outline, label=f"envelope, time constant {lasting}", **look)
    panel.plot(span.time, steady - outline, **look)


def _peak(panel: Axes, case: Case, trace: _Trace, span: _Span, angle: Any) -> None:
    """Mark the peak, or say in words why it cannot be marked."""
    peak = case.peak(trace.element)
    value, time, gap = item(peak.value), item(peak.time), item(peak.gap)
    size = f"peak {show(value, trace.kind)}"
    more = f", at most {show(gap, 'ratio', 2)} more" if gap > PROVED_GAP else ""
    approached = not np.isfinite(time)
    if not (np.isfinite(value) and _bounded(case)):
        note(panel, "grows without bound")
    elif _only_steady(case, trace) and not (approached and case.source.kind == "dc"):
        note(panel, f"{size}{more}, no higher than the steady state")
    elif approached:
        note(panel, f"{size}{more}, approached but not reached")
    else:
        label = f"{size} at {show(time, 'time')}{more}"
        if time > span.end:
            note(panel, f"{label}, after the time shown")
            return
        height = _waveform(case, trace, np.array([time]), angle).ravel()
        panel.plot([time], height, label=label, **MARK)


def _peak_limits(
    panel: Axes, trace: _Trace, targets: Sequence[Target], extent: list[float]
) -> None:
    """Draw limits on the peak, on both sides if the waveform has two, and set the range."""
    low, high = min(extent), max(extent)
    size = max(-low, high) or 1.0
    for target in targets:
        if target.quantity != trace.peak:
            continue
        for limit, upper in limits(target):
            label = limit_label(target, upper=upper)
            if limit > _LIMIT_REACH * size:
                note(panel, f"{label} (above the picture)")
                continue
            sides = [side for side, reach in ((1, high), (-1, -low)) if reach > 0.3 * size]
            for side in sides:
                limit_line(
                    panel, side * limit, label if side == sides[0] else None,
                    upper=upper == (side > 0), vertical=False,
                )  # fmt: skip
                low, high = min(low, side * limit), max(high, side * limit)
    margin = 0.06 * (high - low) or 1.0
    panel.set_ylim(low - margin, high + margin)


def _limit_set(panel: Axes, case: Case, angle: Any) -> None:
    """Where the motion ends: a point under a constant source, an ellipse under a sine."""
    if not _bounded(case):
        note(panel, "no steady state: driven at the resonance without losses")
        return
    voltage, current = (
        np.exp(1j * angle) * case.signals(trace.element)[0].steady for trace in (_VOLTAGE, _CURRENT)
    )
    if case.source.kind == "dc":
        label = "final" if item(case.equation.damping) > 0 else "centre, never reached"
        style = {**MARK, "marker": "s"}
        panel.plot([item(np.imag(voltage))], [item(np.imag(current))], label=label, **style)
        return
    turn = np.exp(1j * np.linspace(0.0, 2 * np.pi, 361))
    panel.plot(
        np.imag(voltage * turn).ravel(), np.imag(current * turn).ravel(),
        label="steady state, one period of the source", **{**STEADY, "linewidth": 2.4, "zorder": 4},
    )  # fmt: skip
