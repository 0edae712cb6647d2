"""The pictures are asked for their data, words and units; expected values are closed forms."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg

from rlc.errors import InputError
from rlc.render import plots
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.quantities import REGISTER
from rlc.solver.source import constant, sine
from rlc.solver.targets import Ratings, Target

RMS, FREQUENCY = 24.0, 880.0
AUDIO = {"resistance": 12.5, "inductance": 33e-3, "capacitance": 1e-6}
MAINS = {"resistance": 0.05, "inductance": 200e-6, "capacitance": 150e-6}
INRUSH = {"resistance": 0.08, "inductance": 2e-6, "capacitance": 470e-6}
OVERDAMPED = {"resistance": 1e3, "inductance": 10e-3, "capacitance": 1e-6}
LOSSLESS = {**AUDIO, "resistance": 0.0}
MAINS_PEAK = 230 * np.sqrt(2)
CAUTIONS = (
    "The capacitor holds the source's voltage after switching off; how long is not known, since"
    " no resistance across it is stated. " * 2,
    "Linear parts and a lumped loop are assumed.",
)

# A few operations in double precision, each good to 1.1e-16.
ROUNDING = 1e-13


def audio(**changed) -> Case:
    return Case(make_loop(**{**AUDIO, **changed}), sine(RMS * np.sqrt(2), FREQUENCY, 0.0))


def labelled(panel, start: str):
    """The one artist of a panel whose label starts with the given words."""
    handles, labels = panel.get_legend_handles_labels()
    found = [h for h, label in zip(handles, labels, strict=True) if label.startswith(start)]
    assert len(found) == 1, labels
    return found[0]


def legend_text(panel) -> str:
    legend = panel.get_legend()
    return "\n".join([legend.get_title().get_text(), *(t.get_text() for t in legend.get_texts())])


def drawn(figure):
    """The figure after one drawing pass, so that texts have their places."""
    FigureCanvasAgg(figure).draw()
    return figure


def ticks(axis) -> list[str]:
    """Labels of the ticks that are seen, after a drawing pass."""
    low, high = axis.get_view_interval()
    return [
        label.get_text()
        for place, label in zip(axis.get_majorticklocs(), axis.get_majorticklabels(), strict=True)
        if low <= place <= high
    ]


def curve(panel):
    return panel.lines[0].get_data()


def band(panel, start="nominal, corners and samples"):
    """Frequencies or times, lower and upper edge of a batch's band."""
    outline = labelled(panel, start).get_paths()[0].vertices
    count = (len(outline) - 3) // 2
    low, high = outline[1 : count + 1], outline[count + 2 : 2 * count + 2][::-1]
    np.testing.assert_array_equal(low[:, 0], high[:, 0])
    return low[:, 0], low[:, 1], high[:, 1]


# --- over frequency


def test_frequency_response_is_the_closed_form():
    figure = plots.frequency_response(audio())
    current, gain, phase = figure.axes
    frequency, drawn = curve(current)
    omega = 2 * np.pi * frequency
    impedance = 12.5 + 1j * (omega * 33e-3 - 1 / (omega * 1e-6))
    # the reactance is a difference of terms 15 times larger than the resistance
    np.testing.assert_allclose(drawn, RMS / np.abs(impedance), rtol=1e2 * ROUNDING)
    across = 1 / np.abs(impedance * omega * 1e-6)
    np.testing.assert_allclose(curve(gain)[1], across, rtol=1e2 * ROUNDING)
    np.testing.assert_allclose(curve(phase)[1], -np.angle(impedance, deg=True), atol=1e-9)


def test_frequency_axes_say_what_they_show():
    figure = plots.frequency_response(audio(), title="Horn driver")
    labels = [panel.get_ylabel() for panel in figure.axes]
    assert labels == ["current, rms [A]", "gain [V/V]", "phase [deg]"]
    assert figure.axes[-1].get_xlabel() == "frequency [Hz]"
    assert "negative: lags" in legend_text(figure.axes[2])
    assert figure.get_suptitle() == "Horn driver"


@pytest.mark.parametrize("resistance", [1e4, 12.5, 0.02, 0.0002])
def test_top_and_half_power_points_are_on_the_curve(resistance):
    """V/R at resonance, 1/sqrt(2) of it and 45 degrees at f1 and f2; Q from 0.02 to 9e5."""
    case = audio(resistance=resistance)
    figure = plots.frequency_response(case)
    frequency, drawn = curve(figure.axes[0])
    assert np.max(drawn) == pytest.approx(RMS / resistance, rel=1e-9)
    phase = curve(figure.axes[2])[1]
    lead = REGISTER["lower_half_power_frequency"](case).item()
    lag = REGISTER["upper_half_power_frequency"](case).item()
    # a frequency is a double: its rounding, seen in bandwidths, is 1.1e-16 Q
    allowed = 1e-9
    for at, angle in ((lead, 45.0), (lag, -45.0)):
        index = int(np.flatnonzero(frequency == at)[0])
        assert drawn[index] == pytest.approx(RMS / resistance / np.sqrt(2), rel=allowed)
        assert phase[index] == pytest.approx(angle, abs=100 * allowed)


