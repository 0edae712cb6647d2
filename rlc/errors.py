"""Errors that a user can mend: what is wrong, where, and what would be right."""

from __future__ import annotations


class RlcError(Exception):
    """Base of every error that `rlc` raises on purpose."""


class InputError(RlcError, ValueError):
    """One value that cannot be used.

    Attributes
    ----------
    name : str
        The argument, flag or key path that holds the value; empty for a file as a whole.
    value : object
        The value as it was given.
    rule : str
        What the value breaks.
    hint : str
        A line that would be right, or empty.
    """

    def __init__(self, name: str, value: object, rule: str, hint: str = "") -> None:
        self.name, self.value, self.rule, self.hint = name, value, rule, hint
        super().__init__(name, value, rule, hint)

    def __str__(self) -> str:
        shown = "" if self.value is None else f" = {self.value!r}"
        head = f"{self.name}{shown}: " if self.name else ""
        return f"{head}{self.rule}" + (f". {self.hint}" if self.hint else "")


class SheetError(RlcError, ValueError):
    """Everything that is wrong with one sheet, found in one pass.

    Attributes
    ----------
    path : str
        The sheet; empty where everything came from flags.
    problems : tuple of (int or None, InputError)
        Line number, where known, and the error.
    """

    def __init__(self, path: str, problems: tuple[tuple[int | None, InputError], ...]) -> None:
        self.path, self.problems = path, problems
        super().__init__(path, problems)

    def __str__(self) -> str:
        return "\n".join(f"{self._place(line, error)}{error}" for line, error in self.problems)

    def _place(self, line: int | None, error: InputError) -> str:
        # What was wrong on the command line is not in the sheet.
        if not self.path or error.name.startswith("--"):
            return ""
        return f"{self.path}:{line}: " if line else f"{self.path}: "
