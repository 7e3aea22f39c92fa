"""The floors of the package: imports point downwards only, and the two lowest know numbers alone."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

SOURCE = Path(__file__).parents[1] / "src" / "knell"
FLOORS = ("physics", "methods", "survey", "record", "readout", "command")
PURE = ("physics", "methods")
HEAVY = {"xarray", "netCDF4", "matplotlib", "scipy", "pandas", "snakemake"}
FILES = {"pathlib", "os", "io", "shutil", "tempfile", "glob", "subprocess", "logging", "argparse", "pickle"}
FILE_CALLS = {"open", "print", "input", "read_text", "write_text", "read_bytes", "write_bytes", "tofile", "fromfile"}
FILE_CALLS |= {"load", "save", "savez", "loadtxt", "savetxt", "genfromtxt"}

MODULES = sorted(SOURCE.rglob("*.py"))


def floor(parts: tuple[str, ...]) -> int:
    """The height of ``knell.<parts>``: 1 and up for the floors, 0 for what they all stand on, the top for ``__main__``.

    Raises `ValueError` for a package that is no floor.
    """
    if not parts or parts[0] in ("errors", "__init__", "__version__"):
        return 0
    if parts[0] == "__main__":
        return len(FLOORS) + 1
    return 1 + FLOORS.index(parts[0])


def imported(source: str, package: tuple[str, ...]) -> set[tuple[str, ...]]:
    """Every absolute dotted name that a module of ``package`` imports, inside functions too."""
    names: set[tuple[str, ...]] = set()
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            names |= {tuple(alias.name.split(".")) for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            above = package[: len(package) - node.level + 1] if node.level else ()
            base = (*above, *(node.module or "").split(".")) if node.module else above
            # `from knell import methods` names a floor only in the imported part.
            names |= {(*base, alias.name) for alias in node.names}
    return names


def upward(source: str, module: tuple[str, ...]) -> set[str]:
    """The imports of ``knell.<module>`` that lie on a floor above its own."""
    own = floor(module)
    inside = {name[1:] for name in imported(source, ("knell", *module[:-1])) if name[0] == "knell"}
    return {".".join(name) for name in inside if floor(name) > own}


def touches(source: str) -> set[str]:
    """The heavy or file-handling modules that a source imports, and its calls that read, write or print."""
    found = {name[0] for name in imported(source, ("knell",))} & (HEAVY | FILES | {"importlib"})
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Call):
            name = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            found |= {f"{name}()"} & {f"{x}()" for x in FILE_CALLS}
    return found


def parts_of(path: Path) -> tuple[str, ...]:
    return path.relative_to(SOURCE).with_suffix("").parts


@pytest.mark.parametrize("path", MODULES, ids=lambda path: "/".join(parts_of(path)))
def test_imports_point_downwards(path: Path) -> None:
    assert upward(path.read_text(encoding="utf-8"), parts_of(path)) == set()


@pytest.mark.parametrize(
    "path", [x for x in MODULES if parts_of(x)[0] in PURE], ids=lambda path: "/".join(parts_of(path))
)
def test_numbers_in_numbers_out(path: Path) -> None:
    assert touches(path.read_text(encoding="utf-8")) == set()


def test_the_pure_floors_load_nothing_heavy() -> None:
    """What a cell imports is paid by every cell: asked of a fresh interpreter, so that indirect imports count."""
    names = [".".join(("knell", *parts_of(path))) for path in MODULES if parts_of(path)[0] in PURE]
    program = f"import sys\nfor name in {names!r}:\n    __import__(name)\nprint(*({HEAVY!r} & set(sys.modules)))"
    run = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert run.stdout.split() == []


def test_every_package_is_a_floor() -> None:
    packages = {path.name for path in SOURCE.iterdir() if path.is_dir() and path.name != "__pycache__"}
    assert packages <= set(FLOORS)
    assert set(PURE) <= packages


@pytest.mark.parametrize(
    ("source", "module", "found"),
    [
        ("import knell.survey.points", ("physics", "field"), {"survey.points"}),
        ("from knell import methods", ("physics", "field"), {"methods"}),
        ("from ..survey import points", ("methods", "aim"), {"survey.points"}),
        ("from ...survey import points", ("methods", "match", "series"), {"survey.points"}),
        ("def f():\n    from knell.command import main", ("readout", "style"), {"command.main"}),
        ("from knell.physics import field\nfrom . import contour\nimport numpy", ("methods", "aim"), set()),
        ("from knell.survey import points", ("errors",), {"survey.points"}),
        ("from knell.errors import InputError\nfrom knell import __version__", ("physics", "field"), set()),
    ],
)
def test_the_rule_sees_what_it_forbids(source: str, module: tuple[str, ...], found: set[str]) -> None:
    assert upward(source, module) == found


@pytest.mark.parametrize(
    ("source", "found"),
    [
        ("import matplotlib.pyplot as plt", {"matplotlib"}),
        ("def f():\n    from pathlib import Path", {"pathlib"}),
        ("with open('x') as f:\n    pass", {"open()"}),
        ("import numpy as np\nnp.save('x', 1)", {"save()"}),
        ("import numpy as np\nimport flint\nnp.exp(1)", set()),
    ],
)
def test_purity_sees_what_it_forbids(source: str, found: set[str]) -> None:
    assert touches(source) == found
