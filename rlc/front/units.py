"""Text to SI numbers and back. The only file that knows pint.

The grammar is ours: one number, at most one prefix, one unit of the kind that is expected. Unit
libraries' expression parsers read "4,7 uF" as 47 uF and "10 mH 5%" as 0.5 mH; here each such text
is refused by name. Numbers stay decimal until the end, so that "4.7 uF" is exactly ``4.7e-6``.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from decimal import Decimal, localcontext
from functools import cache
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from rlc.errors import InputError
from rlc.front.marking import (
    CONTESTED_LETTERS,
    EXACT,
    MISTAKES,
    NUMBER,
    PREFIXES,
    TOLERANCE_LETTERS,
    VALUE_LETTERS,
    ZERO_CELSIUS,
    decode_tolerance,
    decode_value,
    label,
    note_on,
    respelled,
    scale_of,
)
from rlc.front.marking import KINDS as KINDS
from rlc.front.marking import Tolerance as Tolerance
from rlc.front.marking import show as show

Refuse = Callable[..., InputError]

_QUANTITY = re.compile(rf"({NUMBER}) ?(.*)")
# Letters only, each with at most one small power: no scale factors and no towers of powers.
_FACTOR = r"[A-Za-zµ\u03bc\u03a9\u2126°%]+(?:[²³]|(?:\^|\*\*)-?[1-4])?"
_UNIT = re.compile(rf"{_FACTOR}(?: ?[*/ ] ?{_FACTOR})*")
_MARKED = re.compile(r"[A-Za-zµ\u03bc][0-9]")
_SYMMETRICAL = re.compile(r"(?:±|\+/[-\u2212]) ?(.*)|([^+\-\u2212].*)")
_SIDES = re.compile(r"([+\-\u2212]) ?(.*?) ?/ ?([+\-\u2212]) ?(.*)")
_LONGEST_TEXT, _LONGEST_UNIT = 60, 40
_TOO_LONG = f"is longer than {_LONGEST_TEXT} characters"


class Reading(NamedTuple):
    """A value that was read.

    Attributes
    ----------
    value : float
        In the unit of its kind [SI].
    note : str
        Empty, or a sentence that says why the value looks like a slip.
    """

    value: float
    note: str


def read(text: str, kind: str, name: str) -> Reading:
    """Read one quantity.

    Parameters
    ----------
    text : str
        A number and a unit of the right kind, as in "4.7 uF", or an IEC 60062 value such as
        "4u7" for a resistance, inductance or capacitance. At most 60 characters.
    kind : str
        Key of `KINDS`.
    name : str
        What the user calls the value; goes into errors.

    Returns
    -------
    Reading
        The double nearest to the decimal as typed [SI], and a note if it is implausible.

    Raises
    ------
    InputError
        If `text` is anything else; each kind of slip has its own sentence.

    Examples
    --------
    >>> read("4.7 uF", "capacitance", "capacitor.value")
    Reading(value=4.7e-06, note='')
    """
    refuse = _refuser(name, text, kind)
    if not isinstance(text, str):
        raise refuse("must be a text with a number and a unit")
    if len(text) > _LONGEST_TEXT:
        raise _refuser(name, text[:_LONGEST_TEXT] + "...", kind)(_TOO_LONG)
    line = " ".join(text.split())
    with localcontext(EXACT):
        exact = decode_value(line, kind)
        if exact is None:
            exact = _quantity(line, kind, refuse)
    value = float(exact)
    if math.isinf(value):
        raise refuse("is too large for a number")
    if value == 0 and exact != 0:
        raise refuse("is too small for a number, yet not zero")
    if kind == "temperature" and value < 0:
        raise refuse("is below absolute zero")
    return Reading(value, note_on(value, kind))


def to_si(value: object, kind: str, name: str) -> float | NDArray[np.float64]:
    """Turn what a caller may pass into SI.

    Parameters
    ----------
    value : str, int, float, numpy scalar, numpy.ndarray, list, tuple or pint quantity
        Text as for `read`; numbers already in SI [unit of `kind`]; or a quantity from any pint
        registry. Any shape.
    kind, name : str
        As for `read`.

    Returns
    -------
    float or numpy.ndarray
        Value [unit of `kind`]; a new array with the shape of `value` if that is an array.

    Raises
    ------
    InputError
        If `value` is of another type or kind, or is not finite. A rate in rad/s is no
        frequency, though pint converts it as if it were.
    """
    if isinstance(value, str):
        return read(value, kind, name).value
    refuse = _refuser(name, value, kind)
    if isinstance(value, list | tuple):
        value = np.array(value)
    if all(hasattr(value, part) for part in ("magnitude", "units", "to")):
        value = _converted(value, kind, refuse)
    known = (int, float, Decimal, np.integer, np.floating)
    if isinstance(value, bool) or not isinstance(value, (*known, np.ndarray)):
        raise refuse("must be a number in SI units, a text with a unit, or a pint quantity")
    if isinstance(value, np.ndarray) and value.dtype.kind not in "iuf":
        raise refuse(f"must hold real numbers, not {value.dtype}")
    try:
        numbers = np.array(value, dtype=np.float64)
    except OverflowError:
        raise refuse("is too large for a number") from None
    wrong = numbers[~np.isfinite(numbers)]
    if wrong.size:
        raise _refuser(name, float(wrong[0]), kind)("must be finite")
    return numbers if numbers.ndim else float(numbers)


def read_tolerance(text: str, kind: str, name: str, nominal: float | None = None) -> Tolerance:
    """Read a tolerance.

    Parameters
    ----------
    text : str
        "5 %", "±5 %", "+/-5 %"; "0.5 pF", in a unit of `kind`; "-20 % / +80 %" in either order;
        or an IEC 60062 letter for a resistance, inductance or capacitance.
    kind, name : str
        As for `read`; the kind is that of the value, such as "capacitance".
    nominal : float, optional
        The value [SI]. On a capacitor below 10 pF the letters B, C, D, F and G mean
        picofarads; without `nominal` they mean per cent.

    Returns
    -------
    Tolerance

    Raises
    ------
    InputError
        If `text` is none of these, or would let the value reach zero.

    References
    ----------
    .. [1] IEC 60062:2016, clause 4, through public pages; see
       `rlc.front.marking.TOLERANCE_LETTERS` for which letters are confirmed.

    Examples
    --------
    >>> read_tolerance("+80 % / -20 %", "capacitance", "capacitor.tolerance")
    Tolerance(low=-0.2, high=0.8, relative=True, text='+80 % / -20 %')
    """

    def refuse(rule: str, hint: str = 'Write for example "5 %" or "-20 % / +80 %"') -> InputError:
        return InputError(name, text, rule, hint)

    if not isinstance(text, str):
        raise refuse("must be a text with a tolerance and its unit")
    if len(text) > _LONGEST_TEXT:
        raise InputError(name, text[:_LONGEST_TEXT] + "...", _TOO_LONG)
    line = " ".join(text.split())
    if re.fullmatch("[A-Za-z]", line):
        found = _letter(line, kind, nominal, refuse)
    else:
        found = _offsets(line, kind, name, refuse)
    known = nominal is not None and kind in VALUE_LETTERS
    part = abs(nominal) if nominal is not None and known else math.inf
    reaches = found.low <= (-1.0 if found.relative else -part)
    # A value of zero may stay zero; only a wire has one.
    if reaches and not (part == 0 and found.low == 0):
        raise refuse("would let the value reach zero")
    return found


def _refuser(name: str, value: object, kind: str) -> Refuse:
    def refuse(rule: str, hint: str = "") -> InputError:
        return InputError(name, value, rule, hint or f'Write for example "{KINDS[kind].example}"')

    return refuse


def _quantity(line: str, kind: str, refuse: Refuse) -> Decimal:
    """Read a number and a unit, or say what is wrong with them."""
    if not line:
        raise refuse("is empty")
    match = _QUANTITY.fullmatch(line)
    scale = scale_of(match[2], kind) if match else None
    if scale is None:
        for pattern, rule in MISTAKES:
            if pattern.search(line):
                raise refuse(rule)
    if match is None:
        raise refuse("does not begin with a number")
    digits, unit = match.groups()
    number = EXACT.create_decimal(digits.replace("\u2212", "-"))
    if scale is None:
        _check_unit(digits, unit, line, kind, refuse)
        return _from_pint(number, digits, unit, kind, refuse)
    return number * scale + (ZERO_CELSIUS if kind == "temperature" and unit != "K" else 0)


def _check_unit(digits: str, unit: str, line: str, kind: str, refuse: Refuse) -> None:
    """Refuse what is not a unit at all."""
    entry = KINDS[kind]
    letters = VALUE_LETTERS.get(kind, {})
    marked = line == digits + unit and _MARKED.match(unit)
    if not unit:
        raise refuse("has no unit")
    if letters and marked:
        raise refuse(
            f"is no letter-and-digit value; there, one letter of {' '.join(letters)} stands in"
            " place of decimal mark and unit, with nothing around it"
        )
    if unit in PREFIXES or unit == "K":
        whole = f"{digits} {unit.lower() if unit == 'K' else unit}{entry.symbol}"
        raise refuse("has a prefix but no unit", f'Write "{whole}"' if entry.prefixes else "")
    kilo = respelled("k" + unit[1:], kind) if unit[0] == "K" else ""
    if kilo:
        raise refuse("has a capital K; kilo is a small k", f'Write "{digits} {kilo}"')
    if unit[1:2] == " " and scale_of(unit.replace(" ", "", 1), kind) is not None:
        joined = unit.replace(" ", "", 1)
        raise refuse("has a space after the prefix", f'Write "{digits} {joined}"')
    if unit[0] in PREFIXES and unit[1:2] in PREFIXES and unit[2:] in entry.units:
        raise refuse("has two prefixes, and a unit takes one")
    if len(unit) > _LONGEST_UNIT or not _UNIT.fullmatch(unit):
        raise refuse(
            f"has a unit that cannot be read; at most {_LONGEST_UNIT} letters with *, / and powers"
            " up to 4"
        )


@cache
def _registry() -> Any:
    """Our own registry, with exact decimal factors; the application's is left alone."""
    import pint

    return pint.UnitRegistry(non_int_type=Decimal)