def test_source_and_resonance_are_marked():
    figure = plots.frequency_response(audio())
    current = figure.axes[0]
    reactance = 2 * np.pi * FREQUENCY * 33e-3 - 1 / (2 * np.pi * FREQUENCY * 1e-6)
    mark = labelled(current, "1.904 A at 880 Hz")
    assert mark.get_xdata()[0] == FREQUENCY
    assert mark.get_ydata()[0] == pytest.approx(RMS / np.hypot(12.5, reactance), rel=1e-11)
    natural = labelled(current, "natural frequency").get_xdata()[0]
    assert natural == pytest.approx(1 / (2 * np.pi * np.sqrt(33e-9)), rel=ROUNDING)
    shaded = labelled(current, "half-power band").get_path().get_extents()
    transform = labelled(current, "half-power band").get_patch_transform()
    ends = transform.transform([[shaded.x0, 0], [shaded.x1, 0]])[:, 0]
    assert ends[1] - ends[0] == pytest.approx(12.5 / (2 * np.pi * 33e-3), rel=1e-11)
    names = {text.get_text(): text.xy[0] for text in current.texts}
    assert names == {"f1": pytest.approx(ends[0]), "f2": pytest.approx(ends[1])}
    assert "f1 846.5 Hz, f2 906.8 Hz, 60.29 Hz apart" in legend_text(current)


def test_limits_over_frequency_are_where_they_were_set():
    targets = (
        Target("natural_frequency", 850.0, 900.0),
        Target("bandwidth", maximum=80.0),
        Target("current", maximum=2.2),
        Target("gain", minimum=10.0, at=700.0),
        Target("current_phase", maximum=np.pi / 6, at=800.0),
        *Ratings(capacitor_voltage_rms=250.0).targets(),
        Target("impedance", minimum=5.0, at=1e3),
        Target("gain", minimum=0.0, at=1e3),
        Target("overshoot", maximum=0.5),  # of the switch-on: in no picture of the steady state
        Target("lower_half_power_frequency", minimum=1.0),
    )
    current, gain, phase = plots.frequency_response(audio(), targets).axes
    assert labelled(current, "natural frequency min 850 Hz").get_xdata()[0] == 850.0
    assert labelled(current, "natural frequency max 900 Hz").get_xdata()[0] == 900.0
    ends = labelled(current, "bandwidth max 80 Hz").get_xdata()
    assert ends[1] - ends[0] == pytest.approx(80.0, rel=1e-12)
    assert np.sqrt(ends[0] * ends[1]) == pytest.approx(1 / (2 * np.pi * np.sqrt(33e-9)))
    rated = labelled(current, "current max 2.2 A")
    assert (rated.get_xdata()[1], rated.get_ydata()[1]) == (FREQUENCY, 2.2)
    asked = labelled(gain, "gain min 10 at 700 Hz")
    assert (asked.get_xdata()[1], asked.get_ydata()[1]) == (700.0, 10.0)
    voltage = labelled(gain, "capacitor rated voltage rms max 250 V")
    assert voltage.get_ydata()[1] == pytest.approx(250.0 / RMS)
    lead = labelled(phase, "current phase max 30 deg at 800 Hz")
    assert lead.get_ydata()[1] == pytest.approx(30.0)
    assert labelled(current, "impedance min 5 ohm at 1 kHz (not drawn)").get_xdata().size == 0
    assert labelled(gain, "gain min 0 at 1 kHz (below the picture)").get_xdata().size == 0
    assert "overshoot" not in legend_text(current)
    far = labelled(current, "lower half power frequency min 1 Hz (beyond the picture)")
    assert far.get_xdata().size == 0


