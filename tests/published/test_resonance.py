"""Resonance as textbooks print it: frequency, magnification, bandwidth, and parts for a tuning."""

import pytest

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import sine

from .printed import TURN, Reading, ask, crosses, printed, readings, rms_sine

NCERT_LOOP = make_loop(resistance=3, inductance=25.48e-3, capacitance=796e-6)


def tuned_to(frequency, part):
    """The inductance that resonates with a capacitance, or the other way round."""
    return 1 / ((TURN * frequency) ** 2 * part)


READINGS = [
    # A. Hambley, Electrical Engineering: Principles and Applications, example 6.5 (FOSSEE Python
    # Textbook Companions, chapter6_1.ipynb).
    *readings(
        "Hambley 6.5",
        Case(
            make_loop(resistance=100, inductance=159.2e-3, capacitance=0.1592e-6),
            rms_sine(1, 1e3),
        ),
        Reading("resistor_voltage", "1.00", at="resonance"),
        Reading("inductor_voltage", "10.00", at="resonance"),
        Reading("capacitor_voltage", "10.00", at="resonance"),
    ),
    # OpenStax, University Physics vol. 2, section 15.5, worked example 1 (module m58492, element
    # fs-id1172100517213).
    *readings(
        "University Physics 15.5",
        Case(make_loop(resistance=4.00, inductance=3.00e-3, capacitance=8.00e-4), sine(0.100, 200)),
        Reading("natural_frequency", "1.03e2"),
        Reading("current_amplitude", "2.50e-2", at="resonance"),
    ),
    # The same section, check question (element fs-id1172100796341).
    *readings(
        "University Physics 15.5 check",
        Case(make_loop(resistance=40, inductance=2.0e-3, capacitance=5.0e-4), sine(10, 200)),
        Reading("natural_frequency", "160", figures=2),
        Reading("impedance", "40", at="resonance"),
        Reading("current_amplitude", "0.25", at="resonance"),
        Reading("impedance_phase", "0.023", at=200),
    ),
    # The same section, exercise (element fs-id1172100886484), its 100 V read as the amplitude.
    *readings(
        "University Physics 15.5 exercise",
        Case(make_loop(resistance=100, inductance=2.0, capacitance=5.0e-6), sine(100, 50)),
        Reading("natural_frequency", "50"),
        Reading("real_power", "50", at="resonance"),
        Reading("quality_factor", "6.32"),
        Reading("bandwidth", "50", 1 / TURN),
    ),
    # NCERT, Physics part I, class 12, chapter 7, example 7.9. The angular frequency is rounded
    # twice, 222.05 to 222.1, worth 0.005 more; the frequency is the rounded one over 2 x 3.14,
    # 0.024 % and 0.051 % too large.
    *readings(
        "NCERT 7.9",
        Case(NCERT_LOOP, sine(283, 50)),
        Reading("natural_frequency", "222.1", 1 / TURN, carried=0.005 / 222.1),
        Reading("natural_frequency", "35.4", carried=0.75e-3),
        Reading("current", "66.7", at="resonance"),
        Reading("real_power", "13.35", 1e3, at="resonance"),
    ),
    # J. Bird, Electrical Circuit Theory and Technology, example 28.1; digits of the companion
    # notebook (FOSSEE Python Textbook Companions, chapter_28.ipynb), as for all of chapter 28.
    *readings(
        "Bird 28.1",
        Case(make_loop(resistance=10, inductance=75e-3, capacitance=40e-6), rms_sine(200, 50)),
        Reading("natural_frequency", "91.89"),
        Reading("current", "20", at="resonance"),
    ),
    # J. Bird, example 28.4: the inductance is the one that resonates at 318.3 Hz.
    *readings(
        "Bird 28.4",
        Case(
            make_loop(resistance=10, inductance=tuned_to(318.3, 5e-6), capacitance=5e-6),
            rms_sine(20, 318.3),
        ),
        Reading("natural_frequency", "318.3"),
        Reading("inductor_voltage", "200.01"),
        Reading("capacitor_voltage", "200.01"),
        Reading("quality_factor", "10"),
    ),
    # J. Bird, example 28.5.
    *readings(
        "Bird 28.5",
        Case(make_loop(resistance=80, inductance=20e-3, capacitance=0.4e-6), rms_sine(12, 1e3)),
        Reading("natural_frequency", "1779.41"),
        Reading("capacitor_voltage", "33.54", at="resonance"),
        Reading("capacitor_voltage_maximum_frequency", "1721.52"),
    ),
    # J. Bird, example 28.7.
    *readings(
        "Bird 28.7",
        Case(
            make_loop(resistance=5, inductance=10e-3, capacitance=tuned_to(10e3, 10e-3)),
            rms_sine(1, 10e3),
        ),
        Reading("bandwidth", "79.58"),
    ),
    # J. Bird, example 28.10.
    *readings(
        "Bird 28.10",
        Case(make_loop(resistance=8.84, inductance=0.3518, capacitance=20e-6), rms_sine(1, 60)),
        Reading("natural_frequency", "60.0"),
        Reading("quality_factor", "15.0"),
        Reading("bandwidth", "4.0"),
        Reading("lower_half_power_frequency", "58.0"),
        Reading("upper_half_power_frequency", "62.0"),
    ),
    # T. Kuphaldt, Lessons in Electric Circuits, vol. II (AC), chapter on resonance, simple series
    # resonance (resonant.sml).
    *readings(
        "Kuphaldt series resonance",
        Case(make_loop(resistance=1, inductance=100e-3, capacitance=10e-6), rms_sine(1, 60)),
        Reading("natural_frequency", "159.155"),
        Reading("characteristic_impedance", "100"),
        Reading("inductor_voltage", "100", at="resonance", over="current"),
        Reading("capacitor_voltage", "100", at="resonance", over="current"),
    ),
    # J. Bird, example 15.18 (chapter_15.ipynb).
    *readings(
        "Bird 15.18",
        Case(make_loop(resistance=10, inductance=125e-3, capacitance=60e-6), rms_sine(120, 50)),
        Reading("natural_frequency", "58.12"),
        Reading("current", "12", at="resonance"),
    ),
]


