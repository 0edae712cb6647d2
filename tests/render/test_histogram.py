"""The picture over samples: what is counted, where, and in which words."""

from __future__ import annotations

import numpy as np
import pytest
from pictures import labelled, legend_text

from rlc.render import plots
from rlc.solver.targets import Target

VALUES = np.concatenate([np.linspace(55.0, 65.0, 101), [np.nan, np.inf]])


def test_histogram_counts_what_is_within_and_outside():
    target = Target("bandwidth", 57.0, 63.0, goal=0.99)
    (panel,) = plots.histogram(target, VALUES, 60.0).axes
    # 57.0, 57.1 .. 63.0 are 61 of 101 even steps; the limits themselves are allowed
    inside = labelled(panel, "within the limits")
    outside = labelled(panel, "outside")
    assert sum(bar.get_height() for bar in inside) == 61
    assert sum(bar.get_height() for bar in outside) == 40
    assert all(bar.get_hatch() for bar in outside)
    assert "61 of 103 samples are within the limits (59.22 %); asked for: 99 %" in legend_text(
        panel
    )
    assert "none or unbounded: 2" in legend_text(panel)
    assert labelled(panel, "bandwidth min 57 Hz").get_xdata()[0] == 57.0
    assert labelled(panel, "bandwidth max 63 Hz").get_xdata()[0] == 63.0
    assert labelled(panel, "nominal 60 Hz").get_xdata()[0] == 60.0
    assert panel.get_xlabel() == "bandwidth [Hz]"


def test_histogram_names_only_what_there_is():
    (panel,) = plots.histogram(Target("bandwidth", 50.0, 70.0), VALUES[:-2], 60.0).axes
    assert "outside" not in legend_text(panel)
    assert len(panel.containers) == 1
    assert panel.get_ylabel() == "samples per bin"


@pytest.mark.parametrize(
    ("target", "label"),
    [
        (Target("current"), "current, rms [A]"),
        (Target("capacitor_voltage_amplitude"),
         "capacitor voltage amplitude, peak, steady state, fundamental [V]"),
        (Target("peak_current"), "peak current, peak magnitude over all time [A]"),
        (Target("damping_ratio"), "damping ratio"),
        (Target("gain", maximum=0.03, at=300.0, across="resistor"),
         "gain across the resistor at 300 Hz"),
        (Target("settling_time", at=0.05), "settling time at 5 % [s]"),
        (Target("overshoot"), "overshoot [%]"),
    ],
)  # fmt: skip
def test_histogram_axis_carries_convention_and_unit(target, label):
    (panel,) = plots.histogram(target, np.linspace(2.0, 5.0, 40), 3.0).axes
    assert panel.get_xlabel() == label


def test_histogram_of_what_rounding_leaves_of_an_angle_is_one_value():
    target = Target("worst_closing_angle_current")
    (panel,) = plots.histogram(target, [1e-16, 2e-15, 0.0, 3e-14], 1e-14).axes
    assert labelled(panel, "nominal 0 deg")
    assert [bar.get_height() for bar in labelled(panel, "samples")] == [4]


def test_histogram_of_an_angle_is_in_degrees():
    target = Target("current_phase", maximum=np.pi / 3)
    (panel,) = plots.histogram(target, np.linspace(0.0, np.pi / 2, 50), np.pi / 4).axes
    assert panel.get_xlabel() == "current phase [deg]"
    assert labelled(panel, "nominal").get_xdata()[0] == pytest.approx(45.0)
    assert labelled(panel, "current phase max").get_xdata()[0] == pytest.approx(60.0)


@pytest.mark.parametrize("values", [[60.0], [60.0] * 9, [0.0, 0.0], [np.nan, np.nan], [1e-300]])
def test_histogram_of_one_value(values):
    (panel,) = plots.histogram(Target("bandwidth", maximum=1e6), values, 60.0).axes
    count = np.count_nonzero(np.isfinite(values))
    assert sum(bar.get_height() for bar in labelled(panel, "within")) == count
    # zeros have no size of their own: the picture is as wide as the limit asks for
    assert ("(beyond the picture)" in legend_text(panel)) is (values != [0.0, 0.0])


def test_histogram_without_limits_has_nothing_to_keep():
    (panel,) = plots.histogram(Target("bandwidth"), VALUES, 60.0).axes
    assert "limits" not in legend_text(panel)
    assert "103 samples" in legend_text(panel)
