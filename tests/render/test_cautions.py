"""Cautions: each speaks when it should and not otherwise, with numbers worked out by hand."""

import math

import pytest
from hand import holds, loop, lossless, printed, resonant, slow, told
from scipy.integrate import solve_ivp

from rlc.render.cautions import cautions
from rlc.solver.case import Case
from rlc.solver.source import constant, sine
from rlc.solver.targets import Fuse, Ratings

ROOT2 = math.sqrt(2)


def test_reading_numbers_back():
    assert holds("stores 99.9 J at", "J", 99.901)
    assert not holds("stores 99.9 J at", "J", 99.93)
    assert holds("up to 28.31 mJ.", "J", 28.306e-3)
    assert not holds("1.5 V rms", "J", 1.5)


# --- voltage of the source and above it


@pytest.mark.parametrize(
    ("source", "hazardous"),
    [
        (sine(50 * ROOT2, 50), False),
        (sine(50.01 * ROOT2, 50), True),
        (constant(120), False),
        (constant(120.1), True),
        (constant(-400), True),
        (constant(0), False),
    ],
)
def test_a_source_above_extra_low_voltage(source, hazardous):
    # IEC 61140, IEC 61558-1: 50 V ac rms, 120 V ripple-free dc (confirmed on public pages).
    found = told(Case(slow(1e-9), source))
    assert ("hazardous-source" in found) is hazardous
    if hazardous:
        assert "extra-low-voltage" not in found


@pytest.mark.parametrize(("level", "leaves"), [(59.9, False), (60.1, True)])
def test_ringing_takes_a_dc_loop_above_its_source(level, leaves):
    # Without losses the capacitor reaches twice the step.
    found = told(Case(lossless(1e-6, 1e-9), constant(level)))
    assert ("extra-low-voltage" in found) is leaves
    if leaves:
        assert holds(found["extra-low-voltage"], "V", 2 * level)
        assert "capacitor" in found["extra-low-voltage"]
        assert "inductor" not in found["extra-low-voltage"]


@pytest.mark.parametrize(("amplitude", "leaves"), [(6.9, False), (7.2, True)])
def test_resonance_takes_parts_above_extra_low_voltage(amplitude, leaves):
    # 10 times 7.2 V is above 50 sqrt 2 = 70.7 V, 10 times 6.9 V is not.
    found = told(resonant(10, amplitude))
    assert ("extra-low-voltage" in found) is leaves
    if leaves:
        assert holds(found["extra-low-voltage"], "V", 10 * amplitude)
        assert "70.7 V peak" in found["extra-low-voltage"]


def test_the_resistor_too_can_leave_extra_low_voltage():
    case = Case(loop(20.0, 1e-3, 1e-6), constant(12), 0.0, 10.0)
    assert holds(told(case)["extra-low-voltage"].split("resistor")[1], "V", 200.0)


def test_the_highest_value_over_the_parts_counts_and_is_shown_beside_the_nominal():
    case = Case(lossless(1e-6, 1e-9), constant(59.0))
    assert "extra-low-voltage" not in told(case)
    text = told(case, worst={"peak_capacitor_voltage": 121.0})["extra-low-voltage"]
    assert "nominal 118 V, up to 121 V over the parts" in text


@pytest.mark.parametrize("highest", [118.0, 100.0, math.nan, None])
def test_a_highest_value_that_is_none_leaves_the_nominal(highest):
    case = Case(lossless(1e-6, 1e-9), constant(59.0))
    assert told(case, worst={"peak_capacitor_voltage": highest}) == told(case)


# --- energy and charge


def test_stored_energy_of_a_kilovar():
    """1 kvar at 60 Hz: 2.65 J at the peak, the rule printed for shunt capacitors."""
    # Manufacturer's data sheet, single phase; printed with three digits.
    rms, frequency = 240.0, 60.0
    capacitance = 1000 / (2 * math.pi * frequency * rms**2)
    # closed at the zero through hardly any impedance, so that the peak is the steady one
    case = Case(loop(0.01, 1e-9, capacitance), sine(rms * ROOT2, frequency))
    text = told(case)["stored-energy"]
    (low, high), *_ = printed(text, "J")
    assert low < 2.655
    assert high > 2.645
    assert "shock" in text


