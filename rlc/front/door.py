"""The door that a value passes: text in, an SI number of the right kind and range out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

from rlc.errors import InputError


@dataclass(frozen=True)
class Door:
    """Reads a text as an SI value of one kind.

    Attributes
    ----------
    kind : str
        Key of :data:`rlc.front.units.KINDS`.
    least : {"any", "zero", "above zero"}
        Lower limit.
    word : str
        A word that stands for None, such as "worst".
    """

    kind: str
    least: Literal["any", "zero", "above zero"] = "any"
    word: str = ""

    def __get_pydantic_core_schema__(self, *_: object) -> Any:
        """Let a model use it as the annotation of a key."""
        from pydantic_core import core_schema

        return core_schema.no_info_plain_validator_function(self.open)

    def open(self, text: Any) -> float | None:
        """Read one value.

        Parameters
        ----------
        text : str
            A number with a unit; where no unit is missing a bare number will do.

        Returns
        -------
        float or None
            SI value [unit of `kind`]; None for the word that stands for it.

        Raises
        ------
        InputError
            Without a name: who asks knows what the value is called.
        """
        # The command line names its flags without reading any unit.
        from rlc.front.units import read
        from rlc.solver.loop import BEYOND

        if self.word and text == self.word:
            return None
        bare = isinstance(text, int | float) and not isinstance(text, bool)
        typed = repr(text) if bare and self.kind in ("number", "ratio") else text
        try:
            value = read(typed, self.kind, "").value
        except InputError as error:
            hint = error.hint + (f' or "{self.word}"' if self.word else "")
            raise InputError("", text, error.rule, hint) from None
        if value and not 1 / BEYOND <= abs(value) <= BEYOND:
            raise InputError("", text, "is beyond any circuit")
        if self.least == "zero" and value < 0:
            raise InputError("", text, "must be zero or more")
        if self.least == "above zero" and value <= 0:
            raise InputError("", text, "must be more than zero")
        return value
