"""What the commands share: flags, errors on stderr, the answer on stdout, saved pictures."""

from __future__ import annotations

import functools
import inspect
import json
import os
import shutil
import sys
from collections.abc import Callable, Iterable
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, Literal, NamedTuple

import typer

from rlc.errors import InputError, RlcError
from rlc.front.flags import Flag

if TYPE_CHECKING:
    from rich.table import Table
    from rich.text import Text

    from rlc.front.inputs import Loaded
    from rlc.review import Review

BAD_INPUT = 2

Sheet = Annotated[
    Path | None, typer.Argument(help="The sheet of parts (TOML); not needed with flags.")
]
Json = Annotated[bool, typer.Option("--json", help="Print one JSON document, in SI units.")]
Plots = Annotated[
    Path | None, typer.Option(metavar="DIR", help="Save the pictures in this directory.")
]
Suffix = Annotated[
    Literal["png", "svg", "pdf"], typer.Option("--picture-format", help="Of saved pictures.")
]
Samples = Annotated[int, typer.Option(help="Random units to draw, up to 1000000.")]
Seed = Annotated[int, typer.Option(help="What the random units follow from.")]


class Output(NamedTuple):
    """How the answer is wanted."""

    as_json: bool
    plots: Path | None
    suffix: str


def guarded(command: Callable[..., None]) -> Callable[..., None]:
    """Show an expected error on stderr and exit with 2; a bug keeps its trace."""

    @functools.wraps(command)
    def call(*args: Any, **given: Any) -> None:
        try:
            command(*args, **given)
            sys.stdout.flush()
        except RlcError as error:
            typer.echo(str(error), err=True)
            raise typer.Exit(BAD_INPUT) from None
        except BrokenPipeError:
            # Whoever read the output has seen enough; nothing may be flushed at exit.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        except OSError as error:
            typer.echo(f"The answer cannot be written: {error.strerror}", err=True)
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
            raise typer.Exit(BAD_INPUT) from None

    return call


def with_flags(*flags: Flag) -> Callable[[Callable[..., None]], Callable[..., None]]:
    """Give a command one option per flag, and hand it those that were used."""

    def decorate(command: Callable[..., None]) -> Callable[..., None]:
        names = {flag.option.strip("-").replace("-", "_"): flag for flag in flags}

        @functools.wraps(command)
        def wrapper(**given: Any) -> None:
            texts = {name: given.pop(name) for name in names}
            used = {names[name].option: text for name, text in texts.items() if text is not None}
            command(flags=used, **given)

        own = inspect.signature(command, eval_str=True).parameters
        options = [
            inspect.Parameter(
                name,
                inspect.Parameter.KEYWORD_ONLY,
                default=None,
                annotation=Annotated[
                    str | None, typer.Option(flag.option, metavar="VALUE", help=flag.help)
                ],
            )
            for name, flag in names.items()
        ]
        kept = [
            parameter.replace(kind=inspect.Parameter.KEYWORD_ONLY)
            for name, parameter in own.items()
            if name != "flags"
        ]
        signature = inspect.Signature([kept[0], *options, *kept[1:]])
        wrapper.__signature__ = signature  # type: ignore[attr-defined]
        wrapper.__annotations__ = {
            each.name: each.annotation for each in signature.parameters.values()
        }
        return wrapper

    return decorate


def read_sheet(sheet: Path | None, flags: dict[str, str]) -> Loaded:
    """Read the sheet and say on stderr what looks like a slip."""
    from rlc.front.load import load

    loaded = load(sheet, flags)
    for text in loaded.notes:
        note(text)
    return loaded


def note(text: str) -> None:
    """Say something on stderr, if there is anything to say."""
    if text:
        typer.echo(f"Note: {text}", err=True)


def show(
    found: Review, pieces: Iterable[Table | Text | str], pictures: Iterable[str], output: Output
) -> None:
    """Save the pictures, then print the answer: as one JSON document, or as tables."""
    from rlc.render import tables
    from rlc.render.layout import write

    if output.plots is not None:
        _save(found, pictures, output.plots, output.suffix)
    if output.as_json:
        typer.echo(json.dumps(found.document(), indent=2, allow_nan=False))
        return
    heading = [found.loaded.inputs.title] * bool(found.loaded.inputs.title)
    if found.loaded.sheet:
        heading.append(f"Sheet: {found.loaded.sheet}")
    heading += [f"Changed: {change}" for change in found.loaded.changes]
    write(terminal_width(), *heading, *pieces, *tables.cautions(found.cautions))


def terminal_width() -> int:
    """Columns of the terminal; 80 in a pipe."""
    return shutil.get_terminal_size().columns


def _save(found: Review, pictures: Iterable[str], directory: Path, suffix: str) -> None:
    from rlc.render.plots import save

    drawn = {
        directory / f"{name}.{suffix}": draw for name, draw in found.pictures(pictures).items()
    }
    try:
        for path in drawn:
            if path.exists():
                rule = f"would overwrite {path}"
                raise InputError("--plots", str(directory), rule, "Name another directory")
        directory.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise InputError("--plots", str(directory), f"cannot be made: {error.strerror}") from None
    for path, draw in drawn.items():
        save(draw(), path)
        typer.echo(f"Saved {path}", err=True)
