"""Cautions under every kind of source: what each is held against, and words that fit it."""

import math
import re

import numpy as np
import pytest
from hand import holds, loop, slow, spread_over, told
from hypothesis import given
from hypothesis import strategies as st

from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.source import ANY_ANGLE, Order, Window, constant, shaped, sine
from rlc.solver.targets import Fuse, Ratings

RINGING = loop(0.2, 1e-3, 1e-3)
HARMONICS = (Order(5, 0.3, math.pi), Order(7, 0.2))


def pulse(volts, count=1, width=1.0):
    return shaped(shapes.pulse(volts, width, period=None if count == 1 else 2 * width, count=count))


def surge(volts):
    return shaped(shapes.surge(volts, 1e-5, 1e-3))


def record(*volts, step=1e-5):
    return shaped(shapes.recorded(step * np.arange(len(volts)), np.array(volts)))


KINDS = {
    "dc": constant(200.0),
    "sine": sine(200.0, 50.0, None),
    "harmonics": sine(200.0, 50.0, ANY_ANGLE, orders=HARMONICS),
    "window": sine(200.0, 50.0, Window(-0.2, 0.2)),
    "ramp": shaped(shapes.ramp(200.0, 1e-3)),
    "pulse": pulse(200.0, width=1e-3),
    "pulses": pulse(200.0, 3, width=1e-3),
    "train": pulse(200.0, None, width=1e-2),
    "surge": surge(200.0),
    "recorded": record(0.0, 200.0, 100.0),
}


@pytest.mark.parametrize("kind", KINDS)
def test_a_source_is_called_what_it_is(kind):
    source = KINDS[kind]
    text = told(Case(RINGING, source))["hazardous-source"]
    words = {
        "sine": "141.4 V rms (200 V peak)", "window": "141.4 V rms (200 V peak)",
        "dc": "200 V dc", "harmonics": "rms with its harmonics", "ramp": "a ramp to 200 V",
        "pulse": "a pulse of 200 V", "pulses": "pulses of 200 V", "train": "pulses of 200 V",
        "surge": "a surge of 200 V peak", "recorded": "recorded with 200 V at most",
    }[kind]  # fmt: skip
    assert words in text
    held = kind not in ("dc", "sine", "window", "harmonics")
    assert ("largest value is held against the limit for dc" in text) is held


@pytest.mark.parametrize("volts", [119.0, 121.0])
def test_the_largest_value_decides_where_there_is_no_rms(volts):
    """Also where the source ends at nothing, or on less."""
    for source in (pulse(volts), surge(volts), record(0.0, volts, 3.0)):
        assert ("hazardous-source" in told(Case(slow(1e-6), source))) is (volts > 120)


def test_harmonics_count_towards_the_rms_of_the_source():
    """49 V of the fundamental and 30 % of it: 49 sqrt(1.09) = 51.2 V rms."""
    parts = slow(1e-6)
    alone = Case(parts, sine(rms=49.0, frequency=50.0))
    both = Case(parts, sine(rms=49.0, frequency=50.0, orders=[Order(3, 0.3)]))
    assert "hazardous-source" not in told(alone)
    assert holds(told(both)["hazardous-source"], "V", 49 * math.sqrt(1.09))


def test_a_pulse_takes_the_capacitor_above_extra_low_voltage():
    """100 V for long onto a loop without losses: 200 V."""
    text = told(Case(loop(1e-3, 1e-3, 1e-3), pulse(100.0)))["extra-low-voltage"]
    assert "a pulse of 100 V" in text
    assert "120 V dc" in text


def test_magnification_is_held_against_the_whole_wave():
    """The seventh at the loop's resonance, Q = 5: 20 % of it comes to the fundamental's size."""
    natural = 2 * math.pi * 350.0
    inductance = 1.0 / (natural**2 * 1e-5)
    parts = loop(math.sqrt(inductance / 1e-5) / 5, inductance, 1e-5)
    seventh = Case(parts, sine(100.0, 50.0, orders=[Order(7, 0.5)]))
    text = told(seventh)["magnification"]
    # steady waves by hand, read off a fine grid: a crest is cut by at most a part in 1e4
    time = np.linspace(0, 0.02, 40_001)
    total = np.zeros_like(time)
    for number, share in ((1, 1.0), (7, 0.5)):
        omega = 2 * math.pi * 50 * number
        gain = 1 / (1 - omega**2 * inductance * 1e-5 + 1j * omega * 1e-5 * float(parts.resistance))
        total += 100 * share * np.imag(gain * np.exp(1j * omega * time))
    assert holds(text, "V", float(np.max(np.abs(total))) * (1 + 2e-5))


def test_resonance_with_a_harmonic_names_its_order():
    natural = 2 * math.pi * 350.0
    inductance = 1.0 / (natural**2 * 1e-5)
    parts = loop(math.sqrt(inductance / 1e-5) / 20, inductance, 1e-5)
    text = told(Case(parts, sine(100.0, 50.0, orders=HARMONICS)))["resonance"]
    assert "350 Hz, order 7, lies in" in text
    assert "resonance" not in told(Case(parts, sine(100.0, 50.0, orders=HARMONICS[:1])))
    # over the parts: the fifth comes into the band where the capacitance is twice as large
    other = Case(parts, sine(100.0, 50.0, orders=HARMONICS[:1]))
    wide = told(other, corners=spread_over(other, capacitance=(1, (350 / 250) ** 2)))
    assert "250 Hz, order 5, lies in the half-power band over the parts" in wide["resonance"]


