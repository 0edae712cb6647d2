"""Let-through, limits exceeded and distributions over closings, against general integrators."""

from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import fixed_quad
from sources import KINDS, drawn

from rlc.solver import shapes
from rlc.solver.case import Case
from rlc.solver.closing import over_closings
from rlc.solver.exceeding import exceeded
from rlc.solver.loop import make_loop
from rlc.solver.passed import let_through, let_through_time, running_let_through, whole_let_through
from rlc.solver.quantities import REGISTER
from rlc.solver.source import ANY_ANGLE, Order, Window, constant, shaped, sine


def unit_loop(zeta, **more):
    return make_loop(resistance=2 * zeta, inductance=1.0, capacitance=1.0, **more)


def random_case(kind, seed, load=False):
    rng = np.random.default_rng([seed, KINDS.index(kind), 11])
    loop = unit_loop(10 ** rng.uniform(-1.5, 1.0), load_resistance=2.0 if load else np.inf)
    return Case(loop, drawn(kind, rng, 1.0, decades=0.7), *(rng.normal(size=2) * (seed % 2)))


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("seed", range(4))
def test_let_through_against_quadrature_of_another_order(kind, seed):
    case = random_case(kind, seed, load=seed == 3)
    until = 17.3
    knots = [] if case.lines is None else [t for t in case.lines.start if 0 < t < until]
    fast = np.geomspace(1e-3, until / 2, 12)
    edges = np.union1d(np.r_[0.0, until, knots], fast)
    edges = np.union1d(edges, np.linspace(0, until, 12))
    # sixty nodes to each of dozens of parts: far beyond what the answer is held to
    expected = sum(
        fixed_quad(lambda t: case.waveforms(t).current ** 2, a, b, n=60)[0]
        for a, b in pairwise(edges)
    )
    assert float(let_through(case, until)) == pytest.approx(expected, rel=1e-9)
    # both ways, where the doubled spans of a sine and a constant have one of their own
    running = running_let_through(case, np.array([until, 0.0, until / 3]))
    assert running[0] == pytest.approx(expected, rel=1e-9)
    assert running[1] == 0.0
    assert running[2] == pytest.approx(float(let_through(case, until / 3)), rel=1e-11)


@pytest.mark.parametrize("kind", ["ramp", "pulse", "train", "recorded", "surge"])
@pytest.mark.parametrize("seed", range(3))
def test_energy_balance_of_the_whole_switch_on(kind, seed):
    """What the source has given is stored at the end or lost in the resistance."""
    case = random_case(kind, seed)
    end = 400.0
    passed = float(let_through(case, end))
    knots = [] if case.lines is None else case.lines.start.tolist()
    edges = np.unique(np.r_[0.0, knots, np.linspace(0, end, 800), np.geomspace(1e-4, end, 100)])
    nodes, weights = np.polynomial.legendre.leggauss(12)
    half, middle = np.diff(edges) / 2, (edges[1:] + edges[:-1]) / 2
    waves = case.waveforms((middle[:, np.newaxis] + half[:, np.newaxis] * nodes).ravel())
    given = np.sum(half * ((waves.source * waves.current).reshape(half.size, -1) @ weights))
    last = case.waveforms(np.array([end]))
    before = 0.5 * float(case.capacitor_voltage) ** 2 + 0.5 * float(case.initial_current) ** 2
    after = 0.5 * float(last.capacitor_voltage[0]) ** 2 + 0.5 * float(last.current[0]) ** 2
    lost = float(case.loop.resistance) * passed
    assert given + before == pytest.approx(lost + after, rel=1e-9, abs=1e-9 * (lost + before))
    assert float(whole_let_through(case)) == pytest.approx(
        float(let_through(case, 1500.0)), rel=1e-9
    )


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("share", [0.1, 0.5, 0.99])
def test_let_through_reaches_its_share(kind, share):
    case = random_case(kind, 2)
    when = let_through_time(case, share)
    whole = whole_let_through(case)
    assert float(let_through(case, when)) == pytest.approx(share * float(whole), rel=1e-9)


