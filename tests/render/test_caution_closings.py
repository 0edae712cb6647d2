"""Cautions: other closings, the model's limits, the order, and what holds for all loops."""

import math
import re

import numpy as np
import pytest
from hand import holds, loop, lossless, resonant, spread_over, told
from hypothesis import given
from hypothesis import strategies as st

from rlc.render.cautions import cautions
from rlc.solver.case import Case
from rlc.solver.peaks import Peak
from rlc.solver.source import constant, sine
from rlc.solver.targets import Ratings

FORBIDDEN = re.compile(r"\b(un)?safe(ly|ty)?\b|\bcompl(y|ies|iant|iance)\b", re.IGNORECASE)
#: Standards whose values nobody confirmed.
UNCONFIRMED = ("60831", "60871", "60252", "61010", "60479", "DOE")


# --- other closings


def fast_loop(x, amplitude, angle, **states):
    """No losses, driven at x times the natural frequency (1 rad/s), L = C = 1.

    With S = V/(1 - x^2) the steady capacitor voltage is S sin(x t + phi), and free motion adds
    sqrt((S sin phi - v_0)^2 + (x S cos phi)^2) in both voltage and current.
    """
    source = sine(amplitude, x / (2 * math.pi), angle)
    return Case(lossless(1.0, 1.0), source, *states.values()), amplitude / (1 - x * x)


def test_a_chosen_closing_angle_is_held_against_the_worst_one():
    case, steady = fast_loop(0.1, 10.0, 0.0)
    text = told(case)["closing-angle"]
    assert holds(text, "A", steady * (0.1 + 1))
    assert holds(text, "V", 2 * steady)
    assert "closing at 0 deg" in text
    at_the_worst, _ = fast_loop(0.1, 10.0, math.pi / 2)
    assert "closing-angle" not in told(at_the_worst)


def test_the_angle_in_the_text_is_the_worst_of_all():
    parts, frequency = loop(0.3, 1.0, 1.0), 0.13 / (2 * math.pi)
    text = told(Case(parts, sine(10.0, frequency, 0.2)))["closing-angle"]
    named = [float(angle) for angle in re.findall(r"\(at ([\d.]+) deg\b", text)]
    angles = np.radians(np.arange(0, 180, 0.25))
    scan = Case(parts, sine(10.0, frequency, angles))
    for element, angle in zip(("current", "capacitor"), named, strict=True):
        peaks = scan.peak(element).value
        # the peak is flat around its angle, and both are printed or scanned coarsely
        assert np.degrees(angles[peaks.argmax()]) == pytest.approx(angle, abs=0.25)

    worst = told(Case(parts, sine(10.0, frequency, None)))["closing-angle"]
    assert [float(angle) for angle in re.findall(r"([\d.]+) deg", worst)] == named
    assert "different closings" in worst


def test_no_angle_is_named_where_the_steady_state_is_the_peak():
    assert "closing-angle" not in told(resonant(10, 5.0, None))
    assert "closing-angle" not in told(Case(lossless(1.0, 1.0), constant(5.0)))


def test_reclosing_onto_what_opening_leaves():
    case, steady = fast_loop(0.1, 10.0, None)
    text = told(case)["trapped-charge"]
    assert holds(text, "V", steady)  # left on the capacitor
    assert holds(text, "V", 3 * steady)
    assert holds(text, "A", steady * (0.1 + 2))
    assert "load" not in text


def worst_of_reclosing(x):
    """Free amplitude over S from a charge of S, at the worst angle: sine 1/(x^2 - 1) there.

    Of (sin phi + 1)^2 + x^2 cos(phi)^2 the derivative is zero where sin phi (x^2 - 1) = 1.
    """
    rising = 1 / (x * x - 1)
    return math.sqrt((rising + 1) ** 2 + x * x * (1 - rising**2))


def test_reclosing_is_worth_a_sentence_from_a_tenth_more_on():
    # At x = 3 the capacitor reaches (1 + 3.18) S from a charge and (1 + 3) S from rest: 4.5 %.
    case, steady = fast_loop(3.0, 10.0, None)
    before, after = 4 * abs(steady), (1 + worst_of_reclosing(3.0)) * abs(steady)
    assert 1.01 * before < after < 1.1 * before
    assert "trapped-charge" not in told(case)
    # At x = 1.8 it is (1 + 2.165)/(1 + 1.8): 13 %.
    case, steady = fast_loop(1.8, 10.0, None)
    text = told(case)["trapped-charge"]
    assert holds(text, "V", (1 + worst_of_reclosing(1.8)) * abs(steady))
    assert holds(text, "A", (1.8 + worst_of_reclosing(1.8)) * abs(steady))