@pytest.mark.parametrize("source", [sine(RMS * np.sqrt(2), FREQUENCY, 0.0), constant(24.0)])
def test_gain_across_another_element_is_drawn_for_the_targets_that_name_it(source):
    case = Case(make_loop(**AUDIO, winding_resistance=2.0), source)
    batch = Case(make_loop(**AUDIO, winding_resistance=np.array([1.0, 3.0])), source)
    targets = (
        Target("gain", maximum=0.03, across="resistor", at=300.0),
        Target("gain", minimum=0.1, across="inductor", at=300.0),
        Target("gain", maximum=20.0, across="capacitor", at=1e3),
    )
    gain = plots.frequency_response(case, targets, batch).axes[1]
    frequency = curve(gain)[0]
    omega = 2 * np.pi * frequency
    coil = 2.0 + 1j * omega * 33e-3
    impedance = 12.5 + coil - 1j / (omega * 1e-6)
    forms = {
        "capacitor": 1 / np.abs(impedance * omega * 1e-6),
        "resistor": 12.5 / np.abs(impedance),
        "inductor": np.abs(coil / impedance),
    }
    for element, form in forms.items():
        line = labelled(gain, f"across the {element}")
        # the reactance is a difference of terms 15 times larger than the resistance
        np.testing.assert_allclose(line.get_ydata(), form, rtol=1e2 * ROUNDING)
    assert len({labelled(gain, f"across the {each}").get_color() for each in forms}) == 3
    assert len({labelled(gain, f"across the {each}").get_linestyle() for each in forms}) >= 2
    assert sum(len(band.get_paths()) for band in gain.collections) == 3
    for label, value in (
        ("gain across the resistor max 0.03 at 300 Hz", 0.03),
        ("gain across the inductor min 0.1 at 300 Hz", 0.1),
        ("gain across the capacitor max 20 at 1 kHz", 20.0),
    ):
        mark = labelled(gain, label)
        assert mark.get_ydata()[1] == value
        assert mark.get_xdata()[1] in (300.0, 1e3)
    assert "voltage over source voltage" in legend_text(gain)


def test_voltage_of_another_element_has_a_place_at_the_source_frequency():
    gain = plots.frequency_response(audio(), (Target("inductor_voltage", maximum=360.0),)).axes[1]
    mark = labelled(gain, "inductor voltage max 360 V")
    assert (mark.get_xdata()[1], mark.get_ydata()[1]) == (FREQUENCY, pytest.approx(360.0 / RMS))
    assert labelled(gain, "across the inductor")
    assert "across the resistor" not in legend_text(gain)


def test_gain_across_another_element_of_a_constant_source_needs_a_frequency():
    case = Case(make_loop(**INRUSH), constant(24.0))
    targets = (Target("gain", maximum=0.5, across="resistor"),)
    current, gain, _ = plots.frequency_response(case, targets).axes
    assert labelled(current, "gain across the resistor max 0.5 (not drawn)")
    assert "capacitor voltage over source voltage" in legend_text(gain)


def test_letters_of_the_half_power_band_stand_outside_clear_of_everything():
    targets = (Target("natural_frequency", 840.0, 915.0), Target("bandwidth", 50.0, 70.0))
    figure = drawn(plots.frequency_response(audio(), targets))
    current = figure.axes[0]
    lower, upper = (text.get_window_extent() for text in current.texts)
    for letters in (lower, upper):
        assert letters.y0 >= current.bbox.y1
        assert letters.y1 <= current.get_legend().get_window_extent().y0
    assert lower.x1 < upper.x0


def test_constant_source_has_an_admittance_and_no_source_frequency():
    case = Case(make_loop(**INRUSH), constant(24.0))
    current, gain, _ = plots.frequency_response(case, (Target("gain", maximum=2.0),)).axes
    assert current.get_ylabel() == "admittance [S]"
    assert np.max(curve(current)[1]) == pytest.approx(1 / 0.08, rel=1e-9)
    assert "source" not in legend_text(current)
    assert "gain max" not in legend_text(gain)


def test_band_over_frequency_is_lowest_and_highest_of_the_loops():
    case = audio()
    inductance = np.array([[0.9, 1.0], [1.1, 1.05]]) * 33e-3
    batch = audio(inductance=inductance)
    current = plots.frequency_response(case, batch=batch).axes[0]
    assert labelled(current, "nominal, corners and samples (4 loops)")
    frequency, low, high = band(current)
    nominal = curve(current)[1]
    assert np.all(low <= nominal)
    assert np.all(high >= nominal)
    omega = 2 * np.pi * frequency
    each = RMS / np.abs(12.5 + 1j * (omega * inductance.reshape(-1, 1) - 1e6 / omega))
    np.testing.assert_allclose(low, each.min(axis=0), rtol=1e-11)
    # resonances between two drawn frequencies count at the nearest one
    assert np.all(high >= each.max(axis=0) * (1 - 1e-11))
    assert np.count_nonzero(high > each.max(axis=0) * (1 + 1e-11)) <= 3


def test_no_sharp_peak_of_a_batch_is_lost():
    """Q = 9000 over 10 % of inductance: each loop's top is V/R, however few points there are."""
    batch = audio(resistance=0.02, inductance=33e-3 * np.linspace(0.95, 1.05, 7))
    _, _, high = band(plots.frequency_response(audio(resistance=0.02), batch=batch).axes[0])
    assert np.count_nonzero(high >= RMS / 0.02 * (1 - 1e-9)) == 7


