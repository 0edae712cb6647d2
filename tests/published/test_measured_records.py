"""Measured records whose parts are known; they lie beside the project and are not part of it."""

import zipfile
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from scipy.optimize import least_squares
from scipy.stats import chi2

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine

from .printed import DEGREE, ask, printed

DATASETS = Path(__file__).resolve().parents[2].parent / "shared" / "datasets"

pytestmark = pytest.mark.skipif(
    not DATASETS.is_dir(), reason="the measured records are not in ../shared/datasets"
)


# ---------------------------------------------------------------- a driven loop


# Student laboratory experiment E7 (github.com/HCui91/E7-LRC at ab9bc73, MIT): capacitor voltage
# against frequency; 18 mH, 1800 pF, and a resistor of 820 ohm or of 1520 +- 10 ohm.
COIL = 18e-3


def fit_of_the_sweep(name):
    """Total resistance, capacitance and source that put the solver's curve through a record."""
    record = np.loadtxt(DATASETS / "e7-lrc" / name, delimiter=",")
    frequency, volts, uncertainty = record[:, 0], record[:, 1], record[:, 2]

    def loop(values):
        return make_loop(resistance=1e3 * values[0], inductance=COIL, capacitance=1e-9 * values[1])

    def misfit(values):
        gain = np.abs(Case(loop(values), sine(1, 1)).steady_at(frequency).capacitor)
        return (values[2] * gain - volts) / uncertainty

    found = least_squares(misfit, [1.0, 1.8, 2.0], xtol=1e-12, ftol=1e-12)
    errors = np.sqrt(np.diag(np.linalg.inv(found.jac.T @ found.jac)))
    return loop(found.x), found.x, errors, found.fun


@pytest.mark.parametrize(
    ("name", "resonance", "damping", "source"),
    [
        ("low_damp.csv", "27494.6", "0.1594", "2.018"),
        ("high_damp.csv", "27863.5", "0.2691", "2.007"),
    ],
)
def test_sweep_of_a_driven_loop(name, resonance, damping, source):
    """The curve passes within the stated errors, at the constants of an earlier fit.

    That fit used the closed formula A/sqrt((1 - x^2)^2 + (2 zeta x)^2); both minimise the same
    sum of squares, so its printed digits have to come out.
    """
    loop, values, _, misfit = fit_of_the_sweep(name)
    case = Case(loop, constant(1))
    assert printed(resonance).covers(ask("natural_frequency", case))
    assert printed(damping).covers(ask("damping_ratio", case))
    assert printed(source).covers(float(values[2]))
    # Stated errors of one standard deviation leave a mean square of 1.
    assert np.mean(misfit**2) <= 1


def test_both_sweeps_find_the_same_coil_and_source_resistance():
    """What the loop has besides its resistor does not depend on the resistor."""
    found = []
    for name, resistor, uncertainty in (("low_damp.csv", 820, 0), ("high_damp.csv", 1520, 10)):
        _, values, errors, _ = fit_of_the_sweep(name)
        found.append((1e3 * values[0] - resistor, np.hypot(1e3 * errors[0], uncertainty)))
    (low, low_error), (high, high_error) = found
    assert abs(low - high) <= 2 * np.hypot(low_error, high_error)
    # More than five standard errors from nothing: the comparison is not one of zeros.
    assert low > 5 * low_error
    assert high > 5 * high_error


# ---------------------------------------------------------------- a loop that rings


# MIPT laboratory 3.2.4, free oscillations (github.com/ajlekcahdp4/general-physics-labs at c87c09c,
# MIT): periods against capacitance, decrements against resistance; coil of 14 ohm, 0.146 H by an
# LCR meter. The screen was read to one decimal, so half of that is a reading's error.
READING = 0.05


def sheet(number, columns, rows):
    """Some columns of one sheet of the laboratory's workbook, as one array for each."""
    with zipfile.ZipFile(DATASETS / "mipt-3-2-4" / "3-2-4.xlsx") as book:
        tree = ElementTree.fromstring(book.read(f"xl/worksheets/sheet{number}.xml"))
    cells = {cell.get("r"): cell.findtext("{*}v") for cell in tree.iterfind(".//{*}c")}
    return [np.array([float(cells[f"{column}{row}"]) for row in rows]) for column in columns]


