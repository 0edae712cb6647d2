"""How quantities are written: numbers, unit symbols, prefixes, and the letters printed on parts.

Letters are those of IEC 60062. The standard itself was not at hand: "confirmed" below means that
a public page states the entry; the other entries are unconfirmed, from memory, and say so.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Context, Decimal, localcontext
from typing import NamedTuple

NUMBER = r"[+\-\u2212]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+\-\u2212]?[0-9]+)?"
PREFIXES = {
    "f": -15, "p": -12, "n": -9, "u": -6, "µ": -6, "\u03bc": -6, "m": -3,
    "k": 3, "M": 6, "G": 9, "T": 12,
}  # fmt: skip

_PRINTED = {0: ""} | {power: prefix for prefix, power in PREFIXES.items() if prefix.isascii()}
ZERO_CELSIUS = Decimal("273.15")
# More digits than any double has; overflow becomes infinity instead of an exception.
EXACT = Context(prec=400, Emin=-99999, Emax=99999, traps=[])

_ONE, _PPM, _PERCENT = Decimal(1), Decimal("1e-6"), Decimal("0.01")
_DEGREE = Decimal("0.01745329251994329576923690768488612713442871888541725456097191")  # pi/180


class Kind(NamedTuple):
    """How one kind of quantity is written.

    Attributes
    ----------
    symbol, pint : str
        Unit symbol that is printed, and SI unit in pint's words.
    units : dict of str to Decimal
        Unit symbols and the exact value of each [SI]; "" where a bare number will do.
    prefixes : bool
        Whether SI prefixes go before the symbols.
    plausible : tuple of float or None
        Range outside of which a value other than zero gets a note [SI].
    example : str
        A text to paste.
    """

    symbol: str
    pint: str
    units: dict[str, Decimal]
    prefixes: bool
    plausible: tuple[float, float] | None
    example: str


def _same(*symbols: str) -> dict[str, Decimal]:
    return dict.fromkeys(symbols, _ONE)


_OHMS = _same("ohm", "\u03a9", "\u2126", "Ohm", "ohms")
_FRACTIONS = {"%": _PERCENT, "ppm": _PPM, "": _ONE}
_PER_KELVIN = {"ppm/K": _PPM, "1/K": _ONE, "%/K": _PERCENT}
# A prefix goes with the symbol next to it, so kA^2 is (kA)^2: no prefixes of ours on let-through.
KINDS: dict[str, Kind] = {
    "resistance": Kind("ohm", "ohm", _OHMS, True, (1e-6, 1e12), "4.7 kohm"),
    "inductance": Kind("H", "henry", _same("H"), True, (1e-10, 1e3), "10 mH"),
    "capacitance": Kind("F", "farad", _same("F"), True, (1e-14, 1e4), "4.7 uF"),
    "conductance": Kind("S", "siemens", _same("S"), True, (1e-13, 1e6), "20 uS"),
    "voltage": Kind("V", "volt", _same("V"), True, (1e-9, 1e7), "24 V"),
    "current": Kind("A", "ampere", _same("A"), True, (1e-12, 1e7), "2 A"),
    "frequency": Kind("Hz", "hertz", _same("Hz"), True, (1e-2, 1e12), "50 Hz"),
    "time": Kind("s", "second", _same("s"), True, (1e-15, 1e9), "20 ms"),
    "power": Kind("W", "watt", _same("W"), True, (1e-12, 1e10), "5 W"),
    "reactive_power": Kind("var", "volt_ampere", _same("var"), True, (1e-12, 1e10), "5 kvar"),
    "apparent_power": Kind("VA", "volt_ampere", _same("VA"), True, (1e-12, 1e10), "5 kVA"),
    "energy": Kind("J", "joule", _same("J"), True, (1e-15, 1e12), "2.5 J"),
    "angle": Kind(
        "deg", "radian", {"rad": _ONE, "deg": _DEGREE, "°": _DEGREE}, False, None, "30 deg"
    ),
    "let_through": Kind(
        "A^2 s", "ampere**2 * second", _same("A^2 s", "A²s", "A2s"), False, None, "120 A^2 s"
    ),
    "temperature": Kind(
        "degC", "kelvin", _same("degC", "°C", "K"), False, (173.15, 773.15), "25 degC"
    ),
    "temperature_difference": Kind("K", "kelvin", _same("K"), True, (1e-6, 1e3), "40 K"),
    "temperature_coefficient": Kind(
        "ppm/K", "1/kelvin", _PER_KELVIN, False, (1e-9, 0.1), "50 ppm/K"
    ),
    "ratio": Kind("%", "dimensionless", _FRACTIONS, False, None, "5 %"),
    "number": Kind("", "dimensionless", _same(""), False, None, "0.7"),
    "voltage_rate": Kind("V/s", "volt/second", _same("V/s"), True, (1e-6, 1e15), "5 kV/s"),
    "current_rate": Kind("A/s", "ampere/second", _same("A/s"), True, (1e-9, 1e15), "200 A/s"),
}

# What a text that is no quantity turns out to be, most telling first.
MISTAKES: tuple[tuple[re.Pattern[str], str], ...] = tuple(
    (re.compile(pattern), rule)
    for pattern, rule in (
        (r"^[+\-\u2212]?(?i:nan|inf|infinity|∞)(?![A-Za-z])", "must be a finite number"),
        (
            r"[0-9],|,[0-9]",
            "uses a comma; write the decimal mark as a point, and thousands with no separator",
        ),
        (
            r"[0-9]['’_][0-9]|^[+\-\u2212]?[0-9]{1,3}(?: [0-9]{3})+(?![0-9])",
            "separates thousands; write the digits of the number together",
        ),
        (r"[0-9.] ?[ij](?![A-Za-z])", "is a complex number, and a real one is expected"),
        (
            rf"[()]|^{NUMBER} ?[*/^+\-\u2212]",
            "is an expression; work it out and write one number",
        ),
        (
            rf"^{NUMBER}.*(?: [*/+\-\u2212±]*|[±;]) ?[0-9]|^[^ ]*\.[0-9]*\.",
            "holds several numbers, and one is expected",
        ),
    )
)

# Power of ten for the letter that stands in place of the decimal mark.
# Resistance, R K M: confirmed; G and T: unconfirmed, from memory. Printed in upper case; a
# small k is taken too, because 2k2 is how it is typed, but never a small m for mega.
# Capacitance: unconfirmed, from memory. Inductance: by analogy with capacitance, unconfirmed;
# R is left out, because on inductors some makers mean microhenries by it.
VALUE_LETTERS: dict[str, dict[str, int]] = {
    "resistance": {"R": 0, "k": 3, "K": 3, "M": 6, "G": 9, "T": 12},
    "inductance": {"n": -9, "u": -6, "µ": -6, "\u03bc": -6, "m": -3, "H": 0},
    "capacitance": {"p": -12, "n": -9, "u": -6, "µ": -6, "\u03bc": -6, "m": -3, "F": 0},
}

_VALUE = re.compile(r"(?=.*[0-9])([0-9]*)([^0-9\s])([0-9]*)")


@dataclass(frozen=True)
class Tolerance:
    """How far a value may lie from its nominal.

    Attributes
    ----------
    low, high : float
        Signed offsets; shares of the nominal [1] if `relative`, else in its own unit [SI].
    relative : bool
        Which of the two they are.
    text : str
        As it was given, with single spaces.
    """

    low: float
    high: float
    relative: bool
    text: str

    def limits(self, nominal: float) -> tuple[float, float]:
        """Smallest and largest value.

        Parameters
        ----------
        nominal : float
            Value [SI]. A relative tolerance goes with its magnitude: +80 % of -5 V is -9 V.

        Returns
        -------
        tuple of float
            Lower and upper limit [unit of `nominal`].
        """
        unit = nominal if self.relative else 1.0
        ends = nominal + self.low * unit, nominal + self.high * unit
        return min(ends), max(ends)


class ToleranceLetter(NamedTuple):
    """What a tolerance letter means.

    Attributes
    ----------
    low, high : Decimal
        Signed offsets [% of the value].
    picofarads : Decimal or None
        Symmetrical offset [pF] that the letter means on a capacitor below 10 pF, if it has one.
    """

    low: Decimal
    high: Decimal
    picofarads: Decimal | None = None


def _symmetrical(percent: str, picofarads: str | None = None) -> ToleranceLetter:
    offset = Decimal(percent)
    return ToleranceLetter(-offset, offset, None if picofarads is None else Decimal(picofarads))


def _sides(low: str, high: str) -> ToleranceLetter:
    return ToleranceLetter(Decimal(low), Decimal(high))


TOLERANCE_LETTERS: dict[str, ToleranceLetter] = {
    "E": _symmetrical("0.005"),  # unconfirmed, from memory
    "L": _symmetrical("0.01"),  # unconfirmed, from memory
    "P": _symmetrical("0.02"),  # unconfirmed, from memory; see CONTESTED_LETTERS
    "W": _symmetrical("0.05"),  # unconfirmed, from memory
    "B": _symmetrical("0.1", "0.1"),  # per cent unconfirmed; pF confirmed
    "C": _symmetrical("0.25", "0.25"),  # per cent unconfirmed; pF confirmed
    "D": _symmetrical("0.5", "0.5"),  # both confirmed
    "F": _symmetrical("1", "1"),  # per cent confirmed; pF unconfirmed, from memory
    "G": _symmetrical("2", "2"),  # per cent confirmed; pF unconfirmed, from memory
    "J": _symmetrical("5"),  # confirmed
    "K": _symmetrical("10"),  # confirmed
    "M": _symmetrical("20"),  # confirmed
    "N": _symmetrical("30"),  # confirmed
    "Q": _sides("-10", "30"),  # unconfirmed, from memory
    "S": _sides("-20", "50"),  # unconfirmed, from memory
    "T": _sides("-10", "50"),  # confirmed
    "Z": _sides("-20", "80"),  # confirmed
}

# Letters that a maker was seen to print on capacitors with another meaning than the standard's.
CONTESTED_LETTERS: dict[str, str] = {"P": "0.02 % (standard) or -0 % / +100 % (some makers)"}


def show(value: float | None, kind: str, digits: int = 4) -> str:
    """Write an SI value so that `read` gives it back to the digits printed.

    Parameters
    ----------
    value : float or None
        SI value [unit of `kind`].
    kind : str
        Key of `KINDS`.
    digits : int
        Significant digits, one or more; zeros at the end are dropped.

    Returns
    -------
    str
        Plain ASCII with an engineering prefix, as in "470 nF"; angles in deg, ratios in %,
        temperatures in degC (to 1e-9 at most); "-" for None or not a number, "unbounded" for
        infinity.

    Examples
    --------
    >>> show(999.96, "resistance"), show(4.7e-7, "capacitance")
    ('1 kohm', '470 nF')
    """
    if value is None or math.isnan(value):
        return "-"
    if math.isinf(value):
        return "unbounded" if value > 0 else "-unbounded"
    entry = KINDS[kind]
    with localcontext(EXACT):
        # repr is the shortest decimal that stands for this double: no binary noise to round.
        number = Decimal(repr(float(value)))
        if kind == "temperature":
            # The difference would bring out the last bit of the kelvin value.
            number = round(number - ZERO_CELSIUS, 9)
        number /= entry.units[entry.symbol]
        number = Context(prec=digits).plus(number)
        if not number:
            return f"0 {entry.symbol}".rstrip()
        power = 3 * (number.adjusted() // 3)
        prefix, tail = "", ""
        if entry.prefixes and power in _PRINTED:
            prefix = _PRINTED[power]
        elif -4 < number.adjusted() < 5:
            power = 0
        else:
            tail = f"e{power}"
        mantissa = f"{number.scaleb(-power).normalize():f}"
    return f"{mantissa}{tail} {prefix}{entry.symbol}".rstrip()


def label(kind: str) -> str:
    """The kind in words."""
    return kind.replace("_", " ")


def scale_of(unit: str, kind: str) -> Decimal | None:
    """Exact value of a unit in our table, prefix included, or None if not of this kind [SI].

    Parameters
    ----------
    unit, kind : str
        A unit as it was typed, and a key of `KINDS`.
    """
    entry = KINDS[kind]
    if unit in entry.units:
        return entry.units[unit]
    if entry.prefixes and unit[:1] in PREFIXES and unit[1:] in entry.units:
        return entry.units[unit[1:]].scaleb(PREFIXES[unit[0]])
    return None


def respelled(unit: str, kind: str) -> str:
    """The unit of this kind that differs from `unit` by capital letters only, or nothing.

    Parameters
    ----------
    unit, kind : str
        As for `scale_of`.
    """
    entry = KINDS[kind]
    for symbol in filter(None, entry.units):
        if unit.casefold() == symbol.casefold():
            return symbol
        if entry.prefixes and unit[:1] in PREFIXES and unit[1:].casefold() == symbol.casefold():
            return unit[0] + symbol
    return ""


def note_on(value: float, kind: str) -> str:
    """A sentence if the SI value is outside the plausible range, else nothing.

    Parameters
    ----------
    value : float
        Finite [unit of `kind`].
    kind : str
        Key of `KINDS`.
    """
    usual = KINDS[kind].plausible
    if usual is None or value == 0 or usual[0] <= abs(value) <= usual[1]:
        return ""
    low, high = (show(end, kind) for end in usual)
    return (
        f"{label(kind)} of {show(value, kind)} is unusual, most lie from {low} to {high};"
        " check the unit (m is milli, M is mega)"
    )


def decode_value(text: str, kind: str) -> Decimal | None:
    """Read a letter-and-digit value, in which a letter stands in place of the decimal mark.

    Parts: ``4R7``, ``R47``, ``470R``, ``2k2`` for a resistance; ``4n7``, ``3p3``, ``100n``,
    ``1m0`` for a capacitance; ``10u``, ``4m7`` for an inductance.

    Parameters
    ----------
    text : str
        The marking alone: no spaces, sign, unit or tolerance letter.
    kind : {"resistance", "inductance", "capacitance"}
        What is marked; for any other kind the answer is None.

    Returns
    -------
    Decimal or None
        Exact value [ohm, H or F], or None if `text` is not such a value.

    References
    ----------
    .. [1] IEC 60062:2016, clause 3, "Letter and digit code for resistance and capacitance
       values". Seen through public pages; for what is confirmed see `VALUE_LETTERS`.

    Examples
    --------
    >>> decode_value("4n7", "capacitance"), decode_value("4X7", "capacitance")
    (Decimal('4.7E-9'), None)
    """
    match = _VALUE.fullmatch(text)
    if match is None:
        return None
    whole, letter, fraction = match.groups()
    power = VALUE_LETTERS.get(kind, {}).get(letter)
    return None if power is None else Decimal(f"{whole}.{fraction}e{power}")


def decode_tolerance(text: str, kind: str, nominal: float | None = None) -> Tolerance | None:
    """Read a tolerance letter.

    Parameters
    ----------
    text, kind : str
        One capital letter, and what is marked, as for `decode_value`.
    nominal : float, optional
        Its value [SI]. On a capacitor below 10 pF the letters B, C, D, F and G mean picofarads;
        if the value is not known they are taken as per cent.

    Returns
    -------
    Tolerance or None
        None if `text` is not in `TOLERANCE_LETTERS`.

    References
    ----------
    .. [1] IEC 60062:2016, clause 4; see `TOLERANCE_LETTERS` for what is confirmed.

    Examples
    --------
    >>> decode_tolerance("Z", "capacitance")
    Tolerance(low=-0.2, high=0.8, relative=True, text='Z')
    """
    meaning = TOLERANCE_LETTERS.get(text)
    if meaning is None:
        return None
    small = kind == "capacitance" and nominal is not None and nominal < 10e-12
    if small and meaning.picofarads is not None:
        offset = float(meaning.picofarads.scaleb(-12))
        return Tolerance(-offset, offset, False, text)
    return Tolerance(float(meaning.low / 100), float(meaning.high / 100), True, text)
