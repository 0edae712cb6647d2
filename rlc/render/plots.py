"""The pictures of an answer: over frequency, over time, in the state plane, over samples.

Each function returns a figure and draws nothing on any screen; `save` writes it.
"""

from __future__ import annotations

import os
import struct
import zlib
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rlc.errors import InputError
from rlc.files import write_new
from rlc.front.marking import KINDS, show
from rlc.render.figures import (
    ANGLE_DECIMALS,
    INSIDE,
    NATURAL,
    OUTSIDE,
    asked_at,
    limit_label,
    limit_line,
    limits,
    name_axis,
    note,
    quantity_name,
    shown,
)
from rlc.render.panels import any_character, fit_height, legend_above, panels
from rlc.render.planes import state_plane
from rlc.render.responses import frequency_response
from rlc.render.transients import switch_on
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.figure import Figure

__all__ = ["frequency_response", "histogram", "save", "state_plane", "switch_on"]

Array = NDArray[np.float64]

#: What `save` can write, by suffix, and the metadata that would differ from run to run.
_FORMATS: dict[str, Any] = {
    ".png": {},
    ".svg": {"Date": None, "Creator": None},
    ".pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}

_FEWEST_BINS, _MOST_BINS = 10, 50
# Samples closer together than this share of their size are drawn as one value.
_RESOLVED = 1e-9


def histogram(
    target: Target,
    values: ArrayLike,
    nominal: float,
    cautions: Sequence[str] = (),
    title: str = "",
) -> Figure:
    """How a target's quantity is distributed over samples, and which share keeps the limits.

    Parameters
    ----------
    target : Target
        What was asked for.
    values : array_like
        The quantity for each sample, at least one [SI unit of the quantity]. A sample for which
        it does not exist, or is unbounded, is counted and not drawn.
    nominal : float
        The quantity for the nominal loop [SI unit of the quantity].
    cautions : sequence of str
        Printed small beneath.
    title : str
        Stands above.

    Returns
    -------
    Figure
        One panel: the quantity across, samples per bin up; those outside the limits hatched.
    """
    from matplotlib.ticker import MaxNLocator

    kind = target.entry.kind
    unit = float(KINDS[kind].units[KINDS[kind].symbol])
    values = np.asarray(values, dtype=np.float64).ravel()
    kept = target.kept(values)
    drawn = np.isfinite(values)
    figure, (panel,) = panels(1, title, cautions)
    if kind == "angle":
        # what rounding leaves of one angle is no distribution
        values = np.round(values, ANGLE_DECIMALS)
    stated = [abs(limit) for limit, _ in limits(target) if limit]
    edges = _bin_edges(values[drawn], nominal, max(stated, default=1.0))
    inside = np.histogram(values[drawn & kept], edges)[0]
    outside = np.histogram(values[drawn & ~kept], edges)[0]
    left, width = edges[:-1] / unit, np.diff(edges) / unit
    panel.bar(
        left,
        inside,
        width,
        align="edge",
        label="within the limits" if target.limited else "samples",
        **INSIDE,
    )
    some = outside > 0
    if np.any(some):
        panel.bar(
            left[some], outside[some], width[some], inside[some],
            align="edge", label="outside", **OUTSIDE,
        )  # fmt: skip
    panel.set_ylim(0, 1.06 * max(float(np.max(inside + outside)), 1.0))
    if np.isfinite(nominal):
        panel.axvline(nominal / unit, label=f"nominal {shown(nominal, kind)}", **NATURAL)
    reach = edges[-1] - edges[0]
    for limit, upper in limits(target):
        label = limit_label(target, upper=upper)
        if edges[0] - reach <= limit <= edges[-1] + reach:
            limit_line(panel, limit / unit, label, upper=upper, vertical=True)
        else:
            note(panel, f"{label} (beyond the picture)")
    heading = f"{kept.size} samples"
    if target.limited:
        share = show(float(np.mean(kept)), "ratio")
        heading = f"{np.count_nonzero(kept)} of {heading} are within the limits ({share})"
    if target.goal is not None:
        heading += f"; asked for: {show(target.goal, 'ratio')}"
    missing = int(np.count_nonzero(~drawn))
    if missing:
        note(panel, f"not drawn, since none or unbounded: {missing}")
    name_axis(panel.xaxis, _axis_words(target), kind)
    panel.set_ylabel("samples per bin")
    panel.yaxis.set_major_locator(MaxNLocator("auto", steps=[1, 2, 5, 10], integer=True))
    legend_above(panel, heading)
    fit_height(figure, 3.6)
    return figure


def _axis_words(target: Target) -> str:
    """The quantity, where it is asked for, and whether it is a peak or an rms value."""
    convention = target.entry.convention.partition(";")[0]
    matters = convention.startswith(("rms", "peak"))
    if convention.startswith("rms"):
        convention = "rms"
    return quantity_name(target) + asked_at(target) + (f", {convention}" if matters else "")


def _bin_edges(values: Array, nominal: float, size: float) -> Array:
    """Even bins over the samples; about one value if they are all the same.

    Zeros alone have no size: that of what they are held against is given.
    """
    if not values.size:
        values = np.array([nominal if np.isfinite(nominal) else 0.0])
    low, high = float(values.min()), float(values.max())
    if high - low <= _RESOLVED * max(abs(low), abs(high)):
        half = 0.01 * abs(low) or size
        return np.linspace(low - half, low + half, 2)
    wished = np.histogram_bin_edges(values, "sturges").size - 1 + np.sqrt(values.size) / 2
    bins = int(np.clip(wished, _FEWEST_BINS, _MOST_BINS))
    return np.linspace(low, high, bins + 1)


def save(figure: Figure, path: str | os.PathLike[str]) -> None:
    """Write a figure as PNG, SVG or PDF; the same figure gives the same bytes.

    The file is written under a temporary name beside its place and then moved there.

    Parameters
    ----------
    figure : Figure
        As the other functions here return it.
    path : path-like
        Ends with .png, .svg or .pdf.

    Raises
    ------
    InputError
        If the suffix is another one, the file exists, or it cannot be written, or not even be
        looked for.
    """
    import matplotlib

    path = Path(path)
    suffix = path.suffix.lower()
    if suffix not in _FORMATS:
        raise InputError("path", str(path), f"must end with {', '.join(_FORMATS)}")

    def fill(partial: Path) -> None:
        # a random salt would give every SVG other names for its clip paths
        with matplotlib.rc_context({"svg.hashsalt": "rlc"}), any_character():
            if suffix == ".png":
                _write_pixels(figure, partial)
            else:
                figure.savefig(partial, format=suffix[1:], metadata=_FORMATS[suffix])

    write_new(path, "path", fill)


def _write_pixels(figure: Figure, path: Path) -> None:
    """Write a PNG with a palette: a quarter of the size, and no difference to see."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    canvas = FigureCanvasAgg(figure)
    canvas.draw()  # type: ignore[no-untyped-call]
    pixels = np.asarray(canvas.buffer_rgba())[..., :3]  # type: ignore[no-untyped-call]
    # 16 levels per colour, and of these colours the most frequent
    shade = np.rint(pixels / 17.0).astype(np.intp) @ np.array([256, 16, 1])
    counts = np.bincount(shade.ravel(), minlength=4096)
    every = np.arange(4096)[:, np.newaxis] // [256, 16, 1] % 16
    kept = np.sort(np.argsort(-counts, kind="stable")[:256])
    used = np.flatnonzero(counts)
    apart = np.sum((every[used][:, np.newaxis] - every[kept]) ** 2, axis=-1)
    nearest = np.zeros(4096, dtype=np.uint8)
    nearest[used] = np.argmin(apart, axis=-1)
    path.write_bytes(_indexed_png(nearest[shade], (every[kept] * 17).astype(np.uint8), figure.dpi))


def _indexed_png(index: NDArray[np.uint8], palette: NDArray[np.uint8], dpi: float) -> bytes:
    """The bytes of a PNG whose pixels are places in a palette.

    References
    ----------
    .. [1] ISO/IEC 15948, Portable Network Graphics: chunks and their order (from memory).
    """
    height, width = index.shape
    unfiltered = np.zeros((height, 1 + width), dtype=np.uint8)
    unfiltered[:, 1:] = index
    per_metre = round(dpi / 0.0254)
    chunks = (
        (b"IHDR", struct.pack(">IIBBBBB", width, height, 8, 3, 0, 0, 0)),
        (b"PLTE", palette.tobytes()),
        (b"pHYs", struct.pack(">IIB", per_metre, per_metre, 1)),
        (b"IDAT", zlib.compress(unfiltered.tobytes(), 9)),
        (b"IEND", b""),
    )
    return b"\x89PNG\r\n\x1a\n" + b"".join(
        struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))
        for kind, data in chunks
    )
