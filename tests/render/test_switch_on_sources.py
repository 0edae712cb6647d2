"""The picture of the switch-on for every kind of source, against other ways to the same curves."""

from __future__ import annotations

import numpy as np
import pytest
from pictures import INRUSH, MAINS, MAINS_PEAK, curve, heading, labelled, legend_text, over_time
from scipy.integrate import quad, solve_ivp
from scipy.linalg import expm

from rlc.render import plots
from rlc.render.findings import ELV_DC
from rlc.solver.case import Case
from rlc.solver.loop import make_loop
from rlc.solver.shapes import pulse, ramp, recorded, surge
from rlc.solver.source import Order, Window, constant, shaped, sine
from rlc.solver.targets import Fuse, Ratings, Target

R, L, C = 2.5, 100e-6, 10e-6
BENCH = {"resistance": R, "inductance": L, "capacitance": C}
SLOW = {"resistance": R, "inductance": 10e-3, "capacitance": 100e-6}
RECORD = np.linspace(0.0, 1e-3, 41), 24.0 * np.sin(np.linspace(0.0, 9.0, 41)) ** 3
SOURCES = {
    "dc": constant(48.0),
    "sine": sine(MAINS_PEAK, 400.0, 0.6),
    "harmonics": sine(MAINS_PEAK, 400.0, 0.6, orders=[Order(5, 0.2, 1.0), Order(7, 0.1)]),
    "ramp": shaped(ramp(48.0, 50e-6)),
    "pulse": shaped(pulse(48.0, 100e-6, 10e-6, 20e-6)),
    "train": shaped(pulse(48.0, 100e-6, 1e-6, 1e-6, 250e-6, 5)),
    "steady train": shaped(pulse(48.0, 100e-6, 1e-6, 1e-6, 250e-6, None)),
    "surge": shaped(surge(1e3, 1.2e-6, 50e-6)),
    "recorded": shaped(recorded(*RECORD)),
}


def surge_voltage(time):
    """Peak of 1 and half value at 50 us: only used for its size, the picture has the rates."""
    shape = SOURCES["surge"].shape
    return shape.scale * (np.exp(-shape.slow * time) - np.exp(-shape.fast * time))


def pulse_voltage(time, period, count):
    """Trapezoid of 1 us edges, 100 us between half levels."""
    within = np.mod(time, period) if time < count * period else np.inf
    return float(np.interp(within, [0.0, 1e-6, 100e-6, 101e-6], [0.0, 48.0, 48.0, 0.0]))


VOLTAGES = {
    "dc": lambda t: 48.0,
    "sine": lambda t: MAINS_PEAK * np.sin(2 * np.pi * 400 * t + 0.6),
    "harmonics": lambda t: MAINS_PEAK * (
        np.sin(2 * np.pi * 400 * t + 0.6)
        + 0.2 * np.sin(5 * (2 * np.pi * 400 * t + 0.6) + 1.0)
        + 0.1 * np.sin(7 * (2 * np.pi * 400 * t + 0.6))
    ),
    "ramp": lambda t: 48.0 * min(t / 50e-6, 1.0),
    "pulse": lambda t: float(np.interp(t, [0, 10e-6, 95e-6, 115e-6], [0.0, 48.0, 48.0, 0.0])),
    "train": lambda t: pulse_voltage(t, 250e-6, 5),
    "steady train": lambda t: pulse_voltage(t, 250e-6, 1e9),
    "surge": surge_voltage,
    "recorded": lambda t: float(np.interp(t, *RECORD)),
}  # fmt: skip


