"""Which code and which libraries make a file.

Asking git and the package metadata takes longer than a small cell, so the workflow asks
once and hands the answer to its jobs in the environment variable `VARIABLE`.
"""

from __future__ import annotations

import json
import os
from dataclasses import asdict, dataclass, field
from pathlib import Path

from knell.record.source import PACKAGE, package_hash

VARIABLE = "KNELL_CODE"
# What can change the files of a rule; libraries that only draw are not among those of a cell.
_SOLVER = ("python", "knell", "python-flint", "numpy", "mpmath")
_LIBRARIES = {
    "resolve_config": ("python", "knell", "pyyaml", "jsonschema"),
    "search": _SOLVER,
    "cell": _SOLVER,
    "witness": _SOLVER,
    "proofs": _SOLVER,
    "dataset": (*_SOLVER, "xarray", "netCDF4"),
    "figure": ("python", "knell", "numpy", "xarray", "netCDF4", "matplotlib"),
}
# Edits of a config or of a page of documentation do not make the code dirty.
_CODE_PATHS = ("src", "Snakefile", "workflow", "pyproject.toml")


@dataclass(frozen=True)
class Code:
    """``commit`` and ``dirty`` are None outside a git checkout; ``source``, the hash of the
    package, is given where the commit does not say everything. ``versions`` maps each
    library to its version."""

    commit: str | None
    dirty: bool | None
    source: str | None
    versions: dict[str, str] = field(default_factory=dict)

    def versions_for(self, rule: str) -> dict[str, str]:
        """The versions of the libraries that the files of a rule depend on; all for an unknown rule."""
        return {name: self.versions[name] for name in _LIBRARIES.get(rule, tuple(self.versions))}

    def text(self) -> str:
        """The JSON text that `current` reads back."""
        return json.dumps(asdict(self), sort_keys=True)


def current() -> Code:
    """The code that runs: as the workflow said it, or else found out here."""
    text = os.environ.get(VARIABLE)
    return Code(**json.loads(text)) if text else examine()


def examine(root: Path | None = None) -> Code:
    """Ask git about the checkout at ``root`` (default: where the package lies), and the libraries for versions."""
    root = root or PACKAGE.parents[1]
    commit = _git(root, "rev-parse", "HEAD") if (root / ".git").exists() else None
    dirty = bool(_git(root, "status", "--porcelain", "--", *_CODE_PATHS)) if commit else None
    return Code(commit, dirty, None if commit and not dirty else package_hash(), _versions())


def _git(root: Path, *arguments: str) -> str | None:
    import subprocess

    try:
        done = subprocess.run(
            ["git", "--no-optional-locks", "-C", str(root), *arguments], capture_output=True, text=True, check=True
        )
    except (OSError, subprocess.CalledProcessError):
        return None
    return done.stdout.strip()


def _versions() -> dict[str, str]:
    from importlib.metadata import PackageNotFoundError, version
    from platform import python_version

    found = {"python": python_version()}
    for name in sorted({name for names in _LIBRARIES.values() for name in names} - {"python"}):
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            found[name] = "unknown"
    return found
