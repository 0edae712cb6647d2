"""The switch-on as tables: peaks, turning points, closings and limits in time."""

from __future__ import annotations

import math

import numpy as np
import pytest
from stated import rows, stated, unit

from rlc.render import machine, switching
from rlc.render.limits import limits_in_time
from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.closing import Closings
from rlc.solver.extrema import Extrema, first_extrema
from rlc.solver.loop import make_loop
from rlc.solver.source import ANY_ANGLE, Order, Window, constant, shaped, sine
from rlc.solver.targets import Target

RESONANCE = 1 / (2 * math.pi)
PEAKS = {
    "current": (2.0, 3.0, 0.015, math.pi / 6),
    "capacitor": (5.0, math.inf, 0.0, math.pi / 6),
    "inductor": (math.inf, math.inf, 0.0, math.pi / 6),
}


def test_peaks_of_a_critical_step() -> None:
    """R = 2, 1 V: i = t exp(-t), 1/e at 1 s; v_C creeps to 1 V; v_L is 1 V at closing."""
    assert rows(switching.peaks(unit(2.0, constant(1.0)))) == [
        ["current", "367.9 mA", "1 s", "0 A", "proved"],
        ["capacitor voltage", "1 V", "-", "1 V", "approached, never reached"],
        ["inductor voltage", "1 V", "0 s", "0 V", "proved"],
    ]


def test_how_each_peak_is_known() -> None:
    """R = 1 at resonance: 1 V across each part in steady state, 1 A."""
    assert rows(switching.peaks(stated(sine(1.0, RESONANCE, None), **PEAKS))) == [
        ["current", "2 A", "3 s", "30 deg", "1 A", "searched; at most 1.5 % more"],
        ["capacitor voltage", "5 V", "-", "any", "1 V", "approached, never reached"],
        ["inductor voltage", "unbounded", "-", "any", "1 V", "grows without bound"],
    ]


def test_headings_go_with_the_source() -> None:
    def last(source: object) -> str:
        return str(switching.peaks(unit(1.0, source)).columns[-2].header)  # type: ignore[arg-type]

    assert last(sine(1.0, RESONANCE)) == "steady\namplitude"
    assert last(sine(1.0, RESONANCE, orders=[Order(3, 0.1)])) == "steady\npeak"
    assert last(shaped(shapes.ramp(1.0, 1.0))) == "final"


def test_the_charge_of_each_peak_where_its_polarity_is_open() -> None:
    """Without losses 1 V onto 2 V swings down to 0, onto -2 V up to 4 V with 3 A."""
    case = unit(0.0, constant(1.0), 2.0, either_polarity=True)
    table = switching.peaks(case)
    assert [str(column.header) for column in table.columns][3] == "charge"
    found = rows(table)
    assert found[0][:4] == ["current", "3 A", "1.571 s", "-2 V"]
    assert found[1][:4] == ["capacitor voltage", "4 V", "3.142 s", "-2 V"]
    peaks = machine.peaks(case)
    assert [peaks[name]["polarity"] for name in ("current", "capacitor")] == [-1.0, -1.0]
    assert "polarity" not in machine.peaks(unit(0.0, constant(1.0), 2.0))["current"]


def test_a_peak_of_the_steady_train_is_said_to_be_so() -> None:
    """A slow charge rises pulse by pulse to the mean; its last crest is that of the train."""
    source = shaped(shapes.pulse(10.0, 0.5, period=1.0, count=None))
    loop = make_loop(resistance=10.0, inductance=1e-3, capacitance=1.0)
    found = rows(switching.peaks(Case(loop, source)))
    assert found[1][2:] == ["-", "-", "reached by the steady train"]


# --- turning points


def turning(*voltages: float) -> Extrema:
    return Extrema(
        math.pi / 6, np.array([1.0, 2.0, 3.0]), np.array([-2.0, 1e-15, 1.0]),
        np.array(voltages), ("current", "capacitor", "current"),
    )  # fmt: skip


def test_the_governing_extremum_is_named() -> None:
    case = stated(sine(1.0, RESONANCE, math.pi / 6), **PEAKS)
    table = switching.extrema(turning(0.0, 5.0, 4.0), case)
    assert str(table.title) == "First extrema, closed at 30 deg"
    assert rows(table) == [
        ["1 s", "-2 A", "0 V", "largest current"],
        # 1e-15 A beside a peak of 2 A is rounding of zero
        ["2 s", "0 A", "5 V", "largest capacitor voltage"],
        ["3 s", "1 A", "4 V", "turn of the current"],
    ]
    assert str(switching.extrema(turning(0, 5, 4), stated(constant(1.0), **PEAKS)).title) == (
        "First extrema"
    )
    assert switching.beyond(turning(0.0, 5.0, 4.0), case) == ""


@pytest.mark.parametrize(
    ("time", "told"),
    [
        (7.0, "comes later, at 7 s."), (math.inf, "is only approached."),
        (0.0, "is that at closing."), (2.5, "is no turning point: it comes at 2.5 s."),
    ],
)  # fmt: skip
def test_a_peak_beyond_the_first_extrema_is_told(time: float, told: str) -> None:
    peaks = PEAKS | {"capacitor": (5.0, time, 0.0, 0.5)}
    said = switching.beyond(turning(0.0, 4.0, 3.0), stated(constant(1.0), **peaks))
    assert said == f"The largest capacitor voltage, 5 V, {told}"


def test_what_another_closing_makes_larger_is_told() -> None:
    """R = 0.2 at a tenth of resonance: current and capacitor voltage have their own angles."""
    case = unit(0.2, sine(10.0, 0.1 * RESONANCE, None))
    said = switching.beyond(first_extrema(case), case)
    worst = f"{float(case.peak('capacitor').value):.4g} V"
    assert f"At its own worst closing the capacitor voltage reaches {worst}." in said
    assert "the current reaches" not in said
    given = unit(0.2, sine(10.0, 0.1 * RESONANCE, 1.0))
    assert "worst" not in switching.beyond(first_extrema(given), given)


