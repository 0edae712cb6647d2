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
from rlc.render.closings import closing_angle, trapped_charge
from rlc.render.driving import (
    magnification,
    magnified,
    record,
    resonance,
    source_ends,
    switch_on_heat,
)
from rlc.render.findings import ELV_AC_PEAK, ELV_DC, Findings, Size, exceeds
from rlc.solver.case import Case
from rlc.solver.quantities import REGISTER
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
OVERSHOT = 1.2  # peak over the source's, or over the steady amplitude: a usual margin
LOSSLESS_QUALITY = 1e3  # above it a resistance is probably missing on the sheet
CONTACT_CURRENT = 1.0  # what small contacts, connectors and fuses are made for [A]
ARC_ENERGY = 1e-3  # in the inductance, when the loop is opened [J]

_MINUTE = 60.0
_NO_RATINGS, _NO_LIMITS = Ratings(), dict[str, float]()


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
    corners: Case | None = None,
    limits: Mapping[str, float] = _NO_LIMITS,
) -> tuple[Caution, ...]:
    """Cautions that this loop calls for, the most hazardous first.

    Parameters
    ----------
    case : Case
        The nominal switch-on: one loop, shape ().
    ratings : Ratings
        What the parts are made for.
    worst : mapping of str to float, optional
        Highest value over the parts' tolerances, samples included, by name in the register of
        quantities [SI unit of the quantity]. It counts where it is above that of `corners`.
    fuse : Fuse, optional
        What the let-through has to pass.
    closings : bool
        Whether other closings than the one asked for are compared: the worst angles, and
        closing onto a charged capacitor.
    corners : Case, optional
        The same switch-on with the parts at their limits, shape (n,), from which the highest
        values over the parts are computed. Without it no part has a tolerance.
    limits : mapping of str to float, optional
        Highest value that a target allows, by name in the register [SI unit of the quantity];
        other closings are held against it.

    Returns
    -------
    tuple of Caution
        The last two, the model's limits and what governs the work, are always there.

    Notes
    -----
    Voltages and currents are peak values unless rms is said. Under a sine up to four more peak
    searches are made: at the worst closing angles, and onto a charged capacitor; these are of
    the nominal case. The corners take one more.
    """
    found = Findings(case, ratings, worst or {}, fuse, corners, limits)
    rules = (row for row in _RULES if closings or row[0] not in _CLOSINGS)
    told = ((name, rule(found)) for name, rule in rules)
    return tuple(Caution(name, text) for name, text in told if text)


def _hazardous_source(found: Findings) -> str:
    if not found.hazardous_source:
        return ""
    held = "" if found.steady_source else " Its largest value is held against the limit for dc."
    return (
        f"The source, {found.source}, is above extra-low voltage (50 V ac rms or 120 V"
        f" ripple-free dc; IEC 61140, IEC 61558-1).{held} Every terminal of the loop is at"
        " hazardous voltage."
    )


def _extra_low_voltage(found: Findings) -> str:
    if found.hazardous_source:
        return ""
    limit = ELV_AC_PEAK if found.alternating else ELV_DC
    peaks = (
        ("capacitor", found.capacitor),
        ("inductor", found.inductor),
        ("resistor", found.resistor),
    )
    above = [f"{name} {size}" for name, size in peaks if exceeds(size.highest, limit)]
    if not above:
        return ""
    words = "70.7 V peak for 50 V ac rms" if found.alternating else "120 V dc"
    return (
        f"The source, {found.source}, is within extra-low voltage, but parts of the loop go"
        f" above it ({words}; IEC 61140, IEC 61558-1). Peak voltages: {'; '.join(above)}."
        " Their terminals are then at hazardous voltage."
    )


def _stored_energy(found: Findings) -> str:
    if not (found.shocks or found.burns):
        return ""
    told = [f"Peak voltage on the capacitor: {found.charge}. Energy in it: {found.energy}."]
    burns = "short circuit across it sparks, welds contacts and burns."
    if found.shocks:
        more = f", and a {burns}" if found.burns else "."
        told.append(f"It is a shock hazard with the source off as well{more}")
    else:
        told.append(f"A {burns}")
    return " ".join(told)


def _residual_voltage(found: Findings) -> str:
    if not (found.shocks or found.burns):
        return ""
    charge, load = found.charge, float(found.loop.load_resistance)
    prove = "prove it dead before touching it"
    if math.isinf(load):
        held = str(charge) if math.isfinite(charge.nominal) else "any voltage"
        left = found.steady("dielectric")
        settled = f"; opened in steady state: {left}" if left.highest > 0 else ""
        return (
            "Once the loop is opened nothing discharges the capacitor. It may hold for a long"
            f" time: {held}{settled}. Short it through a resistor and {prove}."
        )
    head = (
        f"Once the source is off, the load of {show(load, 'resistance')} discharges the capacitor"
    )
    tail = f" If the load comes off or fails, the charge stays: {prove}."
    path = load + float(found.loop.series_resistance)
    start = Size(charge.nominal * load / path, charge.highest * load / path, "voltage")
    if not start.highest > RESIDUAL_VOLTAGE:
        time_constant = found.size(lambda case: path * case.loop.capacitance, "time")
        return f"{head} with a time constant of {time_constant.told(_duration)}.{tail}"
    time = found.discharge(RESIDUAL_VOLTAGE)
    working, state = float(REGISTER["capacitor_voltage"](found.case)), "in steady state"
    if not working > 0:
        working, state = charge.nominal, "at its peak"
    allowed, rule = _TIMES_ALLOWED[working > _LOW_VOLTAGE]
    takes = "this takes longer" if time.nominal > allowed else "this takes less"
    if not time.nominal > allowed and time.highest > allowed:
        takes = "over the parts this may take longer"
    rms = " rms" if found.alternating else ""
    here = f"{found.nominal}{show(working, 'voltage')}{rms} {state}"
    return (
        f"{head} from its peak ({start}) to 50 V in {time.told(_duration)}. For information:"
        f" {rule}; with {here}, {takes}.{tail}"
    )


