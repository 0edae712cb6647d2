"""The picture of the steady state over frequency."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import KINDS, show
from rlc.render.figures import (
    BAND,
    LIMIT,
    MARK,
    NATURAL,
    NOMINAL,
    SOURCE,
    SPREAD,
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
)
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.steady import steady_state
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

#: Half width of the picture in half-power bandwidths: skirts and band can both be seen.
_BANDWIDTHS = 8.0
# Half widths as logarithms: the least keeps ticks to six digits, the most is for loops that
# hardly resonate, and a loop without losses has no bandwidth to go by.
_NARROWEST, _WIDEST, _LOSSLESS = np.log([1.0002, 30.0, 3.0])
_CURVE_POINTS, _PEAK_POINTS = 400, 100
# Half length of a limit's bar as a share of the axis.
_BAR = 0.02
_PHASE_REACH = 98.0

_ON_THE_AXIS = (
    "natural_frequency",
    "ringing_frequency",
    "lower_half_power_frequency",
    "upper_half_power_frequency",
    "capacitor_voltage_maximum_frequency",
)


class _Curve(NamedTuple):
    """One panel over frequency; ``limits`` turn a quantity's value into the curve's."""

    heading: str
    words: str
    kind: str
    unit: str | None
    limits: dict[str, float]


class _Marks(NamedTuple):
    """Frequencies that the picture is about [Hz]."""

    natural: float
    lower: float
    upper: float
    width: float
    source: float | None

    @property
    def digits(self) -> int:
        """As many as it takes to tell the half-power frequencies apart."""
        if not self.width > 0:
            return 4
        return int(np.clip(np.ceil(np.log10(self.natural / self.width)) + 2, 4, 12))


def frequency_response(
    case: Case,
    targets: Sequence[Target] = (),
    batch: Case | None = None,
    cautions: Sequence[str] = (),
    title: str = "",
) -> Figure:
    """Current, gain and phase of the steady state against the source's frequency.

    Parameters
    ----------
    case : Case
        One nominal loop. A sine gives the current [A rms]; a constant source the admittance
        [S], since it has no current at other frequencies.
    targets : sequence of Target
        Limits on frequencies of the loop and on its bandwidth [Hz], and on current [A],
        capacitor voltage [V], gain [1] or phase [rad] at a frequency, are drawn; others are not.
    batch : Case, optional
        Loops of any number, drawn as the band from the lowest to the highest at each frequency.
    cautions : sequence of str
        Printed small beneath the panels.
    title : str
        Stands above.

    Returns
    -------
    Figure
        Three panels: current, capacitor over source voltage, phase of the current [deg,
        negative: it lags the source].
    """
    from matplotlib.ticker import FixedLocator

    marks = _marks(case)
    frequency = _frequencies(marks, targets, batch)
    at_source = _response(case, np.array([item(case.source.frequency)]))
    figure, axes = panels(3, title, cautions)
    values = [value.ravel() for value in _response(case, frequency)]
    bands = None if batch is None else _response_bands(batch, frequency, values)
    for index, (panel, row) in enumerate(zip(axes, _rows(case), strict=True)):
        panel.set_xscale("log")
        panel.set_xlim(frequency[0], frequency[-1])
        if row.kind != "angle":
            panel.set_yscale("log")
        # a loop without losses has no finite value at its resonance
        value = np.where(np.isfinite(values[index]), values[index], np.nan)
        label = "nominal" if batch is not None and index == 0 else ""
        panel.plot(frequency, value, label=label, **NOMINAL)
        if bands is not None and batch is not None:
            label = "" if index else band_label(batch)
            panel.fill_between(frequency, *bands[index], label=label, **SPREAD)
        _frequency_marks(panel, marks, named=index == 0)
        for target in targets:
            _frequency_limits(panel, target, named=index == 0)
            _value_limits(panel, row, target, marks.source)
            if index == 0 and target.quantity == "bandwidth":
                _bandwidth_limits(panel, target, marks, float(np.nanmax(value)))
        low, high = panel.get_ylim()
        panel.set_ylim(
            *((-_PHASE_REACH, _PHASE_REACH) if row.kind == "angle" else (low, 1.2 * high))
        )
        if marks.source is not None:
            _source_mark(panel, row, marks.source, float(at_source[index].item()))
        name_axis(panel.yaxis, row.words, row.kind, row.unit)
        legend_above(panel, row.heading or _resonance(marks))
    axes[-1].yaxis.set_major_locator(FixedLocator([-90, -45, 0, 45, 90]))
    name_axis(axes[-1].xaxis, "frequency", "frequency")
    fit_height(figure, 1.7)
    return figure


def _marks(case: Case) -> _Marks:
    names = (
        "natural_frequency",
        "lower_half_power_frequency",
        "upper_half_power_frequency",
        "bandwidth",
    )
    natural, lower, upper, width = (item(REGISTER[name](case)) for name in names)
    source = item(case.source.frequency) if case.source.kind == "sine" else None
    return _Marks(natural, lower, upper, width, source)


def _frequencies(marks: _Marks, targets: Sequence[Target], batch: Case | None) -> Array:
    """Frequencies to draw at: even in the logarithm, closer and closer about the resonance."""
    # the logarithm of f2/f1, without the rounding of a quotient near one
    width = 2 * np.arcsinh(marks.width / (2 * marks.natural))
    half = np.clip(_BANDWIDTHS * width, _NARROWEST, max(_WIDEST, width)) if width else _LOSSLESS
    # a loop without losses has no value at its resonance, nor anything to see close to it
    seen = [marks.lower, marks.natural, marks.upper] if width else []
    asked = [] if marks.source is None else [marks.source]
    if batch is not None:
        for name in ("lower_half_power_frequency", "upper_half_power_frequency"):
            seen += [float(np.min(REGISTER[name](batch))), float(np.max(REGISTER[name](batch)))]
    for target in targets:
        if target.entry.at == "frequency" and target.at is not None:
            asked.append(target.at)
        if target.quantity in _ON_THE_AXIS:
            stated = [limit for limit, _ in limits(target) if limit > 0]
            seen += [f for f in stated if abs(np.log(f / marks.natural)) < 2 * half]
    offsets = np.log(np.array([marks.natural, *seen, *asked]) / marks.natural)
    low, high = min(-half, 1.1 * float(offsets.min())), max(half, 1.1 * float(offsets.max()))
    fine = np.geomspace(1e-3 * (width or half), max(-low, high), _PEAK_POINTS)
    spaced = np.concatenate([np.linspace(low, high, _CURVE_POINTS), fine, -fine])
    spaced = marks.natural * np.exp(spaced[(spaced >= low) & (spaced <= high)])
    return np.unique(np.concatenate([spaced, seen, asked if width else []]))


def _rows(case: Case) -> tuple[_Curve, _Curve, _Curve]:
    level = item(case.source.rms)
    degree = float(KINDS["angle"].units["deg"])
    if case.source.kind == "sine":
        share = case.source.rms_per_amplitude
        current = {"current": 1.0, "current_amplitude": share}
        first = _Curve("", "current (rms)", "current", None, current)
        gain = {"capacitor_voltage": 1 / level, "capacitor_voltage_amplitude": share / level}
        if not level:
            gain = {}
    else:
        first = _Curve("", "admittance", "conductance", None, {})
        gain = {}
    gain |= {"gain": 1.0, "voltage_magnification": 1.0}
    phase = {"current_phase": 1 / degree, "impedance_phase": -1 / degree}
    return (
        first,
        _Curve("capacitor voltage over source voltage", "gain", "number", "V/V", gain),
        _Curve("current against source, negative: lags", "phase", "angle", None, phase),
    )


def _response(case: Case, frequency: Array) -> tuple[Array, Array, Array]:
    """Current [A rms] or admittance [S], gain [1] and phase [deg]; frequencies on the last axis."""
    steady = steady_state(case.loop.column(), frequency)
    level = np.asarray(case.source.rms)[..., np.newaxis] if case.source.kind == "sine" else 1.0
    return (
        level * np.abs(steady.current),
        np.abs(steady.capacitor),
        np.degrees(np.angle(steady.current)),
    )


def _response_bands(
    batch: Case, frequency: Array, nominal: Sequence[Array]
) -> list[tuple[Array, Array]]:
    """Lowest and highest of each curve over the batch, the nominal included.

    Each loop's resonance counts at the nearest frequency drawn: between two of them a sharp
    peak would be lost.
    """
    low, high = [value.copy() for value in nominal], [value.copy() for value in nominal]
    for piece in pieces(batch, frequency.size):
        for index, value in enumerate(_response(piece, frequency)):
            low[index] = np.fmin(low[index], np.fmin.reduce(value, axis=0))
            high[index] = np.fmax(high[index], np.fmax.reduce(value, axis=0))
        natural = REGISTER["natural_frequency"](piece)
        nearest = np.searchsorted(np.sqrt(frequency[1:] * frequency[:-1]), natural)
        tops = _response(piece, natural[..., np.newaxis])
        for index in (0, 1):
            np.fmax.at(high[index], nearest, tops[index][..., 0])
    return list(zip(low, high, strict=True))


def _resonance(marks: _Marks) -> str:
    """The resonance in words."""
    natural, lower, upper = (
        show(f, "frequency", marks.digits) for f in (marks.natural, marks.lower, marks.upper)
    )
    if not marks.width > 0:
        return f"natural frequency {natural}; no losses: no bandwidth, no bound at this frequency"
    width = show(marks.width, "frequency")
    return f"natural frequency {natural}; half power: f1 {lower}, f2 {upper}, {width} apart"


def _frequency_marks(panel: Axes, marks: _Marks, *, named: bool) -> None:
    """The resonance, its half-power band and the source, right across a panel."""
    label = "natural frequency"
    if marks.width > 0:
        band = "half-power band f1 to f2"
        panel.axvspan(marks.lower, marks.upper, label=band if named else None, **BAND)
    panel.axvline(marks.natural, label=label if named else None, **NATURAL)
    if marks.source is not None:
        label = f"source {show(marks.source, 'frequency', marks.digits)}"
        panel.axvline(marks.source, label=label if named else None, **SOURCE)
    if named and marks.width > 0:
        for name, frequency, side, shift in (
            ("f1", marks.lower, "right", -2), ("f2", marks.upper, "left", 2)
        ):  # fmt: skip
            panel.annotate(
                name, (frequency, 0.0), (shift, 2), xycoords=panel.get_xaxis_transform(),
                textcoords="offset points", ha=side, va="bottom", fontsize=8,
            )  # fmt: skip


def _frequency_limits(panel: Axes, target: Target, *, named: bool) -> None:
    """Limits that are places on the frequency axis."""
    if target.quantity not in _ON_THE_AXIS:
        return
    low, high = panel.get_xlim()
    for limit, upper in limits(target):
        label = limit_label(target, upper=upper)
        if low <= limit <= high:
            limit_line(panel, limit, label if named else None, upper=upper, vertical=True)
        elif named:
            note(panel, f"{label} (beyond the picture)")


def _bandwidth_limits(panel: Axes, target: Target, marks: _Marks, top: float) -> None:
    """A bandwidth's limit as a bracket about the resonance, at half the power of the top."""
    for limit, upper in limits(target):
        centre = np.hypot(marks.natural, limit / 2)
        ends = np.array([marks.natural**2 / (centre + limit / 2), centre + limit / 2])
        level = top * np.sqrt(0.5)
        label = limit_label(target, upper=upper)
        panel.plot(ends, [level, level], marker="|", markersize=9, label=label, **LIMIT)


