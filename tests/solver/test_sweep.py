"""The frequency response that is printed: its rows, and SciPy for its values."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.sweep import sweep

CASE = Case(make_loop(resistance=1e-3, inductance=1e-3, capacitance=1e-6), sine(10.0, 4e3))


def test_response_against_scipy() -> None:
    found = sweep(CASE, 100.0, 1e6, 50)
    w = 2 * np.pi * found.frequency
    # I/V = s C/(L C s^2 + R C s + 1), V_C/V = 1/(...), from the loop's equation.
    _, current = signal.freqs([1e-6, 0.0], [1e-9, 1e-9, 1.0], w)
    _, voltage = signal.freqs([1.0], [1e-9, 1e-9, 1.0], w)
    columns = {(each.quantity, each.across): each.values for each in found.columns}
    # Rounding of w^2 L C against 1 is magnified by the quality factor, 3e4.
    assert columns["current", None] == pytest.approx(np.abs(current) * 10 / 2**0.5, rel=1e-10)
    assert columns["gain", "capacitor"] == pytest.approx(np.abs(voltage), rel=1e-10)
    assert np.exp(1j * columns["current_phase", None]) == pytest.approx(
        current / np.abs(current), abs=1e-10
    )


def test_the_narrowest_resonance_is_met_at_its_top() -> None:
    found = sweep(CASE, None, None, 10)
    current = next(each.values for each in found.columns if each.quantity == "current")
    assert current.max() == pytest.approx(10 / 2**0.5 / 1e-3, rel=1e-12)
    assert set(found.marks.values()) == {"f_1", "f_0", "f_2", "source"}
    assert np.all(np.diff(found.frequency) > 0)
    assert found.frequency.size == 10 + 4


def test_a_step_on_a_marked_frequency_is_one_row() -> None:
    natural = float(REGISTER["natural_frequency"](CASE))
    assert sweep(CASE, natural / 10, natural * 10, 3).frequency.size == 3 + 3


def test_range_goes_a_decade_beyond_natural_frequency_and_source() -> None:
    found = sweep(CASE, None, None, 2)
    natural = float(REGISTER["natural_frequency"](CASE))
    assert natural > 4e3
    assert found.frequency[[0, -1]] == pytest.approx([400.0, natural * 10], rel=1e-12)


def test_a_dc_source_has_no_current_at_a_frequency() -> None:
    found = sweep(Case(CASE.loop, constant(5.0)), None, None, 5)
    assert "current" not in {each.quantity for each in found.columns}
    assert "source" not in found.marks.values()


@pytest.mark.parametrize(
    ("start", "stop", "points", "said"),
    [
        (0.0, 1e3, 5, "start = '0 Hz': must be above zero"),
        (2e3, 1e3, 5, "start = '2000 Hz': must be above zero and below stop, 1000 Hz"),
        (1e3, 2e3, 1, "points = 1: must be from 2 to 100000"),
    ],
)
def test_empty_ranges(start: float, stop: float, points: int, said: str) -> None:
    with pytest.raises(InputError, match=said):
        sweep(CASE, start, stop, points)