def _duration(seconds: float) -> str:
    if not 2 * _MINUTE < seconds < math.inf:
        return show(seconds, "time")
    return f"{show(seconds / _MINUTE, 'number')} min"


def _undamped(found: Findings) -> str:
    if not found.quality > LOSSLESS_QUALITY:
        return ""
    if math.isfinite(found.quality):
        quality = show(found.quality, "number")
        return (
            f"The quality factor of {quality} is more than real parts usually give."
            " Put winding, contact and series resistances on the sheet: they bound the peaks."
        )
    at_resonance = found.alternating and exceeds(
        found.capacitor.nominal, LOSSLESS_QUALITY * found.level
    )
    driven = "as here, it grows" if at_resonance else "it would grow"
    return (
        "The loop has no resistance, so its ringing never dies; driven at its resonance,"
        f" {driven} without bound. Real parts have losses: put them on the sheet."
    )


def _capacitor_overvoltage(found: Findings) -> str:
    peak, ratings, told = found.capacitor, found.ratings, []
    rated, rated_rms = ratings.capacitor_voltage, ratings.capacitor_voltage_rms
    if rated is not None and exceeds(peak.highest, rated):
        told.append(
            f"Peak capacitor voltage: {peak}, above the rated voltage of {show(rated, 'voltage')}."
        )
    elif rated is None and peak.highest > OVERSHOT * found.level > 0:
        source = "the source" if found.case.source.kind == "dc" else "the source's peak"
        told.append(
            f"Peak capacitor voltage: {magnified(found, peak, f' {source}')}."
            " No voltage rating is stated for peaks; the part must withstand them."
        )
    name = "capacitor_voltage"
    rms = found.size(REGISTER[name], "voltage", {name: 1.0})
    if rated_rms is not None and exceeds(rms.highest, rated_rms):
        limit = show(rated_rms, "voltage")
        told.append(f"Steady capacitor voltage, rms: {rms}, above the rated {limit} rms.")
    return " ".join(told)


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
    if not (exceeds(found.current.highest, CONTACT_CURRENT) and found.inrush > OVERSHOT):
        return ""
    largest = "largest steady value" if found.case.source.orders else "steady amplitude"
    steady = f" ({largest}: {found.steady('current')})" if found.alternating else ""
    told = [
        f"Peak current at switch-on: {found.current}{steady}."
        f" Contacts, connectors and fuses carry it{_let_through(found)}."
    ]
    if found.ratings.inductor_saturation is None:
        told.append(
            "No saturation current is stated: if a core saturates below this, the true peak is"
            " higher."
        )
    return " ".join(told)


def _let_through(found: Findings) -> str:
    """The end of a sentence on what a fuse lets through, where that is bounded."""
    until = found.let_through_end
    passed, when = found.let_through(until), "over all time"
    if not math.isfinite(passed.nominal):
        return ""
    if found.alternating:
        when = "in the first source period"
    elif found.case.repeats:
        when = "in one period of the steady train"
    elif until is not None:
        when = f"in the first {show(until, 'time')}"
    return f"; the let-through {when} is {passed}"


def _fuse(found: Findings) -> str:
    fuse = found.fuse
    if fuse is None:
        return ""
    target = fuse.target(found.case)
    passed = found.let_through(target.at)
    once = "one switch-on"
    if found.case.repeats:
        once = "one period of the steady train"
    elif found.alternating:
        once = "one switch-on, in the first source period,"
    melting = show(fuse.melting_let_through, "let_through")
    lasting = float(REGISTER["current"](found.case))
    stays = ""
    if math.isfinite(lasting) and lasting * lasting > 0:
        stays = (
            f" The {show(lasting, 'current')} rms that stays afterwards is not in it and heats the"
            f" fuse all the time: held against the melting value alone it would add that every"
            f" {show(fuse.melting_let_through / lasting**2, 'time')}. It is a matter of the fuse's"
            " rated current."
        )
    return (
        f"The fuse melts at {melting}; the let-through of {once} is {passed}. For"
        f" {fuse.operations} operations practice allows {show(fuse.share, 'ratio')} of what"
        f" melts it, {show(target.maximum, 'let_through')}: the maker's pulse curve governs."
        f"{stays}"
    )


def _interrupting(found: Findings) -> str:
    if not exceeds(found.inductive_energy.highest, ARC_ENERGY):
        return ""
    return (
        f"Peak current: {found.current}. Energy in the inductance: {found.inductive_energy}."
        " Opening the loop while current flows (a bouncing contact, a blowing fuse) turns it into"
        " an arc and an overvoltage across the opening."
    )


def _model_limits(found: Findings) -> str:
    told = (
        "The model is a lumped loop of linear parts: no saturation, no skin effect, no"
        " capacitance that falls with voltage. Contact and lead resistances that are not on the"
        " sheet are left out."
    )
    if bool(found.case.equation.underdamped):
        # Measured; the source is beside the check in tests/published.
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
    ("magnification", magnification),
    ("resonance", resonance),
    ("saturation", _saturation),
    ("inrush", _inrush),
    ("fuse", _fuse),
    ("switch-on-heat", switch_on_heat),
    ("closing-angle", closing_angle),
    ("trapped-charge", trapped_charge),
    ("source-ends", source_ends),
    ("record", record),
    ("model-limits", _model_limits),
    ("deference", _deference),
)
