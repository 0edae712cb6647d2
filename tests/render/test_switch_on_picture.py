"""The picture over time; expected values are closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from pictures import (
    AUDIO,
    FREQUENCY,
    INRUSH,
    LOSSLESS,
    MAINS,
    MAINS_PEAK,
    OVERDAMPED,
    audio,
    band,
    curve,
    heading,
    labelled,
    legend_text,
    over_time,
)

from rlc.render import plots
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.targets import Ratings, Target


def inrush_forms() -> tuple[float, float, float]:
    """Damping and ringing [1/s] of INRUSH, and the voltage stepped on [V]."""
    a = 0.08 / (2 * 2e-6)
    return a, np.sqrt(1 / (2e-6 * 470e-6) - a * a), 24.0


def test_peaks_of_a_step_are_marked_where_the_closed_form_has_them():
    a, ringing, level = inrush_forms()
    figure = plots.switch_on(Case(make_loop(**INRUSH), constant(level)))
    current, voltage = over_time(figure)
    labels = ["source [V]", "current [A]", "capacitor voltage [V]"]
    assert [panel.get_ylabel() for panel in figure.axes[:3]] == labels
    assert voltage.get_xlabel() == "time from closing [us]"

    time = np.arctan2(ringing, a) / ringing
    height = level / (ringing * 2e-6) * np.exp(-a * time) * np.sin(ringing * time)
    mark = labelled(current, "peak 181.4 A at 35.35 us")
    assert mark.get_xdata()[0] == pytest.approx(time, rel=1e-12)
    assert mark.get_ydata()[0] == pytest.approx(height, rel=1e-12)

    mark = labelled(voltage, "peak 26.09 V at 121.9 us")
    assert mark.get_xdata()[0] == pytest.approx(np.pi / ringing, rel=1e-12)
    overshoot = np.exp(-np.pi * a / ringing)
    assert mark.get_ydata()[0] == pytest.approx(level * (1 + overshoot), rel=1e-12)
    assert labelled(voltage, "final value 24 V").get_ydata()[0] == pytest.approx(24.0)


def test_drawn_waveform_is_the_closed_form():
    a, ringing, level = inrush_forms()
    time, drawn = curve(over_time(plots.switch_on(Case(make_loop(**INRUSH), constant(level))))[0])
    expected = level / (ringing * 2e-6) * np.exp(-a * time) * np.sin(ringing * time)
    np.testing.assert_allclose(drawn, expected, atol=1e-12 * np.max(expected))
    assert time[0] == 0.0
    # the free motion has fallen below 2 % where the picture ends
    assert np.exp(-a * time[-1]) < 0.02


def test_envelope_holds_the_ringing_and_touches_it():
    case = Case(make_loop(**{**INRUSH, "resistance": 0.01}), constant(24.0))
    for panel, steady in zip(over_time(plots.switch_on(case)), (0.0, 24.0), strict=True):
        time, drawn = curve(panel)
        upper = labelled(panel, "envelope, time constant 400 us")
        np.testing.assert_array_equal(upper.get_xdata(), time)
        outline = upper.get_ydata() - steady
        size = np.abs(drawn - steady)
        assert np.all(size <= outline + 1e-9 * outline[0])
        # once in each half swing the ringing is as large as the envelope
        assert np.max(size[time > 1e-4] / outline[time > 1e-4]) == pytest.approx(1.0, abs=1e-3)


def test_each_panel_has_its_own_worst_angle():
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, None))
    current, voltage = over_time(plots.switch_on(case))
    assert "closed at 86.91 deg" in legend_text(current)
    assert "worst for the current" in legend_text(current)
    assert "closed at 85.07 deg" in legend_text(voltage)
    assert "worst for the capacitor voltage" in legend_text(voltage)
    for panel, element in ((current, "current"), (voltage, "capacitor")):
        peak = case.peak(element)
        mark = labelled(panel, "peak ")
        assert mark.get_xdata()[0] == pytest.approx(peak.time.item(), rel=1e-12)
        assert abs(mark.get_ydata()[0]) == pytest.approx(peak.value.item(), rel=1e-9)
        assert np.max(np.abs(curve(panel)[1])) <= peak.value * (1 + 1e-9)


def test_trapped_charge_starts_the_curve_and_keeps_its_sign():
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, None), -325.0)
    current, voltage = over_time(plots.switch_on(case))
    assert curve(voltage)[1][0] == -325.0
    for panel, element in ((current, "current"), (voltage, "capacitor")):
        height = labelled(panel, "peak ").get_ydata()[0]
        assert height == pytest.approx(case.peak(element).value.item(), rel=1e-9)


def test_steady_waveform_is_the_closed_form():
    angle, omega = 0.4, 2 * np.pi * 50.0
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, angle))
    current, voltage = over_time(plots.switch_on(case))
    phasor = MAINS_PEAK / (0.05 + 1j * (omega * 200e-6 - 1 / (omega * 150e-6)))
    for panel, amplitude in ((current, phasor), (voltage, phasor / (1j * omega * 150e-6))):
        steady = labelled(panel, "steady state, amplitude")
        turn = np.exp(1j * (omega * steady.get_xdata() + angle))
        expected = np.imag(amplitude * turn)
        np.testing.assert_allclose(steady.get_ydata(), expected, atol=1e-11 * np.abs(amplitude))


def test_limits_on_peaks_stand_on_both_sides_of_an_alternating_waveform():
    targets = (
        Target("peak_current", maximum=200.0),
        *Ratings(capacitor_voltage=800.0, inductor_saturation=5e3).targets(),
        Target("bandwidth", maximum=1.0),
    )
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, None))
    current, voltage = over_time(plots.switch_on(case, targets))
    drawn = {line.get_ydata()[0] for line in current.lines if len(line.get_xdata()) == 3}
    assert drawn == {200.0, -200.0}
    assert labelled(voltage, "capacitor rated voltage max 800 V").get_ydata()[0] == 800.0
    assert labelled(current, "inductor saturation current max 5 kA (above the picture)")
    assert "bandwidth" not in legend_text(current)
    # a line beyond the data is inside the picture
    assert voltage.get_ylim()[1] > 800.0


def test_one_sided_waveform_has_one_limit_line():
    case = Case(make_loop(**OVERDAMPED), constant(12.0))
    _, voltage = over_time(plots.switch_on(case, Ratings(capacitor_voltage=16.0).targets()))
    assert [line.get_ydata()[0] for line in voltage.lines if len(line.get_xdata()) == 3] == [16.0]


@pytest.mark.parametrize(("ratio", "marked"), [(0.94, True), (0.95, False)])
def test_peak_that_only_digits_tell_from_the_final_value_is_not_marked(ratio, marked):
    """A step's overshoot exp(-pi z/sqrt(1 - z^2)) is 1.7e-4 for 0.94, 0.7e-4 for 0.95."""
    resistance = 2 * ratio * np.sqrt(AUDIO["inductance"] / AUDIO["capacitance"])
    case = Case(make_loop(**{**AUDIO, "resistance": resistance}), constant(12.0))
    voltage = over_time(plots.switch_on(case))[1]
    assert labelled(voltage, "peak 12 V").get_xdata().size == marked
    assert ("no higher than the steady state" in legend_text(voltage)) is not marked


