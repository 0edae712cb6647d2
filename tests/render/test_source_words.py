"""Every kind of source in words and in numbers."""

from __future__ import annotations

import math

import numpy as np
import pytest
from stated import unit

from rlc.render import sources
from rlc.solver import shapes
from rlc.solver.source import ANY_ANGLE, Order, Source, Window, constant, shaped, sine

RAMP = shaped(shapes.ramp(48.0, 50e-6))
ONE = shaped(shapes.pulse(-48.0, 1e-4))
TRAIN = shaped(shapes.pulse(48.0, 1e-4, 1e-6, 2e-6, 250e-6, 20))
STEADY = shaped(shapes.pulse(48.0, 1e-4, 1e-6, 2e-6, 250e-6, None))
SURGE = shaped(shapes.surge(1000.0, 1.2e-6, 50e-6))
RECORD = shaped(shapes.recorded([1.0, 2.0, 4.0], [3.0, -5.0, 2.0]))
FIFTH = (Order(5, 0.06, math.pi), Order(7, 0.08))
HARMONICS = sine(rms=230.0, frequency=50.0, closing_angle=ANY_ANGLE, orders=FIFTH)


@pytest.mark.parametrize(
    ("source", "states", "said"),
    [
        (
            constant(-3.0), (-5.0, 2.0),
            "Source: dc, -3 V stepped on at t = 0; -5 V on the capacitor at closing;"
            " 2 A in the loop.",
        ),
        (
            constant(3.0), (0.0, -2.0),
            "Source: dc, 3 V stepped on at t = 0; 0 V on the capacitor at closing;"
            " -2 A in the loop.",
        ),
        # 3 V / sqrt(2) = 2.1213 V
        (
            sine(3.0, 50.0, math.pi / 6), (),
            "Source: sine, 2.121 V rms (3 V peak), 50 Hz; closing angle: 30 deg from the rising"
            " zero; 0 V on the capacitor at closing.",
        ),
        (
            sine(3.0, 50.0, None), (4.0,),
            "Source: sine, 2.121 V rms (3 V peak), 50 Hz; closing angle: the worst; 4 V on the"
            " capacitor at closing.",
        ),
        (
            sine(3.0, 50.0, Window(-math.pi / 12, math.pi / 12)), (),
            "Source: sine, 2.121 V rms (3 V peak), 50 Hz; closing angle: between -15 deg and"
            " 15 deg from the rising zero; 0 V on the capacitor at closing.",
        ),
        (
            RAMP, (),
            "Source: ramp, from 0 V to 48 V in 50 us, then held; 0 V on the capacitor at closing.",
        ),
        (
            ONE, (),
            "Source: one pulse of -48 V, 100 us wide between half levels, rise 0 s, fall 0 s; 0 V"
            " after it; 0 V on the capacitor at closing.",
        ),
        (
            TRAIN, (),
            "Source: 20 pulses of 48 V, one every 250 us, each 100 us wide between half levels,"
            " rise 1 us, fall 2 us; 0 V after them; 0 V on the capacitor at closing.",
        ),
        (
            STEADY, (),
            "Source: pulses of 48 V until the loop is steady, one every 250 us, each 100 us wide"
            " between half levels, rise 1 us, fall 2 us; 0 V on the capacitor at closing.",
        ),
        (
            SURGE, (),
            "Source: surge, 1 kV peak, front time 1.2 us, to half value 50 us; 0 V on the"
            " capacitor at closing.",
        ),
        (
            RECORD, (),
            "Source: recorded, 3 points over 3 s, from -5 V to 3 V; the last value, 2 V, is held;"
            " 0 V on the capacitor at closing.",
        ),
    ],
)  # fmt: skip
def test_source_and_states_in_one_sentence(
    source: Source, states: tuple[float, ...], said: str
) -> None:
    assert sources.sentence(unit(1.0, source, *states)) == said


def test_harmonics_are_listed_and_summed() -> None:
    """6 % and 8 %: sqrt(0.36 + 0.64) 10 % in all, so that 230 V become 230 sqrt(1.01) V."""
    assert 230 * math.sqrt(1.01) == pytest.approx(231.147, abs=5e-4)
    # The peak is at most the sum of the amplitudes; read off the waveform, a thousandth apart.
    angle = np.linspace(0, 2 * np.pi, 100_001)
    wave = np.sin(angle) + 0.06 * np.sin(5 * angle + np.pi) + 0.08 * np.sin(7 * angle)
    peak = 230 * math.sqrt(2) * np.max(np.abs(wave))
    assert sources.sentence(unit(1.0, HARMONICS)) == (
        "Source: sine, 230 V rms (325.3 V peak), 50 Hz, with harmonics, 6 % of order 5 at 180 deg,"
        f" 8 % of order 7; in all 231.1 V rms ({peak:.4g} V peak), total harmonic distortion 10 %"
        " of the fundamental; closing angle: any (random); 0 V on the capacitor at closing."
    )