@pytest.mark.parametrize("name", SOURCES)
def test_curves_are_those_of_the_differential_equation(name):
    """Source, current and capacitor voltage as drawn, against steps of a solver's own choice."""
    figure = plots.switch_on(Case(make_loop(**BENCH), SOURCES[name]))
    drive = VOLTAGES[name]

    def motion(t, state):
        return [state[1] / C, (drive(t) - R * state[1] - state[0]) / L]

    for panel, index in zip(over_time(figure), (1, 0), strict=True):
        time, drawn = curve(panel)
        expected = solve_ivp(
            motion, (0.0, time[-1]), [0.0, 0.0], t_eval=time, max_step=2e-6, rtol=1e-10, atol=1e-10
        ).y[index]
        # between steps of 2 us it interpolates to their fifth power: (2 us * 33e3 / s)^5 = 1e-6
        np.testing.assert_allclose(drawn, expected, atol=2e-6 * np.max(np.abs(expected)))
    at, drawn = curve(figure.axes[0])
    expected = np.array([drive(t) for t in at])
    np.testing.assert_allclose(drawn, expected, atol=1e-9 * np.max(np.abs(expected)))


def test_steady_train_is_the_periodic_solution():
    """The state that a period maps on itself, by matrix exponentials of the four lines."""
    period = 250e-6
    figure = plots.switch_on(Case(make_loop(**BENCH), SOURCES["steady train"]))
    # v, i, source, slope of the source
    system = np.array([[0, 1 / C, 0, 0], [-1 / L, -R / L, 1 / L, 0], [0, 0, 0, 1], [0, 0, 0, 0]])
    across, state = np.eye(2), np.zeros(2)
    for start, end, length in ((0, 48, 1e-6), (48, 48, 99e-6), (48, 0, 1e-6), (0, 0, 149e-6)):
        step = expm(system * length)
        across = step[:2, :2] @ across
        state = step[:2, :2] @ state + step[:2, 2:] @ [start, (end - start) / length]
    expected = np.linalg.solve(np.eye(2) - across, state)
    for panel, value in zip(over_time(figure), (expected[1], expected[0]), strict=True):
        steady = labelled(panel, "steady train of pulses")
        # 1e-12 of the first transient is left, and rounding of a few thousand knots
        assert steady.get_ydata()[0] == pytest.approx(value, abs=1e-9 * 60)
        wave = np.interp(period, *steady.get_data())
        assert wave == pytest.approx(value, abs=1e-6 * 60)
    assert "the pulses go on" in figure.axes[2].get_xlabel()
    assert "in each period of the steady train" in legend_text(figure.axes[4])


WINDOWS = [None, Window(0.0, 2 * np.pi), Window(-0.3, 0.25), Window(1.2, 4.0)]


def closings_band(panel):
    """Times, lower and upper edge of the band of all closings."""
    outline = labelled(panel, "closed at").get_paths()[0].vertices
    count = (len(outline) - 3) // 2
    low, high = outline[1 : count + 1], outline[count + 2 : 2 * count + 2][::-1]
    np.testing.assert_array_equal(low[:, 0], high[:, 0])
    return low[:, 0], low[:, 1], high[:, 1]


@pytest.mark.parametrize("either", [False, True])
@pytest.mark.parametrize("window", WINDOWS)
@pytest.mark.parametrize("orders", [(), (Order(5, 0.2, 1.0),)])
def test_band_of_closings_is_the_highest_and_lowest_of_all(window, orders, either):
    """Against closings at 181 angles, which see a wave's top to 1 - cos(half a step)."""
    source = sine(MAINS_PEAK, 50.0, window, orders=orders)
    loop = make_loop(**SLOW)
    figure = plots.switch_on(Case(loop, source, 200.0, 1.5, either))
    low, high = window or (0.0, 2 * np.pi)
    angles = np.linspace(low, high, 181)
    fastest = max([1, *(order.number for order in orders)])
    missed = 1 - np.cos(fastest * (high - low) / 180 / 2)
    for panel, name in zip(figure.axes, ("source", "current", "capacitor_voltage"), strict=False):
        time, below, above = closings_band(panel)
        waves = np.concatenate([
            getattr(Case(loop, sine(MAINS_PEAK, 50.0, angles, orders=orders), charge, 1.5)
                    .waveforms(time), name)
            for charge in ((200.0, -200.0) if either else (200.0,))
        ])  # fmt: skip
        size = np.max(np.abs(waves))
        # harmonics: the picture has angles of its own, at least 16 to a turn of the highest
        own = 1 - np.cos(np.pi / 16) if orders else 1e-12
        assert np.all(below <= waves.min(axis=0) + own * size)
        assert np.all(above >= waves.max(axis=0) - own * size)
        assert np.all(below >= waves.min(axis=0) - (missed + 1e-12) * 2 * size)
        assert np.all(above <= waves.max(axis=0) + (missed + 1e-12) * 2 * size)
        if panel is not figure.axes[0]:
            drawn = np.interp(time, *curve(panel))
            assert np.all((below - own * size <= drawn) & (drawn <= above + own * size))


