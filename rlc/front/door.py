"""The doors that values pass: text in, an SI number of the right kind and range out."""

from __future__ import annotations

import math
import operator
import re
from dataclasses import dataclass
from typing import Any, ClassVar, Literal, NamedTuple

from rlc.errors import InputError

#: What a pulse train may have in place of a number of pulses.
UNTIL_STEADY = "until steady"

_PLUS_OR_MINUS = r"(?:±|\+/?[-\u2212])"
_AROUND = re.compile(rf"(.*?){_PLUS_OR_MINUS}(.*)", re.DOTALL)
_EITHER = re.compile(rf"\s*{_PLUS_OR_MINUS}(.*)", re.DOTALL)
_WINDOW = 'Write for example "0 deg +- 15 deg"'
# 180 deg, give or take the rounding of other units.
_HALF_TURN = math.pi * (1 + 1e-12)


@dataclass(frozen=True)
class Door:
    """Reads a text as an SI value of one kind.

    Attributes
    ----------
    kind : str
        Key of :data:`rlc.front.units.KINDS`.
    least : {"any", "zero", "above zero"}
        Lower limit.
    most : float
        Upper limit [unit of `kind`].
    """

    #: What a hint offers beside the kind's example.
    also: ClassVar[str] = ""

    kind: str
    least: Literal["any", "zero", "above zero"] = "any"
    most: float = math.inf

    def __get_pydantic_core_schema__(self, *_: object) -> Any:
        """Let a model use it as the annotation of a key."""
        from pydantic_core import core_schema

        return core_schema.no_info_plain_validator_function(self.open)

    def open(self, text: Any) -> Any:
        """Read one value.

        Parameters
        ----------
        text : str
            A number with a unit; where no unit is missing a bare number will do.

        Returns
        -------
        float
            SI value [unit of `kind`].

        Raises
        ------
        InputError
            Without a name: who asks knows what the value is called.
        """
        # The command line names its flags without reading any unit.
        from rlc.front.units import read, show
        from rlc.solver.loop import BEYOND

        bare = isinstance(text, int | float) and not isinstance(text, bool)
        typed = repr(text) if bare and self.kind in ("number", "ratio") else text
        try:
            value = read(typed, self.kind, "").value
        except InputError as error:
            raise InputError("", text, error.rule, error.hint + self.also) from None
        if value and not 1 / BEYOND <= abs(value) <= BEYOND:
            raise InputError("", text, "is beyond any circuit")
        if self.least == "zero" and value < 0:
            raise InputError("", text, "must be zero or more")
        if self.least == "above zero" and value <= 0:
            raise InputError("", text, "must be more than zero")
        if value > self.most:
            raise InputError("", text, f"is more than {show(self.most, self.kind)}")
        return value

    def note(self, value: Any) -> str:
        """A sentence if a value that was read is implausible, else nothing.

        Parameters
        ----------
        value : float or None
            What `open` returned; None where nothing was given [unit of `kind`].
        """
        from rlc.front.marking import note_on

        return "" if value is None else note_on(value, self.kind)


@dataclass(frozen=True)
class ClosingAngleDoor(Door):
    """Reads a closing angle: one angle, a window, or a word.

    Attributes
    ----------
    kind, least : str
        Always an angle, of either sign.
    most : float
        None [rad].
    """

    also = ', "0 deg +- 15 deg", "random" or "worst"'

    kind: str = "angle"

    def open(self, text: Any) -> Any:
        """Read one angle, a window of angles, "worst" or "random".

        Parameters
        ----------
        text : str
            From the source's rising zero, as in "30 deg"; or a middle and a half width.

        Returns
        -------
        float, Window or None
            One angle; a window of equally likely ones; None for the worst one [rad].

        Raises
        ------
        InputError
            Without a name, as for every door.
        """
        # The command line names its flags without loading any array.
        from rlc.solver.source import ANY_ANGLE, Window

        if text == "worst":
            return None
        if text == "random":
            return ANY_ANGLE
        around = _AROUND.fullmatch(text) if isinstance(text, str) else None
        if around is None:
            return super().open(text)
        if not all(part.strip() for part in around.groups()):
            raise InputError("", text, "needs an angle on both sides of the sign", _WINDOW)
        middle, half = (self._part(part, text) for part in around.groups())
        if not 0 < half <= _HALF_TURN:
            rule = "must have a half width above zero and at most 180 deg"
            raise InputError("", text, rule, _WINDOW)
        # A whole turn is the same wherever its middle lies.
        if half >= 2 * math.pi - _HALF_TURN:
            return ANY_ANGLE
        middle = math.fmod(middle, 2 * math.pi)
        return Window(middle - half, middle + half)

    def _part(self, part: str, text: str) -> float:
        try:
            return float(super().open(part))
        except InputError as error:
            rule = f"{part.strip()!r} {error.rule}"
            raise InputError("", text, rule, error.hint) from None

    def note(self, value: Any) -> str:
        """Nothing: no angle is implausible.

        Parameters
        ----------
        value : float, Window or None
            What `open` returned [rad].
        """
        return ""


