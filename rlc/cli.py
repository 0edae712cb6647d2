"""The commands: read, solve, show. Whatever is slow to import is imported inside them."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal

import typer

from rlc import __version__
from rlc.console import (
    Json,
    Output,
    Plots,
    Samples,
    Seed,
    Sheet,
    Suffix,
    guarded,
    note,
    read_sheet,
    show,
    terminal_width,
    with_flags,
)
from rlc.files import write_new
from rlc.front.flags import FLAGS, SAMPLES, SEED, TOLERANCE_FLAGS

if TYPE_CHECKING:
    from rich.table import Table
    from rich.text import Text

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

TARGET_FAILS = 3


@app.command()
@with_flags(*FLAGS, *TOLERANCE_FLAGS)
@guarded
def check(
    flags: dict[str, str],
    sheet: Sheet = None,
    samples: Samples = SAMPLES,
    seed: Seed = SEED,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Judge a loop: all results, a verdict per target, cautions.

    Exits with 0 if all targets hold, 3 if one fails, 2 on bad input.
    """
    from rlc.review import effort, judge, review
    from rlc.solver.quantities import REGISTER

    loaded = read_sheet(sheet, flags)
    note(effort(loaded, loaded.inputs.targets, samples))
    found = review(loaded, REGISTER, judge(loaded, loaded.inputs.targets, samples, seed))
    pieces = [*_loop(found), *_steady(found), *_switch_on(found), *_spread(found)]
    pictures = ("frequency-response", "switch-on", "state-plane", "spread")
    show(found, pieces, pictures, Output(as_json, plots, suffix))
    if not found.targets_hold:
        raise typer.Exit(TARGET_FAILS)


