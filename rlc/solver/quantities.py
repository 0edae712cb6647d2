"""THE register: every result that has a name.

Target names, table rows, JSON keys, help texts, error suggestions and the docs are all read
from here. Conventions, once: amplitude means peak, rms is said; frequencies are in hertz;
voltages of inductor and capacitor are across the part's terminals, winding and series
resistance included; a negative ``current_phase`` lags the source; power is what the source's
inner voltage delivers, its own resistance included.
"""

from __future__ import annotations

import numpy as np

from rlc.errors import InputError
from rlc.solver import results, totals
from rlc.solver.passed import let_through_time
from rlc.solver.quantity import Quantity
from rlc.solver.steady import capacitor_voltage_maximum, half_power_frequencies
from rlc.solver.transient import logarithmic_decrement, overshoot, settling_time

_AC = "OpenStax, University Physics vol. 2, sections 15.2 to 15.5"
_FREE = "OpenStax, University Physics vol. 2, section 14.6"
_STEP = "step response of a second-order system: K. Ogata, Modern Control Engineering (from memory)"
_SEARCH = "steady state plus free motion; branch and bound over time, proved to 1e-9"

#: Convention of what adds up over the orders of a source with harmonics.
_ALL = "harmonics included unless asked at a frequency"

SETTLING_BAND = 0.02
HALF = 0.5

