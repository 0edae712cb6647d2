"""Cases that the pictures show, and what can be read back from a figure."""

from __future__ import annotations

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import sine
from rlc.solver.targets import Ratings, Target

RMS, FREQUENCY = 24.0, 880.0
AUDIO = {"resistance": 12.5, "inductance": 33e-3, "capacitance": 1e-6}
MAINS = {"resistance": 0.05, "inductance": 200e-6, "capacitance": 150e-6}
INRUSH = {"resistance": 0.08, "inductance": 2e-6, "capacitance": 470e-6}
OVERDAMPED = {"resistance": 1e3, "inductance": 10e-3, "capacitance": 1e-6}
LOSSLESS = {**AUDIO, "resistance": 0.0}
MAINS_PEAK = 230 * np.sqrt(2)
CAUTIONS = (
    "The capacitor holds the source's voltage after switching off; how long is not known, since"
    " no resistance across it is stated. " * 2,
    "Linear parts and a lumped loop are assumed.",
)
TARGETS = (
    Target("natural_frequency", 800.0, 900.0),
    Target("bandwidth", maximum=80.0),
    Target("gain", minimum=0.0, maximum=20.0, at=1000.0),
    Target("peak_current", maximum=3.0),
    *Ratings(capacitor_voltage=63.0, inductor_current=1.0, inductor_saturation=2.0).targets(),
)

# A few operations in double precision, each good to 1.1e-16.
ROUNDING = 1e-13


def audio(**changed) -> Case:
    return Case(make_loop(**{**AUDIO, **changed}), sine(RMS * np.sqrt(2), FREQUENCY, 0.0))


def labelled(panel, start: str):
    """The one artist of a panel whose label starts with the given words."""
    handles, labels = panel.get_legend_handles_labels()
    found = [h for h, label in zip(handles, labels, strict=True) if label.startswith(start)]
    assert len(found) == 1, labels
    return found[0]


def legend_text(panel) -> str:
    legend = panel.get_legend()
    return "\n".join([legend.get_title().get_text(), *(t.get_text() for t in legend.get_texts())])


def heading(panel) -> str:
    """What stands above a panel, in one line."""
    return " ".join(panel.get_legend().get_title().get_text().split())


def over_time(figure):
    """The panels of current and capacitor voltage of a switch-on."""
    _, current, voltage, _, _ = figure.axes
    return current, voltage


def drawn(figure):
    """The figure after one drawing pass, so that texts have their places."""
    FigureCanvasAgg(figure).draw()
    return figure


def ticks(axis) -> list[str]:
    """Labels of the ticks that are seen, after a drawing pass."""
    low, high = axis.get_view_interval()
    return [
        label.get_text()
        for place, label in zip(axis.get_majorticklocs(), axis.get_majorticklabels(), strict=True)
        if low <= place <= high
    ]


def curve(panel):
    return panel.lines[0].get_data()


def band(panel, start="nominal, corners and samples"):
    """Frequencies or times, lower and upper edge of a batch's band."""
    outline = labelled(panel, start).get_paths()[0].vertices
    count = (len(outline) - 3) // 2
    low, high = outline[1 : count + 1], outline[count + 2 : 2 * count + 2][::-1]
    np.testing.assert_array_equal(low[:, 0], high[:, 0])
    return low[:, 0], low[:, 1], high[:, 1]