def test_a_charge_of_either_polarity() -> None:
    case = unit(1.0, constant(3.0), 325.0, either_polarity=True)
    assert sources.sentence(case).endswith(
        "; ± 325 V, whichever polarity is worse, on the capacitor at closing."
    )
    none = unit(1.0, constant(3.0), 0.0, either_polarity=True)
    assert sources.sentence(none).endswith("; 0 V on the capacitor at closing.")


@pytest.mark.parametrize(
    ("source", "words"),
    [
        (constant(-48.0), "48 V dc"),
        (sine(100.0, 50.0), "70.71 V rms (100 V peak)"),
        (RAMP, "a ramp to 48 V"),
        (ONE, "a pulse of 48 V"),
        (TRAIN, "pulses of 48 V"),
        (STEADY, "pulses of 48 V"),
        (SURGE, "a surge of 1 kV peak"),
        (RECORD, "recorded with 5 V at most"),
    ],
)
def test_few_words(source: Source, words: str) -> None:
    assert sources.short(source) == words


NO_ANGLE = {"amplitude": None, "rms": None, "frequency": None, "closing_angle": None, "orders": []}


@pytest.mark.parametrize(
    ("source", "numbers"),
    [
        (RAMP, {"kind": "ramp", "largest": 48.0, "final": 48.0, "voltage": 48.0,
                "rise_time": 50e-6}),
        (ONE, {"kind": "pulse", "largest": 48.0, "final": 0.0, "voltage": -48.0, "width": 1e-4,
               "rise_time": 0.0, "fall_time": 0.0, "period": None, "count": 1}),
        (TRAIN, {"kind": "pulse", "largest": 48.0, "final": 0.0, "voltage": 48.0, "width": 1e-4,
                 "rise_time": 1e-6, "fall_time": 2e-6, "period": 250e-6, "count": 20}),
        (STEADY, {"kind": "pulse", "largest": 48.0, "final": 0.0, "voltage": 48.0, "width": 1e-4,
                  "rise_time": 1e-6, "fall_time": 2e-6, "period": 250e-6,
                  "count": "until steady"}),
        (RECORD, {"kind": "recorded", "largest": 5.0, "final": 2.0, "points": 3, "duration": 3.0,
                  "lowest": -5.0, "highest": 3.0}),
    ],
)  # fmt: skip
def test_numbers_of_a_course_in_time(source: Source, numbers: dict[str, object]) -> None:
    assert sources.document(source) == NO_ANGLE | numbers


def test_numbers_of_a_surge() -> None:
    found = sources.document(SURGE)
    # the two exponentials are scaled to their peak
    assert found.pop("largest") == pytest.approx(1000.0, rel=1e-12)
    assert found == NO_ANGLE | {
        "kind": "surge", "final": 0.0, "voltage": 1000.0, "front_time": 1.2e-6,
        "half_value_time": 50e-6,
    }  # fmt: skip


@pytest.mark.parametrize(
    ("angle", "found"),
    [
        (0.25, 0.25), (None, "worst"), (ANY_ANGLE, "random"),
        (Window(-0.5, 0.5), {"low": -0.5, "high": 0.5}),
    ],
)  # fmt: skip
def test_numbers_of_harmonics(angle: object, found: object) -> None:
    source = sine(amplitude=10.0, frequency=50.0, closing_angle=angle, orders=FIFTH)  # type: ignore[arg-type]
    numbers = sources.document(source)
    assert numbers["closing_angle"] == found
    assert numbers["orders"] == [
        {"number": 5, "share": 0.06, "phase": math.pi}, {"number": 7, "share": 0.08, "phase": 0.0},
    ]  # fmt: skip
    assert numbers["rms"] == pytest.approx(10 * math.sqrt(1.01 / 2), rel=1e-14)
    assert (numbers["kind"], numbers["amplitude"], numbers["frequency"]) == ("harmonics", 10.0, 50)
