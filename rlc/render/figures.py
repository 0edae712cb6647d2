"""What every picture shares: palette, panels, ticks with prefixes, legends, cautions.

Only matplotlib's objects are used: no global state, no window, nothing to close.
"""

from __future__ import annotations

import contextlib
import math
import re
import warnings
from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import KINDS, PREFIXES, show
from rlc.solver.case import Case
from rlc.solver.source import Source
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.axis import Axis
    from matplotlib.figure import Figure

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
INSIDE: dict[str, Any] = {"facecolor": SKY, "edgecolor": BLUE, "linewidth": 0.6, "zorder": 2}
OUTSIDE: dict[str, Any] = {
    "facecolor": ORANGE, "edgecolor": VERMILION, "hatch": "////", "linewidth": 0.6, "zorder": 2,
}  # fmt: skip
MARK: dict[str, Any] = {
    "color": BLACK,
    "marker": "o",
    "markersize": 5,
    "linestyle": "none",
    "zorder": 5,
}

# What the drawing library says of characters that it cannot draw as they are meant.
_CHARACTERS = "Glyph .* missing from|Matplotlib currently does not support"
#: Decimals of an angle [rad]; what is smaller is what rounding leaves of zero.
ANGLE_DECIMALS = 9
# An axis goes this much beyond its data at most; 900 A are then still written in A.
_AXIS_REACH = 1.13
# Steps of ticks within a decade.
_STEPS, _FINE_STEPS = (1.0, 2.0, 5.0), (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0)
# Way along the path, in widths of the picture, to where an arrow shows its sense.
_ARROWS_AT = (0.6, 1.6)
_WIDTH = 8.0
_RESOLUTION = 100
_SMALL = 8.0
_LEGEND_WIDTH = 495.0
_TEXT_WIDTH = 555.0
_HANDLE_WIDTH = 42.0
# Loops times points computed at once, so that any batch fits into memory.
_VALUES_AT_ONCE = 200_000


def panels(count: int, title: str, cautions: Iterable[str]) -> tuple[Figure, list[Axes]]:
    """An empty figure of panels above each other, with title and cautions in place.

    Parameters
    ----------
    count : int
        Number of panels; they share the horizontal axis.
    title : str
        Stands above; may be empty.
    cautions : iterable of str
        Printed small beneath the panels, wrapped to the width.
    """
    from matplotlib.figure import Figure

    figure = Figure(layout="constrained", dpi=_RESOLUTION)
    axes = list(figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0])
    for panel in axes:
        panel.grid(True, color="0.88", linewidth=0.6)
        panel.set_axisbelow(True)
    if title:
        # what a user typed is no formula, even with dollar signs in it
        figure.suptitle("\n".join(_wrapped(title, 11.0)), fontsize=11, parse_math=False)
    lines = [line for caution in cautions for line in _wrapped(caution, _SMALL - 0.5)]
    if lines:
        figure.supxlabel(
            "\n".join(lines), x=0.01, ha="left", fontsize=_SMALL - 0.5, color="0.15",
            parse_math=False, multialignment="left",
        )  # fmt: skip
    return figure, axes


def fit_height(figure: Figure, panel_height: float) -> None:
    """Make the figure as high as panels of a given height [inch] and all texts need."""
    lines = 0.0
    for panel in figure.axes:
        legend = panel.get_legend()
        if legend is not None:
            texts, columns = len(legend.get_texts()), legend._ncols  # type: ignore[attr-defined]
            lines += 0.6 + math.ceil(texts / columns) + bool(legend.get_title().get_text())
        lines += 2 + panel.get_xlabel().count("\n")
    height = len(figure.axes) * panel_height + lines * 0.165
    for text, line in ((figure.get_suptitle(), 0.23), (figure.get_supxlabel(), 0.14)):
        height += (text.count("\n") + 1) * line if text else 0.0
    figure.set_size_inches(_WIDTH, height)


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
    if KINDS[kind].prefixes:
        power = _power(low if logarithmic else max(abs(low), abs(high)) / _AXIS_REACH)
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
    axis.set_label_text(f"{words} [{prefix}{symbol}]" if symbol else words)


