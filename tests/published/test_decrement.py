"""A laboratory's table of logarithmic decrements: amplitudes some swings apart."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant

from .printed import ask, crosses, printed

# MIPT student laboratory report 3.2.4, free oscillations, table of decrements (repository
# ajlekcahdp4/general-physics-labs at c87c09c1, electricity-and-magnetism/3-2-4/main.tex, MIT).
INDUCTANCE = 0.146
CAPACITANCE = 5e-9


def discharge(resistance, amplitude=1.0, inductance=INDUCTANCE):
    loop = make_loop(resistance=resistance, inductance=inductance, capacitance=CAPACITANCE)
    return Case(loop, constant(0), capacitor_voltage=amplitude)


def resistance_for(decrement):
    """From decrement = 2 pi zeta/sqrt(1 - zeta^2) and R = 2 zeta sqrt(L/C)."""
    damping_ratio = decrement / np.hypot(2 * np.pi, decrement)
    return 2 * damping_ratio * np.sqrt(INDUCTANCE / CAPACITANCE)


@pytest.mark.parametrize(
    ("swings", "first", "last", "decrement"),
    [
        (3, 4, 1, "0.462"),
        (3, 3, 0.5, "0.597"),
        (2, 2.2, 0.5, "0.741"),
        (2, 4, 0.6, "0.949"),
        (2, 3.4, 0.4, "1.070"),
        (2, 3, 0.3, "1.151"),
    ],
)
def test_printed_decrement_takes_one_printed_amplitude_to_the_other(swings, first, last, decrement):
    ends = []
    for value in (printed(decrement).low, printed(decrement).high):
        case = discharge(resistance_for(value), first)
        assert ask("logarithmic_decrement", case) == pytest.approx(value, rel=1e-13)
        later = case.waveforms([swings / ask("ringing_frequency", case)])
        ends.append(float(later.capacitor_voltage[0]))
    assert crosses(last, *ends)


def test_quality_factor_of_the_lightest_damping():
    """Decrement 0.458: the report's pi over decrement is 6.9, and so is the exact value."""
    assert printed("6.9").covers(ask("quality_factor", discharge(resistance_for(0.458))))


def test_quality_factor_of_the_heaviest_damping_is_above_the_printed_rule():
    """Decrement 1.204: pi over it is the printed 2.6; sqrt((pi/d)^2 + 1/4) is 2.66."""
    case = discharge(resistance_for(1.204))
    assert printed("2.6").covers(np.pi / ask("logarithmic_decrement", case))
    assert printed("2.66").covers(ask("quality_factor", case))
    assert not printed("2.6").covers(ask("quality_factor", case))


def test_critical_resistance_in_theory():
    """2 sqrt(L/C) is 12.6 kohm for 0.2 H and 5 nF."""
    resistance = printed("12600", figures=3)
    ends = [
        ask("damping_ratio", discharge(value, inductance=0.2))
        for value in (resistance.low, resistance.high)
    ]
    assert crosses(1.0, *ends)


def test_critical_resistance_read_off_a_line_is_wrong():
    """264 ohm is far from critical: one over R was plotted where one over R squared was meant."""
    # By hand, 2 sqrt(0.146 H/5 nF) = 10.81 kohm.
    wrong = discharge(264)
    assert printed("0.0244").covers(ask("damping_ratio", wrong))
    assert ask("overshoot", wrong) > 0.9
    critical = printed("10.81")
    ends = [ask("damping_ratio", discharge(1e3 * r)) for r in (critical.low, critical.high)]
    assert crosses(1.0, *ends)
