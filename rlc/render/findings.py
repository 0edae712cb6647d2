"""The numbers that cautions are drawn from: peaks, charge, energy and other closings.

Limits that a standard sets were seen through public pages, not in the standard: "confirmed"
means that such a page states the figure.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np

from rlc.front.marking import show
from rlc.render.known import steady_of
from rlc.render.sources import short
from rlc.solver.case import Case
from rlc.solver.loop import Loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import ANY_ANGLE, Source
from rlc.solver.targets import Fuse, Ratings

# Upper limits of extra-low voltage, IEC 61140 and IEC 61558-1: confirmed.
ELV_AC_RMS = 50.0
ELV_DC = 120.0
# A peak of a ringing dc loop is held against ELV_DC although that limit is for a steady,
# ripple-free level, and so is the largest value of a pulse, a surge or a record: common
# practice, no source.
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
_NO_NAMES: Mapping[str, float] = {}


def peak_of(case: Case, element: str) -> float:
    """Largest magnitude of ``"current"`` [A] or of an element's voltage [V]."""
    return float(case.peak(element).value)


class Size(NamedTuple):
    """A nominal value, and the highest one over the parts."""

    nominal: float
    highest: float
    kind: str

    def __str__(self) -> str:
        return self.told(lambda value: show(value, self.kind))

    def told(self, write: Callable[[float], str]) -> str:
        """Both values, each as `write` puts it; one where they read the same."""
        nominal, highest = write(self.nominal), write(self.highest)
        if nominal == highest:
            return nominal
        bound = "" if math.isinf(self.highest) else "up to "
        return f"nominal {nominal}, {bound}{highest} over the parts"


def exceeds(value: float, limit: float) -> bool:
    """Whether a value is above a limit by more than rounding; never for not a number."""
    return value > limit * (1 + _ROUNDING)


def _highest(values: Any) -> float:
    """The highest of what exists; not a number where nothing does."""
    return float(np.fmax.reduce(np.ravel(values)))