def test_large_batch_is_cut_into_pieces(monkeypatch):
    """Whether it is computed in one or in many pieces makes no difference."""
    loops = make_loop(**{**MAINS, "capacitance": 150e-6 * np.linspace(0.8, 1.2, 9)})
    source = sine(MAINS_PEAK, 50.0, None)
    case, batch = Case(make_loop(**MAINS), source), Case(loops, source, np.linspace(0, 9, 9))

    def edges():
        figures = plots.frequency_response(case, batch=batch), plots.switch_on(case, batch=batch)
        return [band(figure.axes[0]) for figure in figures]

    whole = edges()
    monkeypatch.setattr("rlc.render.figures._VALUES_AT_ONCE", 1)
    np.testing.assert_equal(edges(), whole)


def test_lossless_loop_has_no_half_power_band():
    case = Case(make_loop(**LOSSLESS), constant(24.0))
    current = plots.frequency_response(case).axes[0]
    assert "no losses: no bandwidth" in legend_text(current)
    assert "half-power band" not in legend_text(current)
    assert not current.texts


# --- over time


def inrush_forms() -> tuple[float, float, float]:
    """Damping and ringing [1/s] of INRUSH, and the voltage stepped on [V]."""
    a = 0.08 / (2 * 2e-6)
    return a, np.sqrt(1 / (2e-6 * 470e-6) - a * a), 24.0


def test_peaks_of_a_step_are_marked_where_the_closed_form_has_them():
    a, ringing, level = inrush_forms()
    figure = plots.switch_on(Case(make_loop(**INRUSH), constant(level)))
    current, voltage = figure.axes
    assert [panel.get_ylabel() for panel in figure.axes] == ["current [A]", "capacitor voltage [V]"]
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
    time, drawn = curve(plots.switch_on(Case(make_loop(**INRUSH), constant(level))).axes[0])
    expected = level / (ringing * 2e-6) * np.exp(-a * time) * np.sin(ringing * time)
    np.testing.assert_allclose(drawn, expected, atol=1e-12 * np.max(expected))
    assert time[0] == 0.0
    # the free motion has fallen below 2 % where the picture ends
    assert np.exp(-a * time[-1]) < 0.02


def test_envelope_holds_the_ringing_and_touches_it():
    case = Case(make_loop(**{**INRUSH, "resistance": 0.01}), constant(24.0))
    for panel, steady in zip(plots.switch_on(case).axes, (0.0, 24.0), strict=True):
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
    current, voltage = plots.switch_on(case).axes
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
    current, voltage = plots.switch_on(case).axes
    assert curve(voltage)[1][0] == -325.0
    for panel, element in ((current, "current"), (voltage, "capacitor")):
        height = labelled(panel, "peak ").get_ydata()[0]
        assert height == pytest.approx(case.peak(element).value.item(), rel=1e-9)


def test_steady_waveform_is_the_closed_form():
    angle, omega = 0.4, 2 * np.pi * 50.0
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, angle))
    current, voltage = plots.switch_on(case).axes
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
    current, voltage = plots.switch_on(case, targets).axes
    drawn = {line.get_ydata()[0] for line in current.lines if len(line.get_xdata()) == 3}
    assert drawn == {200.0, -200.0}
    assert labelled(voltage, "capacitor rated voltage max 800 V").get_ydata()[0] == 800.0
    assert labelled(current, "inductor saturation current max 5 kA (above the picture)")
    assert "bandwidth" not in legend_text(current)
    # a line beyond the data is inside the picture
    assert voltage.get_ylim()[1] > 800.0


def test_one_sided_waveform_has_one_limit_line():
    case = Case(make_loop(**OVERDAMPED), constant(12.0))
    _, voltage = plots.switch_on(case, Ratings(capacitor_voltage=16.0).targets()).axes
    assert [line.get_ydata()[0] for line in voltage.lines if len(line.get_xdata()) == 3] == [16.0]


@pytest.mark.parametrize(("ratio", "marked"), [(0.94, True), (0.95, False)])
def test_peak_that_only_digits_tell_from_the_final_value_is_not_marked(ratio, marked):
    """A step's overshoot exp(-pi z/sqrt(1 - z^2)) is 1.7e-4 for 0.94, 0.7e-4 for 0.95."""
    resistance = 2 * ratio * np.sqrt(AUDIO["inductance"] / AUDIO["capacitance"])
    case = Case(make_loop(**{**AUDIO, "resistance": resistance}), constant(12.0))
    voltage = plots.switch_on(case).axes[1]
    assert labelled(voltage, "peak 12 V").get_xdata().size == marked
    assert ("no higher than the steady state" in legend_text(voltage)) is not marked


