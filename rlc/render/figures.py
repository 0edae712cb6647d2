"""What every picture shares: palette, ticks with prefixes, limits and their words."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import KINDS, PREFIXES, show
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.axis import Axis

# M. Okabe and K. Ito, "Color Universal Design" (2008), as matplotlib's sequence "okabe_ito"
# has it. Each colour also has its own line style, marker or hatching, so that grey print works.
BLACK, ORANGE, SKY, GREEN = "#000000", "#e69f00", "#56b4e9", "#009e73"
BLUE, VERMILION, PURPLE = "#0072b2", "#d55e00", "#cc79a7"

NOMINAL: dict[str, Any] = {"color": BLUE, "linewidth": 1.4, "zorder": 3}
SPREAD: dict[str, Any] = {"facecolor": SKY, "alpha": 0.45, "linewidth": 0, "zorder": 1}
BAND: dict[str, Any] = {
    "facecolor": GREEN,
    "alpha": 0.16,
    "hatch": "....",
    "edgecolor": GREEN,
    "zorder": 0.6,
}
LIMIT: dict[str, Any] = {
    "color": VERMILION,
    "linewidth": 1.3,
    "linestyle": (0, (7, 2, 1, 2)),
    "zorder": 2.5,
}
NATURAL: dict[str, Any] = {"color": BLACK, "linewidth": 1.0, "linestyle": (0, (5, 3)), "zorder": 2}
SOURCE: dict[str, Any] = {
    "color": PURPLE,
    "linewidth": 1.2,
    "linestyle": (0, (1, 1.5)),
    "zorder": 2,
}
STEADY: dict[str, Any] = {"color": GREEN, "linewidth": 1.2, "linestyle": (0, (4, 2)), "zorder": 3.2}
ENVELOPE: dict[str, Any] = {
    "color": ORANGE,
    "linewidth": 1.2,
    "linestyle": (0, (1, 1.5)),
    "zorder": 2,
}
CLOSINGS: dict[str, Any] = {
    "facecolor": "0.9", "edgecolor": "0.55", "linewidth": 0.5, "linestyle": "dotted", "zorder": 0.8,
}  # fmt: skip
OTHER: dict[str, Any] = {"color": ORANGE, "linewidth": 1.2, "linestyle": (0, (6, 2)), "zorder": 2.9}
EXTRA_LOW: dict[str, Any] = {
    "color": "0.35",
    "linewidth": 1.0,
    "linestyle": (0, (3, 2, 1, 2, 1, 2)),
    "zorder": 2.2,
}
INSIDE: dict[str, Any] = {"facecolor": SKY, "edgecolor": BLUE, "linewidth": 0.6, "zorder": 2}
OUTSIDE: dict[str, Any] = {
    "facecolor": ORANGE, "edgecolor": VERMILION, "hatch": "////", "linewidth": 0.6, "zorder": 2,
}  # fmt: skip
HARMONIC: dict[str, Any] = {
    "color": PURPLE, "marker": "D", "markersize": 4.5, "linestyle": "none", "zorder": 4.5,
}  # fmt: skip
MARK: dict[str, Any] = {
    "color": BLACK,
    "marker": "o",
    "markersize": 5,
    "linestyle": "none",
    "zorder": 5,
}

#: Decimals of an angle [rad]; what is smaller is what rounding leaves of zero.
ANGLE_DECIMALS = 9
# An axis goes this much beyond its data at most; 900 A are then still written in A.
_AXIS_REACH = 1.13
# Numbers without prefix that are written as they are.
_PLAIN = (0.1, 1e4)
# Steps of ticks within a decade.
_STEPS, _FINE_STEPS = (1.0, 2.0, 5.0), (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0)
# Way along the path, in widths of the picture, to where an arrow shows its sense.
_ARROWS_AT = (0.6, 1.6)


def name_axis(axis: Axis, words: str, kind: str, unit: str | None = None) -> None:
    """Label an axis with words and unit, and write its ticks with engineering prefixes.

    To be called when the limits stand: an axis gets one prefix for all of it, but a prefix at
    each tick if it is logarithmic and long, or goes from the range of one prefix into another.

    Parameters
    ----------
    axis : Axis
        Its data are in SI units; angles in degrees.
    words : str
        What is drawn.
    kind : str
        Key of :data:`rlc.front.marking.KINDS`.
    unit : str, optional
        Replaces the kind's symbol, such as "V/V" for a number.
    """
    from matplotlib.ticker import LogLocator, MaxNLocator, NullFormatter, NullLocator

    low, high = sorted(axis.get_view_interval())
    horizontal = axis is axis.axes.xaxis
    symbol = KINDS[kind].symbol if unit is None else unit
    logarithmic = axis.get_scale() == "log"
    wide = logarithmic and high > 100 * low
    if wide:
        axis.set_major_locator(LogLocator(numticks=9))
        axis.set_minor_formatter(NullFormatter())
    else:
        if logarithmic and high > 3 * low:
            fine = horizontal and high < 8 * low
            axis.set_major_locator(LogLocator(subs=_FINE_STEPS if fine else _STEPS))
        else:
            axis.set_major_locator(MaxNLocator(8 if horizontal else 5))
        axis.set_minor_locator(NullLocator())
    power = 0
    largest = max(abs(low), abs(high))
    if kind == "let_through" and not _PLAIN[0] <= largest < _PLAIN[1]:
        # a prefix would be squared with the ampere beside it
        power = 3 * math.floor(math.log10(largest / _AXIS_REACH) / 3 + 1e-9)
    if KINDS[kind].prefixes:
        power = _power(low if logarithmic else largest / _AXIS_REACH)
        wide |= logarithmic and high > max(3 * low, 10.0 ** (power + 3))
    if wide:
        power = 0
        # without prefixes powers of ten are shorter, but for numbers that need none
        if KINDS[kind].prefixes or (low > 1e-4 and high < 1e5):
            axis.set_major_formatter(lambda value, _: show(value, kind))
    else:
        scale = 10.0**power
        # adding zero turns -0.0 into 0.0
        axis.set_major_formatter(lambda value, _: f"{round(value / scale, 9) + 0.0:.9g}")
    prefix = next((name for name, exponent in PREFIXES.items() if exponent == power), "")
    if not KINDS[kind].prefixes and power:
        prefix = f"1e{power} "
    axis.set_label_text(f"{words} [{prefix}{symbol}]" if symbol else words)


def _power(value: float) -> int:
    """Power of ten of the prefix with which a value is written."""
    power = 3 * math.floor(math.log10(value) / 3 + 1e-9)
    return min(max(power, min(PREFIXES.values())), max(PREFIXES.values()))


def note(panel: Axes, text: str) -> None:
    """Say something in the panel's legend that has no line to go with it."""
    panel.plot([], [], linestyle="none", label=text)


