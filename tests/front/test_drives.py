"""Sources from Python: numbers, text and pint quantities give the same course."""

from __future__ import annotations

import doctest
import math
from typing import Any

import numpy as np
import pint
import pytest

import rlc
from rlc.front import drives
from rlc.solver import shapes
from rlc.solver.source import ANY_ANGLE, Order, Window

UNITS = pint.UnitRegistry()
LOOP = {"resistance": "10 ohm", "inductance": "1 mH", "capacitance": "1 uF"}


def test_harmonics_in_three_ways() -> None:
    texts = rlc.harmonics(
        rms="230 V", frequency="50 Hz", orders=[(5, "6 %"), (7, "40000 ppm", "90 deg")]
    )
    numbers = rlc.harmonics(rms=230, frequency=50, orders=[[5, 0.06], (7, 0.04, math.pi / 2)])
    quantities = rlc.harmonics(
        rms=0.23 * UNITS.kV,
        frequency=50 * UNITS.Hz,
        orders=[Order(np.int64(5), 0.06), (7, 0.04 * UNITS.dimensionless, 90 * UNITS.deg)],
    )
    assert texts.kind == "harmonics"
    assert texts.orders == numbers.orders == quantities.orders
    assert texts.orders == ((5, 0.06, 0.0), (7, 0.04, math.pi / 2))
    for each in (texts, numbers, quantities):
        assert float(each.amplitude) == pytest.approx(230 * math.sqrt(2), rel=1e-15)


@pytest.mark.parametrize(
    ("orders", "rule"),
    [
        ([], "is empty; without harmonics it is a sine"),
        ([5], "must hold (number, share) or (number, share, phase)"),
        (["56"], "must hold (number, share) or (number, share, phase)"),
        ([(5,)], "must hold (number, share) or (number, share, phase)"),
        ([(5.0, "6 %")], "must be a whole number from 2 to 1000, without quotes"),
        ([(1, "6 %")], "must be a whole number from 2 to 1000, without quotes"),
        ([(5, "6 V")], "is in V, a unit of voltage, and ratio is expected"),
        ([(5, [0.1, 0.2])], "must be one value, not several"),
        ([(5, "6 %", "180")], "has no unit"),
    ],
)
def test_orders_that_are_refused(orders: list[Any], rule: str) -> None:
    with pytest.raises(rlc.InputError) as caught:
        rlc.harmonics(rms="230 V", frequency="50 Hz", orders=orders)
    assert (caught.value.name, caught.value.rule) == ("orders", rule)


def test_orders_that_only_the_solver_refuses() -> None:
    with pytest.raises(rlc.InputError, match="is given twice"):
        rlc.harmonics(rms=1, frequency=1, orders=[(5, 0.1), (5, 0.2)])
    with pytest.raises(rlc.InputError, match="must be zero or more"):
        rlc.harmonics(rms=1, frequency=1, orders=[(5, -0.1)])
    with pytest.raises(rlc.InputError, match="not both or neither"):
        rlc.harmonics(frequency=1, orders=[(5, 0.1)])


@pytest.mark.parametrize("make", [rlc.sine, rlc.harmonics])
def test_closing_angles(make: Any) -> None:
    more = {"orders": [(5, 0.1)]} if make is rlc.harmonics else {}

    def closed(angle: Any) -> Any:
        return make(rms="24 V", frequency="50 Hz", closing_angle=angle, **more)

    assert closed("random").window == ANY_ANGLE
    assert closed(Window(0.0, 1.0)).window == (0.0, 1.0)
    around = closed("0 deg ± 15 deg")
    assert around.closing_angle is None
    assert around.window == pytest.approx((-math.pi / 12, math.pi / 12), rel=1e-15)
    assert closed("worst").worst_angle
    assert closed("worst").window is None
    for angle in (math.pi / 2, "90 deg", 90 * UNITS.deg):
        assert float(closed(angle).closing_angle) == math.pi / 2
    with pytest.raises(rlc.InputError) as caught:
        closed("0 deg ± 200 deg")
    assert (caught.value.name, caught.value.value) == ("closing_angle", "0 deg ± 200 deg")
    with pytest.raises(rlc.InputError, match=r"closing_angle = 'Worst': does not begin"):
        closed("Worst")


@pytest.mark.parametrize(
    ("voltage", "rise"), [("-12 V", "2 ms"), (-12, 2e-3), (-12 * UNITS.V, 2 * UNITS.ms)]
)
def test_a_ramp(voltage: Any, rise: Any) -> None:
    source = rlc.ramp(voltage, rise)
    assert source.kind == "ramp"
    assert isinstance(source.shape, shapes.Piecewise)
    found = source.shape.at([0.0, 1e-3, 2e-3, 5.0])
    np.testing.assert_allclose(found, [0, -6, -12, -12], rtol=5e-16)


