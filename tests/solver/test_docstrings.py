"""Docstrings of the solver and the front: present, true to the signature, with units."""

import ast
import dataclasses
import importlib
import inspect
import pkgutil
import re
import textwrap

import pytest

import rlc.front
import rlc.solver

ROOMS = (rlc.solver, rlc.front)
# A bracket that begins with a unit, or with words for one that depends on the kind of value.
_UNIT = re.compile(
    r"\[(?:SI\b|unit of `\w+`|(?:1|V|A|s|Hz|ohm|H|F|S|W|var|J|rad|deg|pF)(?![A-Za-z0-9.])|%)"
)
# Whole numbers are counts, places and seeds, which have no unit.
_NUMBERS = re.compile(r"\b(?:float|array_like|Array|Complex|Decimal|Pair|pint quantity)\b")
_TRUTH = re.compile(r"\bArray of bool\b")
_ENTRY = re.compile(r"^(\*{0,2}\w+(?:, \w+)*) : (.+)$")
_ERRORS = ("InputError", "SheetError", "ValueError")

# Their arguments are explained once, at the top of the module.
EXEMPT = {f"rlc.solver.doubledouble.{name}" for name in (
    "two_sum", "two_product", "add", "subtract", "multiply", "divide",
)}  # fmt: skip


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


def documented(docstring, section="Parameters"):
    """Names, type and description of each entry of a section, in order."""
    lines = inspect.cleandoc(docstring or "").splitlines()
    if section not in lines:
        return []
    entries = []
    for line, following in zip(
        lines[lines.index(section) + 2 :], [*lines[lines.index(section) + 3 :], ""], strict=True
    ):
        if following and set(following) == {"-"}:
            break
        if found := _ENTRY.match(line):
            entries.append((found[1].replace("*", "").split(", "), found[2], []))
        elif entries and (line.startswith("    ") or not line):
            entries[-1][2].append(line.strip())
    return [(names, kind, " ".join(text).strip()) for names, kind, text in entries]


def arguments(thing):
    names = [
        name
        for name in inspect.signature(thing).parameters
        if name not in ("self", "cls") and not name.startswith("_")
    ]
    if dataclasses.is_dataclass(thing):
        hidden = {f.name for f in dataclasses.fields(thing) if not f.init}
        names = [name for name in names if name not in hidden]
    return names


def lacks_parameters(thing):
    """Whether arguments or fields go without a section of their own."""
    if inspect.isclass(thing):
        fields = set(getattr(thing, "__annotations__", {}))
        return bool(fields) and not any(
            documented(thing.__doc__, section) for section in ("Parameters", "Attributes")
        )
    return len(arguments(thing)) > 1 and not documented(thing.__doc__)


def without_unit(docstring):
    """Names of the numbers that are documented without a unit, or without any text."""
    return [
        name
        for section in ("Parameters", "Attributes")
        for names, kind, text in documented(docstring, section)
        for name in names
        if not text or (_NUMBERS.search(_TRUTH.sub("", kind)) and not _UNIT.search(text))
    ]


def returns_without_unit(thing):
    """Whether numbers are returned and the docstring says nowhere but for arguments in what."""
    answer = str(inspect.signature(thing).return_annotation)
    lines = inspect.cleandoc(thing.__doc__).splitlines()
    start = lines.index("Returns") if "Returns" in lines else len(lines)
    told = "\n".join([lines[0], *lines[start:]])
    return bool(_NUMBERS.search(answer)) and not (_UNIT.search(told) or _TRUTH.search(told))


def raised_silently(thing):
    """Errors that are raised right there and are not in the docstring."""
    first = getattr(thing, "__post_init__", None) if inspect.isclass(thing) else thing
    if first is None or not inspect.isfunction(first):
        return []
    tree = ast.parse(textwrap.dedent(inspect.getsource(first)))
    raised = {
        node.exc.func.id
        for node in ast.walk(tree)
        if isinstance(node, ast.Raise)
        and isinstance(node.exc, ast.Call)
        and isinstance(node.exc.func, ast.Name)
    }
    return [name for name in _ERRORS if name in raised and name not in thing.__doc__]


