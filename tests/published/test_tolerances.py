"""Published uncertainties, out of the spread over parts."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.source import constant
from rlc.solver.spread import spread
from rlc.solver.targets import Target

from .printed import TURN, Reading, printed, readings

SAMPLES = 1_000_000


def effects(case, parts, quantity):
    """Half of what each part's limits do to a quantity, one part at a time [SI]."""
    found = spread(case, parts, samples=0, seed=0).outcome(Target(quantity, minimum=0.0))
    return np.array([abs(effect.high - effect.low) / 2 for effect in found.effects])


def around(field, value, uncertainty):
    return Part(field, value, value - uncertainty, value + uncertainty)


# Montalti and co-authors, RLC pulse report (repository nicmontalti/RLC-Pulse at e0e41217):
# 35.31(5), 41.41(5) and 50 ohm, 32.0(3) nF (its file has 32.02 nF, 1 %), 10.17(10) mH.
PULSE = Case(
    make_loop(
        resistance=35.31,
        winding_resistance=41.41,
        source_resistance=50,
        inductance=10.17e-3,
        capacitance=32.02e-9,
    ),
    constant(1),
)
PULSE_PARTS = (
    around("resistance", 35.31, 0.05),
    around("winding_resistance", 41.41, 0.05),
    around("inductance", 10.17e-3, 0.10e-3),
    around("capacitance", 32.02e-9, 0.32e-9),
)


@pytest.mark.parametrize(
    ("case", "reading"),
    readings(
        "RLC pulse report",
        PULSE,
        Reading("natural_frequency", "55.4", 1e3 / TURN),
        # Its gamma is R/L, the bandwidth in rad/s.
        Reading("bandwidth", "12.46", 1e3 / TURN),
        Reading("natural_frequency", "8.82", 1e3),
        Reading("ringing_frequency", "8.76", 1e3),
    ),
)
def test_expected_values_of_a_report(case, reading):
    assert reading.printed.covers(reading.of(case))


@pytest.mark.parametrize(
    ("quantity", "text"), [("natural_frequency", "0.4"), ("bandwidth", "0.12")]
)
def test_uncertainties_of_a_report_add_in_quadrature(quantity, text):
    """One standard uncertainty of each part at a time, in 1e3/s."""
    single = effects(PULSE, PULSE_PARTS, quantity)
    assert printed(text).covers(float(np.sqrt(np.sum(single**2))) * TURN / 1e3)


def test_uncertainties_of_another_report_add_up():
    """10 % of inductance and of capacitance are 300 rad/s together; the printed centre is cut off.

    1/sqrt(LC) is 3162 rad/s by hand, where the report has 3100.
    """
    # UAM student report on coupled circuits, nominal values (repository
    # saul-diaz-mansilla/coupled-rlc-circuits at bfba72b, report).
    case = Case(make_loop(resistance=1, inductance=1.0, capacitance=100e-9), constant(1))
    parts = (around("inductance", 1.0, 0.1), around("capacitance", 100e-9, 10e-9))
    total = TURN * float(effects(case, parts, "natural_frequency").sum())
    assert printed("300", figures=1).covers(total)
    centre = Reading("natural_frequency", "3162", 1 / TURN)
    assert centre.printed.covers(centre.of(case))
    assert not printed("3100", figures=2).covers(centre.of(case))


def sum_of_resistances(parts):
    """The loop's four resistances added up: its bandwidth, times 2 pi L with L = 1 H [ohm]."""
    loop = make_loop(
        resistance=100,
        winding_resistance=100,
        series_resistance=100,
        source_resistance=100,
        inductance=1.0,
        capacitance=1.0,
    )
    found = spread(Case(loop, constant(1)), parts, SAMPLES, seed=1)
    return TURN * found.outcome(Target("bandwidth", minimum=0.0)).samples


FOUR = ("resistance", "winding_resistance", "series_resistance", "source_resistance")
# Cut off at six standard deviations: what is missing is 2e-9 of all units.
UNIT_NORMAL = tuple(Part(field, 100, 94, 106, "normal", sigmas=6) for field in FOUR)
UNIT_RECTANGLE = tuple(Part(field, 100, 100 - 3**0.5, 100 + 3**0.5) for field in FOUR)


@pytest.mark.parametrize(
    ("parts", "half_width"),
    [
        # JCGM 101:2008, section 9.2, additive model: sums of four standard normal and of four
        # rectangular quantities of unit variance.
        pytest.param(UNIT_NORMAL, "3.92", id="normal"),
        pytest.param(UNIT_RECTANGLE, "3.88", id="rectangular"),
    ],
)
def test_sum_of_four_equal_uncertainties(parts, half_width):
    """Standard uncertainty 2.0, and half the width of the interval that holds 95 %."""
    samples = sum_of_resistances(parts)
    assert printed("2.0").covers(float(np.std(samples)))
    low, high = np.quantile(samples, (0.025, 0.975))
    # Four standard errors of the mean of the two points, with the normal's density 0.029 there.
    noise = 4 * np.sqrt(0.025 * 0.95 / 2 / SAMPLES) / 0.029
    expected = printed(half_width)
    assert abs((high - low) / 2 - expected.value) <= expected.tolerance + noise


def test_logarithm_of_a_rectangular_quantity():
    """ln x of x even in (0.1, 1.1): mean -0.665, standard uncertainty 0.606."""
    # NPL report DEM-ES-011, example on a logarithmic model.
    case = Case(make_loop(resistance=0.6, inductance=1.0, capacitance=1.0), constant(1))
    found = spread(case, (Part("resistance", 0.6, 0.1, 1.1),), SAMPLES, seed=2)
    logarithm = np.log(TURN * found.outcome(Target("bandwidth", minimum=0.0)).samples)
    # Four standard errors of mean and deviation; the fourth moment is below 9 of its square's.
    noise = 4 * 0.606 / np.sqrt(SAMPLES)
    for text, value in (("-0.665", logarithm.mean()), ("0.606", logarithm.std())):
        expected = printed(text)
        assert abs(value - expected.value) <= expected.tolerance + np.sqrt(2) * noise
