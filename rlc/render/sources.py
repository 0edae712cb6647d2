"""A source in words and in numbers, kind by kind."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from rlc.front.marking import show
from rlc.solver.case import Case
from rlc.solver.shapes import Piecewise
from rlc.solver.source import ANY_ANGLE, Source


def sentence(case: Case) -> str:
    """The source and the states at closing, in one sentence.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    str
    """
    source = case.source
    found = [f"Source: {_WORDS[source.kind](source)}"]
    if source.alternating:
        found.append(f"closing angle: {closing(source)}")
    found.append(f"{_charge(case)} on the capacitor at closing")
    if float(case.initial_current):
        found.append(f"{show(float(case.initial_current), 'current')} in the loop")
    return "; ".join(found) + "."


def closing(source: Source) -> str:
    """At which angle the switch closes.

    Parameters
    ----------
    source : Source
        An alternating one.

    Returns
    -------
    str
        Such as "between -15 deg and 15 deg from the rising zero".
    """
    if source.closing_angle is not None:
        return f"{show(float(source.closing_angle), 'angle')} from the rising zero"
    if source.window is None:
        return "the worst"
    if source.window == ANY_ANGLE:
        return "any (random)"
    low, high = (show(end, "angle") for end in source.window)
    return f"between {low} and {high} from the rising zero"


def short(source: Source) -> str:
    """The source in a few words, as they stand in a caution.

    Parameters
    ----------
    source : Source
        Of any kind.

    Returns
    -------
    str
        Such as "48 V dc" or "a surge of 1 kV peak".
    """
    largest = show(float(source.largest), "voltage")
    rms = show(float(source.rms), "voltage")
    return {
        "dc": f"{largest} dc",
        "sine": f"{rms} rms ({largest} peak)",
        "harmonics": f"{rms} rms with its harmonics ({largest} peak)",
        "ramp": f"a ramp to {largest}",
        "pulse": f"pulses of {largest}" if _many(source) else f"a pulse of {largest}",
        "surge": f"a surge of {largest} peak",
        "recorded": f"recorded with {largest} at most",
    }[source.kind]


def document(source: Source) -> dict[str, Any]:
    """The source as SI numbers under their names.

    Parameters
    ----------
    source : Source
        One source.

    Returns
    -------
    dict
        Those of every kind; beside them what a source of a course in time is made from, and the
        voltage that it ends on. None where there is none.
    """
    shape = source.shape
    found: dict[str, Any] = {
        "kind": source.kind,
        "amplitude": None if shape else float(source.amplitude),
        "rms": None if shape else float(source.rms),
        "frequency": None if shape else float(source.frequency),
        "largest": float(source.largest),
        "closing_angle": _closing_angle(source) if source.alternating else None,
        "orders": [order._asdict() for order in source.orders],
    }
    if shape is None:
        return found
    found |= {"final": float(source.amplitude), **shape.given}
    if source.kind == "pulse" and shape.given.get("count") is None:
        found["count"] = "until steady"
    if isinstance(shape, Piecewise) and shape.kind == "recorded":
        found |= {"points": shape.start.size, "duration": float(shape.start[-1])}
        found |= {"lowest": float(np.min(shape.level)), "highest": float(np.max(shape.level))}
    return found


def _closing_angle(source: Source) -> Any:
    if source.closing_angle is not None:
        return float(source.closing_angle)
    if source.window is None:
        return "worst"
    return "random" if source.window == ANY_ANGLE else source.window._asdict()


def _charge(case: Case) -> str:
    written = show(float(case.capacitor_voltage), "voltage")
    if not (case.either_polarity and np.any(case.capacitor_voltage)):
        return written
    return f"± {written}, whichever polarity is worse,"


def _many(source: Source) -> bool:
    return source.shape is not None and source.shape.given.get("count") != 1


def _dc(source: Source) -> str:
    return f"dc, {show(float(source.amplitude), 'voltage')} stepped on at t = 0"


def _sine(source: Source) -> str:
    rms = abs(float(source.amplitude)) * source.rms_per_amplitude
    peak = show(abs(float(source.amplitude)), "voltage")
    return (
        f"sine, {show(rms, 'voltage')} rms ({peak} peak),"
        f" {show(float(source.frequency), 'frequency')}"
    )


def _harmonics(source: Source) -> str:
    orders = ", ".join(
        f"{show(order.share, 'ratio')} of order {order.number}"
        + (f" at {show(order.phase, 'angle')}" if order.phase else "")
        for order in source.orders
    )
    distortion = float(np.hypot.reduce([order.share for order in source.orders]))
    return (
        f"{_sine(source)}, with harmonics, {orders}; in all"
        f" {show(float(source.rms), 'voltage')} rms"
        f" ({show(float(source.largest), 'voltage')} peak), total harmonic distortion"
        f" {show(distortion, 'ratio')} of the fundamental"
    )


def _ramp(source: Source) -> str:
    given = _given(source)
    level, rise = show(given["voltage"], "voltage"), show(given["rise_time"], "time")
    return f"ramp, from 0 V to {level} in {rise}, then held"


def _pulse(source: Source) -> str:
    given = _given(source)
    level = show(given["voltage"], "voltage")
    width, rise, fall = (show(given[name], "time") for name in ("width", "rise_time", "fall_time"))
    one = f"{width} wide between half levels, rise {rise}, fall {fall}"
    if given["count"] == 1:
        return f"one pulse of {level}, {one}; 0 V after it"
    every = f"one every {show(given['period'], 'time')}"
    if given["count"] is None:
        return f"pulses of {level} until the loop is steady, {every}, each {one}"
    return f"{given['count']} pulses of {level}, {every}, each {one}; 0 V after them"


def _surge(source: Source) -> str:
    given = _given(source)
    front, half = (show(given[name], "time") for name in ("front_time", "half_value_time"))
    return (
        f"surge, {show(given['voltage'], 'voltage')} peak, front time {front}, to half value {half}"
    )


def _recorded(source: Source) -> str:
    shape = source.shape
    assert isinstance(shape, Piecewise)
    low, high, last = (
        show(float(value), "voltage")
        for value in (np.min(shape.level), np.max(shape.level), shape.final)
    )
    return (
        f"recorded, {shape.start.size} points over {show(float(shape.start[-1]), 'time')}, from"
        f" {low} to {high}; the last value, {last}, is held"
    )


def _given(source: Source) -> Any:
    assert source.shape is not None
    return source.shape.given


_WORDS: dict[str, Callable[[Source], str]] = {
    "dc": _dc,
    "sine": _sine,
    "harmonics": _harmonics,
    "ramp": _ramp,
    "pulse": _pulse,
    "surge": _surge,
    "recorded": _recorded,
}
