"""The main job: a sheet in, results and verdicts out."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from rlc import __version__
from rlc.front.flags import SAMPLES, SEED
from rlc.front.inputs import Loaded
from rlc.front.load import load
from rlc.render.cautions import Caution, cautions
from rlc.render.known import SIGNALS
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER, lookup
from rlc.solver.targets import Target

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from rlc.render.limits import Passing
    from rlc.solver.closing import Closings
    from rlc.solver.extrema import Extrema
    from rlc.solver.spread import Outcome, Spread
    from rlc.solver.sweep import Sweep

#: What a spread shows where nobody has asked for anything.
USUAL = (
    "natural_frequency",
    "bandwidth",
    "quality_factor",
    "peak_current",
    "peak_capacitor_voltage",
)

# Points of the source times units: more take longer than a quick answer.
_LONG = 5_000_000
# Units from which on solving for the crossings of a limit takes more than seconds.
_MANY = 500


@dataclass(frozen=True)
class Review:
    """What was computed from one sheet.

    Attributes
    ----------
    loaded : Loaded
        The sheet's values and where they came from.
    case : Case
        The nominal switch-on.
    quantities : mapping of str to float
        Nominal values by name; nan where one does not exist [SI unit of the quantity].
    spread : Spread or None
        Nominal, corners and samples as one batch; None if no spread was asked for.
    outcomes : tuple of Outcome
        One per target, in the order of the sheet, then the ratings.
    cautions : tuple of Caution
        What belongs beside the numbers.
    sweep : Sweep or None
        The frequency response, if it was asked for.
    extrema : Extrema or None
        The first turning points of the switch-on, if they were asked for.
    closings : mapping of str to Closings
        Peaks over the closings that are possible, by signal; empty if one is given, or no
        switch-on was asked for.
    exceeded : tuple of Passing
        How the nominal loop exceeds limits in time; empty if no switch-on was asked for.
    """

    loaded: Loaded
    case: Case
    quantities: Mapping[str, float]
    spread: Spread | None
    outcomes: tuple[Outcome, ...]
    cautions: tuple[Caution, ...]
    sweep: Sweep | None = None
    extrema: Extrema | None = None
    closings: Mapping[str, Closings] = field(default_factory=dict)
    exceeded: tuple[Passing, ...] = ()

    @property
    def targets_hold(self) -> bool:
        """Whether no target fails; a quantity without limits is no target."""
        limited = (outcome for outcome in self.outcomes if outcome.target.limited)
        return all(outcome.verdict != "fails" for outcome in limited)

    def document(self) -> dict[str, Any]:
        """Everything in it as one JSON document, in SI units.

        Returns
        -------
        dict
            Ready for JSON; no number is nan or infinite.
        """
        from rlc.render import machine

        loaded, batch = self.loaded, self.spread
        found: dict[str, Any] = {
            "title": loaded.inputs.title,
            "sheet": loaded.sheet or None,
            "version": __version__,
        }
        if batch is not None:
            found |= {"seed": batch.seed, "samples": batch.count}
        if loaded.changes:
            found["changed"] = [change._asdict() for change in loaded.changes]
        found["loop"] = machine.loop(self.case, loaded.inputs.parts)
        found["quantities"] = machine.quantities(self.quantities)
        groups = {REGISTER[name].group for name in self.quantities}
        if "steady" in groups:
            found["elements"] = machine.elements(self.case)
            if self.case.source.orders:
                found["orders"] = machine.orders(self.case)
        if "switch-on" in groups:
            found["peaks"] = machine.peaks(self.case)
            found["exceeded"] = machine.exceeded(self.exceeded)
            if self.closings:
                found["closings"] = machine.closings(self.closings, self.case)
        if batch is not None:
            limited = [each for each in self.outcomes if each.target.limited]
            found["targets"] = [machine.target(outcome) for outcome in limited]
            found["spread"] = [machine.spread(outcome) for outcome in self.outcomes]
        if self.sweep is not None:
            found["sweep"] = machine.sweep(self.sweep)
        if self.extrema is not None:
            found["extrema"] = machine.extrema(self.extrema, self.case)
        return found | {"cautions": machine.cautions(self.cautions)}

    def pictures(self, names: Iterable[str]) -> dict[str, Callable[[], Figure]]:
        """What draws each picture, by file name without suffix.

        Parameters
        ----------
        names : iterable of {"frequency-response", "switch-on", "state-plane", "spread"}
            Which to draw; "spread" stands for one histogram per outcome.

        Returns
        -------
        dict of str to callable
            Each returns a matplotlib figure when it is called.
        """
        from rlc.render import plots

        title = self.loaded.inputs.title or "Series loop"
        beside = tuple(caution.text for caution in self.cautions)
        limits = self.loaded.inputs.targets
        batch = self.spread.case if self.spread and self.spread.parts else None

        def histogram(outcome: Outcome) -> Callable[[], Figure]:
            return lambda: plots.histogram(
                outcome.target, outcome.samples, outcome.nominal, beside, title
            )

        drawn: dict[str, Callable[[], Figure]] = {
            "frequency-response": lambda: plots.frequency_response(
                self.case, limits, batch, beside, title
            ),
            "switch-on": lambda: plots.switch_on(self.case, limits, batch, beside, title),
            "state-plane": lambda: plots.state_plane(self.case, beside, title),
        }
        asked = list(names)
        found = {name: drawn[name] for name in asked if name in drawn}
        if "spread" in asked and self.spread is not None and self.spread.count:
            for index, outcome in enumerate(self.outcomes, start=1):
                found[f"spread-{index}-{outcome.target.quantity}"] = histogram(outcome)
        return found


def check(
    path: str | Path | None = None,
    *,
    flags: Mapping[str, str] | None = None,
    samples: int = SAMPLES,
    seed: int = SEED,
) -> Review:
    """Judge a loop from one sheet of parts.

    Parameters
    ----------
    path : str or Path, optional
        The sheet.
    flags : mapping of str to str, optional
        Values in place of the sheet's, as on the command line: ``{"--load": "10 kohm"}``.
    samples, seed : int
        Random units that are drawn, zero to 1e6, and what they follow from.

    Returns
    -------
    Review

    Raises
    ------
    SheetError, InputError
        If the sheet or a value cannot be used.
    """
    loaded = load(path, flags)
    return review(loaded, REGISTER, judge(loaded, loaded.inputs.targets, samples, seed))


def judge(
    loaded: Loaded, targets: Iterable[Target], samples: int, seed: int
) -> tuple[Spread, tuple[Outcome, ...]]:
    """Put the sheet's parts through their spread, and each target through that.

    Parameters
    ----------
    loaded : Loaded
        The sheet.
    targets : iterable of Target
        What to judge.
    samples, seed : int
        Random units that are drawn, zero to 1e6, and what they follow from, zero or more.

    Returns
    -------
    spread, outcomes : Spread, tuple of Outcome
        The batch, and one outcome per target.

    Raises
    ------
    InputError
        If `samples` or `seed` is out of range, or a target does not go with the source.
    """
    from rlc.solver.spread import spread

    batch = spread(loaded.inputs.case, loaded.inputs.parts, samples, seed)
    return batch, tuple(batch.outcome(target) for target in targets)


def effort(loaded: Loaded, targets: Iterable[Target], samples: int) -> str:
    """What to say before a spread that takes long.

    Parameters
    ----------
    loaded : Loaded
        The sheet.
    targets : iterable of Target
        What is to be judged.
    samples : int
        Random units that are to be drawn.

    Returns
    -------
    str
        Empty where it does not take long.
    """
    if not any(part.high > part.low for part in loaded.inputs.parts):
        return ""
    targets, lines = tuple(targets), loaded.inputs.case.lines
    if samples >= _MANY and any("_exceeding_" in target.quantity for target in targets):
        return (
            f"the spread takes a while: {samples} units, in each of which the crossings of a limit"
            " are solved for; --samples sets how many units"
        )
    if lines is None or all(target.entry.group == "loop" for target in targets):
        return ""
    points = lines.start.size
    if points * samples <= _LONG:
        return ""
    return (
        f"the spread takes a while: {samples} units, each followed through {points} points of the"
        " source; --samples sets how many units"
    )


def review(
    loaded: Loaded,
    names: Iterable[str],
    judged: tuple[Spread, tuple[Outcome, ...]] | None = None,
) -> Review:
    """Put together what was asked for.

    Parameters
    ----------
    loaded : Loaded
        The sheet.
    names : iterable of str
        Registered quantities to evaluate.
    judged : tuple, optional
        What :func:`judge` gave.

    Returns
    -------
    Review
    """
    case = loaded.inputs.case
    batch, outcomes = judged or (None, ())
    worst = {
        outcome.target.quantity: outcome.worst_high
        for outcome in outcomes
        if outcome.target.at is None and outcome.target.across is None
    }
    quantities = {name: float(REGISTER[name](case)) for name in names}
    asked = {*quantities, *(outcome.target.quantity for outcome in outcomes)}
    # Other closings matter to an answer about the switch-on, and cost a search each.
    closings = any(REGISTER[name].group == "switch-on" for name in asked)
    inputs = loaded.inputs
    corners = None
    if inputs.tolerances:
        from rlc.solver.spread import spread

        # Not the judged batch: a few loops, searched at once, tell what goes with what.
        limits_alone = spread(case, inputs.parts, 0, seed=1)
        corners = limits_alone.case if limits_alone.parts else None
    limits: dict[str, float] = {}
    for target in inputs.targets:
        plain = target.at is None and target.across is None and not target.rating
        if target.maximum is not None and plain:
            known = limits.get(target.quantity, math.inf)
            limits[target.quantity] = min(known, target.maximum)
    told = cautions(
        case,
        inputs.ratings,
        worst,
        fuse=inputs.fuse,
        closings=closings,
        corners=corners,
        limits=limits,
    )
    found = Review(loaded, case, quantities, batch, outcomes, told)
    if not any(REGISTER[name].group == "switch-on" for name in quantities):
        return found
    from rlc.render.limits import limits_in_time

    passings = limits_in_time(case, inputs.targets)
    return replace(found, closings=_closings(case), exceeded=passings)


def _closings(case: Case) -> dict[str, Closings]:
    """Peaks over the closings, where the angle is left to chance."""
    if not (case.source.alternating and case.source.worst_angle and case.source.window):
        return {}
    from rlc.solver.closing import over_closings

    return {element: over_closings(case, element) for element in SIGNALS}


def names_in(*groups: str) -> tuple[str, ...]:
    """Names of the registered quantities of some groups.

    Parameters
    ----------
    *groups : {"loop", "steady", "switch-on"}
        Which to list.

    Returns
    -------
    tuple of str
        In the register's order.
    """
    return tuple(name for name, entry in REGISTER.items() if entry.group in groups)


def asked_targets(loaded: Loaded, names: Iterable[str]) -> tuple[Target, ...]:
    """What `rlc spread` looks at: the named quantities, else the targets, else the usual ones.

    Parameters
    ----------
    loaded : Loaded
        The sheet.
    names : iterable of str
        Registered quantities; may be empty.

    Returns
    -------
    tuple of Target
        Named quantities with their limits, where the sheet has any.

    Raises
    ------
    InputError
        If a name is not in the register.
    """
    targets = loaded.inputs.targets
    named = tuple(names)
    for name in named:
        lookup(name, "--quantity")
    if named:
        limited = {target.quantity for target in targets}
        extra = tuple(Target(name) for name in named if name not in limited)
        return tuple(target for target in targets if target.quantity in named) + extra
    return targets or tuple(Target(name) for name in USUAL)
