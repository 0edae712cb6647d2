"""Peaks: constant source against closed forms and search, sine against dense sampling."""

import numpy as np
import pytest
from exact import Exact
from mpmath import mp, mpf
from scipy.integrate import solve_ivp
from scipy.optimize import minimize_scalar

from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.search import PROVED_GAP
from rlc.solver.source import Source, constant, sine

EPS = np.finfo(float).eps

WAVES = {
    "current": "current",
    "resistor": "resistor_voltage",
    "inductor": "inductor_voltage",
    "capacitor": "capacitor_voltage",
}


def unit_loop(zeta, **more):
    """A loop with L = C = 1, so that natural frequency and impedance are one."""
    return make_loop(resistance=2.0 * zeta, inductance=1.0, capacitance=1.0, **more)


def sampled(case, element, times, angle=None):
    return np.abs(getattr(case.waveforms(times, angle), WAVES[element]))


@pytest.mark.parametrize("zeta", [1e-6, 1e-3, 0.1, 0.6, 1 - 1e-12, 1 + 1e-12, 1.7, 40.0, 1e4])
def test_step_from_rest_has_its_known_peaks(zeta):
    # From di/dt = 0: i_max = V sqrt(C/L) exp(-phi cot phi), zeta = cos phi, at phi/w_d; above
    # critical damping the same with hyperbolic functions. v_max = V (1 + exp(-pi zeta/d)).
    loop = unit_loop(zeta)
    case = Case(loop, constant(24.0))
    with mp.workdps(50):
        z = mpf(float(loop.resistance)) / 2
        if z < 1:
            phi, d = mp.acos(z), mp.sqrt(1 - z * z)
        else:
            phi, d = mp.acosh(z), mp.sqrt(z * z - 1)
        current, when = float(24 * mp.exp(-phi * z / d)), float(phi / d)
        voltage = float(24 * (1 + mp.exp(-mp.pi * z / d))) if z < 1 else 24.0
        half = float(mp.pi / d) if z < 1 else np.inf
    peak = case.peak("current")
    assert peak.value == pytest.approx(current, rel=1e-13)
    # A time is found from the slope, whose rounding is a share of the motion's.
    assert peak.time == pytest.approx(when, rel=1e-12)
    assert case.peak("capacitor").value == pytest.approx(voltage, rel=1e-13)
    if voltage - 24 > 1e-12:
        assert case.peak("capacitor").time == pytest.approx(half, rel=1e-12)
    # The inductor meets the whole step at once.
    assert case.peak("inductor").value == 24.0
    assert case.peak("inductor").time == 0.0


def random_loop(rng, least=-3.0, most=1.5):
    zeta = 10 ** rng.uniform(least, most)
    more = {}
    if rng.random() < 0.4:
        more["load_resistance"] = 10 ** rng.uniform(-0.5, 3)
    if rng.random() < 0.4:
        more["series_resistance"] = zeta * rng.random()
    if rng.random() < 0.3:
        more["winding_resistance"] = zeta * rng.random()
    return unit_loop(zeta, **more)


def envelope_time(case):
    """When the free motion has fallen to 1/e."""
    eq = case.equation
    return 1 / float(np.where(eq.underdamped, eq.damping, eq.slow))


@pytest.mark.parametrize("seed", range(30))
def test_constant_source_peaks_are_what_a_search_finds(seed):
    rng = np.random.default_rng(seed)
    case = Case(random_loop(rng), constant(10.0), rng.uniform(-20, 20), rng.uniform(-20, 20))
    end = 30 * envelope_time(case)
    fine = np.linspace(0, min(end, 40.0), 8001)
    times = np.unique(np.r_[fine, np.geomspace(1e-5, end, 2000)])
    for element in WAVES:
        peak = case.peak(element)
        values = sampled(case, element, times)
        at = int(values.argmax())
        around = times[max(at - 1, 0)], times[min(at + 1, times.size - 1)]

        def falling(time, element=element):
            return -float(sampled(case, element, np.array([time]))[0])

        refined = minimize_scalar(falling, bounds=around, method="bounded", options={"xatol": 1e-9})
        highest = max(float(values[at]), -refined.fun)
        # A value is a sum of terms as large as the source and the states.
        assert abs(float(peak.value) - highest) <= 1e-13 * max(highest, 50.0) + 1e-12 * (
            not np.isfinite(peak.time)
        ), element
        if np.isfinite(peak.time):
            assert -falling(float(peak.time)) == pytest.approx(float(peak.value), rel=1e-13)


def test_step_from_rest_never_more_than_doubles_the_voltage():
    zeta = np.geomspace(1e-9, 1e3, 2001)
    peak = Case(unit_loop(zeta), constant(24.0)).peak("capacitor").value
    assert np.all(peak <= 48.0 * (1 + EPS))
    assert np.all(peak >= 24.0)
    assert Case(unit_loop(0.0), constant(24.0)).peak("capacitor").value == pytest.approx(48.0)


