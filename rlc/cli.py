"""The commands: read, solve, show. Whatever is slow to import is imported inside them."""

from __future__ import annotations

import functools
import inspect
import json
import os
import sys
from collections.abc import Callable, Iterable
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, Literal, NamedTuple

import typer

from rlc import __version__
from rlc.errors import InputError, RlcError
from rlc.front.flags import FLAGS, TOLERANCE_FLAGS, Flag

if TYPE_CHECKING:
    from rich.console import Console
    from rich.table import Table

    from rlc.front.validate import Loaded
    from rlc.review import Review

app = typer.Typer(
    name="rlc",
    help="Judge a series resistor-inductor-capacitor loop from one sheet of real parts.",
    epilog='Start with "rlc new filter", then "rlc check filter.toml".',
    no_args_is_help=True,
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
)

TARGET_FAILS, BAD_INPUT = 3, 2

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


class _Output(NamedTuple):
    """How the answer is wanted."""

    as_json: bool
    plots: Path | None
    suffix: str


def main() -> None:
    """Run the command line."""
    app()


def _guarded(command: Callable[..., None]) -> Callable[..., None]:
    """Show an expected error on stderr and exit with 2; a bug keeps its trace."""

    @functools.wraps(command)
    def guarded(*args: Any, **given: Any) -> None:
        try:
            command(*args, **given)
            sys.stdout.flush()
        except RlcError as error:
            typer.echo(str(error), err=True)
            raise typer.Exit(BAD_INPUT) from None
        except BrokenPipeError:
            # Whoever read the output has seen enough; nothing may be flushed at exit.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())

    return guarded


def _with_flags(*flags: Flag) -> Callable[[Callable[..., None]], Callable[..., None]]:
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


def _loaded(sheet: Path | None, flags: dict[str, str]) -> Loaded:
    """Read the sheet and say on stderr what was replaced and what looks like a slip."""
    from rlc.front.validate import load

    loaded = load(sheet, flags)
    for each in loaded.document.replacements:
        old = "nothing" if each.old is None else f'"{each.old}"'
        typer.echo(f'{each.option} replaces {each.key}: {old} by "{each.new}"', err=True)
    for note in loaded.notes:
        typer.echo(f"Note: {note}", err=True)
    return loaded


def _show(
    found: Review, pieces: Iterable[Table | str], pictures: Iterable[str], output: _Output
) -> None:
    """Save the pictures, then print the answer: as one JSON document, or as tables."""
    from rlc.render import tables

    if output.plots is not None:
        _save(found, pictures, output.plots, output.suffix)
    if output.as_json:
        typer.echo(json.dumps(found.document(), indent=2, allow_nan=False))
        return
    heading = [found.loaded.sheet.title] * bool(found.loaded.sheet.title)
    if found.loaded.document.name:
        heading.append(f"Sheet: {found.loaded.document.name}")
    heading += [
        f"Replaced: {each.key} = {each.new} (sheet: {each.old or 'nothing'})"
        for each in found.loaded.document.replacements
    ]
    tables.write(_console(), *heading, *pieces, *tables.cautions(found.cautions))


def _console() -> Console:
    from rich.console import Console

    return Console(markup=False, highlight=False, emoji=False)


def _save(found: Review, pictures: Iterable[str], directory: Path, suffix: str) -> None:
    from rlc.render.plots import save

    drawn = {
        directory / f"{name}.{suffix}": draw for name, draw in found.pictures(pictures).items()
    }
    for path in drawn:
        if path.exists():
            rule = f"would overwrite {path}"
            raise InputError("--plots", str(directory), rule, "Name another directory")
    try:
        directory.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise InputError("--plots", str(directory), f"cannot be made: {error.strerror}") from None
    for path, draw in drawn.items():
        save(draw(), path)
        typer.echo(f"Saved {path}", err=True)


