"""What anyone who has had such a loop on the bench expects. Common practice, no source."""

import numpy as np
import pytest

from rlc.solver.case import Case
from rlc.solver.equation import equation_of
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.steady import steady_state

EPS = np.finfo(float).eps


def unit_loop(zeta, **more):
    """A loop with L = C = 1: the charge is the capacitor's voltage."""
    return make_loop(resistance=2.0 * zeta, inductance=1.0, capacitance=1.0, **more)


@pytest.mark.parametrize("zeta", [1e-4, 0.3, 1.0, 5.0])
def test_charge_follows_the_source_below_resonance_and_opposes_it_above(zeta):
    # Common practice, no source: in step far below, a quarter turn behind at resonance, half a
    # turn behind far above; the rest is 2 zeta over the ratio of the frequencies.
    ratio = 1e4
    far_below, at, far_above = (
        float(np.angle(steady_state(unit_loop(zeta), r / (2 * np.pi)).dielectric))
        for r in (1 / ratio, 1.0, ratio)
    )
    assert -2.1 * zeta / ratio <= far_below <= 0
    assert at == pytest.approx(-np.pi / 2, abs=EPS / zeta + 4 * EPS)
    assert -np.pi <= far_above <= -np.pi + 2.1 * zeta / ratio


@pytest.mark.parametrize("zeta", [0.05, 1.0, 3.0])
def test_only_the_sources_frequency_is_left_in_the_end(zeta):
    # Common practice, no source. A wave of one frequency obeys x(t + h) + x(t - h) =
    # 2 cos(w h) x(t), whatever its amplitude and phase.
    omega, step = 0.8, 0.3
    case = Case(unit_loop(zeta), sine(10.0, omega / (2 * np.pi), 0.4), 7.0, -3.0)
    slow = float(np.where(case.equation.underdamped, case.equation.damping, case.equation.slow))
    times = 40 / slow + step * np.arange(200)
    for name in ("current", "capacitor_voltage", "inductor_voltage"):
        wave = getattr(case.waveforms(times), name)
        rest = wave[2:] + wave[:-2] - 2 * np.cos(omega * step) * wave[1:-1]
        # exp(-40) is 4e-18; times and phase are rounded.
        size = np.max(np.abs(wave)) * omega * times[-1]
        assert np.max(np.abs(rest)) <= 10 * EPS * size
        # Early on it is not so: the ringing is still there.
        early = getattr(case.waveforms(step * np.arange(3)), name)
        assert abs(early[2] + early[0] - 2 * np.cos(omega * step) * early[1]) > 1e-3


@pytest.mark.parametrize("zeta", [0.02, 0.5, 2.0])
def test_state_plane_ends_on_an_ellipse(zeta):
    # Common practice, no source: voltage over current, long after closing, is an ellipse with
    # its axes along both, (v/V)^2 + (i/I)^2 = 1.
    case = Case(unit_loop(zeta), sine(10.0, 1.3 / (2 * np.pi), 1.0), -5.0, 2.0)
    slow = float(np.where(case.equation.underdamped, case.equation.damping, case.equation.slow))
    waves = case.waveforms(40 / slow + np.linspace(0, 30, 500))
    voltage = float(REGISTER["capacitor_voltage_amplitude"](case))
    current = float(REGISTER["current_amplitude"](case))
    radius = (waves.capacitor_voltage / voltage) ** 2 + (waves.current / current) ** 2
    assert np.max(np.abs(radius - 1)) <= 1e-12


@pytest.mark.parametrize("zeta", [0.0, 0.02, 0.5])
def test_free_ringing_spirals_inwards_or_stays_on_its_circle(zeta):
    # Common practice, no source: without a source the stored energy never grows.
    waves = Case(unit_loop(zeta), constant(0.0), 5.0, 3.0).waveforms(np.linspace(0, 40, 4001))
    energy = waves.capacitor_voltage**2 + waves.current**2
    if zeta == 0:
        assert energy == pytest.approx(np.full(4001, 34.0), rel=10 * EPS)
    else:
        assert np.all(np.diff(energy) <= 4 * EPS * energy[:-1])
        assert energy[-1] < 34.0 * np.exp(-zeta * 40)


@pytest.mark.parametrize("frequency", [1e-3, 0.159, 20.0])
@pytest.mark.parametrize("zeta", [0.0, 0.2, 4.0])
def test_charge_and_current_are_a_quarter_turn_apart(zeta, frequency):
    # Common practice, no source: the current is the charge's rate.
    found = steady_state(unit_loop(zeta), frequency)
    apart = np.angle(found.current / found.dielectric)
    assert float(apart) == pytest.approx(np.pi / 2, abs=4 * EPS)
    ratio = float(np.abs(found.current / found.dielectric))
    assert ratio == pytest.approx(2 * np.pi * frequency, rel=10 * EPS)


@pytest.mark.parametrize("zeta", [1e-6, 1e-3, 0.05, 0.1])
def test_light_damping_hardly_shifts_the_ringing(zeta):
    # Common practice, no source: by half the square of the damping ratio, and no more than its
    # fourth power beyond.
    case = Case(unit_loop(zeta), constant(1.0))
    natural, ringing = (
        float(REGISTER[name](case)) for name in ("natural_frequency", "ringing_frequency")
    )
    shift = 1 - ringing / natural
    assert abs(shift - zeta**2 / 2) <= zeta**4 / 4 + 2 * EPS


@pytest.mark.parametrize("quality", [10.0, 100.0, 1e4])
def test_resonance_magnifies_by_the_quality_factor(quality):
    # Common practice, no source: the capacitor takes Q times the source, the inductor as much.
    case = Case(unit_loop(0.5 / quality), sine(1.0, 1 / (2 * np.pi)))
    assert REGISTER["gain"](case, across="capacitor") == pytest.approx(quality, rel=1e-10)
    assert REGISTER["gain"](case, across="inductor") == pytest.approx(quality, rel=1e-10)
    assert REGISTER["gain"](case, across="resistor") == pytest.approx(1.0, rel=1e-10)
    assert REGISTER["quality_factor"](case) == pytest.approx(quality, rel=4 * EPS)


def test_a_load_that_is_hardly_there_changes_hardly_anything():
    # Common practice, no source: a megohm across a loop of ohms is no load.
    bare, loaded = unit_loop(0.1), unit_loop(0.1, load_resistance=1e6)
    first, second = equation_of(bare), equation_of(loaded)
    assert second.natural == pytest.approx(float(first.natural), rel=1e-6)
    assert second.damping == pytest.approx(float(first.damping), rel=1e-5)


def test_the_step_ends_at_the_sources_level_and_without_current():
    # Common practice, no source.
    waves = Case(unit_loop(0.3), constant(24.0), -7.0, 5.0).waveforms(np.array([150.0]))
    assert waves.capacitor_voltage[0] == pytest.approx(24.0, rel=4 * EPS)
    # 31 V off and 5 A at closing, each at most 1/sqrt(1 - zeta^2) = 1.05 of itself later on.
    assert abs(waves.current[0]) <= 1.05 * (31 + 5) * np.exp(-0.3 * 150)