@pytest.mark.parametrize(
    ("voltage", "capacitance", "words"),
    [
        # energy C v^2/2 against 0.35 J, at voltages that do not shock
        (24, 4700e-6, {"sparks", "welds"}),  # 1.35 J
        (12, 4700e-6, set()),  # 0.34 J
        (60, 1e-3, {"sparks"}),
        # above 60 V dc also a shock, and both where there is energy
        (60.1, 1e-3, {"shock", "sparks"}),
        (61, 1e-6, {"shock"}),
        # IEC 60335-1, 8.1.4: 0.1 uF up to 450 V, 45 uC up to 15 kV, 350 mJ above
        (300, 0.099e-6, set()),
        (300, 0.101e-6, {"shock"}),
        (1e3, 44e-9, set()),
        (1e3, 46e-9, {"shock"}),
        (20e3, 1.7e-9, set()),  # 0.34 J
        (20e3, 1.8e-9, {"shock", "sparks"}),  # 0.36 J
    ],
)
def test_what_a_charge_can_do(voltage, capacitance, words):
    found = told(Case(slow(capacitance), constant(voltage)))
    assert ("stored-energy" in found) is bool(words)
    assert ("residual-voltage" in found) is bool(words)
    text = found.get("stored-energy", "")
    assert {word for word in ("shock", "sparks", "welds") if word in text} >= words
    assert ("shock" in text) is ("shock" in words)
    assert ("sparks" in text) is bool(words & {"sparks", "welds"})
    if words:
        assert holds(text, "J", capacitance * voltage**2 / 2)
        assert holds(text, "V", voltage)


def test_the_registered_energy_over_the_parts_is_shown():
    text = told(Case(slow(1e-3), constant(100.0)), worst={"stored_energy": 6.0})["stored-energy"]
    assert "nominal 5 J, up to 6 J over the parts" in text


def test_the_charge_is_the_voltage_behind_the_series_resistance():
    """At closing the terminals have 100 V x 0.9 from the current; the capacitor holds none yet."""
    parts = loop(1.0, 1e-12, 1e-3, series_resistance=9.0)
    case = Case(parts, constant(0.0), 0.0, 10.0)
    # 10 A through 1 pH: 50 pJ, which lifts 1 mF by less than a microvolt
    assert "stored-energy" not in told(case)
    assert "stored-energy" not in told(case, worst={"peak_capacitor_voltage": 95.0})


def test_without_a_load_the_charge_stays():
    text = told(Case(lossless(1e-6, 1e-3), constant(100.0)))["residual-voltage"]
    assert "nothing discharges" in text
    assert holds(text, "V", 200.0)  # opened at the top of the ringing
    assert holds(text, "V", 100.0)  # opened when it has settled
    assert "through a resistor" in text


def fall_to_50_volt(charge, capacitance, load, series):
    """Time for the terminals to fall to 50 V, integrated."""

    def slope(_, voltage):
        return -voltage / (load + series) / capacitance

    def at_limit(_, voltage):
        return voltage[0] * load / (load + series) - 50.0

    at_limit.terminal = True
    end = 20 * (load + series) * capacitance
    run = solve_ivp(slope, (0, end), [charge], events=at_limit, rtol=1e-10, atol=1e-10)
    return float(run.t_events[0][0])


@pytest.mark.parametrize(
    ("charge", "capacitance", "load", "series"),
    [(400.0, 470e-6, 47e3, 0.0), (90.0, 10e-6, 1e6, 0.0), (900.0, 1e-3, 2e3, 150.0)],
)
def test_a_load_discharges_in_the_time_that_an_integrator_finds(charge, capacitance, load, series):
    # trapped, and opened before anything flows: held by a loop that is all but open
    parts = loop(1e9, 1e-6, capacitance, load_resistance=load, series_resistance=series)
    case = Case(parts, constant(0.0), charge)
    text = told(case)["residual-voltage"]
    assert holds(text, "s", fall_to_50_volt(charge, capacitance, load, series))
    assert holds(text, "V", charge * load / (load + series))
    assert "comes off or fails" in text


@pytest.mark.parametrize(
    ("volts", "seconds", "rule", "word"),
    [
        (400.0, 59.0, "NEC 460.6", "less"),
        (400.0, 61.0, "NEC 460.6", "longer"),
        (1000.0, 61.0, "NEC 460.6", "longer"),
        (1001.0, 61.0, "Title 8", "less"),
        (1001.0, 301.0, "Title 8", "longer"),
    ],
)
def test_the_discharge_is_held_against_the_rule_for_its_voltage(volts, seconds, rule, word):
    load = 1e6
    capacitance = seconds / (load * math.log(volts / 50))
    case = Case(slow(capacitance, load_resistance=load), constant(volts))
    text = told(case)["residual-voltage"]
    assert "For information" in text
    assert rule in text
    assert f"takes {word}" in text


def test_the_capacitor_decides_which_rule_it_is_and_not_the_source():
    # 1200 V dc over 1 Mohm and 3 Mohm: the capacitor has 900 V
    parts = loop(1e6, 1e-6, 1e-6, load_resistance=3e6)
    text = told(Case(parts, constant(1200.0)))["residual-voltage"]
    assert "NEC 460.6" in text
    assert "with 900 V in steady state" in text
    # 600 V rms with a quality factor of 2 at resonance: 1200 V rms; a load of 1 Gohm is none
    case = resonant(2, 600 * ROOT2)
    resistance = float(case.loop.resistance)
    case = Case(loop(resistance, 1e-3, 1e-6, load_resistance=1e9), case.source)
    text = told(case)["residual-voltage"]
    assert "Title 8" in text
    assert "with 1.2 kV rms in steady state" in text


