"""A document's values against the sheet's models: every error at once, each with its place."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from difflib import get_close_matches
from pathlib import Path
from typing import Any, get_args

from pydantic import BaseModel, ValidationError

from rlc.errors import InputError, SheetError
from rlc.front.contradictions import ORDER, contradictions
from rlc.front.document import Document, KeyPath, read_document, with_flags
from rlc.front.door import Door
from rlc.front.inputs import Loaded
from rlc.front.sheet import Sheet
from rlc.front.sources import SOURCES, OrderTable, Sine

_TABLES: dict[str, tuple[type[BaseModel], ...]] = {
    name: models
    for name, info in Sheet.model_fields.items()
    if (
        models := tuple(
            kind
            for kind in (info.annotation, *get_args(info.annotation))
            if isinstance(kind, type) and issubclass(kind, BaseModel)
        )
    )
}
_EXAMPLES = {
    "resistor.value": '"12 ohm"',
    "inductor.value": '"33 mH"',
    "capacitor.value": '"1 uF"',
    "source.voltage": '"24 V"',
    "source.frequency": '"50 Hz"',
    "source.rise_time": '"2 ms"',
    "source.width": '"5 ms"',
    "source.front_time": '"1.2 us"',
    "source.half_value_time": '"50 us"',
    "source.file": '"record.csv"',
    "source.orders.number": "5",
    "load.resistance": '"10 kohm"',
    "fuse.melting_let_through": '"0.9 A^2 s"',
    "fuse.operations": "10000",
}
_SINE = 'kind = "sine", rms = "24 V", frequency = "50 Hz"'


def read_sheet(path: str | Path, flags: Mapping[str, str]) -> Loaded:
    """Read a sheet, with flags in place of some of its values.

    Parameters
    ----------
    path : str or Path
        The sheet.
    flags : mapping of str to str
        Option, such as ``--resistance``, to its text; they do not contradict each other.

    Returns
    -------
    Loaded

    Raises
    ------
    SheetError
        With everything that is wrong with the sheet.
    """
    document = with_flags(read_document(path), flags)
    said = dict(contradictions(document.data))
    problems = dict(said)
    try:
        sheet = Sheet.model_validate(document.data, context=Path(path).parent)
    except ValidationError as error:
        for each in error.errors():
            at, found = _problem(each, document)
            # A table that contradicts itself makes no source; why is said at its keys.
            told = any(known[: len(at)] == at for known in said)
            if not (told and each["type"] == "value_error"):
                problems.setdefault(at, found)
    if problems:
        ordered = sorted(problems, key=lambda at: document.line_of(at) or 0)
        raise SheetError(
            document.name, tuple(_placed(at, problems[at], document) for at in ordered)
        )
    notes = tuple(_notes(sheet, document))
    return Loaded(sheet.inputs(), document.name, document.changes, notes)


def _placed(at: KeyPath, found: InputError, document: Document) -> tuple[int | None, InputError]:
    """The error with its line, under the name by which the user knows the value."""
    steps = (f"[{part + 1}]" if isinstance(part, int) else f".{part}" for part in at)
    name = document.options.get(at) or "".join(steps).lstrip(".")
    if found.name and found.name != at[-1]:
        name += f": {found.name}"
    line = None if at in document.options else document.line_of(at)
    return line, InputError(name, found.value, found.rule, found.hint)


def _problem(error: Any, document: Document) -> tuple[KeyPath, InputError]:
    """One of pydantic's errors in our words, and where it is."""
    # A source's place holds its kind, which is no key of the sheet.
    at: KeyPath = tuple(
        part
        for index, part in enumerate(error["loc"])
        if (error["loc"][0], index) != ("source", 1) or part not in SOURCES
    )
    kind, value = error["type"], error["input"]
    cause = error.get("ctx", {}).get("error")
    if isinstance(cause, InputError):
        # A rule between keys names the one to change; its value is shown as it was typed.
        if isinstance(value, dict) and cause.name in value:
            at, value = (*at, cause.name), value[cause.name]
        elif cause.name and cause.name != at[-1]:
            value = None
        return at, InputError(cause.name, value, cause.rule, cause.hint)
    if kind == "missing":
        return _missing(at)
    if kind == "extra_forbidden":
        return at, InputError("", value, *_unknown(at, document.data))
    if kind.startswith("union_tag"):
        given = value.get("kind") if isinstance(value, dict) else None
        rule = "is missing" if given is None else "is no kind of source"
        hint = f"Write kind = {_either(SOURCES)}"
        return ("source", "kind"), InputError("", given, rule, hint)
    if kind == "literal_error":
        return at, InputError("", value, *_no_choice(at, value, document.data))
    if kind in ("model_type", "model_attributes_type", "tuple_type"):
        if _is_order(at):
            return at, InputError("", value, "must be tables, each below a line [[source.orders]]")
        line = f"[[{at[0]}]]" if at[0] == "target" else f"[{at[0]}]"
        return at, InputError("", value, f"must be a table, with a line {line} above its keys")
    return at, InputError("", value, error["msg"].replace("Input should be", "must be"))


