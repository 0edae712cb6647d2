"""When the nominal switch-on exceeds what is rated, aimed at, or usual to touch."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import NamedTuple

from rlc.render.findings import ELV_AC_PEAK, ELV_DC
from rlc.solver.case import Case
from rlc.solver.exceeding import exceeded
from rlc.solver.targets import Target

_PEAKS = {"peak_current": "current", "peak_capacitor_voltage": "capacitor"}
_EXCEEDING = {
    f"{words}_exceeding_{what}": element
    for words, element in (("current", "current"), ("capacitor_voltage", "capacitor"))
    for what in ("time", "duration")
}


class Passing(NamedTuple):
    """How one signal of the nominal loop exceeds one limit.

    Attributes
    ----------
    element : str
        ``current`` or ``capacitor``.
    limit : float
        Of the magnitude [A or V].
    words : str
        What the limit is: a rating by its key, a target, or extra-low voltage.
    first : float
        When it is first exceeded; not a number if it never is [s].
    lasts : float
        For how long in all; infinite if again and again, not a number if it is not known [s].
    """

    element: str
    limit: float
    words: str
    first: float
    lasts: float


def limits_in_time(case: Case, targets: Iterable[Target]) -> tuple[Passing, ...]:
    """Hold the nominal waveforms against every limit on a peak.

    Parameters
    ----------
    case : Case
        One loop. Where angle or polarity are open, they are those of the signal's peak.
    targets : iterable of Target
        Targets and ratings; upper limits on peak current and peak capacitor voltage count.

    Returns
    -------
    tuple of Passing
        In the order of the targets, then extra-low voltage across the capacitor.
    """
    return tuple(
        Passing(element, limit, words, *exceeded(case, element, limit))
        for element, limit, words in _limits(case, targets)
    )


def _limits(case: Case, targets: Iterable[Target]) -> Iterator[tuple[str, float, str]]:
    for target in targets:
        if target.quantity in _PEAKS and (target.maximum or 0.0) > 0:
            assert target.maximum is not None
            yield _PEAKS[target.quantity], target.maximum, target.rating or "target"
        elif target.quantity in _EXCEEDING and target.at is not None:
            yield _EXCEEDING[target.quantity], target.at, "target on its time"
    if case.source.alternating:
        yield "capacitor", ELV_AC_PEAK, "extra-low voltage, 50 V ac rms as a peak"
    else:
        yield "capacitor", ELV_DC, "extra-low voltage, dc"