@pytest.mark.parametrize(
    ("seconds", "written"), [(119.9, "119.9 s"), (120.6, "2.01 min"), (1266.0, "21.1 min")]
)
def test_long_discharges_are_told_in_minutes(seconds, written):
    load = 1e6
    capacitance = seconds / (load * math.log(400 / 50))
    text = told(Case(slow(capacitance, load_resistance=load), constant(400.0)))
    # 200 times the square root of 1 uH over at least 50 uF: a divider by less than 1e-4
    assert f"to 50 V in {written}." in text["residual-voltage"]


def test_a_low_voltage_store_with_a_load_has_a_time_constant():
    parts = slow(10e-3, load_resistance=100.0)
    text = told(Case(parts, constant(24.0)))["residual-voltage"]
    assert holds(text, "s", 1.0)
    assert "NEC" not in text


def test_opening_a_loop_that_carries_current():
    # V sqrt(C/L) = 100 A through 2 uH: 10 mJ
    case = Case(lossless(2e-6, 200e-6), constant(10.0))
    text = told(case)["interrupting"]
    assert holds(text, "A", 100.0)
    assert holds(text, "J", 10e-3)
    # C V^2/2 is also the inductance's largest energy: 1 mJ is the boundary
    below = Case(lossless(2e-6, 19.9e-6), constant(10.0))
    above = Case(lossless(2e-6, 20.1e-6), constant(10.0))
    assert "interrupting" not in told(below)
    assert "interrupting" in told(above)


# --- ratings and magnification


def test_capacitor_voltage_above_its_rating():
    case = Case(lossless(1e-6, 1e-6), constant(24.0))
    assert "capacitor-overvoltage" not in told(case, Ratings(capacitor_voltage=48.0))
    text = told(case, Ratings(capacitor_voltage=47.0))["capacitor-overvoltage"]
    assert holds(text, "V", 48.0)
    assert "above the rated voltage of 47 V" in text
    text = told(case, Ratings(capacitor_voltage=50.0), {"peak_capacitor_voltage": 51.0})
    assert "nominal 48 V, up to 51 V" in text["capacitor-overvoltage"]


def test_capacitor_voltage_without_a_rating():
    text = told(Case(lossless(1e-6, 1e-6), constant(24.0)))["capacitor-overvoltage"]
    assert "No voltage rating is stated for peaks" in text
    assert "48 V (2 times the source)." in text
    text = told(resonant(10, 5.0))["capacitor-overvoltage"]
    assert "50 V (10 times the source's peak)." in text
    assert "capacitor-overvoltage" not in told(Case(slow(1e-6), constant(24.0)))
    # overshoot exp(-pi zeta/sqrt(1 - zeta^2)) is 0.2 at a damping ratio of 0.456
    for zeta, speaks in ((0.45, True), (0.46, False)):
        case = Case(loop(2 * zeta, 1.0, 1.0), constant(1.0))
        assert ("capacitor-overvoltage" in told(case)) is speaks


def test_steady_capacitor_voltage_above_its_rms_rating():
    case = resonant(10, 7.0 * ROOT2)  # 70 V rms across the capacitor
    rms = 70.0
    kept = Ratings(capacitor_voltage=200.0, capacitor_voltage_rms=rms * 1.001)
    assert "capacitor-overvoltage" not in told(case, kept)
    text = told(case, Ratings(capacitor_voltage=200.0, capacitor_voltage_rms=rms * 0.999))
    assert holds(text["capacitor-overvoltage"], "V", rms)
    assert "rms" in text["capacitor-overvoltage"]
    assert "capacitor-overvoltage" in told(case, kept, {"capacitor_voltage": 71.0})


def test_magnification_in_steady_state():
    text = told(resonant(10, 5.0))["magnification"]
    assert text.count(" 50 V (10 times)") == 2  # at resonance both have Q times the source
    assert "magnification" not in told(resonant(1.99, 5.0))
    assert "magnification" in told(resonant(2.01, 5.0))
    worst = {"capacitor_voltage": 11.0 / ROOT2}
    text = told(resonant(1.99, 5.0), worst=worst)["magnification"]
    assert "up to 11 V (2.2 times) over the parts" in text
    assert "inductor" not in text
    assert "magnification" not in told(Case(lossless(1e-3, 1e-6), constant(5.0)))


