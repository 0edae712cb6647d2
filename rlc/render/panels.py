"""Where panels, legends, titles and cautions stand on a picture.

Only matplotlib's objects are used: no global state, no window, nothing to close.
"""

from __future__ import annotations

import contextlib
import warnings
from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

# What the drawing library says of characters that it cannot draw as they are meant.
_CHARACTERS = "Glyph .* missing from|Matplotlib currently does not support"
_WIDTH = 8.0
_RESOLUTION = 100
_SMALL = 8.0
_LEGEND_WIDTH = 495.0
_TEXT_WIDTH = 555.0
_HANDLE_WIDTH = 42.0
# Two columns: widths [inch], of their legends [point], and heights of their panels [inch].
_COLUMN_WIDTHS = (6.9, 4.6)
_COLUMN_LEGENDS = (412.0, 258.0)
# Where panels stand before the layout is solved for; a legend wider than its panel is then would
# make the panel narrower.
_AT_FIRST = {"left": 0.1, "right": 0.99}
_COLUMN_HEIGHTS = ((1.15, 2.0, 2.0), (3.3, 1.9))


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
    _prepare(figure, axes, title, cautions, _TEXT_WIDTH)
    return figure, axes


def two_columns(
    title: str, cautions: Iterable[str]
) -> tuple[Figure, tuple[list[Axes], list[Axes]]]:
    """An empty figure of three panels and, beside them, two others.

    Parameters
    ----------
    title : str
        Stands above; may be empty.
    cautions : iterable of str
        Printed small beneath the panels, wrapped to the width.
    """
    from matplotlib.figure import Figure

    figure = Figure(layout="constrained", dpi=_RESOLUTION)
    figure.subfigures(1, 2, width_ratios=_COLUMN_WIDTHS)
    left, right = (
        list(part.subplots(len(heights), 1, height_ratios=heights, gridspec_kw=_AT_FIRST))
        for part, heights in zip(figure.subfigs, _COLUMN_HEIGHTS, strict=True)
    )
    text_width = _TEXT_WIDTH * sum(_COLUMN_WIDTHS) / _WIDTH
    _prepare(figure, [*left, *right], title, cautions, text_width)
    return figure, (left, right)


def _prepare(
    figure: Figure, axes: Iterable[Axes], title: str, cautions: Iterable[str], width: float
) -> None:
    for panel in axes:
        panel.grid(True, color="0.88", linewidth=0.6)
        panel.set_axisbelow(True)
    if title:
        # what a user typed is no formula, even with dollar signs in it
        figure.suptitle("\n".join(_wrapped(title, 11.0, width)), fontsize=11, parse_math=False)
    small = _SMALL - 0.5
    lines = [line for caution in cautions for line in _wrapped(caution, small, width)]
    if lines:
        figure.supxlabel(
            "\n".join(lines), x=0.01, ha="left", fontsize=small, color="0.15",
            parse_math=False, multialignment="left",
        )  # fmt: skip


def fit_height(figure: Figure, panel_height: float) -> None:
    """Make the figure as high as panels of a given height [inch] and all texts need."""
    height = len(figure.axes) * panel_height + _beside_panels(figure.axes)
    figure.set_size_inches(_WIDTH, height + _around(figure))


def fit_columns(figure: Figure, columns: Iterable[Sequence[Axes]]) -> None:
    """Make a figure of two columns as high as the one that needs more."""
    for part in figure.subfigs:
        part.align_ylabels()
    heights = [
        sum(each) + _beside_panels(axes)
        for each, axes in zip(_COLUMN_HEIGHTS, columns, strict=True)
    ]
    figure.set_size_inches(sum(_COLUMN_WIDTHS), max(heights) + _around(figure))