def test_angle_that_is_only_rounding_is_zero():
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, 1e-14))
    for panel in (*over_time(plots.switch_on(case)), *plots.state_plane(case).axes):
        assert "closed at 0 deg from" in legend_text(panel)
    natural = REGISTER["natural_frequency"](audio()).item()
    at_resonance = Case(make_loop(**AUDIO), sine(34.0, natural, 0.0))
    phase = plots.frequency_response(at_resonance).axes[2]
    assert "0 deg at 876.1 Hz" in legend_text(phase).splitlines()


def test_nothing_is_said_of_closing_angles_under_a_constant_source():
    case = Case(make_loop(**INRUSH), constant(24.0))
    for panel in (*over_time(plots.switch_on(case, batch=case)), *plots.state_plane(case).axes):
        assert "closed" not in legend_text(panel)
        assert "angle" not in legend_text(panel)


@pytest.mark.parametrize(
    ("angle", "words"), [(None, "at its own worst"), (0.3, "at the same angle")]
)
def test_band_says_at_which_angle_its_loops_are_closed(angle, words):
    source = sine(MAINS_PEAK, 50.0, angle)
    batch = Case(make_loop(**{**MAINS, "inductance": 200e-6 * np.array([0.9, 1.1])}), source)
    for panel in over_time(plots.switch_on(Case(make_loop(**MAINS), source), batch=batch)):
        assert f"; each loop of the band {words}" in heading(panel)
        assert labelled(panel, "nominal, corners and samples (2 loops)")
    for panel in over_time(plots.switch_on(Case(make_loop(**MAINS), source))):
        assert "band" not in legend_text(panel)