def test_the_end_of_a_pulse_is_no_proof():
    """R = 0.2, L = 1 mH: the envelope's time constant is 2 L/R = 10 ms."""
    for source, words in ((pulse(200.0), "a pulse of 200 V"), (surge(200.0), "a surge of 200 V")):
        text = told(Case(RINGING, source))["source-ends"]
        assert words in text
        assert holds(text, "s", 10e-3)
    lossless = told(Case(loop(0.0, 1e-3, 1e-3), pulse(200.0)))["source-ends"]
    assert "rings on" in lossless
    for kind in ("dc", "sine", "harmonics", "ramp", "train", "recorded"):
        assert "source-ends" not in told(Case(RINGING, KINDS[kind]))
    # nothing worth a caution is stored
    assert "source-ends" not in told(Case(slow(1e-9), pulse(10.0)))


def test_what_stays_after_a_pulse_is_not_called_a_steady_state():
    text = told(Case(RINGING, pulse(200.0)))["residual-voltage"]
    assert "steady state" not in text
    loaded = loop(0.2, 1e-3, 1e-3, load_resistance=1e6)
    assert "at its peak" in told(Case(loaded, pulse(200.0)))["residual-voltage"]
    assert "in steady state" in told(Case(loaded, KINDS["ramp"]))["residual-voltage"]


def test_a_record_that_is_coarse_beside_the_loop():
    """L C = 1e-6: a natural period of 2 pi ms, of which a tenth is 0.628 ms."""
    coarse = told(Case(RINGING, record(0.0, 1.0, 2.0, step=0.7e-3)))["record"]
    assert holds(coarse, "s", 0.7e-3)
    assert holds(coarse, "s", 2 * math.pi * 1e-3)
    assert "record" not in told(Case(RINGING, record(0.0, 1.0, 2.0, step=0.6e-3)))
    begins = told(Case(RINGING, record(0.5, 1.0, 2.0)))["record"]
    assert "begins at 500 mV" in begins


def test_a_window_is_held_against_all_angles():
    """Far below resonance without losses the swing is doubled at the crest."""
    parts = loop(0.0, 1e-3, 1e-6)
    case = Case(parts, sine(100.0, 50.0, Window(-0.1, 0.1)))
    text = told(case)["closing-angle"]
    assert "between -5.73 deg and 5.73 deg" in text
    # 1/(1 - x^2) times two, x = 50 Hz over 5033 Hz
    assert holds(text, "V", 200 / (1 - (50 / 5032.921) ** 2))
    random = told(Case(parts, sine(100.0, 50.0, ANY_ANGLE)))
    worst = told(Case(parts, sine(100.0, 50.0, None)))
    assert random.get("closing-angle") == worst.get("closing-angle")


def test_a_charge_of_either_polarity_is_said_to_be_so():
    case = Case(RINGING, constant(10.0), 5.0, either_polarity=True)
    text = told(case)["trapped-charge"]
    assert "charged to ± 5 V" in text
    assert "whichever polarity is worse" in text
    for kind in ("surge", "pulse", "ramp", "recorded"):
        one = told(Case(RINGING, KINDS[kind], 50.0))["trapped-charge"]
        assert "with the opposite polarity" in one


@pytest.mark.parametrize("kind", KINDS)
def test_a_fuse_goes_with_every_source(kind):
    fuse = Fuse(1e3, 1000)
    text = told(Case(RINGING, KINDS[kind]), fuse=fuse)["fuse"]
    passed = re.search(r"the let-through of .* is ([^.]*\.?[^.]*) A\^2 s", text)
    assert passed
    assert "unbounded" not in text
    assert ("one period of the steady train" in text) is (kind == "train")


def test_a_fuse_before_a_loaded_ramp_has_a_stated_end():
    """R = 0.2 and a load of 1 kohm: until the ramp's end and five time constants of 10 ms."""
    parts = loop(0.2, 1e-3, 1e-3, load_resistance=1e3)
    target = Fuse(1e3, 1000).target(Case(parts, KINDS["ramp"]))
    # 2/gamma with gamma = R/L + 1/(R_load C) = 200 + 1
    assert target.at == pytest.approx(1e-3 + 5 * 2 / 201.0, rel=1e-12)
    assert Fuse(1e3, 1000).target(Case(parts, KINDS["pulse"])).at is None


@given(
    kind=st.sampled_from(sorted(KINDS)),
    resistance=st.floats(0.01, 100.0),
    load=st.sampled_from([math.inf, 1e3]),
    charge=st.sampled_from([0.0, 40.0]),
    either=st.booleans(),
)
def test_every_source_gets_cautions_in_plain_words(kind, resistance, load, charge, either):
    parts = loop(resistance, 1e-3, 1e-4, load_resistance=load)
    case = Case(parts, KINDS[kind], charge, either_polarity=either)
    found = told(case, Ratings(inductor_saturation=1.0, capacitor_voltage=100.0))
    assert {"model-limits", "deference"} <= set(found)
    for text in found.values():
        assert text == " ".join(text.split())
        assert not re.search(r"\b(nan|inf|None)\b", text)
        assert not re.search(r"(?<![\w.])- V|: -[;,.]", text)
        if kind not in ("dc", "ramp"):
            assert not re.search(r"source, [^,]* dc\b", text)


def test_continuous_ratings_do_not_cover_the_heat_of_the_switch_on():
    """A resistor that charges a capacitor burns C V^2/2, whatever its size: 1 mF to 100 V, 5 J."""
    case = Case(loop(3.0, 1e-3, 1e-3), constant(100.0))
    text = told(case, Ratings(resistor_power=5.0))["switch-on-heat"]
    assert "heats the resistor with 5 J" in text
    assert "switch-on-heat" not in told(case, Ratings(capacitor_voltage=200.0))
    lasting = Case(loop(3.0, 1e-3, 1e-3), sine(100.0, 50.0))
    assert "switch-on-heat" not in told(lasting, Ratings(resistor_power=5.0))
