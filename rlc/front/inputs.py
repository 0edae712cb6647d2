"""What a question comes down to: the solver's objects, wherever their values were written."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import NamedTuple

from rlc.front.document import Document
from rlc.solver.case import Case
from rlc.solver.spread import Part
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


class Loaded(NamedTuple):
    """Inputs, where they came from, and what was noticed on the way.

    Attributes
    ----------
    inputs : Inputs
        What to work with.
    document : Document
        The sheet; without a name if everything came from flags.
    notes : tuple of str
        Values that were taken, but look like slips.
    """

    inputs: Inputs
    document: Document
    notes: tuple[str, ...]