def test_there_is_something_to_check():
    assert "rlc.solver.loop.Loop" in THINGS
    assert "rlc.solver.loop.Loop.weights" in THINGS
    assert "rlc.solver.case.Case.equation" in THINGS
    assert "rlc.front.units.read" in THINGS
    assert set(THINGS) > EXEMPT
    assert sum(bool(documented(thing.__doc__ or "")) for thing in THINGS.values()) > 15


@pytest.mark.parametrize("name", THINGS)
def test_has_a_docstring(name):
    docstring = THINGS[name].__doc__
    # A dataclass without one of its own shows its signature instead.
    assert docstring
    assert not docstring.startswith(f"{THINGS[name].__name__}(")
    summary = inspect.cleandoc(docstring).split("\n\n")[0]
    assert summary.rstrip().endswith((".", "]", ":")), summary


@pytest.mark.parametrize("name", sorted(set(THINGS) - EXEMPT))
def test_parameters_are_documented(name):
    assert not lacks_parameters(THINGS[name])


WITH_PARAMETERS = [name for name, thing in THINGS.items() if documented(thing.__doc__)]
WITH_ATTRIBUTES = [
    name for name, thing in THINGS.items() if documented(thing.__doc__, "Attributes")
]


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_documented_parameters_are_those_of_the_signature(name):
    thing = THINGS[name]
    listed = [each for names, _, _ in documented(thing.__doc__) for each in names]
    assert listed == arguments(thing)


@pytest.mark.parametrize("name", WITH_ATTRIBUTES)
def test_documented_attributes_are_those_of_the_class(name):
    thing = THINGS[name]
    listed = [each for names, _, _ in documented(thing.__doc__, "Attributes") for each in names]
    if dataclasses.is_dataclass(thing) or issubclass(thing, tuple):
        assert listed == arguments(thing)
    else:
        # A table of the sheet; what it shares with others is documented there.
        assert set(listed) >= set(thing.__annotations__) - {"kind", "field"}
        assert set(listed) <= set(thing.model_fields)


@pytest.mark.parametrize("name", THINGS)
def test_numbers_have_units(name):
    assert not without_unit(THINGS[name].__doc__)


# Pairs of doubles have the caller's units.
FUNCTIONS = [
    name
    for name, thing in THINGS.items()
    if inspect.isfunction(thing) and not name.startswith("rlc.solver.doubledouble.")
]


@pytest.mark.parametrize("name", FUNCTIONS)
def test_returned_numbers_have_units(name):
    assert not returns_without_unit(THINGS[name])


@pytest.mark.parametrize("name", THINGS)
def test_errors_are_documented(name):
    assert not raised_silently(THINGS[name])


def _bare(first: float, second: float) -> float:
    """Sum."""
    if second:
        raise ValueError(second)
    return first


def _vague(first: float) -> float:
    """Itself.

    Parameters
    ----------
    first : float
        A number [from 0 to 1], see [2].

    Returns
    -------
    float
    """
    return first


def _told(first: float) -> float:
    """Itself.

    Parameters
    ----------
    first : float
        More than zero [ohm].

    Returns
    -------
    float
        The same [ohm].

    Raises
    ------
    ValueError
        At zero.
    """
    if not first:
        raise ValueError(first)
    return first


def test_the_checks_find_what_is_missing():
    assert lacks_parameters(_bare)
    assert returns_without_unit(_bare)
    assert raised_silently(_bare) == ["ValueError"]
    assert without_unit(_vague.__doc__) == ["first"]
    assert returns_without_unit(_vague)
    assert not lacks_parameters(_told)
    assert not without_unit(_told.__doc__)
    assert not returns_without_unit(_told)
    assert not raised_silently(_told)
