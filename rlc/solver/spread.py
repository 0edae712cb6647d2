"""The spread over real parts: corners and random samples, through the solver's own functions."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import product
from typing import Any, Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.loop import Loop
from rlc.solver.parts import Part
from rlc.solver.targets import Target

Array = NDArray[np.float64]

CONFIDENCE = 0.95
MOST_SAMPLES = 1_000_000
# Orders of a train of pulses that are looked at: the amplitude of later ones is below 1 %.
_TRAIN_ORDERS = 40


class Yield(NamedTuple):
    """The share of units that keep the limits, and its Clopper-Pearson interval.

    Attributes
    ----------
    value : float
        Share of the samples, 0 to 1 [1].
    low, high : float
        Ends of the interval, 0 to 1 [1].
    confidence : float
        Probability with which the interval holds the true share [1].
    """

    value: float
    low: float
    high: float
    confidence: float = CONFIDENCE


def yield_interval(kept: int, samples: int) -> Yield:
    """Exact binomial interval for a share.

    Parameters
    ----------
    kept, samples : int
        Units that keep the limits, of how many; zero to `samples`, and one or more.

    Returns
    -------
    Yield

    References
    ----------
    .. [1] C. J. Clopper and E. S. Pearson, "The use of confidence or fiducial limits
       illustrated in the case of the binomial", Biometrika 26 (1934) 404-413.
    """
    from scipy.special import betaincinv

    tail = (1 - CONFIDENCE) / 2
    low = float(betaincinv(kept, samples - kept + 1, tail)) if kept else 0.0
    high = float(betaincinv(kept + 1, samples - kept, 1 - tail)) if kept < samples else 1.0
    return Yield(kept / samples, low, high)


class Effect(NamedTuple):
    """What one part alone does to a quantity.

    Attributes
    ----------
    field : str
        The part, by the loop's field.
    low, high : float
        The quantity with the part at its lower and upper limit [SI unit of the quantity].
    """

    field: str
    low: float
    high: float


@dataclass(frozen=True)
class Outcome:
    """One quantity over the spread; all values in SI units.

    Attributes
    ----------
    target : Target
        The quantity and its limits.
    nominal : float
        With every part at its nominal value [SI].
    worst_low, worst_high : float
        Extremes over parts at their limits, resonances between them and all samples: searched,
        not proved [SI].
    minimum, maximum, mean, percent_1, percent_50, percent_99 : float
        Of the samples for which the quantity exists; nan without samples [SI].
    samples : Array
        Shape (n,); nan where the quantity does not exist [SI].
    share : Yield or None
        Share of the samples that keep the limits.
    effects : tuple of Effect
        Each part alone at its limits, the part that moves the quantity most first.
    """

    target: Target
    nominal: float
    worst_low: float
    worst_high: float
    minimum: float
    maximum: float
    mean: float
    percent_1: float
    percent_50: float
    percent_99: float
    samples: Array
    share: Yield | None
    effects: tuple[Effect, ...]

    @property
    def verdict(self) -> Literal["holds", "holds by yield", "fails"]:
        """Whether nominal and worst case are inside, or enough units are, or neither.

        A value that does not exist is not inside; a share is enough when the lower end of its
        interval reaches the goal.
        """
        if not self.miss:
            return "holds"
        goal, share = self.target.goal, self.share
        enough = goal is not None and share is not None and share.low >= goal
        return "holds by yield" if enough else "fails"

    @property
    def margin(self) -> float:
        """How far the nominal value is inside the nearest limit, as a share of that limit [1]."""
        low, high = self.target.minimum, self.target.maximum
        room = [(self.nominal - low) / abs(low)] if low else []
        room += [(high - self.nominal) / abs(high)] if high else []
        return min(room, default=np.nan)

    @property
    def miss(self) -> str:
        """What is outside the limits: "nominal", "worst low", "worst high"; or nothing."""
        for name in ("nominal", "worst_low", "worst_high"):
            if not self.target.kept(getattr(self, name)):
                return name.replace("_", " ")
        return ""


@dataclass(frozen=True)
class Spread:
    """Nominal, limits one at a time, corners and samples as one batch.

    Attributes
    ----------
    case : Case
        The batch, shape (n,): the nominal loop first, then each part alone at its two limits,
        then all corners and the resonances with the source between the limits, then the samples.
    parts : tuple of Part
        What is spread; may be empty.
    count, seed : int
        Number of samples, and what they follow from.
    """

    case: Case
    parts: tuple[Part, ...]
    count: int
    seed: int

    def outcome(self, target: Target) -> Outcome:
        """Evaluate one target over the batch.

        Parameters
        ----------
        target : Target
            Limits on a registered quantity, or a quantity without any.

        Returns
        -------
        Outcome

        Raises
        ------
        InputError
            If the quantity is not asked for like this of the source.
        """
        values = np.broadcast_to(target.values(self.case), self.case.loop.shape)
        nominal, singles = float(values[0]), values[1 : 1 + 2 * len(self.parts)]
        effects = [
            Effect(part.field, float(low), float(high))
            for part, low, high in zip(self.parts, singles[::2], singles[1::2], strict=True)
        ]
        drawn = values[values.size - self.count :]
        kept = int(np.count_nonzero(target.kept(drawn)))
        missing = bool(np.isnan(values).any())
        return Outcome(
            target,
            nominal,
            *((np.nan, np.nan) if missing else (float(values.min()), float(values.max()))),
            *_statistics(drawn),
            drawn,
            yield_interval(kept, self.count) if self.count else None,
            tuple(sorted(effects, key=lambda effect: -_movement(effect, nominal))),
        )


def spread(case: Case, parts: tuple[Part, ...], samples: int, seed: int) -> Spread:
    """Put parts at their limits, in all corners and at random.

    Parameters
    ----------
    case : Case
        The nominal switch-on, one loop.
    parts : tuple of Part
        What differs from unit to unit; everything else stays nominal.
    samples : int
        Number of random units, zero to 1e6; each part is drawn independently.
    seed : int
        Zero or more; the same seed gives the same units.

    Returns
    -------
    Spread

    Raises
    ------
    InputError
        If `samples` or `seed` is out of range.
    """
    if not isinstance(samples, int) or not 0 <= samples <= MOST_SAMPLES:
        raise InputError("samples", samples, f"must be a whole number from 0 to {MOST_SAMPLES}")
    if not isinstance(seed, int) or seed < 0:
        raise InputError("seed", seed, "must be a whole number, zero or more")
    spread_parts = tuple(part for part in parts if part.high > part.low)
    count = samples if spread_parts else 0
    limits = _limits(case, spread_parts)
    # Seeded by place among all parts: another part's tolerance changes no draw of this one.
    rows: dict[str, Array] = {
        part.field: np.concatenate([limits[part.field], part.draw(count, (seed, index))])
        for index, part in enumerate(parts)
        if part in spread_parts
    }
    loop = case.loop
    values: dict[str, Any] = {name: getattr(loop, name) for name in loop.__dataclass_fields__}
    values.update(rows or {"resistance": np.array([loop.resistance])})
    batch = replace(case, loop=Loop(**values))
    return Spread(batch, spread_parts, count, seed)


def _limits(case: Case, parts: tuple[Part, ...]) -> dict[str, Array]:
    """Nominal, each part alone at its limits, all corners, and resonances between the limits."""
    nominal = {part.field: part.nominal for part in parts}
    rows = [nominal]
    rows += [nominal | {part.field: end} for part in parts for end in (part.low, part.high)]
    ends = [(part.low, part.high) for part in parts]
    rows += [dict(zip(nominal, corner, strict=True)) for corner in product(*ends)]
    rows += list(_resonances(case, {part.field: part for part in parts}))
    return {field: np.array([row[field] for row in rows]) for field in nominal}


def _resonances(case: Case, parts: dict[str, Part]) -> Iterator[dict[str, float]]:
    """Units in which a frequency of the source is the resonance of inductance and capacitance.

    A resonance inside the tolerances is worse than any corner, and corners miss it.
    """

    def ends(field: str) -> tuple[float, ...]:
        part = parts.get(field)
        return (part.low, part.high) if part else (float(getattr(case.loop, field)),)

    extra = float(case.loop.source_inductance)
    for frequency in _driving_frequencies(case):
        squared = (2 * np.pi * frequency) ** 2
        for resistance, inductance in product(ends("resistance"), ends("inductance")):
            capacitance = 1 / (squared * (inductance + extra))
            yield from _between(parts, resistance, inductance, capacitance)
        for resistance, capacitance in product(ends("resistance"), ends("capacitance")):
            inductance = 1 / (squared * capacitance) - extra
            yield from _between(parts, resistance, inductance, capacitance)


def _driving_frequencies(case: Case) -> list[float]:
    """Of a source that goes on: its own and its harmonics; a train of pulses holds all orders."""
    source, shape = case.source, case.source.shape
    if source.alternating:
        return [order.number * float(source.frequency) for order in source.every_order]
    period = shape.given.get("period") if shape is not None else None
    return [] if not period else [number / period for number in range(1, _TRAIN_ORDERS + 1)]


def _between(
    parts: dict[str, Part], resistance: float, inductance: float, capacitance: float
) -> Iterator[dict[str, float]]:
    """The unit, cut to the parts that are spread, if it lies between their limits."""
    unit = {"resistance": resistance, "inductance": inductance, "capacitance": capacitance}
    row = {field: unit[field] for field in parts}
    if all(part.low <= row[field] <= part.high for field, part in parts.items()):
        yield row


def _statistics(drawn: Array) -> tuple[float, float, float, float, float, float]:
    """Minimum, maximum, mean and 1/50/99 % points of the values that exist."""
    there = drawn[~np.isnan(drawn)]
    if not there.size:
        return np.nan, np.nan, np.nan, np.nan, np.nan, np.nan
    # Points that are samples themselves: no interpolation towards an infinite neighbour.
    one, half, most = np.quantile(there, (0.01, 0.5, 0.99), method="inverted_cdf")
    with np.errstate(invalid="ignore"):
        mean = float(np.mean(there))
    return float(there.min()), float(there.max()), mean, float(one), float(half), float(most)


def _movement(effect: Effect, nominal: float) -> float:
    """How far a part alone moves the quantity; a value that ceases to exist moves it most."""
    values = (effect.low, nominal, effect.high)
    if not np.all(np.isfinite(values)):
        return np.inf if np.isfinite(nominal) else 0.0
    return max(values) - min(values)