def test_a_pulse_alone_counted_and_until_steady() -> None:
    times = [0.5e-3, 1.5e-3, 10.5e-3, 20.5e-3]
    one = rlc.pulse("5 V", "1 ms").shape
    two = rlc.pulse(5, 1e-3, period=10 * UNITS.ms, count=2).shape
    all_of_them = rlc.pulse("5 V", "1 ms", period="10 ms", count="until steady").shape
    for shape, levels in ((one, [5, 0, 0, 0]), (two, [5, 0, 5, 0]), (all_of_them, [5, 0, 5, 5])):
        assert isinstance(shape, shapes.Piecewise)
        np.testing.assert_array_equal(shape.at(times), levels)
    slow = rlc.pulse("5 V", "1 ms", rise_time="200 us", fall_time="400 us").shape
    assert isinstance(slow, shapes.Piecewise)
    found = slow.at([0.1e-3, 0.2e-3, 1.1e-3, 1.3e-3])
    np.testing.assert_allclose(found, [2.5, 5.0, 2.5, 0.0], atol=1e-13)


def test_a_surge_is_the_one_of_its_times() -> None:
    by_text = rlc.surge("-6 kV", "1.2 us", "50 us")
    assert by_text.kind == "surge"
    assert by_text.shape == rlc.surge(-6e3, 1.2 * UNITS.us, 50e-6).shape
    assert by_text.shape == shapes.surge(-6e3, 1.2e-6, 50e-6)


def test_a_record_of_arrays_lists_and_quantities() -> None:
    time, voltage = [5e-3, 6e-3, 8e-3], np.array([1.0, 3.0, -2.0])
    for source in (
        rlc.recorded(time, voltage),
        rlc.recorded(np.array([5, 6, 8]) * UNITS.ms, voltage * UNITS.V),
    ):
        assert source.kind == "recorded"
        assert isinstance(source.shape, shapes.Piecewise)
        found = source.shape.at([0.0, 0.5e-3, 2e-3, 9.0])
        np.testing.assert_allclose(found, [1, 2, 0.5, -2], rtol=1e-12)


@pytest.mark.parametrize(
    ("make", "name"),
    [
        (lambda: rlc.ramp("5", "1 ms"), "voltage"),
        (lambda: rlc.ramp("5 V", "1 V"), "rise_time"),
        (lambda: rlc.ramp("5 V", 0), "rise_time"),
        (lambda: rlc.ramp([1.0, 2.0], 1.0), "voltage"),
        (lambda: rlc.pulse("5 V", "-1 ms"), "width"),
        (lambda: rlc.pulse("5 V", "1 ms", rise_time="-1 us"), "rise_time"),
        (lambda: rlc.pulse("5 V", "1 ms", period="5 ms"), "period"),
        (lambda: rlc.pulse("5 V", "1 ms", period="5 ms", count=2.0), "count"),  # type: ignore[arg-type]
        (lambda: rlc.pulse("5 V", "1 ms", period="5 ms", count="for ever"), "count"),
        (lambda: rlc.pulse("5 V", "1 ms", period="5 ms", count=0), "count"),
        (lambda: rlc.surge("5 V", "0 s", "50 us"), "front_time"),
        (lambda: rlc.surge("5 V", "50 us", "1 us"), "half_value_time"),
        (lambda: rlc.recorded([0, 1], "5 V"), "time, voltage"),
        (lambda: rlc.recorded([0, math.nan], [1, 2]), "time"),
        (lambda: rlc.recorded([0, 1, 1], [1, 2, 3]), "time"),
    ],
)
def test_bad_values_name_the_argument(make: Any, name: str) -> None:
    with pytest.raises(rlc.InputError) as caught:
        make()
    assert caught.value.name == name


def test_charge_of_either_polarity() -> None:
    loop = rlc.Loop(**LOOP)
    for given, volts, either in (
        ({"capacitor_voltage": "± 325 V"}, 325.0, True),
        ({"capacitor_voltage": "+- 325 V", "either_polarity": True}, 325.0, True),
        ({"capacitor_voltage": "-325 V", "either_polarity": True}, -325.0, True),
        ({"capacitor_voltage": 325 * UNITS.V, "either_polarity": True}, 325.0, True),
        ({"capacitor_voltage": "-325 V"}, -325.0, False),
        ({}, 0.0, False),
    ):
        case = rlc.Case(loop, rlc.constant("5 V"), **given)  # type: ignore[arg-type]
        assert (float(case.capacitor_voltage), case.either_polarity) == (volts, either)
    with pytest.raises(rlc.InputError, match=r"capacitor_voltage = '± 5': has no unit"):
        rlc.Case(loop, rlc.constant("5 V"), capacitor_voltage="± 5")  # type: ignore[arg-type]


def test_the_examples_run() -> None:
    found = doctest.testmod(drives)
    assert found.failed == 0
    assert found.attempted > 0