def test_either_polarity_of_a_step_is_both_curves():
    """v_C(0) = +-40 V under 48 V: the larger current belongs to -40 V, (48 + 40) V of a step."""
    loop = make_loop(**BENCH)
    figure = plots.switch_on(Case(loop, constant(48.0), 40.0, either_polarity=True))
    for panel, name in zip(over_time(figure), ("current", "capacitor_voltage"), strict=True):
        assert heading(panel).startswith("charged to -40 V, worst for the")
        outline = labelled(panel, "charged either way").get_paths()[0].vertices
        time = curve(panel)[0]
        both = [getattr(Case(loop, constant(48.0), v).waveforms(time), name) for v in (-40, 40)]
        size = np.max(np.abs(both))
        assert outline[:, 1].max() == pytest.approx(np.max(both), abs=1e-12 * size)
        assert outline[:, 1].min() == pytest.approx(np.min(both), abs=1e-12 * size)
    assert "closed as for the current" in heading(figure.axes[3])
    assert not figure.axes[0].get_legend_handles_labels()[1]


def test_random_closing_says_so_and_a_window_its_ends():
    loop = make_loop(**MAINS)
    for window, words in (
        (Window(0.0, 2 * np.pi), "closed at any angle"),
        (Window(-np.pi / 12, np.pi / 12), "closed at -15 deg to 15 deg"),
    ):
        figure = plots.switch_on(Case(loop, sine(MAINS_PEAK, 50.0, window)))
        for panel in figure.axes[:3]:
            assert labelled(panel, words)
        assert "worst for the current" in heading(figure.axes[1])
    given = plots.switch_on(Case(loop, sine(MAINS_PEAK, 50.0, 0.3)))
    assert "closed at any" not in "".join(map(legend_text, given.axes[1:]))


def test_let_through_is_the_integral_of_the_squared_current():
    """Of a step from rest C V^2/(2 R) in all; by quadrature of the closed form up to each time."""
    panel = plots.switch_on(Case(make_loop(**BENCH), constant(48.0))).axes[4]
    rate, ringing = R / (2 * L), np.sqrt(1 / (L * C) - (R / (2 * L)) ** 2)

    def squared(t):
        return (48.0 / (ringing * L) * np.exp(-rate * t) * np.sin(ringing * t)) ** 2

    time, passed = curve(panel)
    whole = C * 48.0**2 / (2 * R)
    for index in range(5, time.size, 60):
        expected = quad(squared, 0.0, time[index], epsabs=0.0, epsrel=1e-12, limit=200)[0]
        assert passed[index] == pytest.approx(expected, rel=1e-9)
    assert labelled(panel, "in all 0.004608 A^2 s").get_ydata()[0] == pytest.approx(whole)
    mark = labelled(panel, "half of 0.004608 A^2 s by")
    (half,) = mark.get_xdata()
    assert quad(squared, 0.0, half, epsrel=1e-12)[0] == pytest.approx(whole / 2, rel=1e-9)
    assert mark.get_ydata()[0] == pytest.approx(whole / 2)
    assert panel.get_ylabel() == "let-through [1e-3 A^2 s]"