def test_trapped_charge_against_the_source_can_triple_it():
    # Lossless, charged to -V: it swings about V by 2 V.
    case = Case(unit_loop(0.0), constant(24.0), -24.0)
    assert case.peak("capacitor").value == pytest.approx(72.0, rel=4 * EPS)
    assert case.peak("current").value == pytest.approx(48.0, rel=4 * EPS)


def dense_times(case):
    """Several hundred points to each swing of source and loop, until the transient is gone."""
    rate = max(1.0, 2 * np.pi * float(case.source.frequency))
    end = min(12 * envelope_time(case), 300 / rate * 2 * np.pi)
    quick = 1 / float(case.equation.quickest)
    return np.unique(
        np.r_[
            np.linspace(0, end, 24001), np.geomspace(quick * 1e-3, 10 * envelope_time(case), 3000)
        ]
    )


def check_sine_peak(case, element):
    peak = case.peak(element)
    worst = case.source.worst_angle
    angle = float(peak.angle) if worst else float(case.source.closing_angle)
    assert 0 <= peak.gap <= PROVED_GAP
    assert peak.value >= np.abs(case.source.amplitude * getattr(case.steady, element))
    # Waveforms and the search round differently: some 1e-13 of their largest term.
    limit = float(peak.value) * (1 + PROVED_GAP) + 1e-13 * 20.0
    times = dense_times(case)
    others = np.linspace(0, 2 * np.pi, 10, endpoint=False) if worst else []
    for closing in (angle, *others):
        assert np.max(sampled(case, element, times, closing)) <= limit, closing
    if np.isfinite(peak.time):
        reached = sampled(case, element, np.array([float(peak.time)]), angle)[0]
        assert reached == pytest.approx(float(peak.value), rel=1e-11)


@pytest.mark.parametrize("seed", range(40))
def test_sine_peak_is_attained_and_never_exceeded(seed):
    rng = np.random.default_rng(100 + seed)
    loop = random_loop(rng, -2.5, 1.0)
    frequency = 10 ** rng.uniform(-1, 1) / (2 * np.pi)
    angle = None if seed % 2 else rng.uniform(0, 2 * np.pi)
    states = rng.uniform(-15, 15, 2) * rng.integers(2, size=2)
    case = Case(loop, sine(10.0, frequency, angle), *states)
    for element in ("current", "capacitor", "inductor"):
        check_sine_peak(case, element)


@pytest.mark.parametrize("seed", range(6))
def test_worst_angle_is_worse_than_every_fixed_one(seed):
    rng = np.random.default_rng(200 + seed)
    loop, frequency = random_loop(rng, -2, 0.5), 10 ** rng.uniform(-0.7, 0.7) / (2 * np.pi)
    states = rng.uniform(-15, 15, 2) * (seed % 2)
    worst = Case(loop, sine(10.0, frequency, None), *states)
    angles = np.linspace(0, 2 * np.pi, 37)
    for element in ("current", "capacitor"):
        top = worst.peak(element)
        fixed = Case(loop, Source(10.0, frequency, angles), *states).peak(element).value
        assert np.all(fixed <= top.value * (1 + PROVED_GAP))
        again = Case(loop, sine(10.0, frequency, float(top.angle)), *states).peak(element)
        if np.isfinite(top.time):
            assert again.value == pytest.approx(float(top.value), rel=2 * PROVED_GAP)


def integrated_peak(zeta, ratio, angle, end):
    """Largest current and capacitor voltage for 1 V on L = C = 1, by an integrator's events."""

    def slope(t, state):
        voltage, current = state
        return [current, np.sin(ratio * t + angle) - 2 * zeta * current - voltage]

    def voltage_turns(t, state):
        return state[1]

    def current_turns(t, state):
        return slope(t, state)[1]

    solution = solve_ivp(
        slope,
        (0, end),
        [0.0, 0.0],
        "DOP853",
        rtol=1e-10,
        atol=1e-12,
        max_step=0.2 / max(1.0, ratio),
        events=[voltage_turns, current_turns],
    )
    turns = [np.reshape(found, (-1, 2)) for found in solution.y_events]
    return np.max(np.abs(turns[1][:, 1])), np.max(np.abs(turns[0][:, 0]))


def test_closing_at_the_zero_crossing_can_hide_four_fifths_of_the_current():
    # A capacitor on a line of ten times slower frequency: the inrush wants the crest.
    ratio, zeta = 0.1, 0.005
    loop, frequency = unit_loop(zeta), ratio / (2 * np.pi)
    worst = Case(loop, sine(1.0, frequency, None)).peak("current")
    zero = Case(loop, sine(1.0, frequency, 0.0)).peak("current")
    assert zero.value < worst.value / 5
    for peak, angle in ((worst, float(worst.angle)), (zero, 0.0)):
        current, _ = integrated_peak(zeta, ratio, angle, 130.0)
        assert peak.value == pytest.approx(current, rel=1e-7)