def test_angle_that_is_only_rounding_is_zero():
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, 1e-14))
    for panel in (*plots.switch_on(case).axes, *plots.state_plane(case).axes):
        assert "closed at 0 deg from" in legend_text(panel)
    natural = REGISTER["natural_frequency"](audio()).item()
    at_resonance = Case(make_loop(**AUDIO), sine(34.0, natural, 0.0))
    phase = plots.frequency_response(at_resonance).axes[2]
    assert "0 deg at 876.1 Hz" in legend_text(phase).splitlines()


def test_nothing_is_said_of_closing_angles_under_a_constant_source():
    case = Case(make_loop(**INRUSH), constant(24.0))
    for panel in (*plots.switch_on(case, batch=case).axes, *plots.state_plane(case).axes):
        assert "closed" not in legend_text(panel)
        assert "angle" not in legend_text(panel)


@pytest.mark.parametrize(
    ("angle", "words"), [(None, "at its own worst"), (0.3, "at the same angle")]
)
def test_band_says_at_which_angle_its_loops_are_closed(angle, words):
    source = sine(MAINS_PEAK, 50.0, angle)
    batch = Case(make_loop(**{**MAINS, "inductance": 200e-6 * np.array([0.9, 1.1])}), source)
    for panel in plots.switch_on(Case(make_loop(**MAINS), source), batch=batch).axes:
        assert legend_text(panel).splitlines()[0].endswith(f"; each loop of the band {words}")
        assert labelled(panel, "nominal, corners and samples (2 loops)")
    for panel in plots.switch_on(Case(make_loop(**MAINS), source)).axes:
        assert "band" not in legend_text(panel)


@pytest.mark.parametrize("states", [(0.0, 0.0), (-200.0, 30.0)])
@pytest.mark.parametrize("angle", [None, 0.7])
def test_envelope_of_a_quick_ringing_lies_about_the_steady_sine(angle, states):
    """Time constant 2 L/R = 8 ms; ringing at 919 Hz under a source of 50 Hz."""
    case = Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0, angle), *states)
    for panel in plots.switch_on(case).axes:
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
    current, voltage = plots.switch_on(audio()).axes
    assert labelled(current, "time constant 5.28 ms").get_xdata().size == 0
    for panel in (current, voltage):
        assert "envelope" not in legend_text(panel)


def test_peak_only_approached_is_said_and_not_marked():
    _, voltage = plots.switch_on(Case(make_loop(**OVERDAMPED), constant(12.0))).axes
    said = labelled(voltage, "peak 12 V, approached but not reached")
    assert said.get_xdata().size == 0


def test_peak_of_a_slow_build_up_is_the_steady_state():
    """Driven near resonance the current rises to its steady amplitude and no higher."""
    current = plots.switch_on(audio()).axes[0]
    assert "no higher than the steady state" in legend_text(current)


def test_peak_only_approached_at_resonance_is_the_steady_state():
    case = Case(make_loop(**{**AUDIO, "resistance": 0.05}), sine(34.0, 876.12, 0.0))
    for panel, element in zip(plots.switch_on(case).axes, ("current", "capacitor"), strict=True):
        assert np.isinf(case.peak(element).time)
        assert "no higher than the steady state" in legend_text(panel)
        assert "approached" not in legend_text(panel)


def test_lossless_resonance_grows_without_bound():
    loop = make_loop(**LOSSLESS)
    natural = REGISTER["natural_frequency"](Case(loop, constant(1.0))).item()
    case = Case(loop, sine(34.0, natural, 0.0))
    figure = plots.switch_on(case)
    for panel in figure.axes:
        assert "grows without bound" in legend_text(panel)
        assert "no steady state" in legend_text(panel)
    assert "it never dies" in figure.axes[1].get_xlabel()
    assert "no steady state" in legend_text(plots.state_plane(case).axes[0])


def test_picture_of_a_long_ringing_says_which_part_it_shows():
    loop = make_loop(**{**AUDIO, "resistance": 0.0002})
    figure = plots.switch_on(Case(loop, sine(34.0, 876.12, 0.0)))
    assert "of the transient; its time constant is 330 s" in figure.axes[1].get_xlabel()
    assert "after the time shown" in legend_text(figure.axes[0])


def test_late_peak_of_a_beat_is_in_the_picture():
    """Q = 9000 driven half a per cent off: the peak comes after a hundred periods."""
    current = plots.switch_on(audio(resistance=0.02)).axes[0]
    mark = labelled(current, "peak ")
    assert 100 / FREQUENCY < mark.get_xdata()[0] < current.get_xlim()[1]


@pytest.mark.parametrize("source", [constant(24.0), sine(34.0, 50.0, 0.3), sine(34.0, 50.0, None)])
def test_band_over_time_holds_the_nominal_and_each_loop(source):
    loops = make_loop(**{**MAINS, "inductance": 200e-6 * np.array([0.9, 1.1])})
    case, batch = Case(make_loop(**MAINS), source), Case(loops, source)
    figure = plots.switch_on(case, batch=batch)
    for panel, element in zip(figure.axes, ("current", "capacitor"), strict=True):
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


