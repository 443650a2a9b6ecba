"""The house: which room may import which, what lies at the top, how large files and signatures grow."""

from __future__ import annotations

import ast
import fnmatch
import importlib
import inspect
import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from functools import cache
from pathlib import Path

import pytest

HOUSE = Path(__file__).resolve().parents[1]
PACKAGES = ("coatings", "materials")
PATHS = sorted(path for package in PACKAGES for path in (HOUSE / package).rglob("*.py"))

# A room imports only rooms above it in this list.
ROOMS = (
    "errors", "stack", "grids", "optics", "executors", "recipe", "facets", "guide", "design", "laser",
    "curve", "product", "field", "witness", "datafiles", "counted", "below_threshold", "calibration",
    "reflectivity", "trade", "trading", "audit", "documents", "cli",
)  # fmt: skip
MAY_IMPORT = {"optics": {"errors", "stack", "grids"}, "laser": {"errors", "grids"}}
"""Rooms that know even less than their place in the list allows."""

USES_MATERIALS = {"recipe", "facets", "design", "witness", "trade", "audit", "documents", "cli"}
OUTSIDE = {"numpy", "scipy", "matplotlib", "numba", "pydantic", "rich", "click", "tomlkit"}
ONLY_IN = {
    "matplotlib": {"documents"}, "tomlkit": {"documents"}, "pydantic": {"recipe"},
    "numba": {"optics"}, "click": {"cli"}, "rich": {"cli"},
}  # fmt: skip
FILE_ACCESS = {"pathlib", "io", "tempfile", "shutil", "csv", "json", "tomllib", "pickle", "glob"}

TOP_LEVEL = {
    "README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE",
    "coatings", "materials", "tests", "recipes",
}  # fmt: skip
MOST_LINES = 400
MOST_PARAMETERS, MOST_POSITIONAL = 8, 2

# A chip and its two facets belong together and go in one order everywhere.
POSITIONAL_EXCEPTIONS = {
    "estimate", "operate", "power_current", "power_budget", "estimate_external",
    # of materials: a name and its numbers, as a recipe writes them
    "cauchy", "constant", "mixture",
}  # fmt: skip
EXPORTING = ("coatings.optics", "coatings.recipe", "coatings.laser", "materials")