def test_a_train_has_the_extrema_of_its_first_pulses() -> None:
    """Each pulse of 1 s every 4 s turns the current; the largest of all comes with a later one."""
    source = shaped(shapes.pulse(1.0, 1.0, period=4.0, count=None))
    case = unit(0.2, source)
    found = first_extrema(case)
    assert found.time.size == 8
    assert np.all(np.diff(found.time) > 0)
    # Every 4 s is no period of ringing, 6.3 s: what rises is spread over a few pulses.
    largest = rows(switching.extrema(found, case))
    named = sum("largest" in row[-1] for row in largest)
    assert named + switching.beyond(found, case).count("The largest") == 2


# --- closings


def test_closings_beside_the_worst() -> None:
    case = stated(sine(1.0, RESONANCE, ANY_ANGLE), **PEAKS)
    given = {"current": Closings(0.5, 1.0, 1.5)}
    table = switching.closings(given, case)
    assert str(table.title) == "Peaks over closings at any angle"
    assert rows(table) == [["current", "500 mA", "1 A", "1.5 A", "2 A", "30 deg"]]
    window = stated(sine(1.0, RESONANCE, Window(-math.pi / 6, math.pi / 6)), **PEAKS)
    title = str(switching.closings(given, window).title)
    assert title == "Peaks over closings between -30 deg and 30 deg"
    found = machine.closings(given, case)["current"]
    assert found.pop("closing_angle") == pytest.approx(math.pi / 6, rel=1e-15)
    assert found == {"percent_1": 0.5, "percent_50": 1.0, "percent_99": 1.5, "worst": 2.0}


# --- limits in time


def test_limits_of_a_lossless_swing() -> None:
    """v = 100 (1 - cos t), i = 100 sin t: 150 V at 120 deg, beyond it again and again."""
    case = unit(0.0, constant(100.0))
    targets = (
        Target("peak_current", maximum=200.0),
        Target("peak_capacitor_voltage", maximum=150.0, rating="capacitor.rated_voltage"),
        # neither a lower limit nor another quantity is passed in time
        Target("peak_current", minimum=1.0), Target("bandwidth", maximum=1.0),
    )  # fmt: skip
    found = limits_in_time(case, targets)
    at = math.acos(-0.2)  # 120 V: 1 - cos t = 1.2
    assert rows(switching.limits(found, case)) == [
        ["current", "200 A", "never", "-", "target"],
        ["capacitor voltage", "150 V", "2.094 s", "lasting", "capacitor.rated_voltage"],
        ["capacitor voltage", "120 V", f"{at:.4g} s", "lasting", "extra-low voltage, dc"],
    ]
    numbers = machine.exceeded(found)
    assert numbers[0] == {
        "of": "current", "limit": 200.0, "stands_for": "target", "exceeded": False,
        "first": None, "lasts": 0.0, "again_and_again": False,
    }  # fmt: skip
    # closed by bisection, to a part in 1e9 or better
    assert numbers[1]["first"] == pytest.approx(2 * math.pi / 3, rel=1e-9)
    assert (numbers[1]["lasts"], numbers[1]["again_and_again"]) == (None, True)


def test_a_single_passing_has_a_duration() -> None:
    """R = 2, 1 A beyond: i = 10 t exp(-t) is above 2 A between two roots of t exp(-t) = 0.2."""
    from scipy.special import lambertw

    first, last = -lambertw(-0.2, 0).real, -lambertw(-0.2, -1).real
    case = unit(2.0, constant(10.0))
    (row, _) = limits_in_time(case, (Target("peak_current", maximum=2.0),))
    assert row.first == pytest.approx(first, rel=1e-9)
    assert row.lasts == pytest.approx(last - first, rel=1e-9)
    assert "worst" not in str(switching.limits([row], case).title)


def test_a_train_passes_a_limit_again_and_again_or_in_its_first_pulses() -> None:
    """10 V over 10 ohm onto nothing: 1 A at first, a little above 0.5 A in the steady train."""
    source = shaped(shapes.pulse(10.0, 1e-3, period=2e-3, count=None))
    case = Case(make_loop(resistance=10.0, inductance=1e-9, capacitance=1e-3), source)
    targets = (Target("peak_current", maximum=0.4), Target("peak_current", maximum=0.8))
    often, early, _ = limits_in_time(case, targets)
    assert math.isinf(often.lasts)
    # tau is 10 ms, d = exp(-0.1) in a pulse and in a pause: the second pulse begins at 1 - d + d^2
    # = 0.914 A, the third at 0.843 A, which falls to 0.8 A on the way; the fourth at 0.78 A.
    d = math.exp(-0.1)
    third = 1 - (1 - (1 - d + d * d) * d) * d
    lasts = 2e-3 + 10e-3 * math.log(third / 0.8)
    # The current rises within some L/R = 0.1 ns, three times.
    assert early.lasts == pytest.approx(lasts, abs=1e-8)


def test_extra_low_voltage_goes_with_the_source() -> None:
    (alternating,) = limits_in_time(unit(1.0, sine(1.0, 1.0, None)), ())
    assert alternating.limit == pytest.approx(50 * math.sqrt(2), rel=1e-15)
    assert "worst closing" in str(
        switching.limits([alternating], unit(1.0, sine(1.0, 1.0, None))).title
    )
    (surge,) = limits_in_time(unit(1.0, shaped(shapes.surge(1.0, 1.0, 50.0))), ())
    assert surge.limit == 120.0
