"""The running let-through of a switch-on."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.front.marking import show
from rlc.render.bands import open_angle, open_polarity
from rlc.render.figures import (
    LIMIT,
    MARK,
    NOMINAL,
    STEADY,
    item,
    limit_label,
    limit_line,
    limits,
    name_axis,
    note,
)
from rlc.render.spans import Span
from rlc.render.traces import LIMIT_REACH
from rlc.solver.case import Case
from rlc.solver.passed import let_through, let_through_time, whole_let_through
from rlc.solver.quantities import HALF
from rlc.solver.targets import Target
from rlc.solver.transient import settled

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Array = NDArray[np.float64]

_FUSE = "fuse.melting_let_through"
# What has passed can be read further below a limit than a swing's height.
_LIMIT_REACH = 3.0
_POINTS, _EARLY_POINTS, _LONG_POINTS = 200, 100, 4000
# Knots of a record that is gone through once.
_LONG_RECORD = 50_000


class _Known(NamedTuple):
    """The whole let-through [A^2 s], when half of it has passed [s], and how well that is known."""

    whole: float
    half: float
    about: str = ""


def draw_let_through(panel: Axes, case: Case, span: Span, targets: Sequence[Target]) -> str:
    """Draw what has passed up to each time, half of the whole, and limits on it.

    Parameters
    ----------
    panel : Axes
        Empty.
    case : Case
        One loop. Where angle or polarity are open, the curve is the most that may have passed.
    span : Span
        What is drawn beside it; a source with a frequency is followed for a period at least.
    targets : sequence of Target
        Limits on ``let_through`` are drawn [A^2 s].

    Returns
    -------
    str
        Of which closing it is; empty if there is only one.
    """
    end, known = span.end, _solved(case)
    if case.source.alternating and known is not None and known.half > end:
        end = 1 / item(case.source.frequency)
    early = np.geomspace(1e-3 * end, end, _EARLY_POINTS)
    near = span.time[:: max(1, span.time.size // _POINTS)]
    time = np.unique(np.concatenate([np.linspace(span.begin, end, _POINTS), early, near]))
    if known is None:
        # one passage through a long record gives all
        time = np.union1d(time, np.linspace(0.0, item(settled(case)), _LONG_POINTS))
    passed = let_through(case, time)
    if known is None:
        half = float(np.interp(HALF * passed[-1], passed, time))
        known = _Known(float(passed[-1]), half, "about ")
    drawn = (time >= span.begin) & (time <= end)
    time, passed = time[drawn], passed[drawn]
    panel.plot(time, passed, **NOMINAL)
    top = _whole(panel, case, known, (float(passed[-1]), end))
    top = _limits(panel, targets, end, top)
    panel.set_xlim(span.begin, end)
    panel.set_ylim(0.0, 1.08 * top or 1.0)
    name_axis(panel.xaxis, "time from closing", "time")
    name_axis(panel.yaxis, "let-through", "let_through")
    if case.source.orders and open_angle(case):
        return "closed as for the largest current"
    return "most of all closings" if open_angle(case) or open_polarity(case) else ""


def _solved(case: Case) -> _Known | None:
    """What the solver has, but for a long record, each passage through which takes seconds."""
    if case.source.kind == "recorded" and case.lines is not None:
        ends = item(case.equation.damping) > 0 and not np.any(case.loop.load_conductance)
        if case.lines.start.size > _LONG_RECORD and ends:
            return None
    half = np.nan if case.repeats else item(let_through_time(case, HALF))
    return _Known(item(whole_let_through(case)), half)


def _whole(panel: Axes, case: Case, known: _Known, drawn: tuple[float, float]) -> float:
    """Draw the whole let-through, and when half of it has passed; the highest of all.

    What is drawn beside it ends on a let-through [A^2 s] and at a time [s].
    """
    (whole, half, about), (top, end) = known, drawn
    size = show(whole, "let_through") if np.isfinite(whole) else ""
    if case.repeats:
        note(panel, f"{size} in each period of the steady train")
    elif not np.isfinite(whole):
        note(panel, "without end: a current remains")
    elif not case.source.alternating and whole <= LIMIT_REACH * top:
        panel.axhline(whole, label=f"in all {size}", **STEADY)
        top = max(top, whole)
    if not np.isfinite(half):
        return top
    of = f"half of {size}" + (" of a period" if case.source.alternating else "")
    label = f"{of} by {about}{show(half, 'time', 3 if about else 4)}"
    if half <= end:
        panel.plot([half], [whole * HALF], label=label, **MARK)
    else:
        note(panel, f"{label}, after the time shown")
    return top


def _limits(panel: Axes, targets: Sequence[Target], end: float, top: float) -> float:
    """Draw limits up to the time for which they are stated; the highest of all."""
    reach = _LIMIT_REACH * top
    for target in targets:
        if target.quantity != "let_through":
            continue
        for limit, upper in limits(target):
            label = limit_label(target, upper=upper)
            if target.rating == _FUSE:
                label = f"the fuse's share for one closing, {show(limit, 'let_through')}"
            if limit > reach:
                note(panel, f"{label} (above the picture)")
            elif target.at is None:
                limit_line(panel, limit, label, upper=upper, vertical=False)
                top = max(top, limit)
            else:
                until = min(target.at, end)
                panel.plot(
                    [0.0, 0.97 * until, until], [limit] * 3, marker="v" if upper else "^",
                    markersize=5, markevery=[1], label=label, **LIMIT,
                )  # fmt: skip
                top = max(top, limit)
    return top
