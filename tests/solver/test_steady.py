"""The steady state: transfer functions, phases and signs, band edges, power."""

import numpy as np
import pytest
from exact import Exact
from mpmath import mp
from scipy.optimize import brentq, minimize_scalar
from scipy.signal import freqs

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.equation import equation_of
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.steady import capacitor_voltage_maximum, half_power_frequencies, steady_state

EPS = np.finfo(float).eps

BARE = {"resistance": 12.0, "inductance": 33e-3, "capacitance": 1e-6}
WOUND = BARE | {"winding_resistance": 2.2, "source_resistance": 0.5, "source_inductance": 1e-3}
LOSSY = WOUND | {"series_resistance": 3.0}
LOADED = LOSSY | {"load_resistance": 470.0}
ALL = [BARE, WOUND, LOSSY, LOADED]

PLAIN = ("resistance", "inductance", "capacitance", "series_resistance", "load_resistance")
POWERS = ("real_power", "reactive_power", "apparent_power", "power_factor", "resistor_power")


def transfer_functions(parts):
    """Numerators over one denominator in powers of s, by hand from the drawn network."""
    series = parts.get("series_resistance", 0.0)
    conductance = 1 / parts.get("load_resistance", np.inf)
    outer = sum(parts.get(k, 0.0) for k in ("resistance", "winding_resistance"))
    outer += parts.get("source_resistance", 0.0)
    inductance = parts["inductance"] + parts.get("source_inductance", 0.0)
    capacitance = parts["capacitance"]
    # Terminal admittance G + sC/(1 + s r C) = n(s)/d(s) with
    d = np.poly1d([series * capacitance, 1.0])
    n = conductance * d + np.poly1d([capacitance, 0.0])
    # I/V = 1/(R + sL + d/n) = n/((R + sL) n + d)
    denominator = np.poly1d([inductance, outer]) * n + d
    return {
        "current": n,
        "resistor": parts["resistance"] * n,
        "inductor": np.poly1d([parts["inductance"], parts.get("winding_resistance", 0.0)]) * n,
        "capacitor": d,
    }, denominator


@pytest.mark.parametrize("parts", ALL)
def test_phasors_are_the_transfer_functions(parts):
    frequencies = np.geomspace(1.0, 1e6, 301)
    omega = 2 * np.pi * frequencies
    found = steady_state(make_loop(**parts), frequencies)
    numerators, denominator = transfer_functions(parts)
    # The polynomials cancel where ours do not: their rounding is a share of the sum of the
    # magnitudes of their terms.
    terms = np.polyval(np.abs(denominator.coeffs), omega)
    for name, numerator in numerators.items():
        _, expected = freqs(numerator.coeffs, denominator.coeffs, omega)
        loss = terms / np.abs(denominator(1j * omega))
        loss = loss + np.polyval(np.abs(numerator.coeffs), omega) / np.abs(numerator(1j * omega))
        error = np.abs(getattr(found, name) - expected)
        assert np.all(error <= 20 * EPS * loss * np.abs(expected)), name
        if name != "current":
            assert np.all(found.across(name) == getattr(found, name))
    assert np.all(np.abs(found.impedance * found.current - 1) <= 4 * EPS)


def test_no_phasor_for_an_unknown_element():
    found = steady_state(make_loop(**BARE), 50.0)
    with pytest.raises(ValueError, match="wire"):
        found.across("wire")
    with pytest.raises(InputError, match="wire"):
        make_loop(**BARE).weights("wire")


