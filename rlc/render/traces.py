"""What a panel over time shows of one signal: steady state, envelope, peak, limits."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import show
from rlc.render.bands import open_angle, open_polarity, signal
from rlc.render.figures import (
    ENVELOPE,
    EXTRA_LOW,
    MARK,
    STEADY,
    item,
    limit_label,
    limit_line,
    limits,
    note,
    shown,
)
from rlc.render.findings import ELV_AC_PEAK, ELV_AC_RMS, ELV_DC
from rlc.render.spans import Span, only_steady
from rlc.solver.case import Case
from rlc.solver.peaking import steady_peak
from rlc.solver.quantities import REGISTER
from rlc.solver.search import PROVED_GAP
from rlc.solver.targets import Target
from rlc.solver.transient import transient

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Array = NDArray[np.float64]

# Above this damping ratio the envelope is no outline of a motion that hardly swings.
_ENVELOPE_DAMPING = 0.5
# Where the ringing is not this much quicker than the source, an envelope that follows the source
# cannot be told from it.
_ENVELOPE_FREQUENCIES = 3.0
#: A limit further out than this, in multiples of the data, would flatten the curve.
LIMIT_REACH = 1.6
# Steady state per volt above which the source cannot be told from the lossless resonance.
_UNBOUNDED = 1e12


class Trace(NamedTuple):
    """What one panel draws, and the registered quantities that belong to it."""

    element: str
    words: str
    kind: str
    peak: str
    exceeding: tuple[str, ...]


CURRENT = Trace(
    "current", "current", "current", "peak_current",
    ("current_exceeding_time", "current_exceeding_duration"),
)  # fmt: skip
VOLTAGE = Trace(
    "capacitor", "capacitor voltage", "voltage", "peak_capacitor_voltage",
    ("capacitor_voltage_exceeding_time", "capacitor_voltage_exceeding_duration"),
)  # fmt: skip


def closing_words(case: Case, closed: Case, trace: Trace) -> str:
    """At which angle of the source the loop is closed, and which sign the charge has."""
    worst = f"worst for the {trace.words}"
    words = []
    if case.source.alternating:
        angle = shown(item(closed.source.closing_angle), "angle")
        words.append(f"closed at {angle} from the source's rising zero")
    if open_polarity(case):
        words.append(f"charged to {show(item(closed.capacitor_voltage), 'voltage')}")
    if open_angle(case) or open_polarity(case):
        words.append(worst)
    return ", ".join(words)


def batch_words(batch: Case) -> str:
    """How the loops of a batch are closed."""
    if open_angle(batch) or open_polarity(batch):
        return "each loop of the band at its own worst"
    return "each loop of the band at the same angle" if batch.source.alternating else ""


def bounded(case: Case) -> bool:
    """Whether there is a steady state that the loop gets to or swings about."""
    frequency = case.source.frequency
    return all(
        item(np.abs(case.steady_at(order.number * frequency).capacitor)) < _UNBOUNDED
        for order in case.source.every_order
    )


def steady_wave(closed: Case, trace: Trace, time: Array) -> Array:
    """The waveform of a steady state; where the source comes to a level, the final value."""
    if closed.repeats:
        last = closed.course_end - closed.repeats
        return signal(closed.waveforms(last + np.mod(time, closed.repeats)), trace.element)
    source = closed.source
    turn = np.exp(1j * np.asarray(source.closing_angle))
    wave = np.zeros(time.shape)
    for order, driven in zip(
        source.every_order, closed.rotating_signals(trace.element), strict=True
    ):
        omega = 2 * np.pi * order.number * source.frequency
        wave = wave + np.imag(turn**order.number * driven.steady * np.exp(1j * omega * time))
    return wave


def draw_steady(panel: Axes, closed: Case, trace: Trace, span: Span, extent: list[float]) -> None:
    """Draw the steady state if it is within reach of what is drawn, and add to its extent."""
    if not bounded(closed):
        note(panel, "no steady state: driven at the resonance without losses")
        return
    if not (closed.source.alternating or closed.repeats):
        final = float(steady_wave(closed, trace, np.zeros(1))[0])
        if final != 0:
            label = f"final value {show(final, trace.kind)}"
            panel.axhline(final, label=label, **STEADY)
        extent.append(final)
        return
    if closed.repeats:
        wave = steady_wave(closed, trace, span.time)
        panel.plot(span.time, wave, label="steady train of pulses", **STEADY)
        extent += [float(np.min(wave)), float(np.max(wave))]
        return
    amplitude = item(steady_peak(closed, trace.element))
    name = "peak" if closed.source.orders else "amplitude"
    label = f"steady state, {name} {show(amplitude, trace.kind)}"
    if amplitude > LIMIT_REACH * max(-min(extent), max(extent)):
        note(panel, f"{label} (beyond the picture)")
        return
    if span.readable(span.turning):
        wave = steady_wave(closed, trace, span.time)
        panel.plot(span.time, wave, label=label, **STEADY)
        extent += [float(np.min(wave)), float(np.max(wave))]
    else:
        extent += [-amplitude, amplitude]
        panel.axhline(amplitude, label=label, **STEADY)
        panel.axhline(-amplitude, **STEADY)


def draw_envelope(panel: Axes, closed: Case, trace: Trace, span: Span) -> None:
    """The outline exp(-t/tau) of the ringing about the steady state, or tau in words."""
    eq = closed.equation
    lasting = show(item(REGISTER["time_constant"](closed)), "time")
    free = transient(closed, trace.element)
    quick = span.ringing >= _ENVELOPE_FREQUENCIES * item(closed.source.frequency)
    rings = 0 < item(eq.damping_ratio) < _ENVELOPE_DAMPING and quick
    known = np.isfinite(item(free.value)) and bounded(closed) and free.since < span.end
    if not (rings and known and span.readable(span.ringing, free.since)):
        if trace is CURRENT and not span.remark:
            note(panel, f"time constant {lasting}")
        return
    rate, root = item(eq.damping), item(eq.root[0])
    reach = np.hypot(item(free.value), (item(free.slope) + rate * item(free.value)) / root)
    time = span.time[span.time >= free.since]
    outline = reach * np.exp(-rate * (time - free.since))
    steady = steady_wave(closed, trace, time)
    look = {**ENVELOPE, "linewidth": 1.0} if closed.source.alternating else ENVELOPE
    panel.plot(time, steady + outline, label=f"envelope, time constant {lasting}", **look)
    panel.plot(time, steady - outline, **look)


def draw_peak(panel: Axes, case: Case, closed: Case, trace: Trace, span: Span) -> None:
    """Mark the peak, or say in words why it cannot be marked."""
    peak = case.peak(trace.element)
    value, time, gap = item(peak.value), item(peak.time), item(peak.gap)
    size = f"peak {show(value, trace.kind)}"
    more = f", at most {show(gap, 'ratio', 2)} more" if gap > PROVED_GAP else ""
    approached = not np.isfinite(time)
    if not (np.isfinite(value) and bounded(case)):
        note(panel, "grows without bound")
    elif approached and case.repeats:
        note(panel, f"{size}{more}, in the steady train")
    elif only_steady(case, trace.element) and not (approached and not case.source.alternating):
        note(panel, f"{size}{more}, no higher than the steady state")
    elif approached:
        note(panel, f"{size}{more}, approached but not reached")
    else:
        label = f"{size} at {show(time, 'time')}{more}"
        if time > span.end:
            note(panel, f"{label}, after the time shown")
            return
        height = signal(closed.waveforms(np.array([time])), trace.element)
        panel.plot([time], height, label=label, **MARK)


def draw_limits(
    panel: Axes, trace: Trace, targets: Sequence[Target], extent: list[float]
) -> tuple[float, float]:
    """Draw limits on the peak and levels that are not to be exceeded for long.

    Each stands on both sides if the waveform has two. Returns the range that they make up
    together with what is drawn.
    """
    low, high = min(extent), max(extent)
    size = max(-low, high) or 1.0
    stated = [
        (limit, upper, limit_label(target, upper=upper))
        for target in targets
        for limit, upper in limits(target)
        if target.quantity == trace.peak
    ]
    stated += [
        (target.at, True, limit_label(target, upper=upper))
        for target in targets
        for _, upper in limits(target)
        if target.quantity in trace.exceeding and target.at is not None
    ]
    for limit, upper, label in stated:
        if limit > LIMIT_REACH * size:
            note(panel, f"{label} (above the picture)")
            continue
        sides = [side for side, reach in ((1, high), (-1, -low)) if reach > 0.3 * size]
        for side in sides:
            limit_line(
                panel, side * limit, label if side == sides[0] else None,
                upper=upper == (side > 0), vertical=False,
            )  # fmt: skip
            low, high = min(low, side * limit), max(high, side * limit)
    return low, high


def set_range(panel: Axes, low: float, high: float) -> None:
    """Leave some room above and below what is drawn."""
    margin = 0.06 * (high - low) or 1.0
    panel.set_ylim(low - margin, high + margin)
    panel.axhline(0.0, color="0.55", linewidth=0.8, zorder=0.5)


def draw_extra_low(panel: Axes, case: Case) -> None:
    """The upper limit of extra-low voltage where it is inside the picture."""
    limit = ELV_AC_PEAK if case.source.alternating else ELV_DC
    label = f"extra-low voltage up to {show(ELV_DC, 'voltage')} dc"
    if case.source.alternating:
        rms = show(ELV_AC_RMS, "voltage")
        label = f"extra-low voltage up to {show(limit, 'voltage')} peak ({rms} rms)"
    low, high = panel.get_ylim()
    for level in (limit, -limit):
        if low < level < high:
            panel.axhline(level, label=label, **EXTRA_LOW)
            label = ""