@pytest.mark.parametrize(("case", "reading"), READINGS)
def test_printed_resonance(case, reading):
    assert reading.printed.covers(reading.of(case))


def test_power_at_resonance_tells_amplitude_from_rms():
    """The book's 50 W hold for an amplitude of 100 V; 100 V rms would be 100 W."""
    # OpenStax, University Physics vol. 2, section 15.5, exercise (m58492, fs-id1172100886484).
    loop = make_loop(resistance=100, inductance=2.0, capacitance=5.0e-6)
    rms = Case(loop, rms_sine(100, 50))
    power = ask("real_power", rms, ask("natural_frequency", rms))
    assert printed("100").covers(power)
    assert not printed("50").covers(power)


@pytest.mark.parametrize(
    ("frequency", "known", "text", "unit"),
    [
        # OpenStax, College Physics 2e, section 23.12, exercises on tuning (m42431, elements
        # fs-id1169738244135, fs-id1169738136983, fs-id1169738072090).
        pytest.param(1.00e9, 8.00e-9, "3.17", 1e-12, id="College Physics: 1 GHz with 8 nH"),
        pytest.param(88.0e6, 2.50e-12, "1.31", 1e-6, id="College Physics: 88 MHz with 2.5 pF"),
        pytest.param(108e6, 1.3084e-6, "1.66", 1e-12, id="College Physics: 108 MHz, same coil"),
        pytest.param(1650e3, 1.00e-6, "9.30", 1e-9, id="College Physics: 1650 kHz with 1 uH"),
        pytest.param(500e3, 1.00e-6, "101", 1e-9, id="College Physics: 500 kHz with 1 uH"),
        pytest.param(1e3, 10e-3, "2.53", 1e-6, id="Bird 28.2: 1 kHz with 10 mH"),
        pytest.param(318.3, 5e-6, "50.0", 1e-3, id="Bird 28.4: 318.3 Hz with 5 uF"),
        pytest.param(200e3, 0.05e-3, "12.67", 1e-9, id="Bird 15.19: 200 kHz with 0.05 mH"),
    ],
)
def test_part_for_a_tuning(frequency, known, text, unit):
    """The resonance passes the wanted frequency within the printed part's last digit.

    Inductance and capacitance enter the resonance alike, so either may be the known one.
    """
    part = printed(text)
    ends = [
        ask(
            "natural_frequency",
            Case(make_loop(resistance=1, inductance=known, capacitance=value * unit), sine(1, 1)),
        )
        for value in (part.low, part.high)
    ]
    assert crosses(frequency, *ends)