@dataclass(frozen=True)
class Findings:
    """What the cautions draw on; each number is computed when it is first asked for."""

    case: Case
    ratings: Ratings
    worst: Mapping[str, float]
    fuse: Fuse | None = None
    corners: Case | None = None
    limits: Mapping[str, float] = field(default_factory=dict)

    @property
    def loop(self) -> Loop:
        return self.case.loop

    @cached_property
    def batch(self) -> Case:
        """Nominal and corners; the nominal case alone without tolerances."""
        return self.case if self.corners is None else self.corners

    @property
    def nominal(self) -> str:
        """What goes before a number that is the nominal one although parts have tolerances."""
        return "" if self.corners is None else "nominal "

    @property
    def alternating(self) -> bool:
        return self.case.source.alternating

    @cached_property
    def level(self) -> float:
        """Largest magnitude of the source at any time [V]."""
        return float(self.case.source.largest)

    @cached_property
    def source(self) -> str:
        """The source in words."""
        return short(self.case.source)

    @property
    def steady_source(self) -> bool:
        """Whether the limits of extra-low voltage are meant for it: alternating, or constant."""
        return self.alternating or self.case.source.kind == "dc"

    @property
    def undamped(self) -> bool:
        return float(self.case.equation.damping) == 0

    @cached_property
    def hazardous_source(self) -> bool:
        if self.alternating:
            return exceeds(float(self.case.source.rms), ELV_AC_RMS)
        return exceeds(self.level, ELV_DC)

    @cached_property
    def quality(self) -> float:
        """Quality factor; infinite without losses."""
        return float(REGISTER["quality_factor"](self.case))

    def size(
        self, compute: Callable[[Case], Any], kind: str, names: Mapping[str, float] = _NO_NAMES
    ) -> Size:
        """A quantity of the nominal case, and its highest over the corners and the samples.

        The samples' highest value may be at hand under one of the register's `names`, each with
        the factor that makes it the same quantity.
        """
        with np.errstate(all="ignore"):
            nominal = float(compute(self.case))
            over = nominal if self.corners is None else compute(self.corners)
        seen = [
            scale * highest
            for name, scale in names.items()
            if (highest := self.worst.get(name)) is not None
        ]
        return Size(nominal, _highest([nominal, _highest(over), *seen]), kind)

    def peak(self, element: str, kind: str, name: str = "") -> Size:
        """Peak of the current [A] or of an element's voltage [V] from closing on."""
        return self.size(lambda case: case.peak(element).value, kind, {name: 1.0})

    @cached_property
    def current(self) -> Size:
        """Peak of the current from closing on [A]."""
        return self.peak("current", "current", "peak_current")

    @cached_property
    def capacitor(self) -> Size:
        """Peak of the voltage across the capacitor's terminals [V]."""
        return self.peak("capacitor", "voltage", "peak_capacitor_voltage")

    @cached_property
    def inductor(self) -> Size:
        """Peak of the voltage across the inductor's terminals [V]."""
        return self.peak("inductor", "voltage", "peak_inductor_voltage")

    @cached_property
    def charge(self) -> Size:
        """Highest voltage that the capacitor is charged to, behind its series resistance [V]."""
        held, terminals = peak_of(self.case, "dielectric"), self.capacitor.nominal
        # the samples' terminals say nothing of a charge far from theirs
        near = abs(terminals - held) <= 0.01 * held
        return self.peak("dielectric", "voltage", "peak_capacitor_voltage" if near else "")

    def at_peak(
        self,
        formula: Callable[[Any, Any], Any],
        part: str,
        element: str,
        peak: Size,
        kind: str,
        name: str = "",
    ) -> Size:
        """What follows from a part's value and a peak, each loop with its own of both.

        The samples may reach a higher peak than the corners. Where their highest is not at hand
        under a name of its own, that peak is taken with the part's highest value.
        """
        found = self.size(
            lambda case: formula(getattr(case.loop, part), case.peak(element).value),
            kind,
            {name: 1.0},
        )
        corners = _highest(self.batch.peak(element).value)
        if self.worst.get(name) is not None or not peak.highest > corners:
            return found
        with np.errstate(all="ignore"):
            bound = formula(np.max(getattr(self.batch.loop, part)), peak.highest)
        return found._replace(highest=_highest([found.highest, bound]))

    @cached_property
    def energy(self) -> Size:
        """Energy in the capacitor at its highest charge [J]."""
        charged = "capacitance", "dielectric", self.charge
        return self.at_peak(_stored, *charged, "energy", "stored_energy")

    @cached_property
    def inductive_energy(self) -> Size:
        """Energy in the inductance at the peak current [J]."""
        return self.at_peak(_stored, "total_inductance", "current", self.current, "energy")

    @cached_property
    def resistor(self) -> Size:
        """Peak of the voltage across the resistor [V]."""
        return self.at_peak(np.multiply, "resistance", "current", self.current, "voltage")

    def discharge(self, to: float) -> Size:
        """Time in which the load takes the capacitor's terminals from its charge to a voltage."""
        load = float(self.loop.load_resistance)
        path = load + float(self.loop.series_resistance)

        def time(capacitance: Any, held: Any) -> Any:
            return path * capacitance * np.maximum(np.log(held * (load / path) / to), 0.0)

        return self.at_peak(time, "capacitance", "dielectric", self.charge, "time")

    @cached_property
    def shocks(self) -> bool:
        """Whether the charge that the capacitor holds is worth a caution for its voltage."""
        voltage, capacitance = self.charge.highest, float(np.max(self.batch.loop.capacitance))
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
        return exceeds(self.energy.highest, SMALL_ENERGY)

    def steady(self, element: str) -> Size:
        """Largest steady value of ``"current"`` [A] or of a voltage [V]; not a number if none."""
        kind = "current" if element == "current" else "voltage"
        name = "current" if element == "current" else f"{element}_voltage"
        names = {f"{name}_amplitude": 1.0, name: 1 / self.case.source.rms_per_amplitude}
        # The register's amplitudes are those of the fundamental alone.
        if self.case.source.orders:
            names = {}
        return self.size(lambda case: steady_of(case, element), kind, names)

    @cached_property
    def inrush(self) -> float:
        """Highest ratio of a loop's peak current to its own largest steady one.

        Infinite where no current stays, and for a train of pulses.
        """
        if self.case.repeats:
            return math.inf
        with np.errstate(all="ignore"):
            ratio = self.batch.peak("current").value / steady_of(self.batch, "current")
        return _highest(ratio)

    @property
    def searched(self) -> bool:
        """Whether other closings of an alternating source are looked at."""
        if not (self.alternating and self.level):
            return False
        if math.isinf(self.quality):
            return True
        eq, source = self.case.equation, self.case.source
        away = min(
            abs(2 * math.pi * order.number * float(source.frequency) - float(eq.natural))
            for order in source.every_order
        )
        flat = self.quality > _SHARP_QUALITY and away < _AT_RESONANCE * float(eq.gamma)
        return self.quality <= _SEARCHED_QUALITY and not flat

    @cached_property
    def worst_closing(self) -> Case:
        """The same switch-on at the worst closing angles."""
        if self.case.source.worst_angle and self.case.source.window in (None, ANY_ANGLE):
            return self.case
        return replace(self.case, source=self._at_any_angle)

    def reclosing(self, trapped: float) -> Case:
        """Closing onto a capacitor charged [V] either way, at the worst angles."""
        return Case(self.loop, self._at_any_angle, np.asarray(trapped), either_polarity=True)

    @property
    def _at_any_angle(self) -> Source:
        return replace(self.case.source, closing_angle=None, window=None)

    def worst_angle(self, element: str) -> float:
        """Worst closing angle for ``"current"`` or ``"capacitor"`` [rad].

        Not a number where the peak is the steady amplitude, whatever the angle.
        """
        if not math.isfinite(float(self.worst_closing.peak(element).time)):
            return math.nan
        name = "current" if element == "current" else "capacitor_voltage"
        return float(REGISTER[f"worst_closing_angle_{name}"](self.worst_closing))

    @property
    def let_through_end(self) -> float | None:
        """Until when the let-through counts, where it would grow for ever; else None [s]."""
        if self.alternating or not math.isfinite(self.quality):
            return None
        if math.isfinite(float(REGISTER["let_through"](self.case))):
            return None
        shape = self.case.source.shape
        end = shape.gone if shape is not None else 0.0
        return end + _LET_THROUGH_TIME_CONSTANTS * float(REGISTER["time_constant"](self.case))

    def let_through(self, until: float | None) -> Size:
        """Let-through of one switch-on, to a stated time or of the whole of it [A^2 s]."""
        entry, names = REGISTER["let_through"], {"let_through": 1.0} if until is None else _NO_NAMES
        return self.size(lambda case: entry(case, until), "let_through", names)


def _stored(part: Any, peak: Any) -> Any:
    return 0.5 * part * peak * peak
