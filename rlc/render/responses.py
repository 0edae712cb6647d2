"""The picture of the steady state over frequency."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import KINDS, show
from rlc.render.bands import band_label
from rlc.render.curves import Curve, Row, place_of, response, response_bands, rows_of
from rlc.render.figures import (
    BAND,
    HARMONIC,
    LIMIT,
    MARK,
    NATURAL,
    NOMINAL,
    SOURCE,
    SPREAD,
    item,
    limit_label,
    limit_line,
    limits,
    name_axis,
    note,
    shown,
)
from rlc.render.panels import fit_height, legend_above, panels
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
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
# Room for the letters on the upper edge [point].
_LETTERS = 11.0

_ON_THE_AXIS = (
    "natural_frequency",
    "ringing_frequency",
    "lower_half_power_frequency",
    "upper_half_power_frequency",
    "capacitor_voltage_maximum_frequency",
)


class _Marks(NamedTuple):
    """Frequencies that the picture is about [Hz]."""

    natural: float
    lower: float
    upper: float
    width: float
    source: float | None
    harmonics: tuple[float, ...]

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
        One nominal loop. A sine gives the current [A rms], with harmonics that of its
        fundamental and, marked, those of each harmonic; a source without a frequency the
        admittance [S].
    targets : sequence of Target
        Limits on frequencies of the loop and on its bandwidth [Hz], and on current [A],
        voltage of an element [V], gain [1] or phase [rad] at a frequency, are drawn. Others on
        the loop or its steady state are named as not drawn; those on the switch-on are left out.
    batch : Case, optional
        Loops of any number, drawn as the band from the lowest to the highest at each frequency.
    cautions : sequence of str
        Printed small beneath the panels.
    title : str
        Stands above.

    Returns
    -------
    Figure
        Three panels: current, gain, phase of the current [deg, negative: it lags the source].
        The gain is the capacitor's voltage over the source's, and that of each other element
        which a target names.
    """
    from matplotlib.ticker import FixedLocator

    marks = _marks(case)
    frequency = _frequencies(marks, targets, batch)
    rows = rows_of(case, targets, marks.source)
    names = [curve.name for row in rows for curve in row.curves]
    at_source = response(case, np.array([item(case.source.frequency)]), names)
    figure, axes = panels(3, title, cautions)
    drawn = response(case, frequency, names)
    values = {name: value.ravel() for name, value in drawn.items()}
    bands = {} if batch is None else response_bands(batch, frequency, values)
    for panel, row in zip(axes, rows, strict=True):
        first = panel is axes[0]
        panel.set_xscale("log")
        panel.set_xlim(frequency[0], frequency[-1])
        if row.kind != "angle":
            panel.set_yscale("log")
        for curve in row.curves:
            # a loop without losses has no finite value at its resonance
            value = np.where(np.isfinite(values[curve.name]), values[curve.name], np.nan)
            label = "nominal" if first and batch is not None else curve.label
            panel.plot(frequency, value, label=label, **curve.look)
            if batch is not None:
                label = band_label(batch) if first else ""
                color = {} if curve.look is NOMINAL else {"facecolor": curve.look["color"]}
                panel.fill_between(
                    frequency, *bands[curve.name], label=label, **{**SPREAD, **color}
                )
        _frequency_marks(panel, marks, named=first)
        for target in targets:
            _frequency_limits(panel, target, named=first)
            for curve in row.curves:
                _value_limits(panel, curve, target, marks.source)
            if first:
                _bandwidth_limits(panel, target, marks, values["current"])
                _not_drawn(panel, target, rows, marks.source)
        if row.kind == "current":
            _harmonic_marks(panel, case)
        low, high = panel.get_ylim()
        panel.set_ylim(
            *((-_PHASE_REACH, _PHASE_REACH) if row.kind == "angle" else (low, 1.2 * high))
        )
        if marks.source is not None:
            _source_mark(panel, row, marks.source, float(at_source[row.curves[0].name].item()))
        name_axis(panel.yaxis, row.words, row.kind, row.unit)
        legend_above(panel, row.heading or _resonance(marks), _LETTERS if panel.texts else 0.0)
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
    source = item(case.source.frequency) if case.source.alternating else None
    orders = (order.number for order in case.source.orders if order.share > 0)
    harmonics = tuple(number * item(case.source.frequency) for number in orders)
    return _Marks(natural, lower, upper, width, source, harmonics)