def _from_pint(number: Decimal, digits: str, unit: str, kind: str, refuse: Refuse) -> Decimal:
    """Convert from a unit that is not in our table, or say which kind it belongs to."""
    import pint

    spelled = respelled(unit, kind)
    hint = ""
    if spelled:
        # "var" is not in pint.
        word = _registry().parse_units(spelled) if spelled in _registry() else label(kind)
        hint = f'Capital letters matter: {word} is written {spelled}, as in "{digits} {spelled}"'
    for other in KINDS:
        if scale_of(unit, other) is not None:
            raise refuse(_wrong_kind(unit, other, kind), hint)
    # Fractions have names in pint that are no units, such as "alpha" and "pi".
    if KINDS[kind].pint == "dimensionless":
        raise refuse(f"is in {unit!r}, which is no unit of {kind}")
    try:
        quantity = _registry().Quantity(number, _registry().parse_units(unit))
    except (pint.PintError, TypeError, ValueError):
        raise refuse(f"has the unknown unit {unit!r}", hint) from None
    return Decimal(_converted(quantity, kind, lambda rule: refuse(rule, hint)))


def _wrong_kind(unit: str, other: str, kind: str) -> str:
    if other == kind:
        # 1/s may count cycles or radians, and W may be active or reactive power.
        return f"is in {unit}, and {label(kind)} is given in {KINDS[kind].pint}"
    belongs = f", a unit of {label(other)}," if other else ""
    return f"is in {unit}{belongs} and {label(kind)} is expected"