def test_fuse_has_its_share_as_a_line():
    """38 % of the melting let-through for 1000 closings."""
    case = Case(make_loop(**BENCH), constant(48.0))
    for melting, drawn in ((0.02, True), (0.2, False)):
        target = Fuse(melting, 1000).target(case)
        panel = plots.switch_on(case, (target,)).axes[4]
        line = labelled(panel, f"the fuse's share for one closing, {0.38 * melting:.4g} A^2 s")
        assert bool(len(line.get_xdata())) is drawn
        if drawn:
            np.testing.assert_allclose(line.get_ydata(), 0.38 * melting)
            assert panel.get_ylim()[1] > 0.38 * melting
        else:
            assert "above the picture" in line.get_label()


def test_limit_on_let_through_reaches_as_far_as_it_is_stated():
    target = Target("let_through", maximum=0.004, at=100e-6)
    panel = plots.switch_on(Case(make_loop(**BENCH), constant(48.0)), (target,)).axes[4]
    line = labelled(panel, "let through max 0.004 A^2 s at 100 us")
    assert (line.get_xdata()[0], line.get_xdata()[-1]) == (0.0, 100e-6)


def test_half_of_a_period_is_in_the_picture_though_the_inrush_is_short():
    case = Case(make_loop(**BENCH), sine(MAINS_PEAK, 50.0, None))
    panel = plots.switch_on(case).axes[4]
    mark = labelled(panel, "half of 0.2221 A^2 s of a period by")
    assert mark.get_xdata()[0] < panel.get_xlim()[1]
    assert "most of all closings" in heading(panel)


def test_extra_low_voltage_is_a_line_where_it_is_inside_the_picture():
    low = plots.switch_on(Case(make_loop(**BENCH), constant(48.0)))
    assert all("extra-low" not in legend_text(panel) for panel in over_time(low))
    high = over_time(plots.switch_on(Case(make_loop(**BENCH), constant(100.0))))[1]
    assert labelled(high, "extra-low voltage up to 120 V dc").get_ydata()[0] == ELV_DC
    ac = over_time(plots.switch_on(Case(make_loop(**BENCH), sine(MAINS_PEAK, 50.0, 1.0))))[1]
    # 50 V rms
    expected = 50 * np.sqrt(2)
    line = labelled(ac, "extra-low voltage up to 70.71 V peak (50 V rms)")
    assert abs(line.get_ydata()[0]) == pytest.approx(expected)


def test_level_that_is_not_to_be_exceeded_for_long_is_a_line():
    target = Target("capacitor_voltage_exceeding_duration", maximum=1e-3, at=55.0)
    voltage = over_time(plots.switch_on(Case(make_loop(**BENCH), constant(48.0)), (target,)))[1]
    line = labelled(voltage, "capacitor voltage exceeding duration max 1 ms at 55 V")
    assert set(line.get_ydata()) == {55.0}


def test_surge_on_a_slow_loop_has_a_time_axis_of_its_own():
    """50 us of surge, 6 ms of ringing: both can be read, and both peaks are in the picture."""
    case = Case(make_loop(**SLOW), SOURCES["surge"])
    source, current, voltage, _, _ = plots.switch_on(case).axes
    assert source.get_xlabel() == "the source alone, time from closing [us]"
    assert source.get_xlim()[1] < 1e-3
    assert voltage.get_xlim()[1] > 15e-3
    assert np.max(curve(source)[1]) == pytest.approx(1e3, rel=1e-3)
    for panel, element in ((current, "current"), (voltage, "capacitor")):
        mark = labelled(panel, "peak ")
        assert mark.get_ydata()[0] == pytest.approx(case.peak(element).value.item(), rel=1e-9)
        assert np.max(curve(panel)[1]) == pytest.approx(mark.get_ydata()[0], rel=1e-12)