@pytest.mark.parametrize("share", [0.999, 1.001])
def test_a_limit_that_reclosing_breaks_is_named_even_for_a_smaller_rise(share):
    case, steady = fast_loop(3.0, 10.0, None)
    voltage = (1 + worst_of_reclosing(3.0)) * abs(steady)
    current = (3 + worst_of_reclosing(3.0)) * abs(steady)
    for ratings, limits, words in (
        (Ratings(capacitor_voltage=share * voltage), {}, "V (above the rated"),
        (Ratings(inductor_saturation=share * current), {}, "A (above the rated"),
        (Ratings(), {"peak_current": share * current}, "A (above the target of"),
        (Ratings(), {"peak_capacitor_voltage": share * voltage}, "V (above the target of"),
    ):
        found = told(case, ratings, limits=limits)
        assert ("trapped-charge" in found) is (share < 1)
        assert share > 1 or found["trapped-charge"].count(words) == 1
        assert share > 1 or found["trapped-charge"].count("above") == 1


def test_both_limits_are_named_where_both_are_broken():
    case, steady = fast_loop(0.1, 10.0, 0.0)
    ratings = Ratings(capacitor_voltage=15.0)
    found = told(case, ratings, limits={"peak_capacitor_voltage": 12.0, "peak_current": 30.0})
    # 2 S and 3 S are above both, 1.1 S and 2.1 S of current below 30 A
    assert steady == pytest.approx(10.101, abs=1e-3)
    for name in ("closing-angle", "trapped-charge"):
        assert "above the rated 15 V and the target of 12 V" in found[name]
        assert "30 A" not in found[name]


def test_the_other_polarity_is_held_against_the_limits_too():
    case = Case(lossless(1.0, 1.0), constant(24.0), 10.0)
    text = told(case, limits={"peak_current": 33.0, "peak_capacitor_voltage": 58.1})
    assert "34 A (above the target of 33 A)" in text["trapped-charge"]
    assert "58 V, peak" in text["trapped-charge"]


def test_other_closings_are_said_to_be_those_of_nominal_parts():
    case, steady = fast_loop(0.1, 10.0, 0.0)
    corners = spread_over(case, capacitance=(0.9, 1.1))
    found = told(case, corners=corners)
    assert "each, with nominal parts: current" in found["closing-angle"]
    assert "each, with nominal parts, the current" in found["trapped-charge"]
    assert holds(found["trapped-charge"], "V", 3 * steady)
    assert not any("nominal" in text for text in told(case).values())


def test_a_charged_capacitor_of_the_other_polarity():
    case = Case(lossless(1.0, 1.0), constant(24.0), 10.0)
    text = told(case)["trapped-charge"]
    assert "charged to 10 V" in text
    assert holds(text, "V", 24.0 + 34.0)
    assert holds(text, "A", 34.0)
    assert "trapped-charge" not in told(Case(lossless(1.0, 1.0), constant(24.0)))
    assert "trapped-charge" not in told(Case(lossless(1.0, 1.0), constant(0.0), 10.0))
    alternating, _ = fast_loop(0.1, 10.0, None, capacitor_voltage=-30.0)
    assert "charged to -30 V" in told(alternating)["trapped-charge"]


@pytest.mark.parametrize("quality", [101.0, 400.0])
@pytest.mark.parametrize("away", [-0.049, 0.0, 0.049])
def test_closings_that_are_left_out_at_resonance_would_not_matter(quality, away):
    """Rotating and free part come to S (1 - exp(-a t)) and S exp(-a t): no more than S."""
    frequency = (1 + away / quality) / (2 * math.pi)
    parts = loop(1 / quality, 1.0, 1.0)
    given = Case(parts, sine(1.0, frequency, 0.2))
    steady = abs(complex(given.steady.dielectric))
    for other in (
        Case(parts, sine(1.0, frequency, None)),
        Case(parts, sine(1.0, frequency, None), steady),
    ):
        for element in ("current", "capacitor"):
            assert other.peak(element).value <= 1.01 * given.peak(element).value
    assert not {"closing-angle", "trapped-charge"} & told(given).keys()


# --- limits of the model


def test_a_loop_without_losses():
    frequency = 1 / (2 * math.pi)
    at_resonance = told(Case(lossless(1.0, 1.0), sine(1.0, frequency)))
    beside = told(Case(lossless(1.0, 1.0), sine(1.0, 2 * frequency)))
    assert "it would grow without bound" in beside["undamped"]
    assert "as here, it grows without bound" in at_resonance["undamped"]
    stepped = told(Case(lossless(1.0, 1.0), constant(1.0)))
    assert "it would grow without bound" in stepped["undamped"]
    for quality, speaks in ((999.0, False), (1001.0, True)):
        found = told(Case(loop(1 / quality, 1.0, 1.0), constant(1.0)))
        assert ("undamped" in found) is speaks
        if speaks:
            assert "1001" in found["undamped"]


