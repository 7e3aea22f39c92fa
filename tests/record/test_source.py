"""Source hashes: they see what a module can import, and nothing else."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

from knell.record import source


@pytest.fixture
def package(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A package of its own, under the same name."""
    root = tmp_path / "knell"
    files = {
        "__init__.py": "",
        "low/__init__.py": "",
        "low/sums.py": "import math\n",
        "low/products.py": "from . import sums\n",
        "high/__init__.py": "",
        "high/solve.py": "from knell.low import (\n    products,  # and, with a comment, sums\n)\n",
        "high/lazy.py": "def f():\n    import knell.low.sums as s, os\n    return s, os\n",
        "high/draw.py": "'''from knell.high import nothing'''\nfrom knell.high.solve import answer\n",
    }
    for name, text in files.items():
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        (root / name).write_text(text)
    monkeypatch.setattr(source, "PACKAGE", root)
    source._file.cache_clear()
    yield root
    source._file.cache_clear()


def reached(package: Path, module: str) -> set[str]:
    return {path.relative_to(package).as_posix() for path in source.source_files([module])}


def test_what_a_module_reaches(package: Path) -> None:
    shared = {"__init__.py", "high/__init__.py", "low/__init__.py", "low/sums.py"}
    assert reached(package, "knell.high.solve") == shared | {"high/solve.py", "low/products.py"}
    assert reached(package, "knell.high.lazy") == shared | {"high/lazy.py"}
    assert reached(package, "knell.low.sums") == {"__init__.py", "low/__init__.py", "low/sums.py"}
    with pytest.raises(ModuleNotFoundError, match=r"knell\.high\.none"):
        source.source_hash("knell.high.none")


@pytest.mark.parametrize(
    ("edited", "solver_changes"),
    [
        ("high/solve.py", True),
        ("low/sums.py", True),
        ("low/__init__.py", True),
        ("high/draw.py", False),
        ("high/lazy.py", False),
    ],
)
def test_an_edit_changes_the_hashes_of_what_reaches_it(package: Path, edited: str, solver_changes: bool) -> None:
    before, all_before = source.source_hash("knell.high.solve"), source.package_hash()
    path = package / edited
    path.write_text(path.read_text() + "# edited\n")
    assert (source.source_hash("knell.high.solve") != before) == solver_changes
    assert source.package_hash() != all_before


def test_a_new_name_for_the_same_text_changes_the_hash(package: Path) -> None:
    before = source.source_hash("knell.high.solve")
    (package / "low" / "sums.py").rename(package / "low" / "totals.py")
    (package / "low" / "products.py").write_text("from . import sum\n")
    assert source.source_hash("knell.high.solve") != before


@pytest.mark.parametrize("module", [source.SOLVER, source.PROVER, source.DATASET, source.FIGURES])
def test_nothing_that_python_imports_is_overlooked(module: str) -> None:
    """Import the module in a fresh interpreter: what it loads is in the hash."""
    script = f"import sys, {module}\nprint(*(m.__file__ for n, m in sys.modules.items() if n.split('.')[0] == 'knell'))"
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert {Path(path) for path in done.stdout.split()} <= set(source.source_files([module]))


def test_imports_inside_functions_are_found_as_the_parser_finds_them() -> None:
    """The import lines of every module of the package, by regular expression and by Python's own parser."""
    for path in source.PACKAGE.rglob("*.py"):
        module = source._module_name(path)
        names = set()
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Import):
                names |= {alias.name for alias in node.names}
            elif isinstance(node, ast.ImportFrom) and not node.level:
                names |= {node.module, *(f"{node.module}.{alias.name}" for alias in node.names)}
        assert {n for n in names if n and n.startswith("knell")} <= set(source._imports(path, module)), path


def test_the_solver_does_not_see_what_is_drawn() -> None:
    folders = {path.relative_to(source.PACKAGE).parts[0] for path in source.source_files([source.SOLVER])}
    assert {"physics", "methods", "survey"} <= folders
    assert not folders & {"readout", "command", "record"}
