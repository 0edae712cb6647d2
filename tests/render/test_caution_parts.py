"""Cautions: numbers over the parts' tolerances, each of the unit that it belongs to."""

import itertools
import math
import re

import numpy as np
import pytest
from hand import holds, loop, lossless, resonant, slow, spread_over, told

from rlc.front.load import load
from rlc.review import names_in, review
from rlc.solver.case import Case
from rlc.solver.source import constant, sine
from rlc.solver.targets import Fuse, Ratings

ROOT2 = math.sqrt(2)
TENTH, FIFTH = (0.9, 1.1), (0.8, 1.2)


def step_peak(level, resistance, inductance, capacitance):
    """Overshoot exp(-pi zeta/sqrt(1 - zeta^2)), textbook; the case is underdamped."""
    zeta = resistance / 2 * math.sqrt(capacitance / inductance)
    return level * (1 + math.exp(-math.pi * zeta / math.sqrt(1 - zeta * zeta)))


def step_current(level, resistance, inductance, capacitance):
    """Peak of V/(L w) exp(-a t) sin(w t), where tan(w t) = w/a; textbook."""
    decay = resistance / 2 / inductance
    ringing = math.sqrt(1 / (inductance * capacitance) - decay * decay)
    time = math.atan2(ringing, decay) / ringing
    return level / inductance / ringing * math.exp(-decay * time) * math.sin(ringing * time)


def units(nominal, *factors):
    """Nominal parts and all corners."""
    yield nominal
    for corner in itertools.product(*factors):
        yield tuple(value * factor for value, factor in zip(nominal, corner, strict=True))


# --- energies


def test_energy_goes_with_the_voltage_of_its_own_unit():
    """The highest voltage is that of the lowest C, the highest energy that of the highest."""
    parts, level = (0.5, 1e-3, 1e-3), 100.0
    case = Case(loop(*parts), constant(level))
    corners = spread_over(case, FIFTH, TENTH, FIFTH)
    each = [(unit[2], step_peak(level, *unit)) for unit in units(parts, FIFTH, TENTH, FIFTH)]
    energies = [c * v * v / 2 for c, v in each]
    # not the product of two highest values that no unit has at once
    assert max(energies) < 0.98 * max(c for c, _ in each) * max(v for _, v in each) ** 2 / 2
    text = told(case, corners=corners)["stored-energy"]
    voltage, energy = text.split(". ")[:2]
    assert holds(voltage.split("up to")[0], "V", each[0][1])
    assert holds(voltage.split("up to")[1], "V", max(v for _, v in each))
    assert holds(energy.split("up to")[0], "J", energies[0])
    assert holds(energy.split("up to")[1], "J", max(energies))
    assert "over the parts" not in told(case)["stored-energy"]


def test_a_higher_voltage_among_the_samples_is_taken_with_the_highest_capacitance():
    case = Case(lossless(1e-3, 1e-3), constant(100.0))  # 200 V whatever the parts
    corners = spread_over(case, capacitance=TENTH)
    text = told(case, corners=corners)["stored-energy"]
    assert "on the capacitor: 200 V. Energy in it: nominal 20 J, up to 22 J over the parts." in text
    sampled = {"peak_capacitor_voltage": 210.0}
    text = told(case, worst=sampled, corners=corners)["stored-energy"]
    assert holds(text.split("up to")[1], "V", 210.0)
    assert holds(text.split("up to")[2], "J", 1.1e-3 * 210.0**2 / 2)
    text = told(case, worst=sampled | {"stored_energy": 23.0}, corners=corners)["stored-energy"]
    assert "nominal 20 J, up to 23 J over the parts" in text
    # samples that stay below the corners add nothing
    assert told(case, worst={"stored_energy": 21.0}, corners=corners) == told(case, corners=corners)


def test_the_unit_with_the_largest_capacitance_decides_whether_to_speak():
    # 0.1 uF from 60 V to 450 V (IEC 60335-1, 8.1.4)
    case = Case(slow(0.095e-6), constant(300.0))
    assert "stored-energy" not in told(case)
    assert "shock" in told(case, corners=spread_over(case, capacitance=TENTH))["stored-energy"]
    assert "stored-energy" not in told(case, corners=spread_over(case, capacitance=(0.9, 1.05)))


