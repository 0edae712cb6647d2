"""Results as JSON: SI numbers at full precision, null where there is none."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Mapping
from dataclasses import fields
from typing import Any

from rlc.front.marking import KINDS
from rlc.render import sources
from rlc.render.cautions import Caution
from rlc.render.known import PEAKS, largest_among, peak_of
from rlc.render.limits import Passing
from rlc.render.states import by_order
from rlc.solver import totals
from rlc.solver.case import Case
from rlc.solver.closing import Closings
from rlc.solver.extrema import Extrema
from rlc.solver.loop import ELEMENTS, Loop
from rlc.solver.parts import Part
from rlc.solver.quantities import REGISTER
from rlc.solver.quantity import Quantity
from rlc.solver.spread import CONFIDENCE, Outcome
from rlc.solver.sweep import Sweep

# Where the unit that is printed is not the SI unit.
_SI = {"angle": "rad", "ratio": "1", "number": "1"}


def unit(kind: str) -> str:
    """The SI unit of a kind of quantity, as text.

    Parameters
    ----------
    kind : str
        Key of :data:`rlc.front.marking.KINDS`.
    """
    return _SI.get(kind, KINDS[kind].symbol)


def number(value: Any) -> float | None:
    """A finite float, or None.

    Parameters
    ----------
    value : float or None
        Of any size; None, nan and infinite become None.
    """
    return float(value) if value is not None and math.isfinite(value) else None


def loop(case: Case, parts: Iterable[Part] = ()) -> dict[str, Any]:
    """The loop as understood: every part, what adds up, the source, the states at closing.

    Parameters
    ----------
    case : Case
        One loop.
    parts : iterable of Part
        What is spread; its limits are listed.

    Returns
    -------
    dict
        SI values by field; None for a load that is not there.
    """
    values = {field.name: number(getattr(case.loop, field.name)) for field in fields(Loop)}
    return values | {
        "total_resistance": number(case.loop.total_resistance),
        "total_inductance": number(case.loop.total_inductance),
        "source": sources.document(case.source),
        "capacitor_voltage": number(case.capacitor_voltage),
        "either_polarity": case.either_polarity,
        "initial_current": number(case.initial_current),
        "limits": {part.field: [part.low, part.high] for part in parts if part.high > part.low},
    }


def quantities(values: Mapping[str, float]) -> dict[str, Any]:
    """Registered quantities by name.

    Parameters
    ----------
    values : mapping of str to float
        By name in the register [SI unit of the quantity].

    Returns
    -------
    dict
        Value and unit of each.
    """
    return {
        name: {"value": number(value), "unit": unit(REGISTER[name].kind)}
        for name, value in values.items()
    }


def _asked(outcome: Outcome) -> dict[str, Any]:
    target = outcome.target
    return {"quantity": target.quantity, "at": number(target.at), "across": target.across}


def target(outcome: Outcome) -> dict[str, Any]:
    """One target with its verdict.

    Parameters
    ----------
    outcome : Outcome
        Of a quantity with limits.

    Returns
    -------
    dict
        SI values; None for what is not stated or does not exist.
    """
    asked, share = outcome.target, outcome.share
    return _asked(outcome) | {
        "min": number(asked.minimum),
        "max": number(asked.maximum),
        "goal": number(asked.goal),
        "rating": asked.rating or None,
        "nominal": number(outcome.nominal),
        "worst_low": number(outcome.worst_low),
        "worst_high": number(outcome.worst_high),
        "yield": {
            "value": number(share and share.value),
            "low": number(share and share.low),
            "high": number(share and share.high),
            "confidence": CONFIDENCE,
        },
        "margin": number(outcome.margin),
        "verdict": outcome.verdict,
    }


def spread(outcome: Outcome) -> dict[str, Any]:
    """How one quantity is spread, and what each part alone does to it.

    Parameters
    ----------
    outcome : Outcome
        With or without limits.

    Returns
    -------
    dict
        SI values; None for what does not exist.
    """
    points = ("nominal", "minimum", "percent_1", "percent_50", "mean", "percent_99", "maximum")
    return (
        _asked(outcome)
        | {"unit": unit(outcome.target.entry.kind)}
        | {name: number(getattr(outcome, name)) for name in points}
        | {
            "parts": [
                {"part": effect.field, "low": number(effect.low), "high": number(effect.high)}
                for effect in outcome.effects
            ]
        }
    )


def sweep(found: Sweep) -> dict[str, Any]:
    """A frequency response, column by column.

    Parameters
    ----------
    found : Sweep
        The response.

    Returns
    -------
    dict
        One list per column, in SI units, "frequency" first.
    """
    columns = {
        column.quantity + (f"_across_{column.across}" if column.across else ""): column.values
        for column in found.columns
    }
    return {
        name: [number(value) for value in values]
        for name, values in ({"frequency": found.frequency} | columns).items()
    }


def elements(case: Case) -> dict[str, Any]:
    """Voltage across each part in steady state, with harmonics that of the fundamental.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    dict
        By element: amplitude, a peak value [V], and phase against the source [rad]; None for a
        train of pulses, which has none.
    """
    level = float(totals.level(case))
    phasors = {name: complex(case.steady.across(name)) for name in ELEMENTS}
    return {
        name: {
            "amplitude": number(level * abs(phasor)),
            "phase": None if case.repeats else number(cmath.phase(phasor)),
        }
        for name, phasor in phasors.items()
    }


def peaks(case: Case) -> dict[str, Any]:
    """What is known of each peak of the switch-on.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    dict
        By signal: value and steady amplitude [A or V], time [s], closing angle [rad], gap [1];
        where the capacitor's polarity at closing is open, its sign as well [1].
    """
    found = {element: peak_of(case, element) for element, _ in PEAKS}
    return {
        element: {
            "value": number(peak.value),
            "time": number(peak.time),
            "closing_angle": number(peak.angle) if case.source.alternating else None,
            "steady": number(peak.steady),
            "gap": number(peak.gap),
            "known": peak.known,
        }
        | ({"polarity": peak.polarity} if case.either_polarity else {})
        for element, peak in found.items()
    }


def orders(case: Case) -> list[dict[str, Any]]:
    """The steady state of each order of a source with harmonics.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    list of dict
        Number [1], frequency [Hz], and rms of source, current and capacitor voltage [V], [A].
    """
    return [{name: number(value) for name, value in row.items()} for row in by_order(case)]


def closings(found: Mapping[str, Closings], case: Case) -> dict[str, Any]:
    """How peaks are distributed over the closings that are possible.

    Parameters
    ----------
    found : mapping of str to Closings
        By signal.
    case : Case
        The loop that they are of.

    Returns
    -------
    dict
        By signal: 1, 50 and 99 % point and worst [A or V], and the worst one's angle [rad].
    """
    return {
        element: {
            **points._asdict(),
            "worst": number(peak_of(case, element).value),
            "closing_angle": number(peak_of(case, element).angle),
        }
        for element, points in found.items()
    }


def exceeded(found: Iterable[Passing]) -> list[dict[str, Any]]:
    """When limits are first exceeded by the nominal loop, and for how long in all.

    Parameters
    ----------
    found : iterable of Passing
        One per limit.

    Returns
    -------
    list of dict
        Limit [A or V], first moment [s], None if never; duration in all [s], None if it is
        exceeded again and again, or if that is not known.
    """
    return [
        {
            "of": "current" if row.element == "current" else "capacitor_voltage",
            "limit": number(row.limit),
            "stands_for": row.words,
            "exceeded": row.lasts != 0,
            "first": number(row.first),
            "lasts": number(row.lasts),
            "again_and_again": math.isinf(row.lasts),
        }
        for row in found
    ]


def extrema(found: Extrema, case: Case) -> list[dict[str, Any]]:
    """Turning points in time order, and which of the two signals turns.

    Parameters
    ----------
    found : Extrema
        The turning points.
    case : Case
        The loop that they are of.

    Returns
    -------
    list of dict
        Each with time [s], current [A] and capacitor voltage [V], and whether it is its
        signal's largest of the whole switch-on.
    """
    rows = zip(
        found.time, found.current, found.capacitor_voltage, found.of,
        largest_among(found, case), strict=True,
    )  # fmt: skip
    return [
        {
            "time": number(time),
            "current": number(current),
            "capacitor_voltage": number(voltage),
            "of": "current" if of == "current" else "capacitor_voltage",
            "largest": largest,
        }
        for time, current, voltage, of, largest in rows
    ]


def register(rows: Iterable[Quantity]) -> list[dict[str, Any]]:
    """Entries of the register.

    Parameters
    ----------
    rows : iterable of Quantity
        Which entries.

    Returns
    -------
    list of dict
        Each without its function.
    """
    words = (
        "name",
        "symbol",
        "group",
        "convention",
        "definition",
        "formula",
        "at",
        "across",
        "source",
    )
    return [{"unit": unit(row.kind)} | {word: getattr(row, word) for word in words} for row in rows]


def cautions(found: Iterable[Caution]) -> list[dict[str, str]]:
    """Cautions in their order.

    Parameters
    ----------
    found : iterable of Caution
        As they are shown.

    Returns
    -------
    list of dict
        Each with its id and text.
    """
    return [{"id": caution.id, "text": caution.text} for caution in found]