def loss_free(inductance, capacitance):
    return Case(
        make_loop(resistance=0, inductance=inductance, capacitance=capacitance), constant(1)
    )


def inductance_from_periods():
    """The inductance that the measured periods call for [H], and the misfit in reading errors."""
    microfarads, sweep, whole, from_scale, swings, part, to_scale = sheet(
        1, "BCDEFGH", range(3, 12)
    )
    period = sweep * (part / whole) * (to_scale / from_scale) / swings
    error = period * READING / part

    def misfit(values):
        case = loss_free(values[0], 1e-6 * microfarads)
        return (1 / REGISTER["ringing_frequency"](case) - period) / error

    found = least_squares(misfit, [0.146], xtol=1e-12)
    return found.x[0], found.fun


def test_periods_against_capacitance_have_one_inductance():
    """From 0.02 to 0.9 uF the period grows by a factor of seven; one coil explains it."""
    _, misfit = inductance_from_periods()
    # One value is fitted; 19 of 20 such records are below this sum.
    assert np.sum(misfit**2) <= chi2.ppf(0.95, len(misfit) - 1)


def test_theoretical_periods_of_the_laboratory():
    """The report's own column, in 1e-5 s, for 0.146 H; it took 3.14 for pi, 0.051 % too little."""
    lines = (DATASETS / "mipt-3-2-4" / "T-T.txt").read_text().split()
    theory = lines[1::2]
    (microfarads,) = sheet(1, "B", range(3, 12))
    assert len(theory) == len(microfarads)
    for text, capacitance in zip(theory, microfarads, strict=True):
        frequency = ask("natural_frequency", loss_free(0.146, 1e-6 * capacitance))
        assert printed(text, carried=0.51e-3).covers(1e5 / frequency)


def test_decrements_against_resistance_follow_from_the_inductance_of_the_periods():
    """Two measurements of one coil: periods without a resistor, decrements with 5 nF and one."""
    inductance, _ = inductance_from_periods()
    resistance, swings, first, last = sheet(2, "ABCD", range(2, 8))
    case = Case(
        make_loop(
            resistance=resistance,
            winding_resistance=14,
            inductance=inductance,
            capacitance=5e-9,
        ),
        constant(1),
    )
    measured = np.log(first / last) / swings
    error = READING * np.hypot(1 / first, 1 / last) / swings
    misfit = (REGISTER["logarithmic_decrement"](case) - measured) / error
    # Nothing is fitted here; 19 of 20 such records are below this sum.
    assert np.sum(misfit**2) <= chi2.ppf(0.95, len(misfit))


# ---------------------------------------------------------------- a piezo's series branch


def test_piezo_conducts_best_at_its_series_resonance():
    """The capacitance across the branch adds no conductance, so the maximum is the branch's own.

    A sweep cannot place it better than its step.
    """
    # Impedance analyser's sweep of a thickness mode and its own equivalent circuit
    # (github.com/NabboGamer/Sensori-Rivelatori-Dispositivi-Elettronici-Esercitazioni at 8b12200,
    # MIT).
    folder = DATASETS / "piezo-e4990a"
    values = dict(
        line.split(", ")
        for line in (folder / "circuitoParametriConcentrati.txt").read_text().splitlines()
        if ", " in line
    )
    branch = make_loop(
        resistance=float(values["R1"]),
        inductance=float(values["L1"]),
        capacitance=float(values["C1"]),
    )
    lines = (folder / "MODULOFASEMODOTHICKNES.CSV").read_text().splitlines()
    sweep = np.array([line.split(",") for line in lines if line[:1] == "+"], dtype=np.float64)
    frequency, magnitude, angle = sweep.T
    best = frequency[np.argmax(np.cos(DEGREE * angle) / magnitude)]
    step = frequency[1] - frequency[0]
    assert abs(ask("natural_frequency", Case(branch, constant(1))) - best) <= step
