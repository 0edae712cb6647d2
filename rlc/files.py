"""Writing a file that was not there: as a whole or not at all."""

from __future__ import annotations

import contextlib
import os
from collections.abc import Callable
from pathlib import Path

from rlc.errors import InputError


def write_new(path: Path, name: str, fill: Callable[[Path], object]) -> None:
    """Write under a temporary name beside the place, then move there; overwrite nothing.

    Parameters
    ----------
    path : Path
        Where the file goes.
    name : str
        What the user calls it; goes into errors.
    fill : callable
        Writes the file at the path that it is given.

    Raises
    ------
    InputError
        If the file exists, or cannot be written.
    """
    partial = path.with_name(f".{path.name}.{os.getpid()}.partial")
    try:
        if path.exists():
            raise FileExistsError
        fill(partial)
        _move(partial, path)
    except FileExistsError:
        raise InputError(name, str(path), "exists, and nothing is overwritten") from None
    except OSError as error:
        raise InputError(name, str(path), f"cannot be written: {error.strerror}") from error
    finally:
        # Where nothing can be looked for, nothing was written either.
        with contextlib.suppress(OSError):
            partial.unlink(missing_ok=True)


def _move(partial: Path, path: Path) -> None:
    try:
        # A link, unlike a move, fails where another file has come in between.
        os.link(partial, path)
    except FileExistsError:
        raise
    except OSError:
        # Some file systems have no links.
        partial.replace(path)