@pytest.mark.parametrize("quality", [0.01, 1.0, 1e3, 1e6])
@pytest.mark.parametrize("detuning", [-1e-3, -1e-6, -1e-9, -1e-12, 0.0, 1e-12, 1e-8, 1e-5])
def test_current_close_to_resonance_keeps_its_digits(quality, detuning):
    # The reactance is the difference of two nearly equal numbers; a plain difference is off by
    # 1e-10 at a quality factor of 1e6.
    loop = make_loop(resistance=1 / quality, inductance=1.7e-3, capacitance=1 / 1.7e3)
    case = Case(loop, sine(1.0, (1 + detuning) / (2 * np.pi)))
    exact = Exact(case)
    with mp.workdps(50):
        _, current = exact.phasors()
    steady = case.steady
    assert abs(float(abs(current)) / float(np.abs(steady.current)) - 1) <= 10 * EPS
    with mp.workdps(50):
        assert abs(float(mp.arg(current)) - float(np.angle(steady.current))) <= 10 * EPS


def test_inductor_voltage_far_below_resonance_keeps_its_digits():
    # 50 Hz on a loop that rings at 500 kHz: the inductor takes 1e-8 of the source.
    loop = make_loop(resistance=0.0, inductance=1e-7, capacitance=1e-6)
    case = Case(loop, sine(1.0, 50.0))
    exact = Exact(case)
    with mp.workdps(50):
        expected = float(abs(exact.phasors()[1] * exact.omega * exact.L))
    assert float(np.abs(case.steady.inductor)) == pytest.approx(expected, rel=10 * EPS, abs=0)


def test_phases_and_signs():
    loop = make_loop(**BARE)
    resonance = float(REGISTER["natural_frequency"](Case(loop, sine(1.0, 50.0))))
    below = Case(loop, sine(1.0, resonance / 3))
    above = Case(loop, sine(1.0, resonance * 3))
    # Above resonance the loop is inductive: the current lags, the impedance's angle is positive.
    assert REGISTER["current_phase"](above) < 0 < REGISTER["impedance_phase"](above)
    assert REGISTER["reactive_power"](above) > 0
    # Below, it is capacitive.
    assert REGISTER["impedance_phase"](below) < 0 < REGISTER["current_phase"](below)
    assert REGISTER["reactive_power"](below) < 0
    for case in (below, above):
        phase = float(REGISTER["current_phase"](case))
        omega = 2 * np.pi * float(case.source.frequency)
        reactance = omega * 33e-3 - 1 / (omega * 1e-6)
        assert phase == pytest.approx(-np.arctan2(reactance, 12.0), rel=1e-13)
        # In time: long after closing, the current is I sin(omega t + phase) as signed.
        steady = case.waveforms(1.0 + np.linspace(0, 2 * np.pi / omega, 9))
        amplitude = float(REGISTER["current_amplitude"](case))
        expected = amplitude * np.sin(omega * steady.time + phase)
        # 12 ohm on 33 mH: after a second exp(-182) of the transient is left. The reference's
        # plain phase of omega t is off by its own rounding.
        assert np.max(np.abs(steady.current - expected)) <= 4 * EPS * omega * amplitude
    at_resonance = Case(loop, sine(1.0, resonance))
    # f0 is a double; half a unit of it turns the current by 2 Q times that.
    quality = float(REGISTER["quality_factor"](at_resonance))
    assert abs(float(REGISTER["current_phase"](at_resonance))) <= 4 * quality * EPS
    assert REGISTER["impedance"](at_resonance) == pytest.approx(12.0, rel=1e-14)


@pytest.mark.parametrize("parts", ALL[:3])
@pytest.mark.parametrize("resistance", [0.01, 12.0, 4e3])
def test_half_the_power_at_the_band_edges(parts, resistance):
    loop = make_loop(**(parts | {"resistance": resistance}))
    eq = equation_of(loop)
    lower, upper = half_power_frequencies(eq)
    resonance = eq.natural / (2 * np.pi)
    edges = steady_state(loop, np.array([lower, resonance, upper]))
    power = np.abs(edges.current) ** 2 * loop.total_resistance
    # At the edges the power's relative slope in frequency is about 2 Q.
    allowed = 20 * EPS * (1 + 1 / float(eq.damping_ratio))
    assert power[1] == pytest.approx(float(1 / loop.total_resistance), rel=allowed)
    assert power[[0, 2]] == pytest.approx(np.full(2, power[1] / 2), rel=allowed)
    # ... and the current is an eighth of a turn ahead below and behind above.
    assert np.angle(edges.current[[0, 2]]) == pytest.approx([np.pi / 4, -np.pi / 4], rel=allowed)
    assert upper - lower == pytest.approx(
        float(loop.total_resistance / loop.total_inductance) / (2 * np.pi), rel=allowed
    )