def _value_limits(panel: Axes, row: _Curve, target: Target, source: float | None) -> None:
    """Limits on a curve at one frequency: a short bar with a pointer to the allowed side."""
    at = source if target.at is None else target.at
    factor = row.limits.get(target.quantity)
    if at is None or factor is None or target.across not in (None, "capacitor"):
        return
    low, high = panel.get_xlim()
    reach = (high / low) ** _BAR
    for limit, upper in limits(target):
        value = factor * limit
        if value <= 0 and panel.get_yscale() == "log":
            continue
        panel.plot(
            [at / reach, at, at * reach],
            [value] * 3,
            marker="v" if upper == (factor > 0) else "^",
            markevery=[1],
            markersize=5,
            label=limit_label(target, upper=upper),
            **{**LIMIT, "linestyle": "solid", "zorder": 4},
        )


def _source_mark(panel: Axes, row: _Curve, source: float, value: float) -> None:
    """The curve's value at the source's frequency."""
    text = f"{value:.4g} deg" if row.kind == "angle" else show(value, row.kind)
    label = f"{text} at {show(source, 'frequency')}"
    low, high = panel.get_ylim()
    if low <= value <= high:
        panel.plot([source], [value], label=label, **MARK)
    else:
        note(panel, f"{label} (beyond the picture)")