# --- the state plane


def test_state_plane_runs_from_closing_to_the_final_point():
    case = Case(make_loop(**INRUSH), constant(24.0), 5.0, 10.0)
    (panel,) = plots.state_plane(case).axes
    across, up = curve(panel)
    assert (across[0], up[0]) == (5.0, 10.0)
    final = labelled(panel, "final")
    assert final.get_xdata()[0] == pytest.approx(24.0)
    assert final.get_ydata()[0] == pytest.approx(0.0, abs=1e-12)
    assert (panel.get_xlabel(), panel.get_ylabel()) == ("capacitor voltage [V]", "current [A]")
    assert len(panel.texts) == 2  # two arrows


def test_state_plane_ends_on_the_ellipse_of_the_steady_state():
    """Without a load i = C dv/dt: half axes V_C and omega C V_C."""
    (panel,) = plots.state_plane(audio()).axes
    ellipse = labelled(panel, "steady state")
    across, up = ellipse.get_data()
    omega = 2 * np.pi * FREQUENCY
    amplitude = RMS * np.sqrt(2) / np.hypot(12.5, omega * 33e-3 - 1 / (omega * 1e-6))
    on = (across * omega * 1e-6 / amplitude) ** 2 + (up / amplitude) ** 2
    np.testing.assert_allclose(on, 1.0, rtol=1e-11)


# --- over samples

VALUES = np.concatenate([np.linspace(55.0, 65.0, 101), [np.nan, np.inf]])


def test_histogram_counts_what_is_within_and_outside():
    target = Target("bandwidth", 57.0, 63.0, goal=0.99)
    (panel,) = plots.histogram(target, VALUES, 60.0).axes
    # 57.0, 57.1 .. 63.0 are 61 of 101 even steps; the limits themselves are allowed
    inside = labelled(panel, "within the limits")
    outside = labelled(panel, "outside")
    assert sum(bar.get_height() for bar in inside) == 61
    assert sum(bar.get_height() for bar in outside) == 40
    assert all(bar.get_hatch() for bar in outside)
    assert "61 of 103 samples are within the limits (59.22 %); asked for: 99 %" in legend_text(
        panel
    )
    assert "none or unbounded: 2" in legend_text(panel)
    assert labelled(panel, "bandwidth min 57 Hz").get_xdata()[0] == 57.0
    assert labelled(panel, "bandwidth max 63 Hz").get_xdata()[0] == 63.0
    assert labelled(panel, "nominal 60 Hz").get_xdata()[0] == 60.0
    assert panel.get_xlabel() == "bandwidth [Hz]"


def test_histogram_names_only_what_there_is():
    (panel,) = plots.histogram(Target("bandwidth", 50.0, 70.0), VALUES[:-2], 60.0).axes
    assert "outside" not in legend_text(panel)
    assert len(panel.containers) == 1
    assert panel.get_ylabel() == "samples per bin"


@pytest.mark.parametrize(
    ("target", "label"),
    [
        (Target("current"), "current, rms [A]"),
        (Target("capacitor_voltage_amplitude"),
         "capacitor voltage amplitude, peak, steady state [V]"),
        (Target("peak_current"), "peak current, peak magnitude over all time [A]"),
        (Target("damping_ratio"), "damping ratio"),
        (Target("gain", maximum=0.03, at=300.0, across="resistor"),
         "gain across the resistor at 300 Hz"),
        (Target("settling_time", at=0.05), "settling time at 5 % [s]"),
        (Target("overshoot"), "overshoot [%]"),
    ],
)  # fmt: skip
def test_histogram_axis_carries_convention_and_unit(target, label):
    (panel,) = plots.histogram(target, np.linspace(2.0, 5.0, 40), 3.0).axes
    assert panel.get_xlabel() == label


def test_histogram_of_what_rounding_leaves_of_an_angle_is_one_value():
    target = Target("worst_closing_angle_current")
    (panel,) = plots.histogram(target, [1e-16, 2e-15, 0.0, 3e-14], 1e-14).axes
    assert labelled(panel, "nominal 0 deg")
    assert [bar.get_height() for bar in labelled(panel, "samples")] == [4]


def test_histogram_of_an_angle_is_in_degrees():
    target = Target("current_phase", maximum=np.pi / 3)
    (panel,) = plots.histogram(target, np.linspace(0.0, np.pi / 2, 50), np.pi / 4).axes
    assert panel.get_xlabel() == "current phase [deg]"
    assert labelled(panel, "nominal").get_xdata()[0] == pytest.approx(45.0)
    assert labelled(panel, "current phase max").get_xdata()[0] == pytest.approx(60.0)


