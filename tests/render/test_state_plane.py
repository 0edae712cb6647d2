"""Current over capacitor voltage, from closing to the final point or ellipse."""

from __future__ import annotations

import numpy as np
import pytest
from pictures import FREQUENCY, INRUSH, RMS, audio, curve, labelled

from rlc.render import plots
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant


def test_state_plane_runs_from_closing_to_the_final_point():
    case = Case(make_loop(**INRUSH), constant(24.0), 5.0, 10.0)
    (panel,) = plots.state_plane(case).axes
    across, up = curve(panel)
    assert (across[0], up[0]) == (5.0, 10.0)
    final = labelled(panel, "final")
    assert final.get_xdata()[0] == pytest.approx(24.0)
    assert final.get_ydata()[0] == pytest.approx(0.0, abs=1e-12)
    assert (panel.get_xlabel(), panel.get_ylabel()) == ("capacitor voltage [V]", "current [A]")
    assert len(panel.texts) == 2  # two arrows


def test_state_plane_ends_on_the_ellipse_of_the_steady_state():
    """Without a load i = C dv/dt: half axes V_C and omega C V_C."""
    (panel,) = plots.state_plane(audio()).axes
    ellipse = labelled(panel, "steady state")
    across, up = ellipse.get_data()
    omega = 2 * np.pi * FREQUENCY
    amplitude = RMS * np.sqrt(2) / np.hypot(12.5, omega * 33e-3 - 1 / (omega * 1e-6))
    on = (across * omega * 1e-6 / amplitude) ** 2 + (up / amplitude) ** 2
    np.testing.assert_allclose(on, 1.0, rtol=1e-11)
