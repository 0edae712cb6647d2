"""The main job from Python: which targets are looked at, what is judged, what is handed on."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from matplotlib.figure import Figure

from rlc.errors import InputError
from rlc.front.inputs import Inputs, Loaded
from rlc.review import USUAL, asked_targets, check, judge, names_in, review
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.parts import Part
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source, constant, sine
from rlc.solver.spread import spread
from rlc.solver.targets import Ratings, Target

RESONANCE = 1 / (2 * math.pi)
# A few roundings on the way to a number of about one.
FEW_ROUNDINGS = 1e-14
#: Damping ratio R/2 from 0.45 to 0.55.
RESISTOR = Part("resistance", 1.0, 0.9, 1.1)


def loaded(
    *targets: Target, source: Source | None = None, parts: tuple[Part, ...] = (RESISTOR,)
) -> Loaded:
    """L = C = 1, R = 1, with no sheet behind it."""
    loop = make_loop(resistance=1.0, inductance=1.0, capacitance=1.0)
    case = Case(loop, source or constant(1.0))
    return Loaded(Inputs("Unit loop", case, parts, {}, Ratings(), targets))


def reviewed(*targets: Target, source: Source | None = None, samples: int = 20):  # type: ignore[no-untyped-def]
    given = loaded(*targets, source=source)
    return review(given, REGISTER, judge(given, targets, samples, 3))


# --- what the spread looks at


def test_a_named_quantity_keeps_the_limits_of_its_targets() -> None:
    limited = Target("bandwidth", maximum=7.0)
    second = Target("bandwidth", minimum=1.0)
    given = loaded(limited, Target("quality_factor", minimum=0.5), second)
    assert asked_targets(given, ["bandwidth"]) == (limited, second)
    assert asked_targets(given, ["peak_current", "bandwidth"]) == (
        limited, second, Target("peak_current"),
    )  # fmt: skip


def test_without_a_name_the_targets_and_without_targets_the_usual_ones() -> None:
    limited = Target("overshoot", maximum=7.0)
    assert asked_targets(loaded(limited), ()) == (limited,)
    usual = (
        "natural_frequency", "bandwidth", "quality_factor", "peak_current",
        "peak_capacitor_voltage",
    )  # fmt: skip
    assert asked_targets(loaded(), ()) == tuple(Target(name) for name in usual)
    assert usual == USUAL


def test_a_name_that_is_not_in_the_register() -> None:
    with pytest.raises(InputError, match=r'--quantity.*Did you mean "bandwidth"'):
        asked_targets(loaded(), ["bandwidht"])


def test_names_in_a_group() -> None:
    assert set(names_in("loop", "steady")) | set(names_in("switch-on")) == set(REGISTER)
    assert "peak_current" not in names_in("loop", "steady")
    assert "current" in names_in("steady")


# --- verdicts


@pytest.mark.parametrize(
    ("targets", "hold"),
    [
        ((Target("damping_ratio", maximum=0.6),), True),
        ((Target("damping_ratio", maximum=0.6), Target("damping_ratio", maximum=0.5)), False),
        ((Target("damping_ratio", minimum=0.5), Target("damping_ratio", maximum=0.6)), False),
        # Of a dc source no beat exists; without limits it fails nothing.
        ((Target("beat_frequency"),), True),
        ((Target("beat_frequency", maximum=1e9),), False),
        ((), True),
    ],
)
def test_targets_hold_if_none_that_has_limits_fails(
    targets: tuple[Target, ...], hold: bool
) -> None:
    assert reviewed(*targets).targets_hold is hold


def test_a_target_that_holds_by_yield_holds() -> None:
    # Nine units in ten are below 0.54.
    found = reviewed(Target("damping_ratio", maximum=0.54, goal=0.5), samples=2000)
    assert [outcome.verdict for outcome in found.outcomes] == ["holds by yield"]
    assert found.targets_hold


# --- cautions


# Closed at the crest and slow beside the loop: nearly a step, with an inrush.
SLOW = sine(100.0, 0.02, math.pi / 2)


def told(target: Target) -> dict[str, str]:
    found = reviewed(target, source=SLOW)
    return {caution.id: caution.text for caution in found.cautions}


def test_a_target_at_a_stated_place_says_nothing_of_the_worst_case_elsewhere() -> None:
    """What a fuse passes in 1000 s is no let-through of the first source period, 50 s."""
    plain = told(Target("bandwidth", minimum=0.1))
    late = told(Target("let_through", minimum=1.0, at=1000.0))
    assert "the let-through in the first source period is" in plain["inrush"]
    assert late == plain


def test_samples_beyond_the_corners_reach_the_cautions() -> None:
    """A peak that only the samples reach is said: a worst case without a stated place."""
    given = loaded(source=SLOW)
    target = Target("peak_current", maximum=1.0)
    batch, (outcome,) = judge(given, [target], 20, 3)
    higher = replace(outcome, worst_high=4321.0)
    found = review(given, REGISTER, (batch, (higher,)))
    texts = {caution.id: caution.text for caution in found.cautions}
    assert "4.321 kA" in texts["inrush"]


# --- the document


def test_the_document_of_a_spread() -> None:
    found = reviewed(Target("damping_ratio", maximum=0.6), Target("bandwidth")).document()
    assert (found["title"], found["sheet"]) == ("Unit loop", None)
    assert (found["seed"], found["samples"]) == (3, 20)
    assert [each["quantity"] for each in found["targets"]] == ["damping_ratio"]
    assert [each["quantity"] for each in found["spread"]] == ["damping_ratio", "bandwidth"]
    assert found["loop"]["limits"] == {"resistance": [0.9, 1.1]}
    assert found["quantities"]["damping_ratio"] == {"value": 0.5, "unit": "1"}
    assert {"elements", "peaks"} <= set(found)
    assert not {"changed", "sweep", "extrema"} & set(found)


def test_the_document_of_a_part_of_it() -> None:
    """Elements belong to the steady state, peaks to the switch-on, neither to the loop."""
    for groups, kept in (
        (("loop",), set()),
        (("loop", "steady"), {"elements"}),
        (("loop", "switch-on"), {"peaks"}),
    ):
        found = review(loaded(), names_in(*groups)).document()
        assert {"elements", "peaks"} & set(found) == kept
        assert not {"seed", "samples", "targets", "spread"} & set(found)
        assert list(found["quantities"]) == list(names_in(*groups))


# --- pictures


def test_pictures_have_the_names_of_what_they_show() -> None:
    found = reviewed(Target("damping_ratio", maximum=0.6), Target("bandwidth"))
    every = ("frequency-response", "switch-on", "state-plane", "spread")
    drawn = found.pictures(every)
    assert list(drawn) == [
        "frequency-response", "switch-on", "state-plane", "spread-1-damping_ratio",
        "spread-2-bandwidth",
    ]  # fmt: skip
    assert list(found.pictures(["state-plane"])) == ["state-plane"]
    assert list(found.pictures(["spread"])) == ["spread-1-damping_ratio", "spread-2-bandwidth"]
    histograms = [drawn[name]() for name in ("spread-1-damping_ratio", "spread-2-bandwidth")]
    assert all(isinstance(figure, Figure) for figure in histograms)
    # Each draws its own outcome: dimensionless damping, and a bandwidth in hertz.
    labels = [figure.axes[0].get_xlabel() for figure in histograms]
    assert ["Hz" in label for label in labels] == [False, True]


def test_without_samples_there_is_no_histogram() -> None:
    target = Target("damping_ratio", maximum=0.6)
    assert reviewed(target, samples=0).pictures(["spread"]) == {}
    assert review(loaded(target), ["bandwidth"]).pictures(["spread", "switch-on"]).keys() == {
        "switch-on"
    }


# --- from a sheet

SHEET = """title = "From a sheet"
[resistor]
value = "1 ohm"
tolerance = "10 %"
[inductor]
value = "1 H"
[capacitor]
value = "1 F"
[source]
kind = "dc"
voltage = "1 V"
[[target]]
quantity = "damping_ratio"
max = 0.6
"""


def test_check_judges_every_target_of_a_sheet(tmp_path: Path) -> None:
    path = tmp_path / "unit.toml"
    path.write_text(SHEET)
    found = check(path, samples=10, seed=5)
    assert found.targets_hold
    assert list(found.quantities) == list(REGISTER)
    assert (found.spread.count, found.spread.seed) == (10, 5)  # type: ignore[union-attr]
    changed = check(path, flags={"--resistance": "2 ohm"}, samples=10)
    # Damping ratio 1, from 0.9 to 1.1.
    assert not changed.targets_hold
    assert changed.outcomes[0].worst_high == pytest.approx(1.1, rel=FEW_ROUNDINGS)


# --- what a spread takes along


def test_states_at_closing_reach_every_unit() -> None:
    """Lossless, no source, 3 V and 4 A: the energy gives sqrt(9 + 16 L/C) and sqrt(16 + 9 C/L)."""
    loop = make_loop(resistance=0.0, inductance=1.0, capacitance=1.0)
    case = Case(loop, constant(0.0), 3.0, 4.0)  # type: ignore[arg-type]
    batch = spread(case, (Part("capacitance", 1.0, 1.0, 4.0),), 50, 1)
    voltage, current = (
        batch.outcome(Target(name)) for name in ("peak_capacitor_voltage", "peak_current")
    )
    ends = (voltage.worst_low, voltage.worst_high, current.worst_low, current.worst_high)
    # 9 + 16/4 = 13 and 16 + 9*4 = 52
    assert ends == pytest.approx((math.sqrt(13), 5.0, 5.0, math.sqrt(52)), rel=FEW_ROUNDINGS)
    assert voltage.maximum <= 5.0 + FEW_ROUNDINGS


def test_a_part_that_makes_a_value_cease_to_exist_moves_it_most() -> None:
    """It rings below R = 2 sqrt(L/C): at 1.9 ohm and from 0.95 H on, not at 2.5 ohm."""
    loop = make_loop(resistance=1.9, inductance=1.0, capacitance=1.0)
    parts = (Part("inductance", 1.0, 0.95, 400.0), Part("resistance", 1.9, 1.8, 2.5))
    for order in (parts, parts[::-1]):
        found = spread(Case(loop, constant(1.0)), order, 0, 1).outcome(Target("ringing_frequency"))
        assert [effect.field for effect in found.effects] == ["resistance", "inductance"]
        # sqrt(1/LC - (R/2L)^2): 1 - 0.9^2 = 0.19
        assert found.effects[0].low == pytest.approx(math.sqrt(0.19) * RESONANCE, rel=1e-13)
        assert np.isnan(found.effects[0].high)
        assert np.isfinite([found.effects[1].low, found.effects[1].high]).all()


OHMS = Part("resistance", 0.316, 0.316 * 0.99, 0.316 * 1.01)
HENRIES = Part("inductance", 1e-3, 0.9e-3, 1.1e-3)
FARADS = Part("capacitance", 1e-6, 0.95e-6, 1.05e-6)


@pytest.mark.parametrize(
    ("parts", "detuning"),
    [
        ((OHMS, HENRIES, FARADS), 1.0),
        # 8 % more than the nominal L C: only an inductance or capacitance beside the nominal.
        ((OHMS, HENRIES, FARADS), 1.08),
        ((OHMS, HENRIES), 1.08),
        ((OHMS, FARADS), 0.97),
        ((FARADS, OHMS), 1.03),
    ],
)
@pytest.mark.parametrize("extra", [{}, {"winding_resistance": 0.1, "source_inductance": 2e-4}])
def test_a_resonance_inside_the_tolerances_is_the_worst_case(
    parts: tuple[Part, ...], detuning: float, extra: dict[str, float]
) -> None:
    loop = make_loop(resistance=0.316, inductance=1e-3, capacitance=1e-6, **extra)
    product = detuning * (1e-3 + extra.get("source_inductance", 0.0)) * 1e-6
    case = Case(loop, sine(1.0, 1 / (2 * math.pi * math.sqrt(product))))
    found = spread(case, parts, 0, 1).outcome(Target("current_amplitude"))
    total = 0.316 * 0.99 + extra.get("winding_resistance", 0.0)
    # Roundings of the two reactances, 30 ohm each, square into nothing beside 0.3 ohm.
    assert found.worst_high == pytest.approx(1 / total, rel=1e-13)
    if detuning == 1.0 and not extra:
        assert found.worst_high == pytest.approx(3.197, abs=5e-4)


def test_a_resonance_beyond_the_limits_is_no_unit() -> None:
    """Driven at twice the nominal frequency: the nearest corner is the worst case."""
    loop = make_loop(resistance=0.316, inductance=1e-3, capacitance=1e-6)
    frequency = 2 / (2 * math.pi * math.sqrt(1e-9))
    batch = spread(Case(loop, sine(1.0, frequency)), (OHMS, HENRIES, FARADS), 0, 1)
    found = batch.outcome(Target("current_amplitude"))
    omega = 2 * math.pi * frequency
    reactance = omega * 0.9e-3 - 1 / (omega * 0.95e-6)
    assert found.worst_high == pytest.approx(1 / math.hypot(0.316 * 0.99, reactance), rel=1e-12)
    # Nominal, two limits of each of three parts, eight corners: nothing else.
    assert batch.case.loop.shape == (1 + 6 + 8,)
