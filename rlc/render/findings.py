"""The numbers that cautions are drawn from: peaks, charge, energy and other closings.

Limits that a standard sets were seen through public pages, not in the standard: "confirmed"
means that such a page states the figure.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import NamedTuple

import numpy as np

from rlc.front.marking import show
from rlc.solver.case import Case
from rlc.solver.loop import Loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source
from rlc.solver.targets import Fuse, Ratings

# Upper limits of extra-low voltage, IEC 61140 and IEC 61558-1: confirmed.
ELV_AC_RMS = 50.0
ELV_DC = 120.0
# A peak of a ringing dc loop is held against ELV_DC although that limit is for a steady,
# ripple-free level: common practice, no source.
ELV_AC_PEAK = ELV_AC_RMS * math.sqrt(2)

# Direct voltage that may be touched when dry, as quoted with IEC 61140 and 60364: confirmed.
TOUCHABLE_DC = 60.0

# What IEC 60335-1, 8.1.4 lets be touched behind a protective impedance: capacitance up to
# 450 V, charge up to 15 kV, energy above: confirmed (public quotations of the clause). Borrowed
# here as the size from which a charge that is held is worth a caution.
SMALL_CAPACITANCE, SMALL_CAPACITANCE_UP_TO = 1e-7, 450.0
SMALL_CHARGE, SMALL_CHARGE_UP_TO = 45e-6, 15e3
SMALL_ENERGY = 0.35

# Rounding may lift a value that is exactly at its limit: 50 V rms is stored as a peak.
_ROUNDING = 1e-9
# Above this quality factor, which no real loop has, one search takes seconds.
_SEARCHED_QUALITY = 1e5
_LET_THROUGH_TIME_CONSTANTS = 5.0
# At resonance a sharp loop's rotating and free parts come to S (1 - exp(-a t)) and
# k S exp(-a t): no closing angle and no charge below S lifts their sum by a per cent, and
# being flat it takes long to search. As shares of the bandwidth:
_SHARP_QUALITY, _AT_RESONANCE = 100.0, 0.05


def peak_of(case: Case, element: str) -> float:
    """Largest magnitude of ``"current"`` [A] or of an element's voltage [V]."""
    return float(case.peak(element).value)


class Size(NamedTuple):
    """A nominal value, and the highest one over the parts."""

    nominal: float
    highest: float
    kind: str

    def __str__(self) -> str:
        nominal, highest = show(self.nominal, self.kind), show(self.highest, self.kind)
        if nominal == highest:
            return nominal
        return f"nominal {nominal}, up to {highest} over the parts"


def exceeds(value: float, limit: float) -> bool:
    """Whether a value is above a limit by more than rounding; never for not a number."""
    return value > limit * (1 + _ROUNDING)