@pytest.mark.parametrize("values", [[60.0], [60.0] * 9, [0.0, 0.0], [np.nan, np.nan], [1e-300]])
def test_histogram_of_one_value(values):
    (panel,) = plots.histogram(Target("bandwidth", maximum=1e6), values, 60.0).axes
    count = np.count_nonzero(np.isfinite(values))
    assert sum(bar.get_height() for bar in labelled(panel, "within")) == count
    assert "(beyond the picture)" in legend_text(panel)


def test_histogram_without_limits_has_nothing_to_keep():
    (panel,) = plots.histogram(Target("bandwidth"), VALUES, 60.0).axes
    assert "limits" not in legend_text(panel)
    assert "103 samples" in legend_text(panel)


# --- every picture

CASES = {
    "audio": (AUDIO, sine(RMS * np.sqrt(2), FREQUENCY, 0.0)),
    "mains, worst angle": (MAINS, sine(MAINS_PEAK, 50.0, None)),
    "inrush": (INRUSH, constant(24.0)),
    "overdamped": (OVERDAMPED, constant(12.0)),
    "heavily overdamped sine": ({**OVERDAMPED, "resistance": 1e6}, sine(325.0, 50.0, None)),
    "sharp": ({**AUDIO, "resistance": 0.0002}, sine(34.0, 876.12, 0.0)),
    "lossless step": (LOSSLESS, constant(24.0)),
    "lossless sine": (LOSSLESS, sine(34.0, 700.0, None)),
    "loaded": ({**AUDIO, "load_resistance": 400.0, "series_resistance": 0.1}, constant(48.0)),
    "short ringing, slow source": ({**MAINS, "resistance": 1.0}, sine(325.0, 5.0, None)),
    "nothing happens": (AUDIO, constant(0.0)),
    "picofarads": (
        {"resistance": 1.0, "inductance": 1e-9, "capacitance": 1e-12},
        sine(1e-3, 5e9, 0.0),
    ),
}
TARGETS = (
    Target("natural_frequency", 800.0, 900.0),
    Target("bandwidth", maximum=80.0),
    Target("gain", minimum=0.0, maximum=20.0, at=1000.0),
    Target("peak_current", maximum=3.0),
    *Ratings(capacitor_voltage=63.0, inductor_current=1.0, inductor_saturation=2.0).targets(),
)


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("picture", ["frequency_response", "switch_on", "state_plane"])
def test_nothing_is_cut_or_covered(name, picture):
    """Texts are inside the figure, legends above their panel, cautions below all of them."""
    parts, source = CASES[name]
    case = Case(make_loop(**parts), source)
    options = {"cautions": CAUTIONS, "title": "A rather long title of the sheet, " * 4}
    if picture != "state_plane":
        options |= {"targets": TARGETS}
    figure = drawn(getattr(plots, picture)(case, **options))
    paper = figure.bbox
    below = figure._supxlabel.get_window_extent()
    lowest = min(panel.get_tightbbox().y0 for panel in figure.axes)
    assert below.x0 >= 0
    assert below.x1 <= paper.x1
    assert below.y0 >= 0
    assert below.y1 <= lowest
    top = figure._suptitle.get_window_extent()
    assert top.x0 >= 0
    assert top.x1 <= paper.x1
    assert max(panel.get_tightbbox().y1 for panel in figure.axes) <= top.y0
    for upper, lower in zip(figure.axes, figure.axes[1:], strict=False):
        assert lower.get_tightbbox().y1 <= upper.get_tightbbox().y0
    for panel in figure.axes:
        box = panel.get_tightbbox()
        assert box.x0 >= 0
        assert box.x1 <= paper.x1 + 1
        legend = panel.get_legend()
        assert legend.get_window_extent().y0 >= panel.bbox.y1
        assert legend.get_window_extent().x1 <= paper.x1
        assert panel.bbox.height > 100
        assert "[" in panel.get_ylabel()
    assert "[" in figure.axes[-1].get_xlabel()


@pytest.mark.parametrize("name", CASES)
def test_frequencies_are_written_without_leading_zeros(name):
    """Each tick has the prefix that its number asks for, or all of them the same."""
    parts, source = CASES[name]
    figure = drawn(plots.frequency_response(Case(make_loop(**parts), source)))
    labels = ticks(figure.axes[-1].xaxis)
    assert len(labels) >= 2
    assert not [label for label in labels if label.startswith("0")]
    unit = figure.axes[-1].get_xlabel().removeprefix("frequency ")
    assert all(label.endswith("Hz") for label in labels) == (" " in labels[0])
    assert unit == "[Hz]" if " " in labels[0] else unit.endswith("Hz]")


