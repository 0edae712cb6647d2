"""Docstrings of the solver and the front: present, true to the signature, with units."""

import dataclasses
import importlib
import inspect
import pkgutil
import re

import pytest

import rlc.front
import rlc.solver

ROOMS = (rlc.solver, rlc.front)
# A unit; or words for one where it depends on the kind of value, or for a count.
_UNIT = re.compile(r"\[[^\]]+\]|\bSI\b|\bHow many\b")
_ENTRY = re.compile(r"^(\w+(?:, \w+)*) : (.+)$")


def modules():
    for room in ROOMS:
        for found in pkgutil.iter_modules(room.__path__, room.__name__ + "."):
            yield importlib.import_module(found.name)


def public_things():
    """Functions and classes of our own, and the classes' methods and properties."""
    for module in modules():
        for name, thing in list(vars(module).items()):
            own = getattr(thing, "__module__", None) == module.__name__
            if name.startswith("_") or not own:
                continue
            if inspect.isclass(thing):
                yield f"{module.__name__}.{name}", thing
                for part, member in list(vars(thing).items()):
                    function = getattr(member, "fget", getattr(member, "func", member))
                    written = inspect.isfunction(function) and function.__doc__ is not None
                    if not part.startswith("_") and (written or _is_code_of(module, function)):
                        yield f"{module.__name__}.{name}.{part}", function
            elif inspect.isfunction(thing) or hasattr(thing, "__wrapped__"):
                yield f"{module.__name__}.{name}", inspect.unwrap(thing)


def _is_code_of(module, function):
    # Methods that a decorator writes, such as those of a named tuple, come from no file of ours.
    return inspect.isfunction(function) and function.__code__.co_filename == module.__file__


THINGS = dict(public_things())


def documented(docstring):
    """Names, type and description of each entry of the section Parameters, in order."""
    lines = inspect.cleandoc(docstring).splitlines()
    if "Parameters" not in lines:
        return []
    entries = []
    for line in lines[lines.index("Parameters") + 2 :]:
        if set(line) == {"-"}:
            # The underline of the next section; its title was taken for a description.
            break
        if found := _ENTRY.match(line):
            entries.append((found[1].split(", "), found[2], []))
        elif entries and (line.startswith("    ") or not line):
            entries[-1][2].append(line.strip())
    return [(names, kind, " ".join(text)) for names, kind, text in entries]


def arguments(thing):
    names = [
        name
        for name, parameter in inspect.signature(thing).parameters.items()
        if name not in ("self", "cls")
        and not name.startswith("_")
        and parameter.kind is not parameter.VAR_KEYWORD
    ]
    if dataclasses.is_dataclass(thing):
        hidden = {f.name for f in dataclasses.fields(thing) if not f.init}
        names = [name for name in names if name not in hidden]
    return names


def test_there_is_something_to_check():
    assert "rlc.solver.loop.Loop" in THINGS
    assert "rlc.solver.loop.Loop.weights" in THINGS
    assert "rlc.solver.case.Case.equation" in THINGS
    assert "rlc.front.units.read" in THINGS
    assert sum(bool(documented(thing.__doc__ or "")) for thing in THINGS.values()) > 15


@pytest.mark.parametrize("name", THINGS)
def test_has_a_docstring(name):
    docstring = THINGS[name].__doc__
    # A dataclass without one of its own shows its signature instead.
    assert docstring
    assert not docstring.startswith(f"{THINGS[name].__name__}(")
    summary = inspect.cleandoc(docstring).split("\n\n")[0]
    assert summary.rstrip().endswith((".", "]", ":")), summary


WITH_PARAMETERS = [name for name, thing in THINGS.items() if documented(thing.__doc__ or "")]


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_documented_parameters_are_those_of_the_signature(name):
    thing = THINGS[name]
    listed = [each for names, _, _ in documented(thing.__doc__) for each in names]
    assert listed == arguments(thing)


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_numbers_have_units(name):
    for names, kind, text in documented(THINGS[name].__doc__):
        assert text, names
        if re.search(r"\b(float|array_like|Array)\b", kind):
            assert _UNIT.search(text), (names, "has no unit")
