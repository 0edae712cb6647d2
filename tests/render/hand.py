"""Loops whose answers are known by hand, and numbers read back from a caution's text."""

import itertools
import math
import re
from dataclasses import fields

import numpy as np

from rlc.render.cautions import Caution, cautions
from rlc.solver.case import Case
from rlc.solver.loop import Loop, make_loop
from rlc.solver.source import sine
from rlc.solver.targets import Ratings

POWERS = {"p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9}


def loop(resistance, inductance, capacitance, **more):
    return make_loop(resistance=resistance, inductance=inductance, capacitance=capacitance, **more)


def slow(capacitance, **more):
    """Far above critical damping: the capacitor's peak is the source's level."""
    resistance = 200 * math.sqrt(1e-6 / capacitance)
    return loop(resistance, 1e-6, capacitance, **more)


def lossless(inductance, capacitance, **more):
    return loop(0.0, inductance, capacitance, **more)


def told(case, ratings=None, worst=None, **more):
    found = cautions(case, ratings or Ratings(), worst, **more)
    assert all(isinstance(each, Caution) for each in found)
    return {each.id: each.text for each in found}


def printed(text, unit):
    """Numbers with a unit in a text, as ranges of what rounds to the digits that are printed."""
    found = []
    for digits, prefix in re.findall(rf"(?<![\w.])([\d.]+) ([pnumkMG]?){re.escape(unit)}\b", text):
        scale = 10.0 ** POWERS[prefix]
        # four significant digits, of which zeros at the end are dropped
        half = 0.5 * 10.0 ** (math.floor(math.log10(float(digits))) - 3) if float(digits) else 0.0
        found.append(((float(digits) - half) * scale, (float(digits) + half) * scale))
    return found


def holds(text, unit, value):
    """Whether a text has this value, to the digits printed."""
    slack = 1e-9 * value
    return any(low - slack <= value <= high + slack for low, high in printed(text, unit))


def spread_over(case, resistance=(1, 1), inductance=(1, 1), capacitance=(1, 1)):
    """The corners of a loop whose parts lie between these multiples of their nominal values."""
    nominal = case.loop
    rows = [(1, 1, 1), *itertools.product(resistance, inductance, capacitance)]
    values = {each.name: getattr(nominal, each.name) for each in fields(Loop)}
    for name, factors in zip(
        ("resistance", "inductance", "capacitance"), np.transpose(rows), strict=True
    ):
        values[name] = values[name] * factors
    return Case(Loop(**values), case.source, case.capacitor_voltage, case.initial_current)


def resonant(quality, amplitude, angle=0.0):
    """At resonance, L = 1 mH and C = 1 uF: V_C is quality times the source."""
    impedance = math.sqrt(1e-3 / 1e-6)
    frequency = 1 / (2 * math.pi * math.sqrt(1e-3 * 1e-6))
    return Case(loop(impedance / quality, 1e-3, 1e-6), sine(amplitude, frequency, angle))