def limit_line(
    panel: Axes, value: float, label: str | None, *, upper: bool, vertical: bool
) -> None:
    """Draw a limit right across a panel, with a pointer to the side that is allowed."""
    along, across = (0.0, 0.93 if vertical else 0.985, 1.0), (value, value, value)
    pointer = ("<" if upper else ">") if vertical else ("v" if upper else "^")
    transform = panel.get_xaxis_transform() if vertical else panel.get_yaxis_transform()
    panel.plot(
        *((across, along) if vertical else (along, across)),
        transform=transform, marker=pointer, markersize=5, markevery=[1], label=label, **LIMIT,
    )  # fmt: skip


def arrows(panel: Axes, across: NDArray[np.float64], up: NDArray[np.float64]) -> None:
    """Show the sense of the motion early on, where the turns lie apart."""
    steps = np.hypot(np.diff(across) / (np.ptp(across) or 1), np.diff(up) / (np.ptp(up) or 1))
    way = np.concatenate([[0.0], np.cumsum(steps)])
    for distance in _ARROWS_AT:
        start = int(np.searchsorted(way, distance * min(1.0, way[-1] / 2)))
        end = int(np.searchsorted(way, way[start] + 0.02))
        if start < end < way.size:
            panel.annotate(
                "", (across[end], up[end]), (across[start], up[start]),
                arrowprops={"arrowstyle": "-|>", "color": NOMINAL["color"], "mutation_scale": 16,
                            "shrinkA": 0, "shrinkB": 0},
            )  # fmt: skip


def item(value: Any) -> float:
    """The number in an array of one."""
    return float(np.asarray(value).item())


def shown(value: float, kind: str, digits: int = 4) -> str:
    """A computed value as text: what rounding leaves of an angle of zero is zero."""
    return show(round(value, ANGLE_DECIMALS) if kind == "angle" else value, kind, digits)


def quantity_name(target: Target) -> str:
    """A target's quantity in words, such as "gain across the resistor"."""
    element = f" across the {target.across}" if target.across else ""
    return target.quantity.replace("_", " ") + element


def asked_at(target: Target) -> str:
    """Where it is asked for, such as " at 300 Hz", or nothing."""
    at = target.entry.at
    return "" if target.at is None or at is None else f" at {show(target.at, at)}"


def limit_label(target: Target, *, upper: bool) -> str:
    """One limit in words, such as "capacitor rated voltage max 63 V"."""
    words = re.sub("[_.]", " ", target.rating) or quantity_name(target)
    limit = target.maximum if upper else target.minimum
    side = "max" if upper else "min"
    return f"{words} {side} {show(limit, target.entry.kind)}{asked_at(target)}"


def limits(target: Target) -> Iterator[tuple[float, bool]]:
    """The limits that are stated, each with whether it is the upper one."""
    if target.minimum is not None:
        yield target.minimum, False
    if target.maximum is not None:
        yield target.maximum, True
