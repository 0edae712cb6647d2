"""The rooms of the house: which may import which, and how large they may grow."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
FILES = sorted((ROOT / "rlc").rglob("*.py"))

# Arrows run one way. Formatting a number as text is all that a renderer takes from the front.
MAY_IMPORT = {
    "errors": set[str](),
    "files": {"errors"},
    "solver": {"errors", "solver"},
    "front": {"errors", "solver", "front"},
    "render": {"errors", "files", "solver", "render", "front.marking"},
    "review": {"errors", "solver", "front", "render", ""},
    "console": {"errors", "front", "render", "review"},
    "cli": {"errors", "files", "solver", "front", "render", "review", "console", ""},
    "__init__": set[str](),
    "__main__": {"cli"},
}


def imports(path: Path) -> set[str]:
    """Modules of the package that a file imports, wherever in it, without the leading "rlc."."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: imports are absolute"
            found.add(node.module or "")
            found |= {f"{node.module}.{alias.name}" for alias in node.names}
    own = (
        name.removeprefix("rlc").lstrip(".") for name in found if name.partition(".")[0] == "rlc"
    )
    modules = {
        str(file.relative_to(ROOT / "rlc").with_suffix("")).replace("/", ".") for file in FILES
    }
    return {name for name in own if name == "" or name in modules}


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(ROOT)))
def test_arrows_run_one_way(path: Path) -> None:
    room = path.relative_to(ROOT / "rlc").with_suffix("").parts[0]
    allowed = MAY_IMPORT[room]
    for name in imports(path):
        assert name in allowed or name.partition(".")[0] in allowed, f"{room} imports {name!r}"


def test_the_reader_of_imports_sees_them() -> None:
    found = imports(ROOT / "rlc" / "cli.py")
    assert {"review", "render.tables", "front.flags", ""} <= found
