"""Every picture: nothing is cut or covered, and numbers and words read well."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from pictures import (
    AUDIO,
    CAUTIONS,
    FREQUENCY,
    INRUSH,
    LOSSLESS,
    MAINS,
    MAINS_PEAK,
    OVERDAMPED,
    RMS,
    TARGETS,
    audio,
    drawn,
    over_time,
    ticks,
)

from rlc.render import plots
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.shapes import pulse, ramp, recorded, surge
from rlc.solver.source import ANY_ANGLE, Order, constant, shaped, sine
from rlc.solver.targets import Target

CASES = {
    "audio": (AUDIO, sine(RMS * np.sqrt(2), FREQUENCY, 0.0)),
    "mains, worst angle": (MAINS, sine(MAINS_PEAK, 50.0, None)),
    "inrush": (INRUSH, constant(24.0)),
    "overdamped": (OVERDAMPED, constant(12.0)),
    "heavily overdamped sine": ({**OVERDAMPED, "resistance": 1e6}, sine(325.0, 50.0, None)),
    "sharp": ({**AUDIO, "resistance": 0.0002}, sine(34.0, 876.12, 0.0)),
    "lossless step": (LOSSLESS, constant(24.0)),
    "lossless sine": (LOSSLESS, sine(34.0, 700.0, None)),
    "loaded": ({**AUDIO, "load_resistance": 400.0, "series_resistance": 0.1}, constant(48.0)),
    "short ringing, slow source": ({**MAINS, "resistance": 1.0}, sine(325.0, 5.0, None)),
    "nothing happens": (AUDIO, constant(0.0)),
    "harmonics at any angle": (MAINS, sine(325.0, 50.0, ANY_ANGLE, orders=[Order(5, 0.06)])),
    "ramp": (INRUSH, shaped(ramp(24.0, 1e-4))),
    "pulse": (INRUSH, shaped(pulse(24.0, 1e-4))),
    "steady train": (AUDIO, shaped(pulse(24.0, 1e-4, 0.0, 0.0, 5e-4, None))),
    "surge": (MAINS, shaped(surge(6e3, 1.2e-6, 50e-6))),
    "recorded": (OVERDAMPED, shaped(recorded([0.0, 1e-3, 2e-3, 5e-3], [0.0, 9.0, -3.0, 1.0]))),
    "picofarads": (
        {"resistance": 1.0, "inductance": 1e-9, "capacitance": 1e-12},
        sine(1e-3, 5e9, 0.0),
    ),
}


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("picture", ["frequency_response", "switch_on", "state_plane"])
def test_nothing_is_cut_or_covered(name, picture):
    """Texts are inside the figure, legends above their panel, cautions below all of them."""
    parts, source = CASES[name]
    case = Case(make_loop(**parts), source)
    options = {"cautions": CAUTIONS, "title": "A rather long title of the sheet, " * 4}
    if picture != "state_plane":
        options |= {"targets": TARGETS}
    figure = drawn(getattr(plots, picture)(case, **options))
    paper = figure.bbox
    below = figure._supxlabel.get_window_extent()
    lowest = min(panel.get_tightbbox().y0 for panel in figure.axes)
    assert below.x0 >= 0
    assert below.x1 <= paper.x1
    assert below.y0 >= 0
    assert below.y1 <= lowest
    top = figure._suptitle.get_window_extent()
    assert top.x0 >= 0
    assert top.x1 <= paper.x1
    assert max(panel.get_tightbbox().y1 for panel in figure.axes) <= top.y0
    axes = figure.axes
    columns = (axes[:3], axes[3:]) if picture == "switch_on" else (axes,)
    for column in columns:
        for upper, lower in pairwise(column):
            assert lower.get_tightbbox().y1 <= upper.get_tightbbox().y0
        for panel in column:
            assert panel.get_tightbbox().x1 <= (paper.x1 + 1 if column is columns[-1] else 690)
    for panel in figure.axes:
        box = panel.get_tightbbox()
        assert box.x0 >= 0
        assert box.x1 <= paper.x1 + 1
        legend = panel.get_legend()
        assert legend.get_window_extent().y0 >= panel.bbox.y1
        assert legend.get_window_extent().x1 <= paper.x1
        assert panel.bbox.height > 100
        assert "[" in panel.get_ylabel()
    assert "[" in figure.axes[-1].get_xlabel()


@pytest.mark.parametrize("name", CASES)
def test_frequencies_are_written_without_leading_zeros(name):
    """Each tick has the prefix that its number asks for, or all of them the same."""
    parts, source = CASES[name]
    figure = drawn(plots.frequency_response(Case(make_loop(**parts), source)))
    labels = ticks(figure.axes[-1].xaxis)
    assert len(labels) >= 2
    assert not [label for label in labels if label.startswith("0")]
    unit = figure.axes[-1].get_xlabel().removeprefix("frequency ")
    assert all(label.endswith("Hz") for label in labels) == (" " in labels[0])
    assert unit == "[Hz]" if " " in labels[0] else unit.endswith("Hz]")


def test_frequencies_from_source_to_resonance_have_each_its_prefix():
    figure = drawn(plots.frequency_response(Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0))))
    labels = ticks(figure.axes[-1].xaxis)
    assert labels == ["50 Hz", "100 Hz", "200 Hz", "500 Hz", "1 kHz"]


def test_axis_that_goes_little_beyond_its_data_keeps_their_prefix():
    case = Case(make_loop(**MAINS), sine(3 * MAINS_PEAK, 50.0, None))
    figure = drawn(plots.switch_on(case, (Target("peak_current", maximum=900.0),)))
    current, _ = over_time(figure)
    assert current.get_ylim()[1] > 1000.0
    assert current.get_ylabel() == "current [A]"
    assert "500" in ticks(current.yaxis)


@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf"])
def test_characters_that_the_font_lacks_are_no_warning(tmp_path, suffix):
    """Warnings are errors here: a box is drawn in their place, and nothing is printed."""
    title = "震荡回路 מעגל 🔔"
    figure = plots.state_plane(audio(), title=title, cautions=(title,))
    path = tmp_path / f"picture{suffix}"
    plots.save(figure, path)
    assert figure.get_suptitle() == title
    assert path.stat().st_size > 1000


def test_dollar_signs_are_no_formula():
    figure = plots.switch_on(audio(), title="$3 part, $_2", cautions=("costs $5 or $6_",))
    drawn(figure)
    assert figure.get_supxlabel() == "costs $5 or $6_"


def test_endless_word_is_broken():
    figure = drawn(plots.state_plane(audio(), cautions=("x" * 400,)))
    text = figure._supxlabel
    assert text.get_window_extent().x1 <= figure.bbox.x1
    assert text.get_text().replace("\n", "") == "x" * 400