def test_energy_in_the_inductance_goes_with_the_current_of_its_own_unit():
    """Without losses it is C V^2/2 in every unit, although i^2 goes with C/L."""
    case = Case(lossless(2e-6, 200e-6), constant(10.0))
    text = told(case, corners=spread_over(case, inductance=FIFTH, capacitance=TENTH))[
        "interrupting"
    ]
    assert "Energy in the inductance: nominal 10 mJ, up to 11 mJ over the parts." in text
    assert "Peak current: nominal 100 A" in text
    assert holds(text, "A", 100 * math.sqrt(1.1 / 0.8))
    # the source's share of the inductance counts as well
    shared = Case(lossless(1e-6, 200e-6, source_inductance=1e-6), constant(10.0))
    assert "Energy in the inductance: 10 mJ." in told(shared)["interrupting"]
    below = Case(lossless(2e-6, 19e-6), constant(10.0))  # 0.95 mJ, and 1.045 mJ at most
    assert "interrupting" not in told(below)
    assert "interrupting" in told(below, corners=spread_over(below, capacitance=TENTH))


# --- voltages


def test_each_element_is_looked_at_over_the_parts():
    # 10 A at closing through 20 ohm: 200 V, and 220 V at 10 % more
    case = Case(loop(20.0, 1e-3, 1e-6), constant(12.0), 0.0, 10.0)
    text = told(case, corners=spread_over(case, resistance=TENTH))["extra-low-voltage"]
    assert "resistor nominal 200 V, up to 220 V over the parts" in text
    # within the limit nominally, above it with 10 % more
    case = Case(loop(11.5, 1e-3, 1e-6), constant(12.0), 0.0, 10.0)
    assert "resistor" not in told(case)["extra-low-voltage"]
    corners = spread_over(case, resistance=TENTH)
    assert (
        "resistor nominal 115 V, up to 126.5 V" in told(case, corners=corners)["extra-low-voltage"]
    )


def steady_voltages(amplitude, frequency, resistance, inductance, capacitance):
    """Capacitor and inductor, by complex impedances."""
    omega = 2 * math.pi * frequency
    current = amplitude / complex(resistance, omega * inductance - 1 / (omega * capacitance))
    return abs(current) / (omega * capacitance), abs(current) * omega * inductance


def test_steady_voltages_are_those_of_the_worst_corner():
    parts, amplitude, frequency = (2.0, 1e-3, 1e-6), 5.0, 4.5e3
    case = Case(loop(*parts), sine(amplitude, frequency))
    factors = (TENTH, TENTH, TENTH)
    each = [steady_voltages(amplitude, frequency, *unit) for unit in units(parts, *factors)]
    text = told(case, corners=spread_over(case, *factors))["magnification"]
    capacitor, inductor = text.split(": ")[1].split("; ")
    for words, nominal, highest in zip(
        (capacitor, inductor), each[0], np.transpose(each), strict=True
    ):
        low, high = words.split("up to")
        assert holds(low, "V", nominal)
        assert f"({nominal / amplitude:.4g} times)" in low
        assert holds(high, "V", max(highest))
        assert f"({max(highest) / amplitude:.4g} times)" in high


def test_what_steady_opening_leaves_and_the_rms_are_over_the_parts():
    # below resonance at 1 - w^2 L C = 1/2 nominally: 2 times the source, and 1/0.45 at most
    omega = math.sqrt(0.5 / (1e-3 * 1e-6))
    case = Case(lossless(1e-3, 1e-6), sine(200.0, omega / 2 / math.pi))
    corners = spread_over(case, capacitance=TENTH)
    text = told(case, corners=corners)["residual-voltage"].split("opened in steady state: ")[1]
    assert "nominal 400 V, up to 444.4 V over the parts." in text
    ratings = Ratings(capacitor_voltage_rms=300.0)  # 282.8 V and 314.3 V
    assert "capacitor-overvoltage" in told(case)
    assert " rms" not in told(case, ratings)["capacitor-overvoltage"]
    text = told(case, ratings, corners=corners)["capacitor-overvoltage"]
    assert "rms: nominal 282.8 V, up to 314.3 V over the parts, above the rated 300 V rms." in text


# --- discharge


def discharge_text(seconds, **more):
    """400 V, a load of 1 Mohm, and a capacitance that it takes so long."""
    load = 1e6
    capacitance = seconds / (load * math.log(400 / 50))
    case = Case(slow(capacitance, load_resistance=load), constant(400.0))
    return told(case, corners=spread_over(case, **more))["residual-voltage"]