@cache
def parsed(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


def room(path: Path) -> str:
    """Room of a file: ``optics``, ``curve``; ``materials``; ``coatings`` for the package itself."""
    parts = path.relative_to(HOUSE).with_suffix("").parts
    if parts[0] == "materials" or parts[1] == "__init__":
        return parts[0]
    return parts[1]


def imports(path: Path) -> Iterator[str]:
    """Modules that a file imports anywhere in it, also late and for types only."""
    for node in ast.walk(parsed(path)):
        if isinstance(node, ast.Import):
            yield from (name.name for name in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            assert node.module is not None
            yield node.module
            if node.module == "coatings":
                yield from (f"coatings.{name.name}" for name in node.names)


def rooms_imported(path: Path) -> set[str]:
    names = (name.split(".") for name in imports(path))
    return {parts[1] for parts in names if parts[0] == "coatings" and len(parts) > 1}


def ids(path: Path) -> str:
    return str(path.relative_to(HOUSE))


def test_every_room_has_its_place() -> None:
    assert {room(path) for path in PATHS} <= {*ROOMS, "coatings", "materials"}


@pytest.mark.parametrize("path", PATHS, ids=ids)
def test_imports_go_one_way(path: Path) -> None:
    here = room(path)
    imported = rooms_imported(path) - {here, "__version__"}
    if here in ("materials", "coatings"):
        assert not imported
        return
    above = set(ROOMS[: ROOMS.index(here)])
    assert imported <= MAY_IMPORT.get(here, above)


@pytest.mark.parametrize("path", PATHS, ids=ids)
def test_other_packages_stay_in_their_rooms(path: Path) -> None:
    here = room(path)
    tops = {name.split(".")[0] for name in imports(path)} - set(sys.stdlib_module_names)
    allowed = {name for name in OUTSIDE if here in ONLY_IN.get(name, {here})} | {"coatings"}
    if here == "materials":
        allowed = {"numpy", "scipy", "materials"}
    elif here in USES_MATERIALS:
        allowed.add("materials")
    assert tops <= allowed


def test_no_cycles_between_files() -> None:
    """Not even between the files of one room, by what they import when they are loaded."""
    names = {_module(path): path for path in PATHS}
    edges = {name: {m for m in _loaded(path) if m in names} for name, path in names.items()}
    done: set[str] = set()

    def visit(name: str, trail: tuple[str, ...]) -> None:
        assert name not in trail, " -> ".join((*trail, name))
        if name not in done:
            for other in edges[name]:
                visit(other, (*trail, name))
            done.add(name)

    for name in names:
        visit(name, ())


def _module(path: Path) -> str:
    parts = path.relative_to(HOUSE).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def _loaded(path: Path) -> Iterator[str]:
    for node in parsed(path).body:
        if isinstance(node, ast.Import):
            yield from (name.name for name in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module is not None:
            yield node.module


@pytest.mark.parametrize(
    "path", [path for path in PATHS if room(path) in ("optics", "laser")], ids=ids
)
def test_no_file_access_in_optics_and_laser(path: Path) -> None:
    assert not {name.split(".")[0] for name in imports(path)} & FILE_ACCESS
    called = {
        node.func.id
        for node in ast.walk(parsed(path))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    }
    assert "open" not in called


def test_top_level_is_what_it_should_be() -> None:
    listed = subprocess.run(
        ["git", "ls-files"], cwd=HOUSE, capture_output=True, text=True, check=False
    )
    if listed.returncode == 0 and listed.stdout:
        found = {line.split("/")[0] for line in listed.stdout.splitlines()}
    else:  # a copy without history: what git would not keep is left out
        ignored = [line.strip("/") for line in (HOUSE / ".gitignore").read_text().split()]
        found = {
            path.name
            for path in HOUSE.iterdir()
            if not any(fnmatch.fnmatch(path.name, pattern) for pattern in ignored)
        }
    assert {name for name in found if not name.startswith(".")} == TOP_LEVEL


@pytest.mark.parametrize("path", PATHS, ids=ids)
def test_files_stay_small(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= MOST_LINES


@pytest.mark.parametrize("path", PATHS, ids=ids)
def test_public_names_say_what_they_are(path: Path) -> None:
    tree = parsed(path)
    assert ast.get_docstring(tree) or not tree.body
    silent = [
        node.name
        for node in tree.body
        if isinstance(node, ast.FunctionDef | ast.ClassDef)
        and not node.name.startswith("_")
        and not ast.get_docstring(node)
    ]
    assert silent == []


def exported_functions() -> Iterator[tuple[str, Callable[..., object]]]:
    for name in EXPORTING:
        module = importlib.import_module(name)
        for public in module.__all__:
            value = getattr(module, public)
            if inspect.isfunction(value):
                yield public, value


@pytest.mark.parametrize(("name", "function"), list(exported_functions()))
def test_signatures_stay_short(name: str, function: Callable[..., object]) -> None:
    parameters = inspect.signature(function).parameters.values()
    positional = [p for p in parameters if p.kind is p.POSITIONAL_OR_KEYWORD]
    assert len(parameters) <= MOST_PARAMETERS
    if name not in POSITIONAL_EXCEPTIONS:
        assert len(positional) <= MOST_POSITIONAL


def test_readme_and_ci_run_the_same_lines() -> None:
    readme = (HOUSE / "README.md").read_text(encoding="utf-8")
    blocks = re.findall(r"^```[a-z]*\n(.*?)^```$", readme, flags=re.MULTILINE | re.DOTALL)
    commands = [block.strip() for block in blocks if block.startswith("python3 -m venv")]
    ran = (HOUSE / ".ci" / "run").read_text(encoding="utf-8").splitlines()
    assert len(commands) == 2
    for command in commands:
        assert "\n" not in command
        assert command in ran