def test_resonance_is_named_inside_the_half_power_band_only():
    # R/(2 pi L) apart, with the product f_0^2: textbook half-power frequencies
    inductance, capacitance, resistance = 1e-3, 1e-6, 5.0
    natural = 1 / (2 * math.pi * math.sqrt(inductance * capacitance))
    bandwidth = resistance / (2 * math.pi * inductance)
    lower = math.hypot(natural, bandwidth / 2) - bandwidth / 2
    upper = lower + bandwidth
    for frequency, speaks in (
        (0.999 * lower, False),
        (1.001 * lower, True),
        (0.999 * upper, True),
        (1.001 * upper, False),
    ):
        found = told(Case(loop(resistance, inductance, capacitance), sine(1.0, frequency)))
        assert ("resonance" in found) is speaks
        if speaks:
            assert all(holds(found["resonance"], "Hz", each) for each in (lower, upper, natural))
    assert "resonance" not in told(resonant(0.99, 1.0))
    assert "resonance" in told(resonant(1.01, 1.0))


# --- current


def test_current_above_saturation():
    case = Case(lossless(1e-6, 1e-6), constant(24.0))  # 24 A
    assert "saturation" not in told(case)
    assert "saturation" not in told(case, Ratings(inductor_saturation=24.0))
    text = told(case, Ratings(inductor_saturation=20.0))["saturation"]
    assert holds(text, "A", 24.0)
    assert "saturation current of 20 A" in text
    assert "saturation" in told(case, Ratings(inductor_saturation=25.0), {"peak_current": 26.0})


def test_inrush_of_an_ideal_capacitor():
    """230 V on 40 uF through 20 uH: V sqrt(C/L) = 325.27 A."""
    # Bimbhra, Power Electronics, Example 5.4: 120 A of load and this inrush make 445.27 A.
    text = told(Case(lossless(20e-6, 40e-6), constant(230.0)))["inrush"]
    assert holds(text, "A", 445.27 - 120)
    assert "No saturation current is stated" in text
    assert "let-through" not in text  # it never ends
    stated = told(Case(lossless(20e-6, 40e-6), constant(230.0)), Ratings(inductor_saturation=400))
    assert "No saturation current" not in stated["inrush"]


def test_let_through_of_an_inrush():
    # all of C V^2/2 is lost in the resistance: integral of i^2 = C V^2/(2 R)
    text = told(Case(loop(0.1, 1e-6, 100e-6), constant(24.0)))["inrush"]
    assert f"the let-through over all time is {100e-6 * 24**2 / 0.2:.4g} A^2 s." in text


def test_let_through_beside_a_load_is_that_of_the_inrush():
    """With a load current flows for ever: five time constants 2/(R/L + G/C) are counted."""
    resistance, inductance, capacitance, load = 0.1, 1e-6, 100e-6, 2.0
    until = 10 / (resistance / inductance + 1 / (load * capacitance))

    def slope(_, states):
        voltage, current, _ = states
        return [
            (current - voltage / load) / capacitance,
            (24.0 - resistance * current - voltage) / inductance,
            current**2,
        ]

    run = solve_ivp(slope, (0, until), [0.0, 0.0, 0.0], method="DOP853", rtol=1e-10, atol=1e-10)
    parts = loop(resistance, inductance, capacitance, load_resistance=load)
    text = told(Case(parts, constant(24.0)))["inrush"]
    assert holds(text, "A^2 s", run.y[2, -1])
    assert holds(text, "s", until)


def test_inrush_speaks_of_notable_currents_only():
    assert "inrush" not in told(Case(lossless(1e-6, 1e-6), constant(0.99)))
    assert "inrush" in told(Case(lossless(1e-6, 1e-6), constant(1.01)))
    # started at its resonance a loop creeps up to its steady amplitude: no inrush
    assert "inrush" not in told(resonant(10, 100.0))


def test_a_fuse_is_held_against_the_let_through_of_one_switch_on():
    # C V^2/(2 R) = 100 uF * 24^2 / (2 * 0.1 ohm) = 0.288 A^2 s.
    case = Case(loop(resistance=0.1, inductance=1e-6, capacitance=100e-6), constant(24.0))
    (text,) = [each.text for each in cautions(case, fuse=Fuse(0.9, 10_000)) if each.id == "fuse"]
    assert holds(text, "A^2 s", 0.288)
    assert holds(text, "A^2 s", 0.29 * 0.9)
    assert "the maker's pulse curve governs" in text
    assert "fuse" not in told(case)


def test_other_closings_are_left_out_where_they_were_not_asked_for():
    case = Case(loop(resistance=0.1, inductance=1e-3, capacitance=100e-6), sine(325.0, 50.0))
    every = {each.id for each in cautions(case)}
    some = {each.id for each in cautions(case, closings=False)}
    assert every - some == {"closing-angle", "trapped-charge"}