def test_frequencies_from_source_to_resonance_have_each_its_prefix():
    figure = drawn(plots.frequency_response(Case(make_loop(**MAINS), sine(MAINS_PEAK, 50.0))))
    labels = ticks(figure.axes[-1].xaxis)
    assert labels == ["50 Hz", "100 Hz", "200 Hz", "500 Hz", "1 kHz"]


def test_axis_that_goes_little_beyond_its_data_keeps_their_prefix():
    case = Case(make_loop(**MAINS), sine(3 * MAINS_PEAK, 50.0, None))
    current = drawn(plots.switch_on(case, (Target("peak_current", maximum=900.0),))).axes[0]
    assert current.get_ylim()[1] > 1000.0
    assert current.get_ylabel() == "current [A]"
    assert "500" in ticks(current.yaxis)


@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf"])
def test_characters_that_the_font_lacks_are_no_warning(tmp_path, suffix):
    """Warnings are errors here: a box is drawn in their place, and nothing is printed."""
    title = "震荡回路 מעגל 🔔"
    figure = plots.state_plane(audio(), title=title, cautions=(title,))
    path = tmp_path / f"picture{suffix}"
    plots.save(figure, path)
    assert figure.get_suptitle() == title
    assert path.stat().st_size > 1000


def test_dollar_signs_are_no_formula():
    figure = plots.switch_on(audio(), title="$3 part, $_2", cautions=("costs $5 or $6_",))
    drawn(figure)
    assert figure.get_supxlabel() == "costs $5 or $6_"


def test_endless_word_is_broken():
    figure = drawn(plots.state_plane(audio(), cautions=("x" * 400,)))
    text = figure._supxlabel
    assert text.get_window_extent().x1 <= figure.bbox.x1
    assert text.get_text().replace("\n", "") == "x" * 400


# --- files


@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf", ".PNG"])
def test_same_figure_gives_the_same_bytes(tmp_path, suffix):
    paths = [tmp_path / f"{name}{suffix}" for name in ("first", "second")]
    for path in paths:
        plots.save(plots.switch_on(Case(make_loop(**INRUSH), constant(24.0))), path)
    first, second = (path.read_bytes() for path in paths)
    assert first == second
    start = {".png": b"\x89PNG", ".svg": b"<?xml", ".pdf": b"%PDF"}[suffix.lower()]
    assert first.startswith(start)
    assert sorted(tmp_path.iterdir()) == sorted(paths)


def test_png_is_small(tmp_path):
    path = tmp_path / "picture.png"
    plots.save(plots.frequency_response(audio(), TARGETS, audio(), CAUTIONS, "Horn"), path)
    assert path.stat().st_size < 120_000


def test_nothing_is_overwritten(tmp_path):
    path = tmp_path / "picture.svg"
    path.write_text("mine")
    with pytest.raises(InputError, match="nothing is overwritten"):
        plots.save(plots.state_plane(audio()), path)
    assert path.read_text() == "mine"


@pytest.mark.parametrize(
    ("name", "rule"),
    [
        ("picture.jpg", "must end with .png, .svg, .pdf"),
        ("picture", "must end with"),
        ("nowhere/picture.png", "cannot be written: No such file"),
        ("nowhere/picture.pdf", "cannot be written: No such file"),
        # cannot even be looked for
        (f"{'x' * 300}.png", "cannot be written: File name too long"),
    ],
)
def test_path_that_cannot_be_written(tmp_path, name, rule):
    with pytest.raises(InputError, match=rule):
        plots.save(plots.state_plane(audio()), tmp_path / name)
    assert not list(tmp_path.iterdir())


def test_directory_that_cannot_be_searched(tmp_path, monkeypatch):
    def refuse(path, *args, **kwargs):
        raise PermissionError(13, "Permission denied")

    figure = plots.state_plane(audio())
    for name in ("exists", "unlink"):
        monkeypatch.setattr(f"pathlib.Path.{name}", refuse)
    with pytest.raises(InputError, match="cannot be written: Permission denied"):
        plots.save(figure, tmp_path / "picture.png")
    monkeypatch.undo()
    assert not list(tmp_path.iterdir())


def test_no_global_state_of_matplotlib_is_touched(tmp_path):
    """Importing loads no matplotlib; drawing and saving load no pyplot."""
    program = f"""
import sys
from rlc.render import plots
assert "matplotlib" not in sys.modules
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.source import constant
case = Case(make_loop(resistance=1.0, inductance=1e-3, capacitance=1e-6), constant(1.0))
for number, suffix in enumerate((".png", ".svg", ".pdf")):
    plots.save(plots.switch_on(case), r"{tmp_path}/" + str(number) + suffix)
plots.frequency_response(case), plots.state_plane(case)
assert "matplotlib.figure" in sys.modules
assert "matplotlib.pyplot" not in sys.modules
"""
    subprocess.run([sys.executable, "-c", program], check=True)