@pytest.mark.parametrize("states", [(0.0, 0.0), (-200.0, 30.0)])
@pytest.mark.parametrize("angle", [None, 0.7])
def test_envelope_of_a_quick_ringing_lies_about_the_steady_sine(angle, states):
    """Time constant 2 L/R = 8 ms; ringing at 919 Hz under a source of 50 Hz."""
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, angle), *states)
    for panel in over_time(plots.switch_on(case)):
        time, values = curve(panel)
        upper = labelled(panel, "envelope, time constant 8 ms").get_ydata()
        steady = labelled(panel, "steady state").get_ydata()
        outline = upper - steady
        np.testing.assert_allclose(outline, outline[0] * np.exp(-time / 8e-3), atol=1e-9 * upper[0])
        size = np.abs(values - steady)
        assert np.all(size <= outline + 1e-9 * outline[0])
        # seventy points in a swing: the nearest is 1/140 of a turn from the top, 0.1 % below it
        assert np.max(size / outline) > 1 - 2e-3


def test_where_no_envelope_can_be_read_the_time_constant_is_said():
    """Near resonance: 2 L/R = 66 mH over 12.5 ohm."""
    current, voltage = over_time(plots.switch_on(audio()))
    assert labelled(current, "time constant 5.28 ms").get_xdata().size == 0
    for panel in (current, voltage):
        assert "envelope" not in legend_text(panel)


def test_peak_only_approached_is_said_and_not_marked():
    _, voltage = over_time(plots.switch_on(Case(make_loop(**OVERDAMPED), constant(12.0))))
    said = labelled(voltage, "peak 12 V, approached but not reached")
    assert said.get_xdata().size == 0


def test_peak_of_a_slow_build_up_is_the_steady_state():
    """Driven near resonance the current rises to its steady amplitude and no higher."""
    current = over_time(plots.switch_on(audio()))[0]
    assert "no higher than the steady state" in legend_text(current)


def test_peak_only_approached_at_resonance_is_the_steady_state():
    case = Case(make_loop(**{**AUDIO, "resistance": 0.05}), sine(34.0, 876.12, 0.0))
    panels = over_time(plots.switch_on(case))
    for panel, element in zip(panels, ("current", "capacitor"), strict=True):
        assert np.isinf(case.peak(element).time)
        assert "no higher than the steady state" in legend_text(panel)
        assert "approached" not in legend_text(panel)


def test_lossless_resonance_grows_without_bound():
    loop = make_loop(**LOSSLESS)
    natural = REGISTER["natural_frequency"](Case(loop, constant(1.0))).item()
    case = Case(loop, sine(34.0, natural, 0.0))
    figure = plots.switch_on(case)
    for panel in over_time(figure):
        assert "grows without bound" in legend_text(panel)
        assert "no steady state" in legend_text(panel)
    assert "it never dies" in over_time(figure)[1].get_xlabel()
    assert "no steady state" in legend_text(plots.state_plane(case).axes[0])


def test_picture_of_a_long_ringing_says_which_part_it_shows():
    loop = make_loop(**{**AUDIO, "resistance": 0.0002})
    figure = plots.switch_on(Case(loop, sine(34.0, 876.12, 0.0)))
    assert "of the transient; its time constant is 330 s" in over_time(figure)[1].get_xlabel()
    assert "after the time shown" in legend_text(over_time(figure)[0])


def test_late_peak_of_a_beat_is_in_the_picture():
    """Q = 9000 driven half a per cent off: the peak comes after a hundred periods."""
    current = over_time(plots.switch_on(audio(resistance=0.02)))[0]
    mark = labelled(current, "peak ")
    assert 100 / FREQUENCY < mark.get_xdata()[0] < current.get_xlim()[1]


@pytest.mark.parametrize("source", [constant(24.0), sine(34.0, 50.0, 0.3), sine(34.0, 50.0, None)])
def test_band_over_time_holds_the_nominal_and_each_loop(source):
    loops = make_loop(**{**MAINS, "inductance": 200e-6 * np.array([0.9, 1.1])})
    case, batch = Case(make_loop(**MAINS), source), Case(loops, source)
    figure = plots.switch_on(case, batch=batch)
    for panel, element in zip(over_time(figure), ("current", "capacitor"), strict=True):
        time, low, high = band(panel)
        nominal = np.interp(time, *curve(panel))
        assert np.all((low <= nominal) & (nominal <= high))
        for index in range(2):
            one = Case(loops.map(lambda value, index=index: value[index]), source)
            waves = one.waveforms(time, one.closing_angle_for(element))
            wave = waves.current if element == "current" else waves.capacitor_voltage
            slack = 1e-9 * np.max(np.abs(wave))
            # from rest half a turn of the worst angle only turns the sign
            assert any(
                np.all((low - slack <= turned) & (turned <= high + slack))
                for turned in (wave, -wave)
            )
