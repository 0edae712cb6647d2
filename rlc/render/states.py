"""What is left when the transient has died, element by element and order by order."""

from __future__ import annotations

from typing import Any

import numpy as np
from rich.table import Table

from rlc.front.marking import show
from rlc.render.layout import new_table
from rlc.render.tables import shown
from rlc.solver.case import Case
from rlc.solver.loop import ELEMENTS
from rlc.solver.quantities import REGISTER
from rlc.solver.totals import steady_orders

_ENDS = {
    "dc": "",
    "ramp": ", at its level",
    "pulse": ", after its last pulse",
    "surge": ", after the surge",
    "recorded": ", last value held",
}


def elements(case: Case) -> Table:
    """The steady or final state, element by element.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    Table
    """
    if case.repeats:
        return _train(case)
    if not case.source.alternating:
        return _final(case)
    steady, level = case.steady, abs(float(case.source.amplitude))
    alone = ", of the fundamental" if case.source.orders else ""
    table = new_table(
        f"Steady state by element{alone}", "across", "rms", "amplitude", "phase", "times source"
    )
    phasors = {"source": np.complex128(1)} | {name: steady.across(name) for name in ELEMENTS}
    for name, phasor in phasors.items():
        ratio = abs(complex(phasor))
        table.add_row(
            name,
            show(ratio * level * case.source.rms_per_amplitude, "voltage"),
            show(ratio * level, "voltage"),
            shown(float(np.angle(phasor)), "angle"),
            show(ratio, "number"),
        )
    return table


def _final(case: Case) -> Table:
    steady, level = case.steady, float(case.source.amplitude)
    table = new_table("Final state", "of", "value")
    table.add_row(f"source{_ENDS[case.source.kind]}", show(level, "voltage"))
    for element in ELEMENTS:
        table.add_row(element, show(level * float(np.real(steady.across(element))), "voltage"))
    current = level * float(np.real(steady.current))
    table.add_row("current", show(current, "current"))
    table.add_row("power from the source", show(level * current, "power"))
    return table


def _train(case: Case) -> Table:
    table = new_table("Steady train of pulses", "of", "value")
    for words, name in (
        ("current, rms over a period", "current"),
        ("heat in the resistor, mean", "resistor_power"),
    ):
        table.add_row(words, show(float(REGISTER[name](case)), REGISTER[name].kind))
    return table


def after(case: Case) -> str:
    """What becomes of a charge when the source has gone back to zero; empty for other sources.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    str
        A sentence.
    """
    if case.source.kind not in ("pulse", "surge") or case.repeats:
        return ""
    what = "surge" if case.source.kind == "surge" else "last pulse"
    if float(case.equation.damping) == 0:
        return f"After the {what} the source stays in the loop at 0 V; nothing damps the ringing."
    constant = show(1 / float(case.equation.slowest), "time")
    return (
        f"After the {what} the source stays in the loop at 0 V and discharges the capacitor, with"
        f" a time constant of {constant}. If it disconnects instead, the charge of that moment"
        " stays."
    )


def by_order(case: Case) -> list[dict[str, Any]]:
    """The steady state of each order of an alternating source.

    Parameters
    ----------
    case : Case
        One loop.

    Returns
    -------
    list of dict
        Number [1], frequency [Hz], rms of source [V], current [A] and capacitor voltage [V].
    """
    source = case.source
    level = abs(float(source.amplitude)) * source.rms_per_amplitude
    return [
        {
            "number": order.number,
            "frequency": float(order.number * source.frequency),
            "source": level * share,
            "current": level * share * abs(complex(steady.current)),
            "capacitor_voltage": level * share * abs(complex(steady.capacitor)),
        }
        for order, (share, steady) in zip(
            source.every_order, steady_orders(case, None), strict=True
        )
    ]


def orders(case: Case) -> Table:
    """Rms values order by order, and their totals.

    Parameters
    ----------
    case : Case
        One loop under a source with harmonics.

    Returns
    -------
    Table
    """
    kinds = {"source": "voltage", "current": "current", "capacitor_voltage": "voltage"}
    table = new_table(
        "Steady state by order, rms", "order", "frequency", "source", "current", "capacitor voltage"
    )
    for row in by_order(case):
        values = (show(row[name], kind) for name, kind in kinds.items())
        table.add_row(str(row["number"]), show(row["frequency"], "frequency"), *values)
    table.add_section()
    totals = (float(case.source.rms), *(float(REGISTER[name](case)) for name in list(kinds)[1:]))
    written = (show(value, kind) for value, kind in zip(totals, kinds.values(), strict=True))
    table.add_row("total", "", *written, style="bold")
    return table