def _frequencies(marks: _Marks, targets: Sequence[Target], batch: Case | None) -> Array:
    """Frequencies to draw at: even in the logarithm, closer and closer about the resonance."""
    # the logarithm of f2/f1, without the rounding of a quotient near one
    width = 2 * np.arcsinh(marks.width / (2 * marks.natural))
    half = np.clip(_BANDWIDTHS * width, _NARROWEST, max(_WIDEST, width)) if width else _LOSSLESS
    # a loop without losses has no value at its resonance, nor anything to see close to it
    seen = [marks.lower, marks.natural, marks.upper] if width else []
    asked = [] if marks.source is None else [marks.source, *marks.harmonics]
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
            # outside, where no limit's line runs through them
            panel.annotate(
                name, (frequency, 1.0), (shift, 2), xycoords=panel.get_xaxis_transform(),
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


def _bandwidth_limits(panel: Axes, target: Target, marks: _Marks, current: Array) -> None:
    """A bandwidth's limit as a bracket about the resonance, at half the power of the top."""
    if target.quantity != "bandwidth":
        return
    top = float(np.max(current[np.isfinite(current)]))
    for limit, upper in limits(target):
        centre = np.hypot(marks.natural, limit / 2)
        ends = np.array([marks.natural**2 / (centre + limit / 2), centre + limit / 2])
        level = top * np.sqrt(0.5)
        label = limit_label(target, upper=upper)
        panel.plot(ends, [level, level], marker="|", markersize=9, label=label, **LIMIT)


def _not_drawn(panel: Axes, target: Target, rows: Sequence[Row], source: float | None) -> None:
    """Name a limit on the loop or its steady state that has no place in this picture."""
    if target.entry.group == "switch-on" or target.quantity in (*_ON_THE_AXIS, "bandwidth"):
        return
    if any(place_of(curve, target, source) for row in rows for curve in row.curves):
        return
    for _, upper in limits(target):
        note(panel, f"{limit_label(target, upper=upper)} (not drawn)")


def _value_limits(panel: Axes, curve: Curve, target: Target, source: float | None) -> None:
    """Limits on a curve at one frequency: a short bar with a pointer to the allowed side."""
    place = place_of(curve, target, source)
    if place is None:
        return
    at, factor = place
    low, high = panel.get_xlim()
    reach = (high / low) ** _BAR
    for limit, upper in limits(target):
        value, label = factor * limit, limit_label(target, upper=upper)
        if value <= 0 and panel.get_yscale() == "log":
            note(panel, f"{label} (below the picture)")
            continue
        panel.plot(
            [at / reach, at, at * reach],
            [value] * 3,
            marker="v" if upper == (factor > 0) else "^",
            markevery=[1],
            markersize=5,
            label=label,
            **{**LIMIT, "linestyle": "solid", "zorder": 4},
        )


def _harmonic_marks(panel: Axes, case: Case) -> None:
    """The current of each harmonic, which has a share of the fundamental's voltage."""
    orders = [order for order in case.source.orders if order.share > 0]
    frequency = np.array([order.number for order in orders]) * item(case.source.frequency)
    current = response(case, frequency, ("current",))["current"].ravel()
    share = np.array([order.share for order in orders])
    if orders:
        panel.plot(frequency, share * current, label="current of each harmonic", **HARMONIC)


def _source_mark(panel: Axes, row: Row, source: float, value: float) -> None:
    """The curve's value at the source's frequency."""
    unit = float(KINDS[row.kind].units[KINDS[row.kind].symbol])
    text = shown(value * unit, row.kind)
    label = f"{text} at {show(source, 'frequency')}"
    low, high = panel.get_ylim()
    if low <= value <= high:
        panel.plot([source], [value], label=label, **MARK)
    else:
        note(panel, f"{label} (beyond the picture)")
