"""Failures that a user can cause or meet: told in one line each, never as a traceback.

    KnellError
    ├── InputError      what was asked for does not exist or makes no sense
    │   └── ConfigError     a config that cannot be run: one line for each problem
    ├── FileError       a file cannot be read or written
    │   └── DamagedFile     a file is not what its checksum or its place says
    └── StaleError      what is on disk no longer belongs to what made it

The command line prints ``str(error)`` and leaves with ``exit_code``; anything else that
is raised is a bug and keeps its traceback.
"""

from __future__ import annotations

from collections.abc import Iterable


class KnellError(Exception):
    """An expected failure; its text is one line that names the cause and the remedy."""

    exit_code = 1


class InputError(KnellError):
    """A parameter, option or config that describes no computation."""


class ConfigError(InputError):
    """A config that cannot be run; the text has one line for each problem."""

    def __init__(self, lines: Iterable[str]) -> None:
        self.lines = list(lines)
        super().__init__("\n".join(self.lines))


class FileError(KnellError):
    """A file or folder that cannot be read or written."""

    @classmethod
    def from_os(cls, action: str, path: object, error: OSError) -> FileError:
        """``cannot write results/x.json: No space left on device``."""
        return cls(f"cannot {action} {path}: {error.strerror or error}")


class DamagedFile(FileError):
    """A file whose content is not what its checksum or its place says."""


class StaleError(KnellError):
    """Something on disk that another state of the code, or another input, has made."""