def test_largest_capacitor_voltage_where_the_companion_is_wrong():
    """V Q/sqrt(1 - 1/(4 Q^2)) is 34.0909 V; with 1/(2 Q^2) the companion has 34.67 V."""
    # J. Bird, example 28.5 (chapter_28.ipynb). Right value by hand: Q^2 = 50000/6400 = 7.8125, so
    # 12 V x 2.79508/sqrt(0.968) = 375/11 V.
    case = Case(make_loop(resistance=80, inductance=20e-3, capacitance=0.4e-6), rms_sine(12, 1e3))
    top = ask("capacitor_voltage_maximum_frequency", case)
    largest = ask("capacitor_voltage", case, top)
    assert printed("34.0909").covers(largest)
    assert not printed("34.67").covers(largest)
    assert largest > ask("capacitor_voltage", case, 0.999 * top)
    assert largest > ask("capacitor_voltage", case, 1.001 * top)


def test_coil_and_capacitor_losses_combine_into_one_quality_factor():
    """Quality factors 60 and 390 of the parts give 52.0 of the loop."""
    # J. Bird, example 28.6 (chapter_28.ipynb).
    reactance = 390.0
    loop = make_loop(
        resistance=0,
        inductance=reactance * 1e-3,
        winding_resistance=reactance / 60,
        capacitance=1e-3 / reactance,
        series_resistance=reactance / 390,
    )
    case = Case(loop, rms_sine(1, 100))
    assert ask("characteristic_impedance", case) == pytest.approx(reactance, rel=1e-14)
    assert printed("52.0").covers(ask("quality_factor", case))


# J. Bird, example 28.9 (chapter_28.ipynb): 0.2 V drive 4 mA at a resonance of 3 kHz, Q 100.
def bird_28_9(resistance=50.0, inductance=265.2582e-3, capacitance=None):
    if capacitance is None:
        capacitance = tuned_to(3e3, inductance)
    loop = make_loop(resistance=resistance, inductance=inductance, capacitance=capacitance)
    return Case(loop, rms_sine(0.2, 3e3))


@pytest.mark.parametrize(
    ("part", "text", "unit", "quantity", "wanted"),
    [
        ("resistance", "50", 1.0, "current", 4e-3),
        ("inductance", "265.26", 1e-3, "quality_factor", 100),
        ("capacitance", "10.61", 1e-9, "natural_frequency", 3e3),
    ],
)
def test_parts_from_current_resonance_and_quality_factor(part, text, unit, quantity, wanted):
    ends = [
        ask(quantity, bird_28_9(**{part: value * unit}))
        for value in (printed(text).low, printed(text).high)
    ]
    assert crosses(wanted, *ends)


def test_capacitor_voltage_of_those_parts():
    assert printed("20").covers(ask("capacitor_voltage", bird_28_9()))


def test_resistance_from_the_current_at_resonance():
    """2 mV drive 0.1 mA through 20 ohm."""
    # J. Bird, example 15.19 (chapter_15.ipynb).
    resistance = printed("20")
    currents = [
        ask(
            "current",
            Case(
                make_loop(
                    resistance=value, inductance=0.05e-3, capacitance=tuned_to(200e3, 0.05e-3)
                ),
                rms_sine(2e-3, 200e3),
            ),
        )
        for value in (resistance.low, resistance.high)
    ]
    assert crosses(0.1e-3, *currents)


def test_band_edges_read_off_a_graph_are_not_quite_symmetrical():
    """323 Hz and 64 Hz: Q is 5, but the edges are 292.6 and 356.6 Hz, not 291 and 355 Hz."""
    # T. Kuphaldt, Lessons in Electric Circuits, vol. II, Q and bandwidth of a resonant circuit
    # (resonant.sml). The printed edges were set symmetrically; the exact ones have the resonance
    # as their geometric mean and were worked out apart from the solver.
    inductance = 0.1
    case = Case(
        make_loop(
            resistance=TURN * 64 * inductance,
            inductance=inductance,
            capacitance=tuned_to(323, inductance),
        ),
        rms_sine(1, 60),
    )
    assert printed("64").covers(ask("bandwidth", case))
    assert printed("5").covers(ask("quality_factor", case))
    edges = (
        ("lower_half_power_frequency", "292.6", "291"),
        (
            "upper_half_power_frequency",
            "356.6",
            "355",
        ),
    )
    for quantity, right, read_off in edges:
        assert printed(right).covers(ask(quantity, case))
        assert not printed(read_off).covers(ask(quantity, case))
