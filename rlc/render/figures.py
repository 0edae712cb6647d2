"""What every picture shares: palette, panels, ticks with prefixes, legends, cautions, saving.

Only matplotlib's objects are used: no global state, no window, nothing to close.
"""

from __future__ import annotations

import math
import os
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from rlc.errors import InputError
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

#: What `save` can write, by suffix, and the metadata that would differ from run to run.
_FORMATS: dict[str, Any] = {
    ".png": {"Software": None},
    ".svg": {"Date": None, "Creator": None},
    ".pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}

# Steps of ticks within a decade.
_STEPS, _FINE_STEPS = (1.0, 2.0, 5.0), (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0)
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

    To be called when the limits stand: an axis that spans less than two decades gets one
    prefix for all of it, a longer one a prefix at each tick.

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
    power = 0
    wide = axis.get_scale() == "log" and high > 100 * low
    if wide:
        axis.set_major_locator(LogLocator(numticks=9))
        axis.set_minor_formatter(NullFormatter())
        if KINDS[kind].prefixes:
            axis.set_major_formatter(lambda value, _: show(value, kind))
    else:
        if KINDS[kind].prefixes:
            power = 3 * math.floor(math.log10(max(abs(low), abs(high))) / 3 + 1e-9)
            power = min(max(power, min(PREFIXES.values())), max(PREFIXES.values()))
        if axis.get_scale() == "log" and high > 3 * low:
            fine = horizontal and high < 20 * low
            axis.set_major_locator(LogLocator(subs=_FINE_STEPS if fine else _STEPS))
        else:
            axis.set_major_locator(MaxNLocator(8 if horizontal else 5))
        axis.set_minor_locator(NullLocator())
        scale = 10.0**power
        # adding zero turns -0.0 into 0.0
        axis.set_major_formatter(lambda value, _: f"{round(value / scale, 9) + 0.0:.9g}")
    prefix = next((name for name, exponent in PREFIXES.items() if exponent == power), "")
    axis.set_label_text(f"{words} [{prefix}{symbol}]")


def legend_above(panel: Axes, heading: str = "") -> None:
    """Put the panel's legend above it, where it covers no data, in as many columns as fit."""
    handles, labels = panel.get_legend_handles_labels()
    widest = max((_text_width(label, _SMALL) for label in labels), default=0.0) + _HANDLE_WIDTH
    columns = max(1, min(len(labels), 4, int(_LEGEND_WIDTH / widest)))
    legend = panel.legend(
        handles, labels, title=heading or None, loc="lower left", bbox_to_anchor=(0.0, 1.0),
        ncols=columns, fontsize=_SMALL, frameon=False, borderaxespad=0.2, columnspacing=1.4,
        handlelength=2.8, labelspacing=0.35, borderpad=0.2, alignment="left",
    )  # fmt: skip
    legend.get_title().set_fontsize(_SMALL)


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


def save(figure: Figure, path: str | os.PathLike[str]) -> None:
    """Write a figure as PNG, SVG or PDF; the same figure gives the same bytes.

    The file is written under a temporary name beside its place and then moved there.

    Parameters
    ----------
    figure : Figure
        As the functions of :mod:`rlc.render.plots` return it.
    path : path-like
        Ends with .png, .svg or .pdf.

    Raises
    ------
    InputError
        If the suffix is another one, the file exists, or it cannot be written.
    """
    import matplotlib

    path = Path(path)
    suffix = path.suffix.lower()
    if suffix not in _FORMATS:
        raise InputError("path", str(path), f"must end with {', '.join(_FORMATS)}")
    if path.exists():
        raise InputError("path", str(path), "exists, and nothing is overwritten")
    partial = path.with_name(f".{path.name}.{os.getpid()}.partial")
    try:
        # a random salt would give every SVG other names for its clip paths
        with matplotlib.rc_context({"svg.hashsalt": "rlc"}):
            if suffix == ".png":
                _write_pixels(figure, partial)
            else:
                figure.savefig(partial, format=suffix[1:], metadata=_FORMATS[suffix])
        partial.replace(path)
    except OSError as error:
        raise InputError("path", str(path), f"cannot be written: {error.strerror}") from error
    finally:
        partial.unlink(missing_ok=True)


def _write_pixels(figure: Figure, path: Path) -> None:
    """Write a PNG of 16 levels per colour: a third of the size, and no difference to see."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.image import imsave

    canvas = FigureCanvasAgg(figure)
    canvas.draw()  # type: ignore[no-untyped-call]
    pixels = np.asarray(canvas.buffer_rgba())[..., :3]  # type: ignore[no-untyped-call]
    pixels = np.rint(pixels / 17.0).astype(np.uint8) * np.uint8(17)
    imsave(path, pixels, format="png", dpi=figure.dpi, metadata=_FORMATS[".png"],
           pil_kwargs={"optimize": True})  # fmt: skip


def _text_width(text: str, size: float) -> float:
    """Width of one line [point]."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import TextToPath

    properties = FontProperties(size=size)
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


def limit_label(target: Target, *, upper: bool) -> str:
    """One limit in words, such as "capacitor rated voltage max 63 V"."""
    words = (target.rating or target.quantity).replace("_", " ").replace(".", " ")
    limit = target.maximum if upper else target.minimum
    text = f"{words} {'max' if upper else 'min'} {show(limit, target.entry.kind)}"
    at = target.entry.at
    return text if target.at is None or at is None else f"{text} at {show(target.at, at)}"


def limits(target: Target) -> Iterator[tuple[float, bool]]:
    """The limits that are stated, each with whether it is the upper one."""
    if target.minimum is not None:
        yield target.minimum, False
    if target.maximum is not None:
        yield target.maximum, True


def band_label(batch: Case) -> str:
    """What the band of a batch is."""
    return f"lowest to highest of {math.prod(batch.shape)} loops"


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
