"""Corners, samples, intervals and verdicts, against SciPy and closed forms."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from scipy import stats

from rlc.errors import InputError
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.spread import spread, yield_interval
from rlc.solver.targets import Fuse, Ratings, Target

RESISTOR = Part("resistance", 10.0, 9.0, 12.0)
INDUCTOR = Part("inductance", 1e-3, 0.8e-3, 1.1e-3)
CAPACITOR = Part("capacitance", 1e-6, 0.9e-6, 1.2e-6)
PARTS = (RESISTOR, INDUCTOR, CAPACITOR)


def nominal() -> Case:
    loop = make_loop(resistance=10.0, inductance=1e-3, capacitance=1e-6, winding_resistance=0.5)
    return Case(loop, constant(5.0))


@pytest.mark.parametrize(
    ("kept", "samples"), [(0, 1), (1, 1), (0, 50), (50, 50), (37, 50), (1999, 2000), (1, 100_000)]
)
def test_yield_interval_is_clopper_and_pearsons(kept: int, samples: int) -> None:
    found = yield_interval(kept, samples)
    exact = stats.binomtest(kept, samples).proportion_ci(0.95, method="exact")
    assert found.value == kept / samples
    # SciPy inverts the beta distribution by a search of its own, to about 1e-9.
    assert (found.low, found.high) == pytest.approx((exact.low, exact.high), abs=1e-8)


def test_corners_are_those_that_a_loop_over_them_finds() -> None:
    target = Target("peak_capacitor_voltage", maximum=9.0)
    found = spread(nominal(), PARTS, 0, 1).outcome(target)
    values = []
    for resistance, inductance, capacitance in product(*((p.low, p.high) for p in PARTS)):
        loop = make_loop(
            resistance=resistance,
            inductance=inductance,
            capacitance=capacitance,
            winding_resistance=0.5,
        )
        values.append(float(target.values(Case(loop, constant(5.0)))))
    assert found.worst_low == pytest.approx(min(values), rel=1e-14)
    assert found.worst_high == pytest.approx(max(values), rel=1e-14)
    assert found.nominal == pytest.approx(float(target.values(nominal())), rel=1e-14)
    assert found.share is None


def test_effects_are_each_part_alone_at_its_limits() -> None:
    found = spread(nominal(), PARTS, 0, 1).outcome(Target("natural_frequency", maximum=1.0))
    effects = {effect.field: effect for effect in found.effects}

    def frequency(inductance: float, capacitance: float) -> float:
        return 1 / (2 * np.pi * np.sqrt(inductance * capacitance))

    assert effects["inductance"].low == pytest.approx(frequency(0.8e-3, 1e-6), rel=1e-14)
    assert effects["inductance"].high == pytest.approx(frequency(1.1e-3, 1e-6), rel=1e-14)
    assert effects["capacitance"].low == pytest.approx(frequency(1e-3, 0.9e-6), rel=1e-14)
    assert effects["resistance"].low == effects["resistance"].high == found.nominal
    assert [effect.field for effect in found.effects] == ["inductance", "capacitance", "resistance"]


@pytest.mark.parametrize(
    ("part", "exact"),
    [
        (RESISTOR, stats.uniform(9.0, 3.0)),
        (
            Part("resistance", 10.0, 9.0, 12.0, "normal", 2.0),
            stats.truncnorm(-2.0, 2.0, loc=10.5, scale=0.75),
        ),
        (Part("resistance", 10.0, 9.0, 12.0, "triangular"), stats.triang(1 / 3, 9.0, 3.0)),
    ],
    ids=["uniform", "normal", "triangular"],
)
def test_samples_follow_their_distribution(part: Part, exact: object) -> None:
    drawn = part.draw(20_000, (7, 0))
    assert drawn.min() >= part.low
    assert drawn.max() <= part.high
    # A true sample fails this once in a thousand seeds, and the seed is fixed.
    assert stats.kstest(drawn, exact.cdf).pvalue > 1e-3  # type: ignore[attr-defined]


def test_parts_are_drawn_independently_of_each_other() -> None:
    batch = spread(nominal(), PARTS, 5000, 3).case.loop
    drawn = np.array([getattr(batch, part.field)[-5000:] for part in PARTS])
    correlation = np.corrcoef(drawn) - np.eye(3)
    # The correlation of independent samples has a standard deviation of 1/sqrt(n).
    assert np.max(np.abs(correlation)) < 4 / np.sqrt(5000)


def test_the_seed_decides_and_another_part_changes_nothing() -> None:
    target = Target("bandwidth", maximum=1.0)
    one, same = (spread(nominal(), PARTS, 100, 3).outcome(target).samples for _ in range(2))
    other = spread(nominal(), PARTS, 100, 4).outcome(target).samples
    assert np.array_equal(one, same)
    assert not np.array_equal(one, other)
    alone = spread(nominal(), PARTS[:1], 100, 3).case.loop.resistance[-100:]
    assert np.array_equal(alone, spread(nominal(), PARTS, 100, 3).case.loop.resistance[-100:])


def test_statistics_against_the_exact_distribution() -> None:
    """Bandwidth of a loop with a uniform resistance is itself uniform."""
    part = Part("resistance", 10.0, 8.0, 12.0)
    found = spread(nominal(), (part,), 100_000, 2).outcome(
        Target("bandwidth", maximum=(0.5 + 11.0) / (2 * np.pi * 1e-3))
    )
    low, high = ((0.5 + ohms) / (2 * np.pi * 1e-3) for ohms in (8.0, 12.0))
    width = high - low
    # Four standard errors: of the mean width/sqrt(12 n), of a quantile width*sqrt(p(1-p)/n).
    assert found.mean == pytest.approx((low + high) / 2, abs=4 * width / np.sqrt(12e5))
    for point, value in (
        (0.01, found.percent_1),
        (0.5, found.percent_50),
        (0.99, found.percent_99),
    ):
        error = 4 * width * np.sqrt(point * (1 - point) / 1e5)
        assert value == pytest.approx(low + point * width, abs=error)
    assert found.share is not None
    assert found.share.low < 0.75 < found.share.high
    assert (found.worst_low, found.worst_high) == pytest.approx((low, high), rel=1e-12)
    assert low <= found.minimum < found.maximum <= high


def test_without_tolerances_nominal_is_all_there_is() -> None:
    exact = tuple(Part(part.field, part.nominal, part.nominal, part.nominal) for part in PARTS)
    batch = spread(nominal(), exact, 500, 1)
    found = batch.outcome(Target("bandwidth", maximum=2e3))
    assert batch.parts == ()
    assert batch.count == 0
    assert found.worst_low == found.nominal == found.worst_high
    assert found.verdict == "holds"
    assert np.isnan(found.mean)


def limits_for(quantity: str) -> tuple[float, float, float]:
    found = spread(nominal(), PARTS, 2000, 1).outcome(Target(quantity, maximum=1.0))
    return found.nominal, found.percent_99, found.worst_high


def verdict(quantity: str, maximum: float, goal: float | None) -> str:
    target = Target(quantity, maximum=maximum, goal=goal)
    return spread(nominal(), PARTS, 2000, 1).outcome(target).verdict


def test_verdicts() -> None:
    middle, most, worst = limits_for("bandwidth")
    assert verdict("bandwidth", worst, None) == "holds"
    # a limit is kept by what passes it no more than by rounding
    assert verdict("bandwidth", np.nextafter(worst, 0), None) == "holds"
    assert verdict("bandwidth", worst * (1 - 1e-10), None) == "fails"
    assert verdict("bandwidth", most, 0.98) == "holds by yield"
    # 99 % of the samples hold, so the interval's lower end is below 99 %.
    assert verdict("bandwidth", most, 0.99) == "fails"
    assert verdict("bandwidth", most, None) == "fails"
    # The nominal unit is one of many: where some may miss, so may it.
    assert verdict("bandwidth", middle * (1 - 1e-10), 0.01) == "holds by yield"
    assert verdict("bandwidth", middle * (1 - 1e-10), None) == "fails"


def test_a_quantity_that_does_not_exist_for_every_unit_fails() -> None:
    """Some units ring and some do not; a ringing frequency is asked of all."""
    case = Case(
        make_loop(resistance=2.0, inductance=1.0, capacitance=1.0), sine(1.0, frequency=1.0)
    )
    part = Part("resistance", 1.9, 1.5, 2.5)
    found = spread(case, (part,), 1000, 1).outcome(Target("ringing_frequency", maximum=10.0))
    assert found.verdict == "fails"
    assert np.isnan(found.worst_high)
    assert np.isfinite(found.maximum)
    assert found.share is not None
    # It rings below 2 ohm: half of the units.
    assert found.share.low < 0.5 < found.share.high


@pytest.mark.parametrize("name", REGISTER)
def test_every_quantity_can_be_a_target(name: str) -> None:
    loop = make_loop(resistance=10.0, inductance=1e-3, capacitance=1e-6)
    case = Case(loop, sine(5.0, 4e3, closing_angle=None))
    # what is exceeded by every unit: an exceeded limit has to be stated
    limit = {"current": 0.1, "voltage": 1.0}.get(REGISTER[name].at or "")
    found = spread(case, PARTS, 20, 1).outcome(Target(name, maximum=1.0, at=limit))
    assert found.worst_low <= found.nominal <= found.worst_high
    assert found.worst_low <= found.minimum <= found.percent_50 <= found.maximum <= found.worst_high


def test_ratings_become_targets() -> None:
    ratings = Ratings(resistor_power=5.0, capacitor_voltage=250.0)
    assert [(each.quantity, each.maximum, each.rating) for each in ratings.targets()] == [
        ("resistor_power", 5.0, "resistor.rated_power"),
        ("peak_capacitor_voltage", 250.0, "capacitor.rated_voltage"),
    ]


@pytest.mark.parametrize(("samples", "seed"), [(-1, 1), (1_000_001, 1), (10, -1)])
def test_counts_out_of_range(samples: int, seed: int) -> None:
    with pytest.raises(InputError, match="must be"):
        spread(nominal(), PARTS, samples, seed)


def test_targets_refuse_what_makes_no_sense() -> None:
    with pytest.raises(InputError, match="is not in the register"):
        Target("bandwith", maximum=1.0)
    with pytest.raises(InputError, match="is above max"):
        Target("bandwidth", minimum=2.0, maximum=1.0)


@pytest.mark.parametrize(
    ("operations", "share"),
    [(1, 0.48), (100, 0.48), (1000, 0.38), (10_000, 0.29), (100_000, 0.22), (31_623, 0.255)],
)
def test_a_fuse_allows_less_for_more_pulses(operations: int, share: float) -> None:
    """Common practice in fuse makers' guides, no source; half way in the logarithm, half way."""
    fuse = Fuse(0.5, operations)
    target = fuse.target(nominal())
    assert fuse.share == pytest.approx(share, abs=1e-6)
    assert target.maximum == pytest.approx(share * 0.5, abs=1e-6)
    assert (target.quantity, target.at) == ("let_through", None)


def test_a_fuse_in_a_loop_with_a_load_is_held_against_the_pulse_alone() -> None:
    loaded = make_loop(resistance=10.0, inductance=1e-3, capacitance=1e-6, load_resistance=1e4)
    target = Fuse(0.5, 100).target(Case(loaded, constant(5.0)))
    # Five time constants of 2/gamma, gamma = R/L + 1/(R_load C).
    assert target.at == pytest.approx(5 * 2 / (1e4 + 100), rel=1e-12)