def _converted(quantity: Any, kind: str, refuse: Refuse) -> Any:
    """Magnitude in SI of a quantity from any pint registry."""
    import pint

    target = KINDS[kind].pint
    unit = f"{quantity.units:D}"
    # To pint a radian is the number 1 and a volt-ampere a watt, so dimensions are not enough.
    # Root units keep the radian, and these two must be there by name or not at all.
    named = all((word in unit) == (word == target) for word in ("hertz", "volt_ampere"))
    # No difference of temperatures is a temperature.
    named &= not (kind == "temperature" and "delta_" in unit)
    root = ""
    try:
        zero, one = (quantity.__class__(number, quantity.units) for number in (0, 1))
        bare = one.to_root_units().units
        root = f"{bare:D}"
        # An offset (degC) or a logarithm (dB) moves zero.
        straight = kind == "temperature" or zero.to(target).magnitude == 0
        if named and straight and bare == one.to(target).to_root_units().units:
            return quantity.to(target).magnitude
    except (pint.PintError, TypeError):
        # Reported below, as for every other unit that does not fit.
        pass
    if kind == "frequency" and root == "radian / second":
        raise refuse("is an angular rate; divide rad/s by 2 pi, or rpm by 60, and write hertz")
    raise refuse(_wrong_kind(unit, _kinds_by_root().get(root, ""), kind))


