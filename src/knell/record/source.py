"""Content hashes of source code: what a result depends on, and nothing else.

The modules that one module can reach are found by following its ``import`` lines through
the package, those inside functions too, without importing anything: an edit of the solver
changes the solver's hash, an edit of a figure does not. Imports under ``TYPE_CHECKING``
count as well, which is the safe side.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterable
from functools import cache
from pathlib import Path

PACKAGE = Path(__file__).resolve().parents[1]
SOLVER = "knell.survey.solve"
PROVER = "knell.survey.certify"
DATASET = "knell.survey.dataset"
FIGURES = "knell.readout.figures"

_IMPORT = re.compile(
    r"^[ \t]*(?:from[ \t]+(?P<origin>\.*[\w.]*)[ \t]+import[ \t]+(?P<names>\([^)]*\)|[^\n#]*)"
    r"|import[ \t]+(?P<modules>[^\n#]+))",
    re.MULTILINE,
)


def source_hash(*modules: str) -> str:
    """Sixteen hexadecimal digits of the SHA-256 of every file that ``modules`` reach, names included.

    Raises `ModuleNotFoundError` for a module that is not in the package.
    """
    digest = hashlib.sha256()
    for path in source_files(modules):
        digest.update(f"{path.relative_to(PACKAGE).as_posix()}\n".encode())
        digest.update(hashlib.sha256(path.read_bytes()).digest())
    return digest.hexdigest()[:16]


def package_hash() -> str:
    """The same for every module of the package."""
    return source_hash(*sorted(_module_name(path) for path in PACKAGE.rglob("*.py")))


def source_files(modules: Iterable[str]) -> list[Path]:
    """The files of ``modules`` and of all that they import from the package, sorted by path."""
    pending, found = list(modules), {}
    for module in pending:
        if _file(module) is None:
            raise ModuleNotFoundError(f"no module {module} in {PACKAGE}")
    while pending:
        module = pending.pop()
        path = _file(module)
        if path is None or path in found:
            continue
        found[path] = module
        pending += _imports(path, module)
        # Importing a.b.c runs a/__init__ and a.b/__init__ first.
        pending += [module.rsplit(".", depth)[0] for depth in range(1, module.count(".") + 1)]
    return sorted(found)


@cache
def _file(module: str) -> Path | None:
    parts = module.split(".")
    if parts[0] != PACKAGE.name:
        return None
    base = PACKAGE.joinpath(*parts[1:])
    package = base / "__init__.py"
    if package.is_file():
        return package
    single = base.with_suffix(".py")
    return single if len(parts) > 1 and single.is_file() else None


def _module_name(path: Path) -> str:
    parts = (PACKAGE.name, *path.relative_to(PACKAGE).with_suffix("").parts)
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def _imports(path: Path, module: str) -> list[str]:
    """The names that the import lines of a file may mean as modules; those that are none are passed over later."""
    here = module.split(".") if path.name == "__init__.py" else module.split(".")[:-1]
    names: list[str] = []
    for match in _IMPORT.finditer(path.read_text(encoding="utf-8")):
        if match["modules"]:
            names += [part.split()[0] for part in match["modules"].split(",") if part.split()]
            continue
        origin = match["origin"]
        dots = len(origin) - len(origin.lstrip("."))
        if dots:
            origin = ".".join([*here[: len(here) - dots + 1], *filter(None, [origin.lstrip(".")])])
        listed = re.sub(r"#[^\n]*", "", match["names"]).strip("() \t\n").split(",")
        names += [origin, *(f"{origin}.{part.split()[0]}" for part in listed if part.split())]
    return names
