"""What a question comes down to: the solver's objects, wherever their values were written."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, NamedTuple

from rlc.solver.case import Case
from rlc.solver.parts import Part
from rlc.solver.targets import Fuse, Ratings, Target


@dataclass(frozen=True)
class Inputs:
    """A loop with its source, and what is asked of it.

    Attributes
    ----------
    title : str
        One line, or empty.
    case : Case
        The nominal switch-on.
    parts : tuple of Part
        Resistor, inductor and capacitor with their limits.
    tolerances : mapping of str to str
        Tolerances as they were typed, by field of the loop.
    ratings : Ratings
        What the parts are made for.
    targets : tuple of Target
        The sheet's targets, then its ratings.
    fuse : Fuse or None
        What the let-through of a switch-on has to pass.
    """

    title: str
    case: Case
    parts: tuple[Part, ...]
    tolerances: Mapping[str, str]
    ratings: Ratings
    targets: tuple[Target, ...]
    fuse: Fuse | None = None


class Change(NamedTuple):
    """What a flag has done to one key of the sheet.

    Attributes
    ----------
    option : str
        The flag, such as ``--load``.
    key : str
        The key with its table, such as ``load.resistance``.
    old : object
        What the sheet had; None if nothing.
    new : str or None
        What the flag put there; None if it dropped the key.
    """

    option: str
    key: str
    old: Any
    new: str | None

    def __str__(self) -> str:
        if isinstance(self.old, list):
            return f"{self.option} drops {self.key}, {len(self.old)} of them"
        if self.old is None:
            return f'{self.option} adds {self.key} = "{self.new}"'
        if self.new is None:
            return f'{self.option} drops {self.key} = "{self.old}"'
        return f'{self.option} replaces {self.key} = "{self.old}" by "{self.new}"'


class Loaded(NamedTuple):
    """Inputs, where they came from, and what was noticed on the way.

    Attributes
    ----------
    inputs : Inputs
        What to work with.
    sheet : str
        The file as it was given; empty if everything came from flags.
    changes : tuple of Change
        What flags have done to the sheet.
    notes : tuple of str
        Values that were taken, but look like slips.
    """

    inputs: Inputs
    sheet: str = ""
    changes: tuple[Change, ...] = ()
    notes: tuple[str, ...] = ()
