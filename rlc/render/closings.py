"""Cautions about other closings than the one asked for: worst angles, and a charge left behind."""

from __future__ import annotations

import math
from typing import NamedTuple

from rlc.front.marking import show
from rlc.render.findings import Findings, exceeds, peak_of
from rlc.solver.case import Case

# Common practice, no source: smaller rises from one closing to another are not worth a sentence.
NOTABLE_RISE = 1.01
RECLOSING_RISE = 1.1

_SAME_ANGLE = math.radians(1.0)


class _Watched(NamedTuple):
    element: str
    words: str
    kind: str
    quantity: str


_WATCHED = (
    _Watched("current", "current", "current", "peak_current"),
    _Watched("capacitor", "capacitor voltage", "voltage", "peak_capacitor_voltage"),
)


def closing_angle(found: Findings) -> str:
    """What other closing angles than the given one do."""
    if not found.searched:
        return ""
    case, worst = found.case, found.worst_closing
    angles = {element: found.worst_angle(element) for element in ("current", "capacitor")}
    if case.source.closing_angle is None:
        turn = math.pi if found.case.at_rest else 2 * math.pi
        apart = (angles["current"] - angles["capacitor"] + turn / 2) % turn - turn / 2
        if not abs(apart) > _SAME_ANGLE:
            return ""
        first, second = (show(angle, "angle", 3) for angle in angles.values())
        return (
            f"The largest current (closing at {first}) and the largest capacitor voltage (closing"
            f" at {second}) belong to different closings; no single one shows both."
        )
    told = []
    for watched in _WATCHED:
        peak, angle = peak_of(worst, watched.element), angles[watched.element]
        if peak > NOTABLE_RISE * peak_of(case, watched.element):
            at = f"at {show(angle, 'angle', 3)}" if math.isfinite(angle) else ""
            beside = ", ".join(filter(None, (at, _above(found, watched, peak))))
            told.append(
                f"{watched.words} {show(peak, watched.kind)}" + (f" ({beside})" if beside else "")
            )
    if not told:
        return ""
    return (
        f"The peaks hold for closing at {show(float(case.source.closing_angle), 'angle')}; an"
        f" uncontrolled switch closes anywhere. At the worst angle of each{_nominal(found)}:"
        f" {' and '.join(told)}, peak."
    )


def trapped_charge(found: Findings) -> str:
    """What a charge on the capacitor does at closing, given or left by an opening."""
    case, told = found.case, []
    trapped = float(case.capacitor_voltage)
    if trapped and found.level:
        told.append(
            f"The peaks hold for a capacitor charged to {show(trapped, 'voltage')} at closing"
        )
        if found.sine:
            told[0] += "; another charge changes them."
        else:
            other = Case(case.loop, case.source, -case.capacitor_voltage, case.initial_current)
            told[0] += f"; with the opposite polarity{_nominal(found)} {_peaks_of(found, other)}."
    left = found.steady("dielectric").nominal
    if found.searched and math.isfinite(left) and left > 0:
        again = found.reclosing(left)
        if any(_matters(found, again, watched) for watched in _WATCHED):
            until = "" if math.isinf(found.loop.load_resistance) else " until the load drains it"
            told.append(
                f"Opening can leave {found.nominal}{show(left, 'voltage')} on the"
                f" capacitor{until}. Reclosing onto it at the worst angle of each"
                f"{_nominal(found)}, {_peaks_of(found, again)}."
            )
    return " ".join(told)


def _matters(found: Findings, again: Case, watched: _Watched) -> bool:
    """Whether reclosing does what the worst closing of a discharged loop does not."""
    peak, before = (peak_of(case, watched.element) for case in (again, found.worst_closing))
    if peak > RECLOSING_RISE * before:
        return True
    return peak > NOTABLE_RISE * before and bool(_above(found, watched, peak))


def _peaks_of(found: Findings, case: Case) -> str:
    """Both peaks of another closing, as the end of a sentence."""
    current, capacitor = (
        f"{show(peak, watched.kind)}" + (f" ({above})" if above else "")
        for watched in _WATCHED
        for peak in [peak_of(case, watched.element)]
        for above in [_above(found, watched, peak)]
    )
    return f"the current reaches {current} and the capacitor voltage {capacitor}, peak"


def _above(found: Findings, watched: _Watched, peak: float) -> str:
    """The stated limits that a peak is above, in words."""
    ratings, target = found.ratings, found.limits.get(watched.quantity)
    rated = ratings.capacitor_voltage
    if watched.element == "current":
        rated = ratings.inductor_saturation
    told = [
        f"the {words} {show(limit, watched.kind)}"
        for words, limit in (("rated", rated), ("target of", target))
        if limit is not None and exceeds(peak, limit)
    ]
    return f"above {' and '.join(told)}" if told else ""


def _nominal(found: Findings) -> str:
    """Says whose peaks they are where the parts have tolerances."""
    return "" if found.corners is None else ", with nominal parts"