class Charge(NamedTuple):
    """What is on the capacitor at closing.

    Attributes
    ----------
    voltage : float
        Behind its series resistance [V].
    either_polarity : bool
        Whether it may be of either sign.
    """

    voltage: float
    either_polarity: bool = False


@dataclass(frozen=True)
class ChargeDoor(Door):
    """Reads the capacitor's voltage at closing.

    Attributes
    ----------
    kind, least : str
        Always a voltage, of either sign.
    most : float
        None [V].
    """

    also = ' or "+- 325 V"'

    kind: str = "voltage"

    def open(self, text: Any) -> Any:
        """Read a voltage of stated or of either polarity.

        Parameters
        ----------
        text : str
            A voltage as in "-5 V", or as in "+- 325 V".

        Returns
        -------
        Charge

        Raises
        ------
        InputError
            Without a name, as for every door.
        """
        either = _EITHER.fullmatch(text) if isinstance(text, str) else None
        if either is None:
            return Charge(super().open(text))
        try:
            voltage = super().open(either[1])
        except InputError as error:
            raise InputError("", text, error.rule, error.hint) from None
        if voltage < 0:
            raise InputError("", text, "has a sign too many", 'Write for example "+- 325 V"')
        return Charge(voltage, either_polarity=True)

    def note(self, value: Any) -> str:
        """A sentence if the voltage is implausible, else nothing.

        Parameters
        ----------
        value : Charge
            What `open` returned.
        """
        return super().note(value.voltage)


@dataclass(frozen=True)
class WholeDoor:
    """Takes a whole number.

    Attributes
    ----------
    least, most : int
        Its limits.
    word : str
        A word that stands for None, such as "until steady".
    """

    least: int
    most: int
    word: str = ""

    def __get_pydantic_core_schema__(self, *_: object) -> Any:
        """Let a model use it as the annotation of a key."""
        from pydantic_core import core_schema

        return core_schema.no_info_plain_validator_function(self.open)

    def open(self, given: Any) -> int | None:
        """Take one number, or the word.

        Parameters
        ----------
        given : int or str
            A whole number of any type, or the word.

        Returns
        -------
        int or None
            None for the word.

        Raises
        ------
        InputError
            Without a name: who asks knows what the value is called.
        """
        if self.word and isinstance(given, str) and given == self.word:
            return None
        try:
            number = None if isinstance(given, bool) else operator.index(given)
        except TypeError:
            number = None
        if number is None or not self.least <= number <= self.most:
            rule = f"must be a whole number from {self.least} to {self.most}"
            rule += f' or "{self.word}"' if self.word else ", without quotes"
            raise InputError("", given, rule)
        return number


def open_as(door: Door | WholeDoor, given: Any, name: str) -> Any:
    """Read one value whose name is known.

    Parameters
    ----------
    door : Door or WholeDoor
        What the value passes.
    given : str or int
        As for the door.
    name : str
        What the user calls the value; goes into errors.

    Returns
    -------
    float or what the door reads instead
        SI value [SI].

    Raises
    ------
    InputError
        If it does not pass.
    """
    try:
        return door.open(given)
    except InputError as error:
        raise InputError(name, given, error.rule, error.hint) from None
