"""A file that a user names: there, ordinary, and not some other file by its size."""

from __future__ import annotations

from pathlib import Path

from rlc.errors import InputError, SheetError


def check_file(path: str | Path, what: str, most: int, missing: str) -> None:
    """Refuse what cannot be a text of ours, before any of it is read.

    Parameters
    ----------
    path : str or Path
        As the user named it.
    what : str
        What it should be, such as "sheet".
    most : int
        Bytes that such a file may have.
    missing : str
        What to do if it is not there.

    Raises
    ------
    SheetError
        If it is not there, no ordinary file, or too large.
    """
    file = Path(path)
    try:
        if file.is_dir():
            raise whole(path, "is a directory", f"Name the {what} in it")
        if not file.exists():
            raise whole(path, "does not exist", missing)
        if not file.is_file():
            raise whole(path, "is no ordinary file")
        size = file.stat().st_size
    except (OSError, ValueError) as error:
        if isinstance(error, SheetError):
            raise
        raise unreadable(path, error) from None
    if size > most:
        rule = f"has {size} bytes, and a {what} has at most {most}"
        raise whole(path, rule, "Is it the right file?")


def unreadable(path: str | Path, error: Exception) -> SheetError:
    """The system's reason why a file cannot be read, as an error of ours.

    Parameters
    ----------
    path : str or Path
        The file.
    error : Exception
        What the system said.

    Returns
    -------
    SheetError
    """
    return whole(path, f"cannot be read: {getattr(error, 'strerror', None) or error}")


def whole(path: str | Path, rule: str, hint: str = "") -> SheetError:
    """An error of a file as a whole.

    Parameters
    ----------
    path : str or Path
        The file.
    rule, hint : str
        What it breaks, and what would be right.

    Returns
    -------
    SheetError
    """
    return SheetError(str(path), ((None, InputError("", None, rule, hint)),))