@app.command()
@with_flags(*FLAGS)
@guarded
def steady(
    flags: dict[str, str],
    sheet: Sheet = None,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Show the steady state: impedance, current, voltages, power."""
    found = _partial(sheet, flags, ("loop", "steady"))
    pieces = [*_loop(found), *_steady(found)]
    show(found, pieces, ("frequency-response",), Output(as_json, plots, suffix))


@app.command(name="switch-on")
@with_flags(*FLAGS)
@guarded
def switch_on(
    flags: dict[str, str],
    sheet: Sheet = None,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Show the switch-on: true peaks, settling, let-through."""
    from rlc.render import switching
    from rlc.solver.extrema import first_extrema

    found = _partial(sheet, flags, ("loop", "switch-on"))
    extrema = first_extrema(found.case)
    found = replace(found, extrema=extrema)
    pieces = [*_loop(found), *_switch_on(found), switching.extrema(extrema, found.case)]
    pieces += _told(switching.beyond(extrema, found.case))
    show(found, pieces, ("switch-on", "state-plane"), Output(as_json, plots, suffix))


@app.command()
@with_flags(*FLAGS)
@guarded
def sweep(
    flags: dict[str, str],
    sheet: Sheet = None,
    start: Annotated[str | None, typer.Option(metavar="VALUE", help="First frequency.")] = None,
    stop: Annotated[str | None, typer.Option(metavar="VALUE", help="Last frequency.")] = None,
    points: Annotated[int, typer.Option(help="Rows at equal ratios between them.")] = 25,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Show the steady state over a range of frequencies.

    The resonance, the band edges and the source's frequency are rows of their own.
    """
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
    show(found, pieces, ("frequency-response",), Output(as_json, plots, suffix))


@app.command()
@with_flags(*FLAGS, *TOLERANCE_FLAGS)
@guarded
def spread(
    flags: dict[str, str],
    sheet: Sheet = None,
    quantity: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME", help="Look at this one instead of the targets; repeatable."),
    ] = None,
    samples: Samples = SAMPLES,
    seed: Seed = SEED,
    as_json: Json = False,
    plots: Plots = None,
    suffix: Suffix = "png",
) -> None:
    """Show what real parts do: worst case, yield, part to blame.

    Exits with 0 if all targets that were looked at hold, 3 if one fails, 2 on bad input.
    """
    from rlc.review import asked_targets, effort, judge, names_in, review

    loaded = read_sheet(sheet, flags)
    targets = asked_targets(loaded, quantity or ())
    note(effort(loaded, targets, samples))
    judged = judge(loaded, targets, samples, seed)
    found = review(loaded, names_in("loop"), judged)
    pieces = [*_loop(found), *_spread(found)]
    show(found, pieces, ("spread",), Output(as_json, plots, suffix))
    if not found.targets_hold:
        raise typer.Exit(TARGET_FAILS)


@app.command()
@guarded
def new(
    kind: Annotated[
        Literal["filter", "inrush", "tolerance"], typer.Argument(help="What the sheet is for.")
    ],
    file: Annotated[
        Path | None, typer.Argument(help="Where to write it; KIND.toml here if not given.")
    ] = None,
) -> None:
    """Write a commented sheet to start from.

    It passes "rlc check" as it stands. Nothing is overwritten.
    """
    from importlib.resources import files

    path = file or Path(f"{kind}.toml")
    text = files("rlc.front").joinpath("starters", f"{kind}.toml").read_bytes()
    write_new(path, "FILE", lambda partial: partial.write_bytes(text))
    typer.echo(f"Wrote {path}; try: rlc check {path}", err=True)


@app.command()
@guarded
def quantities(
    name: Annotated[str | None, typer.Argument(help="Only this one, in full.")] = None,
    as_json: Json = False,
) -> None:
    """List every quantity that has a name.

    With a name: its unit, convention, definition, formula and published source.
    """
    from rlc.render import machine, tables
    from rlc.render.layout import write
    from rlc.solver.quantities import REGISTER, lookup

    rows = list(REGISTER.values()) if name is None else [lookup(name, "NAME")]
    if as_json:
        typer.echo(json.dumps({"quantities": machine.register(rows)}, indent=2))
    else:
        write(terminal_width(), tables.register() if name is None else tables.definition(rows[0]))


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

    return review(read_sheet(sheet, flags), names_in(*groups))


def _told(sentence: str) -> list[Table | Text | str]:
    """A sentence where there is one to tell."""
    return [sentence] if sentence else []


def _loop(found: Review) -> list[Table | Text | str]:
    from rlc.render import sources, tables

    inputs = found.loaded.inputs
    return [
        tables.loop(found.case, inputs.parts, inputs.tolerances),
        sources.sentence(found.case),
        tables.frequencies(found.case, found.quantities),
        tables.quantities("Loop quantities", found.quantities, "loop"),
    ]


def _steady(found: Review) -> list[Table | Text | str]:
    from rlc.render import states, tables

    case = found.case
    if not case.source.alternating:
        return [states.elements(case), *_told(states.after(case))]
    shown: list[Table | Text | str] = [states.elements(case)]
    if case.source.orders:
        shown.append(states.orders(case))
    return [*shown, tables.quantities("Steady state", found.quantities, "steady")]


def _switch_on(found: Review) -> list[Table | Text | str]:
    from rlc.render import switching, tables

    shown: list[Table | Text | str] = [switching.peaks(found.case)]
    if found.closings:
        shown.append(switching.closings(found.closings, found.case))
    return [
        *shown,
        switching.limits(found.exceeded, found.case),
        tables.quantities("Switch-on", found.quantities, "switch-on"),
    ]


def _spread(found: Review) -> list[Table | Text | str]:
    from rlc.render import tables

    batch = found.spread
    assert batch is not None
    shown: list[Table | Text | str] = []
    if not batch.parts:
        shown.append("No part has a tolerance: there is no spread.")
    else:
        shown.append(
            f"{batch.count} random units, seed {batch.seed}; worst case searched among corners,"
            " resonances between them and samples, not proved."
        )
        if found.outcomes and batch.count:
            shown.append(tables.spread(found.outcomes))
    limited = [outcome for outcome in found.outcomes if outcome.target.limited]
    return [*shown, *([tables.targets(limited)] if limited else []), tables.summary(limited)]
