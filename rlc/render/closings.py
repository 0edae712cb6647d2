"""Cautions about other closings than the one asked for: worst angles, and a charge left behind."""

from __future__ import annotations

import math
from dataclasses import replace

from rlc.front.marking import show
from rlc.render.findings import Findings, exceeds, peak_of
from rlc.render.known import SIGNALS
from rlc.render.sources import closing
from rlc.solver.case import Case

# Common practice, no source: smaller rises from one closing to another are not worth a sentence.
NOTABLE_RISE = 1.01
RECLOSING_RISE = 1.1

_SAME_ANGLE = math.radians(1.0)


def closing_angle(found: Findings) -> str:
    """What other closing angles than the given one do."""
    if not found.searched:
        return ""
    case, worst = found.case, found.worst_closing
    angles = {element: found.worst_angle(element) for element in SIGNALS}
    if worst is case:
        odd = all(order.number % 2 for order in case.source.orders)
        turn = math.pi if case.at_rest and odd else 2 * math.pi
        apart = (angles["current"] - angles["capacitor"] + turn / 2) % turn - turn / 2
        if not abs(apart) > _SAME_ANGLE:
            return ""
        first, second = (show(angle, "angle", 3) for angle in angles.values())
        return (
            f"The largest current (closing at {first}) and the largest capacitor voltage (closing"
            f" at {second}) belong to different closings; no single one shows both."
        )
    told = []
    for element, (_, words, kind) in SIGNALS.items():
        peak, angle = peak_of(worst, element), angles[element]
        if peak > NOTABLE_RISE * peak_of(case, element):
            at = f"at {show(angle, 'angle', 3)}" if math.isfinite(angle) else ""
            beside = ", ".join(filter(None, (at, _above(found, element, peak))))
            told.append(f"{words} {show(peak, kind)}" + (f" ({beside})" if beside else ""))
    if not told:
        return ""
    where = closing(case.source)
    if case.source.closing_angle is not None:
        where = f"at {show(float(case.source.closing_angle), 'angle')}"
    return (
        f"The peaks hold for closing {where}; an uncontrolled switch closes anywhere. At the worst"
        f" angle of each{_nominal(found)}: {' and '.join(told)}, peak."
    )


def trapped_charge(found: Findings) -> str:
    """What a charge on the capacitor does at closing, given or left by an opening."""
    case, told = found.case, []
    trapped = float(case.capacitor_voltage)
    if trapped and found.level:
        either = "± " if case.either_polarity else ""
        told.append(
            f"The peaks hold for a capacitor charged to {either}{show(trapped, 'voltage')} at"
            " closing"
        )
        if case.either_polarity:
            told[0] += ", whichever polarity is worse; another charge changes them."
        elif found.alternating:
            told[0] += "; another charge changes them."
        else:
            other = replace(case, capacitor_voltage=-case.capacitor_voltage)
            told[0] += f"; with the opposite polarity{_nominal(found)} {_peaks_of(found, other)}."
    left = found.steady("dielectric").nominal
    if found.searched and math.isfinite(left) and left > 0:
        again = found.reclosing(left)
        if any(_matters(found, again, element) for element in SIGNALS):
            until = "" if math.isinf(found.loop.load_resistance) else " until the load drains it"
            told.append(
                f"Opening can leave {found.nominal}{show(left, 'voltage')} on the"
                f" capacitor{until}. Reclosing onto it at the worst angle of each"
                f"{_nominal(found)}, {_peaks_of(found, again)}."
            )
    return " ".join(told)


def _matters(found: Findings, again: Case, element: str) -> bool:
    """Whether reclosing does what the worst closing of a discharged loop does not."""
    peak, before = (peak_of(case, element) for case in (again, found.worst_closing))
    if peak > RECLOSING_RISE * before:
        return True
    return peak > NOTABLE_RISE * before and bool(_above(found, element, peak))


def _peaks_of(found: Findings, case: Case) -> str:
    """Both peaks of another closing, as the end of a sentence."""
    current, capacitor = (
        f"{show(peak, kind)}" + (f" ({above})" if above else "")
        for element, (_, _, kind) in SIGNALS.items()
        for peak in [peak_of(case, element)]
        for above in [_above(found, element, peak)]
    )
    return f"the current reaches {current} and the capacitor voltage {capacitor}, peak"


def _above(found: Findings, element: str, peak: float) -> str:
    """The stated limits that a peak is above, in words."""
    ratings, target = found.ratings, found.limits.get(SIGNALS[element].quantity)
    rated = ratings.capacitor_voltage
    if element == "current":
        rated = ratings.inductor_saturation
    told = [
        f"the {words} {show(limit, SIGNALS[element].kind)}"
        for words, limit in (("rated", rated), ("target of", target))
        if limit is not None and exceeds(peak, limit)
    ]
    return f"above {' and '.join(told)}" if told else ""


def _nominal(found: Findings) -> str:
    """Says whose peaks they are where the parts have tolerances."""
    return "" if found.corners is None else ", with nominal parts"