@app.command()
@_with_flags(*FLAGS, *TOLERANCE_FLAGS)
@_guarded
def check(
    flags: dict[str, str],
    sheet: Sheet = None,
    samples: Samples = 2000,
    seed: Seed = 1,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Judge a loop: steady state, switch-on, spread, a verdict per target, cautions.

    Exits with 0 if all targets hold, 3 if one fails, 2 on bad input.
    """
    from rlc.review import judge, review
    from rlc.solver.quantities import REGISTER

    loaded = _loaded(sheet, flags)
    found = review(loaded, REGISTER, judge(loaded, loaded.sheet.targets(), samples, seed))
    pieces = [*_loop(found), *_steady(found), *_switch_on(found), *_spread(found)]
    pictures = ("frequency-response", "switch-on", "state-plane", "spread")
    _show(found, pieces, pictures, _Output(as_json, plots, suffix))
    if not found.targets_hold:
        raise typer.Exit(TARGET_FAILS)


@app.command()
@_with_flags(*FLAGS)
@_guarded
def steady(
    flags: dict[str, str],
    sheet: Sheet = None,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """What is left when the transient has died: impedance, current, voltages, power."""
    found = _partial(sheet, flags, ("loop", "steady"))
    pieces = [*_loop(found), *_steady(found)]
    _show(found, pieces, ("frequency-response",), _Output(as_json, plots, suffix))


@app.command(name="switch-on")
@_with_flags(*FLAGS)
@_guarded
def switch_on(
    flags: dict[str, str],
    sheet: Sheet = None,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """What happens from the closing of the switch on: true peaks, settling, let-through."""
    found = _partial(sheet, flags, ("loop", "switch-on"))
    pieces = [*_loop(found), *_switch_on(found)]
    _show(found, pieces, ("switch-on", "state-plane"), _Output(as_json, plots, suffix))


@app.command()
@_with_flags(*FLAGS)
@_guarded
def sweep(
    flags: dict[str, str],
    sheet: Sheet = None,
    start: Annotated[str | None, typer.Option(metavar="VALUE", help="First frequency.")] = None,
    stop: Annotated[str | None, typer.Option(metavar="VALUE", help="Last frequency.")] = None,
    points: Annotated[int, typer.Option(help="Steps between them, of equal ratio.")] = 25,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """The steady state over a range of frequencies, resonance and band edges included."""
    from rlc.front.units import read
    from rlc.render import tables
    from rlc.solver.sweep import sweep as solve

    first, last = (
        None if text is None else read(text, "frequency", option).value
        for option, text in (("--start", start), ("--stop", stop))
    )
    found = _partial(sheet, flags, ("loop",))
    response = solve(found.case, first, last, points)
    found = replace(found, sweep=response)
    pieces = [*_loop(found), tables.sweep(response)]
    _show(found, pieces, ("frequency-response",), _Output(as_json, plots, suffix))


@app.command()
@_with_flags(*FLAGS, *TOLERANCE_FLAGS)
@_guarded
def spread(
    flags: dict[str, str],
    sheet: Sheet = None,
    quantity: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME", help="Look at this one instead of the targets; repeatable."),
    ] = None,
    samples: Samples = 2000,
    seed: Seed = 1,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """What real parts do: corners, random units, yield, and the part that matters most.

    Exits with 0 if all targets that were looked at hold, 3 if one fails, 2 on bad input.
    """
    from rlc.review import asked_targets, judge, names_in, review

    loaded = _loaded(sheet, flags)
    judged = judge(loaded, asked_targets(loaded, quantity or ()), samples, seed)
    found = review(loaded, names_in("loop"), judged)
    pieces = [*_loop(found), *_spread(found)]
    _show(found, pieces, ("spread",), _Output(as_json, plots, suffix))
    if not found.targets_hold:
        raise typer.Exit(TARGET_FAILS)


@app.command()
@_guarded
def new(
    kind: Annotated[
        Literal["filter", "inrush", "tolerance"], typer.Argument(help="What the sheet is for.")
    ],
    file: Annotated[
        Path | None, typer.Argument(help="Where to write it; KIND.toml here if not given.")
    ] = None,
) -> None:
    """Write a commented sheet to start from; it passes "rlc check" as it stands."""
    from importlib.resources import files

    path = file or Path(f"{kind}.toml")
    text = files("rlc.front").joinpath("starters", f"{kind}.toml").read_bytes()
    try:
        with path.open("xb") as sheet:
            sheet.write(text)
    except FileExistsError:
        raise InputError("FILE", str(path), "exists, and nothing is overwritten") from None
    except OSError as error:
        raise InputError("FILE", str(path), f"cannot be written: {error.strerror}") from None
    typer.echo(f"Wrote {path}; try: rlc check {path}", err=True)


@app.command()
@_guarded
def quantities(
    name: Annotated[str | None, typer.Argument(help="Only this one, in full.")] = None,
    as_json: Json = False,
) -> None:
    """The register: every quantity that has a name, with unit, convention, formula, source."""
    from rlc.render import machine, tables
    from rlc.review import unknown_quantity
    from rlc.solver.quantities import REGISTER

    if name is not None and name not in REGISTER:
        raise unknown_quantity(name, "NAME")
    rows = list(REGISTER.values()) if name is None else [REGISTER[name]]
    if as_json:
        typer.echo(json.dumps({"quantities": machine.register(rows)}, indent=2))
    else:
        tables.write(_console(), tables.register() if name is None else tables.definition(rows[0]))


@app.callback(invoke_without_command=True)
def _options(
    version: Annotated[bool, typer.Option("--version", help="Print the version.")] = False,
) -> None:
    if version:
        typer.echo(f"rlc {__version__}")
        raise typer.Exit


def _partial(sheet: Path | None, flags: dict[str, str], groups: tuple[str, ...]) -> Review:
    """Those quantities that one command answers, without a spread."""
    from rlc.review import names_in, review

    return review(_loaded(sheet, flags), names_in(*groups))


def _loop(found: Review) -> list[Table | str]:
    from rlc.render import tables

    sheet = found.loaded.sheet
    return [
        tables.loop(found.case, sheet.parts(), sheet.tolerances()),
        tables.source(found.case),
        tables.frequencies(found.case, found.quantities),
        tables.quantities("Loop quantities", found.quantities, "loop"),
    ]


def _steady(found: Review) -> list[Table | str]:
    from rlc.render import tables

    return [
        tables.elements(found.case),
        tables.quantities("Steady state", found.quantities, "steady"),
    ]


def _switch_on(found: Review) -> list[Table | str]:
    from rlc.render import tables

    return [
        tables.peaks(found.case),
        tables.quantities("Switch-on", found.quantities, "switch-on"),
    ]


def _spread(found: Review) -> list[Table | str]:
    from rlc.render import tables

    batch = found.spread
    assert batch is not None
    if not batch.parts:
        shown: list[Table | str] = ["No part has a tolerance: there is no spread."]
    else:
        shown = [
            f"{batch.count} random units, seed {batch.seed}; worst case searched among corners"
            " and samples, not proved.",
            tables.spread(found.outcomes),
        ]
    limited = [outcome for outcome in found.outcomes if outcome.target.limited]
    return [*shown, tables.targets(limited)] if limited else shown