def _beside_panels(axes: Iterable[Axes]) -> float:
    """Height of legends and labels [inch]."""
    lines = 0.0
    for panel in axes:
        legend = panel.get_legend()
        if legend is not None:
            heading = legend.get_title().get_text()
            rows = _rows([text.get_text() for text in legend.get_texts()], _columns_of(legend))
            lines += 0.6 + rows + (heading.count("\n") + 1 if heading else 0)
        lines += 2 + panel.get_xlabel().count("\n")
    return lines * 0.165


def _columns_of(legend: Any) -> int:
    return int(legend._ncols)


def _rows(labels: Sequence[str], columns: int) -> float:
    """Lines of the longest column, as the legend itself deals its labels out."""
    parts = np.array_split(np.array([label.count("\n") + 1 for label in labels]), columns)
    return max(float(part.sum()) for part in parts)


def _around(figure: Figure) -> float:
    """Height of title and cautions [inch]."""
    texts = ((figure.get_suptitle(), 0.23), (figure.get_supxlabel(), 0.14))
    return sum((text.count("\n") + 1) * line for text, line in texts if text)


def legend_above(panel: Axes, heading: str = "", gap: float = 0.0) -> None:
    """Put the panel's legend above it, where it covers no data, in as many columns as fit.

    A gap [point] between them leaves room for letters on the panel's upper edge.
    """
    from matplotlib.transforms import ScaledTranslation

    width = _legend_width(panel)
    handles, labels = panel.get_legend_handles_labels()
    labels = ["\n".join(_wrapped(label, _SMALL, width - _HANDLE_WIDTH)) for label in labels]
    heading = "\n".join(_wrapped(heading, _SMALL, width))
    raised = ScaledTranslation(0.0, gap / 72, panel.figure.dpi_scale_trans)
    legend = panel.legend(
        handles, labels, title=heading or None, loc="lower left", bbox_to_anchor=(0.0, 1.0),
        bbox_transform=panel.transAxes + raised, ncols=_columns(labels, width), fontsize=_SMALL,
        frameon=False, borderaxespad=0.2, columnspacing=1.4, handlelength=2.8,
        labelspacing=0.35, borderpad=0.2, alignment="left",
    )  # fmt: skip
    legend.get_title().set_fontsize(_SMALL)


def _legend_width(panel: Axes) -> float:
    """What a panel's legend may take [point]: the figure's width, or that of a column."""
    for column, width in zip(panel.figure.figure.subfigs, _COLUMN_LEGENDS, strict=False):
        if column is panel.figure:
            return width
    return _LEGEND_WIDTH


def _columns(labels: Sequence[str], width: float) -> int:
    """Number of legend columns, each as wide as its longest label, that fit beside each other."""
    widths = [
        max(_text_width(line, _SMALL) for line in label.split("\n")) + _HANDLE_WIDTH
        for label in labels
    ]
    for columns in range(min(len(labels), 4), 1, -1):
        # the legend itself deals its labels out like this
        if sum(float(max(part)) for part in np.array_split(widths, columns)) <= width:
            return columns
    return 1


@contextlib.contextmanager
def any_character() -> Iterator[None]:
    """Draw a character that the font lacks as a box, without a warning for each."""
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", _CHARACTERS)
        yield


def _text_width(text: str, size: float) -> float:
    """Width of one line [point]."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import TextToPath

    properties = FontProperties(size=size)
    with any_character():
        width, _, _ = TextToPath().get_text_width_height_descent(text, properties, ismath=False)
    return float(width)


def _wrapped(text: str, size: float, width: float) -> list[str]:
    """Lines that fit a width [point]; a word that does not is broken."""
    lines: list[str] = []
    line = ""
    for word in text.split():
        trial = f"{line} {word}" if line else word
        if _text_width(trial, size) <= width:
            line = trial
            continue
        if line:
            lines.append(line)
        line = word
        while _text_width(line, size) > width:
            cut = int(len(line) * width / _text_width(line, size)) + 1
            while _text_width(line[:cut], size) > width:
                cut -= 1
            lines.append(line[:cut])
            line = line[cut:]
    return [*lines, line] if line else lines
