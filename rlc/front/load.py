"""Where inputs are read from: a sheet, flags, or a sheet with flags in place of some values."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from rlc.front.flags import check_flags
from rlc.front.inputs import Loaded
from rlc.front.one_off import read_flags


def load(path: str | Path | None = None, flags: Mapping[str, str] | None = None) -> Loaded:
    """Read a sheet, flags, or a sheet with flags in place of some of its values.

    Parameters
    ----------
    path : str or Path, optional
        The sheet.
    flags : mapping of str to str, optional
        Option, such as ``--resistance``, to its text.

    Returns
    -------
    Loaded

    Raises
    ------
    SheetError
        With everything that is wrong with the sheet, or with the flags if there is none.
    InputError
        If flags contradict each other.
    """
    given = flags or {}
    check_flags(given)
    if path is None:
        return read_flags(given)
    # The models of the sheet take longer to load than a one-off question takes to answer.
    from rlc.front.validate import read_sheet

    return read_sheet(path, given)