@pytest.mark.parametrize("quality", [0.8, 1.0, 3.0, 20.0])
@pytest.mark.parametrize("share", [0.0, 0.3, 1.0])
@pytest.mark.parametrize("load", [np.inf, 5.0])
def test_frequency_of_the_largest_capacitor_voltage(quality, share, load):
    # `share` of the losses inside the capacitor; at its terminals they shift the maximum.
    loop = make_loop(
        resistance=(1 - share) / quality,
        series_resistance=share / quality,
        inductance=1.0,
        capacitance=1.0,
        load_resistance=load,
    )
    numerator, denominator = transfer_functions(
        {name: float(getattr(loop, name)) for name in PLAIN}
    )

    def falling(omega):
        return -float(np.abs(numerator["capacitor"](1j * omega) / denominator(1j * omega)))

    best = minimize_scalar(falling, bounds=(1e-3, 3.0), method="bounded", options={"xatol": 1e-9})
    found = 2 * np.pi * float(capacitor_voltage_maximum(loop, equation_of(loop)))
    dense = np.linspace(1e-3, 3.0, 3001)
    assert best.fun <= min(falling(omega) for omega in dense) + 4 * EPS
    if best.x < 2e-3:
        assert found == 0
        return
    # A search by values alone finds a maximum to the root of their rounding; then the values
    # themselves have to agree to rounding.
    assert found == pytest.approx(best.x, abs=4 * np.sqrt(EPS))
    assert falling(found) <= best.fun * (1 - 4 * EPS)


def test_frequency_of_the_largest_capacitor_voltage_by_its_slope():
    # Where the slope of |V_C|^2 is zero, found from the polynomial itself.
    loop = make_loop(**LOADED)
    numerators, denominator = transfer_functions(LOADED)
    top, bottom = numerators["capacitor"], denominator

    def slope(omega):
        s = 1j * omega
        relative = top.deriv()(s) / top(s) - bottom.deriv()(s) / bottom(s)
        return float(np.real(1j * relative))

    peak = brentq(slope, 2 * np.pi * 300, 2 * np.pi * 900, xtol=1e-9, rtol=1e-14)
    found = 2 * np.pi * float(capacitor_voltage_maximum(loop, equation_of(loop)))
    assert found == pytest.approx(peak, rel=1e-12)


@pytest.mark.parametrize("zeta", [0.70711, 1.0, 30.0])
def test_no_maximum_of_the_capacitor_voltage_above_zero(zeta):
    loop = make_loop(resistance=2 * zeta, inductance=1.0, capacitance=1.0)
    assert capacitor_voltage_maximum(loop, equation_of(loop)) == 0