def test_envelope_after_the_last_pulse_holds_the_ringing():
    figure = plots.switch_on(Case(make_loop(**BENCH), SOURCES["pulse"]))
    for panel in over_time(figure):
        upper = labelled(panel, "envelope, time constant 80 us")
        time, outline = upper.get_data()
        assert time[0] == pytest.approx(115e-6)
        np.testing.assert_allclose(outline, outline[0] * np.exp(-(time - time[0]) / 80e-6),
                                   atol=1e-9 * outline[0])  # fmt: skip
        values = np.interp(time, *curve(panel))
        assert np.all(np.abs(values) <= outline * (1 + 1e-9))


def test_train_of_many_pulses_shows_the_first_ones_and_says_so():
    source = shaped(pulse(48.0, 100e-6, 1e-6, 1e-6, 250e-6, 900))
    voltage = plots.switch_on(Case(make_loop(**BENCH), source)).axes[2]
    # 899 periods and one pulse of 101 us
    assert "the first of the pulses, which end after 224.9 ms" in voltage.get_xlabel()
    assert 3 * 250e-6 <= voltage.get_xlim()[1] < 20e-3


def test_record_is_cut_to_what_happens():
    """A blip at 12 ms in 100 ms of nothing."""
    time = np.arange(100_001) * 1e-6
    level = np.where((time > 12e-3) & (time < 12.2e-3), 24.0, 0.0)
    figure = plots.switch_on(Case(make_loop(**BENCH), shaped(recorded(time, level))))
    low, high = figure.axes[2].get_xlim()
    assert 11e-3 < low < 12e-3
    assert 12.2e-3 < high < 15e-3
    words = figure.axes[2].get_xlabel()
    assert "at rest" in words
    assert "the source hardly moves" in words
    for panel in over_time(figure):
        assert low < labelled(panel, "peak ").get_xdata()[0] < high
    assert labelled(figure.axes[3], "over the time shown")


def test_long_record_keeps_its_spikes_with_few_points():
    """One sample of 200 000 stands out: it is drawn, and so is every stretch's height."""
    time = np.arange(200_001) * 1e-6
    level = 10.0 * np.sin(2 * np.pi * 50 * time) + 0.3 * np.cos(1e5 * time)
    level[77_777] = 31.0
    figure = plots.switch_on(Case(make_loop(**BENCH), shaped(recorded(time, level))))
    at, drawn = curve(figure.axes[0])
    assert at.size < 10_000
    assert drawn.max() == 31.0
    assert at[np.argmax(drawn)] == pytest.approx(77_777e-6)
    assert drawn.min() == level.min()
    # an integral of the squared current is known to three digits here
    current = curve(figure.axes[1])[1]
    assert np.max(np.abs(current)) == pytest.approx(
        Case(make_loop(**BENCH), shaped(recorded(time, level))).peak("current").value, rel=1e-9
    )
    panel = figure.axes[4]
    half = labelled(panel, "half of").get_xdata()[0]
    passed = np.interp(half, *curve(panel))
    whole = labelled(panel, "in all").get_ydata()[0]
    assert passed == pytest.approx(whole / 2, rel=5e-3)


@pytest.mark.parametrize("name", ["ramp", "pulse", "train", "steady train", "surge", "recorded"])
def test_frequency_response_of_a_source_without_a_frequency_has_no_mark(name):
    case = Case(make_loop(**BENCH), SOURCES[name])
    targets = Ratings(capacitor_voltage_rms=20.0, inductor_current=1.0).targets()
    current, gain, _ = plots.frequency_response(case, targets).axes
    assert current.get_ylabel() == "admittance [mS]"
    assert np.max(curve(current)[1]) == pytest.approx(1 / R, rel=1e-9)
    for panel in (current, gain):
        assert "source 0" not in legend_text(panel)
        assert " at 0 Hz" not in legend_text(panel)
    assert "inductor rated current max 1 A (not drawn)" in legend_text(current)


