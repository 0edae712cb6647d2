"""What a technician has to be told beside the numbers: cautions computed from the loop.

Limits that a standard sets were seen through public pages, not in the standard: "confirmed"
means that such a page states the figure. The other thresholds only decide when to speak; they
follow common practice, have no source and are not printed as limits.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from rlc.front.marking import show
from rlc.render.findings import ELV_AC_PEAK, ELV_DC, Findings, Size, exceeds, peak_of
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
from rlc.solver.steady import half_power_frequencies
from rlc.solver.targets import Fuse, Ratings

# NEC 460.6: 50 V or less within 1 min, for capacitors up to 1000 V (600 V in older editions);
# above, 5 min in the California Code of Regulations, Title 8, section 2893: both confirmed.
RESIDUAL_VOLTAGE = 50.0
_LOW_VOLTAGE = 1000.0
_TIMES_ALLOWED = (
    (60.0, "NEC 460.6 asks for 50 V or less within 1 min (capacitors up to 1000 V)"),
    (
        300.0,
        "California Title 8, section 2893 asks for 50 V or less within 5 min (above 1000 V)",
    ),
)

# Common practice, no source:
MAGNIFIED = 2.0  # steady voltage over the source's: what a part chosen for the source may have
OVERSHOT = 1.2  # peak over the source's, or over the steady amplitude: a usual margin
LOSSLESS_QUALITY = 1e3  # above it a resistance is probably missing on the sheet
RESONANT_QUALITY = 1.0  # below it resonance magnifies nothing
CONTACT_CURRENT = 1.0  # what small contacts, connectors and fuses are made for [A]
ARC_ENERGY = 1e-3  # in the inductance, when the loop is opened [J]
NOTABLE_RISE = 1.01  # smaller differences between two closings are not worth a sentence

_SAME_ANGLE = math.radians(1.0)
_NO_RATINGS = Ratings()


@dataclass(frozen=True)
class Caution:
    """One thing to be told.

    Attributes
    ----------
    id : str
        Stable name, for programs.
    text : str
        One to three plain sentences with the numbers.
    """

    id: str
    text: str


def cautions(
    case: Case,
    ratings: Ratings = _NO_RATINGS,
    worst: Mapping[str, float] | None = None,
    *,
    fuse: Fuse | None = None,
    closings: bool = True,
) -> tuple[Caution, ...]:
    """Cautions that this loop calls for, the most hazardous first.

    Parameters
    ----------
    case : Case
        The nominal switch-on: one loop, shape ().
    ratings : Ratings
        What the parts are made for.
    worst : mapping of str to float, optional
        Highest value over the parts' tolerances, by name in the register of quantities [SI
        unit of the quantity]. Where one is missing or not a number, the nominal value stands.
    fuse : Fuse, optional
        What the let-through has to pass.
    closings : bool
        Whether other closings than the one asked for are compared: the worst angles, and
        closing onto a charged capacitor.

    Returns
    -------
    tuple of Caution
        The last two, the model's limits and what governs the work, are always there.

    Notes
    -----
    Voltages and currents are peak values unless rms is said. Under a sine up to four more peak
    searches are made: at the worst closing angles, and onto a charged capacitor.
    """
    found = Findings(case, ratings, worst or {}, fuse)
    rules = (row for row in _RULES if closings or row[0] not in _CLOSINGS)
    told = ((name, rule(found)) for name, rule in rules)
    return tuple(Caution(name, text) for name, text in told if text)


def _hazardous_source(found: Findings) -> str:
    if not found.hazardous_source:
        return ""
    return (
        f"The source, {found.source}, is above extra-low voltage (50 V ac rms or 120 V"
        " ripple-free dc; IEC 61140, IEC 61558-1). Every terminal of the loop is at hazardous"
        " voltage."
    )


def _extra_low_voltage(found: Findings) -> str:
    if found.hazardous_source:
        return ""
    resistor = float(found.loop.resistance) * found.current.nominal
    limit = ELV_AC_PEAK if found.sine else ELV_DC
    peaks = (
        ("capacitor", found.capacitor),
        ("inductor", found.inductor),
        ("resistor", Size(resistor, resistor, "voltage")),
    )
    above = [f"{name} {size}" for name, size in peaks if exceeds(size.highest, limit)]
    if not above:
        return ""
    words = "70.7 V peak for 50 V ac rms" if found.sine else "120 V dc"
    return (
        f"The source, {found.source}, is within extra-low voltage, but parts of the loop go"
        f" above it ({words}; IEC 61140, IEC 61558-1). Peak voltages: {'; '.join(above)}."
        " Their terminals are then at hazardous voltage."
    )


def _stored_energy(found: Findings) -> str:
    if not (found.shocks or found.burns):
        return ""
    hurts = "a shock hazard with the source off as well" if found.shocks else ""
    burns = "a short circuit across it sparks, welds contacts and burns" if found.burns else ""
    return (
        f"Peak voltage on the capacitor: {found.charge}. The energy in it is then"
        f" {found.energy}: {', and '.join(filter(None, (hurts, burns)))}."
    )


def _residual_voltage(found: Findings) -> str:
    if not (found.shocks or found.burns):
        return ""
    charge, load = found.charge.highest, float(found.loop.load_resistance)
    prove = "prove it dead before touching it"
    if math.isinf(load):
        held = show(charge, "voltage") if math.isfinite(charge) else "any voltage"
        settled = show(found.steady("dielectric"), "voltage")
        later = f" ({settled} if opened in steady state)" if found.level else ""
        return (
            f"Once the loop is opened nothing discharges the capacitor: it may hold up to {held}"
            f"{later} for a long time. Short it through a resistor and {prove}."
        )
    path = load + float(found.loop.series_resistance)
    time_constant = path * float(found.loop.capacitance)
    start = charge * load / path
    head = (
        f"Once the source is off, the load of {show(load, 'resistance')} discharges the capacitor"
    )
    tail = f" If the load comes off or fails, the charge stays: {prove}."
    if not start > RESIDUAL_VOLTAGE:
        return f"{head} with a time constant of {show(time_constant, 'time')}.{tail}"
    time = time_constant * math.log(start / RESIDUAL_VOLTAGE)
    allowed, rule = _TIMES_ALLOWED[float(found.case.source.rms) > _LOW_VOLTAGE]
    return (
        f"{head} from {show(start, 'voltage')} to 50 V in {show(time, 'time')}; for information,"
        f" {rule}, and this takes {'longer' if time > allowed else 'less'}.{tail}"
    )


def _undamped(found: Findings) -> str:
    if not found.quality > LOSSLESS_QUALITY:
        return ""
    if math.isfinite(found.quality):
        quality = show(found.quality, "number")
        return (
            f"The quality factor of {quality} is more than real parts usually give."
            " Put winding, contact and series resistances on the sheet: they bound the peaks."
        )
    at_resonance = found.sine and exceeds(found.capacitor.nominal, LOSSLESS_QUALITY * found.level)
    driven = "as here, it grows" if at_resonance else "it would grow"
    return (
        "The loop has no resistance, so its ringing never dies; driven at its resonance,"
        f" {driven} without bound. Real parts have losses: put them on the sheet."
    )


def _capacitor_overvoltage(found: Findings) -> str:
    peak, ratings, told = found.capacitor, found.ratings, []
    rms = found.size(
        float(REGISTER["capacitor_voltage"](found.case)), "capacitor_voltage", "voltage"
    )
    rated, rated_rms = ratings.capacitor_voltage, ratings.capacitor_voltage_rms
    if rated is not None and exceeds(peak.highest, rated):
        told.append(
            f"Peak capacitor voltage: {peak}, above the rated voltage of {show(rated, 'voltage')}."
        )
    elif rated is None and peak.highest > OVERSHOT * found.level > 0:
        times = f" ({show(peak.nominal / found.level, 'number')} times the source's peak)"
        told.append(
            f"Peak capacitor voltage: {peak}{times if math.isfinite(peak.nominal) else ''}."
            " No voltage rating is stated for peaks; the part must withstand them."
        )
    if rated_rms is not None and exceeds(rms.highest, rated_rms):
        limit = show(rated_rms, "voltage")
        told.append(f"Steady capacitor voltage: {rms} rms, above the rated {limit} rms.")
    return " ".join(told)


def _magnification(found: Findings) -> str:
    if not (found.sine and found.level):
        return ""
    sizes = ((name, found.steady(name), found.steady_size(name)) for name in _REACTIVE)
    told = [
        f"{name} {show(nominal / found.level, 'number')} times ({size} peak)"
        for name, nominal, size in sizes
        if math.isfinite(nominal) and size.highest >= MAGNIFIED * found.level
    ]
    if not told:
        return ""
    return (
        f"In steady state more than the source's {show(found.level, 'voltage')} peak lies across"
        f" parts of the loop: {'; '.join(told)}."
    )


def _resonance(found: Findings) -> str:
    eq, frequency = found.case.equation, float(found.case.source.frequency)
    lower, upper = (float(edge) for edge in half_power_frequencies(eq))
    if not (found.sine and found.quality >= RESONANT_QUALITY and lower <= frequency <= upper):
        return ""
    band = f"{show(lower, 'frequency')} to {show(upper, 'frequency')}"
    natural = show(float(eq.natural) / (2 * math.pi), "frequency")
    return (
        f"The source's {show(frequency, 'frequency')} lies in the half-power band, {band}, around"
        f" the resonance at {natural}. A small change of a part or of the frequency changes"
        " current and voltages much."
    )


def _saturation(found: Findings) -> str:
    limit = found.ratings.inductor_saturation
    if limit is None or not exceeds(found.current.highest, limit):
        return ""
    return (
        f"Peak current: {found.current}, above the inductor's saturation current of"
        f" {show(limit, 'current')}. The inductance drops there, so the true peak is higher than"
        " the one computed."
    )


def _inrush(found: Findings) -> str:
    peak, steady = found.current, found.steady("current")
    if not (exceeds(peak.highest, CONTACT_CURRENT) and peak.highest > OVERSHOT * steady):
        return ""
    amplitude = f" (steady amplitude {show(steady, 'current')})" if found.sine else ""
    told = [
        f"Peak current at switch-on: {peak}{amplitude}."
        f" Contacts, connectors and fuses carry it{found.let_through}."
    ]
    if found.ratings.inductor_saturation is None:
        told.append(
            "No saturation current is stated: if a core saturates below this, the true peak is"
            " higher."
        )
    return " ".join(told)


def _fuse(found: Findings) -> str:
    fuse = found.fuse
    if fuse is None:
        return ""
    target = fuse.target(found.case)
    passed = show(float(target.values(found.case)), "let_through")
    melting = show(fuse.melting_let_through, "let_through")
    return (
        f"The fuse melts at {melting}; the let-through of one switch-on is {passed}. For"
        f" {fuse.operations} operations practice allows {show(fuse.share, 'ratio')} of what"
        f" melts it, {show(target.maximum, 'let_through')}: the maker's pulse curve governs."
    )


def _interrupting(found: Findings) -> str:
    current = found.current.nominal
    energy = 0.5 * float(found.loop.total_inductance) * current * current
    if not exceeds(energy, ARC_ENERGY):
        return ""
    return (
        f"The inductance stores {show(energy, 'energy')} at the peak current of"
        f" {show(current, 'current')}. Opening the loop while current flows (a bouncing contact,"
        " a blowing fuse) turns it into an arc and an overvoltage across the opening."
    )


def _closing_angle(found: Findings) -> str:
    if not found.searched:
        return ""
    case, worst = found.case, found.worst_closing
    angles = {element: found.worst_angle(element) for element in ("current", "capacitor")}
    if case.source.closing_angle is None:
        turn = math.pi if found.at_rest else 2 * math.pi
        apart = (angles["current"] - angles["capacitor"] + turn / 2) % turn - turn / 2
        if not abs(apart) > _SAME_ANGLE:
            return ""
        first, second = (show(angle, "angle", 3) for angle in angles.values())
        return (
            f"The largest current (closing at {first}) and the largest capacitor voltage (closing"
            f" at {second}) belong to different closings; no single one shows both."
        )
    told = [
        f"{words} {show(peak_of(worst, element), kind)}"
        + (f" (at {show(angles[element], 'angle', 3)})" if math.isfinite(angles[element]) else "")
        for element, words, kind in _WATCHED
        if peak_of(worst, element) > NOTABLE_RISE * peak_of(case, element)
    ]
    if not told:
        return ""
    return (
        f"The peaks hold for closing at {show(float(case.source.closing_angle), 'angle')}; an"
        " uncontrolled switch closes anywhere. At the worst angle of each:"
        f" {' and '.join(told)}, peak."
    )


def _trapped_charge(found: Findings) -> str:
    case, told = found.case, []
    trapped = float(case.capacitor_voltage)
    if trapped and found.level:
        told.append(
            f"The peaks hold for a capacitor charged to {show(trapped, 'voltage')} at closing"
        )
        if found.sine:
            told[0] += "; another charge changes them."
        else:
            other = Case(case.loop, case.source, -case.capacitor_voltage, case.initial_current)
            told[0] += f"; with the opposite polarity {_peaks_of(other)}."
    left = found.steady("dielectric")
    if found.searched and math.isfinite(left) and left > 0:
        again = found.reclosing(left)
        if any(
            peak_of(again, element) > NOTABLE_RISE * peak_of(found.worst_closing, element)
            for element, _, _ in _WATCHED
        ):
            until = "" if math.isinf(found.loop.load_resistance) else " until the load drains it"
            told.append(
                f"Opening can leave {show(left, 'voltage')} on the capacitor{until}. Reclosing"
                f" onto it at the worst angle of each, {_peaks_of(again)}."
            )
    return " ".join(told)


def _peaks_of(case: Case) -> str:
    """Both peaks of another closing, as the end of a sentence."""
    return (
        f"the current reaches {show(peak_of(case, 'current'), 'current')}"
        f" and the capacitor voltage {show(peak_of(case, 'capacitor'), 'voltage')}, peak"
    )


def _model_limits(found: Findings) -> str:
    told = (
        "The model is a lumped loop of linear parts: no saturation, no skin effect, no"
        " capacitance that falls with voltage. Contact and lead resistances that are not on the"
        " sheet are left out."
    )
    if bool(found.case.equation.underdamped):
        # Measured: pololu.com/docs/0J16, 12 V supply and about 9 uF of ceramic.
        told += (
            " High-permittivity ceramic capacitors lose capacitance under bias, and the voltage"
            " can then ring beyond twice the supply: almost 40 V from 12 V has been measured."
        )
    return told


def _deference(found: Findings) -> str:
    return (
        "These figures are computed from the values on the sheet. Local codes, the equipment's"
        " own standard and the practice of qualified, licensed people govern work on live parts."
        " The limits named here are those usually deferred to; check them in the edition in force."
    )


_REACTIVE = ("capacitor", "inductor")
_WATCHED = (("current", "current", "current"), ("capacitor", "capacitor voltage", "voltage"))
_CLOSINGS = ("closing-angle", "trapped-charge")

#: Identifier and rule of each caution, the most hazardous first.
_RULES: tuple[tuple[str, Callable[[Findings], str]], ...] = (
    ("hazardous-source", _hazardous_source),
    ("extra-low-voltage", _extra_low_voltage),
    ("stored-energy", _stored_energy),
    ("residual-voltage", _residual_voltage),
    ("undamped", _undamped),
    ("interrupting", _interrupting),
    ("capacitor-overvoltage", _capacitor_overvoltage),
    ("magnification", _magnification),
    ("resonance", _resonance),
    ("saturation", _saturation),
    ("inrush", _inrush),
    ("fuse", _fuse),
    ("closing-angle", _closing_angle),
    ("trapped-charge", _trapped_charge),
    ("model-limits", _model_limits),
    ("deference", _deference),
)