def test_let_through_time_of_a_discharge_through_a_resistance():
    """Overdamped far beyond critical: i^2 falls as exp(-2 t/RC), half has passed at RC ln(2)/2."""
    case = Case(make_loop(resistance=1e3, inductance=1e-9, capacitance=1e-6), constant(10.0))
    assert float(let_through_time(case, 0.5)) == pytest.approx(1e-3 * np.log(2) / 2, rel=1e-6)
    assert np.isnan(float(let_through_time(case, 1.5)))


def test_limit_passed_by_a_charging_capacitor():
    """v = V (1 - exp(-t/RC)): above V/2 from RC ln 2 on, for ever."""
    case = Case(make_loop(resistance=1e3, inductance=1e-9, capacitance=1e-6), constant(10.0))
    first, lasts = exceeded(case, "capacitor", 5.0)
    assert first == pytest.approx(1e-3 * np.log(2), rel=1e-6)
    assert lasts == np.inf
    assert np.isnan(exceeded(case, "capacitor", 10.5).first)
    assert exceeded(case, "capacitor", 10.5).lasts == 0.0


def test_limit_passed_by_an_undamped_ringing_is_passed_again_and_again():
    """v = 1 - cos t is above 1.5 from t = 120 degrees on, in every period."""
    case = Case(unit_loop(0.0), constant(1.0))
    first, lasts = exceeded(case, "capacitor", 1.5)
    assert first == pytest.approx(2 * np.pi / 3, rel=1e-12)
    assert lasts == np.inf


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("element", ["current", "capacitor"])
@pytest.mark.parametrize("share", [0.3, 0.7, 0.97])
def test_times_above_a_limit_against_dense_samples(kind, element, share):
    case = random_case(kind, 2)
    limit = share * float(case.peak(element).value)
    first, lasts = exceeded(case, element, limit)
    step = 1e-3
    times = np.arange(0, 250.0, step)
    waves = case.waveforms(times)
    values = np.abs(waves.current if element == "current" else waves.capacitor_voltage)
    above = values > limit
    at_once = np.flatnonzero(above)
    if at_once.size:
        assert times[at_once[0]] - step <= first <= times[at_once[0]]
    if np.isfinite(lasts):
        # every crossing may be off by a step
        crossings = np.count_nonzero(above[1:] != above[:-1]) + 2
        assert lasts == pytest.approx(np.count_nonzero(above) * step, abs=crossings * step)


def test_register_asks_for_a_limit():
    case = Case(unit_loop(0.1), constant(10.0))
    row = REGISTER["capacitor_voltage_exceeding_time"]
    assert np.isnan(row(case))
    both = Case(unit_loop(np.array([0.1, 3.0])), constant(10.0))
    first = row(both, 12.0)
    assert first[0] > 0
    assert first[1] == np.inf


@pytest.mark.parametrize("window", [ANY_ANGLE, Window(-0.3, 0.3)])
@pytest.mark.parametrize("orders", [(), (Order(5, 0.2, 1.0),)])
def test_distribution_over_closings_against_random_ones(window, orders):
    """1, 50 and 99 % of the peaks of 1500 random closings lie where the distribution says."""
    rng = np.random.default_rng(1)
    case = Case(unit_loop(0.1), sine(10.0, 0.05, window, orders=orders))
    found = over_closings(case, "current")
    angles = rng.uniform(*window, 1500)
    peaks = Case(case.loop, sine(10.0, 0.05, angles, orders=orders)).peak("current").value
    for share, point in zip((0.01, 0.5, 0.99), found, strict=True):
        below = np.mean(peaks <= point)
        # four standard deviations of a share of 1500, and half a step of the 720 angles
        assert below == pytest.approx(share, abs=4 * np.sqrt(share * (1 - share) / 1500) + 1e-3)
    assert found.percent_99 <= float(case.peak("current").value)


def test_surge_far_quicker_than_the_loop_lets_its_impulse_through():
    """An impulse of area F into an overdamped loop without capacitance to speak of: i = F/L
    exp(-t R/L), and the integral of its square is F^2/(2 R L)."""
    surge = shapes.Surge(1.0, 1e6, 1e8)
    area = surge.scale * (1 / surge.slow - 1 / surge.fast)
    case = Case(make_loop(resistance=2.0, inductance=1.0, capacitance=1e9), shaped(surge))
    assert float(whole_let_through(case)) == pytest.approx(area**2 / 4.0, rel=1e-5)