@dataclass(frozen=True)
class Findings:
    """What the cautions draw on; each number is computed when it is first asked for."""

    case: Case
    ratings: Ratings
    worst: Mapping[str, float]
    fuse: Fuse | None = None

    @property
    def loop(self) -> Loop:
        return self.case.loop

    @property
    def sine(self) -> bool:
        return self.case.source.kind == "sine"

    @cached_property
    def level(self) -> float:
        """Peak of the source [V]."""
        return abs(float(self.case.source.amplitude))

    @cached_property
    def source(self) -> str:
        """The source in words."""
        if not self.sine:
            return f"{show(self.level, 'voltage')} dc"
        rms = show(float(self.case.source.rms), "voltage")
        return f"{rms} rms ({show(self.level, 'voltage')} peak)"

    @cached_property
    def hazardous_source(self) -> bool:
        return exceeds(float(self.case.source.rms), ELV_AC_RMS if self.sine else ELV_DC)

    @cached_property
    def quality(self) -> float:
        """Quality factor; infinite without losses."""
        return float(REGISTER["quality_factor"](self.case))

    def size(self, nominal: float, name: str, kind: str, scale: float = 1.0) -> Size:
        highest = self.worst.get(name)
        if highest is None or not highest * scale > nominal:
            return Size(nominal, nominal, kind)
        return Size(nominal, highest * scale, kind)

    @cached_property
    def current(self) -> Size:
        """Peak of the current from closing on [A]."""
        return self.size(peak_of(self.case, "current"), "peak_current", "current")

    @cached_property
    def capacitor(self) -> Size:
        """Peak of the voltage across the capacitor's terminals [V]."""
        return self.size(peak_of(self.case, "capacitor"), "peak_capacitor_voltage", "voltage")

    @cached_property
    def inductor(self) -> Size:
        """Peak of the voltage across the inductor's terminals [V]."""
        return self.size(peak_of(self.case, "inductor"), "peak_inductor_voltage", "voltage")

    @cached_property
    def charge(self) -> Size:
        """Highest voltage that the capacitor is charged to, behind its series resistance [V]."""
        terminals = self.capacitor
        if self.loop.series_resistance == 0:
            return terminals
        held = peak_of(self.case, "dielectric")
        # the terminals' highest value over the parts says nothing of a charge far from theirs
        if not abs(terminals.nominal - held) <= 0.01 * held:
            return Size(held, held, "voltage")
        return Size(held, max(held, terminals.highest), "voltage")

    @cached_property
    def energy(self) -> Size:
        """Energy in the capacitor at its highest charge [J]."""
        stored = 0.5 * float(self.loop.capacitance) * self.charge.nominal * self.charge.nominal
        return self.size(stored, "stored_energy", "energy")

    @cached_property
    def shocks(self) -> bool:
        """Whether the charge that the capacitor holds is worth a caution for its voltage."""
        voltage, capacitance = self.charge.highest, float(self.loop.capacitance)
        if not exceeds(voltage, TOUCHABLE_DC):
            return False
        if voltage <= SMALL_CAPACITANCE_UP_TO:
            return exceeds(capacitance, SMALL_CAPACITANCE)
        if voltage <= SMALL_CHARGE_UP_TO:
            return exceeds(capacitance * voltage, SMALL_CHARGE)
        return self.burns

    @cached_property
    def burns(self) -> bool:
        """Whether the energy in the capacitor is worth a caution at any voltage."""
        highest = 0.5 * float(self.loop.capacitance) * self.charge.highest * self.charge.highest
        return exceeds(max(highest, self.energy.highest), SMALL_ENERGY)

    def steady(self, element: str) -> float:
        """Steady amplitude of ``"current"`` or of a voltage."""
        return self.level * float(np.abs(getattr(self.case.steady, element)))

    def steady_size(self, element: str) -> Size:
        """Steady amplitude of the capacitor's or inductor's voltage under a sine [V]."""
        nominal = self.steady(element)
        amplitude = self.size(nominal, f"{element}_voltage_amplitude", "voltage")
        from_rms = self.size(nominal, f"{element}_voltage", "voltage", math.sqrt(2))
        return max(amplitude, from_rms)

    @property
    def at_rest(self) -> bool:
        """Whether the loop is closed with no charge and no current in it."""
        return not (self.case.capacitor_voltage or self.case.initial_current)

    @property
    def searched(self) -> bool:
        """Whether other closings of a sine are looked at."""
        if not (self.sine and self.level):
            return False
        if math.isinf(self.quality):
            return True
        eq = self.case.equation
        away = abs(2 * math.pi * float(self.case.source.frequency) - float(eq.natural))
        flat = self.quality > _SHARP_QUALITY and away < _AT_RESONANCE * float(eq.gamma)
        return self.quality <= _SEARCHED_QUALITY and not flat

    @cached_property
    def worst_closing(self) -> Case:
        """The same switch-on at the worst closing angles."""
        if self.case.source.worst_angle:
            return self.case
        states = self.case.capacitor_voltage, self.case.initial_current
        return Case(self.loop, self._at_any_angle, *states)

    def reclosing(self, trapped: float) -> Case:
        """Closing onto a charged capacitor [V] at the worst angles."""
        return Case(self.loop, self._at_any_angle, np.asarray(trapped))

    @property
    def _at_any_angle(self) -> Source:
        return replace(self.case.source, closing_angle=None)

    def worst_angle(self, element: str) -> float:
        """Worst closing angle for ``"current"`` or ``"capacitor"`` [rad].

        Not a number where the peak is the steady amplitude, whatever the angle.
        """
        if not math.isfinite(float(self.worst_closing.peak(element).time)):
            return math.nan
        name = "current" if element == "current" else "capacitor_voltage"
        return float(REGISTER[f"worst_closing_angle_{name}"](self.worst_closing))

    @property
    def let_through(self) -> str:
        """The end of a sentence on what a fuse lets through, where that is bounded."""
        entry, case = REGISTER["let_through"], self.case
        passed, when = float(entry(case)), "over all time"
        if self.sine:
            when = "in the first source period"
        elif math.isinf(passed) and math.isfinite(self.quality):
            until = _LET_THROUGH_TIME_CONSTANTS * float(REGISTER["time_constant"](case))
            passed, when = float(entry(case, until)), f"in the first {show(until, 'time')}"
        if not math.isfinite(passed):
            return ""
        return f"; the let-through is {show(passed, 'let_through')} {when}"