def test_the_largest_capacitance_takes_longest_to_discharge():
    text = discharge_text(50.0, capacitance=FIFTH)
    # a source resistance below 1e-4 of the load leaves the four digits
    assert "to 50 V in nominal 50 s, up to 60 s over the parts." in text
    assert "this takes less" in discharge_text(49.9, capacitance=FIFTH)
    assert "over the parts this may take longer" in discharge_text(50.1, capacitance=FIFTH)
    assert "steady state, this takes longer" in discharge_text(60.1, capacitance=FIFTH)
    text = discharge_text(110.0, capacitance=FIFTH)
    assert "in nominal 110 s, up to 2.2 min over the parts." in text


def test_the_discharge_goes_with_the_charge_of_its_own_unit():
    """Each from its own peak: R C ln(v/50 V)."""
    parts, level, load = (2.0, 10e-3, 1e-3), 300.0, 20e3
    case = Case(loop(*parts, load_resistance=load), constant(level))
    factors = (TENTH, FIFTH, FIFTH)
    # Such a load takes 1e-4 of the voltage: the unloaded peak is good to three digits
    times = [
        load * unit[2] * math.log(step_peak(level, *unit) / 50) for unit in units(parts, *factors)
    ]
    text = told(case, corners=spread_over(case, *factors))["residual-voltage"]
    low, high = text.split(" in nominal ")[1].split(", up to ")
    assert float(low.split(" s")[0]) == pytest.approx(times[0], rel=1e-3)
    assert float(high.split(" s")[0]) == pytest.approx(max(times), rel=1e-3)


def test_a_time_constant_is_over_the_parts():
    parts = slow(10e-3, load_resistance=100.0)
    case = Case(parts, constant(24.0))
    text = told(case, corners=spread_over(case, capacitance=FIFTH))["residual-voltage"]
    assert "a time constant of nominal 1 s, up to 1.2 s over the parts." in text
    parts = slow(10e-3, load_resistance=18e3)  # 180 s
    assert "a time constant of 3 min." in told(Case(parts, constant(24.0)))["residual-voltage"]


# --- current


def test_current_and_let_through_of_an_inrush_are_over_the_parts():
    parts, level = (0.1, 1e-6, 100e-6), 24.0
    case = Case(loop(*parts), constant(level))
    factors = (FIFTH, FIFTH, FIFTH)
    corners = spread_over(case, *factors)
    found = told(case, corners=corners, fuse=Fuse(1.5, 100))
    each = list(units(parts, *factors))
    currents = [step_current(level, *unit) for unit in each]
    # all of C V^2/2 is lost in the resistance: C V^2/(2 R)
    passed = [c * level**2 / 2 / r for r, _, c in each]
    low, high, through = found["inrush"].split("up to")
    assert holds(low, "A", currents[0])
    assert holds(high, "A", max(currents))
    assert max(passed) == pytest.approx(0.432)
    assert "nominal 0.288 A^2 s, up to 0.432 A^2 s over the parts" in found["fuse"]
    assert "over all time is nominal 0.288 A^2 s" in high
    assert through.startswith(" 0.432 A^2 s over the parts.")
    sampled = told(case, worst={"let_through": 0.44}, corners=corners)["inrush"]
    assert "up to 0.44 A^2 s over the parts" in sampled


def test_let_through_beside_a_load_ends_in_every_unit():
    """Over all time a load lets through without bound; so do the samples."""
    case = Case(loop(0.1, 1e-6, 100e-6, load_resistance=20.0), constant(24.0))
    corners = spread_over(case, capacitance=FIFTH)
    found = told(case, worst={"let_through": math.inf}, corners=corners, fuse=Fuse(1.5, 100))
    assert "unbounded" not in found["inrush"] + found["fuse"]
    (said,) = re.findall(r"is (nominal .* over the parts)\.", found["inrush"])
    assert f"one switch-on is {said}." in found["fuse"]


def test_an_inrush_is_held_against_the_steady_current_of_its_own_unit():
    """A loop that creeps up to its steady amplitude has no inrush, resonant or not."""
    case = resonant(10, 100.0)
    # the highest peak is 1.43 times the nominal steady amplitude, and that of no unit its own
    assert "inrush" not in told(case, corners=spread_over(case, resistance=(0.7, 1.1)))
    case = Case(lossless(1e-6, 1e-6), constant(0.95))  # 0.95 A, and 1.06 A at most
    assert "inrush" not in told(case)
    assert "inrush" in told(case, corners=spread_over(case, inductance=FIFTH))


# --- resonance


def band(resistance, inductance, capacitance):
    """Half-power frequencies of a series loop: R/(2 pi L) apart, their product f_0^2."""
    width = resistance / (2 * math.pi * inductance)
    natural = 1 / (2 * math.pi * math.sqrt(inductance * capacitance))
    lower = math.hypot(natural, width / 2) - width / 2
    return lower, lower + width


