"""The first extrema, and how fast the current rises, against closed forms and SciPy."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from rlc.solver.case import Case
from rlc.solver.extrema import first_extrema
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import Source, constant, sine


def test_a_step_from_rest_turns_every_half_period_by_the_same_factor() -> None:
    """Closed form: extrema of the current half a ringing period apart, each smaller by
    exp(-pi zeta/sqrt(1 - zeta^2)); between them the voltage turns where the current is zero."""
    zeta = 0.1
    case = Case(make_loop(resistance=2 * zeta, inductance=1.0, capacitance=1.0), constant(1.0))
    found = first_extrema(case, 10)
    assert found.of == ("current", "capacitor") * 5
    root = np.sqrt(1 - zeta**2)
    current, voltage = found.time[::2], found.time[1::2]
    assert current[0] == pytest.approx(np.arctan2(root, zeta) / root, rel=1e-13)
    assert np.diff(current) == pytest.approx(np.full(4, np.pi / root), rel=1e-12)
    assert voltage == pytest.approx(np.pi / root * np.arange(1, 6), rel=1e-13)
    shrink = -np.exp(-np.pi * zeta / root)
    assert found.current[::2][1:] == pytest.approx(found.current[::2][:-1] * shrink, rel=1e-12)
    assert found.capacitor_voltage[1::2] == pytest.approx(1 - shrink ** np.arange(1, 6), rel=1e-12)
    assert found.current[1::2] == pytest.approx(np.zeros(5), abs=1e-15)


@pytest.mark.parametrize("angle", [0.0, 1.0, None])
def test_a_sine_turns_where_an_integrator_finds_it(angle: float | None) -> None:
    source = Source(np.float64(1.0), np.float64(0.3 / (2 * np.pi)), angle)  # type: ignore[arg-type]
    loop = make_loop(
        resistance=0.1,
        inductance=1.0,
        capacitance=1.0,
        series_resistance=0.2,
        load_resistance=9.0,
    )
    found = first_extrema(Case(loop, source, 0.3, -0.2), 12)  # type: ignore[arg-type]

    def terminal(v: float, i: float) -> float:
        return (v + 0.2 * i) / (1 + 0.2 / 9)

    def rates(t: float, x: np.ndarray) -> list[float]:
        out = terminal(*x)
        return [x[1] - out / 9, np.sin(0.3 * t + found.angle) - 0.1 * x[1] - out]

    def current_turns(t: float, x: np.ndarray) -> float:
        return rates(t, x)[1]

    def voltage_turns(t: float, x: np.ndarray) -> float:
        return terminal(*rates(t, x))

    done = solve_ivp(
        rates, (0, 60), [0.3, -0.2], "DOP853", rtol=1e-12, atol=1e-13,
        events=(current_turns, voltage_turns),
    )  # fmt: skip
    expected = np.sort(np.concatenate(done.t_events))[:12]
    # The integrator's own error after a dozen swings, and its root finder's.
    assert found.time == pytest.approx(expected, abs=1e-9)
    assert all(
        any(abs(time - event) < 1e-9 for event in done.t_events[0 if of == "current" else 1])
        for time, of in zip(found.time, found.of, strict=True)
    )


def test_no_extremum_is_above_the_peak_and_a_step_reaches_it() -> None:
    rng = np.random.default_rng(11)
    for index in range(80):
        loop = make_loop(
            resistance=10 ** rng.uniform(-4, 4),
            inductance=10 ** rng.uniform(-6, 0),
            capacitance=10 ** rng.uniform(-9, -3),
            series_resistance=10 ** rng.uniform(-4, 1),
            load_resistance=10 ** rng.uniform(0, 6),
        )
        step = index % 2 == 1
        source = constant(1.0) if step else sine(1.0, 10 ** rng.uniform(1, 5), rng.uniform(0, 6))
        case = Case(loop, source, rng.normal())
        found = first_extrema(case, 12)
        for of, values in (("current", found.current), ("capacitor", found.capacitor_voltage)):
            peak = case.peak(of)
            largest = max(
                (abs(value) for value, turns in zip(values, found.of, strict=True) if turns == of),
                default=0.0,
            )
            assert largest <= float(peak.value) * (1 + 1e-9)
            if step and 0 < float(peak.time) < np.inf:
                assert largest >= float(peak.value) * (1 - 1e-9)


@pytest.mark.parametrize(
    "case",
    [
        Case(make_loop(resistance=1.0, inductance=1.0, capacitance=1.0), constant(0.0)),
        Case(make_loop(resistance=9.0, inductance=1.0, capacitance=1.0), constant(0.0), 1.0, -0.2),
    ],
    ids=["at rest", "creeping"],
)
def test_a_loop_that_never_turns_has_none(case: Case) -> None:
    found = first_extrema(case)
    assert found.time.size == found.current.size == found.capacitor_voltage.size == 0


def test_a_step_from_rest_rises_fastest_at_closing() -> None:
    """V/L, the inductor's law at closing."""
    loop = make_loop(resistance=[1.0, 9.0], inductance=2.0, capacitance=0.1, source_inductance=0.5)
    rise = REGISTER["peak_rate_of_rise"](Case(loop, constant(10.0)))
    assert rise == pytest.approx(np.full(2, 10.0 / 2.5), rel=1e-14)


def test_rate_of_rise_under_a_sine_against_dense_sampling() -> None:
    case = Case(
        make_loop(resistance=0.2, inductance=1.0, capacitance=1.0, load_resistance=5.0),
        sine(1.0, 0.11, 0.4),
        0.5,
    )
    time = np.linspace(0, 120, 400_001)
    rate = np.abs(np.gradient(case.waveforms(time).current, time, edge_order=2)).max()
    peak = float(REGISTER["peak_rate_of_rise"](case))
    # Central differences err by h^2/6 times the third derivative, below 1e-7 here.
    assert rate == pytest.approx(peak, rel=1e-6)


def test_beat_and_product() -> None:
    loop = make_loop(resistance=[0.2, 3.0], inductance=1.0, capacitance=1.0)
    case = Case(loop, sine(1.0, 0.2))
    ringing = np.sqrt(1 - 0.01) / (2 * np.pi)
    assert REGISTER["beat_frequency"](case)[0] == pytest.approx(0.2 - ringing, rel=1e-13)
    product = REGISTER["current_frequency_product"](case)
    assert product[0] == pytest.approx(float(case.peak("current").value[0]) * ringing, rel=1e-13)
    assert np.isnan(product[1])
    assert np.isnan(REGISTER["beat_frequency"](case)[1])
    assert np.isnan(REGISTER["beat_frequency"](Case(loop, constant(1.0)))).all()
