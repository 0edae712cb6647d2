"""The Python interface: numbers, text and pint quantities give the same loop."""

from __future__ import annotations

import doctest
import math
import subprocess
import sys

import numpy as np
import pint
import pytest

import rlc
from rlc.front import marking, units, values

UNITS = pint.UnitRegistry()


def test_three_ways_to_say_the_same() -> None:
    numbers = rlc.Loop(resistance=4.7, inductance=33e-3, capacitance=1e-6)
    texts = rlc.Loop(resistance="4.7 ohm", inductance="33 mH", capacitance="1u0")
    quantities = rlc.Loop(
        resistance=4.7 * UNITS.ohm, inductance=33 * UNITS.mH, capacitance=1 * UNITS.uF
    )
    assert repr(numbers) == repr(texts) == repr(quantities)


def test_batches_of_quantities() -> None:
    loop = rlc.Loop(
        resistance=np.array([1.0, 2.0]) * UNITS.kohm, inductance="1 mH", capacitance=1e-6
    )
    assert loop.shape == (2,)
    assert loop.resistance.tolist() == [1000.0, 2000.0]


@pytest.mark.parametrize(
    "bad", [{"resistance": "4.7"}, {"inductance": 0}, {"capacitance": math.nan}]
)
def test_bad_values_name_the_argument(bad: dict[str, object]) -> None:
    good: dict[str, object] = {"resistance": 1.0, "inductance": 1.0, "capacitance": 1.0}
    with pytest.raises(rlc.InputError) as caught:
        rlc.Loop(**(good | bad))  # type: ignore[arg-type]
    assert caught.value.name == next(iter(bad))


def test_a_sine_is_rms_or_amplitude_and_its_angle_may_be_text() -> None:
    assert rlc.sine(rms="24 V", frequency="50 Hz").amplitude == pytest.approx(24 * math.sqrt(2))
    assert rlc.sine(amplitude=24, frequency=50 * UNITS.Hz).amplitude == 24
    assert rlc.sine(rms=1, frequency=1, closing_angle="90 deg").closing_angle == math.pi / 2
    assert rlc.sine(rms=1, frequency=1, closing_angle="worst").worst_angle
    for given in ({}, {"rms": 1, "amplitude": 1}):
        with pytest.raises(rlc.InputError, match="not both or neither"):
            rlc.sine(frequency=1, **given)  # type: ignore[arg-type]


def test_a_case_answers_with_units_at_the_edge() -> None:
    loop = rlc.Loop(resistance="10 ohm", inductance="1 mH", capacitance="1 uF")
    case = rlc.Case(loop, rlc.constant("5 V"), capacitor_voltage=1 * UNITS.V)
    assert case.capacitor_voltage == 1.0
    # Discharged by one volt less: the step is four volts.
    waveforms = case.waveforms([0, 1] * UNITS.us)
    assert waveforms.capacitor_voltage[0] == 1.0
    assert float(case.quantity("impedance", at="1 kHz")) == pytest.approx(
        abs(10 + 1j * (2e3 * np.pi * 1e-3 - 1 / (2e3 * np.pi * 1e-6))), rel=1e-14
    )
    with pytest.raises(rlc.InputError, match="is not in the register"):
        case.quantity("impedence")
    with pytest.raises(rlc.InputError, match="is in s, a unit of time"):
        case.quantity("impedance", at="1 s")


def test_every_public_name_is_there_and_no_other() -> None:
    for name in rlc.__all__:
        assert getattr(rlc, name) is not None
    assert set(dir(rlc)) == set(rlc.__all__)
    with pytest.raises(AttributeError):
        _ = rlc.loop_of_wonders


def test_import_loads_nothing_slow() -> None:
    slow = ("scipy", "matplotlib", "pint", "pydantic", "numpy")
    code = f"import rlc, sys; print([name for name in {slow} if name in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_the_example_in_the_package_runs() -> None:
    for module in (rlc, units, marking, values):
        found = doctest.testmod(module)
        assert found.failed == 0
        assert found.attempted > 0


def test_lists_arrays_and_no_load_in_some_loops() -> None:
    loop = rlc.Loop(
        resistance=[1.0, 2.0],
        inductance="1 mH",
        capacitance=1e-6,
        load_resistance=np.array([np.inf, 50.0]),
    )
    assert loop.load_conductance.tolist() == [0.0, 0.02]
    case = rlc.Case(loop, rlc.constant(5.0))
    assert case.waveforms([0, 1e-6]).current.shape == (2, 2)
    with pytest.raises(rlc.InputError, match="must be zero or more"):
        case.waveforms([-1e-3])
    with pytest.raises(rlc.InputError, match="must be zero or more"):
        case.steady_at(-5.0)
    with pytest.raises(rlc.InputError, match="do not go together"):
        rlc.Loop(resistance=[1.0, 2.0], inductance=[1.0, 2.0, 3.0], capacitance=1.0)


def test_check_refuses_flags_and_counts_that_make_no_sense() -> None:
    with pytest.raises(rlc.InputError, match="is no flag"):
        rlc.check(flags={"--resistence": "5 ohm"})
    flags = {"--resistance": "5 ohm", "--inductance": "1 mH", "--capacitance": "1 uF"}
    with pytest.raises(rlc.InputError, match="must be a whole number"):
        rlc.check(flags=flags | {"--source-dc": "5 V"}, samples=5.5)  # type: ignore[arg-type]