def _missing(at: KeyPath) -> tuple[KeyPath, InputError]:
    if at[-1] in _TABLES and at[-1] != "source" and len(at) == 1:
        at = (*at, "value")
    example = _EXAMPLES.get(".".join(part for part in at if isinstance(part, str)), "")
    if at == ("source",):
        hint = f"Write [source] and below it {_SINE}"
    elif at == ("source", "orders"):
        hint = ORDER
    else:
        table = "[[source.orders]]" if _is_order(at) else f"[{at[0]}]"
        hint = f"Write below {table} {at[-1]} = {example}" if example else ""
    return at, InputError("", None, "is missing", hint)


def _is_order(at: KeyPath) -> bool:
    return at[:2] == ("source", "orders")


def _either(words: Iterable[str]) -> str:
    *some, last = (f'"{word}"' for word in words)
    return f"{', '.join(some)} or {last}" if some else last


def _model_at(at: KeyPath, data: Mapping[str, Any]) -> type[BaseModel]:
    """The model of the table around a key."""
    if len(at) == 1:
        return Sheet
    if _is_order(at):
        return OrderTable
    if at[0] == "source":
        return SOURCES.get(str(data["source"].get("kind")), Sine)
    return _TABLES[str(at[0])][0]


def _no_choice(at: KeyPath, value: Any, data: Mapping[str, Any]) -> tuple[str, str]:
    """Rule and hint for a word that is not among those that may stand here."""
    model = _model_at(at, data)
    names = {info.alias or name: info.annotation for name, info in model.model_fields.items()}
    annotation = names[str(at[-1])]
    nested = (get_args(each) or (each,) for each in get_args(annotation))
    choices = [choice for each in nested for choice in each if isinstance(choice, str)]
    near = get_close_matches(str(value), choices, 1)
    if at[-1] == "quantity":
        hint = f'Did you mean "{near[0]}"?' if near else 'The names: "rlc quantities"'
        return "is not in the register of quantities", hint
    listed = ", ".join(f'"{choice}"' for choice in choices)
    return f"is none of {listed}", f'Did you mean "{near[0]}"?' if near else ""


def _unknown(at: KeyPath, data: Mapping[str, Any]) -> tuple[str, str]:
    """Rule and hint for a key that does not belong where it stands."""
    key = str(at[-1])
    here = [info.alias or name for name, info in _model_at(at, data).model_fields.items()]
    if at[0] == "source" and len(at) == 2:
        kinds = [kind for kind, table in SOURCES.items() if key in table.model_fields]
        if kinds:
            own = data["source"]["kind"]
            return f'belongs to a source of kind {_either(kinds)}, and this one is "{own}"', ""
    elsewhere = [
        name
        for name, models in _TABLES.items()
        if len(at) > 1 and name != at[0] and any(key in model.model_fields for model in models)
    ]
    # a key of several tables, such as a part's value, is hardly meant for one of them
    if len(elsewhere) == 1:
        return f"is a key of [{elsewhere[0]}], not of [{at[0]}]", f"Move it below [{elsewhere[0]}]"
    near = get_close_matches(key, here, 1)
    return "is an unknown key", f'Did you mean "{near[0]}"?' if near else (
        f"Known here: {', '.join(here)}"
    )


def _notes(sheet: Sheet, document: Document) -> Iterator[str]:
    """Sentences on values that are implausible for their kind."""
    for name, table in sheet:
        if not isinstance(table, BaseModel):
            continue
        for key, info in type(table).model_fields.items():
            nested = (part for each in get_args(info.annotation) for part in get_args(each))
            door = next(
                (part for part in (*info.metadata, *nested) if isinstance(part, Door)), None
            )
            value = getattr(table, key)
            note = door.note(value) if door else ""
            if note:
                yield f"{document.options.get((name, key)) or f'{name}.{key}'}: {note}"