_ROWS: tuple[Quantity, ...] = (
    Quantity(
        "natural_frequency", "f_0", "frequency", "loop", "undamped",
        "Frequency at which the loop would ring without losses; its resonance.",
        "sqrt(det A)/(2 pi); without a load 1/(2 pi sqrt(L C))", _AC,
        lambda c, at, across: c.equation.natural / (2 * np.pi),
    ),
    Quantity(
        "ringing_frequency", "f_r", "frequency", "loop", "damped; none if overdamped",
        "Frequency at which the loop rings after a disturbance.",
        "sqrt(omega_0^2 - gamma^2/4)/(2 pi)", _FREE,
        lambda c, at, across: results.ringing(c),
    ),
    Quantity(
        "damping_ratio", "zeta", "number", "loop", "1 is critical",
        "Damping as a share of critical damping.", "gamma/(2 omega_0)", _FREE,
        lambda c, at, across: c.equation.damping_ratio,
    ),
    Quantity(
        "quality_factor", "Q", "number", "loop", "at the natural frequency, losses included",
        "Natural angular frequency over bandwidth in rad/s.", "omega_0/gamma", _AC,
        lambda c, at, across: 0.5 / c.equation.damping_ratio,
    ),
    Quantity(
        "bandwidth", "B", "frequency", "loop", "half power, all losses and the load included",
        "Distance of the two half-power frequencies.", "gamma/(2 pi); without a load R/(2 pi L)",
        _AC, lambda c, at, across: c.equation.gamma / (2 * np.pi),
    ),
    Quantity(
        "lower_half_power_frequency", "f_1", "frequency", "loop",
        "half power of the capacitor's own current",
        "Frequency below resonance at which the capacitor's own current, without a load the"
        " loop's, is 1/sqrt(2) of its maximum.",
        "f_0^2/f_2", _AC, lambda c, at, across: half_power_frequencies(c.equation)[0],
    ),
    Quantity(
        "upper_half_power_frequency", "f_2", "frequency", "loop",
        "half power of the capacitor's own current",
        "Frequency above resonance at which the capacitor's own current, without a load the"
        " loop's, is 1/sqrt(2) of its maximum.",
        "(sqrt(omega_0^2 + gamma^2/4) + gamma/2)/(2 pi)", _AC,
        lambda c, at, across: half_power_frequencies(c.equation)[1],
    ),
    Quantity(
        "characteristic_impedance", "Z_0", "resistance", "loop", "",
        "Square root of inductance over capacitance.", "sqrt(L/C)", _FREE,
        lambda c, at, across: np.sqrt(c.loop.total_inductance / c.loop.capacitance),
    ),
    Quantity(
        "time_constant", "tau", "time", "loop", "of the envelope; overdamped: of the slow part",
        "Time in which what lasts longest of the transient falls to 1/e.",
        "2/gamma, without a load 2 L/R; overdamped 1/|s_1|", _FREE,
        lambda c, at, across: results.time_constant(c),
    ),
    Quantity(
        "logarithmic_decrement", "Lambda", "number", "loop", "natural logarithm",
        "Logarithm of the ratio of one swing to the next on the same side.",
        "gamma/(2 f_r)", _FREE,
        lambda c, at, across: np.where(results.rings(c), logarithmic_decrement(c.equation), np.nan),
    ),
    Quantity(
        "capacitor_voltage_maximum_frequency", "f_C", "frequency", "loop", "zero if none",
        "Source frequency at which the capacitor voltage is largest.",
        "sqrt(omega_0^2 - gamma^2/2)/(2 pi) without series resistance", _AC,
        lambda c, at, across: capacitor_voltage_maximum(c.loop, c.equation),
    ),
    Quantity(
        "impedance", "|Z|", "resistance", "steady", "magnitude",
        "Magnitude of all that the source's inner voltage meets, its own impedance included.",
        "|R + j(omega L - 1/(omega C))| without a load", _AC,
        lambda c, at, across: np.abs(totals.steady_at(c, at).impedance), "frequency",
    ),
    Quantity(
        "impedance_phase", "arg Z", "angle", "steady", "inductive if positive",
        "Angle by which the source voltage leads the current.", "arg Z", _AC,
        lambda c, at, across: np.angle(totals.steady_at(c, at).impedance), "frequency",
    ),
    Quantity(
        "current", "I", "current", "steady", f"rms, {_ALL}", "Loop current.", "V/|Z|", _AC,
        lambda c, at, across: totals.current(c, at), "frequency",
    ),
    Quantity(
        "current_amplitude", "I_pk", "current", "steady", "peak, steady state, fundamental",
        "Amplitude of the loop current when the transient has died.", "V_pk/|Z|", _AC,
        lambda c, at, across: np.abs(totals.phasor_current(c, at)), "frequency",
    ),
    Quantity(
        "current_phase", "phi_i", "angle", "steady",
        "lags the source if negative; of the fundamental",
        "Phase of the current against the source.", "-arg Z", _AC,
        lambda c, at, across: np.angle(totals.steady_at(c, at).current), "frequency",
    ),
    Quantity(
        "resistor_voltage", "V_R", "voltage", "steady", f"rms, {_ALL}",
        "Voltage across the resistor.", "R I", _AC,
        lambda c, at, across: totals.current(c, at) * c.loop.resistance, "frequency",
    ),
    Quantity(
        "inductor_voltage", "V_L", "voltage", "steady",
        f"rms, winding resistance included; {_ALL}",
        "Voltage across the inductor's terminals.", "|R_w + j omega L| I", _AC,
        lambda c, at, across: totals.rms(c, at, lambda steady: steady.inductor), "frequency",
    ),
    Quantity(
        "capacitor_voltage", "V_C", "voltage", "steady",
        f"rms, series resistance included; {_ALL}",
        "Voltage across the capacitor's terminals.", "|r + 1/(j omega C)| I without a load", _AC,
        lambda c, at, across: totals.rms(c, at, lambda steady: steady.capacitor), "frequency",
    ),
    Quantity(
        "capacitor_voltage_amplitude", "V_C,pk", "voltage", "steady",
        "peak, steady state, fundamental",
        "Amplitude of the capacitor's terminal voltage when the transient has died.",
        "sqrt(2) V_C for a sine", _AC,
        lambda c, at, across: totals.level(c) * np.abs(totals.steady_at(c, at).capacitor),
        "frequency",
    ),
    Quantity(
        "resistor_power", "P_R", "power", "steady", f"mean, {_ALL}", "Heat in the resistor alone.",
        "R I^2", _AC, lambda c, at, across: totals.resistor_power(c, at), "frequency",
    ),
    Quantity(
        "real_power", "P", "power", "steady", f"mean, all losses of the loop; {_ALL}",
        "Power that the source delivers.", "V I cos(phi_i)", _AC,
        lambda c, at, across: totals.real_power(c, at), "frequency",
    ),
    Quantity(
        "reactive_power", "Q_r", "reactive_power", "steady",
        "inductive if positive; of the fundamental",
        "Reactive power that the source delivers.", "-V I sin(phi_i)", _AC,
        lambda c, at, across: totals.reactive_power(c, at), "frequency",
    ),
    Quantity(
        "apparent_power", "S", "apparent_power", "steady", f"rms times rms, {_ALL}",
        "Source voltage times current.", "V I", _AC,
        lambda c, at, across: totals.apparent_power(c, at), "frequency",
    ),
    Quantity(
        "power_factor", "cos phi", "number", "steady", f"unsigned, {_ALL}",
        "Real over apparent power.", "P/S", _AC,
        lambda c, at, across: totals.power_factor(c, at), "frequency",
    ),
    Quantity(
        "voltage_magnification", "m", "number", "steady", "amplitude over amplitude",
        "Capacitor voltage over source voltage; near Q at resonance.", "|V_C/V|", _AC,
        lambda c, at, across: np.abs(totals.steady_at(c, at).capacitor), "frequency",
    ),
    Quantity(
        "gain", "|H|", "number", "steady", "amplitude over amplitude",
        "Voltage across the named element (the capacitor if none is named) over the source's.",
        "|V_element/V|", _AC,
        lambda c, at, across: np.abs(totals.steady_at(c, at).across(across or "capacitor")),
        "frequency", True,
    ),
    Quantity(
        "peak_current", "i_max", "current", "switch-on", "peak magnitude over all time",
        "Largest current from closing on, the inrush.", "max |i(t)|", _SEARCH,
        lambda c, at, across: c.peak("current").value,
    ),
    Quantity(
        "peak_current_time", "t_i", "time", "switch-on", "none if only approached",
        "When the largest current flows.", "arg max |i(t)|", _SEARCH,
        lambda c, at, across: results.peak_time(c, "current"),
    ),
    Quantity(
        "peak_capacitor_voltage", "v_C,max", "voltage", "switch-on",
        "peak magnitude over all time, at the terminals",
        "Largest capacitor voltage from closing on.", "max |v_C(t)|", _SEARCH,
        lambda c, at, across: c.peak("capacitor").value,
    ),
    Quantity(
        "peak_capacitor_voltage_time", "t_C", "time", "switch-on", "none if only approached",
        "When the capacitor voltage is largest.", "arg max |v_C(t)|", _SEARCH,
        lambda c, at, across: results.peak_time(c, "capacitor"),
    ),
    Quantity(
        "peak_inductor_voltage", "v_L,max", "voltage", "switch-on",
        "peak magnitude over all time, at the terminals",
        "Largest inductor voltage from closing on.", "max |v_L(t)|", _SEARCH,
        lambda c, at, across: c.peak("inductor").value,
    ),
    Quantity(
        "peak_rate_of_rise", "(di/dt)_max", "current_rate", "switch-on",
        "peak magnitude over all time", "Largest rate of change of the current from closing on.",
        "max |di/dt|; V/L at closing for a step from rest", _SEARCH,
        lambda c, at, across: c.peak("current_rate").value,
    ),
    Quantity(
        "current_frequency_product", "i_max f_r", "current_rate", "switch-on",
        "peak current times hertz; none if overdamped",
        "Peak current times ringing frequency, by which switching devices are rated.",
        "i_max f_r", _FREE, lambda c, at, across: c.peak("current").value * results.ringing(c),
    ),
    Quantity(
        "beat_frequency", "f_b", "frequency", "switch-on",
        "none if overdamped, or the source has no frequency",
        "Distance of source and ringing frequency, at which their sum swells and fades.",
        "|f - f_r|", _FREE, lambda c, at, across: results.beat(c),
    ),
    Quantity(
        "worst_closing_angle_current", "phi_wi", "angle", "switch-on",
        "from the source's rising zero, from rest within half a turn; none if all are as bad",
        "Closing angle of the largest current; only with closing angle \"worst\".",
        "90 deg - arg Y_i(t_i)", _SEARCH,
        lambda c, at, across: results.worst_angle(c, "current"),
    ),
    Quantity(
        "worst_closing_angle_capacitor_voltage", "phi_wC", "angle", "switch-on",
        "from the source's rising zero, from rest within half a turn; none if all are as bad",
        "Closing angle of the largest capacitor voltage; only with closing angle \"worst\".",
        "90 deg - arg Y_C(t_C)", _SEARCH,
        lambda c, at, across: results.worst_angle(c, "capacitor"),
    ),
    Quantity(
        "overshoot", "o", "ratio", "switch-on", "share of the step, or of the steady amplitude",
        "How far the capacitor voltage passes its steady state.",
        "exp(-pi zeta/sqrt(1 - zeta^2)) for a step from rest without series resistance", _STEP,
        lambda c, at, across: overshoot(c),
    ),
    Quantity(
        "settling_time", "t_s", "time", "switch-on",
        "band 2 % unless stated with at, of the step or the steady amplitude; worst angle:"
        " that of the capacitor voltage",
        "Last time at which the capacitor voltage's transient is at or outside the band.",
        "last t with |v_C - steady| >= band * (step or steady amplitude)", _STEP,
        lambda c, at, across: settling_time(c, SETTLING_BAND if at is None else at), "ratio",
    ),
    Quantity(
        "let_through", "I^2 t", "let_through", "switch-on",
        "to the stated time; else over all time, of a source with a frequency over its first"
        " period, of a steady train over one; worst angle: its own",
        "Integral of the squared current, what a fuse or contact must pass.",
        "integral of i^2 dt; C V^2/(2 R) for a step from rest without a load", _STEP,
        lambda c, at, across: results.until(c, at), "time",
    ),
    Quantity(
        "let_through_time", "t_I2t", "time", "switch-on",
        "share stated with at, else half, of the let-through over all time or over the period",
        "When the running let-through has come to a share of the whole.",
        "t with integral to t = share * whole", _STEP,
        lambda c, at, across: let_through_time(c, HALF if at is None else at), "ratio",
    ),
    Quantity(
        "current_exceeding_time", "t_i>", "time", "switch-on",
        "of the current stated with at, peak; infinite if never",
        "When the current first exceeds a stated one.", "first t with |i(t)| > stated", _SEARCH,
        lambda c, at, across: results.exceeding(c, "current", at, 0), "current",
    ),
    Quantity(
        "capacitor_voltage_exceeding_time", "t_C>", "time", "switch-on",
        "of the voltage stated with at, peak at the terminals; infinite if never",
        "When the capacitor voltage first exceeds a stated one.",
        "first t with |v_C(t)| > stated", _SEARCH,
        lambda c, at, across: results.exceeding(c, "capacitor", at, 0), "voltage",
    ),
    Quantity(
        "current_exceeding_duration", "T_i>", "time", "switch-on",
        "of the current stated with at, peak; infinite if again and again",
        "For how long in all the current exceeds a stated one.",
        "sum of times with |i(t)| > stated", _SEARCH,
        lambda c, at, across: results.exceeding(c, "current", at, 1), "current",
    ),
    Quantity(
        "capacitor_voltage_exceeding_duration", "T_C>", "time", "switch-on",
        "of the voltage stated with at, peak at the terminals; infinite if again and again",
        "For how long in all the capacitor voltage exceeds a stated one.",
        "sum of times with |v_C(t)| > stated", _SEARCH,
        lambda c, at, across: results.exceeding(c, "capacitor", at, 1), "voltage",
    ),
    Quantity(
        "stored_energy", "W", "energy", "switch-on",
        "at the largest voltage behind the series resistance",
        "Largest energy stored in the capacitor.", "C v^2/2, v behind the series resistance", _FREE,
        lambda c, at, across: c.loop.capacitance * c.peak("dielectric").value ** 2 / 2,
    ),
)  # fmt: skip

#: Name to quantity, in the order of tables.
REGISTER: dict[str, Quantity] = {row.name: row for row in _ROWS}


def lookup(name: str, where: str) -> Quantity:
    """A quantity by its name.

    Parameters
    ----------
    name : str
        As in the register.
    where : str
        What asks for it; goes into the error.

    Returns
    -------
    Quantity

    Raises
    ------
    InputError
        If there is none, with the nearest name that there is.
    """
    if name in REGISTER:
        return REGISTER[name]
    from difflib import get_close_matches

    near = get_close_matches(name, REGISTER, 1)
    hint = f'Did you mean "{near[0]}"?' if near else 'The names: "rlc quantities"'
    raise InputError(where, name, "is not in the register of quantities", hint)
