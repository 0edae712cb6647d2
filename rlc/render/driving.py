"""Cautions about what the source does: magnification, resonance, its end, a record's points."""

from __future__ import annotations

import math

import numpy as np

from rlc.front.marking import show
from rlc.render.findings import Findings, Size
from rlc.solver.shapes import Piecewise
from rlc.solver.steady import half_power_frequencies

# Common practice, no source:
MAGNIFIED = 2.0  # steady voltage over the source's: what a part chosen for the source may have
RESONANT_QUALITY = 1.0  # below it resonance magnifies nothing
COARSE = 0.1  # points farther apart than this share of the loop's natural period
BEGINS = 0.01  # a record's first value, as a share of its largest, that is a step of its own


def magnified(found: Findings, size: Size, source: str = "") -> str:
    """A voltage, and how many times the source's it is."""

    def write(value: float) -> str:
        if not math.isfinite(value):
            return show(value, "voltage")
        times = show(value / found.level, "number")
        return f"{show(value, 'voltage')} ({times} times{source})"

    return size.told(write)


def magnification(found: Findings) -> str:
    """Which parts have more than the source's voltage in steady state."""
    if not (found.alternating and found.level):
        return ""
    sizes = ((name, found.steady(name)) for name in ("capacitor", "inductor"))
    told = [
        f"{name} {magnified(found, size)}"
        for name, size in sizes
        if math.isfinite(size.nominal) and size.highest >= MAGNIFIED * found.level
    ]
    if not told:
        return ""
    return (
        f"In steady state parts of the loop have more than the source's"
        f" {show(found.level, 'voltage')} peak: {'; '.join(told)}."
    )


def resonance(found: Findings) -> str:
    """Which frequency of the source lies in the half-power band."""
    if not (found.alternating and found.quality >= RESONANT_QUALITY):
        return ""
    eq, source = found.case.equation, found.case.source
    nominal = tuple(float(edge) for edge in half_power_frequencies(eq))
    lower, upper = half_power_frequencies(found.batch.equation)
    reached = float(np.min(lower)), float(np.max(upper))
    within = [
        order.number * float(source.frequency)
        for order in source.every_order
        if reached[0] <= order.number * float(source.frequency) <= reached[1] and order.share > 0
    ]
    if not within:
        return ""
    # One in the nominal band is named first.
    frequency = min(within, key=lambda each: not nominal[0] <= each <= nominal[1])
    order = f", order {round(frequency / float(source.frequency))}," if source.orders else ""
    whose = "" if math.isinf(found.loop.load_resistance) else " of the capacitor's current"
    band, spread = f"{found.nominal}half-power band{whose}, {_range(nominal)}", ""
    if not nominal[0] <= frequency <= nominal[1]:
        band = f"half-power band{whose} over the parts, {_range(reached)}"
        spread = f"; the nominal band, {_range(nominal)}, misses it"
    natural = show(float(eq.natural) / (2 * math.pi), "frequency")
    return (
        f"The source's {show(frequency, 'frequency')}{order} lies in the {band}, around the"
        f" {found.nominal}resonance at {natural}{spread}. A small change of a part or of the"
        " frequency changes current and voltages much."
    )


def _range(edges: tuple[float, ...]) -> str:
    return " to ".join(show(edge, "frequency") for edge in edges)


def source_ends(found: Findings) -> str:
    """What is left when a pulse or a surge is over."""
    source = found.case.source
    if source.kind not in ("pulse", "surge") or found.case.repeats:
        return ""
    if not (found.shocks or found.burns):
        return ""
    ends = f"The source, {found.source}, ends at 0 V, which is no proof of a dead capacitor"
    if found.undamped:
        return f"{ends}: without losses it rings on."
    fades = found.size(lambda case: 1 / case.equation.slowest, "time")
    return (
        f"{ends}: the loop takes the charge away with a time constant of {fades}, and only while"
        " the source stays connected and conducts both ways."
    )


def switch_on_heat(found: Findings) -> str:
    """What continuous ratings do not cover: the heat of one switch-on in the resistor."""
    ratings = found.ratings
    stated = ratings.resistor_power is not None or ratings.inductor_current is not None
    if not stated or found.alternating or found.case.repeats:
        return ""
    passed = found.let_through(found.let_through_end).nominal
    heat = passed * float(found.loop.resistance)
    if not (math.isfinite(heat) and heat > 0):
        return ""
    return (
        "Continuous ratings are held against what stays in the end. The switch-on itself heats"
        f" the resistor with {found.nominal}{show(heat, 'energy')}, and each repetition with as"
        " much: the maker's pulse rating governs."
    )


def record(found: Findings) -> str:
    """What a measured source leaves out."""
    shape, told = found.case.source.shape, []
    if not isinstance(shape, Piecewise) or shape.kind != "recorded":
        return ""
    step = float(np.max(np.diff(shape.start)))
    period = 2 * math.pi / float(found.case.equation.natural)
    if step > COARSE * period:
        told.append(
            f"The record's points are up to {show(step, 'time')} apart, and the"
            f" {found.nominal}natural period of the loop is {show(period, 'time')}: what the source"
            " does between its points is taken as straight lines."
        )
    first = float(shape.level[0])
    if abs(first) > BEGINS * shape.largest:
        told.append(
            f"The record begins at {show(first, 'voltage')}, onto which the switch closes as onto"
            " a step."
        )
    return " ".join(told)
