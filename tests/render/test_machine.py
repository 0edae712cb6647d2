"""Results as JSON: each number under its own name, from values stated here and from unit loops."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from rlc.render import machine
from rlc.render.cautions import Caution
from rlc.solver.case import Case
from rlc.solver.extrema import Extrema
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.peaks import Peak
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.spread import Effect, Outcome, Yield
from rlc.solver.sweep import Column, Sweep
from rlc.solver.targets import Target

RESONANCE = 1 / (2 * math.pi)
# A few roundings on the way to a number of about one.
FEW_ROUNDINGS = 1e-14

#: No two numbers alike, so that none can stand in another's place.
OUTCOME = Outcome(
    target=Target(
        "gain", minimum=1.0, maximum=10.0, at=50.0, across="resistor", goal=0.7,
        rating="capacitor.rated_voltage",
    ),
    nominal=4.0, worst_low=1.25, worst_high=11.0, minimum=2.0, maximum=8.0, mean=4.5,
    percent_1=2.5, percent_50=4.25, percent_99=7.5, samples=np.array([2.0, 8.0]),
    share=Yield(0.75, 0.5, 0.875),
    effects=(Effect("capacitance", 3.0, 6.0), Effect("resistance", 5.0, 3.5)),
)  # fmt: skip


def unit(resistance: float, source: Any, *states: float) -> Case:
    """L = C = 1: natural angular frequency and characteristic impedance are 1."""
    loop = make_loop(resistance=resistance, inductance=1.0, capacitance=1.0)
    return Case(loop, source, *states)  # type: ignore[arg-type]


class Stated(Case):
    """A loop whose peaks are stated instead of solved for."""

    stated = (2.0, 3.0, 0.0, 0.5)

    def peak(self, element: str) -> Peak:
        return Peak(*(np.asarray(value) for value in self.stated))


def stated(source: Any, value: float, time: float, gap: float, angle: float) -> Case:
    case = Stated(make_loop(resistance=1.0, inductance=1.0, capacitance=1.0), source)
    object.__setattr__(case, "stated", (value, time, gap, angle))
    return case


def test_every_part_of_the_loop_under_its_own_name() -> None:
    loop = make_loop(
        resistance=2.0, inductance=3.0, capacitance=5.0, winding_resistance=7.0,
        series_resistance=11.0, load_resistance=13.0, source_resistance=17.0,
        source_inductance=19.0,
    )  # fmt: skip
    case = Case(loop, sine(10.0, 50.0, 0.25), 23.0, 29.0)  # type: ignore[arg-type]
    parts = (Part("resistance", 2.0, 1.5, 4.0), Part("inductance", 3.0, 3.0, 3.0))
    found = machine.loop(case, parts)
    rms = found["source"].pop("rms")
    # 10 V peak over sqrt(2), which is to be rounded twice.
    assert rms == pytest.approx(7.0710678118654755, rel=FEW_ROUNDINGS)
    assert found == {
        "resistance": 2.0, "inductance": 3.0, "capacitance": 5.0, "winding_resistance": 7.0,
        "series_resistance": 11.0, "load_resistance": 13.0, "source_resistance": 17.0,
        "source_inductance": 19.0,
        # 2 + 7 + 17 + 11 and 3 + 19
        "total_resistance": 37.0, "total_inductance": 22.0,
        "source": {
            "kind": "sine", "amplitude": 10.0, "frequency": 50.0, "largest": 10.0,
            "closing_angle": 0.25, "orders": [],
        },
        "capacitor_voltage": 23.0, "either_polarity": False, "initial_current": 29.0,
        "limits": {"resistance": [1.5, 4.0]},
    }  # fmt: skip


def test_a_dc_source_keeps_its_sign_and_has_no_angle() -> None:
    found = machine.loop(unit(1.0, constant(-3.0)))
    assert found["source"] == {
        "kind": "dc", "amplitude": -3.0, "rms": 3.0, "frequency": 0.0, "largest": 3.0,
        "closing_angle": None, "orders": [],
    }  # fmt: skip
    assert found["load_resistance"] is None
    assert found["limits"] == {}


def test_the_worst_closing_angle_is_a_word() -> None:
    found = machine.loop(unit(1.0, sine(1.0, 1.0, None)))
    assert found["source"]["closing_angle"] == "worst"


def test_units_are_those_of_the_numbers_beside_them() -> None:
    units = {name: entry["unit"] for name, entry in machine.quantities(values()).items()}
    assert units["current_phase"] == "rad"
    assert units["overshoot"] == "1"
    assert units["damping_ratio"] == "1"
    assert units["natural_frequency"] == "Hz"
    assert units["reactive_power"] == "var"
    assert units["let_through"] == "A^2 s"
    assert "deg" not in units.values()
    assert "%" not in units.values()
    rows = {row["name"]: row for row in machine.register(REGISTER.values())}
    assert {name: row["unit"] for name, row in rows.items()} == units
    assert machine.spread(replace(OUTCOME, target=Target("impedance_phase")))["unit"] == "rad"


def values() -> dict[str, float]:
    return dict.fromkeys(REGISTER, 0.5)


def test_what_does_not_exist_or_is_unbounded_is_null() -> None:
    given = {"bandwidth": 0.5, "ringing_frequency": math.nan, "let_through": math.inf}
    found = machine.quantities(given)
    assert {name: entry["value"] for name, entry in found.items()} == {
        "bandwidth": 0.5, "ringing_frequency": None, "let_through": None,
    }  # fmt: skip


def test_a_target_with_everything() -> None:
    # Inside the limit of 1 by 3/1, inside that of 10 by 6/10: the nearest one counts.
    assert machine.target(OUTCOME) == {
        "quantity": "gain", "at": 50.0, "across": "resistor",
        "min": 1.0, "max": 10.0, "goal": 0.7, "rating": "capacitor.rated_voltage",
        "nominal": 4.0, "worst_low": 1.25, "worst_high": 11.0,
        "yield": {"value": 0.75, "low": 0.5, "high": 0.875, "confidence": 0.95},
        "margin": 0.6, "verdict": "fails",
    }  # fmt: skip


def test_without_samples_a_target_keeps_its_keys() -> None:
    bare = replace(OUTCOME, target=Target("bandwidth", maximum=12.0), share=None)
    found = machine.target(bare)
    assert found["yield"] == {"value": None, "low": None, "high": None, "confidence": 0.95}
    assert (found["min"], found["max"], found["goal"], found["rating"]) == (None, 12.0, None, None)
    assert (found["at"], found["across"]) == (None, None)
    assert found["verdict"] == "holds"
    # (12 - 4)/12, rounded twice
    assert found["margin"] == pytest.approx(2 / 3, rel=FEW_ROUNDINGS)


def test_a_yield_of_nothing_is_a_number() -> None:
    none_kept = replace(OUTCOME, share=Yield(0.0, 0.0, 0.25))
    assert machine.target(none_kept)["yield"] == {
        "value": 0.0, "low": 0.0, "high": 0.25, "confidence": 0.95,
    }  # fmt: skip


def test_a_spread_with_everything() -> None:
    assert machine.spread(OUTCOME) == {
        "quantity": "gain", "at": 50.0, "across": "resistor", "unit": "1",
        "nominal": 4.0, "minimum": 2.0, "percent_1": 2.5, "percent_50": 4.25, "mean": 4.5,
        "percent_99": 7.5, "maximum": 8.0,
        "parts": [
            {"part": "capacitance", "low": 3.0, "high": 6.0},
            {"part": "resistance", "low": 5.0, "high": 3.5},
        ],
    }  # fmt: skip


def test_a_sweep_column_by_column() -> None:
    found = Sweep(
        np.array([1.0, 2.0, 4.0]),
        (
            Column("impedance", None, np.array([10.0, 20.0, np.inf])),
            Column("gain", "resistor", np.array([0.1, 0.2, 0.3])),
            Column("gain", "capacitor", np.array([3.0, 2.0, 1.0])),
        ),
        {2.0: "f_0"},
    )
    assert machine.sweep(found) == {
        "frequency": [1.0, 2.0, 4.0],
        "impedance": [10.0, 20.0, None],
        "gain_across_resistor": [0.1, 0.2, 0.3],
        "gain_across_capacitor": [3.0, 2.0, 1.0],
    }


@pytest.mark.parametrize("amplitude", [3.0, -3.0])
def test_elements_at_resonance(amplitude: float) -> None:
    """R = 0.5 of impedances of 1: the current is twice the source, in phase."""
    found = machine.elements(unit(0.5, sine(amplitude, RESONANCE)))
    hand = {
        "resistor": (3.0, 0.0),
        "inductor": (6.0, math.pi / 2),
        "capacitor": (6.0, -math.pi / 2),
    }
    assert list(found) == list(hand)
    for name, (level, phase) in hand.items():
        assert set(found[name]) == {"amplitude", "phase"}
        assert found[name]["amplitude"] == pytest.approx(level, rel=FEW_ROUNDINGS)
        # The frequency is off by half a unit in its last place, which Q = 2 doubles twice.
        assert found[name]["phase"] == pytest.approx(phase, abs=FEW_ROUNDINGS)


def test_elements_of_a_dc_source() -> None:
    found = machine.elements(unit(1.0, constant(-3.0)))
    assert {name: entry["amplitude"] for name, entry in found.items()} == {
        "resistor": 0.0, "inductor": 0.0, "capacitor": 3.0,
    }  # fmt: skip


def test_peaks_of_a_lossless_step() -> None:
    """i = 2 sin t, v_C = 2 (1 - cos t), v_L = 2 cos t for a step of 2 V."""
    found = machine.peaks(unit(0.0, constant(2.0)))
    hand = {
        "current": (2.0, math.pi / 2, 0.0),
        "capacitor": (4.0, math.pi, 2.0),
        "inductor": (2.0, 0.0, 0.0),
    }
    assert list(found) == list(hand)
    for name, (value, time, steady) in hand.items():
        peak = found[name]
        assert peak["value"] == pytest.approx(value, rel=FEW_ROUNDINGS)
        assert peak["time"] == pytest.approx(time, rel=FEW_ROUNDINGS)
        assert peak["steady"] == pytest.approx(steady, rel=FEW_ROUNDINGS)
        assert (peak["closing_angle"], peak["gap"], peak["known"]) == (None, 0.0, "proved")


def test_peaks_of_a_critical_step() -> None:
    """R = 2: i = t exp(-t), at most 1/e at 1 s; v_C creeps to 1 V."""
    found = machine.peaks(unit(2.0, constant(1.0)))
    assert found["current"]["value"] == pytest.approx(math.exp(-1), rel=FEW_ROUNDINGS)
    assert found["current"]["time"] == pytest.approx(1.0, rel=FEW_ROUNDINGS)
    assert found["capacitor"] == {
        "value": 1.0, "time": None, "closing_angle": None, "steady": 1.0, "gap": 0.0,
        "known": "approached, never reached",
    }  # fmt: skip


@pytest.mark.parametrize(
    ("peak", "time", "known"),
    [
        ((2.0, 3.0, 0.0, 0.5), 3.0, "proved"),
        ((2.0, 0.0, 0.0, 0.5), 0.0, "proved"),
        # Steady current of R = 1 at resonance from 1 V: 1 A.
        ((1.00005, 3.0, 0.0, 0.5), None, "proved: the steady state"),
        ((1.0002, 3.0, 0.0, 0.5), 3.0, "proved"),
        ((2.0, 3.0, 0.015, 0.5), 3.0, "searched; at most 1.5 % more"),
        ((2.0, math.inf, 0.0, 0.5), None, "approached, never reached"),
        ((math.inf, math.inf, 0.0, 0.5), None, "grows without bound"),
    ],
)
def test_how_a_peak_is_known(
    peak: tuple[float, float, float, float], time: float | None, known: str
) -> None:
    found = machine.peaks(stated(sine(1.0, RESONANCE, None), *peak))["current"]
    value, steady = found.pop("value"), found.pop("steady")
    assert value == (None if math.isinf(peak[0]) else peak[0])
    assert steady == pytest.approx(1.0, rel=FEW_ROUNDINGS)
    # A current at closing, or one that is only approached, has no worst angle: each is as bad.
    angle = 0.5 if 0 < peak[1] < math.inf else None
    assert found == {"time": time, "closing_angle": angle, "gap": peak[2], "known": known}


def test_a_given_closing_angle_is_kept_beside_a_peak() -> None:
    found = machine.peaks(stated(sine(1.0, RESONANCE, 0.75), 2.0, math.inf, 0.0, 0.5))
    assert found["current"]["closing_angle"] == 0.75


def test_extrema_in_their_order() -> None:
    found = Extrema(
        0.5, np.array([1.0, 2.0]), np.array([3.0, -4.0]), np.array([5.0, 6.0]),
        ("capacitor", "current"),
    )  # fmt: skip
    # The peak of either signal is stated as 4.
    rows = machine.extrema(found, stated(constant(1.0), 4.0, 2.0, 0.0, 0.5))
    assert rows == [
        {
            "time": 1.0, "current": 3.0, "capacitor_voltage": 5.0, "of": "capacitor_voltage",
            "largest": False,
        },
        {
            "time": 2.0, "current": -4.0, "capacitor_voltage": 6.0, "of": "current",
            "largest": True,
        },
    ]  # fmt: skip


def test_the_register_says_how_a_quantity_is_asked_for() -> None:
    (row,) = machine.register([REGISTER["gain"]])
    assert (row["name"], row["at"], row["across"], row["group"], row["symbol"]) == (
        "gain", "frequency", True, "steady", "|H|",
    )  # fmt: skip
    assert json.loads(json.dumps(row)) == row


def test_cautions_keep_their_order() -> None:
    found = machine.cautions([Caution("b", "Second."), Caution("a", "First.")])
    assert found == [{"id": "b", "text": "Second."}, {"id": "a", "text": "First."}]