def _power(value: float) -> int:
    """Power of ten of the prefix with which a value is written."""
    power = 3 * math.floor(math.log10(value) / 3 + 1e-9)
    return min(max(power, min(PREFIXES.values())), max(PREFIXES.values()))


def legend_above(panel: Axes, heading: str = "", gap: float = 0.0) -> None:
    """Put the panel's legend above it, where it covers no data, in as many columns as fit.

    A gap [point] between them leaves room for letters on the panel's upper edge.
    """
    from matplotlib.transforms import ScaledTranslation

    handles, labels = panel.get_legend_handles_labels()
    raised = ScaledTranslation(0.0, gap / 72, panel.figure.dpi_scale_trans)
    legend = panel.legend(
        handles, labels, title=heading or None, loc="lower left", bbox_to_anchor=(0.0, 1.0),
        bbox_transform=panel.transAxes + raised, ncols=_columns(labels), fontsize=_SMALL,
        frameon=False, borderaxespad=0.2, columnspacing=1.4, handlelength=2.8,
        labelspacing=0.35, borderpad=0.2, alignment="left",
    )  # fmt: skip
    legend.get_title().set_fontsize(_SMALL)


def _columns(labels: Sequence[str]) -> int:
    """Number of legend columns, each as wide as its longest label, that fit beside each other."""
    widths = [_text_width(label, _SMALL) + _HANDLE_WIDTH for label in labels]
    for columns in range(min(len(labels), 4), 1, -1):
        # the legend itself deals its labels out like this
        if sum(float(max(part)) for part in np.array_split(widths, columns)) <= _LEGEND_WIDTH:
            return columns
    return 1


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


@contextlib.contextmanager
def any_character() -> Iterator[None]:
    """Draw a character that the font lacks as a box, without a warning for each."""
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", _CHARACTERS)
        yield


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


def _text_width(text: str, size: float) -> float:
    """Width of one line [point]."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import TextToPath

    properties = FontProperties(size=size)
    with any_character():
        width, _, _ = TextToPath().get_text_width_height_descent(text, properties, ismath=False)
    return float(width)


def _wrapped(text: str, size: float) -> list[str]:
    """Lines that fit the figure's width; a word that does not is broken."""
    lines: list[str] = []
    line = ""
    for word in text.split():
        trial = f"{line} {word}" if line else word
        if _text_width(trial, size) <= _TEXT_WIDTH:
            line = trial
            continue
        if line:
            lines.append(line)
        line = word
        while _text_width(line, size) > _TEXT_WIDTH:
            cut = int(len(line) * _TEXT_WIDTH / _text_width(line, size)) + 1
            while _text_width(line[:cut], size) > _TEXT_WIDTH:
                cut -= 1
            lines.append(line[:cut])
            line = line[cut:]
    return [*lines, line] if line else lines


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


def band_label(batch: Case) -> str:
    """Over which loops the band of a batch reaches."""
    return f"nominal, corners and samples ({math.prod(batch.shape)} loops)"


def pieces(batch: Case, points: int, closing_angle: Any = None) -> Iterator[Case]:
    """A batch cut into flat ones that fit into memory with a number of points per loop.

    Parameters
    ----------
    batch : Case
        Any number of loops.
    points : int
        Times or frequencies at which each will be evaluated.
    closing_angle : array_like, optional
        One for each loop, in place of the source's own [rad].
    """
    shape = batch.shape
    angle = batch.source.closing_angle if closing_angle is None else closing_angle
    length = max(1, _VALUES_AT_ONCE // points)
    for start in range(0, math.prod(shape), length):
        part = slice(start, start + length)

        def cut(value: Any, part: slice = part) -> Any:
            return np.broadcast_to(value, shape).reshape(-1)[part]

        source = batch.source
        yield Case(
            batch.loop.map(cut),
            Source(
                cut(source.amplitude), cut(source.frequency), None if angle is None else cut(angle)
            ),
            cut(batch.capacitor_voltage),
            cut(batch.initial_current),
        )