@cache
def _kinds_by_root() -> dict[str, str]:
    # Backwards, so that of kinds with the same root the first one stays.
    return {
        f"{_registry().Quantity(1, entry.pint).to_root_units().units:D}": kind
        for kind, entry in reversed(KINDS.items())
    }


def _letter(letter: str, kind: str, nominal: float | None, refuse: Refuse) -> Tolerance:
    if kind not in VALUE_LETTERS:
        raise refuse(f"is a letter, and letters are for {', '.join(VALUE_LETTERS)}")
    if kind == "capacitance" and letter in CONTESTED_LETTERS:
        raise refuse(f"has two meanings: {CONTESTED_LETTERS[letter]}")
    meaning = decode_tolerance(letter, kind, nominal)
    if meaning is None:
        raise refuse(f"is no tolerance letter; these are {' '.join(TOLERANCE_LETTERS)}")
    return meaning


def _offsets(line: str, kind: str, name: str, refuse: Refuse) -> Tolerance:
    if not line:
        raise refuse("is empty")
    sides = _SIDES.fullmatch(line)
    symmetrical = _SYMMETRICAL.fullmatch(line)
    if symmetrical:
        high, relative = _offset(symmetrical[1] or symmetrical[2] or "", kind, name, refuse)
        return Tolerance(-high, high, relative, line)
    if sides is None:
        raise refuse("has a sign, which would be one side only", 'Write "5 %" or "-5 % / +0 %"')
    sign, first, other_sign, second = sides.groups()
    if (sign == "+") == (other_sign == "+"):
        raise refuse("needs one side with + and one with -")
    unit = _QUANTITY.fullmatch(second)
    if unit and re.fullmatch(NUMBER, first):
        # "+80/-20 %": one unit for both.
        first = f"{first} {unit[2]}"
    (high, relative), (low, also) = (_offset(side, kind, name, refuse) for side in (first, second))
    if relative != also:
        raise refuse("mixes a share of the value with a fixed amount")
    if sign != "+":
        low, high = high, low
    return Tolerance(-low, high, relative, line)


def _offset(text: str, kind: str, name: str, refuse: Refuse) -> tuple[float, bool]:
    """Read one side, without its sign; the flag says whether it is relative."""
    if re.fullmatch(NUMBER, text):
        raise refuse("has no unit", f'Did you mean "{text} %"?')
    relative = text.endswith(("%", "ppm"))
    # On a temperature scale with an offset, "2 degC" would be 275 K.
    fixed = "temperature_difference" if kind == "temperature" else kind
    try:
        value = read(text, "ratio" if relative else fixed, name).value
    except InputError as error:
        raise refuse(error.rule) from None
    if value < 0:
        raise refuse("has a sign too many")
    return value, relative
