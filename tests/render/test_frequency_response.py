"""The picture over frequency; expected values are closed forms."""

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
    RMS,
    ROUNDING,
    audio,
    band,
    curve,
    drawn,
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
        response = plots.frequency_response(case, batch=batch).axes[0]
        return [band(panel) for panel in (response, *over_time(plots.switch_on(case, batch=batch)))]

    whole = edges()
    monkeypatch.setattr("rlc.render.bands._VALUES_AT_ONCE", 1)
    np.testing.assert_equal(edges(), whole)


def test_lossless_loop_has_no_half_power_band():
    case = Case(make_loop(**LOSSLESS), constant(24.0))
    current = plots.frequency_response(case).axes[0]
    assert "no losses: no bandwidth" in legend_text(current)
    assert "half-power band" not in legend_text(current)
    assert not current.texts