def test_tolerances_can_carry_the_band_onto_the_source():
    parts, factors = (5.0, 1e-3, 1e-6), (TENTH, TENTH, TENTH)
    edges = [band(*unit) for unit in units(parts, *factors)]
    nominal = edges[0]
    lowest, highest = min(low for low, _ in edges), max(high for _, high in edges)
    for frequency, over_parts, speaks in (
        (0.999 * lowest, False, False),
        (1.001 * lowest, True, True),
        (0.999 * nominal[0], True, True),
        (1.001 * nominal[0], False, True),
        (0.999 * nominal[1], False, True),
        (1.001 * nominal[1], True, True),
        (0.999 * highest, True, True),
        (1.001 * highest, False, False),
    ):
        case = Case(loop(*parts), sine(1.0, frequency))
        found = told(case, corners=spread_over(case, *factors))
        assert ("resonance" in found) is speaks
        if speaks:
            text = found["resonance"]
            assert ("half-power band over the parts" in text) is over_parts
            assert ("nominal half-power band" in text) is not over_parts
            assert all(holds(text, "Hz", edge) for edge in nominal)
            assert all(holds(text, "Hz", edge) for edge in (lowest, highest)) is over_parts
            assert ("resonance" in told(case)) is not over_parts


def test_with_a_load_the_band_is_that_of_the_capacitors_current():
    assert "band," in told(resonant(10, 1.0))["resonance"]
    case = resonant(10, 1.0)
    parts = loop(float(case.loop.resistance), 1e-3, 1e-6, load_resistance=1e4)
    text = told(Case(parts, case.source))["resonance"]
    assert "half-power band of the capacitor's current," in text


# --- through the sheet

SHEET = """
[resistor]
value = "0.5 ohm"
{tolerance}
[inductor]
value = "1 mH"
saturation_current = "50 A"
[capacitor]
value = "1 mF"
{tolerance}
[source]
kind = "dc"
voltage = "100 V"
[switch_on]
capacitor_voltage = "-20 V"
[[target]]
quantity = "peak_current"
max = "55 A"
[[target]]
quantity = "peak_current"
max = "58 A"
[[target]]
quantity = "gain"
at = "1 kHz"
max = 0.001
"""


@pytest.mark.parametrize("groups", [("loop", "steady"), ("loop", "switch-on"), ("loop",)])
def test_every_command_knows_the_tolerances_of_a_sheet(tmp_path, groups):
    path = tmp_path / "sheet.toml"
    path.write_text(SHEET.format(tolerance='tolerance = "10 %"'), encoding="utf-8")
    loaded = load(path)
    texts = {each.id: each.text for each in review(loaded, names_in(*groups)).cautions}
    # charged to -20 V the loop rings from there: a step of 120 V, 20 V lower
    parts, factors = (0.5, 1e-3, 1e-3), (TENTH, (1, 1), TENTH)
    each = list(units(parts, *factors))
    energies = [c * (step_peak(120.0, r, x, c) - 20) ** 2 / 2 for r, x, c in each]
    energy = texts["stored-energy"].split("Energy in it: ")[1]
    low, high = energy.split("up to")
    assert holds(low, "J", energies[0])
    assert holds(high, "J", max(energies))
    # the other polarity is a step of 80 V: about 57 A, which the lower of two limits refuses
    opposite = step_current(80.0, *parts)
    assert 55 < opposite < 58
    if "switch-on" in groups:
        assert holds(texts["trapped-charge"], "A", opposite)
        assert "(above the rated 50 A and the target of 55 A)" in texts["trapped-charge"]

    path.write_text(SHEET.format(tolerance=""), encoding="utf-8")
    plain = review(load(path), names_in(*groups)).cautions
    assert not any("over the parts" in each.text or "nominal" in each.text for each in plain)


def test_a_batch_of_nominal_units_says_nothing_of_parts():
    for case in (
        Case(loop(0.5, 1e-3, 1e-3, load_resistance=50.0), constant(100.0)),
        Case(loop(0.5, 1e-3, 1e-3, load_resistance=50e3), constant(100.0), 5.0),
    ):
        same = Case(case.loop.map(lambda x: np.full(3, x)), case.source, case.capacitor_voltage)
        found = told(case, corners=same)
        assert not any("over the parts" in text for text in found.values())
        assert {"stored-energy", "residual-voltage", "inrush"} <= found.keys()