def test_frequency_response_marks_each_harmonic_at_its_own_voltage():
    source = sine(MAINS_PEAK, 50.0, 0.0, orders=[Order(5, 0.06), Order(7, 0.05, 1.0)])
    targets = (Target("current", maximum=20.0), Target("current", maximum=9.0, at=50.0))
    current, gain, _ = plots.frequency_response(Case(make_loop(**SLOW), source), targets).axes
    marks = labelled(current, "current of each harmonic")
    for number, share, at, value in zip((5, 7), (0.06, 0.05), *marks.get_data(), strict=True):
        omega = 2 * np.pi * number * 50.0
        impedance = np.hypot(R, omega * 10e-3 - 1 / (omega * 100e-6))
        assert at == pytest.approx(number * 50.0)
        assert value == pytest.approx(230 * share / impedance, rel=1e-11)
        assert current.get_ylim()[0] < value < current.get_ylim()[1]
        assert current.get_xlim()[0] < at < current.get_xlim()[1]
    # all orders together make up the current: its limit belongs to no single frequency
    assert labelled(current, "current max 20 A (not drawn)")
    assert labelled(current, "current max 9 A at 50 Hz").get_ydata()[1] == 9.0
    assert "harmonic" not in legend_text(gain)


@pytest.mark.parametrize("name", SOURCES)
def test_state_plane_ends_where_the_source_leads(name):
    case = Case(make_loop(**BENCH), SOURCES[name])
    (panel,) = plots.state_plane(case).axes
    beside = plots.switch_on(case).axes[3]
    for plane in (panel, beside):
        across, up = curve(plane)
        assert (across[0], up[0]) == (0.0, pytest.approx(0.0))
        if name in ("sine", "harmonics", "steady train"):
            closed = labelled(plane, "steady state, one period of the source")
            x, y = closed.get_data()
            size = np.max(np.abs(x)), np.max(np.abs(y))
            assert abs(x[-1] - x[0]) <= 1e-6 * size[0]
            assert abs(y[-1] - y[0]) <= 1e-6 * size[1]
        else:
            final = {"dc": 48.0, "ramp": 48.0, "recorded": RECORD[1][-1]}.get(name, 0.0)
            (x,), (y,) = labelled(plane, "final").get_data()
            assert (x, y) == (pytest.approx(final, abs=1e-12), pytest.approx(0.0, abs=1e-12))


def test_band_of_a_batch_has_the_source_of_its_loops():
    """Parts 10 % off under a pulse: the extremes of two loops drawn alone."""
    source = SOURCES["pulse"]
    batch = Case(make_loop(**{**BENCH, "inductance": L * np.array([0.9, 1.1])}), source)
    figure = plots.switch_on(Case(make_loop(**BENCH), source), batch=batch)
    for panel, name in zip(over_time(figure), ("current", "capacitor_voltage"), strict=True):
        outline = labelled(panel, "nominal, corners and samples (2 loops)").get_paths()[0].vertices
        count = (len(outline) - 3) // 2
        time, low = outline[1 : count + 1].T
        high = outline[count + 2 : 2 * count + 2][::-1, 1]
        each = [
            getattr(Case(make_loop(**{**BENCH, "inductance": value}), source).waveforms(time), name)
            for value in (0.9 * L, L, 1.1 * L)
        ]
        slack = 1e-12 * np.max(np.abs(each))
        np.testing.assert_allclose(low, np.min(each, axis=0), atol=slack)
        np.testing.assert_allclose(high, np.max(each, axis=0), atol=slack)


def test_inrush_of_a_lossless_loop_never_ends():
    case = Case(make_loop(**{**INRUSH, "resistance": 0.0}), constant(24.0))
    panel = plots.switch_on(case).axes[4]
    assert "without end" in legend_text(panel)