@pytest.mark.parametrize("parts", ALL)
@pytest.mark.parametrize("frequency", [1.0, 50.0, 870.0, 1e5])
def test_power_in_is_power_lost(parts, frequency):
    case = Case(make_loop(**parts), sine(np.sqrt(2) * 24.0, frequency))
    power = {name: float(REGISTER[name](case)) for name in POWERS}
    current = float(REGISTER["current"](case))
    loop = case.loop
    lost = current**2 * float(loop.outer_resistance)
    conductance = float(loop.load_conductance)
    terminal = float(REGISTER["capacitor_voltage"](case))
    through = 2 * np.pi * frequency * float(loop.capacitance) * terminal
    inside = through / np.hypot(1, 2 * np.pi * frequency * 1e-6 * float(loop.series_resistance))
    lost += conductance * terminal**2 + float(loop.series_resistance) * inside**2
    assert power["real_power"] == pytest.approx(lost, rel=1e-13)
    assert power["resistor_power"] == pytest.approx(12.0 * current**2, rel=1e-14)
    assert power["apparent_power"] == pytest.approx(24.0 * current, rel=1e-14)
    assert np.hypot(power["real_power"], power["reactive_power"]) == pytest.approx(
        power["apparent_power"], rel=1e-14
    )
    phase = float(REGISTER["current_phase"](case))
    factor = power["power_factor"]
    assert abs(factor - np.cos(phase)) <= 2 * EPS
    # Reactive power is what the inductance takes less what the capacitance gives.
    stored = (
        2
        * np.pi
        * frequency
        * (
            float(loop.total_inductance) * current**2
            - 1e-6 * (inside / (2 * np.pi * frequency * 1e-6)) ** 2
        )
    )
    size = power["apparent_power"]
    assert power["reactive_power"] == pytest.approx(stored, abs=1e-13 * size)


def test_names_for_the_same_thing_agree():
    case = Case(make_loop(**LOADED), sine(10.0, 700.0))
    gain = float(REGISTER["gain"](case))
    assert gain == float(REGISTER["voltage_magnification"](case))
    assert gain == float(REGISTER["gain"](case, across="capacitor"))
    assert REGISTER["capacitor_voltage_amplitude"](case) == pytest.approx(10 * gain, rel=4 * EPS)
    assert REGISTER["capacitor_voltage"](case) == pytest.approx(10 * gain / np.sqrt(2), rel=4 * EPS)
    elements = sum(case.steady.across(name) for name in ("resistor", "inductor", "capacitor"))
    inside = (0.5 + 2j * np.pi * 700.0 * 1e-3) * case.steady.current
    assert abs(complex(elements + inside) - 1) <= 20 * EPS * gain
    # `at` asks for another frequency than the source's.
    elsewhere = Case(make_loop(**LOADED), sine(10.0, 50.0))
    assert REGISTER["gain"](elsewhere, at=700.0) == gain


def test_constant_source():
    case = Case(make_loop(**WOUND), constant(24.0))
    assert REGISTER["impedance"](case) == np.inf
    assert REGISTER["current"](case) == 0
    assert REGISTER["capacitor_voltage"](case) == 24.0
    assert REGISTER["real_power"](case) == 0
    loaded = Case(make_loop(**LOADED), constant(24.0))
    total = 12.0 + 2.2 + 0.5 + 470.0
    assert REGISTER["impedance"](loaded) == pytest.approx(total, rel=4 * EPS)
    assert REGISTER["current"](loaded) == pytest.approx(24.0 / total, rel=4 * EPS)
    assert REGISTER["capacitor_voltage"](loaded) == pytest.approx(24.0 * 470.0 / total, rel=4 * EPS)
    assert REGISTER["inductor_voltage"](loaded) == pytest.approx(24.0 * 2.2 / total, rel=4 * EPS)
    assert REGISTER["real_power"](loaded) == pytest.approx(24.0**2 / total, rel=4 * EPS)


def test_lossless_loop_has_no_bound_at_resonance():
    # A double never is 1/(2 pi sqrt(LC)) exactly; the current grows as one over the distance
    # in between, V/(2 L (w0 - w)), here known from 50 digits.
    loop = make_loop(resistance=0.0, inductance=1e-3, capacitance=1e-6)
    case = Case(loop, sine(1.0, float(equation_of(loop).natural / (2 * np.pi))))
    exact = Exact(case)
    with mp.workdps(50):
        expected = float(1 / (2 * exact.L * abs(exact.w0 - exact.omega)))
    assert expected > 1e12
    assert REGISTER["current_amplitude"](case) == pytest.approx(expected, rel=1e-13)