@pytest.mark.parametrize(("zeta", "ratio", "below"), [(0.05, 2.0, 0.8), (0.05, 5.0, 0.5)])
def test_closing_at_the_crest_can_miss_the_largest_capacitor_voltage(zeta, ratio, below):
    # A source faster than the loop: the crest is the mild case, the zero crossing the bad one.
    loop, frequency = unit_loop(zeta), ratio / (2 * np.pi)
    worst = Case(loop, sine(1.0, frequency, None)).peak("capacitor")
    crest = Case(loop, sine(1.0, frequency, np.pi / 2)).peak("capacitor")
    assert crest.value < below * worst.value
    for peak, angle in ((worst, float(worst.angle)), (crest, np.pi / 2)):
        _, voltage = integrated_peak(zeta, ratio, angle, 80.0)
        assert peak.value == pytest.approx(voltage, rel=1e-7)


@pytest.mark.parametrize("ratio", [1 / np.e, 0.999, np.e])
@pytest.mark.parametrize("angle", [None, 0.4])
@pytest.mark.parametrize("states", [(0.0, 0.0), (5.0, 0.0), (0.0, 7.0), (5.0, 7.0)])
def test_lossless_peak_is_approached_by_steady_state_and_ringing_in_step(ratio, angle, states):
    # Source and ringing have no common period, so every pair of their phases is approached:
    # the peak is the steady amplitude plus the largest of the ringing, here on a grid of phases.
    case = Case(unit_loop(0.0), sine(10.0, ratio / (2 * np.pi), angle), *states)
    gain = 10.0 / (1 - ratio**2)
    ringing = np.linspace(0, 2 * np.pi, 200001)
    cosine, sine_ = np.cos(ringing), np.sin(ringing)
    # v_C from rest to exp(j ratio t): gain (exp(j ratio t) - cos t - j ratio sin t)
    driven, free = -gain * (cosine + 1j * ratio * sine_), states[0] * cosine + states[1] * sine_
    if angle is None:
        sizes = np.abs(driven) + np.abs(free)
    else:
        sizes = np.abs(np.imag(np.exp(1j * angle) * driven) + free)
    peak = case.peak("capacitor")
    # Half a step of the grid, 1.6e-5, lowers a maximum by at most half its square.
    assert peak.value == pytest.approx(abs(gain) + float(np.max(sizes)), rel=2e-9)
    assert peak.time == np.inf
    closing = np.linspace(0, 2 * np.pi, 12) if angle is None else [angle]
    # At least one whole beat of source and ringing, and ten points to a radian.
    times = np.linspace(0, max(2000, 2 * np.pi / abs(1 - ratio)), 70001)
    found = max(np.max(sampled(case, "capacitor", times, phi)) for phi in closing)
    assert found <= peak.value * (1 + PROVED_GAP)
    assert found >= 0.95 * peak.value


def test_lossless_loop_at_its_resonance_has_no_finite_peak():
    # A double frequency never is 1/(2 pi) exactly: the peak goes as one over the distance.
    case = Case(unit_loop(0.0), sine(1.0, 1 / (2 * np.pi)))
    exact = Exact(case)
    with mp.workdps(50):
        amplitude = 1 / abs(1 - exact.omega**2)
        expected = float(amplitude * (1 + exact.omega))
    assert expected > 1e15
    assert case.peak("capacitor").value == pytest.approx(expected, rel=1e-9)
    assert case.peak("capacitor").time == np.inf


def test_initial_states_and_angles_may_be_batches():
    loop = unit_loop(0.2)
    levels = np.array([0.0, 5.0, -3.0])
    for source in (constant(10.0), sine(10.0, 0.3), sine(10.0, 0.3, None)):
        for pair in ((levels, 0.0), (0.0, levels), (levels, levels[:, np.newaxis])):
            batch = Case(loop, source, *pair)
            together = batch.peak("current").value
            assert together.shape == batch.shape
            for index in np.ndindex(batch.shape):
                v, i = (np.broadcast_to(x, batch.shape)[index] for x in pair)
                alone = Case(loop, source, v, i).peak("current").value
                assert together[index] == pytest.approx(float(alone), rel=2 * PROVED_GAP)


def test_energy_at_the_largest_capacitor_voltage():
    # Behind the series resistance: that is where the charge sits.
    case = Case(unit_loop(0.1, series_resistance=0.5), constant(10.0))
    top = np.max(np.abs(exact_voltages(case, np.linspace(0, 10, 2001))))
    assert REGISTER["stored_energy"](case) == pytest.approx(0.5 * top**2, rel=1e-4)
    assert REGISTER["stored_energy"](case) >= 0.5 * top**2 * (1 - 4 * EPS)


def exact_voltages(case, times):
    exact = Exact(case)
    return np.array([float(exact.at(time).dielectric) for time in times])