def test_unbounded_peaks_are_said_to_be_so():
    # No two doubles L and C meet a frequency to the solver's 32 digits: the peaks are put in.
    unbounded = Peak(*(np.asarray(each) for each in (np.inf, np.inf, 0.0, 0.0)))
    peaks = dict.fromkeys(("current", "capacitor", "inductor", "dielectric"), unbounded)
    case = Case(lossless(1.0, 1.0), sine(1.0, 1 / (2 * math.pi)))
    case._peaks.update(peaks)
    found = told(case)
    assert "as here, it grows without bound" in found["undamped"]
    assert "capacitor unbounded" in found["extra-low-voltage"]
    assert "unbounded" in found["stored-energy"]
    assert "It may hold for a long time: any voltage" in found["residual-voltage"]
    assert "unbounded" in found["capacitor-overvoltage"]


def test_ceramic_capacitors_are_named_where_the_loop_rings():
    ringing = told(Case(loop(1.9, 1.0, 1.0), constant(5.0)))
    creeping = told(Case(loop(2.1, 1.0, 1.0), constant(5.0)))
    assert "ceramic" in ringing["model-limits"]
    assert "ceramic" not in creeping["model-limits"]


def test_the_most_hazardous_comes_first():
    case = Case(loop(0.5, 1e-3, 100e-6), sine(325.0, 480.0, 0.3), 50.0)
    ratings = Ratings(inductor_saturation=10.0, capacitor_voltage=100.0)
    assert list(told(case, ratings)) == [
        "hazardous-source",
        "stored-energy",
        "residual-voltage",
        "interrupting",
        "capacitor-overvoltage",
        "magnification",
        "resonance",
        "saturation",
        "trapped-charge",
        "model-limits",
        "deference",
    ]
    case = Case(lossless(1e-3, 100e-6), sine(68.0, 50.0, 1.0))
    assert list(told(case)) == [
        "extra-low-voltage",
        "stored-energy",
        "residual-voltage",
        "undamped",
        "interrupting",
        "capacitor-overvoltage",
        "inrush",
        "closing-angle",
        "trapped-charge",
        "model-limits",
        "deference",
    ]


def test_a_quiet_loop_has_only_what_always_holds():
    case = Case(loop(1e3, 1e-3, 1e-6), constant(5.0))
    assert list(told(case)) == ["model-limits", "deference"]


# --- all loops


def decades(low, high):
    return st.floats(low, high).map(lambda exponent: 10.0**exponent)


def maybe(strategy, otherwise):
    return st.one_of(st.just(otherwise), strategy)


@st.composite
def switch_ons(draw):
    parts = loop(
        draw(maybe(decades(-4, 6), 0.0)),
        draw(decades(-9, 2)),
        draw(decades(-12, 1)),
        series_resistance=draw(maybe(decades(-4, 3), 0.0)),
        winding_resistance=draw(maybe(decades(-4, 3), 0.0)),
        load_resistance=draw(maybe(decades(-2, 8), math.inf)),
        source_inductance=draw(maybe(decades(-9, 0), 0.0)),
    )
    natural = float(Case(parts, constant(1.0)).equation.natural) / (2 * math.pi)
    level = draw(maybe(decades(-3, 5), 0.0))
    if draw(st.booleans()):
        source = constant(draw(st.sampled_from([-1, 1])) * level)
    else:
        frequency = draw(maybe(decades(-3, 3), 1.0)) * natural
        source = sine(level, frequency, draw(maybe(st.floats(0, 6), None)))
    states = (draw(maybe(st.floats(-1e3, 1e3), 0.0)) for _ in range(2))
    return Case(parts, source, *states)


RATINGS = st.builds(
    Ratings,
    inductor_saturation=maybe(decades(-3, 3), None),
    capacitor_voltage=maybe(decades(0, 4), None),
    capacitor_voltage_rms=maybe(decades(0, 4), None),
)
WORST = st.dictionaries(
    st.sampled_from(
        ("peak_current", "peak_capacitor_voltage", "capacitor_voltage", "stored_energy")
    ),
    maybe(decades(-3, 6), math.nan) | st.just(math.inf),
)


LIMITS = st.dictionaries(
    st.sampled_from(("peak_current", "peak_capacitor_voltage")), decades(-3, 6)
)
FACTORS = st.just((1, 1)) | st.tuples(st.floats(0.5, 1), st.floats(1, 2))


@given(switch_ons(), RATINGS, WORST, st.tuples(FACTORS, FACTORS, FACTORS), LIMITS)
def test_any_loop_gets_cautions_in_plain_words(case, ratings, worst, factors, limits):
    corners = None if np.ravel(factors).max() == 1 else spread_over(case, *factors)
    found = cautions(case, ratings, worst, corners=corners, limits=limits)
    assert worst or corners or not any("over the parts" in each.text for each in found)
    assert [each.id for each in found[-2:]] == ["model-limits", "deference"]
    assert len({each.id for each in found}) == len(found)
    for each in found:
        assert not FORBIDDEN.search(each.text)
        assert not any(standard in each.text for standard in UNCONFIRMED)
        assert not re.search(r"\bnan\b|\binf\b|None| - |: -\.", each.text)
        assert each.text.endswith(".")
        assert 1 <= len(re.findall(r"\.(?= [A-Z]|$)", each.text)) <= 3
        assert "  " not in each.text
